package carbon

import (
	"bufio"
	"context"
	"crypto/sha256"
	"encoding/hex"
	"fmt"
	"io"
	"math"
	"sort"
	"strconv"
	"strings"
	"sync"

	"cycle/carbon/record"
	"cycle/carbon/units"
)

// Keys of an axis that are no keys of a scenario: with one of them a map shows
// planets under steady conditions.
const (
	AxisSunlight   = "sunlight"
	AxisOutgassing = "outgassing"
)

// AxisField returns the field of an axis: dimension, unit and what is allowed.
// It is nil when there is no such key.
func (s *Setup) AxisField(key string) *units.Field {
	switch key {
	case AxisSunlight:
		return &units.Field{Key: key, Kind: units.HeatFlux, Unit: "W/m2", Min: 1, Max: 1e5, Doc: "steady sunlight at the top of the atmosphere"}
	case AxisOutgassing:
		return &units.Field{Key: key, Kind: units.Flux, Unit: "Tmol/yr", Min: 1e6, Max: 1e17, Doc: "steady outgassing of the planet"}
	}
	if strings.HasPrefix(key, "solver.") || strings.HasPrefix(key, "zone.") {
		return nil
	}
	return s.Number(key)
}

// AxisRange is an axis of a map, in base units.
type AxisRange struct {
	Key    string
	Lo, Hi float64
	Log    bool
}

// FateOptions steers Fates; the zero value is the default.
type FateOptions struct {
	Workers  int    // 0: one for each processor
	Cells    int    // of the first grid along each axis; 0 is 16
	Depth    int    // halvings where neighbours differ; 0 is 4, negative none
	Version  string // of the program; a journal of another is not used
	Progress func(done, total int)

	// Journal receives every computed point as it comes. Resume is what an
	// interrupted map left there, torn last line and all; a *JournalError tells
	// that it belongs to another map.
	Journal io.Writer
	Resume  io.Reader
}

// A JournalError tells that a journal belongs to another map.
type JournalError struct{ Found, Want string }

func (e *JournalError) Error() string {
	return fmt.Sprintf("carbon: the points kept from before belong to another map: found %q, want %q", e.Found, e.Want)
}

// An AxisError tells what is wrong with an axis.
type AxisError struct {
	key    string
	Reason string
}

func (e *AxisError) Error() string { return e.key + ": " + e.Reason }

// Key returns the key of the axis.
func (e *AxisError) Key() string { return e.key }

// mapper holds what the points of a map share.
type mapper struct {
	set    *Setup // pristine
	opt    FateOptions
	out    *record.Map
	ranges [2]AxisRange
	field  [2]units.Field
	steady bool
	cond   Conditions // of steady planets
	v      float64    // outgassing of steady planets, mol/yr

	n     int
	known map[[2]int]record.FatePoint // also those read from a journal
	used  map[[2]int]bool
}

// Fates maps the outcome over two keys. Histories are run on a grid that is
// halved where neighbours differ, until a boundary lies within 1/256 of each
// axis. What the scenario solves for is solved once: every point is the same
// planet with two values changed. With an axis "sunlight" or "outgassing" every
// point is instead a planet under conditions that do not change, those of the
// reference age. The result depends neither on the workers nor on a resumed
// journal. Errors are those of Run, *AxisError and *JournalError.
func Fates(ctx context.Context, s *Setup, x, y AxisRange, opt FateOptions) (*record.Map, error) {
	if opt.Cells <= 0 {
		opt.Cells = 16
	}
	switch {
	case opt.Depth == 0:
		opt.Depth = 4
	case opt.Depth < 0:
		opt.Depth = 0
	}
	m := &mapper{set: s.Clone(), opt: opt, ranges: [2]AxisRange{x, y}, n: opt.Cells << opt.Depth, known: map[[2]int]record.FatePoint{}, used: map[[2]int]bool{}}
	m.out = &record.Map{Format: 1, Title: s.Title, N: m.n}
	if err := m.axes(); err != nil {
		return nil, err
	}
	run, err := Run(ctx, s.Clone())
	if err != nil {
		return nil, err
	}
	m.out.Run = run
	if err := m.base(ctx, run); err != nil {
		return nil, err
	}
	if err := m.resume(); err != nil {
		return nil, err
	}
	if err := m.lines(ctx); err != nil {
		return nil, err
	}
	if err := m.refine(ctx); err != nil {
		return nil, err
	}
	m.path(run)
	m.out.Works = methodWorks(run.Works)
	return m.out, nil
}

