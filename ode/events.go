package ode

import "math"

// interior fractions of a step at which event functions are sampled.
const nSamples = 3

type eventState struct {
	side    []int8    // side of zero the run is on; 0 at a zero
	g0, g1  []float64 // values at the start and the end of the step
	gs      []float64 // samples inside: event i at i*nSamples
	noise   []float64 // size of an event function within the precision of its last location
	count   []int
	lastT   []float64 // time of the last firing with Apply, NaN if none
	cand    []candidate
	lastGap float64 // time between the last two firings of an event with Apply
	known   bool
	stale   bool // g1 does not belong to the end of the step last taken
	total   int
	taken   float64 // length of the step last taken while an event is located
	whole   bool    // f and the Jacobian belong to it
	hits    []bool  // fires at the end of this step
	fresh   []bool  // fired at the start of this step: its value there is rounding

	records []EventRecord
	fired   int
}

// candidate is a crossing seen inside the attempted step: event in the sense
// sense lies before zero at fraction a and beyond at b.
type candidate struct {
	on    bool
	sense int8 // +1 rising
	a, b  float64
	root  float64 // on the dense output
}

func (s *Solver) initEvents() error {
	k := len(s.p.Events)
	for i := range s.p.Events {
		e := &s.p.Events[i]
		if e.Func == nil {
			return badInput("event %d (%s) has no function", i, e.Name)
		}
		if e.Terminal < 0 || e.Direction < Both || e.Direction > Falling {
			return badInput("event %d (%s): direction %d, terminal %d", i, e.Name, e.Direction, e.Terminal)
		}
	}
	ev := &s.ev
	ev.side = make([]int8, k)
	ev.g0, ev.g1 = make([]float64, k), make([]float64, k)
	ev.gs = make([]float64, nSamples*k)
	ev.noise, ev.lastT = make([]float64, k), make([]float64, k)
	ev.count, ev.hits, ev.fresh = make([]int, k), make([]bool, k), make([]bool, k)
	ev.cand = make([]candidate, k)
	return nil
}

func (s *Solver) startEvents() {
	ev := &s.ev
	ev.records, ev.fired, ev.total, ev.lastGap = ev.records[:0], 0, 0, 0
	ev.known = false
	for i := range ev.side {
		ev.side[i], ev.count[i], ev.lastT[i], ev.noise[i] = 0, 0, math.NaN(), 0
		ev.hits[i], ev.fresh[i] = false, false
	}
}

func sign8(x float64) int8 {
	if x > 0 {
		return 1
	}
	if x < 0 {
		return -1
	}
	return 0
}

func (s *Solver) event(i int, t float64, y []float64) float64 {
	s.stats.EventEvals++
	return s.p.Events[i].Func(t, y)
}

// eventAt evaluates event i at fraction th of the attempted step, on the
// dense output.
func (s *Solver) eventAt(i int, h, th float64) float64 {
	s.interpTheta(s.interp, s.y, th)
	return s.event(i, s.t+th*h, s.interp)
}

func (e *Event) wants(sense int8) bool {
	return e.Direction == Both || (e.Direction == Rising) == (sense > 0)
}

// scan looks for crossings in the attempted step to tEnd and fills the
// candidates. It reports whether there are any.
func (s *Solver) scan(tEnd float64) bool {
	ev := &s.ev
	if !ev.known {
		for i := range ev.side {
			ev.g0[i] = s.event(i, s.t, s.y)
			ev.side[i] = sign8(ev.g0[i])
		}
		ev.known = true
	}
	h := tEnd - s.t
	for j := range nSamples {
		th := float64(j+1) / (nSamples + 1)
		s.interpTheta(s.interp, s.y, th)
		t := s.t + th*h
		for i := range ev.side {
			ev.gs[i*nSamples+j] = s.event(i, t, s.interp)
		}
	}
	any := false
	ev.stale = false
	for i := range ev.side {
		g1 := s.event(i, tEnd, s.y1)
		ev.g1[i] = g1
		c := &ev.cand[i]
		c.on = false
		// Nothing to do while the function keeps its sign and varies less
		// over the step than it is away from zero.
		low, up := ev.g0[i], ev.g0[i]
		for _, v := range [...]float64{g1, ev.gs[i*nSamples], ev.gs[i*nSamples+1], ev.gs[i*nSamples+2]} {
			if v < low || v != v {
				low = v
			}
			if v > up || v != v {
				up = v
			}
		}
		if low > 0 && up < 2*low || up < 0 && low > 2*up {
			continue
		}
		s.scanOne(i, h, c)
		any = any || c.on
	}
	return any
}

