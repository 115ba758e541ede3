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

//go:embed ensemble.tmpl
var ensembleTemplate string

var ensemblePage = template.Must(page.Parse("ensemble", reuseTemplate+plotTemplate+ensembleTemplate, plotFuncs))

type ensembleBody struct {
	*record.Ensemble
	reuse
	ShortTitle, CountWords, Heading, CountNote string
	Fates                                      []fateRow
	Doubts                                     []string
	More, Design                               string
	Figures                                    []*page.Figure
	Ages                                       []ageRow
	Clocks                                     []clockTable
	Laws                                       []byLawRow
	Pairs                                      []pairRow
	Priors                                     []record.UncertainInput
	Correlated                                 []string
	Facts                                      []fact
	Command, Scenario, Licences, Clock         string
}

type fateRow struct {
	blotOf
	Share, Interval, All, Dates, Median, Typical string
	Bar                                          barOf
}

type ageRow struct {
	Age, Quantity string
	Values        []string
	Count         int
}

type clockTable struct {
	Name, Words string
	HasTotal    bool
	Rows        []sensitiveRow
}

type sensitiveRow struct {
	Key, First, Total, Partial string
	Bar                        barOf
}

type byLawRow struct {
	blotOf
	Choice, Share, Interval, Dates string
	Bar                            barOf
}

type pairRow struct{ Between, Members, Distance, Apart string }

// EnsembleHTML writes the summary of an ensemble as report.html.
func EnsembleHTML(w io.Writer, e *record.Ensemble) error {
	b := &ensembleBody{Ensemble: e, Licences: Licences(), Command: clean(e.Command), Scenario: e.Scenario, More: typeset(clean(e.Worth))}
	b.ShortTitle = clip(titleFor(e.Title, e.Name), 120)
	b.CountWords = num.Count(e.Members, "history", "histories")
	b.Heading = clip(sentence(e.Sentence), 600)
	b.CountNote = typeset(fmt.Sprintf("%d members count for shares and dates, from %s to %s. Intervals are Wilson's at 95 %%; dates are ages of the star.", e.Independent, num.Age(e.StartGyr), num.Age(e.EndGyr)))
	for _, x := range e.Warnings {
		b.Doubts = append(b.Doubts, sentence(x.Words))
	}
	b.reuse = reuseOf(methodsOfEnsemble(e), e.Works)
	b.fates()
	b.decides()
	b.byLaw()
	for _, a := range e.AtAges {
		r := ageRow{Age: num.Age(a.AgeGyr), Quantity: typeset(clean(a.Quantity)), Count: a.Count}
		for _, v := range []float64{a.Q025, a.Q16, a.Q50, a.Q84, a.Q975} {
			s := "–"
			switch {
			case !known(v):
			case a.Unit == "bar":
				s = pressure(v)
			case a.Unit == "K":
				s = kelvin(v)
			default:
				s = num.Fix(v, 2)
			}
			r.Values = append(r.Values, s)
		}
		b.Ages = append(b.Ages, r)
	}
	for _, x := range e.Borders {
		b.Pairs = append(b.Pairs, pairRow{typeset(clean(string(x.A)) + " and " + clean(string(x.B))), fmt.Sprintf("%d and %d", x.MemberA, x.MemberB), num.Percent(x.Distance), typeset(num.Unit(clean(x.Apart)))})
	}
	b.Design = sentence(fmt.Sprintf("%s; seed %d", clean(e.DesignWords), e.Seed))
	for _, u := range e.Uncertain {
		b.Priors = append(b.Priors, record.UncertainInput{Key: clean(u.Key), Distribution: typeset(num.Unit(clean(u.Distribution))), Doc: typeset(clean(u.Doc))})
	}
	for _, c := range e.Correlated {
		b.Correlated = append(b.Correlated, sentence(c))
	}
	b.Facts = []fact{{Name: "Scenario", Value: clean(e.Name)}, {Name: "Hash of the scenario", Value: clean(e.Hash)}, {Name: "Members", Value: fmt.Sprint(e.Members)}, {Name: "Seed", Value: fmt.Sprint(e.Seed)}, {Name: "Design", Value: clean(e.Design)}}
	doc := &page.Document{Title: clip(b.ShortTitle, 90) + ", " + b.CountWords + " – cycle", Label: b.ShortTitle + "  ·  cycle " + clip(clean(e.Version), 20), File: fileStem(e.Name) + "-ensemble",
		Data: ensembleData(e), Figures: ensembleFigures(e), Outcome: nan(), Present: nan()}
	if e.RefAgeGyr != 0 && known(e.RefAgeGyr) {
		doc.Present = e.RefAgeGyr
		b.Clock = "before " + num.Short(doc.Present, 4) + " Gyr"
	}
	if err := doc.Finish(); err != nil {
		return err
	}
	b.Figures = doc.Figures
	doc.Body = b
	return doc.Write(w, ensemblePage)
}

