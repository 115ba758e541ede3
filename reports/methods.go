package reports

import (
	_ "embed"
	"fmt"
	"regexp"
	"slices"
	"strconv"
	"strings"

	"cycle/carbon/record"
	"cycle/reports/internal/num"
)

//go:embed reuse.tmpl
var reuseTemplate string

// A reuse is what a reader takes from a report into a paper or a run of his own.
type reuse struct {
	Methods    []string // paragraphs
	BibTeX     string
	References []record.Work
	Scenarios  []savedText // resolved, of a comparison
}

// A savedText is a text that the page holds and saves as a file.
type savedText struct{ ID, Name, File, Text string }

func reuseOf(p *prose, works []record.Work) reuse {
	return reuse{Methods: p.text(), BibTeX: bibTeX(works), References: references(works)}
}

// A prose is a text for the methods section of a paper. It cites works of the
// reference list by author and year and remembers which.
type prose struct {
	labels map[string]string // key of a work -> as cited
	paras  []string
	b      strings.Builder
	solved bool // carbon or outgassing is solved for
}

func newProse(works []record.Work) *prose {
	return &prose{labels: labelsOf(works)}
}

// labelsOf says how each work is cited. Works that share author and year get a
// letter behind it.
func labelsOf(works []record.Work) map[string]string {
	n := map[string]int{}
	for _, w := range works {
		n[w.Short]++
	}
	at, out := map[string]int{}, map[string]string{}
	for _, w := range works {
		label := clip(clean(w.Short), 80)
		if label == "" {
			continue
		}
		if n[w.Short] > 1 && at[w.Short] < 26 {
			label += string(rune('a' + at[w.Short]))
			at[w.Short]++
		}
		out[w.Key] = label
	}
	return out
}

// reference is a line of the reference list, with the letter of its label behind
// the year.
func references(works []record.Work) []record.Work {
	labels := labelsOf(works)
	var out []record.Work
	for _, w := range works {
		if l := labels[w.Key]; l != "" && l != clean(w.Short) {
			if year := regexp.MustCompile(`\(\d{4}\)`).FindString(w.Text); year != "" {
				w.Text = strings.Replace(w.Text, year, strings.TrimSuffix(year, ")")+l[len(l)-1:]+")", 1)
			}
		}
		w.Text = clean(w.Text)
		out = append(out, w)
	}
	return out
}

// bibTeX joins the entries of works.
func bibTeX(works []record.Work) string {
	var parts []string
	for _, w := range works {
		parts = append(parts, strings.TrimSpace(w.BibTeX)+"\n")
	}
	return strings.Join(parts, "\n")
}

func (p *prose) say(format string, args ...any) {
	if p.b.Len() > 0 {
		p.b.WriteByte(' ')
	}
	fmt.Fprintf(&p.b, format, args...)
}

// para ends a paragraph.
func (p *prose) para() {
	if s := typeset(p.b.String()); s != "" {
		p.paras = append(p.paras, s)
	}
	p.b.Reset()
}

func (p *prose) text() []string {
	p.para()
	return p.paras
}

// refs cites works: "Walker et al. 1981; Foley 2015". A work the list does not
// hold is left out.
func (p *prose) refs(keys ...string) string {
	var out []string
	for _, k := range keys {
		if l := p.labels[k]; l != "" && !slices.Contains(out, l) {
			out = append(out, l)
		}
	}
	return strings.Join(out, "; ")
}

// in cites works in brackets behind a word.
func (p *prose) in(keys ...string) string {
	if s := p.refs(keys...); s != "" {
		return " (" + s + ")"
	}
	return ""
}

// subjects names what a law of a part gives.
var subjects = map[string]string{
	"star": "The luminosity of the star", "radiation": "Outgoing long-wave radiation", "albedo": "The planetary albedo", "weathering.land": "Silicate weathering on land",
	"weathering.seafloor": "Weathering of the sea floor", "sources": "Outgassing", "interior": "The thermal history of the interior", "ocean": "The division of surface carbon between air and ocean",
	"zone": "The limits of the habitable zone, which are shown and decide nothing, are given by",
}

