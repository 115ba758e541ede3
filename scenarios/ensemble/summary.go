package ensemble

import (
	"context"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"slices"
	"strings"

	"github.com/parquet-go/parquet-go"

	"cycle/carbon"
	"cycle/carbon/cite"
	"cycle/carbon/record"
	"cycle/carbon/units"
	"cycle/scenarios"
	"cycle/scenarios/ensemble/estimate"
)

const (
	// learnFrom is how many members sensitivities are estimated from at most: the
	// first ones. More would change no digit that is shown.
	learnFrom = 50000
	// pairsFrom is how many members are searched for pairs on a border.
	pairsFrom = 4000
	// curvePoints is how many steps a curve keeps.
	curvePoints = 240
	// resamples is how many resampled sets give the intervals of Sobol indices.
	resamples = 400
	// fewest events for a sensitivity of their date.
	fewest = 100
)

// column reads one column of members.parquet: of a number in the unit of the
// record, of a word its index.
func (p *Plan) column(dir, name string) ([]float64, error) {
	f, err := os.Open(filepath.Join(dir, MembersFile))
	if err != nil {
		return nil, err
	}
	defer f.Close()
	info, err := f.Stat()
	if err != nil {
		return nil, err
	}
	pf, err := parquet.OpenFile(f, info.Size())
	if err != nil {
		return nil, err
	}
	at := slices.IndexFunc(p.columns, func(c column) bool { return c.name == name })
	out := make([]float64, 0, p.Members)
	for _, g := range pf.RowGroups() {
		for i, path := range pf.Schema().Columns() {
			if path[0] != name {
				continue
			}
			if out, err = appendChunk(out, g.ColumnChunks()[i], &p.columns[at]); err != nil {
				return nil, err
			}
		}
	}
	return out, nil
}

// lost tells whether an outcome ends liquid water.
func lost(k record.Kind) bool {
	return k != record.Temperate && k != record.StarLeft && k != record.Undecided
}

// summary is a summary in the making.
type summary struct {
	*record.Ensemble
	p      *Plan
	dir    string
	keep   []int // independent members
	kind   []uint8
	time   []float64 // Gyr
	status []uint8
}

// Summarise says what the members of a gathered ensemble have in common. workers
// run the typical members again; the result does not depend on their number.
func (p *Plan) Summarise(ctx context.Context, dir string) (*record.Ensemble, error) {
	r := p.Scenario
	s := &summary{p: p, dir: dir, Ensemble: &record.Ensemble{
		Format: 1, Kind: "ensemble", Title: r.Title, Name: r.Name, Hash: r.EnsembleHash(), Version: p.Version, Seed: p.Seed, Design: p.Design, DesignWords: p.DesignWords(),
		Members: p.Members, StartGyr: r.Setup.Start / units.Gyr, EndGyr: r.Setup.End / units.Gyr, RefAgeGyr: r.Setup.RefAge / units.Gyr,
		Inputs: r.Inputs(), Scenario: r.TOML(),
		Command: fmt.Sprintf("cycle ensemble scenario.toml --members %d --seed %d --design %s", p.Members, p.Seed, p.Design),
	}}
	if err := s.outcomes(); err != nil {
		return nil, err
	}
	s.inputs()
	s.shares()
	s.curves()
	if err := s.dates(); err != nil {
		return nil, err
	}
	s.byLaw()
	if err := s.ages(); err != nil {
		return nil, err
	}
	if err := s.sensitivities(); err != nil {
		return nil, err
	}
	s.borders()
	if err := s.typical(ctx); err != nil {
		return nil, err
	}
	s.words()
	s.works()
	return s.Ensemble, ctx.Err()
}

