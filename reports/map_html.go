package reports

import (
	_ "embed"
	"fmt"
	"html/template"
	"io"
	"math"
	"sort"
	"strings"

	"cycle/carbon/record"
	"cycle/reports/internal/num"
	"cycle/reports/internal/page"
)

//go:embed map.tmpl
var mapTemplate string

var mapPage = template.Must(page.Parse("map", reuseTemplate+plotTemplate+mapTemplate, plotFuncs))

type mapBody struct {
	*record.Map
	reuse
	ShortTitle, Heading, Meant, Made string
	Command                          string
	Plots                            []*plot
	Shares                           []mapShare
	LineNotes                        []string
	Facts                            []fact
	Scenario, Licences               string
}

type mapShare struct {
	blotOf
	Name, Value string
	Bar         barOf
}

// MapHTML writes the map as report.html.
func MapHTML(w io.Writer, m *record.Map) error {
	b := &mapBody{Map: m, Licences: Licences(), Command: clean(m.Command)}
	b.ShortTitle = clip(titleFor(m.Title, m.Name), 120)
	b.Heading = sentence(fmt.Sprintf("which fate where: %s against %s", axisName(&m.Y), axisName(&m.X)))
	b.Meant = sentence(m.Meant)
	b.Made = typeset(fmt.Sprintf("%d histories. Cells were halved where outcomes differ, so that a boundary lies within 1/%d of each axis, %s of it.", len(m.Points), m.N, num.Percent(1/float64(m.N))))
	var shares []float64
	for _, s := range m.Shares {
		shares = append(shares, s.Share)
	}
	for i, bar := range bars(shares, "quiet") {
		s := m.Shares[i]
		b.Shares = append(b.Shares, mapShare{blotOf: blot(s.Kind, 0, false), Name: typeset(clean(string(s.Kind))), Value: num.Percent(s.Share), Bar: bar})
	}
	if largest := b.largest(); len(largest) > 0 {
		var parts []string
		for i, s := range largest {
			if i < 3 {
				parts = append(parts, s.Name+" "+s.Value)
			}
		}
		b.Heading = sentence(fmt.Sprintf("over %s and %s: %s of the map", clean(m.X.Key), clean(m.Y.Key), strings.Join(parts, ", ")))
		if w := b.own(); w != "" {
			b.Heading = strings.TrimSuffix(b.Heading, ".") + "; " + lower(w) + "."
		}
	}
	for _, l := range m.Lines {
		b.LineNotes = append(b.LineNotes, sentence(l.Name+": "+l.Words))
	}
	b.reuse = reuseOf(methodsOfMap(m), m.Works)
	b.plots()
	mapNumbers(b.Plots, m)
	if m.Run != nil {
		b.Scenario = m.Run.Scenario
	}
	b.Facts = []fact{{Name: "Scenario", Value: clean(m.Name)}, {Name: "Hash of the scenario", Value: clean(m.Hash)}}
	doc := &page.Document{Title: clip(b.Heading, 120) + " – cycle", Label: b.ShortTitle, File: fileStem(m.Name) + "-map", Data: &page.Data{}, Outcome: nan(), Present: nan(), Body: b}
	if err := doc.Finish(); err != nil {
		return err
	}
	return doc.Write(w, mapPage)
}

// largest lists the fates by the part of the map they take.
func (b *mapBody) largest() []mapShare {
	order := make([]int, len(b.Map.Shares))
	for i := range order {
		order[i] = i
	}
	sort.SliceStable(order, func(i, j int) bool { return b.Map.Shares[order[i]].Share > b.Map.Shares[order[j]].Share })
	var out []mapShare
	for _, i := range order {
		out = append(out, b.Shares[i])
	}
	return out
}

// own says what becomes of the scenario itself.
func (b *mapBody) own() string {
	m := b.Map
	if m.Run == nil || m.Steady || m.Run.Outcome.Kind == "" {
		return ""
	}
	o := &m.Run.Outcome
	return typeset("The scenario itself: " + fateText(o.Kind, o.TimeGyr, !lasting(o.Kind)))
}

