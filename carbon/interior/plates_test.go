package interior

import (
	"fmt"
	"math"
	"testing"

	"cycle/carbon/units"
)

// rayleigh is the heat flow per area in W/m² in the form of the papers,
// q = k ΔT/d (Ra/Ra_c)^β.
func rayleigh(rho, g, alpha, dT, d, kappa, eta, rac, beta, k float64) (ra, nu, q float64) {
	ra = rho * g * alpha * dT * d * d * d / (kappa * eta)
	nu = math.Pow(ra/rac, beta)
	return ra, nu, k * dT / d * nu
}

func TestPlates(t *testing.T) {
	const src = "evaluation of the printed equations"
	heat := func(beta, tm float64) float64 {
		l := newPlates().(*Plates)
		l.Beta, l.Surface = beta, 0 // ΔT proportional to T
		if err := l.Bind(earth, now); err != nil {
			t.Fatal(err)
		}
		return l.Flow(now, tm, tm).Heat
	}
	const third = 1. / 3
	const e = 1e-3
	slope := math.Log(heat(third, 1600*(1+e))/heat(third, 1600*(1-e))) / math.Log((1+e)/(1-e))
	// With ΔT^(1+β) divided out, the rest is the viscosity to the power −β.
	eta := math.Pow(heat(third, 1700)/heat(third, 1600)/math.Pow(1700./1600, 4*third), -3)
	ra, nu, q := rayleigh(4000, 9.8, 3e-5, 1350, 2.89e6, 1e-6, 1e22, 1100, third, 4)

	ref := bound(t, "plates", earth).(*Plates)
	at := ref.Flow(now, ref.TRef, 0)
	heavy := earth
	heavy.MantleMass = 4.03e24
	cool := bound(t, "plates", heavy).(*Plates).warming
	run(t, []row{
		{"Q(1700)/Q(1600)", "β 1/3, E 300 kJ/mol", heat(third, 1700) / heat(third, 1600), 1.6870992, 1.7e-6, exact, src},
		{"Q(1700)/Q(1600)", "β 0.3, E 300 kJ/mol", heat(0.3, 1700) / heat(0.3, 1600), 1.6108661, 1.7e-6, exact, src},
		{"η(1700)/η(1600)", "E 300 kJ/mol", eta, 0.26539571, 1e-6, exact, src},
		{"d ln Q/d ln T", "1600 K", slope, 8.8503555, 2e-5, exact, "4/3 + E/(3 R T)"},
		{"Ra", "form of the papers", ra, 3.83208e6, 5, exact, src},
		{"Nu", "form of the papers", nu, 15.159352, 1e-6, exact, src},
		{"q, mW/m²", "form of the papers", q * 1e3, 28.325, 1e-3, exact, src},
		{"K/Gyr for 1 TW", "4.03e24 kg, 1200 J/kg/K", cool * 1e12 * 1e9, 6.526, 1e-3, exact, src},
		{"relative heat flow", "reference state", at.Relative, 1, 1e-15, exact, "definition"},
		{"crust production", "reference state", at.Crust, 1, 1e-15, exact, "definition"},
		{"recycling", "reference state", at.Recycling, 1, 1e-15, exact, "definition"},
		{"heat flow, TW", "reference state", at.Heat / 1e12, 37.5, 1.5, memory, "36-39 TW convective"},
	})

	// The normalised law against the form of the papers over masses and temperatures.
	for _, beta := range []float64{0, 0.1, 0.3, third} {
		for _, mass := range []float64{0.1, 0.5, 1, 3, 8} {
			p := NewPlanet(mass, 0.3)
			l := newPlates().(*Plates)
			l.Beta = beta
			if err := l.Bind(p, now); err != nil {
				t.Fatal(err)
			}
			paper := func(p *Planet, tm float64) float64 {
				eta := 1e21 * math.Exp(l.E/units.GasConstant*(1/tm-1/l.TRef))
				_, _, q := rayleigh(p.mantleDensity(), p.Gravity, 3e-5, tm-l.Surface, p.MantleDepth, 1e-6, eta, 1100, beta, 4)
				return q
			}
			for tm := 600.0; tm < 3000; tm += 400 {
				want := paper(&p, tm) / paper(&earth, l.TRef)
				f := l.Flow(1e9, tm, 0)
				if math.Abs(f.Relative/want-1) > 1e-12 || math.Abs(f.Heat/p.Area/(l.QRef/earth.Area)/want-1) > 1e-12 {
					t.Errorf("β %g, %g Earth masses, %g K: relative %g, heat %g, want %g", beta, mass, tm, f.Relative, f.Heat, want)
				}
			}
		}
	}

	l := newPlates().(*Plates)
	l.M = 2
	if err := l.Bind(earth, now); err != nil {
		t.Fatal(err)
	}
	if f := l.Flow(now, 1800, 0); math.Abs(f.Crust/(f.Relative*f.Relative)-1) > 1e-14 {
		t.Errorf("crust %g is not the square of %g", f.Crust, f.Relative)
	}
}

