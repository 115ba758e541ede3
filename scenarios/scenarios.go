// Package scenarios turns a scenario file into a resolved scenario: every key
// with its value, and who set it.
//
// Start with Load. It reads a built-in scenario or a TOML file and the --set
// flags over it, in the order of precedence
//
//	default < built-in < file < --set
//
// and returns a Resolved, which holds the carbon.Setup to run and writes itself
// as a scenario again (TOML), as a table of inputs (Inputs) and as a Hash.
//
// What may stand in a file is not said here: package carbon lists its sections
// and keys (carbon.Setup.Sections), and everything in this package walks that
// list.
package scenarios

import (
	"errors"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"slices"
	"strconv"
	"strings"
	"unicode"
	"unicode/utf8"

	"cycle/carbon"
	"cycle/carbon/units"
)

// Who set a value.
const (
	Default = "default"
	BuiltIn = "built-in"
	File    = "file"
	Set     = "--set"
)

// Resolved is a scenario with every value settled.
type Resolved struct {
	Name  string // names the folder of the results
	Title string
	Notes string
	File  string // as the user named it; empty for a built-in scenario
	Setup *carbon.Setup

	Uncertain *Uncertain // the section [uncertain]; nil when there is none

	// Origins says who set a key; a key that is missing has its default.
	Origins map[string]string

	places map[string]place // where a key was set last
}

// place is where a key was set.
type place struct {
	file string
	line int
}

// Origin says who set a key.
func (r *Resolved) Origin(key string) string {
	if o := r.Origins[key]; o != "" {
		return o
	}
	return Default
}

// Problem words what package carbon says about a key: with the file and line
// that set it, when the user did.
func (r *Resolved) Problem(key string, err error) error {
	e := &KeyError{File: r.File, Key: key, What: strings.TrimPrefix(err.Error(), key+": ")}
	if p, ok := r.places[key]; ok {
		e.File, e.Line = p.file, p.line
	}
	return e
}

// Load reads a scenario: the name of a built-in one, or a file; sets are the
// values of --set, "KEY=VALUE". Errors are *Errors, *KeyError or, when the file
// system fails, *FileError.
func Load(ref string, sets []string) (*Resolved, error) {
	if data, ok := builtinSource(ref); ok && !isFile(ref) {
		return resolve(&layer{origin: BuiltIn, file: "built-in " + ref, dir: "-"}, ref, "", data, sets)
	}
	data, err := readFile(ref)
	if err != nil {
		return nil, explainRef(ref, err)
	}
	return Parse(ref, data, sets)
}

// Parse is Load for a file that has been read already.
func Parse(file string, data []byte, sets []string) (*Resolved, error) {
	return resolve(&layer{origin: File, file: file, dir: filepath.Dir(file)}, nameFrom(file), file, data, sets)
}

func isFile(path string) bool {
	info, err := os.Stat(path)
	return err == nil && info.Mode().IsRegular()
}

// explainRef adds what the user may have meant.
func explainRef(ref string, err error) error {
	var ke *KeyError
	if !errors.As(err, &ke) {
		return err
	}
	switch {
	case isFile(ref + ".toml"):
		ke.Near = ref + ".toml"
	case isFile(filepath.Join(ref, "scenario.toml")):
		ke.Near = filepath.Join(ref, "scenario.toml")
	default:
		ke.Near = Nearest(ref, builtinNames())
	}
	ke.hints = append(ke.hints, "a scenario is a TOML file or one of the built-in "+strings.Join(builtinNames(), ", "))
	if ke.Found == "" && !strings.ContainsAny(ref, "./\\") && validName(ref) {
		ke.hints = append(ke.hints, "write a new scenario with: cycle new "+ref)
	}
	return ke
}

// resolver applies layers to a setup.
type resolver struct {
	res    *Resolved
	errs   Errors
	layers []*layer // that spoke, in order
}

func resolve(top *layer, name, file string, data []byte, sets []string) (*Resolved, error) {
	r := &resolver{res: &Resolved{Name: name, File: file, Setup: carbon.NewSetup(), Origins: map[string]string{}, places: map[string]place{}}}
	if !parse(top, data, known().accept, &r.errs) {
		return nil, &r.errs
	}
	flags := &layer{origin: Set, file: "--set", dir: "."}
	for _, arg := range sets {
		s, e := parseSet(arg)
		if e == nil {
			e = known().accept(s.key, false)
		}
		if e == nil && s.key == "base" {
			e = &KeyError{Key: s.key, What: "a base can only be chosen in a file"}
		}
		if e != nil {
			e.File = flags.file
			r.errs.add(e)
			continue
		}
		// The last of several flags for one key counts.
		flags.settings = slices.DeleteFunc(flags.settings, func(old setting) bool { return old.key == s.key })
		flags.settings = append(flags.settings, s)
	}
	r.base(top, nil)
	r.apply(top)
	r.apply(flags)
	r.uncertain(append(r.layers, top), flags)
	if len(r.errs.List) == 0 {
		r.finish()
	}
	if len(r.errs.List) > 0 {
		r.errs.settle(r.res.Setup)
		return nil, &r.errs
	}
	return r.res, nil
}

