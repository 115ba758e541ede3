package star

import (
	"math"

	"cycle/carbon/cite"
	"cycle/carbon/units"
)

// sqrt shortens the formulas of this package.
func sqrt(x float64) float64 { return math.Sqrt(x) }

// Gough1981 is the analytic brightening of the Sun of Gough (1981):
//
//	L/L☉ = 1/[1 + (2/5)(1 − t/t☉)]
//
// with t since the zero-age main sequence and t☉ the Sun's present age. Good
// from 0.2 to about 6.5 Gyr (against the solar model of Bahcall et al. 2001, which
// it overtakes by 0.02 at 6.6 Gyr and 0.06 at 7.8 Gyr), singular at 3.5 t☉.
type Gough1981 struct {
	Age  float64 // t☉, yr
	Last float64 // end of the main sequence, yr
}

func newGough1981() Law { return &Gough1981{Age: 4.57 * units.Gyr, Last: 10 * units.Gyr} }

// Luminosity returns L/L☉, held at the end of the main sequence.
func (l *Gough1981) Luminosity(age float64) float64 {
	return 1 / (1 + 0.4*(1-math.Min(age, l.Last)/l.Age))
}

// Temperature returns today's effective temperature of the Sun.
func (l *Gough1981) Temperature(float64) float64 { return SunTemperature }

// End returns the end of the main sequence.
func (l *Gough1981) End() float64 { return l.Last }

// Range returns 0.2 to 6.5 Gyr.
func (l *Gough1981) Range() units.Range { return units.Range{Lo: 0.2 * units.Gyr, Hi: 6.5 * units.Gyr} }

// Bind needs nothing: the allowed ranges keep L finite up to the end.
func (l *Gough1981) Bind() error { return nil }

// Fields lists t☉ and the end of the main sequence.
func (l *Gough1981) Fields() []units.Field {
	return []units.Field{
		{Key: "sun_age", Kind: units.Time, Unit: "Gyr", Min: 4.4e9, Max: 4.8e9, Published: units.Range{Lo: 4.57e9, Hi: 4.7e9}, Doc: "present age of the Sun", Source: cite.Ref{Work: cite.Gough1981, Trust: cite.Memory}, Value: &l.Age},
		{Key: "main_sequence_end", Kind: units.Time, Unit: "Gyr", Min: 5e9, Max: 12e9, Published: units.Range{Lo: 10e9, Hi: 11e9}, Doc: "age at which the star leaves the main sequence", Source: cite.Ref{Work: cite.SchroderSmith2008, Trust: cite.Memory}, Value: &l.Last},
	}
}
