package scenarios

import (
	"crypto/sha256"
	"encoding/hex"
	"fmt"
	"sort"
	"strconv"
	"strings"
	"unicode/utf8"

	"cycle/carbon"
	"cycle/carbon/cite"
	"cycle/carbon/record"
)

// entry is one settled key, ready to be written in any form.
type entry struct {
	section, name string
	toml          string // the value as TOML
	plain         string // the value for people
	exact         string // the value in base units, to the last bit
	def           string // the default for people
	isDefault     bool   // or the source concerns the value whoever set it
	doc           string
	source        string // of the default
	allowed       string
	published     string
	outside       bool
	works         []string // keys of the works behind the source
}

func (e *entry) key() string { return dotted(e.section, e.name) }

// entries lists every key with its value, in file order.
func (r *Resolved) entries() []entry {
	defaults, plain := carbon.NewSetup(), carbon.NewSetup()
	for _, sec := range r.Setup.Sections() {
		if sec.Laws != nil {
			_ = defaults.Choose(sec.Name, sec.Law) // the law is there: it was chosen
		}
		defaults.Grow(sec.Name)
		plain.Grow(sec.Name)
	}
	lawless := plain.Sections()
	def := defaults.Sections()
	var out []entry
	for i, sec := range r.Setup.Sections() {
		d := &def[i]
		if sec.Laws != nil {
			e := entry{section: sec.Name, name: "law", toml: tomlString(sec.Law), plain: sec.Law, exact: sec.Law, def: lawless[i].Law, isDefault: true, allowed: words(lawNames(sec.Laws))}
			for _, c := range sec.Laws {
				if c.Name == sec.Law {
					e.doc, e.source, e.works = c.Doc, sources(c.Source), workKeys(c.Source...)
				}
			}
			out = append(out, e)
		}
		for j := range sec.Options {
			o := &sec.Options[j]
			out = append(out, entry{section: sec.Name, name: o.Key, toml: tomlString(*o.Value), plain: *o.Value, exact: *o.Value, def: *d.Options[j].Value, isDefault: o.Own || *o.Value == *d.Options[j].Value,
				doc: o.Doc, source: o.Source.String(), works: workKeys(o.Source), allowed: words(o.Allowed)})
		}
		for j := range sec.Fields {
			f := &sec.Fields[j]
			e := entry{section: sec.Name, name: f.Key, toml: literal(f, *f.Value), plain: plainText(f, *f.Value), exact: strconv.FormatFloat(*f.Value, 'g', -1, 64), def: plainText(f, *d.Fields[j].Value), isDefault: *f.Value == *d.Fields[j].Value,
				doc: f.Doc, source: f.Source.String(), works: workKeys(f.Source), allowed: allowedRange(f), outside: f.Extrapolates(*f.Value)}
			if f.Published.Stated() {
				e.published = between(f, f.Published.Lo, f.Published.Hi)
			}
			out = append(out, e)
		}
		for j := range sec.Flags {
			f := &sec.Flags[j]
			out = append(out, entry{section: sec.Name, name: f.Key, toml: boolText(*f.Value), plain: boolText(*f.Value), exact: boolText(*f.Value), def: boolText(*d.Flags[j].Value), isDefault: *f.Value == *d.Flags[j].Value,
				doc: f.Doc, source: f.Source.String(), works: workKeys(f.Source), allowed: "true or false"})
		}
		if t := sec.Table; t != nil {
			out = append(out, entry{section: sec.Name, name: t.Key + "_csv", toml: tomlText(*t.Text), plain: fmt.Sprintf("table of %d lines", strings.Count(strings.TrimSpace(*t.Text), "\n")+1), exact: *t.Text, def: "none",
				doc: t.Doc, source: "the user's table", allowed: "CSV"})
		}
	}
	return out
}

// workKeys lists the works that sources point to.
func workKeys(refs ...cite.Ref) []string {
	var out []string
	for _, r := range refs {
		if r.Work != nil {
			out = append(out, r.Work.Key)
		}
	}
	return out
}

// sourceText says where the value comes from: the default's source when it is
// the default, whoever wrote it; otherwise who set it, with the default beside.
func (r *Resolved) sourceText(e *entry) string {
	src := e.source
	if !e.isDefault {
		src = "set by the user"
		if r.Origin(e.key()) == BuiltIn {
			src = "set by the built-in scenario"
		}
		if e.def != "none" {
			src += "; default " + e.def + ": " + e.source
		}
	}
	return src
}

