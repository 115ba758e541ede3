package carbon

import (
	"bytes"
	"context"
	"fmt"
	"math"
	"strings"
	"testing"

	"cycle/carbon/record"
	"cycle/carbon/units"
)

// cooling is a planet whose interior cools and whose land grows until the warm
// state is lost.
func cooling() *Setup {
	s := NewSetup()
	s.Title = "cooling"
	s.Distance, s.Content = 1.12*units.AU, 7.5e-3
	s.Land = Step{Before: 0.1, After: 0.7, Middle: 2.4e9, Width: 0.6e9}
	s.Biology.Before = 1
	s.End = 5e9
	return s
}

func explained(tb testing.TB, s *Setup, opt ExplainOptions) *record.Explanation {
	tb.Helper()
	e, err := Explain(context.Background(), s, opt)
	if err != nil {
		tb.Fatal(err)
	}
	return e
}

// date runs a setup alone and returns its fate.
func lone(tb testing.TB, s *Setup, rtol float64) fate {
	tb.Helper()
	v := variant{set: s.Clone(), rtol: rtol}
	f, err := v.fate(context.Background())
	if err != nil {
		tb.Fatal(err)
	}
	return f
}

// TestExplain checks the parts of one explanation against histories run alone.
func TestExplain(t *testing.T) {
	s := cooling()
	e := explained(t, s, ExplainOptions{})
	base := lone(t, s, s.Tolerance)
	if !e.Fails || e.Clock != clockFreezing || base.clock != clockFreezing {
		t.Fatalf("clock %q, want %q: this planet does not test it", e.Clock, clockFreezing)
	}

	t.Run("shares", func(t *testing.T) {
		if len(e.Drivers) != 3 || len(e.Combinations) != 8 {
			t.Fatalf("%d drivers, %d combinations; want 3 and 8", len(e.Drivers), len(e.Combinations))
		}
		sum := 0.0
		for _, sh := range e.Cause.Shares {
			sum += sh.Gyr
		}
		full, none := e.Combinations[0], e.Combinations[7]
		if whole := full.TimeGyr - none.TimeGyr; !e.Cause.Mixed && math.Abs(sum-whole) > 1e-9*math.Abs(whole) {
			t.Errorf("shares add up to %.12g Gyr, the whole is %.12g", sum, whole)
		}
		if math.Abs(full.TimeGyr-e.Outcome.TimeGyr) > 1e-9 {
			t.Errorf("with all drivers the failure is at %.9g Gyr, the history says %.9g", full.TimeGyr, e.Outcome.TimeGyr)
		}
	})

	t.Run("rescue", func(t *testing.T) {
		found := 0
		for i := range e.Rescues {
			r := &e.Rescues[i]
			if !r.Found {
				continue
			}
			found++
			at := func(part float64) fate {
				c := s.Clone()
				f := c.Number(r.Key)
				v, _, err := f.Kind.Parse(r.ToText)
				if err != nil {
					t.Fatal(err)
				}
				*f.Value += part * (v - *f.Value)
				return lone(t, c, s.Tolerance)
			}
			if f := at(1); f.clock == base.clock {
				t.Errorf("%s = %s: still %s at %.5g Gyr", r.Key, r.ToText, f.kind, gyr(f.t))
			}
			if f := at(0.99); f.clock != base.clock {
				t.Errorf("%s: 1 %% less of the change, %s to %s, also avoids it: %s at %.5g Gyr", r.Key, r.FromText, r.ToText, f.kind, gyr(f.t))
			}
		}
		if found < 5 {
			t.Errorf("%d rescues, want 5 or more: this planet does not test it", found)
		}
		last := -1.0
		for _, r := range e.Rescues {
			if r.Found && r.Published {
				if r.Part < last {
					t.Errorf("%s is sorted behind a larger change", r.Key)
				}
				last = r.Part
			}
		}
	})

	t.Run("elasticities", func(t *testing.T) {
		checked := 0
		for _, el := range e.Elasticities {
			if math.IsNaN(el.Value) || el.Near != "" || math.Abs(el.Value) < 0.02 || checked == 20 {
				continue
			}
			checked++
			at := func(h float64) float64 {
				c := s.Clone()
				f := c.Number(el.Key)
				*f.Value *= math.Exp(h)
				return math.Log(lone(t, c, 1e-7).t)
			}
			const h = 3e-3
			want := (8*(at(h)-at(-h)) - (at(2*h) - at(-2*h))) / (12 * h)
			if d := math.Abs(el.Value - want); d > 0.01*math.Abs(want) {
				t.Errorf("%s: %.6g ± %.1g, full runs at a step of 0.3 %% and a tolerance of 1e-7 give %.6g, off by %.2g %%", el.Key, el.Value, el.Error, want, 100*d/math.Abs(want))
			}
		}
		if checked < 12 {
			t.Errorf("%d elasticities checked, want 12 or more", checked)
		}
	})

	t.Run("laws", func(t *testing.T) {
		land, sea, rad := 8, 3, 6
		if got, want := len(e.Variants), land+sea+rad+land*sea+land*rad+sea*rad; got != want {
			t.Errorf("%d variants, want %d", got, want)
		}
		for _, i := range []int{0, 9, 12, 20, 60} {
			v := &e.Variants[i]
			c := s.Clone()
			for j := range v.Parts {
				if err := c.Choose(v.Parts[j], v.Laws[j]); err != nil {
					t.Fatal(err)
				}
			}
			if f := lone(t, c, s.Tolerance); f.kind != v.Outcome || gyr(f.t) != v.TimeGyr {
				t.Errorf("%v: %s at %.9g Gyr, run alone %s at %.9g", v.Changed, v.Outcome, v.TimeGyr, f.kind, gyr(f.t))
			}
		}
	})

	t.Run("distances", func(t *testing.T) {
		// What is said to be the distance must be it: at so much less sunlight the
		// warm state needs just the outgassing there is.
		checked := 0
		for i := range e.Distances {
			d := &e.Distances[i]
			if math.IsNaN(d.ColdSun) || d.ColdSun == 0 || i%3 != 0 {
				continue
			}
			var row *record.Row
			for j := range e.Run.Rows {
				if gyr(e.Run.Rows[j].Age) == d.AgeGyr {
					row = &e.Run.Rows[j]
				}
			}
			c := ConditionsOf(row)
			c.Sunlight *= 1 - d.ColdSun/100
			eq, err := NewEquilibria(s, c)
			if err != nil {
				t.Fatal(err)
			}
			b := eq.Boundaries()
			if math.Abs(b.WarmFold.Outgassing/d.Outgassing-1) > 1e-4 {
				t.Errorf("%.4g Gyr: at %.4g %% less sunlight the fold needs %.6g Tmol/yr, outgassing is %.6g", d.AgeGyr, d.ColdSun, b.WarmFold.Outgassing, d.Outgassing)
			}
			checked++
		}
		if checked < 4 {
			t.Errorf("%d distances checked, want 4 or more", checked)
		}
	})

	t.Run("workers", func(t *testing.T) {
		calls := 0
		one := explained(t, s, ExplainOptions{Workers: 1, Progress: func(done, total int) {
			if calls++; done != calls || done > total {
				t.Errorf("progress %d of %d at call %d", done, total, calls)
			}
		}})
		if a, b := fmt.Sprintf("%+v", *blank(e)), fmt.Sprintf("%+v", *blank(one)); a != b {
			t.Error("one worker and two give different explanations")
		}
	})
}

