package weathering

import (
	"fmt"
	"math"

	"cycle/carbon/cite"
	"cycle/carbon/units"
)

// Supply bounds any law of land by the supply of fresh rock, in the form of Foley
// (2015):
//
//	W = W_s {1 − exp(−W_k/W_s)},  W_k = κ W_s · k
//
// k is the relative flux of the law inside and W_s the limit. κ = −ln(1 − W₀/W_s)
// makes W the reference flux W₀ at the reference state:
//
//	W/W₀ = (1 − exp(−κ k))/(1 − exp(−κ))
//
// Outgassing above W_s has no steady state.
type Supply struct {
	Law           // the law inside
	Limit float64 // W_s on an Earth-sized planet at the reference land area, mol/yr; 0 is none
	kappa float64 // κ
	full  float64 // exp(−κ) − 1
}

// NewSupply wraps a law of land; the limit is that of Foley (2015).
func NewSupply(law Law) *Supply { return &Supply{Law: law, Limit: 9.5625e15} }

// Relative returns W/W₀.
func (l *Supply) Relative(e *Env) float64 { return l.Of(l.Law.Relative(e)) }

// Saturation returns W/W_s, 0 without a limit.
func (l *Supply) Saturation(e *Env) float64 { return l.Use(l.Law.Relative(e)) }

// Of bounds a relative kinetic flux k: it returns W/W₀.
func (l *Supply) Of(k float64) float64 {
	if l.Limit == 0 {
		return k
	}
	return expm1(-l.kappa*k) / l.full
}

// Use returns W/W_s at a relative kinetic flux k, 0 without a limit.
func (l *Supply) Use(k float64) float64 {
	if l.Limit == 0 {
		return 0
	}
	return -expm1(-l.kappa * k)
}

// Fields lists those of the law inside and W_s.
func (l *Supply) Fields() []units.Field { return append(l.Law.Fields(), l.LimitField()) }

// LimitField is the field of W_s alone.
func (l *Supply) LimitField() units.Field {
	return units.Field{Key: "supply_limit", Kind: units.Flux, Unit: "Tmol/yr", Min: 0, Max: 1e20, Published: units.Range{Lo: 9.5625e14, Hi: 9.5625e15},
		Doc: "largest flux the supply of fresh rock allows on an Earth-sized planet with its reference land; 0 sets no limit", Source: cite.Ref{Work: cite.Foley2015, Note: "erosion of 1 to 10 mm/yr", Trust: cite.Derived}, Off: true, Value: &l.Limit}
}

// Bind binds the law inside and solves κ.
func (l *Supply) Bind(ref Reference) error {
	if err := l.Law.Bind(ref); err != nil || l.Limit == 0 {
		return err
	}
	var err error
	if l.kappa, l.full, err = saturation(ref.Flux, l.Limit); err != nil {
		return fmt.Errorf("supply_limit: %w", err)
	}
	return nil
}

// saturation returns κ = −ln(1 − w0/limit) and exp(−κ) − 1.
func saturation(w0, limit float64) (kappa, full float64, err error) {
	if !(w0 > 0 && limit > w0) {
		return 0, 0, fmt.Errorf("a supply limit of %.3g Tmol/yr must exceed the reference flux of %.3g Tmol/yr, which must be positive", limit/1e12, w0/1e12)
	}
	kappa = -math.Log1p(-w0 / limit)
	return kappa, expm1(-kappa), nil
}
