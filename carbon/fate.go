package carbon

import (
	"context"
	"errors"
	"math"
	"sort"

	"cycle/carbon/record"
	"cycle/ode"
)

// Fate runs one history of a setup and keeps only what a row of an ensemble
// holds: the outcome, the first date on every clock, the end and the state at
// some ages in yr. It is Run without the second run that gives dates their
// error, and without margins, zone and words.
//
// Numerical trouble is the outcome record.Undecided with a status, and so is a
// history that cannot be brought through the reference state. The error is a
// *SetupError when the numbers do not fit together, or that of ctx.
func Fate(ctx context.Context, s *Setup, ages []float64) (*record.Member, error) {
	m, err := NewModel(s)
	if err != nil {
		return nil, err
	}
	residual := 0.0
	if s.Solve != "nothing" {
		if residual, err = m.anchor(ctx, s.Tolerance); err != nil {
			var se *SetupError
			var step *ode.StepError
			switch {
			case errors.As(err, &se):
				return Unrun(s, record.StatusUnanchored), nil
			case errors.As(err, &step):
				return Unrun(s, record.StatusSolver), nil
			}
			return nil, err
		}
	}
	h, err := m.integrate(ctx, s.End, s.Tolerance, true)
	if err != nil {
		return nil, err
	}
	return m.member(h, residual, ages), nil
}

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
