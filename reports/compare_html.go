package reports

import (
	_ "embed"
	"fmt"
	"html/template"
	"io"
	"math"
	"sort"
	"strings"

	"cycle/carbon/record"
	"cycle/reports/internal/num"
	"cycle/reports/internal/page"
)

//go:embed compare.tmpl
var compareTemplate string

var comparePage = template.Must(page.Parse("compare", reuseTemplate+plotTemplate+compareTemplate, plotFuncs))

type compareBody struct {
	*record.Comparison
	reuse
	Heading, AgreeWords string
	Command             string
	Names               []string
	Differ              []record.Difference
	Results             []comparedRow
	MarginHeads         []string
	Figures             []*page.Figure
	Clock               string
	Facts               []fact
	Scenario, Licences  string
}

type comparedRow struct {
	blotOf
	Name, Liquid, Sentence, Why, LineRole, Dash string
	Bar                                         barOf
	Margins                                     []string
}

// lineOf is the look of one scenario's curves.
func lineOf(i int) (role, dash string) {
	roles := []string{"series.1", "series.2", "series.3", "series.4", "series.5"}
	return roles[i%len(roles)], []string{"", "dashed", "dotted"}[i/len(roles)%3]
}

// CompareHTML writes the comparison as report.html.
func CompareHTML(w io.Writer, c *record.Comparison) error {
	b := &compareBody{Comparison: c, Licences: Licences(), Command: clean(c.Command)}
	for _, n := range c.Names {
		b.Names = append(b.Names, clean(n))
	}
	for _, d := range c.Differ {
		d := record.Difference{Key: clean(d.Key), Doc: typeset(clean(d.Doc)), Values: append([]string(nil), d.Values...)}
		for i := range d.Values {
			d.Values[i] = typeset(clean(d.Values[i]))
		}
		b.Differ = append(b.Differ, d)
	}
	b.Heading = clip(sentence(c.Words), 400)
	b.AgreeWords = fmt.Sprintf("%d inputs are the same everywhere and are not shown.", c.Agree)
	for _, m := range c.Margins {
		b.MarginHeads = append(b.MarginHeads, typeset(upper(clean(m.Boundary))+", "+clean(m.Unit)))
	}
	var liquid []float64
	for i := range c.Results {
		liquid = append(liquid, c.Results[i].Liquid)
	}
	for i, bar := range bars(liquid, "quiet") {
		r := &c.Results[i]
		row := comparedRow{blotOf: blot(r.Outcome.Kind, r.Outcome.TimeGyr, !lasting(r.Outcome.Kind)), Name: clean(r.Name), Liquid: typeset(num.With(num.Short(r.Liquid, 4), "Gyr")), Sentence: sentence(r.Outcome.Sentence), Why: sentence(r.Outcome.Why), Bar: bar}
		if lasting(r.Outcome.Kind) {
			row.Date = strings.ReplaceAll(num.Pretty(num.Date(r.Outcome.TimeGyr, r.Outcome.ErrorGyr)), " ", "\u00a0")
		}
		row.LineRole, row.Dash = lineOf(i)
		for _, m := range c.Margins {
			v := "–"
			if known(m.Values[i]) {
				v = unitSet("")(m.Values[i])
			}
			row.Margins = append(row.Margins, v)
		}
		b.Results = append(b.Results, row)
		b.Facts = append(b.Facts, fact{Name: "Hash of " + clean(r.Name), Value: clean(r.Hash)})
	}
	b.reuse = reuseOf(methodsOfComparison(c), c.Works)
	for i, r := range c.Runs {
		if r.Scenario != "" && i < len(c.Names) {
			id := fmt.Sprintf("scenario-%d", i+1)
			b.Scenarios = append(b.Scenarios, savedText{id, clip(clean(c.Names[i]), 80), id + ".toml", r.Scenario})
		}
	}
	doc := &page.Document{Title: clip(b.Heading, 120) + " – cycle", Label: clip(clean(strings.Join(c.Names, ", ")), 90) + "  ·  cycle " + clip(clean(c.Version), 20), File: "compare", Data: comparedData(c), Figures: comparedFigures(c), Outcome: nan(), Present: nan()}
	if len(c.Runs) > 0 && c.Runs[0].ReferenceAgeGyr != 0 {
		doc.Present = c.Runs[0].ReferenceAgeGyr
		b.Clock = "before " + num.Short(doc.Present, 4) + " Gyr"
	}
	if err := doc.Finish(); err != nil {
		return err
	}
	b.Figures = doc.Figures
	doc.Body = b
	return doc.Write(w, comparePage)
}

// compared are the quantities drawn on common axes.
var compared = []string{"temperature", "pco2", "outgassing", "cold_margin", "hot_margin", "sunlight"}

func seriesName(i int, column string) string { return fmt.Sprintf("s%d_%s", i+1, column) }

