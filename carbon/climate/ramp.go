package climate

import (
	"cycle/carbon/cite"
	"cycle/carbon/units"
)

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
	Warm, Ice float64 // a_w, a_i
	iceEdge           // T_c, w
	Rayleigh  float64 // ρ, bar⁻¹
}

func newRamp() Albedo {
	return &Ramp{Warm: 0.3, Ice: 0.62, iceEdge: defaultIceEdge, Rayleigh: 0.10}
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
	ice := units.Field{Key: "ice", Min: 0.4, Max: 0.85, Published: units.Range{Lo: 0.5, Hi: 0.7}, Doc: "planetary albedo over ice", Source: cite.Ref{Work: cite.North1975, Trust: cite.Memory}, Value: &l.Ice}
	ray := units.Field{Key: "rayleigh", Min: 0, Max: 1, Doc: "scattering of CO2, per bar", Source: cite.Own("of the size of the Williams & Kasting 1997 planetary albedo"), Value: &l.Rayleigh}
	return append(append([]units.Field{ice}, l.iceEdge.fields()...), ray)
}
