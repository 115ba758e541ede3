package carbon

import (
	"context"
	"errors"
	"fmt"
	"math"

	"cycle/carbon/record"
	"cycle/carbon/units"
	"cycle/carbon/weathering"
	"cycle/ode"
	"cycle/ode/elementary"
)

// Reasons for which a history ends.
const (
	endTime     = "reached the end of the history"
	endTable    = "the table of the star's luminosity ends"
	endStar     = "the star left the main sequence"
	endHot      = "the surface left the radiation law's range on the hot side"
	endCold     = "the surface left the radiation law's range on the cold side"
	endDense    = "CO2 left the radiation law's range"
	endDry      = "the water is lost"
	endCondense = "CO2 condenses at the coldest place"
	endFreezes  = "the largest number of freezes was reached"
	endSwings   = "the climate swings without an end in sight"
	endSolver   = "the solver could not go on"
)

// moistLasting is how long the stratosphere must stay moist to count as a
// lasting failure, yr. A thaw overshoots for less than a million years.
const moistLasting = 10 * units.Myr

// span is one stay in the frozen or the moist state.
type span struct {
	lost       float64 // loss of the branch that led to it, NaN when none was located
	start, end float64 // threshold crossings; end is NaN while it lasts
}

// begun returns the date of the failure: the loss of the branch, which does not
// depend on a threshold, or else the crossing.
func (s span) begun() float64 {
	if math.IsNaN(s.lost) {
		return s.start
	}
	return s.lost
}

// supplyReached is the part of its supply limit at which land weathering counts
// as having reached it, dry the part of its water at which a planet counts as
// having lost it.
const (
	supplyReached = 0.9
	dry           = 0.01
)

// swings counts swings of the temperature that follow one another without a
// freeze. Close to a fold a climate may swing within millennia, over and over:
// to follow that for billions of years has no end.
type swings struct {
	start, last   float64 // first and last turn, yr
	cold, warm    float64 // its extremes, K
	count         int     // turns
	extreme, sign float64 // since the last turn
}

// A turn counts when it leads back by swingKelvin within swingQuiet.
const (
	swingKelvin = 1.0
	swingQuiet  = 10 * units.Myr
)

func (w *swings) reset(t, temp float64) {
	*w = swings{start: t, last: t, cold: temp, warm: temp, extreme: temp, sign: w.sign}
}

// see takes the temperature at the end of a step.
func (w *swings) see(t, temp float64) {
	switch {
	case w.extreme == 0 || t-w.last > swingQuiet:
		w.reset(t, temp)
	case w.sign == 0:
		w.sign = math.Copysign(1, temp-w.extreme)
	}
	w.cold, w.warm = math.Min(w.cold, temp), math.Max(w.warm, temp)
	if (temp-w.extreme)*w.sign >= 0 {
		w.extreme = temp
	} else if math.Abs(temp-w.extreme) > swingKelvin {
		if w.count++; w.count == 1 {
			w.start = t
		}
		w.last, w.extreme, w.sign = t, temp, -w.sign
	}
}

// regainLasting is how long a regained stability must last for the loss before
// it to be another matter, yr.
const regainLasting = 10 * units.Myr

type mark struct {
	name string
	t    float64
}

// history is what one integration leaves behind.
type history struct {
	rows   []record.Row
	marks  []mark
	frozen []span
	moist  []span
	swings swings
	end    float64
	reason string
	cause  error // of endSolver
	// unsolved tells that the solve for the reference state failed.
	unsolved bool
	stats    ode.Stats
	drift    float64 // largest |change of total carbon|/total
	first    State
	atRef    State
	hasRef   bool
	words    string // where it started
}

// atol returns the noise floor of every component at a relative tolerance.
func (m *Model) atol(rtol float64) []float64 {
	a := make([]float64, m.lay.n)
	a[0] = rtol * 1 // K
	a[m.lay.surface] = rtol * 1e12
	a[m.lay.seafloor] = rtol * 1e17
	a[m.lay.continental] = rtol * 1e18
	a[m.lay.mantle] = rtol * 1e20
	a[m.lay.mantleT] = rtol * 1
	a[m.lay.water] = rtol * 1e-2 * m.set.OceanFraction * m.set.Mass
	if m.lay.coreT >= 0 {
		a[m.lay.coreT] = rtol * 1
	}
	if m.lay.alk >= 0 {
		a[m.lay.alk] = rtol * 1e15
	}
	if m.lay.escaped >= 0 {
		a[m.lay.escaped] = rtol * 1e18
	}
	return a
}

