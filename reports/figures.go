package reports

import (
	"fmt"
	"math"
	"strings"

	"cycle/carbon/record"
	"cycle/reports/internal/num"
	"cycle/reports/internal/page"
)

// figuresOf is the list of figures of a run, in the order they are shown. A
// curve without numbers, and a figure without curves, is left out by the kit.
func figuresOf(r *record.Run, groups []markGroup) []*page.Figure {
	if len(r.Rows) < 2 {
		return nil
	}
	c := &captions{r}
	figures := []*page.Figure{
		{ID: "history", Title: "Climate through time", Caption: c.history(), Marks: markLines(groups),
			Panels: []page.Panel{
				{Rail: true},
				{Name: "Surface temperature", Unit: "K", Height: 170, Limits: []page.Limit{{Value: 273.15, Words: "273 K, water freezes"}}, Curves: []page.Curve{{Column: "temperature", Role: "ink"}}},
				{Name: "CO₂ partial pressure", Unit: "bar", Log: true, Height: 170, Limits: []page.Limit{{Value: 150e-6, Words: "150 ppm, C3 plants"}, {Value: 10e-6, Words: "10 ppm, C4 plants"}}, Curves: []page.Curve{{Column: "pco2", Role: "ink"}}},
				{Name: "Sunlight", Unit: "W/m2", Height: 90, Curves: []page.Curve{{Column: "sunlight", Role: "ink"}}},
			}},
		{ID: "margins", Title: "Distance to failure", Caption: c.margins(),
			Panels: []page.Panel{
				{Name: "Outgassing over what the warm state needs", Height: 130, Log: logWorthy(r, "cold_margin"), Limits: []page.Limit{{Value: 1, Words: "1: the warm state is lost"}}, Curves: []page.Curve{{Column: "cold_margin", Role: "ink"}}},
				{Name: "Temperature above the cold fold", Unit: "K", Height: 130, Limits: []page.Limit{{Value: 0, Words: "the fold"}}, Curves: []page.Curve{{Column: "cold_kelvin", Role: "ink"}}},
				{Name: "Sunlight left to the radiation limit", Unit: "%", Height: 130, Limits: []page.Limit{{Value: 0, Words: "the radiation limit"}}, Curves: []page.Curve{{Column: "hot_margin", Role: "ink"}}},
			}},
		{ID: "fluxes", Title: "Ledger of carbon fluxes", Caption: c.fluxes(),
			Panels: fluxPanels(r)},
		{ID: "reservoirs", Title: "Carbon reservoirs", Caption: c.reservoirs(),
			Panels: []page.Panel{{Name: "Carbon", Unit: "Emol", Height: 230, Log: logWorthy(r, "surface_carbon", "seafloor_carbon", "continental_carbon", "mantle_carbon"), Curves: []page.Curve{
				{Column: "mantle_carbon", Role: "pool.mantle", Wide: true},
				{Column: "continental_carbon", Role: "pool.continental", Dash: "dashed", Wide: true},
				{Column: "seafloor_carbon", Role: "pool.seafloor", Wide: true},
				{Column: "surface_carbon", Role: "pool.surface", Wide: true},
				{Column: "total_carbon", Role: "pool.total", Dash: "dotted"},
			}}}},
		{ID: "interior", Title: "Interior", Caption: c.interior(),
			Panels: []page.Panel{
				{Name: "Temperature", Unit: "K", Height: 130, Curves: used(r, page.Curve{Column: "mantle_temperature", Role: "ink"}, page.Curve{Column: "core_temperature", Role: "ink", Dash: "dashed"})},
				{Name: "Heat", Unit: "TW", Height: 130, Curves: used(r, page.Curve{Column: "heat_flow", Role: "ink"}, page.Curve{Column: "radiogenic", Role: "ink", Dash: "dashed"}, page.Curve{Column: "core_heat", Role: "ink", Dash: "dotted"})},
			}},
		{ID: "ocean", Title: "Ocean", Caption: c.ocean(),
			Panels: []page.Panel{
				{Name: "pH", Height: 120, Curves: []page.Curve{{Column: "ph", Role: "ink"}}},
				{Name: "Concentration", Unit: "mmol/kg", Height: 120, Log: logWorthy(r, "dic", "alkalinity"), Curves: []page.Curve{{Column: "dic", Role: "ink"}, {Column: "alkalinity", Role: "ink", Dash: "dashed"}}},
			}},
		{ID: "water", Title: "Water on its way out", Caption: c.water(),
			Panels: []page.Panel{
				{Name: "Water in the stratosphere, mixing ratio", Height: 120, Log: logWorthy(r, "moisture"), Curves: used(r, page.Curve{Column: "moisture", Role: "ink"})},
				{Name: "Inventory", Unit: "kg", Height: 90, Curves: changing(r, page.Curve{Column: "water", Role: "ink"})},
			}},
		{ID: "zone", Title: "The planet’s flux between the zone limits", Caption: c.zone(),
			Panels: []page.Panel{{Name: "Flux over the Earth’s today", Height: 230, Curves: []page.Curve{
				{Column: "zone_early_mars", Upper: "zone_recent_venus", Name: "optimistic zone", Role: "zone.outer", Kind: page.Band},
				{Column: "zone_outer", Upper: "zone_inner", Name: "conservative zone", Role: "zone.inner", Kind: page.Band},
				{Column: "flux", Name: "the planet", Role: "ink", Wide: true},
			}}}},
	}
	for _, f := range figures {
		for i := range f.Caption {
			f.Caption[i] = typeset(f.Caption[i])
		}
		for _, w := range r.Warnings {
			if concerns(w.About, f.ID) {
				f.Doubts = append(f.Doubts, clean(w.About)+": "+typeset(sentenceEnd(w.Words)))
			}
		}
	}
	return figures
}

