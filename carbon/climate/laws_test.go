package climate

import (
	"math"
	"strings"
	"testing"

	"pgregory.net/rapid"

	"cycle/carbon/units"
)

// earth is today's reference state.
var earth = Reference{T: 288, P: 280e-6, Sun: units.SolarFlux / 4}

func TestTables(t *testing.T) {
	seen := map[string]bool{}
	row := func(name, doc, form string, sources int) {
		if name == "" || doc == "" || form == "" || sources == 0 || seen[name] {
			t.Errorf("%q: incomplete or twice", name)
		}
		seen[name] = true
	}
	for _, e := range Radiations {
		row(e.Name, e.Doc, e.Form, len(e.Source))
		for _, f := range e.New().Fields() {
			checkField(t, e.Name, f)
		}
		if b := e.New().Box(); !b.T.Stated() || !b.P.Stated() {
			t.Errorf("%s: no box", e.Name)
		}
	}
	seen = map[string]bool{}
	for _, e := range Albedos {
		row(e.Name, e.Doc, e.Form, len(e.Source))
		a := e.New()
		for _, f := range a.Fields() {
			checkField(t, e.Name, f)
		}
		if name, allowed, free := a.Free(); free == nil || name == "" || !allowed.Holds(*free) {
			t.Errorf("%s: free number %q in %v", e.Name, name, allowed)
		}
	}
	seen = map[string]bool{}
	for _, e := range Condensations {
		row(e.Name, e.Doc, e.Form, len(e.Source))
	}
	for _, f := range NewStratosphere().Fields() {
		checkField(t, "Stratosphere", f)
	}
}

// corners returns the states on a grid over all that a run may ask for.
func corners(visit func(t, p float64)) {
	for t := 100.0; t <= 700; t += 2.5 {
		for lg := -12.0; lg <= 3; lg += 0.25 {
			visit(t, math.Pow(10, lg))
		}
	}
}