// events of the integration, in this order.
const (
	evFreeze = iota
	evThaw
	evC3
	evC4
	evMoist
	evHot
	evCold
	evDense
	evCondense
	evSupply
	evDry
	evCount
)

// afterPulse is how long after the end of a pulse every step is kept, yr.
const afterPulse = 3 * units.Myr

// endOf names the end a terminal event brings.
var endOf = [evCount]string{evHot: endHot, evCold: endCold, evDense: endDense, evCondense: endCondense, evDry: endDry}

// lookup gives the logarithm of the CO₂ pressure of a state vector. It does not
// disturb what the model keeps: events ask between the states of a step.
type lookup struct {
	m         *Model
	t, c, alk float64
	lnp       float64
}

func (l *lookup) pressure(y []float64) float64 {
	lay := &l.m.lay
	t, c, alk := y[0], y[lay.surface], 0.0
	if lay.alk >= 0 {
		alk = y[lay.alk]
	}
	if l.t != t || l.c != c || l.alk != alk {
		l.t, l.c, l.alk = t, c, alk
		if a := l.m.airs.at(t, c, alk); a != nil {
			l.lnp = a.lnp
		} else {
			p, _ := l.m.set.ocean.law.Pressure(present(c), alk, t)
			l.lnp = elementary.Log(p)
		}
	}
	return l.lnp
}

// supplyUse gives land weathering as a part of its supply limit.
func (l *lookup) supplyUse(age float64, y []float64) float64 {
	m := l.m
	s := m.set
	lnp := l.pressure(y)
	t, p := y[0], elementary.Exp(lnp)
	env := &m.env
	*env = weathering.Env{Age: age, T: t, P: p, LnP: lnp - m.lnP0}
	if s.supply.Limit == 0 {
		return m.supplyUse(s.land.law.Relative(env), 0)
	}
	env.Sun, env.Alb = m.sunlight(age)/4, s.albedo.law.Planetary(t, p)
	relative := s.land.law.Relative(env)
	return m.supplyUse(relative, m.kinetic(relative, p, s.Biology.at(m.hold.at(driveBiology, age)), s.albedo.law.IceFraction(t)))
}

