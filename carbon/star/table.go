package star

import (
	"encoding/csv"
	"errors"
	"fmt"
	"io"
	"math"
	"strconv"
	"strings"

	"gonum.org/v1/gonum/interp"

	"cycle/carbon/units"
)

// Limits of a user's table.
const (
	tableBytes = 8 << 20
	tableRows  = 100000
	tableStep  = 0.999e-9 // Gyr between two rows
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
	raw, err := io.ReadAll(io.LimitReader(r, tableBytes+1))
	if err != nil {
		return err
	}
	if len(raw) > tableBytes {
		return fmt.Errorf("found more than %d MB, allowed is less", tableBytes>>20)
	}
	rd := csv.NewReader(strings.NewReader(strings.TrimPrefix(string(raw), "\ufeff")))
	rd.Comment, rd.TrimLeadingSpace, rd.FieldsPerRecord = '#', true, -1

	const header = "age_gyr,luminosity or age_gyr,luminosity,temperature_k"
	// An allowed range for each column, in the unit of the column.
	allowed := []units.Range{{Lo: 0, Hi: 1e4}, {Lo: 1e-5, Hi: 1e5}, {Lo: 1000, Hi: 50000}}
	var cols [3][]float64
	width := 0
	for {
		rec, err := rd.Read()
		if errors.Is(err, io.EOF) {
			break
		}
		var pe *csv.ParseError
		if errors.As(err, &pe) {
			return fmt.Errorf("line %d: found a malformed row (%v), allowed is comma-separated numbers", pe.Line, pe.Err)
		}
		if err != nil {
			return err
		}
		line, _ := rd.FieldPos(0)
		for i := range rec {
			rec[i] = strings.TrimSpace(rec[i])
		}
		if width == 0 {
			switch strings.Join(rec, ",") {
			case "age_gyr,luminosity", "age_gyr,luminosity,temperature_k":
				width = len(rec)
				continue
			}
			return fmt.Errorf("line %d: found the columns %s, allowed is %s", line, short(strings.Join(rec, ",")), header)
		}
		if len(rec) != width {
			return fmt.Errorf("line %d: found %d columns, allowed is %d as in the header", line, len(rec), width)
		}
		for i, text := range rec {
			x, err := strconv.ParseFloat(text, 64)
			if err != nil || !(x >= allowed[i].Lo && x <= allowed[i].Hi) {
				return fmt.Errorf("line %d: found %s in column %s, allowed is a number from %g to %g", line, short(text), strings.Split("age_gyr luminosity temperature_k", " ")[i], allowed[i].Lo, allowed[i].Hi)
			}
			cols[i] = append(cols[i], x)
		}
		n := len(cols[0])
		if n > 1 && !(cols[0][n-1]-cols[0][n-2] >= tableStep) {
			return fmt.Errorf("line %d: found the age %s Gyr, allowed is at least 1 yr more than the %g Gyr of the row before", line, rec[0], cols[0][n-2])
		}
		if n > tableRows {
			return fmt.Errorf("line %d: found more than %d rows, allowed is fewer", line, tableRows)
		}
	}
	if len(cols[0]) < 2 {
		return fmt.Errorf("found %d rows of numbers, allowed is two or more under the columns %s", len(cols[0]), header)
	}
	for i := range cols[0] {
		cols[0][i] *= units.Gyr
	}
	l.ages, l.lum, l.teff, l.text = cols[0], cols[1], cols[2], string(raw)
	return nil
}

// short quotes a text of a user's file, cut when long.
func short(s string) string {
	if r := []rune(s); len(r) > 40 {
		s = string(r[:37]) + "..."
	}
	return strconv.Quote(s)
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
