package ode

import (
	"errors"
	"math"
	"testing"
)

var rtols = []float64{1e-4, 1e-5, 1e-6, 1e-7, 1e-8, 1e-9, 1e-10}

func mustSolver(tb testing.TB, p *Problem, st *Settings) *Solver {
	tb.Helper()
	s, err := NewSolver(p, st)
	if err != nil {
		tb.Fatal(err)
	}
	return s
}

// Exact times: t1 = sqrt(2·10/9.81), each flight 0.9 times the one before.
func bounce(k int) float64 {
	t1 := math.Sqrt(2 * 10 / 9.81)
	t, flight := t1, 2*t1
	for range k {
		flight *= 0.9
		t += flight
	}
	return t
}

func bouncingBall() *Problem {
	return &Problem{
		Dim: 2, Autonomous: true,
		Func: func(d []float64, _ float64, y []float64) { d[0], d[1] = y[1], -9.81 },
		Events: []Event{{
			Name: "floor", Direction: Falling,
			Func:  func(_ float64, y []float64) float64 { return y[0] },
			Apply: func(_ float64, y []float64) { y[1] *= -0.9 },
		}},
	}
}

func TestBouncingBall(t *testing.T) {
	for _, m := range allMethods {
		for _, rtol := range rtols {
			p := bouncingBall()
			p.Events[0].Terminal = 10
			s := mustSolver(t, p, &Settings{Method: m, RelTol: rtol})
			y := []float64{10, 0}
			r, err := s.Integrate(0, 100, y)
			if err != nil || r.Status != Terminated || len(r.Events) != 10 {
				t.Fatalf("%v, rtol %g: %v, %v, %d bounces", m, rtol, err, r.Status, len(r.Events))
			}
			for k, e := range r.Events {
				if d := math.Abs(e.T - bounce(k)); d > 1e-11 {
					t.Errorf("%v, rtol %g: bounce %d at %.15g, off by %g", m, rtol, k+1, e.T, d)
				}
				if e.Rising {
					t.Errorf("bounce %d is reported rising", k+1)
				}
			}
		}
	}
}

func TestAccumulatingBounces(t *testing.T) {
	limit := math.Sqrt(2*10/9.81) * (1 + 2*0.9/(1-0.9))
	for _, m := range allMethods {
		for _, rtol := range []float64{1e-4, 1e-7, 1e-10} {
			s := mustSolver(t, bouncingBall(), &Settings{Method: m, RelTol: rtol})
			y := []float64{10, 0}
			r, err := s.Integrate(0, 100, y)
			if !errors.Is(err, ErrTooManyEvents) {
				t.Fatalf("%v, rtol %g: error %v after %d bounces at %g, want ErrTooManyEvents", m, rtol, err, len(r.Events), r.T)
			}
			if math.Abs(r.T-limit) > 1e-9 {
				t.Errorf("%v, rtol %g: ended at %.15g, want the limit point %.15g", m, rtol, r.T, limit)
			}
			for k, e := range r.Events {
				if math.Abs(e.T-bounce(k)) > 1e-9 {
					t.Fatalf("%v, rtol %g: bounce %d of %d at %.15g, want %.15g", m, rtol, k+1, len(r.Events), e.T, bounce(k))
				}
			}
		}
	}
}

// TestPairedCrossings: the stiff problem y' = -1e6 (y − cos t) − sin t has
// the solution cos t. It exceeds 0.9999 for 0.028 around each multiple of 2π,
// a small part of a step, where the error estimate of a step does not see the solution bend.
func TestPairedCrossings(t *testing.T) {
	const level = 0.9999
	half := math.Acos(level)
	for _, m := range allMethods {
		for _, rtol := range rtols {
			for _, dir := range []Direction{Both, Rising, Falling} {
				p := &Problem{
					Dim:  1,
					Func: func(d []float64, t float64, y []float64) { d[0] = -1e6*(y[0]-math.Cos(t)) - math.Sin(t) },
					Events: []Event{
						{Name: "high", Direction: dir, Func: func(_ float64, y []float64) float64 { return y[0] - level }},
						{Name: "low", Direction: dir, Func: func(_ float64, y []float64) float64 { return y[0] + level }},
					},
				}
				s := mustSolver(t, p, &Settings{Method: m, RelTol: rtol, AbsTol: []float64{1e-3 * rtol}})
				y := []float64{0}
				r, err := s.Integrate(math.Pi/2, 50, func() []float64 { y[0] = math.Cos(math.Pi / 2); return y }())
				if err != nil {
					t.Fatalf("%v, rtol %g, direction %d: %v", m, rtol, dir, err)
				}
				var want []float64
				for k := 1; k < 16; k++ {
					c := math.Pi * float64(k)
					for _, w := range []float64{c - half, c + half} {
						rising := (w < c) == (k%2 == 0)
						if w < 50 && (dir == Both || rising == (dir == Rising)) {
							want = append(want, w)
						}
					}
				}
				if len(r.Events) != len(want) {
					t.Errorf("%v, rtol %g, direction %d: %d crossings, want %d", m, rtol, dir, len(r.Events), len(want))
					continue
				}
				// The slope of the event function at the crossing is 0.014,
				// so an error of the solution moves it 70 times as far.
				for i, e := range r.Events {
					if math.Abs(e.T-want[i]) > 100*rtol+1e-9 {
						t.Errorf("%v, rtol %g: crossing %d at %.12g, want %.12g", m, rtol, i, e.T, want[i])
					}
				}
			}
		}
	}
}

