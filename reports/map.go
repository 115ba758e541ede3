package reports

import (
	"fmt"
	"io"
	"strings"

	"cycle/carbon/record"
	"cycle/reports/internal/num"
)

// MapJSON writes what a map is, its boundaries, path and shares as map.json.
func MapJSON(w io.Writer, m *record.Map) error { return structJSON(w, *m) }

func mapSheet(m *record.Map) *sheet {
	s := &sheet{name: "points", head: []string{header(m.X.Key, m.X.Unit), header(m.Y.Key, m.Y.Unit), "outcome", "time_Gyr", "words"}}
	for i := range m.Points {
		p := &m.Points[i]
		s.add(p.X, p.Y, string(p.Kind), p.TimeGyr, p.Words)
	}
	return s
}

// MapCSV writes every history of the map as points.csv.
func MapCSV(w io.Writer, m *record.Map) error { return mapSheet(m).csv(w) }

// MapParquet writes the same as points.parquet.
func MapParquet(w io.Writer, m *record.Map) error {
	return mapSheet(m).parquet(w, map[string]string{"title": m.Title, "scenario_hash": m.Hash, "version": m.Version})
}

// MapLinesCSV writes the exact boundaries and the scenario's own path.
func MapLinesCSV(w io.Writer, m *record.Map) error {
	s := &sheet{name: "lines", head: []string{"line", "age_Gyr", header(m.X.Key, m.X.Unit), header(m.Y.Key, m.Y.Unit)}}
	for _, l := range m.Lines {
		for i := range l.X {
			s.add(l.Name, l.AgeGyr, l.X[i], l.Y[i])
		}
	}
	for _, p := range m.Path {
		s.add("the scenario", p.AgeGyr, p.X, p.Y)
	}
	return s.csv(w)
}

// mapGlyph draws an outcome on a terminal.
var mapGlyph = map[record.Kind]string{record.Temperate: "=", record.Snowball: "*", record.LimitCycles: "~", record.MoistGreen: "^", record.RunawayGreen: "!", record.Condensation: "c",
	record.WaterLost: "w", record.StarLeft: "-", record.BeyondRange: "?", record.Undecided: "x"}

// MapTerminal draws the map with letters.
func MapTerminal(w io.Writer, m *record.Map, opt TerminalOptions) error {
	t := newTerminal(opt, titleFor(m.Title, m.Name), m.Hash, m.Version)
	t.paragraph(upper(m.Meant)+".", 4)
	const tall = 20
	wide := t.width - 12
	at := make([]record.Kind, m.N*m.N)
	for _, c := range m.Cells {
		for i := c.I; i < c.I+c.Size; i++ {
			for j := c.J; j < c.J+c.Size; j++ {
				at[i*m.N+j] = c.Kind
			}
		}
	}
	own := map[[2]int]string{}
	place := func(x, y float64, mark string) {
		p, q := m.X.Part(x), m.Y.Part(y)
		if p >= 0 && p <= 1 && q >= 0 && q <= 1 {
			own[[2]int{min(int(p*float64(wide)), wide-1), min(int(q*tall), tall-1)}] = mark
		}
	}
	for _, p := range m.Path {
		place(p.X, p.Y, "o")
	}
	place(m.X.Own, m.Y.Own, "O")
	t.line(t.dim(axisWords(&m.Y)))
	for r := tall - 1; r >= 0; r-- {
		label := ""
		if r == tall-1 {
			label = num.Short(m.Y.Hi, 3)
		} else if r == 0 {
			label = num.Short(m.Y.Lo, 3)
		}
		line := fmt.Sprintf("%9s ", label)
		for c := 0; c < wide; c++ {
			if s, ok := own[[2]int{c, r}]; ok {
				line += t.bold(s)
				continue
			}
			k := at[(c*m.N/wide)*m.N+r*m.N/tall]
			line += t.ansi("38;5;"+kindColor(k), mapGlyph[k])
		}
		t.line(line)
	}
	lo, hi := num.Short(m.X.Lo, 3), num.Short(m.X.Hi, 3)
	t.line(strings.Repeat(" ", 10) + lo + strings.Repeat(" ", max(wide-len(lo)-len(hi), 1)) + hi)
	t.line(strings.Repeat(" ", 10) + t.dim(axisWords(&m.X)))
	t.line("")
	var rows [][]string
	for _, s := range m.Shares {
		rows = append(rows, []string{mapGlyph[s.Kind] + " " + clean(string(s.Kind)), num.Percent(s.Share) + " of the map"})
	}
	if len(m.Path) > 0 {
		rows = append(rows, []string{"o the scenario's own path", ""})
	} else if known(m.X.Own) && known(m.Y.Own) {
		rows = append(rows, []string{"O the scenario itself", ""})
	}
	t.table("Fates", rows)
	cell := fmt.Sprintf("%d histories; boundaries lie within 1/%d of each axis", len(m.Points), m.N)
	if len(m.Lines) > 0 {
		var names []string
		for _, l := range m.Lines {
			names = append(names, l.Name)
		}
		cell += "; exact boundaries in lines.csv: " + strings.Join(names, ", ")
	}
	t.paragraph(cell+".", 3)
	return t.write(w)
}

func kindColor(k record.Kind) string {
	switch outcomeRole(k) {
	case "state.temperate":
		return glyph[record.StateTemperate].color
	case "state.snowball":
		return glyph[record.StateSnowball].color
	case "state.moist":
		return glyph[record.StateMoist].color
	case "state.runaway":
		return glyph[record.StateRunaway].color
	}
	return glyph[record.StateBeyond].color
}

// axisWords is the key of an axis with its unit.
func axisWords(a *record.Axis) string {
	s := clean(a.Key)
	if a.Unit != "" {
		s += ", " + num.Unit(a.Unit)
	}
	if a.Log {
		s += " (logarithmic)"
	}
	return s
}
