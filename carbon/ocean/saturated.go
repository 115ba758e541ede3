package ocean

import (
	"math"

	"cycle/carbon/cite"
	"cycle/carbon/units"
	"cycle/ode/elementary"
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
// every tenfold pCO₂.
//
// Hardly any state is left where C falls to M [CO₃²⁻], for instance in an ocean
// that cools with next to no CO₂ above it. Own choice: from 1.001 M [CO₃²⁻]
// down, where p is below 3e-11 bar, the carbon above M [CO₃²⁻] is continued by a
// hyperbola that ends at no carbon and no pressure.
type Saturated struct {
	Seawater
	Omega float64 // Ω

	n, m float64 // mol/bar, kg

	lnRoot, lnH, lnCO3 series // ln of [HCO₃⁻]/√p, h/√p and [CO₃²⁻], p in bar

	kept recent[fixed]
}

func newSaturated() Law { return &Saturated{Seawater: newSeawater(), Omega: 5} }

// fixed is what saturation fixes at one temperature: K0 in mol/kg/bar, [CO₃²⁻],
// [HCO₃⁻]/√p, ln (h/√p), and the temperature held, its inverse and logarithm.
type fixed struct{ k0, co3, root, lnH, t, inv, lnT float64 }

func (l *Saturated) at(t float64) *fixed {
	t = Held(t)
	if k := l.kept.at(t); k != nil {
		return k
	}
	inv, lnT := 1/t, elementary.Log(t)
	k := l.kept.next(t)
	*k = fixed{
		k0:   elementary.Exp(l.lnK0.at(t, inv, lnT)) / units.BarPerAtm,
		co3:  elementary.Exp(l.lnCO3.at(t, inv, lnT)),
		root: elementary.Exp(l.lnRoot.at(t, inv, lnT)),
		lnH:  l.lnH.at(t, inv, lnT),
		t:    t, inv: inv, lnT: lnT,
	}
	return k
}

// scarce is the carbon above M [CO₃²⁻], as a part of it, below which the
// hyperbola goes on.
const scarce = 1e-3

// above returns (C − M [CO₃²⁻])/(M [CO₃²⁻]) for y = C/(M [CO₃²⁻]), continued
// below 1 + ε by the hyperbola of the same slope through y = 0:
//
//	u²/(u + 1 + ε − y) − ε²,  u = ε (1 + ε)
func above(y float64) float64 {
	if y >= 1+scarce {
		return y - 1
	}
	const u = scarce * (1 + scarce)
	return scarce * scarce * y / (u + 1 + scarce - y)
}

// below is the inverse of above.
func below(x float64) float64 {
	if x >= scarce {
		return x + 1
	}
	const u = scarce * (1 + scarce)
	return x * (u + 1 + scarce) / (scarce*scarce + x)
}

// Solve returns the positive root of the quadratic; every field is NaN when
// c ≤ 0.
func (l *Saturated) Solve(c, _, t float64) State {
	if !(c > 0) {
		return none()
	}
	k := l.at(t)
	return l.state(k, l.root(k, c))
}

// root returns √p for c > 0.
func (l *Saturated) root(k *fixed, c float64) float64 {
	fixed := l.m * k.co3
	free := c
	if fixed > 0 {
		free = fixed * above(c/fixed)
	}
	a, b := l.n+l.m*k.k0, l.m*k.root
	return 2 * free / (b + math.Sqrt(b*b+4*a*free))
}

// Pressure returns P and ln h.
func (l *Saturated) Pressure(c, _, t float64) (p, lnH float64) {
	if !(c > 0) {
		return math.NaN(), math.NaN()
	}
	k := l.at(t)
	x := l.root(k, c)
	return x * x, k.lnH + elementary.Log(x)
}

// state fills in the chemistry at x = √p.
func (l *Saturated) state(k *fixed, x float64) State {
	s := State{P: x * x, H: elementary.Exp(k.lnH) * x, CO2: k.k0 * x * x, HCO3: k.root * x, CO3: k.co3, Omega: l.Omega}
	kb, kw := elementary.Exp(l.lnKB.at(k.t, k.inv, k.lnT)), elementary.Exp(l.lnKW.at(k.t, k.inv, k.lnT))
	s.DIC = s.CO2 + s.HCO3 + s.CO3
	s.Alk = s.HCO3 + 2*s.CO3 + l.Boron*kb/(kb+s.H) + kw/s.H - s.H
	return s
}

// Carbon returns C(p, T) and the alkalinity.
func (l *Saturated) Carbon(p, t float64) (c, alk float64) {
	k := l.at(t)
	s := l.state(k, math.Sqrt(p))
	c = l.n*p + l.m*s.DIC
	if fixed := l.m * k.co3; c-fixed < scarce*fixed {
		c = fixed * below((l.n*p+l.m*(s.CO2+s.HCO3))/fixed)
	}
	return c, l.m * s.Alk
}

// Slope returns d ln C/d ln p at constant temperature.
func (l *Saturated) Slope(p, t float64) float64 {
	k := l.at(t)
	linear, half := (l.n+l.m*k.k0)*p, l.m*k.root*math.Sqrt(p)
	return (linear + 0.5*half) / (linear + half + l.m*k.co3)
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
	l.kept.forget()
	l.n, l.m = MolesPerBar(p), p.Mass
	l.lnCO3 = l.lnCalcite
	l.lnCO3.one += elementary.Log(l.Omega / l.Calcium)
	k0 := l.lnK0
	k0.one -= elementary.Log(units.BarPerAtm)
	l.lnRoot = k0.plus(1, l.lnK1).plus(-1, l.lnK2).plus(1, l.lnCO3).times(0.5)
	l.lnH = k0.plus(1, l.lnK1).plus(1, l.lnK2).plus(-1, l.lnCO3).times(0.5)
	return check(p)
}

// HasAlkalinity is false: saturation sets it.
func (l *Saturated) HasAlkalinity() bool { return false }

// Range returns Measured.
func (l *Saturated) Range() units.Range { return Measured }
