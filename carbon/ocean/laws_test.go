package ocean

import (
	"math"
	"math/rand/v2"
	"testing"

	"cycle/carbon/cite"
	"cycle/carbon/units"

	"pgregory.net/rapid"
)

// TestTable: every row is complete and every default is allowed.
func TestTable(t *testing.T) {
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
		l := bound(t, e)
		for _, f := range l.Fields() {
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
		if !l.Range().Stated() {
			t.Errorf("%s states no range", e.Name)
		}
		if err := e.New().Bind(Planet{Area: 1, Gravity: 0, Mass: 1}); err == nil {
			t.Errorf("%s accepts a planet without gravity", e.Name)
		}
	}
}

// drawn returns a law with parameters drawn from what is allowed, on a drawn planet.
func drawn(t *rapid.T) (string, Law, Planet) {
	e := rapid.SampledFrom(Laws).Draw(t, "law")
	l := e.New()
	for _, f := range l.Fields() {
		switch {
		case !rapid.Bool().Draw(t, "set "+f.Key):
		case f.Min > 0:
			*f.Value = math.Exp(rapid.Float64Range(math.Log(f.Min), math.Log(f.Max)).Draw(t, f.Key))
		default:
			*f.Value = rapid.Float64Range(f.Min, f.Max).Draw(t, f.Key)
		}
		*f.Value = min(max(*f.Value, f.Min), f.Max)
	}
	logs := func(lo, hi float64, label string) float64 {
		return math.Exp(rapid.Float64Range(math.Log(lo), math.Log(hi)).Draw(t, label))
	}
	p := Planet{Area: units.EarthArea * logs(0.05, 10, "area"), Gravity: logs(2, 40, "gravity"), Mass: logs(1e18, 1e23, "ocean")}
	if err := l.Bind(p); err != nil {
		t.Fatal(err)
	}
	return e.Name, l, p
}

// TestRoundTrip: Solve inverts Carbon for every law, over its allowed
// parameters, from a nano-bar to 100 bar and from 200 to 400 K. The tolerance
// is that of ln p by the conditioning of the inverse.
func TestRoundTrip(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		name, l, pl := drawn(t)
		p := math.Exp(rapid.Float64Range(math.Log(1e-9), math.Log(100)).Draw(t, "p"))
		T := rapid.Float64Range(200, 400).Draw(t, "T")
		c, alk := l.Carbon(p, T)
		s := l.Solve(c, alk, T)
		// How much ln p moves when c and alk move by a rounding error.
		const e = 1e-6
		up, down := l.Solve(c*(1+e), alk, T), l.Solve(c, alk*(1-e), T)
		amplify := (math.Abs(math.Log(up.P/s.P)) + math.Abs(math.Log(down.P/s.P))) / e
		if d := math.Abs(math.Log(s.P / p)); !(d <= 1e-12+1e-14*amplify) {
			t.Fatalf("%s: p %g comes back as %g, conditioning %g", name, p, s.P, amplify)
		}
		for _, v := range []float64{s.P, s.H, s.CO2, s.HCO3, s.CO3, s.DIC, s.Omega} {
			if !(v > 0) || math.IsInf(v, 0) {
				t.Fatalf("%s: %+v", name, s)
			}
		}
		if sat, ok := l.(*Saturated); name != "fraction" && !(ok && c < (1+scarce)*sat.m*s.CO3) {
			if total := MolesPerBar(pl)*s.P + pl.Mass*s.DIC; math.Abs(total/c-1) > 1e-12*(1+amplify*1e-2) {
				t.Fatalf("%s: reservoirs hold %g of %g", name, total, c)
			}
		}
	})
}

