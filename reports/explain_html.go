package reports

import (
	_ "embed"
	"fmt"
	"html/template"
	"io"
	"math"
	"strings"

	"cycle/carbon/record"
	"cycle/reports/internal/num"
	"cycle/reports/internal/page"
)

//go:embed plot.tmpl
var plotTemplate string

//go:embed explain.tmpl
var explainTemplate string

// plotFuncs are what drawings without a script need beside the kit.
var plotFuncs = template.FuncMap{"typeset": typeset, "dash": dashName, "sub": func(a, b float64) float64 { return round1(a - b) }}

var explainPage = template.Must(page.Parse("explain", reuseTemplate+plotTemplate+explainTemplate, plotFuncs))

// blotOf is a fate as a coloured spot with words.
type blotOf struct{ Role, Pattern, Outcome, Date string }

func blot(k record.Kind, gyr float64, censored bool) blotOf {
	b := blotOf{Role: outcomeRole(k), Pattern: kindPattern(k), Outcome: typeset(clean(string(k))), Date: num.Age(gyr)}
	switch {
	case k == "":
		b.Role, b.Pattern, b.Outcome, b.Date = "state.beyond", "hatch", "cannot be computed", "–"
	case censored:
		b.Date = "none up to " + num.Age(gyr)
	}
	return b
}

type explainBody struct {
	*record.Explanation
	reuse
	ShortTitle, Heading, Command         string
	ElasticWords                         string
	CauseWords, RescueWords, SpreadWords string
	Doubts                               []record.Warning
	DriverNames                          []string
	Combos                               []comboRow
	Shares                               []shareRow
	Whole                                string
	Drivers                              []fact
	Margins                              []string
	Plots                                []*plot
	Figures                              []*page.Figure
	Clock                                string
	RescueWord, RescueTitle, RescueNote  string
	Rescues                              []rescueRow
	None                                 []string
	Elastic                              []elasticRow
	Laws                                 []lawRow
	Grids                                []lawGrid
	KindKeys                             []blotOf
	Facts                                []fact
	Scenario, Licences                   string
}

type comboRow struct {
	blotOf
	On []bool
}

type shareRow struct {
	Name, Value string
	Bar         barOf
}

type rescueRow struct {
	blotOf
	Key, Doc, From, To, Part, Then string
	Published                      bool
	Bar                            barOf
}

type elasticRow struct {
	Key, Doc, Value, Moves, Near string
	Bar                          barOf
}

type lawRow struct {
	blotOf
	Part, Law string
	Own       bool
}

type lawGrid struct {
	Title string
	Head  []string
	Rows  []gridRow
}

type gridRow struct {
	Name  string
	Cells []blotOf
}

// ExplainHTML writes the explanation as report.html, one file like that of a run.
func ExplainHTML(w io.Writer, e *record.Explanation) error {
	doc := &page.Document{
		Title: "Why: " + clip(sentence(e.Outcome.Sentence), 110) + " – cycle",
		Label: clip(titleFor(e.Title, e.Name), 90) + "  ·  cycle " + clip(clean(e.Version), 20) + "  ·  scenario " + clip(clean(e.Hash), 12),
		File:  fileStem(e.Name) + "-explain", Data: distanceData(e), Figures: distanceFigures(e), Outcome: nan(), Present: nan(),
	}
	if e.Fails {
		doc.Outcome = e.Outcome.TimeGyr
	}
	if e.Run != nil {
		doc.Episodes = episodesOf(e.Run)
		if e.Run.ReferenceAgeGyr != 0 {
			doc.Present = e.Run.ReferenceAgeGyr
		}
	}
	if err := doc.Finish(); err != nil {
		return err
	}
	b := &explainBody{Explanation: e, Figures: doc.Figures, Licences: Licences(), Command: clean(e.Command), ElasticWords: sentence(e.ElasticWords)}
	if known(doc.Present) {
		b.Clock = "before " + num.Short(doc.Present, 4) + " Gyr"
	}
	b.reuse = reuseOf(methodsOfWhy(e), e.Works)
	b.fill()
	doc.Body = b
	return doc.Write(w, explainPage)
}