// blank takes the pointers away, whose addresses differ.
func blank(e *record.Explanation) *record.Explanation {
	c := *e
	c.Run, c.Curves = nil, nil
	return &c
}

// TestOneDriverGetsEverything: only the star changes.
func TestOneDriverGetsEverything(t *testing.T) {
	s := NewSetup()
	s.Land, s.Biology = Step{Before: 1, After: 1, Width: 1e9}, Step{Before: 1, After: 1, Width: 1e9}
	for section, law := range map[string]string{"interior": "steady", "sources": "steady"} {
		if err := s.Choose(section, law); err != nil {
			t.Fatal(err)
		}
	}
	s.Distance = 0.9 * units.AU
	x := &explainer{ctx: context.Background(), set: s.Clone(), out: &record.Explanation{}}
	active, combos := x.onlyCause(t)
	if len(active) != 1 || active[0] != driveSun {
		t.Fatalf("drivers %v, want sunlight alone", active)
	}
	x.cause(active, combos)
	c := &x.out.Cause
	if c.Mixed || len(c.Shares) != 1 || c.Shares[0].Gyr != c.WholeGyr || c.WholeGyr == 0 {
		t.Errorf("shares %+v of %.6g Gyr, mixed %v: want everything for sunlight", c.Shares, c.WholeGyr, c.Mixed)
	}
	if !c.Bounds {
		t.Error("under steady sunlight this planet never fails, but the shares are not called bounds")
	}
}

// onlyCause runs what the cause needs.
func (x *explainer) onlyCause(t *testing.T) ([]driver, []fate) {
	t.Helper()
	run, err := Run(x.ctx, x.set.Clone())
	if err != nil {
		t.Fatal(err)
	}
	if x.base, err = x.run(&variant{set: x.set.Clone()}); err != nil {
		t.Fatal(err)
	}
	if x.m, err = NewModel(x.set.Clone()); err != nil {
		t.Fatal(err)
	}
	x.out.Fails = x.base.fails()
	active := x.driversOf(run)
	combos := make([]fate, 1<<len(active))
	for i := range combos {
		if combos[i], err = x.combination(active, i); err != nil {
			t.Fatal(err)
		}
	}
	return active, combos
}

