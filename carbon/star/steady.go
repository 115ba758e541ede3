package star

import (
	"cycle/carbon/cite"
	"cycle/carbon/units"
)

// Steady is a star that does not change until it ends: for experiments in
// which the star must not matter.
type Steady struct {
	L    float64 // L/L☉
	Teff float64 // K
	Last float64 // yr
}

func newSteady() Law { return &Steady{L: 1, Teff: SunTemperature, Last: 10 * units.Gyr} }

// Luminosity returns L/L☉.
func (l *Steady) Luminosity(float64) float64 { return l.L }

// Temperature returns the effective temperature in K.
func (l *Steady) Temperature(float64) float64 { return l.Teff }

// End returns the end as set.
func (l *Steady) End() float64 { return l.Last }

// Range is not stated.
func (l *Steady) Range() units.Range { return units.Range{} }

// Bind needs nothing.
func (l *Steady) Bind() error { return nil }

// Fields lists luminosity, temperature and end.
func (l *Steady) Fields() []units.Field {
	sun := cite.Ref{Work: cite.IAU2015, Note: "the Sun today", Trust: cite.Checked}
	return []units.Field{
		{Key: "luminosity", Min: 1e-4, Max: 1e3, Doc: "luminosity in units of the Sun's", Source: sun, Value: &l.L},
		{Key: "temperature", Kind: units.Temperature, Unit: "K", Min: 2000, Max: 12000, Doc: "effective temperature", Source: sun, Value: &l.Teff},
		{Key: "end", Kind: units.Time, Unit: "Gyr", Min: 1e6, Max: 1e13, Published: units.Range{Lo: 10e9, Hi: 11e9}, Doc: "age at which the star leaves the main sequence", Source: cite.Ref{Work: cite.SchroderSmith2008, Note: "the Sun", Trust: cite.Memory}, Value: &l.Last},
	}
}
