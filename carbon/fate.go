package carbon

import (
	"context"
	"errors"
	"math"
	"sort"

	"cycle/carbon/record"
	"cycle/carbon/units"
	"cycle/ode"
)

// Fate runs one history of a setup and keeps only what a row of an ensemble
// holds: the outcome, the first date on every clock, the end and the state at
// some ages in yr. It is Run without the second run that gives dates their
// error, and without margins, zone and words.
//
// Numerical trouble is the outcome record.Undecided with a status. So is a setup
// that no carbon brings through the reference state, unless it is known what
// becomes of it: see settle. The error is a *SetupError when the numbers do not fit
// together, or that of ctx.
func Fate(ctx context.Context, s *Setup, ages []float64) (*record.Member, error) {
	m, err := NewModel(s)
	if err != nil {
		return nil, err
	}
	ending, missed := (*history)(nil), false
	residual := 0.0
	if s.Solve != "nothing" {
		ending, residual, missed, err = m.settle(ctx)
	} else {
		ending, err = m.integrate(ctx, s.End, s.Tolerance, true)
	}
	var setup *SetupError
	var step *ode.StepError
	switch {
	case err == nil:
	case errors.As(err, &setup):
		return Unrun(s, record.StatusUnanchored), nil
	case errors.As(err, &step):
		return Unrun(s, record.StatusSolver), nil
	default:
		return nil, err
	}
	x := m.member(ending, residual, ages)
	if missed {
		x.Status = record.StatusMissed
	}
	return x, nil
}

