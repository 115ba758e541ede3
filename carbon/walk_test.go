package carbon

import (
	"context"
	"errors"
	"fmt"
	"math"
	"math/rand/v2"
	"os"
	"runtime"
	"sort"
	"strconv"
	"strings"
	"sync"
	"testing"
	"time"

	"cycle/carbon/record"
	"cycle/carbon/units"
)

// A walk draws setups from the whole space a scenario spans: every law, every
// number over its allowed range, options, flags, tables and pulses.
type walk struct{ *rand.Rand }

func newWalk(seed, index uint64) walk { return walk{rand.New(rand.NewPCG(seed, index))} }

// number draws from [lo, hi]: by its logarithm where it spans decades, now and
// then an end of the range itself.
func (w walk) number(f *units.Field) float64 {
	lo, hi := f.Min, f.Max
	switch {
	case f.Off && w.IntN(2) == 0:
		return 0
	case w.IntN(20) == 0:
		return lo
	case w.IntN(20) == 0:
		return hi
	case lo > 0 && hi/lo >= 100:
		return math.Min(math.Max(lo*math.Exp(w.Float64()*math.Log(hi/lo)), lo), hi)
	case lo == 0 && hi >= 1e6: // decades, down to nothing
		return hi * math.Exp(-w.Float64()*math.Log(1e8))
	case lo < 0 && hi >= 1e6:
		return math.Copysign(hi*math.Exp(-w.Float64()*math.Log(1e8)), w.Float64()-0.5)
	}
	return lo + (hi-lo)*w.Float64()
}

// table makes a user's table of the columns a law reads.
func (w walk) table(section string) string {
	var b strings.Builder
	b.WriteString(map[string]string{"star": "age_gyr,luminosity", "interior": "age_gyr,relative_heat_flow", "sources": "age_gyr,outgassing_tmol_yr"}[section] + "\n")
	age := 0.5 * w.Float64()
	for range 2 + w.IntN(6) {
		x := math.Exp(4 * (w.Float64() - 0.5))
		if section == "sources" {
			x *= 7.5
		}
		fmt.Fprintf(&b, "%g,%g\n", age, x)
		age += 0.01 + 4*w.Float64()
	}
	return b.String()
}

// setup draws one setup. Half of the setups draw everything; the others keep
// every key at its default with a chance of 7 in 8, so that what is drawn is not
// always refused or over at once.
func (w walk) setup() *Setup {
	keep := 0.0
	if w.IntN(2) == 0 {
		keep = 7. / 8
	}
	drawn := func() bool { return w.Float64() >= keep }
	s := NewSetup()
	for n := w.IntN(4); n > 0; n-- {
		s.Grow(fmt.Sprintf("pulse.%d", n))
	}
	for _, sec := range s.Sections() {
		if len(sec.Laws) > 0 && w.Float64() >= keep/2 {
			if err := s.Choose(sec.Name, sec.Laws[w.IntN(len(sec.Laws))].Name); err != nil {
				panic(err)
			}
		}
	}
	for _, sec := range s.Sections() {
		for i := range sec.Fields {
			if f := &sec.Fields[i]; drawn() {
				*f.Value = w.number(f)
			}
		}
		for _, o := range sec.Options {
			if drawn() {
				*o.Value = o.Allowed[w.IntN(len(o.Allowed))]
			}
		}
		for _, f := range sec.Flags {
			if drawn() {
				*f.Value = w.IntN(2) == 0
			}
		}
		if sec.Table != nil && sec.Law == "table" {
			if err := sec.Table.Load(strings.NewReader(w.table(sec.Name))); err != nil {
				panic(err)
			}
		}
	}
	if w.IntN(10) > 0 {
		s.mend(w)
	}
	// What only bounds the work keeps within reason.
	s.MaxSteps, s.MaxFreezes = 200000, math.Min(s.MaxFreezes, 10)
	s.Tolerance = math.Max(s.Tolerance, 1e-7)
	s.MaxStep = math.Max(s.MaxStep, 1*units.Myr)
	return s
}

