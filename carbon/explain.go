package carbon

import (
	"context"
	"fmt"
	"math"
	"runtime"
	"sort"
	"strings"
	"sync"

	"cycle/carbon/cite"
	"cycle/carbon/record"
	"cycle/carbon/units"
	"cycle/carbon/weathering"
)

// ExplainOptions steers Explain; the zero value is the default.
type ExplainOptions struct {
	Workers  int                   // 0: one for each processor
	Postpone float64               // yr; > 0: a rescue puts the failure off by so much, 0: it avoids it
	Progress func(done, total int) // called from one goroutine at a time; may be nil
}

// Clocks that are no outcome.
const (
	clockFreezing    = "freezing"
	clockOverheating = "overheating"
)

// fate is what became of one variant of the planet.
type fate struct {
	kind           record.Kind // empty: the variant makes no sense
	t              float64     // yr; the end of the history when nothing fails
	clock          string      // empty when nothing fails
	words          string      // why there is no fate
	content, scale float64     // as solved
}

// fails tells whether a lasting failure of the climate was found.
func (f *fate) fails() bool { return f.clock != "" }

// censored tells that nothing failed up to the end.
func (f *fate) censored() bool { return f.kind == record.Temperate || f.kind == record.StarLeft }

// clockOf groups outcomes that are the same failure seen a little earlier or
// later. Dates are compared only within a clock.
func clockOf(v verdict, h *history) string {
	switch v.kind {
	case record.Temperate, record.StarLeft, record.Undecided, "":
		return ""
	case record.Snowball, record.LimitCycles:
		return clockFreezing
	case record.Condensation:
		if v.span.start > 0 {
			return clockFreezing
		}
		// On the fall from a lost warm branch, before the threshold of a snowball.
		for _, k := range h.marks {
			if k.name == record.MarkBranchLost && h.end-k.t < regainLasting {
				return clockFreezing
			}
		}
	case record.MoistGreen, record.RunawayGreen:
		return clockOverheating
	case record.BeyondRange:
		if h.reason == endHot {
			return clockOverheating
		}
	}
	return string(v.kind)
}

// variant is a planet to be run for its fate alone.
type variant struct {
	set   *Setup // its own
	still [drivers]bool
	rtol  float64

	// Of a solve that is close to one known: ln of what is solved for over its
	// start, and d ln p/d of it. A slope of 0 is not known.
	guess, slope float64
	rough        bool // a solve may miss by 3e-4 in ln p: enough to look for a change
}

// fate runs the variant once. Only ctx makes it fail.
func (v *variant) fate(ctx context.Context) (fate, error) {
	s := v.set
	// Three freezes settle the outcome.
	s.MaxFreezes = 3
	m, err := NewModel(s)
	if err != nil {
		return fate{words: err.Error()}, nil
	}
	m.hold = m.holdAtStart(v.still)
	var h *history
	if s.Solve != "nothing" && v.slope != 0 {
		h, err = m.solvedNear(ctx, v.rtol, v.guess, v.slope, v.rough)
	}
	if h == nil && err == nil {
		*m.knob() *= math.Exp(math.Max(-1, math.Min(v.guess, 1)))
		var residual float64
		if h, residual, err = m.solved(ctx, v.rtol); err == nil && math.Abs(residual) > 0.01 {
			return fate{words: "nothing that may be solved for brings the history through the reference state"}, nil
		}
	}
	if err != nil {
		if ctx.Err() != nil {
			return fate{}, ctx.Err()
		}
		return fate{words: err.Error()}, nil
	}
	f := m.judge(h)
	return fate{kind: f.kind, t: f.t, clock: clockOf(f, h), content: m.content, scale: m.scale}, nil
}

// knob is what the scenario solves for.
func (m *Model) knob() *float64 {
	if m.set.Solve == "outgassing" {
		return &m.scale
	}
	return &m.content
}

