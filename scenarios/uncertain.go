package scenarios

import (
	"crypto/sha256"
	"encoding/hex"
	"fmt"
	"math"
	"slices"
	"strconv"
	"strings"

	"github.com/pelletier/go-toml/v2/unstable"
	"gonum.org/v1/gonum/floats"
	"gonum.org/v1/gonum/mat"

	"cycle/carbon"
	"cycle/carbon/units"
)

// The section [uncertain] gives keys of a scenario a distribution instead of a
// value:
//
//	[uncertain]
//	"weathering.land.efold" = { distribution = "uniform", low = "10 K", high = "40 K" }
//	"weathering.land.beta"  = "published"
//	"weathering.land.law"   = { choices = ["walker1981", "graham2020"], weights = [2, 1] }
//	correlations = [ { between = ["sources.ridge", "sources.arc"], rank = 0.5 } ]
//	ages = ["0.57 Gyr", "2.07 Gyr"]
//
// "published" is the uniform distribution over the range the key's source gives,
// of the law the member has. A distribution other than uniform, log-uniform and
// triangular ends at the key's allowed range, or before it at at_least and
// at_most. A key that --set gives a value is no longer uncertain.

// The distributions.
const (
	Uniform    = "uniform"
	LogUniform = "log-uniform"
	Normal     = "normal"
	LogNormal  = "log-normal"
	Triangular = "triangular"
	Published  = "published"
	Chosen     = "choice"
)

// shapes lists what each distribution takes, the required words first.
var shapes = []struct {
	name     string
	required []string
	bounds   bool
}{
	{Uniform, []string{"low", "high"}, false},
	{LogUniform, []string{"low", "high"}, false},
	{Normal, []string{"mean", "sd"}, true},
	{LogNormal, []string{"median", "sigma"}, true},
	{Triangular, []string{"low", "mode", "high"}, false},
	{Published, nil, false},
}

// uncertainKeys explains the section as Keys lists it. KEY stands for the full
// name of a key of another section.
var uncertainKeys = func() []Key {
	const of = `"KEY".`
	list := []Key{
		{Name: `"KEY"`, Kind: "distribution", Default: "none: the key has its one value", Allowed: `"published", or { distribution = ... } with the words below, or { choices = ... }`, Doc: `the distribution of a key, by its full name in quotes; "published" is uniform over the range its source gives. A key that --set gives a value is certain`},
		{Name: of + "distribution", Kind: "word", Doc: "its shape"},
		{Name: of + "low", Kind: "value", Allowed: "what KEY allows, with its unit", Doc: "lower end of uniform, log-uniform and triangular"},
		{Name: of + "high", Kind: "value", Allowed: "above low", Doc: "upper end of the same"},
		{Name: of + "mode", Kind: "value", Allowed: "from low to high", Doc: "most likely value of triangular"},
		{Name: of + "mean", Kind: "value", Allowed: "what KEY allows, with its unit", Doc: "mean of normal"},
		{Name: of + "sd", Kind: "value", Allowed: "above zero, with the unit of KEY", Doc: "standard deviation of normal"},
		{Name: of + "median", Kind: "value", Allowed: "above zero, with its unit", Doc: "median of log-normal"},
		{Name: of + "sigma", Kind: "number", Allowed: "above zero", Doc: "standard deviation of the natural logarithm, of log-normal"},
		{Name: of + "at_least", Kind: "value", Allowed: "what KEY allows, with its unit", Doc: "normal and log-normal are cut off below it"},
		{Name: of + "at_most", Kind: "value", Allowed: "above at_least", Doc: "normal and log-normal are cut off above it"},
		{Name: of + "choices", Kind: "list", Allowed: "a list of at least two of the words that KEY allows", Doc: "the laws or words a member may have"},
		{Name: of + "weights", Kind: "list", Default: "all alike", Allowed: "a list of positive numbers, one a choice", Doc: "how likely each choice is against the others"},
		{Name: "correlations", Kind: "list", Default: "[]", Allowed: `[ { between = ["KEY", "OTHER"], rank = 0.5 } ], rank above -1 and below 1`, Doc: "rank correlations between two uncertain numbers"},
		{Name: "ages", Kind: "list", Default: "[]", Allowed: `a list of ages within the history: ["2.07 Gyr"]`, Doc: "ages at which the spread of temperature, CO2 and pH is reported"},
	}
	var names []string
	for _, s := range shapes {
		if s.name != Published {
			names = append(names, s.name)
		}
	}
	list[1].Allowed = words(names)
	for i := range list {
		list[i].Section, list[i].Source = uncertainSection, "the user"
		if list[i].Default == "" {
			list[i].Default = "none"
		}
	}
	return list
}()