// groups names the sections without a law, and whether all their values are
// told, or only those that rest on a work or were chosen for this scenario.
var groups = map[string]struct {
	name string
	all  bool
}{
	"orbit": {"The orbit has", true}, "planet": {"The planet has", true}, "reference": {"At the reference state, where every law of weathering is 1 and the energy balance closes, stand", true},
	"carbon": {"Carbon is set by", true}, "atmosphere": {"The atmosphere has", true}, "climate": {"The climate has", false}, "weathering": {"Both sinks share", false},
	"land": {"The land fraction steps in time with", true}, "biology": {"The strength of life in weathering steps in time with", true}, "water": {"The loss of water has", false},
}

// laws words the laws with their parameters, then the values that belong to no
// law. skip says which keys are told elsewhere.
func (p *prose) laws(laws []record.Law, inputs []record.Input, skip func(key string) bool) {
	values := map[string][]record.Input{}
	var sections []string
	for _, in := range inputs {
		s := sectionOf(clean(in.Key))
		if len(values[s]) == 0 {
			sections = append(sections, s)
		}
		values[s] = append(values[s], in)
	}
	told := map[string]bool{}
	for i := 0; i < len(laws); {
		j := i
		for j < len(laws) && laws[j].Part == laws[i].Part {
			j++
		}
		part := clean(laws[i].Part)
		told[part] = true
		var names []string
		for _, l := range laws[i:j] {
			names = append(names, p.law(&l))
		}
		subject := subjects[part]
		switch {
		case subject == "":
			subject = "For " + clip(part, 60) + " we used"
		case part != "zone":
			subject += " follows"
		}
		if j > i+1 {
			p.say("%s one of %d laws, %s.", subject, j-i, strings.Join(names, ", or "))
		} else {
			with := p.values(values[part], true, func(k string) bool { return strings.HasSuffix(k, ".law") || skip(k) })
			if with != "" {
				with = ", with " + with
			}
			p.say("%s %s%s.", subject, names[0], with)
		}
		i = j
	}
	p.para()
	rest := false
	for _, s := range sections {
		switch {
		case told[s] || s == "solver":
			continue
		case s == "time":
			p.span(values[s], skip)
			continue
		}
		g, ok := groups[s]
		if !ok {
			g.name, g.all = upper(clip(s, 60))+" has", true
		}
		if v := p.values(values[s], !g.all, skip); v != "" {
			p.say("%s %s.", g.name, v)
		}
		rest = true
	}
	if rest {
		p.say("Values that are not named are defaults of the program without a published source; they stand in the resolved scenario.")
	}
	p.para()
}

// span words the section on time.
func (p *prose) span(inputs []record.Input, skip func(string) bool) {
	at := map[string]string{}
	for _, in := range inputs {
		if !skip(in.Key) {
			at[in.Key] = shownValue(clip(clean(in.Value), 40))
		}
	}
	start, end := at["time.start"], at["time.end"]
	if start != "" && end != "" {
		p.say("Histories run from %s to %s at the latest.", start, end)
	}
	if l := at["time.lasting"]; l != "" {
		p.say("A snowball that lasts longer than %s is a failure.", l)
	}
}

// law names a law: "Walker et al. 1981 (law walker1981: power of pCO₂ …)".
func (p *prose) law(l *record.Law) string {
	name, doc := clip(clean(l.Name), 60), strings.TrimSuffix(clip(clean(l.Doc), 300), ".")
	refs := p.refs(l.Works...)
	if refs == "" && len(l.Works) == 0 {
		if s := clip(clean(l.Source), 200); s != "" {
			return "the law " + name + " (" + doc + "; " + s + ")"
		}
	}
	if refs == "" {
		return "the law " + name + " (" + doc + ")"
	}
	return listed(strings.Split(refs, "; ")) + " (law " + name + ": " + doc + ")"
}

