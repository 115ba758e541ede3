package reports

import (
	"sort"
	"strings"

	"cycle/carbon/record"
	"cycle/reports/internal/num"
)

// factsOf says where the planet stands at the reference age and how strong its
// thermostat is.
func factsOf(r *record.Run) []fact {
	var out []fact
	add := func(name, value, note string) {
		if value != num.Missing {
			out = append(out, fact{name, value, note})
		}
	}
	s, f := &r.Reference, &r.Feedback
	if s.Reached {
		add("Temperature", kelvin(s.TemperatureK), "")
		add("CO₂", pressure(s.PCO2Bar), "")
		if known(s.PH) {
			add("Ocean", "pH "+num.Pretty(num.Fix(s.PH, 2)), "")
		}
		add("Outgassing", pretty(s.Outgassing, 3, "Tmol/yr"), "")
	}
	add("Feedback gain", pretty(f.Gain, 3, ""), "d ln W / d ln pCO₂")
	add("Response time", num.Pretty(num.Span(f.ResponseKyr*1e-6)), "of surface carbon, e-fold")
	add("Sensitivity", pretty(f.Sensitivity, 3, "K"), "a doubling of CO₂")
	add("Forcing", pretty(f.Forcing, 3, "W/m²"), "a doubling of CO₂")
	return out
}

// passed words how a disturbance went by.
func passed(p *record.Recovery, set func(string) string) string {
	change := num.Short(p.PeakKelvin, 3)
	if p.PeakKelvin > 0 {
		change = "+" + change
	}
	s := clip(clean(p.Pulse), 60) + ", at " + num.Age(p.StartGyr) + ": " + num.With(set(change), "K") + " at the most"
	if known(p.RecoveryKyr) {
		return s + ", down to 1/e after " + set(num.Span(p.RecoveryKyr*1e-6))
	}
	return s + ", no recovery followed"
}

// solverFacts says what the integrator did.
func solverFacts(r *record.Run) []fact {
	s := &r.Solver
	var out []fact
	add := func(name, value string) {
		if value != "" && value != num.Missing {
			out = append(out, fact{Name: name, Value: value})
		}
	}
	add("Method", clean(s.Method))
	add("Relative tolerance", pretty(s.RelTol, 3, ""))
	add("Tolerance of the run that gives the errors", pretty(s.TightenedTol, 3, ""))
	if s.Guard {
		add("Stability guard", "on")
	} else {
		add("Stability guard", "off")
	}
	add("Steps", num.Count(s.Steps, "step", "steps"))
	add("Steps rejected", counts(s.Rejected))
	add("Steps limited by", counts(s.Limiting))
	add("Evaluations of the model", num.Short(float64(s.FuncEvals), 9))
	add("Smallest step", pretty(s.MinStepYr, 3, "yr"))
	add("Largest step", pretty(s.MaxStepYr, 3, "yr"))
	add("How it ended", clean(s.Status))
	add("Start", clean(r.StartWords))
	if r.Reference.Solved != "" {
		add("Solved for", clean(r.Reference.Solved)+" (left over in ln pCO₂: "+pretty(r.Reference.Residual, 2, "")+")")
	}
	add("Carbon drift over the history", pretty(r.CarbonDrift, 2, "of the total"))
	return out
}

// counts lists counts by name, the largest first.
func counts(m map[string]int) string {
	names := make([]string, 0, len(m))
	for k := range m {
		names = append(names, k)
	}
	sort.Slice(names, func(i, j int) bool {
		if m[names[i]] != m[names[j]] {
			return m[names[i]] > m[names[j]]
		}
		return names[i] < names[j]
	})
	for i, k := range names {
		names[i] = clean(k) + " " + num.Short(float64(m[k]), 9)
	}
	return strings.Join(names, ", ")
}
