package carbon

import (
	"context"
	"errors"
	"fmt"
	"math"
	"sort"
	"strings"

	"cycle/carbon/cite"
	"cycle/carbon/record"
	"cycle/carbon/star"
	"cycle/carbon/units"
	"cycle/ode"
)

// Run computes one history and everything that is said about it. The result's
// inputs, name, hash, version and command are left to the caller. The error is
// a *SetupError when the setup cannot stand, or that of ctx; numerical trouble
// is the outcome record.Undecided.
func Run(ctx context.Context, s *Setup) (*record.Run, error) {
	m, err := NewModel(s)
	if err != nil {
		return nil, err
	}
	main, residual, err := m.solved(ctx, s.Tolerance)
	if err != nil {
		return nil, err
	}
	solvedContent, solvedScale := m.content, m.scale

	// The same planet at a tighter tolerance, for the error of every date.
	tight := s.Tolerance / 10
	check, _, err := m.solved(ctx, tight)
	if err != nil {
		return nil, err
	}
	m.content, m.scale = solvedContent, solvedScale

	b := &builder{m: m, h: main, run: &record.Run{Format: 1, Title: s.Title}}
	b.dates(check)
	b.margins()
	b.zone()
	b.reference(residual)
	b.episodes()
	b.laws()
	b.solver(tight)
	b.outcome(check)
	b.marks(check)
	if len(s.Pulses) > 0 {
		if err := b.recoveries(ctx); err != nil {
			return nil, err
		}
	}
	b.warnings(residual)
	b.run.Rows = main.rows
	return b.run, nil
}

// solved anchors the model when asked to and runs the history.
func (m *Model) solved(ctx context.Context, rtol float64) (*history, float64, error) {
	var residual float64
	if m.set.Solve != "nothing" {
		var err error
		if residual, err = m.anchor(ctx, rtol); err != nil {
			var se *ode.StepError
			if !errors.As(err, &se) {
				return nil, 0, err
			}
			// The solve met numerical trouble: what can be shown is the history
			// before it, and the fate is undecided.
			h, e := m.integrate(ctx, m.set.End, rtol, true)
			if e == nil {
				h.reason, h.cause, h.unsolved = endSolver, err, true
			}
			return h, 0, e
		}
	}
	h, err := m.integrate(ctx, m.set.End, rtol, true)
	return h, residual, err
}

// builder puts a record.Run together.
type builder struct {
	m    *Model
	h    *history
	run  *record.Run
	fail verdict // of the main run
}

// verdict is the first lasting failure of a history.
type verdict struct {
	kind record.Kind
	t    float64 // yr
	span span    // of the failing episode
}

// hot tells whether the failure is on the hot side.
func (v verdict) hot() bool {
	return v.kind == record.MoistGreen || v.kind == record.RunawayGreen || v.kind == record.BeyondRange
}

// judge finds the first lasting failure.
func (m *Model) judge(h *history) verdict {
	if h.unsolved {
		return verdict{record.Undecided, h.end, span{}}
	}
	s := m.set
	var all []verdict
	add := func(k record.Kind, t float64, sp span) { all = append(all, verdict{k, t, sp}) }
	if len(h.frozen) >= 3 {
		add(record.LimitCycles, h.frozen[0].begun(), h.frozen[0])
	}
	for i, f := range h.frozen {
		lasts := f.end - f.start
		switch {
		case math.IsNaN(f.end) && h.reason == endSolver:
			lasts = h.end - f.start // what follows is not known
		case math.IsNaN(f.end):
			lasts = math.Inf(1)
			if i > 1 { // the last of three freezes or more is one of the cycles
				continue
			}
		}
		if lasts >= s.Lasting {
			k := record.Snowball
			if math.IsInf(lasts, 1) && h.reason == endCondense {
				k = record.Condensation
			}
			add(k, f.begun(), f)
			break
		}
	}
	for _, w := range h.moist {
		if w.end-w.start < moistLasting || math.IsNaN(w.end) && h.reason == endSolver && h.end-w.start < moistLasting {
			continue
		}
		if quick := math.IsNaN(w.end) && h.end-w.start < 1*units.Myr; math.IsNaN(w.lost) && !quick {
			add(record.MoistGreen, w.start, w)
		} else {
			add(m.hotKind(h, w), w.begun(), w)
		}
		break
	}
	switch h.reason {
	case endHot:
		if len(h.moist) == 0 {
			add(m.hotKind(h, span{}), h.end, span{lost: math.NaN(), start: h.end})
		}
	case endCold, endDense:
		add(record.BeyondRange, h.end, span{})
	case endSwings:
		add(record.BeyondRange, h.swings.start, span{})
	case endCondense:
		add(record.Condensation, h.end, span{})
	case endDry:
		add(record.WaterLost, h.end, span{})
	case endStar:
		add(record.StarLeft, h.end, span{})
	case endSolver:
		add(record.Undecided, h.end, span{})
	}
	v := verdict{record.Temperate, h.end, span{}}
	if len(all) > 0 {
		sort.SliceStable(all, func(i, j int) bool { return all[i].t < all[j].t })
		v = all[0]
	}
	return v
}

