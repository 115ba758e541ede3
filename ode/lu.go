package ode

import "math"

// luFactor replaces the n×n row-major matrix a by its LU factors with row
// interchanges in piv. The pivot of a column is the entry largest after
// multiplication by the row scale rs, so that units of the components do not
// matter. The diagonal of U is stored inverted. It reports whether every pivot
// was usable.
func luFactor(a []float64, piv []int, rs []float64, n int) bool {
	for k := 0; k < n; k++ {
		p, best := k, math.Abs(a[k*n+k])*rs[piv[k]]
		for i := k + 1; i < n; i++ {
			if v := math.Abs(a[i*n+k]) * rs[piv[i]]; v > best {
				p, best = i, v
			}
		}
		rowk := a[k*n : k*n+n]
		if p != k {
			rowp := a[p*n : p*n+n]
			for j := range rowk {
				rowk[j], rowp[j] = rowp[j], rowk[j]
			}
			piv[k], piv[p] = piv[p], piv[k]
		}
		r := 1 / rowk[k]
		if !(math.Abs(r) <= math.MaxFloat64) || r == 0 {
			return false
		}
		rowk[k] = r
		uk := rowk[k+1:]
		for i := k + 1; i < n; i++ {
			rowi := a[i*n : i*n+n]
			l := rowi[k]
			if l == 0 {
				continue
			}
			l *= r
			rowi[k] = l
			ri := rowi[k+1:]
			ri = ri[:len(uk)]
			for j, u := range uk {
				ri[j] -= l * u
			}
		}
	}
	return true
}

// luSolve solves with the factors of luFactor: x = A⁻¹ b. x and b may not
// overlap.
func luSolve(a []float64, piv []int, n int, x, b []float64) {
	for i := 0; i < n; i++ {
		row := a[i*n : i*n+i]
		v := b[piv[i]]
		for j, l := range row {
			v -= l * x[j]
		}
		x[i] = v
	}
	for i := n - 1; i >= 0; i-- {
		row := a[i*n : i*n+n]
		v := x[i]
		for j := i + 1; j < n; j++ {
			v -= row[j] * x[j]
		}
		x[i] = v * row[i]
	}
}

// luSolveT solves Aᵀ x = b with the factors of luFactor. It overwrites b.
func luSolveT(a []float64, piv []int, n int, x, b []float64) {
	for i := 0; i < n; i++ {
		row := a[i*n : i*n+n]
		v := b[i] * row[i]
		b[i] = v
		for j := i + 1; j < n; j++ {
			b[j] -= row[j] * v
		}
	}
	for i := n - 1; i >= 0; i-- {
		v := b[i]
		for j, l := range a[i*n : i*n+i] {
			b[j] -= l * v
		}
		x[piv[i]] = v
	}
}

// cluFactor is luFactor for complex matrices. It assumes a well-scaled matrix.
func cluFactor(a []complex128, piv []int, rs []float64, n int) bool {
	for k := 0; k < n; k++ {
		p, best := k, abs1(a[k*n+k])*rs[piv[k]]
		for i := k + 1; i < n; i++ {
			if v := abs1(a[i*n+k]) * rs[piv[i]]; v > best {
				p, best = i, v
			}
		}
		rowk := a[k*n : k*n+n]
		if p != k {
			rowp := a[p*n : p*n+n]
			for j := range rowk {
				rowk[j], rowp[j] = rowp[j], rowk[j]
			}
			piv[k], piv[p] = piv[p], piv[k]
		}
		r := cinv(rowk[k])
		if m := abs1(r); !(m <= math.MaxFloat64) || m == 0 {
			return false
		}
		rowk[k] = r
		uk := rowk[k+1:]
		for i := k + 1; i < n; i++ {
			rowi := a[i*n : i*n+n]
			l := rowi[k]
			if l == 0 {
				continue
			}
			l *= r
			rowi[k] = l
			ri := rowi[k+1:]
			ri = ri[:len(uk)]
			for j, u := range uk {
				ri[j] -= l * u
			}
		}
	}
	return true
}

func cluSolve(a []complex128, piv []int, n int, x, b []complex128) {
	for i := 0; i < n; i++ {
		row := a[i*n : i*n+i]
		v := b[piv[i]]
		for j, l := range row {
			v -= l * x[j]
		}
		x[i] = v
	}
	for i := n - 1; i >= 0; i-- {
		row := a[i*n : i*n+n]
		v := x[i]
		for j := i + 1; j < n; j++ {
			v -= row[j] * x[j]
		}
		x[i] = v * row[i]
	}
}

func abs1(z complex128) float64 { return math.Abs(real(z)) + math.Abs(imag(z)) }

// cinv returns 1/z without the slow paths of complex division.
func cinv(z complex128) complex128 {
	re, im := real(z), imag(z)
	if math.Abs(re) >= math.Abs(im) {
		q := im / re
		d := 1 / (re + im*q)
		return complex(d, -q*d)
	}
	q := re / im
	d := 1 / (re*q + im)
	return complex(q*d, -d)
}

// identity resets piv to the identity permutation.
func identity(piv []int) {
	for i := range piv {
		piv[i] = i
	}
}
