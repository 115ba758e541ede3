package climate

import (
	"cycle/carbon/cite"
	"cycle/carbon/units"
	"cycle/ode/elementary"
)

// Walker1981 is the greenhouse formula of Walker, Hays & Kasting (1981), solved
// for the outgoing radiation:
//
//	T = 2 Tₑ + 4.6 Pⁿ − 226.4 K,   P = p/280 ppm
//	F = σ Tₑ⁴ = σ [(T + 226.4 − 4.6 Pⁿ)/2]⁴        W/m²
//
// With a constant albedo Tₑ goes as the fourth root of the sunlight, as in the
// paper; at T = 285 K and P = 1, Tₑ = 253.4 K. The exponent n is remembered as
// 0.364 from the paper and as 0.346 from later quotations.
//
// The paper states no range. Own choice: 200-320 K, where F reaches about 300 W/m²
// (the formula knows no radiation limit), and 1e-8 to 1 bar, where F is still that
// of the fits to radiative models. Below 222 K (226 K without CO₂) F exceeds σT⁴.
type Walker1981 struct {
	N float64 // n
}

func newWalker1981() Radiation { return &Walker1981{N: 0.364} }

var walkerBox = newEdges(200, 320, 1e-8, 1)

// ln280ppm is ln 280e-6.
const ln280ppm = -8.180720954795024

// Outgoing returns F in W/m².
func (l *Walker1981) Outgoing(t, _, lnp float64) float64 {
	t, lnp = walkerBox.hold(t, lnp)
	te := (t + 226.4 - 4.6*elementary.Exp(l.N*(lnp-ln280ppm))) / 2
	te *= te
	return units.Sigma * te * te
}

// Bind needs nothing.
func (l *Walker1981) Bind(Reference) error { return nil }

// Box returns 200-320 K, 1e-8 to 1 bar.
func (l *Walker1981) Box() Box { return walkerBox.Box }

// Fields lists n.
func (l *Walker1981) Fields() []units.Field {
	return []units.Field{
		{Key: "exponent", Min: 0.1, Max: 0.5, Published: units.Range{Lo: 0.346, Hi: 0.364}, Doc: "exponent n of the CO2 pressure", Source: cite.Ref{Work: cite.Walker1981, Note: "0.346 in later quotations", Trust: cite.Unsure}, Value: &l.N},
	}
}