// hotKind tells what a hot end is: a runaway when sunlight exceeds what the
// surface can shed at its CO₂, a moist greenhouse when it passes the threshold
// in balance, beyond the model where the law still rises at its hot edge.
func (m *Model) hotKind(h *history, w span) record.Kind {
	if h.reason != endHot || len(h.rows) == 0 {
		return record.MoistGreen
	}
	last := &h.rows[len(h.rows)-1]
	if m.radiationLimit(last.Temperature-25, last.PCO2) <= last.Sunlight*1.0000001 {
		// Absorbed sunlight exceeds every outgoing flux on the way here. It is
		// the law's own limit only where the law has levelled off at its edge.
		top := m.top()
		f := m.set.radiation.law.Outgoing
		lnp := math.Log(last.PCO2)
		if slope := (f(top, last.PCO2, lnp) - f(top-2, last.PCO2, lnp)) / 2; slope > 0.5 {
			return record.BeyondRange
		}
		return record.RunawayGreen
	}
	return record.BeyondRange
}

// dates finds the verdict and its numerical error.
func (b *builder) dates(check *history) {
	b.fail = b.m.judge(b.h)
	v := b.m.judge(check)
	b.run.Outcome = record.Outcome{Kind: b.fail.kind, TimeGyr: gyr(b.fail.t), ErrorGyr: gyr(math.Abs(v.t - b.fail.t))}
	if v.kind != b.fail.kind {
		b.warn("solver", fmt.Sprintf("the run at a tolerance ten times tighter ends as %q at %.4g Gyr: this outcome is not numerically settled", v.kind, gyr(v.t)))
	}
}

func (b *builder) warn(about, words string) {
	words = tidy(words)
	for _, w := range b.run.Warnings {
		if w.About == about && w.Words == words {
			return
		}
	}
	b.run.Warnings = append(b.run.Warnings, record.Warning{About: about, Words: words})
}

