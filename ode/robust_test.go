package ode

import (
	"errors"
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"gonum.org/v1/gonum/diff/fd"
	"gonum.org/v1/gonum/mat"

	"cycle/ode/odetest"
)

func isNamed(err error) bool {
	for _, e := range []error{ErrStepTooSmall, ErrMaxSteps, ErrNotFinite, ErrSingular, ErrTooManyEvents, ErrBadInput} {
		if errors.Is(err, e) {
			return true
		}
	}
	return false
}

// TestBlowUp: y' = y² from 1 is infinite at t = 1; the run stops just before
// and says where.
func TestBlowUp(t *testing.T) {
	for _, m := range allMethods {
		s := mustSolver(t, &Problem{Dim: 2, Func: func(d []float64, _ float64, y []float64) { d[0], d[1] = -y[0], y[1]*y[1] }}, &Settings{Method: m})
		y := []float64{1, 1}
		r, err := s.Integrate(0, 2, y)
		var se *StepError
		if !errors.As(err, &se) || !isNamed(err) {
			t.Fatalf("%v: %v", m, err)
		}
		if math.Abs(se.T-1) > 1e-4 || r.T != se.T || r.Status != Failed {
			t.Errorf("%v: stopped at %g (%v)", m, se.T, err)
		}
		if math.IsNaN(y[1]) || math.IsInf(y[1], 0) || !(y[1] > 1e4) {
			t.Errorf("%v: state %v", m, y)
		}
	}
}

// TestNaNRightHandSide: f turns NaN at t = 1 or below y = 0; the run stops
// just before, with y valid.
func TestNaNRightHandSide(t *testing.T) {
	for _, m := range allMethods {
		for name, f := range map[string]Func{
			"time":  func(d []float64, t float64, y []float64) { d[0] = math.Log(1 - t) },
			"state": func(d []float64, _ float64, y []float64) { d[0] = -1 - 0*math.Sqrt(y[0]) },
		} {
			s := mustSolver(t, &Problem{Dim: 1, Func: f}, &Settings{Method: m, AbsTol: []float64{1e-8}})
			y := []float64{1}
			r, err := s.Integrate(0, 2, y)
			if !isNamed(err) {
				t.Fatalf("%v, %s: %v", m, name, err)
			}
			if r.T > 1 || r.T < 1-1e-5 || math.IsNaN(y[0]) {
				t.Errorf("%v, %s: stopped at %.12g, y = %g", m, name, r.T, y[0])
			}
		}
		s := mustSolver(t, &Problem{Dim: 1, Func: func(d []float64, _ float64, _ []float64) { d[0] = math.NaN() }}, &Settings{Method: m})
		if _, err := s.Integrate(0, 1, []float64{1}); !errors.Is(err, ErrNotFinite) {
			t.Errorf("%v: %v, want ErrNotFinite", m, err)
		}
	}
}

func TestZeroLengthInterval(t *testing.T) {
	s := mustSolver(t, bouncingBall(), nil)
	y := []float64{1, 2}
	r, err := s.Integrate(3, 3, y)
	if err != nil || r.Status != Reached || r.T != 3 || y[0] != 1 || y[1] != 2 {
		t.Errorf("%v %+v %v", err, r, y)
	}
	if done, err := s.Step(); !done || err != nil {
		t.Errorf("a step after the end: %v, %v", done, err)
	}
}

// TestScales: the relative error does not depend on the units of y or t.
func TestScales(t *testing.T) {
	for _, m := range allMethods {
		for _, sy := range []float64{1e-100, 1e-20, 1, 1e20, 1e100} {
			for _, st := range []float64{1e-30, 1, 1e30} {
				f := func(d []float64, _ float64, y []float64) {
					d[0] = (-1000*y[0] + 999*y[1]) / st
					d[1] = -y[1] / st
				}
				s := mustSolver(t, &Problem{Dim: 2, Func: f}, &Settings{Method: m})
				y := []float64{2 * sy, sy}
				if _, err := s.Integrate(0, 2*st, y); err != nil {
					t.Errorf("%v, scales %g, %g: %v", m, sy, st, err)
					continue
				}
				if w := math.Exp(-2) * sy; math.Abs(y[0]/w-1) > 2e-5 || math.Abs(y[1]/w-1) > 2e-5 {
					t.Errorf("%v, scales %g, %g: %v, want %g", m, sy, st, y, w)
				}
			}
		}
	}
}