// doubts are those of the map, and those of the scenario's own history.
func (b *mapBody) doubts() []record.Warning {
	out := append([]record.Warning(nil), b.Map.Warnings...)
	if b.Map.Run != nil {
		for _, w := range b.Map.Run.Warnings {
			w.Words = "in the scenario’s own history, " + clean(w.Words)
			out = append(out, w)
		}
	}
	return out
}

func axisName(a *record.Axis) string {
	if a.Unit == "" {
		return clean(a.Key)
	}
	return clean(a.Key) + " in " + num.Unit(a.Unit)
}

// frameOf sets an empty plot over the map's axes.
func frameOf(m *record.Map, id, title string) *plot {
	x := plotAxis{Name: axisWords(&m.X), Lo: m.X.Lo, Hi: m.X.Hi, Log: m.X.Log}
	y := plotAxis{Name: axisWords(&m.Y), Lo: m.Y.Lo, Hi: m.Y.Hi, Log: m.Y.Log}
	p := newPlot(id, title, x, y)
	p.H = 560
	p.B = p.H - 52
	p.X.Ticks, p.Y.Ticks = p.ticks(&p.X, true), p.ticks(&p.Y, false)
	return p
}

// cells joins the places of the lattice to which pick gives the same name into one
// path. u and v tell where in its cell a place lies.
func cells(p *plot, m *record.Map, pick func(c *record.FateCell, u, v float64) string) map[string]string {
	// Rows of cells of one name are drawn as one rectangle.
	name := make([]string, m.N*m.N)
	for i := range m.Cells {
		c := &m.Cells[i]
		for x := c.I; x < c.I+c.Size; x++ {
			for y := c.J; y < c.J+c.Size; y++ {
				name[y*m.N+x] = pick(c, (float64(x-c.I)+0.5)/float64(c.Size), (float64(y-c.J)+0.5)/float64(c.Size))
			}
		}
	}
	type run struct{ from, to int }
	out := map[string]*strings.Builder{}
	draw := func(s string, r run, y0, y1 int) {
		if s == "" {
			return
		}
		if out[s] == nil {
			out[s] = &strings.Builder{}
		}
		w, h := (p.R-p.L)/float64(m.N), (p.B-p.T)/float64(m.N)
		fmt.Fprintf(out[s], "M%.1f %.1fH%.1fV%.1fH%.1fZ", p.L+w*float64(r.from), p.B-h*float64(y0), p.L+w*float64(r.to), p.B-h*float64(y1), p.L+w*float64(r.from))
	}
	// Equal rows above one another are drawn once.
	for y := 0; y < m.N; {
		z := y + 1
		for z < m.N && equal(name[y*m.N:(y+1)*m.N], name[z*m.N:(z+1)*m.N]) {
			z++
		}
		for x := 0; x < m.N; {
			k := x + 1
			for k < m.N && name[y*m.N+k] == name[y*m.N+x] {
				k++
			}
			draw(name[y*m.N+x], run{x, k}, y, z)
			x = k
		}
		y = z
	}
	paths := map[string]string{}
	for s, b := range out {
		paths[s] = b.String()
	}
	return paths
}

func equal(a, b []string) bool {
	for i := range a {
		if a[i] != b[i] {
			return false
		}
	}
	return true
}

