package weathering

import (
	"cycle/carbon/cite"
	"cycle/carbon/units"
	"cycle/ode/elementary"
)

// KrissansenTotton2017 is the continental silicate weathering of Krissansen-Totton
// & Catling (2017), of Krissansen-Totton, Arney & Catling (2018) and of Lehmer,
// Catling & Krissansen-Totton (2020):
//
//	W/W₀ = (p/p₀)^α · exp((T − T₀)/Tₑ)
//
// The papers draw α from 0.1-0.5 and Tₑ from 10-40 K; the defaults are the middle
// of these. The 2017 inversion of the last 100 Myr finds that 15-31 K of warming
// double weathering, Tₑ = 22-45 K: a weaker thermostat than that of Walker et al.
// Biology and land fraction, factors of the same papers, are applied outside.
type KrissansenTotton2017 struct {
	Alpha float64 // α
	Te    float64 // Tₑ, K
	t0    float64 // T₀, K
}

func newKrissansenTotton2017() Law { return &KrissansenTotton2017{Alpha: 0.3, Te: 25} }

// Relative returns W/W₀.
func (l *KrissansenTotton2017) Relative(e *Env) float64 {
	return elementary.Exp(l.Alpha*e.LnP + (e.T-l.t0)/l.Te)
}

// Fields lists α and Tₑ.
func (l *KrissansenTotton2017) Fields() []units.Field {
	mid := cite.Ref{Work: cite.Lehmer2020, Where: "table 1", Note: "middle of the range", Trust: cite.Derived}
	return []units.Field{
		exponentField("exponent", units.Range{Lo: 0.1, Hi: 0.5}, "exponent α of the CO2 pressure", mid, &l.Alpha),
		efoldField(units.Range{Lo: 10, Hi: 40}, "warming Tₑ that multiplies weathering by e", mid, &l.Te),
	}
}

// Bind fixes T₀.
func (l *KrissansenTotton2017) Bind(ref Reference) error { l.t0 = ref.T; return nil }

// Range is not stated.
func (l *KrissansenTotton2017) Range() Range { return Range{} }