func (s *summary) outcomes() error {
	kinds, err := s.p.column(s.dir, "outcome")
	if err != nil {
		return err
	}
	s.kind = make([]uint8, 0, len(kinds))
	for i, k := range kinds {
		if s.p.Independent(i) {
			s.keep = append(s.keep, i)
			s.kind = append(s.kind, uint8(k))
		}
	}
	times, err := s.p.column(s.dir, columnName("outcome_age", "Gyr"))
	if err != nil {
		return err
	}
	s.time = s.pick(times)
	status, err := s.p.column(s.dir, "status")
	if err != nil {
		return err
	}
	count := make([]int, len(record.Statuses))
	for _, x := range s.pick(status) {
		s.status = append(s.status, uint8(x))
		count[int(x)]++
	}
	for i, n := range count {
		if n > 0 {
			s.Statuses = append(s.Statuses, record.StatusCount{Status: record.Statuses[i], Count: n})
		}
	}
	s.Independent = len(s.keep)
	return nil
}

// pick keeps the independent members of a column.
func (s *summary) pick(all []float64) []float64 {
	if len(s.keep) == len(all) {
		return all
	}
	out := make([]float64, len(s.keep))
	for j, i := range s.keep {
		out[j] = all[i]
	}
	return out
}

func (s *summary) is(j int) record.Kind { return record.Kinds[s.kind[j]] }

func (s *summary) inputs() {
	for j := range s.p.priors {
		pr := &s.p.priors[j]
		in := record.UncertainInput{Key: pr.Key, Distribution: s.p.Scenario.Words(pr), Column: s.p.columns[1+j].name, Doc: "which of them"}
		if f := s.p.fieldOf(pr); f != nil && pr.Shape != scenarios.Chosen {
			in.Doc = f.Doc
		}
		s.Uncertain = append(s.Uncertain, in)
	}
	for _, c := range s.p.Scenario.Uncertain.Correlations {
		s.Correlated = append(s.Correlated, fmt.Sprintf("%s and %s: rank correlation %g", c.A, c.B, c.Rank))
	}
}

func (s *summary) count(k record.Kind) int {
	n := 0
	for j := range s.kind {
		if s.is(j) == k {
			n++
		}
	}
	return n
}

func (s *summary) shares() {
	n := s.Independent
	s.Undecided = s.count(record.Undecided)
	for _, k := range record.Kinds {
		c := s.count(k)
		if c == 0 || k == record.Undecided {
			continue
		}
		sh := record.FateShare{Kind: k, Count: c, Of: n, Typical: -1}
		sh.Share.Value = float64(c) / float64(n)
		sh.Share.Low, sh.Share.High = estimate.Wilson(c, n)
		with := c + s.Undecided
		sh.WithAll.Value = float64(with) / float64(n)
		sh.WithAll.Low, sh.WithAll.High = estimate.Wilson(with, n)
		s.Shares = append(s.Shares, sh)
	}
}

// failures lists the outcomes that compete, in the order of Shares.
func (s *summary) failures() []record.Kind {
	var out []record.Kind
	for _, sh := range s.Shares {
		if sh.Kind != record.Temperate {
			out = append(out, sh.Kind)
		}
	}
	return out
}

func (s *summary) curves() {
	kinds := s.failures()
	events := make([]estimate.Event, 0, len(s.kind))
	for j := range s.kind {
		events = append(events, estimate.Event{Time: s.time[j], Cause: slices.Index(kinds, s.is(j))})
	}
	// One grid for all, so that the curves can be stacked.
	by, all := estimate.Incidence(events, len(kinds), curvePoints)
	grid := all.Time
	ends := func(g []float64) []float64 {
		if len(g) == 0 || g[0] > s.StartGyr {
			g = append([]float64{s.StartGyr}, g...)
		}
		if g[len(g)-1] < s.EndGyr {
			g = append(g, s.EndGyr)
		}
		return g
	}
	on := func(c *estimate.Curve, name string, g []float64) record.Curve {
		out := record.Curve{Name: name}
		for _, t := range g {
			v, lo, hi := c.At(t)
			out.TimeGyr, out.Value, out.Low, out.High = append(out.TimeGyr, t), append(out.Value, v), append(out.Low, lo), append(out.High, hi)
		}
		return out
	}
	grid = ends(grid)
	for i, k := range kinds {
		s.Incidence = append(s.Incidence, on(&by[i], string(k), grid))
	}
	events = events[:0]
	for j := range s.kind {
		e := estimate.Event{Time: s.time[j], Cause: -1}
		if lost(s.is(j)) {
			e.Cause = 0
		}
		events = append(events, e)
	}
	_, free := estimate.Incidence(events, 1, curvePoints)
	g := free.Time
	g = ends(g)
	s.Liquid = on(&free, "liquid water", g)
	for i, t := range g {
		if len(free.Time) == 0 || t < free.Time[0] {
			s.Liquid.Value[i], s.Liquid.Low[i], s.Liquid.High[i] = 1, 1, 1
		}
	}
}

