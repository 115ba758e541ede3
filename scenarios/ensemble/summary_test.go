package ensemble

import (
	"context"
	"math"
	"strings"
	"testing"

	"cycle/carbon/record"
	"cycle/scenarios"
)

// What a summary says agrees with its members.
func TestSummary(t *testing.T) {
	for _, design := range []string{Sobol, Freeze} {
		const n = 420 // 60 base points of 7 with five inputs
		p := smallPlan(t, n, design)
		dir := t.TempDir()
		runAll(t, p, dir, 1, 2)
		s, err := p.Summarise(context.Background(), dir)
		if err != nil {
			t.Fatal(err)
		}
		count := map[record.Kind]int{}
		independent, first := 0, math.Inf(1)
		if err := p.Each(dir, func(rec []float64) error {
			r := p.row(rec)
			if p.Independent(r.Index) {
				independent++
				count[r.Kind]++
				if lost(r.Kind) {
					first = math.Min(first, r.TimeGyr)
				}
			}
			return nil
		}); err != nil {
			t.Fatal(err)
		}
		if want := map[string]int{Sobol: n, Freeze: 120}[design]; independent != want || s.Independent != want {
			t.Errorf("%s: %d independent, summary %d, want %d", design, independent, s.Independent, want)
		}
		sum := s.Undecided
		for _, x := range s.Shares {
			sum += x.Count
			if x.Count != count[x.Kind] || !(x.Share.Low <= x.Share.Value && x.Share.Value <= x.Share.High) || x.WithAll.High < x.Share.High {
				t.Errorf("%s: %+v, counted %d", design, x, count[x.Kind])
			}
			row, err := p.Member(context.Background(), x.Typical)
			if err != nil || row.Kind != x.Kind {
				t.Errorf("%s: the typical member %d of %s is %s", design, x.Typical, x.Kind, row.Kind)
			}
		}
		if sum != s.Independent || s.Undecided != count[record.Undecided] {
			t.Errorf("%s: shares add up to %d", design, sum)
		}
		for _, c := range s.Incidence {
			last := len(c.Value) - 1
			for i := range c.Value {
				if i > 0 && c.Value[i] < c.Value[i-1] || c.Low[i] > c.Value[i] || c.High[i] < c.Value[i] {
					t.Fatalf("%s: curve of %s at %d", design, c.Name, i)
				}
			}
			// Nothing is censored before the end but undecided members.
			share := float64(count[record.Kind(c.Name)]) / float64(s.Independent)
			if c.Value[last] < share-1e-9 || c.Value[last] > share+float64(s.Undecided)/float64(s.Independent)+1e-9 {
				t.Errorf("%s: %s ends at %v, share %v", design, c.Name, c.Value[last], share)
			}
		}
		if s.Liquid.Value[0] != 1 && s.Liquid.TimeGyr[0] < first {
			t.Errorf("%s: liquid water begins at %v", design, s.Liquid.Value[0])
		}
		found := false
		for _, x := range s.Sensitive {
			for _, in := range x.Inputs {
				if total := !math.IsNaN(in.Total.Value); total != (design == Freeze) {
					t.Errorf("%s: %s, total index of %s %v", design, x.Clock, in.Input, in.Total)
				}
				if x.Clock == "liquid water" && in.Input == "orbit.distance" {
					found = in.First.Value > 0.3 // by far the most important here
				}
			}
			if design == Sobol && (math.IsNaN(x.Laws.Value) || x.Laws.Value > 0.5 || !strings.Contains(x.Note, "--design freeze")) {
				t.Errorf("%s: %+v", x.Clock, x)
			}
		}
		if !found {
			t.Errorf("%s: the distance decides nothing", design)
		}
		for _, b := range s.Borders {
			x, _ := p.Member(context.Background(), b.MemberA)
			y, _ := p.Member(context.Background(), b.MemberB)
			if x.Kind != b.A || y.Kind != b.B || !(b.Distance > 0 && b.Distance < 0.5) || b.Apart == "" {
				t.Errorf("%s: border %+v between %s and %s", design, b, x.Kind, y.Kind)
			}
		}
		if len(s.Borders) == 0 || len(s.AtAges) != 6 || len(s.ByLaw) != 3*len(s.Shares) || s.Worth == "" || len(s.Works) < 8 {
			t.Errorf("%s: %d borders, %d ages, %d by law, %q", design, len(s.Borders), len(s.AtAges), len(s.ByLaw), s.Worth)
		}
	}
}

// The built-in ensemble of the Earth against the published ensemble it takes its
// ranges from (Krissansen-Totton et al. 2018): the medians of ocean pH 4.0 and 2.5
// Gyr ago lie inside its intervals, pH rises through time, and temperatures of the
// Archean lie inside its envelope of 271 to 314 K but for the hottest few, which
// reach some 5 K further. pH 0.54 Gyr ago is lower than published (7.7 to 8.0): life
// on land spreads later here, 0.42 Gyr ago.
func TestEarthPublished(t *testing.T) {
	const n = 256
	r, err := scenarios.Load("earth_uncertain", nil)
	if err != nil {
		t.Fatal(err)
	}
	p, err := NewPlan(r, "test", 1, Sobol, n)
	if err != nil {
		t.Fatal(err)
	}
	dir := t.TempDir()
	runAll(t, p, dir, 1, 2)
	s, err := p.Summarise(context.Background(), dir)
	if err != nil {
		t.Fatal(err)
	}
	before := 0.0
	for _, a := range s.AtAges {
		t.Logf("%.2f Gyr %s: %.4g (%.4g to %.4g) %s", a.AgeGyr, a.Quantity, a.Q50, a.Q025, a.Q975, a.Unit)
		switch {
		case a.Quantity == "ocean pH":
			if a.Q50 <= before {
				t.Errorf("pH falls to %.2f at %v Gyr", a.Q50, a.AgeGyr)
			}
			before = a.Q50
			want := map[float64][2]float64{0.57: {6.2, 7.2}, 2.07: {6.5, 7.7}}[a.AgeGyr]
			if want[0] > 0 && (a.Q50 < want[0] || a.Q50 > want[1] || a.Q025 < want[0] || a.Q975 > want[1]) {
				t.Errorf("pH at %v Gyr is %.2f (%.2f to %.2f), published %.1f to %.1f", a.AgeGyr, a.Q50, a.Q025, a.Q975, want[0], want[1])
			}
		case a.Quantity == "temperature" && a.AgeGyr <= 2.07:
			if a.Q16 < 271 || a.Q84 > 314 || a.Q025 < 271 || a.Q975 > 322 {
				t.Errorf("temperature at %v Gyr is %.1f K (%.1f to %.1f)", a.AgeGyr, a.Q50, a.Q025, a.Q975)
			}
		}
	}
	if s.Undecided > 0 {
		t.Errorf("%d undecided", s.Undecided)
	}
}
