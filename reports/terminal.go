package reports

import (
	"fmt"
	"io"
	"math"
	"sort"
	"strings"

	"github.com/mattn/go-runewidth"

	"cycle/carbon/record"
	"cycle/reports/internal/num"
)

// TerminalOptions fit the verdict to a terminal.
type TerminalOptions struct {
	Width int  // columns; 80 when zero, held between 60 and 100
	Color bool // use ANSI colours and bold type
}

// terminalLines is the most the verdict takes at 80 columns.
const terminalLines = 25

// glyph draws a climate state in the strip of the history, with and without colour.
var glyph = map[string]struct {
	rune  string
	color string // ANSI 256-colour foreground
}{
	record.StateTemperate: {"=", "36"},
	record.StateSnowball:  {"*", "75"},
	record.StateMoist:     {"^", "172"},
	record.StateRunaway:   {"!", "160"},
	record.StateBeyond:    {"?", "245"},
}

// Terminal writes the verdict for people: what becomes of the planet, when and
// with what numerical error, why, how close, and what is to be doubted. It
// takes at most 25 lines of 80 columns.
func Terminal(w io.Writer, r *record.Run, opt TerminalOptions) error {
	if opt.Width == 0 {
		opt.Width = 80
	}
	t := &terminal{width: min(max(opt.Width, 60), 100), color: opt.Color}

	right := clean(r.Version)
	if h := clean(r.Hash); h != "" {
		right += "  " + runewidth.Truncate(h, 12, "")
	}
	right = short(right, t.width/2)
	title := runewidth.Truncate(titleOf(r), t.width-2-runewidth.StringWidth(right), "…")
	gap := t.width - runewidth.StringWidth(title) - runewidth.StringWidth(right)
	t.line(t.bold(title) + strings.Repeat(" ", max(gap, 1)) + t.dim(right))
	t.line("")

	kind := short(strings.ToUpper(clean(string(r.Outcome.Kind))), t.width/2)
	date, ago := when(r)
	if ago != "" && runewidth.StringWidth(kind+"  "+date+", "+ago) > t.width {
		ago = strings.Replace(ago, "the reference age", num.Age(r.ReferenceAgeGyr), 1)
	}
	if ago != "" && runewidth.StringWidth(kind+"  "+date+", "+ago) <= t.width {
		date += ", " + ago
	}
	t.line(t.bold(kind) + "  " + short(date, t.width-2-runewidth.StringWidth(kind)))
	t.item("", clean(r.Outcome.Sentence), 2)
	t.item("why", clean(r.Outcome.Why), 3)
	for i := range r.Recoveries {
		if i < 2 {
			t.item(label(i == 0, "passed"), passed(&r.Recoveries[i], func(s string) string { return s }), 2)
		}
	}
	t.line("")

	if strip, key := t.strip(r); strip != "" {
		t.line(strip)
		t.line(key)
		t.line("")
	}

	for i, m := range nearest(r.Margins, 3) {
		label := "margin"
		if i > 0 {
			label = ""
		}
		t.item(label, clean(m.Words), 2)
	}
	tail := &terminal{width: t.width, color: t.color, out: make([]string, 4)}
	if r.Reference.Reached {
		tail.item("at "+num.Age(r.Reference.AgeGyr), stateWords(&r.Reference), 1)
	}
	tail.item("feedback", feedbackWords(r), 1)
	tail.item("marks", marksWords(r), 2)
	tail.item("solver", solverWords(r), 2)
	tail.out = tail.out[4:]

	t.doubts(r.Warnings, max(terminalLines-len(t.out)-len(tail.out), 2))
	if len(t.out)+len(tail.out) < terminalLines {
		t.line("")
	}
	t.out = append(t.out, tail.out...)
	_, err := io.WriteString(w, strings.Join(t.out, "\n")+"\n")
	return err
}

// labelWidth is the column where the words begin.
const labelWidth = 14

type terminal struct {
	width int
	color bool
	out   []string
}

func (t *terminal) line(s string) { t.out = append(t.out, strings.TrimRight(s, " ")) }

func (t *terminal) ansi(code, s string) string {
	if !t.color || s == "" {
		return s
	}
	return "\x1b[" + code + "m" + s + "\x1b[0m"
}

func (t *terminal) bold(s string) string { return t.ansi("1", s) }
func (t *terminal) dim(s string) string  { return t.ansi("2", s) }

