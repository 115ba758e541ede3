package reports

import (
	_ "embed"
	"fmt"
	"html/template"
	"io"
	"regexp"
	"strconv"
	"strings"
	"unicode"
	"unicode/utf8"

	"cycle/carbon/record"
	"cycle/reports/assets"
	"cycle/reports/internal/num"
	"cycle/reports/internal/page"
)

//go:embed run.tmpl
var runTemplate string

var runPage = template.Must(page.Parse("run", reuseTemplate+runTemplate, template.FuncMap{"typeset": typeset}))

// Licences returns the notices and licences of everything a report embeds.
func Licences() string { return assets.Licences() }

// HTML writes the run as report.html: one file that needs no network and
// nothing beside it. It opens with the verdict, then shows the figures, every
// input and law, how to repeat the run, and the references. No text of the
// record can become markup or code in it.
func HTML(w io.Writer, r *record.Run) error {
	doc, err := runDocument(r)
	if err != nil {
		return err
	}
	return doc.Write(w, runPage)
}

// runDocument sets the report of one run.
func runDocument(r *record.Run) (*page.Document, error) {
	groups := markGroups(r.Marks)
	present := nan()
	if r.ReferenceAgeGyr != 0 {
		present = r.ReferenceAgeGyr
	}
	outcome := nan()
	if lasting(r.Outcome.Kind) {
		outcome = r.Outcome.TimeGyr
	}
	doc := &page.Document{
		Title:    clip(sentence(r.Outcome.Sentence), 120) + " – cycle",
		Label:    clip(titleOf(r), 90) + "  ·  cycle " + clip(clean(r.Version), 20) + "  ·  scenario " + clip(clean(r.Hash), 12),
		File:     fileStem(r.Name),
		Data:     dataOf(r),
		Figures:  figuresOf(r, groups),
		Episodes: episodesOf(r),
		Marks:    railMarks(groups),
		Outcome:  outcome,
		Room:     440e3, // so that the page of one history stays below 1 MB
		Present:  present,
	}
	if err := doc.Finish(); err != nil {
		return nil, err
	}
	b := &runBody{Run: r, Figures: doc.Figures, Licences: Licences(), Clock: ""}
	b.Precision = doc.Data.Precision()
	if known(present) {
		b.Clock = "before " + num.Short(present, 4) + " Gyr"
	}
	b.fill()
	doc.Body = b
	return doc, nil
}

// dataOf is the history in shown units, for the page.
func dataOf(r *record.Run) *page.Data {
	d := &page.Data{Rows: len(r.Rows)}
	for i := range record.Columns {
		c := &record.Columns[i]
		col := page.Column{Name: c.Name, Header: ColumnName(c), Title: c.Title, Unit: c.Unit, Values: make([]float64, len(r.Rows))}
		for j := range r.Rows {
			col.Values[j] = c.Value(&r.Rows[j])
		}
		d.Columns = append(d.Columns, col)
	}
	return d
}

// stateRole is the colour of a climate state.
func stateRole(s string) string {
	switch s {
	case record.StateTemperate:
		return "state.temperate"
	case record.StateSnowball:
		return "state.snowball"
	case record.StateMoist:
		return "state.moist"
	case record.StateRunaway:
		return "state.runaway"
	}
	return "state.beyond"
}

func episodesOf(r *record.Run) []page.Episode {
	var out []page.Episode
	for _, e := range r.Episodes {
		if known(e.Start) && known(e.End) {
			out = append(out, page.Episode{Role: stateRole(e.State), Name: clip(clean(e.State), 40), From: e.Start, To: e.End})
		}
	}
	return out
}

// railMarks numbers the first mark of each name; its repetitions are bare ticks.
func railMarks(groups []markGroup) []page.Mark {
	var out []page.Mark
	for i, g := range groups {
		for j, m := range g.marks {
			if !known(m.TimeGyr) {
				continue
			}
			pm := page.Mark{Time: m.TimeGyr, Name: clip(clean(m.Name), 60)}
			if j == 0 {
				pm.Number = strconv.Itoa(i + 1)
			}
			out = append(out, pm)
		}
	}
	return out
}

// runBody is what the template of a run reads.
type runBody struct {
	*record.Run
	Figures  []*page.Figure
	Licences string
	Clock    string

	Precision                      string // of the rows in the page
	Heading, ShortTitle, FullTitle string
	Why                            string
	Kind, Role                     string
	Date, Ago                      string
	Strip                          *strip
	MarginWords                    []string
	Passed                         []string // how the disturbances passed
	RefAge                         string
	Doubts                         []record.Warning
	FirstDoubts, MoreDoubts        []record.Warning // those in view, and the rest
	Facts                          []fact
	Solved                         []fact
	InputGroups                    []inputGroup
	Changed, Outside               int
	LawRows                        []record.Law
	reuse
	File string
}

// A fact is a number with its name.
type fact struct{ Name, Value, Note string }

type inputGroup struct {
	Name   string
	Inputs []record.Input
}

