package ode

import (
	"math"
	"testing"

	"cycle/ode/odetest"
)

// rk4 integrates by brute force with steps of length h until the event
// function is positive, and returns the time.
func rk4(f Func, y []float64, t0, t1, h float64, event func(t float64, y []float64) float64) float64 {
	n := len(y)
	k := [4][]float64{make([]float64, n), make([]float64, n), make([]float64, n), make([]float64, n)}
	w := make([]float64, n)
	for i := 0; ; i++ {
		t := t0 + float64(i)*h
		if t >= t1 {
			return math.NaN()
		}
		if event(t, y) > 0 {
			return t
		}
		f(k[0], t, y)
		for s := 1; s < 4; s++ {
			c := 0.5 * h
			if s == 3 {
				c = h
			}
			for j := range y {
				w[j] = y[j] + c*k[s-1][j]
			}
			f(k[s], t+c, w)
		}
		for j := range y {
			y[j] += h / 6 * (k[0][j] + 2*k[1][j] + 2*k[2][j] + k[3][j])
		}
	}
}

// growthProblem is a problem that loses its stability, with the truth.
type growthProblem struct {
	name     string
	f        Func
	y0       []float64
	t0, t1   float64
	atol     float64 // per unit of RelTol
	maxStep  float64
	blocks   [][]int
	loss     float64 // exact time at which stability is first lost
	growing  int     // modes that grow then
	complex  bool
	regained float64                              // exact time of the first return; 0 if not asked
	event    func(t float64, y []float64) float64 // positive once the state has left
	leave    func() float64                       // its time
}

const k4 = 1e4