// axes checks both axes.
func (m *mapper) axes() error {
	for i := range m.ranges {
		a := &m.ranges[i]
		fail := func(format string, args ...any) error {
			return &AxisError{a.Key, fmt.Sprintf(format, args...)}
		}
		f := m.set.AxisField(a.Key)
		if f == nil {
			return fail("no numeric key of this scenario")
		}
		m.field[i] = *f
		for _, v := range []float64{a.Lo, a.Hi} {
			if err := f.Check(v); err != nil {
				return fail("%v", err)
			}
		}
		if !(a.Lo < a.Hi) {
			return fail("found %s to %s, allowed is from a lower to a higher value", f.Text(a.Lo), f.Text(a.Hi))
		}
		scale, offset, _ := f.Kind.Scale(f.ShownUnit())
		if a.Log && (a.Lo-offset)/scale <= 0 {
			return fail("found %s, allowed is a positive value on a logarithmic axis", f.Text(a.Lo))
		}
		if a.Key == AxisSunlight || a.Key == AxisOutgassing {
			m.steady = true
		}
		ax := record.Axis{Key: a.Key, Doc: f.Doc, Unit: f.ShownUnit(), Lo: (a.Lo - offset) / scale, Hi: (a.Hi - offset) / scale, Log: a.Log, Own: math.NaN()}
		if f.Value != nil {
			ax.Own = (*f.Value - offset) / scale
		}
		*[]*record.Axis{&m.out.X, &m.out.Y}[i] = ax
	}
	if m.ranges[0].Key == m.ranges[1].Key {
		return &AxisError{m.ranges[1].Key, "both axes have the same key"}
	}
	m.out.Steady = m.steady
	return nil
}

// base settles what was solved for and the conditions of steady planets.
func (m *mapper) base(ctx context.Context, run *record.Run) error {
	if m.set.Solve != "nothing" {
		v := variant{set: m.set.Clone(), rtol: m.set.Tolerance}
		f, err := v.fate(ctx)
		if err != nil {
			return err
		}
		if f.kind != "" {
			m.set.Content, m.set.OutgassingScale = f.content, f.scale
		}
		m.set.Solve = "nothing"
	}
	row := m.reference(run)
	m.cond, m.v = ConditionsOf(row), row.Outgassing-row.Pulse
	if m.steady {
		m.out.Meant = fmt.Sprintf("each point is the planet under steady conditions for %.3g Gyr: sunlight, outgassing, land, biology and crust production as at %.4g Gyr unless an axis sets them", heldSpan/units.Gyr, gyr(row.Age))
	} else {
		m.out.Meant = "each point is the history of the same planet with two values changed"
		if on := m.ranges[0].Key + " " + m.ranges[1].Key; !strings.Contains(on, "carbon.content") {
			m.out.Meant += "; its carbon content is " + units.Content.Format(round(m.set.Content, 6), "mmol/kg") + " throughout"
		}
	}
	return nil
}

// reference returns the row at the reference age, or the last before the end.
func (m *mapper) reference(run *record.Run) *record.Row {
	best := &run.Rows[0]
	for i := range run.Rows {
		if run.Rows[i].Age <= m.set.RefAge && run.Rows[i].Age <= run.Outcome.TimeGyr*units.Gyr {
			best = &run.Rows[i]
		}
	}
	return best
}

// value returns the base value of an axis at a lattice place.
func (m *mapper) value(axis, i int) float64 {
	a := []*record.Axis{&m.out.X, &m.out.Y}[axis]
	scale, offset, _ := m.field[axis].Kind.Scale(m.field[axis].ShownUnit())
	return a.At(i, m.n)*scale + offset
}

