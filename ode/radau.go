package ode

import "math"

// radau holds the coefficients of the s-stage Radau IIA method, derived from
// its nodes, and the workspace of its Newton iteration (Hairer & Wanner II,
// IV.5 and IV.8, for any odd s). In terms of the stage increments Z,
//
//	Z = h (A ⊗ I) F(y + Z),   y(t+h) ≈ y + Z_s
//
// and with A⁻¹ T = T Λ, Λ = diag(γ, [[α, β], [−β, α]], …), one iteration
// solves one real and (s−1)/2 complex linear systems of the size of the
// problem, (γ/h − J) and ((α−iβ)/h − J).
type radau struct {
	s          int
	c          []float64 // nodes, c[s-1] = 1
	ainv       []float64 // A⁻¹, s×s row-major
	t, ti      []float64 // T and its inverse
	gamma      float64
	mu         []complex128 // α − iβ for each pair
	e          []float64    // error weights, to be divided by h
	bary       []float64    // barycentric weights of the nodes 0, c
	pnum, pden []float64    // stability function, by rising powers

	z, zPrev  []float64 // stage increments, stage-major; zPrev of the last accepted step
	w         []float64 // T⁻¹ z
	exact     bool      // residuals are formed before the transformation, whose condition costs the order-13 method digits
	f, dw     []float64
	cr, cx    []complex128
	lag       []float64
	ahead     []float64               // the basis of the last step at the nodes of the next
	at        [nSamples + 1][]float64 // the basis at the samples for events, and at 1
	slope     []float64               // basisDiff at 1/2
	ez        []float64
	hPrev     float64 // signed length of the last accepted step, 0 if none
	haveFac   bool
	facStale  bool // the factored matrices hold an older Jacobian
	hFac      float64
	theta     float64 // contraction of the last iteration
	eta       float64
	iters     int
	kappa     float64 // size of the last Newton correction, in tolerances, that ends the iteration
	lin       []csystem
	firstStep bool // of a run or after a restart
	jacFresh  bool // s.jac belongs to (t, y)
}

// legendre returns P_k(x), P_{k-1}(x).
func legendre(k int, x float64) (p, q float64) {
	p, q = 1, 0
	for j := 1; j <= k; j++ {
		p, q = (float64(2*j-1)*x*p-float64(j-1)*q)/float64(j), p
	}
	return p, q
}

// roots finds the k simple roots of f inside (lo, hi) by scanning and
// bisection to the last bit.
func roots(f func(float64) float64, k int, lo, hi float64) []float64 {
	var xs []float64
	const n = 4000
	at := func(i int) float64 { // dense near the ends
		return 0.5*(lo+hi) - 0.5*(hi-lo)*math.Cos(math.Pi*(float64(i)+0.5)/(n+1))
	}
	for i := 0; i < n && len(xs) < k; i++ {
		a, b := at(i), at(i+1)
		fa, fb := f(a), f(b)
		if fa == 0 {
			xs = append(xs, a)
			continue
		}
		if fa*fb >= 0 {
			continue
		}
		for {
			m := 0.5 * (a + b)
			if m <= a || m >= b {
				break
			}
			if fm := f(m); fm*fa > 0 {
				a = m
			} else {
				b = m
			}
		}
		xs = append(xs, 0.5*(a+b))
	}
	return xs
}

// radauNodes returns the nodes of the s-stage Radau IIA method on (0, 1].
func radauNodes(s int) []float64 {
	// P_s − P_{s−1} without its root at 1.
	xs := roots(func(x float64) float64 {
		p, q := legendre(s, x)
		return (p - q) / (x - 1)
	}, s-1, -1, 1)
	c := make([]float64, s)
	for i, x := range xs {
		c[i] = 0.5 * (1 + x)
	}
	c[s-1] = 1
	return c
}

