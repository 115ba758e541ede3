package reports

import (
	"fmt"
	"math"

	"cycle/carbon/record"
	"cycle/reports/internal/num"
)

// A strip is the whole history as one band of climate states: the first thing
// the eye meets in a report, drawn without a script.
type strip struct {
	Bands []stripBand
	Ticks []stripTick
	End   *stripTick // the outcome
	Alt   string
}

type stripBand struct{ X, W, Mid, Role, Name string }
type stripTick struct{ X, Label, Anchor string }

func percent(v float64) string { return fmt.Sprintf("%.3f%%", v) }

func stripOf(r *record.Run) *strip {
	from, to, ok := extent(r)
	if !ok || !known(from) || !known(to) {
		return nil
	}
	at := func(t float64) float64 { return 100 * (t - from) / (to - from) }
	s := &strip{Alt: "History from " + num.Age(from) + " to " + num.Age(to) + ": "}
	for i, e := range r.Episodes {
		if !known(e.Start) || !known(e.End) {
			continue
		}
		b := stripBand{X: percent(at(e.Start)), W: percent(math.Max(at(e.End)-at(e.Start), 0.15)), Mid: percent((at(e.Start) + at(e.End)) / 2), Role: stateRole(e.State)}
		if at(e.End)-at(e.Start) > 22 {
			b.Name = clip(clean(e.State), 24)
		}
		s.Bands = append(s.Bands, b)
		if i < 6 {
			if i > 0 {
				s.Alt += ", then "
			}
			s.Alt += clip(clean(e.State), 40) + " until " + num.Age(e.End)
		} else if i == 6 {
			s.Alt += fmt.Sprintf(", and %d more episodes", len(r.Episodes)-6)
		}
	}
	s.Alt += "."
	step := niceStep((to - from) / 8)
	for t := math.Ceil(from/step) * step; t <= to+1e-9*step; t += step {
		x, anchor := at(t), "middle"
		if x < 2 {
			anchor = "start"
		}
		if x > 93 { // the unit stands there
			continue
		}
		s.Ticks = append(s.Ticks, stripTick{X: percent(x), Label: num.Pretty(num.Short(t, 4)), Anchor: anchor})
	}
	if lasting(r.Outcome.Kind) && known(r.Outcome.TimeGyr) && at(r.Outcome.TimeGyr) >= 0 && at(r.Outcome.TimeGyr) <= 100 {
		x, anchor := at(r.Outcome.TimeGyr), "middle"
		switch {
		case x < 25:
			anchor = "start"
		case x > 75:
			anchor = "end"
		}
		date := age(r.Outcome.TimeGyr)
		s.End = &stripTick{X: percent(x), Label: typeset(clip(clean(string(r.Outcome.Kind)), 40)) + ", " + date, Anchor: anchor}
	}
	return s
}

// niceStep rounds a distance between ticks up to 1, 2 or 5 times a power of ten.
func niceStep(raw float64) float64 {
	p := math.Pow(10, math.Floor(math.Log10(raw)))
	for _, m := range []float64{1, 2, 5} {
		if raw <= m*p*1.0001 {
			return m * p
		}
	}
	return 10 * p
}

func nan() float64 { return math.NaN() }