func (b *mapBody) plots() {
	m := b.Map
	p := frameOf(m, "map", "Which fate where")
	paths := cells(p, m, func(c *record.FateCell, _, _ float64) string { return string(c.Kind) })
	for _, k := range record.Kinds {
		if d := paths[string(k)]; d != "" {
			p.Areas = append(p.Areas, plotPath{Role: outcomeRole(k), D: d, Pattern: kindPattern(k)})
			p.Keys = append(p.Keys, plotKey{Role: outcomeRole(k), Pattern: kindPattern(k), Area: true, Name: typeset(string(k))})
		}
	}
	overlay(p, m)
	for i, s := range b.largest() {
		if i == 4 {
			break
		}
		p.Caption = append(p.Caption, typeset(fmt.Sprintf("%s on %s of the map.", upper(s.Name), s.Value)))
	}
	if w := b.own(); w != "" {
		p.Caption = append(p.Caption, w+".")
	}
	p.Doubts = beside(b.doubts(), every)
	p.Alt = p.Title + ". " + strings.Join(p.Caption, " ")
	b.Plots = append(b.Plots, p)

	// The date of failure as shading, for what fails.
	lo, hi := math.Inf(1), math.Inf(-1)
	fails := func(c *record.FateCell) bool {
		return c.Kind != record.Temperate && c.Kind != record.StarLeft && c.Kind != record.Undecided && known(c.TimeGyr)
	}
	for i := range m.Cells {
		if c := &m.Cells[i]; fails(c) {
			lo, hi = math.Min(lo, c.TimeGyr), math.Max(hi, c.TimeGyr)
		}
	}
	if !(hi > lo*1.001) || m.Steady {
		return
	}
	const steps = 8
	q := frameOf(m, "dates", "When it fails")
	shade := cells(q, m, func(c *record.FateCell, u, v float64) string {
		if !fails(c) {
			return ""
		}
		k := c.Corners
		t := (1-v)*((1-u)*k[0]+u*k[1]) + v*((1-u)*k[2]+u*k[3])
		if !known(t) {
			t = c.TimeGyr
		}
		return fmt.Sprint(max(0, min(int(steps*(t-lo)/(hi-lo)), steps-1)))
	})
	for k := 0; k < steps; k++ {
		role := fmt.Sprintf("shade.%d", k+1)
		if d := shade[fmt.Sprint(k)]; d != "" {
			q.Areas = append(q.Areas, plotPath{Role: role, D: d})
			q.Keys = append(q.Keys, plotKey{Role: role, Area: true, Name: num.Fix(lo+(hi-lo)*float64(k)/steps, 2) + " to " + num.Fix(lo+(hi-lo)*float64(k+1)/steps, 2) + "\u00a0Gyr"})
		}
	}
	overlay(q, m)
	q.Caption = []string{typeset(fmt.Sprintf("Failures come between %s and %s; where there is no colour nothing fails.", num.Age(lo), num.Age(hi)))}
	q.Alt = q.Title + ". " + q.Caption[0]
	b.Plots = append(b.Plots, q)
}

// overlay draws the exact boundaries and where the scenario itself is.
func overlay(p *plot, m *record.Map) {
	for i, l := range m.Lines {
		dash := []string{"", "dashed", "dotted"}[i%3]
		p.Lines = append(p.Lines, plotPath{Role: "paper", D: p.line(l.X, l.Y), Halo: true})
		if p.curve("ink", dash, true, l.X, l.Y) {
			p.Keys = append(p.Keys, plotKey{Role: "ink", Dash: dash, Name: "boundary: " + clean(l.Name)})
		}
	}
	if len(m.Path) > 1 {
		var xs, ys []float64
		for _, q := range m.Path {
			xs, ys = append(xs, q.X), append(ys, q.Y)
		}
		if p.curve("paper", "", true, xs, ys) { // so that the path stands out from every fate
			p.Lines[len(p.Lines)-1].Halo = true
		}
		p.curve("flux.pulse", "", true, xs, ys)
		first, last := m.Path[0], m.Path[len(m.Path)-1]
		p.dot("flux.pulse", num.Age(first.AgeGyr), first.X, first.Y, false)
		end := num.Age(last.AgeGyr)
		if known(m.X.Own) && known(m.Y.Own) && math.Hypot(m.X.Part(last.X)-m.X.Part(m.X.Own), m.Y.Part(last.Y)-m.Y.Part(m.Y.Own)) < 0.08 {
			end = ""
		}
		p.dot("flux.pulse", end, last.X, last.Y, false)
		p.Keys = append(p.Keys, plotKey{Role: "flux.pulse", Name: "the scenario’s own path"})
	}
	if known(m.X.Own) && known(m.Y.Own) {
		p.dot("ink", "the scenario", m.X.Own, m.Y.Own, true)
	}
}
