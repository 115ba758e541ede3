package carbon

import (
	"math"

	"gonum.org/v1/gonum/diff/fd"

	"cycle/carbon/climate"
	"cycle/carbon/outgas"
	"cycle/carbon/record"
	"cycle/carbon/units"
	"cycle/ode/elementary"
)

// pressures returns the CO₂ pressures, bar, between which the energy balance
// is inverted: the box of the radiation law, or a wide range when it states none.
func (m *Model) pressures() (lo, hi float64) {
	b := m.set.radiation.law.Box().P
	if !b.Stated() {
		return 1e-8, 100
	}
	return b.Lo, b.Hi
}

// imbalance returns (S/4)(1 − A) − F in W/m² for mean sunlight sun = S/4.
func (m *Model) imbalance(sun, t, p float64) float64 {
	return m.imbalanceAt(sun, t, p, elementary.Log(p))
}

// imbalanceAt is imbalance where lnp = ln(p/1 bar) is known.
func (m *Model) imbalanceAt(sun, t, p, lnp float64) float64 {
	return sun*(1-m.set.albedo.law.Planetary(t, p)) - m.set.radiation.law.Outgoing(t, p, lnp)
}

// balance inverts the energy balance: the lowest CO₂ pressure in bar at which
// temperature t is in balance with mean sunlight sun. low tells that even the
// least CO₂ is too warm, high that no CO₂ pressure is warm enough.
func (m *Model) balance(sun, t float64) (p float64, low, high bool) {
	p, low, high, _ = m.balanceMost(sun, t)
	return p, low, high
}

// balanceMost is balance; where no CO₂ pressure is warm enough, most is the
// largest imbalance of those tried, in W/m².
func (m *Model) balanceMost(sun, t float64) (p float64, low, high bool, most float64) {
	lo, hi := m.pressures()
	x0, x1 := elementary.Log(lo), elementary.Log(hi)
	g := func(x float64) float64 { return m.imbalanceAt(sun, t, elementary.Exp(x), x) }
	const parts = 16
	a, ga := x0, g(x0)
	if ga > 0 {
		return lo, true, false, 0
	}
	most = ga
	for i := 1; i <= parts; i++ {
		b := x0 + (x1-x0)*float64(i)/parts
		gb := g(b)
		if gb > 0 {
			return elementary.Exp(bracketed(g, a, b, ga, gb, 1e-13)), false, false, 0
		}
		a, ga, most = b, gb, math.Max(most, gb)
	}
	return hi, false, true, most
}

// balanceNear is balance where something is known of the logarithm of the
// pressure: it finds the same root while that lies within 0.02 of what is
// expected, or within 0.3 of near. NaN stands for nothing known.
func (m *Model) balanceNear(sun, t, near, expected float64) (p float64, low, high bool) {
	lo, hi := m.pressures()
	g := func(x float64) float64 { return m.imbalanceAt(sun, t, elementary.Exp(x), x) }
	x0, x1 := elementary.Log(lo), elementary.Log(hi)
	within := func(a, b float64) bool {
		if !(a > x0 && b < x1) {
			return false
		}
		ga, gb := g(a), g(b)
		if !(ga <= 0 && gb > 0) {
			return false
		}
		p = elementary.Exp(bracketed(g, a, b, ga, gb, 1e-13))
		return true
	}
	if !math.IsNaN(near) && g(x0) <= 0 && (within(expected-0.02, expected+0.02) || within(near-0.3, near+0.3)) {
		return p, false, false
	}
	return m.balance(sun, t)
}

// bracketed finds a root of f between a and b, where it has opposite signs, by
// the ITP method of Oliveira & Takahashi (2021), to |b − a| ≤ tol·max(1, |x|).
func bracketed(f func(float64) float64, a, b, fa, fb, tol float64) float64 {
	if fa == 0 {
		return a
	}
	if fb == 0 {
		return b
	}
	span := b - a
	k1 := 0.2 / math.Abs(span)
	eps := 0.5 * tol * math.Max(1, math.Max(math.Abs(a), math.Abs(b)))
	budget := math.Ceil(math.Log2(math.Abs(span)/(2*eps))) + 1
	for j := 0.0; math.Abs(b-a) > 2*eps && j <= budget; j++ {
		mid := 0.5 * (a + b)
		r := eps*math.Exp2(budget-j) - 0.5*math.Abs(b-a)
		delta := k1 * (b - a) * (b - a)
		xf := (fb*a - fa*b) / (fb - fa)
		sigma := math.Copysign(1, mid-xf)
		xt := mid
		if math.Abs(delta) <= math.Abs(mid-xf) {
			xt = xf + sigma*math.Abs(delta)
		}
		x := mid - sigma*r
		if math.Abs(xt-mid) <= r {
			x = xt
		}
		fx := f(x)
		if fx == 0 {
			return x
		}
		if (fx > 0) == (fb > 0) {
			b, fb = x, fx
		} else {
			a, fa = x, fx
		}
	}
	return 0.5 * (a + b)
}

