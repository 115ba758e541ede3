package carbon

import (
	"context"
	"errors"
	"testing"

	"cycle/carbon/units"
)

// TestCompare: only what differs, in the order of the sections, and results that
// are those of the runs alone.
func TestCompare(t *testing.T) {
	a, b, c := cooling(), cooling(), cooling()
	b.Distance = 1 * units.AU
	if err := c.Choose("weathering.land", "menou2015"); err != nil {
		t.Fatal(err)
	}
	cmp, err := Compare(context.Background(), []Named{{"a", a}, {"b", b}, {"c", c}}, CompareOptions{})
	if err != nil {
		t.Fatal(err)
	}
	got := map[string][]string{}
	for _, d := range cmp.Differ {
		got[d.Key] = d.Values
	}
	if v := got["orbit.distance"]; len(v) != 3 || v[0] != v[2] || v[1] != "1 au" {
		t.Errorf("orbit.distance: %q", v)
	}
	if v := got["weathering.land.law"]; len(v) != 3 || v[0] != "walker1981" || v[2] != "menou2015" {
		t.Errorf("weathering.land.law: %q", v)
	}
	for key, v := range got {
		if v[0] == v[1] && v[1] == v[2] {
			t.Errorf("%s is the same everywhere: %q", key, v)
		}
		if key != "orbit.distance" && v[0] != v[1] {
			t.Errorf("%s: %q and %q, but only the distance of b was changed", key, v[0], v[1])
		}
	}
	if cmp.Agree < 60 {
		t.Errorf("%d inputs agree, want most", cmp.Agree)
	}
	for i, s := range []*Setup{a, b, c} {
		r, err := Run(context.Background(), s.Clone())
		if err != nil {
			t.Fatal(err)
		}
		if r.Outcome != cmp.Results[i].Outcome || len(r.Rows) != len(cmp.Runs[i].Rows) {
			t.Errorf("%s: %+v, run alone %+v", cmp.Names[i], cmp.Results[i].Outcome, r.Outcome)
		}
		for _, m := range r.Margins {
			found := false
			for _, row := range cmp.Margins {
				found = found || row.Boundary == m.Boundary && row.Side == m.Side && row.Unit == m.Unit && row.Values[i] == m.Value
			}
			if !found {
				t.Errorf("%s: the margin %q is not in the comparison", cmp.Names[i], m.Words)
			}
		}
	}
}

// TestCompareNamesTheBadOne.
func TestCompareNamesTheBadOne(t *testing.T) {
	bad := cooling()
	bad.End = bad.Start
	_, err := Compare(context.Background(), []Named{{"good", cooling()}, {"bad", bad}}, CompareOptions{})
	var ne *NamedError
	var se *SetupError
	if !errors.As(err, &ne) || ne.Name != "bad" || ne.Index != 1 || !errors.As(err, &se) || se.Key() != "time.end" {
		t.Errorf("error %v, want one that names bad and time.end", err)
	}
}

func BenchmarkCompare(b *testing.B) {
	var sets []Named
	for _, au := range []float64{0.9, 1, 1.05, 1.1, 1.15} {
		s := cooling()
		s.Distance = au * units.AU
		sets = append(sets, Named{"planet", s})
	}
	for i := 0; i < b.N; i++ {
		if _, err := Compare(context.Background(), sets, CompareOptions{}); err != nil {
			b.Fatal(err)
		}
	}
}