// mend makes numbers that exclude one another fit together, as far as Check
// tells, so that most draws are not refused.
func (s *Setup) mend(w walk) {
	if s.Start > s.End {
		s.Start, s.End = s.End, s.Start
	}
	if s.Solve != "nothing" && (s.RefAge <= s.Start || s.RefAge >= s.End) {
		s.RefAge = math.Min(math.Max(s.Start+(s.End-s.Start)*w.Float64(), 0.1e9), 12e9)
	}
	if s.metamorphic() < 0 {
		k := w.Float64() * s.OutgassingRef / (s.RidgeRef + s.ArcRef)
		s.RidgeRef, s.ArcRef = k*s.RidgeRef, k*s.ArcRef
	}
	if s.seafloorRef() > s.RidgeRef+s.ArcRef {
		s.SeafloorRef = w.Float64() * (s.RidgeRef + s.ArcRef)
	}
	if w.IntN(4) > 0 {
		s.Solve = "nothing" // most planets cannot pass through a state drawn at random
	}
	if s.supply.Limit > 0 && s.supply.Limit < s.OutgassingRef {
		s.supply.Limit = s.OutgassingRef * (1 + 10*w.Float64())
	}
}

// describe lists what a setup has that the defaults of its laws have not.
func describe(s *Setup) string {
	d := NewSetup()
	for range s.Pulses {
		d.Grow(fmt.Sprintf("pulse.%d", len(d.Pulses)+1))
	}
	var out []string
	for _, sec := range s.Sections() {
		if len(sec.Laws) > 0 {
			_ = d.Choose(sec.Name, sec.Law)
		}
	}
	def := d.Sections()
	for i, sec := range s.Sections() {
		if len(sec.Laws) > 0 && sec.Law != sec.Laws[0].Name {
			out = append(out, sec.Name+"="+sec.Law)
		}
		for j := range sec.Fields {
			if f := &sec.Fields[j]; *f.Value != *def[i].Fields[j].Value {
				out = append(out, fmt.Sprintf("%s.%s=%q", sec.Name, f.Key, f.Text(*f.Value)))
			}
		}
		for j, o := range sec.Options {
			if *o.Value != *def[i].Options[j].Value {
				out = append(out, sec.Name+"."+o.Key+"="+*o.Value)
			}
		}
		for j, f := range sec.Flags {
			if *f.Value != *def[i].Flags[j].Value {
				out = append(out, fmt.Sprintf("%s.%s=%v", sec.Name, f.Key, *f.Value))
			}
		}
	}
	return strings.Join(out, " ")
}

// absent are the columns that may hold NaN, which stands for "there is none":
// no fold, no radiation limit, no thermostat, no such limit of the zone.
var absent = map[string]bool{"warm_state_needs": true, "cold_margin": true, "cold_kelvin": true, "hot_margin": true, "gain": true, "response_time": true,
	"zone_recent_venus": true, "zone_inner": true, "zone_outer": true, "zone_early_mars": true}

// warned tells whether a result carries a warning about something with a word in it.
func warned(r *record.Run, about, word string) bool {
	for _, w := range r.Warnings {
		if w.About == about && strings.Contains(w.Words, word) {
			return true
		}
	}
	return false
}