// settle is anchor followed by the history, for many planets. It looks for the
// root in long steps at a loose tolerance, and then corrects it by the history
// itself until that meets the reference CO₂ to ten times the relative tolerance:
// 0.01 % as a rule, which moves no date by more than 1e-5 of itself.
//
// Where less carbon gives a planet that is frozen at the reference age, or has
// cycled before it, and any more gives one with too much CO₂, no warm planet has the reference CO₂: the one that would have it freezes.
// The history is then that of the carbon at which the warm ones, extrapolated,
// would have it, and missed is true. Likewise on the hot side: the one with enough
// carbon overheats before.
func (m *Model) settle(ctx context.Context) (h *history, residual float64, missed bool, err error) {
	const (
		far    = 50
		gap    = 0.02          // width in ln carbon at which a jump is one
		close  = 0.35          // ln(p/p₀) of a warm planet, and
		narrow = 0.1           // width, from which one is told by extrapolation
		slope  = 1.5           // d ln p/d ln carbon to start with
		near   = 3e-3          // |ln(p/p₀)| at which the loose search ends
		most   = 5.70378247466 // ln 300
	)
	s := m.set
	knob := &m.content
	if s.Solve == "outgassing" {
		knob = &m.scale
	}
	x0, longest, freezes := *knob, s.MaxStep, s.MaxFreezes
	defer func() { s.MaxStep, s.MaxFreezes = longest, freezes }()
	value := func(h *history) (float64, error) {
		switch {
		case h.hasRef && h.atRef.T > s.FrozenBelow:
			return math.Log(s.ocean.law.Solve(h.atRef.Surface, h.atRef.Alk, h.atRef.T).P / s.RefP), nil
		case h.hasRef || h.reason == endCondense || h.reason == endCold || h.reason == endFreezes:
			return -far, nil
		case h.reason == endSolver:
			return 0, h.cause
		}
		return far, nil
	}
	shoot := func(x float64) (float64, error) {
		*knob = x0 * math.Exp(x)
		s.MaxStep, s.MaxFreezes = math.Max(longest, looseStep), cycling
		h, err := m.integrate(ctx, math.Min(s.End, s.RefAge*(1+1e-9)), math.Max(looseTolerance, s.Tolerance), false)
		s.MaxStep, s.MaxFreezes = longest, freezes
		if err != nil {
			return 0, err
		}
		return value(h)
	}
	whole := func() (*history, error) { return m.integrate(ctx, s.End, s.Tolerance, true) }
	robust := func() (*history, float64, bool, error) {
		if ctx.Err() != nil {
			return nil, 0, false, ctx.Err()
		}
		*knob = x0
		r, err := m.anchor(ctx, s.Tolerance)
		if err != nil {
			return nil, r, false, err
		}
		h, err := whole()
		return h, r, false, err
	}
	lo, hi := math.Inf(-1), math.Inf(1) // f < 0 at lo, f > 0 at hi
	flo, fhi := 0.0, 0.0
	x, d := 0.0, slope
	px, pf := math.NaN(), 0.0 // the point before
	stride := 0.3
	tol := 10 * s.Tolerance
	for n := 0; ; n++ {
		f, err := shoot(x)
		if err != nil {
			return robust()
		}
		if math.Abs(f) < far {
			if !math.IsNaN(px) && x != px {
				if e := (f - pf) / (x - px); e > 0.05 {
					d = e
				}
			}
			px, pf = x, f
			if math.Abs(f) < near/100 || math.Abs(f) < near && n > 0 {
				x -= f / d
				break
			}
		}
		if f < 0 {
			lo, flo = x, f
		} else {
			hi, fhi = x, f
		}
		// A warm planet close above a frozen one points at the carbon it takes.
		jump := flo == -far && fhi > 0 && fhi < far && (hi-lo < gap || hi-fhi/d <= lo && (fhi < close || hi-lo < narrow))
		if jump {
			for k := range 12 {
				*knob = x0 * math.Exp(math.Min(hi-fhi/d, lo)-gap*float64(k*k))
				if h, err = whole(); err != nil {
					return nil, 0, false, err
				}
				switch f, err := value(h); {
				case err != nil:
					return robust()
				case f == -far:
					return h, math.NaN(), true, nil
				case math.Abs(f) <= tol:
					return h, f, false, nil
				}
			}
			return robust()
		}
		if hi-lo < gap/2 && flo < 0 && fhi == far {
			*knob = x0 * math.Exp(hi)
			if h, err = whole(); err != nil {
				return nil, 0, false, err
			}
			if f, err := value(h); err == nil && f == far {
				return h, math.NaN(), true, nil
			}
			return robust()
		}
		if hi-lo < 1e-3 || n > 60 {
			return robust()
		}
		next := x - f/d
		switch {
		case math.IsInf(lo, 0) || math.IsInf(hi, 0):
			if math.Abs(f) >= far || math.Abs(next-x) > stride {
				next = x - math.Copysign(stride, f)
				stride *= 1.6
			}
			if math.Abs(next) > most {
				return robust()
			}
		case flo == -far && fhi < far && hi-fhi/d > lo && hi-fhi/d < hi-gap/2:
			next = hi - fhi/d
		case math.Abs(f) >= far || !(next > lo+0.05*(hi-lo) && next < hi-0.05*(hi-lo)) && math.Abs(f) > 0.3:
			next = 0.5 * (lo + hi)
		}
		x = next
	}
	for range 6 {
		*knob = x0 * math.Exp(x)
		if h, err = whole(); err != nil {
			return nil, 0, false, err
		}
		f, err := value(h)
		switch {
		case err != nil:
			return robust()
		case math.Abs(f) == far: // in short steps it freezes or overheats
			return h, math.NaN(), true, nil
		case math.Abs(f) > 0.3:
			return robust() // a jump is close
		case math.Abs(f) <= tol:
			return h, f, false, nil
		}
		x -= f / d
	}
	return robust()
}

// The loose search of settle.
const (
	looseTolerance = 1e-4
	looseStep      = 100 * units.Myr
	cycling        = 3 // freezes that make limit cycles
)

// Unrun is the row of a member without a history.
func Unrun(s *Setup, status string) *record.Member {
	nan := math.NaN()
	u := &record.Member{Kind: record.Undecided, TimeGyr: gyr(s.Start), Status: status, EndGyr: gyr(s.Start),
		EndT: nan, EndP: nan, EndPH: nan, ColdestK: nan, HottestK: nan, Solved: nan, Residual: nan, FrozenShare: nan, Drift: nan}
	for i := range u.Clocks {
		u.Clocks[i] = nan
	}
	return u
}