// specWords are the keys inside a distribution.
var specWords = []string{"distribution", "low", "high", "mean", "sd", "median", "sigma", "mode", "at_least", "at_most", "choices", "weights"}

// Prior is the distribution of one key. Numbers are in base units.
type Prior struct {
	Key   string
	Shape string

	Low, Mode, High float64 // uniform, log-uniform, triangular
	Mean, SD        float64 // normal
	Median, Sigma   float64 // log-normal: the median, and the standard deviation of the logarithm
	AtLeast, AtMost float64 // infinite without a bound

	Choices []string  // of a law, a word or true and false
	Weights []float64 // of the choices, as given: they need not add up to 1
}

// Correlation is the rank correlation of two keys.
type Correlation struct {
	A, B string
	Rank float64
}

// Uncertain is the section [uncertain], settled.
type Uncertain struct {
	Priors       []Prior // in the order of the file
	Correlations []Correlation
	Ages         []float64 // yr, at which the climate is kept
}

// Prior returns the distribution of a key, or nil.
func (u *Uncertain) Prior(key string) *Prior {
	for i := range u.Priors {
		if u.Priors[i].Key == key {
			return &u.Priors[i]
		}
	}
	return nil
}

// node is a TOML value with its line.
type node struct {
	value
	line   int
	list   []node
	fields []named
}

type named struct {
	key  string
	line int
	node node
}

const uncertainSection = "uncertain"

// isUncertain tells whether a key or a header belongs to the section.
func isUncertain(path []string) bool { return len(path) > 0 && path[0] == uncertainSection }

// uncertainFields reads the section of a text that has been parsed before: every
// value below it under its full key.
func uncertainFields(data []byte) []named {
	var p unstable.Parser
	p.Reset(data)
	var out []named
	var prefix []string
	line := func(n *unstable.Node) int { return p.Shape(n.Raw).Start.Line }
	var read func(n *unstable.Node, at int) node
	read = func(n *unstable.Node, at int) node {
		x := node{value: valueOf(n), line: at}
		switch n.Kind {
		case unstable.Array:
			for it := n.Children(); it.Next(); {
				if c := it.Node(); c.Kind != unstable.Comment {
					x.list = append(x.list, read(c, at))
				}
			}
		case unstable.InlineTable:
			for it := n.Children(); it.Next(); {
				c := it.Node()
				if c.Kind != unstable.KeyValue {
					continue
				}
				path, first := keyOf(c.Key(), nil)
				x.fields = append(x.fields, named{strings.Join(path, "."), line(first), read(c.Value(), line(first))})
			}
		}
		return x
	}
	for p.NextExpression() {
		switch e := p.Expression(); e.Kind {
		case unstable.Table:
			prefix, _ = keyOf(e.Key(), nil)
		case unstable.ArrayTable:
			prefix = nil
		case unstable.KeyValue:
			path, first := keyOf(e.Key(), prefix)
			if !isUncertain(path) {
				continue
			}
			at := line(first)
			n := read(e.Value(), at)
			if len(path) == 1 { // uncertain = { ... }
				if n.shape == table {
					out = append(out, n.fields...)
				} else {
					out = append(out, named{"", at, n})
				}
				continue
			}
			out = append(out, named{strings.Join(path[1:], "."), at, n})
		}
	}
	return out
}

// spec is what a file says about one key.
type spec struct {
	key    string
	file   string
	line   int
	word   *node // "published"
	fields []named
}