// concerned says beside which figure a doubt about a part of the model stands,
// by the first word of what it is about.
var concerned = map[string]string{
	"star": "history", "climate": "history", "radiation": "history", "albedo": "history", "atmosphere": "history", "time": "history", "condensation": "history",
	"weathering": "fluxes", "land": "fluxes", "seafloor": "fluxes", "outgassing": "fluxes", "pulse": "fluxes",
	"carbon": "reservoirs", "interior": "interior", "mantle": "interior", "planet": "interior", "ocean": "ocean", "water": "water", "zone": "zone", "orbit": "zone",
}

func concerns(about, figure string) bool {
	word := strings.FieldsFunc(strings.ToLower(about), func(r rune) bool { return r < 'a' || r > 'z' })
	return len(word) > 0 && concerned[word[0]] == figure
}

func sentenceEnd(s string) string {
	s = clean(s)
	if s != "" && !strings.ContainsAny(s[len(s)-1:], ".!?…") {
		s += "."
	}
	return s
}

// fluxPanels is the ledger: sources stacked above zero against sinks below it.
// Where the sinks surge far beyond the sources, as they do after a thaw, one
// linear axis would show the surges alone; then the sources have a panel of
// their own and the sinks are set against their sum on a logarithmic axis.
func fluxPanels(r *record.Run) []page.Panel {
	sources := used(r,
		page.Curve{Column: "metamorphic", Role: "flux.metamorphic", Kind: page.Stack},
		page.Curve{Column: "arc", Role: "flux.arc", Kind: page.Stack},
		page.Curve{Column: "ridge", Role: "flux.ridge", Kind: page.Stack},
		page.Curve{Column: "pulse", Role: "flux.pulse", Kind: page.Stack})
	sinks := used(r,
		page.Curve{Column: "land_weathering", Role: "flux.land", Kind: page.Sink},
		page.Curve{Column: "seafloor_weathering", Role: "flux.seafloor", Kind: page.Sink})
	balance := page.Panel{Name: "Imbalance", Unit: "Tmol/yr", Trim: true, Height: 90, Limits: []page.Limit{{Value: 0, Words: "balance"}}, Curves: []page.Curve{{Column: "imbalance", Role: "ink"}}}
	if surging(r) {
		for i := range sinks {
			sinks[i].Kind, sinks[i].Wide = page.Line, true
		}
		return []page.Panel{
			{Name: "Sources", Unit: "Tmol/yr", Height: 120, Trim: true, Curves: sources},
			{Name: "Sinks against all sources", Unit: "Tmol/yr", Height: 190, Log: true, Decades: 5, Curves: append([]page.Curve{{Column: "outgassing", Name: "All sources", Role: "ink", Dash: "dashed"}}, sinks...)},
			balance,
		}
	}
	return []page.Panel{
		{Name: "Sources up, sinks down", Unit: "Tmol/yr", Mirror: true, Trim: true, Height: 240, Limits: []page.Limit{{Value: 0}}, Curves: append(sources, sinks...)},
		balance,
	}
}

