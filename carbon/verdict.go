package carbon

import (
	"errors"
	"fmt"
	"math"
	"regexp"
	"strings"

	"cycle/carbon/record"
	"cycle/ode"
)

// outcome words the verdict: what, when and with what numerical error, and the
// process that brought it about at a glance.
func (b *builder) outcome(check *history) {
	o, h, s := &b.run.Outcome, b.h, b.m.set
	when := date(o.TimeGyr, o.ErrorGyr)
	liquid := gyr(b.fail.t - s.Start)
	for _, f := range h.frozen { // less what was spent under ice before
		if f.end < b.fail.t {
			liquid -= gyr(f.end - f.begun())
		}
	}
	cold := b.fail.span
	switch b.fail.kind {
	case record.Temperate:
		o.Sentence = fmt.Sprintf("Surface water stays liquid from %.3g Gyr to the end of the history at %.4g Gyr.", gyr(s.Start), o.TimeGyr)
		if n := len(h.frozen); n > 0 {
			o.Sentence = fmt.Sprintf("No lasting failure up to %.4g Gyr; the planet froze %s on the way and recovered.", o.TimeGyr, times(n))
		}
	case record.Snowball:
		o.Sentence = fmt.Sprintf("The planet freezes over at %s, after %.3g Gyr of liquid water, and %s.", when, liquid, staysFrozen(cold, h))
		if liquid < 1e-3 {
			o.Sentence = fmt.Sprintf("The planet has no warm climate at its start, %.3g Gyr, freezes over at once and %s.", gyr(s.Start), staysFrozen(cold, h))
		}
	case record.LimitCycles:
		o.Sentence = fmt.Sprintf("From %s on the climate cycles between snowball and warm: %d freezes by %.3g Gyr, %.0f %% of the history under ice.", when, len(h.frozen), gyr(h.end), 100*b.run.FrozenShare)
	case record.MoistGreen, record.RunawayGreen:
		o.Sentence = fmt.Sprintf("Surface water is safe for %.3g Gyr; at %s the stratosphere turns moist and the planet begins to lose its water.", liquid, when)
		if b.fail.kind == record.RunawayGreen {
			o.Sentence = fmt.Sprintf("Surface water stays liquid for %.3g Gyr; at %s sunlight exceeds what the planet can radiate: runaway greenhouse.", liquid, when)
		}
		if liquid < 1e-3 {
			o.Sentence = fmt.Sprintf("The planet has no temperate climate at its start, %.3g Gyr: it ends in a %s.", gyr(s.Start), b.fail.kind)
		}
	case record.Condensation:
		o.Sentence = fmt.Sprintf("At %s, CO2 condenses at the coldest place before the greenhouse can act.", date(gyr(h.end), o.ErrorGyr))
		if cold.start > 0 {
			o.Sentence = fmt.Sprintf("The planet freezes over at %s and cannot thaw: CO2 condenses at the coldest place at %.4g Gyr.", when, gyr(h.end))
		}
	case record.WaterLost:
		o.Sentence = fmt.Sprintf("Surface water lasts for %.3g Gyr; at %s the last of it has escaped through the stratosphere.", liquid, when)
	case record.StarLeft:
		o.Sentence = fmt.Sprintf("Surface water stays liquid until the star leaves the main sequence at %.4g Gyr.", o.TimeGyr)
		if n := len(h.frozen); n > 0 {
			o.Sentence = fmt.Sprintf("No lasting failure until the star leaves the main sequence at %.4g Gyr; the planet froze %s on the way and recovered.", o.TimeGyr, times(n))
		}
	case record.BeyondRange:
		o.Sentence = fmt.Sprintf("At %s the climate leaves the range of the radiation law (%s): what follows is not known to this model.", when, beyond(h.reason))
		if h.reason == endSwings {
			w := &h.swings
			o.Sentence = fmt.Sprintf("From %s on the climate swings between %.3g and %.3g K every %.2g kyr, %d times up to %.4g Gyr and without an end in sight: what follows is not known to this model.", when, w.cold, w.warm, (w.last-w.start)/float64(w.count-1)*2e-3, w.count/2, gyr(h.end))
		}
	case record.Undecided:
		o.Sentence = fmt.Sprintf("Undecided: the solver could not go on at %.4g Gyr.", gyr(h.end))
	}
	o.Sentence, o.Why = tidy(o.Sentence), tidy(b.why())
}

