package climate

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/diff/fd"

	"cycle/ode/elementary"
)

// Imbalance returns Q (1 − A) − F in W/m² at mean sunlight Q = S/4, temperature
// t in K and CO₂ pressure p in bar.
func Imbalance(r Radiation, a Albedo, sun, t, p float64) float64 {
	return sun*(1-a.Planetary(t, p)) - r.Outgoing(t, p, elementary.Log(p))
}

// SolveFree sets the free number of a so that the reference state is in
// balance, Q (1 − A) = F, and returns what is left of the imbalance in W/m².
// Both laws must be bound. The number is left untouched on error; the error
// tells what cannot balance. A law without a free number is not an error: its
// imbalance is returned.
//
// The root is bracketed by the law's allowed range and found by bisection, so
// the answer is as good as float64 allows.
func SolveFree(r Radiation, a Albedo, ref Reference) (residual float64, err error) {
	left := func() float64 { return Imbalance(r, a, ref.Sun, ref.T, ref.P) }
	name, allowed, free := a.Free()
	if free == nil {
		return left(), nil
	}
	before := *free
	at := func(x float64) float64 { *free = x; return left() }
	lo, hi := allowed.Lo, allowed.Hi
	fLo, fHi := at(lo), at(hi)
	if !(fLo*fHi <= 0) { // also when one is not a number
		out := r.Outgoing(ref.T, ref.P, elementary.Log(ref.P))
		aLo, aHi := 1-(fLo+out)/ref.Sun, 1-(fHi+out)/ref.Sun
		*free = before
		return fLo, fmt.Errorf("the reference state cannot balance: it emits %.1f W/m² at %.2f K and %.3g bar of CO2 and receives %.1f W/m² of sunlight, which needs a planetary albedo of %.3f; the %s between %g and %g gives %.3f to %.3f",
			out, ref.T, ref.P, ref.Sun, 1-out/ref.Sun, name, lo, hi, math.Min(aLo, aHi), math.Max(aLo, aHi))
	}
	for fLo != 0 && fHi != 0 {
		mid := lo + (hi-lo)/2
		if !(lo < mid && mid < hi) {
			break
		}
		if f := at(mid); f*fLo > 0 {
			lo, fLo = mid, f
		} else {
			hi, fHi = mid, f
		}
	}
	if math.Abs(fLo) < math.Abs(fHi) {
		return at(lo), nil
	}
	return at(hi), nil
}

// Forcing returns by how much a doubling of CO₂ from the reference state lowers
// the outgoing radiation, in W/m².
func Forcing(r Radiation, ref Reference) float64 {
	lnp := elementary.Log(ref.P)
	return r.Outgoing(ref.T, ref.P, lnp) - r.Outgoing(ref.T, 2*ref.P, lnp+math.Ln2)
}

// Damping returns λ = dF/dT + Q dA/dT in W/m²/K at a state, at fixed CO₂: how
// fast the energy balance restores T. It is negative where ice-albedo feedback
// wins.
func Damping(r Radiation, a Albedo, sun, t, p float64) float64 {
	return -fd.Derivative(func(t float64) float64 { return Imbalance(r, a, sun, t, p) }, t,
		&fd.Settings{Formula: fd.Central, Step: 1e-3})
}

// Sensitivity returns the warming in K for a doubling of CO₂ that the two laws
// give at the reference state, to first order and with ice-albedo feedback:
// the radiative forcing, CO₂'s own scattering included, over the damping λ.
// It is an error if the reference state does not damp.
func Sensitivity(r Radiation, a Albedo, ref Reference) (perDoubling float64, err error) {
	damping := Damping(r, a, ref.Sun, ref.T, ref.P)
	if !(damping > 0) {
		return 0, fmt.Errorf("the reference state at %.2f K is unstable: its energy balance has a damping of %.3g W/m²/K", ref.T, damping)
	}
	forcing := Imbalance(r, a, ref.Sun, ref.T, 2*ref.P) - Imbalance(r, a, ref.Sun, ref.T, ref.P)
	return forcing / damping, nil
}
