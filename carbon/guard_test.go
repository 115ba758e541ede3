package carbon

import (
	"context"
	"math"
	"testing"

	"cycle/carbon/units"
	"cycle/ode"
)

// bruteForce integrates without the guard in many short legs, kicks the
// temperature at each, and returns the age at which ∂(dT/dt)/∂T at fixed carbon
// first turns positive, and the age of the first freeze.
func bruteForce(t *testing.T, s *Setup, leg, kick, until float64) (lost, froze float64) {
	t.Helper()
	m, err := NewModel(s)
	if err != nil {
		t.Fatal(err)
	}
	st, _ := m.start()
	y := make([]float64, m.lay.n)
	m.lay.pack(y, &st)
	f := func(dy []float64, t float64, y []float64) { m.derivative(dy, t, y) }
	sol, err := ode.NewSolver(&ode.Problem{Dim: m.lay.n, Func: f},
		&ode.Settings{RelTol: 1e-6, AbsTol: m.atol(1e-6), MaxStep: leg / 2, Guard: ode.Guard{Off: true}})
	if err != nil {
		t.Fatal(err)
	}
	up, down := make([]float64, m.lay.n), make([]float64, m.lay.n)
	lost = math.NaN()
	for a := s.Start; a < until; a += leg {
		if _, err := sol.Integrate(a, a+leg, y); err != nil {
			t.Fatal(err)
		}
		const d = 1e-4 // K
		t0 := y[0]
		y[0] = t0 + d
		f(up, a+leg, y)
		y[0] = t0 - d
		f(down, a+leg, y)
		y[0] = t0
		if up[0] > down[0] && math.IsNaN(lost) {
			lost = a + leg
		}
		if y[0] < s.FrozenBelow {
			return lost, a + leg
		}
		kick = -kick
		y[0] += kick
	}
	return lost, math.NaN()
}

// losingPlanets lose their warm branch, one while plants spread, one while land
// grows, one as its interior cools under a steady star.
var losingPlanets = []struct {
	name  string
	set   func(s *Setup)
	until float64 // yr
	tight bool    // the unguarded solver fails at every tolerance down to 1e-7
}{
	{"far from the star", func(s *Setup) { s.Content = 7.8e-3; s.Distance = 1.1 * units.AU }, 4.3e9, false},
	{"little carbon", func(s *Setup) { s.Content = 1.56e-3 }, 1.9e9, false},
	{"small and cooling", func(s *Setup) {
		s.Content, s.Mass, s.Distance = 7.8e-3, 0.3*units.EarthMass, 1.08*units.AU
		if err := s.Choose("star", "steady"); err != nil {
			panic(err)
		}
		s.Land.Before, s.Biology.Before = 1, 1
	}, 3e9, true},
}

// TestGuardAgainstBruteForce: the date at which the warm branch is lost agrees
// with brute force within 0.1 % from a relative tolerance of 1e-4 to 1e-7, and
// without the guard it does not.
func TestGuardAgainstBruteForce(t *testing.T) {
	for _, p := range losingPlanets {
		s := NewSetup()
		p.set(s)
		leg := 2e5
		lost, froze := bruteForce(t, s, leg, 1e-3, p.until)
		if math.IsNaN(lost) || math.IsNaN(froze) {
			t.Fatalf("%s: brute force finds no loss before %.3g Gyr", p.name, p.until/1e9)
		}
		wrong := 0
		tols := []float64{1e-4, 1e-5, 1e-6, 1e-7}
		for _, tol := range tols {
			for _, guard := range []bool{true, false} {
				s.Guard = guard
				m, err := NewModel(s)
				if err != nil {
					t.Fatal(err)
				}
				h, err := m.integrate(context.Background(), p.until, tol, false)
				if err != nil {
					t.Fatal(err)
				}
				got, never := math.NaN(), len(h.frozen) == 0
				if !never {
					got = h.frozen[0].begun()
				}
				t.Logf("%s: tolerance %g, guard %v: %.6f Gyr; brute force lost %.6f, froze %.6f", p.name, tol, guard, got/1e9, lost/1e9, froze/1e9)
				if guard {
					if never || math.Abs(got/lost-1) > 1e-3 {
						t.Errorf("%s: tolerance %g: lost at %.6f Gyr, brute force %.6f", p.name, tol, got/1e9, lost/1e9)
					}
				} else if never || math.Abs(got/froze-1) > 1e-3 {
					wrong++
				}
			}
		}
		if wrong == 0 || p.tight && wrong < len(tols) {
			t.Errorf("%s: without the guard %d of %d tolerances are wrong: this planet does not test it", p.name, wrong, len(tols))
		}
	}
}

// TestHeavierPlanetsFreezeLater: under a steady star, otherwise alike, the first
// freeze comes later the more massive the planet (common practice, no source: a
// small planet loses its interior heat first; order in mass).
func TestHeavierPlanetsFreezeLater(t *testing.T) {
	last, lastMass := 0.0, 0.0
	for _, mass := range []float64{0.1, 0.3, 1, 3} {
		s := NewSetup()
		s.Content, s.Mass, s.Distance, s.End = 7.8e-3, mass*units.EarthMass, 1.08*units.AU, 20e9
		s.MaxFreezes = 3
		if err := s.Choose("star", "steady"); err != nil {
			t.Fatal(err)
		}
		for _, sec := range s.Sections() {
			for _, f := range sec.Fields {
				if sec.Name == "star" && f.Kind == units.Time {
					*f.Value = f.Max // a star that outlives the planet
				}
			}
		}
		s.Land.Before, s.Biology.Before = 1, 1
		m, err := NewModel(s)
		if err != nil {
			t.Fatal(err)
		}
		h, err := m.integrate(context.Background(), s.End, 1e-5, false)
		if err != nil {
			t.Fatal(err)
		}
		first := math.Inf(1)
		if len(h.frozen) > 0 {
			first = h.frozen[0].begun()
		}
		t.Logf("%.1f Earth masses: first freeze at %.4g Gyr (history ends at %.4g)", mass, first/1e9, h.end/1e9)
		if math.IsInf(first, 1) && mass < 3 {
			t.Errorf("%.1f Earth masses: never freezes", mass)
		}
		if !(first > last) {
			t.Errorf("%.1f Earth masses freeze at %.4g Gyr, %.1f at %.4g", mass, first/1e9, lastMass, last/1e9)
		}
		last, lastMass = first, mass
	}
}
