package carbon

import (
	"context"
	"math"
	"testing"

	"cycle/carbon/record"
	"cycle/carbon/units"
)

// steadyPlanet has constant sunlight S (of today's Earth) and constant
// outgassing, mol/yr.
func steadyPlanet(tb testing.TB, sun, v float64) *Setup {
	tb.Helper()
	s := NewSetup()
	for section, law := range map[string]string{"star": "steady", "interior": "steady", "sources": "steady"} {
		if err := s.Choose(section, law); err != nil {
			tb.Fatal(err)
		}
	}
	*s.Number("star.end").Value = 1e12
	s.Distance = units.AU / math.Sqrt(sun)
	s.OutgassingScale = v / s.OutgassingRef
	s.Land, s.Biology = Step{Before: 1, After: 1, Width: 1e9}, Step{Before: 1, After: 1, Width: 1e9}
	s.Content = 0.1 // a mantle that does not run out
	s.Start, s.End = 0.2e9, 12.2e9
	s.WaterEscape = false
	s.MaxFreezes = 3
	return s
}

// TestBoundariesPredictHistories: the three curves of the equilibrium analysis
// against histories that start warm but far from any steady state. What is
// predicted wrong is listed with its distance to the boundaries.
func TestBoundariesPredictHistories(t *testing.T) {
	for _, c := range []struct {
		radiation string
		ice       float64 // strength of the seafloor under ice
	}{{"kadoya2019", 1}, {"williams1997", 0}, {"linear_byrne2014", 0.3}} {
		t.Run(c.radiation, func(t *testing.T) { predict(t, c.radiation, c.ice) })
	}
}

func predict(t *testing.T, radiation string, ice float64) {
	total, hits := 0, 0
	for i := 0; i < 16; i++ {
		sun := 0.58 + 0.04*float64(i)
		var e *Equilibria
		var b record.Boundaries
		for j := 0; j < 14; j++ {
			v := 0.3e12 * math.Pow(200, float64(j)/13)
			s := steadyPlanet(t, sun, v)
			s.SeafloorIce = ice
			if err := s.Choose("radiation", radiation); err != nil {
				t.Fatal(err)
			}
			if e == nil {
				var err error
				if e, err = NewEquilibria(s, Conditions{Age: s.Start, Sunlight: sun * units.SolarFlux, Land: 1, Biology: 1, Crust: 1}); err != nil {
					t.Fatal(err)
				}
				b = e.Boundaries()
			}
			want := e.Fate(&b, v)
			m, err := NewModel(s)
			if err != nil {
				t.Fatal(err)
			}
			// A third of the way from the cold end of the warm branch to its hot end,
			// whatever the outgassing.
			if branch, _ := e.warmBranch(); branch != nil {
				n := &branch[len(branch)/3]
				st, _ := m.start()
				st.T, st.Surface, st.Alk = n.t, n.row.Surface, n.alk
				m.from = &st
			}
			h, err := m.integrate(context.Background(), s.End, 1e-5, true)
			if err != nil {
				t.Fatal(err)
			}
			got := m.judge(h)
			total++
			if sameFate(want, got.kind) || hotOutcome(want) && h.reason == endHot {
				hits++
				continue
			}
			t.Logf("miss: S = %.2f, V = %.4g Tmol/yr: predicted %s, integrated %s at %.4g Gyr (%s, %d freezes); needs %.4g, thaws above %.4g (%s), bears %.4g (%s)",
				sun, v/1e12, want, got.kind, gyr(got.t), h.reason, len(h.frozen), b.WarmNeeds, b.ThawsAbove, b.ThawWhy, b.HotAbove, b.HotWhy)
		}
	}
	t.Logf("%d of %d predicted", hits, total)
	if total < 200 || float64(hits) < 0.98*float64(total) {
		t.Errorf("%d of %d predicted, want 98 %% of at least 200", hits, total)
	}
}

// TestFoldedHotSide: where the hot side folds back on itself a second stable
// stretch lies above the warm one. A planet without an equilibrium there starts
// on the warm one, and what becomes of it is what the boundaries say.
func TestFoldedHotSide(t *testing.T) {
	for _, sun := range []float64{1500, 1540, 1553, 1565, 1580} {
		s := steadyPlanet(t, sun/units.SolarFlux, 7e12)
		e, err := NewEquilibria(s, Conditions{Age: s.Start, Sunlight: sun, Land: 1, Biology: 1, Crust: 1})
		if err != nil {
			t.Fatal(err)
		}
		b := e.Boundaries()
		want := record.Temperate
		if sun > 1570 {
			want = record.RunawayGreen
		}
		m, err := NewModel(s)
		if err != nil {
			t.Fatal(err)
		}
		h, err := m.integrate(context.Background(), s.End, 1e-5, true)
		if err != nil {
			t.Fatal(err)
		}
		got := m.judge(h)
		if f := e.Fate(&b, 7e12); f != want || got.kind != want {
			t.Errorf("%g W/m2: predicted %s, integrated %s at %.4g Gyr, want %s", sun, f, got.kind, gyr(got.t), want)
		}
	}
}

// sameFate compares outcomes as far as the equilibrium analysis tells them
// apart: it does not say how a hot end goes on.
func sameFate(a, b record.Kind) bool {
	return a == b || hotOutcome(a) && hotOutcome(b)
}

func hotOutcome(k record.Kind) bool {
	return k == record.MoistGreen || k == record.RunawayGreen
}