func (s *Solver) scanOne(i int, h float64, c *candidate) {
	ev := &s.ev
	e := &s.p.Events[i]
	c.on = false
	var th, g [nSamples + 4]float64
	g[0] = ev.g0[i]
	k := 1
	side := ev.side[i]
	if side == 0 {
		for _, x := range [...]float64{0x1p-20, 0x1p-10} {
			th[k], g[k] = x, s.eventAt(i, h, x)
			k++
		}
	}
	for j := range nSamples {
		th[k], g[k] = float64(j+1)/(nSamples+1), ev.gs[i*nSamples+j]
		k++
	}
	th[k], g[k] = 1, ev.g1[i]
	k++

	cur := side
	lo, hi := math.Inf(1), 0.0
	low, up := math.Inf(1), math.Inf(-1)
	at := 0
	for j := 0; j < k; j++ {
		v := g[j]
		if a := math.Abs(v); j > 0 || side != 0 && !ev.fresh[i] {
			if a < lo {
				lo, at = a, j
			}
			hi = max(hi, a)
			low, up = min(low, v), max(up, v)
		}
		if j == 0 {
			continue
		}
		sg := sign8(v)
		if cur == 0 {
			cur = sg
			continue
		}
		if math.IsNaN(v) || sg == cur {
			continue
		}
		if e.wants(-cur) {
			*c = candidate{on: true, sense: -cur, a: th[j-1], b: th[j]}
			return
		}
		cur = -cur
	}
	if cur == 0 || cur != side && side != 0 {
		return
	}
	// No wanted crossing between samples. If the function comes as near to
	// zero as it varies over the step, it may cross twice in between.
	if !(lo < up-low) {
		return
	}
	sd := float64(cur)
	a, b := th[max(at-1, 0)], th[min(at+1, k-1)]
	if at == 0 || at == k-1 {
		x := 0x1p-10
		if at == k-1 {
			x = 1 - x
		}
		v := sd * s.eventAt(i, h, x)
		if v > lo {
			return // moves away from zero
		}
		if v <= 0 {
			s.dip(e, c, cur, th[max(at-1, 0)], x, th[min(at+1, k-1)])
			return
		}
	}
	if ev.fresh[i] {
		a = max(a, 0x1p-6) // what lies nearer is the zero just passed
	}
	// Golden section for the least value.
	const phi = 0.6180339887498949
	x1, x2 := b-phi*(b-a), a+phi*(b-a)
	v1, v2 := sd*s.eventAt(i, h, x1), sd*s.eventAt(i, h, x2)
	l0, r0 := a, b
	for range 24 {
		if v1 <= 0 {
			s.dip(e, c, cur, l0, x1, r0)
			return
		}
		if v2 <= 0 {
			s.dip(e, c, cur, l0, x2, r0)
			return
		}
		// A parabola through the three lowest points bounds what is left to
		// gain; stop when the bracket is narrow.
		if b-a < 1e-4*(r0-l0) || math.Min(v1, v2) > 0.9*lo && b-a < 0.1*(r0-l0) {
			return
		}
		if v1 < v2 {
			b, x2, v2 = x2, x1, v1
			x1 = b - phi*(b-a)
			v1 = sd * s.eventAt(i, h, x1)
		} else {
			a, x1, v1 = x1, x2, v2
			x2 = a + phi*(b-a)
			v2 = sd * s.eventAt(i, h, x2)
		}
	}
}