// comparedRows is the most rows the page keeps of one history.
const comparedRows = 700

// comparedData puts all histories on one list of ages. Between two of its own
// ages a history is drawn straight, which is how it is drawn alone.
func comparedData(c *record.Comparison) *page.Data {
	var ages []float64
	for _, r := range c.Runs {
		step := max(1, len(r.Rows)/comparedRows)
		for j := 0; j < len(r.Rows); j += step {
			ages = append(ages, r.Rows[j].Age/1e9)
		}
		if n := len(r.Rows); n > 0 {
			ages = append(ages, r.Rows[n-1].Age/1e9)
		}
	}
	sort.Float64s(ages)
	n := 0
	for i := range ages {
		if i == 0 || ages[i] != ages[n-1] {
			ages[n] = ages[i]
			n++
		}
	}
	ages = ages[:n]
	d := &page.Data{Rows: n, Columns: []page.Column{{Name: "age", Header: "age_Gyr", Title: "Age of the star", Unit: "Gyr", Values: ages}}}
	for i, r := range c.Runs {
		for _, name := range compared {
			col := record.ColumnNamed(name)
			if col == nil {
				continue
			}
			v := make([]float64, n)
			j := 0
			for k, t := range ages {
				v[k] = nan()
				if len(r.Rows) == 0 || t < r.Rows[0].Age/1e9 || t > r.Rows[len(r.Rows)-1].Age/1e9 {
					continue
				}
				for j+1 < len(r.Rows)-1 && r.Rows[j+1].Age/1e9 <= t {
					j++
				}
				a, z := &r.Rows[j], &r.Rows[min(j+1, len(r.Rows)-1)]
				w := 0.0
				if z.Age > a.Age {
					w = math.Max(0, math.Min(1, (t-a.Age/1e9)/((z.Age-a.Age)/1e9)))
				}
				p, q := col.Value(a), col.Value(z)
				switch {
				case w == 0:
					v[k] = p
				case w == 1:
					v[k] = q
				default:
					v[k] = p + w*(q-p)
				}
			}
			d.Columns = append(d.Columns, page.Column{Name: seriesName(i, name), Header: header(seriesName(i, name), col.Unit), Title: clean(c.Names[i]), Unit: col.Unit, Values: v})
		}
	}
	return d
}

func comparedFigures(c *record.Comparison) []*page.Figure {
	curves := func(column string) []page.Curve {
		var out []page.Curve
		for i := range c.Runs {
			role, dash := lineOf(i)
			out = append(out, page.Curve{Column: seriesName(i, column), Role: role, Dash: dash})
		}
		return out
	}
	var words []string
	for i := range c.Results {
		r := &c.Results[i]
		words = append(words, typeset(clean(r.Name)+": "+fateText(r.Outcome.Kind, r.Outcome.TimeGyr, !lasting(r.Outcome.Kind))+"."))
	}
	doubts := doubtsOf(c.Names, c.Runs)
	near := func(figure string) []string {
		return beside(doubts, func(w record.Warning) bool { return concerns(w.About, figure) })
	}
	return []*page.Figure{
		{ID: "climate", Title: "Climate through time", Caption: append(words, rangedAll(c, "temperature", kelvin)...), Doubts: near("history"), Panels: []page.Panel{
			{Name: "Surface temperature", Unit: "K", Height: 190, Limits: []page.Limit{{Value: 273.15, Words: "273 K, water freezes"}}, Curves: curves("temperature")},
		}},
		{ID: "co2", Title: "CO₂ through time", Caption: rangedAll(c, "pco2", pressure), Doubts: near("ocean"), Panels: []page.Panel{
			{Name: "CO₂ partial pressure", Unit: "bar", Log: true, Height: 190, Curves: curves("pco2")},
		}},
		{ID: "sources", Title: "Outgassing through time", Caption: rangedAll(c, "outgassing", unitSet("Tmol/yr")), Doubts: near("fluxes"), Panels: []page.Panel{
			{Name: "Outgassing", Unit: "Tmol/yr", Height: 150, Log: true, Curves: curves("outgassing")},
		}},
		{ID: "coldside", Title: "Distance to freezing", Caption: rangedAll(c, "cold_margin", unitSet("")), Doubts: near("interior"), Panels: []page.Panel{
			{Name: "Outgassing over what the warm state needs", Height: 150, Log: true, Limits: []page.Limit{{Value: 1, Words: "1: the warm state is lost"}}, Curves: curves("cold_margin")},
		}},
		{ID: "hotside", Title: "Distance to overheating", Caption: rangedAll(c, "hot_margin", unitSet("%")), Panels: []page.Panel{
			{Name: "Sunlight left to the radiation limit", Unit: "%", Height: 150, Limits: []page.Limit{{Value: 0, Words: "the radiation limit"}}, Curves: curves("hot_margin")},
		}},
	}
}
