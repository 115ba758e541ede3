package ode

import "math"

// bandFactor replaces the banded matrix a by its LU factors. Row i holds columns
// i−kl … i+ku+kl; the last kl of them are zero on entry and take the fill of
// the interchanges. Pivots are chosen as in luFactor; piv[k] is the row
// exchanged with row k. The diagonal of U is stored inverted.
func bandFactor(a []float64, piv []int, rs []float64, n, kl, ku int) bool {
	w := 2*kl + ku + 1
	for k := 0; k < n; k++ {
		last := min(k+kl, n-1)
		p, best := k, math.Abs(a[k*w+kl])*rs[k]
		for i := k + 1; i <= last; i++ {
			if v := math.Abs(a[i*w+k-i+kl]) * rs[i]; v > best {
				p, best = i, v
			}
		}
		piv[k] = p
		m := min(kl+ku, n-1-k) + 1 // columns k … k+kl+ku
		rowk := a[k*w+kl : k*w+kl+m]
		if p != k {
			rowp := a[p*w+k-p+kl:]
			rowp = rowp[:m]
			for j := range rowk {
				rowk[j], rowp[j] = rowp[j], rowk[j]
			}
		}
		r := 1 / rowk[0]
		if z := math.Abs(r); !(z <= math.MaxFloat64) || z == 0 {
			return false
		}
		rowk[0] = r
		uk := rowk[1:]
		for i := k + 1; i <= last; i++ {
			at := i*w + k - i + kl
			l := a[at]
			if l == 0 {
				continue
			}
			l *= r
			a[at] = l
			ri := a[at+1:]
			ri = ri[:len(uk)]
			for j, u := range uk {
				ri[j] -= l * u
			}
		}
	}
	return true
}

// bandSolve solves with the factors of bandFactor.
func bandSolve(a []float64, piv []int, n, kl, ku int, x, b []float64) {
	w := 2*kl + ku + 1
	copy(x, b)
	for k := 0; k < n; k++ {
		if p := piv[k]; p != k {
			x[k], x[p] = x[p], x[k]
		}
		v := x[k]
		for i := k + 1; i <= min(k+kl, n-1); i++ {
			x[i] -= a[i*w+k-i+kl] * v
		}
	}
	for k := n - 1; k >= 0; k-- {
		m := min(kl+ku, n-1-k) + 1
		row := a[k*w+kl : k*w+kl+m]
		xs := x[k : k+m]
		v := xs[0]
		for j := 1; j < len(row); j++ {
			v -= row[j] * xs[j]
		}
		xs[0] = v * row[0]
	}
}

// cbandFactor replaces the banded matrix a by its LU factors. Row i holds columns
// i−kl … i+ku+kl; the last kl of them are zero on entry and take the fill of
// the interchanges. Pivots are chosen as in luFactor; piv[k] is the row
// exchanged with row k. The diagonal of U is stored inverted.
func cbandFactor(a []complex128, piv []int, rs []float64, n, kl, ku int) bool {
	w := 2*kl + ku + 1
	for k := 0; k < n; k++ {
		last := min(k+kl, n-1)
		p, best := k, abs1(a[k*w+kl])*rs[k]
		for i := k + 1; i <= last; i++ {
			if v := abs1(a[i*w+k-i+kl]) * rs[i]; v > best {
				p, best = i, v
			}
		}
		piv[k] = p
		m := min(kl+ku, n-1-k) + 1 // columns k … k+kl+ku
		rowk := a[k*w+kl : k*w+kl+m]
		if p != k {
			rowp := a[p*w+k-p+kl:]
			rowp = rowp[:m]
			for j := range rowk {
				rowk[j], rowp[j] = rowp[j], rowk[j]
			}
		}
		r := cinv(rowk[0])
		if z := abs1(r); !(z <= math.MaxFloat64) || z == 0 {
			return false
		}
		rowk[0] = r
		uk := rowk[1:]
		for i := k + 1; i <= last; i++ {
			at := i*w + k - i + kl
			l := a[at]
			if l == 0 {
				continue
			}
			l *= r
			a[at] = l
			ri := a[at+1:]
			ri = ri[:len(uk)]
			for j, u := range uk {
				ri[j] -= l * u
			}
		}
	}
	return true
}

// cbandSolve solves with the factors of cbandFactor.
func cbandSolve(a []complex128, piv []int, n, kl, ku int, x, b []complex128) {
	w := 2*kl + ku + 1
	copy(x, b)
	for k := 0; k < n; k++ {
		if p := piv[k]; p != k {
			x[k], x[p] = x[p], x[k]
		}
		v := x[k]
		for i := k + 1; i <= min(k+kl, n-1); i++ {
			x[i] -= a[i*w+k-i+kl] * v
		}
	}
	for k := n - 1; k >= 0; k-- {
		m := min(kl+ku, n-1-k) + 1
		row := a[k*w+kl : k*w+kl+m]
		xs := x[k : k+m]
		v := xs[0]
		for j := 1; j < len(row); j++ {
			v -= row[j] * xs[j]
		}
		xs[0] = v * row[0]
	}
}
