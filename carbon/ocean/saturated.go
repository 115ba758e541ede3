package ocean

import (
	"math"

	"cycle/carbon/cite"
	"cycle/carbon/units"
)

// Saturated is an ocean that keeps a fixed saturation Ω with calcite, so that
//
//	[CO₃²⁻] = Ω Ksp/[Ca²⁺]
//	[HCO₃⁻] = √(K0 p K1 [CO₃²⁻]/K2)
//	h = √(K0 p K1 K2/[CO₃²⁻])
//
// and the surface carbon is a quadratic in √p,
//
//	C = n p + M (K0 p + √(K0 p K1 [CO₃²⁻]/K2) + [CO₃²⁻])
//
// with n of MolesPerBar and M the mass of the ocean. On the time scale of
// carbonate compensation, 10 kyr, the seafloor keeps Ω; pH falls by 0.5 for
// every tenfold pCO₂. No state holds less carbon than M [CO₃²⁻].
type Saturated struct {
	Seawater
	Omega float64 // Ω

	n, m float64 // mol/bar, kg
}

func newSaturated() Law { return &Saturated{Seawater: newSeawater(), Omega: 5} }

// coefficients returns K0 in mol/kg/bar, [CO₃²⁻], and the factor of √p in [HCO₃⁻].
func (l *Saturated) coefficients(t float64) (k Constants, k0, co3, root float64) {
	k = l.At(t)
	k0 = k.K0 / units.BarPerAtm
	co3 = l.Omega * k.Calcite / l.Calcium
	return k, k0, co3, math.Sqrt(k0 * k.K1 * co3 / k.K2)
}

// Solve returns the positive root of the quadratic; every field is NaN when
// c ≤ M [CO₃²⁻].
func (l *Saturated) Solve(c, _, t float64) State {
	k, k0, co3, root := l.coefficients(t)
	free := c - l.m*co3
	if !(free > 0) {
		return none()
	}
	a, b := l.n+l.m*k0, l.m*root
	x := 2 * free / (b + math.Sqrt(b*b+4*a*free)) // √p
	return l.state(&k, k0, co3, root, x)
}

// state fills in the chemistry at √p = x.
func (l *Saturated) state(k *Constants, k0, co3, root, x float64) State {
	return l.speciate(k, x*x, k0*x*x, root*x*k.K2/co3)
}

// Carbon returns C(p, T) and the alkalinity.
func (l *Saturated) Carbon(p, t float64) (c, alk float64) {
	k, k0, co3, root := l.coefficients(t)
	x := math.Sqrt(p)
	c = l.n*p + l.m*(k0*p+root*x+co3)
	if l.m == 0 {
		return c, 0
	}
	s := l.state(&k, k0, co3, root, x)
	return c, l.m * s.Alk
}

// Slope returns d ln C/d ln p at constant temperature.
func (l *Saturated) Slope(p, t float64) float64 {
	_, k0, co3, root := l.coefficients(t)
	linear, half := (l.n+l.m*k0)*p, l.m*root*math.Sqrt(p)
	return (linear + 0.5*half) / (linear + half + l.m*co3)
}

// Fields lists Ω and the composition of seawater.
func (l *Saturated) Fields() []units.Field {
	return append([]units.Field{omegaField(&l.Omega)}, l.fields()...)
}

func omegaField(v *float64) units.Field {
	return units.Field{Key: "saturation", Min: 0.1, Max: 100, Doc: "saturation Ω of the surface ocean with calcite",
		Source: cite.Ref{Note: "today's surface ocean at 15 °C: 4.99 at 2.0 mmol/kg carbon and 2.3 mmol/kg alkalinity", Trust: cite.Practice}, Value: v}
}

// Bind fixes the size of the two reservoirs.
func (l *Saturated) Bind(p Planet) error {
	l.Seawater.Bind()
	l.n, l.m = MolesPerBar(p), p.Mass
	return check(p)
}

// HasAlkalinity is false: saturation sets it.
func (l *Saturated) HasAlkalinity() bool { return false }

// Range returns Measured.
func (l *Saturated) Range() units.Range { return Measured }
