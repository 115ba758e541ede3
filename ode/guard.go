package ode

import (
	"math"
	"slices"
)

// blockState is what the guard knows of one block at one end of a step.
type blockState struct {
	count  int     // significantly growing eigenvalues
	re, im float64 // the fastest growing one
	sig    float64 // smallest growth rate that counts
	// How far the block lies beyond a change of its number of growing
	// eigenvalues from base; negative before the change.
	excess float64
	base   int
	judged bool // excess is known
	det    determinant
}

type guardState struct {
	on     bool
	known  bool // cur belongs to the present state
	blocks [][]int
	cur    []blockState // at the start of the step
	end    []blockState // at the end of the attempted step
	locate float64
	noise  float64 // relative uncertainty of Jacobian entries

	a, b   []float64
	wr, wi []float64
	ca     []complex128
	cv, cw []complex128
	cx     []complex128
	cpiv   []int
	wv     []float64
	scale  []float64

	ref, refTol [][]float64 // large blocks as of the last closer look
	byPoly      []bool      // comparisonStable does not hold for the block
	detOnly     bool
	signOnly    bool        // while a change is located, only the number of growing modes matters
	det         determinant // of the last matrix that oddAbove or oddBand factored

	hMax     float64 // longest step that resolves the growth at the end
	hRetry   float64
	hAfter   float64 // bound for the step after a located loss
	logErr   float64
	efolds   float64
	refRate  float64
	probe    float64 // longest step so far
	released bool

	losses []Loss
	fresh  int
}

// After so many e-foldings nothing that a floating-point number can hold is
// too small to have grown: a solution that has not left an unstable state by
// then rests in it exactly.
const maxEFolds = 750

func (s *Solver) initGuard(g *Guard) error {
	s.gd.on = !g.Off
	s.gd.locate = g.Locate
	if g.Locate == 0 {
		s.gd.locate = 0.1 * s.rtol
	}
	if !s.gd.on {
		return nil
	}
	s.gd.noise = 1e-7
	if s.p.Jac != nil {
		s.gd.noise = 1e-12
	}
	m := 0
	if g.Blocks == nil {
		all := make([]int, s.n)
		for i := range all {
			all[i] = i
		}
		s.gd.blocks = [][]int{all}
	}
	for k, b := range g.Blocks {
		if len(b) == 0 {
			return badInput("guard block %d is empty", k)
		}
		b = slices.Clone(b)
		slices.Sort(b)
		for j, i := range b {
			if i < 0 || i >= s.n || j > 0 && b[j-1] == i {
				return badInput("guard block %d: index %d", k, i)
			}
		}
		s.gd.blocks = append(s.gd.blocks, b)
	}
	for _, b := range s.gd.blocks {
		m = max(m, len(b))
	}
	gd := &s.gd
	gd.cur = make([]blockState, len(gd.blocks))
	gd.end = make([]blockState, len(gd.blocks))
	gd.a, gd.b = make([]float64, m*m), make([]float64, m*m)
	if s.band != nil {
		gd.b = make([]float64, max(m*m, s.n*(2*s.band.Lower+s.band.Upper+1)))
	}
	gd.wr, gd.wi = make([]float64, m), make([]float64, m)
	gd.ca = make([]complex128, m*m)
	gd.cv, gd.cw, gd.cx = make([]complex128, m), make([]complex128, m), make([]complex128, m)
	gd.cpiv = make([]int, m)
	gd.wv = make([]float64, 3*m)
	gd.scale = make([]float64, m)
	gd.detOnly = g.Blocks == nil && s.n > wholeLimit
	for _, b := range gd.blocks {
		size := 0
		if len(b) > 4 && !gd.detOnly {
			size = sq2(len(b))
		}
		gd.byPoly = append(gd.byPoly, false)
		gd.ref = append(gd.ref, make([]float64, size))
		gd.refTol = append(gd.refTol, make([]float64, size))
	}
	return nil
}

func (s *Solver) startGuard() {
	s.gd.known = false
	s.gd.losses = s.gd.losses[:0]
	s.gd.fresh = 0
	s.gd.efolds, s.gd.refRate, s.gd.released = 0, 0, false
	s.gd.probe = 0
	for i := range s.gd.cur {
		s.gd.cur[i] = blockState{}
		s.gd.byPoly[i] = false
		clear(s.gd.ref[i])
		clear(s.gd.refTol[i])
	}
}

// significance is the smallest growth rate that counts: one that multiplies a
// perturbation by 1.001 over the whole run.
func (s *Solver) significance() float64 { return 1e-3 / math.Abs(s.t1-s.t0) }

// entry returns ∂f_i/∂y_j from jac.
func (s *Solver) entry(jac []float64, i, j int) float64 {
	if s.band == nil {
		return jac[i*s.n+j]
	}
	kl, ku := s.band.Lower, s.band.Upper
	if j < i-kl || j > i+ku {
		return 0
	}
	return jac[i*(kl+ku+1)+j-i+kl]
}

// extract copies block b of jac, in the direction of the run, to gd.a.
func (s *Solver) extract(jac []float64, b []int) {
	m, n := len(b), s.n
	a := s.gd.a
	if s.band != nil {
		for i, bi := range b {
			for j, bj := range b {
				a[i*m+j] = s.dir * s.entry(jac, bi, bj)
			}
		}
		return
	}
	if m == n {
		if s.dir > 0 {
			copy(a, jac)
		} else {
			for i, v := range jac {
				a[i] = -v
			}
		}
		return
	}
	for i, bi := range b {
		row := jac[bi*n : bi*n+n]
		for j, bj := range b {
			a[i*m+j] = s.dir * row[bj]
		}
	}
}

