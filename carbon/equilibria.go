package carbon

import (
	"errors"
	"fmt"
	"math"
	"sort"

	"gonum.org/v1/gonum/diff/fd"

	"cycle/carbon/interior"
	"cycle/carbon/record"
	"cycle/carbon/units"
)

// Conditions are what the steady states of climate and carbon depend on
// besides the laws.
type Conditions struct {
	Age      float64 // of the star, yr
	Sunlight float64 // S, W/m²
	Land     float64 // land fraction, relative
	Biology  float64 // biological enhancement, relative
	Crust    float64 // crust production per area, relative
}

// ConditionsOf returns the conditions of a row of a history.
func ConditionsOf(r *record.Row) Conditions {
	return Conditions{Age: r.Age, Sunlight: r.Sunlight, Land: r.LandFraction, Biology: r.Biology, Crust: r.Crust}
}

func (c *Conditions) memo() *memo {
	return &memo{age: c.Age, sun: c.Sunlight / 4, land: c.Land, biology: c.Biology, flow: interior.Flow{Crust: c.Crust}}
}

// Equilibria finds the steady states of climate and carbon under fixed
// conditions.
//
// In the global mean they are a graph over temperature. At a temperature T the
// energy balance (S/4)(1 − A(T, p)) = F(T, p) has no root p, one, or two: more
// CO₂ first warms, but a thick atmosphere reflects. Each root is a sheet. The
// outgassing that keeps the state is what weathers there, V(T) = W_l + W_s. A
// climate is stable where the growth rate of temperature at fixed surface
// carbon and alkalinity is negative; where it vanishes is a fold, at which the
// climate must jump. The carbon cycle closed on a stable climate is stable
// where V rises with surface carbon.
//
// It is not safe for use by several goroutines.
type Equilibria struct {
	m     *Model
	d     *memo
	cond  Conditions
	curve []node // sampled, in order of sheet and temperature
}

// node is one sampled steady climate.
type node struct {
	steady
	sheet int
	t     float64
}

func (n *node) v() float64 { return n.row.Land + n.row.Seafloor }

// sampling of the curve over temperature, K.
const curveStep = 0.5

// NewEquilibria binds a copy of the setup's laws and samples the curve.
func NewEquilibria(s *Setup, c Conditions) (*Equilibria, error) {
	for name, x := range map[string]float64{"sunlight": c.Sunlight, "crust production": c.Crust} {
		if !(x > 0) || math.IsInf(x, 0) {
			return nil, fmt.Errorf("carbon: %s %v must be positive", name, x)
		}
	}
	if !(c.Land >= 0) || !(c.Biology >= 0) {
		return nil, errors.New("carbon: land and biology must not be negative")
	}
	m, err := NewModel(s.Clone())
	if err != nil {
		return nil, err
	}
	return m.equilibria(c), nil
}

func (m *Model) equilibria(c Conditions) *Equilibria {
	e := &Equilibria{m: m, d: c.memo(), cond: c}
	lo, hi := e.span()
	n := int(math.Ceil((hi - lo) / curveStep))
	var sheets [2][]node
	for i := 0; i <= n; i++ {
		t := lo + (hi-lo)*float64(i)/float64(n)
		xs, k := m.balances(e.d.sun, t)
		for _, x := range xs {
			if k < len(sheets) {
				sheets[k] = append(sheets[k], e.node(k, t, math.Exp(x)))
			}
			k++
		}
	}
	e.curve = append(sheets[0], sheets[1]...)
	return e
}

// span returns the temperatures between which steady states are looked for.
func (e *Equilibria) span() (lo, hi float64) {
	lo, hi = 150, e.m.top()
	if b := e.m.set.radiation.law.Box().T; b.Stated() {
		lo = math.Max(lo, b.Lo)
	}
	return lo, hi
}