// TestSharesOfMadeUpDates: exact, worked by hand. v(∅)=9, v(a)=7, v(b)=8,
// v(ab)=2: a gets ½[(7−9)+(2−8)] = −4, b gets ½[(8−9)+(2−7)] = −3.
func TestSharesOfMadeUpDates(t *testing.T) {
	f := func(t float64) fate { return fate{kind: record.Snowball, clock: clockFreezing, t: t * units.Gyr} }
	x := &explainer{out: &record.Explanation{Fails: true}, base: f(2)}
	combos := []fate{f(9), f(7), f(8), f(2)}
	x.cause([]driver{driveSun, driveLand}, combos)
	got := map[string]float64{}
	for _, s := range x.out.Cause.Shares {
		got[s.Driver] = s.Gyr
	}
	if got["sunlight"] != -4 || got["land"] != -3 {
		t.Errorf("shares %v, want sunlight -4, land -3 Gyr", got)
	}
	// One combination that fails otherwise: no shares, and it is said.
	combos[1].clock, combos[1].kind = clockOverheating, record.RunawayGreen
	x.out = &record.Explanation{Fails: true}
	x.cause([]driver{driveSun, driveLand}, combos)
	if c := x.out.Cause; !c.Mixed || len(c.Shares) != 0 || !strings.Contains(c.Words, "different ways") {
		t.Errorf("mixed failures: %+v", c)
	}
}

// TestSafePlanetIsThreatened: where nothing fails the search is for what would
// bring a failure.
func TestSafePlanetIsThreatened(t *testing.T) {
	s := cooling()
	s.Distance, s.End = units.AU, 4e9
	s.Land.After = 0.3
	e := explained(t, s, ExplainOptions{})
	if e.Fails || e.Clock != "" || len(e.Elasticities) != 0 {
		t.Fatalf("fails %v, clock %q, %d elasticities; want a safe planet", e.Fails, e.Clock, len(e.Elasticities))
	}
	n := 0
	for _, r := range e.Rescues {
		if r.Found {
			n++
			if r.Outcome == record.Temperate || r.Outcome == record.StarLeft {
				t.Errorf("%s to %s is said to bring a failure and gives %s", r.Key, r.ToText, r.Outcome)
			}
		}
	}
	if n < 3 {
		t.Errorf("%d changes bring a failure, want 3 or more", n)
	}
}

// TestExplainStops: a cancelled context ends it with its error.
func TestExplainStops(t *testing.T) {
	ctx, stop := context.WithCancel(context.Background())
	_, err := Explain(ctx, cooling(), ExplainOptions{Workers: 2, Progress: func(done, _ int) {
		if done == 3 {
			stop()
		}
	}})
	stop()
	if err != context.Canceled {
		t.Errorf("error %v, want %v", err, context.Canceled)
	}
}

// TestClone: a copy has the same content and shares none of it.
func TestClone(t *testing.T) {
	s := NewSetup()
	s.Grow("pulse.2")
	s.Pulses[1].Carbon = 5e17
	if err := s.Choose("weathering.land", "foley2015"); err != nil {
		t.Fatal(err)
	}
	*s.Number("weathering.land.supply_limit").Value = 3e13
	text := func(s *Setup) string {
		var b bytes.Buffer
		for _, sec := range s.Sections() {
			for _, f := range sec.Fields {
				fmt.Fprintln(&b, sec.Name, f.Key, *f.Value)
			}
			for _, o := range sec.Options {
				fmt.Fprintln(&b, sec.Name, o.Key, *o.Value)
			}
			for _, f := range sec.Flags {
				fmt.Fprintln(&b, sec.Name, f.Key, *f.Value)
			}
			fmt.Fprintln(&b, sec.Name, sec.Law)
		}
		return b.String()
	}
	before := text(s)
	c := s.Clone()
	if text(c) != before {
		t.Error("the copy differs")
	}
	for _, sec := range c.Sections() {
		for _, f := range sec.Fields {
			*f.Value = f.Max
		}
		for _, o := range sec.Options {
			*o.Value = o.Allowed[len(o.Allowed)-1]
		}
		for _, f := range sec.Flags {
			*f.Value = !*f.Value
		}
	}
	if text(s) != before {
		t.Error("a change of the copy reaches the original")
	}
}

func BenchmarkExplain(b *testing.B) {
	for name, s := range map[string]*Setup{"cooling": cooling(), "earth": func() *Setup { s := NewSetup(); s.Solve = "total"; return s }()} {
		b.Run(name, func(b *testing.B) {
			n := 0
			for i := 0; i < b.N; i++ {
				n = explained(b, s, ExplainOptions{}).Histories
			}
			b.ReportMetric(float64(n), "histories/op")
		})
	}
}