// integrate runs the history from its start to an age in yr. With full, a row
// is kept wherever something happens; without, only the state at the reference
// age. It fails only when ctx ends.
func (m *Model) integrate(ctx context.Context, until, rtol float64, full bool) (*history, error) {
	s := m.set
	h := &history{reason: endTime}
	m.memo.valid = false
	m.airs.forget()
	var st State
	words := "a given state"
	if m.from != nil {
		st = *m.from
	} else {
		st, words = m.start()
	}
	h.first, h.words = st, words
	y := make([]float64, m.lay.n)
	m.lay.pack(y, &st)
	total := st.Carbon()

	end := until
	if e := s.star.law.End(); e <= end {
		end, h.reason = e, endStar
		if s.starTable() {
			h.reason = endTable
		}
	}
	box := s.radiation.law.Box()
	look := &lookup{m: m, t: math.NaN()}
	limit := func(target float64, stated bool) func(float64, []float64) float64 {
		if !stated {
			return func(float64, []float64) float64 { return -1 }
		}
		ln := elementary.Log(target)
		return func(_ float64, y []float64) float64 { return look.pressure(y) - ln }
	}
	below := func(x float64, stated bool) func(float64, []float64) float64 {
		if !stated {
			return func(float64, []float64) float64 { return 1 }
		}
		return func(_ float64, y []float64) float64 { return y[0] - x }
	}
	temp := func(x float64) func(float64, []float64) float64 {
		return func(_ float64, y []float64) float64 { return y[0] - x }
	}
	condense := s.condensation()
	events := make([]ode.Event, evCount)
	events[evFreeze] = ode.Event{Name: record.MarkFroze, Func: temp(s.FrozenBelow), Direction: ode.Falling}
	events[evThaw] = ode.Event{Name: record.MarkThawed, Func: temp(s.ThawedAbove), Direction: ode.Rising}
	// What is marked once is not looked at again: a climate may rest on it.
	var passed [evCount]bool
	first := func(i int, f func(float64, []float64) float64) func(float64, []float64) float64 {
		return func(t float64, y []float64) float64 {
			if passed[i] {
				return -1
			}
			return f(t, y)
		}
	}
	events[evC3] = ode.Event{Name: record.MarkC3, Func: first(evC3, limit(150e-6, true)), Direction: ode.Falling}
	events[evC4] = ode.Event{Name: record.MarkC4, Func: first(evC4, limit(10e-6, true)), Direction: ode.Falling}
	events[evMoist] = ode.Event{Name: record.MarkMoist, Func: temp(s.Strato.T)}
	events[evHot] = ode.Event{Name: "hot edge", Func: temp(m.top()), Direction: ode.Rising, Terminal: 1}
	events[evCold] = ode.Event{Name: "cold edge", Func: below(box.T.Lo, box.T.Stated()), Direction: ode.Falling, Terminal: 1}
	events[evDense] = ode.Event{Name: "dense edge", Func: limit(box.P.Hi, box.P.Stated()), Direction: ode.Rising, Terminal: 1}
	events[evCondense] = ode.Event{Name: record.MarkCondensation, Direction: ode.Rising, Terminal: 1, Func: func(_ float64, y []float64) float64 {
		return look.pressure(y) - elementary.Log(condense(y[0]-s.ColdContrast))
	}}

	events[evSupply] = ode.Event{Name: record.MarkSupply, Direction: ode.Rising, Func: func(t float64, y []float64) float64 {
		if s.supply.Limit == 0 && m.saturates == nil {
			return -1
		}
		return look.supplyUse(t, y) - supplyReached
	}}
	events[evDry] = ode.Event{Name: "dry", Direction: ode.Falling, Terminal: 1, Func: func(_ float64, y []float64) float64 {
		return y[m.lay.water]/st.Water - dry
	}}

	stops := []float64{}
	stop := func(t float64) {
		if t > s.Start && t < end {
			stops = append(stops, t)
		}
	}
	stop(s.RefAge)
	for _, p := range s.Pulses {
		stop(p.Start)
		stop(p.Start + p.Duration)
	}
	problem := &ode.Problem{Dim: m.lay.n, Func: func(dy []float64, t float64, y []float64) { m.derivative(dy, t, y) }, Events: events, StopTimes: stops}
	settings := &ode.Settings{RelTol: rtol, AbsTol: m.atol(rtol), MaxStep: s.MaxStep, InitialStep: 1, MaxSteps: int(s.MaxSteps),
		Guard: ode.Guard{Off: !s.Guard, Blocks: [][]int{bands(m.lay.bands)}}}
	solver, err := ode.NewSolver(problem, settings)
	if err != nil {
		return nil, fmt.Errorf("carbon: %w", err)
	}

	var dynamo []bool
	keep := func(t float64, y []float64, force bool) {
		if !full {
			return
		}
		var z State
		m.lay.unpack(&z, y)
		var r record.Row
		m.diagnose(&r, t, &z)
		m.describe(&r, &z)
		works := m.memo.flow.Dynamo
		if n := len(h.rows); n > 0 && !force {
			l := &h.rows[n-1]
			if math.Abs(r.Temperature-l.Temperature) < 0.05 && math.Abs(elementary.Log(r.PCO2/l.PCO2)) < 0.01 && t-l.Age < 10*units.Myr {
				return
			}
		}
		h.rows, dynamo = append(h.rows, r), append(dynamo, works)
	}
	drift := func(y []float64) {
		var z State
		m.lay.unpack(&z, y)
		h.drift = math.Max(h.drift, math.Abs(z.Carbon()-total)/total)
	}

	// The state of the climate, with hysteresis.
	isFrozen := y[0] < s.FrozenBelow
	isMoist := y[0] > s.Strato.T
	nan := math.NaN()
	if isFrozen {
		h.frozen = append(h.frozen, span{lost: nan, start: s.Start, end: nan})
	}
	if isMoist {
		h.moist = append(h.moist, span{lost: nan, start: s.Start, end: nan})
	}
	// lost is the located loss of the present branch that is not yet followed
	// by a jump. Close to the fold the state winds around it and stability
	// comes and goes; the first loss of such a row counts.
	lost, regained := nan, nan
	seen := map[string]bool{}
	once := func(name string, t float64) {
		if !seen[name] {
			seen[name] = true
			h.marks = append(h.marks, mark{name, t})
		}
	}

	keep(s.Start, y, true)
	err = solver.Init(s.Start, end, y)
	done := false
	// A start at an edge or beyond it is the end: an event sees crossings only.
	for i := range events {
		e := &events[i]
		if g := e.Func(s.Start, y); e.Terminal > 0 && (e.Direction == ode.Rising && g >= 0 || e.Direction == ode.Falling && g <= 0) {
			h.reason, done = endOf[i], true
			if i == evCondense {
				once(record.MarkCondensation, s.Start)
			}
			break
		}
	}
	for n := 0; err == nil && !done; n++ {
		if n&255 == 0 && ctx.Err() != nil {
			return nil, ctx.Err()
		}
		done, err = solver.Step()
		if err != nil {
			break
		}
		t, y := solver.T(), solver.Y()
		force := done
		for _, l := range solver.Losses() {
			force = true
			if l.Regained {
				regained = l.T
				continue
			}
			if !math.IsNaN(lost) && l.T-regained < regainLasting {
				continue
			}
			lost = l.T
			if !isFrozen && !isMoist {
				h.marks = append(h.marks, mark{record.MarkBranchLost, l.T})
			}
		}
		if t-regained >= regainLasting {
			lost, regained = nan, nan
		}
		for _, e := range solver.Fired() {
			force = true
			switch e.Index {
			case evFreeze:
				if !isFrozen {
					isFrozen = true
					h.frozen = append(h.frozen, span{lost: lost, start: e.T, end: nan})
					h.marks = append(h.marks, mark{record.MarkFroze, e.T})
					h.swings.reset(e.T, y[0])
					lost, regained = nan, nan
				}
			case evThaw:
				if isFrozen {
					isFrozen = false
					h.frozen[len(h.frozen)-1].end = e.T
					h.marks = append(h.marks, mark{record.MarkThawed, e.T})
					lost, regained = nan, nan
				}
			case evSupply:
				once(e.Name, e.T)
			case evC3, evC4:
				if !isFrozen {
					once(e.Name, e.T)
					passed[e.Index] = true
				}
			case evMoist:
				if e.Rising && !isMoist {
					isMoist = true
					h.moist = append(h.moist, span{lost: lost, start: e.T, end: nan})
					once(record.MarkMoist, e.T)
				} else if !e.Rising && isMoist {
					isMoist = false
					h.moist[len(h.moist)-1].end = e.T
				}
				lost, regained = nan, nan
			case evHot, evCold, evDense, evDry:
				h.reason = endOf[e.Index]
			case evCondense:
				h.reason = endOf[e.Index]
				once(record.MarkCondensation, e.T)
			}
		}
		for _, p := range s.Pulses {
			force = force || t >= p.Start && t <= p.Start+p.Duration+afterPulse
		}
		if t == s.RefAge {
			m.lay.unpack(&h.atRef, y)
			h.hasRef = true
			force = true
		}
		drift(y)
		keep(t, y, force)
		if h.swings.see(t, y[0]); h.swings.count >= 2*int(s.MaxFreezes) && !done {
			h.reason = endSwings
			break
		}
		if len(h.frozen) >= int(s.MaxFreezes) && isFrozen && !done {
			h.reason = endFreezes
			break
		}
	}
	for i := 1; i < len(h.rows); i++ {
		if s.interior.law.HasCore() && dynamo[i-1] && !dynamo[i] {
			once(record.MarkDynamo, h.rows[i].Age)
		}
	}
	h.stats = solver.Stats()
	h.end = solver.T()
	if err != nil {
		var se *ode.StepError
		if !errors.As(err, &se) {
			return nil, fmt.Errorf("carbon: %w", err)
		}
		h.reason, h.cause = endSolver, err
	}
	return h, nil
}

