package weathering

import (
	"cycle/carbon/cite"
	"cycle/carbon/units"
	"cycle/ode/elementary"
)

// Abbot2012 is the land term of Abbot, Cowan & Ciesla (2012):
//
//	W_land = f · W₀ · (p/p₀)^b · exp((T − T₀)/Tᵤ) · [1 + a_p (T − T₀)]^a
//
// with the land fraction f applied outside, and precipitation growing by a_p per
// kelvin. They explore b from 0.25 to 1 and Tᵤ from 10 to 15 K. Halving the land
// calls for a warming of Tᵤ ln 2 at most, so the climate depends weakly on f
// until there is hardly any land. Their seafloor term, (p/p₀)^0.25 whatever the
// temperature, is the law sleep2001 with co2_exponent = 0.25: with no land it
// gives no thermostat.
type Abbot2012 struct {
	B  float64 // b
	Tu float64 // Tᵤ, K
	Ap float64 // a_p, K⁻¹
	A  float64 // a
	t0 float64 // T₀, K
}

func newAbbot2012() Law { return &Abbot2012{B: 0.25, Tu: 13.7, Ap: 0.025, A: 0.65} }

// Relative returns W/W₀ at full land fraction.
func (l *Abbot2012) Relative(e *Env) float64 {
	dt := e.T - l.t0
	return elementary.Exp(l.B*e.LnP + dt/l.Tu + l.A*lnBracket(1+l.Ap*dt))
}

// Runoff returns the precipitation 1 + a_p ΔT.
func (l *Abbot2012) Runoff(e *Env) float64 { return bracket(1 + l.Ap*(e.T-l.t0)) }

// Fields lists b, Tᵤ, a_p and a.
func (l *Abbot2012) Fields() []units.Field {
	ref := cite.Ref{Work: cite.Abbot2012, Trust: cite.Unsure}
	return []units.Field{
		exponentField("exponent", units.Range{Lo: 0.25, Hi: 1}, "exponent b of the CO2 pressure", cite.Ref{Work: cite.Abbot2012, Note: "low end of the range", Trust: cite.Unsure}, &l.B),
		efoldField(units.Range{Lo: 10, Hi: 15}, "warming Tᵤ that multiplies the rate by e", cite.Ref{Work: cite.Walker1981, Note: "range Abbot et al. 2012", Trust: cite.Unsure}, &l.Tu),
		runoffField("precipitation_sensitivity", units.Range{Lo: 0.025, Hi: 0.03}, "growth a_p of precipitation with temperature", ref, &l.Ap),
		{Key: "precipitation_exponent", Min: 0, Max: 2, Doc: "exponent a of precipitation", Source: ref, Value: &l.A},
	}
}

// Bind fixes T₀.
func (l *Abbot2012) Bind(ref Reference) error { l.t0 = ref.T; return nil }

// Range is not stated.
func (l *Abbot2012) Range() Range { return Range{} }
