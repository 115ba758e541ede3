package ode

import "math"

// bracket shrinks an interval [a, b] around a sign change by the ITP method
// (Oliveira & Takahashi, ACM Trans. Math. Software 47 (2021) 5): superlinear
// on smooth functions, never more than one evaluation worse than bisection.
type bracket struct {
	a, b, fa, fb float64 // fa < 0 ≤ fb in the sense of update
	tol          float64 // half the final width
	k1           float64
	left         int // bisections still allowed by the bound
}

func newBracket(a, b, fa, fb, tol float64) bracket {
	n := 1
	for w := b - a; w > 2*tol && n < 1100; w *= 0.5 {
		n++
	}
	return bracket{a: a, b: b, fa: fa, fb: fb, tol: tol, k1: 0.2 / (b - a), left: n}
}

func (r *bracket) done() bool {
	mid := 0.5 * (r.a + r.b)
	return r.b-r.a <= 2*r.tol || mid <= r.a || mid >= r.b
}

// next proposes a point strictly inside.
func (r *bracket) next() float64 {
	mid := 0.5 * (r.a + r.b)
	rad := math.Ldexp(r.tol, r.left) - 0.5*(r.b-r.a)
	r.left--
	xf := (r.fb*r.a - r.fa*r.b) / (r.fb - r.fa)
	if !(xf >= r.a && xf <= r.b) {
		return mid
	}
	sg := math.Copysign(1, mid-xf)
	d := r.k1 * sq(r.b-r.a)
	xt := mid
	if d <= math.Abs(mid-xf) {
		xt = xf + sg*d
	}
	if math.Abs(xt-mid) > rad {
		if !(rad > 0) {
			return mid
		}
		xt = mid - sg*rad
	}
	// Probe just beside an end that the estimate hits, to move the other.
	if xt-r.a < r.tol {
		xt = min(r.a+r.tol, mid)
	}
	if r.b-xt < r.tol {
		xt = max(r.b-r.tol, mid)
	}
	if !(xt > r.a && xt < r.b) {
		return mid
	}
	return xt
}

// update takes the value f at x; beyond says on which side of the change x is.
func (r *bracket) update(x, f float64, beyond bool) {
	if beyond {
		r.b, r.fb = x, f
	} else {
		r.a, r.fa = x, f
	}
}