// missed returns ln(p/p₀) at the reference age; ok is false where the history is
// not warm there.
func (m *Model) missed(h *history) (f float64, ok bool) {
	if !h.hasRef || h.atRef.T <= m.set.FrozenBelow {
		return 0, false
	}
	return math.Log(m.set.ocean.law.Solve(h.atRef.Surface, h.atRef.Alk, h.atRef.T).P / m.set.RefP), true
}

// solvedNear is solved for a planet whose solution is nearly known: the secant
// method from a guess and a slope, on whole histories so that the last one is the
// answer. It returns nil when that does not converge.
func (m *Model) solvedNear(ctx context.Context, rtol, guess, slope float64, rough bool) (*history, error) {
	s, knob := m.set, m.knob()
	x0 := *knob
	tol := math.Max(1e-8, 0.3*rtol)
	if rough {
		tol = math.Max(tol, 3e-4)
	}
	x := math.Max(-3, math.Min(guess, 3))
	var px, pf float64
	for i := 0; i < 8; i++ {
		*knob = x0 * math.Exp(x)
		h, err := m.integrate(ctx, s.End, rtol, true)
		if err != nil {
			return nil, err
		}
		f, ok := m.missed(h)
		switch {
		case !ok || math.Abs(f) > 5:
			*knob = x0
			return nil, nil
		case math.Abs(f) < tol:
			return h, nil
		}
		if i > 0 && x != px && f != pf {
			if k := (f - pf) / (x - px); k > 0.2*slope && k < 5*slope {
				slope = k
			}
		}
		px, pf = x, f
		x -= f / slope
	}
	*knob = x0
	return nil, nil
}

// each runs jobs 0 to n−1 on a pool of workers and stops at the first error.
func each(ctx context.Context, workers, n int, done func(), job func(i int) error) error {
	if workers <= 0 {
		workers = runtime.GOMAXPROCS(0)
	}
	var mu sync.Mutex
	var wg sync.WaitGroup
	next, failed := 0, error(nil)
	for w := 0; w < min(workers, n); w++ {
		wg.Add(1)
		go func() {
			defer wg.Done()
			for {
				mu.Lock()
				i := next
				if failed == nil {
					failed = ctx.Err()
				}
				if i >= n || failed != nil {
					mu.Unlock()
					return
				}
				next++
				mu.Unlock()
				err := job(i)
				mu.Lock()
				if err != nil && failed == nil {
					failed = err
				}
				if done != nil && err == nil {
					done()
				}
				mu.Unlock()
			}
		}()
	}
	wg.Wait()
	return failed
}

// explainer holds what the parts of an explanation share.
type explainer struct {
	ctx  context.Context
	set  *Setup // pristine: never bound, only cloned
	opt  ExplainOptions
	out  *record.Explanation
	m    *Model // of the main run, anchored
	base fate   // light run at the scenario's tolerance

	slope float64 // d ln p/d ln of what is solved for; 0 when nothing is

	mu  sync.Mutex
	ran int
}

// run runs one variant and counts it.
func (x *explainer) run(v *variant) (fate, error) {
	if v.rtol == 0 {
		v.rtol = x.set.Tolerance
	}
	f, err := v.fate(x.ctx)
	x.mu.Lock()
	x.ran++
	x.mu.Unlock()
	return f, err
}

