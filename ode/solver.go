package ode

import (
	"math"
	"slices"
)

const (
	eps     = 0x1p-52
	sqrtEps = 0x1p-26

	// Below this a scale of a component means that there is none.
	tinyScale = 0x1p-500
)

// outcome of one attempted step.
type outcome int

const (
	outcomeOK outcome = iota
	outcomeNonFinite
	outcomeSingular
	outcomeNewton
	outcomeError
	outcomeDomain
	outcomeStability
)

var outcomeText = [...]string{
	outcomeOK:        "",
	outcomeNonFinite: "not finite",
	outcomeSingular:  "singular iteration matrix",
	outcomeNewton:    "no convergence of Newton's iteration",
	outcomeError:     "error estimate above tolerance",
	outcomeDomain:    "non-negative component below its floor",
	outcomeStability: "growing mode not resolved",
}

// Solver integrates one Problem. It owns all memory a run needs, may run any
// number of times, and belongs to one goroutine at a time.
type Solver struct {
	p          *Problem
	f          Func
	n          int
	autonomous bool
	method     Method
	rtol       float64
	atol       []float64 // current absolute tolerances
	autoAtol   bool
	ymax       []float64 // largest |y_i| so far, for automatic atol
	nonneg     []int
	maxStep    float64
	minStep    float64
	initStep   float64
	maxSteps   int
	maxEvents  int
	stops      []float64 // ascending
	q          float64   // exponent denominator of the step controller

	// run
	t0, t1, dir     float64
	t, h            float64
	status          Status
	err             error
	attempts        int
	logErrOld, hOld float64 // of the last accepted step, for the controller
	rejectedLast    bool

	tPrev         float64
	y, yPrev      []float64
	y1, f1, errv  []float64
	errW          []float64 // inverse of the tolerance of each component in the attempted step
	f0, dfdt      []float64
	jac           []float64
	dfdt1, jac1   []float64
	haveF, haveJ  bool
	rs            []float64 // row scales for pivoting
	w             []float64
	piv, ipiv     []int
	rsFac, scaled []float64
	inc, rhsW     []float64
	band          *Band
	rad           *radau
	limit         float64 // largest growth exponent of a step
	arg, rhs, sol []float64
	fs            []float64
	u, dense      []float64
	denseReady    bool
	clip          bool // times of stages at the end are moved just before it
	tClip         float64
	errNorm       float64
	errComp       int
	lastH         float64
	lastOutcome   outcome
	stats         Stats
	limiting      []int
	interp        []float64
	haveDense     bool
	denseWanted   bool // hold the dense output to the tolerance
	denseAlways   bool
	ev            eventState
	gd            guardState
	stepErr       StepError
}