// Inputs lists every value of the scenario for a table of inputs.
func (r *Resolved) Inputs() []record.Input {
	var out []record.Input
	for _, e := range r.entries() {
		allowed := e.allowed
		if e.published != "" {
			allowed += " (published " + e.published + ")"
		}
		out = append(out, record.Input{Key: e.key(), Value: e.plain, Doc: e.doc, Origin: r.Origin(e.key()), Source: r.sourceText(&e), Allowed: allowed, Outside: e.outside, Works: e.works})
	}
	return out
}

// TOML writes the scenario with every key spelled out. Loading it gives the same
// setup to the last bit.
func (r *Resolved) TOML() string {
	var b strings.Builder
	b.WriteString("# A resolved scenario: every key with its value, who set it and its source.\n# It repeats the run with: cycle run scenario.toml\n\n")
	fmt.Fprintf(&b, "title = %s\nname = %s\n", tomlString(r.Title), tomlString(r.Name))
	if r.Notes != "" {
		fmt.Fprintf(&b, "notes = %s\n", tomlText(r.Notes))
	}
	all := r.entries()
	for i := 0; i < len(all); {
		section := all[i].section
		j := i
		var lines [][2]string
		width := 0
		for ; j < len(all) && all[j].section == section; j++ {
			e := &all[j]
			left := e.name + " = " + e.toml
			right := "# " + r.Origin(e.key()) + "; " + r.sourceText(e)
			if e.outside {
				right += "; outside the published range " + e.published
			}
			if strings.Contains(left, "\n") {
				right = ""
			} else if n := utf8.RuneCountInString(left); n <= 44 {
				width = max(width, n)
			}
			lines = append(lines, [2]string{left, oneLine(right)})
		}
		fmt.Fprintf(&b, "\n# %s\n[%s]\n", oneLine(SectionDoc(section)), section)
		for _, l := range lines {
			b.WriteString(l[0])
			if l[1] != "" {
				b.WriteString(strings.Repeat(" ", max(0, width-utf8.RuneCountInString(l[0]))+2))
				b.WriteString(l[1])
			}
			b.WriteByte('\n')
		}
		i = j
	}
	b.WriteString(r.uncertainTOML())
	return b.String()
}

// oneLine keeps a comment a comment.
func oneLine(s string) string { return strings.Join(strings.Fields(s), " ") }

// Hash identifies what is computed: the first 16 hexadecimal digits of the SHA-256
// of all keys with their values in base units. Title, name, notes, comments and who
// set a value do not enter.
func (r *Resolved) Hash() string {
	var lines []string
	for _, e := range r.entries() {
		lines = append(lines, e.key()+"="+strconv.Quote(e.exact)+"\n")
	}
	sort.Strings(lines)
	sum := sha256.Sum256([]byte(strings.Join(lines, "")))
	return hex.EncodeToString(sum[:])[:16]
}

// tomlString writes a basic string on one line.
func tomlString(s string) string {
	var b strings.Builder
	b.WriteByte('"')
	for _, c := range s {
		escape(&b, c)
	}
	b.WriteByte('"')
	return b.String()
}

// tomlText writes a string that may have several lines.
func tomlText(s string) string {
	if !strings.Contains(s, "\n") {
		return tomlString(s)
	}
	var b strings.Builder
	b.WriteString("\"\"\"\n")
	for _, c := range s {
		if c == '\n' {
			b.WriteByte('\n')
		} else {
			escape(&b, c)
		}
	}
	b.WriteString("\"\"\"")
	return b.String()
}

func escape(b *strings.Builder, c rune) {
	switch {
	case c == '"' || c == '\\':
		b.WriteByte('\\')
		b.WriteRune(c)
	case c == '\n':
		b.WriteString(`\n`)
	case c == '\t':
		b.WriteString(`\t`)
	case c == '\r':
		b.WriteString(`\r`)
	case c < 0x20 || c >= 0x7f && c < 0xa0:
		fmt.Fprintf(b, `\u%04X`, c)
	default:
		b.WriteRune(c)
	}
}
