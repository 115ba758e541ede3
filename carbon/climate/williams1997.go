package climate

import (
	"cycle/carbon/units"
)

// Williams1997 is the outgoing radiation of Williams & Kasting (1997),
// appendix, fitted to a one-dimensional radiative-convective model:
//
//	F = Σᵢⱼ cᵢⱼ φⁱ Tʲ                              W/m²
//	φ = ln(p / 3.3e-4 bar)
//
// T in K, p the CO₂ partial pressure in bar. The fit is stated for 190-380 K and
// 1e-5 to 10 bar. It is used, and held at the edge, within 190-360 K and 1e-5 to
// 8 bar: near 362 K it has its maximum, the radiation limit of 303 W/m², and at
// 10 bar it falls with temperature below 270 K, where an energy balance would
// find states that do not exist.
type Williams1997 struct{}

func newWilliams1997() Radiation { return Williams1997{} }

// williamsC is c, rows φ⁰ to φ⁴, columns T⁰ to T³.
var williamsC = [5][4]float64{
	{9.468980, -2.794778, 2.212108e-2, -3.361939e-5},
	{-7.714727e-5, -3.244753e-3, 3.088497e-5, -1.679112e-7},
	{-3.547406e-4, 2.229142e-3, -2.789815e-5, 6.590999e-8},
	{-3.442973e-3, 9.173169e-3, -7.775195e-5, 1.528125e-7},
	{-3.367567e-2, -1.631909e-4, 3.663871e-6, -9.255646e-9},
}

// lnPhi0 is ln 3.3e-4.
const lnPhi0 = -8.016417903503749

// williamsBox is where the fit can be used.
var williamsBox = newEdges(190, 360, 1e-5, 8)

// Outgoing returns F in W/m².
func (Williams1997) Outgoing(t, _, lnp float64) float64 {
	t, lnp = williamsBox.hold(t, lnp)
	phi, f := lnp-lnPhi0, 0.0
	for i := len(williamsC) - 1; i >= 0; i-- {
		c := &williamsC[i]
		f = f*phi + ((c[3]*t+c[2])*t+c[1])*t + c[0]
	}
	return f
}

// Fields is empty: the fit has no free number.
func (Williams1997) Fields() []units.Field { return nil }

// Bind needs nothing.
func (Williams1997) Bind(Reference) error { return nil }

// Box returns 190-360 K, 1e-5 to 8 bar.
func (Williams1997) Box() Box { return williamsBox.Box }