// growth returns ∂(dT/dt)/∂T in W m⁻² K⁻¹ at fixed surface carbon: positive
// where the climate runs away from the state. Carbon is held, not CO₂: as the
// ocean warms it gives off CO₂, which moves the fold towards the warm side.
func (m *Model) growth(sun, t, p, c, alk float64) float64 {
	return fd.Derivative(func(x float64) float64 {
		p, _ := m.set.ocean.law.Pressure(c, alk, x)
		return m.imbalance(sun, x, p)
	}, t, &fd.Settings{Formula: fivePoint, Step: 1e-2})
}

// grows tells whether growth is positive, at half its cost.
func (m *Model) grows(sun, t, c, alk float64) bool {
	side := func(x float64) float64 {
		p, _ := m.set.ocean.law.Pressure(c, alk, x)
		return m.imbalance(sun, x, p)
	}
	const h = 1e-2 // K
	return side(t+h) >= side(t-h)
}

// steady is a state in energy balance at one age, with the sinks there.
type steady struct {
	row  record.Row // T, p, albedo, ice, sinks, surface carbon
	alk  float64    // mol
	grow float64    // W m⁻² K⁻¹ at fixed carbon and alkalinity
}

// steadyAt returns the state in balance at temperature t.
func (m *Model) steadyAt(d *memo, t float64) (s steady, low, high bool) {
	p, low, high := m.balance(d.sun, t)
	if low || high {
		return s, low, high
	}
	return m.steadyWith(d, t, p), false, false
}

// steadyWith completes a state that is in balance at temperature t and CO₂
// pressure p.
func (m *Model) steadyWith(d *memo, t, p float64) steady {
	s := m.sinksWith(d, t, p)
	s.grow = m.growth(d.sun, t, p, s.row.Surface, s.alk)
	return s
}

// sinksWith is steadyWith but for grow.
func (m *Model) sinksWith(d *memo, t, p float64) (s steady) {
	r := &s.row
	r.Age, r.Temperature, r.PCO2 = d.age, t, p
	r.Sunlight, r.LandFraction, r.Biology, r.Crust = 4*d.sun, d.land, d.biology, d.flow.Crust
	r.Albedo = m.set.albedo.law.Planetary(t, p)
	r.Ice = m.set.albedo.law.IceFraction(t)
	lnp := elementary.Log(p)
	weather := func(c, alk float64) {
		lnh := math.NaN()
		if m.acidic {
			_, lnh = m.set.ocean.law.Pressure(c, alk, t)
		}
		m.weather(r, lnp, lnh)
	}
	c, alk := m.carbonAt(p, t, m.ref.Total()*m.area)
	weather(c, alk)
	if m.pair != nil {
		c, alk = m.carbonAt(p, t, r.Land+r.Seafloor)
		if m.acidic {
			weather(c, alk)
		}
	}
	r.Surface, s.alk = c, alk
	return s
}

// growthAlong returns growth at temperature t along the energy balance; ok is
// false where no CO₂ inside the box balances.
func (m *Model) growthAlong(d *memo, t float64) (grow float64, ok bool) {
	p, low, high := m.balance(d.sun, t)
	if low || high {
		return 0, false
	}
	flux := m.ref.Total() * m.area
	c, alk := m.carbonAt(p, t, flux)
	return m.growth(d.sun, t, p, c, alk), true
}

// coldFold returns the temperature in K, at or below t, at which the warm branch
// ends: growth turns positive. ok is false when the branch does not end where
// CO₂ is inside the box of the radiation law.
func (m *Model) coldFold(d *memo, t float64) (fold float64, ok bool) {
	const stride = 1.5
	grow := func(x float64) (float64, bool) { return m.growthAlong(d, x) }
	a := t
	ga, ok := grow(a)
	if !ok {
		return 0, false
	}
	if ga > 0 {
		return a, true
	}
	for a > m.set.FrozenBelow {
		b := a - stride
		gb, ok := grow(b)
		if !ok {
			return 0, false
		}
		if gb > 0 {
			return bracketed(func(x float64) float64 { g, _ := grow(x); return g }, a, b, ga, gb, 1e-9), true
		}
		a, ga = b, gb
	}
	return 0, false
}

