package ode

import "math"

// eigenvalues overwrites the m×m row-major matrix a and writes the real and
// imaginary parts of its eigenvalues to wr and wi. It balances, reduces to
// Hessenberg form by elimination and applies the double-shift QR iteration
// (EISPACK balanc, elmhes, hqr; Wilkinson & Reinsch, Handbook for Automatic
// Computation II, 1971). It reports whether the iteration converged.
func eigenvalues(a []float64, m int, wr, wi []float64) bool {
	switch m {
	case 1:
		wr[0], wi[0] = a[0], 0
		return !math.IsNaN(a[0] - a[0])
	case 2:
		eigen2(a[0], a[1], a[2], a[3], wr, wi)
		return !math.IsNaN(wr[0]+wr[1]) && !math.IsInf(wr[0]+wr[1], 0)
	}
	balance(a, m)
	hessenberg(a, m)
	return hqr(a, m, wr, wi)
}

// eigen2 gives the eigenvalues of [[a, b], [c, d]], the small one of a real
// pair without cancellation.
func eigen2(a, b, c, d float64, wr, wi []float64) {
	p := 0.5 * (a - d)
	bc := b * c
	q := p*p + bc
	mid := 0.5 * (a + d)
	if q < 0 {
		z := math.Sqrt(-q)
		wr[0], wr[1] = mid, mid
		wi[0], wi[1] = z, -z
		return
	}
	z := math.Sqrt(q)
	l1 := mid + math.Copysign(z, mid)
	l2 := mid - math.Copysign(z, mid)
	if l1 != 0 {
		if det := a*d - bc; !math.IsInf(det, 0) && det/l1 == det/l1 {
			l2 = det / l1
		}
	}
	wr[0], wr[1] = l1, l2
	wi[0], wi[1] = 0, 0
}

// balance scales rows and columns by powers of two until their sums agree.
func balance(a []float64, m int) {
	for sweep := 0; sweep < 100; sweep++ {
		done := true
		for i := range m {
			r, c := 0.0, 0.0
			for j := range m {
				if j != i {
					c += math.Abs(a[j*m+i])
					r += math.Abs(a[i*m+j])
				}
			}
			if c == 0 || r == 0 || math.IsInf(c+r, 0) {
				continue
			}
			g, f, s := r/2, 1.0, c+r
			for c < g && f < 0x1p500 {
				f *= 2
				c *= 4
			}
			g = r * 2
			for c > g && f > 0x1p-500 {
				f /= 2
				c /= 4
			}
			if (c+r)/f < 0.95*s && f != 1 {
				done = false
				g = 1 / f
				for j := range m {
					a[i*m+j] *= g
				}
				for j := range m {
					a[j*m+i] *= f
				}
			}
		}
		if done {
			return
		}
	}
}

func hessenberg(a []float64, m int) {
	for k := 1; k < m-1; k++ {
		x, p := 0.0, k
		for j := k; j < m; j++ {
			if math.Abs(a[j*m+k-1]) > math.Abs(x) {
				x, p = a[j*m+k-1], j
			}
		}
		if p != k {
			for j := k - 1; j < m; j++ {
				a[p*m+j], a[k*m+j] = a[k*m+j], a[p*m+j]
			}
			for j := range m {
				a[j*m+p], a[j*m+k] = a[j*m+k], a[j*m+p]
			}
		}
		if x == 0 {
			continue
		}
		for i := k + 1; i < m; i++ {
			y := a[i*m+k-1]
			if y == 0 {
				continue
			}
			y /= x
			a[i*m+k-1] = 0
			ri, rk := a[i*m:i*m+m], a[k*m:k*m+m]
			for j := k; j < len(ri) && j < len(rk); j++ {
				ri[j] -= y * rk[j]
			}
			for j := 0; j < len(a); j += m {
				row := a[j : j+m]
				row[k] += y * row[i]
			}
		}
	}
	for i := 2; i < m; i++ {
		for j := 0; j < i-1; j++ {
			a[i*m+j] = 0
		}
	}
}

