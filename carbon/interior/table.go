package interior

import (
	"errors"
	"io"
	"math"

	"gonum.org/v1/gonum/interp"

	"cycle/carbon/units"
)

// Table is the heat flow of a user's CSV with the columns age_gyr and
// relative_heat_flow (per area, the Earth today = 1), named by its first line. It is interpolated by monotone cubics (Fritsch & Butland
// 1984) and held before the first and after the last age; Range tells.
type Table struct {
	prescribed
	text      string
	ages, rel []float64 // yr, 1
	curve     interp.FritschButland
}

func newTable() Law { return &Table{prescribed: newPrescribed()} }

// Text returns the CSV as loaded.
func (l *Table) Text() *string { return &l.text }

// Load reads the CSV in place of what was there. An error names the line, what
// was found and what is allowed, and leaves the table as it was. Lines that
// start with # are comments.
func (l *Table) Load(r io.Reader) error {
	cols, text, err := units.ReadTable(r, units.TableColumn{Name: "relative_heat_flow", Lo: 1e-6, Hi: 1e4})
	if err != nil {
		return err
	}
	l.ages, l.rel, l.text = cols[0], cols[1], text
	return nil
}

// Flow evaluates the table; the temperatures do not matter.
func (l *Table) Flow(age, _, _ float64) Flow { return l.flow(l.curve.Predict(age)) }

// Fields lists Q_ref and m.
func (l *Table) Fields() []units.Field { return l.fields() }

// Bind needs a loaded table.
func (l *Table) Bind(p Planet, _ float64) error {
	if l.ages == nil {
		return errors.New("the law \"table\" of the interior has no table: give one with the columns age_gyr,relative_heat_flow")
	}
	l.prescribed.bind(&p)
	return l.curve.Fit(l.ages, l.rel)
}

// Range returns the first and the last age of the table.
func (l *Table) Range() units.Range {
	if l.ages == nil {
		return units.Range{}
	}
	return units.Range{Lo: math.Max(l.ages[0], 0), Hi: l.ages[len(l.ages)-1]}
}