func TestBadInput(t *testing.T) {
	f := func(d []float64, _ float64, _ []float64) { clear(d) }
	nan := math.NaN()
	for i, c := range []struct {
		p *Problem
		s *Settings
	}{
		{nil, nil}, {&Problem{Dim: 1}, nil}, {&Problem{Func: f}, nil},
		{&Problem{Dim: 1, Func: f}, &Settings{RelTol: -1}},
		{&Problem{Dim: 1, Func: f}, &Settings{RelTol: nan}},
		{&Problem{Dim: 2, Func: f}, &Settings{AbsTol: []float64{1, 1, 1}}},
		{&Problem{Dim: 1, Func: f}, &Settings{AbsTol: []float64{-1}}},
		{&Problem{Dim: 1, Func: f}, &Settings{Method: 9}},
		{&Problem{Dim: 1, Func: f}, &Settings{MaxStep: nan}},
		{&Problem{Dim: 1, Func: f}, &Settings{NonNegative: []int{1}}},
		{&Problem{Dim: 1, Func: f, Events: []Event{{}}}, nil},
		{&Problem{Dim: 1, Func: f, StopTimes: []float64{nan}}, nil},
		{&Problem{Dim: 2, Func: f, Band: &Band{2, 0}}, nil},
		{&Problem{Dim: 2, Func: f}, &Settings{Guard: Guard{Blocks: [][]int{{0, 0}}}}},
	} {
		if _, err := NewSolver(c.p, c.s); !errors.Is(err, ErrBadInput) {
			t.Errorf("case %d: %v, want ErrBadInput", i, err)
		}
	}
	s := mustSolver(t, &Problem{Dim: 1, Func: f}, nil)
	for i, run := range []func() error{
		func() error { _, err := s.Integrate(0, 1, []float64{1, 2}); return err },
		func() error { _, err := s.Integrate(0, nan, []float64{1}); return err },
		func() error { _, err := s.Integrate(0, math.Inf(1), []float64{1}); return err },
		func() error { _, err := s.Integrate(0, 1, []float64{nan}); return err },
		func() error {
			_, err := s.IntegrateAt(make([]float64, 2), []float64{2, 1}, 0, []float64{1})
			return err
		},
		func() error { _, err := s.IntegrateAt(nil, []float64{1}, 0, []float64{1}); return err },
	} {
		if err := run(); !errors.Is(err, ErrBadInput) {
			t.Errorf("run %d: %v, want ErrBadInput", i, err)
		}
	}
}

// randomSystem makes a stiff system of 1 to 6 components with rates over 12
// decades, linear or with quadratic terms, stable or not.
func randomSystem(r *rand.Rand) (Func, []float64) {
	n := 1 + r.IntN(6)
	a, q := make([]float64, n*n), make([]float64, n)
	for i := range n {
		rate := math.Pow(10, 12*r.Float64()-4)
		for j := range n {
			a[i*n+j] = rate * r.NormFloat64() * 0.5
		}
		a[i*n+i] -= rate * float64(r.IntN(4))
		if r.IntN(2) == 0 {
			q[i] = rate * r.NormFloat64()
		}
	}
	y := make([]float64, n)
	for i := range y {
		y[i] = r.NormFloat64() * math.Pow(10, 6*r.Float64()-3)
		if r.IntN(5) == 0 {
			y[i] = 0
		}
	}
	return func(d []float64, t float64, y []float64) {
		for i := range n {
			s := -q[i] * y[i] * y[(i+1)%n]
			for j := range n {
				s += a[i*n+j] * y[j]
			}
			d[i] = s
		}
	}, y
}