// balances returns all ln p at which temperature t is in balance with mean
// sunlight sun, in rising order, and the sheet of the first: even where more
// CO₂ warms, odd where it cools.
func (m *Model) balances(sun, t float64) (lnp []float64, first int) {
	lo, hi := m.pressures()
	x0, x1 := math.Log(lo), math.Log(hi)
	g := func(x float64) float64 { return m.imbalance(sun, t, math.Exp(x)) }
	if g(x0) > 0 {
		first = 1
	}
	return rootsOn(g, x0, x1, 24, 1e-13), first
}

// rootsOn returns the roots of f between a and b in order, to tol: sign changes
// on a grid of n parts, and pairs of roots about an extremum between its points.
func rootsOn(f func(float64) float64, a, b float64, n int, tol float64) []float64 {
	xs, fs := make([]float64, n+1), make([]float64, n+1)
	for i := range xs {
		xs[i] = a + (b-a)*float64(i)/float64(n)
		fs[i] = f(xs[i])
	}
	return rootsOf(f, xs, fs, tol)
}

// rootsOf is rootsOn for a function sampled already; NaN samples end a stretch.
func rootsOf(f func(float64) float64, xs, fs []float64, tol float64) []float64 {
	var out []float64
	for i := range xs {
		if fs[i] == 0 {
			out = append(out, xs[i])
		}
		if i == 0 {
			continue
		}
		if fs[i-1] < 0 && fs[i] > 0 || fs[i-1] > 0 && fs[i] < 0 {
			out = append(out, bracketed(f, xs[i-1], xs[i], fs[i-1], fs[i], tol))
		}
		if i == 1 {
			continue
		}
		// An extremum that points to zero without a change of sign.
		l, c, r := fs[i-2], fs[i-1], fs[i]
		if l*c > 0 && c*r > 0 && math.Abs(c) <= math.Abs(l) && math.Abs(c) <= math.Abs(r) {
			sign := math.Copysign(1, c)
			x, fx := lowest(func(x float64) float64 { return sign * f(x) }, xs[i-2], xs[i], 1e-9)
			if fx < 0 {
				out = append(out, bracketed(f, xs[i-2], x, l, sign*fx, tol), bracketed(f, x, xs[i], sign*fx, r, tol))
			}
		}
	}
	sort.Float64s(out)
	return out
}

// lowest returns the lowest point of f between a and b by golden section; it
// stops early at a negative value.
func lowest(f func(float64) float64, a, b, tol float64) (x, fx float64) {
	const g = 0.6180339887498949
	c, d := b-g*(b-a), a+g*(b-a)
	fc, fd := f(c), f(d)
	for math.Abs(b-a) > tol*math.Max(1, math.Abs(a)) && fc >= 0 && fd >= 0 {
		if fc < fd {
			b, d, fd = d, c, fc
			c = b - g*(b-a)
			fc = f(c)
		} else {
			a, c, fc = c, d, fd
			d = a + g*(b-a)
			fd = f(d)
		}
	}
	if fc < fd {
		return c, fc
	}
	return d, fd
}

// turn is a local extremum.
type turn struct {
	x, f float64
	max  bool
}

// turnsOf finds the local extrema of f between a and b on a grid of n parts:
// the folds of whatever f is plotted against. Where f is smooth an extremum is
// a root of its derivative; where it jumps or has a corner it is closed in by
// golden section.
func turnsOf(f func(float64) float64, a, b float64, n int) []turn {
	var out []turn
	h := (b - a) / float64(n)
	at := func(i int) float64 { return a + h*float64(i) }
	fs := make([]float64, n+1)
	for i := range fs {
		fs[i] = f(at(i))
	}
	for i := 1; i < n; i++ {
		l, c, r := fs[i-1], fs[i], fs[i+1]
		var t turn
		switch {
		case c > l && c >= r:
			t.max = true
		case c < l && c <= r:
		default:
			continue
		}
		sign := 1.0
		if t.max {
			sign = -1
		}
		g := func(x float64) float64 { return sign * f(x) }
		t.x = golden(g, at(i-1), at(i+1), 1e-12)
		// Polish on the derivative where it changes sign smoothly.
		w := 0.05 * h
		slope := func(x float64) float64 { return slope5(f, x, w) }
		lo, hi := t.x-2*w, t.x+2*w
		if sl, sh := slope(lo), slope(hi); sl*sh < 0 && lo-2*w > a && hi+2*w < b {
			x := bracketed(slope, lo, hi, sl, sh, 1e-13)
			if sign*f(x) <= sign*f(t.x)+1e-12*math.Abs(f(t.x)) {
				t.x = x
			}
		}
		t.f = f(t.x)
		out = append(out, t)
	}
	return out
}