func newRadau(s, n int) *radau {
	r := &radau{s: s, c: radauNodes(s)}
	c := r.c
	// a_ij = ∫_0^{c_i} ℓ_j by Gauss quadrature, exact for this degree.
	gx := roots(func(x float64) float64 { p, _ := legendre(s, x); return p }, s, -1, 1)
	gw := make([]float64, s)
	for i, x := range gx {
		p, q := legendre(s, x)
		d := float64(s) * (x*p - q) / (x*x - 1)
		gw[i] = 2 / ((1 - x*x) * d * d)
	}
	a := make([]float64, s*s)
	for i := range s {
		for j := range s {
			sum := 0.0
			for k, x := range gx {
				th := 0.5 * c[i] * (1 + x)
				l := 1.0
				for m := range s {
					if m != j {
						l *= (th - c[m]) / (c[j] - c[m])
					}
				}
				sum += gw[k] * l
			}
			a[i*s+j] = 0.5 * c[i] * sum
		}
	}
	r.ainv = invert(a, s)

	// Eigenvectors of A⁻¹: one real, (s−1)/2 pairs, by inverse iteration and
	// Rayleigh quotients.
	wr, wi := make([]float64, s), make([]float64, s)
	w := append([]float64(nil), r.ainv...)
	eigenvalues(w, s, wr, wi)
	r.t = make([]float64, s*s)
	col := 0
	put := func(v []complex128, im bool) {
		for i := range s {
			x := real(v[i])
			if im {
				x = imag(v[i])
			}
			r.t[i*s+col] = x
		}
		col++
	}
	for i := range s {
		if wi[i] == 0 {
			l, v := refineEigen(r.ainv, s, complex(wr[i], 0))
			r.gamma = real(l)
			put(v, false)
		}
	}
	for i := range s {
		if wi[i] > 0 {
			l, v := refineEigen(r.ainv, s, complex(wr[i], wi[i]))
			r.mu = append(r.mu, complex(real(l), -imag(l)))
			put(v, false)
			put(v, true)
		}
	}
	r.ti = invert(r.t, s)

	// Error weights: the embedded quadrature has weight 1/γ at the left end
	// and order s; δ is its difference to the method at the nodes.
	v, d := make([]float64, s*s), make([]float64, s)
	for k := range s {
		for i := range s {
			v[k*s+i] = math.Pow(c[i], float64(k))
		}
	}
	d[0] = -1 / r.gamma
	vi := invert(v, s)
	r.e = make([]float64, s)
	for j := range s {
		for i := range s {
			delta := vi[i*s] * d[0]
			r.e[j] += r.gamma * delta * r.ainv[i*s+j]
		}
	}

	r.bary = make([]float64, s+1)
	x := append([]float64{0}, c...)
	for j := range x {
		p := 1.0
		for m := range x {
			if m != j {
				p *= x[j] - x[m]
			}
		}
		r.bary[j] = 1 / p
	}

	// R = P/Q, the (s−1, s) Padé approximant of exp.
	r.pnum, r.pden = make([]float64, s), make([]float64, s+1)
	ratio, bn, bd := 1.0, 1.0, 1.0 // (2s−1−j)!/(2s−1)!, binomials
	for j := 0; j <= s; j++ {
		if j < s {
			r.pnum[j] = bn * ratio
		}
		r.pden[j] = bd * ratio
		if j%2 == 1 {
			r.pden[j] = -r.pden[j]
		}
		ratio /= float64(2*s - 1 - j)
		bn *= float64(s-1-j) / float64(j+1)
		bd *= float64(s-j) / float64(j+1)
	}

	r.z, r.zPrev = make([]float64, s*n), make([]float64, s*n)
	r.exact = s > 5
	r.f, r.w, r.dw = make([]float64, s*n), make([]float64, s*n), make([]float64, s*n)
	r.cr, r.cx = make([]complex128, n), make([]complex128, n)
	r.lag, r.ez = make([]float64, s), make([]float64, n)
	r.ahead, r.slope = make([]float64, s*s), make([]float64, s)
	for i := range r.at {
		r.at[i] = make([]float64, s)
		r.basis(r.at[i], float64(i+1)/(nSamples+1))
	}
	r.basisDiff(r.slope, 0.5)
	r.lin = make([]csystem, (s-1)/2)
	return r
}

// invert returns the inverse of the s×s matrix a.
func invert(a []float64, s int) []float64 {
	lu := append([]float64(nil), a...)
	piv, rs := make([]int, s), make([]float64, s)
	identity(piv)
	for i := range rs {
		rs[i] = 1
	}
	luFactor(lu, piv, rs, s)
	inv, b, x := make([]float64, s*s), make([]float64, s), make([]float64, s)
	for j := range s {
		clear(b)
		b[j] = 1
		luSolve(lu, piv, s, x, b)
		// One step of refinement.
		for i := range s {
			v := 0.0
			if i == j {
				v = 1
			}
			for k := range s {
				v = math.FMA(-a[i*s+k], x[k], v)
			}
			b[i] = v
		}
		d := make([]float64, s)
		luSolve(lu, piv, s, d, b)
		for i := range s {
			inv[i*s+j] = x[i] + d[i]
		}
	}
	return inv
}