// base applies the built-in scenario a layer starts from.
func (r *resolver) base(l *layer, seen []string) {
	i := slices.IndexFunc(l.settings, func(s setting) bool { return s.key == "base" })
	if i < 0 {
		return
	}
	s := l.settings[i]
	if s.val.shape == text && s.val.text == "" {
		return
	}
	data, ok := []byte(nil), false
	if s.val.shape == text {
		data, ok = builtinSource(s.val.text)
	}
	if !ok || slices.Contains(seen, s.val.text) {
		r.errs.add(&KeyError{File: l.file, Line: s.line, Key: "base", Found: s.val.found(), Allowed: "one of the built-in " + words(builtinNames()), Near: Nearest(s.val.text, builtinNames())})
		return
	}
	b := &layer{origin: BuiltIn, file: "built-in " + s.val.text, dir: "-"}
	parse(b, data, known().accept, &r.errs)
	// Title, name and notes belong to the scenario that has them.
	b.settings = slices.DeleteFunc(b.settings, func(s setting) bool { return s.key == "title" || s.key == "name" || s.key == "notes" })
	r.base(b, append(seen, s.val.text))
	r.apply(b)
	r.layers = append(r.layers, b)
}

// apply sets everything a layer says: laws first, since they decide which other
// keys there are, so that the order in a file does not matter.
func (r *resolver) apply(l *layer) {
	setup := r.res.Setup
	for _, s := range l.settings {
		if section := parent(s.key); known().headers[first(section)] {
			setup.Grow(section)
		}
	}
	for _, s := range l.settings {
		section, isLaw := strings.CutSuffix(s.key, ".law")
		if !isLaw {
			continue
		}
		for _, sec := range setup.Sections() {
			if sec.Name != section || sec.Laws == nil {
				continue
			}
			names := lawNames(sec.Laws)
			if !s.isWord() || !slices.Contains(names, s.val.text) {
				r.bad(l, s, s.val.found(), words(names), Nearest(s.val.text, names))
				continue
			}
			before := values(setup, section)
			if err := setup.Choose(section, s.val.text); err != nil {
				r.errs.add(&KeyError{File: l.file, Line: s.line, Key: s.key, What: err.Error()})
				continue
			}
			// The parameters of the law that went are gone with it.
			after := values(setup, section)
			for key, p := range before {
				if after[key] != p {
					delete(r.res.Origins, key)
					delete(r.res.places, key)
				}
			}
			r.spoke(l, s)
		}
	}
	sections := setup.Sections()
	csv := map[string]string{} // section -> key that gave the table
	for _, s := range l.settings {
		if r.errs.full() {
			return
		}
		if r.top(l, s) {
			continue
		}
		if !r.one(l, s, sections, csv) {
			r.otherLaw(l, s, sections)
		}
	}
}

// values maps the keys of a section to the places of their values.
func values(s *carbon.Setup, section string) map[string]any {
	out := map[string]any{}
	for _, sec := range s.Sections() {
		if sec.Name != section {
			continue
		}
		for i := range sec.Fields {
			out[dotted(section, sec.Fields[i].Key)] = sec.Fields[i].Value
		}
		for i := range sec.Options {
			out[dotted(section, sec.Options[i].Key)] = sec.Options[i].Value
		}
		for i := range sec.Flags {
			out[dotted(section, sec.Flags[i].Key)] = sec.Flags[i].Value
		}
		if sec.Table != nil {
			out[dotted(section, sec.Table.Key+"_csv")] = sec.Table.Text
		}
	}
	return out
}

func (s *setting) isWord() bool { return s.val.shape == text || s.val.shape == bare }

func (r *resolver) spoke(l *layer, s setting) {
	r.res.Origins[s.key] = l.origin
	r.res.places[s.key] = place{l.file, s.line}
}

func (r *resolver) bad(l *layer, s setting, found, allowed, near string) {
	r.errs.add(&KeyError{File: l.file, Line: s.line, Key: s.key, Found: found, Allowed: allowed, Near: near})
}

