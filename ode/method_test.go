package ode

import (
	"math"
	"math/cmplx"
	"testing"

	"cycle/ode/odetest"
)

// tree is a rooted tree: the list of its subtrees.
type tree []tree

func (t tree) order() int {
	n := 1
	for _, c := range t {
		n += c.order()
	}
	return n
}

func (t tree) gamma() float64 {
	g := float64(t.order())
	for _, c := range t {
		g *= c.gamma()
	}
	return g
}

// treesOf returns the rooted trees of order n.
func treesOf(n int) []tree {
	var out []tree
	// Multisets of trees with n−1 vertices together, in falling order of an
	// enumeration of all smaller trees.
	var all []tree
	for k := 1; k < n; k++ {
		all = append(all, treesOf(k)...)
	}
	var rec func(left, last int, cur tree)
	rec = func(left, last int, cur tree) {
		if left == 0 {
			out = append(out, append(tree(nil), cur...))
			return
		}
		for i := last; i >= 0; i-- {
			if o := all[i].order(); o <= left {
				rec(left-o, i, append(cur, all[i]))
			}
		}
	}
	rec(n-1, len(all)-1, nil)
	return out
}

// TestRodasOrderConditions checks the order conditions of Rosenbrock methods
// (Hairer & Wanner II, IV.7, theorem 7.4) after undoing the change of
// variables U = Γ k: a vertex with one branch sums with α+γ, others with α.
func TestRodasOrderConditions(t *testing.T) {
	const n = 8
	// Γ⁻¹ = I/γ − C.
	gi := make([]float64, n*n)
	for i := range n {
		for j := range i {
			gi[i*n+j] = -rodasCC[i][j]
		}
		gi[i*n+i] = 1 / rodasGamma
	}
	gam := invert(gi, n)
	alpha := make([]float64, n*n)
	for i := range n {
		for j := range n {
			for k := range n {
				alpha[i*n+j] += rodasA[i][k] * gam[k*n+j]
			}
		}
	}
	b, bh := make([]float64, n), make([]float64, n)
	for j := range n {
		for k := range n {
			m := rodasA[7][k]
			bh[j] += m * gam[k*n+j]
			if k == 7 {
				m = 1
			}
			b[j] += m * gam[k*n+j]
		}
	}
	for i := range n {
		c, d := 0.0, 0.0
		for j := range n {
			c += alpha[i*n+j]
			d += gam[i*n+j]
		}
		if math.Abs(c-rodasC[i]) > 2e-14 || math.Abs(d-rodasD[i]) > 2e-14 {
			t.Errorf("stage %d: row sums %.17g, %.17g; want c = %.17g, d = %.17g", i+1, c, d, rodasC[i], rodasD[i])
		}
	}
	var phi func(tr tree) []float64
	phi = func(tr tree) []float64 {
		out := make([]float64, n)
		for i := range out {
			out[i] = 1
		}
		for _, c := range tr {
			p := phi(c)
			for i := range n {
				s := 0.0
				for j := range n {
					w := alpha[i*n+j]
					if len(tr) == 1 {
						w += gam[i*n+j]
					}
					s += w * p[j]
				}
				out[i] *= s
			}
		}
		return out
	}
	count := 0
	for order := 1; order <= 5; order++ {
		for _, tr := range treesOf(order) {
			count++
			p := phi(tr)
			s, sh := 0.0, 0.0
			for i := range n {
				s += b[i] * p[i]
				sh += bh[i] * p[i]
			}
			if r := math.Abs(s - 1/tr.gamma()); r > 2e-14 {
				t.Errorf("order %d, tree %v: residual %g", order, tr, r)
			}
			if r := math.Abs(sh - 1/tr.gamma()); order <= 4 && r > 2e-14 {
				t.Errorf("embedded, order %d, tree %v: residual %g", order, tr, r)
			}
		}
	}
	if count != 17 {
		t.Errorf("%d trees, want 17", count)
	}
}