// sound lists everything in a result that is no number where one must be, or
// that contradicts itself.
func sound(r *record.Run) (wrong []string) {
	bad := func(format string, args ...any) { wrong = append(wrong, fmt.Sprintf(format, args...)) }
	finite := func(what string, x ...float64) {
		for _, v := range x {
			if math.IsNaN(v) || math.IsInf(v, 0) {
				bad("%s is %v", what, v)
			}
		}
	}
	known := false
	for _, k := range record.Kinds {
		known = known || k == r.Outcome.Kind
	}
	if !known || r.Outcome.Sentence == "" || r.Outcome.Why == "" {
		bad("the end has no label: %+v", r.Outcome)
	}
	for _, words := range []string{r.Outcome.Sentence, r.Outcome.Why, r.StartWords} {
		if strings.Contains(words, "NaN") || strings.Contains(words, "Inf") {
			bad("words with no number: %s", words)
		}
	}
	for _, w := range r.Warnings {
		if strings.Contains(w.Words, "NaN") || strings.Contains(w.Words, "Inf") {
			bad("warning with no number: %s", w.Words)
		}
	}
	finite("date of the outcome", r.Outcome.TimeGyr, r.Outcome.ErrorGyr)
	for _, e := range r.Episodes {
		finite("date of an episode", e.Start, e.End)
		if e.End < e.Start {
			bad("episode from %g to %g", e.Start, e.End)
		}
	}
	for i, m := range r.Marks {
		finite("date of the mark "+m.Name, m.TimeGyr)
		if math.IsInf(m.ErrorGyr, 0) || i > 0 && m.TimeGyr < r.Marks[i-1].TimeGyr {
			bad("mark %+v after %+v", m, r.Marks[max(i-1, 0)])
		}
	}
	for _, m := range r.Margins {
		finite("margin "+m.Boundary, m.TimeGyr, m.Value)
	}
	for _, z := range r.Zones {
		finite("crossing of "+z.Name, z.Crossed...)
	}
	for _, s := range r.Stays {
		finite("stay", s.EnterGyr, s.LeaveGyr)
	}
	for _, p := range r.Recoveries {
		finite(p.Pulse, p.StartGyr, p.EndGyr, p.PeakKelvin, p.PeakLnCO2)
		if math.IsInf(p.RecoveryKyr, 0) || p.RecoveryKyr < 0 {
			bad("%s: recovery %v", p.Pulse, p.RecoveryKyr)
		}
	}
	finite("start", r.Start.AgeGyr, r.Start.TemperatureK, r.Start.PCO2Bar, r.Start.PH, r.Start.Outgassing, r.Start.Land, r.Start.Seafloor, r.Start.MantleK)
	if r.Reference.Reached {
		finite("reference", r.Reference.TemperatureK, r.Reference.PCO2Bar, r.Reference.PH, r.Reference.Residual)
	}
	finite("forcing", r.Feedback.Forcing)
	if math.IsInf(r.Feedback.Sensitivity, 0) {
		bad("sensitivity %v", r.Feedback.Sensitivity)
	}
	finite("frozen share", r.FrozenShare)
	finite("total carbon or its drift", r.CarbonMol, r.CarbonDrift)
	if r.CarbonDrift > 1e-6 || r.CarbonDrift > driftAllowed && !warned(r, "carbon", "drifts") {
		bad("carbon drifts by %g", r.CarbonDrift)
	}
	if r.FrozenShare < 0 || r.FrozenShare > 1+1e-12 {
		bad("frozen share %g", r.FrozenShare)
	}
	if len(r.Rows) == 0 {
		bad("no rows")
	}
	for i := range r.Rows {
		row := &r.Rows[i]
		if i > 0 && row.Age < r.Rows[i-1].Age {
			bad("row %d: age %g after %g", i, row.Age, r.Rows[i-1].Age)
		}
		for j := range record.Columns {
			c := &record.Columns[j]
			v := c.Get(row)
			if math.IsInf(v, 0) || math.IsNaN(v) && !absent[c.Name] {
				bad("row %d at %g yr: %s is %v", i, row.Age, c.Name, v)
			}
		}
		if len(wrong) > 20 {
			return wrong
		}
	}
	return wrong
}