// threeDates words the 5, 50 and 95 % quantiles of dates.
func threeDates(q ...float64) string {
	for _, v := range q {
		if !known(v) {
			return "–"
		}
	}
	return fmt.Sprintf("%s, %s, %s\u00a0Gyr", num.Fix(q[0], 3), num.Fix(q[1], 3), num.Fix(q[2], 3))
}

func percents(x record.Interval) string {
	if !known(x.Low) || !known(x.High) {
		return "–"
	}
	return num.Short(100*x.Low, 3) + " to " + num.Percent(x.High)
}

func (b *ensembleBody) fates() {
	order := append([]record.FateShare(nil), b.Shares...)
	sort.SliceStable(order, func(i, j int) bool { return order[i].Count > order[j].Count })
	var values []float64
	for _, s := range order {
		values = append(values, s.Share.Value)
	}
	for i, bar := range bars(values, "quiet") {
		s := order[i]
		r := fateRow{blotOf: blot(s.Kind, nan(), false), Share: typeset(num.Percent(s.Share.Value)), Interval: typeset(percents(s.Share)), All: typeset(percents(s.WithAll)), Dates: "–", Median: "–", Typical: "–", Bar: bar}
		if s.Typical >= 0 {
			r.Typical = fmt.Sprint(s.Typical)
		}
		for _, d := range b.Ensemble.Dates {
			if d.Failure && d.Clock == string(s.Kind) && len(d.Quantiles) == 5 {
				r.Dates = threeDates(d.Quantiles[0].TimeGyr.Value, d.Quantiles[2].TimeGyr.Value, d.Quantiles[4].TimeGyr.Value)
				if m := d.Quantiles[2].TimeGyr; known(m.Low) && known(m.High) {
					r.Median = num.Fix(m.Low, 4) + " to " + num.Fix(m.High, 4) + "\u00a0Gyr"
				}
			}
		}
		b.Fates = append(b.Fates, r)
	}
}

func (b *ensembleBody) decides() {
	index := func(x record.Interval) string {
		if !known(x.Value) {
			return "–"
		}
		return num.Percent(x.Value) + " (" + num.Short(100*x.Low, 2) + " to " + num.Short(100*x.High, 2) + ")"
	}
	for _, s := range b.Sensitive {
		t := clockTable{Name: typeset(upper(clean(s.Clock)))}
		words := fmt.Sprintf("%s; %d of %d members have the event. %s.", upper(clean(s.Quantity)), s.Count, s.Of, upper(clean(s.Method)))
		if known(s.Laws.Value) {
			words += fmt.Sprintf(" The choices of law explain %s together (%s); numbers and their interplay with the laws the rest.", num.Percent(s.Laws.Value), percents(s.Laws))
		}
		if s.Note != "" {
			words += " " + upper(clean(s.Note)) + "."
		}
		t.Words = typeset(words)
		in := append([]record.Sensitivity(nil), s.Inputs...)
		sort.SliceStable(in, func(i, j int) bool { return worth(in[i]) > worth(in[j]) })
		var values []float64
		for _, x := range in {
			values = append(values, x.First.Value)
			t.HasTotal = t.HasTotal || known(x.Total.Value)
		}
		for i, bar := range bars(values, "accent") {
			x := in[i]
			partial := "–"
			if known(x.Partial.Value) {
				partial = num.Pretty(fmt.Sprintf("%+.2f", x.Partial.Value))
				if known(x.Partial.Low) && known(x.Partial.High) {
					partial = num.Pretty(fmt.Sprintf("%+.2f (%+.2f to %+.2f)", x.Partial.Value, x.Partial.Low, x.Partial.High))
				}
			}
			t.Rows = append(t.Rows, sensitiveRow{Key: clean(x.Input), First: index(x.First), Total: index(x.Total), Partial: partial, Bar: bar})
		}
		b.Clocks = append(b.Clocks, t)
	}
}