// radiationLimit returns the most sunlight S in W/m² that can be shed at CO₂
// pressure p by a surface not colder than t: the maximum of 4 F/(1 − A) over
// temperature inside the radiation law's box.
func (m *Model) radiationLimit(t, p float64) float64 {
	top := m.top()
	lnp := elementary.Log(p)
	at := func(x float64) float64 {
		return 4 * m.set.radiation.law.Outgoing(x, p, lnp) / (1 - m.set.albedo.law.Planetary(x, p))
	}
	const parts = 24
	best, bx := at(t), t
	for i := 1; i <= parts; i++ {
		x := t + (top-t)*float64(i)/parts
		if v := at(x); v > best {
			best, bx = v, x
		}
	}
	// A parabola through the best point and its neighbours.
	if h := (top - t) / parts; h > 0 && bx > t && bx < top {
		l, r := at(bx-h), at(bx+h)
		if den := l - 2*best + r; den < 0 {
			if v := at(bx + 0.5*h*(l-r)/den); v > best {
				best = v
			}
		}
	}
	return best
}

// top returns the temperature in K at which a hot history ends.
func (m *Model) top() float64 {
	if b := m.set.radiation.law.Box().T; b.Stated() {
		return b.Hi
	}
	return 380
}

// steep is more than the imbalance rises by as it gets colder by one kelvin, at
// any CO₂ pressure, whatever the laws, W m⁻² K⁻¹.
const steep = 10

