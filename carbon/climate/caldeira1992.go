package climate

import "cycle/carbon/units"

// Caldeira1992 is the outgoing radiation of Caldeira & Kasting (1992), Nature
// 359, 226-228 (the paper on early glaciation), a straight line in T whose
// coefficients follow the CO₂ pressure:
//
//	F = A(φ) + B(φ) T                              W/m²
//	φ = ln(p / 300 ppm)
//
// T in K. The range of the fit is not known here; own choice: 190-320 K and 1e-5
// to 2 bar. The line knows no radiation limit and passes 300 W/m² at 320 K; above
// 2 bar it soon stops rising with T, below 1e-5 bar it is far too steep.
type Caldeira1992 struct{}

func newCaldeira1992() Radiation { return Caldeira1992{} }

var caldeiraBox = newEdges(190, 320, 1e-5, 2)

// ln300ppm is ln 3e-4.
const ln300ppm = -8.111728083308073

// caldeiraLine returns A and B.
func caldeiraLine(phi float64) (a, b float64) {
	return -326.4 + phi*(9.161+phi*(-3.164+phi*0.5468)), 1.953 + phi*(-0.04866+phi*(0.01309+phi*-0.002577))
}

// Outgoing returns F in W/m².
func (Caldeira1992) Outgoing(t, _, lnp float64) float64 {
	t, lnp = caldeiraBox.hold(t, lnp)
	a, b := caldeiraLine(lnp - ln300ppm)
	return a + b*t
}

// Fields is empty: the fit has no free number.
func (Caldeira1992) Fields() []units.Field { return nil }

// Bind needs nothing.
func (Caldeira1992) Bind(Reference) error { return nil }

// Box returns 190-320 K, 1e-5 to 2 bar.
func (Caldeira1992) Box() Box { return caldeiraBox.Box }