// distanceData is the distances through time, for the kit.
func distanceData(e *record.Explanation) *page.Data {
	s := distanceSheet(e)
	d := &page.Data{Rows: len(s.rows)}
	for i, h := range s.head {
		c := page.Column{Name: h, Header: h, Title: h, Values: make([]float64, len(s.rows))}
		if i == 0 {
			c.Name, c.Title, c.Unit = "age", "Age of the star", "Gyr"
		}
		if t, ok := distanceTitles[h]; ok {
			c.Title, c.Unit = t[0], t[1]
		}
		for j := range s.rows {
			c.Values[j], _ = s.rows[j][i].(float64)
		}
		d.Columns = append(d.Columns, c)
	}
	return d
}

var distanceTitles = map[string][2]string{
	"temperature_K": {"Surface temperature", "K"}, "cold_fold_K": {"Cold fold", "K"},
	"outgassing_Tmol_per_yr": {"Outgassing", "Tmol/yr"}, "warm_state_needs_Tmol_per_yr": {"Needed by the warm state", "Tmol/yr"},
	"cold_outgassing_factor": {"cold: outgassing over what the warm state needs", ""}, "hot_outgassing_factor": {"hot: what the warm state bears over outgassing", ""},
	"cold_sunlight_percent": {"cold: sunlight that could be lost", "%"}, "hot_sunlight_percent": {"hot: sunlight to the radiation limit at this CO₂", "%"},
	"cold_K": {"cold: above the cold fold", "K"}, "hot_K": {"hot: below the moist threshold", "K"},
	"gain": {"Feedback gain", ""}, "response_time_kyr": {"Response time", "kyr"}, "supply_percent": {"Supply limit used", "%"},
}

func distanceFigures(e *record.Explanation) []*page.Figure {
	var words []string
	for _, m := range e.Margins {
		if m.Side == "cold" || m.Side == "hot" {
			words = append(words, typeset(upper(clean(m.Words))+"."))
		}
	}
	cold, hot := "pool.surface", "state.runaway"
	return []*page.Figure{
		{ID: "distance", Title: "Distance to failure through time", Caption: words[:min(len(words), 4)], Doubts: beside(e.Warnings, every),
			Panels: []page.Panel{
				{Name: "In factors of outgassing", Height: 150, Log: true, Limits: []page.Limit{{Value: 1, Words: "1: failure"}}, Curves: []page.Curve{{Column: "cold_outgassing_factor", Role: cold}, {Column: "hot_outgassing_factor", Role: hot, Dash: "dashed"}}},
				{Name: "In sunlight", Unit: "%", Height: 150, Limits: []page.Limit{{Value: 0, Words: "0: failure"}}, Curves: []page.Curve{{Column: "cold_sunlight_percent", Role: cold}, {Column: "hot_sunlight_percent", Role: hot, Dash: "dashed"}}},
				{Name: "In kelvin", Unit: "K", Height: 150, Limits: []page.Limit{{Value: 0, Words: "0: failure"}}, Curves: []page.Curve{{Column: "cold_K", Role: cold}, {Column: "hot_K", Role: hot, Dash: "dashed"}}},
			}},
		{ID: "thermostat", Title: "The thermostat through time", Caption: thermostatWords(e),
			Panels: []page.Panel{
				{Name: "Outgassing, and what the warm state needs", Unit: "Tmol/yr", Height: 130, Log: true, Curves: []page.Curve{{Column: "outgassing_Tmol_per_yr", Role: "ink"}, {Column: "warm_state_needs_Tmol_per_yr", Role: cold, Dash: "dashed"}}},
				{Name: "Feedback gain", Height: 110, Curves: []page.Curve{{Column: "gain", Role: "ink"}}},
				{Name: "Response time", Unit: "kyr", Height: 110, Log: true, Curves: []page.Curve{{Column: "response_time_kyr", Role: "ink"}}},
			}},
	}
}