// golden returns where f is least between a and b.
func golden(f func(float64) float64, a, b, tol float64) float64 {
	const g = 0.6180339887498949
	c, d := b-g*(b-a), a+g*(b-a)
	fc, fd := f(c), f(d)
	for i := 0; i < 90 && math.Abs(b-a) > tol*math.Max(1, math.Abs(a)+math.Abs(b)); i++ {
		if fc < fd {
			b, d, fd = d, c, fc
			c = b - g*(b-a)
			fc = f(c)
		} else {
			a, c, fc = c, d, fd
			d = a + g*(b-a)
			fd = f(d)
		}
	}
	if fc < fd {
		return c
	}
	return d
}

// fivePoint is the central difference of fourth order.
var fivePoint = fd.Formula{
	Stencil:    []fd.Point{{Loc: -2, Coeff: 1.0 / 12}, {Loc: -1, Coeff: -2.0 / 3}, {Loc: 1, Coeff: 2.0 / 3}, {Loc: 2, Coeff: -1.0 / 12}},
	Derivative: 1, Step: 1e-3,
}

// slope5 is df/dx by the formula of fourth order with step h.
func slope5(f func(float64) float64, x, h float64) float64 {
	return fd.Derivative(f, x, &fd.Settings{Formula: fivePoint, Step: h})
}

// node completes a climate in balance at temperature t and pressure p.
func (e *Equilibria) node(sheet int, t, p float64) node {
	return node{steady: e.m.steadyWith(e.d, t, p), sheet: sheet, t: t}
}

// at returns the steady climate of a sheet at temperature t.
func (e *Equilibria) at(sheet int, t float64) (node, bool) {
	xs, first := e.m.balances(e.d.sun, t)
	if i := sheet - first; i >= 0 && i < len(xs) {
		return e.node(sheet, t, math.Exp(xs[i])), true
	}
	return node{}, false
}

// along returns a function of the temperature on a sheet, NaN off it.
func (e *Equilibria) along(sheet int, get func(*node) float64) func(float64) float64 {
	return func(t float64) float64 {
		n, ok := e.at(sheet, t)
		if !ok {
			return math.NaN()
		}
		return get(&n)
	}
}

// stretches cuts the curve where a sheet ends or begins.
func (e *Equilibria) stretches() [][]node {
	var out [][]node
	for i := 0; i < len(e.curve); {
		j := i + 1
		for j < len(e.curve) && e.curve[j].sheet == e.curve[i].sheet && e.curve[j].t-e.curve[j-1].t < 1.5*curveStep {
			j++
		}
		out = append(out, e.curve[i:j])
		i = j
	}
	return out
}

func sampled(st []node, get func(*node) float64) (xs, fs []float64) {
	for i := range st {
		xs = append(xs, st[i].t)
		fs = append(fs, get(&st[i]))
	}
	return xs, fs
}