// uncertain reads the sections of all layers, the later ones over the earlier.
func (r *resolver) uncertain(layers []*layer, flags *layer) {
	var specs []*spec
	var corr, ages *named
	var corrFile, agesFile string
	for _, l := range layers {
		seen := map[string]*spec{}
		fail := func(f named, e KeyError) {
			e.File, e.Line = l.file, f.line
			if e.Key == "" {
				e.Key = uncertainKey(f.key)
			}
			r.errs.add(&e)
		}
		for _, f := range uncertainFields(l.data) {
			switch f.key {
			case "":
				fail(f, KeyError{Key: uncertainSection, Found: f.node.found(), Allowed: "the section [uncertain] with keys below it"})
				continue
			case "correlations":
				corr, corrFile = &f, l.file
				continue
			case "ages":
				ages, agesFile = &f, l.file
				continue
			}
			key, inner := f.key, ""
			_, isKey := known().byDotted[first(key)]
			if !isKey {
				if _, ok := known().byDotted[first(parent(key))]; ok && slices.Contains(specWords, leaf(key)) {
					key, inner = parent(key), leaf(key)
				} else {
					near := Nearest(key, known().dotted())
					fail(f, KeyError{What: "unknown key", Near: near, hints: []string{"list the keys with: cycle keys"}})
					continue
				}
			}
			s := seen[key]
			if s == nil {
				s = &spec{key: key, file: l.file, line: f.line}
				seen[key] = s
				specs = slices.DeleteFunc(specs, func(o *spec) bool { return o.key == key })
				specs = append(specs, s)
			}
			switch {
			case inner != "":
				s.fields = append(s.fields, named{inner, f.line, f.node})
			case f.node.shape == table:
				s.fields = append(s.fields, f.node.fields...)
			default:
				s.word = &f.node
			}
		}
	}
	// A value on the command line settles a key.
	specs = slices.DeleteFunc(specs, func(s *spec) bool {
		return slices.ContainsFunc(flags.settings, func(x setting) bool { return x.key == s.key })
	})
	if len(specs) == 0 && corr == nil && ages == nil {
		return
	}
	u := &Uncertain{}
	// Laws first: which fields there are depends on them.
	laws := map[string][]string{}
	for _, s := range specs {
		if p, ok := r.choice(s); ok {
			if section, isLaw := strings.CutSuffix(s.key, ".law"); isLaw {
				laws[section] = p.Choices
			}
		}
	}
	n := len(r.errs.List)
	for _, s := range specs {
		if r.errs.full() {
			return
		}
		if p, ok := r.prior(s, laws); ok {
			u.Priors = append(u.Priors, p)
		}
	}
	if corr != nil && len(r.errs.List) == n {
		r.correlations(u, corr, corrFile)
	}
	if ages != nil {
		r.ages(u, ages, agesFile)
	}
	r.res.Uncertain = u
}

// uncertainKey writes the full key of an entry of the section.
func uncertainKey(key string) string { return join([]string{uncertainSection, key}) }

// target is what a prior may change under one choice of laws.
type target struct {
	law   string
	field *units.Field
	words []string // the choices, when it is no number
}

// targets lists what a key is under each law its section may have.
func (r *resolver) targets(key string, laws map[string][]string) []target {
	section := parent(key)
	names := laws[section]
	if names == nil {
		names = []string{""}
	}
	var out []target
	for _, law := range names {
		setup := r.res.Setup.Clone()
		if law != "" {
			if setup.Choose(section, law) != nil {
				continue
			}
		}
		for _, sec := range setup.Sections() {
			if sec.Name != section {
				continue
			}
			if key == dotted(section, "law") && sec.Laws != nil {
				return []target{{words: lawNames(sec.Laws)}}
			}
			for i := range sec.Fields {
				if dotted(section, sec.Fields[i].Key) == key {
					out = append(out, target{law: law, field: &sec.Fields[i]})
				}
			}
			for i := range sec.Options {
				if dotted(section, sec.Options[i].Key) == key {
					return []target{{words: sec.Options[i].Allowed}}
				}
			}
			for i := range sec.Flags {
				if dotted(section, sec.Flags[i].Key) == key {
					return []target{{words: []string{"true", "false"}}}
				}
			}
		}
	}
	return out
}

// choice reads a list of choices with weights without complaint: it is asked
// before the problems are told.
func (r *resolver) choice(s *spec) (Prior, bool) {
	p := Prior{Key: s.key, Shape: Chosen}
	for _, f := range s.fields {
		if f.key == "choices" {
			for _, n := range f.node.list {
				p.Choices = append(p.Choices, n.text)
			}
		}
	}
	return p, p.Choices != nil
}