// TestWrittenOutSums compares the written-out sums with the tables.
func TestWrittenOutSums(t *testing.T) {
	u := []float64{0.3, -1.1, 0.7, 2.3, -0.4, 1.9, 0.6, -0.8}
	y, arg, rhs := []float64{0.25}, []float64{0}, []float64{0}
	for i := 1; i < 8; i++ {
		a, c := 0.25, 0.0
		for j := range i {
			a += rodasA[i][j] * u[j]
			c += rodasCC[i][j] * u[j]
		}
		stageSums(i, u, y, arg, rhs, 2)
		if math.Abs(arg[0]-a) > 1e-13 || math.Abs(rhs[0]-2*c) > 1e-12 {
			t.Errorf("stage %d: %v, %v; want %v, %v", i+1, arg[0], rhs[0], a, 2*c)
		}
	}
	d := make([]float64, 3)
	denseSums(u, d, 1)
	for r := range 3 {
		w := 0.0
		for j := range 8 {
			w += rodasH[r][j] * u[j]
		}
		if math.Abs(d[r]-w) > 1e-12 {
			t.Errorf("K%d = %v, want %v", r+1, d[r], w)
		}
	}
}

var allMethods = []Method{Rodas5P, RadauIIA3, RadauIIA5, RadauIIA7}

func methodLogR(m Method) func(complex128) float64 {
	switch m {
	case RadauIIA3:
		return newRadau(3, 1).logR
	case RadauIIA5:
		return newRadau(5, 1).logR
	case RadauIIA7:
		return newRadau(7, 1).logR
	}
	return rodasLogR
}

func TestLStability(t *testing.T) {
	for _, m := range allMethods {
		logR := methodLogR(m)
		for _, z := range []complex128{-1e14, 1e14, 1e14i} {
			if r := logR(z); r > math.Log(1e-12) {
				t.Errorf("%v: |R(%g)| = %g, want 0", m, z, math.Exp(r))
			}
		}
		for k := -400; k <= 400; k++ {
			y := math.Pow(10, float64(k)/100)
			if r := logR(complex(0, y)); r > 1e-13 {
				t.Errorf("%v: |R(%gi)| − 1 = %g", m, y, r)
			}
			for _, arg := range []float64{0.51, 0.7, 0.99} {
				if r := logR(cmplx.Rect(y, math.Pi*arg)); r > 1e-13 {
					t.Errorf("%v: |R| > 1 at modulus %g, argument %gπ", m, y, arg)
				}
			}
		}
		// Near zero R is exp to the order of the method.
		if r := logR(0.01); math.Abs(r-0.01) > 1e-12 {
			t.Errorf("%v: ln R(0.01) = %g", m, r)
		}
	}
}

// TestRadauCoefficients compares with the published values of RADAU5
// (Hairer & Wanner II, IV.8) and checks the simplifying assumptions.
func TestRadauCoefficients(t *testing.T) {
	r := newRadau(3, 1)
	s6 := math.Sqrt(6)
	for i, w := range []float64{(4 - s6) / 10, (4 + s6) / 10, 1} {
		if math.Abs(r.c[i]-w) > 2e-16 {
			t.Errorf("c%d = %.17g, want %.17g", i+1, r.c[i], w)
		}
	}
	for i, w := range []float64{(-13 - 7*s6) / 3, (-13 + 7*s6) / 3, -1.0 / 3} {
		if math.Abs(r.e[i]-w) > 1e-14*math.Abs(w)*4 {
			t.Errorf("e%d = %.17g, want %.17g", i+1, r.e[i], w)
		}
	}
	for s, gamma := range map[int]float64{3: 3.6378342527444957, 5: 6.2867047517292766, 7: 8.9368327884052163} {
		r := newRadau(s, 1)
		if math.Abs(r.gamma-gamma) > 1e-14*gamma {
			t.Errorf("s = %d: γ = %.17g, want %.17g", s, r.gamma, gamma)
		}
		// Stiffly accurate: the last row of A integrates c^(k−1) to degree 2s−2.
		a := invert(r.ainv, s)
		for k := 1; k <= 2*s-1; k++ {
			sum := 0.0
			for j := range s {
				sum += a[(s-1)*s+j] * math.Pow(r.c[j], float64(k-1))
			}
			if e := math.Abs(sum - 1/float64(k)); e > 1e-14 {
				t.Errorf("s = %d: B(%d) residual %g", s, k, e)
			}
		}
		// A⁻¹ T = T Λ.
		for i := range s {
			for p := range r.mu {
				v := complex128(0)
				for k := range s {
					v += complex(r.ainv[i*s+k], 0) * complex(r.t[k*s+2*p+1], r.t[k*s+2*p+2])
				}
				w := cmplx.Conj(r.mu[p]) * complex(r.t[i*s+2*p+1], r.t[i*s+2*p+2])
				if cmplx.Abs(v-w) > 1e-12 {
					t.Errorf("s = %d: eigenvector residual %g", s, cmplx.Abs(v-w))
				}
			}
		}
	}
}