// NewSolver checks p and s and makes all memory a run needs. A nil s means the
// zero Settings.
func NewSolver(p *Problem, st *Settings) (*Solver, error) {
	if st == nil {
		st = &Settings{}
	}
	if p == nil || p.Func == nil {
		return nil, badInput("no right-hand side")
	}
	n := p.Dim
	if n < 1 {
		return nil, badInput("dimension %d", n)
	}
	s := &Solver{p: p, f: p.Func, n: n, autonomous: p.Autonomous, method: st.Method}
	s.rtol = st.RelTol
	if s.rtol == 0 {
		s.rtol = 1e-6
	}
	if !(s.rtol >= 16*eps && s.rtol < 1) {
		return nil, badInput("relative tolerance %g is not between 4e-15 and 1", st.RelTol)
	}
	s.atol = make([]float64, n)
	s.ymax = make([]float64, n)
	switch len(st.AbsTol) {
	case 0:
		s.autoAtol = true
	case 1:
		for i := range s.atol {
			s.atol[i] = st.AbsTol[0]
		}
	case n:
		copy(s.atol, st.AbsTol)
	default:
		return nil, badInput("%d absolute tolerances for %d components", len(st.AbsTol), n)
	}
	for i, a := range s.atol {
		if !(a >= 0 && a <= math.MaxFloat64) {
			return nil, badInput("absolute tolerance %g of component %d", a, i)
		}
	}
	for _, i := range st.NonNegative {
		if i < 0 || i >= n {
			return nil, badInput("non-negative component %d of %d", i, n)
		}
	}
	s.nonneg = slices.Clone(st.NonNegative)
	for _, v := range [...]struct {
		name string
		v    float64
	}{{"initial step", st.InitialStep}, {"largest step", st.MaxStep}, {"smallest step", st.MinStep}, {"precision of location", st.Guard.Locate}} {
		if !(v.v >= 0) {
			return nil, badInput("%s %g", v.name, v.v)
		}
	}
	s.initStep, s.minStep = st.InitialStep, st.MinStep
	s.maxStep = st.MaxStep
	if s.maxStep == 0 {
		s.maxStep = math.Inf(1)
	}
	s.maxSteps, s.maxEvents = st.MaxSteps, st.MaxEvents
	if s.maxSteps < 0 || s.maxEvents < 0 {
		return nil, badInput("negative bound on the number of steps or events")
	}
	if s.maxSteps == 0 {
		s.maxSteps = 100000
	}
	if s.maxEvents == 0 {
		s.maxEvents = 100000
	}
	s.stops = slices.Clone(p.StopTimes)
	for _, v := range s.stops {
		if math.IsNaN(v) || math.IsInf(v, 0) {
			return nil, badInput("stop time %g", v)
		}
	}
	slices.Sort(s.stops)
	s.q = 5
	s.denseAlways = st.Dense || len(p.Events) > 0

	vec := func() []float64 { return make([]float64, n) }
	s.y, s.yPrev, s.y1, s.f0, s.f1 = vec(), vec(), vec(), vec(), vec()
	s.errv, s.errW, s.dfdt, s.dfdt1, s.rs = vec(), vec(), vec(), vec(), vec()
	s.arg, s.rhs, s.sol, s.fs, s.interp = vec(), vec(), vec(), vec(), vec()
	size, wsize := n*n, n*n
	if b := p.Band; b != nil {
		if b.Lower < 0 || b.Upper < 0 || b.Lower >= n || b.Upper >= n {
			return nil, badInput("bandwidths %d and %d for %d components", b.Lower, b.Upper, n)
		}
		s.band = &Band{b.Lower, b.Upper}
		size, wsize = n*(b.Lower+b.Upper+1), n*(2*b.Lower+b.Upper+1)
	}
	s.jac, s.jac1 = make([]float64, size), make([]float64, size)
	s.w, s.piv, s.ipiv = make([]float64, wsize), make([]int, n), make([]int, n)
	s.rsFac, s.scaled, s.inc, s.rhsW = vec(), vec(), vec(), vec()
	s.limit = 2
	stages := 0
	switch st.Method {
	case Rodas5P:
		s.u, s.dense = make([]float64, 8*n), make([]float64, 3*n)
	case RadauIIA3:
		stages = 3
	case RadauIIA5:
		stages = 5
	case RadauIIA7:
		stages = 7
	default:
		return nil, badInput("unknown method %d", int(st.Method))
	}
	if stages > 0 {
		s.rad = newRadau(stages, n)
		s.rad.kappa = max(10*eps/s.rtol, min(0.03, math.Sqrt(s.rtol)))
		for i := range s.rad.lin {
			s.rad.lin[i].init(n, s.band)
		}
		s.q = float64(stages + 1)
		s.limit = float64(stages) - 0.5
	}
	s.limiting = make([]int, n)
	if err := s.initEvents(); err != nil {
		return nil, err
	}
	if err := s.initGuard(&st.Guard); err != nil {
		return nil, err
	}
	return s, nil
}

// Init starts a run from (t0, y) towards t1, which may lie before t0. y is
// copied.
func (s *Solver) Init(t0, t1 float64, y []float64) error {
	s.status, s.err = Failed, nil
	if len(y) != s.n {
		s.err = badInput("state of length %d, want %d", len(y), s.n)
		return s.err
	}
	if math.IsNaN(t0-t1) || math.IsInf(t0-t1, 0) {
		s.err = badInput("interval [%g, %g]", t0, t1)
		return s.err
	}
	for i, v := range y {
		if math.IsNaN(v) || math.IsInf(v, 0) {
			s.err = badInput("component %d starts at %g", i, v)
			return s.err
		}
	}
	clear(s.limiting)
	s.stats = Stats{Limiting: s.limiting}
	s.t0, s.t1, s.t, s.tPrev = t0, t1, t0, t0
	s.dir = 1
	if t1 < t0 {
		s.dir = -1
	}
	copy(s.y, y)
	copy(s.yPrev, y)
	copy(s.y1, y)
	for _, i := range s.nonneg {
		if s.y[i] < 0 {
			s.err = badInput("non-negative component %d starts at %g", i, y[i])
			return s.err
		}
	}
	if s.autoAtol {
		for i, v := range y {
			s.ymax[i] = math.Abs(v)
		}
		s.updateAtol()
	}
	s.status = Running
	s.attempts = 0
	s.haveF, s.haveJ, s.haveDense, s.denseReady = false, false, false, false
	s.logErrOld, s.hOld, s.rejectedLast = math.NaN(), 0, false
	s.errNorm, s.errComp, s.lastOutcome, s.lastH = math.NaN(), -1, outcomeOK, 0
	s.clip = false
	s.denseWanted = s.denseAlways
	s.startEvents()
	s.startGuard()
	if s.rad != nil {
		s.radauRestart()
	}
	if t0 == t1 {
		s.status = Reached
		return nil
	}
	s.h = 0
	return nil
}