// top sets the keys above the first section.
func (r *resolver) top(l *layer, s setting) bool {
	switch s.key {
	case "title", "name", "notes", "base":
	default:
		return false
	}
	if !s.isWord() {
		r.bad(l, s, s.val.found(), "a text in quotes", "")
		return true
	}
	t := s.val.text
	switch s.key {
	case "title":
		if !clean(t, "") {
			r.bad(l, s, quote(t), "one line of text without control characters", "")
			return true
		}
		r.res.Title = t
	case "name":
		if !validName(t) {
			r.bad(l, s, quote(t), nameRule, "")
			return true
		}
		r.res.Name = t
	case "notes":
		if !clean(t, "\n\r\t") {
			r.bad(l, s, quote(t), "text without control characters", "")
			return true
		}
		r.res.Notes = t
	case "base":
		return true
	}
	r.spoke(l, s)
	return true
}

// clean reports whether a text has no control character other than those named.
func clean(s, but string) bool {
	for _, c := range s {
		if unicode.IsControl(c) && !strings.ContainsRune(but, c) {
			return false
		}
	}
	return true
}

const nameRule = "up to 64 letters, digits, dots, dashes and underscores, beginning with a letter or digit"

// validName reports whether a name can name a folder everywhere.
func validName(s string) bool {
	if s == "" || len(s) > 64 {
		return false
	}
	for i := 0; i < len(s); i++ {
		if c := s[i]; !(isBare(s[i:i+1]) || c == '.') || i == 0 && (c == '-' || c == '_' || c == '.') {
			return false
		}
	}
	return s[len(s)-1] != '.'
}

// CheckName returns an error when a name cannot name a scenario.
func CheckName(name string) error {
	if validName(name) {
		return nil
	}
	return &KeyError{Key: "NAME", Found: quote(name), Allowed: nameRule}
}

// nameFrom makes a name from the path of a file.
func nameFrom(file string) string {
	base := filepath.Base(file)
	base = strings.TrimSuffix(base, filepath.Ext(base))
	var b strings.Builder
	for _, c := range base {
		switch {
		case c < utf8.RuneSelf && isBare(string(c)) || c == '.':
			b.WriteRune(c)
		default:
			b.WriteByte('-')
		}
	}
	name := strings.TrimLeft(b.String(), "-_.")
	name = strings.TrimRight(name[:min(len(name), 64)], "-.")
	if name == "" {
		return "scenario"
	}
	return name
}

// one sets a key of a section; false when the present laws have no such key.
func (r *resolver) one(l *layer, s setting, sections []carbon.Section, csv map[string]string) bool {
	for i := range sections {
		sec := &sections[i]
		name, ok := strings.CutPrefix(s.key, sec.Name+".")
		if !ok || strings.Contains(name, ".") {
			continue
		}
		if name == "law" && sec.Laws != nil {
			return true
		}
		for j := range sec.Fields {
			if f := &sec.Fields[j]; f.Key == name {
				r.field(l, s, f)
				return true
			}
		}
		for j := range sec.Options {
			o := &sec.Options[j]
			if o.Key != name {
				continue
			}
			if !s.isWord() || !slices.Contains(o.Allowed, s.val.text) {
				r.bad(l, s, s.val.found(), words(o.Allowed), Nearest(s.val.text, o.Allowed))
				return true
			}
			*o.Value = s.val.text
			r.spoke(l, s)
			return true
		}
		for j := range sec.Flags {
			f := &sec.Flags[j]
			if f.Key != name {
				continue
			}
			if s.val.shape != boolean && s.val.shape != bare || s.val.text != "true" && s.val.text != "false" {
				r.bad(l, s, s.val.found(), "true or false, without quotes", "")
				return true
			}
			*f.Value = s.val.text == "true"
			r.spoke(l, s)
			return true
		}
		if t := sec.Table; t != nil && (name == t.Key+"_file" || name == t.Key+"_csv") {
			if first := csv[sec.Name]; first != "" {
				r.errs.add(&KeyError{File: l.file, Line: s.line, Key: s.key, What: "the table is given twice, the first time by " + first})
				return true
			}
			csv[sec.Name] = s.key
			r.table(l, s, t, dotted(sec.Name, t.Key+"_csv"))
			return true
		}
	}
	return false
}

// field reads a number or a quantity.
func (r *resolver) field(l *layer, s setting, f *units.Field) {
	var v float64
	if f.Kind == nil {
		val := s.val
		if val.shape == bare {
			if p, ok := parseValue(val.text); ok && (p.shape == integer || p.shape == float) {
				val = p
			}
		}
		number, ok := parseNumber(val)
		if !ok {
			r.bad(l, s, s.val.found(), "a number without unit and quotes, "+allowedRange(f), "")
			return
		}
		v = number
	} else {
		how := fmt.Sprintf("a %s with its unit, %s", f.Kind.Name, allowedRange(f))
		if !s.isWord() {
			r.bad(l, s, s.val.found(), how+", written "+example(l, f), "")
			return
		}
		parsed, _, err := f.Kind.Parse(s.val.text)
		if err != nil {
			found := quote(s.val.text)
			var pe *units.ParseError
			if errors.As(err, &pe) {
				found += ", " + pe.Reason
			}
			r.bad(l, s, found, fmt.Sprintf("%s; units are %s", how, strings.Join(f.Kind.Spellings(), ", ")), "")
			return
		}
		v = parsed
	}
	switch {
	case math.IsNaN(v) || math.IsInf(v, 0):
		r.bad(l, s, s.val.found()+", which is not finite", "a finite number, "+allowedRange(f), "")
	case v < f.Min || v > f.Max:
		found := s.val.found()
		if shown := plainText(f, v); f.Kind != nil && shown != s.val.text {
			found += " = " + shown
		}
		r.bad(l, s, found+", which is out of range", allowedRange(f), "")
	default:
		if v == 0 {
			v = 0 // no negative zero
		}
		*f.Value = v
		r.spoke(l, s)
	}
}