func (b *runBody) fill() {
	r := b.Run
	b.Heading = clip(sentence(r.Outcome.Sentence), 600)
	b.Why = sentence(r.Outcome.Why)
	b.FullTitle = strings.TrimSpace(r.Title)
	b.ShortTitle = clip(titleOf(r), 120)
	b.Kind = typeset(upper(clip(clean(string(r.Outcome.Kind)), 80)))
	b.Role = outcomeRole(r.Outcome.Kind)
	b.Date, b.Ago = when(r)
	b.Date = num.Pretty(strings.TrimPrefix(b.Date, "at "))
	b.Strip = stripOf(r)
	for _, m := range r.Margins {
		b.MarginWords = append(b.MarginWords, sentence(m.Words))
	}
	for i := range r.Recoveries {
		if i == 4 {
			b.Passed = append(b.Passed, fmt.Sprintf("%d more stand below the first figure.", len(r.Recoveries)-i))
			break
		}
		b.Passed = append(b.Passed, strings.Replace(sentence(passed(&r.Recoveries[i], num.Pretty)), ": -", ": −", 1))
	}
	for _, w := range r.Warnings {
		b.Doubts = append(b.Doubts, record.Warning{About: clean(w.About), Words: typeset(sentenceEnd(w.Words))})
	}
	b.FirstDoubts = b.Doubts
	if len(b.Doubts) > 6 {
		b.FirstDoubts, b.MoreDoubts = b.Doubts[:5], b.Doubts[5:]
	}
	b.RefAge = age(r.Reference.AgeGyr)
	b.Facts = factsOf(r)
	b.Solved = solverFacts(r)
	for _, in := range r.Inputs {
		name, _, ok := strings.Cut(clean(in.Key), ".")
		if !ok {
			name = "general"
		}
		if n := len(b.InputGroups); n == 0 || b.InputGroups[n-1].Name != name {
			b.InputGroups = append(b.InputGroups, inputGroup{Name: name})
		}
		g := &b.InputGroups[len(b.InputGroups)-1]
		g.Inputs = append(g.Inputs, in)
		if in.Origin != "default" {
			b.Changed++
		}
		if in.Outside {
			b.Outside++
		}
	}
	b.LawRows = r.Laws
	b.reuse = reuseOf(methodsOf(r), r.Works)
	b.File = fileStem(r.Name)
}

// outcomeRole is the colour that goes with an outcome.
func outcomeRole(k record.Kind) string {
	switch k {
	case record.Temperate, record.StarLeft:
		return "state.temperate"
	case record.Snowball, record.LimitCycles, record.Condensation:
		return "state.snowball"
	case record.MoistGreen, record.WaterLost:
		return "state.moist"
	case record.RunawayGreen:
		return "state.runaway"
	}
	return "state.beyond"
}

// fileStem makes a name fit for a file.
func fileStem(s string) string {
	s = strings.Map(func(r rune) rune {
		if r < 0x80 && (unicode.IsLetter(r) || unicode.IsDigit(r) || r == '-' || r == '_') {
			return r
		}
		return -1
	}, s)
	if s == "" {
		return "run"
	}
	return s[:min(len(s), 40)]
}

// sentence makes words a sentence: a capital at the start, a full stop at the end.
func sentence(s string) string {
	s = typeset(upper(clean(s)))
	if s != "" && !strings.ContainsAny(s[len(s)-1:], ".!?…") {
		s += "."
	}
	return s
}

// typeset writes the plain numbers, units and formulas of a sentence as print
// does: 1e-05 as 1 × 10⁻⁵, CO2 as CO₂, W/m2 as W/m², and no line break between
// a number and its unit.
func typeset(s string) string {
	s = roundIn(s)
	s = plainNumber.ReplaceAllStringFunc(s, func(m string) string {
		mant, exp, _ := strings.Cut(m, "e")
		n, err := strconv.Atoi(exp)
		if err != nil {
			return m
		}
		return num.Pretty(mant + "e" + strconv.Itoa(n))
	})
	s = beforeUnit.ReplaceAllString(s, "$1\u00a0$2")
	return strings.NewReplacer("CO2", "CO₂", "/m2", "/m²", "'s ", "’s ").Replace(s)
}

var plainNumber = regexp.MustCompile(`\b[0-9]+(?:\.[0-9]+)?e[+-]?[0-9]{1,3}\b`)

var beforeUnit = regexp.MustCompile(`([0-9⁰¹²³⁴⁵⁶⁷⁸⁹]) (%|K|[GMk]?yr|ppm|bar|Tmol/yr|Emol|mmol/kg|kJ/mol|M_E|TW|W/m[2²]|au)`)

func upper(s string) string {
	r, n := utf8.DecodeRuneInString(s)
	if n == 0 {
		return s
	}
	return string(unicode.ToUpper(r)) + s[n:]
}

// clip cuts a text to n characters.
func clip(s string, n int) string {
	r := []rune(s)
	if len(r) <= n {
		return s
	}
	return strings.TrimSpace(string(r[:n-1])) + "…"
}