// TestEarth: the default history against what is known of the Earth's.
func TestEarth(t *testing.T) {
	l := bound(t, "plates", earth).(*Plates)
	tm, tc := l.Start(0)
	at, age := map[float64]float64{}, 0.1
	var rows []row
	for _, to := range []float64{0.2, 1, 2, 3, 4.57, 7} {
		tm, tc = history(l, age, to, tm, tc, nil)
		age = to
		at[to] = tm
		f := l.Flow(to*1e9, tm, tc)
		t.Logf("%.2f Gyr: %.1f K, heat flow %.2f TW, radiogenic %.2f TW, relative %.3f, cooling %.1f K/Gyr", to, tm, f.Heat/1e12, f.Radiogenic/1e12, f.Relative, -f.MantleRate*1e9)
		if to == 4.57 {
			rows = append(rows,
				row{"potential temperature, °C", "today", tm - 273.15, 1350, 20, published, "Herzberg, Condie & Korenaga 2010"},
				row{"heat loss, TW", "today", f.Heat / 1e12, 37.5, 3.5, memory, "36-39 TW convective"},
			)
		}
	}
	run(t, append(rows,
		row{"potential temperature, °C", "2.57 Ga ago", at[2] - 273.15, 1550, 100, published, "Herzberg, Condie & Korenaga 2010: maximum of 1500-1600 at 2.5-3 Ga ago, within 50"},
		row{"cooling, K/Gyr", "mean of the last 3.57 Gyr", (at[1] - at[4.57]) / 3.57, 75, 25, memory, "secular cooling 50-100 K/Gyr"},
	))
}

// TestStartForgotten: with β = 1/3 the start temperature is forgotten within
// about half a Gyr.
func TestStartForgotten(t *testing.T) {
	l := bound(t, "plates", earth)
	end := func(start, to float64) float64 {
		tm, _ := history(l, 0.1, to, start, 0, nil)
		return tm
	}
	for _, start := range []float64{1850, 2300, 2600} {
		// A sixth or less after 0.5 Gyr, nothing by today.
		if d := math.Abs(end(start, 0.6)-end(2000, 0.6)) / math.Abs(start-2000); d > 0.17 {
			t.Errorf("%.2g of the start from %g K is left after 0.5 Gyr", d, start)
		}
		if d := math.Abs(end(start, 4.57) - end(2000, 4.57)); d > 0.1 {
			t.Errorf("the start from %g K still makes %g K today", start, d)
		}
	}
}

// TestCatastrophe: going back from today with a Urey ratio of 0.2-0.35, β = 1/3
// runs away before 2 Gyr ago, β near 0 does not (Korenaga 2008).
func TestCatastrophe(t *testing.T) {
	for _, urey := range []float64{0.2, 0.35} {
		for _, beta := range []float64{0, 1. / 3} {
			l := newPlates().(*Plates)
			l.Beta = beta
			l.Heating = urey * l.QRef / (heating(&turcotteSchubert, 0) * earth.MantleMass)
			if err := l.Bind(earth, now); err != nil {
				t.Fatal(err)
			}
			if u := l.Flow(now, l.TRef, 0); math.Abs(u.Radiogenic/u.Heat-urey) > 1e-12 {
				t.Fatalf("Urey ratio %g, want %g", u.Radiogenic/u.Heat, urey)
			}
			hot := math.NaN()
			tm, _ := history(l, 4.57, 1.57, l.TRef, 0, func(age, tm, _ float64) bool {
				if tm > 2500 {
					hot = (now - age) / 1e9
				}
				return tm <= 2500
			})
			if runaway := hot <= 2; runaway != (beta > 0) {
				t.Errorf("β %g, Urey ratio %g: beyond 2500 K %.2f Gyr ago, %g K at the end", beta, urey, hot, tm)
			}
		}
	}
}

// TestMass: the smaller the planet, the sooner its heat flow fades.
func TestMass(t *testing.T) {
	for _, name := range []string{"plates", "stagnant"} {
		before := 0.0
		for _, mass := range []float64{0.1, 0.3, 1, 3} {
			l := bound(t, name, NewPlanet(mass, 0.33))
			m0, c0 := l.Start(0)
			tm, tc := history(l, 0.1, 4.57, m0, c0, nil)
			f := l.Flow(now, tm, tc)
			if !(f.Relative > before) {
				t.Errorf("%s: %g Earth masses lose %g per area, a smaller planet %g (common practice)", name, mass, f.Relative, before)
			}
			before = f.Relative
		}
	}
}