// guardAll tests every block of jac.
func (s *Solver) guardAll(dst []blockState, jac []float64, t float64, y []float64) {
	sig := s.significance()
	for k, b := range s.gd.blocks {
		m := len(b)
		if m == 1 {
			v := s.dir * s.entry(jac, b[0], b[0])
			st := blockState{re: v, sig: sig}
			if v > sig {
				st.count = 1
			}
			dst[k] = st
			continue
		}
		a := jac
		if s.gd.detOnly {
			dst[k] = s.oddState(jac, sig)
			continue
		}
		whole := m == s.n && s.band == nil && s.dir > 0
		if !whole {
			s.extract(jac, b)
			a = s.gd.a
		}
		a = a[:m*m]
		stable := blockState{sig: sig}
		if m <= 4 {
			if smallStable(a, m, s.gd.noise) {
				dst[k] = stable
				continue
			}
			if whole {
				s.extract(jac, b)
			}
		} else {
			if !s.gd.byPoly[k] && comparisonStable(a, s.gd.b, m) {
				dst[k] = stable
				continue
			}
			if whole {
				s.extract(jac, b)
			}
			if s.gd.known && s.gd.cur[k].count == 0 && s.calm(k, m, sig) ||
				s.gd.byPoly[k] && comparisonStable(a, s.gd.b, m) && s.setByPoly(k, false) ||
				m <= polyLimit && polyStable(a, s.gd.b, m, polyNoise*s.gd.noise) && s.setByPoly(k, true) {
				dst[k] = stable
				continue
			}
			s.setByPoly(k, true)
		}
		dst[k] = s.spectrum(m, sig, s.gd.cur[k].count, dst[k])
	}
}

// setByPoly notes whether comparisonStable fails for block k, whose present
// state becomes the one that calm compares with. It returns true.
func (s *Solver) setByPoly(k int, v bool) bool {
	g := &s.gd
	g.byPoly[k] = v
	if !v {
		return true
	}
	m := len(g.blocks[k])
	a, ref, tol := g.a[:m*m], g.ref[k], g.refTol[k]
	copy(ref, a)
	for i := range m {
		d := 0.01 * math.Abs(a[i*m+i])
		ri := s.rs[g.blocks[k][i]]
		for j := range m {
			// The size of an entry is judged in units of the tolerances.
			tol[i*m+j] = changeLimit * (math.Abs(a[i*m+j]) + d*s.rs[g.blocks[k][j]]/ri)
		}
	}
	return true
}

// calm reports whether block k in gd.a, stable so far, needs no closer look:
// no entry has changed so much since the last one that a complex pair may have
// begun to grow, and no odd number of real eigenvalues has become positive,
// which the sign of a determinant tells.
func (s *Solver) calm(k, m int, sig float64) bool {
	g := &s.gd
	ref, tol := g.ref[k], g.refTol[k]
	for i, v := range g.a[:m*m] {
		if !(math.Abs(v-ref[i]) <= tol[i]) {
			return false
		}
	}
	return !s.oddAbove(k, m, max(sig, 1e-3/s.probeStep()))
}

// oddAbove reports whether an odd number of real eigenvalues of block k, held
// in gd.a, exceeds c: whether det(c·I − A) is negative.
func (s *Solver) oddAbove(k, m int, c float64) bool {
	g := &s.gd
	a, w := g.a[:m*m], g.b[:m*m]
	for i, v := range a {
		w[i] = -v
	}
	for i := 0; i < len(w); i += m + 1 {
		w[i] += c
	}
	for i, j := range g.blocks[k] {
		g.scale[i] = s.rs[j]
	}
	identity(g.cpiv[:m])
	if !luFactor(w, g.cpiv[:m], g.scale, m) {
		return false
	}
	odd := false
	d := determinant{mant: 1}
	for i := range m {
		if w[i*m+i] < 0 {
			odd = !odd
		}
		d.divide(w[i*m+i])
		for g.cpiv[i] != i { // sort the permutation
			j := g.cpiv[i]
			g.cpiv[i], g.cpiv[j] = g.cpiv[j], g.cpiv[i]
			odd = !odd
		}
	}
	g.det = d
	return odd
}

// determinant is |1/det| = mant·2^exp, which neither overflows nor underflows.
type determinant struct {
	mant float64
	exp  int
}

// divide takes a factor 1/x of the determinant, x the inverse of a pivot.
func (d *determinant) divide(x float64) {
	d.mant *= math.Abs(x)
	if d.mant > 0x1p300 || d.mant < 0x1p-300 {
		var e int
		d.mant, e = math.Frexp(d.mant)
		d.exp += e
	}
}

// over returns the ratio of the determinants d and e.
func (d determinant) over(e determinant) float64 {
	return math.Ldexp(e.mant/d.mant, min(max(e.exp-d.exp, -2000), 2000))
}

// oddBand is oddAbove for a banded Jacobian.
func (s *Solver) oddBand(jac []float64, c float64) bool {
	g := &s.gd
	n, kl, ku := s.n, s.band.Lower, s.band.Upper
	width := 2*kl + ku + 1
	w := g.b[:n*width]
	fillBand(w, jac, n, kl, ku, s.dir, c)
	if !bandFactor(w, g.cpiv, s.rs, n, kl, ku) {
		return false
	}
	odd := false
	d := determinant{mant: 1}
	for i := range n {
		if w[i*width+kl] < 0 {
			odd = !odd
		}
		d.divide(w[i*width+kl])
		if g.cpiv[i] != i {
			odd = !odd
		}
	}
	g.det = d
	return odd
}

// oddState judges a large whole Jacobian by determinants alone: count is 1 if
// an odd number of real eigenvalues grows, and re then bounds the fastest of
// them from above, within a factor of two where that matters.
func (s *Solver) oddState(jac []float64, sig float64) blockState {
	odd := s.oddBand
	if s.band == nil {
		s.extract(jac, s.gd.blocks[0])
		odd = s.oddDense
	}
	c := max(sig, 1e-3/s.probeStep())
	grows := odd(jac, c)
	// The determinant vanishes where the number changes.
	st := blockState{sig: sig, base: s.gd.cur[0].count, det: s.gd.det, judged: true}
	if !grows {
		return st
	}
	if s.gd.signOnly {
		st.count, st.re = 1, c
		return st
	}
	// The bound of the last step is a good one to begin with, and need not be
	// sharp while steps resolve it well.
	if old := s.gd.cur[0].re; s.gd.cur[0].count == 1 && old > c {
		if s.probeStep()*old < 0.25*s.limit && !odd(jac, old) {
			st.count, st.re = 1, old
			return st
		}
		if odd(jac, 0.5*old) {
			c = 0.5 * old
		}
	}
	for range 30 {
		c *= 4
		if !odd(jac, c) {
			break
		}
	}
	if !odd(jac, 0.5*c) {
		c *= 0.5
	}
	st.count, st.re = 1, c
	return st
}