// start finds the equilibrium a history starts from: at the start age
// everything but the interior is steady (surface, seafloor and continental
// carbon; the mantle holds the rest). It is reached from the warm side: of all
// such states the warmest stable one, or from the cold side the coldest.
// words says what was found.
func (m *Model) start() (y State, words string) {
	s := m.set
	y.MantleT, y.CoreT = s.interior.law.Start(s.Start)
	y.Water = s.OceanFraction * s.Mass
	d := m.drive(s.Start, y.MantleT, y.CoreT)
	total := m.content * s.Mass

	// What leaves the reservoirs of carbonate, per yr.
	in := outgas.Input{Age: m.hold.at(driveSources, s.Start), Crust: d.flow.Crust, Dilution: m.dilution, Area: m.area, Scale: m.scale}
	in.Seafloor, in.Continental = 1e20, 1e20
	f := s.sources.law.Fluxes(&in)
	ksub, kcont := f.Subducted/1e20, (f.Metamorphic+f.Foundered)/1e20

	// fill completes a state in energy balance by the steady reservoirs and
	// returns the imbalance of the surface, mol/yr.
	fill := func(st *steady) (State, float64) {
		z := y
		z.T, z.Surface, z.Alk = st.row.Temperature, st.row.Surface, st.alk
		deposit := m.deposited * st.row.Land
		share := func(flux, k float64) float64 {
			if k <= 0 {
				return 0 // nothing leaves the reservoir: it starts empty
			}
			return flux / k
		}
		z.Seafloor = share(st.row.Seafloor+deposit, ksub)
		z.Continental = share(st.row.Land-deposit, kcont)
		z.Mantle = total - z.Surface - z.Seafloor - z.Continental
		in.Mantle, in.Seafloor, in.Continental = z.Mantle, z.Seafloor, z.Continental
		g := s.sources.law.Fluxes(&in)
		return z, g.Ridge + g.Arc + g.Metamorphic - st.row.Land - st.row.Seafloor
	}

	lo, hi := math.Max(s.FrozenBelow-90, s.radiation.law.Box().T.Lo+1), m.top()-1
	const step = 0.5 // K
	// The last two balances, of which the second is the newer, tell where to
	// look for the next.
	nan := math.NaN()
	lastT, lastX := [2]float64{nan, nan}, [2]float64{nan, nan} // T and ln p
	// at completes the state in balance at t and returns the imbalance of the
	// surface; hot tells that no CO₂ is enough for t.
	at := func(t float64) (z State, r float64, ok, hot bool) {
		expected := lastX[1] + (lastX[1]-lastX[0])/(lastT[1]-lastT[0])*(t-lastT[1])
		p, low, high := m.balanceNear(d.sun, t, lastX[1], expected)
		if low || high {
			return z, 0, false, high
		}
		if t != lastT[1] {
			lastT, lastX = [2]float64{lastT[1], t}, [2]float64{lastX[1], elementary.Log(p)}
		}
		st := m.sinksWith(d, t, p)
		z, r = fill(&st)
		return z, r, true, false
	}
	stable := func(z *State) bool { return !m.grows(d.sun, z.T, z.Surface, z.Alk) }
	// scan walks from one temperature to another and returns the first steady
	// stable state; failing that, the last stable state before the branch ends.
	scan := func(from, to float64, good func(t float64) bool) (best State, found, any bool) {
		h := math.Copysign(step, to-from)
		var pt, pr float64
		have := false
		for t := from; (to-t)*h >= 0; t += h {
			if !good(t) {
				have = false
				continue
			}
			z, r, ok, hot := at(t)
			if !ok || !stable(&z) {
				have = false
				if hot && h < 0 {
					// No CO₂ makes up for the imbalance so soon.
					_, _, _, most := m.balanceMost(d.sun, t)
					t += h * math.Floor(-most/(steep*step))
				}
				// The end of the warm branch; far above ice another stretch of
				// it may follow, where the hot side folds back on itself.
				if any && h < 0 && t <= s.ThawedAbove {
					return best, false, true
				}
				continue
			}
			if have && (pr < 0) != (r < 0) && pr*h > 0 {
				x := bracketed(func(x float64) float64 { _, r, _, _ := at(x); return r }, pt, t, pr, r, 1e-10)
				if z, _, ok, _ := at(x); ok && stable(&z) && z.Mantle > 0 {
					return z, true, true
				}
			}
			if z.Mantle > 0 {
				best, any = z, true
			}
			pt, pr, have = t, r, true
		}
		return best, false, any
	}
	warm := func(t float64) bool { return t >= s.FrozenBelow }
	all := func(float64) bool { return true }
	if s.StartSide == "cold" {
		if z, found, any := scan(lo, hi, all); found {
			return z, "an equilibrium reached from the cold side"
		} else if any {
			return z, "no equilibrium at the start age: the coldest stable climate"
		}
	}
	z, found, any := scan(hi, lo, warm)
	switch {
	case found:
		return z, "an equilibrium reached from the warm side"
	case any:
		// No steady carbon cycle on the warm branch: start at its cold end,
		// where weathering is as weak as it gets, if sources are still weaker.
		return z, "no warm equilibrium at the start age: the end of the warm branch"
	}
	// Sunlight above what a warm surface can shed with the least CO₂ leaves no
	// warm climate either; from the warm side that is a hot planet, even where a
	// frozen one could reflect as much.
	if p, _ := m.pressures(); s.StartSide != "cold" && m.imbalance(d.sun, math.Min(s.Strato.T, m.top())-1, p) > 0 {
		return m.hot(y, total), "no warm climate at the start age: sunlight exceeds what a warm surface can shed"
	}
	z, found, any = scan(s.FrozenBelow, lo, all)
	if found || any {
		return z, "no warm climate at the start age: the planet is born frozen"
	}
	z = m.bare(y, d, total)
	if z.T < s.FrozenBelow {
		return z, "no warm climate at the start age: the planet is born frozen"
	}
	return z, "no climate in balance at the start age inside the radiation law's range"
}

// least is the least CO₂ pressure a history starts with, bar: just above the
// edge of the radiation law's box, so that the start does not sit on a threshold.
func (m *Model) least() float64 {
	p, _ := m.pressures()
	return 1.001 * p
}

// hot is a surface that no radiation inside the law's box can cool: it starts,
// and ends, at the hot edge, with the least CO₂.
func (m *Model) hot(y State, total float64) State {
	p := m.least()
	y.T = m.top()
	y.Surface, y.Alk = m.carbonAt(p, y.T, m.ref.Total()*m.area)
	y.Mantle = total - y.Surface
	return y
}

