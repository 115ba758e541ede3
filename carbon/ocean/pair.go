package ocean

import (
	"errors"
	"math"

	"cycle/carbon/cite"
	"cycle/carbon/units"
	"cycle/ode/elementary"
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

// Solve finds h by Halley's method in ln h within a bracket. Every field is NaN
// when c ≤ 0.
func (l *Pair) Solve(c, alk, t float64) State {
	if !(c > 0) || math.IsNaN(alk) {
		return none()
	}
	k := l.constants(t)
	h, co2 := l.dissolved(k, c, alk)
	return l.speciate(k, co2*units.BarPerAtm/k.K0, co2, h)
}

// dissolved returns h and [CO₂].
func (l *Pair) dissolved(k *Constants, c, alk float64) (h, co2 float64) {
	r := 1 + l.n/l.m*(units.BarPerAtm/k.K0)
	dic := c / l.m
	h = l.hydrogen(k, r, dic, alk/l.m)
	x := k.K1 / h
	return h, dic / (r + x*(1+k.K2/h))
}

// Pressure returns P and ln h.
func (l *Pair) Pressure(c, alk, t float64) (p, lnH float64) {
	p, h, _ := l.Balance(c, alk, t)
	return p, elementary.Log(h)
}

// Balance returns P, h and Ω.
func (l *Pair) Balance(c, alk, t float64) (p, h, omega float64) {
	if !(c > 0) || math.IsNaN(alk) {
		return math.NaN(), math.NaN(), math.NaN()
	}
	k := l.constants(t)
	h, co2 := l.dissolved(k, c, alk)
	return co2 * units.BarPerAtm / k.K0, h, l.Calcium * k.K2 * k.K1 * co2 / (h * h * k.Calcite)
}

// hydrogen solves the alkalinity balance for h, with the carbon of air and
// ocean per kg of ocean.
func (l *Pair) hydrogen(k *Constants, r, dic, alk float64) float64 {
	lo := 0.5 * k.KW / (math.Abs(alk) + 1)
	hi := 2*(math.Abs(alk)+dic) + l.Boron + 10
	h := guess(k, r, dic, alk)
	if h > lo && h < hi {
		// Again, without the alkalinity of boron and water at the first guess.
		if next := guess(k, r, dic, alk-l.Boron*k.KB/(k.KB+h)-k.KW/h+h); next > 0.1*h && next < 10*h {
			h = next
		}
	}
	if !(h > lo && h < hi) {
		h = math.Sqrt(lo * hi)
	}
	k12 := k.K1 * k.K2
	for range 200 {
		u := 1 / h
		x, y, w := k.K1*u, k12*u*u, k.KW*u
		den, share := 1/(r+x+y), 1/(k.KB+h)
		// Charge of a mole of carbon: mean and central moments of the species.
		q, q2 := (x+2*y)*den, (x+4*y)*den
		var2, var3 := q2-q*q, (x+8*y)*den+q*(2*q*q-3*q2)
		b, part := l.Boron*k.KB*share, h*share
		f := dic*q + b + w - h - alk
		// Its derivatives in ln h; the first is negative.
		f1 := -dic*var2 - b*part - w - h
		f2 := dic*var3 + b*part*(2*part-1) + w - h
		if f > 0 {
			lo = h
		} else {
			hi = h
		}
		step := -f * f1
		if bend := f1*f1 - 0.5*f*f2; bend > 0 {
			step /= bend
		} else {
			step /= f1 * f1
		}
		next := h * grow(step)
		if !(next > lo && next < hi) {
			if math.Abs(step) < 1e-12 {
				return h
			}
			next = math.Sqrt(lo * hi)
			step = 1
		}
		h = next
		if math.Abs(step) < 5e-6 { // the error left is of the order of its cube
			break
		}
	}
	return h
}

// grow returns exp(x), by its series where x is small enough for the last digit.
func grow(x float64) float64 {
	if math.Abs(x) < 0.03 {
		return 1 + x*(1+x*(1./2+x*(1./6+x*(1./24+x*(1./120+x*(1./720+x*(1./5040)))))))
	}
	return elementary.Exp(x)
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
	k := l.constants(t)
	co2 := k.K0 / units.BarPerAtm * p
	co3 := l.Omega * k.Calcite / l.Calcium
	s := l.speciate(k, p, co2, math.Sqrt(co2*k.K1*k.K2/co3))
	return l.n*p + l.m*s.DIC, l.m * s.Alk
}

// Precipitation returns F in mol/yr.
func (l *Pair) Precipitation(omega float64) float64 {
	if !(omega > 1) {
		return 0
	}
	return l.rate * power(omega-1, l.Order)
}

// power returns x^ν for x > 0. Where ν is a number of quarters, as its default
// is, square roots do it.
func power(x, nu float64) float64 {
	n := 4 * nu
	if n != math.Trunc(n) {
		return elementary.Exp(nu * elementary.Log(x))
	}
	root := math.Sqrt(math.Sqrt(x))
	y := 1.0
	for i := int(n); i > 0; i >>= 1 {
		if i&1 == 1 {
			y *= root
		}
		root *= root
	}
	return y
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
	l.rate = l.Flux * p.Area / units.EarthArea * elementary.Exp(-l.Order*elementary.Log(l.Omega-1))
	return nil
}

// HasAlkalinity is true.
func (l *Pair) HasAlkalinity() bool { return true }

// Range returns Measured.
func (l *Pair) Range() units.Range { return Measured }
