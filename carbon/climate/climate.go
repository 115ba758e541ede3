// Package climate holds the closures of the global energy balance: outgoing
// radiation and planetary albedo, one law a file, and the saturation pressures
// of water and CO₂.
//
//	c dT/dt = (S/4)(1 − A(T, p)) − F(T, p)
package climate

import (
	"math"

	"cycle/carbon/cite"
	"cycle/carbon/units"
)

// Reference is the state at which the energy balance closes.
type Reference struct {
	T   float64 // K
	P   float64 // CO₂ partial pressure, bar
	Sun float64 // mean sunlight S/4, W/m²
}

// Box is the range over which a closure was fitted; outside it a law is held
// at its edge. A zero range is not stated.
type Box struct {
	T units.Range // K
	P units.Range // CO₂ partial pressure, bar
}

// Radiation is a law of outgoing long-wave radiation.
type Radiation interface {
	Fields() []units.Field
	// Bind is called once after the parameters are set.
	Bind(ref Reference) error
	// Outgoing returns F in W/m² at temperature T in K and CO₂ pressure p in
	// bar, lnp = ln(p/1 bar). Outside the box it returns the value at the
	// edge. Finite for all T > 0 and finite lnp.
	Outgoing(t, p, lnp float64) float64
	Box() Box
}

// Albedo is a law of planetary albedo with one number left free, which is
// solved so that the reference state is in balance.
type Albedo interface {
	Fields() []units.Field
	Bind(ref Reference) error
	// Planetary returns A at temperature T in K and CO₂ pressure p in bar.
	Planetary(t, p float64) float64
	// IceFraction returns the fraction of the surface under ice.
	IceFraction(t float64) float64
	// Free returns the name of the free number, its allowed range and the
	// number itself, or nil when the law leaves nothing free.
	Free() (name string, allowed units.Range, value *float64)
	Box() Box
}

// RadiationEntry is one row of the table of radiation laws.
type RadiationEntry struct {
	Name   string
	Doc    string
	Form   string
	Source []cite.Ref
	New    func() Radiation
}

// AlbedoEntry is one row of the table of albedo laws.
type AlbedoEntry struct {
	Name   string
	Doc    string
	Form   string
	Source []cite.Ref
	New    func() Albedo
}

// Radiations lists the laws of outgoing radiation; the first is the default. To
// add a law, write its file and add its row.
var Radiations = []RadiationEntry{
	{"kadoya2019", "fit to a radiative-convective model, 150-350 K and up to 10 bar of CO2", "F = −3.1 + X B Yᵀ,  X = [1, ξ, …, ξ⁶],  Y = [1, y, …, y⁴],  ξ = 0.01 (T − 250),  y = 0.2 log₁₀ p (p < 1 bar), log₁₀ p (p ≥ 1 bar)", []cite.Ref{{Work: cite.KadoyaTajika2019, Where: "appendix", Trust: cite.Checked}}, newKadoya2019},
	{"williams1997", "fit to a radiative-convective model with weak CO2 forcing", "F = Σᵢⱼ cᵢⱼ φⁱ Tʲ,  φ = ln(p/3.3e-4 bar)", []cite.Ref{{Work: cite.WilliamsKasting1997, Where: "appendix", Trust: cite.Checked}}, newWilliams1997},
}

// Albedos lists the albedo laws; the first is the default.
var Albedos = []AlbedoEntry{
	{"ramp", "smooth ice-albedo ramp under a Rayleigh layer that grows with CO2", "A = 1 − (1 − r)(1 − a)/(1 − r a),  a = a_w + (a_i − a_w)·½[1 − tanh((T − T_c)/w)],  r = ρp/(1 + ρp)", []cite.Ref{{Work: cite.North1975, Note: "albedo over ice", Trust: cite.Memory}, cite.Own("shape of the ramp")}, newRamp},
}

// Ramp is a smooth ice-albedo ramp under a conservative scattering layer:
//
//	a = a_w + (a_i − a_w)·½[1 − tanh((T − T_c)/w)]       surface and clouds
//	r = ρ p/(1 + ρ p)                                    Rayleigh layer
//	A = 1 − (1 − r)(1 − a)/(1 − r a)                     one layer above a Lambert surface
//
// a_w, the albedo without ice, is solved at the reference state. a_i = 0.62
// is the complement of the co-albedo 0.38 over ice of North (1975); T_c, w and
// ρ are own choices, checked against the planetary albedo of Williams &
// Kasting (1997).
type Ramp struct {
	Warm, Ice     float64 // a_w, a_i
	Centre, Width float64 // T_c, w; K
	Rayleigh      float64 // ρ, bar⁻¹
}

func newRamp() Albedo { return &Ramp{Warm: 0.3, Ice: 0.62, Centre: 263, Width: 10, Rayleigh: 0.10} }

// IceFraction returns ½[1 − tanh((T − T_c)/w)].
func (l *Ramp) IceFraction(t float64) float64 {
	// ½(1 − tanh x) = 1/(1 + e^2x)
	return 1 / (1 + math.Exp(2*(t-l.Centre)/l.Width))
}

// Planetary returns A.
func (l *Ramp) Planetary(t, p float64) float64 {
	b := 1 - l.Warm - (l.Ice-l.Warm)*l.IceFraction(t) // 1 − a
	// (1 − r)(1 − a)/(1 − r a) with r = x/(1 + x), x = ρp
	return 1 - b/(1+l.Rayleigh*p*b)
}

// Free is the albedo without ice.
func (l *Ramp) Free() (string, units.Range, *float64) {
	return "albedo without ice", units.Range{Lo: 0, Hi: 0.6}, &l.Warm
}

// Box is not stated.
func (l *Ramp) Box() Box { return Box{} }

// Bind needs nothing.
func (l *Ramp) Bind(Reference) error { return nil }

// Fields lists the ramp and the layer.
func (l *Ramp) Fields() []units.Field {
	return []units.Field{
		{Key: "ice", Min: 0.4, Max: 0.85, Published: units.Range{Lo: 0.5, Hi: 0.7}, Doc: "planetary albedo over ice", Source: cite.Ref{Work: cite.North1975, Trust: cite.Memory}, Value: &l.Ice},
		{Key: "centre", Kind: units.Temperature, Unit: "K", Min: 240, Max: 280, Doc: "global mean temperature at which half the surface is under ice", Source: cite.Own("a scan of ramps: keeps today's climate away from the fold"), Value: &l.Centre},
		{Key: "width", Kind: units.Interval, Unit: "K", Min: 3, Max: 40, Doc: "half-width of the ramp", Source: cite.Own("below 3 K the ice edge becomes a step"), Value: &l.Width},
		{Key: "rayleigh", Min: 0, Max: 1, Doc: "scattering of CO2, per bar", Source: cite.Own("of the size of the Williams & Kasting 1997 planetary albedo"), Value: &l.Rayleigh},
	}
}