// Explain runs the history and says why it ends as it does: the slow drivers
// that brought the failure about, the closest approach to every boundary, the
// smallest change of each parameter that would have avoided it, how strongly
// its date hangs on each input, and what other published laws say. The setup
// is left alone. The result does not depend on the number of workers; inputs,
// name, hash, version and command are left to the caller. Errors are those of
// Run.
func Explain(ctx context.Context, s *Setup, opt ExplainOptions) (*record.Explanation, error) {
	x := &explainer{ctx: ctx, set: s.Clone(), opt: opt}
	run, err := Run(ctx, s.Clone())
	if err != nil {
		return nil, err
	}
	x.out = &record.Explanation{Format: 1, Title: s.Title, Run: run, Outcome: run.Outcome, Warnings: run.Warnings}
	if x.base, err = x.run(&variant{set: s.Clone()}); err != nil {
		return nil, err
	}
	if x.m, err = NewModel(s.Clone()); err != nil {
		return nil, err
	}
	x.m.content, x.m.scale = x.base.content, x.base.scale
	if err := x.findSlope(); err != nil {
		return nil, err
	}
	x.out.Fails, x.out.Clock = x.base.fails(), x.base.clock

	active := x.driversOf(run)
	fields := x.fields()
	laws := x.lawVariants()

	// Every part is a list of independent jobs; one pool serves them all.
	combos := make([]fate, 1<<len(active))
	inputs := make([]inputResult, len(fields))
	others := make([]fate, len(laws))
	singles := 0
	for singles < len(laws) && len(laws[singles].parts) == 1 {
		singles++
	}
	total := len(combos) + len(fields) + len(laws) + 1
	count := 0
	done := func() {
		count++
		if opt.Progress != nil {
			opt.Progress(count, total)
		}
	}
	err = each(ctx, opt.Workers, singles, done, func(i int) (err error) {
		others[i], err = x.underLaws(laws[i])
		return err
	})
	if err == nil {
		x.guessPairs(laws, others, singles)
		err = each(ctx, opt.Workers, total-singles, done, func(i int) (err error) {
			// The longest jobs first.
			if i < len(fields) {
				inputs[i], err = x.input(fields[i])
				return err
			}
			if i += singles - len(fields); i < len(laws) {
				others[i], err = x.underLaws(laws[i])
				return err
			}
			if i -= len(laws); i < len(combos) {
				combos[i], err = x.combination(active, i)
				return err
			}
			x.distances(run)
			return nil
		})
	}
	if err != nil {
		return nil, err
	}
	x.cause(active, combos)
	x.margins(run)
	x.rescues(fields, inputs)
	x.elasticities(fields, inputs)
	x.others(laws, others)
	x.spread(fields, inputs)
	x.out.Histories = x.ran
	x.out.Works = methodWorks(run.Works, cite.Shapley1953, cite.OliveiraTakahashi2021)
	return x.out, nil
}

// findSlope takes d ln p/d ln of what is solved for at the solution.
func (x *explainer) findSlope() error {
	if x.set.Solve == "nothing" {
		return nil
	}
	m, err := NewModel(x.solvedClone())
	if err != nil {
		return err
	}
	const d = 2e-3
	*m.knob() *= math.Exp(d)
	h, err := m.integrate(x.ctx, math.Min(x.set.End, x.set.RefAge*(1+1e-9)), x.set.Tolerance, false)
	if err != nil {
		return err
	}
	if f, ok := m.missed(h); ok {
		x.slope = f / d
	}
	return nil
}

// methodWorks adds the works behind a method to those of the laws.
func methodWorks(have []record.Work, works ...*cite.Work) []record.Work {
	return append(append([]record.Work(nil), have...), WorkList(works...)...)
}

// driversOf lists the drivers that change.
func (x *explainer) driversOf(run *record.Run) []driver {
	until := run.Outcome.TimeGyr * units.Gyr
	is, from, to := x.m.changing(run.Rows, until)
	unit := [drivers]string{driveSun: "W/m2", driveInterior: "of the reference crust production", driveSources: "Tmol/yr", driveLand: "of the reference land", driveBiology: "of the reference", drivePulses: ""}
	scale := [drivers]float64{driveSun: 1, driveInterior: 1, driveSources: 1e12, driveLand: 1, driveBiology: 1, drivePulses: 1}
	var out []driver
	for d := driver(0); d < drivers; d++ {
		if is[d] {
			out = append(out, d)
			x.out.Drivers = append(x.out.Drivers, record.Driver{Name: driverWords[d].name, Doc: driverWords[d].doc, From: from[d] / scale[d], To: to[d] / scale[d], Unit: unit[d]})
		}
	}
	return out
}