// surging reports whether weathering exceeds the largest outgassing manyfold,
// and does so at more than one moment.
func surging(r *record.Run) bool {
	out, n := extremes(r, "outgassing"), 0
	for _, name := range []string{"land_weathering", "seafloor_weathering"} {
		c, above := record.ColumnNamed(name), false
		for i := range r.Rows {
			is := c.Value(&r.Rows[i]) > 4*out.most
			if is && !above {
				n++
			}
			above = is
		}
	}
	return out.ok && out.most > 0 && n > 1
}

// used leaves out what is zero throughout: a part of the model that is off.
func used(r *record.Run, curves ...page.Curve) []page.Curve {
	var out []page.Curve
	for _, c := range curves {
		if e := extremes(r, c.Column); e.ok && (e.least != 0 || e.most != 0) {
			out = append(out, c)
		}
	}
	return out
}

// changing leaves out what is the same throughout.
func changing(r *record.Run, c page.Curve) []page.Curve {
	if e := extremes(r, c.Column); e.ok && e.least != e.most {
		return []page.Curve{c}
	}
	return nil
}

func logWorthy(r *record.Run, names ...string) bool {
	var cols []*page.Column
	for _, name := range names {
		if c := record.ColumnNamed(name); c != nil {
			col := &page.Column{}
			for i := range r.Rows {
				col.Values = append(col.Values, c.Value(&r.Rows[i]))
			}
			cols = append(cols, col)
		}
	}
	return page.LogWorthy(cols...)
}

// markLines lists the marks below the history, numbered as in the rail.
func markLines(groups []markGroup) []page.MarkLine {
	var out []page.MarkLine
	for i, g := range groups {
		date := num.Date(g.marks[0].TimeGyr, g.marks[0].ErrorGyr)
		if n := len(g.marks); n > 1 {
			date += fmt.Sprintf(", first of %d; last at %s", n, num.Age(g.marks[n-1].TimeGyr))
		}
		out = append(out, page.MarkLine{Number: fmt.Sprint(i + 1), Name: clip(clean(g.name), 80), Date: num.Pretty(date)})
	}
	return out
}

// captions words what is seen in the figures of one run. They pick values out
// of the record and compute none.
type captions struct{ r *record.Run }

// An extreme is the least and the largest value of a column with their ages.
type extreme struct {
	first, last, least, most     float64
	tFirst, tLast, tLeast, tMost float64
	ok                           bool
	unit                         string
}

func extremes(r *record.Run, name string) extreme {
	c := record.ColumnNamed(name)
	var e extreme
	if c == nil {
		return e
	}
	e.unit = num.Unit(c.Unit)
	for i := range r.Rows {
		v, t := c.Value(&r.Rows[i]), r.Rows[i].Age/1e9
		if !known(v) {
			continue
		}
		if !e.ok {
			e.first, e.tFirst, e.least, e.tLeast, e.most, e.tMost, e.ok = v, t, v, t, v, t, true
		}
		e.last, e.tLast = v, t
		if v < e.least {
			e.least, e.tLeast = v, t
		}
		if v > e.most {
			e.most, e.tMost = v, t
		}
	}
	return e
}

// valueAt is the value of a column at the row nearest to an age, in words.
func (c *captions) valueAt(name string, gyr float64) (float64, bool) {
	col := record.ColumnNamed(name)
	if col == nil {
		return 0, false
	}
	best, dist := 0.0, math.Inf(1)
	for i := range c.r.Rows {
		if d := math.Abs(c.r.Rows[i].Age/1e9 - gyr); d < dist {
			best, dist = col.Value(&c.r.Rows[i]), d
		}
	}
	return best, known(best) && dist < 0.05
}

func pretty(v float64, n int, unit string) string {
	return num.With(num.Pretty(num.Short(v, n)), unit)
}

func kelvin(v float64) string { return num.With(num.Pretty(num.Fix(v, 1)), "K") }

func age(gyr float64) string { return num.Pretty(num.Age(gyr)) }

func pressure(bar float64) string { return num.Pretty(num.Pressure(bar)) }

// fromTo words a change from the first to the last value.
func fromTo(a, b string, up bool) string { return change(a, b, up, "rises", "falls") }

func change(a, b string, up bool, rises, falls string) string {
	switch {
	case a == b:
		return "stays at " + a
	case up:
		return rises + " from " + a + " to " + b
	}
	return falls + " from " + a + " to " + b
}