// refineEigen improves the eigenvalue l of a and returns it with its
// eigenvector.
func refineEigen(a []float64, s int, l complex128) (complex128, []complex128) {
	m, piv, rs := make([]complex128, s*s), make([]int, s), make([]float64, s)
	v, x := make([]complex128, s), make([]complex128, s)
	for i := range v {
		v[i], rs[i] = 1, 1
	}
	for range 6 {
		for i := range m {
			m[i] = complex(a[i], 0)
		}
		for i := range s {
			m[i*s+i] -= l * (1 + 1e-12)
		}
		identity(piv)
		if !cluFactor(m, piv, rs, s) {
			break
		}
		cluSolve(m, piv, s, x, v)
		big := complex128(0)
		for _, z := range x {
			if abs1(z) > abs1(big) {
				big = z
			}
		}
		for i := range x {
			v[i] = x[i] / big
		}
		// Quotient of the component that is one.
		for i := range v {
			if v[i] == 1 {
				l = 0
				for j := range s {
					l += complex(a[i*s+j], 0) * v[j]
				}
				break
			}
		}
	}
	return l, v
}

// logR returns ln|R(z)|.
func (r *radau) logR(z complex128) float64 {
	var p, q complex128
	// Horner in 1/z for large arguments keeps the powers finite.
	if abs1(z) > 1e6 {
		return math.Log(math.Abs(r.pnum[r.s-1]/r.pden[r.s])) - math.Log(abs1(z))
	}
	for j := r.s; j >= 0; j-- {
		if j < r.s {
			p = p*z + complex(r.pnum[j], 0)
		}
		q = q*z + complex(r.pden[j], 0)
	}
	return math.Log(cabs(p)) - math.Log(cabs(q))
}

// basis fills lag with the Lagrange polynomials of the nodes 0, c at th, for
// the nodes c.
func (r *radau) basis(lag []float64, th float64) {
	p := th // of the factors before j, then after it
	for j, c := range r.c {
		lag[j] = p * r.bary[j+1]
		p *= th - c
	}
	p = 1
	for j := len(r.c) - 1; j >= 0; j-- {
		lag[j] *= p
		p *= th - r.c[j]
	}
}

func (r *radau) basisDiff(lag []float64, th float64) {
	s := r.s
	for j := range s {
		sum := 0.0
		for k := -1; k < s; k++ { // factor left out
			if k == j {
				continue
			}
			p := r.bary[j+1]
			for m := -1; m < s; m++ {
				switch {
				case m == j || m == k:
				case m < 0:
					p *= th
				default:
					p *= th - r.c[m]
				}
			}
			sum += p
		}
		lag[j] = sum
	}
}

func (s *Solver) radauInterp(dst, y0 []float64, th float64) {
	r, n := s.rad, s.n
	lag := r.lag
	if i := th * (nSamples + 1); i == math.Trunc(i) && i >= 1 && i <= nSamples+1 {
		lag = r.at[int(i)-1]
	} else {
		r.basis(lag, th)
	}
	copy(dst, y0[:len(dst)])
	for j, l := range lag {
		for k, z := range r.z[j*n : j*n+n] {
			dst[k] += l * z
		}
	}
}

func (s *Solver) radauInterpDiff(dst []float64, th float64) {
	r, n := s.rad, s.n
	lag := r.slope
	if th != 0.5 {
		lag = r.lag
		r.basisDiff(lag, th)
	}
	clear(dst)
	for j, l := range lag {
		for k, z := range r.z[j*n : j*n+n] {
			dst[k] += l * z
		}
	}
}