// dip records that the event function, on side cur at fractions a and b, is
// not on that side at x between.
func (s *Solver) dip(e *Event, c *candidate, cur int8, a, x, b float64) {
	if e.wants(-cur) {
		*c = candidate{on: true, sense: -cur, a: a, b: x}
	} else {
		*c = candidate{on: true, sense: cur, a: x, b: b}
	}
}

// cut shortens the attempted step so that it ends at the first loss of
// stability or the first event in it. It returns the new end.
func (s *Solver) cut(tEnd float64) (float64, outcome) {
	ev := &s.ev
	clear(ev.hits)
	full := math.Abs(tEnd - s.t)
	h := full
	s.gd.hAfter = math.Inf(1)
	if s.gd.on && s.stabilityChanged() {
		var o outcome
		if h, o = s.locateLoss(h); o != outcomeOK {
			return tEnd, o
		}
		if h != full {
			tEnd = s.t + s.dir*h
		}
	}
	if len(ev.side) == 0 || !s.scan(tEnd) {
		return tEnd, outcomeOK
	}
	h2, o := s.locateEvents(h, tEnd)
	if o != outcomeOK {
		return tEnd, o
	}
	if h2 != h {
		s.gd.hAfter = math.Inf(1)
		tEnd = s.t + s.dir*h2
	}
	return tEnd, outcomeOK
}

// crossed reports whether candidate i is at or beyond its crossing at the end
// of the step last taken, and its value in the sense of the crossing.
func (s *Solver) crossed(i int, tEnd float64) (bool, float64) {
	c := &s.ev.cand[i]
	v := float64(c.sense) * s.event(i, tEnd, s.y1)
	return v >= 0, v
}

// locateEvents takes the step of length h again, shorter, until it ends just
// beyond the first of the candidates. It returns the new length and marks the
// events that fire there.
func (s *Solver) locateEvents(h, tEnd float64) (float64, outcome) {
	ev := &s.ev
	hs := s.dir * h
	tol := 0.25 * s.spacing(tEnd) // 4 units of rounding
	if m := 4 * eps * h; m > tol {
		tol = m
	}
	// Roots on the dense output, to know which is first.
	for i := range ev.cand {
		c := &ev.cand[i]
		ev.noise[i] = 0
		if !c.on {
			continue
		}
		sg := float64(c.sense)
		fb := sg * s.eventAt(i, hs, c.b)
		if c.b == 1 {
			fb = sg * ev.g1[i]
		}
		fa := sg * ev.g0[i]
		if c.a > 0 {
			fa = sg * s.eventAt(i, hs, c.a)
		}
		br := newBracket(c.a, c.b, fa, fb, max(0.25*tol/h, 0x1p-40))
		for !br.done() {
			x := br.next()
			f := sg * s.eventAt(i, hs, x)
			br.update(x, f, f >= 0)
		}
		c.root = br.b
	}
	ev.taken, ev.whole = h, true
	for pass := 0; pass < 2+len(ev.cand); pass++ {
		first := -1
		for i := range ev.cand {
			if ev.cand[i].on && (first < 0 || ev.cand[i].root < ev.cand[first].root) {
				first = i
			}
		}
		if first < 0 {
			break
		}
		c := &ev.cand[first]
		lo, hi, ok, o := s.locateOne(first, h, tol)
		if o != outcomeOK {
			return 0, o
		}
		if !ok {
			c.on = false // the dense output crossed, the step itself does not
			continue
		}
		// Others already beyond at the near end come first.
		again := false
		if len(ev.cand) > 1 {
			for i := range ev.cand {
				d := &ev.cand[i]
				if i == first || !d.on || s.second(i) && d.a*h >= lo {
					continue
				}
				if lo > 0 && !s.retakeTo(lo) {
					return 0, s.lastOutcome
				}
				if lo <= 0 {
					break
				}
				if yes, _ := s.crossed(i, s.t+s.dir*lo); yes {
					d.root, d.b = lo/h, lo/h
					again = true
				}
			}
			if again {
				c.root = hi / h
				continue
			}
		}
		end := hi
		// Others that cross within the precision fire together.
		for i := range ev.cand {
			d := &ev.cand[i]
			if i == first || !d.on || d.root*h > end+16*tol+1e-6*h {
				continue
			}
			if !s.retakeTo(end) {
				return 0, s.lastOutcome
			}
			if yes, _ := s.crossed(i, s.t+s.dir*end); yes {
				continue
			}
			x := min(end+16*tol, h)
			if !s.retakeTo(x) {
				return 0, s.lastOutcome
			}
			if yes, _ := s.crossed(i, s.t+s.dir*x); yes {
				end = x
			}
		}
		if !s.retakeTo(end) {
			return 0, s.lastOutcome
		}
		te := tEnd
		if end != h {
			te = s.t + s.dir*end
		}
		for i := range ev.cand {
			d := &ev.cand[i]
			ev.hits[i] = false
			if !d.on || i != first && s.second(i) && d.a*h >= end {
				continue
			}
			if yes, v := s.crossed(i, te); yes {
				ev.hits[i] = true
				ev.noise[i] = max(ev.noise[i], 4*math.Abs(v))
			}
		}
		if ev.hits[first] {
			if !s.completeTaken() {
				return 0, s.lastOutcome
			}
			return end, outcomeOK
		}
		c.on = false
	}
	if !s.retakeTo(h) || !s.completeTaken() {
		return 0, s.lastOutcome
	}
	return h, outcomeOK
}