// margins fills the distance to failure of every row and finds the closest
// approaches.
func (b *builder) margins() {
	m, s, rows := b.m, b.m.set, b.h.rows
	nan := math.NaN()
	state := frozenAt(b.h)
	fold := nan
	for i := range rows {
		r := &rows[i]
		r.WarmNeeds, r.ColdMargin, r.ColdKelvin, r.HotMargin, r.Gain, r.Response = nan, nan, nan, nan, nan, nan
		if state(r.Age) {
			fold = nan
			continue
		}
		d := m.drive(r.Age, r.MantleTemperature, r.CoreTemperature)
		if f, ok := m.nearFold(d, r.Temperature, fold); ok {
			fold = f
			if st, low, high := m.steadyAt(d, f); !low && !high {
				r.WarmNeeds = st.row.Land + st.row.Seafloor
				r.ColdMargin = r.Outgassing / r.WarmNeeds
				r.ColdKelvin = r.Temperature - f
			}
		} else {
			fold = nan
		}
		r.HotMargin = m.radiationLimit(r.Temperature, r.PCO2)/r.Sunlight - 1
		g := m.strength(r.Age, State{T: r.Temperature, Surface: r.Surface, Seafloor: r.SeafloorCarbon, Continental: r.Continental, Mantle: r.Mantle, MantleT: r.MantleTemperature, CoreT: r.CoreTemperature, Alk: r.Alk * s.OceanFraction * s.Mass})
		if !math.IsInf(g.gain, 0) && g.response > 0 && !math.IsInf(g.response, 0) {
			r.Gain, r.Response = g.gain, g.response
		}
	}
	var cold, kelvin, hot *record.Row
	for i := range rows {
		r := &rows[i]
		if r.Age > b.fail.t {
			break
		}
		if !math.IsNaN(r.ColdMargin) && (cold == nil || r.ColdMargin < cold.ColdMargin) {
			cold = r
		}
		if !math.IsNaN(r.ColdKelvin) && (kelvin == nil || r.ColdKelvin < kelvin.ColdKelvin) {
			kelvin = r
		}
		if !math.IsNaN(r.HotMargin) && (hot == nil || r.HotMargin < hot.HotMargin) {
			hot = r
		}
	}
	add := func(boundary, side string, r *record.Row, v float64, unit, words string) {
		b.run.Margins = append(b.run.Margins, record.Margin{Boundary: boundary, Side: side, TimeGyr: gyr(r.Age), Value: v, Unit: unit, Words: tidy(words)})
	}
	coldFailure := b.fail.kind == record.Snowball || b.fail.kind == record.LimitCycles || b.fail.kind == record.Condensation
	if cold != nil {
		words := fmt.Sprintf("closest to freezing at %.3g Gyr: outgassing of %.3g Tmol/yr was %.3g times what the warm state needs", gyr(cold.Age), cold.Outgassing/1e12, cold.ColdMargin)
		if coldFailure {
			words = fmt.Sprintf("the warm state needed %.3g Tmol/yr at %.4g Gyr and outgassing gave %.3g Tmol/yr", cold.WarmNeeds/1e12, gyr(cold.Age), cold.Outgassing/1e12)
		}
		add("warm branch", "cold", cold, cold.ColdMargin, "times the outgassing needed", words)
		add("warm branch", "cold", kelvin, kelvin.ColdKelvin, "K", fmt.Sprintf("closest to the cold fold at %.3g Gyr: %.3g K above it", gyr(kelvin.Age), kelvin.ColdKelvin))
	}
	if hot != nil {
		words := fmt.Sprintf("closest to the radiation limit at %.3g Gyr: %.3g %% more sunlight would have exceeded it", gyr(hot.Age), 100*hot.HotMargin)
		if hot.HotMargin <= 0.002 {
			words = fmt.Sprintf("the radiation limit is reached at %.4g Gyr", gyr(hot.Age))
		}
		add("radiation limit", "hot", hot, 100*hot.HotMargin, "% of sunlight", words)
	}
}

// nearFold finds the cold fold, starting next to where it was in the row before.
func (m *Model) nearFold(d *memo, t, before float64) (float64, bool) {
	if !math.IsNaN(before) && before < t {
		grow := func(x float64) (float64, bool) { return m.growthAlong(d, x) }
		for _, w := range []float64{0.05, 0.6} {
			lo, hi := before-w, math.Min(before+w, t)
			gl, ok1 := grow(lo)
			gh, ok2 := grow(hi)
			if ok1 && ok2 && gl > 0 && gh < 0 {
				return bracketed(func(x float64) float64 { g, _ := grow(x); return g }, lo, hi, gl, gh, 1e-8), true
			}
		}
	}
	return m.coldFold(d, t)
}

// frozenAt returns a test whether the planet is frozen, or about to freeze on a
// lost branch, at an age.
func frozenAt(h *history) func(age float64) bool {
	return func(age float64) bool {
		i := sort.Search(len(h.frozen), func(i int) bool { return h.frozen[i].begun() > age })
		if i == 0 {
			return false
		}
		f := h.frozen[i-1]
		return math.IsNaN(f.end) || age < f.end
	}
}