// TestRandomWalk draws setups over the whole space: every end is labelled,
// every number a number, what cannot stand names its key, and what the solver
// cannot settle is rare and listed. The environment variable CYCLE_WALK sets the
// number of draws, CYCLE_WALK_FROM the first one.
func TestRandomWalk(t *testing.T) {
	draws := 500
	if v := os.Getenv("CYCLE_WALK"); v != "" {
		n, err := strconv.Atoi(v)
		if err != nil || n < 1 {
			t.Fatalf("CYCLE_WALK=%q: a number of draws", v)
		}
		draws = n
	}
	first := 0
	if v := os.Getenv("CYCLE_WALK_FROM"); v != "" {
		n, err := strconv.Atoi(v)
		if err != nil || n < 0 {
			t.Fatalf("CYCLE_WALK_FROM=%q: the first draw", v)
		}
		first = n
	}
	const seed = 4
	type result struct {
		kind    record.Kind
		refused string
		words   string
		took    time.Duration
	}
	results := make([]result, draws)
	var wg sync.WaitGroup
	next := make(chan int)
	for range runtime.GOMAXPROCS(0) {
		wg.Add(1)
		go func() {
			defer wg.Done()
			for i := range next {
				res := &results[i]
				func() {
					defer func() {
						if p := recover(); p != nil {
							buf := make([]byte, 4096)
							buf = buf[:runtime.Stack(buf, false)]
							t.Errorf("draw %d: panic: %v\n%s", first+i, p, buf)
						}
					}()
					s := newWalk(seed, uint64(first+i)).setup()
					start := time.Now()
					r, err := Run(context.Background(), s)
					res.took = time.Since(start)
					var se *SetupError
					switch {
					case errors.As(err, &se):
						res.refused = se.Key()
						if !knownKey(s, se.Key()) || se.Reason == "" {
							t.Errorf("draw %d: refused for %q, which is no key: %v", first+i, se.Key(), err)
						}
						return
					case err != nil:
						t.Errorf("draw %d: %v\n%s", first+i, err, describe(s))
						return
					}
					res.kind = r.Outcome.Kind
					if r.Outcome.Kind == record.Undecided {
						res.words = r.Outcome.Why
					}
					if wrong := sound(r); len(wrong) > 0 {
						t.Errorf("draw %d: %s\n%s", first+i, strings.Join(wrong, "\n\t"), describe(s))
					}
				}()
			}
		}()
	}
	for i := range results {
		next <- i
	}
	close(next)
	wg.Wait()

	kinds, refused := map[string]int{}, map[string]int{}
	ran, undecided, worst := 0, 0, 0
	var slowest time.Duration
	var total time.Duration
	for i := range results {
		res := &results[i]
		total += res.took
		if res.took > slowest {
			slowest, worst = res.took, first+i
		}
		if res.refused != "" {
			refused[res.refused]++
			continue
		}
		ran++
		kinds[string(res.kind)]++
		if res.kind == record.Undecided {
			undecided++
			t.Logf("draw %d is undecided: %s", first+i, res.words)
		}
	}
	t.Logf("%d draws, %d histories: %s", draws, ran, counts(kinds))
	t.Logf("%d refused: %s", draws-ran, counts(refused))
	t.Logf("%d undecided, %.3g %%; mean %v, slowest %v, draw %d", undecided, 100*float64(undecided)/float64(max(ran, 1)), total/time.Duration(draws), slowest, worst)
	if float64(undecided) >= 1e-3*float64(ran) && undecided > 0 {
		t.Errorf("%d of %d undecided, want fewer than 0.1 %%", undecided, ran)
	}
}

// knownKey tells whether a key, or a section, exists in the setup.
func knownKey(s *Setup, key string) bool {
	for _, sec := range s.Sections() {
		if key == sec.Name && len(sec.Laws) > 0 {
			return true
		}
		name, ok := strings.CutPrefix(key, sec.Name+".")
		if !ok {
			continue
		}
		for i := range sec.Fields {
			if sec.Fields[i].Key == name {
				return true
			}
		}
		for _, o := range sec.Options {
			if o.Key == name {
				return true
			}
		}
		if sec.Table != nil && sec.Table.Key == name {
			return true
		}
	}
	return false
}

func counts(m map[string]int) string {
	var names []string
	for k := range m {
		names = append(names, k)
	}
	sort.Slice(names, func(i, j int) bool {
		return m[names[i]] > m[names[j]] || m[names[i]] == m[names[j]] && names[i] < names[j]
	})
	for i, k := range names {
		names[i] = fmt.Sprintf("%s %d", k, m[k])
	}
	return strings.Join(names, ", ")
}
