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
	add("Response time", pretty(f.ResponseKyr, 3, "kyr"), "surface carbon, e-folding")
	add("Sensitivity", pretty(f.Sensitivity, 3, "K"), "a doubling of CO₂")
	add("Forcing", pretty(f.Forcing, 3, "W/m²"), "a doubling of CO₂")
	return out
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

// methods is a paragraph for the methods section of a paper, written from the
// laws and values of this run.
func methods(r *record.Run) string {
	var b strings.Builder
	from, to, ok := extent(r)
	b.WriteString("We computed the history of surface climate and carbon cycle of “" + clip(titleOf(r), 120) + "”")
	if ok {
		b.WriteString(" from " + age(from) + " to " + age(to) + " after the formation of its star")
	}
	b.WriteString(" with cycle " + clean(r.Version) + " (scenario " + clean(r.Hash) + ").")
	if s := clean(r.StartWords); s != "" {
		b.WriteString(" The history begins in a steady state: " + strings.TrimSuffix(s, ".") + ".")
	}
	if len(r.Laws) > 0 {
		b.WriteString(" The laws are: ")
		for i, l := range r.Laws {
			if i > 0 {
				b.WriteString("; ")
			}
			b.WriteString("for " + clean(l.Part) + ", " + strings.TrimSuffix(clean(l.Doc), "."))
			if s := clean(l.Source); s != "" {
				b.WriteString(" (" + s + ")")
			}
		}
		b.WriteString(".")
	}
	if r.Reference.Reached && r.ReferenceAgeGyr != 0 {
		b.WriteString(" At the reference age of " + age(r.ReferenceAgeGyr) + " the surface is at " + kelvin(r.Reference.TemperatureK) + " under " + pressure(r.Reference.PCO2Bar) + " of CO₂; a doubling of CO₂ warms it by " + pretty(r.Feedback.Sensitivity, 3, "K") + ".")
	}
	s := &r.Solver
	b.WriteString(" The equations were integrated with " + clean(s.Method) + " at a relative tolerance of " + pretty(s.RelTol, 3, ""))
	if s.Guard {
		b.WriteString(" under a stability guard that dates the loss of a climate branch")
	}
	b.WriteString("; dates carry the difference to a run at " + pretty(s.TightenedTol, 3, "") + " as their numerical error. Total carbon is conserved to a relative " + pretty(r.CarbonDrift, 2, "") + ".")
	return b.String()
}