func growthProblems() []growthProblem {
	brute := func(f Func, y0 []float64, t0, t1, h float64, ev func(t float64, y []float64) float64) func() float64 {
		return func() float64 { return rk4(f, append([]float64(nil), y0...), t0, t1, h, ev) }
	}
	var ps []growthProblem
	// First zeros of Ai' and Ai, DLMF table 9.9.1.
	const aip, ai = 1.01879297, 2.33810741
	// Saddle-node x' = K (ε(t−t*) + x²): x = −φ'/(Kφ), φ Airy's function; the
	// growth rate 2Kx is zero at the first zero of Ai', x is infinite at that
	// of Ai.
	saddle := func(name string, K, e, ts float64) {
		w := math.Cbrt(K * K * e)
		f := func(d []float64, t float64, y []float64) { d[0] = K * (e*(t-ts) + y[0]*y[0]) }
		ps = append(ps, growthProblem{
			name: name, f: f, y0: []float64{-1}, t1: 2 * ts, atol: 1e-3,
			loss: ts + aip/w, growing: 1,
			event: func(_ float64, y []float64) float64 { return y[0] - 5 },
			leave: func() float64 { return ts + ai/w - 1/(5*K) },
		})
	}
	saddle("saddle-node, slow", 1e6, 0.01, 100)
	saddle("saddle-node, quick", 1e3, 1, 1)

	// Transcritical: the branch x ≈ −δ/s lives on as an unstable one.
	f := func(d []float64, t float64, y []float64) { s := t - 1; d[0] = k4 * (s*y[0] - y[0]*y[0] + 1e-7) }
	ev := func(_ float64, y []float64) float64 { return y[0] - 0.02 }
	ps = append(ps, growthProblem{
		name: "transcritical", f: f, y0: []float64{1e-7}, t1: 4, atol: 1,
		loss: 1, growing: 1, event: ev, leave: brute(f, []float64{1e-7}, 0, 2, 2e-5, ev),
	})

	// Hopf: a slow complex pair, z' = (s + 200i) z − |z|² z + δ exp(200it).
	f = func(d []float64, t float64, y []float64) {
		s, r := t-10, y[0]*y[0]+y[1]*y[1]
		d[0] = s*y[0] - 200*y[1] - r*y[0] + 1e-8*math.Cos(200*t)
		d[1] = 200*y[0] + s*y[1] - r*y[1] + 1e-8*math.Sin(200*t)
	}
	ev = func(_ float64, y []float64) float64 { return y[0]*y[0] + y[1]*y[1] - 0.25 }
	ps = append(ps, growthProblem{
		name: "Hopf", f: f, y0: []float64{0, 0}, t1: 20, atol: 1,
		loss: 10, growing: 2, complex: true, event: ev, leave: brute(f, []float64{0, 0}, 0, 20, 1e-4, ev),
	})

	// Two real modes at once.
	f = func(d []float64, t float64, y []float64) {
		s := t - 1
		d[0] = k4*(s*y[0]-y[0]*y[0]*y[0]) + 1e-5
		d[1] = k4*(1.5*s*y[1]-y[1]*y[1]*y[1]) + 1e-5
	}
	ev = func(_ float64, y []float64) float64 { return y[0]*y[0] - 0.0025 }
	ps = append(ps, growthProblem{
		name: "two modes", f: f, y0: []float64{1e-9, 1e-9}, t1: 4, atol: 1,
		loss: 1, growing: 2, event: ev, leave: brute(f, []float64{1e-9, 1e-9}, 0, 2, 2e-5, ev),
	})

	// A window of instability shorter than a normal step.
	const width = 0.02
	f = func(d []float64, t float64, y []float64) {
		a := -1 + 2*math.Exp(-sq((t-5)/width))
		d[0] = k4*(a*y[0]-y[0]*y[0]*y[0]) + 1e-4
	}
	ev = func(_ float64, y []float64) float64 { return y[0]*y[0] - 0.25 }
	hw := width * math.Sqrt(math.Ln2)
	ps = append(ps, growthProblem{
		name: "window", f: f, y0: []float64{1e-8}, t1: 8, atol: 1, maxStep: 0.02,
		loss: 5 - hw, growing: 1, event: ev, leave: brute(f, []float64{1e-8}, 4.8, 5.2, 2e-5, ev),
	})

	// A fast stable mode beside a slow growing one, ratio 1e8; the growing
	// one becomes stable again at t = 3.
	f = func(d []float64, t float64, y []float64) {
		d[0] = -1e8 * (y[0] - y[1])
		d[1] = (t-1)*(3-t)*y[0] + 1e-3
	}
	v := append([]float64(nil), 1e-3)
	slow := func(d []float64, t float64, y []float64) { d[0] = (t-1)*(3-t)*y[0] + 1e-3 }
	sev := func(_ float64, y []float64) float64 { return y[0] - 5e-3 }
	ps = append(ps, growthProblem{
		name: "fast beside slow", f: f, y0: []float64{1e-3, 1e-3}, t1: 4, atol: 1e-3,
		loss: 1, growing: 1, regained: 3, event: func(_ float64, y []float64) float64 { return y[1] - 5e-3 },
		leave: brute(slow, v, 0, 4, 1e-5, sev),
	})

	// Fast beside fast: the growing mode is found in its block although a
	// slow mode grows all the time and the sign of the whole determinant
	// never changes at the loss of a second one.
	f = func(d []float64, t float64, y []float64) {
		s := t - 1
		d[0] = k4 * (s*y[0] - y[0]*y[0] + 1e-7*y[1])
		d[1] = 0.1 * y[1]
	}
	ev = func(_ float64, y []float64) float64 { return y[0] - 0.02 }
	ps = append(ps, growthProblem{
		name: "fast beside growing", f: f, y0: []float64{1e-7, 1}, t1: 4, atol: 1, blocks: [][]int{{0}},
		loss: 1, growing: 1, event: ev, leave: brute(f, []float64{1e-7, 1}, 0, 2, 2e-5, ev),
	})

	// Five components: beyond the sizes with closed criteria.
	f = func(d []float64, t float64, y []float64) {
		s := t - 1
		d[0] = k4 * (s*y[0] - y[0]*y[0] + 1e-7*y[4])
		d[1] = -3e3*(y[1]-y[2]) + y[0]
		d[2] = -20 * (y[2] + y[1])
		d[3] = -1e5*y[3] + y[1]
		d[4] = 0.001 * (y[2] - y[4] + 1)
	}
	ps = append(ps, growthProblem{
		name: "five components", f: f, y0: []float64{1e-7, 0, 0, 0, 1}, t1: 4, atol: 1,
		loss: 1, growing: 1, event: ev, leave: brute(f, []float64{1e-7, 0, 0, 0, 1}, 0, 2, 1e-5, ev),
	})
	return ps
}

func (g *growthProblem) run(t *testing.T, m Method, rtol float64, guard Guard) (Result, float64) {
	t.Helper()
	s := mustSolver(t, &Problem{Dim: len(g.y0), Func: g.f, Events: []Event{{Func: g.event, Terminal: 1, Direction: Rising}}},
		&Settings{Method: m, RelTol: rtol, AbsTol: []float64{rtol * g.atol}, MaxStep: g.maxStep, Guard: guard})
	y := append([]float64(nil), g.y0...)
	r, err := s.Integrate(g.t0, g.t1, y)
	if err != nil {
		t.Errorf("%s, %v, rtol %g: %v", g.name, m, rtol, err)
	}
	if r.Status != Terminated {
		return r, math.NaN()
	}
	return r, r.T
}