// TestSimultaneous: events whose zeros coincide exactly or to rounding fire
// together in order of declaration, others in order of time.
func TestSimultaneous(t *testing.T) {
	for _, m := range allMethods {
		for _, rtol := range []float64{1e-4, 1e-7, 1e-10} {
			p := &Problem{
				Dim:  2,
				Func: func(d []float64, t float64, y []float64) { d[0], d[1] = -1e5*(y[0]-t)+1, 1 },
				Events: []Event{
					{Name: "later", Func: func(t float64, _ []float64) float64 { return t - 0.7000001 }},
					{Name: "a", Func: func(_ float64, y []float64) float64 { return y[1] - 0.7 }},
					{Name: "b", Func: func(_ float64, y []float64) float64 { return 3*y[1] - 2.1 }},
					{Name: "c", Func: func(t float64, _ []float64) float64 { return 0.7 - t }},
					{Name: "never", Direction: Rising, Func: func(t float64, _ []float64) float64 { return 0.7 - t }},
				},
			}
			s := mustSolver(t, p, &Settings{Method: m, RelTol: rtol})
			if err := s.Init(0, 1, []float64{0, 0}); err != nil {
				t.Fatal(err)
			}
			var groups [][]string
			for {
				done, err := s.Step()
				if err != nil {
					t.Fatal(err)
				}
				if f := s.Fired(); len(f) > 0 {
					var g []string
					for _, e := range f {
						g = append(g, e.Name)
						if e.T != s.T() || math.Abs(e.T-0.7) > 2e-7 {
							t.Errorf("%s at %.17g, step ends at %.17g", e.Name, e.T, s.T())
						}
					}
					groups = append(groups, g)
				}
				if done {
					break
				}
			}
			if len(groups) != 2 || len(groups[0]) != 3 || groups[0][0] != "a" || groups[0][1] != "b" || groups[0][2] != "c" || groups[1][0] != "later" {
				t.Errorf("%v, rtol %g: fired %v, want [[a b c] [later]]", m, rtol, groups)
			}
		}
	}
}

// TestEventAtStepEnd: a zero exactly at the end of a step, or of the run,
// fires once, and none is repeated after it.
func TestEventAtStepEnd(t *testing.T) {
	p := &Problem{
		Dim:       1,
		Func:      func(d []float64, _ float64, _ []float64) { d[0] = 1 },
		StopTimes: []float64{1, 2},
		Events: []Event{
			{Name: "one", Func: func(t float64, _ []float64) float64 { return t - 1 }},
			{Name: "end", Func: func(t float64, _ []float64) float64 { return t - 3 }},
			{Name: "start", Func: func(t float64, _ []float64) float64 { return t }},
		},
	}
	s := mustSolver(t, p, nil)
	y := []float64{0}
	r, err := s.Integrate(0, 3, y)
	if err != nil {
		t.Fatal(err)
	}
	if len(r.Events) != 2 || r.Events[0].T != 1 || r.Events[0].Name != "one" || r.Events[1].T != 3 || r.Events[1].Name != "end" {
		t.Errorf("fired %+v", r.Events)
	}
}

func TestTerminalCountAndOrder(t *testing.T) {
	p := &Problem{
		Dim:  2,
		Func: func(d []float64, _ float64, y []float64) { d[0], d[1] = y[1], -y[0] },
		Events: []Event{
			{Name: "third", Terminal: 3, Func: func(_ float64, y []float64) float64 { return y[0] }},
			{Name: "same", Func: func(_ float64, y []float64) float64 { return 2 * y[0] }},
		},
	}
	for _, m := range allMethods {
		s := mustSolver(t, p, &Settings{Method: m, RelTol: 1e-9})
		y := []float64{1, 0} // cos t
		r, err := s.Integrate(0, 100, y)
		if err != nil || r.Status != Terminated || !s.Terminated() {
			t.Fatal(err, r.Status)
		}
		if w := 2.5 * math.Pi; math.Abs(r.T-w) > 1e-7 {
			t.Errorf("%v: ended at %.12g, want %.12g", m, r.T, w)
		}
		if len(r.Events) != 5 { // the first terminal one ends the run
			t.Errorf("%v: %d events, want 5", m, len(r.Events))
		}
	}
}