// fixed integrates with steps of length h and returns the error at the end
// and the largest error of the dense output.
func fixed(t *testing.T, m Method, f Func, autonomous bool, exact func(t float64, y []float64), n int, t1, h float64) (end, dense float64) {
	t.Helper()
	at := make([]float64, n)
	for i := range at {
		at[i] = 1e-3
	}
	s, err := NewSolver(&Problem{Dim: n, Func: f, Autonomous: autonomous},
		&Settings{Method: m, RelTol: 1e-3, AbsTol: at, InitialStep: h, MaxStep: h * (1 + 1e-12), Guard: Guard{Off: true}})
	if err != nil {
		t.Fatal(err)
	}
	if s.rad != nil {
		s.rad.kappa = 1e-11 // the error of the formula, not of Newton's iteration
	}
	y, w := make([]float64, n), make([]float64, n)
	exact(0, y)
	if err := s.Init(0, t1, y); err != nil {
		t.Fatal(err)
	}
	for {
		done, err := s.Step()
		if err != nil {
			t.Fatal(err)
		}
		a, b := s.Interval()
		for _, th := range []float64{0.21, 0.5, 0.83} {
			x := a + th*(b-a)
			s.Interpolate(y, x)
			exact(x, w)
			for i := range y {
				dense = max(dense, math.Abs(y[i]-w[i]))
			}
		}
		if done {
			break
		}
	}
	exact(t1, w)
	for i, v := range s.Y() {
		end = max(end, math.Abs(v-w[i]))
	}
	return end, dense
}

func TestOrder(t *testing.T) {
	// y1' = y1 y2 cos t …: y1 = exp(sin t), y2 = 1/(1+t), not autonomous; and
	// the same made autonomous by a third component.
	exact2 := func(t float64, y []float64) { y[0], y[1] = math.Exp(math.Sin(t)), 1/(1+t) }
	f2 := func(d []float64, t float64, y []float64) {
		d[0] = y[0] * math.Cos(t) * (1 + t) * y[1]
		d[1] = -y[1]*y[1] + 0.1*(y[0]-math.Exp(math.Sin(t)))
	}
	exact3 := func(t float64, y []float64) { y[0], y[1], y[2] = math.Exp(math.Sin(t)), 1/(1+t), t }
	f3 := func(d []float64, _ float64, y []float64) {
		d[0] = y[0] * math.Cos(y[2]) * (1 + y[2]) * y[1]
		d[1] = -y[1]*y[1] + 0.1*(y[0]-math.Exp(math.Sin(y[2])))
		d[2] = 1
	}
	for _, c := range []struct {
		m           Method
		order, dens float64
		h           float64
	}{{Rodas5P, 5, 4, 0.05}, {RadauIIA3, 5, 4, 0.1}, {RadauIIA5, 9, 5, 0.4}} {
		e1, d1 := fixed(t, c.m, f2, false, exact2, 2, 2, c.h)
		e2, d2 := fixed(t, c.m, f2, false, exact2, 2, 2, c.h/2)
		if p := math.Log2(e1 / e2); p < c.order-0.25 {
			t.Errorf("%v, time-dependent: order %.2f, want %g (errors %g, %g)", c.m, p, c.order, e1, e2)
		}
		if p := math.Log2(d1 / d2); p < c.dens-0.25 {
			t.Errorf("%v, dense output: order %.2f, want %g", c.m, p, c.dens)
		}
		e1, _ = fixed(t, c.m, f3, true, exact3, 3, 2, c.h)
		e2, _ = fixed(t, c.m, f3, true, exact3, 3, 2, c.h/2)
		if p := math.Log2(e1 / e2); p < c.order-0.25 {
			t.Errorf("%v, autonomous: order %.2f, want %g (errors %g, %g)", c.m, p, c.order, e1, e2)
		}
	}
}