// prior settles the distribution of a key.
func (r *resolver) prior(s *spec, laws map[string][]string) (p Prior, ok bool) {
	p = Prior{Key: s.key, AtLeast: math.Inf(-1), AtMost: math.Inf(1)}
	ok = true
	fail := func(line int, sub string, e KeyError) {
		e.File, e.Line, e.Key = s.file, line, uncertainKey(s.key)
		if sub != "" {
			e.Key += "." + sub
		}
		r.errs.add(&e)
		ok = false
	}
	if _, top := known().byDotted[s.key]; top && parent(s.key) == "" {
		fail(s.line, "", KeyError{What: "this key cannot be uncertain"})
		return
	}
	given := map[string]named{}
	for _, f := range s.fields {
		if !slices.Contains(specWords, f.key) {
			fail(f.line, f.key, KeyError{What: "unknown word in a distribution", Allowed: words(specWords), Near: Nearest(f.key, specWords)})
			continue
		}
		if old, twice := given[f.key]; twice {
			fail(f.line, f.key, KeyError{What: fmt.Sprintf("set twice, first in line %d", old.line)})
		}
		given[f.key] = f
	}
	if !ok {
		return
	}
	goals := r.targets(s.key, laws)
	if len(goals) == 0 {
		c := known()
		var under []string
		for _, i := range c.byDotted[first(s.key)] {
			under = append(under, c.keys[i].Laws...)
		}
		e := KeyError{What: "no law that is chosen has this key"}
		if under != nil {
			e.Allowed = "under " + words(under)
			e.hints = []string{fmt.Sprintf("choose the law with: %s.law = %q, or name it among the choices of uncertain.%q", parent(s.key), under[0], parent(s.key)+".law")}
		} else {
			e.hints = []string{"this key holds no number and no word of a list"}
		}
		fail(s.line, "", e)
		return
	}
	if goals[0].words != nil {
		r.choices(&p, s, given, goals[0].words, fail)
		return p, ok
	}
	if s.word != nil {
		if s.word.shape != text || s.word.text != Published || len(given) > 0 {
			fail(s.line, "", KeyError{Found: s.word.found(), Allowed: `"published", or { distribution = "uniform", low = ..., high = ... }`})
			return
		}
		p.Shape = Published
	} else {
		d, have := given["distribution"]
		var names []string
		for _, sh := range shapes {
			names = append(names, sh.name)
		}
		if _, list := given["choices"]; list && !have {
			fail(s.line, "", KeyError{What: "this key is a number", Found: "choices", Allowed: "distribution = " + words(names)})
			return
		}
		if !have || d.node.shape != text || !slices.Contains(names, d.node.text) {
			found, near := "no distribution", ""
			if have {
				found, near = d.node.found(), Nearest(d.node.text, names)
			}
			fail(s.line, "distribution", KeyError{Found: found, Allowed: words(names), Near: near})
			return
		}
		p.Shape = d.node.text
	}
	f := goals[0].field
	number := func(name string, scale bool) (float64, bool) {
		g, have := given[name]
		if !have {
			return 0, false
		}
		k := f.Kind
		if name == "sigma" {
			k = nil // of the logarithm: a pure number
		}
		v, err := parseUncertain(k, g.node, scale)
		if err != "" {
			how := "a number without unit and quotes"
			if k != nil {
				how = fmt.Sprintf("a %s with its unit in quotes; units are %s", k.Name, strings.Join(k.Spellings(), ", "))
			}
			fail(g.line, name, KeyError{Found: g.node.found() + err, Allowed: how})
		}
		return v, true
	}
	for _, sh := range shapes {
		if sh.name != p.Shape {
			continue
		}
		allowed := append([]string{"distribution"}, sh.required...)
		if sh.bounds {
			allowed = append(allowed, "at_least", "at_most")
		}
		for _, g := range s.fields {
			if !slices.Contains(allowed, g.key) {
				fail(g.line, g.key, KeyError{What: fmt.Sprintf("the distribution %q has no such word", p.Shape), Allowed: words(allowed)})
			}
		}
		for _, name := range sh.required {
			v, have := number(name, name == "sd")
			if !have {
				fail(s.line, "", KeyError{What: fmt.Sprintf("the distribution %q needs %s", p.Shape, strings.Join(sh.required, ", ")), Found: "no " + name})
				continue
			}
			*map[string]*float64{"low": &p.Low, "high": &p.High, "mean": &p.Mean, "sd": &p.SD, "median": &p.Median, "sigma": &p.Sigma, "mode": &p.Mode}[name] = v
		}
		if sh.bounds {
			if v, have := number("at_least", false); have {
				p.AtLeast = v
			}
			if v, have := number("at_most", false); have {
				p.AtMost = v
			}
		}
	}
	if !ok {
		return
	}
	at := func(name string) int {
		if g, have := given[name]; have {
			return g.line
		}
		return s.line
	}
	switch {
	case (p.Shape == Uniform || p.Shape == LogUniform || p.Shape == Triangular) && !(p.Low < p.High):
		fail(at("high"), "high", KeyError{Found: f.Text(p.High), Allowed: "more than low, " + f.Text(p.Low)})
	case p.Shape == LogUniform && p.Low <= 0:
		fail(at("low"), "low", KeyError{Found: f.Text(p.Low), Allowed: "more than zero"})
	case p.Shape == Triangular && !(p.Low <= p.Mode && p.Mode <= p.High):
		fail(at("mode"), "mode", KeyError{Found: f.Text(p.Mode), Allowed: "from low to high"})
	case p.Shape == Normal && !(p.SD > 0):
		fail(at("sd"), "sd", KeyError{Found: given["sd"].node.found(), Allowed: "more than zero"})
	case p.Shape == LogNormal && !(p.Median > 0):
		fail(at("median"), "median", KeyError{Found: f.Text(p.Median), Allowed: "more than zero"})
	case p.Shape == LogNormal && !(p.Sigma > 0):
		fail(at("sigma"), "sigma", KeyError{Found: given["sigma"].node.found(), Allowed: "more than zero"})
	case !(p.AtLeast < p.AtMost):
		fail(at("at_most"), "at_most", KeyError{Found: f.Text(p.AtMost), Allowed: "more than at_least, " + f.Text(p.AtLeast)})
	}
	if !ok {
		return
	}
	for _, g := range goals {
		f := g.field
		under := ""
		if g.law != "" {
			under = " under the law " + g.law
		}
		if p.Shape == Published && !f.Published.Stated() {
			fail(s.line, "", KeyError{What: "no range was published for this key" + under, Allowed: "a distribution of your own"})
			return
		}
		lo, hi := p.Low, p.High
		switch p.Shape {
		case Published:
			continue
		case Normal, LogNormal:
			c := p.Mean
			if p.Shape == LogNormal {
				c = p.Median
			}
			if lo, hi := max(p.AtLeast, f.Min), min(p.AtMost, f.Max); !(lo < hi) || c < lo || c > hi {
				fail(s.line, "", KeyError{What: "the middle of the distribution lies outside its bounds" + under, Found: f.Text(c), Allowed: between(f, lo, hi)})
				return
			}
			continue
		}
		if lo < f.Min {
			fail(at("low"), "low", KeyError{Found: f.Text(lo) + ", which is out of range" + under, Allowed: allowedRange(f)})
		}
		if hi > f.Max {
			fail(at("high"), "high", KeyError{Found: f.Text(hi) + ", which is out of range" + under, Allowed: allowedRange(f)})
		}
		if !ok {
			return
		}
	}
	return p, ok
}