// combination runs the planet with the drivers of a mask changing and the
// others held at their start. What was solved for stays as solved.
func (x *explainer) combination(active []driver, mask int) (fate, error) {
	v := variant{set: x.set.Clone()}
	v.set.Solve, v.set.Content, v.set.OutgassingScale = "nothing", x.base.content, x.base.scale
	for i, d := range active {
		v.still[d] = mask&(1<<i) == 0
	}
	return x.run(&v)
}

// cause builds the table of combinations and, where it makes sense, the shares.
func (x *explainer) cause(active []driver, combos []fate) {
	all := len(combos) - 1
	name := func(mask int) (in, out []string) {
		for i, d := range active {
			if mask&(1<<i) != 0 {
				in = append(in, driverWords[d].name)
			} else {
				out = append(out, driverWords[d].name)
			}
		}
		return in, out
	}
	// All changing first, then fewer and fewer.
	order := make([]int, len(combos))
	for i := range order {
		order[i] = all - i
	}
	sort.SliceStable(order, func(i, j int) bool { return ones(order[i]) > ones(order[j]) })
	c := &x.out.Cause
	for _, mask := range order {
		f := &combos[mask]
		in, out := name(mask)
		x.out.Combinations = append(x.out.Combinations, record.Combination{Changing: in, Still: out, Outcome: f.kind, TimeGyr: gyr(f.t), Clock: f.clock, Censored: f.censored(), Words: fateWords(f)})
		switch {
		case f.fails() && f.clock != combos[all].clock, f.kind == record.Undecided, f.kind == "":
			c.Mixed = true
		case f.censored():
			c.Bounds = true
		}
	}
	if !x.out.Fails {
		c.Words = "Nothing fails, so there is nothing to share out."
		return
	}
	if len(active) == 0 {
		c.Words = "No driver changes: the planet fails from its start on."
		return
	}
	same := func(f *fate) bool { return f.clock == combos[all].clock }
	for i, d := range active {
		if without := &combos[all&^(1<<i)]; !same(without) && without.kind != "" && without.kind != record.Undecided {
			c.Necessary = append(c.Necessary, driverWords[d].name)
		}
		if alone := &combos[1<<i]; same(alone) && !same(&combos[0]) {
			c.Enough = append(c.Enough, driverWords[d].name)
		}
	}
	c.WholeGyr = gyr(combos[all].t - combos[0].t)
	if !c.Mixed {
		n := len(active)
		for i, d := range active {
			sum := 0.0
			for mask := range combos {
				if mask&(1<<i) == 0 {
					sum += shapleyWeight(ones(mask), n) * (combos[mask|1<<i].t - combos[mask].t)
				}
			}
			c.Shares = append(c.Shares, record.Share{Driver: driverWords[d].name, Gyr: gyr(sum)})
		}
		sort.SliceStable(c.Shares, func(i, j int) bool { return c.Shares[i].Gyr < c.Shares[j].Gyr })
	}
	c.Words = x.causeWords(c, combos)
}

func (x *explainer) causeWords(c *record.Cause, combos []fate) string {
	var w []string
	none := &combos[0]
	if none.fails() && none.clock == combos[len(combos)-1].clock {
		w = append(w, fmt.Sprintf("With every driver held at its start the planet fails in the same way, at %.4g Gyr", gyr(none.t)))
	}
	if len(c.Necessary) > 0 {
		w = append(w, fmt.Sprintf("Held at its start, %s takes this failure away", list(c.Necessary, "or")))
	}
	if len(c.Enough) > 0 {
		w = append(w, fmt.Sprintf("Changing alone, %s brings it about", list(c.Enough, "or")))
	}
	if len(c.Necessary) == 0 && len(c.Enough) == 0 && len(w) == 0 {
		w = append(w, "No single driver is needed for this failure and none brings it about alone")
	}
	switch {
	case c.Mixed:
		w = append(w, "Combinations fail in different ways, so their dates are no measure of one cause and no shares are given; the table shows each")
	case c.Bounds:
		w = append(w, "Some combinations never fail; their dates are the end of the history, so the shares are bounds")
	}
	return strings.Join(w, ". ") + "."
}