// TestCore: the indicator starts with a dynamo, flows as reviews have it
// today, and ends.
func TestCore(t *testing.T) {
	for _, name := range []string{"plates", "stagnant"} {
		var l Law
		for _, e := range Laws {
			if e.Name == name {
				l = e.New()
			}
		}
		for _, f := range l.Fields() {
			if f.Key == "core_flow" {
				*f.Value = 12e12
			}
		}
		if err := l.Bind(NewPlanet(1, 0), now); err == nil {
			t.Errorf("%s cools a core of no mass", name)
		}
		if err := l.Bind(earth, now); err != nil {
			t.Fatal(err)
		}
		if !l.HasCore() || bound(t, name, earth).HasCore() {
			t.Errorf("%s: the core is a state when and only when it has a flow", name)
		}
		m0, c0 := l.Start(0)
		var today, off float64
		history(l, 0.1, 10, m0, c0, func(age, tm, tc float64) bool {
			f := l.Flow(age, tm, tc)
			if math.Abs(age-now) < 0.6e6 {
				today = f.Core
			}
			if !f.Dynamo && off == 0 {
				off = age / 1e9
			}
			if want := units.Year * (f.Radiogenic + f.Core - f.Heat) / (earth.MantleMass * 1200); math.Abs(f.MantleRate-want) > 1e-12*math.Abs(want)+1e-20 {
				t.Fatalf("mantle warms by %g K/yr, its heat budget says %g", f.MantleRate, want)
			}
			if want := -f.Core * units.Year / (earth.Mass * 0.33 * 840); math.Abs(f.CoreRate/want-1) > 1e-12 {
				t.Fatalf("core cools by %g K/yr, want %g", f.CoreRate, want)
			}
			return true
		})
		t.Logf("%s: core heat flow today %.2f TW, dynamo off at %.2f Gyr", name, today/1e12, off)
		if name == "plates" {
			run(t, []row{
				{"core heat flow, TW", "today", today / 1e12, 10, 2, published, "8-12 TW in reviews"},
				{"end of the dynamo, Gyr", "12 TW", off, 7, 2.4, common, "the Earth has one today"},
			})
		}
	}
	l := newPlates().(*Plates)
	l.core.Flow = 10e12
	if err := l.Bind(earth, now); err != nil {
		t.Fatal(err)
	}
	at := func(excess float64) Flow { return l.Flow(now, l.TRef, l.TRef+excess) }
	run(t, []row{
		{"Q_c, TW", "reference state", at(1500).Core / 1e12, 10, 1e-12, exact, "definition"},
		{"Q_c, TW", "twice the excess", at(3000).Core / 1e12, 10 * math.Pow(2, 4./3), 1e-12, exact, "ΔT^(4/3)"},
		{"Q_c, TW", "core as warm as the mantle", at(0).Core, 0, 0, exact, "no difference"},
		{"Q_c, TW", "core colder than the mantle", at(-1500).Core / 1e12, -10, 1e-12, exact, "odd in ΔT"},
	})
	if f := at(1500 + 1); !f.Dynamo {
		t.Error("no dynamo just above 10 TW")
	}
	if f := at(1500 - 100); f.Dynamo {
		t.Error("a dynamo below what the core conducts")
	}
}

func TestPowerLaw(t *testing.T) {
	const src = "Krissansen-Totton, Arney & Catling 2018, evaluated"
	var rows []row
	for _, c := range [][3]float64{{1, 0.2, 1.05155}, {1, 0.45, 1.11973}, {1, 0.73, 1.20137}, {2.5, 0.45, 1.44040}, {4, 0.2, 1.55185}, {4, 0.45, 2.68788}, {4, 0.73, 4.97275}, {0, 0.73, 1}} {
		l := newPowerLaw().(*PowerLaw)
		l.N = c[1]
		if err := l.Bind(earth, now); err != nil {
			t.Fatal(err)
		}
		rows = append(rows, row{"q", fmt.Sprintf("%g Gyr ago, n %g", c[0], c[1]), l.Flow(now-c[0]*1e9, 0, 0).Relative, c[2], 1e-5, exact, src})
	}
	l := bound(t, "powerlaw", earth)
	run(t, append(rows, row{"q", "age 0", l.Flow(0, 0, 0).Relative, math.Pow(0.05, -0.365), 1e-12, exact, "held at a base of 0.05"}))
	if r := l.Range(); r.Holds(now-4.2e9) || !r.Holds(now-4e9) || r.Holds(now+1e9) {
		t.Errorf("range %v", r)
	}
}
