package scenarios

import (
	"slices"
	"sort"
	"strconv"
	"strings"
	"sync"

	"cycle/carbon"
	"cycle/carbon/cite"
	"cycle/carbon/units"
)

// Key is one key of a scenario, as `cycle keys` lists it.
type Key struct {
	Section   string
	Name      string
	Laws      []string // the laws of the section it belongs to; nil when it is always there
	Kind      string   // dimension, "number", "word", "true or false", "file" or "text"
	Default   string   // with unit, as written in a scenario
	Allowed   string
	Published string // range of the source; empty when not stated
	Units     []string
	Doc       string
	Source    string
}

// Dotted returns the full key.
func (k *Key) Dotted() string { return dotted(k.Section, k.Name) }

func dotted(section, name string) string {
	if section == "" {
		return name
	}
	return section + "." + name
}

// The keys above the first section.
var topKeys = []Key{
	{Name: "title", Kind: "text", Default: `the name`, Allowed: "one line", Doc: "what stands above the results", Source: "the user"},
	{Name: "name", Kind: "text", Default: `the name of the file`, Allowed: "letters, digits, dot, dash and underscore", Doc: "names the folder of the results", Source: "the user"},
	{Name: "notes", Kind: "text", Default: `""`, Allowed: "any text", Doc: "kept with the results", Source: "the user"},
	{Name: "base", Kind: "word", Default: `""`, Doc: "the built-in scenario to start from; empty starts from the defaults", Source: "the user"},
}

// catalog is every section and key that any choice of laws offers.
type catalog struct {
	order    []string          // sections in file order
	docs     map[string]string // section -> doc
	headers  map[string]bool   // sections and what stands before their dots
	keys     []Key             // in file order
	byDotted map[string][]int
}

var known = sync.OnceValue(func() *catalog {
	c := &catalog{docs: map[string]string{}, headers: map[string]bool{}, byDotted: map[string][]int{}}
	add := func(k Key) {
		d := k.Dotted()
		c.byDotted[d] = append(c.byDotted[d], len(c.keys))
		c.keys = append(c.keys, k)
	}
	for _, k := range topKeys {
		if k.Name == "base" {
			var names []string
			for _, b := range Builtins() {
				names = append(names, b.Name)
			}
			k.Allowed = words(names)
		}
		add(k)
	}
	for i, sec := range fullSetup().Sections() {
		c.order = append(c.order, sec.Name)
		c.docs[sec.Name] = sec.Doc
		for name := sec.Name; name != ""; {
			c.headers[name] = true
			name = parent(name)
		}
		if sec.Laws == nil {
			for _, k := range keysOf(&sec) {
				add(k)
			}
			continue
		}
		// Each law in turn on a setup of its own. A key of all laws alike stands
		// once; others name their laws.
		var lists [][]Key
		for _, law := range sec.Laws {
			s := fullSetup()
			if err := s.Choose(sec.Name, law.Name); err != nil {
				continue // a law that cannot be chosen has no keys
			}
			chosen := s.Sections()[i]
			list := keysOf(&chosen)
			for j := range list {
				if list[j].Name != "law" {
					list[j].Laws = []string{law.Name}
				}
			}
			lists = append(lists, list)
		}
		var merged []Key
		for _, list := range lists {
			for _, k := range list {
				j := slices.IndexFunc(merged, func(m Key) bool { return sameKey(m, k) })
				if j < 0 {
					merged = append(merged, k)
				} else if k.Laws != nil {
					merged[j].Laws = append(merged[j].Laws, k.Laws...)
				}
			}
		}
		sort.SliceStable(merged, func(a, b int) bool { return rank(&merged[a], len(lists)) < rank(&merged[b], len(lists)) })
		for _, k := range merged {
			if len(k.Laws) == len(lists) {
				k.Laws = nil
			}
			if k.Name == "law" {
				k.Default = tomlString(sec.Law)
			}
			add(k)
		}
	}
	return c
})