// choices settles a list of words with weights.
func (r *resolver) choices(p *Prior, s *spec, given map[string]named, allowed []string, fail func(int, string, KeyError)) {
	p.Shape = Chosen
	c, have := given["choices"]
	if !have || c.node.shape != list || s.word != nil {
		fail(s.line, "", KeyError{What: "this key is a choice", Allowed: "{ choices = [" + words(allowed) + "] }, with weights = [...] if they are not alike"})
		return
	}
	for name, f := range given {
		if name != "choices" && name != "weights" {
			fail(f.line, name, KeyError{What: "a choice has no such word", Allowed: `"choices" or "weights"`})
			return
		}
	}
	for _, n := range c.node.list {
		w := n.text
		if n.shape != text && n.shape != boolean || !slices.Contains(allowed, w) {
			fail(c.line, "choices", KeyError{Found: n.found(), Allowed: words(allowed), Near: Nearest(w, allowed)})
			return
		}
		if slices.Contains(p.Choices, w) {
			fail(c.line, "choices", KeyError{Found: n.found() + " twice", Allowed: "each once"})
			return
		}
		p.Choices = append(p.Choices, w)
	}
	if len(p.Choices) < 2 {
		fail(c.line, "choices", KeyError{Found: fmt.Sprintf("%d of them", len(p.Choices)), Allowed: "two or more of " + words(allowed)})
		return
	}
	if strings.HasSuffix(s.key, ".law") {
		for _, w := range p.Choices {
			setup := r.res.Setup.Clone()
			if err := setup.Choose(parent(s.key), w); err != nil {
				continue
			}
			for _, sec := range setup.Sections() {
				if sec.Name == parent(s.key) && sec.Table != nil && *sec.Table.Text == "" {
					fail(c.line, "choices", KeyError{Found: quote(w) + ", a law that needs a table", Allowed: "laws without a table"})
					return
				}
			}
		}
	}
	sum := 0.0
	if w, have := given["weights"]; have {
		if w.node.shape != list || len(w.node.list) != len(p.Choices) {
			fail(w.line, "weights", KeyError{Found: fmt.Sprintf("%d weights", len(w.node.list)), Allowed: fmt.Sprintf("a list of %d numbers, one for each choice", len(p.Choices))})
			return
		}
		for _, n := range w.node.list {
			x, ok := parseNumber(n.value)
			if !ok || !(x > 0) || math.IsInf(x, 0) {
				fail(w.line, "weights", KeyError{Found: n.found(), Allowed: "finite numbers above zero"})
				return
			}
			p.Weights = append(p.Weights, x)
			sum += x
		}
	} else {
		for range p.Choices {
			p.Weights = append(p.Weights, 1)
			sum++
		}
	}
	if math.IsInf(sum, 0) {
		fail(given["weights"].line, "weights", KeyError{Found: "weights whose sum is too large", Allowed: "smaller ones"})
	}
}