// zone fills the limits of the habitable zone through time.
func (b *builder) zone() {
	s := b.m.set
	b.run.ZoneLaw = s.ZoneLaw
	law := s.zoneLaw()
	mass := s.Mass / units.EarthMass
	limits := func(age float64) []star.Limit { return law.Limits(s.star.law.Temperature(age), mass) }
	for i := range b.h.rows {
		r := &b.h.rows[i]
		r.Flux = r.Sunlight / units.SolarFlux
		nan := math.NaN()
		r.RecentVenus, r.InnerConservative, r.OuterConservative, r.EarlyMars = nan, nan, nan, nan
		for _, l := range limits(r.Age) {
			switch {
			case l.Inner && l.Conservative && !(r.InnerConservative < l.Flux):
				r.InnerConservative = l.Flux
			case l.Inner && !l.Conservative && !(r.RecentVenus > l.Flux):
				r.RecentVenus = l.Flux
			case !l.Inner && l.Conservative && !(r.OuterConservative > l.Flux):
				r.OuterConservative = l.Flux
			case !l.Inner && !l.Conservative && !(r.EarlyMars < l.Flux):
				r.EarlyMars = l.Flux
			}
		}
	}
	end := math.Min(s.End, s.star.law.End())
	flux := func(age float64) float64 {
		return star.Sunlight(s.star.law.Luminosity(age), s.Distance, s.Eccentricity) / units.SolarFlux
	}
	// Crossings over the whole life of the star, on a grid and then refined.
	const parts = 1000
	age := func(i int) float64 { return s.Start + (end-s.Start)*float64(i)/parts }
	for k, l := range limits(s.Start) {
		over := func(t float64) float64 { return flux(t) - limits(t)[k].Flux }
		z := record.Zone{Name: l.Name, Inner: l.Inner, Conserv: l.Conservative}
		a, fa := s.Start, over(s.Start)
		for i := 1; i <= parts; i++ {
			c := age(i)
			fc := over(c)
			if fa*fc < 0 {
				z.Crossed = append(z.Crossed, gyr(bracketed(over, a, c, fa, fc, 1e-12)))
			}
			a, fa = c, fc
		}
		b.run.Zones = append(b.run.Zones, z)
	}
	for _, cons := range []bool{true, false} {
		st := record.Stay{Name: map[bool]string{true: "conservative", false: "optimistic"}[cons]}
		in := func(t float64) bool { return star.InZone(limits(t), flux(t), cons) }
		// The longest continuous stay.
		best := 0.0
		for i := 0; i <= parts; i++ {
			if !in(age(i)) {
				continue
			}
			j := i
			for j < parts && in(age(j+1)) {
				j++
			}
			enter, leave := age(i), age(j)
			if i > 0 {
				enter = edge(in, age(i-1), age(i))
			}
			if j < parts {
				leave = edge(in, age(j), age(j+1))
			}
			if leave-enter >= best {
				best = leave - enter
				st.Inside, st.EnterGyr, st.LeaveGyr = true, gyr(enter), gyr(leave)
			}
			i = j
		}
		b.run.Stays = append(b.run.Stays, st)
	}
}

// edge bisects for the age at which a condition changes between two ages.
func edge(in func(float64) bool, a, b float64) float64 {
	ia := in(a)
	for i := 0; i < 60; i++ {
		c := 0.5 * (a + b)
		if in(c) == ia {
			a = c
		} else {
			b = c
		}
	}
	return 0.5 * (a + b)
}

// stateOf makes the named state of a row.
func stateOf(r *record.Row) record.State {
	return record.State{AgeGyr: gyr(r.Age), TemperatureK: r.Temperature, PCO2Bar: r.PCO2, PH: r.PH,
		Outgassing: r.Outgassing / 1e12, Land: r.Land / 1e12, Seafloor: r.Seafloor / 1e12, MantleK: r.MantleTemperature}
}

// reference fills the state at the reference age and the feedback there.
func (b *builder) reference(residual float64) {
	m, s, run := b.m, b.m.set, b.run
	run.Start = stateOf(&b.h.rows[0])
	run.StartWords = b.h.words
	run.ReferenceAgeGyr = gyr(s.RefAge)
	run.CarbonMol = b.h.first.Carbon()
	run.CarbonDrift = b.h.drift
	forcing, sensitivity := m.Response()
	run.Feedback = record.Feedback{Forcing: forcing, Sensitivity: sensitivity, Gain: math.NaN(), ResponseKyr: math.NaN()}
	at := -1
	for i := range b.h.rows {
		if b.h.rows[i].Age == s.RefAge {
			at = i
		}
	}
	run.Reference.AgeGyr = gyr(s.RefAge)
	where := "the reference age"
	if at >= 0 {
		run.Reference = stateOf(&b.h.rows[at])
		run.Reference.Reached = true
	} else {
		at, where = 0, "the start, since the history ends before the reference age"
		nan := math.NaN()
		run.Reference = record.State{AgeGyr: gyr(s.RefAge), TemperatureK: nan, PCO2Bar: nan, PH: nan, Outgassing: nan, Land: nan, Seafloor: nan, MantleK: nan}
	}
	switch s.Solve {
	case "total":
		run.Reference.Solved = fmt.Sprintf("total carbon %.4g mol (carbon.content = %s)", m.content*s.Mass, units.Content.Format(round(m.content, 6), "mmol/kg"))
	case "outgassing":
		run.Reference.Solved = fmt.Sprintf("sources.scale = %.6g", m.scale)
	}
	run.Reference.Residual = residual
	run.Feedback.AtStateOf = where
	run.Feedback.Gain = b.h.rows[at].Gain
	run.Feedback.ResponseKyr = b.h.rows[at].Response / 1e3
}

