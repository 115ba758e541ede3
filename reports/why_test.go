package reports

import (
	"bytes"
	"encoding/csv"
	"encoding/json"
	"io"
	"math"
	"path/filepath"
	"strings"
	"testing"

	"github.com/mattn/go-runewidth"
	"github.com/parquet-go/parquet-go"

	"cycle/carbon/record"
)

// explanation is made up; word stands wherever a text of the user may.
func explanation(word string) *record.Explanation {
	run := quessmere()
	e := &record.Explanation{Format: 1, Title: "Quessmere " + word, Name: "quessmere", Hash: strings.Repeat("ab", 32), Version: "0.0.0", Command: "cycle explain scenario.toml " + word,
		Run: run, Outcome: run.Outcome, Fails: true, Clock: "freezing", Histories: 321,
		Drivers: []record.Driver{{Name: "sunlight", Doc: "the star's luminosity", From: 900, To: 1100, Unit: "W/m2"}, {Name: "land", Doc: "the land fraction", From: 0.1, To: 0.7}},
		Combinations: []record.Combination{
			{Changing: []string{"sunlight", "land"}, Outcome: record.LimitCycles, TimeGyr: 1.2, Clock: "freezing"},
			{Changing: []string{"land"}, Still: []string{"sunlight"}, Outcome: record.Snowball, TimeGyr: 1.1, Clock: "freezing"},
			{Changing: []string{"sunlight"}, Still: []string{"land"}, Outcome: record.Temperate, TimeGyr: 5, Censored: true},
			{Still: []string{"sunlight", "land"}, TimeGyr: math.NaN(), Words: "cannot be computed: " + word},
		},
		Cause:    record.Cause{Shares: []record.Share{{Driver: "land", Gyr: -3.9}, {Driver: "sunlight", Gyr: 0.1}}, WholeGyr: -3.8, Bounds: true, Words: "Held at its start, land takes this failure away " + word},
		Margins:  []record.Margin{{Boundary: "warm branch", Side: "cold", TimeGyr: 1.19, Value: 1.01, Words: "closest to freezing at 1.19 Gyr " + word}},
		Warnings: []record.Warning{{About: "radiation", Words: "outside " + word}},
		Elasticities: []record.Elasticity{
			{Key: "orbit.distance", Doc: "semi-major axis", At: "1.1 au", Value: -3.1, Error: 0.01, Gyr: -0.037, Near: "temperate throughout at -2 %"},
			{Key: "land.after", Doc: "land", At: "0.7", Value: 0.4, Error: 1e-5, Gyr: 0.005},
			{Key: "albedo.width", Doc: "width", At: "10 K", Value: math.NaN(), Error: math.NaN(), Gyr: math.NaN(), Near: word},
		},
		ElasticWords: "An elasticity of 1 means that 1 % more of the input moves the date by 1 %.",
		Spread:       record.Spread{LawGyr: 1.5, ParameterGyr: 0.7, Words: "The choice of law moves the date by ±1.5 Gyr"},
		Works:        run.Works,
	}
	for i, k := range []string{"land.after", "orbit.distance", "sources.scale"} {
		e.Rescues = append(e.Rescues, record.Rescue{Key: k, Doc: word, From: 1, To: 2, FromText: "1 au", ToText: "2 au", Published: i < 2, Found: true, Relative: 1, Part: 0.1 * float64(i+1), Outcome: record.Temperate, TimeGyr: 5, Range: "0 to 3"})
	}
	e.Rescues = append(e.Rescues, record.Rescue{Key: "albedo.ice", Words: "none in range", To: math.NaN(), Relative: math.NaN(), Part: math.NaN()})
	parts := map[string][]string{"weathering.land": {"menou2015", "west2012"}, "radiation": {"williams1997"}}
	for _, p := range []string{"weathering.land", "radiation"} {
		for _, l := range parts[p] {
			e.Variants = append(e.Variants, record.LawVariant{Changed: []string{p + " = " + l}, Parts: []string{p}, Laws: []string{l}, Outcome: record.Snowball, TimeGyr: 0.9, Clock: "freezing", Same: true})
		}
	}
	for _, l := range parts["weathering.land"] {
		e.Variants = append(e.Variants, record.LawVariant{Changed: []string{"a", "b"}, Parts: []string{"weathering.land", "radiation"}, Laws: []string{l, "williams1997"}, Outcome: record.Condensation, TimeGyr: 0.4})
	}
	for i := 0; i <= 30; i++ {
		t := 0.2 + float64(i)/30
		e.Distances = append(e.Distances, record.Distance{AgeGyr: t, TemperatureK: 295 - 15*t, PCO2Bar: 0.1, Outgassing: 30 / (1 + t), SunlightWm2: 900, ColdFactor: 3 - 1.6*t, ColdSun: 10 - 8*t, ColdKelvin: 12 - 9*t,
			HotFactor: 20, HotSun: 50, HotKelvin: 50 + 15*t, SupplyPercent: 10, Gain: 0.5, ResponseKyr: 300, FoldK: 278, FoldOutgassing: 10 + 4*t})
	}
	for k := 0; k < 2; k++ {
		c := record.Equilibria{AgeGyr: 0.2 + float64(k), Folds: []record.Fold{{Steady: record.Steady{TemperatureK: 278, Outgassing: 12 + float64(k)}, Name: record.FoldCold}}, Boundaries: record.Boundaries{WarmNeeds: 12 + float64(k), ThawsAbove: 4}}
		for t := 220.0; t < 330; t++ {
			c.Curve = append(c.Curve, record.CurvePoint{TemperatureK: t, PCO2Bar: 0.1, Outgassing: (12 + float64(k)) * math.Exp((t-278)/30), Climate: t > 278 || t < 250})
		}
		e.Curves = append(e.Curves, c)
	}
	return e
}