func hqr(a []float64, m int, wr, wi []float64) bool {
	at := func(i, j int) *float64 { return &a[i*m+j] }
	norm := 0.0
	for i := range m {
		for j := max(i-1, 0); j < m; j++ {
			norm += math.Abs(*at(i, j))
		}
	}
	if math.IsNaN(norm - norm) {
		return false
	}
	if norm == 0 {
		clear(wr[:m])
		clear(wi[:m])
		return true
	}
	nn, t := m-1, 0.0
	for nn >= 0 {
		for its := 0; ; its++ {
			l := nn
			for ; l > 0; l-- {
				s := math.Abs(*at(l-1, l-1)) + math.Abs(*at(l, l))
				if s == 0 {
					s = norm
				}
				if math.Abs(*at(l, l-1)) <= 0.5*eps*s {
					*at(l, l-1) = 0
					break
				}
			}
			x := *at(nn, nn)
			if l == nn {
				wr[nn], wi[nn] = x+t, 0
				nn--
				break
			}
			y, w := *at(nn-1, nn-1), *at(nn, nn-1)**at(nn-1, nn)
			if l == nn-1 {
				p := 0.5 * (y - x)
				q := p*p + w
				z := math.Sqrt(math.Abs(q))
				x += t
				if q >= 0 {
					z = p + math.Copysign(z, p)
					wr[nn-1], wr[nn] = x+z, x+z
					if z != 0 {
						wr[nn] = x - w/z
					}
					wi[nn-1], wi[nn] = 0, 0
				} else {
					wr[nn-1], wr[nn] = x+p, x+p
					wi[nn-1], wi[nn] = z, -z
				}
				nn -= 2
				break
			}
			if its == 60 {
				return false
			}
			if its%10 == 0 && its > 0 {
				t += x
				for i := 0; i <= nn; i++ {
					*at(i, i) -= x
				}
				s := math.Abs(*at(nn, nn-1)) + math.Abs(*at(nn-1, nn-2))
				x = 0.75 * s
				y = x
				w = -0.4375 * s * s
			}
			var p, q, r float64
			k := nn - 2
			for ; k >= l; k-- {
				z := *at(k, k)
				rr, ss := x-z, y-z
				p = (rr*ss-w)/(*at(k+1, k)) + *at(k, k+1)
				q = *at(k+1, k+1) - z - rr - ss
				r = *at(k+2, k+1)
				s := math.Abs(p) + math.Abs(q) + math.Abs(r)
				p, q, r = p/s, q/s, r/s
				if k == l {
					break
				}
				u := math.Abs(*at(k, k-1)) * (math.Abs(q) + math.Abs(r))
				v := math.Abs(p) * (math.Abs(*at(k-1, k-1)) + math.Abs(z) + math.Abs(*at(k+1, k+1)))
				if u <= 0.5*eps*v {
					break
				}
			}
			for i := k + 2; i <= nn; i++ {
				*at(i, i-2) = 0
				if i != k+2 {
					*at(i, i-3) = 0
				}
			}
			for kk := k; kk <= nn-1; kk++ {
				if kk != k {
					p, q, r = *at(kk, kk-1), *at(kk+1, kk-1), 0
					if kk != nn-1 {
						r = *at(kk+2, kk-1)
					}
					x = math.Abs(p) + math.Abs(q) + math.Abs(r)
					if x != 0 {
						p, q, r = p/x, q/x, r/x
					}
				}
				s := math.Copysign(math.Sqrt(p*p+q*q+r*r), p)
				if s == 0 {
					continue
				}
				if kk == k {
					if l != k {
						*at(kk, kk-1) = -*at(kk, kk-1)
					}
				} else {
					*at(kk, kk-1) = -s * x
				}
				p += s
				x, y = p/s, q/s
				z := r / s
				q /= p
				r /= p
				r0, r1 := a[kk*m:kk*m+nn+1], a[(kk+1)*m:(kk+1)*m+nn+1]
				mm := min(nn, kk+3)
				if kk == nn-1 {
					for j := kk; j < len(r0) && j < len(r1); j++ {
						p = r0[j] + q*r1[j]
						r1[j] -= p * y
						r0[j] -= p * x
					}
					for i := l; i <= mm; i++ {
						c := (*[2]float64)(a[i*m+kk:])
						p = x*c[0] + y*c[1]
						c[1] -= p * q
						c[0] -= p
					}
					continue
				}
				r2 := a[(kk+2)*m : (kk+2)*m+nn+1]
				for j := kk; j < len(r0) && j < len(r1) && j < len(r2); j++ {
					p = r0[j] + q*r1[j] + r*r2[j]
					r2[j] -= p * z
					r1[j] -= p * y
					r0[j] -= p * x
				}
				for i := l; i <= mm; i++ {
					c := (*[3]float64)(a[i*m+kk:])
					p = x*c[0] + y*c[1] + z*c[2]
					c[2] -= p * r
					c[1] -= p * q
					c[0] -= p
				}
			}
		}
	}
	return true
}