// Folds returns the states at which a climate loses its stability at fixed
// surface carbon and alkalinity, in order of sheet and temperature.
func (e *Equilibria) Folds() []record.Fold {
	grow := func(n *node) float64 { return n.grow }
	var out []record.Fold
	for _, st := range e.stretches() {
		xs, fs := sampled(st, grow)
		sheet := st[0].sheet
		for _, t := range rootsOf(e.along(sheet, grow), xs, fs, 1e-12) {
			n, ok := e.at(sheet, t)
			if !ok {
				continue
			}
			d := 1e-3
			warmer, ok := e.at(sheet, t+d)
			f := record.Fold{Steady: e.steady(&n), Name: record.FoldCold, GrowthWm2K: n.grow}
			if ok && warmer.grow > 0 {
				f.Name = record.FoldHot
				if t < e.m.set.ThawedAbove && n.row.Ice > 0.3 {
					f.Name = record.FoldThaw
				}
			}
			out = append(out, f)
		}
	}
	return out
}

// States returns all steady states, stable and unstable, at an outgassing of v
// mol/yr, from cold to warm.
func (e *Equilibria) States(v float64) []record.Steady {
	excess := func(n *node) float64 { return math.Log(n.v() / v) }
	var out []record.Steady
	for _, st := range e.stretches() {
		xs, fs := sampled(st, excess)
		sheet := st[0].sheet
		for _, t := range rootsOf(e.along(sheet, excess), xs, fs, 1e-14) {
			n, ok := e.at(sheet, t)
			if !ok || n.row.SupplyUse >= 1 && n.row.Seafloor == 0 {
				continue // weathering has reached its limit to the last bit and does not respond
			}
			out = append(out, e.steady(&n))
		}
	}
	sort.SliceStable(out, func(i, j int) bool { return out[i].TemperatureK < out[j].TemperatureK })
	return out
}

// slow returns dV/dC along the sheet at a node, 1/yr: the rate at which a stable
// climate's surface carbon goes back to its balance.
func (e *Equilibria) slow(n *node) float64 {
	const h = 5e-3
	v := slope5(e.along(n.sheet, func(n *node) float64 { return n.v() }), n.t, h)
	c := slope5(e.along(n.sheet, func(n *node) float64 { return n.row.Surface }), n.t, h)
	return v / c
}

// steady puts a node into words and units of the record.
func (e *Equilibria) steady(n *node) record.Steady {
	s := record.Steady{TemperatureK: n.t, PCO2Bar: n.row.PCO2, Outgassing: n.v() / 1e12, Land: n.row.Land / 1e12, Seafloor: n.row.Seafloor / 1e12,
		SurfaceEmol: n.row.Surface / 1e18, Ice: n.row.Ice, SupplyUse: n.row.SupplyUse, Sheet: n.sheet,
		GrowthPerYr: n.grow * units.Year / e.m.set.HeatCapacity, ResponseKyr: math.NaN()}
	if r := e.slow(n); !math.IsNaN(r) && !math.IsInf(r, 0) && r != 0 {
		s.ResponseKyr = 1e-3 / r
		s.Stable = n.grow < 0 && r > 0
	} else {
		s.Stable = n.grow < 0
	}
	s.Climate = n.grow < 0
	return s
}

// Jacobian returns the derivatives of (dT/dt, dC/dt) in K/yr and mol/yr with
// respect to T (K) and surface carbon (mol) at a steady state, at fixed
// outgassing and alkalinity:
//
//	[ ∂Ṫ/∂T  ∂Ṫ/∂C ]
//	[ ∂Ċ/∂T  ∂Ċ/∂C ]
func (e *Equilibria) Jacobian(s *record.Steady) [2][2]float64 {
	n := e.node(s.Sheet, s.TemperatureK, s.PCO2Bar)
	m := e.m
	heat := func(t, c float64) float64 {
		return m.imbalance(e.d.sun, t, m.set.ocean.law.Solve(c, n.alk, t).P) * units.Year / m.set.HeatCapacity
	}
	sinks := func(t, c float64) float64 {
		chem := m.set.ocean.law.Solve(c, n.alk, t)
		r := n.row
		r.Temperature, r.PCO2 = t, chem.P
		r.Albedo, r.Ice = m.set.albedo.law.Planetary(t, chem.P), m.set.albedo.law.IceFraction(t)
		m.weather(&r, math.Log(chem.P), math.Log(chem.H))
		return -r.Land - r.Seafloor
	}
	t0, c0 := s.TemperatureK, n.row.Surface
	part := func(f func(t, c float64) float64) [2]float64 {
		return [2]float64{
			slope5(func(t float64) float64 { return f(t, c0) }, t0, 1e-2),
			slope5(func(x float64) float64 { return f(t0, c0*(1+x)) }, 0, 1e-4) / c0,
		}
	}
	return [2][2]float64{part(heat), part(sinks)}
}