// fullSetup is a setup with every section there can be; of numbered sections,
// such as pulse.1 and pulse.2, the first.
func fullSetup() *carbon.Setup {
	s := carbon.NewSetup()
	for _, name := range numbered {
		s.Grow(name + ".1")
	}
	return s
}

// numbered lists the sections that a setup makes on demand.
var numbered = []string{"pulse"}

// first maps a key or a section of a numbered section to that of its first:
// pulse.3.start to pulse.1.start.
func first(key string) string {
	for _, name := range numbered {
		rest, ok := strings.CutPrefix(key, name+".")
		if !ok {
			continue
		}
		number, tail, _ := strings.Cut(rest, ".")
		if carbon.NewSetup().Grow(name + "." + number) {
			return strings.TrimSuffix(name+".1."+tail, ".")
		}
	}
	return key
}

// rank puts the law first, then what all laws share, then the rest.
func rank(k *Key, laws int) int {
	switch {
	case k.Name == "law":
		return 0
	case len(k.Laws) == laws:
		return 1
	}
	return 2
}

// parent returns what stands before the last dot.
func parent(key string) string { return key[:max(0, strings.LastIndexByte(key, '.'))] }

func sameKey(a, b Key) bool {
	return a.Name == b.Name && a.Kind == b.Kind && (a.Name == "law" ||
		a.Default == b.Default && a.Allowed == b.Allowed && a.Published == b.Published && a.Doc == b.Doc && a.Source == b.Source)
}

func lawNames(laws []carbon.Choice) []string {
	out := make([]string, len(laws))
	for i, l := range laws {
		out[i] = l.Name
	}
	return out
}

// keysOf lists the keys of one section with its present law.
func keysOf(sec *carbon.Section) []Key {
	var out []Key
	if sec.Laws != nil {
		out = append(out, Key{Section: sec.Name, Name: "law", Kind: "word", Default: tomlString(sec.Law), Allowed: words(lawNames(sec.Laws)), Doc: "which law is used", Source: "the first of the list"})
	}
	for i := range sec.Options {
		o := &sec.Options[i]
		out = append(out, Key{Section: sec.Name, Name: o.Key, Kind: "word", Default: tomlString(*o.Value), Allowed: words(o.Allowed), Doc: o.Doc, Source: o.Source.String()})
	}
	for i := range sec.Fields {
		f := &sec.Fields[i]
		k := Key{Section: sec.Name, Name: f.Key, Kind: "number", Default: literal(f, *f.Value), Allowed: allowedRange(f), Doc: f.Doc, Source: f.Source.String()}
		if f.Kind != nil {
			k.Kind, k.Units = f.Kind.Name, f.Kind.Spellings()
		}
		if f.Published.Stated() {
			k.Published = between(f, f.Published.Lo, f.Published.Hi)
		}
		out = append(out, k)
	}
	for i := range sec.Flags {
		f := &sec.Flags[i]
		out = append(out, Key{Section: sec.Name, Name: f.Key, Kind: "true or false", Default: boolText(*f.Value), Allowed: "true or false", Doc: f.Doc, Source: f.Source.String()})
	}
	if t := sec.Table; t != nil {
		out = append(out,
			Key{Section: sec.Name, Name: t.Key + "_file", Kind: "file", Default: "none", Allowed: "a CSV file of at most 1 MiB, relative to the scenario", Doc: t.Doc, Source: "the user"},
			Key{Section: sec.Name, Name: t.Key + "_csv", Kind: "text", Default: "none", Allowed: "the CSV itself", Doc: t.Doc + ", as text", Source: "the user"})
	}
	return out
}

func boolText(b bool) string {
	if b {
		return "true"
	}
	return "false"
}

// literal writes a value as it stands in a scenario: quantities quoted.
func literal(f *units.Field, v float64) string {
	if f.Kind == nil {
		return f.Text(v)
	}
	return tomlString(f.Text(v))
}

// allowedRange words the allowed range of a field.
func allowedRange(f *units.Field) string { return between(f, f.Min, f.Max) }