// TestHydrogenToRounding: [H⁺] of the pair leaves nothing of the alkalinity
// balance but rounding, also where the ocean is far from saturation.
func TestHydrogenToRounding(t *testing.T) {
	l := newPair().(*Pair)
	if err := l.Bind(Planet{Area: units.EarthArea, Gravity: 9.81, Mass: 1.4e21}); err != nil {
		t.Fatal(err)
	}
	rnd := rand.New(rand.NewPCG(1, 2))
	for range 200000 {
		k := l.At(200 + 200*rnd.Float64())
		r := 1 + l.n/l.m*(units.BarPerAtm/k.K0)
		dic := math.Exp(math.Log(1e-9) + rnd.Float64()*math.Log(1e10))
		alk := dic * (3*rnd.Float64() - 0.5)
		h := l.hydrogen(&k, r, dic, alk)
		x, y := k.K1/h, k.K1*k.K2/(h*h)
		b, w := l.Boron*k.KB/(k.KB+h), k.KW/h
		c := dic * (x + 2*y) / (r + x + y)
		if left := c + b + w - h - alk; !(math.Abs(left) <= 2e-15*(c+b+w+h+math.Abs(alk))) {
			t.Fatalf("dic %g, alk %g: h %g leaves %g of the balance", dic, alk, h, left)
		}
	}
}

// TestPressure: what the rates are given is what Solve says, at temperatures in
// any order.
func TestPressure(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		name, l, _ := drawn(t)
		for range 6 {
			T := rapid.SampledFrom([]float64{200, 250, 268, 288, 288.001, 310, 350, 400}).Draw(t, "T")
			p := math.Exp(rapid.Float64Range(math.Log(1e-9), math.Log(100)).Draw(t, "p"))
			c, alk := l.Carbon(p, T)
			s := l.Solve(c, alk, T)
			gp, lnH := l.Pressure(c, alk, T)
			omega := s.Omega
			if pair, ok := l.(*Pair); ok {
				_, _, omega = pair.Balance(c, alk, T)
			}
			if math.Abs(gp/s.P-1) > 1e-12 || math.Abs(lnH-math.Log(s.H)) > 1e-12 || math.Abs(omega/s.Omega-1) > 1e-11 {
				t.Fatalf("%s at %g K: %g bar, ln h %g, Ω %g; Solve has %g, %g, %g", name, T, gp, lnH, omega, s.P, math.Log(s.H), s.Omega)
			}
		}
		for _, c := range []float64{-1, 0, math.NaN()} {
			if p, _ := l.Pressure(c, 1e18, 288); !math.IsNaN(p) {
				t.Fatalf("%s: %g mol give %g bar", name, c, p)
			}
		}
	})
}

// TestDefaultsRoundTrip pins the accuracy with default parameters.
func TestDefaultsRoundTrip(t *testing.T) {
	for _, e := range Laws {
		l := bound(t, e)
		for T := 200.0; T <= 400; T += 10 {
			for p := 1e-9; p <= 100; p *= 10 {
				c, alk := l.Carbon(p, T)
				if got := l.Solve(c, alk, T).P; !(math.Abs(got/p-1) < 2e-11) {
					t.Errorf("%s: %g bar at %g K comes back as %g", e.Name, p, T, got)
				}
			}
		}
	}
}

// TestMonotone: more surface carbon is more pCO₂ and, by chemistry, a more acid ocean.
func TestMonotone(t *testing.T) {
	for _, e := range Laws {
		l := bound(t, e)
		for T := 200.0; T <= 400; T += 20 {
			_, alk := l.Carbon(280e-6, 288)
			before := l.Solve(4e17, alk, T)
			for c := 5e17; c < 1e22; c *= 1.2 {
				s := l.Solve(c, alk, T)
				if !(s.P > before.P) {
					t.Errorf("%s: pCO2 does not rise with carbon at %g mol, %g K", e.Name, c, T)
				}
				if e.Name != "fraction" && !(s.H > before.H) {
					t.Errorf("%s: pH does not fall with carbon at %g mol, %g K", e.Name, c, T)
				}
				before = s
			}
		}
	}
}

// TestNone: too little carbon has no state, and says so.
func TestNone(t *testing.T) {
	for _, e := range Laws {
		l := bound(t, e)
		for _, c := range []float64{-1, 0, math.NaN()} {
			if s := l.Solve(c, 3e18, 288); !math.IsNaN(s.P) {
				t.Errorf("%s: %g mol give %g bar", e.Name, c, s.P)
			}
		}
	}
}

