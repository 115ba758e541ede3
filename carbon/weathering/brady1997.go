package weathering

import (
	"cycle/carbon/cite"
	"cycle/carbon/units"
	"cycle/ode/elementary"
)

// Brady1997 is the dissolution of basalt in seawater after Brady & Gislason (1997):
//
//	W/W₀ = s^ν · (p/p₀)^α · exp(−(E/R)(1/T_d − 1/T_d₀))
//
// s is the crust production, T_d the temperature of the deep ocean. They measured
// E = 41-65 kJ/mol below 40 °C; the default is the middle. α = 0.23 is later
// practice that cites them, and unsure.
type Brady1997 struct {
	E     float64 // E, J/mol
	Alpha float64 // α
	Nu    float64 // ν
	Deep
	er     float64 // E/R, K
	invTd0 float64 // 1/T_d₀, K⁻¹
}

func newBrady1997() Law { return &Brady1997{E: 53e3, Alpha: 0.23, Nu: 1, Deep: newDeep()} }

// Relative returns W/W₀.
func (l *Brady1997) Relative(e *Env) float64 {
	return power(e.Crust, l.Nu) * elementary.Exp(l.Alpha*e.LnP-l.er*(1/l.DeepTemperature(e.T)-l.invTd0))
}

// Fields lists E, α, ν and the deep-ocean temperature.
func (l *Brady1997) Fields() []units.Field {
	return append([]units.Field{
		energyField(units.Range{Lo: 41e3, Hi: 65e3}, "activation energy E of basalt in seawater", cite.Ref{Work: cite.BradyGislason1997, Where: "p. 965", Note: "middle of the range", Trust: cite.Derived}, &l.E),
		exponentField("co2_exponent", units.Range{Lo: 0, Hi: 0.25}, "exponent α of the CO2 pressure", cite.Ref{Work: cite.BradyGislason1997, Note: "as cited by later carbon-cycle models; 0.25 in Foley 2015", Trust: cite.Unsure}, &l.Alpha),
		crustField(cite.Ref{Work: cite.SleepZahnle2001, Trust: cite.Memory}, &l.Nu),
	}, l.fields()...)
}

// Bind fixes the deep-ocean temperature of the reference state.
func (l *Brady1997) Bind(ref Reference) error {
	l.t0 = ref.T
	l.er = l.E / units.GasConstant
	l.invTd0 = 1 / l.DeepTemperature(ref.T)
	return nil
}

// Range returns the surface temperatures whose deep ocean is below 40 °C.
func (l *Brady1997) Range() Range {
	if l.Gradient <= 0 {
		return Range{}
	}
	return Range{T: units.Range{Hi: l.t0 + (313.15-l.Deep0)/l.Gradient}}
}