// thin returns at most m of n indices, evenly spread, the ends among them.
func thin(n, m int) []int {
	var out []int
	for i := range min(n, m) {
		at := i
		if n > m {
			at = i * (n - 1) / (m - 1)
		}
		out = append(out, at)
	}
	return out
}

var quantiles = []float64{0.05, 0.25, 0.5, 0.75, 0.95}

func datesOf(clock string, failure bool, t []float64) record.Dates {
	slices.Sort(t)
	d := record.Dates{Clock: clock, Failure: failure, Count: len(t)}
	for _, q := range quantiles {
		v, lo, hi := estimate.Quantile(t, q)
		d.Quantiles = append(d.Quantiles, record.Quantile{P: q, TimeGyr: record.Interval{Value: v, Low: lo, High: hi}})
	}
	return d
}

func (s *summary) dates() error {
	for _, k := range s.failures() {
		var t []float64
		for j := range s.kind {
			if s.is(j) == k {
				t = append(t, s.time[j])
			}
		}
		s.Dates = append(s.Dates, datesOf(string(k), true, t))
	}
	for _, c := range record.Clocks {
		t, err := s.clock(c)
		if err != nil {
			return err
		}
		var have []float64
		for _, x := range t {
			if !math.IsNaN(x) {
				have = append(have, x)
			}
		}
		if len(have) > 0 {
			s.Dates = append(s.Dates, datesOf(c, false, have))
		}
	}
	return nil
}

func (s *summary) clock(c string) ([]float64, error) {
	t, err := s.p.column(s.dir, columnName("first "+c, "Gyr"))
	return s.pick(t), err
}

// byLaw counts outcomes and dates under every choice.
func (s *summary) byLaw() {
	for q := range s.p.priors {
		pr := &s.p.priors[q]
		if pr.Shape != scenarios.Chosen {
			continue
		}
		chosen := make([]int, len(s.keep))
		total := make([]int, len(pr.Choices))
		for j, i := range s.keep {
			chosen[j] = choice(pr, s.p.Unit(i)[q])
			total[chosen[j]]++
		}
		for c, name := range pr.Choices {
			for _, sh := range s.Shares {
				var t []float64
				for j := range s.kind {
					if chosen[j] == c && s.is(j) == sh.Kind {
						t = append(t, s.time[j])
					}
				}
				b := record.ByLaw{Key: pr.Key, Choice: name, Kind: sh.Kind, Count: len(t), Of: total[c]}
				b.Share.Value = float64(len(t)) / math.Max(1, float64(total[c]))
				b.Share.Low, b.Share.High = estimate.Wilson(len(t), total[c])
				slices.Sort(t)
				b.Median, _, _ = estimate.Quantile(t, 0.5)
				b.LowGyr, _, _ = estimate.Quantile(t, 0.05)
				b.HighGyr, _, _ = estimate.Quantile(t, 0.95)
				s.ByLaw = append(s.ByLaw, b)
			}
		}
	}
}

// ages gives the spread of the climate at the ages asked for, among the members
// that have not failed by then.
func (s *summary) ages() error {
	for _, age := range s.p.Scenario.Uncertain.Ages {
		at := strings.ReplaceAll(units.Time.Format(age, "Gyr"), " ", "")
		for _, q := range []struct{ name, unit, words string }{{"temperature", "K", "temperature"}, {"pco2", "bar", "CO2"}, {"ph", "", "ocean pH"}} {
			all, err := s.p.column(s.dir, columnName(q.name+" at "+at, q.unit))
			if err != nil {
				return err
			}
			var x []float64
			for j, v := range s.pick(all) {
				if !math.IsNaN(v) && !(lost(s.is(j)) && s.time[j] <= age/units.Gyr) {
					x = append(x, v)
				}
			}
			slices.Sort(x)
			a := record.AtAge{AgeGyr: age / units.Gyr, Quantity: q.words, Unit: q.unit, Count: len(x)}
			for p, to := range map[float64]*float64{0.025: &a.Q025, 0.16: &a.Q16, 0.5: &a.Q50, 0.84: &a.Q84, 0.975: &a.Q975} {
				*to, _, _ = estimate.Quantile(x, p)
			}
			s.AtAges = append(s.AtAges, a)
		}
	}
	return nil
}

