package weathering

import (
	"cycle/carbon/cite"
	"cycle/carbon/units"
	"cycle/ode/elementary"
)

// Walker1981 is the law of Walker, Hays & Kasting (1981):
//
//	W/W₀ = (p/p₀)^β · exp((T − T₀)/Tₑ)
//
// The paper has β = 0.3, Tₑ = 13.7 K and T₀ = 285 K; shifting T₀ changes W/W₀ by
// a constant factor only, which the reference state takes up. No runoff, no
// supply limit, no meaning under ice.
type Walker1981 struct {
	Beta float64 // β
	Te   float64 // Tₑ, K
	t0   float64 // T₀, K
}

func newWalker1981() Law { return &Walker1981{Beta: 0.3, Te: 13.7} }

// Relative returns W/W₀.
func (l *Walker1981) Relative(e *Env) float64 {
	return elementary.Exp(l.Beta*e.LnP + (e.T-l.t0)/l.Te)
}

// Fields lists β and Tₑ.
func (l *Walker1981) Fields() []units.Field {
	ref := cite.Ref{Work: cite.Walker1981, Trust: cite.Checked}
	return []units.Field{
		exponentField("exponent", units.Range{Lo: 0.1, Hi: 0.5}, "exponent β of the CO2 pressure", ref, &l.Beta),
		efoldField(units.Range{Lo: 10, Hi: 40}, "warming Tₑ that multiplies weathering by e", ref, &l.Te),
	}
}

// Bind fixes T₀.
func (l *Walker1981) Bind(ref Reference) error { l.t0 = ref.T; return nil }

// Range is not stated in the paper.
func (l *Walker1981) Range() Range { return Range{} }