// values lists inputs with their units; neighbours that rest on the same works
// share one citation.
func (p *prose) values(inputs []record.Input, sparing bool, skip func(string) bool) string {
	type item struct{ words, refs string }
	var items []item
	for _, in := range inputs {
		key := clean(in.Key)
		set := in.Origin != "default"
		switch key {
		case "carbon.solve": // said with what was solved for
			continue
		case "carbon.content":
			if p.solved {
				continue
			}
		}
		if skip(key) || sparing && !set && len(in.Works) == 0 {
			continue
		}
		w := parameter(key) + " " + shownValue(clip(clean(in.Value), 80))
		refs := p.refs(in.Works...)
		if set && refs != "" && !strings.HasPrefix(in.Source, "set by") { // the source is that of the value
			refs, set = "chosen here, "+refs, false
		}
		switch {
		case set && refs != "" && in.Outside:
			refs = "chosen here, outside the range published; default after " + refs
		case set && refs != "":
			refs = "chosen here; default after " + refs
		case in.Outside:
			refs = strings.TrimPrefix(refs+"; outside the range published", "; ")
		}
		if n := len(items); n > 0 && refs != "" && items[n-1].refs == refs {
			items[n-1].words += ", " + w
			continue
		}
		items = append(items, item{w, refs})
	}
	var out []string
	for _, x := range items {
		if x.refs != "" {
			x.words += " (" + x.refs + ")"
		}
		out = append(out, x.words)
	}
	return listed(out)
}

// parameter is the name of a key in a sentence.
func parameter(key string) string {
	name := key[strings.LastIndexByte(key, '.')+1:]
	return strings.NewReplacer("_", " ", "co2", "CO2", "efold", "e-folding").Replace(name)
}

// listed joins words with commas and "and".
func listed(s []string) string {
	if len(s) < 2 {
		return strings.Join(s, "")
	}
	return strings.Join(s[:len(s)-1], ", ") + " and " + s[len(s)-1]
}

func sectionOf(key string) string { return key[:max(strings.LastIndexByte(key, '.'), 0)] }

// integrated says how histories were computed, from the solver's record.
func (p *prose) integrated(s *record.Solver, drift float64) {
	p.say("The stiff equations were integrated with %s%s at a relative tolerance of %s", clip(clean(s.Method), 60), p.in(s.Works...), pretty(s.RelTol, 3, ""))
	if s.Guard {
		p.say("under a stability guard, which locates the loss of a climate branch instead of following the branch that is lost")
	} else {
		p.say("without a stability guard")
	}
	p.b.WriteString(";")
	p.say("the error of a date is its difference to a second integration at %s.", pretty(s.TightenedTol, 3, ""))
	if known(drift) {
		p.say("Total carbon is conserved to a relative %s.", pretty(drift, 2, ""))
	}
}

// reserved says what was used beyond its published range, and every other doubt.
func (p *prose) reserved(ws []record.Warning) {
	if len(ws) == 0 {
		p.say("No law and no value was used outside a published range.")
		return
	}
	var out []string
	for i, w := range ws {
		if i == 12 {
			out = append(out, fmt.Sprintf("and %d more", len(ws)-i))
			break
		}
		s := strings.TrimSuffix(clip(clean(w.Words), 240), ".")
		if a := clip(clean(w.About), 60); a != "" {
			s = a + ", " + s
		}
		out = append(out, s)
	}
	p.say("Extrapolations and other reservations: %s.", strings.Join(out, "; "))
}

const conditional = "All results are those of a model and conditional on these assumptions."

// made names program, version and scenario.
func made(version, hash string) string {
	return "with cycle " + clip(clean(version), 40) + " (scenario " + clip(clean(hash), 64) + "), a model of the global mean surface temperature and of carbon in air and ocean, sea floor, continents and mantle"
}

func never(string) bool { return false }

// methodsOf is the text for one history.
func methodsOf(r *record.Run) *prose {
	p := newProse(r.Works)
	span := ""
	if from, to, ok := extent(r); ok {
		span = " from " + age(from) + " to " + age(to) + " after the formation of its star"
	}
	p.say("We computed the history of surface climate and carbon cycle of “%s”%s %s.", clip(titleOf(r), 120), span, made(r.Version, r.Hash))
	p.basis(r, never)
	p.integrated(&r.Solver, r.CarbonDrift)
	p.reserved(r.Warnings)
	p.say(conditional)
	return p
}

