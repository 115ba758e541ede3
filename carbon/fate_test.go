package carbon

import (
	"context"
	"math"
	"testing"

	"cycle/carbon/record"
)

// A row of an ensemble says what the full run says.
func TestFate(t *testing.T) {
	for _, set := range []func(*Setup){
		func(s *Setup) { s.Solve = "total" },
		func(s *Setup) { s.Distance *= 1.1; s.OutgassingRef, s.RidgeRef, s.ArcRef = 3e12, 1e12, 1e12 },
		func(s *Setup) { s.Distance *= 0.9 },
	} {
		s := NewSetup()
		set(s)
		run, err := Run(context.Background(), s.Clone())
		if err != nil {
			t.Fatal(err)
		}
		age := 1e9
		x, err := Fate(context.Background(), s.Clone(), []float64{age, 1e12})
		if err != nil {
			t.Fatal(err)
		}
		// An anchored row meets the reference CO2 to 0.01 %, a run more closely.
		same := func(a, b float64) bool {
			return a == b || s.Solve != "nothing" && math.Abs(a-b) < 1e-5*b || math.IsNaN(a) && math.IsNaN(b)
		}
		if x.Kind != run.Outcome.Kind || !same(x.TimeGyr, run.Outcome.TimeGyr) {
			t.Errorf("row says %s at %v, run %s at %v", x.Kind, x.TimeGyr, run.Outcome.Kind, run.Outcome.TimeGyr)
		}
		if x.Freezes != run.Freezes || math.Abs(x.FrozenShare-run.FrozenShare) > 1e-12 || s.Solve == "nothing" && x.Steps != run.Solver.Steps {
			t.Errorf("row has %d freezes, %v frozen, %d steps; run %d, %v, %d", x.Freezes, x.FrozenShare, x.Steps, run.Freezes, run.FrozenShare, run.Solver.Steps)
		}
		for i, c := range record.Clocks {
			if c == string(record.RunawayGreen) || c == string(record.WaterLost) {
				continue
			}
			want := math.NaN()
			for _, m := range run.Marks {
				if m.Name == c && !(want <= m.TimeGyr) {
					want = m.TimeGyr
				}
			}
			if math.IsNaN(want) && c == record.MarkFroze && run.Freezes > 0 {
				continue // born frozen: no mark
			}
			if got := x.Clocks[i]; !same(got, want) {
				t.Errorf("%s: row %v, run %v", c, got, want)
			}
		}
		if got := x.At[0].Temperature; !(got > 150 && got < 400) || !math.IsNaN(x.At[1].Temperature) {
			t.Errorf("at %g and after the end: %+v", age, x.At)
		}
	}
}

// A planet that no amount of carbon brings through its reference state is a row.
func TestFateUnanchored(t *testing.T) {
	s := NewSetup()
	s.Solve, s.Distance = "total", 1.6*s.Distance
	x, err := Fate(context.Background(), s, nil)
	if err != nil || x.Kind != record.Undecided || x.Status != record.StatusUnanchored {
		t.Fatalf("%+v, %v", x, err)
	}
	s = NewSetup()
	s.RidgeRef = 10e12
	if _, err := Fate(context.Background(), s, nil); err == nil {
		t.Fatal("no error for sources that do not add up")
	}
}

// BenchmarkFate is the cost of one member of an anchored Earth.
func BenchmarkFate(b *testing.B) {
	s := NewSetup()
	s.Solve = "total"
	for b.Loop() {
		if _, err := Fate(context.Background(), s.Clone(), nil); err != nil {
			b.Fatal(err)
		}
	}
}