// TestRadiationShape: finite everywhere; held outside the box; inside, rising
// with T and falling with p but for the slips of each fit, smooth in T, and below
// the radiation of a black surface.
func TestRadiationShape(t *testing.T) {
	shape := map[string]struct {
		dropT       float64 // largest fall of F below what a colder state emits, W/m²
		riseP, from float64 // largest rise of F with p, W/m², from this T to 320 K
		riseHot     float64 // the same above 320 K, where F is near the radiation limit
		black       float64 // from this T up F < σT⁴
		kink        float64 // ln p where the slope may jump
	}{
		// The dips are the radiation limit: 271.5 W/m² at 320 K, 268.5 at 343 K.
		"kadoya2019":       {dropT: 3.2, riseP: 0.5, from: 200, riseHot: 2, black: 150},
		"williams1997":     {dropT: 4, riseP: 0.5, from: 210, riseHot: 9.5, black: 190, kink: math.NaN()},
		"caldeira1992":     {from: 220, black: 190, kink: math.NaN()},
		"caldeira1992life": {from: 273, black: 273, kink: math.NaN()},
		"linear_myhre1998": {from: 200, black: 200, kink: math.NaN()},
		"linear_byrne2014": {from: 200, black: 200, kink: math.NaN()},
		"walker1981":       {from: 200, black: 226.4, kink: math.NaN()},
	}
	for _, e := range Radiations {
		s, ok := shape[e.Name]
		if !ok {
			t.Errorf("%s: its shape is not stated here", e.Name)
			continue
		}
		r := e.New()
		if err := r.Bind(earth); err != nil {
			t.Fatal(err)
		}
		b := r.Box()
		corners(func(temp, p float64) {
			f := r.Outgoing(temp, p, math.Log(p))
			if math.IsNaN(f) || f < -50 || f > 600 {
				t.Fatalf("%s: F = %g at %g K, %g bar", e.Name, f, temp, p)
			}
			ht, mt := b.HoldT(temp)
			hp, mp := b.HoldP(p)
			if held := r.Outgoing(ht, hp, math.Log(hp)); (mt || mp) && math.Abs(f-held) > 1e-9 {
				t.Fatalf("%s: not held at the edge: %g at %g K, %g bar, %g at the edge", e.Name, f, temp, p, held)
			}
		})
		lo, hi := math.Log(b.P.Lo), math.Log(b.P.Hi)
		for i := 0; i <= 60; i++ {
			lnp := lo + (hi-lo)*float64(i)/60
			top, prev, slope := math.Inf(-1), math.NaN(), math.NaN()
			const h = 0.02
			for temp := b.T.Lo; temp <= b.T.Hi; temp += h {
				f := r.Outgoing(temp, 0, lnp)
				top = math.Max(top, f)
				if f < top-s.dropT-1e-9 {
					t.Fatalf("%s: falls to %g from %g at %g K, %g bar", e.Name, f, top, temp, math.Exp(lnp))
				}
				if bb := units.Sigma * math.Pow(temp, 4); temp > s.black && f >= bb {
					t.Fatalf("%s: emits %g, a black surface %g, at %g K, %g bar", e.Name, f, bb, temp, math.Exp(lnp))
				}
				now := (f - prev) / h
				if math.Abs(now-slope) > 0.01 {
					t.Fatalf("%s: slope jumps from %g to %g at %g K, %g bar", e.Name, slope, now, temp, math.Exp(lnp))
				}
				prev, slope = f, now
			}
		}
		for temp := b.T.Lo; temp <= b.T.Hi; temp += 5 {
			low, prev, slope := math.Inf(1), math.NaN(), math.NaN()
			const h = 5e-4
			for lnp := lo; lnp <= hi; lnp += h {
				f := r.Outgoing(temp, 0, lnp)
				low = math.Min(low, f)
				rise := s.riseP
				if temp > 320 {
					rise = s.riseHot
				}
				if temp >= s.from && f > low+rise+1e-9 {
					t.Fatalf("%s: rises to %g from %g at %g K, %g bar", e.Name, f, low, temp, math.Exp(lnp))
				}
				now := (f - prev) / h
				if math.Abs(now-slope) > 0.1 && !(math.Abs(lnp-s.kink) < 2.5*h) {
					t.Fatalf("%s: slope jumps from %g to %g at %g K, ln p = %g", e.Name, slope, now, temp, lnp)
				}
				prev, slope = f, now
			}
		}
	}
}

// TestAlbedoShape: between 0 and 1 and smooth everywhere, whatever the free
// number; less ice, and for the ramps less reflection, when warmer.
func TestAlbedoShape(t *testing.T) {
	for _, e := range Albedos {
		a := e.New()
		if err := a.Bind(earth); err != nil {
			t.Fatal(err)
		}
		_, allowed, free := a.Free()
		before := *free
		for _, x := range []float64{allowed.Lo, before, allowed.Hi} {
			*free = x
			corners(func(temp, p float64) {
				v, ice := a.Planetary(temp, p), a.IceFraction(temp)
				if !(v > -0.1 && v < 1) || !(ice >= 0 && ice <= 1) {
					t.Fatalf("%s: A = %g, ice %g at %g K, %g bar, free number %g", e.Name, v, ice, temp, p, x)
				}
				if b := a.Box(); b.T.Stated() {
					ht, _ := b.HoldT(temp)
					hp, _ := b.HoldP(p)
					if _, isRamp := a.(*WilliamsAlbedo); !isRamp && math.Abs(a.Planetary(ht, hp)-v) > 1e-12 {
						t.Fatalf("%s: not held at %g K, %g bar", e.Name, temp, p)
					}
				}
			})
		}
		*free = before
		for _, p := range []float64{1e-6, 3e-4, 1e-2, 1, 9} {
			prev, slope := math.NaN(), math.NaN()
			const h = 0.01
			for temp := 195.0; temp < 365; temp += h {
				v := a.Planetary(temp, p)
				now := (v - prev) / h
				if b := a.Box().T; math.Abs(now-slope) > 2e-5 && !(b.Stated() && (math.Abs(temp-b.Lo) < 0.1 || math.Abs(temp-b.Hi) < 0.1)) {
					t.Fatalf("%s: slope jumps from %g to %g at %g K", e.Name, slope, now, temp)
				}
				if e.Name != "williams1997" && v > prev+1e-12 { // its blend rises by up to 0.035
					t.Fatalf("%s: A rises from %g to %g at %g K", e.Name, prev, v, temp)
				}
				prev, slope = v, now
			}
		}
		for temp := 150.0; temp < 400; temp += 0.5 {
			if a.IceFraction(temp+0.5) > a.IceFraction(temp) {
				t.Fatalf("%s: more ice at %g K", e.Name, temp+0.5)
			}
		}
	}
	// A Rayleigh layer and thick CO₂ reflect more.
	for _, name := range []string{"ramp", "williams1997"} {
		for _, e := range Albedos {
			if a := e.New(); e.Name == name && !(a.Planetary(290, 5) > a.Planetary(290, 0.5) && a.Planetary(290, 0.5) > a.Planetary(290, 3e-4)) {
				t.Errorf("%s: thicker CO2 does not reflect more", name)
			}
		}
	}
}