// TestProtheroRobinson: y' = λ(y − cos t) − sin t with λ = -1e6, y = cos t.
// The order may not collapse with stiffness, at the ends of steps and between.
func TestProtheroRobinson(t *testing.T) {
	f := func(d []float64, t float64, y []float64) { d[0] = -1e6*(y[0]-math.Cos(t)) - math.Sin(t) }
	exact := func(t float64, y []float64) { y[0] = math.Cos(t) }
	for _, c := range []struct {
		m Method
		h float64
	}{{Rodas5P, 0.5}, {RadauIIA3, 0.5}, {RadauIIA5, 1}} {
		e1, d1 := fixed(t, c.m, f, false, exact, 1, 2, c.h)
		e2, d2 := fixed(t, c.m, f, false, exact, 1, 2, c.h/2)
		// The end error carries a factor 1/λ; at its size rounding of λ·y
		// is the floor.
		if e1 > 1e-8 || e2 > e1/4 && e2 > 1e-14 {
			t.Errorf("%v: errors %g, %g", c.m, e1, e2)
		}
		if p := math.Log2(d1 / d2); p < 2.75 {
			t.Errorf("%v: dense output of order %.2f (errors %g, %g)", c.m, p, d1, d2)
		}
		if c.m == Rodas5P && d2 > 1e-5 {
			t.Errorf("%v: dense error %g", c.m, d2)
		}
	}
}

func newStandard(tb testing.TB, p *odetest.Problem, st Settings, analytic bool) *Solver {
	tb.Helper()
	st.AbsTol = make([]float64, len(p.Y0))
	for i := range st.AbsTol {
		st.AbsTol[i] = st.RelTol * p.Scale[i]
	}
	pr := &Problem{Dim: len(p.Y0), Func: p.Func, Autonomous: p.Autonomous}
	if analytic {
		pr.Jac = p.Jac
	}
	s, err := NewSolver(pr, &st)
	if err != nil {
		tb.Fatal(err)
	}
	return s
}

func TestStandardProblems(t *testing.T) {
	for _, p := range odetest.Standard() {
		for _, m := range allMethods {
			for _, rtol := range []float64{1e-4, 1e-6, 1e-8, 1e-10} {
				bar := 20.0
				if rtol < 1e-9 {
					bar = 100
				}
				if p.Name == "Arenstorf" {
					// One revolution multiplies a perturbation by about 1e4
					// to 1e5: the passage near the moon happens at 1/160 of
					// the size the tolerance refers to.
					bar = 2e4
				}
				for _, analytic := range []bool{false, true} {
					s := newStandard(t, p, Settings{Method: m, RelTol: rtol}, analytic)
					y := append([]float64(nil), p.Y0...)
					r, err := s.Integrate(p.T0, p.T1, y)
					if err != nil {
						t.Errorf("%s, %v, rtol %g: %v", p.Name, m, rtol, err)
						continue
					}
					if e := p.Error(y); !(e <= bar*rtol) {
						t.Errorf("%s, %v, rtol %g, analytic %v: error %.3g = %.3g rtol, want %g (%d steps)",
							p.Name, m, rtol, analytic, e, e/rtol, bar, r.Stats.Steps)
					}
				}
			}
		}
	}
}

// TestWork bounds the work on two problems, so that a loss of efficiency is a
// failure. The bounds are the counts measured when the test was written plus a
// quarter.
func TestWork(t *testing.T) {
	for _, c := range []struct {
		p     *odetest.Problem
		m     Method
		rtol  float64
		evals int
	}{
		{odetest.Robertson(), Rodas5P, 1e-6, 1000},
		{odetest.VanDerPol(), Rodas5P, 1e-4, 3500},
		{odetest.HIRES(), RadauIIA5, 1e-8, 6500},
	} {
		s := newStandard(t, c.p, Settings{Method: c.m, RelTol: c.rtol}, false)
		y := append([]float64(nil), c.p.Y0...)
		r, err := s.Integrate(c.p.T0, c.p.T1, y)
		if err != nil {
			t.Fatal(err)
		}
		if r.Stats.FuncEvals > c.evals {
			t.Errorf("%s, %v, rtol %g: %d evaluations, want at most %d", c.p.Name, c.m, c.rtol, r.Stats.FuncEvals, c.evals)
		}
	}
}