func example(l *layer, f *units.Field) string {
	if l.origin == Set {
		return fmt.Sprintf("%q", f.Text(*f.Value))
	}
	return fmt.Sprintf("%s = %q", f.Key, f.Text(*f.Value))
}

// parseNumber reads a TOML number.
func parseNumber(v value) (float64, bool) {
	t := strings.ReplaceAll(v.text, "_", "")
	switch v.shape {
	case integer:
		if len(t) > 1 && t[0] == '0' {
			n, err := strconv.ParseInt(t, 0, 64)
			return float64(n), err == nil
		}
		fallthrough // 1 and 1.0 are the same number here
	case float:
		x, err := strconv.ParseFloat(t, 64)
		return x, err == nil || math.IsInf(x, 0)
	}
	return 0, false
}

// table reads the user's CSV.
func (r *resolver) table(l *layer, s setting, t *carbon.Table, csvKey string) {
	if !s.isWord() {
		r.bad(l, s, s.val.found(), "a text in quotes", "")
		return
	}
	content := s.val.text
	in := "the table"
	if strings.HasSuffix(s.key, "_file") {
		if l.dir == "-" {
			r.bad(l, s, s.val.found(), "nothing: a built-in scenario holds its table", "")
			return
		}
		path := s.val.text
		if !filepath.IsAbs(path) {
			path = filepath.Join(l.dir, path)
		}
		data, err := readFile(path)
		if err == nil {
			if e := checkText(path, data); e != nil {
				err = e
			}
		}
		if err != nil {
			r.errs.add(&KeyError{File: l.file, Line: s.line, Key: s.key, What: err.Error(), Found: s.val.found(), Allowed: "a CSV file, its path relative to the scenario's folder"})
			return
		}
		content, in = strings.TrimPrefix(string(data), "\ufeff"), path
	}
	if err := t.Load(strings.NewReader(content)); err != nil {
		r.errs.add(&KeyError{File: l.file, Line: s.line, Key: s.key, What: printable(in) + ": " + printable(err.Error())})
		return
	}
	s.key = csvKey
	r.spoke(l, s)
}

// otherLaw explains a key that exists under another law only.
func (r *resolver) otherLaw(l *layer, s setting, sections []carbon.Section) {
	c := known()
	e := &KeyError{File: l.file, Line: s.line, Key: s.key, What: "unknown key"}
	var laws []string
	for _, i := range c.byDotted[first(s.key)] {
		laws = append(laws, c.keys[i].Laws...)
	}
	section := parent(s.key)
	for _, sec := range sections {
		if sec.Name == section && laws != nil {
			e.What = fmt.Sprintf("the law %q has no such key", sec.Law)
			e.Allowed = "under " + words(laws)
			e.hints = append(e.hints, fmt.Sprintf("choose the law with: %s.law = %q", section, laws[0]),
				"list the keys of the section with: cycle keys "+section)
		}
	}
	r.errs.add(e)
}

// finish checks what concerns several keys at once.
func (r *resolver) finish() {
	res := r.res
	if res.Title == "" {
		res.Title = res.Name
	}
	res.Setup.Title = res.Title
	for _, sec := range res.Setup.Sections() {
		if t := sec.Table; t != nil && *t.Text == "" {
			key := dotted(sec.Name, "law")
			p := res.places[key]
			e := &KeyError{File: p.file, Line: p.line, Key: key, What: fmt.Sprintf("the law %q needs a table", sec.Law), Allowed: fmt.Sprintf("%s.%s_file = \"FILE.csv\"", sec.Name, t.Key)}
			r.errs.add(e)
		}
	}
	if len(r.errs.List) > 0 {
		return
	}
	if err := res.Setup.Check(); err != nil {
		key := ""
		var keyed interface{ Key() string }
		if errors.As(err, &keyed) {
			key = keyed.Key()
		}
		var e *KeyError
		if errors.As(res.Problem(key, err), &e) {
			r.errs.add(e)
		}
	}
}