var padded = regexp.MustCompile(`([0-9]e[+-])0+([0-9])`)

// tidy writes powers of ten without padding and plus: 1e-5, 2e6.
func tidy(s string) string {
	return strings.ReplaceAll(padded.ReplaceAllString(s, "$1$2"), "e+", "e")
}

// length words a span of time in years in the unit that suits it.
func length(yr float64) string {
	switch {
	case yr >= 0.9995e9:
		return fmt.Sprintf("%.3g Gyr", yr/1e9)
	case yr >= 0.9995e6:
		return fmt.Sprintf("%.3g Myr", yr/1e6)
	case yr >= 0.9995e3:
		return fmt.Sprintf("%.3g kyr", yr/1e3)
	}
	return fmt.Sprintf("%.3g yr", yr)
}

// date words a date with its numerical error.
func date(t, e float64) string {
	switch {
	case e == 0 || math.IsNaN(e):
		return fmt.Sprintf("%.4f Gyr", t)
	case e >= 1e-3:
		return fmt.Sprintf("%.3f ± %.1g Gyr", t, e)
	case e >= 1e-4:
		return fmt.Sprintf("%.4f ± %.1g Gyr", t, e)
	}
	return fmt.Sprintf("%.4f Gyr (± %s)", t, span1(e))
}

// span1 words a short span in the unit that suits it.
func span1(g float64) string {
	yr := g * 1e9
	switch {
	case yr >= 1e6:
		return fmt.Sprintf("%.1g Myr", yr/1e6)
	case yr >= 1e3:
		return fmt.Sprintf("%.0f kyr", yr/1e3)
	case yr >= 1:
		return fmt.Sprintf("%.0f yr", yr)
	}
	return "below 1 yr"
}

func times(n int) string {
	switch n {
	case 1:
		return "once"
	case 2:
		return "twice"
	}
	return fmt.Sprintf("%d times", n)
}

func staysFrozen(f span, h *history) string {
	if math.IsNaN(f.end) {
		where := ""
		if h.reason != endTime {
			where = ", where " + h.reason
		}
		return fmt.Sprintf("is still frozen at %.4g Gyr%s", gyr(h.end), where)
	}
	return fmt.Sprintf("thaws only at %.4g Gyr", gyr(f.end))
}

func beyond(reason string) string {
	switch reason {
	case endCold:
		return "too cold"
	case endDense:
		return "too much CO2"
	}
	return "too hot"
}

// earthOcean is the mass of the Earth's oceans, kg.
const earthOcean = 1.35e21