// worth orders inputs: by the total index where it is known.
func worth(x record.Sensitivity) float64 {
	switch {
	case known(x.Total.Value):
		return x.Total.Value
	case known(x.First.Value):
		return x.First.Value
	}
	return -1
}

func (b *ensembleBody) byLaw() {
	var values []float64
	for _, l := range b.Ensemble.ByLaw {
		values = append(values, l.Share.Value)
	}
	for i, bar := range bars(values, "quiet") {
		l := b.Ensemble.ByLaw[i]
		b.Laws = append(b.Laws, byLawRow{blotOf: blot(l.Kind, nan(), false), Choice: clean(l.Choice), Share: num.Percent(l.Share.Value), Interval: percents(l.Share), Dates: threeDates(l.LowGyr, l.Median, l.HighGyr), Bar: bar})
	}
}

// ensembleData puts the curves through time and the typical histories on one list
// of ages.
func ensembleData(e *record.Ensemble) *page.Data {
	c := &record.Comparison{}
	for _, t := range e.Typical {
		c.Names = append(c.Names, fmt.Sprintf("%s, member %d", t.Kind, t.Member))
		c.Runs = append(c.Runs, &record.Run{Rows: t.Rows})
	}
	// The ages of the curves take part as a history that is left out again.
	grid := &record.Run{}
	for _, t := range curveAges(e) {
		grid.Rows = append(grid.Rows, record.Row{Age: t * 1e9})
	}
	c.Names, c.Runs = append(c.Names, "grid"), append(c.Runs, grid)
	d := comparedData(c)
	last := fmt.Sprintf("s%d_", len(c.Runs))
	keep := d.Columns[:0]
	for _, col := range d.Columns {
		if !strings.HasPrefix(col.Name, last) {
			keep = append(keep, col)
		}
	}
	d.Columns = keep
	ages := d.Columns[0].Values
	add := func(name, title string, t, v []float64) {
		x := make([]float64, len(ages))
		for i, a := range ages {
			x[i] = 100 * between(t, v, a)
		}
		d.Columns = append(d.Columns, page.Column{Name: name, Header: header(name, "%"), Title: typeset(title), Unit: "%", Values: x})
	}
	for i, q := range curvesOf(e) {
		name := curveName(i)
		add(name, clean(q.Name), q.TimeGyr, q.Value)
		add(name+"_low", clean(q.Name)+", 95 % band, lower end", q.TimeGyr, q.Low)
		add(name+"_high", clean(q.Name)+", 95 % band", q.TimeGyr, q.High)
	}
	return d
}

func curveName(i int) string { return fmt.Sprintf("curve%d", i) }

// curvesOf lists the curves: liquid water, then the failures.
func curvesOf(e *record.Ensemble) []record.Curve {
	return append([]record.Curve{e.Liquid}, e.Incidence...)
}

// curveAges lists the ages of all curves. A step is drawn between two ages a
// moment apart.
func curveAges(e *record.Ensemble) []float64 {
	var out []float64
	for _, q := range curvesOf(e) {
		for i, t := range q.TimeGyr {
			if i > 0 {
				out = append(out, t-1e-6)
			}
			out = append(out, t)
		}
	}
	sort.Float64s(out)
	return out
}

// between reads a step function.
func between(t, v []float64, at float64) float64 {
	i := sort.SearchFloat64s(t, at)
	if i == len(t) || t[i] > at {
		i--
	}
	switch {
	case i < 0 && len(v) == 0:
		return math.NaN()
	case i < 0:
		return v[0]
	}
	return v[i]
}

