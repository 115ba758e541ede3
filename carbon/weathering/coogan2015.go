package weathering

import (
	"cycle/carbon/cite"
	"cycle/carbon/units"
	"cycle/ode/elementary"
)

// Coogan2015 is the temperature-dependent alteration of ocean crust after
// Coogan & Dosso (2015):
//
//	W/W₀ = s^ν · (p/p₀)^α · exp(−(E/R)(1/Tₚ − 1/Tₚ₀))
//
// s is the crust production, Tₚ the pore-water temperature, E = 92 ± 7 kJ/mol the
// apparent activation energy. The paper has no direct effect of CO₂ (α = 0).
type Coogan2015 struct {
	E     float64 // E, J/mol
	Alpha float64 // α
	Nu    float64 // ν
	Pore
	er     float64 // E/R, K
	invTp0 float64 // 1/Tₚ₀, K⁻¹
}

func newCoogan2015() Law { return &Coogan2015{E: 92e3, Nu: 1, Pore: newPore()} }

// Relative returns W/W₀.
func (l *Coogan2015) Relative(e *Env) float64 {
	return power(e.Crust, l.Nu) * elementary.Exp(l.Alpha*e.LnP-l.er*(1/l.Temperature(e.T)-l.invTp0))
}

// Fields lists E, α, ν and the pore-water temperature.
func (l *Coogan2015) Fields() []units.Field {
	ref := cite.Ref{Work: cite.CooganDosso2015, Trust: cite.Memory}
	return append([]units.Field{
		energyField(units.Range{Lo: 85e3, Hi: 99e3}, "apparent activation energy E of crust alteration", ref, &l.E),
		exponentField("co2_exponent", units.Range{Lo: 0, Hi: 0.25}, "exponent α of the CO2 pressure", cite.Ref{Work: cite.CooganDosso2015, Note: "no direct effect; 0.25 in Foley 2015 and Abbot et al. 2012", Trust: cite.Memory}, &l.Alpha),
		crustField(cite.Ref{Work: cite.SleepZahnle2001, Trust: cite.Memory}, &l.Nu),
	}, l.fields()...)
}

// crustField describes the exponent of the crust production.
func crustField(ref cite.Ref, value *float64) units.Field {
	return units.Field{Key: "crust_exponent", Min: 0, Max: 2, Published: units.Range{Lo: 0, Hi: 2}, Doc: "exponent of the crust production", Source: ref, Value: value}
}

// Bind fixes the pore temperature of the reference state.
func (l *Coogan2015) Bind(ref Reference) error {
	l.t0 = ref.T
	l.er = l.E / units.GasConstant
	l.invTp0 = 1 / l.Temperature(ref.T)
	return nil
}

// Range is not stated.
func (l *Coogan2015) Range() Range { return Range{} }