func (s *Solver) oddDense(_ []float64, c float64) bool { return s.oddAbove(0, s.n, c) }

// probeStep is the length of step the determinant test has in mind: the
// longest so far, so that its threshold does not come and go with the step.
func (s *Solver) probeStep() float64 {
	if s.gd.probe > 0 {
		return s.gd.probe
	}
	return math.Abs(s.t1 - s.t0)
}

// A change of an entry of a large block by this fraction makes the guard
// compute its eigenvalues anew. A whole Jacobian larger than wholeLimit is
// watched by the sign of its determinant alone.
const (
	changeLimit = 0.2
	wholeLimit  = 16
)

// spectrum computes the eigenvalues of the block in gd.a and judges which of
// them grow, and how far the block lies beyond a change of their number from
// c0: by the growth rate of the fastest that would have to be the next to grow
// or the slowest that would have to stop. If the eigenvalues cannot be
// computed it returns old, with an unknown excess.
func (s *Solver) spectrum(m int, sig float64, c0 int, old blockState) blockState {
	g := &s.gd
	s.stats.EigenEvals++
	copy(g.b, g.a[:m*m])
	if !eigenvalues(g.b[:m*m], m, g.wr, g.wi) {
		old.judged = false
		return old
	}
	wr, wi := g.wr[:m], g.wi[:m]
	// By falling real part.
	for i := 1; i < m; i++ {
		for j := i; j > 0 && wr[j] > wr[j-1]; j-- {
			wr[j], wr[j-1] = wr[j-1], wr[j]
			wi[j], wi[j-1] = wi[j-1], wi[j]
		}
	}
	st := blockState{sig: sig, re: wr[0], im: math.Abs(wi[0]), base: c0, judged: true}
	biggest := 0.0
	for i := range wr {
		biggest = max(biggest, math.Abs(wr[i])+math.Abs(wi[i]))
	}
	// An eigenvalue grows if its real part exceeds sig by more than its
	// uncertainty, which is at most bound.
	bound := math.Sqrt(g.noise) * biggest
	st.excess = math.Inf(-1)
	for i, v := range wr {
		asked := i == c0 || i == c0-1
		if v <= sig && !asked {
			if i > c0 {
				break
			}
			continue
		}
		lim := sig + bound
		if math.Abs(v-sig) <= bound {
			lim = sig + min(s.eigenNoise(m, v, wi[i]), bound)
		}
		if v > lim {
			if st.count == 0 {
				st.re, st.im = v, math.Abs(wi[i])
			}
			st.count++
		}
		switch i {
		case c0:
			st.excess = max(st.excess, v-lim)
		case c0 - 1:
			st.excess = max(st.excess, lim-v)
		}
	}
	return st
}

// eigenNoise bounds, to first order, what the uncertainty of the entries of
// the block does to its eigenvalue λ = re + i im: noise·|w|ᵀ|A||v| / |wᵀv|
// with its left and right eigenvectors w and v.
func (s *Solver) eigenNoise(m int, re, im float64) float64 {
	g := &s.gd
	num, den := 0.0, 0.0
	switch {
	case m == 2:
		num, den = adjugate2((*[4]float64)(g.a), re, im)
	case m == 3:
		num, den = adjugate3((*[9]float64)(g.a), complex(re, im))
	case m == 4 && im == 0:
		num, den = adjugate4((*[16]float64)(g.a), re)
	case im == 0:
		num, den = s.realNoise(m, re)
	}
	if den > 0 && num < math.Inf(1) && den < math.Inf(1) {
		return g.noise * num / den
	}
	lam := complex(re, im)
	if !s.eigenvector(m, lam, false) {
		return 0
	}
	copy(g.cx[:m], g.cv[:m])
	if !s.eigenvector(m, lam, true) {
		return 0
	}
	copy(g.cw[:m], g.cv[:m])
	num = 0
	var wv complex128
	for i := range m {
		sum := 0.0
		for j := range m {
			sum += math.Abs(g.a[i*m+j]) * cabs(g.cx[j])
		}
		num += cabs(g.cw[i]) * sum
		wv += g.cw[i] * g.cx[i]
	}
	if d := cabs(wv); d > 0 {
		return g.noise * num / d
	}
	return math.Inf(1)
}

// realNoise returns |w|ᵀ|A||v| and |wᵀv| for the real eigenvalue lam, with both
// vectors from inverse iteration on one factorisation.
func (s *Solver) realNoise(m int, lam float64) (num, den float64) {
	g := &s.gd
	a, lu, rs, piv := g.a[:m*m], g.b[:m*m], g.scale[:m], g.cpiv[:m]
	v, w, x := g.wv[:m], g.wv[m:2*m], g.wv[2*m:3*m]
	copy(lu, a)
	shift := lam + 1e-10*math.Abs(lam) + 0x1p-1000
	for i := range m {
		row := lu[i*m : i*m+m]
		r := 0.0
		for _, e := range row {
			r = max(r, math.Abs(e))
		}
		rs[i] = 1
		if r > 0 {
			rs[i] = 1 / r
		}
		v[i], w[i] = r, rs[i]
		row[i] -= shift
	}
	identity(piv)
	if !luFactor(lu, piv, rs, m) {
		return 0, 0
	}
	for range 2 {
		luSolve(lu, piv, m, x, v)
		if !unitMax(v, x) {
			return 0, 0
		}
		luSolveT(lu, piv, m, x, w)
		if !unitMax(w, x) {
			return 0, 0
		}
	}
	for i := range m {
		sum := 0.0
		for j, e := range a[i*m : i*m+m] {
			sum += math.Abs(e * v[j])
		}
		num += math.Abs(w[i]) * sum
		den += w[i] * v[i]
	}
	return num, math.Abs(den)
}

