package ode

import "math"

// bandFactor replaces the banded matrix a by its LU factors. Row i holds columns
// i−kl … i+ku+kl; the last kl of them are zero on entry and take the fill of
// the interchanges. Pivots are chosen as in luFactor; piv[k] is the row
// exchanged with row k. The diagonal of U is stored inverted.
func bandFactor(a []float64, piv []int, rs []float64, n, kl, ku int) bool {
	w := 2*kl + ku + 1
	start := 0
	if kl == 2 && ku == 2 {
		if start = factorPenta(a, piv, rs, n); start < 0 {
			return false
		}
	}
	for k := start; k < n; k++ {
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
	if kl == 2 && ku == 2 && n >= 3 {
		solvePenta(a, piv, n, x, b)
		return
	}
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

// fillBand writes c·I − sign·J to w, in the form that bandFactor takes, for the
// banded Jacobian jac.
func fillBand(w, jac []float64, n, kl, ku int, sign, c float64) {
	if kl == 2 && ku == 2 {
		for i := range n {
			row, v := (*[7]float64)(w[i*7:]), (*[5]float64)(jac[i*5:])
			row[0], row[1], row[2], row[3], row[4] = -sign*v[0], -sign*v[1], c-sign*v[2], -sign*v[3], -sign*v[4]
			row[5], row[6] = 0, 0
		}
		return
	}
	width, jw := 2*kl+ku+1, kl+ku+1
	for i := range n {
		row := w[i*width : i*width+width]
		for j, v := range jac[i*jw : i*jw+jw] {
			row[j] = -sign * v
		}
		clear(row[jw:])
		row[kl] += c
	}
}

// factorPenta is bandFactor for two diagonals on each side, up to the last
// rows. It returns the column where it stopped, or -1 for an unusable pivot.
func factorPenta(a []float64, piv []int, rs []float64, n int) int {
	k := 0
	for ; k+6 < n; k++ {
		r0 := (*[21]float64)(a[k*7:]) // rows k, k+1, k+2
		p0, p1, p2 := r0[2], r0[8], r0[14]
		at, best := k, math.Abs(p0)*rs[k]
		if v := math.Abs(p1) * rs[k+1]; v > best {
			at, best = k+1, v
		}
		if v := math.Abs(p2) * rs[k+2]; v > best {
			at = k + 2
		}
		piv[k] = at
		switch at - k {
		case 1:
			p0, p1 = p1, p0
			r0[3], r0[9] = r0[9], r0[3]
			r0[4], r0[10] = r0[10], r0[4]
			r0[5], r0[11] = r0[11], r0[5]
			r0[6], r0[12] = r0[12], r0[6]
		case 2:
			p0, p2 = p2, p0
			r0[3], r0[15] = r0[15], r0[3]
			r0[4], r0[16] = r0[16], r0[4]
			r0[5], r0[17] = r0[17], r0[5]
			r0[6], r0[18] = r0[18], r0[6]
		}
		r := 1 / p0
		if z := math.Abs(r); !(z <= math.MaxFloat64) || z == 0 {
			return -1
		}
		u1, u2, u3, u4 := r0[3], r0[4], r0[5], r0[6]
		l1, l2 := p1*r, p2*r
		r0[2], r0[8], r0[14] = r, l1, l2
		r0[9] -= l1 * u1
		r0[10] -= l1 * u2
		r0[11] -= l1 * u3
		r0[12] -= l1 * u4
		r0[15] -= l2 * u1
		r0[16] -= l2 * u2
		r0[17] -= l2 * u3
		r0[18] -= l2 * u4
	}
	return k
}

// solvePenta is bandSolve or cbandSolve for two diagonals on each side and
// n ≥ 3.
func solvePenta[T float64 | complex128](a []T, piv []int, n int, x, b []T) {
	piv, x, b = piv[:n], x[:n], b[:n]
	x0, x1, x2 := b[0], b[1], b[2]
	for k := range n - 2 {
		switch piv[k] - k {
		case 1:
			x0, x1 = x1, x0
		case 2:
			x0, x2 = x2, x0
		}
		r := (*[8]T)(a[k*7+7:]) // row k+1 and the first of row k+2
		x[k] = x0
		x0, x1 = x1-r[1]*x0, x2-r[7]*x0
		if k+3 < n {
			x2 = b[k+3]
		}
	}
	if piv[n-2] == n-1 {
		x0, x1 = x1, x0
	}
	x1 -= a[(n-1)*7+1] * x0
	y1 := x1 * a[(n-1)*7+2]
	x[n-1] = y1
	r := a[(n-2)*7:]
	y0 := (x0 - r[3]*y1) * r[2]
	x[n-2] = y0
	y2 := y1
	y1 = y0
	var y3, y4 T
	for k := n - 3; k >= 0; k-- {
		r := (*[7]T)(a[k*7:])
		v := (x[k] - r[6]*y4 - r[5]*y3 - r[4]*y2 - r[3]*y1) * r[2]
		x[k] = v
		y1, y2, y3, y4 = v, y1, y2, y3
	}
}

// cbandFactor replaces the banded matrix a by its LU factors. Row i holds columns
// i−kl … i+ku+kl; the last kl of them are zero on entry and take the fill of
// the interchanges. Pivots are chosen as in luFactor; piv[k] is the row
// exchanged with row k. The diagonal of U is stored inverted.
func cbandFactor(a []complex128, piv []int, rs []float64, n, kl, ku int) bool {
	w := 2*kl + ku + 1
	start := 0
	if kl == 2 && ku == 2 {
		if start = cfactorPenta(a, piv, rs, n); start < 0 {
			return false
		}
	}
	for k := start; k < n; k++ {
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

// cfactorPenta is cbandFactor for two diagonals on each side, up to the last
// rows. It returns the column where it stopped, or -1 for an unusable pivot.
func cfactorPenta(a []complex128, piv []int, rs []float64, n int) int {
	k := 0
	for ; k+6 < n; k++ {
		r0 := (*[21]complex128)(a[k*7:]) // rows k, k+1, k+2
		p0, p1, p2 := r0[2], r0[8], r0[14]
		at, best := k, abs1(p0)*rs[k]
		if v := abs1(p1) * rs[k+1]; v > best {
			at, best = k+1, v
		}
		if v := abs1(p2) * rs[k+2]; v > best {
			at = k + 2
		}
		piv[k] = at
		switch at - k {
		case 1:
			p0, p1 = p1, p0
			r0[3], r0[9] = r0[9], r0[3]
			r0[4], r0[10] = r0[10], r0[4]
			r0[5], r0[11] = r0[11], r0[5]
			r0[6], r0[12] = r0[12], r0[6]
		case 2:
			p0, p2 = p2, p0
			r0[3], r0[15] = r0[15], r0[3]
			r0[4], r0[16] = r0[16], r0[4]
			r0[5], r0[17] = r0[17], r0[5]
			r0[6], r0[18] = r0[18], r0[6]
		}
		r := cinv(p0)
		if z := abs1(r); !(z <= math.MaxFloat64) || z == 0 {
			return -1
		}
		u1, u2, u3, u4 := r0[3], r0[4], r0[5], r0[6]
		l1, l2 := p1*r, p2*r
		r0[2], r0[8], r0[14] = r, l1, l2
		r0[9] -= l1 * u1
		r0[10] -= l1 * u2
		r0[11] -= l1 * u3
		r0[12] -= l1 * u4
		r0[15] -= l2 * u1
		r0[16] -= l2 * u2
		r0[17] -= l2 * u3
		r0[18] -= l2 * u4
	}
	return k
}

// cbandSolve solves with the factors of cbandFactor.
func cbandSolve(a []complex128, piv []int, n, kl, ku int, x, b []complex128) {
	w := 2*kl + ku + 1
	if kl == 2 && ku == 2 && n >= 3 {
		solvePenta(a, piv, n, x, b)
		return
	}
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