// TestLossOfStability: the time of the loss is exact or, where fast modes cross
// slowly, known from brute force; so is the time at which the solution leaves.
func TestLossOfStability(t *testing.T) {
	for _, g := range growthProblems() {
		leave := g.leave()
		if math.IsNaN(leave) {
			t.Errorf("%s: the brute force does not leave", g.name)
			continue
		}
		for _, m := range []Method{Rodas5P, RadauIIA3, RadauIIA5} {
			late := 0
			for _, rtol := range []float64{1e-4, 1e-5, 1e-6, 1e-8} {
				r, at := g.run(t, m, rtol, Guard{Blocks: g.blocks})
				if len(r.Losses) == 0 || r.Losses[0].Regained {
					t.Errorf("%s, %v, rtol %g: no loss of stability reported", g.name, m, rtol)
					continue
				}
				l := r.Losses[0]
				if e := math.Abs(l.T/g.loss - 1); e > 1e-3 {
					t.Errorf("%s, %v, rtol %g: lost at %.9g, want %.9g", g.name, m, rtol, l.T, g.loss)
				}
				if n := r.Losses[len(r.Losses)-1].Growing; len(r.Losses) == 1 && n != g.growing {
					t.Errorf("%s, %v, rtol %g: %d growing modes, want %d", g.name, m, rtol, n, g.growing)
				}
				if g.complex && math.Abs(l.Frequency-200) > 1 {
					t.Errorf("%s, %v, rtol %g: frequency %g, want 200", g.name, m, rtol, l.Frequency)
				}
				// The time of leaving depends on perturbations below the
				// noise floor, which the loss does not.
				tol := 1e-3
				if rtol == 1e-4 {
					tol = 5e-3
				}
				if g.complex {
					tol = 1.5e-2
				}
				if !(math.Abs(at/leave-1) <= tol) {
					t.Errorf("%s, %v, rtol %g: leaves at %.9g, want %.9g", g.name, m, rtol, at, leave)
				}
				if _, off := g.run(t, m, rtol, Guard{Off: true}); !(math.Abs(off/leave-1) <= 1e-3) {
					late++
				}
			}
			t.Logf("%-20s %-13v guard off is wrong at %d of 4 tolerances", g.name, m, late)
		}
	}
}

// TestGuardOffFollows: without the guard the unstable branch is followed. This
// is what the tests above rest on.
func TestGuardOffFollows(t *testing.T) {
	wrong := 0
	for _, g := range growthProblems() {
		if g.name != "transcritical" && g.name != "two modes" && g.name != "fast beside growing" && g.name != "five components" {
			continue
		}
		leave := g.leave()
		if _, at := g.run(t, Rodas5P, 1e-4, Guard{Off: true}); math.Abs(at/leave-1) <= 1e-3 {
			t.Errorf("%s: right without the guard", g.name)
		} else {
			wrong++
		}
	}
	if wrong == 0 {
		t.Error("no problem needs the guard")
	}
}

func TestRegained(t *testing.T) {
	for _, m := range allMethods {
		f := func(d []float64, t float64, y []float64) {
			d[0] = -1e8 * (y[0] - y[1])
			d[1] = (t - 1) * (3 - t) * y[0]
		}
		s := mustSolver(t, &Problem{Dim: 2, Func: f}, &Settings{Method: m, RelTol: 1e-5, AbsTol: []float64{1e-8}})
		r, err := s.Integrate(0, 4, []float64{1, 1})
		if err != nil {
			t.Fatal(err)
		}
		if len(r.Losses) != 2 || r.Losses[0].Regained || !r.Losses[1].Regained {
			t.Fatalf("%v: %+v", m, r.Losses)
		}
		for i, w := range []float64{1, 3} {
			l := r.Losses[i]
			if math.Abs(l.T-w) > 1e-3 || math.Abs(l.Rate) > 1e-2 {
				t.Errorf("%v: change at %g with rate %g, want %g", m, l.T, l.Rate, w)
			}
		}
		// The mode moves both components alike.
		if md := r.Losses[0].Mode; math.Abs(md[0]/md[1]-1) > 1e-6 {
			t.Errorf("%v: mode %v", m, md)
		}
	}
}