// second reports whether the crossing of candidate i follows another one in
// the same step that does not count: before that, the event function is
// already on the far side.
func (s *Solver) second(i int) bool {
	return s.ev.side[i] == s.ev.cand[i].sense
}

// retakeTo makes x the length of the step last taken, as far as its state goes.
func (s *Solver) retakeTo(x float64) bool {
	ev := &s.ev
	if x == ev.taken {
		return true
	}
	if !s.retakeState(x) {
		s.gd.hRetry = 0.5 * x
		return false
	}
	ev.taken, ev.whole = x, false
	return true
}

// completeTaken completes the step last taken.
func (s *Solver) completeTaken() bool {
	ev := &s.ev
	if !ev.whole && !s.retakeRest(ev.taken) {
		s.gd.hRetry = 0.5 * ev.taken
		return false
	}
	ev.whole = true
	return true
}

// locateOne brackets the crossing of candidate i by steps taken again. It
// returns lengths just before and just after it; ok is false if the candidate
// does not cross.
func (s *Solver) locateOne(i int, h, tol float64) (lo, hi float64, ok bool, o outcome) {
	c := &s.ev.cand[i]
	eval := func(x float64) (float64, bool) {
		if !s.retakeTo(x) {
			return 0, false
		}
		_, v := s.crossed(i, s.t+s.dir*x)
		return v, true
	}
	a, b := c.a*h, c.b*h
	fail := func() (float64, float64, bool, outcome) { return 0, 0, false, s.lastOutcome }
	x := min(max(c.root*h, a), b)
	// The slope on the dense output leads from its root to that of the steps
	// taken again, and tells how wide a bracket to try first.
	w := max(tol, 1e-6*(b-a))
	d := max(1e-3*(b-a), 64*tol)
	dlo, dhi := max(x-d, a), min(x+d, b)
	if s.ev.taken == h && dlo < x && x < dhi && x < h {
		slope := float64(c.sense) * (s.eventAt(i, s.dir*h, dhi/h) - s.eventAt(i, s.dir*h, dlo/h)) / (dhi - dlo)
		v, fine := eval(x)
		if !fine {
			return fail()
		}
		if by := -v / slope; slope > 0 && math.Abs(by) < d {
			x += by
			w = max(tol, 0.01*math.Abs(by))
		}
	}
	hi = min(x+w, h)
	if h-hi <= tol {
		hi = h
	}
	fhi, fine := eval(hi)
	if !fine {
		return fail()
	}
	for fhi < 0 && hi < h { // the dense output may be late
		w *= 30
		hi = min(hi+w, h)
		if fhi, fine = eval(hi); !fine {
			return fail()
		}
	}
	if fhi < 0 {
		return 0, 0, false, outcomeOK
	}
	lo = max(min(x, hi)-w, a)
	flo := math.Inf(-1)
	for lo > a {
		if flo, fine = eval(lo); !fine {
			return fail()
		}
		if flo < 0 {
			break
		}
		hi, fhi = lo, flo
		w *= 30
		lo = max(lo-w, a)
	}
	if lo <= a {
		lo = a
		flo = float64(c.sense) * s.ev.g0[i]
		if a > 0 {
			if flo, fine = eval(a); !fine {
				return fail()
			}
			if flo >= 0 { // beyond already where the dense output was before
				lo, flo = 0, float64(c.sense)*s.ev.g0[i]
			}
		}
	}
	br := newBracket(lo, hi, flo, fhi, 0.5*tol)
	for !br.done() {
		x := br.next()
		f, fine := eval(x)
		if !fine {
			return fail()
		}
		br.update(x, f, f >= 0)
	}
	s.ev.noise[i] = math.Abs(br.fa) + math.Abs(br.fb)
	return br.a, br.b, true, outcomeOK
}

