// Package weathering holds the published laws of silicate weathering on land
// and on the seafloor, one law a file.
//
// Every law is normalised to its own value at the reference state, so that its
// relative flux there is exactly 1. Land fraction, biology, the part of a
// surface under ice and the limiter at vanishing CO₂ are applied outside, in
// package carbon, alike for all laws.
package weathering

import (
	"cycle/carbon/cite"
	"cycle/carbon/units"
)

// Env is the state a law sees.
type Env struct {
	Age   float64 // yr since the star formed
	T     float64 // global mean surface temperature, K
	P     float64 // CO₂ partial pressure, bar
	LnP   float64 // ln(P/P₀) with P₀ of the reference state; shared, so that a power costs one exponential
	Sun   float64 // mean top-of-atmosphere sunlight S/4, W/m²
	Alb   float64 // planetary albedo
	Crust float64 // crust production per area relative to the reference, seafloor laws only
	LnH   float64 // ln([H⁺]/[H⁺]₀) of the ocean, seafloor laws only
}

// Reference is the state at which every relative flux is 1.
type Reference struct {
	T    float64 // K
	P    float64 // bar
	Sun  float64 // mean sunlight S/4, W/m²
	Alb  float64 // planetary albedo
	Flux float64 // the flux at the reference state on an Earth-sized planet, mol/yr
	Land float64 // land area of an Earth-sized planet at the reference state, m²
}

// Law is one weathering law.
type Law interface {
	// Fields lists the parameters a scenario or a prior may change.
	Fields() []units.Field
	// Bind is called once after the parameters are set and before Relative:
	// it normalises the law at the reference state. The error names the
	// parameter that makes the law meaningless.
	Bind(ref Reference) error
	// Relative returns W/W₀ at full land fraction. It must be finite,
	// non-negative and continuously differentiable for 100 K < T < 700 K and
	// 1e-12 bar < P < 1000 bar.
	Relative(e *Env) float64
	// Range returns where the source says the law holds.
	Range() Range
}

// Range is the published range of a law; a zero range is not stated.
type Range struct {
	T units.Range // K
	P units.Range // bar
}

// Entry is one row of a table of laws.
type Entry struct {
	Name   string     // value of the key "law"
	Doc    string     // one line
	Form   string     // the equation, Unicode
	Source []cite.Ref // first the defining work
	New    func() Law // with published defaults
}

// Land lists the laws of continental silicate weathering; the first is the
// default. To add a law, write its file and add its row.
var Land = []Entry{
	{"walker1981", "power of pCO2 times exponential in temperature", "W/W₀ = (p/p₀)^β · exp((T − T₀)/Tₑ)", []cite.Ref{{Work: cite.Walker1981, Trust: cite.Checked}}, newWalker1981},
}

// Seafloor lists the laws of seafloor basalt weathering; the first is the default.
var Seafloor = []Entry{
	{"coogan2015", "Arrhenius law of the pore-water temperature, proportional to crust production", "W/W₀ = s^ν · (p/p₀)^α · exp(−(E/R)(1/Tₚ − 1/Tₚ₀))", []cite.Ref{{Work: cite.CooganDosso2015, Trust: cite.Memory}, {Work: cite.KrissansenTotton2018, Trust: cite.Memory}}, newCoogan2015},
}
