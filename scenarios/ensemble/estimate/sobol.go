package estimate

import (
	"math"
	"slices"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/stat"
	"gonum.org/v1/gonum/stat/distuv"
)

// Index is an estimate with a 95 % interval.
type Index struct{ Value, Low, High float64 }

var missing = Index{math.NaN(), math.NaN(), math.NaN()}

// Freeze is the output of a pick-and-freeze design: f at the points A and B, and
// at A with input i taken from B.
type Freeze struct {
	A, B []float64
	AB   [][]float64 // by input
}

// Indices estimates the first-order index of every input (Saltelli et al. 2010,
// table 2 b) and its total index (Jansen 1999):
//
//	S_i = Σ (f(B) − m)(f(AB_i) − f(A))/(n V),  T_i = Σ (f(A) − f(AB_i))²/(2 n V)
//
// with the mean m and the variance V of all f(A) and f(B). Intervals come from
// resampled base points (Archer et al. 1997), bias-corrected and accelerated
// (Efron 1987): intn(n) must give an independent uniform number below n; resamples
// is their number. Indices of a constant are NaN.
func (f *Freeze) Indices(resamples int, intn func(n int) int) (first, total []Index) {
	n, k := len(f.A), len(f.AB)
	first, total = make([]Index, k), make([]Index, k)
	eval := func(at []int) (s, t []float64) {
		s, t = make([]float64, k), make([]float64, k)
		sum, sq := 0.0, 0.0
		for _, j := range at {
			sum += f.A[j] + f.B[j]
		}
		m := sum / float64(2*n)
		for _, j := range at {
			sq += (f.A[j]-m)*(f.A[j]-m) + (f.B[j]-m)*(f.B[j]-m)
		}
		v := sq / float64(2*n)
		for i, ab := range f.AB {
			for _, j := range at {
				d := ab[j] - f.A[j]
				s[i] += (f.B[j] - m) * d
				t[i] += d * d
			}
			s[i] /= float64(n) * v
			t[i] /= float64(2*n) * v
		}
		return s, t
	}
	all := make([]int, n)
	for j := range all {
		all[j] = j
	}
	s, t := eval(all)
	rs, rt := make([][]float64, k), make([][]float64, k)
	at := make([]int, n)
	for range resamples {
		for j := range at {
			at[j] = intn(n)
		}
		bs, bt := eval(at)
		for i := range k {
			if !math.IsNaN(bs[i]) {
				rs[i], rt[i] = append(rs[i], bs[i]), append(rt[i], bt[i])
			}
		}
	}
	m, v := stat.PopMeanVariance(slices.Concat(f.A, f.B), nil)
	is, it := make([]float64, n), make([]float64, n) // influence of every base point
	for i, ab := range f.AB {
		for j := range n {
			vj := ((f.A[j]-m)*(f.A[j]-m) + (f.B[j]-m)*(f.B[j]-m)) / (2 * v)
			d := ab[j] - f.A[j]
			is[j] = (f.B[j]-m)*d/v - s[i]*vj
			it[j] = d*d/(2*v) - t[i]*vj
		}
		first[i], total[i] = accelerated(s[i], rs[i], is), accelerated(t[i], rt[i], it)
	}
	return first, total
}

// accelerated is the BCa interval of Efron (1987) from resampled values and the
// influence of every point.
func accelerated(x float64, r, influence []float64) Index {
	if math.IsNaN(x) || len(r) < 20 {
		return missing
	}
	slices.Sort(r)
	below := 0.0
	for _, v := range r {
		if v < x {
			below++
		} else if v == x {
			below += 0.5
		}
	}
	n := float64(len(r))
	z0 := distuv.UnitNormal.Quantile(math.Min(math.Max(below, 0.5), n-0.5) / n)
	s2, s3 := 0.0, 0.0
	for _, d := range influence {
		s2 += d * d
		s3 += d * d * d
	}
	a := 0.0
	if s2 > 0 {
		a = s3 / (6 * math.Pow(s2, 1.5))
	}
	at := func(z float64) float64 {
		p := distuv.UnitNormal.CDF(z0 + (z0+z)/(1-a*(z0+z)))
		return stat.Quantile(math.Min(math.Max(p, 0), 1), stat.LinInterp, r, nil)
	}
	return Index{x, math.Min(at(-z95), x), math.Max(at(z95), x)}
}

// Input is one uncertain input of a given sample: quantiles in (0, 1), or the
// index of a choice.
type Input struct {
	U      []float64
	Choice []int
	N      int // number of choices
}