// liquidWords says when half and when all but a tenth of the members have failed.
func liquidWords(c *record.Curve, final string) []string {
	var out []string
	for _, q := range []struct {
		at    float64
		words string
	}{{0.9, "nine in ten"}, {0.5, "half"}, {0.1, "one in ten"}} {
		if t, ok := crossing(c, q.at); ok {
			out = append(out, typeset("No more than "+q.words+" keep liquid water from "+num.Age(t)+" on."))
		}
	}
	return append(out, final)
}

// typicalWords says which members are drawn.
func typicalWords(e *record.Ensemble) []string {
	var out []string
	for i, t := range e.Typical {
		if i == 6 {
			break
		}
		s := fmt.Sprintf("Member %d, %s", t.Member, clip(clean(string(t.Kind)), 60))
		r := &record.Run{Rows: t.Rows}
		if x := extremes(r, "temperature"); x.ok {
			s += ": from " + kelvin(x.least) + " (" + age(x.tLeast) + ") to " + kelvin(x.most) + " (" + age(x.tMost) + ")"
		}
		out = append(out, typeset(s)+".")
	}
	return append(out, "Of each outcome it is the member whose date is close to the median and whose inputs are closest to the mean of its kind.")
}

func ensembleFigures(e *record.Ensemble) []*page.Figure {
	var out []*page.Figure
	percent := func(name string, curves []page.Curve) page.Panel {
		return page.Panel{Name: name, Unit: "%", Height: 210, Curves: curves}
	}
	band := func(i int, role string) []page.Curve {
		n := curveName(i)
		return []page.Curve{{Column: n + "_low", Upper: n + "_high", Name: "95 % band", Role: role, Kind: page.Band}, {Column: n, Role: "ink"}}
	}
	final := func(q *record.Curve) string {
		n := len(q.Value) - 1
		if n < 0 {
			return ""
		}
		return typeset(fmt.Sprintf("%s: %s (%s) by %s.", upper(clean(q.Name)), num.Percent(q.Value[n]), percents(record.Interval{Low: q.Low[n], High: q.High[n]}), num.Age(q.TimeGyr[n])))
	}
	if len(e.Incidence) > 0 {
		var curves []page.Curve
		var words []string
		for i := range e.Incidence {
			q := &e.Incidence[i]
			c := band(i+1, outcomeRole(record.Kind(q.Name)))
			c[0].Name = typeset(clean(q.Name)) + ", 95 % band"
			if kindPattern(record.Kind(q.Name)) != "" {
				c[1].Dash = "dashed"
			}
			curves = append(curves, c...)
			words = append(words, final(q))
		}
		out = append(out, &page.Figure{ID: "incidence", Title: "Cumulative incidence of each failure", Caption: append(words, "The failures compete: each curve is the probability that this one has come first (Aalen and Johansen)."), Doubts: beside(e.Warnings, every),
			Panels: []page.Panel{percent("Probability to have failed so", curves)}})
	}
	if len(e.Liquid.TimeGyr) > 1 {
		out = append(out, &page.Figure{ID: "liquid", Title: "Probability of liquid water", Caption: liquidWords(&e.Liquid, final(&e.Liquid)), Panels: []page.Panel{percent("Probability that no failure has come yet", band(0, "pool.surface"))}})
	}
	if len(e.Typical) > 0 {
		curves := func(column string) []page.Curve {
			var out []page.Curve
			for i, t := range e.Typical {
				c := page.Curve{Column: seriesName(i, column), Role: outcomeRole(t.Kind)}
				if kindPattern(t.Kind) != "" {
					c.Dash = "dashed"
				}
				out = append(out, c)
			}
			return out
		}
		out = append(out, &page.Figure{ID: "typical", Title: "A typical history of each outcome", Caption: typicalWords(e),
			Panels: []page.Panel{
				{Name: "Surface temperature", Unit: "K", Height: 190, Limits: []page.Limit{{Value: 273.15, Words: "273 K, water freezes"}}, Curves: curves("temperature")},
				{Name: "CO₂ partial pressure", Unit: "bar", Log: true, Height: 170, Curves: curves("pco2")},
			}})
	}
	return out
}
