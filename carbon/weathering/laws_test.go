package weathering

import (
	"fmt"
	"math"
	"os"
	"strings"
	"testing"

	"cycle/carbon/units"
	"pgregory.net/rapid"
)

// earth is the reference state of the tests: 288 K, 280 µbar, S₀/4 = 340.25 W/m²,
// 6 Tmol/yr (the silicate sink used by Berner) on 0.3 of 5.1e14 m².
var earth = Reference{T: 288, P: 280e-6, Sun: 340.25, Alb: 0.3, Flux: 6e12, Land: 1.53e14}

// at returns the state at a temperature in K and a pressure in bar, all else as
// in the reference state.
func at(ref Reference, t, p float64) *Env {
	return &Env{Age: 4.57e9, T: t, P: p, LnP: math.Log(p / ref.P), Sun: ref.Sun, Alb: ref.Alb, Crust: 1}
}

// set holds parameters that differ from the defaults, in base units.
type set map[string]float64

// build returns a law with parameters set and bound. "supply " before the name
// wraps it.
func build(t testing.TB, name string, s set, ref Reference) Law {
	t.Helper()
	l := fresh(t, name)
	for key, v := range s {
		found := false
		for _, f := range l.Fields() {
			if f.Key == key {
				*f.Value, found = v, true
			}
		}
		if !found {
			t.Fatalf("%s has no parameter %s", name, key)
		}
	}
	if err := l.Bind(ref); err != nil {
		t.Fatalf("%s: %v", name, err)
	}
	return l
}

func fresh(t testing.TB, name string) Law {
	t.Helper()
	if rest, ok := strings.CutPrefix(name, "supply "); ok {
		return NewSupply(fresh(t, rest))
	}
	for _, e := range entries() {
		if e.Name == name {
			return e.New()
		}
	}
	t.Fatalf("no law %q", name)
	return nil
}

// entries lists every law and one wrapped.
func entries() []Entry {
	all := append(append([]Entry{}, Land...), Seafloor...)
	w := Land[0]
	w.Name, w.New = "supply walker1981", func() Law { return NewSupply(newWalker1981()) }
	return append(all, w)
}

func TestTables(t *testing.T) {
	if Land[0].Name != "walker1981" || Seafloor[0].Name != "coogan2015" {
		t.Errorf("defaults are %s and %s", Land[0].Name, Seafloor[0].Name)
	}
	doc, err := os.ReadFile("doc.go")
	if err != nil {
		t.Fatal(err)
	}
	seen := map[string]bool{}
	for _, e := range entries() {
		if seen[e.Name] {
			t.Errorf("%s: twice", e.Name)
		}
		seen[e.Name] = true
		if e.Doc == "" || e.Form == "" || len(e.Source) == 0 || e.Source[0].IsZero() {
			t.Errorf("%s: needs a line, an equation and a source", e.Name)
		}
		if !strings.HasPrefix(e.Name, "supply ") && !strings.Contains(string(doc), "//	"+e.Name+" ") {
			t.Errorf("%s: not in the table of the package comment", e.Name)
		}
	}
}

func TestFields(t *testing.T) {
	for _, e := range entries() {
		l := e.New()
		keys := map[string]bool{}
		for _, f := range l.Fields() {
			name := e.Name + "." + f.Key
			if keys[f.Key] {
				t.Errorf("%s: twice", name)
			}
			keys[f.Key] = true
			if f.Doc == "" || f.Source.IsZero() || f.Value == nil || !(f.Min < f.Max) {
				t.Errorf("%s: needs a line, a source, a value and a range", name)
				continue
			}
			if err := f.Check(*f.Value); err != nil {
				t.Errorf("%s: default: %v", name, err)
			}
			if !f.Published.Holds(*f.Value) {
				t.Errorf("%s: default %g outside the published %v", name, *f.Value, f.Published)
			}
			if p := f.Published; p.Stated() && (f.Check(p.Lo) != nil || f.Check(p.Hi) != nil || !(p.Lo < p.Hi)) {
				t.Errorf("%s: published %v not inside the allowed %g to %g", name, p, f.Min, f.Max)
			}
			if back, _, err := f.Kind.Parse(f.Text(*f.Value)); err != nil || back != *f.Value {
				t.Errorf("%s: %q reads back as %g, %v", name, f.Text(*f.Value), back, err)
			}
		}
	}
}