func (s *Solver) updateAtol() {
	for i, m := range s.ymax {
		s.atol[i] = max(1e-3*s.rtol*m, 0x1p-1000)
	}
}

// T returns the time reached.
func (s *Solver) T() float64 { return s.t }

// Y returns the state at T. It is a view: valid until the next Step, not to be
// changed.
func (s *Solver) Y() []float64 { return s.y }

// Interval returns the ends of the last accepted step, t0 the older one.
func (s *Solver) Interval() (t0, t1 float64) { return s.tPrev, s.t }

// Fired returns the events that fired at the end of the last step, in order
// of declaration. It is a view, overwritten by the next run.
func (s *Solver) Fired() []EventRecord { return s.ev.records[s.ev.fired:] }

// Losses returns the losses and returns of stability at the end of the last
// step. It is a view, overwritten by the next run.
func (s *Solver) Losses() []Loss { return s.gd.losses[s.gd.fresh:] }

// Growing returns the number of growing eigenvalues at T, over all blocks of
// the guard; it is 0 before the first step and with the guard off.
func (s *Solver) Growing() int {
	k := 0
	for i := range s.gd.cur {
		k += s.gd.cur[i].count
	}
	return k
}

// Terminated reports whether a terminal event ended the run.
func (s *Solver) Terminated() bool { return s.status == Terminated }

// Stats returns the counters of the run so far.
func (s *Solver) Stats() Stats { return s.stats }

// Interpolate writes the solution at time t into dst. t must lie within the
// last accepted step; outside of Interval the result is an extrapolation.
func (s *Solver) Interpolate(dst []float64, t float64) {
	if !s.haveDense {
		copy(dst, s.y)
		return
	}
	h := s.t - s.tPrev
	s.interpTheta(dst[:s.n], s.yPrev, (t-s.tPrev)/h)
}

// InterpolateDerivative writes dy/dt at time t, the derivative of what
// Interpolate returns, into dst.
func (s *Solver) InterpolateDerivative(dst []float64, t float64) {
	if !s.haveDense {
		s.stats.FuncEvals++
		s.f(dst, s.t, s.y)
		return
	}
	h := s.t - s.tPrev
	s.interpThetaDiff(dst[:s.n], s.yPrev, (t-s.tPrev)/h)
	for i := range dst[:s.n] {
		dst[i] /= h
	}
}

// interpTheta evaluates the dense output of the last attempted step from y0 to
// s.y1 at fraction th.
func (s *Solver) interpTheta(dst, y0 []float64, th float64) {
	if s.rad != nil {
		s.radauInterp(dst, y0, th)
		return
	}
	s.rodasInterp(dst, y0, s.y1, th)
}

func (s *Solver) interpThetaDiff(dst, y0 []float64, th float64) {
	if s.rad != nil {
		s.radauInterpDiff(dst, th)
		return
	}
	s.rodasInterpDiff(dst, y0, s.y1, th)
}

// attempt takes one trial step of length h from (t, y) to tEnd.
func (s *Solver) attempt(h, tEnd float64) outcome {
	var o outcome
	if s.rad != nil {
		o = s.radauStep(h, tEnd)
	} else {
		o = s.rodasStep(h, tEnd)
	}
	s.lastH = h
	if o != outcomeOK {
		s.errNorm, s.errComp = math.NaN(), -1
		s.lastOutcome = o
		return o
	}
	// Root mean square of the scaled error estimate.
	sum, worst, comp := 0.0, -1.0, -1
	y, y1, wt, atol := s.y[:s.n], s.y1[:s.n], s.errW[:s.n], s.atol[:s.n]
	for i, e := range s.errv[:s.n] {
		a, b := math.Abs(y[i]), math.Abs(y1[i])
		if b > a {
			a = b
		}
		w := 1 / (atol[i] + s.rtol*a)
		if w > math.MaxFloat64 {
			w = math.MaxFloat64
		}
		wt[i] = w
		e *= w
		e *= e
		sum += e
		if e > worst {
			worst, comp = e, i
		}
	}
	s.errNorm = math.Sqrt(sum / float64(s.n))
	s.errComp = comp
	if !(s.errNorm <= math.MaxFloat64) {
		s.lastOutcome = outcomeNonFinite
		if allFinite(s.y1) && allFinite(s.errv) { // scale 0 or overflow of the norm
			s.lastOutcome = outcomeError
		}
		return s.lastOutcome
	}
	s.limiting[comp]++
	if s.errNorm > 1 {
		s.lastOutcome = outcomeError
		return outcomeError
	}
	for _, i := range s.nonneg {
		if s.y1[i] < -s.atol[i] {
			s.lastOutcome, s.errComp = outcomeDomain, i
			return outcomeDomain
		}
	}
	if s.denseWanted {
		if e, c := s.denseError(h, tEnd); !(e <= s.errNorm) {
			s.errNorm, s.errComp = e, c
			if !(e <= 1) {
				s.lastOutcome = outcomeError
				return outcomeError
			}
		}
	}
	s.lastOutcome = outcomeOK
	return outcomeOK
}