// TestRandomSystems: a result or a named error every time, within bounded work.
func TestRandomSystems(t *testing.T) {
	count := 100000
	if testing.Short() || raceEnabled {
		count = 2000
	}
	const maxSteps = 120
	r := rand.New(rand.NewPCG(1, 2))
	reached, failed := 0, 0
	for k := range count {
		f, y := randomSystem(r)
		evals := 0
		m := allMethods[0]
		if k%50 == 0 {
			m = allMethods[1+k/50%3]
		}
		s := mustSolver(t, &Problem{Dim: len(y), Func: func(d []float64, t float64, y []float64) { evals++; f(d, t, y) }},
			&Settings{Method: m, RelTol: 1e-4, MaxSteps: maxSteps})
		res, err := s.Integrate(0, math.Pow(10, 4*r.Float64()-3), y)
		switch {
		case err == nil && res.Status == Reached:
			reached++
		case isNamed(err):
			failed++
		default:
			t.Fatalf("system %d: status %v, error %v", k, res.Status, err)
		}
		for i, v := range y {
			if math.IsNaN(v) || math.IsInf(v, 0) {
				t.Fatalf("system %d: component %d is %g (%v)", k, i, v, err)
			}
		}
		// A location takes at most about 60 evaluations of a step.
		if evals > 200*maxSteps*20 {
			t.Fatalf("system %d: %d evaluations", k, evals)
		}
	}
	if reached < count/4 {
		t.Errorf("%d of %d reached the end", reached, count)
	}
	t.Logf("%d reached the end, %d ended in a named error", reached, failed)
}

func TestNonNegative(t *testing.T) {
	for _, m := range allMethods {
		// Decay that saturates, undefined below zero.
		f := func(d []float64, _ float64, y []float64) {
			if y[0] < -1e-6 {
				d[0] = math.NaN()
				return
			}
			d[0] = -1e3 * y[0] / (y[0] + 1e-3)
			d[1] = -d[0]
		}
		s := mustSolver(t, &Problem{Dim: 2, Func: f}, &Settings{Method: m, RelTol: 1e-6, AbsTol: []float64{1e-8}, NonNegative: []int{0}})
		if err := s.Init(0, 1, []float64{1, 0}); err != nil {
			t.Fatal(err)
		}
		for {
			done, err := s.Step()
			if err != nil {
				t.Fatalf("%v: %v", m, err)
			}
			if s.Y()[0] < 0 {
				t.Fatalf("%v: y = %g", m, s.Y()[0])
			}
			if done {
				break
			}
		}
		if math.Abs(s.Y()[0]) > 1e-6 || math.Abs(s.Y()[1]-1) > 1e-4 {
			t.Errorf("%v: %v, want [0 1]", m, s.Y())
		}
	}
}

func TestReuseAllocatesNothing(t *testing.T) {
	for _, m := range allMethods {
		p := odetest.VanDerPol()
		s := mustSolver(t, &Problem{Dim: 2, Func: p.Func, Events: []Event{{Func: func(_ float64, y []float64) float64 { return y[0] }}}},
			&Settings{Method: m, RelTol: 1e-5, AbsTol: []float64{1e-7}})
		y, dst := make([]float64, 2), make([]float64, 8)
		times := []float64{0.5, 1, 1.5, 2}
		run := func() {
			copy(y, p.Y0)
			if _, err := s.IntegrateAt(dst, times, 0, y); err != nil {
				t.Fatal(err)
			}
		}
		run()
		if a := testing.AllocsPerRun(5, run); a != 0 {
			t.Errorf("%v: %v allocations a run", m, a)
		}
	}
}

// TestDeterministic: a reused solver and a fresh one give the same bits.
func TestDeterministic(t *testing.T) {
	for _, m := range allMethods {
		p := odetest.Oregonator()
		var ys [3][]float64
		s := newStandard(t, p, Settings{Method: m, RelTol: 1e-5}, false)
		for i := range ys {
			if i == 2 {
				s = newStandard(t, p, Settings{Method: m, RelTol: 1e-5}, false)
			}
			ys[i] = append([]float64(nil), p.Y0...)
			if _, err := s.Integrate(0, p.T1, ys[i]); err != nil {
				t.Fatal(err)
			}
		}
		for k := range ys[0] {
			if ys[0][k] != ys[1][k] || ys[0][k] != ys[2][k] {
				t.Errorf("%v: %v", m, ys)
			}
		}
	}
}

