package weathering

import (
	"errors"
	"math"

	"cycle/carbon/cite"
	"cycle/carbon/units"
	"cycle/ode/elementary"
)

// West2012 is the weathering zone of finite thickness of West (2012):
//
//	W = E χ {1 − exp[−K (1 − exp(−k_w q)) · exp(−(E_a/R)(1/T − 1/T_w)) · (z/E)^σ/σ]}
//
// E is erosion, q runoff, z the regolith. Without erosion W → E χ: supply
// limited; under strong erosion and σ < 1 W grows as E^(1−σ): kinetic. The cation
// content χ (about 0.09) cancels in W/W₀. Runoff follows temperature,
// q = q₀ [1 + ε (T − T₀)]; CO₂ acts through temperature only.
//
// The values of K, k_w, z, σ and T_w are unsure. With χ = 0.09, 32 g/mol of
// cations, 1.53e14 m² of land and q₀ they give a modern flux of 6 Tmol/yr at
// E = 43 t km⁻² yr⁻¹, the default.
type West2012 struct {
	Erosion  float64 // E, kg m⁻² yr⁻¹
	Runoff0  float64 // q₀, m/yr
	Epsilon  float64 // ε, K⁻¹
	K        float64 // K, yr^−σ
	Kw       float64 // k_w, yr/m
	Regolith float64 // z, kg/m²
	Sigma    float64 // σ
	Ea       float64 // E_a, J/mol
	Tw       float64 // T_w, K

	t0   float64 // T₀, K
	rate float64 // K (z/E)^σ/σ
	er   float64 // E_a/R, K
	wet  float64 // k_w q₀
	full float64 // the bracket at the reference state, negative
}

// Quantities this law alone has.
var (
	massPerArea = &units.Kind{Name: "mass per area", Base: "kg/m2", Spell: map[string]float64{"kg/m2": 1, "kg/m²": 1, "t/km2": 1e-3, "t/km²": 1e-3}}
	perRunoff   = &units.Kind{Name: "inverse of runoff", Base: "yr/m", Spell: map[string]float64{"yr/m": 1, "yr/mm": 1e3}}
)

func newWest2012() Law {
	return &West2012{Erosion: 43e-3, Runoff0: 0.198, Epsilon: 0.03, K: 2.6e-4, Kw: 7.6e-2, Regolith: 8.9e3, Sigma: 0.9, Ea: 74e3, Tw: 284.2}
}

// exponent returns −K (1 − exp(−k_w q)) · …, the exponent of the outer bracket.
func (l *West2012) exponent(e *Env) float64 {
	return l.rate * expm1(-l.wet*l.Runoff(e)) * elementary.Exp(l.er*(1/l.Tw-1/e.T))
}

// Relative returns W/W₀.
func (l *West2012) Relative(e *Env) float64 { return expm1(l.exponent(e)) / l.full }

// Saturation returns W/(E χ).
func (l *West2012) Saturation(e *Env) float64 { return -expm1(l.exponent(e)) }

// Runoff returns 1 + ε ΔT.
func (l *West2012) Runoff(e *Env) float64 { return bracket(1 + l.Epsilon*(e.T-l.t0)) }

// Fields lists all but χ.
func (l *West2012) Fields() []units.Field {
	ref := cite.Ref{Work: cite.West2012, Trust: cite.Unsure}
	gp := cite.Ref{Work: cite.GrahamPierrehumbert2020, Trust: cite.Memory}
	return []units.Field{
		{Key: "erosion", Kind: units.Erosion, Unit: "t/km2/yr", Min: 1e-4, Max: 10, Doc: "erosion E", Source: cite.Ref{Work: cite.West2012, Note: "gives 6 Tmol/yr with the other defaults", Trust: cite.Derived}, Value: &l.Erosion},
		{Key: "runoff", Kind: units.Speed, Unit: "mm/yr", Min: 1e-3, Max: 10, Doc: "runoff q₀ at the reference state", Source: cite.Ref{Work: cite.GrahamPierrehumbert2020, Note: "0.2 of 0.99 m/yr", Trust: cite.Memory}, Value: &l.Runoff0},
		runoffField("runoff_sensitivity", units.Range{Lo: 0.02, Hi: 0.1}, "growth ε of runoff with temperature", gp, &l.Epsilon),
		{Key: "rate", Min: 1e-6, Max: 1e-1, Doc: "rate constant K in yr^−σ", Source: ref, Value: &l.K},
		{Key: "water", Kind: perRunoff, Unit: "yr/mm", Min: 1e-4, Max: 1e2, Doc: "effect k_w of runoff", Source: ref, Value: &l.Kw},
		{Key: "regolith", Kind: massPerArea, Unit: "t/km2", Min: 10, Max: 1e6, Doc: "regolith z that weathers", Source: ref, Value: &l.Regolith},
		{Key: "age_exponent", Min: 0.1, Max: 2, Doc: "exponent σ of the age of the regolith", Source: ref, Value: &l.Sigma},
		energyField(units.Range{}, "activation energy E_a", ref, &l.Ea),
		{Key: "standard_temperature", Kind: units.Temperature, Unit: "K", Min: 250, Max: 320, Doc: "temperature T_w that K refers to", Source: ref, Value: &l.Tw},
	}
}

// Bind fixes T₀ and the bracket at the reference state.
func (l *West2012) Bind(ref Reference) error {
	l.t0 = ref.T
	l.er = l.Ea / units.GasConstant
	l.wet = l.Kw * l.Runoff0
	l.rate = l.K * math.Pow(l.Regolith/l.Erosion, l.Sigma) / l.Sigma
	l.full = expm1(l.exponent(&Env{T: ref.T}))
	if !(l.full < 0) {
		return errors.New("rate: no weathering at the reference state")
	}
	return nil
}

// Range is not stated.
func (l *West2012) Range() Range { return Range{} }