// TestLegitimateGrowth: y' = y and a slow mode that grows beside a fast stable
// one are integrated with as many steps as without the guard.
func TestLegitimateGrowth(t *testing.T) {
	for _, m := range allMethods {
		for _, rtol := range rtols {
			for name, p := range map[string]*Problem{
				"y' = y": {Dim: 1, Func: func(d []float64, _ float64, y []float64) { d[0] = y[0] }},
				"slow and fast": {Dim: 2, Func: func(d []float64, _ float64, y []float64) {
					d[0], d[1] = y[0], -1e8*(y[1]-y[0])
				}},
			} {
				var steps [2]int
				for i, g := range []Guard{{}, {Off: true}} {
					s := mustSolver(t, p, &Settings{Method: m, RelTol: rtol, Guard: g})
					y := []float64{1, 1}[:p.Dim]
					r, err := s.Integrate(0, 50, y)
					if err != nil {
						t.Fatal(err)
					}
					// Relative errors of all steps add up.
					if e := math.Abs(y[0]/math.Exp(50) - 1); e > 100*rtol {
						t.Errorf("%s, %v, rtol %g: error %g", name, m, rtol, e)
					}
					steps[i] = r.Stats.Steps + r.Stats.Rejected()
				}
				if float64(steps[0]) > 1.1*float64(steps[1])+2 {
					t.Errorf("%s, %v, rtol %g: %d steps with the guard, %d without", name, m, rtol, steps[0], steps[1])
				}
			}
		}
	}
}

// TestRestAtUnstable: a solution that rests exactly in an unstable state ends
// within bounded work.
func TestRestAtUnstable(t *testing.T) {
	s := mustSolver(t, &Problem{Dim: 1, Func: func(d []float64, _ float64, y []float64) { d[0] = 1e9 * y[0] * (1 - y[0]) }},
		&Settings{AbsTol: []float64{1e-9}})
	y := []float64{0}
	r, err := s.Integrate(0, 1, y)
	if err != nil || y[0] != 0 {
		t.Fatal(err, y)
	}
	if r.Stats.Steps > 2000 {
		t.Errorf("%d steps", r.Stats.Steps)
	}
}

// TestThermostatFold: the members of the ensemble that cross the ice–albedo
// fold cross 255 K at the same time at every tolerance, and without the guard
// some cross late.
func TestThermostatFold(t *testing.T) {
	var th odetest.Thermostat
	f := func(d []float64, t float64, y []float64) { th.Func(d, t, y) }
	cross := func(m int, method Method, rtol float64, guard Guard) []float64 {
		at := make([]float64, 4)
		for i := range at {
			at[i] = rtol * odetest.ThermostatScale[i]
		}
		s := mustSolver(t, &Problem{Dim: 4, Func: f, Events: []Event{{Func: func(_ float64, y []float64) float64 { return y[0] - 255 }}}},
			&Settings{Method: method, RelTol: rtol, AbsTol: at, Guard: guard, MaxSteps: 1000000})
		var y [4]float64
		th, y = odetest.ThermostatMember(m)
		r, err := s.Integrate(0, odetest.ThermostatT1, y[:])
		if err != nil {
			t.Fatalf("member %d, %v, rtol %g: %v", m, method, rtol, err)
		}
		ts := []float64{}
		for _, e := range r.Events {
			ts = append(ts, e.T)
		}
		return ts
	}
	same := func(a, b []float64, tol float64) bool {
		if len(a) != len(b) {
			return false
		}
		for i := range a {
			if math.Abs(a[i]/b[i]-1) > tol {
				return false
			}
		}
		return true
	}
	found, wrongOff := 0, 0
	for m := range 256 {
		first := cross(m, Rodas5P, 1e-6, Guard{Blocks: [][]int{{0}}})
		if len(first) == 0 {
			continue
		}
		found++
		ref := cross(m, Rodas5P, 1e-10, Guard{})
		if r2 := cross(m, RadauIIA5, 1e-11, Guard{}); !same(ref, r2, 1e-4) {
			t.Errorf("member %d: references %v, %v", m, ref, r2)
		}
		for _, method := range []Method{Rodas5P, RadauIIA3, RadauIIA5} {
			for _, rtol := range []float64{1e-4, 1e-5, 1e-6, 1e-8} {
				// The approach to a fold turns an error of the state into
				// one of the date up to a hundred times as large.
				tol := 1e-3
				if method == Rodas5P && rtol == 1e-4 {
					tol = 1e-2
				}
				for _, g := range []Guard{{}, {Blocks: [][]int{{0}}}} {
					if c := cross(m, method, rtol, g); !same(c, ref, tol) {
						t.Errorf("member %d, %v, rtol %g, blocks %v: crossings at %v, want %v", m, method, rtol, g.Blocks, c, ref)
					}
				}
				if c := cross(m, method, rtol, Guard{Off: true}); !same(c, ref, tol) {
					wrongOff++
				}
			}
		}
	}
	if found < 5 {
		t.Errorf("%d members cross the fold, want a few", found)
	}
	if wrongOff == 0 {
		t.Error("right without the guard: the test shows nothing")
	}
	t.Logf("%d members; wrong without the guard in %d of %d runs", found, wrongOff, found*12)
}