// denseError estimates the error of the dense output at the middle of the
// attempted step, in tolerances. The error estimate of a step knows nothing of
// it for a fast component that follows a slow one, because there the ends of
// steps are far more accurate than the inside. The defect y' − f(t, y) of the
// dense output, filtered by the iteration matrix, is the distance from what it
// should follow (compare the residual control of Rodas5Pr, Steinebach 2023).
func (s *Solver) denseError(h, tEnd float64) (float64, int) {
	n := s.n
	if s.rad == nil {
		// The term K3 overestimates the error: if it is small enough, done.
		if !s.denseReady {
			s.rodasDense()
		}
		sum := 0.0
		for k, w := range s.errW[:n] {
			sum += sq(s.dense[3*k+2] * w)
		}
		if 0.1055*math.Sqrt(sum/float64(n)) <= 1 { // max of θ³(1−θ)
			return 0, 0
		}
	}
	s.interpTheta(s.interp, s.y, 0.5)
	s.stats.FuncEvals++
	s.f(s.rhs, s.t+0.5*h, s.interp)
	s.interpThetaDiff(s.interp, s.y, 0.5)
	hinv := 1 / h
	for k, v := range s.interp {
		s.rhs[k] -= v * hinv
	}
	s.solve(s.sol, s.rhs)
	sum, worst, comp := 0.0, -1.0, 0
	for k, v := range s.sol {
		v = sq(v * s.errW[k])
		sum += v
		if v > worst {
			worst, comp = v, k
		}
	}
	return math.Sqrt(sum / float64(n)), comp
}

func allFinite(v []float64) bool {
	z := 0.0
	for _, x := range v {
		z += 0 * x
	}
	return z == 0
}

// project sets NonNegative components just below zero to zero.
func (s *Solver) project() {
	for _, i := range s.nonneg {
		if s.y1[i] < 0 {
			s.y1[i] = 0
			s.stats.Projections++
		}
	}
}

func (s *Solver) count(o outcome) {
	switch o {
	case outcomeNonFinite:
		s.stats.RejectedNonFinite++
	case outcomeSingular:
		s.stats.RejectedSingular++
	case outcomeNewton:
		s.stats.RejectedNewton++
	case outcomeError:
		s.stats.RejectedError++
	case outcomeDomain:
		s.stats.RejectedDomain++
	case outcomeStability:
		s.stats.RejectedStability++
	}
}

// fail ends the run with an error at the state reached.
func (s *Solver) fail(cause error) error {
	s.status = Failed
	s.stepErr = StepError{
		T: s.t, H: s.lastH, ErrNorm: s.errNorm, Component: s.errComp,
		Cause: outcomeText[s.lastOutcome], Err: cause, Stats: s.stats,
	}
	s.err = &s.stepErr
	s.tPrev, s.haveDense = s.t, false
	return s.err
}

// spacing is a few units in the last place of time at t.
func (s *Solver) spacing(t float64) float64 {
	return 16 * eps * max(math.Abs(t), 0x1p-200*math.Abs(s.t1-s.t0))
}