// thermostatWords picks the weakest and the strongest moment of the thermostat.
func thermostatWords(e *record.Explanation) []string {
	var out []string
	for _, q := range []struct {
		name, unit string
		get        func(*record.Distance) float64
	}{
		{"Outgassing", "Tmol/yr", func(d *record.Distance) float64 { return d.Outgassing }},
		{"The feedback gain, d ln W/d ln pCO₂ of all weathering along the energy balance,", "", func(d *record.Distance) float64 { return d.Gain }},
		{"The response time of surface carbon", "kyr", func(d *record.Distance) float64 { return d.ResponseKyr }},
	} {
		var lo, hi *record.Distance
		for i := range e.Distances {
			d := &e.Distances[i]
			if v := q.get(d); known(v) {
				if lo == nil || v < q.get(lo) {
					lo = d
				}
				if hi == nil || v > q.get(hi) {
					hi = d
				}
			}
		}
		if lo != nil {
			out = append(out, typeset(q.name+" lies between "+pretty(q.get(lo), 3, q.unit)+" ("+age(lo.AgeGyr)+") and "+pretty(q.get(hi), 3, q.unit)+" ("+age(hi.AgeGyr)+")."))
		}
	}
	return out
}

func (b *explainBody) fill() {
	e := b.Explanation
	b.ShortTitle = clip(titleFor(e.Title, e.Name), 120)
	b.Heading = clip(sentence(e.Outcome.Sentence), 600)
	b.CauseWords, b.SpreadWords = sentence(e.Cause.Words), sentence(e.Spread.Words)
	for _, w := range e.Warnings {
		b.Doubts = append(b.Doubts, record.Warning{About: clean(w.About), Words: typeset(sentenceEnd(w.Words))})
	}
	for _, d := range e.Drivers {
		b.DriverNames = append(b.DriverNames, clean(d.Name))
		v := "–"
		if known(d.From) && known(d.To) {
			v = typeset(num.Short(d.From, 3) + " to " + num.With(num.Short(d.To, 3), d.Unit))
		}
		b.Drivers = append(b.Drivers, fact{Name: upper(clean(d.Name)), Note: typeset(clean(d.Doc)), Value: v})
	}
	for _, c := range e.Combinations {
		row := comboRow{blotOf: blot(c.Outcome, c.TimeGyr, c.Censored)}
		for _, d := range e.Drivers {
			on := false
			for _, in := range c.Changing {
				on = on || in == d.Name
			}
			row.On = append(row.On, on)
		}
		b.Combos = append(b.Combos, row)
	}
	var shares []float64
	for _, s := range e.Cause.Shares {
		shares = append(shares, s.Gyr)
	}
	for i, bar := range bars(shares, "accent") {
		b.Shares = append(b.Shares, shareRow{Name: clean(e.Cause.Shares[i].Driver), Value: typeset(num.With(minus(signed(shares[i])), "Gyr")), Bar: bar})
	}
	b.Whole = typeset(num.With(minus(signed(e.Cause.WholeGyr)), "Gyr"))
	for _, m := range e.Margins {
		b.Margins = append(b.Margins, sentence(m.Words))
	}
	b.rescues()
	b.elasticities()
	b.laws()
	b.plots()
	pathNumbers(b.Plots, e)
	if e.Run != nil {
		b.Scenario = e.Run.Scenario
	}
	b.Facts = []fact{{Name: "Scenario", Value: clean(e.Name)}, {Name: "Hash of the scenario", Value: clean(e.Hash)}, {Name: "Histories computed", Value: fmt.Sprint(e.Histories)}}
}

func (b *explainBody) rescues() {
	e := b.Explanation
	b.RescueWord, b.RescueTitle = "Rescue", "What would have saved it"
	what := "the smallest change of each parameter after which this failure does not happen"
	if !e.Fails {
		b.RescueWord, b.RescueTitle = "Threat", "What would bring a failure"
		what = "the smallest change of each parameter that brings a failure"
	}
	b.RescueNote = upper(what) + ", found on whole histories and sorted by its size against the published uncertainty. What has no published range is searched over all that is allowed and stands behind."
	if e.Run != nil && e.Run.Reference.Solved != "" {
		b.RescueNote += " What the scenario solves for, so that the history passes through the reference state, is solved again each time: " + typeset(clean(e.Run.Reference.Solved)) + " holds for the scenario itself."
	}
	var parts []float64
	var found []*record.Rescue
	for i := range e.Rescues {
		r := &e.Rescues[i]
		if !r.Found {
			b.None = append(b.None, clean(r.Key))
			continue
		}
		v := r.Part
		if !r.Published {
			v = nan()
		}
		found, parts = append(found, r), append(parts, v)
	}
	for i, bar := range bars(parts, "accent") {
		r := found[i]
		row := rescueRow{blotOf: blot(r.Outcome, r.TimeGyr, r.Outcome == record.Temperate || r.Outcome == record.StarLeft), Key: clean(r.Key), Doc: typeset(clean(r.Doc)), From: typeset(clean(r.FromText)), To: typeset(clean(r.ToText)), Published: r.Published, Bar: bar}
		row.Part = num.Percent(r.Part)
		if !r.Published {
			row.Part = "–"
		}
		row.Then = typeset(fateText(r.Outcome, r.TimeGyr, r.Outcome == record.Temperate || r.Outcome == record.StarLeft))
		b.Rescues = append(b.Rescues, row)
	}
	switch {
	case len(found) == 0:
		b.RescueWords = "No parameter alone, inside its range."
	default:
		r := found[0]
		b.RescueWords = sentence(fmt.Sprintf("the smallest change is %s from %s to %s, then: %s; %d of %d parameters can do it alone", clean(r.Key), r.FromText, r.ToText, b.Rescues[0].Then, len(found), len(e.Rescues)))
	}
}

