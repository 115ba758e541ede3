package star

import (
	"errors"
	"io"
	"math"

	"gonum.org/v1/gonum/interp"

	"cycle/carbon/units"
)

// Table is a luminosity from the user's CSV with the columns age_gyr,
// luminosity (Sun = 1) and, optionally, temperature_k. It is interpolated by
// monotone cubics (Fritsch & Butland 1984), ends with its last age, and before
// its first age is held, which Range lets a result say. Without a temperature
// column the effective temperature is the Sun's.
type Table struct {
	text            string
	ages, lum, teff []float64 // yr, L/L☉, K; teff may be nil
	l, t            interp.FritschButland
}

func newTable() Law { return &Table{} }

// Text returns the CSV as loaded.
func (l *Table) Text() *string { return &l.text }

// Load reads the CSV in place of what was there. An error names the line, what
// was found and what is allowed, and leaves the table as it was. Lines that
// start with # are comments.
func (l *Table) Load(r io.Reader) error {
	cols, text, err := units.ReadTable(r,
		units.TableColumn{Name: "luminosity", Lo: 1e-5, Hi: 1e5},
		units.TableColumn{Name: "temperature_k", Lo: 1000, Hi: 50000, Optional: true})
	if err != nil {
		return err
	}
	l.ages, l.lum, l.teff, l.text = cols[0], cols[1], cols[2], text
	return nil
}

// Bind needs a loaded table.
func (l *Table) Bind() error {
	if l.ages == nil {
		return errors.New("the law \"table\" of the star has no table: give one with the columns age_gyr,luminosity")
	}
	if err := l.l.Fit(l.ages, l.lum); err != nil {
		return err
	}
	if l.teff != nil {
		return l.t.Fit(l.ages, l.teff)
	}
	return nil
}

// Luminosity returns L/L☉, held at both ends of the table.
func (l *Table) Luminosity(age float64) float64 { return l.l.Predict(age) }

// Temperature returns the effective temperature in K.
func (l *Table) Temperature(age float64) float64 {
	if l.teff == nil {
		return SunTemperature
	}
	return l.t.Predict(age)
}

// End returns the last age of the table, infinity while there is none.
func (l *Table) End() float64 {
	if l.ages == nil {
		return math.Inf(1)
	}
	return l.ages[len(l.ages)-1]
}

// Range returns the first and the last age of the table.
func (l *Table) Range() units.Range {
	if l.ages == nil {
		return units.Range{}
	}
	return units.Range{Lo: l.ages[0], Hi: l.End()}
}

// Fields is empty: the table is all there is.
func (l *Table) Fields() []units.Field { return nil }