// fateWords words a fate in a table.
func fateWords(f *fate) string {
	switch {
	case f.kind == "":
		return "cannot be computed: " + f.words
	case f.censored():
		return fmt.Sprintf("no failure up to %.4g Gyr", gyr(f.t))
	case f.kind == record.Undecided:
		return fmt.Sprintf("undecided at %.4g Gyr", gyr(f.t))
	}
	return fmt.Sprintf("%s at %.4g Gyr", f.kind, gyr(f.t))
}

// list joins words: "a, b or c".
func list(w []string, and string) string {
	if len(w) < 2 {
		return strings.Join(w, "")
	}
	return strings.Join(w[:len(w)-1], ", ") + " " + and + " " + w[len(w)-1]
}

func ones(mask int) (n int) {
	for ; mask != 0; mask &= mask - 1 {
		n++
	}
	return n
}

// shapleyWeight is k!(n−k−1)!/n!: the share of all orders of n drivers in which
// a given one comes right after a given set of k (Shapley 1953).
func shapleyWeight(k, n int) float64 {
	w := 1 / float64(n)
	for i := 1; i <= k; i++ { // 1/(n·binomial(n−1, k))
		w *= float64(i) / float64(n-i)
	}
	return w
}

// lawVariant changes the law of one or two parts.
type lawVariant struct {
	parts, laws []string
	guess       float64 // of ln of what is solved for, over that of the scenario
}

// lawParts are the parts of the model whose laws rival one another.
var lawParts = []string{"weathering.land", "weathering.seafloor", "radiation"}

// published lists the laws a part may have instead of the chosen one.
func (x *explainer) published(part string) []string {
	var out []string
	for _, sec := range x.set.Sections() {
		if sec.Name != part {
			continue
		}
		for _, c := range sec.Laws {
			absent := false
			for _, e := range weathering.Seafloor {
				absent = absent || part == "weathering.seafloor" && e.Name == c.Name && e.Absent
			}
			if c.Name != sec.Law && !absent {
				out = append(out, c.Name)
			}
		}
	}
	return out
}

func (x *explainer) lawVariants() []lawVariant {
	var out []lawVariant
	for _, p := range lawParts {
		for _, l := range x.published(p) {
			out = append(out, lawVariant{parts: []string{p}, laws: []string{l}})
		}
	}
	for i, p := range lawParts {
		for _, q := range lawParts[i+1:] {
			for _, l := range x.published(p) {
				for _, k := range x.published(q) {
					out = append(out, lawVariant{parts: []string{p, q}, laws: []string{l, k}})
				}
			}
		}
	}
	return out
}

// underLaws runs the planet under other laws. Every law is 1 at the reference
// state, the albedo closes the balance there anew, and what the scenario solves
// for is solved again.
func (x *explainer) underLaws(l lawVariant) (fate, error) {
	v := variant{set: x.solvedClone(), slope: x.slope, guess: l.guess}
	for i, p := range l.parts {
		if err := v.set.Choose(p, l.laws[i]); err != nil {
			return fate{words: err.Error()}, nil
		}
	}
	return x.run(&v)
}

// guessPairs starts the solve under two other laws from what each of them alone
// needed.
func (x *explainer) guessPairs(laws []lawVariant, fates []fate, singles int) {
	if x.slope == 0 {
		return
	}
	alone := map[string]float64{}
	for i := range laws[:singles] {
		if fates[i].kind != "" {
			alone[laws[i].parts[0]+"="+laws[i].laws[0]] = x.moved(&fates[i])
		}
	}
	for i := singles; i < len(laws); i++ {
		for j := range laws[i].parts {
			laws[i].guess += alone[laws[i].parts[j]+"="+laws[i].laws[j]]
		}
	}
}