// Step takes one accepted step. It ends exactly on located events, located
// losses of stability, stop times and the end of the interval. It returns true
// when the run is over: the end is reached, a terminal event fired, or an
// error occurred.
func (s *Solver) Step() (done bool, err error) {
	if s.status != Running {
		return true, s.err
	}
	s.ev.fired = len(s.ev.records)
	s.gd.fresh = len(s.gd.losses)
	if !s.haveF {
		s.stats.FuncEvals++
		s.f(s.f0, s.t, s.y)
		if !allFinite(s.f0) {
			s.lastOutcome = outcomeNonFinite
			for i, v := range s.f0 {
				if math.IsNaN(v - v) {
					s.errComp = i
					break
				}
			}
			return true, s.fail(ErrNotFinite)
		}
		s.haveF = true
	}
	if !s.haveJ {
		if s.h == 0 {
			s.h = s.firstStep()
		}
		if !s.evalJac(s.jac, s.dfdt, s.t, s.y, s.f0) {
			s.lastOutcome = outcomeNonFinite
			return true, s.fail(ErrNotFinite)
		}
		s.haveJ = true
		s.setRowScale(s.y)
		if s.rad != nil {
			s.rad.jacFresh, s.rad.haveFac = true, false
		}
	}
	if s.gd.on && !s.gd.known {
		s.guardAll(s.gd.cur, s.jac, s.t, s.y)
		s.gd.known = true
	}
	if s.h == 0 {
		s.h = s.firstStep()
	}
	h := s.h
	for {
		if s.attempts >= s.maxSteps {
			return true, s.fail(ErrMaxSteps)
		}
		s.attempts++
		if h > s.maxStep {
			h = s.maxStep
		}
		if s.gd.on {
			h = s.resolve(s.gd.cur, h)
		}
		// The next time the run must end a step on.
		stop, isStop := s.t1, false
		if len(s.stops) > 0 {
			stop, isStop = s.nextStop()
		}
		left := math.Abs(stop - s.t)
		hits := false
		if h >= left*(1-4*eps) || 1.01*h >= left && left <= s.maxStep {
			h, hits = left, true
		} else if 2*h > left {
			h = 0.5 * left
		}
		if !hits && (h < s.minStep || h < s.spacing(s.t)) {
			cause := ErrStepTooSmall
			switch s.lastOutcome {
			case outcomeNonFinite:
				cause = ErrNotFinite
			case outcomeSingular:
				cause = ErrSingular
			}
			return true, s.fail(cause)
		}
		tEnd := s.t + s.dir*h
		if hits {
			tEnd = stop
		}
		s.clip = hits && isStop
		if s.clip {
			s.tClip = math.Nextafter(tEnd, s.t)
		}
		o := s.attempt(s.dir*h, tEnd)
		if o != outcomeOK {
			s.count(o)
			if hits && h < s.spacing(s.t) {
				return true, s.fail(ErrStepTooSmall)
			}
			h = s.shrink(h, o)
			s.rejectedLast = true
			continue
		}
		hNew := s.propose(h)
		s.project()

		if !s.finish(tEnd) {
			s.lastOutcome = outcomeNonFinite
			s.count(outcomeNonFinite)
			h *= 0.1
			s.rejectedLast = true
			continue
		}
		if s.gd.on && !s.guardAccept(h) {
			s.lastOutcome = outcomeStability
			s.count(outcomeStability)
			h = min(s.gd.hMax, 0.5*h)
			s.rejectedLast = true
			continue
		}
		full := tEnd
		tEnd, o = s.cut(tEnd)
		if o != outcomeOK {
			s.count(o)
			h = s.gd.hRetry
			s.rejectedLast = true
			continue
		}
		if tEnd != full {
			hNew = min(hNew, s.gd.hAfter)
		}
		s.accept(tEnd, hNew, tEnd == full && hits && isStop)
		if tEnd != full {
			s.logErrOld, s.hOld = math.NaN(), 0
		}
		if s.err != nil {
			return true, s.err
		}
		return s.status != Running, nil
	}
}

// nextStop returns the next time a step must end on, and whether it is a stop
// time rather than just the end of the interval.
func (s *Solver) nextStop() (float64, bool) {
	stop, is := s.t1, false
	if s.dir > 0 {
		i, _ := slices.BinarySearch(s.stops, s.t)
		for i < len(s.stops) && s.stops[i] <= s.t {
			i++
		}
		if i < len(s.stops) && s.stops[i] <= stop {
			stop, is = s.stops[i], true
		}
		return stop, is
	}
	i, _ := slices.BinarySearch(s.stops, s.t)
	i--
	if i >= 0 && s.stops[i] >= stop {
		stop, is = s.stops[i], true
	}
	return stop, is
}

// propose returns the length of the step after one of length h with error
// s.errNorm: the elementary controller and Gustafsson's predictive form
// (Hairer & Wanner II, IV.8), whichever is shorter.
func (s *Solver) propose(h float64) float64 {
	logSafety := -0.10536051565782628 // ln 0.9
	if s.rad != nil {
		m := 7 + 2*(s.rad.s-3)
		logSafety += math.Log(float64(2*m+1) / float64(2*m+s.rad.iters))
	}
	le := roughLog(max(s.errNorm, 1e-20))
	lf := le/s.q - logSafety
	if s.hOld > 0 {
		if lg := roughLog(s.hOld/h) + (2*le-s.logErrOld)/s.q - logSafety; lg > lf {
			lf = lg
		}
	}
	fac := roughExp(max(-1.791759469228055, min(lf, 1.6094379124341003))) // 1/6 to 5
	if s.rejectedLast && fac < 1 {
		fac = 1
	}
	if s.rad != nil && s.rad.iters > 1 {
		// The contraction of Newton's iteration grows with the step, about as
		// its power 3/2; steps pay best where it is a quarter.
		if lim := roughExp(max(-0.2, min(2.0/3*roughLog(0.25/s.rad.theta), 2))); fac*lim < 1 {
			fac = 1 / lim
		}
	}
	s.gd.logErr = max(le, -4.605170185988091) // err_old at least 0.01
	if s.rad != nil && fac <= 1 && fac > 1/1.2 && s.rad.theta < 0.03 {
		return h // the factored matrices stay good
	}
	return h / fac
}