// basis words start, laws and reference state of a history.
func (p *prose) basis(r *record.Run, skip func(string) bool) {
	if s := clean(r.StartWords); s != "" {
		p.say("The history begins in %s.", strings.TrimSuffix(clip(s, 200), "."))
	}
	if s := clean(r.Reference.Solved); s != "" {
		p.solved = strings.Contains(s, "carbon")
		p.say("One number was solved so that the history passes through the CO2 of the reference state: %s.", clip(roundIn(s), 200))
	}
	p.para()
	p.laws(r.Laws, r.Inputs, skip)
	if r.Reference.Reached && r.ReferenceAgeGyr != 0 {
		p.say("At the reference age of %s the surface is at %s under %s of CO2", age(r.ReferenceAgeGyr), kelvin(r.Reference.TemperatureK), pressure(r.Reference.PCO2Bar))
		if known(r.Feedback.Sensitivity) {
			p.b.WriteString(";")
			p.say("a doubling of CO2 at the reference state warms it by %s", pretty(r.Feedback.Sensitivity, 3, "K"))
		}
		p.b.WriteString(".")
	}
}

// methodsOfWhy is the text for an explanation.
func methodsOfWhy(e *record.Explanation) *prose {
	p := newProse(e.Works)
	p.say("We asked what brings about the fate of “%s” %s.", clip(titleFor(e.Title, e.Name), 120), made(e.Version, e.Hash))
	r := e.Run
	if r == nil {
		r = &record.Run{}
	}
	p.basis(r, never)
	var names []string
	for _, d := range e.Drivers {
		names = append(names, clip(clean(d.Name), 40))
	}
	if len(names) > 0 {
		p.say("Histories were repeated with every combination of the slow drivers (%s) held at their start; shares of the date are Shapley values%s.", strings.Join(names, ", "), p.in("shapley1953"))
	}
	p.say("The smallest change of each parameter that turns the outcome was found on whole histories by bracketing with a minmax-optimal method%s; elasticities are differences between histories; other laws were tried one at a time and in pairs. In all, %s.", p.in("oliveira2021"), num.Count(e.Histories, "history was computed", "histories were computed"))
	p.integrated(&r.Solver, r.CarbonDrift)
	p.reserved(e.Warnings)
	p.say(conditional)
	return p
}

// methodsOfMap is the text for a map.
func methodsOfMap(m *record.Map) *prose {
	p := newProse(m.Works)
	axis := func(a *record.Axis) string {
		s := clip(clean(a.Key), 60) + " from " + pretty(a.Lo, 6, "") + " to " + pretty(a.Hi, 6, num.Unit(a.Unit))
		if a.Log {
			s += " (logarithmic)"
		}
		return s
	}
	p.say("We mapped the fate of “%s” over %s and %s %s.", clip(titleFor(m.Title, m.Name), 120), axis(&m.X), axis(&m.Y), made(m.Version, m.Hash))
	if s := clean(m.Meant); s != "" {
		p.say("%s", strings.TrimSuffix(upper(clip(s, 300)), ".")+".")
	}
	p.say("%s computed; cells were halved where outcomes differ, down to 1/%d of each axis.", num.Count(len(m.Points), "history was", "histories were"), m.N)
	if len(m.Lines) > 0 {
		p.say("Boundaries come from the steady states of climate and carbon under fixed sunlight and outgassing.")
	}
	r := m.Run
	if r == nil {
		r = &record.Run{}
	}
	p.basis(r, func(k string) bool { return k == m.X.Key || k == m.Y.Key })
	p.integrated(&r.Solver, r.CarbonDrift)
	p.reserved(m.Warnings)
	p.say(conditional)
	return p
}