func (c *captions) history() []string {
	r := c.r
	var out []string
	if e := extremes(r, "temperature"); e.ok {
		s := "The surface is at " + kelvin(e.first) + " at " + age(e.tFirst) + " and at " + kelvin(e.last) + " at " + age(e.tLast) + "; it is coldest with " + kelvin(e.least) + " at " + age(e.tLeast) + " and warmest with " + kelvin(e.most) + " at " + age(e.tMost) + "."
		out = append(out, s)
	}
	if e := extremes(r, "pco2"); e.ok {
		s := "CO₂ lies between " + pressure(e.least) + " (" + age(e.tLeast) + ") and " + pressure(e.most) + " (" + age(e.tMost) + ")"
		var cross []string
		for _, g := range markGroups(r.Marks) {
			if g.name == record.MarkC3 || g.name == record.MarkC4 {
				cross = append(cross, strings.TrimPrefix(g.name, "below ")+" at "+age(g.marks[0].TimeGyr))
			}
		}
		if len(cross) > 0 {
			s += " and falls through " + strings.Join(cross, " and ")
		}
		out = append(out, s+".")
	}
	if e := extremes(r, "sunlight"); e.ok {
		out = append(out, "Sunlight "+fromTo(pretty(e.first, 4, e.unit), pretty(e.last, 4, e.unit), e.last > e.first)+".")
	}
	if r.Freezes > 0 {
		out = append(out, "The planet freezes "+times(r.Freezes)+" and is frozen for "+num.Percent(r.FrozenShare)+" of the history.")
	}
	for _, p := range r.Recoveries {
		s := "A pulse (" + clip(clean(p.Pulse), 60) + ") from " + age(p.StartGyr) + " to " + age(p.EndGyr) + " changes the surface by " + pretty(p.PeakKelvin, 3, "K") + " at most"
		if known(p.RecoveryKyr) {
			s += "; all but 1/e of it is gone " + num.Pretty(num.Span(p.RecoveryKyr*1e-6)) + " after the peak"
		} else {
			s += ", and the planet does not recover from it"
		}
		out = append(out, s+".")
	}
	if !lasting(r.Outcome.Kind) {
		out = append(out, "Shaded spans are not temperate.")
	} else {
		out = append(out, "Shaded spans are not temperate; the dotted line is the outcome, "+clip(clean(string(r.Outcome.Kind)), 60)+" at "+age(r.Outcome.TimeGyr)+".")
	}
	return out
}

func times(n int) string {
	switch n {
	case 1:
		return "once"
	case 2:
		return "twice"
	}
	return fmt.Sprintf("%d times", n)
}

func (c *captions) margins() []string {
	var out []string
	for _, m := range c.r.Margins {
		out = append(out, sentence(m.Words))
	}
	if len(out) == 0 {
		out = append(out, "The record names no closest approach for this run.")
	}
	for _, q := range []struct{ column, boundary string }{{"cold_margin", "cold fold"}, {"hot_margin", "radiation limit"}} {
		rows, last := c.r.Rows, -1
		col := record.ColumnNamed(q.column)
		for i := range rows {
			if known(col.Value(&rows[i])) {
				last = i
			}
		}
		switch {
		case last < 0 && len(rows) > 0:
			out = append(out, "There is no "+q.boundary+" at any time.")
		case last >= 0 && last < len(rows)-1:
			out = append(out, "After "+age(rows[last].Age/1e9)+" there is no "+q.boundary+" to be close to, or it has been passed.")
		}
	}
	return out
}

func (c *captions) fluxes() []string {
	r := c.r
	var out []string
	t := r.ReferenceAgeGyr
	if r.Reference.Reached {
		out = append(out, "At the reference age, "+age(t)+", "+pretty(r.Reference.Outgassing, 3, "Tmol/yr")+" come out of the solid planet; land weathering takes "+pretty(r.Reference.Land, 3, "Tmol/yr")+" and the seafloor "+pretty(r.Reference.Seafloor, 3, "Tmol/yr")+".")
		var parts []string
		for _, s := range []struct{ col, name string }{{"ridge", "ridges"}, {"arc", "arcs"}, {"metamorphic", "metamorphism"}} {
			if v, ok := c.valueAt(s.col, t); ok && v != 0 {
				parts = append(parts, s.name+" "+pretty(v, 3, "Tmol/yr"))
			}
		}
		if len(parts) > 1 {
			out = append(out, "Its sources then: "+strings.Join(parts, ", ")+".")
		}
	}
	if e := extremes(r, "outgassing"); e.ok {
		out = append(out, "Over the history outgassing lies between "+pretty(e.least, 3, e.unit)+" ("+age(e.tLeast)+") and "+pretty(e.most, 3, e.unit)+" ("+age(e.tMost)+").")
	}
	if e := extremes(r, "imbalance"); e.ok {
		v, at := e.most, e.tMost
		if -e.least > v {
			v, at = e.least, e.tLeast
		}
		out = append(out, "The largest imbalance is "+pretty(v, 3, e.unit)+" at "+age(at)+".")
	}
	if e := extremes(r, "supply_use"); e.ok && e.most > 0 {
		out = append(out, "Land weathering comes closest to its supply limit at "+age(e.tMost)+", using "+num.Percent(e.most)+" of it.")
	}
	return out
}

