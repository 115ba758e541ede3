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
	// DataEnd says that End is where the law's data end, which is before the
	// star leaves the main sequence or unrelated to it.
	DataEnd bool
}

// Laws lists the luminosity laws; the first is the default.
var Laws = []Entry{
	{Name: "gough1981", Doc: "the Sun, analytic brightening", Form: "L/L☉ = 1/[1 + (2/5)(1 − t/t☉)]",
		Source: []cite.Ref{{Work: cite.Gough1981, Trust: cite.Checked}}, New: newGough1981},
	{Name: "bahcall2001", Doc: "the Sun, table of the standard solar model, up to 8 Gyr", Form: "L/L☉ from the table, monotone cubics",
		Source: bahcallSource, New: newBahcall2001, DataEnd: true},
	{Name: "tout1996", Doc: "a star of any mass: published zero age and lifetime, own brightening", Form: "L/L☉ = [L_Z(M)/L_Z(1)]/[1 + (2/5)(1 − t/t_ref)],  t_ref = 4.57 Gyr · t_MS(M)/t_MS(1)",
		Source: []cite.Ref{{Work: cite.Tout1996, Where: "Z = 0.02", Trust: cite.Checked}, {Work: cite.Hurley2000, Where: "Z = 0.02", Trust: cite.Checked}, cite.Own("brightening of Gough 1981 at the pace of the star's lifetime")}, New: newTout1996},
	{Name: "steady", Doc: "a star that does not change", Form: "L/L☉ = const",
		Source: []cite.Ref{cite.Own("for experiments without a brightening star")}, New: newSteady},
	{Name: "table", Doc: "the user's table of luminosity", Form: "L/L☉ from the table, monotone cubics",
		Source: []cite.Ref{{Note: "the user's table"}}, New: newTable, DataEnd: true},
}

// SunTemperature is the effective temperature of today's Sun in K (IAU 2015,
// resolution B3).
const SunTemperature = 5772

// Sunlight returns the mean flux S in W/m² that an orbit receives: distance in m,
// eccentricity averaged over the year,
//
//	S = S₀ L (1 au/d)² / √(1 − e²)
func Sunlight(luminosity, distance, eccentricity float64) float64 {
	d := distance / units.AU
	return units.SolarFlux * luminosity / (d * d) / sqrt(1-eccentricity*eccentricity)
}