// item writes a label and its words over at most the given number of lines.
func (t *terminal) item(label, words string, lines int) {
	words = plainly(words)
	if words == "" {
		return
	}
	indent := labelWidth
	if label == "" && len(t.out) < 4 {
		indent = 0 // the sentence under the headline
	}
	for i, l := range wrap(words, t.width-indent, lines) {
		head := ""
		if i == 0 {
			head = label
		}
		t.line(t.dim(head) + strings.Repeat(" ", max(indent-runewidth.StringWidth(head), 0)) + l)
	}
}

// doubts lists the warnings in the lines that are left, and says how many did
// not fit.
func (t *terminal) doubts(all []record.Warning, room int) {
	if len(all) == 0 {
		t.item("doubts", "none raised by the model's own checks", 1)
		return
	}
	for i := range all {
		words := clean(all[i].Words)
		if a := clean(all[i].About); a != "" {
			words = a + ": " + words
		}
		lines := len(wrap(words, t.width-labelWidth, 2))
		left := len(all) - i
		if left > 1 && lines >= room {
			t.item(label(i == 0, "doubts"), fmt.Sprintf("%d more in report.html and summary.json", left), 1)
			return
		}
		t.item(label(i == 0, "doubts"), words, min(2, room))
		room -= lines
	}
}

func label(first bool, s string) string {
	if first {
		return s
	}
	return ""
}

// strip draws the history as one line of climate states and the key below it.
func (t *terminal) strip(r *record.Run) (strip, key string) {
	from, to, ok := extent(r)
	if !ok {
		return "", ""
	}
	left, right := num.Short(from, 3)+" Gyr ", " "+num.Short(to, 3)+" Gyr"
	if w := labelWidth - len(left); w > 0 {
		left += strings.Repeat(" ", w)
	}
	cells := t.width - len(left) - len(right)
	seen := map[string]bool{}
	var b strings.Builder
	for i := range cells {
		a := from + (to-from)*float64(i)/float64(cells)
		z := from + (to-from)*float64(i+1)/float64(cells)
		s := worst(r.Episodes, a, z)
		g, known := glyph[s]
		if !known {
			b.WriteString(" ")
			continue
		}
		seen[s] = true
		b.WriteString(t.ansi("38;5;"+g.color, g.rune))
	}
	key = strings.Repeat(" ", len(left))
	room := t.width - len(left)
	for _, s := range record.States {
		if seen[s] && len(s)+2 <= room {
			key += t.ansi("38;5;"+glyph[s].color, glyph[s].rune) + " " + s + "  "
			room -= len(s) + 4
		}
	}
	if r.Freezes > 0 {
		if s := num.Count(r.Freezes, "freeze", "freezes") + ", frozen " + num.Percent(r.FrozenShare) + " of the time"; len(s) <= room {
			key += s
		}
	}
	return t.dim(left) + b.String() + t.dim(right), key
}

// extent is the span of the history.
func extent(r *record.Run) (from, to float64, ok bool) {
	switch {
	case len(r.Episodes) > 0:
		from, to = r.Episodes[0].Start, r.Episodes[len(r.Episodes)-1].End
	case len(r.Rows) > 0:
		from, to = r.Rows[0].Age/1e9, r.Rows[len(r.Rows)-1].Age/1e9
	}
	return from, to, to > from
}

// worst is the least temperate state of a span, so that a short episode does
// not vanish from a coarse strip.
func worst(es []record.Episode, a, z float64) string {
	best, rank := "", -1
	for _, e := range es {
		if e.End <= a || e.Start >= z {
			continue
		}
		for i, s := range record.States {
			if s == e.State && i > rank {
				best, rank = s, i
			}
		}
	}
	return best
}

// nearest gives at most n margins, one of each boundary in the order given.
func nearest(ms []record.Margin, n int) []record.Margin { return ms[:min(n, len(ms))] }

// lasting reports whether the outcome is an end that has a date.
func lasting(k record.Kind) bool { return k != record.Temperate }

// when is the date of the outcome with its numerical error, and the same date
// counted from the reference age (empty when there is nothing to say).
func when(r *record.Run) (date, ago string) {
	if !lasting(r.Outcome.Kind) {
		return "to the end of the history at " + num.Age(r.Outcome.TimeGyr), ""
	}
	if a := num.Ago(r.Outcome.TimeGyr, r.ReferenceAgeGyr); a != num.Missing && r.ReferenceAgeGyr != 0 {
		ago = a + " the reference age"
	}
	return "at " + num.Date(r.Outcome.TimeGyr, r.Outcome.ErrorGyr), ago
}

