package climate

import (
	"math"

	"cycle/carbon/cite"
	"cycle/carbon/units"
)

// Caldeira1992Life is the greenhouse warming of Caldeira & Kasting (1992),
// Nature 360, 721-723 (the paper on the life span of the biosphere), written as
// outgoing radiation:
//
//	ΔT = 815.17 + 4.895e7 T⁻² − 3.9787e5 T⁻¹ − 6.7084 ψ⁻² + 73.221 ψ⁻¹ − 30882 T⁻¹ψ⁻¹
//	ψ  = log₁₀(p / 1 bar)
//	F  = σ (T − ΔT)⁴                               W/m²
//
// T in K. Used within 273-373 K and 1e-8 to 1e-2 bar; the ends are unsure. ΔT is
// singular at 1 bar, and the law knows no ice.
type Caldeira1992Life struct{}

func newCaldeira1992Life() Radiation { return Caldeira1992Life{} }

var caldeiraLifeBox = newEdges(273, 373, 1e-8, 1e-2)

// caldeiraWarming returns ΔT in K; lnp is ln(p/1 bar), below 0.
func caldeiraWarming(t, lnp float64) float64 {
	x, y := 1/t, math.Ln10/lnp // T⁻¹, ψ⁻¹
	return 815.17 + x*(4.895e7*x-3.9787e5-30882*y) + y*(73.221-6.7084*y)
}

// Outgoing returns F in W/m².
func (Caldeira1992Life) Outgoing(t, _, lnp float64) float64 {
	t, lnp = caldeiraLifeBox.hold(t, lnp)
	te := t - caldeiraWarming(t, lnp)
	te *= te
	return units.Sigma * te * te
}

// Fields is empty: the fit has no free number.
func (Caldeira1992Life) Fields() []units.Field { return nil }

// Bind needs nothing.
func (Caldeira1992Life) Bind(Reference) error { return nil }

// Box returns 273-373 K, 1e-8 to 1e-2 bar.
func (Caldeira1992Life) Box() Box { return caldeiraLifeBox.Box }

// CaldeiraAlbedo is the planetary albedo of the same paper with a free offset
// a₀, which the paper does not have:
//
//	A = a₀ + 1.4891 − 0.0065979 T + 8.567e-6 T²
//
// T in K, 273-373 K. It knows no ice; the ice fraction is the ramp of law ramp,
// an own choice, and does not act on A.
type CaldeiraAlbedo struct {
	Offset float64 // a₀
	iceEdge
}

func newCaldeiraAlbedo() Albedo { return &CaldeiraAlbedo{iceEdge: defaultIceEdge} }

// Planetary returns A.
func (l *CaldeiraAlbedo) Planetary(t, _ float64) float64 {
	t, _ = hold(caldeiraLifeBox.T, t)
	return l.Offset + 1.4891 + t*(-0.0065979+8.567e-6*t)
}

// Free is the offset.
func (l *CaldeiraAlbedo) Free() (string, units.Range, *float64) {
	return "albedo offset", units.Range{Lo: -0.2, Hi: 0.5}, &l.Offset
}

// Box returns 273-373 K.
func (l *CaldeiraAlbedo) Box() Box { return Box{T: caldeiraLifeBox.T} }

// Bind needs nothing.
func (l *CaldeiraAlbedo) Bind(Reference) error { return nil }

// Fields lists the ice edge.
func (l *CaldeiraAlbedo) Fields() []units.Field { return l.iceEdge.fields() }

var caldeiraLifeSource = cite.Ref{Work: cite.CaldeiraKasting1992Life, Trust: cite.Checked}