// point runs the history of one lattice place.
func (m *mapper) point(ctx context.Context, at [2]int) (record.FatePoint, error) {
	p := record.FatePoint{I: at[0], J: at[1], X: m.out.X.At(at[0], m.n), Y: m.out.Y.At(at[1], m.n), Kind: record.Undecided, TimeGyr: math.NaN()}
	s := m.set.Clone()
	cond, v := m.cond, m.v
	for k := range m.ranges {
		x := m.value(k, at[k])
		switch m.ranges[k].Key {
		case AxisSunlight:
			cond.Sunlight = x
		case AxisOutgassing:
			v = x
		default:
			*s.Number(m.ranges[k].Key).Value = x
		}
	}
	var f fate
	var err error
	if m.steady {
		f, err = steadyFate(ctx, s, cond, v)
	} else {
		f, err = (&variant{set: s, rtol: s.Tolerance}).fate(ctx)
	}
	if err != nil {
		return p, err
	}
	if f.kind == "" {
		p.Words = f.words
		return p, nil
	}
	p.Kind, p.TimeGyr = f.kind, gyr(f.t)
	return p, nil
}

// steadyFate runs a planet under conditions that do not change.
func steadyFate(ctx context.Context, s *Setup, c Conditions, v float64) (fate, error) {
	h, err := s.held(c, v)
	if err != nil {
		return fate{words: err.Error()}, nil
	}
	h.MaxFreezes = 3
	m, err := holding(h, c)
	if err != nil {
		return fate{words: err.Error()}, nil
	}
	y, err := m.integrate(ctx, h.End, h.Tolerance, true)
	if err != nil {
		return fate{}, err
	}
	f := m.judge(y)
	return fate{kind: f.kind, t: f.t, clock: clockOf(f, y)}, nil
}

// square is a cell of the quadtree.
type square struct{ i, j, size int }

// refine runs the histories and halves cells until neighbours agree or the cells
// are as small as the lattice allows.
func (m *mapper) refine(ctx context.Context) error {
	var leaves []square
	step := 1 << m.opt.Depth
	for i := 0; i < m.n; i += step {
		for j := 0; j < m.n; j += step {
			leaves = append(leaves, square{i, j, step})
		}
	}
	for {
		need := map[[2]int]bool{}
		for _, c := range leaves {
			for _, p := range c.corners() {
				m.used[p] = true
				if _, ok := m.known[p]; !ok {
					need[p] = true
				}
			}
		}
		if err := m.compute(ctx, need); err != nil {
			return err
		}
		var next []square
		split := false
		for _, c := range leaves {
			if c.size > 1 && (m.mixed(c) || m.steady && m.crossed(c)) {
				h := c.size / 2
				next = append(next, square{c.i, c.j, h}, square{c.i + h, c.j, h}, square{c.i, c.j + h, h}, square{c.i + h, c.j + h, h})
				split = true
				continue
			}
			next = append(next, c)
		}
		leaves = next
		if !split {
			break
		}
	}
	sort.Slice(leaves, func(a, b int) bool {
		return leaves[a].i < leaves[b].i || leaves[a].i == leaves[b].i && leaves[a].j < leaves[b].j
	})
	area := map[record.Kind]float64{}
	for _, c := range leaves {
		cell := record.FateCell{I: c.i, J: c.j, Size: c.size, Kind: m.known[[2]int{c.i, c.j}].Kind, Mixed: m.mixed(c)}
		sum, n := 0.0, 0
		for k, p := range c.corners() {
			cell.Corners[k] = math.NaN()
			if q := m.known[p]; q.Kind == cell.Kind && !math.IsNaN(q.TimeGyr) {
				sum, n = sum+q.TimeGyr, n+1
				cell.Corners[k] = q.TimeGyr
			}
			area[m.known[p].Kind] += float64(c.size*c.size) / 4
		}
		cell.TimeGyr = sum / float64(n)
		m.out.Cells = append(m.out.Cells, cell)
	}
	for _, k := range record.Kinds {
		if area[k] > 0 {
			m.out.Shares = append(m.out.Shares, record.KindShare{Kind: k, Share: area[k] / float64(m.n*m.n)})
		}
	}
	for p := range m.used {
		m.out.Points = append(m.out.Points, m.known[p])
	}
	sort.Slice(m.out.Points, func(a, b int) bool {
		p, q := &m.out.Points[a], &m.out.Points[b]
		return p.I < q.I || p.I == q.I && p.J < q.J
	})
	return nil
}

func (c square) corners() [4][2]int {
	return [4][2]int{{c.i, c.j}, {c.i + c.size, c.j}, {c.i, c.j + c.size}, {c.i + c.size, c.j + c.size}}
}

