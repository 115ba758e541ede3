package weathering

import (
	"cycle/carbon/cite"
	"cycle/carbon/units"
	"cycle/ode/elementary"
)

// ArrheniusRunoff is the Arrhenius law times runoff in the form of White & Blum
// (1995), with runoff after Berner (1994):
//
//	W/W₀ = (p/p₀)^β · exp(−(E/R)(1/T − 1/T₀)) · [1 + ε (T − T₀)]
//
// White & Blum find E = 59-62 kJ/mol in granitoid catchments and no direct
// effect of CO₂ (β = 0). Other activation energies are in the table Energies.
type ArrheniusRunoff struct {
	E       float64 // E, J/mol
	Epsilon float64 // ε, K⁻¹
	Beta    float64 // β
	t0      float64 // T₀, K
	invT0   float64 // 1/T₀, K⁻¹
	er      float64 // E/R, K
}

func newArrheniusRunoff() Law { return &ArrheniusRunoff{E: 62e3, Epsilon: 0.038} }

// Relative returns W/W₀.
func (l *ArrheniusRunoff) Relative(e *Env) float64 {
	return bracket(1+l.Epsilon*(e.T-l.t0)) * elementary.Exp(l.Beta*e.LnP-l.er*(1/e.T-l.invT0))
}

// Runoff returns 1 + ε ΔT.
func (l *ArrheniusRunoff) Runoff(e *Env) float64 { return bracket(1 + l.Epsilon*(e.T-l.t0)) }

// Fields lists E, ε and β.
func (l *ArrheniusRunoff) Fields() []units.Field {
	return []units.Field{
		energyField(units.Range{Lo: 22e3, Hi: 77e3}, "apparent activation energy E", cite.Ref{Work: cite.WhiteBlum1995, Note: "59-62; range Brantley et al. 2023 to Velbel 1993", Trust: cite.Memory}, &l.E),
		runoffField("runoff", units.Range{Lo: 0.02, Hi: 0.045}, "growth ε of runoff with temperature", cite.Ref{Work: cite.Berner1994, Trust: cite.Memory}, &l.Epsilon),
		exponentField("exponent", units.Range{Lo: 0, Hi: 0.5}, "exponent β of the CO2 pressure", cite.Ref{Work: cite.WhiteBlum1995, Note: "no direct effect of CO2; range to 0.5 Lehmer et al. 2020", Trust: cite.Memory}, &l.Beta),
	}
}

// Bind fixes T₀.
func (l *ArrheniusRunoff) Bind(ref Reference) error {
	l.t0, l.invT0, l.er = ref.T, 1/ref.T, l.E/units.GasConstant
	return nil
}

// Range is not stated.
func (l *ArrheniusRunoff) Range() Range { return Range{} }

// Energy is one published activation energy of silicate weathering.
type Energy struct {
	E      float64 // J/mol
	What   string
	Source cite.Ref
}

// Energies lists published activation energies, from weak to strong.
var Energies = []Energy{
	{22e3, "from laboratory and soils up to the globe", cite.Ref{Work: cite.Brantley2023}},
	{42.3e3, "rivers on basalt", cite.Ref{Work: cite.Dessert2001, Trust: cite.Memory}},
	{48.1e3, "laboratory, direct effect of temperature", cite.Ref{Work: cite.BradyCarroll1994, Trust: cite.Memory}},
	{50e3, "Ca and Mg silicates, about 48-63", cite.Ref{Work: cite.Brady1991, Trust: cite.Memory}},
	{62e3, "granitoid catchments, 59-62", cite.Ref{Work: cite.WhiteBlum1995, Trust: cite.Memory}},
	{74e3, "catchments limited by kinetics, uncertain by about 29", cite.Ref{Work: cite.WestGalyBickle2005, Trust: cite.Memory}},
	{77e3, "feldspar in two catchments", cite.Ref{Work: cite.Velbel1993}},
	{92e3, "altered ocean crust", cite.Ref{Work: cite.CooganDosso2015, Trust: cite.Memory}},
}

// EFold returns the warming in K that multiplies a rate by e near temperature t,
//
//	Tₑ = R T²/E
//
// and, since the relation is its own inverse, E in J/mol for Tₑ in K.
func EFold(energy, t float64) float64 { return units.GasConstant * t * t / energy }