// learned holds the inputs of the members that sensitivities are estimated from.
func (s *summary) learned(rows []int) []estimate.Input {
	ins := make([]estimate.Input, len(s.p.priors))
	for q := range ins {
		ins[q].N = len(s.p.priors[q].Choices)
	}
	for _, i := range rows {
		u := s.p.Unit(i)
		for q := range ins {
			if pr := &s.p.priors[q]; pr.Shape == scenarios.Chosen {
				ins[q].Choice = append(ins[q].Choice, choice(pr, u[q]))
			} else {
				ins[q].U = append(ins[q].U, u[q])
			}
		}
	}
	return ins
}

func interval(x estimate.Index) record.Interval {
	return record.Interval{Value: x.Value, Low: x.Low, High: x.High}
}

// sensitivities tells for every failure and for the marks of CO2 starvation what
// the inputs decide.
//
// A failure competes with others, so that its date alone is no quantity of every
// member. Its years lost are: the time from the failure to the end of the history,
// none for a member that does not fail so. Their mean is the area under the
// cumulative incidence (Andersen 2013).
func (s *summary) sensitivities() error {
	kinds, err := s.p.column(s.dir, "outcome")
	if err != nil {
		return err
	}
	times, err := s.p.column(s.dir, columnName("outcome_age", "Gyr"))
	if err != nil {
		return err
	}
	k := len(s.p.priors)
	freeze := s.p.Design == Freeze
	// The members that are learned from, by their index; of a pick-and-freeze
	// design whole groups.
	base := min(len(kinds)/(k+2), learnFrom/2)
	var rows []int
	if freeze {
		for b := range base {
			rows = append(rows, b*(k+2), b*(k+2)+1)
		}
	} else {
		rows = s.keep[:min(len(s.keep), learnFrom)]
	}
	ins := s.learned(rows)
	correlated := len(s.p.design.together) > 0
	var laws []estimate.Input
	for q := range ins {
		if s.p.priors[q].Shape == scenarios.Chosen {
			laws = append(laws, ins[q])
		}
	}
	add := func(clock, quantity string, y func(i int) float64, date func(i int) float64) {
		out := record.Sensitivities{Clock: clock, Quantity: quantity, Of: len(rows)}
		all := make([]float64, len(rows))
		var event []int
		for j, i := range rows {
			all[j] = y(i)
			if !math.IsNaN(date(i)) {
				event = append(event, j)
			}
		}
		out.Count = len(event)
		if out.Count < fewest && out.Count < len(rows)/50 || len(rows) < fewest {
			return // too few to say anything
		}
		first, total := make([]estimate.Index, k), make([]estimate.Index, k)
		nan := math.NaN()
		for q := range total {
			total[q] = estimate.Index{Value: nan, Low: nan, High: nan}
		}
		switch {
		case freeze && base >= 50:
			out.Method = fmt.Sprintf("first-order and total indices from %d base points, 95 %% intervals from %d resamples (BCa)", base, resamples)
			f := estimate.Freeze{AB: make([][]float64, k)}
			for b := range base {
				at := b * (k + 2)
				f.A, f.B = append(f.A, y(at)), append(f.B, y(at+1))
				for q := range k {
					f.AB[q] = append(f.AB[q], y(at+2+q))
				}
			}
			src := stream(s.p.Seed, 0, "resamples of "+clock)
			first, total = f.Indices(resamples, func(n int) int { return below(src, n) })
		default:
			out.Method = fmt.Sprintf("first-order indices from the %d members themselves, 95 %% intervals by their influence", len(rows))
			out.Note = fmt.Sprintf("total indices need --design %s", Freeze)
			if correlated {
				out.Note = "inputs are correlated: an index counts what an input shares with those it moves with, and there are no total indices"
			}
			for q := range ins {
				first[q] = estimate.FirstOrder(ins[q], all)
			}
		}
		out.Laws, out.Rest = record.Interval{Value: nan, Low: nan, High: nan}, record.Interval{Value: nan, Low: nan, High: nan}
		if len(laws) > 0 {
			g := estimate.Group(laws, all)
			out.Laws = clip(interval(g))
			out.Rest = record.Interval{Value: 1 - out.Laws.Value, Low: 1 - out.Laws.High, High: 1 - out.Laws.Low}
		}
		partial := make([]estimate.Index, k)
		for q := range partial {
			partial[q] = estimate.Index{Value: nan, Low: nan, High: nan}
		}
		if len(event) >= fewest {
			t := make([]float64, len(event))
			sub := make([]estimate.Input, k)
			for q := range ins {
				sub[q].N = ins[q].N
			}
			for e, j := range event {
				t[e] = date(rows[j])
				for q := range ins {
					if ins[q].Choice != nil {
						sub[q].Choice = append(sub[q].Choice, ins[q].Choice[j])
					} else {
						sub[q].U = append(sub[q].U, ins[q].U[j])
					}
				}
			}
			partial = estimate.PartialRank(sub, t)
		}
		for q := range s.p.priors {
			out.Inputs = append(out.Inputs, record.Sensitivity{Input: s.p.priors[q].Key, First: clip(interval(first[q])), Total: clip(interval(total[q])), Partial: interval(partial[q])})
		}
		s.Sensitive = append(s.Sensitive, out)
	}
	for _, kind := range s.failures() {
		index := float64(slices.Index(record.Kinds, kind))
		add(string(kind), "years lost to: "+string(kind)+", Gyr", func(i int) float64 {
			if kinds[i] == index {
				return s.EndGyr - times[i]
			}
			return 0
		}, func(i int) float64 {
			if kinds[i] == index {
				return times[i]
			}
			return math.NaN()
		})
	}
	add("liquid water", "time with liquid water, Gyr", func(i int) float64 {
		if lost(record.Kinds[int(kinds[i])]) {
			return times[i] - s.StartGyr
		}
		return s.EndGyr - s.StartGyr
	}, func(i int) float64 {
		if lost(record.Kinds[int(kinds[i])]) {
			return times[i]
		}
		return math.NaN()
	})
	for _, c := range []string{record.MarkC3, record.MarkC4} {
		t, err := s.p.column(s.dir, columnName("first "+c, "Gyr"))
		if err != nil {
			return err
		}
		add(c, "first date "+c+", the end of the history where there is none, Gyr", func(i int) float64 {
			if math.IsNaN(t[i]) {
				return s.EndGyr
			}
			return t[i]
		}, func(i int) float64 { return t[i] })
	}
	return nil
}