// methodsOfComparison is the text for scenarios side by side: what they share,
// then what each has of its own.
func methodsOfComparison(c *record.Comparison) *prose {
	p := newProse(c.Works)
	var names []string
	for i, n := range c.Names {
		name := "“" + clip(clean(n), 80) + "”"
		if i < len(c.Results) {
			if h := clip(clean(c.Results[i].Hash), 64); h != "" {
				name += " (scenario " + h + ")"
			}
		}
		names = append(names, name)
	}
	p.say("We compared %s with cycle %s, a model of the global mean surface temperature and of carbon in air and ocean, sea floor, continents and mantle.", listed(names), clip(clean(c.Version), 40))
	p.para()
	if len(c.Runs) == 0 {
		return p
	}
	first := c.Runs[0]
	// A law all runs have is told once, so is a value.
	var shared []record.Law
	own := make([][]record.Law, len(c.Runs))
	has := func(r *record.Run, l *record.Law) bool {
		return slices.ContainsFunc(r.Laws, func(o record.Law) bool { return o.Part == l.Part && o.Name == l.Name })
	}
	for i, r := range c.Runs {
		for j := range r.Laws {
			l := &r.Laws[j]
			all := true
			for _, o := range c.Runs {
				all = all && has(o, l)
			}
			switch {
			case !all:
				own[i] = append(own[i], *l)
			case i == 0:
				shared = append(shared, *l)
			}
		}
	}
	differs := map[string]bool{}
	for _, d := range c.Differ {
		differs[d.Key] = true
	}
	mine := map[string]bool{} // sections whose law differs
	for _, ls := range own {
		for _, l := range ls {
			mine[l.Part] = true
		}
	}
	p.laws(shared, first.Inputs, func(k string) bool { return differs[k] || mine[sectionOf(k)] })
	for i, r := range c.Runs {
		var parts []string
		for j := range own[i] {
			l := &own[i][j]
			with := p.values(inputsOf(r, l.Part), true, func(k string) bool { return strings.HasSuffix(k, ".law") })
			if with != "" {
				with = ", with " + with
			}
			s := strings.TrimSuffix(subjects[l.Part], ", are given by")
			if s == "" {
				s = clip(clean(l.Part), 60)
			}
			parts = append(parts, lower(s)+" follows "+p.law(l)+with)
		}
		v := p.values(r.Inputs, false, func(k string) bool {
			return !differs[k] || mine[sectionOf(k)] || strings.HasSuffix(k, ".law")
		})
		if v != "" {
			parts = append(parts, v)
		}
		if len(parts) > 0 && i < len(names) {
			p.say("Of its own, “%s” has: %s.", clip(clean(c.Names[i]), 80), strings.Join(parts, "; "))
		}
	}
	p.para()
	p.integrated(&first.Solver, nan())
	var ws []record.Warning
	for i, r := range c.Runs {
		for _, w := range r.Warnings {
			w.About = clip(clean(c.Names[min(i, len(c.Names)-1)]), 40) + ", " + clean(w.About)
			ws = append(ws, w)
		}
	}
	p.reserved(ws)
	p.say(conditional)
	return p
}

func inputsOf(r *record.Run, section string) []record.Input {
	var out []record.Input
	for _, in := range r.Inputs {
		if sectionOf(in.Key) == section {
			out = append(out, in)
		}
	}
	return out
}

func lower(s string) string {
	if s == "" {
		return s
	}
	return strings.ToLower(s[:1]) + s[1:]
}

