package weathering

import (
	"cycle/carbon/cite"
	"cycle/carbon/units"
	"cycle/ode/elementary"
)

// KrissansenTotton2018 is the dissolution of ocean crust of Krissansen-Totton,
// Arney & Catling (2018) and of Lehmer, Catling & Krissansen-Totton (2020):
//
//	W/W₀ = s^β · exp(−(E/R)(1/Tₚ − 1/Tₚ₀)) · ([H⁺]/[H⁺]₀)^γ
//
// s is the crust production, Tₚ the pore-water temperature; [H⁺] is that of the
// ocean, which stands for that of the pores. Their factor of sediment thickness
// is constant and cancels. Where the papers draw from a range the default is its
// middle.
type KrissansenTotton2018 struct {
	E     float64 // E, J/mol
	Gamma float64 // γ
	Beta  float64 // β
	Pore
	er     float64 // E/R, K
	invTp0 float64 // 1/Tₚ₀, K⁻¹
}

func newKrissansenTotton2018() Law {
	return &KrissansenTotton2018{E: 80e3, Gamma: 0.25, Beta: 1, Pore: newPore()}
}

// Relative returns W/W₀.
func (l *KrissansenTotton2018) Relative(e *Env) float64 {
	return power(e.Crust, l.Beta) * elementary.Exp(l.Gamma*e.LnH-l.er*(1/l.Temperature(e.T)-l.invTp0))
}

// Acidic says that [H⁺] matters.
func (l *KrissansenTotton2018) Acidic() {}

// Fields lists E, γ, β and the pore-water temperature.
func (l *KrissansenTotton2018) Fields() []units.Field {
	mid := cite.Ref{Work: cite.Lehmer2020, Where: "table 1", Note: "middle of the range", Trust: cite.Derived}
	return append([]units.Field{
		energyField(units.Range{Lo: 60e3, Hi: 100e3}, "activation energy E of crust dissolution", mid, &l.E),
		{Key: "acid_exponent", Min: 0, Max: 2, Published: units.Range{Lo: 0, Hi: 0.5}, Doc: "exponent γ of the hydrogen ion concentration", Source: mid, Value: &l.Gamma},
		crustField(cite.Ref{Work: cite.KrissansenTotton2018, Note: "middle of 0-2; Lehmer et al. 2020 print 0-0.2", Trust: cite.Unsure}, &l.Beta),
	}, l.fields()...)
}

// Bind fixes the pore temperature of the reference state.
func (l *KrissansenTotton2018) Bind(ref Reference) error {
	l.t0 = ref.T
	l.er = l.E / units.GasConstant
	l.invTp0 = 1 / l.Temperature(ref.T)
	return nil
}

// Range is not stated.
func (l *KrissansenTotton2018) Range() Range { return Range{} }