// warmBranch returns the stable warm climates of the sheet on which CO₂ warms,
// from the end of the branch up to the hottest below the moist threshold: the
// longest stretch, where the hot side folds back on itself. why says why there is
// none: "hot" when even the least CO₂ is too warm, "cold" when no CO₂ is warm
// enough or no warm climate is stable.
func (e *Equilibria) warmBranch() (branch []node, why string) {
	s := e.m.set
	moist := math.Min(s.Strato.T, e.m.top())
	warmest := -1
	from := -1
	for i := 0; i <= len(e.curve); i++ {
		var n *node
		if i < len(e.curve) && e.curve[i].sheet == 0 && e.curve[i].t <= moist {
			n = &e.curve[i]
			warmest = i
		}
		in := n != nil && n.t >= s.FrozenBelow && n.grow < 0
		if from >= 0 && (!in || n.t-e.curve[i-1].t > 1.5*curveStep) {
			if i-from > len(branch) {
				branch = e.curve[from:i]
			}
			from = -1
		}
		if in && from < 0 {
			from = i
		}
	}
	if branch != nil {
		return branch, ""
	}
	// Nothing stable and warm: is the least CO₂ too warm, or the most too cold?
	lo, _ := e.m.pressures()
	if e.m.imbalance(e.d.sun, moist, lo) > 0 && (warmest < 0 || e.curve[warmest].t < moist-2*curveStep) {
		return nil, "hot"
	}
	return nil, "cold"
}

// Boundaries returns the limits that decide the fate under these conditions.
func (e *Equilibria) Boundaries() record.Boundaries {
	m, s := e.m, e.m.set
	nan := math.NaN()
	b := record.Boundaries{SunlightWm2: e.cond.Sunlight, WarmNeeds: nan, ThawsAbove: nan, HotAbove: nan, SupplyLimit: nan, CondensesAbove: nan, CondensesBelow: nan, RadiationLimit: nan}
	if s.supply.Limit > 0 {
		b.SupplyLimit = s.supply.Limit * m.area * e.d.land / 1e12
	}
	least, _ := m.pressures()
	b.RadiationLimit = m.radiationLimit(s.ThawedAbove, least)
	grow := func(n *node) float64 { return n.grow }
	branch, why := e.warmBranch()
	b.NoWarm = why
	moist := math.Min(s.Strato.T, m.top())
	if why == "" {
		cold, hot := &branch[0], &branch[len(branch)-1]
		// The cold end: a fold, or no CO₂ left to lose.
		if f, ok := e.foldBetween(0, cold.t-curveStep, cold.t, grow); ok {
			b.WarmFold = f
			b.WarmNeeds = f.Outgassing
		} else if cold.t-curveStep < s.FrozenBelow && cold.t >= s.FrozenBelow {
			b.WarmFold = e.steady(cold) // no fold: the branch passes into ice without a jump
			b.WarmNeeds = b.WarmFold.Outgassing
		} else {
			b.WarmNeeds = 0
			b.WarmFold = e.steady(cold)
		}
		// A dip of V along the branch lets a warm state live on below the fold's.
		for i := range branch {
			b.WarmNeeds = math.Min(b.WarmNeeds, branch[i].v()/1e12)
		}
		// The hot end.
		switch {
		case hot.t >= moist-1.01*curveStep:
			b.HotWhy = string(record.MoistGreen)
			if n, ok := e.at(0, moist); ok && n.grow < 0 {
				b.HotEnd = e.steady(&n)
			} else {
				b.HotEnd = e.steady(hot)
			}
		default:
			if f, ok := e.foldBetween(0, hot.t, hot.t+curveStep, grow); ok {
				b.HotWhy, b.HotEnd = string(record.RunawayGreen), f
			} else {
				b.HotWhy, b.HotEnd = string(record.BeyondRange), e.steady(hot)
				// The most CO₂ the radiation law knows is in balance in between.
				_, most := m.pressures()
				f := func(t float64) float64 { return m.imbalance(e.d.sun, t, most) }
				if fa, fb := f(hot.t), f(hot.t+curveStep); fa > 0 && fb < 0 {
					n := e.node(0, bracketed(f, hot.t, hot.t+curveStep, fa, fb, 1e-12), most)
					b.HotEnd = e.steady(&n)
				}
				if p, _ := m.pressures(); m.imbalance(e.d.sun, hot.t+curveStep, p) > 0 {
					b.HotWhy = string(record.RunawayGreen)
				}
			}
		}
		b.HotAbove = 0
		for i := range branch {
			b.HotAbove = math.Max(b.HotAbove, branch[i].v()/1e12)
		}
		b.HotAbove = math.Max(b.HotAbove, b.HotEnd.Outgassing)
	}
	e.frozenEnd(&b)
	return b
}