// round keeps n significant digits.
func round(x float64, n int) float64 {
	if x == 0 {
		return 0
	}
	k := math.Pow(10, float64(n)-math.Ceil(math.Log10(math.Abs(x))))
	return math.Round(x*k) / k
}

// episodes cuts the history into climate states.
func (b *builder) episodes() {
	h, s := b.h, b.m.set
	type change struct {
		t     float64
		state string
	}
	first := record.StateTemperate
	if len(h.frozen) > 0 && h.frozen[0].start == s.Start {
		first = record.StateSnowball
	} else if len(h.moist) > 0 && h.moist[0].start == s.Start {
		first = record.StateMoist
	}
	cs := []change{{s.Start, first}}
	frozenShare := 0.0
	for _, f := range h.frozen {
		if f.start > s.Start {
			cs = append(cs, change{f.begun(), record.StateSnowball})
		}
		end := f.end
		if math.IsNaN(end) {
			end = h.end
		} else {
			cs = append(cs, change{end, record.StateTemperate})
		}
		frozenShare += end - f.begun()
	}
	for _, w := range h.moist {
		state := record.StateMoist
		if math.IsNaN(w.end) && b.m.hotKind(h, w) == record.RunawayGreen {
			state = record.StateRunaway
		}
		if w.start > s.Start {
			cs = append(cs, change{w.begun(), state})
		}
		if !math.IsNaN(w.end) {
			cs = append(cs, change{w.end, record.StateTemperate})
		}
	}
	sort.SliceStable(cs, func(i, j int) bool { return cs[i].t < cs[j].t })
	if h.reason == endSwings && b.fail.kind == record.BeyondRange {
		cs = append(cs, change{math.Max(h.swings.start, cs[len(cs)-1].t), record.StateBeyond})
	}
	if h.reason == endCold || h.reason == endDense || (h.reason == endHot && b.fail.kind == record.BeyondRange) {
		cs = append(cs, change{h.end, record.StateBeyond})
	}
	for i, c := range cs {
		end := h.end
		if i+1 < len(cs) {
			end = cs[i+1].t
		}
		if n := len(b.run.Episodes); n > 0 && b.run.Episodes[n-1].State == c.state {
			b.run.Episodes[n-1].End = gyr(end)
			continue
		}
		b.run.Episodes = append(b.run.Episodes, record.Episode{State: c.state, Start: gyr(c.t), End: gyr(end)})
	}
	b.run.Freezes = len(h.frozen)
	if h.end > s.Start {
		b.run.FrozenShare = frozenShare / (h.end - s.Start)
	}
}

// marks dates the crossings, with the error against the tighter run.
func (b *builder) marks(check *history) {
	count := func(ms []mark) map[string][]float64 {
		out := map[string][]float64{}
		for _, x := range ms {
			out[x.name] = append(out[x.name], x.t)
		}
		return out
	}
	other := count(check.marks)
	nth := map[string]int{}
	for _, x := range b.h.marks {
		e := math.NaN()
		if o := other[x.name]; nth[x.name] < len(o) {
			e = gyr(math.Abs(o[nth[x.name]] - x.t))
		}
		nth[x.name]++
		b.run.Marks = append(b.run.Marks, record.Mark{Name: x.name, TimeGyr: gyr(x.t), ErrorGyr: e})
	}
	cross := func(name string, f func(r *record.Row) float64) {
		rows := b.h.rows
		for i := 1; i < len(rows); i++ {
			if rows[i].Age > b.fail.t && !b.fail.hot() {
				return
			}
			u, v := f(&rows[i-1]), f(&rows[i])
			if u > 0 && v <= 0 {
				t := rows[i-1].Age + (rows[i].Age-rows[i-1].Age)*u/(u-v)
				b.run.Marks = append(b.run.Marks, record.Mark{Name: name, TimeGyr: gyr(t), ErrorGyr: math.NaN()})
				return
			}
		}
	}
	cross(record.MarkOutgassing, func(r *record.Row) float64 { return r.ColdMargin - 1 })
	cross(record.MarkRadiation, func(r *record.Row) float64 { return r.HotMargin })
	sort.SliceStable(b.run.Marks, func(i, j int) bool { return b.run.Marks[i].TimeGyr < b.run.Marks[j].TimeGyr })
}

