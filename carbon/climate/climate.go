// Package climate holds the closures of the global energy balance: outgoing
// radiation and planetary albedo, one law a file, and the saturation pressures
// of water and CO₂.
//
//	c dT/dt = (S/4)(1 − A(T, p)) − F(T, p)
package climate

import (
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
	{"williams1997", "fit to a radiative-convective model; weak CO2 forcing near today's pressure", "F = Σᵢⱼ cᵢⱼ φⁱ Tʲ,  φ = ln(p/3.3e-4 bar)", []cite.Ref{{Work: cite.WilliamsKasting1997, Where: "appendix", Trust: cite.Checked}}, newWilliams1997},
	{"caldeira1992", "straight line in temperature whose coefficients follow CO2, from the study of early glaciation", "F = A(φ) + B(φ) T,  φ = ln(p/300 ppm)", []cite.Ref{{Work: cite.CaldeiraKasting1992Ice, Trust: cite.Checked}, cite.Own("range of use")}, newCaldeira1992},
	{"caldeira1992life", "greenhouse warming of the study of the biosphere's life span; warm climates only", "F = σ (T − ΔT)⁴,  ΔT(T, ψ),  ψ = log₁₀ p", []cite.Ref{caldeiraLifeSource}, newCaldeira1992Life},
	{"linear_myhre1998", "straight line in temperature with logarithmic CO2 forcing under a radiation limit", "F = softmin(A + B (T − 273.15 K) − k ln(p/278 ppm), F∞)", []cite.Ref{{Work: cite.NorthCahalanCoakley1981, Trust: cite.Memory}, {Work: cite.Myhre1998, Trust: cite.Checked}, {Work: cite.Goldblatt2013, Note: "radiation limit", Trust: cite.Checked}, cite.Own("smooth minimum; range of use")}, newLinearMyhre},
	{"linear_byrne2014", "straight line in temperature with CO2 forcing up to 10,000 ppm under a radiation limit", "F = softmin(A + B (T − 273.15 K) − k x − q x², F∞),  x = ln(p/278 ppm)", []cite.Ref{{Work: cite.NorthCahalanCoakley1981, Trust: cite.Memory}, {Work: cite.ByrneGoldblatt2014, Trust: cite.Memory}, {Work: cite.Goldblatt2013, Note: "radiation limit", Trust: cite.Checked}, cite.Own("smooth minimum; range of use")}, newLinearByrne},
	{"walker1981", "greenhouse formula of the first paper on the weathering feedback", "F = σ [(T + 226.4 − 4.6 Pⁿ)/2]⁴,  P = p/280 ppm", []cite.Ref{{Work: cite.Walker1981, Note: "exponent unsure", Trust: cite.Memory}, cite.Own("range of use")}, newWalker1981},
}

// Albedos lists the albedo laws; the first is the default.
var Albedos = []AlbedoEntry{
	{"ramp", "smooth ice-albedo ramp under a Rayleigh layer that grows with CO2", "A = 1 − (1 − r)(1 − a)/(1 − r a),  a = a_w + (a_i − a_w)·½[1 − tanh((T − T_c)/w)],  r = ρp/(1 + ρp)", []cite.Ref{{Work: cite.North1975, Note: "albedo over ice", Trust: cite.Memory}, cite.Own("shape of the ramp")}, newRamp},
	{"williams1997", "fit to a radiative-convective model over a surface with an ice ramp", "A(T, p, µ, a_s), a quadratic on either side of 280 K,  a_s = a_w + (a_i − a_w)·½[1 − tanh((T − T_c)/w)]", []cite.Ref{{Work: cite.WilliamsKasting1997, Where: "appendix", Trust: cite.Checked}, cite.Own("blend of the branches over 275-285 K; ice ramp of the surface")}, newWilliamsAlbedo},
	{"caldeira1992", "planetary albedo of the study of the biosphere's life span; no ice", "A = a₀ + 1.4891 − 0.0065979 T + 8.567e-6 T²", []cite.Ref{caldeiraLifeSource, cite.Own("offset a₀")}, newCaldeiraAlbedo},
	{"constant", "the same albedo always; no ice", "A = const", []cite.Ref{cite.Own("for experiments without ice-albedo feedback")}, newConstant},
}