// clip keeps the interval of a share of variance between 0 and 1.
func clip(x record.Interval) record.Interval {
	c := func(v float64) float64 { return math.Min(math.Max(v, 0), 1) }
	return record.Interval{Value: c(x.Value), Low: c(x.Low), High: c(x.High)}
}

// below is a uniform number below n; the bias of the remainder is below n/2⁶⁴.
func below(s interface{ Uint64() uint64 }, n int) int { return int(s.Uint64() % uint64(n)) }

// borders finds for every two outcomes the pair of members that are closest in
// their inputs.
func (s *summary) borders() {
	n := min(len(s.keep), pairsFrom)
	u := make([][]float64, n)
	for j := range u {
		u[j] = s.p.Unit(s.keep[j])
		for q := range u[j] {
			if pr := &s.p.priors[q]; pr.Shape == scenarios.Chosen {
				u[j][q] = float64(choice(pr, u[j][q])) // one choice is as far from another as it gets
			}
		}
	}
	type pair struct{ a, b uint8 }
	type found struct {
		i, j int
		d    float64
	}
	best := map[pair]found{}
	undecided := uint8(slices.Index(record.Kinds, record.Undecided))
	for i := range u {
		for j := range i {
			a, b := s.kind[i], s.kind[j]
			if a == b || a == undecided || b == undecided {
				continue
			}
			key := pair{min(a, b), max(a, b)}
			have, any := best[key]
			d := 0.0
			for q := range u[i] {
				x := u[i][q] - u[j][q]
				if s.p.priors[q].Shape == scenarios.Chosen && x != 0 {
					x = 1
				}
				if d += x * x; any && d >= have.d {
					break
				}
			}
			if !any || d < have.d {
				best[key] = found{i, j, d}
			}
		}
	}
	for a := range uint8(len(record.Kinds)) {
		for b := a + 1; b < uint8(len(record.Kinds)); b++ {
			f, any := best[pair{a, b}]
			if !any {
				continue
			}
			i, j := f.i, f.j
			if s.kind[i] != a {
				i, j = j, i
			}
			far, at := 0.0, 0
			for q := range u[i] {
				if d := math.Abs(u[i][q] - u[j][q]); d > far {
					far, at = d, q
				}
			}
			s.Borders = append(s.Borders, record.Border{A: record.Kinds[a], B: record.Kinds[b], MemberA: s.keep[i], MemberB: s.keep[j],
				Distance: math.Sqrt(f.d / float64(len(s.p.priors))), Apart: s.apart(s.keep[i], s.keep[j], at)})
		}
	}
}