// pulseWindow is how long after its end a pulse is followed, yr.
const pulseWindow = 100 * units.Myr

// recoveries follows every pulse against the same planet without pulses.
func (b *builder) recoveries(ctx context.Context) error {
	m, s := b.m, b.m.set
	pulses := s.Pulses
	s.Pulses = nil
	calm, err := m.integrate(ctx, s.End, s.Tolerance, true)
	s.Pulses = pulses
	if err != nil {
		return err
	}
	j := 0
	base := func(age float64) (lnp, t float64) {
		rows := calm.rows
		for j+1 < len(rows)-1 && rows[j+1].Age < age {
			j++
		}
		u, v := &rows[j], &rows[min(j+1, len(rows)-1)]
		w := 0.0
		if v.Age > u.Age {
			w = math.Min(math.Max((age-u.Age)/(v.Age-u.Age), 0), 1)
		}
		return (1-w)*math.Log(u.PCO2) + w*math.Log(v.PCO2), (1-w)*u.Temperature + w*v.Temperature
	}
	for i, p := range pulses {
		rec := record.Recovery{StartGyr: gyr(p.Start), EndGyr: gyr(p.Start + p.Duration), RecoveryKyr: math.NaN()}
		var what []string
		if p.Carbon != 0 {
			what = append(what, fmt.Sprintf("%.3g Emol of carbon", p.Carbon/1e18))
		}
		if p.Sunlight != 0 {
			what = append(what, fmt.Sprintf("%+.3g %% of sunlight", 100*p.Sunlight))
		}
		rec.Pulse = fmt.Sprintf("pulse %d: %s over %s", i+1, strings.Join(what, " and "), length(p.Duration))
		j = 0
		peak, peakAge := 0.0, p.Start
		before, beforeAge := 0.0, p.Start // the row before
		next := math.Inf(1)               // what happens after the next pulse is that pulse's
		for _, q := range pulses {
			if q.Start > p.Start {
				next = math.Min(next, q.Start)
			}
		}
		for k := range b.h.rows {
			r := &b.h.rows[k]
			if r.Age < p.Start || r.Age >= next || r.Age > p.Start+p.Duration+pulseWindow {
				continue
			}
			lnp, t := base(r.Age)
			dl, dt := math.Log(r.PCO2)-lnp, r.Temperature-t
			if math.Abs(dt) > math.Abs(rec.PeakKelvin) {
				rec.PeakKelvin = dt
			}
			if left := math.Abs(peak) / math.E; math.Abs(dl) > math.Abs(peak) {
				peak, peakAge, rec.RecoveryKyr = dl, r.Age, math.NaN()
			} else if math.IsNaN(rec.RecoveryKyr) && r.Age > p.Start+p.Duration && math.Abs(dl) < left {
				// Between the rows the rest decays as an exponential.
				w := 1.0
				if dl*before > 0 && math.Abs(before) > left {
					w = math.Log(math.Abs(before)/left) / math.Log(before/dl)
				}
				rec.RecoveryKyr = (beforeAge + w*(r.Age-beforeAge) - peakAge) / 1e3
			}
			before, beforeAge = dl, r.Age
		}
		rec.PeakLnCO2 = peak
		b.run.Recoveries = append(b.run.Recoveries, rec)
		b.run.Marks = append(b.run.Marks, record.Mark{Name: record.MarkPulse, TimeGyr: rec.StartGyr})
		if !math.IsNaN(rec.RecoveryKyr) {
			b.run.Marks = append(b.run.Marks, record.Mark{Name: record.MarkRecovered, TimeGyr: gyr(peakAge) + rec.RecoveryKyr/1e6, ErrorGyr: math.NaN()})
		}
	}
	sort.SliceStable(b.run.Marks, func(i, j int) bool { return b.run.Marks[i].TimeGyr < b.run.Marks[j].TimeGyr })
	return nil
}

// laws names the chosen laws and collects the works they rest on.
func (b *builder) laws() {
	laws, works := b.m.set.Foundations()
	b.run.Laws = laws
	b.run.Works = WorkList(append(works, cite.Steinebach2023)...)
}