func fateMap(word string) *record.Map {
	m := &record.Map{Format: 1, Title: "Quessmere " + word, Name: "quessmere", Hash: strings.Repeat("cd", 32), Version: "0.0.0", Command: "cycle map " + word, N: 8, Meant: "each point is a history " + word,
		X: record.Axis{Key: "orbit.distance", Doc: "semi-major axis", Unit: "au", Lo: 0.9, Hi: 1.3, Own: 1.1}, Y: record.Axis{Key: "sources.scale", Lo: 0.1, Hi: 10, Log: true, Own: 1}, Run: quessmere()}
	kind := func(i, j int) record.Kind { return record.Kinds[(i/2+3*(j/3))%len(record.Kinds)] }
	for i := 0; i <= 8; i++ {
		for j := 0; j <= 8; j++ {
			p := record.FatePoint{I: i, J: j, X: m.X.At(i, 8), Y: m.Y.At(j, 8), Kind: kind(i, j), TimeGyr: 0.3 + 0.1*float64(i)}
			if p.Kind == record.Undecided {
				p.Words, p.TimeGyr = "makes no planet, "+word, math.NaN()
			}
			m.Points = append(m.Points, p)
			if i < 8 && j < 8 {
				m.Cells = append(m.Cells, record.FateCell{I: i, J: j, Size: 1, Kind: p.Kind, TimeGyr: p.TimeGyr, Mixed: true, Corners: [4]float64{p.TimeGyr, p.TimeGyr + 0.1, p.TimeGyr, math.NaN()}})
			}
		}
	}
	for _, k := range record.Kinds {
		m.Shares = append(m.Shares, record.KindShare{Kind: k, Share: 0.1})
	}
	m.Lines = []record.BoundaryLine{{Name: "warm state lost", Words: "outgassing below which " + word, AgeGyr: 4.57, X: []float64{0.9, 1, 1.1, 1.2}, Y: []float64{0.2, 0.5, math.NaN(), 2}}}
	for i := 0; i < 9; i++ {
		m.Path = append(m.Path, record.PathPoint{AgeGyr: 0.2 + float64(i)/8, X: 1.25 - 0.015*float64(i), Y: 5 / (1 + float64(i)/2)})
	}
	return m
}