// TestApplyRestart: a switched right-hand side by events with exact times: a
// thermostat that heats at rate 1 below 1 and cools at rate 2 above 2.
func TestApplyRestart(t *testing.T) {
	heat := true
	p := &Problem{
		Dim: 1,
		Func: func(d []float64, _ float64, _ []float64) {
			d[0] = -2
			if heat {
				d[0] = 1
			}
		},
		Events: []Event{
			{Name: "off", Direction: Rising, Func: func(_ float64, y []float64) float64 { return y[0] - 2 }, Apply: func(_ float64, _ []float64) { heat = false }},
			{Name: "on", Direction: Falling, Func: func(_ float64, y []float64) float64 { return y[0] - 1 }, Apply: func(_ float64, _ []float64) { heat = true }},
		},
	}
	for _, m := range allMethods {
		heat = true
		s := mustSolver(t, p, &Settings{Method: m})
		y := []float64{1.5}
		r, err := s.Integrate(0, 100, y)
		if err != nil {
			t.Fatal(err)
		}
		// off at 0.5 + 1.5k, on half a unit later.
		if want := 67 + 67 - 1; len(r.Events) < want {
			t.Fatalf("%v: %d events, want at least %d", m, len(r.Events), want)
		}
		for i, e := range r.Events {
			w := 0.5 + 1.5*float64(i/2) + 0.5*float64(i%2)
			if math.Abs(e.T-w) > 1e-10 {
				t.Fatalf("%v: event %d at %.15g, want %.15g", m, i, e.T, w)
			}
		}
	}
}

// TestStopTimes: a right-hand side that jumps in time is integrated exactly
// if, and only if, the jump is declared.
func TestStopTimes(t *testing.T) {
	f := func(d []float64, t float64, y []float64) {
		d[0] = 1
		if t >= 0.3 {
			d[0] = -2
		}
		if t >= 0.6 {
			d[0] = 1e6 * (5 - y[0])
		}
	}
	for _, m := range allMethods {
		s := mustSolver(t, &Problem{Dim: 1, Func: f, StopTimes: []float64{0.6, 0.3, 0.3, 7}}, &Settings{Method: m, RelTol: 1e-8})
		y := []float64{0}
		if err := s.Init(0, 1, y); err != nil {
			t.Fatal(err)
		}
		seen := 0
		for {
			done, err := s.Step()
			if err != nil {
				t.Fatal(err)
			}
			switch s.T() {
			case 0.3:
				seen++
				if math.Abs(s.Y()[0]-0.3) > 1e-14 {
					t.Errorf("%v: y(0.3) = %.17g, want 0.3", m, s.Y()[0])
				}
			case 0.6:
				seen++
				if math.Abs(s.Y()[0]+0.3) > 1e-14 {
					t.Errorf("%v: y(0.6) = %.17g, want -0.3", m, s.Y()[0])
				}
			}
			if done {
				break
			}
		}
		if seen != 2 {
			t.Errorf("%v: %d of 2 stop times", m, seen)
		}
		if math.Abs(s.Y()[0]-5) > 1e-7 {
			t.Errorf("%v: y(1) = %.17g, want 5", m, s.Y()[0])
		}
	}
}

// TestBackward integrates against time, with events.
func TestBackward(t *testing.T) {
	for _, m := range allMethods {
		p := &Problem{
			Dim:    1,
			Func:   func(d []float64, t float64, y []float64) { d[0] = 1e4*(y[0]-math.Cos(t)) - math.Sin(t) },
			Events: []Event{{Func: func(_ float64, y []float64) float64 { return y[0] }, Direction: Rising}},
		}
		s := mustSolver(t, p, &Settings{Method: m, RelTol: 1e-8})
		y := []float64{1}
		r, err := s.Integrate(0, -10, y)
		if err != nil {
			t.Fatal(err)
		}
		if math.Abs(y[0]-math.Cos(10)) > 1e-7 {
			t.Errorf("%v: %g", m, y[0]-math.Cos(10))
		}
		// Along the run cos rises through zero at -3π/2 only (and not at
		// -π/2, -5π/2).
		if len(r.Events) != 1 || math.Abs(r.Events[0].T+1.5*math.Pi) > 1e-6 {
			t.Errorf("%v: events %v", m, r.Events)
		}
		if len(r.Losses) != 0 {
			t.Errorf("%v: losses %v on a problem that is stable backward", m, r.Losses)
		}
	}
}

