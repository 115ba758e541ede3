package interior

import (
	"errors"
	"math"
	"strings"
	"testing"

	"cycle/carbon/cite"

	"pgregory.net/rapid"
)

// TestTable: every row is complete and every default is allowed.
func TestLaws(t *testing.T) {
	names := map[string]bool{}
	for _, e := range Laws {
		if e.Name == "" || e.Doc == "" || e.Form == "" || len(e.Source) == 0 || names[e.Name] {
			t.Errorf("row %q is incomplete or twice there", e.Name)
		}
		names[e.Name] = true
		for _, s := range e.Source {
			if s.IsZero() {
				t.Errorf("%s has an empty source", e.Name)
			}
		}
		keys := map[string]bool{}
		for _, f := range e.New().Fields() {
			if f.Key == "" || f.Doc == "" || f.Value == nil || f.Source.IsZero() || keys[f.Key] {
				t.Errorf("%s.%s is incomplete or twice there", e.Name, f.Key)
			}
			keys[f.Key] = true
			if err := f.Check(*f.Value); err != nil {
				t.Errorf("%s.%s: default: %v", e.Name, f.Key, err)
			}
			if !f.Published.Holds(*f.Value) && f.Source.Trust != cite.OwnChoice {
				t.Errorf("%s.%s: default %g outside the published range %v", e.Name, f.Key, *f.Value, f.Published)
			}
			if p := f.Published; p.Stated() && !(f.Min <= p.Lo && p.Lo <= p.Hi && p.Hi <= f.Max) {
				t.Errorf("%s.%s: published range %v not inside the allowed %g to %g", e.Name, f.Key, p, f.Min, f.Max)
			}
		}
	}
	for _, name := range []string{"plates", "powerlaw", "steady", "table"} {
		if f := bound(t, name, earth).Flow(now, 1623, 0); math.Abs(f.Relative-1) > 1e-12 || math.Abs(f.Crust-1) > 1e-12 || math.Abs(f.Recycling-1) > 1e-12 {
			t.Errorf("%s: the reference state is %+v", name, f)
		}
	}
}

// TestFinite: all laws over their allowed parameters, planets, temperatures
// and ages.
func TestFinite(t *testing.T) {
	rapid.Check(t, func(r *rapid.T) {
		e := rapid.SampledFrom(Laws).Draw(r, "law")
		l := e.New()
		fill(t, l)
		for _, f := range l.Fields() {
			switch {
			case !rapid.Bool().Draw(r, "set "+f.Key):
			case f.Min > 0:
				*f.Value = math.Exp(rapid.Float64Range(math.Log(f.Min), math.Log(f.Max)).Draw(r, f.Key))
			default:
				*f.Value = rapid.Float64Range(f.Min, f.Max).Draw(r, f.Key)
			}
			*f.Value = min(max(*f.Value, f.Min), f.Max)
		}
		p := NewPlanet(rapid.Float64Range(0.05, 8).Draw(r, "mass"), rapid.Float64Range(0.01, 0.6).Draw(r, "core"))
		if err := l.Bind(p, rapid.Float64Range(0.1e9, 12e9).Draw(r, "reference age")); err != nil {
			r.Fatal(err)
		}
		for range 20 {
			age := rapid.Float64Range(0, 15e9).Draw(r, "age")
			tm, tc := rapid.Float64Range(500, 6000).Draw(r, "mantle"), rapid.Float64Range(500, 6000).Draw(r, "core temperature")
			f := l.Flow(age, tm, tc)
			for _, v := range []float64{f.Heat, f.Radiogenic, f.Relative, f.Crust, f.Recycling, f.Core, f.MantleRate, f.CoreRate} {
				if math.IsNaN(v) || math.IsInf(v, 0) {
					r.Fatalf("%s at %g yr, %g K: %+v", e.Name, age, tm, f)
				}
			}
			if f.Heat < 0 || f.Relative < 0 || f.Crust < 0 || f.Recycling < 0 || f.Radiogenic < 0 {
				r.Fatalf("%s at %g yr, %g K: negative in %+v", e.Name, age, tm, f)
			}
			if tc < tm && f.Core > 0 {
				r.Fatalf("%s: heat flows from a colder core", e.Name)
			}
		}
	})
}

// TestSmooth finds kinks: the second difference of a function with a kink grows
// without bound as the step shrinks.
func TestSmooth(t *testing.T) {
	largest := func(f func(x float64) float64, lo, hi, grid, h float64) (m float64) {
		for x := lo; x < hi; x += grid {
			m = max(m, math.Abs(f(x+h)-2*f(x)+f(x-h))/(h*h))
		}
		return m
	}
	check := func(what string, f func(float64) float64, lo, hi, unit float64) {
		t.Helper()
		coarse, fine := largest(f, lo, hi, unit, unit), largest(f, lo, hi, unit/10, unit/10)
		if !(fine < 2*coarse+1e-6/(unit*unit)) {
			t.Errorf("%s has a kink: second differences %g, then %g", what, coarse, fine)
		}
	}
	logs := func(x float64) float64 { return math.Log1p(x) }
	for _, mass := range []float64{0.1, 1, 8} {
		for _, e := range Laws {
			l := bound(t, e.Name, NewPlanet(mass, 0.33))
			check(e.Name+" heat over temperature", func(x float64) float64 { return math.Log(l.Flow(2e9, x, x).Heat) }, 500, 6000, 2)
			check(e.Name+" crust over temperature", func(x float64) float64 { return logs(l.Flow(2e9, x, x).Crust) }, 500, 6000, 2)
		}
	}
	m := bound(t, "stagnant", earth).(*Stagnant).melting
	check("foot of melting", m.bottom, 1380, 3000, 1)
	check("melt column", func(x float64) float64 { return m.column(x, 0) }, 1300, 3000, 1)
	check("slope of hold", func(x float64) float64 { return (hold(x+1e-5, 1, 0.4) - hold(x-1e-5, 1, 0.4)) / 2e-5 }, 0.5, 1.5, 0.01)
	l := bound(t, "powerlaw", earth)
	check("powerlaw over age", func(x float64) float64 { return l.Flow(x*1e9, 0, 0).Relative }, 0, 15, 0.005)
}