// parseUncertain reads a number of a distribution. With difference, it is a
// distance between two values, so that an offset of the unit does not count.
func parseUncertain(k *units.Kind, n node, difference bool) (v float64, problem string) {
	if k == nil {
		x, ok := parseNumber(n.value)
		if !ok || math.IsNaN(x) || math.IsInf(x, 0) {
			return 0, ", which is no finite number"
		}
		return x, ""
	}
	if n.shape != text {
		return 0, ", which has no unit"
	}
	v, unit, err := k.Parse(n.text)
	if err != nil {
		return 0, ", which cannot be read"
	}
	if _, off, _ := k.Scale(unit); difference {
		v -= off
	}
	return v, ""
}

// correlations reads the list of rank correlations.
func (r *resolver) correlations(u *Uncertain, f *named, file string) {
	const how = `a list of { between = ["KEY", "KEY"], rank = NUMBER }`
	bad := func(line int, e KeyError) {
		e.File, e.Line, e.Key = file, line, uncertainKey("correlations")
		r.errs.add(&e)
	}
	if f.node.shape != list {
		bad(f.line, KeyError{Found: f.node.found(), Allowed: how})
		return
	}
	for _, n := range f.node.list {
		var c Correlation
		var have [2]bool
		if n.shape != table {
			bad(n.line, KeyError{Found: n.found(), Allowed: how})
			return
		}
		for _, g := range n.fields {
			switch g.key {
			case "between":
				if len(g.node.list) != 2 || g.node.list[0].shape != text || g.node.list[1].shape != text {
					bad(g.line, KeyError{Found: g.node.found(), Allowed: how})
					return
				}
				c.A, c.B, have[0] = g.node.list[0].text, g.node.list[1].text, true
			case "rank":
				x, ok := parseNumber(g.node.value)
				if !ok || !(x > -1 && x < 1) {
					bad(g.line, KeyError{Found: g.node.found(), Allowed: "a number between -1 and 1, ends excluded"})
					return
				}
				c.Rank, have[1] = x, true
			default:
				bad(g.line, KeyError{Found: quote(g.key), Allowed: how, Near: Nearest(g.key, []string{"between", "rank"})})
				return
			}
		}
		if !have[0] || !have[1] {
			bad(n.line, KeyError{Found: "an entry without between or rank", Allowed: how})
			return
		}
		for _, key := range []string{c.A, c.B} {
			p := u.Prior(key)
			if p == nil || p.Shape == Chosen {
				var names []string
				for _, p := range u.Priors {
					if p.Shape != Chosen {
						names = append(names, p.Key)
					}
				}
				bad(n.line, KeyError{Found: quote(key), Allowed: "numbers that are uncertain: " + words(names), Near: Nearest(key, names)})
				return
			}
		}
		for _, o := range u.Correlations {
			if c.A == c.B || o.A == c.A && o.B == c.B || o.A == c.B && o.B == c.A {
				bad(n.line, KeyError{Found: quote(c.A) + " and " + quote(c.B) + " twice", Allowed: "each pair once"})
				return
			}
		}
		if c.A == c.B {
			bad(n.line, KeyError{Found: quote(c.A) + " with itself", Allowed: "two keys"})
			return
		}
		u.Correlations = append(u.Correlations, c)
	}
	if !u.definite() {
		bad(f.line, KeyError{What: "no joint distribution has these rank correlations together", Allowed: "weaker ones"})
	}
}

