package reports

import (
	"bytes"
	"fmt"
	"io"
	"math"
	"reflect"
	"strings"

	"cycle/carbon/record"
	"cycle/reports/internal/num"
)

// ExplanationJSON writes the whole explanation as explanation.json, in the form
// of summary.json.
func ExplanationJSON(w io.Writer, e *record.Explanation) error { return structJSON(w, *e) }

func structJSON(w io.Writer, v any) error {
	var b bytes.Buffer
	if err := writeJSON(&b, reflect.ValueOf(v), ""); err != nil {
		return err
	}
	b.WriteByte('\n')
	_, err := w.Write(b.Bytes())
	return err
}

// CombinationsCSV writes the table of combinations: which drivers change, which
// are held at their start, and what becomes of the planet.
func CombinationsCSV(w io.Writer, e *record.Explanation) error {
	s := &sheet{name: "combinations", head: []string{"changing", "held", "outcome", "time_Gyr", "no_failure", "clock"}}
	for _, c := range e.Combinations {
		s.add(strings.Join(c.Changing, " "), strings.Join(c.Still, " "), string(c.Outcome), c.TimeGyr, c.Censored, c.Clock)
	}
	return s.csv(w)
}

// RescuesCSV writes the smallest change of each parameter.
func RescuesCSV(w io.Writer, e *record.Explanation) error {
	s := &sheet{name: "rescues", head: []string{"key", "unit", "from", "to", "relative_change", "part_of_range", "range", "range_is_published", "outcome", "time_Gyr"}}
	for _, r := range e.Rescues {
		outcome, t := string(r.Outcome), r.TimeGyr
		if !r.Found {
			outcome, t = "", math.NaN()
		}
		s.add(r.Key, r.Unit, r.From, r.To, r.Relative, r.Part, r.Range, r.Published, outcome, t)
	}
	return s.csv(w)
}

// ElasticitiesCSV writes d ln t/d ln x of the date of failure.
func ElasticitiesCSV(w io.Writer, e *record.Explanation) error {
	s := &sheet{name: "elasticities", head: []string{"key", "at", "elasticity", "error", "Gyr_per_percent", "nearby"}}
	for _, x := range e.Elasticities {
		s.add(x.Key, x.At, x.Value, x.Error, x.Gyr, x.Near)
	}
	return s.csv(w)
}

// LawsCSV writes what becomes of the planet under other laws.
func LawsCSV(w io.Writer, e *record.Explanation) error {
	s := &sheet{name: "laws", head: []string{"changed", "outcome", "time_Gyr", "same_failure", "no_failure", "words"}}
	for _, v := range e.Variants {
		t := v.TimeGyr
		if v.Outcome == "" {
			t = math.NaN()
		}
		s.add(strings.Join(v.Changed, ", "), string(v.Outcome), t, v.Same, v.Censored, v.Words)
	}
	return s.csv(w)
}

// DistancesCSV writes the distance to failure through time.
func DistancesCSV(w io.Writer, e *record.Explanation) error {
	return distanceSheet(e).csv(w)
}

func distanceSheet(e *record.Explanation) *sheet {
	s := &sheet{name: "distances", head: []string{"age_Gyr", "temperature_K", "pco2_bar", "outgassing_Tmol_per_yr", "sunlight_W_per_m2", "cold_fold_K", "warm_state_needs_Tmol_per_yr",
		"cold_outgassing_factor", "cold_sunlight_percent", "cold_K", "hot_outgassing_factor", "hot_sunlight_percent", "hot_K", "supply_percent", "gain", "response_time_kyr"}}
	for _, d := range e.Distances {
		s.add(d.AgeGyr, d.TemperatureK, d.PCO2Bar, d.Outgassing, d.SunlightWm2, d.FoldK, d.FoldOutgassing, d.ColdFactor, d.ColdSun, d.ColdKelvin, d.HotFactor, d.HotSun, d.HotKelvin, d.SupplyPercent, d.Gain, d.ResponseKyr)
	}
	return s
}

// newTerminal begins a page for a terminal with its title line.
func newTerminal(opt TerminalOptions, title, hash, version string) *terminal {
	if opt.Width == 0 {
		opt.Width = 80
	}
	t := &terminal{width: min(max(opt.Width, 60), 100), color: opt.Color}
	right := clean(version)
	if h := clean(hash); h != "" {
		right += "  " + short(h, 12)
		if len(h) > 12 {
			right = clean(version) + "  " + h[:12]
		}
	}
	left := short(clean(title), t.width-2-len(right))
	gap := t.width - len([]rune(left)) - len([]rune(right))
	t.line(t.bold(left) + strings.Repeat(" ", max(gap, 1)) + t.dim(right))
	t.line("")
	return t
}

func (t *terminal) table(head string, rows [][]string) {
	if len(rows) == 0 {
		return
	}
	t.line(t.bold(head))
	for _, r := range rows {
		for i := range r {
			r[i] = plainly(r[i])
		}
	}
	for _, l := range columns(t.width-2, rows) {
		t.line("  " + l)
	}
	t.line("")
}