// TestEveryFieldMatters moves each parameter and looks for a change of Relative.
func TestEveryFieldMatters(t *testing.T) {
	probes := []*Env{at(earth, 200, 1e-5), at(earth, 250, 1e-2), at(earth, 270, 1), at(earth, 320, 1e-3), at(earth, 420, 50)}
	for _, p := range probes {
		p.Crust, p.LnH = 3, 2
	}
	for _, e := range entries() {
		var s set
		if e.Name == "berner1994" {
			s = set{"plants": 0.5} // at 1 the law before plants has no say
		}
		base := build(t, e.Name, s, earth)
		for i, f := range base.Fields() {
			l := build(t, e.Name, s, earth)
			moved := l.Fields()[i]
			v := *f.Value * 1.01
			if v == 0 {
				v = 0.01 * f.Max
			}
			*moved.Value = math.Min(v, f.Max)
			if *moved.Value == *f.Value {
				*moved.Value = 0.99 * *f.Value
			}
			if err := l.Bind(earth); err != nil {
				t.Fatal(err)
			}
			change := 0.0
			for _, p := range probes {
				change = math.Max(change, math.Abs(l.Relative(p)/base.Relative(p)-1))
			}
			if !(change > 1e-9) {
				t.Errorf("%s.%s does nothing", e.Name, f.Key)
			}
		}
	}
}

func TestOneAtReference(t *testing.T) {
	refs := []Reference{earth, {T: 285, P: 33e-5, Sun: 341.5, Alb: 0.31, Flux: 7.5e12, Land: 1.5e14}, {T: 295.5, P: 1e-2, Sun: 250, Alb: 0.22, Flux: 3e12, Land: 4e14}}
	for _, e := range entries() {
		want := 1.0
		if e.Absent {
			want = 0
		}
		for _, ref := range refs {
			l := build(t, e.Name, nil, ref)
			if got := l.Relative(at(ref, ref.T, ref.P)); math.Abs(got-want) > 1e-15 {
				t.Errorf("%s: %.17g at the reference state %+v, want %g", e.Name, got, ref, want)
			}
			if h, ok := l.(Hydrologic); ok {
				if got := h.Runoff(at(ref, ref.T, ref.P)); got != 1 {
					t.Errorf("%s: runoff %g at the reference state", e.Name, got)
				}
			}
		}
	}
}

// An axis is one coordinate of the box in which a law must behave.
type axis struct {
	name   string
	lo, hi float64
	put    func(e *Env, x float64)
}

var axes = []axis{
	{"T", 100, 700, func(e *Env, x float64) { e.T = x }},
	{"ln p", math.Log(1e-12 / earth.P), math.Log(1000 / earth.P), func(e *Env, x float64) { e.LnP, e.P = x, earth.P*math.Exp(x) }},
	{"sunlight", 5, 1500, func(e *Env, x float64) { e.Sun = x }},
	{"albedo", 0.02, 0.95, func(e *Env, x float64) { e.Alb = x }},
	{"ln crust", math.Log(1e-6), math.Log(1e3), func(e *Env, x float64) { e.Crust = math.Exp(x) }},
	{"ln [H+]", -15, 15, func(e *Env, x float64) { e.LnH = x }},
}

// lnRelative keeps a logarithm finite where a law underflows.
func lnRelative(l Law, e *Env) float64 { return math.Log(l.Relative(e) + 1e-290) }

// kink looks for a jump of the slope of f in [lo, hi]: it takes the places where
// slopes left and right differ most on a grid and zooms in. A smooth function
// loses the difference in proportion to the step, a kink keeps it. It returns
// the largest difference left and its place.
func kink(f func(float64) float64, lo, hi float64) (jump, where float64) {
	const n, zooms = 600, 5
	diff := func(x, h float64) float64 { return math.Abs(f(x+h)-2*f(x)+f(x-h)) / h }
	type cell struct{ d, x float64 }
	var worst [4]cell
	h := (hi - lo) / n
	for i := 1; i < n; i++ {
		c := cell{x: lo + float64(i)*h}
		c.d = diff(c.x, h)
		for k := range worst {
			if c.d > worst[k].d {
				worst[k], c = c, worst[k]
			}
		}
	}
	for _, w := range worst {
		h, best := h, w
		if w.x == 0 {
			continue
		}
		for range zooms {
			x0, step := best.x, h/4
			best.d = -1
			for k := -4; k <= 4; k++ {
				if c := (cell{diff(x0+float64(k)*step, step), x0 + float64(k)*step}); c.d > best.d && c.x-step >= lo && c.x+step <= hi {
					best = c
				}
			}
			h = step
		}
		if best.d > jump {
			jump, where = best.d, best.x
		}
	}
	return jump, where
}

// jumpAllowed bounds the jump of the slope of ln W, per unit of the axis, that
// may be left when the step of kink has shrunk to (hi − lo)/614400.
const jumpAllowed = 0.02

