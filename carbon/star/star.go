// Package star holds the laws of stellar luminosity and the published limits
// of the habitable zone.
package star

import (
	"cycle/carbon/cite"
	"cycle/carbon/units"
)

// Law is the luminosity of a star through time.
type Law interface {
	Fields() []units.Field
	// Bind is called once after the parameters are set.
	Bind() error
	// Luminosity returns L in units of today's Sun at an age in yr.
	Luminosity(age float64) float64
	// Temperature returns the effective temperature in K.
	Temperature(age float64) float64
	// End returns the age in yr at which the star leaves the main sequence.
	End() float64
	// Range returns the ages in yr for which the source vouches.
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

// Laws lists the luminosity laws; the first is the default.
var Laws = []Entry{
	{"gough1981", "the Sun, analytic brightening", "L/L☉ = 1/[1 + (2/5)(1 − t/t☉)]", []cite.Ref{{Work: cite.Gough1981, Trust: cite.Checked}}, newGough1981},
}

// Sunlight returns the mean flux S in W/m² that an orbit receives: distance in m,
// eccentricity averaged over the year,
//
//	S = S₀ L (1 au/d)² / √(1 − e²)
func Sunlight(luminosity, distance, eccentricity float64) float64 {
	d := distance / units.AU
	return units.SolarFlux * luminosity / (d * d) / sqrt(1-eccentricity*eccentricity)
}
