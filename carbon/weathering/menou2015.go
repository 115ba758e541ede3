package weathering

import (
	"cycle/carbon/cite"
	"cycle/carbon/units"
	"cycle/ode/elementary"
)

// Menou2015 is the law of Menou (2015), kept by Haqq-Misra et al. (2016):
//
//	W/W₀ = (p/p₀)^β · exp(k ΔT) · [1 + ε ΔT]^a,  ΔT = T − T₀
//
// k = 0.09 K⁻¹, ε = 0.045 K⁻¹, a = 0.65; β = 0.5 without vascular plants and 0
// where life fixes the CO₂ of the soil. The papers have T₀ = 288 K and
// p₀ = 330 µbar.
type Menou2015 struct {
	Beta    float64 // β
	K       float64 // k, K⁻¹
	Epsilon float64 // ε, K⁻¹
	A       float64 // a
	t0      float64 // T₀, K
}

func newMenou2015() Law { return &Menou2015{Beta: 0.5, K: 0.09, Epsilon: 0.045, A: 0.65} }

// Relative returns W/W₀.
func (l *Menou2015) Relative(e *Env) float64 {
	dt := e.T - l.t0
	return elementary.Exp(l.Beta*e.LnP + l.K*dt + l.A*lnBracket(1+l.Epsilon*dt))
}

// Runoff returns 1 + ε ΔT.
func (l *Menou2015) Runoff(e *Env) float64 { return bracket(1 + l.Epsilon*(e.T-l.t0)) }

// Fields lists β, k, ε and a.
func (l *Menou2015) Fields() []units.Field {
	ref := cite.Ref{Work: cite.Menou2015, Trust: cite.Memory}
	return []units.Field{
		exponentField("exponent", units.Range{Lo: 0, Hi: 0.5}, "exponent β of the CO2 pressure, 0 where life fixes the CO2 of the soil", ref, &l.Beta),
		{Key: "activation", Kind: units.PerKelvin, Unit: "1/K", Min: 0, Max: 0.3, Doc: "growth k of the rate constant with temperature", Source: ref, Value: &l.K},
		runoffField("runoff", units.Range{Lo: 0.02, Hi: 0.045}, "growth ε of runoff with temperature", ref, &l.Epsilon),
		{Key: "runoff_exponent", Min: 0, Max: 2, Doc: "exponent a of runoff", Source: ref, Value: &l.A},
	}
}

// Bind fixes T₀.
func (l *Menou2015) Bind(ref Reference) error { l.t0 = ref.T; return nil }

// Range is not stated.
func (l *Menou2015) Range() Range { return Range{} }