// moved is ln of what was solved for, over that of the scenario.
func (x *explainer) moved(f *fate) float64 {
	if x.set.Solve == "outgassing" {
		return math.Log(f.scale / x.base.scale)
	}
	return math.Log(f.content / x.base.content)
}

// solvedClone copies the setup with what was solved as the start of the next solve.
func (x *explainer) solvedClone() *Setup {
	s := x.set.Clone()
	switch s.Solve {
	case "total":
		s.Content = x.base.content
	case "outgassing":
		s.OutgassingScale = x.base.scale
	}
	return s
}

func (x *explainer) others(laws []lawVariant, fates []fate) {
	for i, l := range laws {
		f := &fates[i]
		v := record.LawVariant{Parts: l.parts, Laws: l.laws, Outcome: f.kind, TimeGyr: gyr(f.t), Clock: f.clock, Same: f.kind != "" && f.clock == x.base.clock, Censored: f.censored(), Words: f.words}
		for j := range l.parts {
			v.Changed = append(v.Changed, l.parts[j]+" = "+l.laws[j])
		}
		x.out.Variants = append(x.out.Variants, v)
	}
}

// spread compares laws with parameters.
func (x *explainer) spread(fields []inputField, in []inputResult) {
	sp := &x.out.Spread
	t0 := gyr(x.base.t)
	for _, p := range lawParts {
		ps := record.PartSpread{Part: p, EarlyGyr: t0, LateGyr: t0}
		for i := range x.out.Variants {
			v := &x.out.Variants[i]
			if len(v.Parts) != 1 || v.Parts[0] != p || v.Outcome == "" {
				continue
			}
			ps.Laws++
			if !v.Same {
				ps.Otherwise++
				continue
			}
			ps.EarlyGyr, ps.LateGyr = math.Min(ps.EarlyGyr, v.TimeGyr), math.Max(ps.LateGyr, v.TimeGyr)
		}
		sp.LawCount += ps.Laws
		sp.LawOtherwise += ps.Otherwise
		sp.LawGyr = math.Hypot(sp.LawGyr, (ps.LateGyr-ps.EarlyGyr)/2)
		sp.ByPart = append(sp.ByPart, ps)
	}
	for i := range fields {
		if !fields[i].published || fields[i].onlyDates {
			continue
		}
		lo, hi := t0, t0
		for _, f := range in[i].ends {
			if f.kind == "" {
				continue
			}
			sp.ParamCount++
			if f.clock != x.base.clock {
				sp.ParamOtherwise++
				continue
			}
			lo, hi = math.Min(lo, gyr(f.t)), math.Max(hi, gyr(f.t))
		}
		sp.ParameterGyr = math.Hypot(sp.ParameterGyr, (hi-lo)/2)
	}
	if !x.out.Fails {
		sp.Words = fmt.Sprintf("%d of %d other laws and %d of %d ends of published ranges bring a failure.", sp.LawOtherwise, sp.LawCount, sp.ParamOtherwise, sp.ParamCount)
		return
	}
	sp.Words = fmt.Sprintf("Among those that fail in the same way the choice of law moves the date by ±%.2g Gyr, the published ranges of parameters by ±%.2g Gyr. %d of %d other laws and %d of %d ends of published ranges fail in another way or not at all.",
		sp.LawGyr, sp.ParameterGyr, sp.LawOtherwise, sp.LawCount, sp.ParamOtherwise, sp.ParamCount)
}

// Pick of ages at which distances are taken.
const distanceParts = 72