// shrink returns the length to try after a rejected attempt of length h.
func (s *Solver) shrink(h float64, o outcome) float64 {
	switch o {
	case outcomeError:
		if !(s.errNorm <= math.MaxFloat64) {
			return 0.1 * h
		}
		fac := roughExp(roughLog(s.errNorm)/s.q) / 0.9
		return h / min(max(fac, 1.05), 5)
	case outcomeDomain, outcomeSingular, outcomeNewton:
		return 0.5 * h
	}
	return 0.1 * h
}

// finish evaluates f and, if the guard needs it, the Jacobian at the end of
// an attempted step. It reports whether they are finite.
func (s *Solver) finish(tEnd float64) bool {
	t := tEnd
	if s.clip {
		t = s.tClip
	}
	s.stats.FuncEvals++
	s.f(s.f1, t, s.y1)
	if !allFinite(s.f1) {
		return false
	}
	if s.gd.on {
		return s.evalJac(s.jac1, s.dfdt1, t, s.y1, s.f1)
	}
	return true
}

// accept makes the end of the attempted step the new state, fires events and
// prepares the next step.
func (s *Solver) accept(tEnd, hNew float64, crossed bool) {
	h := math.Abs(tEnd - s.t)
	st := &s.stats
	if st.Steps == 0 || h < st.MinStep {
		st.MinStep = h
	}
	if h > st.MaxStep {
		st.MaxStep = h
	}
	st.LastStep = h
	st.Steps++
	s.tPrev, s.t = s.t, tEnd
	s.y, s.yPrev = s.yPrev, s.y
	copy(s.y, s.y1)
	s.f0, s.f1 = s.f1, s.f0
	s.haveDense = true
	s.lastOutcome = outcomeOK
	s.rejectedLast = false
	s.logErrOld, s.hOld = s.gd.logErr, h
	s.h = hNew
	if s.gd.on {
		s.jac, s.jac1 = s.jac1, s.jac
		s.dfdt, s.dfdt1 = s.dfdt1, s.dfdt
		s.setRowScale(s.y)
		s.guardCommit(h)
	} else {
		// Radau keeps a Jacobian that serves it well.
		s.haveJ = s.rad != nil && (s.rad.theta < 1e-3 || s.rad.iters <= 2)
	}
	if s.rad != nil {
		s.radauAccept()
	}
	if s.autoAtol {
		grew := false
		for i, v := range s.y {
			if v = math.Abs(v); v > s.ymax[i] {
				s.ymax[i] = v
				grew = true
			}
		}
		if grew {
			s.updateAtol()
		}
	}
	changed := s.fire()
	if s.err != nil {
		return
	}
	if tEnd == s.t1 && s.status == Running {
		s.status = Reached
	}
	if changed || crossed {
		s.restart(changed)
	}
}

// restart prepares a fresh start from (t, y) after a discontinuity.
func (s *Solver) restart(changed bool) {
	s.haveF, s.haveJ = false, false
	if s.rad != nil {
		s.radauRestart()
	}
	s.logErrOld, s.hOld = math.NaN(), 0
	s.clip = false
	s.h = 0
	if s.autoAtol && changed {
		for i, v := range s.y {
			s.ymax[i] = max(s.ymax[i], math.Abs(v))
		}
		s.updateAtol()
	}
	if s.status != Running {
		return
	}
	s.stats.FuncEvals++
	s.f(s.f0, s.t, s.y)
	if !allFinite(s.f0) {
		return // the next Step reports it
	}
	s.haveF = true
	s.h = s.firstStep()
	if gap := s.ev.lastGap; gap > 0 && changed {
		s.h = min(s.h, gap)
	}
	if !s.evalJac(s.jac, s.dfdt, s.t, s.y, s.f0) {
		s.haveF = false
		return
	}
	s.haveJ = true
	s.setRowScale(s.y)
	if s.gd.on {
		s.guardJump()
	}
}

func (s *Solver) setRowScale(y []float64) {
	for i, v := range y {
		sc := s.atol[i] + s.rtol*math.Abs(v)
		if sc < tinyScale {
			sc = 1 // nothing is known of this component yet
		}
		s.rs[i] = 1 / sc
	}
}