// ages reads the list of ages at which the climate is kept.
func (r *resolver) ages(u *Uncertain, f *named, file string) {
	bad := func(found string) {
		r.errs.add(&KeyError{File: file, Line: f.line, Key: uncertainKey("ages"), Found: found, Allowed: fmt.Sprintf("a list of at most 16 ages such as \"2.07 Gyr\", rising, from time.start to time.end, %s to %s", units.Time.Format(r.res.Setup.Start, "Gyr"), units.Time.Format(r.res.Setup.End, "Gyr"))})
	}
	if f.node.shape != list || len(f.node.list) > 16 {
		bad(f.node.found())
		return
	}
	for _, n := range f.node.list {
		v, problem := parseUncertain(units.Time, n, false)
		if problem != "" || v < r.res.Setup.Start || v > r.res.Setup.End || len(u.Ages) > 0 && v <= u.Ages[len(u.Ages)-1] {
			bad(n.found())
			return
		}
		u.Ages = append(u.Ages, v)
	}
}

// fieldsOf lists the field a key is under each law its section may have.
func (u *Uncertain) fieldsOf(s *carbon.Setup, key string) []*units.Field {
	r := &resolver{res: &Resolved{Setup: s}}
	laws := map[string][]string{}
	for _, p := range u.Priors {
		if section, ok := strings.CutSuffix(p.Key, ".law"); ok {
			laws[section] = p.Choices
		}
	}
	var out []*units.Field
	for _, t := range r.targets(key, laws) {
		out = append(out, t.field)
	}
	return out
}

// Words words a distribution for people, with units.
func (r *Resolved) Words(p *Prior) string {
	if p.Shape == Chosen {
		var out []string
		for i, c := range p.Choices {
			out = append(out, fmt.Sprintf("%s %.3g %%", c, 100*p.Weights[i]/floats.Sum(p.Weights)))
		}
		return strings.Join(out, ", ")
	}
	fs := r.Uncertain.fieldsOf(r.Setup, p.Key)
	if len(fs) == 0 || fs[0] == nil {
		return p.Shape
	}
	f := fs[0]
	w := ""
	switch p.Shape {
	case Published:
		w = "uniform over the published range, " + between(f, f.Published.Lo, f.Published.Hi)
		for _, o := range fs[1:] {
			if o.Published != f.Published {
				w = "uniform over the published range of each law"
			}
		}
	case Uniform, LogUniform:
		w = p.Shape + ", " + between(f, p.Low, p.High)
	case Triangular:
		w = "triangular, " + between(f, p.Low, p.High) + " with mode " + plainText(f, p.Mode)
	case Normal:
		w = "normal, " + plainText(f, p.Mean) + " ± " + difference(f, p.SD)
	case LogNormal:
		w = fmt.Sprintf("log-normal, median %s, factor %.4g", plainText(f, p.Median), math.Exp(p.Sigma))
	}
	if !math.IsInf(p.AtLeast, 0) {
		w += ", at least " + plainText(f, p.AtLeast)
	}
	if !math.IsInf(p.AtMost, 0) {
		w += ", at most " + plainText(f, p.AtMost)
	}
	return w
}

// difference writes a distance between two values of a field.
func difference(f *units.Field, v float64) string {
	_, off, _ := f.Kind.Scale(f.ShownUnit())
	return plainText(f, v+off)
}