// distances fills the distance to failure through time and the curves of
// steady states.
func (x *explainer) distances(run *record.Run) {
	m := x.m
	rows := run.Rows
	until := run.Outcome.TimeGyr * units.Gyr
	last := &rows[0]
	foldT, ratio := math.NaN(), math.NaN()
	for i := range rows {
		r := &rows[i]
		if r.Age > until*(1+1e-12) {
			break
		}
		if i > 0 && r.Age-last.Age < (until-rows[0].Age)/distanceParts && math.Abs(r.Temperature-last.Temperature) < 3 && !(i+1 < len(rows) && rows[i+1].Age > until) {
			continue
		}
		last = r
		d := x.distance(r, &foldT, &ratio)
		x.out.Distances = append(x.out.Distances, d)
	}
	add := func(r *record.Row) {
		c := ConditionsOf(r)
		for i := range x.out.Curves {
			if x.out.Curves[i].AgeGyr == gyr(c.Age) {
				return
			}
		}
		m.memo.valid = false
		x.out.Curves = append(x.out.Curves, *m.equilibria(c).Record(r.Outgassing))
	}
	add(&rows[0])
	for i := range rows {
		if rows[i].Age == x.set.RefAge && rows[i].Age < until {
			add(&rows[i])
		}
	}
	at := &rows[0]
	for i := range rows {
		if rows[i].Age <= until {
			at = &rows[i]
		}
	}
	add(at)
}

// distance measures one row. foldT and ratio carry the cold fold's temperature
// and the sunlight ratio of the row before.
func (x *explainer) distance(r *record.Row, foldT, ratio *float64) record.Distance {
	m, s := x.m, x.m.set
	nan := math.NaN()
	d := record.Distance{AgeGyr: gyr(r.Age), TemperatureK: r.Temperature, PCO2Bar: r.PCO2, Outgassing: r.Outgassing / 1e12, SunlightWm2: r.Sunlight,
		ColdFactor: r.ColdMargin, ColdKelvin: r.ColdKelvin, ColdSun: nan, HotFactor: nan, HotSun: 100 * r.HotMargin, HotKelvin: s.Strato.T - r.Temperature,
		SupplyPercent: 100 * r.SupplyUse, Gain: r.Gain, ResponseKyr: r.Response / 1e3, FoldK: r.Temperature - r.ColdKelvin, FoldOutgassing: r.WarmNeeds / 1e12}
	c := ConditionsOf(r)
	mem := c.memo()
	if math.IsNaN(r.WarmNeeds) || r.Temperature < s.FrozenBelow {
		*foldT, *ratio = nan, nan
	} else {
		*foldT = d.FoldK
		d.ColdSun = x.coldSun(mem, r, foldT, ratio)
	}
	// Up the warm branch to its hot end.
	best := nan
	for t := r.Temperature; t <= s.Strato.T+1e-9; t += math.Max(0.25, (s.Strato.T-r.Temperature)/16) {
		st, low, high := m.steadyAt(mem, t)
		if low || high || st.grow >= 0 {
			break
		}
		if v := st.row.Land + st.row.Seafloor; math.IsNaN(best) || v > best {
			best = v
		}
	}
	if r.Temperature > s.FrozenBelow && r.Outgassing > 0 {
		d.HotFactor = best / r.Outgassing
	}
	return d
}

// coldSun returns by how many per cent sunlight would have to fall for the warm
// state to be lost at the present outgassing, NaN when no fall does it.
func (x *explainer) coldSun(c *memo, r *record.Row, foldT, ratio *float64) float64 {
	m := x.m
	fold := *foldT
	excess := func(q float64) float64 {
		d := *c
		d.sun = c.sun * q
		// The warm branch at less sunlight and the same outgassing is warm enough to
		// search from the temperature of today's.
		f, ok := m.nearFold(&d, math.Max(r.Temperature, fold+2), fold)
		if !ok {
			return math.NaN()
		}
		st, low, high := m.steadyAt(&d, f)
		if low || high {
			return math.NaN()
		}
		fold = f
		return math.Log(r.Outgassing / (st.row.Land + st.row.Seafloor))
	}
	a, fa := 1.0, math.Log(r.ColdMargin)
	if fa <= 0 {
		return 0
	}
	for _, step := range []float64{0.01, 0.02, 0.03, 0.05, 0.05, 0.08, 0.08, 0.1, 0.1} {
		b := a - step
		fb := excess(b)
		if math.IsNaN(fb) {
			return math.NaN()
		}
		if fb < 0 {
			q := bracketed(excess, a, b, fa, fb, 1e-6)
			*ratio = q
			return 100 * (1 - q)
		}
		a, fa = b, fb
	}
	return math.NaN()
}