// mixed tells whether the points on a cell's border that belong to the map have
// different outcomes.
func (m *mapper) mixed(c square) bool {
	kind := m.known[[2]int{c.i, c.j}].Kind
	for k := 0; k <= c.size; k++ {
		for _, p := range [4][2]int{{c.i + k, c.j}, {c.i + k, c.j + c.size}, {c.i, c.j + k}, {c.i + c.size, c.j + k}} {
			if m.used[p] && m.known[p].Kind != kind {
				return true
			}
		}
	}
	return false
}

// crossed tells whether an exact boundary passes through a cell.
func (m *mapper) crossed(c square) bool {
	n := float64(m.n)
	x0, x1 := float64(c.i)/n, float64(c.i+c.size)/n
	y0, y1 := float64(c.j)/n, float64(c.j+c.size)/n
	for _, l := range m.out.Lines {
		for k := 1; k < len(l.X); k++ {
			ax, ay, bx, by := m.out.X.Part(l.X[k-1]), m.out.Y.Part(l.Y[k-1]), m.out.X.Part(l.X[k]), m.out.Y.Part(l.Y[k])
			if clip(ax, ay, bx, by, x0, y0, x1, y1) {
				return true
			}
		}
	}
	return false
}

// clip tells whether a segment meets a rectangle (Liang-Barsky); NaN meets none.
func clip(ax, ay, bx, by, x0, y0, x1, y1 float64) bool {
	t0, t1 := 0.0, 1.0
	for _, e := range [4][2]float64{{ax - bx, ax - x0}, {bx - ax, x1 - ax}, {ay - by, ay - y0}, {by - ay, y1 - ay}} {
		p, q := e[0], e[1]
		if math.IsNaN(p) || math.IsNaN(q) || math.IsInf(p, 0) || math.IsInf(q, 0) {
			return false
		}
		switch {
		case p == 0:
			if q < 0 {
				return false
			}
		case p < 0:
			t0 = math.Max(t0, q/p)
		default:
			t1 = math.Min(t1, q/p)
		}
	}
	return t0 <= t1
}

// compute runs the histories of the places that are not known yet.
func (m *mapper) compute(ctx context.Context, need map[[2]int]bool) error {
	var todo [][2]int
	for p := range need {
		todo = append(todo, p)
	}
	sort.Slice(todo, func(a, b int) bool {
		return todo[a][0] < todo[b][0] || todo[a][0] == todo[b][0] && todo[a][1] < todo[b][1]
	})
	got := make([]record.FatePoint, len(todo))
	before := len(m.used) - len(todo)
	done := 0
	var mu sync.Mutex
	err := each(ctx, m.opt.Workers, len(todo), func() {
		done++
		if m.opt.Progress != nil {
			m.opt.Progress(before+done, before+len(todo))
		}
	}, func(i int) (err error) {
		if got[i], err = m.point(ctx, todo[i]); err != nil {
			return err
		}
		if m.opt.Journal == nil {
			return nil
		}
		mu.Lock()
		defer mu.Unlock()
		_, err = io.WriteString(m.opt.Journal, line(&got[i]))
		return err
	})
	if err != nil {
		return err
	}
	for i, p := range todo {
		m.known[p] = got[i]
	}
	return nil
}

// line is a point in a journal. The full stop tells that it is whole.
func line(p *record.FatePoint) string {
	kind := 0
	for i, k := range record.Kinds {
		if k == p.Kind {
			kind = i
		}
	}
	return fmt.Sprintf("%d %d %d %s %s .\n", p.I, p.J, kind, strconv.FormatFloat(p.TimeGyr, 'x', -1, 64), strconv.Quote(p.Words))
}

// fingerprint identifies a map: its scenario, axes, lattice and program.
func (m *mapper) fingerprint() string {
	h := sha256.New()
	fmt.Fprintln(h, m.opt.Version, m.n, m.opt.Cells)
	for _, a := range m.ranges {
		fmt.Fprintf(h, "%s %x %x %v\n", a.Key, a.Lo, a.Hi, a.Log)
	}
	for _, sec := range m.set.Sections() {
		fmt.Fprintln(h, sec.Name, sec.Law)
		for _, f := range sec.Fields {
			fmt.Fprintf(h, "%s %x\n", f.Key, *f.Value)
		}
		for _, o := range sec.Options {
			fmt.Fprintln(h, o.Key, *o.Value)
		}
		for _, f := range sec.Flags {
			fmt.Fprintln(h, f.Key, *f.Value)
		}
		if sec.Table != nil {
			fmt.Fprintln(h, *sec.Table.Text)
		}
	}
	return hex.EncodeToString(h.Sum(nil))[:32]
}

