package ocean

import (
	"math"

	"cycle/carbon/cite"
	"cycle/carbon/units"
	"cycle/ode/elementary"
)

// Fraction divides surface carbon without chemistry: the atmosphere holds the
// share φ at the reference pressure p₀, and the ocean's carbon goes with a root
// of the pressure,
//
//	C = C₀ [φ p/p₀ + (1 − φ)(p/p₀)^(1/k)]   C₀ = n p₀/φ
//
// k = 1 is the fixed fraction φ. pH, alkalinity and saturation are what the
// dissolved carbon and pCO₂ then imply; pH is not let below 3.
type Fraction struct {
	Seawater
	Share float64 // φ
	P0    float64 // p₀, bar
	K     float64 // k

	m, air, sea float64 // kg; C₀ φ and C₀ (1 − φ), mol
	acid        recent[acid]
}

func newFraction() Law { return &Fraction{Seawater: newSeawater(), Share: 0.0103, P0: 280e-6, K: 1} }

// Solve inverts C(p); every field is NaN when c ≤ 0.
func (l *Fraction) Solve(c, _, t float64) State {
	if !(c > 0) {
		return none()
	}
	return l.state(l.relative(c), t)
}

// relative returns p/p₀ for c > 0.
func (l *Fraction) relative(c float64) float64 {
	x := c / (l.air + l.sea)
	if l.K != 1 {
		x = l.invert(x)
	}
	return x
}

// Pressure returns P and ln [H⁺].
func (l *Fraction) Pressure(c, _, t float64) (p, lnH float64) {
	if !(c > 0) {
		return math.NaN(), math.NaN()
	}
	x := l.relative(c)
	t = Held(t)
	k := l.acid.at(t)
	if k == nil {
		inv, lnT := 1/t, elementary.Log(t)
		k = l.acid.next(t)
		*k = acid{elementary.Exp(l.lnK0.at(t, inv, lnT)), elementary.Exp(l.lnK1.at(t, inv, lnT)), elementary.Exp(l.lnK2.at(t, inv, lnT))}
	}
	p = l.P0 * x
	return p, elementary.Log(l.hydrogen(x, k.k0/units.BarPerAtm*p, k.k1, k.k2))
}

// acid is what [H⁺] depends on at one temperature.
type acid struct{ k0, k1, k2 float64 }

// hydrogen returns [H⁺] at x = p/p₀ and [CO₂]; it is not let above 1e-3 mol/kg.
//
//	K1 K2/h² + K1/h = DIC/[CO₂] − 1
func (l *Fraction) hydrogen(x, co2, k1, k2 float64) float64 {
	const sour = 1e-3 // mol/kg
	if l.m == 0 {
		return sour
	}
	// The ratio is bounded where next to nothing is left.
	e := math.Min(l.sea*l.root(x)/(l.m*co2)-1, 1e250)
	if !(e > 0) {
		return sour
	}
	return math.Min(sour, k1*(1+math.Sqrt(1+4*e*k2/k1))/(2*e))
}

// invert solves φ x + (1 − φ) x^(1/k) = y by Newton's method in ln x, where
// ln of the left side is convex with a slope between 1/k and 1.
func (l *Fraction) invert(y float64) float64 {
	lnY, inv := elementary.Log(y), 1/l.K
	u := lnY
	if u < 0 {
		u *= l.K
	}
	for range 100 {
		a, b := l.Share*elementary.Exp(u), (1-l.Share)*elementary.Exp(u*inv)
		step := (elementary.Log(a+b) - lnY) * (a + b) / (a + b*inv)
		u -= step
		if math.Abs(step) < 1e-9 {
			break
		}
	}
	return elementary.Exp(u)
}

// root returns x^(1/k).
func (l *Fraction) root(x float64) float64 {
	if l.K == 1 {
		return x
	}
	return elementary.Exp(elementary.Log(x) / l.K)
}

// state returns the chemistry implied at x = p/p₀.
func (l *Fraction) state(x, t float64) State {
	k := l.constants(t)
	p := l.P0 * x
	co2 := k.K0 / units.BarPerAtm * p
	return l.speciate(k, p, co2, l.hydrogen(x, co2, k.K1, k.K2))
}

// Carbon returns C(p) and the alkalinity implied; T matters to the latter only.
func (l *Fraction) Carbon(p, t float64) (c, alk float64) {
	x := p / l.P0
	return l.air*x + l.sea*l.root(x), l.m * l.state(x, t).Alk
}

// Fields lists φ, p₀, k and the composition of seawater.
func (l *Fraction) Fields() []units.Field {
	return append([]units.Field{
		{Key: "share", Min: 1e-6, Max: 1, Doc: "the atmosphere's share of the surface carbon at the reference pressure", Source: cite.Ref{Note: "280 ppm over 38,000 Pg C in the ocean and 590 in the air, the air counted as pure CO2", Trust: cite.Derived}, Value: &l.Share},
		{Key: "reference_pressure", Kind: units.Pressure, Unit: "ppm", Min: 1e-9, Max: 100, Doc: "CO2 pressure at which the share holds", Source: cite.Ref{Note: "pre-industrial", Trust: cite.Practice}, Value: &l.P0},
		{Key: "power", Min: 1, Max: 4, Doc: "power k of pCO2 over the ocean's carbon", Source: cite.Own("1 is the fixed fraction, 2 the bicarbonate of a saturated ocean"), Value: &l.K},
	}, l.fields()...)
}

// Bind fixes the reservoirs.
func (l *Fraction) Bind(p Planet) error {
	l.Seawater.Bind()
	l.acid.forget()
	l.m = p.Mass
	l.air = MolesPerBar(p) * l.P0
	l.sea = l.air * (1 - l.Share) / l.Share
	return check(p)
}

// HasAlkalinity is false.
func (l *Fraction) HasAlkalinity() bool { return false }

// Range returns Measured.
func (l *Fraction) Range() units.Range { return Measured }