// TestJacobians compares every analytic Jacobian with central differences.
func TestJacobians(t *testing.T) {
	for _, p := range odetest.Standard() {
		if p.Name == "Robertson, long" {
			continue
		}
		n := len(p.Y0)
		y := make([]float64, n)
		for i := range y {
			y[i] = 0.3 + 0.2*float64(i)
		}
		jac := make([]float64, n*n)
		p.Jac(jac, make([]float64, n), 0, y)
		compareJacobian(t, p.Name, func(d, y []float64) { p.Func(d, 0, y) }, jac, y)
	}
	th, y0 := odetest.ThermostatMember(3)
	jac, dt := make([]float64, 16), make([]float64, 4)
	y := []float64{1 + 0*y0[0], 1, 1, 1}
	scale := []float64{265, 5, 4000, 20000} // differences on variables of size one
	f := func(d, x []float64) {
		z := make([]float64, 4)
		for i := range z {
			z[i] = x[i] * scale[i]
		}
		th.Func(d, 1.3, z)
		d[0] /= 1e8
	}
	z := append([]float64(nil), scale...)
	th.Jac(jac, dt, 1.3, z)
	for i := range 4 {
		for j := range 4 {
			jac[i*4+j] *= scale[j]
			if i == 0 {
				jac[i*4+j] /= 1e8
			}
		}
	}
	compareJacobian(t, "thermostat", f, jac, y)
	a, b := make([]float64, 4), make([]float64, 4)
	th.Func(a, 1.3-1e-5, z)
	th.Func(b, 1.3+1e-5, z)
	for i := range dt {
		if d := (b[i] - a[i]) / 2e-5; math.Abs(d-dt[i]) > 1e-4*(math.Abs(d)+1) {
			t.Errorf("thermostat: ∂f%d/∂t = %g, difference %g", i, dt[i], d)
		}
	}
}

func compareJacobian(t *testing.T, name string, f func(d, y []float64), jac, y []float64) {
	t.Helper()
	n := len(y)
	dst := mat.NewDense(n, n, nil)
	fd.Jacobian(dst, f, y, &fd.JacobianSettings{Formula: fd.Central})
	for i := range n {
		row := 0.0
		for j := range n {
			row = max(row, math.Abs(dst.At(i, j)))
		}
		for j := range n {
			if d := math.Abs(dst.At(i, j) - jac[i*n+j]); d > 1e-6*(row+1) {
				t.Errorf("%s: ∂f%d/∂y%d = %g, difference %g", name, i, j, jac[i*n+j], dst.At(i, j))
			}
		}
	}
}

// TestLinearAlgebra checks the factorisations, small, large and banded, real
// and complex, with residuals on random systems of mixed units.
func TestLinearAlgebra(t *testing.T) {
	r := rand.New(rand.NewPCG(3, 4))
	for n := 1; n <= 40; n++ {
		for _, band := range []*Band{nil, {min(2, n-1), min(1, n-1)}, {0, min(3, n-1)}} {
			s := mustSolver(t, &Problem{Dim: n, Func: func(d []float64, _ float64, _ []float64) { clear(d) }, Band: band},
				&Settings{Method: RadauIIA3, AbsTol: []float64{1}})
			sc := make([]float64, n)
			for i := range sc {
				sc[i] = math.Pow(10, 12*r.Float64()-6)
				s.rs[i] = 1 / sc[i]
			}
			for i := range s.jac {
				s.jac[i] = 0
			}
			for i := range n {
				for j := range n {
					v := r.NormFloat64() * sc[i] / sc[j]
					if band == nil {
						s.jac[i*n+j] = v
					} else if j >= i-band.Lower && j <= i+band.Upper {
						s.jac[i*(band.Lower+band.Upper+1)+j-i+band.Lower] = v
					}
				}
			}
			b, x := make([]float64, n), make([]float64, n)
			cb, cx := make([]complex128, n), make([]complex128, n)
			for i := range b {
				b[i] = r.NormFloat64() * sc[i]
				cb[i] = complex(b[i], r.NormFloat64()*sc[i])
			}
			const c = 0.7
			mu := complex(0.4, 0.9)
			if s.factorShifted(c) != outcomeOK || !s.rad.lin[0].factor(s, mu) {
				t.Fatalf("n = %d: singular", n)
			}
			s.solve(x, b)
			s.rad.lin[0].solve(cx, cb)
			size, csize := 0.0, 0.0
			for i := range x {
				size = max(size, math.Abs(x[i])/sc[i])
				csize = max(csize, cabs(cx[i])/sc[i])
			}
			for i := range n {
				v, cv := c*x[i]-b[i], mu*cx[i]-cb[i]
				for j := range n {
					a := s.entry(s.jac, i, j)
					v -= a * x[j]
					cv -= complex(a, 0) * cx[j]
				}
				if math.Abs(v)/sc[i] > 1e-12*(1+size)*float64(n) || cabs(cv)/sc[i] > 1e-12*(1+csize)*float64(n) {
					t.Errorf("n = %d, band %v: residuals %g, %g", n, band, v/sc[i], cabs(cv)/sc[i])
				}
			}
		}
	}
}