// unitMax copies src to dst, divided by its largest entry.
func unitMax(dst, src []float64) bool {
	big := 0.0
	for _, v := range src {
		big = max(big, math.Abs(v))
	}
	if !(big > 0 && big <= math.MaxFloat64) {
		return false
	}
	for i, v := range src {
		dst[i] = v / big
	}
	return true
}

// adjugate2 is adjugate4 for m = 2 and λ = re + i im.
func adjugate2(a *[4]float64, re, im float64) (num, den float64) {
	im = im * im
	num = math.Abs(a[0])*math.Sqrt(sq(re-a[3])+im) + math.Abs(a[3])*math.Sqrt(sq(re-a[0])+im) + 2*math.Abs(a[1]*a[2])
	return num, math.Sqrt(sq(2*re-a[0]-a[3]) + 4*im)
}

// adjugate3 is adjugate4 for m = 3 and a complex λ.
func adjugate3(a *[9]float64, lam complex128) (num, den float64) {
	var b [9]complex128
	for i, v := range a {
		b[i] = complex(-v, 0)
	}
	b[0] += lam
	b[4] += lam
	b[8] += lam
	var trace complex128
	for i := range 3 {
		x, y := (*[3]complex128)(b[3*((i+1)%3):]), (*[3]complex128)(b[3*((i+2)%3):])
		for j := range 3 {
			c0, c1 := (j+1)%3, (j+2)%3
			cof := x[c0]*y[c1] - x[c1]*y[c0]
			re, im := real(cof), imag(cof)
			num += math.Abs(a[3*i+j]) * math.Sqrt(re*re+im*im)
			if i == j {
				trace += cof
			}
		}
	}
	return num, cabs(trace)
}

// adjugate4 returns Σ |A_ij| |B_ji| and |Σ B_ii| for B = adj(λI − A).
func adjugate4(a *[16]float64, lam float64) (num, den float64) {
	b := *a
	for i := range b {
		b[i] = -b[i]
	}
	b[0] += lam
	b[5] += lam
	b[10] += lam
	b[15] += lam
	trace := 0.0
	for i := range 4 {
		// Rows other than i.
		r0, r1, r2 := (i+1)&3, (i+2)&3, (i+3)&3
		x, y, z := (*[4]float64)(b[4*r0:]), (*[4]float64)(b[4*r1:]), (*[4]float64)(b[4*r2:])
		for j := range 4 {
			c0, c1, c2 := (j+1)&3, (j+2)&3, (j+3)&3
			cof := x[c0]*(y[c1]*z[c2]-y[c2]*z[c1]) - x[c1]*(y[c0]*z[c2]-y[c2]*z[c0]) + x[c2]*(y[c0]*z[c1]-y[c1]*z[c0])
			num += math.Abs(a[4*i+j] * cof)
			if i == j {
				trace += cof
			}
		}
	}
	return num, math.Abs(trace)
}

func sq2(m int) int { return m * m }

func cabs(z complex128) float64 { return math.Hypot(real(z), imag(z)) }

// eigenvector finds the right (or left) eigenvector of the block for lam by
// inverse iteration and leaves it in gd.cv.
func (s *Solver) eigenvector(m int, lam complex128, left bool) bool {
	g := &s.gd
	ca, cv, cx := g.ca[:m*m], g.cv[:m], g.cw[:m]
	size := 0.0
	for i := range m {
		for j := range m {
			v := g.a[i*m+j]
			if left {
				v = g.a[j*m+i]
			}
			ca[i*m+j] = complex(v, 0)
			size = max(size, math.Abs(v))
		}
	}
	// Row scaling keeps the choice of pivots independent of units.
	rs := g.scale[:m]
	for i := range m {
		r := 0.0
		for j := range m {
			r = max(r, abs1(ca[i*m+j]))
		}
		rs[i] = 1
		if r > 0 {
			rs[i] = 1 / r
		}
	}
	for i := range m {
		d := lam
		d += complex(1e-10*cabs(lam)+0x1p-1000, 0)
		ca[i*m+i] -= d
	}
	identity(g.cpiv[:m])
	if !cluFactor(ca, g.cpiv[:m], rs, m) {
		return false
	}
	for i := range cv {
		cv[i] = complex(1/rs[i], 0)
	}
	for range 3 {
		cluSolve(ca, g.cpiv[:m], m, cx, cv)
		big := 0.0
		for _, v := range cx {
			big = max(big, abs1(v))
		}
		if !(big > 0 && big <= math.MaxFloat64) {
			return false
		}
		r := complex(1/big, 0)
		for i := range cv {
			cv[i] = cx[i] * r
		}
	}
	return true
}

// logR returns ln|R(z)| for the stability function of the method.
func (s *Solver) logR(z complex128) float64 {
	if s.rad != nil {
		return s.rad.logR(z)
	}
	return rodasLogR(z)
}

// resolve returns the longest step not above h that resolves the growth in
// st: the growth rate of the method is at least 99 % of the true one, and the
// growth in a step is at most exp(limit). Modes
// that cannot grow by e before the end of the run do not matter.
func (s *Solver) resolve(st []blockState, h float64) float64 {
	if s.gd.released {
		return h
	}
	left := math.Abs(s.t1 - s.t)
	for i := range st {
		b := &st[i]
		if b.count == 0 || b.re*left < 1 {
			continue
		}
		if h*b.re > s.limit {
			h = s.limit / b.re
		}
		if b.im == 0 {
			continue
		}
		for range 200 {
			if s.logR(complex(h*b.re, h*b.im)) >= 0.99*h*b.re {
				break
			}
			h *= 0.8
		}
	}
	return h
}