// bare relaxes the temperature from the cold side at the least CO₂ pressure of
// the radiation law's box, below which sunlight alone sets the climate. It is
// where a history starts when no pressure inside the box is in balance; at the
// edges of the box it is over at once.
func (m *Model) bare(y State, d *memo, total float64) State {
	p := m.least()
	t, top := math.Max(150, m.set.radiation.law.Box().T.Lo), m.top()
	for ; t < top; t += 0.5 {
		if m.imbalance(d.sun, t, p) <= 0 {
			break
		}
	}
	if t >= top {
		return m.hot(y, total)
	}
	y.T = t
	y.Surface, y.Alk = m.carbonAt(p, t, m.ref.Total()*m.area)
	y.Mantle = total - y.Surface
	return y
}

// strength holds how strongly the thermostat acts at a state.
type strength struct {
	gain     float64 // d ln W/d ln p along the energy balance
	response float64 // e-folding time of surface carbon, yr
}

// strength differentiates the right-hand side at a state: T follows carbon,
//
//	λ = ∂Ċ/∂C − (∂Ċ/∂T)(∂Ṫ/∂C)/(∂Ṫ/∂T),  response = −1/λ
//
// and the gain takes W = W_land + W_sea along the same line. Where alkalinity is a
// state, λ is the slower of the two rates at which carbon and alkalinity return,
// and the gain is taken along its direction.
func (m *Model) strength(age float64, y State) strength {
	type rates struct{ heat, carbon, alk, lnW, lnP float64 }
	eval := func(t, c, a float64) rates {
		z := y
		z.T, z.Surface, z.Alk = t, c, a
		var r record.Row
		m.diagnose(&r, age, &z)
		w := r.Land + r.Seafloor
		return rates{r.Absorbed - r.Outgoing, r.Imbalance, 2 * (w - r.Burial), elementary.Log(w), elementary.Log(r.PCO2)}
	}
	// Slopes by central differences, carbon and alkalinity by their logarithms.
	const step = 1e-4
	slope := func(dt, dc, da float64) rates {
		up := eval(y.T+step*dt, y.Surface*(1+step*dc), y.Alk*(1+step*da))
		dn := eval(y.T-step*dt, y.Surface*(1-step*dc), y.Alk*(1-step*da))
		const k = 1 / (2 * step)
		return rates{k * (up.heat - dn.heat), k * (up.carbon - dn.carbon), k * (up.alk - dn.alk), k * (up.lnW - dn.lnW), k * (up.lnP - dn.lnP)}
	}
	byT := slope(1, 0, 0)
	// along lets T follow.
	along := func(x rates) rates {
		f := -x.heat / byT.heat
		return rates{0, x.carbon + f*byT.carbon, x.alk + f*byT.alk, x.lnW + f*byT.lnW, x.lnP + f*byT.lnP}
	}
	c := along(slope(0, 1, 0))
	if m.pair == nil {
		return strength{gain: c.lnW / c.lnP, response: -y.Surface / c.carbon}
	}
	a := along(slope(0, 0, 1))
	// The rates of ln C and ln A: a matrix whose slower eigenvalue counts.
	cc, ca, ac, aa := c.carbon/y.Surface, a.carbon/y.Surface, c.alk/y.Alk, a.alk/y.Alk
	half, det := 0.5*(cc+aa), cc*aa-ca*ac
	disc := half*half - det
	if disc < 0 {
		return strength{gain: math.NaN(), response: -1 / half} // a damped oscillation
	}
	fast := half + math.Copysign(math.Sqrt(disc), half)
	slow := det / fast
	// Its direction: (cc − λ) + ca·v = 0.
	v := (slow - cc) / ca
	return strength{gain: (c.lnW + v*a.lnW) / (c.lnP + v*a.lnP), response: -1 / slow}
}

// sensitivityK returns the warming per doubling of CO₂ at the reference state, K;
// NaN where that state does not damp.
func (m *Model) sensitivityK() float64 {
	s := m.set
	k, err := climate.Sensitivity(s.radiation.law, s.albedo.law, climate.Reference{T: s.RefT, P: s.RefP, Sun: s.RefSun / 4})
	if err != nil {
		return math.NaN()
	}
	return k
}

// Response returns what the radiation and albedo laws make of a doubling of CO₂
// at the reference state: forcing in W/m² and warming in K at fixed sunlight.
func (m *Model) Response() (forcing, sensitivity float64) {
	s := m.set
	return climate.Forcing(s.radiation.law, climate.Reference{T: s.RefT, P: s.RefP, Sun: s.RefSun / 4}), m.sensitivityK()
}

// gyr converts years for messages.
func gyr(age float64) float64 { return age / units.Gyr }