// TestEigenvalues on companion-like matrices with known spectra.
func TestEigenvalues(t *testing.T) {
	r := rand.New(rand.NewPCG(5, 6))
	for n := 1; n <= 12; n++ {
		for range 20 {
			// Block-diagonal with known eigenvalues, then a similarity.
			want := make([]complex128, n)
			d := mat.NewDense(n, n, nil)
			for i := 0; i < n; i++ {
				if i+1 < n && r.IntN(2) == 0 {
					a, b := r.NormFloat64(), 1+r.Float64()
					d.Set(i, i, a)
					d.Set(i+1, i+1, a)
					d.Set(i, i+1, b)
					d.Set(i+1, i, -b)
					want[i], want[i+1] = complex(a, b), complex(a, -b)
					i++
					continue
				}
				a := r.NormFloat64()
				d.Set(i, i, a)
				want[i] = complex(a, 0)
			}
			p := mat.NewDense(n, n, nil)
			for i := range n {
				for j := range n {
					p.Set(i, j, r.NormFloat64()*0.3)
				}
				p.Set(i, i, p.At(i, i)+2)
			}
			var q, m mat.Dense
			if err := q.Inverse(p); err != nil {
				continue
			}
			m.Product(p, d, &q)
			a := make([]float64, n*n)
			for i := range n {
				for j := range n {
					a[i*n+j] = m.At(i, j) * math.Ldexp(1, 3*(i-j)) // unbalanced
				}
			}
			wr, wi := make([]float64, n), make([]float64, n)
			if !eigenvalues(a, n, wr, wi) {
				t.Fatalf("n = %d: no convergence", n)
			}
			for _, w := range want {
				best := math.Inf(1)
				for i := range wr {
					best = min(best, cabs(complex(wr[i], wi[i])-w))
				}
				if best > 1e-6 {
					t.Errorf("n = %d: eigenvalue %v missed by %g", n, w, best)
				}
			}
		}
	}
}

// TestCertainlyStable: the cheap criteria never call an unstable matrix
// stable, and recognise enough of the stable ones to be worth their while.
func TestCertainlyStable(t *testing.T) {
	r := rand.New(rand.NewPCG(7, 8))
	for n := 2; n <= 8; n++ {
		stable, seen := 0, 0
		for try := range 20000 {
			a, w := make([]float64, n*n), make([]float64, n*n)
			for i := range n {
				rate := math.Pow(10, 6*r.Float64())
				for j := range n {
					a[i*n+j] = rate * r.NormFloat64() * 0.4
				}
				a[i*n+i] -= rate
			}
			neutral := try%4 == 0 // a conserved sum: an eigenvalue zero
			if neutral {
				for j := range n {
					a[(n-1)*n+j] = 0
					for i := range n - 1 {
						a[(n-1)*n+j] -= a[i*n+j]
					}
				}
			}
			wr, wi := make([]float64, n), make([]float64, n)
			ok := certainlyStable(a, w, n, 1e-12)
			b := append([]float64(nil), a...)
			if !eigenvalues(b, n, wr, wi) {
				continue
			}
			worst, size := math.Inf(-1), 0.0
			for _, v := range wr {
				worst = max(worst, v)
			}
			for _, v := range a {
				size = max(size, math.Abs(v))
			}
			if worst < 0 || neutral && worst < 1e-12*size {
				stable++
				if ok {
					seen++
				}
			} else if ok && worst > 1e-12*size {
				t.Fatalf("n = %d: called stable with an eigenvalue %g: %v", n, worst, a)
			}
		}
		if seen < stable*99/100 {
			t.Errorf("n = %d: recognised %d of %d stable matrices", n, seen, stable)
		}
	}
}

