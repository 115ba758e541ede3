package interior

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
	tableBytes  = 8 << 20
	tableRows   = 100000
	tableStep   = 0.999e-9 // Gyr between two rows
	tableHeader = "age_gyr,relative_heat_flow"
)

// Table is the heat flow of a user's CSV with the columns age_gyr and
// relative_heat_flow (per area, the Earth today = 1), with or without the line
// that names them. It is interpolated by monotone cubics (Fritsch & Butland
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
	raw, err := io.ReadAll(io.LimitReader(r, tableBytes+1))
	if err != nil {
		return err
	}
	if len(raw) > tableBytes {
		return fmt.Errorf("found more than %d MB, allowed is less", tableBytes>>20)
	}
	rd := csv.NewReader(strings.NewReader(strings.TrimPrefix(string(raw), "\ufeff")))
	rd.Comment, rd.TrimLeadingSpace, rd.FieldsPerRecord = '#', true, -1
	var ages, rel []float64
	for first := true; ; first = false {
		rec, err := rd.Read()
		if errors.Is(err, io.EOF) {
			break
		}
		if pe := (*csv.ParseError)(nil); errors.As(err, &pe) {
			return fmt.Errorf("line %d: found a malformed row (%v), allowed is comma-separated numbers", pe.Line, pe.Err)
		} else if err != nil {
			return err
		}
		line, _ := rd.FieldPos(0)
		for i := range rec {
			rec[i] = strings.TrimSpace(rec[i])
		}
		if first && strings.Join(rec, ",") == tableHeader {
			continue
		}
		if len(rec) != 2 {
			return fmt.Errorf("line %d: found %d columns, allowed is 2: %s", line, len(rec), tableHeader)
		}
		age, ok1 := number(rec[0], 0, 1e4)
		q, ok2 := number(rec[1], 1e-6, 1e4)
		switch n := len(ages); {
		case !ok1:
			return fmt.Errorf("line %d: found %s in column age_gyr, allowed is a number from 0 to 10000", line, short(rec[0]))
		case !ok2:
			return fmt.Errorf("line %d: found %s in column relative_heat_flow, allowed is a number from 1e-6 to 10000", line, short(rec[1]))
		case n > 0 && !(age-ages[n-1] >= tableStep):
			return fmt.Errorf("line %d: found the age %s Gyr, allowed is at least 1 yr more than the %g Gyr of the row before", line, rec[0], ages[n-1])
		case n >= tableRows:
			return fmt.Errorf("line %d: found more than %d rows, allowed is fewer", line, tableRows)
		}
		ages, rel = append(ages, age), append(rel, q)
	}
	if len(ages) < 2 {
		return fmt.Errorf("found %d rows of numbers, allowed is two or more with the columns %s", len(ages), tableHeader)
	}
	for i := range ages {
		ages[i] *= units.Gyr
	}
	l.ages, l.rel, l.text = ages, rel, string(raw)
	return nil
}

// number reads a number within limits.
func number(text string, lo, hi float64) (float64, bool) {
	x, err := strconv.ParseFloat(text, 64)
	return x, err == nil && x >= lo && x <= hi
}

// short quotes a text of a user's file, cut when long.
func short(s string) string {
	if r := []rune(s); len(r) > 40 {
		s = string(r[:37]) + "..."
	}
	return strconv.Quote(s)
}

// Flow evaluates the table; the temperatures do not matter.
func (l *Table) Flow(age, _, _ float64) Flow { return l.flow(l.curve.Predict(age)) }

// Fields lists Q_ref and m.
func (l *Table) Fields() []units.Field { return l.fields() }

// Bind needs a loaded table.
func (l *Table) Bind(p Planet, _ float64) error {
	if l.ages == nil {
		return errors.New("the law \"table\" of the interior has no table: give one with the columns " + tableHeader)
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
