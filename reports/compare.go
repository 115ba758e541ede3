package reports

import (
	"fmt"
	"io"
	"math"
	"strings"

	"github.com/mattn/go-runewidth"

	"cycle/carbon/record"
	"cycle/reports/internal/num"
)

// ComparisonJSON writes the comparison as comparison.json.
func ComparisonJSON(w io.Writer, c *record.Comparison) error { return structJSON(w, *c) }

// ComparedInputsCSV writes the inputs that differ, one column a scenario.
func ComparedInputsCSV(w io.Writer, c *record.Comparison) error {
	s := &sheet{name: "inputs", head: append([]string{"key"}, c.Names...)}
	for _, d := range c.Differ {
		row := []any{d.Key}
		for _, v := range d.Values {
			row = append(row, v)
		}
		s.add(row...)
	}
	return s.csv(w)
}

// ComparedResultsCSV writes outcomes, dates and feedback, one row a scenario.
func ComparedResultsCSV(w io.Writer, c *record.Comparison) error {
	s := &sheet{name: "results", head: []string{"scenario", "outcome", "time_Gyr", "error_Gyr", "liquid_water_Gyr", "freezes", "frozen_share", "start_temperature_K", "start_pco2_bar", "reference_temperature_K", "reference_pco2_bar", "gain", "response_time_kyr", "sensitivity_K_per_doubling"}}
	for _, m := range c.Margins {
		s.head = append(s.head, header("margin_"+m.Boundary+"_"+m.Side, m.Unit))
	}
	for i := range c.Results {
		r := &c.Results[i]
		row := []any{r.Name, string(r.Outcome.Kind), r.Outcome.TimeGyr, r.Outcome.ErrorGyr, r.Liquid, r.Freezes, r.FrozenShare, r.Start.TemperatureK, r.Start.PCO2Bar, r.Reference.TemperatureK, r.Reference.PCO2Bar, r.Feedback.Gain, r.Feedback.ResponseKyr, r.Feedback.Sensitivity}
		for _, m := range c.Margins {
			row = append(row, m.Values[i])
		}
		s.add(row...)
	}
	return s.csv(w)
}

func historiesSheet(c *record.Comparison) *sheet {
	s := &sheet{name: "histories", head: []string{"scenario"}}
	for i := range record.Columns {
		s.head = append(s.head, ColumnName(&record.Columns[i]))
	}
	for i, r := range c.Runs {
		for j := range r.Rows {
			row := []any{c.Names[i]}
			for k := range record.Columns {
				row = append(row, record.Columns[k].Value(&r.Rows[j]))
			}
			s.add(row...)
		}
	}
	return s
}

// HistoriesCSV writes all histories under one header.
func HistoriesCSV(w io.Writer, c *record.Comparison) error { return historiesSheet(c).csv(w) }

// HistoriesParquet writes the same as Parquet.
func HistoriesParquet(w io.Writer, c *record.Comparison) error {
	return historiesSheet(c).parquet(w, map[string]string{"title": strings.Join(c.Names, ", "), "version": c.Version})
}

// letterOf names a scenario in the tables of a terminal.
func letterOf(i int) string {
	if i < 26 {
		return string(rune('A' + i))
	}
	return fmt.Sprint(i + 1)
}

// CompareTerminal writes the comparison for people.
func CompareTerminal(w io.Writer, c *record.Comparison, opt TerminalOptions) error {
	t := newTerminal(opt, strings.Join(c.Names, " / "), "", c.Version)
	t.paragraph(upper(clean(c.Words))+".", 4)
	var rows [][]string
	for i := range c.Results {
		r := &c.Results[i]
		date := "up to " + num.Age(r.Outcome.TimeGyr)
		switch {
		case !lasting(r.Outcome.Kind):
		case r.Outcome.ErrorGyr >= 0.5e-3:
			date = num.Date(r.Outcome.TimeGyr, r.Outcome.ErrorGyr)
		default:
			date = num.Age(r.Outcome.TimeGyr)
		}
		name := short(clean(r.Name), max(12, t.width-60))
		rows = append(rows, []string{letterOf(i), name, clean(string(r.Outcome.Kind)), date, num.With(num.Short(r.Liquid, 4), "Gyr")})
	}
	if len(rows) > 0 {
		rows = append([][]string{{"", "", "outcome", "date", "liquid water"}}, rows...)
	}
	t.table("What becomes of them", rows)
	head := []string{""}
	for i := range c.Names {
		head = append(head, letterOf(i))
	}
	rows = nil
	for _, d := range c.Differ {
		row := []string{clean(d.Key)}
		for _, v := range d.Values {
			if v == "" {
				v = "-"
			}
			row = append(row, short(plainly(clean(v)), 24))
		}
		rows = append(rows, row)
	}
	t.grid(fmt.Sprintf("What differs in input (%d agree)", c.Agree), head, rows)
	rows = nil
	for _, m := range c.Margins {
		row := []string{clean(m.Boundary + ", " + m.Unit)}
		for i := range m.Values {
			v := "-"
			if known(m.Values[i]) {
				v = num.Short(m.Values[i], 3)
				if math.Abs(m.Values[i]) < 0.0005 { // a limit that is reached
					v = "0"
				}
				v += " at " + num.Age(m.TimeGyr[i])
			}
			row = append(row, v)
		}
		rows = append(rows, row)
	}
	t.grid("Closest approach to", head, rows)
	return t.write(w)
}

// grid is a table with a column a scenario. Where it is too wide for the terminal
// the values of a row stand below its name.
func (t *terminal) grid(title string, head []string, rows [][]string) {
	if len(rows) == 0 {
		return
	}
	var wide []int
	for _, r := range append([][]string{head}, rows...) {
		for i := range r {
			if r[i] = plainly(r[i]); i >= len(wide) {
				wide = append(wide, 0)
			}
			wide[i] = max(wide[i], runewidth.StringWidth(r[i]))
		}
	}
	total := 2 * len(wide)
	for _, w := range wide {
		total += w
	}
	if total <= t.width {
		t.table(title, append([][]string{head}, rows...))
		return
	}
	t.line(t.bold(title))
	for _, r := range rows {
		t.line("  " + short(r[0], t.width-2))
		line := ""
		for i, v := range r[1:] {
			cell := letterOf(i) + " " + v
			if line != "" && runewidth.StringWidth(line)+3+runewidth.StringWidth(cell) > t.width-6 {
				t.line("      " + line)
				line = ""
			}
			if line != "" {
				line += "   "
			}
			line += cell
		}
		t.line("      " + short(line, t.width-6))
	}
	t.line("")
}