// apart words the difference of one input between two members.
func (s *summary) apart(i, j, q int) string {
	pr := &s.p.priors[q]
	_, a := s.p.Setup(i)
	_, b := s.p.Setup(j)
	return fmt.Sprintf("%s: %s and %s", pr.Key, s.p.Text(q, a[q]), s.p.Text(q, b[q]))
}

// Text writes a drawn value with its unit.
func (p *Plan) Text(q int, v float64) string {
	pr := &p.priors[q]
	switch {
	case math.IsNaN(v):
		return "not used"
	case pr.Shape == scenarios.Chosen:
		return pr.Choices[int(v)]
	}
	f := p.fieldOf(pr)
	scale, off, _ := f.Kind.Scale(f.ShownUnit())
	return strings.TrimSpace(fmt.Sprintf("%.4g %s", (v-off)/scale, f.ShownUnit()))
}

// typical picks for every outcome a member whose date is close to the median and
// whose inputs are closest to the mean of its kind, and runs it in full.
func (s *summary) typical(ctx context.Context) error {
	n := min(len(s.keep), learnFrom)
	for at := range s.Shares {
		sh := &s.Shares[at]
		type member struct {
			j int
			t float64
		}
		var of []member
		for j := range n {
			if s.is(j) == sh.Kind {
				of = append(of, member{j, s.time[j]})
			}
		}
		if len(of) == 0 {
			continue
		}
		slices.SortFunc(of, func(a, b member) int {
			switch {
			case a.t < b.t:
				return -1
			case a.t > b.t:
				return 1
			}
			return a.j - b.j
		})
		mean := make([]float64, len(s.p.priors))
		for _, m := range of {
			for q, v := range s.p.Unit(s.keep[m.j]) {
				mean[q] += v / float64(len(of))
			}
		}
		w := max(1, len(of)/40)
		mid := of[max(0, len(of)/2-w):min(len(of), len(of)/2+w+1)]
		least := math.Inf(1)
		for _, m := range mid {
			d := 0.0
			for q, v := range s.p.Unit(s.keep[m.j]) {
				d += (v - mean[q]) * (v - mean[q])
			}
			if d < least {
				least, sh.Typical = d, s.keep[m.j]
			}
		}
		setup, err := s.p.Alone(ctx, sh.Typical)
		if err != nil {
			return err
		}
		run, err := carbon.Run(ctx, setup)
		if ctx.Err() != nil {
			return ctx.Err()
		}
		if err != nil {
			s.Warnings = append(s.Warnings, record.Warning{About: "ensemble", Words: fmt.Sprintf("member %d cannot be run in full: %v", sh.Typical, err)})
			continue
		}
		t := record.Typical{Kind: sh.Kind, Member: sh.Typical}
		for _, i := range thin(len(run.Rows), 400) {
			t.Rows = append(t.Rows, run.Rows[i])
		}
		s.Typical = append(s.Typical, t)
	}
	return nil
}