func between(f *units.Field, lo, hi float64) string {
	a, b := plainText(f, lo), plainText(f, hi)
	if unit := f.ShownUnit(); unit != "" {
		a = strings.TrimSuffix(a, " "+unit)
	}
	return a + " to " + b
}

// plainText writes a value for people: in the field's unit, with six digits at
// most. What is written into a scenario is exact instead (literal).
func plainText(f *units.Field, v float64) string {
	factor, offset, ok := f.Kind.Scale(f.ShownUnit())
	if !ok {
		return f.Text(v)
	}
	s := strconv.FormatFloat((v-offset)/factor, 'g', 6, 64)
	if m, exp, ok := strings.Cut(s, "e"); ok {
		n, _ := strconv.Atoi(exp)
		s = m + "e" + strconv.Itoa(n)
	}
	if unit := f.ShownUnit(); unit != "" {
		s += " " + unit
	}
	return s
}

// Keys lists the keys of a section, of all sections (section ""), or one key by
// its full name. "weathering" includes "weathering.land".
func Keys(section string) ([]Key, error) {
	c := known()
	var out []Key
	for i := range c.keys {
		k := &c.keys[i]
		if section == "" || k.Section == section || strings.HasPrefix(k.Section, section+".") || k.Dotted() == section {
			out = append(out, *k)
		}
	}
	if section == "" || section == uncertainSection {
		out = append(out, uncertainKeys...)
	}
	if out == nil {
		return nil, &KeyError{Key: section, What: "there is no such section or key", Allowed: strings.Join(append(slices.Clone(c.order), uncertainSection), ", "), Near: Nearest(section, append(append(c.dotted(), c.order...), uncertainSection))}
	}
	return out, nil
}

// SectionDoc returns what a section is about.
func SectionDoc(section string) string {
	if section == uncertainSection {
		return "distributions instead of values, for cycle ensemble"
	}
	return known().docs[first(section)]
}

// Laws returns the laws a section offers, nil when it has no key "law" of this kind.
func Laws(section string) []Law {
	for _, sec := range fullSetup().Sections() {
		if sec.Name == section {
			var out []Law
			for _, c := range sec.Laws {
				out = append(out, Law{c.Name, c.Doc, c.Form, sources(c.Source)})
			}
			return out
		}
	}
	return nil
}

// Law is one law a section offers.
type Law struct{ Name, Doc, Form, Source string }

func sources(refs []cite.Ref) string {
	var out []string
	for _, r := range refs {
		out = append(out, r.String())
	}
	return strings.Join(out, "; ")
}

// dotted lists every full key once.
func (c *catalog) dotted() []string {
	var out []string
	for i := range c.keys {
		if d := c.keys[i].Dotted(); c.byDotted[d][0] == i {
			out = append(out, d)
		}
	}
	return out
}

// accept says what is wrong with a key or a section header; nil when it is known.
func (c *catalog) accept(key string, header bool) *KeyError {
	_, isKey := c.byDotted[first(key)]
	isHeader := c.headers[first(key)]
	switch {
	case header && isHeader || !header && isKey:
		return nil
	case header && isKey:
		return &KeyError{Key: key, What: "this is a key, not a section"}
	case isHeader:
		return &KeyError{Key: key, What: "this is a section, not a key", Found: "a value", Allowed: "[" + key + "] with keys below it"}
	case header:
		return &KeyError{Key: key, What: "unknown section", Allowed: strings.Join(c.order, ", "), Near: Nearest(key, c.order),
			hints: []string{"list the sections and keys with: cycle keys"}}
	}
	e := &KeyError{Key: key, What: "unknown key", Near: Nearest(key, c.dotted())}
	section := parent(key)
	if c.docs[first(section)] == "" {
		e.hints = []string{"list the sections and keys with: cycle keys"}
		return e
	}
	e.section = section
	e.hints = []string{"list the keys of the section with: cycle keys " + first(section)}
	return e
}
