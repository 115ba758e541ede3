package reports

import (
	"bytes"
	"encoding/json"
	"fmt"
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"cycle/carbon/record"
	"cycle/scenarios/ensemble/estimate"
)

// absurd is an ensemble no planet has: what the page shows must be these numbers.
func absurdEnsemble() *record.Ensemble {
	nan := math.NaN()
	missing := record.Interval{Value: nan, Low: nan, High: nan}
	q := func(v float64) record.Interval { return record.Interval{Value: v, Low: v - 0.01, High: math.Inf(1)} }
	evil := `</script><img src=x onerror=alert(1)>`
	return &record.Ensemble{
		Format: 1, Kind: "ensemble", Title: evil, Name: "e", Hash: "abc", Version: "9.9", Seed: 77, Design: "sobol", DesignWords: "some design " + evil,
		Members: 123456, Independent: 123456, Undecided: 12, StartGyr: 0.2, EndGyr: 9, RefAgeGyr: 4.57, Sentence: "Of 123456 histories: snowball in 12 %.",
		Uncertain:  []record.UncertainInput{{Key: "a.b", Distribution: "uniform, 1 to 2 K", Doc: evil, Column: "a_b_K"}},
		Correlated: []string{"a and b: rank correlation 0.5"},
		Shares: []record.FateShare{{Kind: record.Snowball, Count: 14815, Of: 123456, Share: record.Interval{Value: 0.1234, Low: 0.11, High: 0.13}, WithAll: record.Interval{Value: 0.1235, Low: 0.111, High: 0.131}, Typical: 4321},
			{Kind: record.Temperate, Count: 100, Of: 123456, Share: record.Interval{Value: 0.001, Low: 0.0009, High: 0.0011}, WithAll: missing, Typical: -1}},
		Liquid:    record.Curve{Name: "liquid water", TimeGyr: []float64{0.2, 3, 9}, Value: []float64{1, 0.5, 0.25}, Low: []float64{1, 0.4, 0.2}, High: []float64{1, 0.6, 0.3}},
		Incidence: []record.Curve{{Name: string(record.Snowball), TimeGyr: []float64{0.2, 3, 9}, Value: []float64{0, 0.1, 0.7654}, Low: []float64{0, 0.1, 0.7}, High: []float64{0, 0.2, nan}}},
		Dates:     []record.Dates{{Clock: string(record.Snowball), Failure: true, Count: 9, Quantiles: []record.Quantile{{P: 0.05, TimeGyr: q(1.111)}, {P: 0.25, TimeGyr: q(2)}, {P: 0.5, TimeGyr: q(3.333)}, {P: 0.75, TimeGyr: q(4)}, {P: 0.95, TimeGyr: q(5.555)}}}},
		Sensitive: []record.Sensitivities{{Quantity: "years lost", Clock: string(record.Snowball), Count: 9, Of: 10, Method: "by hand", Laws: record.Interval{Value: 0.321, Low: 0.3, High: 0.4}, Rest: missing,
			Inputs: []record.Sensitivity{{Input: "a.b", First: record.Interval{Value: 0.456, Low: 0.4, High: 0.5}, Total: record.Interval{Value: 0.567, Low: 0.5, High: 0.6}, Partial: record.Interval{Value: -0.78, Low: -0.8, High: -0.7}}, {Input: "c.law", First: missing, Total: missing, Partial: missing}}}},
		ByLaw:    []record.ByLaw{{Key: "c.law", Choice: "somebody1999", Kind: record.Snowball, Count: 3, Of: 9, Share: record.Interval{Value: 0.3333, Low: 0.2, High: 0.5}, Median: 2.222, LowGyr: nan, HighGyr: 3}},
		Borders:  []record.Border{{A: record.Snowball, B: record.Temperate, MemberA: 1001, MemberB: 2002, Distance: 0.0123, Apart: "a.b: 1 K and 2 K"}},
		AtAges:   []record.AtAge{{AgeGyr: 2.07, Quantity: "temperature", Unit: "K", Count: 8, Q025: 271, Q16: nan, Q50: 290.5, Q84: 300, Q975: 314}},
		Statuses: []record.StatusCount{{Status: record.StatusEnd, Count: 5}}, Worth: "More would help.",
		Works:    []record.Work{{Key: "x", Text: "Somebody (1999). " + evil, BibTeX: "@article{x}"}},
		Warnings: []record.Warning{{About: "ensemble", Words: "12 members are undecided"}},
		Typical:  []record.Typical{{Kind: record.Snowball, Member: 4321, Rows: []record.Row{{Age: 2e8, Temperature: 290, PCO2: 1e-3}, {Age: 1e9, Temperature: 230, PCO2: nan}}}},
		Command:  "cycle ensemble scenario.toml --members 123456",
	}
}

func TestEnsembleHTML(t *testing.T) {
	e := absurdEnsemble()
	var b bytes.Buffer
	if err := EnsembleHTML(&b, e); err != nil {
		t.Fatal(err)
	}
	s := b.String()
	if strings.Contains(s, "<img src=x") {
		t.Error("a title became markup")
	}
	for _, want := range []string{"123456", "12.3", "4321", "1.111, 3.333, 5.555", "45.6", "56.7", "−0.78", "somebody1999", "1001 and 2002", "290.5", "314.0", "12 members are undecided", "More would help.", "seed 77", "32.1", "--members 123456"} {
		if !strings.Contains(s, want) {
			t.Errorf("the page lacks %q", want)
		}
	}
	if strings.Contains(s, "NaN") && strings.Contains(strings.Split(s, "page-library")[0], ">NaN<") {
		t.Error("NaN on the page")
	}
	if b.Len() > 2e6 {
		t.Errorf("%d bytes", b.Len())
	}
	if err := EnsembleHTML(&b, &record.Ensemble{}); err != nil {
		t.Errorf("an empty ensemble: %v", err)
	}
}