// frozenEnd fills how the frozen branch ends for a planet that falls onto it
// from the end of its warm branch, keeping its carbon.
func (e *Equilibria) frozenEnd(b *record.Boundaries) {
	s := e.m.set
	condense := s.condensation()
	ratio := func(n *node) float64 { return math.Log(n.row.PCO2 / condense(n.t-s.ColdContrast)) }
	grow := func(n *node) float64 { return n.grow }
	// The stable frozen stretch with the most carbon.
	var cold []node
	for i := 0; i < len(e.curve) && e.curve[i].sheet == 0 && e.curve[i].t < s.ThawedAbove; i++ {
		n := &e.curve[i]
		switch {
		case n.grow >= 0:
			continue
		case len(cold) > 0 && n.t-cold[len(cold)-1].t > 1.5*curveStep:
			if n.t >= s.FrozenBelow {
				continue // a stable climate beyond the jump
			}
			cold = cold[:0]
		}
		cold = append(cold, *n)
	}
	if len(cold) == 0 {
		return
	}
	land := 0
	if b.NoWarm == "" && b.WarmFold.SurfaceEmol > 0 {
		for land+1 < len(cold) && cold[land].row.Surface < b.WarmFold.SurfaceEmol*1e18 {
			land++
		}
	}
	// Carbon gathers from the landing on, up to the end of the branch.
	last := &cold[len(cold)-1]
	b.ThawWhy = string(record.BeyondRange)
	b.ThawFold = e.steady(last)
	if f, ok := e.foldBetween(0, last.t, last.t+curveStep, grow); ok {
		b.ThawWhy, b.ThawFold = "fold", f
	} else if last.t >= s.ThawedAbove-1.01*curveStep {
		b.ThawWhy = "no jump"
	}
	top := len(cold) - 1
	for i := land; i < len(cold); i++ {
		if ratio(&cold[i]) < 0 {
			continue
		}
		b.ThawWhy, b.ThawFold, top = string(record.Condensation), e.steady(&cold[i]), i
		if i > land {
			f := e.along(0, ratio)
			if c, ok := e.at(0, bracketed(f, cold[i-1].t, cold[i].t, ratio(&cold[i-1]), ratio(&cold[i]), 1e-12)); ok {
				b.ThawFold = e.steady(&c)
			}
		}
		b.CondensesAbove = b.ThawFold.Outgassing
		break
	}
	b.ThawsAbove = b.ThawFold.Outgassing
	for i := land; i < top; i++ {
		b.ThawsAbove = math.Max(b.ThawsAbove, cold[i].v()/1e12)
	}
	// Or carbon is lost from the landing on, down to where the coldest place
	// condenses CO₂ because the planet cools faster than the air thins.
	for i := land; i > 0; i-- {
		if ratio(&cold[i]) < 0 && ratio(&cold[i-1]) >= 0 {
			b.CondensesBelow = cold[i].v() / 1e12
			break
		}
	}
}