// TestMonotone: a hotter mantle loses more heat and makes no less crust.
func TestMonotone(t *testing.T) {
	for _, name := range []string{"plates", "stagnant"} {
		l := bound(t, name, earth)
		before := l.Flow(now, 500, 0)
		for tm := 505.0; tm <= 6000; tm += 5 {
			f := l.Flow(now, tm, 0)
			if !(f.Heat > before.Heat) || f.Crust < before.Crust {
				t.Errorf("%s at %g K: heat %g after %g, crust %g after %g", name, tm, f.Heat, before.Heat, f.Crust, before.Crust)
			}
			before = f
		}
	}
}

func TestRefusals(t *testing.T) {
	none := earth
	none.MantleMass = 0
	for _, name := range []string{"plates", "stagnant"} {
		for _, e := range Laws {
			if e.Name == name && e.New().Bind(none, now) == nil {
				t.Errorf("%s binds to a planet without mantle", name)
			}
		}
	}
	if err := newTable().Bind(earth, now); err == nil {
		t.Error("a table law without a table binds")
	}
}

func TestUserTable(t *testing.T) {
	l := newTable().(*Table)
	const text = "\ufeff# heat flow\nage_gyr,relative_heat_flow\n0.5, 4\n1,3\n\n4.57,1\n"
	if err := l.Load(strings.NewReader(text)); err != nil {
		t.Fatal(err)
	}
	if *l.Text() != text {
		t.Error("the text is not kept as loaded")
	}
	for _, c := range []struct{ text, want string }{
		{"age_gyr,relative_heat_flow\n1,2\n2,x\n", `line 3: found "x" in column relative_heat_flow`},
		{"age_gyr,relative_heat_flow\n1,2\n2,0\n", "line 3"},
		{"age_gyr,relative_heat_flow\n1,2\n2,-1\n", "line 3"},
		{"age_gyr,relative_heat_flow\n1,2\n2,NaN\n", "line 3"},
		{"age_gyr,relative_heat_flow\n1,2\n2,Inf\n", "line 3"},
		{"age_gyr,relative_heat_flow\n-1,2\n2,1\n", "line 2"},
		{"age_gyr,relative_heat_flow\n1,2\n1,1\n", "line 3: found the age 1 Gyr"},
		{"age_gyr,relative_heat_flow\n1,2\n0.5,1\n", "line 3"},
		{"age_gyr,relative_heat_flow\n1,2,3\n", "line 2: found 3 columns"},
		{"age,heat\n1,2\n2,3\n", `line 1: found the columns "age,heat"`},
		{"age_gyr,relative_heat_flow\n1,2\n\"2,3\n", "line 3: found a malformed row"},
		{"age_gyr,relative_heat_flow\n1,2\n", "found 1 rows"},
		{"", "found 0 rows"},
	} {
		if err := l.Load(strings.NewReader(c.text)); err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("%q: got %v, want %q", c.text, err, c.want)
		}
	}
	if err := l.Load(failing{}); err == nil {
		t.Error("a failing reader is no error")
	}
	if err := l.Bind(earth, now); err != nil {
		t.Fatal(err)
	}
	// The refused tables left the first in force; it is held outside.
	for _, c := range [][2]float64{{0, 4}, {0.5, 4}, {1, 3}, {4.57, 1}, {9, 1}} {
		if got := l.Flow(c[0]*1e9, 0, 0).Relative; math.Abs(got-c[1]) > 1e-12 {
			t.Errorf("%g at %g Gyr, want %g", got, c[0], c[1])
		}
	}
	before := 4.0
	for age := 0.51; age < 4.57; age += 0.01 {
		q := l.Flow(age*1e9, 0, 0).Relative
		if !(q < before && q >= 1) {
			t.Errorf("%g at %g Gyr after %g: not monotone", q, age, before)
		}
		before = q
	}
	if r := l.Range(); r.Lo != 0.5e9 || r.Hi != 4.57e9 {
		t.Errorf("range %v", r)
	}
	if err := l.Load(strings.NewReader("0,1\n1,2\n")); err == nil {
		t.Error("loads a table whose columns have no names")
	}
}

type failing struct{}

func (failing) Read([]byte) (int, error) { return 0, errors.New("no") }

// TestAllocations: the hot path allocates nothing.
func TestAllocations(t *testing.T) {
	for _, e := range Laws {
		l := bound(t, e.Name, earth)
		if n := testing.AllocsPerRun(100, func() { l.Flow(2e9, 1700, 3000) }); n != 0 {
			t.Errorf("%s allocates %g times", e.Name, n)
		}
	}
}

func BenchmarkFlow(b *testing.B) {
	for _, e := range Laws {
		l := bound(b, e.Name, earth)
		b.Run(e.Name, func(b *testing.B) {
			for i := 0; b.Loop(); i++ {
				l.Flow(1e9+float64(i&7), 1900+float64(i&7), 3000)
			}
		})
	}
}