// why names what changed between the start and the failure, in numbers.
func (b *builder) why() string {
	rows := b.h.rows
	at := func(t float64) *record.Row {
		best := &rows[0]
		for i := range rows {
			if rows[i].Age <= t {
				best = &rows[i]
			}
		}
		return best
	}
	r0, r := &rows[0], at(b.fail.t)
	switch b.fail.kind {
	case record.Snowball, record.LimitCycles, record.Condensation:
		if b.fail.t <= r0.Age {
			return fmt.Sprintf("at the start sunlight is %.0f %% of the Earth's today and outgassing %.3g Tmol/yr", 100*r0.Flux, r0.Outgassing/1e12)
		}
		words := fmt.Sprintf("outgassing of %.3g Tmol/yr", r.Outgassing/1e12)
		if r.Outgassing < 0.995*r0.Outgassing {
			words = fmt.Sprintf("outgassing fell from %.3g to %.3g Tmol/yr", r0.Outgassing/1e12, r.Outgassing/1e12)
		}
		needs := math.NaN() // of the last row that still had a warm branch
		for i := range rows {
			if n := rows[i].WarmNeeds; rows[i].Age <= r.Age && !math.IsNaN(n) {
				needs = n
			}
		}
		switch {
		case math.IsNaN(needs):
			words += ", too little to keep up CO2 against weathering"
		case r.Outgassing < needs && fmt.Sprintf("%.3g", r.Outgassing) == fmt.Sprintf("%.3g", needs):
			words += ", just short of what the warm climate needs"
		case r.Outgassing < needs:
			words += fmt.Sprintf(", below the %.3g Tmol/yr that the warm climate needs", needs/1e12)
		default:
			words += fmt.Sprintf(", down to the %.3g Tmol/yr that the warm climate needs", needs/1e12)
		}
		words += fmt.Sprintf(" at %.0f %% of the Earth's sunlight today", 100*r.Flux)
		if a, z := r0.LandFraction*r0.Biology, r.LandFraction*r.Biology; z > 1.2*a {
			words += fmt.Sprintf("; land to weather grew from %.2g to %.2g of the reference", a, z)
		}
		return words
	case record.MoistGreen, record.RunawayGreen:
		if b.fail.t <= r0.Age {
			return fmt.Sprintf("at the start sunlight is %.0f %% of the Earth's today and outgassing %.3g Tmol/yr", 100*r0.Flux, r0.Outgassing/1e12)
		}
		if r.PCO2 > r0.PCO2 {
			return fmt.Sprintf("outgassing of %.3g Tmol/yr exceeded the %.3g Tmol/yr that weathering took up, so CO2 rose from %s to %s at %.0f %% of the Earth's sunlight today",
				r.Outgassing/1e12, (r.Land+r.Seafloor)/1e12, pressure(r0.PCO2), pressure(r.PCO2), 100*r.Flux)
		}
		return fmt.Sprintf("sunlight rose from %.0f to %.0f %% of the Earth's today; CO2 had fallen to %s, so weathering had no more warming to give back", 100*r0.Flux, 100*r.Flux, pressure(r.PCO2))
	case record.WaterLost:
		return fmt.Sprintf("of its %.2g kg of water, %.2g of the Earth's oceans, hydrogen escapes as fast as it diffuses: at %.4g K a fraction %.2g of the stratosphere is water", r0.Water, r0.Water/earthOcean, r.Temperature, r.Moisture)
	case record.BeyondRange:
		if sinks := r.Land + r.Seafloor; r.PCO2 > 2*r0.PCO2 && r.Outgassing > sinks {
			return fmt.Sprintf("outgassing of %.3g Tmol/yr exceeded the %.3g Tmol/yr that weathering took up, so CO2 rose from %s to %s: %.4g K at %.0f %% of the Earth's sunlight today",
				r.Outgassing/1e12, sinks/1e12, pressure(r0.PCO2), pressure(r.PCO2), r.Temperature, 100*r.Flux)
		}
		return fmt.Sprintf("%.4g K and %s of CO2 at %.0f %% of the Earth's sunlight", r.Temperature, pressure(r.PCO2), 100*r.Flux)
	case record.Undecided:
		return b.stopped()
	}
	went := "went"
	if r.Flux > r0.Flux {
		went = "rose"
	}
	return fmt.Sprintf("weathering kept CO2 between %s and %s as sunlight %s from %.0f to %.0f %% of the Earth's today", pressure(least(rows)), pressure(most(rows)), went, 100*r0.Flux, 100*r.Flux)
}

// stopped words why the solver could not go on.
func (b *builder) stopped() string {
	var e *ode.StepError
	if !errors.As(b.h.cause, &e) {
		return b.h.reason
	}
	if errors.Is(e.Err, ode.ErrMaxSteps) {
		return fmt.Sprintf("the solver used up its %.0f steps (solver.max_steps) at %.4g Gyr, where the last one was %s long", b.m.set.MaxSteps, gyr(e.T), length(e.H))
	}
	limited := ""
	if names := b.m.lay.names(); e.Component >= 0 && e.Component < len(names) {
		limited = ", limited by " + names[e.Component]
	}
	return fmt.Sprintf("%s at %.4g Gyr, with a step of %s%s", strings.TrimPrefix(e.Err.Error(), "ode: "), gyr(e.T), length(e.H), limited)
}

// pressure words a CO₂ pressure in ppm or bar.
func pressure(p float64) string {
	if p < 1e-2 {
		if p < 9.995e-4 {
			return fmt.Sprintf("%.3g ppm", p*1e6)
		}
		return fmt.Sprintf("%.0f ppm", p*1e6)
	}
	return fmt.Sprintf("%.2g bar", p)
}

func least(rows []record.Row) float64 {
	p := math.Inf(1)
	for i := range rows {
		p = math.Min(p, rows[i].PCO2)
	}
	return p
}

func most(rows []record.Row) float64 {
	p := 0.0
	for i := range rows {
		p = math.Max(p, rows[i].PCO2)
	}
	return p
}