// percent words a share with as many digits as its error earns.
func percent(x record.Interval) string {
	half := 50 * (x.High - x.Low)
	switch {
	case half < 0.05:
		return fmt.Sprintf("%.2f %%", 100*x.Value)
	case half < 1:
		return fmt.Sprintf("%.1f %%", 100*x.Value)
	}
	if p := 100 * x.Value; p > 0 && p < 1 {
		return fmt.Sprintf("%.1g %%", p)
	}
	return fmt.Sprintf("%.0f %%", 100*x.Value)
}

func (s *summary) words() {
	order := slices.Clone(s.Shares)
	slices.SortStableFunc(order, func(a, b record.FateShare) int { return b.Count - a.Count })
	median := func(k record.Kind) string {
		for _, d := range s.Dates {
			if d.Failure && d.Clock == string(k) {
				return fmt.Sprintf(", half of them by %.4g Gyr", d.Quantiles[2].TimeGyr.Value)
			}
		}
		return ""
	}
	var parts []string
	for _, sh := range order {
		parts = append(parts, fmt.Sprintf("%s in %s (%s to %s)%s", sh.Kind, percent(sh.Share), strings.TrimSuffix(percent(record.Interval{Value: sh.Share.Low, Low: sh.Share.Low, High: sh.Share.High}), " %"), percent(record.Interval{Value: sh.Share.High, Low: sh.Share.Low, High: sh.Share.High}), median(sh.Kind)))
	}
	s.Sentence = fmt.Sprintf("Of %d histories: %s.", s.Independent, strings.Join(parts, "; "))
	if s.Undecided > 0 {
		s.Sentence = strings.TrimSuffix(s.Sentence, ".") + fmt.Sprintf("; undecided in %d.", s.Undecided)
	}
	for i := range s.Shares {
		s.Shares[i].DateWords = strings.TrimPrefix(median(s.Shares[i].Kind), ", ")
		s.Shares[i].MembersFor = 4 * s.Members
	}
	// What more members are worth: the widest share and the widest median.
	wide, of := 0.0, record.Kind("")
	for _, sh := range s.Shares {
		if w := (sh.Share.High - sh.Share.Low) / 2; w > wide {
			wide, of = w, sh.Kind
		}
	}
	if of != "" {
		s.Worth = fmt.Sprintf("The widest share, %s, is known to ± %.2g points of a hundred; half of that takes four times as many members, %d.", of, 100*wide, 4*s.Members)
	}
	worst, clock, by := 0.0, "", 0.0
	for _, d := range s.Dates {
		if q := d.Quantiles[2].TimeGyr; d.Failure && !math.IsInf(q.High-q.Low, 0) && (q.High-q.Low)/2/q.Value > worst {
			worst, clock, by = (q.High-q.Low)/2/q.Value, d.Clock, (q.High-q.Low)/2
		}
	}
	if clock != "" {
		s.Worth += fmt.Sprintf(" The median date of %s is known to ± %.2g Gyr (%s %%).", clock, by, plainCount(100*worst))
		const numerical = 1e-3
		if worst > numerical {
			s.Worth += fmt.Sprintf(" Beyond about %s members it would be known better than a single date is computed (0.1 %%).", plainCount(float64(s.Members)*(worst/numerical)*(worst/numerical)))
		} else {
			s.Worth += " More members would not help it: a single date is computed to 0.1 %."
		}
	}
	warn := func(f string, a ...any) {
		s.Warnings = append(s.Warnings, record.Warning{About: "ensemble", Words: fmt.Sprintf(f, a...)})
	}
	if s.Undecided > 0 {
		warn("%d of %d members are undecided (%.2g %%): shares are given without them and with all of them", s.Undecided, s.Independent, 100*float64(s.Undecided)/float64(s.Independent))
	}
	for _, c := range s.Statuses {
		switch c.Status {
		case record.StatusImpossible:
			warn("%d members drew values that do not fit together, such as more outgassing from arcs than in all", c.Count)
		case record.StatusMissed:
			warn("%d members (%.3g %%) freeze or overheat before they can have the reference CO2 at the reference age: they count with the outcome they come to", c.Count, 100*float64(c.Count)/float64(s.Independent))
		case record.StatusUnanchored:
			warn("%d members cannot be brought through the reference state", c.Count)
		case record.StatusFault:
			warn("%d members made the program fail: please report their numbers", c.Count)
		}
	}
	if s.Independent < 200 {
		warn("only %d independent members: read the intervals before the values", s.Independent)
	}
	if s.p.Design == Sobol && s.Members&(s.Members-1) != 0 {
		warn("a Sobol sequence is most even at a power of two: %d or %d members instead of %d", 1<<(bitLen(s.Members)-1), 1<<bitLen(s.Members), s.Members)
	}
	if s.p.Design != Random {
		warn("shares and bands are computed as for independent members; an even design errs less than they say")
	}
	if n := min(s.Independent, learnFrom); n < s.Independent {
		warn("sensitivities are estimated from the first %d members", n)
	}
}