// TestParameters: finite for any parameters that a scenario may set.
func TestParameters(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		temp := rapid.Float64Range(100, 700).Draw(t, "T")
		lnp := rapid.Float64Range(math.Log(1e-12), math.Log(1000)).Draw(t, "ln p")
		draw := func(fields []units.Field) {
			for _, f := range fields {
				*f.Value = rapid.Float64Range(f.Min, f.Max).Draw(t, f.Key)
			}
		}
		for _, e := range Radiations {
			r := e.New()
			draw(r.Fields())
			if err := r.Bind(earth); err != nil {
				t.Fatal(err)
			}
			if f := r.Outgoing(temp, math.Exp(lnp), lnp); math.IsNaN(f) || math.Abs(f) > 2500 {
				t.Fatalf("%s: F = %g", e.Name, f)
			}
			// More CO₂ never lets a mild climate radiate more.
			b := r.Box()
			p1 := rapid.Float64Range(math.Log(b.P.Lo), math.Log(b.P.Hi)).Draw(t, "p1")
			if f1, f2 := r.Outgoing(285, 0, p1), r.Outgoing(285, 0, p1+0.1); f2 > f1+1e-9 {
				t.Fatalf("%s: F rises from %g to %g with CO2 at ln p = %g", e.Name, f1, f2, p1)
			}
		}
		for _, e := range Albedos {
			a := e.New()
			draw(a.Fields())
			_, allowed, free := a.Free()
			*free = rapid.Float64Range(allowed.Lo, allowed.Hi).Draw(t, "free")
			if v := a.Planetary(temp, math.Exp(lnp)); !(v > -0.2 && v < 1.2) {
				t.Fatalf("%s: A = %g", e.Name, v)
			}
		}
	})
}

func TestSolveFree(t *testing.T) {
	for _, re := range Radiations {
		for _, ae := range Albedos {
			r, a := re.New(), ae.New()
			left, err := SolveFree(r, a, earth)
			if err != nil || math.Abs(left) > 1e-10 || math.Abs(Imbalance(r, a, earth.Sun, earth.T, earth.P)) > 1e-10 {
				t.Errorf("%s with %s: left %g, %v", re.Name, ae.Name, left, err)
			}
			// The reference state damps, and the first-order sensitivity is that of the laws.
			s, err := Sensitivity(r, a, earth)
			if err != nil {
				t.Errorf("%s with %s: %v", re.Name, ae.Name, err)
				continue
			}
			// A thousandth of the forcing of a doubling, by the root of the balance.
			const part = 1e-3
			force := part * Imbalance(r, a, earth.Sun, earth.T, 2*earth.P)
			warm := root(func(temp float64) float64 { return force + Imbalance(r, a, earth.Sun, temp, earth.P) }, earth.T-0.5, earth.T+0.5)
			if got := (warm - earth.T) / part; !(math.Abs(got/s-1) < 5e-3) {
				t.Errorf("%s with %s: %.3f K per doubling by roots, %.3f by derivatives", re.Name, ae.Name, got, s)
			}
			t.Logf("%-17s %-13s forcing %.2f W/m², sensitivity %.2f K per doubling", re.Name, ae.Name, Forcing(r, earth), s)
		}
	}
}