// guardAccept tests the end of an attempted step of length h. It reports
// whether the step resolved what grows there.
func (s *Solver) guardAccept(h float64) bool {
	s.gd.probe = max(s.gd.probe, h)
	s.guardAll(s.gd.end, s.jac1, s.t, s.y1)
	hm := s.resolve(s.gd.end, h)
	if hm < h*(1-1e-9) {
		s.gd.hMax = hm
		return false
	}
	return true
}

// stabilityExcess returns how far a state with Jacobian jac and block states st
// lies beyond a change, since the start of the step, in the number of growing
// modes: positive beyond, negative before.
func (s *Solver) stabilityExcess(jac []float64, st []blockState) float64 {
	g := &s.gd
	sig := s.significance()
	worst := math.Inf(-1)
	for k, b := range g.blocks {
		m := len(b)
		c0 := g.cur[k].count
		var v float64
		if m == 1 {
			v = s.dir*s.entry(jac, b[0], b[0]) - sig
			if c0 == 1 {
				v = -v
			}
		} else if g.detOnly {
			v = st[k].det.over(g.cur[k].det) // the sign follows below
			if st[k].count == c0 {
				v = -v
			}
		} else {
			if !st[k].judged || st[k].base != c0 {
				s.extract(jac, b)
				j := s.spectrum(m, sig, c0, st[k])
				st[k].excess, st[k].base, st[k].judged = j.excess, c0, true
				if !j.judged {
					st[k].excess = -1
				}
			}
			v = st[k].excess
		}
		// Noise may make the two judgements differ; the count decides.
		if (st[k].count != c0) != (v > 0) {
			v = -v
		}
		worst = max(worst, v)
	}
	return worst
}

func (s *Solver) stabilityChanged() bool {
	for k := range s.gd.cur {
		if s.gd.cur[k].count != s.gd.end[k].count {
			return true
		}
	}
	return false
}

// retake takes the step from the same start again with length h > 0.
func (s *Solver) retake(h float64) bool {
	return s.retakeState(h) && s.retakeRest(h)
}

// retakeState is retake as far as the state at the end goes, without f and the
// Jacobian there.
func (s *Solver) retakeState(h float64) bool {
	s.stats.Retaken++
	s.clip = false
	s.ev.stale = true
	if s.attempt(s.dir*h, s.t+s.dir*h) != outcomeOK {
		return false
	}
	s.project()
	return true
}

// retakeRest completes what retakeState has begun.
func (s *Solver) retakeRest(h float64) bool {
	tEnd := s.t + s.dir*h
	if !s.finish(tEnd) {
		s.lastOutcome = outcomeNonFinite
		return false
	}
	if s.gd.on {
		s.guardAll(s.gd.end, s.jac1, tEnd, s.y1)
	}
	return true
}

// locateLoss shortens the attempted step, of length h, to end just after the
// first change in the number of growing modes. It returns the new length.
func (s *Solver) locateLoss(h float64) (float64, outcome) {
	t1 := s.t + s.dir*h
	tol := max(s.gd.locate*max(math.Abs(t1), math.Abs(t1-s.t0)), 2*s.spacing(t1))
	s.gd.hAfter = math.Inf(1)
	if h <= tol {
		return h, outcomeOK
	}
	fa, fb := s.stabilityExcess(s.jac, s.gd.cur), s.stabilityExcess(s.jac1, s.gd.end)
	grows, rate := 0, 0.0
	for k := range s.gd.cur {
		if s.gd.end[k].count > s.gd.cur[k].count {
			grows++
			rate = max(rate, s.gd.end[k].re)
		}
	}
	br := newBracket(0, h, fa, fb, 0.5*tol)
	at := h
	s.gd.signOnly = true
	defer func() { s.gd.signOnly = false }()
	if s.resolvedAll(h) {
		// The dense output follows the modes: find the change on it first.
		for !br.done() {
			x := br.next()
			s.interpTheta(s.interp, s.y, x/h)
			t := s.t + s.dir*x
			s.stats.FuncEvals++
			s.f(s.f1, t, s.interp)
			if !allFinite(s.f1) || !s.evalJac(s.jac1, s.dfdt1, t, s.interp, s.f1) {
				break
			}
			s.guardAll(s.gd.end, s.jac1, t, s.interp)
			br.update(x, s.stabilityExcess(s.jac1, s.gd.end), s.stabilityChanged())
		}
		at = br.b
		if at < h {
			at = min(at+tol, h)
		}
		if !s.retake(at) {
			s.gd.hRetry = 0.5 * at
			return 0, s.lastOutcome
		}
		if s.stabilityChanged() {
			br = newBracket(at, at, 0, 0, 0.5*tol)
		} else {
			br = newBracket(at, h, s.stabilityExcess(s.jac1, s.gd.end), fb, 0.5*tol)
		}
	}
	for !br.done() {
		x := br.next()
		if !s.retake(x) {
			s.gd.hRetry = 0.5 * x
			return 0, s.lastOutcome
		}
		at = x
		br.update(x, s.stabilityExcess(s.jac1, s.gd.end), s.stabilityChanged())
	}
	s.gd.signOnly = false
	if at != br.b {
		if !s.retake(br.b) {
			s.gd.hRetry = 0.5 * br.b
			return 0, s.lastOutcome
		}
	} else if s.gd.detOnly {
		s.guardAll(s.gd.end, s.jac1, s.t+s.dir*at, s.y1)
	}
	if grows > 0 && h > br.b {
		slope := rate / (h - br.b)
		s.gd.hAfter = 1 / math.Sqrt(slope)
	}
	return br.b, outcomeOK
}