// stateWords is a state in one line.
func stateWords(s *record.State) string {
	parts := []string{num.With(num.Fix(s.TemperatureK, 1), "K"), "CO₂ " + num.Pressure(s.PCO2Bar)}
	if known(s.PH) {
		parts = append(parts, "pH "+num.Fix(s.PH, 2))
	}
	parts = append(parts, "outgassing "+num.With(num.Short(s.Outgassing, 3), "Tmol/yr"))
	return strings.Join(parts, ", ")
}

// feedbackWords says how strong the thermostat is at the reference age.
func feedbackWords(r *record.Run) string {
	f := &r.Feedback
	var parts []string
	if known(f.Gain) {
		parts = append(parts, "gain "+num.Short(f.Gain, 3))
	}
	if known(f.ResponseKyr) {
		parts = append(parts, "response "+num.Span(f.ResponseKyr*1e-6))
	}
	if known(f.Sensitivity) {
		parts = append(parts, num.With(num.Short(f.Sensitivity, 3), "K")+" a doubling of CO₂")
	}
	return strings.Join(parts, ", ")
}

// marksWords lists the first of each kind of mark with its date.
func marksWords(r *record.Run) string {
	var parts []string
	for _, g := range markGroups(r.Marks) {
		s := clean(g.name) + " " + num.Fix(g.marks[0].TimeGyr, 3)
		if n := len(g.marks); n > 1 {
			s += fmt.Sprintf(" (first of %d)", n)
		}
		parts = append(parts, s)
	}
	if len(parts) == 0 {
		return ""
	}
	return strings.Join(parts, ", ") + " Gyr"
}

// A markGroup holds the marks of one name.
type markGroup struct {
	name  string
	marks []record.Mark
}

// markGroups gathers marks by name, in order of their first date.
func markGroups(ms []record.Mark) []markGroup {
	var out []markGroup
	at := map[string]int{}
	sorted := append([]record.Mark(nil), ms...)
	sort.SliceStable(sorted, func(i, j int) bool { return sorted[i].TimeGyr < sorted[j].TimeGyr })
	for _, m := range sorted {
		i, ok := at[m.Name]
		if !ok {
			i = len(out)
			at[m.Name] = i
			out = append(out, markGroup{name: m.Name})
		}
		out[i].marks = append(out[i].marks, m)
	}
	return out
}

func solverWords(r *record.Run) string {
	s := &r.Solver
	words := clean(s.Method)
	if words != "" {
		words += ", "
	}
	words += fmt.Sprintf("tolerance %s, %d steps", num.Short(s.RelTol, 2), s.Steps)
	if !s.Guard {
		words += ", stability guard off"
	}
	if known(r.CarbonDrift) {
		words += ", carbon to " + num.Short(r.CarbonDrift, 2)
	}
	return words
}

func known(v float64) bool { return !math.IsNaN(v) && !math.IsInf(v, 0) }

// short cuts a text to at most n columns.
func short(s string, n int) string { return runewidth.Truncate(s, n, "…") }

// wrap breaks words into lines of the given width; what does not fit into the
// lines allowed is cut with an ellipsis.
func wrap(s string, width, lines int) []string {
	var out []string
	cur := ""
	for _, word := range strings.Fields(s) {
		for runewidth.StringWidth(word) > width { // a word longer than a line
			if cur != "" {
				out = append(out, cur)
				cur = ""
			}
			head := runewidth.Truncate(word, width, "")
			if head == "" {
				return out
			}
			out = append(out, head)
			word = word[len(head):]
			if len(out) > lines {
				break
			}
		}
		switch {
		case cur == "":
			cur = word
		case runewidth.StringWidth(cur)+1+runewidth.StringWidth(word) <= width:
			cur += " " + word
		default:
			out = append(out, cur)
			cur = word
		}
		if len(out) > lines {
			break
		}
	}
	if cur != "" {
		out = append(out, cur)
	}
	if len(out) > lines {
		out = out[:lines]
		out[lines-1] = runewidth.Truncate(out[lines-1]+" …", width, "…")
	}
	return out
}
