package ocean

import (
	"errors"
	"math"

	"cycle/carbon/cite"
	"cycle/carbon/units"
)

// Precipitator is a law that knows how fast carbonate leaves the ocean.
type Precipitator interface {
	// Precipitation returns the precipitation of CaCO₃ in mol/yr at a
	// saturation with calcite. Each mole takes one of carbon and two of alkalinity.
	Precipitation(omega float64) float64
}

// Pair is the full carbonate system from two states, the surface carbon C and
// the alkalinity A of the ocean. With h = [H⁺] and r = 1 + n/(M K0) the
// atmosphere's share is part of the balance,
//
//	[CO₂] = (C/M)/(r + K1/h + K1 K2/h²)
//	A/M = [CO₂](K1/h + 2 K1 K2/h²) + B_T KB/(KB + h) + KW/h − h
//
// whose right-hand side falls strictly with h, so that there is always exactly
// one state. Carbonate precipitates by the rate law of Krissansen-Totton &
// Catling (2017),
//
//	F = k (Ω − 1)^ν  for Ω > 1, else 0
//
// with k from the flux F₀ at the reference saturation Ω₀.
type Pair struct {
	Seawater
	Omega float64 // Ω₀
	Flux  float64 // F₀ of an Earth-sized planet, mol/yr
	Order float64 // ν

	n, m, rate float64
}

func newPair() Law { return &Pair{Seawater: newSeawater(), Omega: 5, Flux: 7.5e12, Order: 1.75} }

// Solve finds h by Newton's method in ln h within a bracket. Every field is NaN
// when c ≤ 0.
func (l *Pair) Solve(c, alk, t float64) State {
	if !(c > 0) || math.IsNaN(alk) {
		return none()
	}
	k := l.At(t)
	k0 := k.K0 / units.BarPerAtm
	r := 1 + l.n/(l.m*k0)
	dic, a := c/l.m, alk/l.m
	h := l.hydrogen(&k, r, dic, a)
	co2 := dic / (r + k.K1/h*(1+k.K2/h))
	return l.speciate(&k, co2/k0, co2, h)
}

// hydrogen solves the alkalinity balance for h, with the carbon of air and
// ocean per kg of ocean.
func (l *Pair) hydrogen(k *Constants, r, dic, alk float64) float64 {
	lo := 0.5 * k.KW / (math.Abs(alk) + 1)
	hi := 2*(math.Abs(alk)+dic) + l.Boron + 10
	h := guess(k, r, dic, alk)
	if !(h > lo && h < hi) {
		h = math.Sqrt(lo * hi)
	}
	for range 200 {
		x, y := k.K1/h, k.K1*k.K2/(h*h)
		den, num := r+x+y, x+2*y
		b := l.Boron * k.KB / (k.KB + h)
		f := dic*num/den + b + k.KW/h - h - alk
		df := dic*(num*num-(x+4*y)*den)/(den*den) - b*h/(k.KB+h) - k.KW/h - h // df/d ln h < 0
		if f > 0 {
			lo = h
		} else {
			hi = h
		}
		step := -f / df
		next := h * math.Exp(step)
		if !(next > lo && next < hi) {
			if math.Abs(step) < 1e-12 {
				return h
			}
			next = math.Sqrt(lo * hi)
			step = 1
		}
		h = next
		if math.Abs(step) < 1e-8 { // the error left is of the order of its square
			break
		}
	}
	return h
}

// guess solves the balance without boron and water, a quadratic in h:
//
//	A r h² − (D − A) K1 h − (2 D − A) K1 K2 = 0
func guess(k *Constants, r, d, a float64) float64 {
	switch {
	case a <= 0:
		return -a
	case a >= 2*d:
		return k.KW / (a - 2*d)
	}
	b, c := 0.5*(d-a)*k.K1, (2*d-a)*k.K1*k.K2
	root := math.Sqrt(b*b + a*r*c)
	if b > 0 {
		return (b + root) / (a * r)
	}
	return c / (root - b)
}

// Carbon returns carbon and alkalinity at the reference saturation.
func (l *Pair) Carbon(p, t float64) (c, alk float64) {
	k := l.At(t)
	co2 := k.K0 / units.BarPerAtm * p
	co3 := l.Omega * k.Calcite / l.Calcium
	s := l.speciate(&k, p, co2, math.Sqrt(co2*k.K1*k.K2/co3))
	return l.n*p + l.m*s.DIC, l.m * s.Alk
}

// Precipitation returns F in mol/yr.
func (l *Pair) Precipitation(omega float64) float64 {
	if !(omega > 1) {
		return 0
	}
	return l.rate * math.Exp(l.Order*math.Log(omega-1))
}

// Fields lists Ω₀, F₀, ν and the composition of seawater.
func (l *Pair) Fields() []units.Field {
	omega := omegaField(&l.Omega)
	omega.Min = 1.01
	return append([]units.Field{omega,
		{Key: "precipitation", Kind: units.Flux, Unit: "Tmol/yr", Min: 1e9, Max: 1e16, Doc: "precipitation of carbonate at the reference saturation on an Earth-sized planet", Source: cite.Ref{Note: "equal to the outgassing it balances; what carbonate weathering adds cancels with its own burial", Trust: cite.Derived}, Value: &l.Flux},
		{Key: "precipitation_order", Min: 1, Max: 4, Published: units.Range{Lo: 1, Hi: 2.5}, Doc: "order ν of precipitation in Ω − 1", Source: cite.Ref{Work: cite.KrissansenTotton2017, Note: "middle of the range 1-2.5 in Lehmer et al. 2020", Trust: cite.Memory}, Value: &l.Order},
	}, l.fields()...)
}

// Bind fixes the reservoirs and k.
func (l *Pair) Bind(p Planet) error {
	if err := check(p); err != nil {
		return err
	}
	if p.Mass == 0 {
		return errors.New("ocean: the law pair needs an ocean, its mass is 0")
	}
	l.Seawater.Bind()
	l.n, l.m = MolesPerBar(p), p.Mass
	l.rate = l.Flux * p.Area / units.EarthArea * math.Exp(-l.Order*math.Log(l.Omega-1))
	return nil
}

// HasAlkalinity is true.
func (l *Pair) HasAlkalinity() bool { return true }

// Range returns Measured.
func (l *Pair) Range() units.Range { return Measured }