func comparison(word string) *record.Comparison {
	c := &record.Comparison{Format: 1, Version: "0.0.0", Command: "cycle compare a b " + word, Names: []string{"a " + word, "b", "c"}, Agree: 70, Words: "1 input differs " + word,
		Differ: []record.Difference{{Key: "orbit.distance", Doc: "semi-major axis " + word, Values: []string{"1 au " + word, "1.1 au", ""}}}}
	for i, r := range []*record.Run{orrindel(), quessmere(), orrindel()} {
		c.Runs = append(c.Runs, r)
		c.Results = append(c.Results, record.Result{Name: c.Names[i], Hash: "ff", Outcome: r.Outcome, Liquid: float64(i + 1), Start: r.Start, Reference: r.Reference, Feedback: r.Feedback})
	}
	c.Margins = []record.MarginRow{{Boundary: "warm branch", Side: "cold", Unit: "K", Values: []float64{1, math.NaN(), 3}, TimeGyr: []float64{1, math.NaN(), 2}}}
	c.Works = orrindel().Works
	return c
}

// renderings are all files of the three commands.
func renderings(word string) map[string]func(io.Writer) error {
	e, m, c := explanation(word), fateMap(word), comparison(word)
	return map[string]func(io.Writer) error{
		"explain.html":      func(w io.Writer) error { return ExplainHTML(w, e) },
		"map.html":          func(w io.Writer) error { return MapHTML(w, m) },
		"compare.html":      func(w io.Writer) error { return CompareHTML(w, c) },
		"explanation.json":  func(w io.Writer) error { return ExplanationJSON(w, e) },
		"map.json":          func(w io.Writer) error { return MapJSON(w, m) },
		"comparison.json":   func(w io.Writer) error { return ComparisonJSON(w, c) },
		"combinations.csv":  func(w io.Writer) error { return CombinationsCSV(w, e) },
		"rescues.csv":       func(w io.Writer) error { return RescuesCSV(w, e) },
		"elasticities.csv":  func(w io.Writer) error { return ElasticitiesCSV(w, e) },
		"laws.csv":          func(w io.Writer) error { return LawsCSV(w, e) },
		"distances.csv":     func(w io.Writer) error { return DistancesCSV(w, e) },
		"points.csv":        func(w io.Writer) error { return MapCSV(w, m) },
		"lines.csv":         func(w io.Writer) error { return MapLinesCSV(w, m) },
		"inputs.csv":        func(w io.Writer) error { return ComparedInputsCSV(w, c) },
		"results.csv":       func(w io.Writer) error { return ComparedResultsCSV(w, c) },
		"histories.csv":     func(w io.Writer) error { return HistoriesCSV(w, c) },
		"points.parquet":    func(w io.Writer) error { return MapParquet(w, m) },
		"histories.parquet": func(w io.Writer) error { return HistoriesParquet(w, c) },
		"explain.txt":       func(w io.Writer) error { return ExplainTerminal(w, e, TerminalOptions{}) },
		"map.txt":           func(w io.Writer) error { return MapTerminal(w, m, TerminalOptions{}) },
		"compare.txt":       func(w io.Writer) error { return CompareTerminal(w, c, TerminalOptions{}) },
	}
}