// resolvedAll reports whether a step of length h resolves the modes that grow
// at its start or at its end, real and imaginary parts.
func (s *Solver) resolvedAll(h float64) bool {
	for k := range s.gd.cur {
		for _, b := range [...]*blockState{&s.gd.cur[k], &s.gd.end[k]} {
			if b.count > 0 && h*(math.Abs(b.re)+b.im) > 1 {
				return false
			}
		}
	}
	return true
}

// guardCommit makes the states at the end of the accepted step the current
// ones and records losses and returns of stability.
func (s *Solver) guardCommit(h float64) {
	g := &s.gd
	grew := 0.0
	for k := range g.cur {
		if g.end[k].count > 0 {
			grew = max(grew, g.end[k].re)
		}
		s.recordChange(k, g.cur[k], g.end[k])
	}
	g.cur, g.end = g.end, g.cur
	switch {
	case grew == 0:
		g.efolds, g.refRate, g.released = 0, 0, false
	default:
		if g.refRate == 0 || grew > 4*g.refRate {
			g.efolds, g.refRate, g.released = 0, grew, false
		}
		g.efolds += grew * h
		g.released = g.efolds > maxEFolds
	}
}

// guardJump re-examines stability after the state jumped.
func (s *Solver) guardJump() {
	g := &s.gd
	s.guardAll(g.end, s.jac, s.t, s.y)
	for k := range g.cur {
		s.recordChange(k, g.cur[k], g.end[k])
	}
	g.cur, g.end = g.end, g.cur
	g.efolds, g.refRate, g.released = 0, 0, false
	g.known = true
}

// recordChange appends a Loss if the number of growing modes of block k rose
// from that in a to that in b or fell to zero. The Jacobian at the state is in
// s.jac.
func (s *Solver) recordChange(k int, a, b blockState) {
	if b.count <= a.count && !(b.count == 0 && a.count > 0) {
		return
	}
	g := &s.gd
	if len(g.losses) < cap(g.losses) {
		g.losses = g.losses[:len(g.losses)+1]
	} else {
		g.losses = append(g.losses, Loss{})
	}
	l := &g.losses[len(g.losses)-1]
	mode := l.Mode
	if len(mode) != s.n {
		mode = make([]float64, s.n)
	}
	clear(mode)
	*l = Loss{T: s.t, Block: k, Growing: b.count, Regained: b.count == 0, Mode: mode}
	bl := g.blocks[k]
	m := len(bl)
	if m == 1 {
		l.Rate = s.entry(s.jac, bl[0], bl[0])
		mode[bl[0]] = s.atol[bl[0]] + s.rtol*math.Abs(s.y[bl[0]])
		return
	}
	if g.detOnly && s.realMode(l, b) {
		return
	}
	// The mode that just crossed: the one of lowest growth among the growing
	// ones, or the fastest of the stable ones after a return.
	s.extract(s.jac, bl)
	copy(g.b, g.a[:m*m])
	if !eigenvalues(g.b[:m*m], m, g.wr, g.wi) {
		return
	}
	wr, wi := g.wr[:m], g.wi[:m]
	if g.detOnly { // only real modes are meant
		for i := range wr {
			if wi[i] != 0 {
				wr[i] = math.Inf(-1)
			}
		}
	}
	rank := max(b.count-1, 0)
	for i := 1; i < m; i++ {
		for j := i; j > 0 && wr[j] > wr[j-1]; j-- {
			wr[j], wr[j-1] = wr[j-1], wr[j]
			wi[j], wi[j-1] = wi[j-1], wi[j]
		}
	}
	l.Rate = s.dir * wr[rank]
	l.Frequency = math.Abs(wi[rank])
	if !s.eigenvector(m, complex(wr[rank], math.Abs(wi[rank])), false) {
		return
	}
	// Turn the vector so that its largest scaled component is real.
	var big complex128
	for i, v := range g.cv[:m] {
		sc := s.atol[bl[i]] + s.rtol*math.Abs(s.y[bl[i]])
		if z := v / complex(sc, 0); cabs(z) > cabs(big) {
			big = z
		}
	}
	if big == 0 {
		return
	}
	turn := complex(real(big), -imag(big)) / complex(cabs(big), 0)
	sum := 0.0
	for i, v := range g.cv[:m] {
		sc := s.atol[bl[i]] + s.rtol*math.Abs(s.y[bl[i]])
		mode[bl[i]] = real(v * turn)
		sum += sq(mode[bl[i]] / sc)
	}
	sum = math.Sqrt(sum)
	for _, i := range bl {
		mode[i] /= sum
	}
}

// realMode fills in the rate and the mode of l, a change of stability of a
// large whole Jacobian, by inverse iteration from the real axis: from the
// bounds of the growing eigenvalue, or from zero after a return. It reports
// whether the iteration settled.
func (s *Solver) realMode(l *Loss, b blockState) bool {
	g := &s.gd
	n := s.n
	odd := s.oddBand
	if s.band == nil {
		s.extract(s.jac, g.blocks[0])
		odd = s.oddDense
	}
	shift := 0.0
	if b.count > 0 {
		lo, hi := 0.5*b.re, b.re
		if !odd(s.jac, lo) {
			lo = 0
		}
		for range 12 {
			mid := 0.5 * (lo + hi)
			if odd(s.jac, mid) {
				lo = mid
			} else {
				hi = mid
			}
		}
		shift = hi
	}
	if s.band != nil {
		odd(s.jac, shift) // leaves the factors of shift·I − A in gd.b
	} else {
		w := g.b[:n*n]
		for i, v := range g.a[:n*n] {
			w[i] = -v
		}
		for i := 0; i < len(w); i += n + 1 {
			w[i] += shift
		}
		identity(g.cpiv)
		if !luFactor(w, g.cpiv, s.rs, n) {
			return false
		}
	}
	v, x := g.wv[:n], g.wv[n:2*n]
	for i := range v {
		v[i] = 1 / s.rs[i]
	}
	rate, settled := math.NaN(), false
	for try := 0; try < 50 && !settled; try++ {
		if s.band != nil {
			bandSolve(g.b, g.cpiv, n, s.band.Lower, s.band.Upper, x, v)
		} else {
			luSolve(g.b, g.cpiv, n, x, v)
		}
		// v = (shift − λ) x
		num, den, big := 0.0, 0.0, 0.0
		for i, e := range x {
			e *= s.rs[i]
			num += e * v[i] * s.rs[i]
			den += e * e
			if math.Abs(e) > math.Abs(big) {
				big = e
			}
		}
		if !(math.Abs(big) <= math.MaxFloat64) || big == 0 {
			return false
		}
		old := rate
		rate = shift - num/den
		for i, e := range x {
			v[i] = e / big
		}
		settled = math.Abs(rate-old) <= 1e-9*math.Abs(rate)
	}
	if !settled {
		return false
	}
	if b.count > 0 && !(rate > 0) {
		return false
	}
	l.Rate, l.Frequency = s.dir*rate, 0
	sum := 0.0
	for i, e := range v {
		sum += sq(e * s.rs[i])
	}
	sum = math.Sqrt(sum)
	for i, e := range v {
		l.Mode[i] = e / sum
	}
	return true
}