// Foundations returns the chosen laws, and the works behind them and behind
// every value.
func (s *Setup) Foundations() ([]record.Law, []*cite.Work) {
	var laws []record.Law
	var works []*cite.Work
	add := func(part, name, doc, form, published string, source []cite.Ref) {
		l := record.Law{Part: part, Name: name, Doc: doc, Form: form, Range: published}
		var src []string
		for _, r := range source {
			src = append(src, r.String())
			if r.Work != nil {
				works, l.Works = append(works, r.Work), append(l.Works, r.Work.Key)
			}
		}
		l.Source = strings.Join(src, "; ")
		laws = append(laws, l)
	}
	for _, sec := range s.Sections() {
		for _, f := range sec.Fields {
			works = append(works, f.Source.Work)
		}
		for _, o := range sec.Options {
			works = append(works, o.Source.Work)
		}
		for _, f := range sec.Flags {
			works = append(works, f.Source.Work)
		}
		for _, c := range sec.Laws {
			if c.Name == sec.Law {
				add(sec.Name, c.Name, c.Doc, c.Form, s.rangeOf(sec.Name), c.Source)
			}
		}
		if sec.Name == "zone" {
			z := s.zoneLaw()
			add("zone", z.Name, z.Doc, "", "", z.Source)
		}
	}
	return laws, works
}

// WorkList writes distinct works in the order of a reference list.
func WorkList(works ...*cite.Work) []record.Work {
	var out []record.Work
	for _, w := range cite.Sorted(works) {
		out = append(out, record.Work{Key: w.Key, Short: w.Short(), Text: w.Long(), BibTeX: w.BibTeX()})
	}
	return out
}

// rangeOf words the published range of the chosen law of a section.
func (s *Setup) rangeOf(section string) string {
	var t, p, a units.Range
	switch section {
	case "star":
		a = s.star.law.Range()
	case "interior":
		a = s.interior.law.Range()
	case "radiation":
		t, p = s.radiation.law.Box().T, s.radiation.law.Box().P
	case "albedo":
		t, p = s.albedo.law.Box().T, s.albedo.law.Box().P
	case "weathering.land":
		t, p = s.land.law.Range().T, s.land.law.Range().P
	case "weathering.seafloor":
		t, p = s.seafloor.law.Range().T, s.seafloor.law.Range().P
	case "ocean":
		t = s.ocean.law.Range()
	}
	var out []string
	if t.Stated() {
		out = append(out, fmt.Sprintf("%.4g to %.4g K", t.Lo, t.Hi))
	}
	if p.Stated() {
		out = append(out, fmt.Sprintf("%.3g to %.3g bar CO2", p.Lo, p.Hi))
	}
	if a.Stated() {
		out = append(out, fmt.Sprintf("%.3g to %.3g Gyr", gyr(a.Lo), gyr(a.Hi)))
	}
	return strings.Join(out, ", ")
}

// solver records the work done.
func (b *builder) solver(tight float64) {
	st := b.h.stats
	rej := map[string]int{}
	for name, n := range map[string]int{"error above tolerance": st.RejectedError, "outside the domain": st.RejectedNonFinite + st.RejectedDomain, "singular matrix": st.RejectedSingular, "growing mode not resolved": st.RejectedStability} {
		if n > 0 {
			rej[name] = n
		}
	}
	lim := map[string]int{}
	for i, name := range b.m.lay.names() {
		if i < len(st.Limiting) && st.Limiting[i] > 0 {
			lim[name] = st.Limiting[i]
		}
	}
	b.run.Solver = record.Solver{Method: "Rodas5P", Works: []string{cite.Steinebach2023.Key}, RelTol: b.m.set.Tolerance, Steps: st.Steps, Rejected: rej, FuncEvals: st.FuncEvals,
		MinStepYr: st.MinStep, MaxStepYr: st.MaxStep, Limiting: lim, Guard: b.m.set.Guard, Status: b.h.reason, TightenedTol: tight}
}

// driftAllowed is the relative change of the total of carbon above which a
// result says so.
const driftAllowed = 1e-9

