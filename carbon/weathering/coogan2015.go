package weathering

import (
	"math"

	"cycle/carbon/cite"
	"cycle/carbon/units"
)

// Pore gives the temperature of the water in the pores of the ocean crust,
//
//	Tₚ = T_deep + ΔT,  T_deep = g (T − T₀) + T_deep,₀
//
// after Krissansen-Totton, Arney & Catling (2018): the deep ocean follows the
// surface with gradient g and the pore water is ΔT = 9 K warmer.
type Pore struct {
	Gradient float64 // g
	Deep0    float64 // T_deep at the reference state, K
	Warmer   float64 // ΔT, K
	t0       float64 // T₀, K
}

func newPore() Pore { return Pore{Gradient: 1.02, Deep0: 274.037, Warmer: 9} }

// Temperature returns Tₚ in K, held above 200 K by a smooth floor.
func (p *Pore) Temperature(t float64) float64 {
	tp := p.Gradient*(t-p.t0) + p.Deep0 + p.Warmer
	const floor, width = 200, 5
	if x := (tp - floor) / width; x < 30 {
		return floor + width*math.Log1p(math.Exp(x))
	}
	return tp
}

func (p *Pore) fields() []units.Field {
	kt := cite.Ref{Work: cite.KrissansenTotton2018, Trust: cite.Memory}
	return []units.Field{
		{Key: "deep_gradient", Min: 0, Max: 3, Published: units.Range{Lo: 0.8, Hi: 1.4}, Doc: "warming of the deep ocean per warming of the surface", Source: cite.Ref{Work: cite.KrissansenTotton2018, Note: "inside the published range 0.8-1.4", Trust: cite.Unsure}, Value: &p.Gradient},
		{Key: "deep_temperature", Kind: units.Temperature, Unit: "K", Min: 260, Max: 320, Doc: "temperature of the deep ocean at the reference state", Source: cite.Ref{Work: cite.KrissansenTotton2018, Trust: cite.Unsure}, Value: &p.Deep0},
		{Key: "pore_warming", Kind: units.Interval, Unit: "K", Min: 0, Max: 100, Doc: "pore water warmer than the deep ocean by", Source: kt, Value: &p.Warmer},
	}
}

// Coogan2015 is the temperature-dependent alteration of ocean crust after
// Coogan & Dosso (2015):
//
//	W/W₀ = s^ν · (p/p₀)^α · exp(−(E/R)(1/Tₚ − 1/Tₚ₀))
//
// s is the crust production, Tₚ the pore-water temperature, E the apparent
// activation energy, 92 ± 7 kJ/mol. The paper has no direct CO₂ dependence
// (α = 0).
type Coogan2015 struct {
	E     float64 // E, J/mol
	Alpha float64 // α
	Nu    float64 // ν
	Pore
	invTp0 float64 // 1/Tₚ₀, K⁻¹
}

func newCoogan2015() Law { return &Coogan2015{E: 92e3, Nu: 1, Pore: newPore()} }

// Relative returns W/W₀.
func (l *Coogan2015) Relative(e *Env) float64 {
	x := -l.E / units.GasConstant * (1/l.Temperature(e.T) - l.invTp0)
	if l.Alpha != 0 {
		x += l.Alpha * e.LnP
	}
	if l.Nu == 1 {
		return e.Crust * math.Exp(x)
	}
	return math.Exp(x + l.Nu*math.Log(e.Crust))
}

// Fields lists E, α, ν and the pore-water temperature.
func (l *Coogan2015) Fields() []units.Field {
	ref := cite.Ref{Work: cite.CooganDosso2015, Trust: cite.Memory}
	return append([]units.Field{
		{Key: "activation_energy", Kind: units.MolarEnergy, Unit: "kJ/mol", Min: 0, Max: 2e5, Published: units.Range{Lo: 60e3, Hi: 100e3}, Doc: "apparent activation energy of crust alteration", Source: ref, Value: &l.E},
		{Key: "co2_exponent", Min: 0, Max: 1, Published: units.Range{Lo: 0, Hi: 0.5}, Doc: "exponent of the CO2 pressure", Source: ref, Value: &l.Alpha},
		{Key: "crust_exponent", Min: 0, Max: 2, Published: units.Range{Lo: 0, Hi: 2}, Doc: "exponent of the crust production", Source: cite.Ref{Work: cite.SleepZahnle2001, Trust: cite.Memory}, Value: &l.Nu},
	}, l.fields()...)
}

// Bind fixes the pore temperature of the reference state.
func (l *Coogan2015) Bind(ref Reference) error {
	l.t0 = ref.T
	l.invTp0 = 1 / l.Temperature(ref.T)
	return nil
}

// Range is not stated.
func (l *Coogan2015) Range() Range { return Range{} }