func bands(n int) []int {
	out := make([]int, n)
	for i := range out {
		out[i] = i
	}
	return out
}

// anchor solves for total carbon, or for the scale of outgassing, so that the
// history passes through the reference CO₂ at the reference age. It returns the
// residual ln(p/p₀) and what was found.
func (m *Model) anchor(ctx context.Context, rtol float64) (residual float64, err error) {
	s := m.set
	knob := &m.content
	if s.Solve == "outgassing" {
		knob = &m.scale
	}
	x0 := *knob
	const far = 50
	shoot := func(x float64) (float64, error) {
		*knob = x0 * elementary.Exp(x)
		h, err := m.integrate(ctx, math.Min(s.End, s.RefAge*(1+1e-9)), rtol, false)
		switch {
		case err != nil:
			return 0, err
		case h.hasRef && h.atRef.T > s.FrozenBelow:
			return elementary.Log(s.ocean.law.Solve(present(h.atRef.Surface), h.atRef.Alk, h.atRef.T).P / s.RefP), nil
		case h.hasRef || h.reason == endCondense || h.reason == endCold || h.reason == endFreezes:
			return -far, nil // frozen: too little
		case h.reason == endSolver:
			return 0, fmt.Errorf("carbon: while solving for %s: %w", s.Solve, h.cause)
		}
		return far, nil // too hot or too dense: too much
	}
	tol := math.Max(1e-8, 0.3*rtol)
	// March out from the start value until the sign changes, then close in.
	a := 0.0
	fa, err := shoot(a)
	if err != nil || math.Abs(fa) < tol {
		return fa, err
	}
	step := 0.25
	if math.Abs(fa) < 5 {
		step = math.Min(0.25, math.Max(0.02, math.Abs(fa)))
	}
	b, fb := a, fa
	for fa*fb > 0 {
		a, fa = b, fb
		b -= math.Copysign(step, fa)
		if math.Abs(b) > elementary.Log(300) {
			return fb, &SetupError{key: "carbon.solve", Reason: fmt.Sprintf("no value within a factor of 300 of the start brings the history through %s at %s; at the last one tried it misses by ln(p/p0) = %.2g", units.Pressure.Format(s.RefP, "ppm"), units.Time.Format(s.RefAge, "Gyr"), fb)}
		}
		if fb, err = shoot(b); err != nil {
			return 0, err
		}
		step *= 1.6
	}
	for i := 0; i < 60 && math.Abs(fb) > tol && math.Abs(b-a) > 1e-13; i++ {
		// A jump between a frozen and a hot history holds no root.
		if math.Min(math.Abs(fa), math.Abs(fb)) > 0.1 && math.Abs(b-a) < 1e-6 {
			break
		}
		// Illinois variant of regula falsi: b is the newest point.
		x := b - fb*(b-a)/(fb-fa)
		if math.Abs(fa) >= far || math.Abs(fb) >= far {
			x = 0.5 * (a + b)
		}
		fx, err := shoot(x)
		if err != nil {
			return 0, err
		}
		if fx*fb < 0 {
			a, fa = b, fb
		} else {
			fa *= 0.5
		}
		b, fb = x, fx
	}
	if math.Abs(fb) > jump {
		return fb, &SetupError{key: "carbon.solve", Reason: fmt.Sprintf("no value of the %s brings the history through %s at %s: it jumps past from ln(p/p0) = %.2g to %.2g", s.Solve, units.Pressure.Format(s.RefP, "ppm"), units.Time.Format(s.RefAge, "Gyr"), math.Min(fa, fb), math.Max(fa, fb))}
	}
	return fb, nil
}

// jump is the residual ln(p/p₀) above which a solve that cannot be narrowed
// further has found a jump instead of a root.
const jump = 1e-2
