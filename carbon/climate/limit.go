package climate

import (
	"cycle/carbon/units"
	"cycle/ode/elementary"
)

// SteamFlux is the outgoing radiation in W/m² of a grey stratosphere above a
// steam troposphere, as a function of the temperature T in K of the tropopause
// (Nakajima, Hayashi & Abe 1992; Komabayashi; Ingersoll):
//
//	F = 2 σT⁴/(1 + (3/2) τ),   τ = κ p*(T)/g,   p* = 1.4e11 Pa exp(−43655/(8.314 T))
//
// κ is the absorption coefficient in m²/kg (0.01 in the paper), g the gravity in
// m/s² (9.8). Its maximum over T, 385 W/m², is the Komabayashi-Ingersoll limit:
// no state of an ocean-covered planet emits more. It is an upper bound on the
// limits of full radiation models, 282 W/m² (Goldblatt et al. 2013) to about 310
// (Kasting 1988).
func SteamFlux(t, kappa, gravity float64) float64 {
	tau := kappa * 1.4e11 * elementary.Exp(-43655/(8.314*t)) / gravity
	t *= t
	return 2 * units.Sigma * t * t / (1 + 1.5*tau)
}

// SunForLimit returns the stellar flux S in W/m² at which a planet of albedo A
// absorbs as much as a radiation limit F lets it emit: S = 4F/(1 − A).
func SunForLimit(limit, albedo float64) float64 { return 4 * limit / (1 - albedo) }