func TestKinkFindsKinks(t *testing.T) {
	for _, c := range []struct {
		name string
		f    func(x float64) float64
		want bool
	}{
		{"clipped line", func(x float64) float64 { return 0.1 * math.Max(x-263.456, 0) }, true},
		{"step", func(x float64) float64 { return math.Floor(x / 311) }, true},
		{"weak kink on a slope", func(x float64) float64 { return 0.07*x + 0.05*math.Abs(x-401.23) }, true},
		{"bracket clipped at 1e-3", func(x float64) float64 { return math.Log(math.Max(1+0.045*(x-288), 1e-3)) }, true},
		{"softened bracket", func(x float64) float64 { return lnBracket(1 + 0.045*(x-288)) }, false},
		{"tanh", func(x float64) float64 { return 5 * math.Tanh((x-263)/10) }, false},
		{"above", func(x float64) float64 { return above(x, 271.2, 1) }, false},
		{"below", func(x float64) float64 { return below(x, 271.2, 1) }, false},
	} {
		if jump, where := kink(c.f, 100, 700); (jump > jumpAllowed) != c.want {
			t.Errorf("%s: slope jumps by %g at %g", c.name, jump, where)
		}
	}
}

// TestBox walks every law with default parameters along every axis through mild,
// cold and hot states.
func TestBox(t *testing.T) {
	states := []*Env{at(earth, 288, 280e-6), at(earth, 230, 0.5), at(earth, 272.9, 1e-7), at(earth, 360, 30)}
	for _, e := range entries() {
		l := build(t, e.Name, nil, earth)
		for _, s := range states {
			for _, a := range axes {
				probe := *s
				f := func(x float64) float64 { a.put(&probe, x); return lnRelative(l, &probe) }
				if jump, where := kink(f, a.lo, a.hi); jump > jumpAllowed {
					t.Errorf("%s: slope along %s jumps by %.3g at %.6g", e.Name, a.name, jump, where)
				}
				last := math.Inf(-1)
				for i := 0; i <= 500; i++ {
					a.put(&probe, a.lo+(a.hi-a.lo)*float64(i)/500)
					w := l.Relative(&probe)
					if math.IsNaN(w) || math.IsInf(w, 0) || w < 0 || (w == 0 && !e.Absent) {
						t.Fatalf("%s: %g at %+v", e.Name, w, probe)
					}
					// More heat, CO₂, crust, acid or sunlight never slows weathering; more albedo never speeds it.
					if (a.name != "albedo" && w < last*(1-1e-12)) || (a.name == "albedo" && i > 0 && w > last*(1+1e-12)) {
						t.Fatalf("%s: %g after %g along %s at %+v", e.Name, w, last, a.name, probe)
					}
					last = w
				}
			}
		}
	}
}

// TestRandomParameters draws parameters over their allowed ranges: whatever Bind
// accepts must be finite, monotone and continuously differentiable.
func TestRandomParameters(t *testing.T) {
	for _, e := range entries() {
		accepted, refused := 0, 0
		t.Run(e.Name, func(t *testing.T) {
			rapid.Check(t, func(t *rapid.T) {
				l := e.New()
				for _, f := range l.Fields() {
					*f.Value = drawField(t, f)
				}
				if err := l.Bind(earth); err != nil {
					refused++
					if key, _, ok := strings.Cut(err.Error(), ":"); !ok || !hasKey(l, key) {
						t.Fatalf("error names no parameter: %v", err)
					}
					return
				}
				accepted++
				probe := Env{Crust: 1}
				for _, a := range axes {
					a.put(&probe, rapid.Float64Range(a.lo, a.hi).Draw(t, a.name))
				}
				for _, a := range axes[:2] {
					p := probe
					last := 0.0
					for i := 0; i <= 100; i++ {
						a.put(&p, a.lo+(a.hi-a.lo)*float64(i)/100)
						w := l.Relative(&p)
						if math.IsNaN(w) || math.IsInf(w, 0) || w < 0 {
							t.Fatalf("%g at %+v", w, p)
						}
						if w < last*(1-1e-9) {
							t.Fatalf("%g after %g along %s at %+v", w, last, a.name, p)
						}
						last = w
					}
				}
				for _, a := range axes[:3] {
					p := probe
					f := func(x float64) float64 { a.put(&p, x); return lnRelative(l, &p) }
					if jump, where := kink(f, a.lo, a.hi); jump > jumpAllowed {
						t.Fatalf("slope of ln W along %s jumps by %g at %g", a.name, jump, where)
					}
				}
				if s, ok := l.(Limited); ok {
					if x := s.Saturation(&probe); !(x >= 0 && x <= 1) {
						t.Fatalf("saturation %g", x)
					}
				}
			})
		})
		if accepted < 20 {
			t.Errorf("%s: only %d draws accepted, %d refused", e.Name, accepted, refused)
		}
	}
}