// foldBetween returns the state on a sheet at which a quantity changes sign
// between two temperatures.
func (e *Equilibria) foldBetween(sheet int, a, b float64, get func(*node) float64) (record.Steady, bool) {
	f := e.along(sheet, get)
	fa, fb := f(a), f(b)
	if !(fa < 0 && fb > 0 || fa > 0 && fb < 0) {
		return record.Steady{}, false
	}
	n, ok := e.at(sheet, bracketed(f, a, b, fa, fb, 1e-12))
	if !ok {
		return record.Steady{}, false
	}
	return e.steady(&n), true
}

// Fate says what the boundaries make of an outgassing of v mol/yr for a planet
// that starts warm.
func (e *Equilibria) Fate(b *record.Boundaries, v float64) record.Kind {
	x := v / 1e12
	if b.NoWarm == "hot" {
		return record.RunawayGreen
	}
	if b.NoWarm == "" {
		switch {
		case x > b.HotAbove:
			return record.Kind(b.HotWhy)
		case x >= b.WarmNeeds:
			return record.Temperate
		}
	}
	switch {
	case x < b.CondensesBelow:
		return record.Condensation
	case x < b.ThawsAbove:
		return record.Snowball
	case b.ThawWhy == string(record.Condensation):
		return record.Condensation
	case b.ThawWhy == string(record.BeyondRange):
		return record.Snowball // still frozen where the radiation law ends
	case b.ThawWhy == "":
		return record.BeyondRange // no frozen climate either
	}
	return record.LimitCycles
}

// Record puts the curve, its folds, the boundaries and the steady states at
// the given outgassing (mol/yr; none when it is not positive) together.
func (e *Equilibria) Record(v float64) *record.Equilibria {
	out := &record.Equilibria{AgeGyr: gyr(e.cond.Age), SunlightWm2: e.cond.Sunlight, Land: e.cond.Land, Biology: e.cond.Biology, Crust: e.cond.Crust,
		Outgassing: v / 1e12, Folds: e.Folds(), Boundaries: e.Boundaries()}
	for _, st := range e.stretches() {
		for i := range st {
			n := &st[i]
			p := record.CurvePoint{TemperatureK: n.t, PCO2Bar: n.row.PCO2, Outgassing: n.v() / 1e12, Sheet: n.sheet, Climate: n.grow < 0}
			j, k := max(i-1, 0), min(i+1, len(st)-1)
			p.Stable = p.Climate && (st[k].v()-st[j].v())*(st[k].row.Surface-st[j].row.Surface) > 0
			out.Curve = append(out.Curve, p)
		}
	}
	if v > 0 {
		out.States = e.States(v)
	}
	return out
}

// SunFolds returns the sunlight S in W/m² at which a climate at fixed CO₂
// pressure p (bar) loses its stability, with the temperatures: the turns of
// S(T) = 4 F/(1 − A).
func (m *Model) sunFolds(p float64) []turn {
	lnp := math.Log(p)
	lo, hi := 150.0, m.top()
	if b := m.set.radiation.law.Box().T; b.Stated() {
		lo = b.Lo
	}
	return turnsOf(func(t float64) float64 {
		return 4 * m.set.radiation.law.Outgoing(t, p, lnp) / (1 - m.set.albedo.law.Planetary(t, p))
	}, lo, hi, int((hi-lo)/curveStep))
}