// methodsOfEnsemble is the text for an ensemble: design, seed, distributions,
// estimators, then laws and values.
func methodsOfEnsemble(e *record.Ensemble) *prose {
	p := newProse(e.Works)
	p.say("We computed %s of “%s” from %s to %s after the formation of its star %s.", num.Count(e.Members, "history", "histories"), clip(titleFor(e.Title, e.Name), 120), age(e.StartGyr), age(e.EndGyr), made(e.Version, e.Hash))
	switch e.Design {
	case "sobol":
		p.say("Members are points of a Sobol sequence%s with nested uniform scrambling%s", p.in("joe2008"), p.in("owen1995"))
	case "latin":
		p.say("Members are drawn by Latin hypercube sampling%s", p.in("mckay1979"))
	case "freeze":
		p.say("Members follow a pick-and-freeze design%s on a Sobol sequence%s with nested uniform scrambling%s", p.in("saltelli2010"), p.in("joe2008"), p.in("owen1995"))
	default:
		p.say("Members are %s", clip(clean(e.DesignWords), 200))
	}
	p.b.WriteString(",")
	p.say("seed %d.", e.Seed)
	drawn := map[string]bool{}
	var priors []string
	for _, u := range e.Uncertain {
		drawn[u.Key] = true
		s := clip(clean(u.Key), 80) + ": " + clip(clean(u.Distribution), 200)
		for _, in := range e.Inputs {
			if in.Key == u.Key && !strings.HasSuffix(u.Key, ".law") {
				if refs := p.refs(in.Works...); refs != "" {
					s += " (default after " + refs + ")"
				}
			}
		}
		priors = append(priors, s)
	}
	if len(priors) > 0 {
		p.say("Drawn independently were %s.", strings.Join(priors, "; "))
	}
	if len(e.Correlated) > 0 {
		var cs []string
		for _, c := range e.Correlated {
			cs = append(cs, clip(clean(c), 120))
		}
		p.say("Rank correlations were imposed%s: %s.", p.in("iman1982"), strings.Join(cs, "; "))
	}
	p.para()
	p.say("Shares of outcomes have Wilson intervals%s, probabilities through time are cumulative incidences of competing failures by the estimator of Aalen and Johansen%s with bands by the delta method%s, dates are quantiles with distribution-free intervals, all at 95 %%; %d members count for them, %d of these undecided.", p.in("wilson1927"), p.in("aalen1978"), p.in("marubini1995"), e.Independent, e.Undecided)
	p.say("What decides a failure is measured on the years lost to it%s", p.in("andersen2013"))
	var how []string
	if s := p.refs("sudret2008"); s != "" {
		how = append(how, "by variance shares from orthogonal polynomials ("+s+")")
	}
	if s := p.refs("jansen1999"); s != "" {
		how = append(how, "by first-order and total indices ("+s+") with resampled intervals"+p.in("efron1987"))
	}
	if len(how) > 0 {
		p.b.WriteString(",")
		p.say("%s", listed(how))
	}
	p.b.WriteString(".")
	p.para()
	mine := map[string]bool{}
	for k := range drawn {
		if s, ok := strings.CutSuffix(k, ".law"); ok {
			mine[s] = true
		}
	}
	p.laws(e.Laws, e.Inputs, func(k string) bool { return drawn[k] || mine[sectionOf(k)] })
	tol := nan()
	for _, in := range e.Inputs {
		if in.Key == "solver.tolerance" {
			if v, err := strconv.ParseFloat(in.Value, 64); err == nil {
				tol = v
			}
		}
	}
	if s := p.in("steinebach2023"); s != "" {
		p.say("The stiff equations were integrated with Rodas5P%s", s)
		if known(tol) {
			p.say("at a relative tolerance of %s", pretty(tol, 3, ""))
		}
		p.b.WriteString(".")
	}
	p.reserved(e.Warnings)
	p.say(conditional)
	return p
}

var (
	longNumber = regexp.MustCompile(`[0-9]+\.[0-9]+(?:e[+-]?[0-9]+)?`)
	paddedExp  = regexp.MustCompile(`([0-9]e)(?:\+|(-))0*([0-9])`)
)

// roundIn rounds decimal numbers of more than seven digits in a text to six: the
// exact ones stand in the scenario, in CSV and in JSON.
func roundIn(s string) string {
	return longNumber.ReplaceAllStringFunc(s, func(m string) string {
		v, err := strconv.ParseFloat(m, 64)
		mant, _, _ := strings.Cut(m, "e")
		if err != nil || len(strings.TrimLeft(strings.Replace(mant, ".", "", 1), "0")) <= 7 {
			return m
		}
		return num.Short(v, 6)
	})
}

// plainly rounds the numbers in a text for the terminal and writes their powers
// of ten without padding.
func plainly(s string) string { return paddedExp.ReplaceAllString(roundIn(s), "$1$2$3") }

// shownValue is the value of an input for people.
func shownValue(s string) string { return num.Unit(plainly(s)) }