// TestScarceCarbon: where a saturated ocean has hardly a state left, pressure
// goes on positive, rising and smooth down to no carbon, and is below 3e-11 bar there.
func TestScarceCarbon(t *testing.T) {
	l := bound(t, Laws[0]).(*Saturated)
	for T := 200.0; T <= 400; T += 25 {
		full := l.m * l.at(T).co3
		join := full * (1 + scarce)
		at := func(c float64) float64 { return l.Solve(c, 0, T).P }
		if p := at(join); !(p < 3e-11) {
			t.Errorf("%g K: the hyperbola begins at %g bar", T, p)
		}
		before := 0.0
		for c := 1e-9 * full; c < 1.1*full; c += full * min(1e-3, 0.1*c/full+1e-9) {
			p := at(c)
			if !(p > before) {
				t.Fatalf("%g K: %g bar at %g of the carbonate ion, %g just below", T, p, c/full, before)
			}
			if back, _ := l.Carbon(p, T); math.Abs(back/c-1) > 1e-9 {
				t.Fatalf("%g K: %g mol come back as %g", T, c, back)
			}
			before = p
		}
		const e = 1e-7
		up, down := (at(join*(1+e))-at(join))/e, (at(join)-at(join*(1-e)))/e
		if math.Abs(up/down-1) > 1e-3 {
			t.Errorf("%g K: slope jumps from %g to %g", T, down, up)
		}
	}
}

// TestClosedForm: the saturated ocean is the full system at its alkalinity.
func TestClosedForm(t *testing.T) {
	sat, pair := bound(t, Laws[0]), bound(t, Laws[1])
	for T := 200.0; T <= 400; T += 7 {
		for p := 1e-8; p < 100; p *= 3 {
			c, alk := sat.Carbon(p, T)
			a, b := sat.Solve(c, alk, T), pair.Solve(c, alk, T)
			for _, v := range [][2]float64{{a.P, b.P}, {a.H, b.H}, {a.CO2, b.CO2}, {a.HCO3, b.HCO3}, {a.CO3, b.CO3}, {a.DIC, b.DIC}, {a.Alk, b.Alk}, {a.Omega, b.Omega}} {
				if !(math.Abs(v[0]/v[1]-1) < 1e-10) {
					t.Errorf("%g bar, %g K: closed form %+v, full system %+v", p, T, a, b)
					break
				}
			}
		}
	}
}

// TestBisection: the full system with air against bisection in pH, wide
// outside anything a planet should do.
func TestBisection(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		l := newPair().(*Pair)
		if err := l.Bind(earth); err != nil {
			t.Fatal(err)
		}
		c := math.Exp(rapid.Float64Range(math.Log(1e14), math.Log(1e23)).Draw(t, "c"))
		alk := rapid.SampledFrom([]float64{-1, 1}).Draw(t, "sign") * math.Exp(rapid.Float64Range(math.Log(1e13), math.Log(1e22)).Draw(t, "alk"))
		T := rapid.Float64Range(260, 350).Draw(t, "T")
		k := l.At(T)
		r := 1 + l.n/(l.m*k.K0/units.BarPerAtm)
		lo, hi := -3.0, 16.0
		for range 200 {
			mid := 0.5 * (lo + hi)
			h := math.Pow(10, -mid)
			co2 := c / l.m / (r + k.K1/h + k.K1*k.K2/(h*h))
			if l.speciate(&k, 0, co2, h).Alk < alk/l.m {
				lo = mid
			} else {
				hi = mid
			}
		}
		if s := l.Solve(c, alk, T); math.Abs(ph(s.H)-lo) > 1e-8 {
			t.Fatalf("pH %.12g, bisection %.12g", ph(s.H), lo)
		}
	})
}