const journalHead = "cycle map journal 1 "

// resume reads what was computed before and begins the journal.
func (m *mapper) resume() error {
	head := journalHead + m.fingerprint()
	fresh := true
	if m.opt.Resume != nil {
		sc := bufio.NewScanner(m.opt.Resume)
		sc.Buffer(nil, 1<<20)
		for sc.Scan() {
			text := sc.Text()
			switch {
			case !fresh:
				m.keep(text)
			case text == head:
				fresh = false
			case !strings.HasPrefix(head, text): // a torn head is a fresh start
				return &JournalError{text, head}
			}
		}
		if err := sc.Err(); err != nil {
			return fmt.Errorf("carbon: reading the points kept from before: %w", err)
		}
	}
	if m.opt.Journal == nil {
		return nil
	}
	// After a torn line the next one starts afresh.
	text := "\n"
	if fresh {
		text += head + "\n"
	}
	_, err := io.WriteString(m.opt.Journal, text)
	return err
}

// keep takes a line of a journal if it is whole and belongs to the lattice.
func (m *mapper) keep(text string) {
	body, ok := strings.CutSuffix(text, " .")
	if !ok {
		return
	}
	part := strings.SplitN(body, " ", 5)
	if len(part) != 5 {
		return
	}
	var p record.FatePoint
	var kind int
	var err [5]error
	p.I, err[0] = strconv.Atoi(part[0])
	p.J, err[1] = strconv.Atoi(part[1])
	kind, err[2] = strconv.Atoi(part[2])
	p.TimeGyr, err[3] = strconv.ParseFloat(part[3], 64)
	p.Words, err[4] = strconv.Unquote(part[4])
	for _, e := range err {
		if e != nil {
			return
		}
	}
	if p.I < 0 || p.I > m.n || p.J < 0 || p.J > m.n || kind < 0 || kind >= len(record.Kinds) {
		return
	}
	p.Kind = record.Kinds[kind]
	p.X, p.Y = m.out.X.At(p.I, m.n), m.out.Y.At(p.J, m.n)
	m.known[[2]int{p.I, p.J}] = p
}

// plane tells which axis is like sunlight and which like outgassing.
func (m *mapper) plane() (sun, out int, ok bool) {
	sun, out = -1, -1
	for i := range m.ranges {
		switch m.ranges[i].Key {
		case AxisSunlight, "orbit.distance":
			sun = i
		case AxisOutgassing, "sources.scale":
			out = i
		}
	}
	return sun, out, sun >= 0 && out >= 0
}

// linePoints is the number of sunlights at which the boundaries are found.
const linePoints = 97