// TestBanded: a banded and a dense run of the same problem agree, also against
// the order-13 method.
func TestBanded(t *testing.T) {
	p := odetest.Brusselator(20)
	run := func(m Method, rtol float64, band *Band) []float64 {
		s := mustSolver(t, &Problem{Dim: 40, Func: p.Func, Autonomous: true, Band: band}, &Settings{Method: m, RelTol: rtol, AbsTol: []float64{rtol * 1e-2}})
		y := append([]float64(nil), p.Y0...)
		if _, err := s.Integrate(0, p.T1, y); err != nil {
			t.Fatal(err)
		}
		return y
	}
	ref := run(RadauIIA7, 1e-12, nil)
	for _, m := range allMethods {
		for _, rtol := range []float64{1e-4, 1e-7, 1e-10} {
			for _, b := range []*Band{nil, {2, 2}, {3, 2}} {
				for i, v := range run(m, rtol, b) {
					if math.Abs(v/ref[i]-1) > 100*rtol {
						t.Errorf("%v, rtol %g, band %v: component %d off by %g", m, rtol, b, i, v/ref[i]-1)
						break
					}
				}
			}
		}
	}
}

func FuzzIntegrate(f *testing.F) {
	f.Add(-1.0, 2.0, 0.5, -1e6, 1.0, 0.0, 10.0, uint8(0))
	f.Add(1e300, -1e300, 1e-300, 0.0, 1.0, -1.0, -1.0, uint8(1))
	f.Add(0.0, 1.0, -1.0, 0.0, 1e-9, 1e9, 100.0, uint8(6))
	f.Fuzz(func(t *testing.T, a, b, c, d, y0, y1, end float64, mode uint8) {
		p := &Problem{
			Dim: 2,
			Func: func(dy []float64, t float64, y []float64) {
				dy[0], dy[1] = a*y[0]+b*y[1]*y[0], c*y[0]+d*y[1]+math.Sin(t)
			},
			Events: []Event{{Func: func(_ float64, y []float64) float64 { return y[0] - y[1] }}},
		}
		s, err := NewSolver(p, &Settings{Method: Method(mode % 4), RelTol: 1e-4, MaxSteps: 200, Guard: Guard{Off: mode&4 != 0}})
		if err != nil {
			t.Fatal(err)
		}
		y := []float64{y0, y1}
		r, err := s.Integrate(0, end, y)
		if err == nil && r.Status != Reached || err != nil && !isNamed(err) {
			t.Fatalf("%v, %v", r.Status, err)
		}
		if !errors.Is(err, ErrBadInput) && (math.IsNaN(y[0]+y[1]) || r.T*end < 0) {
			t.Fatalf("y = %v at %g", y, r.T)
		}
	})
}

// TestEigenNoise holds the closed forms for small and for real eigenvalues
// against eigenvectors from gonum.
func TestEigenNoise(t *testing.T) {
	r := rand.New(rand.NewPCG(9, 10))
	for _, m := range []int{2, 3, 4, 5, 8} {
		s, err := NewSolver(&Problem{Dim: m, Func: func(d []float64, _ float64, _ []float64) { clear(d) }}, nil)
		if err != nil {
			t.Fatal(err)
		}
		for range 300 {
			a := s.gd.a[:m*m]
			for i := range a {
				a[i] = r.NormFloat64() * math.Exp(r.NormFloat64())
			}
			var e mat.Eigen
			if !e.Factorize(mat.NewDense(m, m, slices.Clone(a)), mat.EigenBoth) {
				t.Fatal("no eigenvalues")
			}
			var right, left mat.CDense
			e.VectorsTo(&right)
			e.LeftVectorsTo(&left)
			for k, lam := range e.Values(nil) {
				num, den := 0.0, complex128(0)
				for i := range m {
					for j := range m {
						num += cabs(left.At(i, k)) * math.Abs(a[i*m+j]) * cabs(right.At(j, k))
					}
					w := left.At(i, k)
					den += complex(real(w), -imag(w)) * right.At(i, k)
				}
				want := num / cabs(den)
				if want > 1e6 {
					continue // hardly two eigenvalues
				}
				if got := s.eigenNoise(m, real(lam), imag(lam)) / s.gd.noise; math.Abs(got-want) > 1e-6*want {
					t.Fatalf("m = %d, eigenvalue %v: noise %g, want %g", m, lam, got, want)
				}
			}
		}
	}
}