// certainlyStable reports whether no eigenvalue of the m×m matrix a can have a
// positive real part, apart from zero eigenvalues indistinguishable from
// rounding, if the entries of a are uncertain by the relative amount noise. It
// is sufficient, not necessary, and cheap. w is workspace for m² numbers.
func certainlyStable(a, w []float64, m int, noise float64) bool {
	if m <= 4 {
		return smallStable(a, m, noise)
	}
	return comparisonStable(a, w, m) || m <= polyLimit && polyStable(a, w, m, polyNoise*noise)
}

// smallStable is certainlyStable for m from 2 to 4.
func smallStable(a []float64, m int, noise float64) bool {
	var c, b [5]float64
	switch m {
	case 2:
		c[1], b[1] = -(a[0] + a[3]), math.Abs(a[0])+math.Abs(a[3])
		p, q := a[0]*a[3], a[1]*a[2]
		c[2], b[2] = p-q, math.Abs(p)+math.Abs(q)
	case 3:
		minors3((*[9]float64)(a), &c, &b)
	case 4:
		minors4((*[16]float64)(a), &c, &b)
	}
	return hurwitz(&c, &b, m, 8*noise)
}

// polyNoise allows for the growth of errors in the reduction to Hessenberg form.
const polyNoise = 32

// Up to this size the characteristic polynomial may speak for a matrix.
const polyLimit = 8

// polyStable is certainlyStable by the Routh–Hurwitz criterion on the
// characteristic polynomial. This comes from the Hessenberg form by La Budde's
// recurrence (Rehman & Ipsen, "La Budde's method for computing characteristic
// polynomials", arXiv:1104.3769, 2011); the same recurrence on absolute values
// bounds what an uncertainty tol of the entries does to each coefficient.
func polyStable(a, w []float64, m int, tol float64) bool {
	h := w[:m*m]
	copy(h, a)
	hessenberg(h, m)
	// p[k] and q[k]: coefficients of the leading k×k block's polynomial, by
	// rising power, and of the absolute values.
	var p, q [polyLimit + 1][polyLimit + 1]float64
	p[0][0], q[0][0] = 1, 1
	for k := 1; k <= m; k++ {
		d := h[(k-1)*m+k-1]
		pk, qk, pm, qm := &p[k], &q[k], &p[k-1], &q[k-1]
		ad := math.Abs(d)
		for i := range k {
			pk[i] -= d * pm[i]
			qk[i] += ad * qm[i]
			pk[i+1] += pm[i]
			qk[i+1] += qm[i]
		}
		sub := 1.0
		for j := k - 1; j >= 1; j-- {
			sub *= h[j*m+j-1]
			f := h[(j-1)*m+k-1] * sub
			af := math.Abs(f)
			for i := range j {
				pk[i] -= f * p[j-1][i]
				qk[i] += af * q[j-1][i]
			}
		}
	}
	c, b := &p[m], &q[m]
	// Zero eigenvalues, within their uncertainty, are dropped.
	low := 0
	for low < m {
		if !(b[low] > 0x1p-900 || b[low] == 0) || !(b[low] <= 0x1p900) {
			return false
		}
		if math.Abs(c[low]) > tol*b[low] {
			break
		}
		low++
	}
	// Routh's array, of which every entry is positive for a stable polynomial,
	// between bounds.
	var lo, hi [2][polyLimit/2 + 2]float64
	n := m - low
	for i := 0; i <= n; i++ {
		v, e := c[m-i], tol*b[m-i]
		if i == 0 {
			e = 0
		}
		if !(v > e) {
			return false
		}
		lo[i&1][i>>1], hi[i&1][i>>1] = v-e, v+e
	}
	for k := n; k >= 2; k-- { // degree of the row to be replaced
		al, ah, bl, bh := &lo[(n-k)&1], &hi[(n-k)&1], &lo[(n-k+1)&1], &hi[(n-k+1)&1]
		ql, qh := al[0]/bh[0], ah[0]/bl[0]
		width := k/2 + 1
		for j := 0; j+1 < width; j++ {
			al[j], ah[j] = al[j+1]-qh*bh[j+1], ah[j+1]-ql*bl[j+1]
			if !(al[j] > 0) {
				return false
			}
		}
		al[width-1], ah[width-1] = 0, 0
	}
	return true
}

// hurwitz applies the Routh–Hurwitz criterion to λ^m + c1 λ^(m−1) + … + cm,
// where c_k is uncertain by tol·b_k. Trailing coefficients that are zero
// within their uncertainty belong to neutral modes and are dropped.
func hurwitz(c, b *[5]float64, m int, tol float64) bool {
	for m > 0 {
		if !(b[m] > 0x1p-900 || b[m] == 0) || !(b[m] <= 0x1p900) {
			return false
		}
		if math.Abs(c[m]) > tol*b[m] {
			break
		}
		m--
	}
	var lo, hi [5]float64
	for k := 1; k <= m; k++ {
		lo[k], hi[k] = c[k]-tol*b[k], c[k]+tol*b[k]
		if !(lo[k] > 0) {
			return false
		}
	}
	switch m {
	case 0, 1, 2:
		return true
	case 3:
		return lo[1]*lo[2] > hi[3]
	}
	d := lo[1]*lo[2] - hi[3]
	return d > 0 && d*lo[3] > hi[1]*hi[1]*hi[4]
}

