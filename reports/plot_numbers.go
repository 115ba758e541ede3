package reports

import (
	"strings"

	"cycle/carbon/record"
	"cycle/reports/internal/num"
	"cycle/reports/internal/page"
)

// plotNumbers are the numbers behind a drawing: some of them as a table, all of
// them as CSV. Names in it are the program's own, so that no text of a scenario
// reaches a spreadsheet.
type plotNumbers struct {
	ID    string // of the element that holds the CSV
	Table page.Table
	Text  string // CSV; empty where another drawing of the page holds it
}

// plotTableRows is about how many rows the page shows of the numbers behind a
// drawing.
const plotTableRows = 32

// numbersOf takes the numbers of a sheet; pick names the rows it shows of them.
func numbersOf(id, label string, head []string, s *sheet) *plotNumbers {
	// A spreadsheet takes a text that begins so as a formula.
	plain := func(v any) any {
		if t, ok := v.(string); ok {
			return strings.TrimLeft(clean(t), "=+-@ ")
		}
		return v
	}
	for i, h := range s.head {
		s.head[i] = plain(h).(string)
	}
	for _, r := range s.rows {
		for i := range r {
			r[i] = plain(r[i])
		}
	}
	var b strings.Builder
	if s.csv(&b) != nil || len(s.rows) == 0 {
		return nil // a strings.Builder takes all that is written
	}
	n := &plotNumbers{ID: id, Text: b.String(), Table: page.Table{Head: head, Of: len(s.rows), Label: "Numbers behind: " + label}}
	shown := min(plotTableRows, len(s.rows))
	for k := range shown {
		j := 0
		if shown > 1 {
			j = k * (len(s.rows) - 1) / (shown - 1)
		}
		var row []string
		for _, v := range s.rows[j] {
			cell := num.Missing
			switch v := v.(type) {
			case float64:
				if known(v) {
					cell = num.Pretty(num.Short(v, 6))
				}
			case string:
				cell = typeset(clean(v))
			}
			row = append(row, cell)
		}
		n.Table.Rows = append(n.Table.Rows, row)
	}
	return n
}

// mapNumbers gives the drawings of a map its histories.
func mapNumbers(plots []*plot, m *record.Map) {
	s := &sheet{name: "points", head: []string{header(m.X.Key, m.X.Unit), header(m.Y.Key, m.Y.Unit), "outcome", "time_Gyr"}}
	for i := range m.Points {
		p := &m.Points[i]
		s.add(p.X, p.Y, string(p.Kind), p.TimeGyr)
	}
	head := []string{axisName(&m.X), axisName(&m.Y), "Outcome", "Date, Gyr"}
	for i, p := range plots {
		p.Numbers = numbersOf("map-csv", p.Title, head, s)
		if i > 0 && p.Numbers != nil {
			p.Numbers.Text = ""
		}
	}
}

// pathNumbers gives the drawing of the path its curves.
func pathNumbers(plots []*plot, e *record.Explanation) {
	s := &sheet{name: "path", head: []string{"curve", "age_Gyr", "outgassing_Tmol_per_yr", "temperature_K"}}
	for _, d := range e.Distances {
		s.add("path of the planet", d.AgeGyr, d.Outgassing, d.TemperatureK)
	}
	for i := range e.Curves {
		c := &e.Curves[i]
		for _, q := range c.Curve {
			name := "unstable climates"
			if q.Climate {
				name = "steady climates"
			}
			s.add(name, c.AgeGyr, q.Outgassing, q.TemperatureK)
		}
	}
	for _, p := range plots {
		p.Numbers = numbersOf("path-csv", p.Title, []string{"Curve", "Age, Gyr", "Outgassing, Tmol/yr", "Surface temperature, K"}, s)
	}
}