// TestBandedSolve: banded factors, with row interchanges, against gonum.
func TestBandedSolve(t *testing.T) {
	r := rand.New(rand.NewPCG(11, 12))
	for _, width := range [][2]int{{1, 1}, {2, 2}, {2, 1}, {1, 3}, {3, 2}} {
		kl, ku := width[0], width[1]
		for n := max(kl, ku) + 1; n < 30; n++ {
			w := 2*kl + ku + 1
			a, piv, rs := make([]float64, n*w), make([]int, n), make([]float64, n)
			full := mat.NewDense(n, n, nil)
			for i := range n {
				rs[i] = math.Exp(r.NormFloat64())
				for j := max(0, i-kl); j <= min(n-1, i+ku); j++ {
					v := r.NormFloat64()
					full.Set(i, j, v)
					a[i*w+j-i+kl] = v
				}
			}
			ca, cpiv := make([]complex128, len(a)), make([]int, n)
			for i, v := range a {
				ca[i] = complex(0, v) // i A (−i x) = b
			}
			if !bandFactor(a, piv, rs, n, kl, ku) || !cbandFactor(ca, cpiv, rs, n, kl, ku) {
				t.Fatalf("n = %d, band %v: singular", n, width)
			}
			b, x := make([]float64, n), make([]float64, n)
			for i := range b {
				b[i] = r.NormFloat64()
			}
			bandSolve(a, piv, n, kl, ku, x, b)
			cb, cx := make([]complex128, n), make([]complex128, n)
			for i, v := range b {
				cb[i] = complex(v, 0)
			}
			cbandSolve(ca, cpiv, n, kl, ku, cx, cb)
			var want mat.VecDense
			if err := want.SolveVec(full, mat.NewVecDense(n, b)); err != nil {
				continue // nearly singular
			}
			for i, v := range x {
				w := want.AtVec(i)
				if tol := 1e-9 * mat.Norm(&want, math.Inf(1)); math.Abs(v-w) > tol || cabs(cx[i]-complex(0, -w)) > tol {
					t.Fatalf("n = %d, band %v: x[%d] = %v and %v, want %v", n, width, i, v, cx[i], w)
				}
			}
		}
	}
}

// TestBoundAfterLoss: once a change of a large whole Jacobian is located, its
// bound of growth has no odd number of real eigenvalues above it.
func TestBoundAfterLoss(t *testing.T) {
	p := odetest.Brusselator(20)
	lost := 0
	for _, m := range allMethods {
		for _, rtol := range []float64{1e-4, 1e-5, 1e-6} {
			s := mustSolver(t, &Problem{Dim: 40, Func: p.Func, Autonomous: true, Band: &Band{2, 2}},
				&Settings{Method: m, RelTol: rtol, AbsTol: []float64{rtol * 1e-2}})
			if err := s.Init(0, p.T1, p.Y0); err != nil {
				t.Fatal(err)
			}
			for done := false; !done; {
				var err error
				if done, err = s.Step(); err != nil {
					t.Fatal(m, err)
				}
				if s.Growing() > 0 {
					lost += len(s.Losses())
					if re := s.gd.cur[0].re; s.oddBand(s.jac, re) {
						t.Errorf("%v, rtol %g: an odd number of real eigenvalues above the bound %g at %g", m, rtol, re, s.T())
					}
				}
			}
		}
	}
	if lost == 0 {
		t.Error("nothing was lost")
	}
}