// fire records the events that fire at the accepted end of the step, applies
// their changes and updates the sides. It reports whether the state changed.
func (s *Solver) fire() bool {
	ev := &s.ev
	if len(ev.side) == 0 {
		return false
	}
	changed := false
	ev.lastGap = 0
	for i, hit := range ev.hits {
		if !hit {
			continue
		}
		e := &s.p.Events[i]
		ev.total++
		if ev.total > s.maxEvents {
			s.fail(ErrTooManyEvents)
			return changed
		}
		s.record(i, ev.cand[i].sense > 0)
		ev.count[i]++
		if e.Apply != nil {
			gap := math.Abs(s.t - ev.lastT[i])
			ev.lastT[i] = s.t
			if gap <= 4*s.spacing(s.t) {
				s.fail(ErrTooManyEvents)
				return changed
			}
			if gap > 0 && (ev.lastGap == 0 || gap < ev.lastGap) {
				ev.lastGap = gap
			}
			e.Apply(s.t, s.y)
			changed = true
		}
		if e.Terminal > 0 && ev.count[i] >= e.Terminal {
			s.status = Terminated
			break
		}
	}
	for i := range ev.side {
		g := ev.g1[i]
		if changed || ev.stale {
			g = s.event(i, s.t, s.y)
		}
		ev.g0[i] = g
		ev.side[i] = sign8(g)
		ev.fresh[i] = ev.hits[i] && math.Abs(g) <= ev.noise[i]
		if ev.fresh[i] {
			// Known where the crossing leads, unless the state was changed.
			ev.side[i] = ev.cand[i].sense
			if changed {
				ev.side[i] = 0
			}
		}
	}
	if changed {
		for i, v := range s.y {
			if math.IsNaN(v) || math.IsInf(v, 0) {
				s.errComp = i
				s.lastOutcome = outcomeNonFinite
				s.fail(ErrNotFinite)
				return changed
			}
		}
	}
	return changed
}

func (s *Solver) record(i int, rising bool) {
	ev := &s.ev
	if len(ev.records) < cap(ev.records) {
		ev.records = ev.records[:len(ev.records)+1]
	} else {
		ev.records = append(ev.records, EventRecord{})
	}
	r := &ev.records[len(ev.records)-1]
	y := r.Y
	if len(y) != s.n {
		y = make([]float64, s.n)
	}
	copy(y, s.y1)
	*r = EventRecord{Index: i, Name: s.p.Events[i].Name, T: s.t, Y: y, Rising: rising}
}
