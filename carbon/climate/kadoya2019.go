package climate

import (
	"math"

	"cycle/carbon/units"
)

// Kadoya2019 is the fit of Kadoya & Tajika (2019), appendix, to a
// one-dimensional radiative-convective model:
//
//	F = −3.1 + X B Yᵀ                              W/m²
//	X = [1, ξ, ξ², …, ξ⁶],  ξ = 0.01 (T − 250)
//	Y = [1, y, y², y³, y⁴], y = 0.2 log₁₀ p below 1 bar, log₁₀ p above
//
// T in K, p the CO₂ partial pressure in bar, 150-350 K and 1e-5 to 10 bar; at
// 1 bar F is continuous, its slope is not.
// Near 340 K and below 1e-3 bar F levels off at about 268 W/m², the radiation
// limit of a moist atmosphere.
type Kadoya2019 struct{}

func newKadoya2019() Radiation { return Kadoya2019{} }

// kadoyaThin is B below 1 bar, kadoyaThick B above; rows ξ⁰ to ξ⁶, columns y⁰ to y⁴.
var (
	kadoyaThin = [7][5]float64{
		{87.8373, -311.289, -504.408, -422.929, -134.611},
		{54.9102, -677.741, -1440.63, -1467.04, -543.371},
		{24.7875, 31.3614, -364.617, -747.352, -395.401},
		{75.8917, 816.426, 1565.03, 1453.73, 476.475},
		{43.0076, 339.957, 996.723, 1361.41, 612.967},
		{-31.4994, -261.362, -395.106, -261.600, -36.6589},
		{-28.8846, -174.942, -378.436, -445.878, -178.948},
	}
	kadoyaThick = [7][5]float64{
		{87.8373, -52.1056, 35.2800, -1.64935, -3.42858},
		{54.9102, -49.6404, -93.8576, 130.671, -41.1725},
		{24.7875, 94.7348, -252.996, 171.685, -34.7665},
		{75.8917, -180.679, 385.989, -344.020, 101.455},
		{43.0076, -327.589, 523.212, -351.086, 81.0478},
		{-31.4994, 235.321, -462.453, 346.483, -90.0657},
		{-28.8846, 284.233, -469.600, 311.854, -72.4874},
	}
)

// kadoyaBox is the range of the fit.
var kadoyaBox = newEdges(150, 350, 1e-5, 10)

// Outgoing returns F in W/m².
func (Kadoya2019) Outgoing(t, _, lnp float64) float64 {
	t, lnp = kadoyaBox.hold(t, lnp)
	b, y := &kadoyaThick, lnp*(1/math.Ln10)
	if y < 0 {
		b, y = &kadoyaThin, 0.2*y
	}
	// X B Yᵀ by Horner's scheme in both directions.
	xi, f := 0.01*(t-250), 0.0
	for i := len(b) - 1; i >= 0; i-- {
		r := &b[i]
		f = f*xi + (((r[4]*y+r[3])*y+r[2])*y+r[1])*y + r[0]
	}
	return f - 3.1
}

// Fields is empty: the fit has no free number.
func (Kadoya2019) Fields() []units.Field { return nil }

// Bind needs nothing.
func (Kadoya2019) Bind(Reference) error { return nil }

// Box returns 150-350 K, 1e-5 to 10 bar.
func (Kadoya2019) Box() Box { return kadoyaBox.Box }