func (b *explainBody) elasticities() {
	e := b.Explanation
	var values []float64
	var shown []*record.Elasticity
	for i := range e.Elasticities {
		x := &e.Elasticities[i]
		if x.Value == 0 && x.Near == "" {
			continue
		}
		values, shown = append(values, x.Value), append(shown, x)
	}
	for i, bar := range bars(values, "accent") {
		x := shown[i]
		row := elasticRow{Key: clean(x.Key), Doc: typeset(clean(x.Doc)), Value: "–", Moves: "–", Near: typeset(clean(x.Near)), Bar: bar}
		if known(x.Value) {
			row.Value = minus(signed(x.Value)) + " ± " + num.Pretty(num.Short(x.Error, 1))
			row.Moves = num.With(num.Pretty(signed(x.Gyr*1e3)), "Myr")
		}
		b.Elastic = append(b.Elastic, row)
	}
}

func (b *explainBody) laws() {
	e := b.Explanation
	own := map[string]string{}
	if e.Run != nil {
		for _, l := range e.Run.Laws {
			own[l.Part] = l.Name
		}
	}
	single := map[string]map[string]blotOf{}
	var parts []string
	order := map[string][]string{}
	seen := map[string]bool{}
	key := func(k blotOf) {
		if !seen[k.Outcome] {
			seen[k.Outcome] = true
			b.KindKeys = append(b.KindKeys, k)
		}
	}
	base := blot(e.Outcome.Kind, e.Outcome.TimeGyr, !e.Fails && e.Outcome.Kind != record.Undecided)
	key(base)
	for i := range e.Variants {
		v := &e.Variants[i]
		cell := blot(v.Outcome, v.TimeGyr, v.Censored)
		key(cell)
		if len(v.Parts) != 1 {
			continue
		}
		p, l := v.Parts[0], v.Laws[0]
		if single[p] == nil {
			single[p] = map[string]blotOf{}
			parts = append(parts, p)
			b.Laws = append(b.Laws, lawRow{blotOf: base, Part: clean(p), Law: clean(own[p]), Own: true})
		}
		single[p][l] = cell
		order[p] = append(order[p], l)
		b.Laws = append(b.Laws, lawRow{blotOf: cell, Part: clean(p), Law: clean(l)})
	}
	pair := map[string]blotOf{}
	for i := range e.Variants {
		if v := &e.Variants[i]; len(v.Parts) == 2 {
			pair[strings.Join(append(append([]string{}, v.Parts...), v.Laws...), "\x00")] = blot(v.Outcome, v.TimeGyr, v.Censored)
		}
	}
	for i, p := range parts {
		for _, q := range parts[i+1:] {
			g := lawGrid{Title: upper(clean(p)) + " against " + clean(q), Head: append([]string{clean(own[q])}, order[q]...)}
			row := gridRow{Name: clean(own[p]), Cells: []blotOf{base}}
			for _, k := range order[q] {
				row.Cells = append(row.Cells, single[q][k])
			}
			g.Rows = append(g.Rows, row)
			for _, l := range order[p] {
				row := gridRow{Name: clean(l), Cells: []blotOf{single[p][l]}}
				for _, k := range order[q] {
					row.Cells = append(row.Cells, pair[strings.Join([]string{p, q, l, k}, "\x00")])
				}
				g.Rows = append(g.Rows, row)
			}
			b.Grids = append(b.Grids, g)
		}
	}
}

