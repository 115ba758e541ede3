package weathering

import (
	"math"

	"cycle/ode/elementary"
)

// least is the part of its reference value below which a runoff bracket leaves
// the published straight line. Own choice: the papers stop at a few tens of
// kelvin, long before the bracket gets this small.
const least = 0.1

var lnLeast = elementary.Log(least)

// bracket returns x where x ≥ least, and least·exp(x/least − 1) below: positive,
// increasing and continuously differentiable.
func bracket(x float64) float64 {
	if x >= least {
		return x
	}
	return least * elementary.Exp(x/least-1)
}

// lnBracket returns the logarithm of bracket without an exponential.
func lnBracket(x float64) float64 {
	if x >= least {
		return elementary.Log(x)
	}
	return lnLeast + x/least - 1
}

// above returns x where x ≥ lo + w and tends to lo below, with continuous slope.
func above(x, lo, w float64) float64 {
	switch {
	case x >= lo+w:
		return x
	case x < lo-40*w: // the tail is below the last bit
		return lo
	}
	return lo + w*elementary.Exp((x-lo)/w-1)
}

// below returns x where x ≤ hi − w and tends to hi above, with continuous slope.
func below(x, hi, w float64) float64 {
	if x <= hi-w {
		return x
	}
	return hi - w*elementary.Exp((hi-x)/w-1)
}

// power returns s^ν; s is the crust production, ν mostly 1.
func power(s, nu float64) float64 {
	switch nu {
	case 1:
		return s
	case 0:
		return 1
	}
	return elementary.Exp(nu * elementary.Log(s))
}

// expm1 returns e^x − 1 to the last digits: by its series near 0, by the
// exponential where the difference loses none.
func expm1(x float64) float64 {
	switch a := math.Abs(x); {
	case a < 1./32:
		return x + x*x*(1./2+x*(1./6+x*(1./24+x*(1./120+x*(1./720+x*(1./5040+x*(1./40320)))))))
	case a > 0.4:
		return elementary.Exp(x) - 1
	}
	return math.Expm1(x)
}