func (c *captions) reservoirs() []string {
	r := c.r
	var out []string
	for _, s := range []struct{ col, name string }{{"surface_carbon", "Atmosphere and ocean hold"}, {"seafloor_carbon", "the seafloor"}, {"continental_carbon", "the continents"}, {"mantle_carbon", "the mantle"}} {
		if e := extremes(r, s.col); e.ok {
			out = append(out, s.name+" "+pretty(e.first, 3, "")+" to "+pretty(e.last, 3, e.unit))
		}
	}
	words := []string{}
	if len(out) > 0 {
		words = append(words, upper(strings.Join(out, ", "))+" (first and last value).")
	}
	if known(r.CarbonMol) && r.CarbonMol != 0 {
		words = append(words, "Together they hold "+pretty(r.CarbonMol/1e18, 4, "Emol")+", which the solver keeps to a relative "+pretty(r.CarbonDrift, 2, "")+".")
	}
	return words
}

func (c *captions) interior() []string {
	r := c.r
	var out []string
	if e := extremes(r, "mantle_temperature"); e.ok {
		out = append(out, "The mantle "+change(pretty(e.first, 4, e.unit), pretty(e.last, 4, e.unit), e.last > e.first, "warms", "cools")+".")
	}
	if e := extremes(r, "heat_flow"); e.ok {
		out = append(out, "Its heat flow "+fromTo(pretty(e.first, 3, e.unit), pretty(e.last, 3, e.unit), e.last > e.first)+".")
	}
	if e := extremes(r, "crust_production"); e.ok {
		out = append(out, "Crust production, relative to the reference, "+fromTo(pretty(e.first, 3, ""), pretty(e.last, 3, ""), e.last > e.first)+".")
	}
	return out
}

func (c *captions) ocean() []string {
	r := c.r
	var out []string
	if e := extremes(r, "ph"); e.ok {
		s := "The ocean is most acid with pH " + num.Pretty(num.Fix(e.least, 2)) + " at " + age(e.tLeast) + " and least with pH " + num.Pretty(num.Fix(e.most, 2)) + " at " + age(e.tMost)
		if r.Reference.Reached && known(r.Reference.PH) {
			s += "; at the reference age it has pH " + num.Pretty(num.Fix(r.Reference.PH, 2))
		}
		out = append(out, s+".")
	}
	return out
}

func (c *captions) water() []string {
	r := c.r
	var out []string
	if e := extremes(r, "moisture"); e.ok {
		out = append(out, "The stratosphere holds most water, a mixing ratio of "+pretty(e.most, 3, "")+", at "+age(e.tMost)+", and least, "+pretty(e.least, 3, "")+", at "+age(e.tLeast)+".")
	}
	if e := extremes(r, "water"); e.ok && e.least != e.most {
		out = append(out, "The inventory "+fromTo(pretty(e.first, 4, e.unit), pretty(e.last, 4, e.unit), e.last > e.first)+".")
	}
	return out
}

func (c *captions) zone() []string {
	r := c.r
	var out []string
	if e := extremes(r, "flux"); e.ok {
		out = append(out, "The planet’s flux goes from "+pretty(e.first, 3, "")+" to "+pretty(e.last, 3, "")+" times the Earth’s today.")
	}
	for _, s := range r.Stays {
		name := clip(clean(s.Name), 40)
		if !s.Inside {
			out = append(out, "It is never inside the "+name+" zone.")
			continue
		}
		out = append(out, "It is inside the "+name+" zone from "+age(s.EnterGyr)+" to "+age(s.LeaveGyr)+".")
	}
	law := ""
	if z := clip(clean(r.ZoneLaw), 60); z != "" {
		law = " (" + z + ")"
	}
	return append(out, "The limits"+law+" are shown beside the model and never decide its fate.")
}