// plots draws the path over the curve of steady states.
func (b *explainBody) plots() {
	e := b.Explanation
	if len(e.Curves) == 0 || len(e.Distances) == 0 {
		return
	}
	lo, hi := math.Inf(1), 0.0
	cool, hot := math.Inf(1), 0.0
	see := func(v, t float64) {
		if v > 0 && known(v) && known(t) {
			lo, hi = math.Min(lo, v), math.Max(hi, v)
			cool, hot = math.Min(cool, t), math.Max(hot, t)
		}
	}
	for _, d := range e.Distances {
		see(d.Outgassing, d.TemperatureK)
	}
	for i := range e.Curves {
		for _, f := range e.Curves[i].Folds {
			if f.Sheet == 0 {
				see(f.Outgassing, f.TemperatureK)
			}
		}
	}
	if hi == 0 {
		return
	}
	lo, hi = lo/2, hi*3
	if hi/lo < 10 {
		lo, hi = lo/2, hi*2
	}
	p := newPlot("path", "The path over the steady states", plotAxis{Name: "Outgassing that keeps the state, Tmol/yr (logarithmic)", Lo: lo, Hi: hi, Log: true}, plotAxis{Name: "Surface temperature, K", Lo: math.Floor((cool-12)/10) * 10, Hi: math.Ceil((hot+14)/10) * 10})
	dashes := []string{"", "dashed", "dotted"}
	for i := range e.Curves {
		c := &e.Curves[i]
		for _, stable := range []bool{false, true} {
			// Each sheet, cut where its stability changes.
			for sheet := 0; sheet < 2; sheet++ {
				var xs, ys []float64
				for k := range c.Curve {
					q := &c.Curve[k]
					if q.Sheet != sheet {
						continue
					}
					if q.Climate == stable {
						xs, ys = append(xs, q.Outgassing), append(ys, q.TemperatureK)
					} else if len(xs) > 0 && !math.IsNaN(xs[len(xs)-1]) {
						xs, ys = append(xs, nan()), append(ys, nan())
					}
				}
				role := "quiet"
				if stable {
					role = []string{"pool.mantle", "pool.continental", "pool.surface"}[i%3]
				}
				p.curve(role, dashes[i%3], stable, xs, ys)
			}
		}
		p.Keys = append(p.Keys, plotKey{Role: []string{"pool.mantle", "pool.continental", "pool.surface"}[i%3], Dash: dashes[i%3], Name: "steady climates at " + num.Age(c.AgeGyr)})
		for _, f := range c.Folds {
			if f.Sheet == 0 {
				p.dot("ink", "", f.Outgassing, f.TemperatureK, true)
			}
		}
	}
	var xs, ys []float64
	for _, d := range e.Distances {
		xs, ys = append(xs, d.Outgassing), append(ys, d.TemperatureK)
	}
	p.curve("accent", "", true, xs, ys)
	first, last := e.Distances[0], e.Distances[len(e.Distances)-1]
	p.dot("accent", num.Age(first.AgeGyr), first.Outgassing, first.TemperatureK, false)
	p.dot("accent", num.Age(last.AgeGyr), last.Outgassing, last.TemperatureK, false)
	p.Keys = append(p.Keys, plotKey{Role: "quiet", Name: "unstable climates"}, plotKey{Role: "accent", Name: "the planet’s path"}, plotKey{Role: "ink", Dot: true, Name: "folds"})
	p.Caption = []string{"Each curve joins all steady states under the conditions of one age; the planet stays where its outgassing meets a stable part."}
	for i := range e.Curves {
		w := e.Curves[i].Boundaries
		if known(w.WarmNeeds) && w.WarmNeeds > 0 {
			p.Caption = append(p.Caption, typeset(fmt.Sprintf("At %s the warm state needs %s Tmol/yr and a snowball thaws above %s Tmol/yr.", num.Age(e.Curves[i].AgeGyr), num.Short(w.WarmNeeds, 3), num.Short(w.ThawsAbove, 3))))
		}
	}
	p.Alt = p.Title + ". " + strings.Join(p.Caption, " ")
	b.Plots = append(b.Plots, p)
}