// minors3 computes the coefficients of det(λI − A) from principal minors and
// the sums of the absolute values of their terms.
func minors3(a *[9]float64, c, b *[5]float64) {
	abs := math.Abs
	c[1] = -(a[0] + a[4] + a[8])
	b[1] = abs(a[0]) + abs(a[4]) + abs(a[8])
	p01, q01 := a[0]*a[4], a[1]*a[3]
	p02, q02 := a[0]*a[8], a[2]*a[6]
	p12, q12 := a[4]*a[8], a[5]*a[7]
	c[2] = (p01 - q01) + (p02 - q02) + (p12 - q12)
	b[2] = abs(p01) + abs(q01) + abs(p02) + abs(q02) + abs(p12) + abs(q12)
	p10, q10 := a[3]*a[8], a[5]*a[6]
	p11, q11 := a[3]*a[7], a[4]*a[6]
	c[3] = -(a[0]*(p12-q12) - a[1]*(p10-q10) + a[2]*(p11-q11))
	b[3] = abs(a[0])*(abs(p12)+abs(q12)) + abs(a[1])*(abs(p10)+abs(q10)) + abs(a[2])*(abs(p11)+abs(q11))
}

func minors4(a *[16]float64, c, b *[5]float64) {
	abs := math.Abs
	c[1] = -(a[0] + a[5] + a[10] + a[15])
	b[1] = abs(a[0]) + abs(a[5]) + abs(a[10]) + abs(a[15])
	// 2×2 minors of rows (2, 3) for all column pairs, of rows (0, 1) likewise.
	type mn struct{ v, m float64 }
	d := func(p, q float64) mn { return mn{p - q, abs(p) + abs(q)} }
	h01 := d(a[0]*a[5], a[1]*a[4])
	h02 := d(a[0]*a[6], a[2]*a[4])
	h03 := d(a[0]*a[7], a[3]*a[4])
	h12 := d(a[1]*a[6], a[2]*a[5])
	h13 := d(a[1]*a[7], a[3]*a[5])
	h23 := d(a[2]*a[7], a[3]*a[6])
	l01 := d(a[8]*a[13], a[9]*a[12])
	l02 := d(a[8]*a[14], a[10]*a[12])
	l03 := d(a[8]*a[15], a[11]*a[12])
	l12 := d(a[9]*a[14], a[10]*a[13])
	l13 := d(a[9]*a[15], a[11]*a[13])
	l23 := d(a[10]*a[15], a[11]*a[14])
	m02 := d(a[0]*a[10], a[2]*a[8])
	m03 := d(a[0]*a[15], a[3]*a[12])
	m12 := d(a[5]*a[10], a[6]*a[9])
	m13 := d(a[5]*a[15], a[7]*a[13])
	c[2] = h01.v + l23.v + m02.v + m03.v + m12.v + m13.v
	b[2] = h01.m + l23.m + m02.m + m03.m + m12.m + m13.m
	// Principal 3×3 minors: {0,1,2} and {0,1,3} by rows 2 and 3 against rows
	// (0,1); {0,2,3} and {1,2,3} by rows 0 and 1 against rows (2,3).
	c[3] = -(a[8]*h12.v - a[9]*h02.v + a[10]*h01.v +
		a[12]*h13.v - a[13]*h03.v + a[15]*h01.v +
		a[0]*l23.v - a[2]*l03.v + a[3]*l02.v +
		a[5]*l23.v - a[6]*l13.v + a[7]*l12.v)
	b[3] = abs(a[8])*h12.m + abs(a[9])*h02.m + abs(a[10])*h01.m +
		abs(a[12])*h13.m + abs(a[13])*h03.m + abs(a[15])*h01.m +
		abs(a[0])*l23.m + abs(a[2])*l03.m + abs(a[3])*l02.m +
		abs(a[5])*l23.m + abs(a[6])*l13.m + abs(a[7])*l12.m
	c[4] = h01.v*l23.v - h02.v*l13.v + h03.v*l12.v + h12.v*l03.v - h13.v*l02.v + h23.v*l01.v
	b[4] = h01.m*l23.m + h02.m*l13.m + h03.m*l12.m + h12.m*l03.m + h13.m*l02.m + h23.m*l01.m
}

// comparisonStable reports whether the comparison matrix of −A, with −a_ii on
// its diagonal and −|a_ij| off it, is a nonsingular M-matrix: then Gershgorin's
// theorem holds for A in some scaling of the components, and every eigenvalue
// has a negative real part (Berman & Plemmons, Nonnegative Matrices in the
// Mathematical Sciences (1979), ch. 6). w is workspace for m² numbers.
func comparisonStable(a, w []float64, m int) bool {
	for i := range m {
		row, wi := a[i*m:i*m+m], w[i*m:i*m+m]
		for j, v := range row {
			wi[j] = -math.Abs(v)
		}
		if !(row[i] < 0) {
			return false
		}
	}
	for i := range m {
		w[i*m+i] = math.Abs(a[i*m+i])
	}
	// Elimination without interchanges meets positive pivots only.
	for k := range m {
		d := w[k*m+k]
		if !(d > 1e-12*math.Abs(a[k*m+k])) {
			return false
		}
		uk := w[k*m+k+1 : k*m+m]
		for i := k + 1; i < m; i++ {
			l := w[i*m+k]
			if l == 0 {
				continue
			}
			l /= d
			wi := w[i*m+k+1 : i*m+m]
			for j, u := range uk {
				wi[j] -= l * u
			}
		}
	}
	return true
}
