// Package ocean divides the carbon of the surface between atmosphere and ocean
// and gives the ocean's carbonate chemistry.
package ocean

import (
	"cycle/carbon/cite"
	"cycle/carbon/units"
)

// Planet is what the partition needs to know.
type Planet struct {
	Area    float64 // m²
	Gravity float64 // m/s²
	Mass    float64 // mass of the ocean, kg
}

// State is the chemistry at one time. Concentrations are per kg of seawater.
type State struct {
	P     float64 // CO₂ partial pressure, bar
	H     float64 // [H⁺], mol/kg, total scale
	CO2   float64 // dissolved CO₂, mol/kg
	HCO3  float64 // mol/kg
	CO3   float64 // mol/kg
	DIC   float64 // dissolved inorganic carbon, mol/kg
	Alk   float64 // alkalinity, mol/kg
	Omega float64 // calcite saturation
}

// Law divides surface carbon.
type Law interface {
	Fields() []units.Field
	// Bind is called once after the parameters are set.
	Bind(p Planet) error
	// Solve returns the chemistry for surface carbon c in mol, ocean
	// alkalinity alk in mol (ignored unless HasAlkalinity) and surface
	// temperature t in K. P is NaN where c ≤ 0.
	Solve(c, alk, t float64) State
	// Pressure returns P and ln [H⁺] of Solve, which is all most rates need, at
	// less cost.
	Pressure(c, alk, t float64) (p, lnH float64)
	// Carbon returns the surface carbon in mol, and the alkalinity in mol,
	// that belong to a CO₂ pressure in bar in saturation with calcite.
	Carbon(p, t float64) (c, alk float64)
	// HasAlkalinity reports whether alkalinity is a state of its own.
	HasAlkalinity() bool
	// Range returns the temperatures in K for which the constants were measured.
	Range() units.Range
}

// Entry is one row of the table of laws.
type Entry struct {
	Name   string
	Doc    string
	Form   string
	Source []cite.Ref
	New    func() Law
}