// mix forms dst_i = Σ_j m_ij src_j for ns vectors of n components.
func mix(dst, m, src []float64, ns, n int) {
	switch ns {
	case 3:
		m := (*[9]float64)(m)
		s0, s1, s2 := src[:n], src[n:2*n], src[2*n:3*n]
		d0, d1, d2 := dst[:n], dst[n:2*n], dst[2*n:3*n]
		for k, a := range s0 {
			b, c := s1[k], s2[k]
			d0[k] = m[0]*a + m[1]*b + m[2]*c
			d1[k] = m[3]*a + m[4]*b + m[5]*c
			d2[k] = m[6]*a + m[7]*b + m[8]*c
		}
		return
	case 5:
		m := (*[25]float64)(m)
		s0, s1, s2, s3, s4 := src[:n], src[n:2*n], src[2*n:3*n], src[3*n:4*n], src[4*n:5*n]
		d0, d1, d2, d3, d4 := dst[:n], dst[n:2*n], dst[2*n:3*n], dst[3*n:4*n], dst[4*n:5*n]
		for k, a := range s0 {
			b, c, d, e := s1[k], s2[k], s3[k], s4[k]
			d0[k] = (m[0]*a + m[1]*b) + (m[2]*c + m[3]*d) + m[4]*e
			d1[k] = (m[5]*a + m[6]*b) + (m[7]*c + m[8]*d) + m[9]*e
			d2[k] = (m[10]*a + m[11]*b) + (m[12]*c + m[13]*d) + m[14]*e
			d3[k] = (m[15]*a + m[16]*b) + (m[17]*c + m[18]*d) + m[19]*e
			d4[k] = (m[20]*a + m[21]*b) + (m[22]*c + m[23]*d) + m[24]*e
		}
		return
	}
	for k := range n {
		for i := range ns {
			sum := 0.0
			at := k
			for _, c := range m[i*ns : i*ns+ns] {
				sum += c * src[at]
				at += n
			}
			dst[i*n+k] = sum
		}
	}
}

// radauStep attempts one step of length h ending at tEnd; it fills s.y1 and
// s.errv.
func (s *Solver) radauStep(h, tEnd float64) outcome {
	r := s.rad
	o := s.radauTry(h, tEnd)
	if o == outcomeNewton && (!r.jacFresh || r.facStale) {
		// The matrices came from an old Jacobian.
		if !r.jacFresh {
			if !s.evalJac(s.jac, s.dfdt, s.t, s.y, s.f0) {
				return outcomeNonFinite
			}
			r.jacFresh = true
		}
		r.haveFac = false
		o = s.radauTry(h, tEnd)
	}
	return o
}