// TestInterpolateAtEnds: the dense output meets both ends of every step and
// its derivative the right-hand side.
func TestInterpolate(t *testing.T) {
	for _, m := range allMethods {
		f := func(d []float64, t float64, y []float64) { d[0], d[1] = y[1], -y[0] }
		s := mustSolver(t, &Problem{Dim: 2, Func: f}, &Settings{Method: m, RelTol: 1e-8})
		if err := s.Init(0, 10, []float64{0, 1}); err != nil {
			t.Fatal(err)
		}
		prev := []float64{0, 1}
		y, d := make([]float64, 2), make([]float64, 2)
		for {
			done, err := s.Step()
			if err != nil {
				t.Fatal(err)
			}
			a, b := s.Interval()
			s.Interpolate(y, a)
			for i := range y {
				if math.Abs(y[i]-prev[i]) > 1e-15 {
					t.Fatalf("%v: start %g, want %g", m, y[i], prev[i])
				}
			}
			s.Interpolate(y, b)
			for i, v := range s.Y() {
				if math.Abs(y[i]-v) > 1e-14 {
					t.Fatalf("%v: end %g, want %g", m, y[i], v)
				}
			}
			copy(prev, s.Y())
			x := 0.4*a + 0.6*b
			s.Interpolate(y, x)
			s.InterpolateDerivative(d, x)
			if math.Abs(y[0]-math.Sin(x)) > 1e-6 || math.Abs(d[0]-math.Cos(x)) > 1e-4 || math.Abs(d[1]+math.Sin(x)) > 1e-4 {
				t.Fatalf("%v: at %g: y %v, y' %v, want sin, cos", m, x, y, d)
			}
			if done {
				break
			}
		}
	}
}

// TestIntegrateAt: outputs agree with the exact solution, also with an
// output at the start, at the end and past a terminal event.
func TestIntegrateAt(t *testing.T) {
	p := &Problem{
		Dim:    1,
		Func:   func(d []float64, _ float64, y []float64) { d[0] = -y[0] },
		Events: []Event{{Func: func(_ float64, y []float64) float64 { return y[0] - 0.1 }, Terminal: 1}},
	}
	for _, m := range allMethods {
		s := mustSolver(t, p, &Settings{Method: m, RelTol: 1e-8})
		times := []float64{0, 0.5, 1, 2, 3}
		dst := []float64{-1, -1, -1, -1, -1}
		y := []float64{1}
		r, err := s.IntegrateAt(dst, times, 0, y)
		if err != nil || r.Status != Terminated {
			t.Fatal(err, r.Status)
		}
		for i, x := range times[:4] {
			if math.Abs(dst[i]-math.Exp(-x)) > 1e-7 {
				t.Errorf("%v: y(%g) = %g, want %g", m, x, dst[i], math.Exp(-x))
			}
		}
		if dst[4] != -1 {
			t.Errorf("%v: an output past the end was written: %g", m, dst[4])
		}
		if math.Abs(r.T-math.Log(10)) > 1e-7 || math.Abs(y[0]-0.1) > 1e-10 {
			t.Errorf("%v: ended at (%g, %g)", m, r.T, y[0])
		}
	}
}

// TestStateAfterEvent: what the next step starts from belongs to the time of the
// event: the state, f and the Jacobian there.
func TestStateAfterEvent(t *testing.T) {
	f := func(d []float64, t float64, y []float64) { d[0], d[1] = y[1]+0.1*y[0]*y[0], -y[0]*math.Cosh(0.1*t) }
	for _, m := range []Method{Rodas5P, RadauIIA3, RadauIIA5, RadauIIA7} {
		s := mustSolver(t, &Problem{Dim: 2, Func: f, Events: []Event{
			{Func: func(_ float64, y []float64) float64 { return y[0] }},
			{Func: func(t float64, y []float64) float64 { return y[1] - 0.3*math.Sin(t) }},
		}}, &Settings{Method: m, RelTol: 1e-6, AbsTol: []float64{1e-9}})
		if err := s.Init(0, 20, []float64{0.5, 0}); err != nil {
			t.Fatal(err)
		}
		fired := 0
		for done := false; !done; {
			var err error
			if done, err = s.Step(); err != nil {
				t.Fatal(m, err)
			}
			fired += len(s.Fired())
			y := s.Y()
			var d [2]float64
			f(d[:], s.T(), y)
			if d[0] != s.f0[0] || d[1] != s.f0[1] {
				t.Fatalf("%v: f at %g is %v, the solver holds %v", m, s.T(), d, s.f0)
			}
			want := [4]float64{0.2 * y[0], 1, -math.Cosh(0.1 * s.T()), 0}
			for i, v := range s.jac {
				if math.Abs(v-want[i]) > 1e-4 { // differences
					t.Fatalf("%v: Jacobian at %g is %v, want %v", m, s.T(), s.jac, want)
				}
			}
		}
		if fired < 10 {
			t.Errorf("%v: %d events", m, fired)
		}
	}
}
