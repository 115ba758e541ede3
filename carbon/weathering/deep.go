package weathering

import (
	"cycle/carbon/cite"
	"cycle/carbon/units"
)

// Deep gives the temperature of the deep ocean,
//
//	T_d = T_d₀ + g (T − T₀)
//
// after Krissansen-Totton, Arney & Catling (2018), who draw g from 0.8-1.4 with
// the line fixed by today's state, T_d₀ = 274 K. Seawater cannot be colder than
// its freezing point: the line bends over the last kelvin above Coldest, so that
// under a frozen ocean T_d stays there, however cold the surface.
type Deep struct {
	Gradient float64 // g
	Deep0    float64 // T_d₀, K
	Coldest  float64 // freezing point of seawater, K
	t0       float64 // T₀, K
}

func newDeep() Deep { return Deep{Gradient: 1.1, Deep0: 274.037, Coldest: 271.2} }

// DeepTemperature returns T_d in K.
func (d *Deep) DeepTemperature(t float64) float64 {
	return above(d.Deep0+d.Gradient*(t-d.t0), d.Coldest, 1)
}

func (d *Deep) fields() []units.Field {
	return []units.Field{
		{Key: "deep_gradient", Min: 0, Max: 3, Published: units.Range{Lo: 0.8, Hi: 1.4}, Doc: "warming g of the deep ocean per warming of the surface",
			Source: cite.Ref{Work: cite.Lehmer2020, Where: "table 1", Note: "middle of the range", Trust: cite.Derived}, Value: &d.Gradient},
		{Key: "deep_temperature", Kind: units.Temperature, Unit: "K", Min: 260, Max: 320, Doc: "temperature of the deep ocean at the reference state",
			Source: cite.Ref{Work: cite.KrissansenTotton2018, Trust: cite.Unsure}, Value: &d.Deep0},
		{Key: "deep_coldest", Kind: units.Temperature, Unit: "K", Min: 150, Max: 300, Doc: "lowest temperature of the deep ocean; 150 K leaves the straight line alone",
			Source: cite.Ref{Note: "freezing point of seawater", Trust: cite.Practice}, Value: &d.Coldest},
	}
}

// Pore gives the temperature of the water in the pores of the ocean crust,
//
//	Tₚ = T_d + ΔTₚ
//
// warmer than the deep ocean by ΔTₚ = 9 K (Krissansen-Totton, Arney & Catling 2018).
type Pore struct {
	Deep
	Warmer float64 // ΔTₚ, K
}

func newPore() Pore { return Pore{Deep: newDeep(), Warmer: 9} }

// Temperature returns Tₚ in K.
func (p *Pore) Temperature(t float64) float64 { return p.DeepTemperature(t) + p.Warmer }

func (p *Pore) fields() []units.Field {
	return append(p.Deep.fields(), units.Field{Key: "pore_warming", Kind: units.Interval, Unit: "K", Min: 0, Max: 100, Doc: "pore water warmer than the deep ocean by",
		Source: cite.Ref{Work: cite.KrissansenTotton2018, Trust: cite.Memory}, Value: &p.Warmer})
}