func TestSolveFreeRefuses(t *testing.T) {
	r, a := newKadoya2019(), newRamp().(*Ramp)
	before := a.Warm
	for _, sun := range []float64{200, 2000, math.NaN()} {
		_, err := SolveFree(r, a, Reference{T: 288, P: 280e-6, Sun: sun})
		if err == nil || !strings.Contains(err.Error(), "albedo without ice between 0 and 0.6") || !strings.Contains(err.Error(), "288.00 K") {
			t.Errorf("%g W/m²: %v", sun, err)
		}
		if a.Warm != before {
			t.Errorf("a refused balance changes the albedo to %g", a.Warm)
		}
	}
	// A root at an end of the range.
	c := newConstant().(*Constant)
	if left, err := SolveFree(r, c, Reference{T: 288, P: 280e-6, Sun: out("kadoya2019", 288, 280e-6)}); err != nil || left != 0 || c.A != 0 {
		t.Errorf("A = %g, left %g, %v; want 0", c.A, left, err)
	}
	// Half the globe freezing within three kelvin does not damp.
	steep := newRamp().(*Ramp)
	steep.Centre, steep.Width = 280, 3
	ref := Reference{T: 280, P: 280e-6, Sun: earth.Sun}
	if _, err := SolveFree(r, steep, ref); err != nil {
		t.Fatal(err)
	}
	if _, err := Sensitivity(r, steep, ref); err == nil || !strings.Contains(err.Error(), "unstable") {
		t.Errorf("an unstable reference state has a sensitivity: %v", err)
	}
}

// TestForcing: what each closure says of a doubling from 280 to 560 ppm at 288 K.
func TestForcing(t *testing.T) {
	run(t, []check{
		{"linear_myhre1998", "forcing", Forcing(radiation("linear_myhre1998"), earth), 3.708337, 2e-3, independent, "Myhre et al. 1998; the limit takes 0.0014"},
		between("kadoya2019", "forcing", Forcing(radiation("kadoya2019"), earth), 3.2, 4.2, published, "Myhre et al. 1998: 3.7 W/m²"),
		between("caldeira1992", "forcing", Forcing(radiation("caldeira1992"), earth), 2.7, 4.7, published, "Myhre et al. 1998: 3.7 W/m²"),
		{"caldeira1992life", "warming of 2x", steady(radiation("caldeira1992life"), &CaldeiraAlbedo{iceEdge: defaultIceEdge}, 342, 5.6e-4, 275, 315) -
			steady(radiation("caldeira1992life"), &CaldeiraAlbedo{iceEdge: defaultIceEdge}, 342, 2.8e-4, 275, 315), 3.065, 5e-4, independent, "Caldeira & Kasting 1992, Nature 360"},
		{"walker1981", "warming of 2x under constant albedo", 4.6 * (math.Pow(2, 0.364) - 1), 1.3202, 1e-4, independent, "Walker, Hays & Kasting 1981"},
	})
}

