// Package cite holds every published work the program rests on, once.
//
// A law, a default and a check value point to a Work through a Ref, which adds
// the place inside the work. The reference list and the BibTeX of a report are
// made from exactly the works a run used.
package cite

import (
	"fmt"
	"sort"
	"strings"
)

// Work is one publication.
type Work struct {
	Key     string   // BibTeX key, unique
	Authors []string // "Family, I. I."
	Year    int
	Title   string
	Journal string // journal or publisher
	Volume  string
	Pages   string
	Kind    string // BibTeX type; "" means article
}

// Short returns the in-text form: "Walker et al. 1981".
func (w *Work) Short() string {
	family := func(a string) string { return strings.SplitN(a, ",", 2)[0] }
	switch len(w.Authors) {
	case 0:
		return fmt.Sprint(w.Year)
	case 1:
		return fmt.Sprintf("%s %d", family(w.Authors[0]), w.Year)
	case 2:
		return fmt.Sprintf("%s & %s %d", family(w.Authors[0]), family(w.Authors[1]), w.Year)
	}
	return fmt.Sprintf("%s et al. %d", family(w.Authors[0]), w.Year)
}

// Long returns one line for a reference list.
func (w *Work) Long() string {
	s := fmt.Sprintf("%s (%d). %s. %s", strings.Join(w.Authors, "; "), w.Year, w.Title, w.Journal)
	if w.Volume != "" {
		s += " " + w.Volume
	}
	if w.Pages != "" {
		s += ", " + w.Pages
	}
	return s + "."
}

// BibTeX returns the entry of the work.
func (w *Work) BibTeX() string {
	kind, place := w.Kind, "journal"
	if kind == "" {
		kind = "article"
	}
	if kind == "book" {
		place = "publisher"
	}
	var b strings.Builder
	fmt.Fprintf(&b, "@%s{%s,\n", kind, w.Key)
	fmt.Fprintf(&b, "  author = {%s},\n", strings.Join(w.Authors, " and "))
	fmt.Fprintf(&b, "  title = {{%s}},\n", w.Title)
	fmt.Fprintf(&b, "  %s = {%s},\n", place, w.Journal)
	if w.Volume != "" {
		fmt.Fprintf(&b, "  volume = {%s},\n", w.Volume)
	}
	if w.Pages != "" {
		fmt.Fprintf(&b, "  pages = {%s},\n", strings.ReplaceAll(w.Pages, "-", "--"))
	}
	fmt.Fprintf(&b, "  year = {%d}\n}\n", w.Year)
	return b.String()
}

// Trust says how well a value is known to be the published one.
type Trust int

const (
	Seen      Trust = iota // seen in the source
	Checked                // from memory, cross-checked against a second law or result
	Memory                 // from memory only
	Unsure                 // from memory, unsure of a digit, a unit or the attribution
	Derived                // follows by arithmetic from other entries
	OwnChoice              // no published source: a choice of this program
	Practice               // common practice, no source
)

var trustWords = [...]string{"", "cross-checked from memory", "from memory", "from memory, unsure", "derived", "own choice, no published source", "common practice, no source"}

// String returns the words shown to a user; empty when seen in the source.
func (t Trust) String() string { return trustWords[t] }

// Ref points to the origin of a value or a formula.
type Ref struct {
	Work  *Work  // nil when there is none
	Where string // table, equation or page, when known
	Note  string // what else the reader should know
	Trust Trust
}

// String returns "Walker et al. 1981, eq. 1 (from memory)".
func (r Ref) String() string {
	var parts []string
	if r.Work != nil {
		parts = append(parts, r.Work.Short())
	}
	if r.Where != "" {
		parts = append(parts, r.Where)
	}
	if r.Note != "" {
		parts = append(parts, r.Note)
	}
	s := strings.Join(parts, ", ")
	if t := r.Trust.String(); t != "" {
		if s == "" {
			return t
		}
		return s + " (" + t + ")"
	}
	return s
}

// IsZero reports whether nothing is said about the origin.
func (r Ref) IsZero() bool { return r == Ref{} }

// Own marks a choice of this program; why says what speaks for it.
func Own(why string) Ref { return Ref{Note: why, Trust: OwnChoice} }

// Sorted returns the distinct works in order of first author and year.
func Sorted(works []*Work) []*Work {
	seen := map[*Work]bool{}
	var out []*Work
	for _, w := range works {
		if w != nil && !seen[w] {
			seen[w] = true
			out = append(out, w)
		}
	}
	sort.Slice(out, func(i, j int) bool {
		if a, b := out[i].Authors[0], out[j].Authors[0]; a != b {
			return a < b
		}
		if out[i].Year != out[j].Year {
			return out[i].Year < out[j].Year
		}
		return out[i].Key < out[j].Key
	})
	return out
}
