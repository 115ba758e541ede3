package reports

import (
	"fmt"

	"cycle/carbon/record"
	"cycle/reports/internal/num"
)

// doubtsShown is how many doubts stand beside a figure; more are counted.
const doubtsShown = 4

// beside words doubts for a figure.
func beside(ws []record.Warning, concerned func(record.Warning) bool) []string {
	var out []string
	n := 0
	for _, w := range ws {
		if !concerned(w) {
			continue
		}
		if n++; n <= doubtsShown {
			s := typeset(sentenceEnd(w.Words))
			if a := clean(w.About); a != "" && a != "ensemble" {
				s = a + ": " + s
			}
			out = append(out, s)
		}
	}
	if n > doubtsShown {
		out = append(out, fmt.Sprintf("%d more.", n-doubtsShown))
	}
	return out
}

func every(record.Warning) bool { return true }

// doubtsOf are the doubts of several runs, each under the name of its run.
func doubtsOf(names []string, runs []*record.Run) []record.Warning {
	var out []record.Warning
	for i, r := range runs {
		for _, w := range r.Warnings {
			if i < len(names) {
				w.Words = clip(clean(names[i]), 40) + ", " + clean(w.Words)
			}
			out = append(out, w)
		}
	}
	return out
}

// ranged words over what a column of a run ranges: "earth from 286.5 K
// (4.253 Gyr) to 350.0 K (6.078 Gyr)".
func ranged(name string, r *record.Run, column string, set func(float64) string) string {
	e := extremes(r, column)
	if !e.ok {
		return clean(name) + " has none."
	}
	if a, z := set(e.least), set(e.most); a == z {
		return clean(name) + " stays at " + a + "."
	}
	return clean(name) + " from " + set(e.least) + " (" + age(e.tLeast) + ") to " + set(e.most) + " (" + age(e.tMost) + ")."
}

// rangedAll words a column of all runs of a comparison.
func rangedAll(c *record.Comparison, column string, set func(float64) string) []string {
	var out []string
	for i, r := range c.Runs {
		if i == 6 && len(c.Runs) > 7 {
			out = append(out, fmt.Sprintf("%d more.", len(c.Runs)-i))
			break
		}
		if i < len(c.Names) {
			out = append(out, typeset(ranged(clip(clean(c.Names[i]), 60), r, column, set)))
		}
	}
	return out
}

// unitSet sets a value with a unit.
func unitSet(unit string) func(float64) string {
	return func(v float64) string {
		if v > -0.0005 && v < 0.0005 { // what is left of a limit that is reached
			return num.With("0", unit)
		}
		return pretty(v, 3, unit)
	}
}

// crossing is the first time at which a curve that falls is at or below a value.
func crossing(c *record.Curve, value float64) (float64, bool) {
	for i, v := range c.Value {
		if v <= value && i < len(c.TimeGyr) {
			return c.TimeGyr[i], true
		}
	}
	return 0, false
}