func (s *Solver) radauTry(h, tEnd float64) outcome {
	r, n, ns := s.rad, s.n, s.rad.s
	hinv := 1 / h
	reused := r.haveFac && r.hFac == h && (!r.facStale || r.theta < 0.03)
	if !reused {
		if o := s.factorShifted(r.gamma * hinv); o != outcomeOK {
			return o
		}
		for k, m := range r.mu {
			s.stats.Factorizations++
			if !r.lin[k].factor(s, m*complex(hinv, 0)) {
				return outcomeSingular
			}
		}
		r.haveFac, r.hFac, r.facStale = true, h, false
		r.theta = 1
	}
	// Starting values from the last collocation polynomial.
	if r.hPrev != 0 && h/r.hPrev < 10 {
		for i, c := range r.c {
			r.basis(r.ahead[i*ns:i*ns+ns], 1+c*h/r.hPrev)
		}
		mix(r.z, r.ahead, r.zPrev, ns, n)
		for i := range ns {
			for k := range n {
				r.z[i*n+k] += s.yPrev[k] - s.y[k]
			}
		}
		mix(r.w, r.ti, r.z, ns, n)
	} else {
		clear(r.z)
		clear(r.w)
	}
	kappa := r.kappa
	maxIt := 7 + 2*(ns-3)
	if !reused || r.eta == 0 {
		r.eta = 1
	}
	eta := math.Sqrt(math.Sqrt(r.eta * r.eta * r.eta))
	if eta < eps {
		eta = eps
	}
	dOld, theta := 0.0, math.Abs(r.theta)
	wt := s.rhsW
	for i := range wt {
		sc := s.atol[i] + s.rtol*max(math.Abs(s.y[i]), math.Abs(h*s.f0[i]))
		wt[i] = 0
		if sc > tinyScale {
			wt[i] = 1 / sc
		}
	}
	it := 0
	for {
		if it == maxIt {
			return outcomeNewton
		}
		for i := range ns {
			ti := s.t + r.c[i]*h
			if i == ns-1 {
				ti = tEnd
				if s.clip {
					ti = s.tClip
				}
			}
			zi := r.z[i*n : i*n+n]
			for k := range zi {
				s.arg[k] = s.y[k] + zi[k]
			}
			s.stats.FuncEvals++
			s.f(r.f[i*n:i*n+n], ti, s.arg)
		}
		if r.exact {
			// Residual T⁻¹ (F − A⁻¹Z/h).
			mix(r.dw, r.ainv, r.z, ns, n)
			for k, v := range r.dw {
				r.f[k] -= hinv * v
			}
			mix(r.dw, r.ti, r.f, ns, n)
			clear(r.w)
		} else {
			// The same as T⁻¹F − ΛW/h, with Λ = T⁻¹A⁻¹T.
			mix(r.dw, r.ti, r.f, ns, n)
		}
		c := r.gamma * hinv
		for k, v := range r.w[:n] {
			r.dw[k] -= c * v
		}
		s.solve(s.sol, r.dw[:n])
		copy(r.dw[:n], s.sol)
		for p := range r.mu {
			a, b := r.dw[(2*p+1)*n:(2*p+2)*n], r.dw[(2*p+2)*n:(2*p+3)*n]
			wa, wb := r.w[(2*p+1)*n:(2*p+2)*n], r.w[(2*p+2)*n:(2*p+3)*n]
			re, im := real(r.mu[p])*hinv, imag(r.mu[p])*hinv
			for k := range n {
				r.cr[k] = complex(a[k]-(re*wa[k]-im*wb[k]), b[k]-(re*wb[k]+im*wa[k]))
			}
			s.stats.Solves++
			r.lin[p].solve(r.cx, r.cr)
			for k := range n {
				a[k], b[k] = real(r.cx[k]), imag(r.cx[k])
			}
		}
		for k, v := range r.dw {
			r.w[k] += v
		}
		// The correction of Z is T times that of W.
		mix(r.f, r.t, r.dw, ns, n)
		sum := 0.0
		for i := range ns {
			zi := r.z[i*n : i*n+n]
			for k, v := range r.f[i*n : i*n+n] {
				zi[k] += v
				v *= wt[k]
				sum += v * v
			}
		}
		d := math.Sqrt(sum / float64(ns*n))
		it++
		if !(d <= math.MaxFloat64) {
			return outcomeNonFinite
		}
		if it > 1 {
			q := d / dOld
			if it == 2 {
				theta = q
			} else {
				theta = math.Sqrt(q * theta)
			}
			if theta >= 0.99 {
				return outcomeNewton
			}
			eta = theta / (1 - theta)
			if left := float64(maxIt - 1 - it); left >= 0 && d > 0 {
				if dyth := eta * d / kappa; dyth > 1 && roughLog(dyth)+left*roughLog(theta) > 0 {
					return outcomeNewton
				}
			}
		}
		dOld = d
		if eta*d <= kappa || d == 0 {
			break
		}
	}
	r.theta, r.eta, r.iters = theta, eta, it

	zs := r.z[(ns-1)*n:]
	for k := range n {
		s.y1[k] = s.y[k] + zs[k]
	}
	// Error estimate.
	for k := range r.ez {
		sum := 0.0
		for j, e := range r.e {
			sum += e * r.z[j*n+k]
		}
		r.ez[k] = sum * hinv
		s.rhs[k] = s.f0[k] + r.ez[k]
	}
	s.solve(s.errv, s.rhs)
	if r.firstStep || s.rejectedLast {
		if s.scaledNorm(s.errv) > 1 {
			for k := range n {
				s.arg[k] = s.y[k] + s.errv[k]
			}
			s.stats.FuncEvals++
			s.f(s.fs, s.t, s.arg)
			if allFinite(s.fs) {
				for k := range n {
					s.rhs[k] = s.fs[k] + r.ez[k]
				}
				s.solve(s.errv, s.rhs)
			}
		}
	}
	return outcomeOK
}

func (s *Solver) scaledNorm(e []float64) float64 {
	sum := 0.0
	for i, v := range e {
		sum += sq(v / (s.atol[i] + s.rtol*max(math.Abs(s.y[i]), math.Abs(s.y1[i]))))
	}
	return math.Sqrt(sum / float64(s.n))
}

// radauAccept keeps what the next step starts from.
func (s *Solver) radauAccept() {
	r := s.rad
	r.z, r.zPrev = r.zPrev, r.z
	copy(r.z, r.zPrev) // the dense output reads z
	r.hPrev = s.t - s.tPrev
	r.firstStep = false
	r.facStale = true
	r.jacFresh = s.gd.on
}

func (s *Solver) radauRestart() {
	r := s.rad
	r.hPrev, r.haveFac, r.firstStep, r.eta, r.theta = 0, false, true, 1, 1
}