// FirstOrder estimates the first-order index of an input from any sample of
// independent inputs. The conditional mean m of y is fitted by least squares with
// shifted Legendre polynomials of the quantile up to degree K (Sudret 2008; from
// given data as in Plischke 2012), or it is the mean of every choice. What chance
// alone would explain is taken off:
//
//	S = [Σ (m − μ)² − K σ²]/Σ (y − μ)²,  σ² = Σ (y − m)²/(n − K − 1)
//
// The interval is normal with the variance of the influence function,
//
//	2(y − μ)(m − μ) − (m − μ)² − S (y − μ)²
//
// and that of K squares of noise.
func FirstOrder(in Input, y []float64) Index {
	n := float64(len(y))
	mu, v := stat.PopMeanVariance(y, nil)
	if !(v > 0) || len(y) < 20 {
		return missing
	}
	var fit []float64
	terms := 0.0
	if in.Choice != nil {
		fit, terms = byChoice(in, y)
	} else {
		fit, terms = byPolynomial(in.U, y, mu)
	}
	if fit == nil || n-terms-1 < 5 {
		return missing
	}
	explained, left := 0.0, 0.0
	for j, m := range fit {
		explained += (m - mu) * (m - mu)
		left += (y[j] - m) * (y[j] - m)
	}
	s := (explained - terms*left/(n-terms-1)) / (n * v)
	sq := 0.0
	for j, m := range fit {
		a, b := y[j]-mu, m-mu
		d := (2*a*b - b*b - s*a*a) / v
		sq += d * d
	}
	rest := math.Max(1-s, 0)
	w := z95 * math.Sqrt(sq+2*terms*rest*rest) / n
	return Index{s, s - w, s + w}
}

// Group estimates the closed index of several choices together: the share of the
// variance between the cells of their combinations.
func Group(ins []Input, y []float64) Index {
	cell := map[int]int{}
	all := Input{Choice: make([]int, len(y))}
	for j := range y {
		at := 0
		for _, in := range ins {
			at = at*in.N + in.Choice[j]
		}
		if _, have := cell[at]; !have {
			cell[at] = len(cell)
		}
		all.Choice[j] = cell[at]
	}
	all.N = len(cell)
	return FirstOrder(all, y)
}

// byChoice fits the mean of every choice.
func byChoice(in Input, y []float64) (fit []float64, terms float64) {
	sum, count := make([]float64, in.N), make([]float64, in.N)
	for j, c := range in.Choice {
		sum[c] += y[j]
		count[c]++
	}
	fit = make([]float64, len(y))
	for j, c := range in.Choice {
		fit[j] = sum[c] / count[c]
	}
	for _, c := range count {
		if c > 0 {
			terms++
		}
	}
	return fit, terms - 1
}

// degree of the polynomials for n members: a smooth mean needs few, a step many.
func degree(n int) int { return min(12, max(3, n/60)) }

// byPolynomial fits Legendre polynomials by least squares.
func byPolynomial(u, y []float64, mu float64) (fit []float64, terms float64) {
	k := degree(len(y))
	gram := mat.NewSymDense(k+1, nil)
	right, c := mat.NewVecDense(k+1, nil), mat.NewVecDense(k+1, nil)
	phi := make([]float64, k+1)
	p := mat.NewVecDense(k+1, phi)
	for j, x := range u {
		legendre(phi, x)
		gram.SymRankOne(gram, 1, p)
		right.AddScaledVec(right, y[j]-mu, p)
	}
	var chol mat.Cholesky
	if !chol.Factorize(gram) || chol.SolveVecTo(c, right) != nil {
		return nil, 0
	}
	fit = make([]float64, len(y))
	for j, x := range u {
		legendre(phi, x)
		fit[j] = mu + mat.Dot(c, p)
	}
	return fit, float64(k)
}

// legendre fills p with the shifted Legendre polynomials at u, orthonormal on
// (0, 1).
func legendre(p []float64, u float64) {
	x := 2*u - 1
	a, b := 1.0, x
	p[0] = 1
	for i := 1; i < len(p); i++ {
		p[i] = b * math.Sqrt(float64(2*i+1))
		k := float64(i)
		a, b = b, ((2*k+1)*x*b-k*a)/(k+1)
	}
}

// PartialRank returns the partial rank correlation of every input with y, the
// others held: −P_iy/√(P_ii P_yy) with the inverse P of the matrix of rank
// correlations, and the interval of Fisher's z. A choice has none, but is held as
// one indicator for each choice but the first.
func PartialRank(ins []Input, y []float64) []Index {
	out := make([]Index, len(ins))
	var cols [][]float64
	of := []int{}
	for i, in := range ins {
		out[i] = missing
		if in.Choice == nil {
			cols, of = append(cols, Rank(in.U)), append(of, i)
			continue
		}
		for c := 1; c < in.N; c++ {
			x := make([]float64, len(y))
			some := false
			for j, have := range in.Choice {
				if have == c {
					x[j], some = 1, true
				}
			}
			if some && slices.Min(x) == 0 {
				cols, of = append(cols, x), append(of, -1)
			}
		}
	}
	k, n := len(cols), len(y)
	if n < k+10 {
		return out
	}
	data := mat.NewDense(n, k+1, nil)
	for i, c := range cols {
		data.SetCol(i, c)
	}
	data.SetCol(k, Rank(y))
	var r mat.SymDense
	stat.CorrelationMatrix(&r, data, nil)
	var c mat.Cholesky
	if !c.Factorize(&r) {
		return out
	}
	var p mat.SymDense
	if c.InverseTo(&p) != nil {
		return out
	}
	w := z95 / math.Sqrt(float64(n-k-2))
	for i, at := range of {
		if at < 0 {
			continue
		}
		v := -p.At(i, k) / math.Sqrt(p.At(i, i)*p.At(k, k))
		v = math.Max(-1, math.Min(1, v))
		z := math.Atanh(v)
		out[at] = Index{v, math.Tanh(z - w), math.Tanh(z + w)}
	}
	return out
}