// Every file of the three commands is well formed, the same each time, and no
// text in it becomes markup, code or a terminal sequence.
func TestWhyFiles(t *testing.T) {
	const word = "</script><script>alert(1)</script><img src=x onerror=alert(2)>\x1b[31m\u202e\"'&"
	again := renderings(word)
	for name, write := range renderings(word) {
		var b, second bytes.Buffer
		if err := write(&b); err != nil {
			t.Errorf("%s: %v", name, err)
			continue
		}
		if err := again[name](&second); err != nil || !bytes.Equal(b.Bytes(), second.Bytes()) {
			t.Errorf("%s: a second time gives other bytes (%v)", name, err)
		}
		text := b.String()
		switch filepath.Ext(name) {
		case ".html":
			for _, bad := range []string{"<script>alert", "<img src=x", "\x1b"} {
				if strings.Contains(text, bad) {
					t.Errorf("%s: %q reaches the page", name, bad)
				}
			}
			if strings.Contains(text, " style=") || strings.Contains(text, " onclick=") || strings.Contains(text, "ZgotmplZ") {
				t.Errorf("%s: a style, a handler or a refused value in the markup", name)
			}
			for _, bad := range []string{">NaN", "NaN<", "+Inf"} {
				if strings.Contains(text[:strings.Index(text, `id="page-data"`)], bad) {
					t.Errorf("%s: shows %q", name, bad)
				}
			}
		case ".json":
			var v any
			if err := json.Unmarshal(b.Bytes(), &v); err != nil {
				t.Errorf("%s: %v", name, err)
			}
		case ".csv":
			rows, err := csv.NewReader(&b).ReadAll() // all rows as long as the first
			if err != nil || len(rows) < 2 {
				t.Errorf("%s: %d rows, %v", name, len(rows), err)
			}
			if strings.Contains(text, "NaN") || strings.Contains(text, "\x1b") {
				t.Errorf("%s: holds NaN or an escape", name)
			}
		case ".parquet":
			f, err := parquet.OpenFile(bytes.NewReader(b.Bytes()), int64(b.Len()))
			if err != nil || f.NumRows() == 0 {
				t.Errorf("%s: %v", name, err)
			}
		case ".txt":
			for _, line := range strings.Split(text, "\n") {
				if runewidth.StringWidth(line) > 80 {
					t.Errorf("%s: %d columns: %q", name, runewidth.StringWidth(line), line)
				}
			}
			if strings.ContainsAny(text, "\x1b\u202e") || strings.Contains(text, "NaN") {
				t.Errorf("%s: holds an escape, a mark of direction or NaN", name)
			}
		}
	}
}

// The areas of a map are drawn whole: every outcome covers its share of the frame.
func TestMapAreas(t *testing.T) {
	m := fateMap("")
	p := frameOf(m, "x", "x")
	count := map[string]int{}
	for _, c := range m.Cells {
		count[string(c.Kind)]++
	}
	frame := (p.R - p.L) * (p.B - p.T)
	for kind, d := range cells(p, m, func(c *record.FateCell, _, _ float64) string { return string(c.Kind) }) {
		area := 0.0
		for _, r := range strings.Split(strings.TrimSuffix(d, "Z"), "Z") {
			r = strings.NewReplacer("M", "", "H", " ", "V", " ").Replace(r)
			var v [6]float64
			for i, s := range strings.Fields(r) {
				if err := json.Unmarshal([]byte(s), &v[i]); err != nil {
					t.Fatal(err)
				}
			}
			area += math.Abs((v[2] - v[0]) * (v[3] - v[1]))
		}
		if want := float64(count[kind]) / 64; math.Abs(area/frame-want) > 2e-3 {
			t.Errorf("%s covers %.4f of the frame, want %.4f", kind, area/frame, want)
		}
	}
}

// Curves are cut at the frame, not dropped there.
func TestCurvesAreCutAtTheFrame(t *testing.T) {
	p := newPlot("x", "x", plotAxis{Lo: 0, Hi: 10}, plotAxis{Lo: 1, Hi: 100, Log: true})
	p.L, p.R, p.T, p.B = 0, 100, 0, 100
	for _, c := range []struct {
		x, y []float64
		want string
	}{
		{[]float64{5, 5}, []float64{1e4, 1e-2}, "M50.0 0.0L50.0 100.0"},
		{[]float64{-10, 20}, []float64{10, 10}, "M0.0 50.0L100.0 50.0"},
		{[]float64{0, 5, 10}, []float64{10, 100, 10}, "M0.0 50.0L50.0 0.0L100.0 50.0"},
		{[]float64{0, math.NaN(), 10, 10}, []float64{10, 10, 10, 1}, "M100.0 50.0L100.0 100.0"},
		{[]float64{20, 30}, []float64{10, 10}, ""},
	} {
		if got := p.line(c.x, c.y); got != c.want {
			t.Errorf("%v, %v: %q, want %q", c.x, c.y, got, c.want)
		}
	}
}