// plainCount writes a number to two digits without a power of ten: 3.5, 170,
// 4800, 4.8 million.
func plainCount(x float64) string {
	word := ""
	switch {
	case x >= 1e9:
		x, word = x/1e9, " billion"
	case x >= 1e6:
		x, word = x/1e6, " million"
	}
	if x < 10 {
		return fmt.Sprintf("%.2g", x) + word
	}
	m := math.Pow(10, math.Floor(math.Log10(x))-1)
	return fmt.Sprintf("%.0f", math.Round(x/m)*m) + word
}

func bitLen(n int) int {
	b := 0
	for ; n > 0; n >>= 1 {
		b++
	}
	return b
}

// works lists the methods and the sources of the laws.
func (s *summary) works() {
	works := []*cite.Work{cite.AalenJohansen1978, cite.MarubiniValsecchi1995, cite.Wilson1927, cite.Andersen2013, cite.Sudret2008}
	switch s.p.Design {
	case Sobol:
		works = append(works, cite.JoeKuo2008, cite.Owen1995)
	case Latin:
		works = append(works, cite.McKay1979)
	case Freeze:
		works = append(works, cite.JoeKuo2008, cite.Owen1995, cite.Saltelli2010, cite.Jansen1999, cite.Efron1987)
	}
	if len(s.p.design.together) > 0 {
		works = append(works, cite.ImanConover1982)
	}
	// The laws of the scenario, where none was drawn, and those that were.
	setup := s.p.Scenario.Setup.Clone()
	drawn := map[string][]string{}
	for _, sec := range setup.Sections() {
		if pr := s.p.Scenario.Uncertain.Prior(sec.Name + ".law"); pr != nil && sec.Laws != nil {
			drawn[sec.Name] = pr.Choices
			if !slices.Contains(pr.Choices, sec.Law) {
				_ = setup.Choose(sec.Name, pr.Choices[0]) // the reader has tried every choice
			}
		}
	}
	add := func(c *carbon.Setup, part string) {
		laws, more := c.Foundations()
		works = append(works, more...)
		for _, l := range laws {
			if part != "" && l.Part != part || part == "" && drawn[l.Part] != nil {
				continue
			}
			for _, sec := range c.Sections() {
				for _, f := range sec.Fields {
					// Values that the table of inputs need not have rest on works too.
					if w := f.Source.Work; sec.Name == part && w != nil && !slices.Contains(l.Works, w.Key) {
						l.Works = append(l.Works, w.Key)
					}
				}
			}
			s.Laws = append(s.Laws, l)
		}
	}
	add(setup, "")
	for _, sec := range setup.Sections() {
		for _, law := range drawn[sec.Name] {
			c := setup.Clone()
			_ = c.Choose(sec.Name, law)
			add(c, sec.Name)
		}
	}
	s.Works = carbon.WorkList(append(works, cite.Steinebach2023)...)
}