func drawField(t *rapid.T, f units.Field) float64 {
	if lo := math.Max(f.Min, 1e-9*f.Max); f.Min > 0 && f.Max/f.Min > 50 || f.Max > 1e10 {
		return math.Min(f.Max, math.Max(f.Min, math.Exp(rapid.Float64Range(math.Log(lo), math.Log(f.Max)).Draw(t, f.Key))))
	}
	return rapid.Float64Range(f.Min, f.Max).Draw(t, f.Key)
}

func hasKey(l Law, keys string) bool {
	for _, key := range strings.Split(keys, ", ") {
		found := false
		for _, f := range l.Fields() {
			found = found || f.Key == key
		}
		if !found {
			return false
		}
	}
	return true
}

// TestBindRefuses gives reference states that leave a law no meaning.
func TestBindRefuses(t *testing.T) {
	for _, c := range []struct {
		law  string
		s    set
		ref  Reference
		want string
	}{
		{"supply walker1981", set{"supply_limit": 6e12}, earth, "supply_limit"},
		{"supply walker1981", nil, Reference{T: 288}, "supply_limit"},
		{"foley2015", set{"erosion": 1e-6}, earth, "erosion"},
		{"foley2015", nil, Reference{T: 288, Flux: 6e12}, "erosion"},
		{"graham2020", set{"rate": 1e-8}, earth, "rate"},
		{"graham2020", nil, Reference{T: 288, Sun: 340, Flux: 6e12}, "rate"},
		{"graham2020", nil, Reference{T: 288, Flux: 6e12, Land: 1e14}, "precipitation"},
	} {
		l := fresh(t, c.law)
		for key, v := range c.s {
			for _, f := range l.Fields() {
				if f.Key == key {
					*f.Value = v
				}
			}
		}
		if err := l.Bind(c.ref); err == nil || !strings.HasPrefix(err.Error(), c.want) {
			t.Errorf("%s %v: got %v, want an error on %s", c.law, c.s, err, c.want)
		}
	}
}

func TestNoAllocation(t *testing.T) {
	env := at(earth, 281, 1e-3)
	for _, e := range entries() {
		l := build(t, e.Name, nil, earth)
		if n := testing.AllocsPerRun(100, func() { sink += l.Relative(env) }); n != 0 {
			t.Errorf("%s: %g allocations", e.Name, n)
		}
	}
}

var sink float64

func BenchmarkRelative(b *testing.B) {
	for _, e := range entries() {
		l := build(b, e.Name, nil, earth)
		for _, c := range []struct {
			name string
			t, p float64
		}{{"warm", 291, 1e-3}, {"cold", 231, 1e-1}} {
			env := at(earth, c.t, c.p)
			b.Run(fmt.Sprintf("%s/%s", strings.ReplaceAll(e.Name, " ", "_"), c.name), func(b *testing.B) {
				b.ReportAllocs()
				for b.Loop() {
					sink = l.Relative(env)
				}
			})
		}
	}
}

// TestSaturationGoesWithRelative: the supply limit of a law is the same in all states.
func TestSaturationGoesWithRelative(t *testing.T) {
	n := 0
	for _, e := range Land {
		l := e.New()
		if err := l.Bind(earth); err != nil {
			t.Fatal(err)
		}
		s, ok := l.(Limited)
		if !ok {
			continue
		}
		n++
		at := func(temp, p float64) *Env {
			return &Env{T: temp, P: p, LnP: math.Log(p / earth.P), Sun: earth.Sun, Alb: earth.Alb, Crust: 1}
		}
		ref := s.Saturation(at(earth.T, earth.P))
		for temp := 230.0; temp < 360; temp += 13 {
			for p := 1e-6; p < 20; p *= 7 {
				e := at(temp, p)
				if got, want := s.Saturation(e), ref*l.Relative(e); math.Abs(got-want) > 1e-12*want {
					t.Errorf("%T at %g K, %g bar: %.15g of the limit, want %.15g", l, temp, p, got, want)
				}
			}
		}
	}
	if n < 2 {
		t.Errorf("%d laws know a supply limit", n)
	}
}

// TestAcidic: exactly the laws of the seafloor that look at [H⁺] say so.
func TestAcidic(t *testing.T) {
	n := 0
	for _, e := range Seafloor {
		l := e.New()
		if err := l.Bind(earth); err != nil {
			t.Fatal(err)
		}
		at := func(lnH float64) float64 {
			return l.Relative(&Env{T: earth.T, P: earth.P, Sun: earth.Sun, Alb: earth.Alb, Crust: 1, LnH: lnH})
		}
		_, says := l.(Acidic)
		if looks := at(2) != at(-1); looks != says {
			t.Errorf("%s looks at [H+]: %v, says so: %v", e.Name, looks, says)
		}
		if says {
			n++
		}
	}
	if n == 0 {
		t.Error("no law looks at [H+]")
	}
}