// TestSaturationShape: finite, rising, smooth, from 100 to 700 K.
func TestSaturationShape(t *testing.T) {
	laws := map[string]func(float64) float64{"WaterPressure": WaterPressure, "WaterLiquid": WaterLiquid, "WaterIce": WaterIce}
	for _, e := range Condensations {
		laws[e.Name] = e.Pressure
	}
	for name, law := range laws {
		prev, slope := math.NaN(), math.NaN()
		const h = 0.01
		for temp := 100.0; temp <= 700; temp += h {
			p := law(temp)
			if !(p > 0) || math.IsInf(p, 0) || p < prev {
				t.Fatalf("%s: %g after %g bar at %g K", name, p, prev, temp)
			}
			now := math.Log(p/prev) / h
			if math.Abs(now-slope) > 1e-3*(1+math.Abs(slope)) {
				t.Fatalf("%s: slope jumps from %g to %g at %g K", name, slope, now, temp)
			}
			prev, slope = p, now
		}
	}
	for temp := WaterTripleT - 1.0; temp < WaterTripleT+1; temp += 0.01 {
		law := WaterIce(temp)
		if temp > WaterTripleT {
			law = WaterLiquid(temp)
		}
		if math.Abs(WaterPressure(temp)/law-1) > 2e-3 {
			t.Fatalf("the blend is off by %g at %g K", WaterPressure(temp)/law-1, temp)
		}
	}
	s := NewStratosphere()
	for temp := 100.0; temp < 700; temp++ {
		for _, dry := range []float64{0, 1e-3, 1, 100} {
			if f, g := s.Mixing(temp, dry), s.Mixing(temp+1, dry); !(f > 0 && f <= 1 && g >= f*(1-1e-12)) {
				t.Fatalf("stratosphere: %g, then %g at %g K under %g bar", f, g, temp, dry)
			}
		}
	}
}

// TestBoilingPoint: the inverse, everywhere; lower pressure boils colder.
// Common practice, no source.
func TestBoilingPoint(t *testing.T) {
	prev := 0.0
	for lg := -25.0; lg < 5; lg += 0.01 {
		p := math.Pow(10, lg)
		b := BoilingPoint(p)
		if !(b >= 100 && b <= WaterCriticalT) || b < prev {
			t.Fatalf("%g bar: %g after %g K", p, b, prev)
		}
		if b > 100 && b < WaterCriticalT && math.Abs(WaterPressure(b)/p-1) > 1e-9 {
			t.Fatalf("%g bar: boils at %g K, where the pressure is %g", p, b, WaterPressure(b))
		}
		prev = b
	}
	if b := BoilingPoint(math.NaN()); b != WaterCriticalT {
		t.Errorf("not a number: %g", b)
	}
}

// TestHold: the ends, and a range that is not stated.
func TestHold(t *testing.T) {
	b := Box{T: units.Range{Lo: 200, Hi: 300}}
	for _, c := range []struct {
		x, want float64
		moved   bool
	}{{199, 200, true}, {200, 200, false}, {250, 250, false}, {301, 300, true}} {
		if got, moved := b.HoldT(c.x); got != c.want || moved != c.moved {
			t.Errorf("%g: %g, %v", c.x, got, moved)
		}
	}
	if got, moved := b.HoldP(1e9); got != 1e9 || moved {
		t.Errorf("an unstated range holds: %g, %v", got, moved)
	}
}

var sink float64

func BenchmarkOutgoing(b *testing.B) {
	for _, e := range Radiations {
		r := e.New()
		b.Run(e.Name, func(b *testing.B) {
			b.ReportAllocs()
			for i := 0; i < b.N; i++ {
				sink += r.Outgoing(288, 280e-6, -8.18+float64(i&7)*0.1)
			}
		})
	}
}

func BenchmarkPlanetary(b *testing.B) {
	for _, e := range Albedos {
		a := e.New()
		b.Run(e.Name, func(b *testing.B) {
			b.ReportAllocs()
			for i := 0; i < b.N; i++ {
				sink += a.Planetary(288+float64(i&7), 280e-6)
			}
		})
	}
}

func BenchmarkPressure(b *testing.B) {
	for name, f := range map[string]func(float64) float64{"WaterPressure": WaterPressure, "BoilingPoint": BoilingPoint, "CO2Pressure": CO2Pressure} {
		b.Run(name, func(b *testing.B) {
			b.ReportAllocs()
			for i := 0; i < b.N; i++ {
				sink += f(1 + 190*float64(i&1))
			}
		})
	}
}