// statuses words the end of a history for the table of members.
var statuses = map[string]string{
	endTime: record.StatusEnd, endTable: record.StatusTable, endStar: record.StatusStar, endHot: record.StatusHot, endCold: record.StatusCold,
	endDense: record.StatusDense, endDry: record.StatusDry, endCondense: record.StatusCondense, endFreezes: record.StatusFreezes, endSolver: record.StatusSolver,
}

// member reads the row off a history.
func (m *Model) member(h *history, residual float64, ages []float64) *record.Member {
	nan := math.NaN()
	v := m.judge(h)
	x := &record.Member{Kind: v.kind, TimeGyr: gyr(v.t), Status: statuses[h.reason], EndGyr: gyr(h.end),
		Freezes: len(h.frozen), Steps: h.stats.Steps, Evals: h.stats.FuncEvals, Drift: h.drift, Residual: residual, Solved: nan}
	switch m.set.Solve {
	case "total":
		x.Solved = m.content * m.set.Mass
	case "outgassing":
		x.Solved = m.scale
	}
	for i := range x.Clocks {
		x.Clocks[i] = nan
	}
	first := func(clock string, t float64) {
		for i, c := range record.Clocks {
			if c == clock && !(x.Clocks[i] <= gyr(t)) {
				x.Clocks[i] = gyr(t)
			}
		}
	}
	for _, k := range h.marks {
		first(k.name, k.t)
	}
	for _, w := range h.frozen {
		first(record.MarkFroze, w.start)
		x.FrozenShare += orEnd(w.end, h.end) - w.begun()
	}
	if span := h.end - m.set.Start; span > 0 {
		x.FrozenShare /= span
	} else {
		x.FrozenShare = 0
	}
	for _, w := range h.moist {
		first(record.MarkMoist, w.start)
	}
	switch h.reason {
	case endDry:
		first(string(record.WaterLost), h.end)
	case endHot:
		w := span{lost: nan, start: h.end, end: nan}
		if n := len(h.moist); n > 0 {
			w = h.moist[n-1]
		}
		if m.hotKind(h, w) == record.RunawayGreen {
			first(string(record.RunawayGreen), w.begun())
		}
	}
	last := &h.rows[len(h.rows)-1]
	x.EndT, x.EndP, x.EndPH = last.Temperature, last.PCO2, last.PH
	x.ColdestK, x.HottestK = math.Inf(1), math.Inf(-1)
	for i := range h.rows {
		if i > 0 && h.rows[i].Age > v.t {
			break
		}
		x.ColdestK = math.Min(x.ColdestK, h.rows[i].Temperature)
		x.HottestK = math.Max(x.HottestK, h.rows[i].Temperature)
	}
	for _, age := range ages {
		x.At = append(x.At, h.at(age))
	}
	return x
}

func orEnd(x, end float64) float64 {
	if math.IsNaN(x) {
		return end
	}
	return x
}

// at reads the state at an age off the rows: linear in temperature and pH, and
// in the logarithm of CO₂. Rows are close where things change.
func (h *history) at(age float64) record.Snapshot {
	i := sort.Search(len(h.rows), func(i int) bool { return h.rows[i].Age >= age })
	if i == len(h.rows) || i == 0 && h.rows[0].Age > age {
		nan := math.NaN()
		return record.Snapshot{Temperature: nan, PCO2: nan, PH: nan}
	}
	b := &h.rows[i]
	if i == 0 || b.Age == age {
		return record.Snapshot{Temperature: b.Temperature, PCO2: b.PCO2, PH: b.PH}
	}
	a := &h.rows[i-1]
	w := (age - a.Age) / (b.Age - a.Age)
	return record.Snapshot{
		Temperature: a.Temperature + w*(b.Temperature-a.Temperature),
		PCO2:        a.PCO2 * math.Pow(b.PCO2/a.PCO2, w),
		PH:          a.PH + w*(b.PH-a.PH),
	}
}