// evalJac evaluates the Jacobian and the time derivative at (t, y), where f
// has the value f. It reports whether they are finite.
func (s *Solver) evalJac(jac, dfdt []float64, t float64, y, f []float64) bool {
	s.stats.JacEvals++
	n := s.n
	f = f[:n]
	if s.p.Jac != nil {
		clear(jac)
		clear(dfdt)
		s.p.Jac(jac, dfdt, t, y)
		return allFinite(jac) && (s.autonomous || allFinite(dfdt))
	}
	arg, fs := s.arg[:n], s.fs[:n]
	copy(arg, y)
	if s.band != nil {
		return s.bandJac(jac, t, y, f) && s.timeDeriv(dfdt, t, y, f)
	}
	for j := range n {
		d := s.increment(j, y, f)
		arg[j] = y[j] + d
		r := 1 / (arg[j] - y[j])
		s.f(fs, t, arg)
		z := 0.0
		for i, v := range fs {
			v = (v - f[i]) * r
			jac[i*n+j] = v
			z += 0 * v
		}
		if z != 0 { // not finite: try the other side
			arg[j] = y[j] - d
			r = 1 / (arg[j] - y[j])
			s.stats.FuncEvals++
			s.f(fs, t, arg)
			if !allFinite(fs) {
				return false
			}
			for i, v := range fs {
				jac[i*n+j] = (v - f[i]) * r
			}
		}
		arg[j] = y[j]
	}
	s.stats.FuncEvals += n
	return s.timeDeriv(dfdt, t, y, f)
}

// increment is the step of a difference in component j: outwards, so that a
// sign is kept.
func (s *Solver) increment(j int, y, f []float64) float64 {
	d := math.Abs(y[j])
	if a := 1000 * s.atol[j]; a > d {
		d = a
	}
	if a := 1e-3 * math.Abs(s.h*f[j]); a > d {
		d = a
	}
	d *= sqrtEps
	if d < 0x1p-900 {
		d = sqrtEps
	}
	if y[j] < 0 {
		d = -d
	}
	return d
}

// bandJac differences all columns together that do not share a row.
func (s *Solver) bandJac(jac []float64, t float64, y, f []float64) bool {
	n, kl, ku := s.n, s.band.Lower, s.band.Upper
	jw := kl + ku + 1
	arg, fs, inc := s.arg, s.fs, s.inc
	for g := 0; g < min(jw, n); g++ {
		sign := 1.0
		for try := 0; ; try++ {
			for j := g; j < n; j += jw {
				arg[j] = y[j] + sign*s.increment(j, y, f)
				inc[j] = 1 / (arg[j] - y[j])
			}
			s.stats.FuncEvals++
			s.f(fs, t, arg)
			if allFinite(fs) {
				break
			}
			if try == 1 {
				return false
			}
			sign = -1
		}
		for j := g; j < n; j += jw {
			arg[j] = y[j]
			for i := max(0, j-ku); i <= min(n-1, j+kl); i++ {
				jac[i*jw+j-i+kl] = (fs[i] - f[i]) * inc[j]
			}
		}
	}
	return true
}

// timeDeriv differences f in t, on the side of t that the step at hand is on.
func (s *Solver) timeDeriv(dfdt []float64, t float64, y, f []float64) bool {
	if s.autonomous {
		return true
	}
	d := s.dir * sqrtEps * max(math.Abs(t), s.h)
	if d == 0 {
		d = s.dir * sqrtEps * math.Abs(s.t1-s.t0)
	}
	tt := t + d
	if s.clip {
		tt = t - d
	}
	d = tt - t
	fs := s.fs
	s.stats.FuncEvals++
	s.f(fs, tt, y)
	if !allFinite(fs) {
		tt = t - d
		d = tt - t
		s.stats.FuncEvals++
		s.f(fs, tt, y)
		if !allFinite(fs) {
			return false
		}
	}
	r := 1 / d
	for i, v := range fs {
		dfdt[i] = (v - f[i]) * r
	}
	return true
}