// TestPower: square roots and logarithms agree.
func TestPower(t *testing.T) {
	for _, nu := range []float64{1, 1.25, 1.5, 1.75, 2, 2.5, 4, 1.7} {
		for x := 1e-9; x < 1e6; x *= 3.7 {
			if got, want := power(x, nu), math.Pow(x, nu); math.Abs(got/want-1) > 1e-13 {
				t.Errorf("%g^%g = %g, want %g", x, nu, got, want)
			}
		}
	}
}

// TestSlope holds the derivative to finite differences.
func TestSlope(t *testing.T) {
	l := bound(t, Laws[0]).(*Saturated)
	for p := 1e-8; p < 100; p *= 7 {
		const e = 1e-5
		up, _ := l.Carbon(p*math.Exp(e), 290)
		down, _ := l.Carbon(p*math.Exp(-e), 290)
		if want, got := math.Log(up/down)/(2*e), l.Slope(p, 290); math.Abs(got-want) > 1e-8 {
			t.Errorf("slope at %g bar is %g, differences give %g", p, got, want)
		}
	}
}

// TestPrecipitation: the reference flux at the reference saturation, nothing at Ω ≤ 1.
func TestPrecipitation(t *testing.T) {
	l := bound(t, Laws[1]).(*Pair)
	run(t, []row{
		{"F", "Ω 5", l.Precipitation(5), 7.5e12, 1, exact, "definition"},
		{"F", "Ω 3, ν 1.75", l.Precipitation(3), 7.5e12 * math.Pow(0.5, 1.75), 1, exact, "k (Ω − 1)^ν"},
		{"F", "Ω 1", l.Precipitation(1), 0, 0, exact, "k (Ω − 1)^ν"},
		{"F", "Ω 0.5", l.Precipitation(0.5), 0, 0, exact, "k (Ω − 1)^ν"},
	})
	if !l.HasAlkalinity() || bound(t, Laws[0]).HasAlkalinity() {
		t.Error("alkalinity must be a state of the full pair alone")
	}
	c, alk := l.Carbon(280e-6, 288)
	if s := l.Solve(c, alk, 288); math.Abs(s.Omega-5) > 1e-9 {
		t.Errorf("the reference state has Ω %g, want 5", s.Omega)
	}
}

// TestFraction: the fixed fraction is proportional, the square goes with √p.
func TestFraction(t *testing.T) {
	l := bound(t, Laws[2]).(*Fraction)
	c, _ := l.Carbon(280e-6, 288)
	share := MolesPerBar(earth) * 280e-6 / c
	ten, _ := l.Carbon(280e-5, 288)
	sq := newFraction().(*Fraction)
	sq.K = 2
	if err := sq.Bind(earth); err != nil {
		t.Fatal(err)
	}
	c2, _ := sq.Carbon(4*280e-6, 288)
	s := l.Solve(c, 0, 288)
	run(t, []row{
		{"share", "280 ppm", share, 0.0103, 1e-12, exact, "definition"},
		{"n p + M DIC over C", "280 ppm", (MolesPerBar(earth)*s.P + earth.Mass*s.DIC) / c, 1, 1e-12, exact, "the species add up to the ocean's share"},
		{"C", "tenfold p, k 1", ten / c, 10, 1e-12, exact, "proportional"},
		{"C", "fourfold p, k 2", c2 / c, 0.0103*4 + (1-0.0103)*2, 1e-12, exact, "definition"},
	})
}

// TestAllocations: the hot path allocates nothing.
func TestAllocations(t *testing.T) {
	for _, e := range Laws {
		l := bound(t, e)
		c, alk := l.Carbon(280e-6, 288)
		if n := testing.AllocsPerRun(100, func() { l.Solve(c, alk, 288) }); n != 0 {
			t.Errorf("%s allocates %g times", e.Name, n)
		}
	}
}

func BenchmarkSolve(b *testing.B) {
	for _, e := range Laws {
		l := bound(b, e)
		c, alk := l.Carbon(280e-6, 288)
		b.Run(e.Name, func(b *testing.B) {
			for i := 0; b.Loop(); i++ {
				l.Solve(c, alk, 288+float64(i&7))
			}
		})
	}
}
