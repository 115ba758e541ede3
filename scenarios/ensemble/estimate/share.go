// Package estimate holds the statistics of an ensemble: shares, quantiles,
// cumulative incidence and sensitivities, each with its error. It knows nothing of
// planets.
package estimate

import (
	"math"
	"slices"

	"gonum.org/v1/gonum/stat"
	"gonum.org/v1/gonum/stat/distuv"
)

// z95 is the two-sided 95 % point of the normal distribution.
var z95 = distuv.UnitNormal.Quantile(0.975)

// Wilson returns the 95 % score interval of k successes in n trials
// (Wilson 1927).
func Wilson(k, n int) (lo, hi float64) {
	if n == 0 {
		return 0, 1
	}
	return score(float64(k)/float64(n), float64(n))
}

func score(p, n float64) (lo, hi float64) {
	z2 := z95 * z95
	mid := (p + z2/(2*n)) / (1 + z2/n)
	half := z95 / (1 + z2/n) * math.Sqrt(p*(1-p)/n+z2/(4*n*n))
	lo, hi = math.Max(mid-half, 0), math.Min(mid+half, 1)
	if p == 0 {
		lo = 0 // not the rounding error of the difference
	}
	if p == 1 {
		hi = 1
	}
	return lo, hi
}

// Quantile returns quantile p of sorted values with a 95 % interval between two
// order statistics, which holds whatever the distribution (David & Nagaraja
// 2003, section 7.1). An end that the sample is too small for is infinite.
func Quantile(sorted []float64, p float64) (value, lo, hi float64) {
	n := len(sorted)
	if n == 0 {
		nan := math.NaN()
		return nan, nan, nan
	}
	value = stat.Quantile(p, stat.LinInterp, sorted, nil)
	lo, hi = math.Inf(-1), math.Inf(1)
	// P(x_(a) ≤ q ≤ x_(b)) = P(a ≤ B < b) with B binomial in (n, p).
	a, b := binomialQuantile(n, p, 0.025), binomialQuantile(n, p, 0.975)+1
	if a >= 1 {
		lo = sorted[a-1]
	}
	if b <= n {
		hi = sorted[b-1]
	}
	return value, math.Min(lo, value), math.Max(hi, value)
}

// binomialQuantile returns the smallest k with P(B ≤ k) ≥ q.
func binomialQuantile(n int, p, q float64) int {
	d := distuv.Binomial{N: float64(n), P: p}
	lo, hi := -1, n // P(B ≤ lo) < q ≤ P(B ≤ hi)
	for hi-lo > 1 {
		if mid := (lo + hi) / 2; d.CDF(float64(mid)) < q {
			lo = mid
		} else {
			hi = mid
		}
	}
	return hi
}

// Rank returns mid-ranks: equal values share the mean of theirs.
func Rank(x []float64) []float64 {
	order := make([]int, len(x))
	for i := range order {
		order[i] = i
	}
	slices.SortStableFunc(order, func(a, b int) int {
		switch {
		case x[a] < x[b]:
			return -1
		case x[a] > x[b]:
			return 1
		}
		return 0
	})
	out := make([]float64, len(x))
	for i := 0; i < len(order); {
		j := i
		for j < len(order) && x[order[j]] == x[order[i]] {
			j++
		}
		for _, k := range order[i:j] {
			out[k] = float64(i+j-1) / 2
		}
		i = j
	}
	return out
}