func TestEnsembleJSON(t *testing.T) {
	var b bytes.Buffer
	if err := EnsembleJSON(&b, absurdEnsemble()); err != nil {
		t.Fatal(err)
	}
	var m map[string]any
	if err := json.Unmarshal(b.Bytes(), &m); err != nil {
		t.Fatal(err)
	}
	for _, k := range []string{"format", "kind", "scenario", "hash", "version", "seed", "design", "members", "uncertain", "shares", "liquid_water", "cumulative_incidence", "dates", "sensitivities", "by_law", "borders", "at_ages", "statuses", "more_members", "works", "warnings"} {
		if _, have := m[k]; !have {
			t.Errorf("no %q", k)
		}
	}
	if v := m["shares"].([]any)[1].(map[string]any)["with_all"].(map[string]any)["value"]; v != nil {
		t.Errorf("a missing number is %v", v)
	}
}

func TestEnsembleTerminal(t *testing.T) {
	var b bytes.Buffer
	if err := EnsembleTerminal(&b, absurdEnsemble(), TerminalOptions{Width: 80}); err != nil {
		t.Fatal(err)
	}
	for _, want := range []string{"123456 members, seed 77", "snowball", "12.34 %", "1.111  3.333  5.555", "undecided", "a.b 57 % (50 to 60)", "choices of law 32 %", "More would help.", "12 members are undecided"} {
		if !strings.Contains(b.String(), want) {
			t.Errorf("the terminal lacks %q:\n%s", want, b.String())
		}
	}
	for _, l := range strings.Split(b.String(), "\n") {
		if len([]rune(l)) > 80 {
			t.Errorf("%d columns: %s", len([]rune(l)), l)
		}
	}
	if strings.Contains(b.String(), "\x1b") {
		t.Error("colour where none is wanted")
	}
}

// manyMembers is an ensemble of n invented members, as large as its report gets:
// every outcome occurs and has a typical history, of forty cycles each, and every
// one of forty uncertain inputs has its say on every date.
func manyMembers(n int) *record.Ensemble {
	e := absurdEnsemble()
	e.Title, e.Members, e.Independent, e.DesignWords = "Many members", n, n, "an invented design"
	dice := rand.New(rand.NewPCG(1, 2))
	var events []estimate.Event
	for range n {
		events = append(events, estimate.Event{Time: 0.3 + 9*dice.Float64()*dice.Float64(), Cause: dice.IntN(len(record.Kinds)+1) - 1})
	}
	by, all := estimate.Incidence(events, len(record.Kinds), 240) // as many steps as the program keeps
	e.Incidence, e.Shares, e.Dates, e.Sensitive, e.Typical, e.Uncertain, e.ByLaw = nil, nil, nil, nil, nil, nil, nil
	for i := range 40 {
		e.Uncertain = append(e.Uncertain, record.UncertainInput{Key: fmt.Sprint("part.input", i), Distribution: "uniform, 1 to 2 K", Doc: "what this input means, in a few words"})
	}
	value := func() record.Interval { v := dice.Float64(); return record.Interval{Value: v, Low: v / 2, High: 2 * v} }
	for i, k := range record.Kinds {
		c := record.Curve{Name: string(k)}
		for _, t := range all.Time {
			v, lo, hi := by[i].At(t)
			c.TimeGyr, c.Value, c.Low, c.High = append(c.TimeGyr, t), append(c.Value, v), append(c.Low, lo), append(c.High, hi)
		}
		e.Incidence = append(e.Incidence, c)
		s := record.Sensitivities{Quantity: "date", Clock: string(k), Count: n / 10, Of: n, Laws: value(), Rest: value()}
		for _, u := range e.Uncertain {
			s.Inputs = append(s.Inputs, record.Sensitivity{Input: u.Key, First: value(), Total: value(), Partial: value()})
			e.ByLaw = append(e.ByLaw, record.ByLaw{Key: u.Key, Choice: "somebody1999", Kind: k, Count: 3, Of: 9, Share: value(), Median: 2, LowGyr: 1, HighGyr: 3})
		}
		e.Sensitive = append(e.Sensitive, s)
		e.Shares = append(e.Shares, record.FateShare{Kind: k, Count: n / 10, Of: n, Share: value(), WithAll: value(), Typical: i})
		t := record.Typical{Kind: k, Member: i}
		for _, row := range quessmere().Rows {
			row.Age += 1e6 * float64(i) // no two on the same ages
			row.Temperature *= 1 + 0.001*dice.Float64()
			row.PCO2 *= 1 + 0.01*dice.Float64()
			t.Rows = append(t.Rows, row)
		}
		e.Typical = append(e.Typical, t)
	}
	e.Liquid = e.Incidence[0]
	return e
}

// The report of 100,000 members stays small enough to be mailed, and does not
// grow with their number.
func TestEnsembleSize(t *testing.T) {
	size := func(e *record.Ensemble) int {
		var b bytes.Buffer
		if err := EnsembleHTML(&b, e); err != nil {
			t.Fatal(err)
		}
		return b.Len()
	}
	many, few := manyMembers(100000), manyMembers(5000)
	if n := size(many); n >= 2e6 {
		t.Errorf("the report of 100,000 members takes %d bytes", n)
	} else {
		t.Logf("100,000 members: %d bytes", n)
	}
	many.Typical, few.Typical = nil, nil // one an outcome, however many members
	large, small := size(many), size(few)
	t.Logf("without typical histories: %d bytes; 5000 members: %d", large, small)
	if float64(large) > 1.1*float64(small) {
		t.Errorf("twenty times the members make %d bytes of %d", large, small)
	}
}