func (t *terminal) paragraph(s string, lines int) {
	for _, l := range wrap(plainly(clean(s)), t.width-2, lines) {
		t.line("  " + l)
	}
	t.line("")
}

func (t *terminal) write(w io.Writer) error {
	for len(t.out) > 0 && t.out[len(t.out)-1] == "" {
		t.out = t.out[:len(t.out)-1]
	}
	_, err := io.WriteString(w, strings.Join(t.out, "\n")+"\n")
	return err
}

// fateText words an outcome with its date for a table.
func fateText(k record.Kind, gyr float64, censored bool) string {
	switch {
	case k == "":
		return "cannot be computed"
	case censored:
		return "no failure up to " + num.Age(gyr)
	}
	return clean(string(k)) + " at " + num.Age(gyr)
}

// changeText words a change with its unit once.
func changeText(r *record.Rescue) string {
	from, to := clean(r.FromText), clean(r.ToText)
	if _, unit, ok := strings.Cut(to, " "); ok {
		from = strings.TrimSuffix(from, " "+unit)
	}
	return from + " -> " + to
}

// shortFate words an outcome for a narrow column.
func shortFate(k record.Kind, gyr float64) string {
	switch {
	case k == "":
		return "cannot be computed"
	case !lasting(k) || k == record.StarLeft:
		return "no failure"
	}
	return clean(string(k)) + ", " + num.Fix(gyr, 2) + " Gyr"
}

// shownRescues and the like are how many rows a terminal gets.
const (
	shownRescues      = 8
	shownElasticities = 8
)

// ExplainTerminal writes the explanation for people.
func ExplainTerminal(w io.Writer, e *record.Explanation, opt TerminalOptions) error {
	t := newTerminal(opt, titleFor(e.Title, e.Name), e.Hash, e.Version)
	t.paragraph(e.Outcome.Sentence, 3)

	var rows [][]string
	for _, c := range e.Combinations {
		in := strings.Join(c.Changing, ", ")
		if in == "" {
			in = "nothing"
		}
		rows = append(rows, []string{in, fateText(c.Outcome, c.TimeGyr, c.Censored)})
	}
	if len(rows) > 17 {
		rows = append(rows[:16], []string{fmt.Sprintf("%d more in combinations.csv", len(e.Combinations)-16), ""})
	}
	t.table("Cause: what changes, and what becomes of the planet", rows)
	t.paragraph(e.Cause.Words, 4)
	rows = nil
	for _, s := range e.Cause.Shares {
		rows = append(rows, []string{s.Driver, signed(s.Gyr) + " Gyr"})
	}
	t.table("Shares of the date (Shapley)", rows)

	t.line(t.bold("Margin"))
	for _, m := range e.Margins {
		for i, l := range wrap(plainly(clean(m.Words)), t.width-4, 2) {
			t.line(map[bool]string{true: "  - ", false: "    "}[i == 0] + l)
		}
	}
	t.line("")

	head := "Rescue: the smallest change that avoids it"
	if !e.Fails {
		head = "Threat: the smallest change that brings a failure"
	}
	rows = nil
	none := 0
	for _, r := range e.Rescues {
		if !r.Found {
			none++
			continue
		}
		if len(rows) < shownRescues {
			mark := ""
			if !r.Published {
				mark = "*"
			}
			rows = append(rows, []string{clean(r.Key), changeText(&r) + mark, shortFate(r.Outcome, r.TimeGyr)})
		}
	}
	t.table(head, rows)
	found := len(e.Rescues) - none
	t.paragraph(fmt.Sprintf("%s; %d of %d parameters can, %d have none in range. Sorted by size against the published uncertainty; * no published range.",
		map[bool]string{true: "all are shown", false: fmt.Sprintf("%d more in rescues.csv", found-len(rows))}[found <= len(rows)], found, len(e.Rescues), none), 2)

	rows = nil
	for _, x := range e.Elasticities {
		if len(rows) == shownElasticities || math.IsNaN(x.Value) {
			continue
		}
		rows = append(rows, []string{clean(x.Key), signed(x.Value) + " ± " + num.Short(x.Error, 1), clean(x.Near)})
	}
	t.table("Elasticity of the date: % later for 1 % more", rows)

	rows = nil
	for _, v := range e.Variants {
		if len(v.Parts) == 1 {
			rows = append(rows, []string{clean(v.Parts[0]), clean(v.Laws[0]), fateText(v.Outcome, v.TimeGyr, v.Censored)})
		}
	}
	t.table("Other laws, one at a time", rows)
	t.paragraph(e.Spread.Words, 5)
	return t.write(w)
}

func titleFor(title, name string) string {
	if t := clean(title); t != "" {
		return t
	}
	return clean(name)
}

// minus sets the sign of a number as print does.
func minus(s string) string { return strings.Replace(s, "-", "−", 1) }

// signed is a number with its sign.
func signed(v float64) string {
	s := num.Short(v, 3)
	if v > 0 {
		s = "+" + s
	}
	return s
}
