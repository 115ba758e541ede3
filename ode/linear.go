package ode

import (
	"gonum.org/v1/gonum/blas/blas64"
	"gonum.org/v1/gonum/lapack/lapack64"
)

// From this size on the dense factorisation is gonum's blocked one.
const blockedFrom = 16

// factorShifted forms and factors W = c·I − J.
func (s *Solver) factorShifted(c float64) outcome {
	n, w := s.n, s.w
	s.stats.Factorizations++
	if s.band != nil {
		kl, ku := s.band.Lower, s.band.Upper
		fillBand(w, s.jac, n, kl, ku, 1, c)
		if !bandFactor(w, s.piv, s.rs, n, kl, ku) {
			return outcomeSingular
		}
		return outcomeOK
	}
	for i, v := range s.jac {
		w[i] = -v
	}
	for i := 0; i < len(w); i += n + 1 {
		w[i] += c
	}
	switch n {
	case 2:
		if !factor2((*[4]float64)(w), (*[2]int)(s.piv), (*[2]float64)(s.rs)) {
			return outcomeSingular
		}
		return outcomeOK
	case 3:
		if !factor3((*[9]float64)(w), (*[3]int)(s.piv), (*[3]float64)(s.rs)) {
			return outcomeSingular
		}
		return outcomeOK
	case 4:
		if !factor4((*[16]float64)(w), (*[4]int)(s.piv), (*[4]float64)(s.rs)) {
			return outcomeSingular
		}
		return outcomeOK
	}
	if n < blockedFrom {
		identity(s.piv)
		if !luFactor(w, s.piv, s.rs, n) {
			return outcomeSingular
		}
		return outcomeOK
	}
	// Getrf does not scale, so the rows are scaled here and again in solve.
	copy(s.rsFac, s.rs)
	for i := range n {
		r := s.rsFac[i]
		row := w[i*n : i*n+n]
		for j := range row {
			row[j] *= r
		}
	}
	if !lapack64.Getrf(blas64.General{Rows: n, Cols: n, Data: w, Stride: n}, s.ipiv) {
		return outcomeSingular
	}
	identity(s.piv)
	for i, p := range s.ipiv {
		s.piv[i], s.piv[p] = s.piv[p], s.piv[i]
	}
	for i := 0; i < len(w); i += n + 1 {
		r := 1 / w[i]
		if r-r != 0 {
			return outcomeSingular
		}
		w[i] = r
	}
	return outcomeOK
}

// solve solves W x = b; x and b may not overlap.
func (s *Solver) solve(x, b []float64) {
	s.stats.Solves++
	if s.band != nil {
		bandSolve(s.w, s.piv, s.n, s.band.Lower, s.band.Upper, x, b)
		return
	}
	switch s.n {
	case 1:
		x[0] = b[0] * s.w[0]
		return
	case 2:
		solve2((*[4]float64)(s.w), (*[2]int)(s.piv), (*[2]float64)(x), (*[2]float64)(b))
		return
	case 3:
		solve3((*[9]float64)(s.w), (*[3]int)(s.piv), (*[3]float64)(x), (*[3]float64)(b))
		return
	case 4:
		solve4((*[16]float64)(s.w), (*[4]int)(s.piv), (*[4]float64)(x), (*[4]float64)(b))
		return
	case 5:
		solve5((*[25]float64)(s.w), (*[5]int)(s.piv), (*[5]float64)(x), (*[5]float64)(b))
		return
	case 6:
		solve6((*[36]float64)(s.w), (*[6]int)(s.piv), (*[6]float64)(x), (*[6]float64)(b))
		return
	case 7:
		solve7((*[49]float64)(s.w), (*[7]int)(s.piv), (*[7]float64)(x), (*[7]float64)(b))
		return
	case 8:
		solve8((*[64]float64)(s.w), (*[8]int)(s.piv), (*[8]float64)(x), (*[8]float64)(b))
		return
	}
	if s.n >= blockedFrom {
		for i, v := range b {
			s.scaled[i] = v * s.rsFac[i]
		}
		b = s.scaled
	}
	luSolve(s.w, s.piv, s.n, x, b)
}

// csystem is one factored complex system μ·I − J.
type csystem struct {
	a    []complex128
	piv  []int
	n    int
	band *Band
}

func (l *csystem) init(n int, b *Band) {
	l.n, l.band = n, b
	l.piv = make([]int, n)
	if b != nil {
		l.a = make([]complex128, n*(2*b.Lower+b.Upper+1))
		return
	}
	l.a = make([]complex128, n*n)
}

func (l *csystem) factor(s *Solver, mu complex128) bool {
	n := l.n
	if l.band != nil {
		kl, ku := l.band.Lower, l.band.Upper
		width, jw := 2*kl+ku+1, kl+ku+1
		for i := range n {
			row := l.a[i*width : i*width+width]
			for j, v := range s.jac[i*jw : i*jw+jw] {
				row[j] = complex(-v, 0)
			}
			clear(row[jw:])
			row[kl] += mu
		}
		return cbandFactor(l.a, l.piv, s.rs, n, kl, ku)
	}
	for i, v := range s.jac {
		l.a[i] = complex(-v, 0)
	}
	for i := 0; i < len(l.a); i += n + 1 {
		l.a[i] += mu
	}
	identity(l.piv)
	return cluFactor(l.a, l.piv, s.rs, n)
}

func (l *csystem) solve(x, b []complex128) {
	if l.band != nil {
		cbandSolve(l.a, l.piv, l.n, l.band.Lower, l.band.Upper, x, b)
		return
	}
	cluSolve(l.a, l.piv, l.n, x, b)
}
