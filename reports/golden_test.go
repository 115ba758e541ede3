package reports

import (
	"bytes"
	"io"
	"strings"
	"testing"

	"cycle/carbon/record"
)

// rendered is what a writer writes.
func rendered(t *testing.T, write func(io.Writer) error) string {
	t.Helper()
	var b bytes.Buffer
	if err := write(&b); err != nil {
		t.Fatal(err)
	}
	return b.String()
}

// absurdExplanation, absurdMap and absurdComparison hold numbers that no planet
// has and that contradict one another.
func absurdExplanation() *record.Explanation {
	e := explanation("")
	e.Run = absurd()
	e.Outcome = record.Outcome{Kind: record.MoistGreen, TimeGyr: -7.125, ErrorGyr: 99, Sentence: "It boils at -7.125 Gyr.", Why: "no reason"}
	e.Histories = 31337
	e.Cause = record.Cause{Shares: []record.Share{{Driver: "land", Gyr: 777}, {Driver: "sunlight", Gyr: -888}}, WholeGyr: 12.5, Words: "777 and -888 make 12.5"}
	e.Combinations[0].TimeGyr = 4321.5
	e.Margins = []record.Margin{{Boundary: "warm branch", Side: "cold", TimeGyr: -3, Value: -66, Words: "closest to freezing at -3 Gyr with -66 K"}}
	for i := range e.Rescues {
		e.Rescues[i].FromText, e.Rescues[i].ToText, e.Rescues[i].Part = "-55 au", "66.5 au", 123
	}
	e.Elasticities[0].Value, e.Elasticities[0].Error, e.Elasticities[0].Gyr = -9999, 5000, 0.25
	e.Distances[3].Gain, e.Distances[4].ResponseKyr = -321, 6.5e9
	e.Spread = record.Spread{LawGyr: -1, ParameterGyr: -2, Words: "the law moves it by -1 Gyr"}
	return e
}

func absurdMap() *record.Map {
	m := fateMap("")
	m.Shares = []record.KindShare{{Kind: record.Snowball, Share: 7}, {Kind: record.Temperate, Share: -2.5}, {Kind: record.MoistGreen, Share: 0.125}}
	m.Points[0].X, m.Points[0].Y, m.Points[0].TimeGyr = -12345, 1e9, 98765
	m.Meant = "each point is 999 planets at -1 K"
	m.Run = absurd()
	return m
}

func absurdComparison() *record.Comparison {
	c := comparison("")
	c.Words = "-3 inputs differ"
	c.Agree = -70
	c.Differ[0].Values = []string{"-1 au", "1e99 au", "0.333333333333 au"}
	c.Results[0].Liquid, c.Results[1].Liquid = -654, 321
	c.Results[0].Outcome = record.Outcome{Kind: record.WaterLost, TimeGyr: -88.5, ErrorGyr: 44, Sentence: "Dry at -88.5 Gyr.", Why: "for 7 reasons"}
	c.Margins[0].Values[0], c.Margins[0].TimeGyr[0] = -1234, 5678
	c.Runs[0] = absurd()
	return c
}

// The words of every kind of report on page and terminal, from hand-made
// records: the absurd ones show that every number comes out as given.
func TestEveryGolden(t *testing.T) {
	e, ae := explanation(""), absurdExplanation()
	m, am := fateMap(""), absurdMap()
	c, ac := comparison(""), absurdComparison()
	n := absurdEnsemble()
	o := TerminalOptions{}
	for _, g := range []struct {
		name  string
		write func(io.Writer) error
		page  bool
		want  []string // of the absurd numbers
	}{
		{"explain", func(w io.Writer) error { return ExplainTerminal(w, e, o) }, false, nil},
		{"explain", func(w io.Writer) error { return ExplainHTML(w, e) }, true, nil},
		{"absurd-explain", func(w io.Writer) error { return ExplainTerminal(w, ae, o) }, false, []string{"It boils at -7.125 Gyr", "+777 Gyr", "-888 Gyr", "4321.500 Gyr", "-66 K", "-55 -> 66.5 au", "-9999 ± 5000", "-1 Gyr"}},
		{"absurd-explain", func(w io.Writer) error { return ExplainHTML(w, ae) }, true, []string{"It boils at -7.125", "+777", "−888", "+12.5", "4321.500 Gyr", "-55", "66.5", "12300 %", "−9999", "31337", "−321", "6.5 × 10⁹"}},
		{"map", func(w io.Writer) error { return MapTerminal(w, m, o) }, false, nil},
		{"map", func(w io.Writer) error { return MapHTML(w, m) }, true, nil},
		{"absurd-map", func(w io.Writer) error { return MapTerminal(w, am, o) }, false, []string{"700 % of the map", "-250 % of the map", "12.5 % of the map", "999 planets"}},
		{"absurd-map", func(w io.Writer) error { return MapHTML(w, am) }, true, []string{"700", "-250", "12.5", "−12345", "98765"}},
		{"compare", func(w io.Writer) error { return CompareTerminal(w, c, o) }, false, nil},
		{"compare", func(w io.Writer) error { return CompareHTML(w, c) }, true, nil},
		{"absurd-compare", func(w io.Writer) error { return CompareTerminal(w, ac, o) }, false, []string{"-70 agree", "-654 Gyr", "-88.50 ± 44.00 Gyr", "-1234 at 5678.000 Gyr", "-1 au", "1e99 au", "0.333333 au"}},
		{"absurd-compare", func(w io.Writer) error { return CompareHTML(w, ac) }, true, []string{"-70 inputs are the same", "-654", "321", "−88.50", "44.00", "−1234", "For 7 reasons", "0.333333"}},
		{"absurd-ensemble", func(w io.Writer) error { return EnsembleTerminal(w, n, o) }, false, []string{"123456 members, seed 77", "12.34 %", "1.111  3.333  5.555"}},
		{"absurd-ensemble", func(w io.Writer) error { return EnsembleHTML(w, n) }, true, []string{"123456", "12.3", "1.111, 3.333, 5.555", "76.5"}},
	} {
		text, file := rendered(t, g.write), g.name+".txt"
		if g.page {
			text, file = words(text), g.name+".words.txt"
		}
		for _, want := range g.want {
			if !strings.Contains(text, want) {
				t.Errorf("%s lacks %q", file, want)
			}
		}
		golden(t, file, text)
	}
}