// uncertainTOML writes the section so that it reads back to the last bit.
func (r *Resolved) uncertainTOML() string {
	u := r.Uncertain
	if u == nil {
		return ""
	}
	var b strings.Builder
	b.WriteString("\n# distributions of an ensemble\n[uncertain]\n")
	for i := range u.Priors {
		p := &u.Priors[i]
		fmt.Fprintf(&b, "%s = %s\n", tomlString(p.Key), r.priorTOML(p))
	}
	if len(u.Correlations) > 0 {
		b.WriteString("correlations = [\n")
		for _, c := range u.Correlations {
			fmt.Fprintf(&b, "  { between = [%s, %s], rank = %s },\n", tomlString(c.A), tomlString(c.B), exact(c.Rank))
		}
		b.WriteString("]\n")
	}
	if len(u.Ages) > 0 {
		var list []string
		for _, a := range u.Ages {
			list = append(list, tomlString(units.Time.Format(a, "Gyr")))
		}
		fmt.Fprintf(&b, "ages = [%s]\n", strings.Join(list, ", "))
	}
	return b.String()
}

func exact(x float64) string { return strconv.FormatFloat(x, 'g', -1, 64) }

func (r *Resolved) priorTOML(p *Prior) string {
	if p.Shape == Published {
		return tomlString(Published)
	}
	if p.Shape == Chosen {
		var c, w []string
		for i := range p.Choices {
			c = append(c, tomlString(p.Choices[i]))
			w = append(w, exact(p.Weights[i]))
		}
		return fmt.Sprintf("{ choices = [%s], weights = [%s] }", strings.Join(c, ", "), strings.Join(w, ", "))
	}
	f := r.Uncertain.fieldsOf(r.Setup, p.Key)[0]
	base := ""
	if f.Kind != nil {
		base = f.Kind.Base
	}
	num := func(v float64) string { // in base units: nothing is lost
		if f.Kind == nil {
			return exact(v)
		}
		return tomlString(exact(v) + " " + base)
	}
	parts := []string{"distribution = " + tomlString(p.Shape)}
	put := func(name, v string) { parts = append(parts, name+" = "+v) }
	switch p.Shape {
	case Uniform, LogUniform:
		put("low", num(p.Low))
		put("high", num(p.High))
	case Triangular:
		put("low", num(p.Low))
		put("mode", num(p.Mode))
		put("high", num(p.High))
	case Normal:
		put("mean", num(p.Mean))
		put("sd", num(p.SD))
	case LogNormal:
		put("median", num(p.Median))
		put("sigma", exact(p.Sigma))
	}
	if !math.IsInf(p.AtLeast, 0) {
		put("at_least", num(p.AtLeast))
	}
	if !math.IsInf(p.AtMost, 0) {
		put("at_most", num(p.AtMost))
	}
	return "{ " + strings.Join(parts, ", ") + " }"
}

// EnsembleHash identifies an ensemble: Hash with the section [uncertain].
func (r *Resolved) EnsembleHash() string {
	sum := sha256.Sum256([]byte(r.Hash() + r.uncertainTOML()))
	return hex.EncodeToString(sum[:])[:16]
}

// Normal returns the correlation matrix of the normal copula that has the rank
// correlations, for the keys that take part, in order of the priors. It is nil
// without correlations.
//
//	ρ = 2 sin(π ρ_s/6)
//
// (Pearson 1907, for the normal distribution).
func (u *Uncertain) Normal() (keys []string, m *mat.SymDense) {
	if len(u.Correlations) == 0 {
		return nil, nil
	}
	at := map[string]int{}
	for _, p := range u.Priors {
		for _, c := range u.Correlations {
			if _, have := at[p.Key]; !have && (c.A == p.Key || c.B == p.Key) {
				at[p.Key] = len(keys)
				keys = append(keys, p.Key)
			}
		}
	}
	m = mat.NewSymDense(len(keys), nil)
	for i := range keys {
		m.SetSym(i, i, 1)
	}
	for _, c := range u.Correlations {
		m.SetSym(at[c.A], at[c.B], 2*math.Sin(math.Pi*c.Rank/6))
	}
	return keys, m
}

// definite tells whether the rank correlations can hold together.
func (u *Uncertain) definite() bool {
	_, m := u.Normal()
	var c mat.Cholesky
	return m == nil || c.Factorize(m)
}