// lines finds the exact boundaries under the conditions of the reference age.
func (m *mapper) lines(ctx context.Context) error {
	sunAxis, outAxis, ok := m.plane()
	if !ok {
		return nil
	}
	own := m.reference(m.out.Run)
	sun := []*record.Axis{&m.out.X, &m.out.Y}[sunAxis]
	out := []*record.Axis{&m.out.X, &m.out.Y}[outAxis]
	sunlight := func(q float64) float64 {
		v := sun.Value(q)
		if m.ranges[sunAxis].Key == AxisSunlight {
			return v
		}
		d := v * units.AU / m.set.Distance // shown in au
		return own.Sunlight / (d * d)
	}
	// Outgassing in Tmol/yr to the axis: a scale multiplies what the planet has.
	shown := func(v float64) float64 {
		if m.ranges[outAxis].Key == AxisOutgassing {
			return v
		}
		return v * 1e12 / (own.Outgassing - own.Pulse) * m.set.OutgassingScale
	}
	bounds := make([]record.Boundaries, linePoints)
	at := func(q float64) (record.Boundaries, error) {
		c := m.cond
		c.Sunlight = sunlight(q)
		e, err := NewEquilibria(m.set, c)
		if err != nil {
			return record.Boundaries{}, err
		}
		return e.Boundaries(), nil
	}
	err := each(ctx, m.opt.Workers, linePoints, nil, func(i int) (err error) {
		bounds[i], err = at(float64(i) / (linePoints - 1))
		return err
	})
	if err != nil {
		return err
	}
	nan := math.NaN()
	// there tells whether a boundary exists at all; where it ends for good, the line
	// goes down to the edge of the map.
	add := func(name, words string, get func(b *record.Boundaries) float64, there func(b *record.Boundaries) bool) {
		l := record.BoundaryLine{Name: name, Words: words, AgeGyr: gyr(m.cond.Age)}
		any := false
		for i := range bounds {
			v := shown(get(&bounds[i]))
			if !(v > 0) || v < out.Lo*1e-3 && out.Log {
				v = nan
			}
			if i > 0 && there(&bounds[i]) != there(&bounds[i-1]) {
				a, b := float64(i-1)/(linePoints-1), float64(i)/(linePoints-1)
				gone := !there(&bounds[i])
				last := bounds[i-1]
				if !gone {
					last = bounds[i]
				}
				for k := 0; k < 24; k++ {
					c := 0.5 * (a + b)
					e, err := at(c)
					if err != nil {
						break
					}
					if !there(&e) == gone {
						b = c
					} else {
						a = c
					}
					if there(&e) {
						last = e
					}
				}
				ends := []float64{shown(get(&last)), out.Lo}
				if !gone {
					ends[0], ends[1] = ends[1], ends[0]
				}
				for _, v := range ends {
					l.X, l.Y = append(l.X, sun.Value(0.5*(a+b))), append(l.Y, v)
				}
			}
			any = any || !math.IsNaN(v)
			l.X, l.Y = append(l.X, sun.Value(float64(i)/(linePoints-1))), append(l.Y, v)
		}
		if !any {
			return
		}
		if sunAxis == 1 {
			l.X, l.Y = l.Y, l.X
		}
		m.out.Lines = append(m.out.Lines, l)
	}
	when := fmt.Sprintf("under the conditions of %.4g Gyr", gyr(m.cond.Age))
	add("warm state lost", "outgassing below which the warm state is lost, "+when, func(b *record.Boundaries) float64 { return b.WarmNeeds }, func(b *record.Boundaries) bool { return !(b.NoWarm == "" && b.WarmNeeds == 0) && b.NoWarm != "hot" })
	add("snowball thaws", "outgassing above which no snowball lasts, "+when, func(b *record.Boundaries) float64 { return b.ThawsAbove }, func(*record.Boundaries) bool { return true })
	add("too hot", "outgassing, or sunlight, above which the warm state is too hot, "+when, func(b *record.Boundaries) float64 { return b.HotAbove }, func(b *record.Boundaries) bool { return b.NoWarm != "hot" })
	return nil
}

// path is where the scenario itself goes when an axis stands for what changes in
// time. On an axis of distance it is the distance at which the star of the
// reference age would shine as bright, on one of scale the scale that would give
// its outgassing then.
func (m *mapper) path(run *record.Run) {
	own := m.reference(run)
	moves := false
	at := func(axis int, r *record.Row) float64 {
		a := []*record.Axis{&m.out.X, &m.out.Y}[axis]
		switch m.ranges[axis].Key {
		case AxisSunlight:
			moves = true
			return r.Sunlight
		case AxisOutgassing:
			moves = true
			return r.Outgassing / 1e12
		case "orbit.distance":
			moves = true
			return a.Own * math.Sqrt(own.Sunlight/r.Sunlight)
		case "sources.scale":
			moves = true
			return m.set.OutgassingScale * r.Outgassing / (own.Outgassing - own.Pulse)
		}
		return a.Own
	}
	last := math.Inf(-1)
	end := run.Outcome.TimeGyr * units.Gyr
	for i := range run.Rows {
		r := &run.Rows[i]
		if r.Age > end*(1+1e-12) {
			break
		}
		if i+1 < len(run.Rows) && run.Rows[i+1].Age <= end && r.Age-last < (end-run.Rows[0].Age)/150 {
			continue
		}
		last = r.Age
		m.out.Path = append(m.out.Path, record.PathPoint{AgeGyr: gyr(r.Age), X: at(0, r), Y: at(1, r)})
	}
	if !moves {
		m.out.Path = m.out.Path[:0]
	}
}