// warnings collects the doubts of the result.
func (b *builder) warnings(residual float64) {
	s, h := b.m.set, b.h
	if !s.Guard {
		b.warn("solver", "the stability guard is off: a lost climate branch may have been followed")
	}
	if h.cause != nil {
		b.warn("solver", "the solver stopped: "+strings.Replace(b.stopped(), "the solver ", "it ", 1))
	}
	if h.reason == endSwings {
		b.warn("solver", fmt.Sprintf("the history was stopped after %d swings of the temperature, at %.3g Gyr", h.swings.count/2, gyr(h.end)))
	}
	if h.reason == endFreezes {
		b.warn("solver", fmt.Sprintf("the history was stopped at %d freezes, %.3g Gyr", len(h.frozen), gyr(h.end)))
	}
	if h.words != "an equilibrium reached from the warm side" && s.StartSide == "warm" {
		b.warn("time", h.words)
	}
	if math.Abs(residual) > 1e-4 {
		b.warn("carbon", fmt.Sprintf("the reference state is missed by %.2g %% in CO2", 100*residual))
	}
	if math.Abs(b.m.balanceResidual) > 0.05 {
		b.warn("albedo", fmt.Sprintf("the energy balance at the reference state is left with %.2g W/m2", b.m.balanceResidual))
	}
	if h.drift > driftAllowed {
		b.warn("carbon", fmt.Sprintf("the total of carbon drifts by %.2g of itself", h.drift))
	}
	for i := range h.rows {
		if r := &h.rows[i]; r.Mantle < 0 {
			b.warn("carbon", fmt.Sprintf("%s from %.4g Gyr on: outgassing is prescribed and takes no account of it", record.MantleEmpty, gyr(r.Age)))
			break
		}
	}
	for _, sec := range s.Sections() {
		for _, f := range sec.Fields {
			if f.Extrapolates(*f.Value) {
				b.warn(sec.Name, fmt.Sprintf("%s = %s is outside its published range, %s to %s", f.Key, f.Text(*f.Value), f.Text(f.Published.Lo), f.Text(f.Published.Hi)))
			}
		}
	}
	for i := range h.rows {
		r := &h.rows[i]
		if r.Pressure < 611.657e-5 {
			b.warn("atmosphere", fmt.Sprintf("%s at %.3g Gyr: %.2g bar", record.BelowTriple, gyr(r.Age), r.Pressure))
			break
		}
	}
	// Where the history leaves the range of a law, first and in total.
	type watch struct {
		about, what string
		r           units.Range
		get         func(*record.Row) float64
		text        func(float64) string
	}
	kelvin := func(x float64) string { return fmt.Sprintf("%.4g K", x) }
	bar := func(x float64) string { return fmt.Sprintf("%.2g bar", x) }
	age := func(x float64) string { return fmt.Sprintf("%.3g Gyr", gyr(x)) }
	temp := func(r *record.Row) float64 { return r.Temperature }
	co2 := func(r *record.Row) float64 { return r.PCO2 }
	box, alb, land, sea := s.radiation.law.Box(), s.albedo.law.Box(), s.land.law.Range(), s.seafloor.law.Range()
	for _, w := range []watch{
		{"star", "age", s.star.law.Range(), func(r *record.Row) float64 { return r.Age }, age},
		{"interior", "age", s.interior.law.Range(), func(r *record.Row) float64 { return r.Age }, age},
		{"radiation", "temperature", box.T, temp, kelvin}, {"radiation", "CO2", box.P, co2, bar},
		{"albedo", "temperature", alb.T, temp, kelvin}, {"albedo", "CO2", alb.P, co2, bar},
		{"weathering.land", "temperature", land.T, temp, kelvin}, {"weathering.land", "CO2", land.P, co2, bar},
		{"weathering.seafloor", "temperature", sea.T, temp, kelvin}, {"weathering.seafloor", "CO2", sea.P, co2, bar},
		{"ocean", "temperature", s.ocean.law.Range(), temp, kelvin},
	} {
		if !w.r.Stated() {
			continue
		}
		out, from, far := 0.0, math.NaN(), math.NaN()
		for i := range h.rows {
			v := w.get(&h.rows[i])
			// The edge itself, where a history may end, is inside.
			if v >= w.r.Lo*(1-1e-9) && v <= w.r.Hi*(1+1e-9) {
				continue
			}
			if math.IsNaN(from) {
				from = h.rows[i].Age
			}
			if math.IsNaN(far) || math.Abs(v-0.5*(w.r.Lo+w.r.Hi)) > math.Abs(far-0.5*(w.r.Lo+w.r.Hi)) {
				far = v
			}
			if i+1 < len(h.rows) {
				out += h.rows[i+1].Age - h.rows[i].Age
			}
		}
		if !math.IsNaN(from) {
			total := ", for " + length(out) + " in all"
			if out == 0 { // the last row alone
				total = ""
			}
			b.warn(w.about, fmt.Sprintf("law used outside its range of %s (%s to %s) from %.4g Gyr on%s, as far as %s", w.what, w.text(w.r.Lo), w.text(w.r.Hi), gyr(from), total, w.text(far)))
		}
	}
}
