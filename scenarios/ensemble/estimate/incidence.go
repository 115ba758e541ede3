package estimate

import (
	"math"
	"slices"
)

// Event is the end of one history: at a time, by a cause from 0 on, or still
// going on when it was last seen (Cause < 0, censored).
type Event struct {
	Time  float64
	Cause int
}

// Curve is a probability at increasing times with its variance and pointwise
// 95 % band. Between its times it is constant.
type Curve struct {
	Time, Value, Var, Low, High []float64
}

// At returns the value and the band at a time.
func (c *Curve) At(t float64) (v, lo, hi float64) {
	i, found := slices.BinarySearch(c.Time, t)
	if !found {
		i--
	}
	if i < 0 {
		return 0, 0, 0
	}
	return c.Value[i], c.Low[i], c.High[i]
}

// Incidence estimates the cumulative incidence of each of n competing causes
// (Aalen & Johansen 1978):
//
//	F_k(t) = Σ_{t_i ≤ t} S(t_i−) d_ki/r_i,  S(t) = Π_{t_i ≤ t} (1 − d_i/r_i)
//
// with r_i at risk and d_ki events of cause k at t_i, and the variance by the
// delta method (Marubini & Valsecchi 1995, section 10.3):
//
//	Var F_k(t) = Σ [F_k(t) − F_k(t_i)]² d_i/(r_i(r_i − d_i))
//	           + Σ S(t_i−)² (r_i − d_ki) d_ki/r_i³
//	           − 2 Σ [F_k(t) − F_k(t_i)] S(t_i−) d_ki/r_i²
//
// The band is that of the transform log(−log(1 − F)) (Kalbfleisch & Prentice
// 1980). free is S, the probability of no event yet, with Greenwood's variance.
//
// All is computed at every event, but no more than some points of the curves are
// kept, evenly spread over the times of events, the first and the last among them;
// 0 keeps all. The events are put in order of time.
func Incidence(e []Event, n, points int) (by []Curve, free Curve) {
	slices.SortFunc(e, func(a, b Event) int {
		switch {
		case a.Time < b.Time:
			return -1
		case a.Time > b.Time:
			return 1
		}
		return 0
	})
	by = make([]Curve, n)
	// Sums over t_i ≤ t of A = d/(r(r−d)), A F, A F², of B = S²(r−d_k)d_k/r³ and
	// of C = S d_k/r², C F.
	type sums struct{ f, aF, aFF, b, c, cF float64 }
	acc := make([]sums, n)
	steps, at := 0, 0 // times with events, and the one we are at
	for i := 0; i < len(e); {
		j, any := i, false
		for ; j < len(e) && e[j].Time == e[i].Time; j++ {
			any = any || e[j].Cause >= 0
		}
		if any {
			steps++
		}
		i = j
	}
	keep := func(k int) bool {
		if points < 2 || steps <= points || k == steps-1 {
			return true
		}
		// One of every bucket of times: where the count of buckets goes up.
		return k*(points-1)/(steps-1) != (k-1)*(points-1)/(steps-1) || k == 0
	}
	a, s := 0.0, 1.0
	risk := float64(len(e))
	d := make([]float64, n)
	for i := 0; i < len(e); {
		j, all := i, 0.0
		clear(d)
		for ; j < len(e) && e[j].Time == e[i].Time; j++ {
			if k := e[j].Cause; k >= 0 {
				d[k]++
				all++
			}
		}
		if all > 0 {
			t := e[i].Time
			kept := keep(at)
			at++
			ai := 0.0
			if all < risk {
				ai = all / (risk * (risk - all))
			}
			a += ai
			for k := range by {
				x := &acc[k]
				x.f += s * d[k] / risk
				x.aF += ai * x.f
				x.aFF += ai * x.f * x.f
				x.b += s * s * (risk - d[k]) * d[k] / (risk * risk * risk)
				ci := s * d[k] / (risk * risk)
				x.c += ci
				x.cF += ci * x.f
				if !kept {
					continue
				}
				v := x.f*x.f*a - 2*x.f*x.aF + x.aFF + x.b - 2*(x.f*x.c-x.cF)
				by[k].add(t, x.f, math.Max(v, 0), float64(len(e)))
			}
			s *= 1 - all/risk
			if kept {
				free.add(t, s, s*s*a, float64(len(e)))
			}
		}
		risk -= float64(j - i)
		i = j
	}
	return by, free
}

// add appends a step. n is the number of histories: where no event or nothing
// but events was seen the band is the score interval of n trials.
func (c *Curve) add(t, f, v, n float64) {
	c.Time, c.Value, c.Var = append(c.Time, t), append(c.Value, f), append(c.Var, v)
	lo, hi := score(math.Min(math.Max(f, 0), 1), n)
	if f > 1e-12 && f < 1-1e-12 && v > 0 {
		g := math.Log1p(-f)
		w := z95 * math.Sqrt(v) / (math.Abs(g) * (1 - f))
		lo, hi = -math.Expm1(g*math.Exp(-w)), -math.Expm1(g*math.Exp(w))
	}
	c.Low, c.High = append(c.Low, lo), append(c.High, hi)
}