// margins adds to the margins of the run those that need more than a row.
func (x *explainer) margins(run *record.Run) {
	x.out.Margins = append(x.out.Margins, run.Margins...)
	least := func(get func(d *record.Distance) float64) *record.Distance {
		var best *record.Distance
		for i := range x.out.Distances {
			d := &x.out.Distances[i]
			if v := get(d); !math.IsNaN(v) && (best == nil || v < get(best)) {
				best = d
			}
		}
		return best
	}
	add := func(boundary, side, unit string, get func(d *record.Distance) float64, words func(d *record.Distance) string) {
		if d := least(get); d != nil {
			x.out.Margins = append(x.out.Margins, record.Margin{Boundary: boundary, Side: side, TimeGyr: d.AgeGyr, Value: get(d), Unit: unit, Words: words(d)})
		}
	}
	add("warm branch", "cold", "% of sunlight", func(d *record.Distance) float64 { return d.ColdSun }, func(d *record.Distance) string {
		if d.ColdSun == 0 {
			return fmt.Sprintf("the warm state has no sunlight to lose from %.4g Gyr on", d.AgeGyr)
		}
		return fmt.Sprintf("closest to freezing by sunlight at %.4g Gyr: %.3g %% less would have ended the warm state", d.AgeGyr, d.ColdSun)
	})
	add("hot end of the warm branch", "hot", "times the outgassing", func(d *record.Distance) float64 { return d.HotFactor }, func(d *record.Distance) string {
		return fmt.Sprintf("closest to overheating by outgassing at %.4g Gyr: the warm state bears %.3g times what there was", d.AgeGyr, d.HotFactor)
	})
	add("moist threshold", "hot", "K", func(d *record.Distance) float64 { return d.HotKelvin }, func(d *record.Distance) string {
		return fmt.Sprintf("closest to the moist threshold of %.4g K at %.4g Gyr: %.3g K below it", x.set.Strato.T, d.AgeGyr, d.HotKelvin)
	})
	if x.set.supply.Limit > 0 || x.m.saturates != nil {
		add("supply limit", "hot", "% of the limit left", func(d *record.Distance) float64 { return 100 - d.SupplyPercent }, func(d *record.Distance) string {
			return fmt.Sprintf("closest to the supply limit of land weathering at %.4g Gyr: %.3g %% of it was left", d.AgeGyr, 100-d.SupplyPercent)
		})
	}
	// Condensation, over the whole history up to the failure.
	condense := x.set.condensation()
	var worst *record.Row
	left := func(r *record.Row) float64 { return condense(r.Temperature-x.set.ColdContrast) / r.PCO2 }
	for i := range run.Rows {
		if r := &run.Rows[i]; r.Age <= run.Outcome.TimeGyr*units.Gyr*(1+1e-12) && (worst == nil || left(r) < left(worst)) {
			worst = r
		}
	}
	if worst != nil {
		x.out.Margins = append(x.out.Margins, record.Margin{Boundary: "CO2 condensation", Side: "cold", TimeGyr: gyr(worst.Age), Value: left(worst), Unit: "times the CO2 pressure",
			Words: fmt.Sprintf("closest to CO2 condensation at %.4g Gyr: saturation at the coldest place was %.3g times the CO2 pressure", gyr(worst.Age), left(worst))})
	}
}
