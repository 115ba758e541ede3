package ensemble

import (
	"math"

	"gonum.org/v1/gonum/stat/distuv"

	"cycle/carbon/units"
	"cycle/scenarios"
)

// distribution is what gonum's distributions offer.
type distribution interface {
	Quantile(p float64) float64
	CDF(x float64) float64
}

// logUniform is uniform in the logarithm.
type logUniform struct{ distuv.Uniform }

func (l logUniform) Quantile(p float64) float64 { return math.Exp(l.Uniform.Quantile(p)) }
func (l logUniform) CDF(x float64) float64      { return l.Uniform.CDF(math.Log(x)) }

// distributionOf returns the distribution of a number, before its bounds.
func distributionOf(p *scenarios.Prior, f *units.Field) distribution {
	switch p.Shape {
	case scenarios.Published:
		return distuv.Uniform{Min: f.Published.Lo, Max: f.Published.Hi}
	case scenarios.LogUniform:
		return logUniform{distuv.Uniform{Min: math.Log(p.Low), Max: math.Log(p.High)}}
	case scenarios.Triangular:
		return distuv.NewTriangle(p.Low, p.High, p.Mode, nil)
	case scenarios.Normal:
		return distuv.Normal{Mu: p.Mean, Sigma: p.SD}
	case scenarios.LogNormal:
		return distuv.LogNormal{Mu: math.Log(p.Median), Sigma: p.Sigma}
	}
	return distuv.Uniform{Min: p.Low, Max: p.High}
}

// value returns the quantile u of a number inside its bounds.
func value(p *scenarios.Prior, f *units.Field, u float64) float64 {
	d := distributionOf(p, f)
	lo, hi := math.Max(p.AtLeast, f.Min), math.Min(p.AtMost, f.Max)
	a, b := 0.0, 1.0
	switch p.Shape {
	case scenarios.Normal:
		a, b = d.CDF(lo), d.CDF(hi)
	case scenarios.LogNormal:
		a, b = d.CDF(math.Max(lo, 0)), d.CDF(hi)
	}
	return math.Min(math.Max(d.Quantile(a+u*(b-a)), lo), hi)
}

// choice returns the index of the choice at quantile u.
func choice(p *scenarios.Prior, u float64) int {
	sum := 0.0
	for _, w := range p.Weights {
		sum += w
	}
	at := 0.0
	for i, w := range p.Weights {
		at += w / sum
		if u < at {
			return i
		}
	}
	return len(p.Weights) - 1
}