// firstStep proposes the length of a first step from (t, y), where f has the
// value f0, from the sizes of y, f and a difference for y” (Hairer, Nørsett &
// Wanner, Solving ODEs I, II.4).
func (s *Solver) firstStep() float64 {
	span := math.Abs(s.t1 - s.t)
	if s.initStep > 0 {
		return min(s.initStep, span)
	}
	d0, d1 := 0.0, 0.0
	for i, v := range s.y {
		sc := s.atol[i] + s.rtol*math.Abs(v)
		if v == 0 && s.autoAtol {
			continue
		}
		d0 += sq(v / sc)
		d1 += sq(s.f0[i] / sc)
	}
	d0, d1 = math.Sqrt(d0/float64(s.n)), math.Sqrt(d1/float64(s.n))
	h := 1e-3 * span
	if d0 > 1e-5 && d1 > 1e-5 {
		h = min(h, 0.01*d0/d1)
	} else {
		h = min(h, 1e-6*span)
	}
	h = max(h, 4*s.spacing(s.t))
	for range 60 {
		for i, v := range s.y {
			s.arg[i] = v + s.dir*h*s.f0[i]
		}
		s.stats.FuncEvals++
		s.f(s.fs, s.t+s.dir*h, s.arg)
		if allFinite(s.fs) {
			break
		}
		h *= 0.1
	}
	d2 := 0.0
	for i, v := range s.y {
		sc := s.atol[i] + s.rtol*math.Abs(v)
		if v == 0 && s.autoAtol {
			continue
		}
		d2 += sq((s.fs[i] - s.f0[i]) / sc)
	}
	d2 = math.Sqrt(d2/float64(s.n)) / h
	h1 := 100 * h
	if d2 > 0 && d2 <= math.MaxFloat64 && d1 > 0 {
		// The solution varies at the rate L = |y''|/|y'| and, if it decays,
		// by d1/L tolerances: resolve that with the order of the method.
		L := d2 / d1
		h1 = 2 / L
		if d1 > L {
			h1 *= math.Exp(-math.Log(d1/L) / s.q)
		}
	}
	return max(min(100*h, h1, span), min(span, 4*s.spacing(s.t)))
}

func sq(x float64) float64 { return x * x }

// roughLog returns ln x for x > 0 to about 1e-4, which is all the step
// controller needs, in a fraction of the time of math.Log.
func roughLog(x float64) float64 {
	b := math.Float64bits(x)
	e := float64(int(b>>52) - 1023)
	m := math.Float64frombits(b&(1<<52-1)|1023<<52) - 1 // in [0, 1)
	// ln(1+m), Abramowitz & Stegun 4.1.43 (error below 1e-5).
	l := m * (0.99949556 + m*(-0.49190896+m*(0.28947478+m*(-0.13606275+m*0.03215845))))
	return e*math.Ln2 + l
}

// roughExp returns exp x for |x| < 3 to about 1e-4 relative.
func roughExp(x float64) float64 {
	x *= 0.125
	p := 1 + x*(1+x*(0.5+x*(1.0/6+x*(1.0/24))))
	p *= p
	p *= p
	return p * p
}

// Integrate runs from (t0, y) to t1 and leaves the state reached in y, also
// when it returns an error.
func (s *Solver) Integrate(t0, t1 float64, y []float64) (Result, error) {
	if err := s.Init(t0, t1, y); err != nil {
		return Result{T: t0, Status: Failed}, err
	}
	for {
		done, err := s.Step()
		if done {
			copy(y, s.y)
			return s.result(), err
		}
	}
}

// IntegrateAt runs from (t0, y) through times, which must lead away from t0 in
// one direction, and writes the state at times[i] to dst[i*n:(i+1)*n]. It ends
// at the last of times, at a terminal event, or with an error, and leaves the
// state reached in y. States at times not reached are not written.
func (s *Solver) IntegrateAt(dst []float64, times []float64, t0 float64, y []float64) (Result, error) {
	n := s.n
	if len(times) == 0 || len(dst) < n*len(times) {
		return Result{T: t0, Status: Failed}, badInput("%d output times with room for %d values", len(times), len(dst))
	}
	t1 := times[len(times)-1]
	prev := t0
	for i, v := range times {
		if math.IsNaN(v) || (t1 >= t0 && v < prev) || (t1 < t0 && v > prev) {
			return Result{T: t0, Status: Failed}, badInput("output time %d (%g) is out of order", i, v)
		}
		prev = v
	}
	if err := s.Init(t0, t1, y); err != nil {
		return Result{T: t0, Status: Failed}, err
	}
	s.denseWanted = true
	k := 0
	for k < len(times) && times[k] == t0 {
		copy(dst[k*n:k*n+n], s.y)
		k++
	}
	for {
		done, err := s.Step()
		if err == nil {
			for k < len(times) && s.dir*(times[k]-s.t) <= 0 {
				if times[k] == s.t {
					copy(dst[k*n:k*n+n], s.y1)
				} else {
					s.Interpolate(dst[k*n:k*n+n], times[k])
				}
				k++
			}
		}
		if done {
			copy(y, s.y)
			return s.result(), err
		}
	}
}

func (s *Solver) result() Result {
	return Result{T: s.t, Status: s.status, Stats: s.stats, Events: s.ev.records, Losses: s.gd.losses}
}
