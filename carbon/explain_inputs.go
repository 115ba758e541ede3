package carbon

import (
	"fmt"
	"math"
	"sort"
	"strings"

	"cycle/carbon/record"
	"cycle/carbon/units"
)

// inputField is one numeric input that may be varied.
type inputField struct {
	key       string
	f         units.Field // its Value belongs to the pristine setup: read only
	x0        float64
	lo, hi    float64 // range of rescues
	published bool
	known     []solvedAt
	onlyDates bool // names a state or a span: it moves dates but saves no planet
}

// inputResult is what varying one input showed.
type inputResult struct {
	elasticity, err float64 // NaN when not defined
	near            string
	ends            [2]fate // at lo and hi
	found           bool
	x               float64 // smallest change that rescues
	f               fate    // after it
}

// fields lists the numeric inputs. Accuracy settings and what the scenario
// solves for are none.
func (x *explainer) fields() []inputField {
	solved := map[string]string{"total": "carbon.content", "outgassing": "sources.scale"}[x.set.Solve]
	definitions := map[string]bool{"climate.frozen_below": true, "climate.thawed_above": true, "time.start": true, "time.end": true, "time.lasting": true}
	var out []inputField
	for _, sec := range x.set.Sections() {
		if sec.Name == "solver" || sec.Name == "zone" {
			continue
		}
		for _, f := range sec.Fields {
			in := inputField{key: sec.Name + "." + f.Key, f: f, x0: *f.Value, lo: f.Min, hi: f.Max}
			if in.key == solved {
				continue
			}
			in.onlyDates = definitions[in.key]
			if f.Published.Stated() {
				in.published = true
				in.lo, in.hi = math.Max(f.Min, math.Min(f.Published.Lo, in.x0)), math.Min(f.Max, math.Max(f.Published.Hi, in.x0))
			}
			out = append(out, in)
		}
	}
	return out
}

// vary runs the planet with one input changed.
func (x *explainer) vary(in *inputField, value float64, rough bool) (fate, error) {
	s := x.solvedClone()
	f := s.Number(in.key)
	if err := f.Check(value); err != nil {
		return fate{words: err.Error()}, nil
	}
	*f.Value = value
	if x.slope == 0 {
		return x.run(&variant{set: s})
	}
	// What is solved for follows the input smoothly: guess it from values near by.
	in.known = append(in.known, solvedAt{in.x0, 0})
	sort.SliceStable(in.known, func(i, j int) bool { return math.Abs(in.known[i].value-value) < math.Abs(in.known[j].value-value) })
	guess := in.known[0].ln
	if a := in.known[0]; len(in.known) > 1 {
		for _, b := range in.known[1:] {
			if b.value != a.value {
				guess += (b.ln - a.ln) / (b.value - a.value) * (value - a.value)
				break
			}
		}
	}
	r, err := x.run(&variant{set: s, guess: guess, slope: x.slope, rough: rough})
	if err == nil && r.kind != "" {
		in.known = append(in.known, solvedAt{value, x.moved(&r)})
	}
	return r, err
}

// solvedAt is what a solve found at one value of an input.
type solvedAt struct {
	value float64
	ln    float64 // of what is solved for, over that of the scenario
}

// sameDate tells that an input has no effect at all.
func (x *explainer) sameDate(f *fate) bool {
	return f.kind == x.base.kind && math.Abs(f.t-x.base.t) <= 1e-9*x.base.t
}

// input finds the elasticity and the rescue of one input.
func (x *explainer) input(in inputField) (r inputResult, err error) {
	r.elasticity, r.err, r.x = math.NaN(), math.NaN(), math.NaN()
	if x.out.Fails && in.x0 != 0 {
		if err := x.elasticity(&in, &r); err != nil {
			return r, err
		}
	}
	if in.onlyDates {
		return r, nil
	}
	return r, x.rescue(&in, &r)
}

// elasticityStep is the relative change at which elasticities are taken first;
// where one and two steps disagree by more than elasticityTolerance, closer ones
// follow, down to a sixteenth.
const (
	elasticityStep      = 0.01
	elasticityTolerance = 0.01
	elasticityFloor     = 2e-4 // absolute; what is smaller moves no date to speak of
)

// elasticity takes d ln t/d ln x by central differences at one and two steps,
// extrapolated (Richardson); at the edge of what is allowed, one-sided.
func (x *explainer) elasticity(in *inputField, r *inputResult) error {
	var near []string
	bad := false
	// date is ln(t/t₀) at a number of steps.
	date := func(k float64) (float64, error) {
		v := in.x0 * math.Exp(k*elasticityStep)
		f, err := x.vary(in, v, false)
		if err != nil {
			return 0, err
		}
		if f.kind == "" {
			bad = true
			return math.NaN(), nil
		}
		if f.clock != x.base.clock || f.kind != x.base.kind {
			w := fmt.Sprintf("%s at %+.3g %%", f.kind, k*100*elasticityStep)
			near = append(near, w)
			if f.clock != x.base.clock {
				return math.NaN(), nil
			}
		}
		return math.Log(f.t / x.base.t), nil
	}
	inside := func(k float64) bool {
		v := in.x0 * math.Exp(k*elasticityStep)
		return in.f.Check(v) == nil
	}
	h := elasticityStep
	var y [3]float64 // at −1, +1, and then ±2
	sides := []float64{-1, 1}
	if !inside(-1) || !inside(1) {
		dir := 1.0
		if !inside(1) {
			dir = -1
		}
		for k := 1; k <= 2; k++ {
			var err error
			if y[k], err = date(dir * float64(k)); err != nil {
				return err
			}
		}
		near = append(near, "taken on one side: the value is at the edge of what is allowed")
		r.elasticity = dir * (4*y[1] - y[2]) / (2 * h)
		r.err = math.Abs(dir*y[1]/h - r.elasticity)
		r.near = strings.Join(near, "; ")
		return nil
	}
	for i, k := range sides {
		var err error
		if y[i], err = date(k); err != nil {
			return err
		}
	}
	if y[0] == 0 && y[1] == 0 {
		r.elasticity, r.err = 0, 0
		return nil
	}
	switch l, g := math.IsNaN(y[0]), math.IsNaN(y[1]); {
	case l && g:
		if bad {
			near = append(near, "the neighbouring values make no planet")
		}
	case l || g:
		// One side fails otherwise: a one-sided difference there is.
		k := 1.0
		if g {
			k = -1
		}
		y2, err := date(2 * k)
		if err != nil {
			return err
		}
		y1 := y[1]
		if g {
			y1 = y[0]
		}
		r.elasticity = k * (4*y1 - y2) / (2 * h)
		r.err = math.Abs(k*y1/h - r.elasticity)
	default:
		a, err := date(-2)
		if err != nil {
			return err
		}
		b, err := date(2)
		if err != nil {
			return err
		}
		for {
			d1, d2 := (y[1]-y[0])/(2*h), (b-a)/(4*h)
			if !math.IsNaN(d2) {
				r.elasticity = (4*d1 - d2) / 3
				r.err = math.Abs(d1 - d2)
			} else {
				r.elasticity, r.err = d1, math.Abs(y[1]+y[0])/h
			}
			if r.err <= math.Max(elasticityTolerance*math.Abs(r.elasticity), elasticityFloor) || h < elasticityStep/8 {
				break
			}
			// Half the step: the inner points become the outer ones.
			a, b = y[0], y[1]
			h /= 2
			for i, k := range sides {
				if y[i], err = date(k * h / elasticityStep); err != nil {
					return err
				}
			}
			if math.IsNaN(y[0]) || math.IsNaN(y[1]) {
				break
			}
		}
	}
	r.near = strings.Join(near, "; ")
	return nil
}

// rescued tells whether a fate is what the rescue is after.
func (x *explainer) rescued(f *fate) bool {
	switch {
	case f.kind == "" || f.kind == record.Undecided:
		return false
	case !x.out.Fails:
		return f.fails()
	case x.opt.Postpone > 0:
		return !f.fails() || f.t >= x.base.t+x.opt.Postpone
	}
	return f.clock != x.base.clock && (!f.fails() || f.t > x.base.t)
}

// rescueTolerance is how well the smallest change is known, as a part of it.
const rescueTolerance = 5e-3

// rescue looks for the smallest change of an input, either way, after which the
// failure does not happen. Between the grid's points, which lie denser near the
// present value, the answer is taken to change once.
func (x *explainer) rescue(in *inputField, r *inputResult) error {
	r.ends = [2]fate{x.base, x.base}
	best := math.Inf(1)
	for side, end := range []float64{in.lo, in.hi} {
		if end == in.x0 {
			continue
		}
		// Geometric where the range spans factors, else linear.
		at := func(q float64) float64 { return in.x0 + (end-in.x0)*q }
		if in.x0 > 0 && end > 0 && math.Abs(math.Log(end/in.x0)) > math.Log(4) && in.f.Kind != units.Temperature {
			at = func(q float64) float64 { return in.x0 * math.Exp(math.Log(end/in.x0)*q) }
		}
		last, err := x.vary(in, end, true)
		if err != nil {
			return err
		}
		r.ends[side] = last
		if x.sameDate(&last) {
			continue
		}
		grid := []float64{0.03, 0.1, 0.3}
		if !x.rescued(&last) && last.clock == x.base.clock && last.kind != "" {
			grid = []float64{0.25}
		}
		a, b := 0.0, math.NaN()
		var fb fate
		for _, q := range append(grid, 1) {
			f := last
			if q < 1 {
				if math.Abs(at(q)-in.x0) > best {
					break // a smaller change the other way is known
				}
				if f, err = x.vary(in, at(q), true); err != nil {
					return err
				}
			}
			if x.rescued(&f) {
				b, fb = q, f
				break
			}
			a = q
		}
		if math.IsNaN(b) {
			continue
		}
		for math.Abs(at(b)-at(a)) > rescueTolerance*math.Abs(at(b)-in.x0) {
			if math.Abs(at(a)-in.x0) > best {
				break
			}
			mid := 0.5 * (a + b)
			if a == 0 && b > 0.01 {
				mid = b / 4
			}
			f, err := x.vary(in, at(mid), true)
			if err != nil {
				return err
			}
			if x.rescued(&f) {
				b, fb = mid, f
			} else {
				a = mid
			}
			if b < 1e-7 {
				break
			}
		}
		v := in.outward(at(b))
		if d := math.Abs(v - in.x0); d < best {
			f, err := x.vary(in, v, false)
			if err != nil {
				return err
			}
			if !x.rescued(&f) {
				v, f = at(b), fb
			}
			best, r.found, r.x, r.f = d, true, v, f
		}
	}
	return nil
}

// outward rounds a value away from the present one to what a person would
// write, without moving it by more than a thousandth of the change.
func (in *inputField) outward(v float64) float64 {
	scale, offset, ok := in.f.Kind.Scale(in.f.ShownUnit())
	if !ok {
		return v
	}
	u, u0 := (v-offset)/scale, (in.x0-offset)/scale
	change := math.Abs(u - u0)
	if change == 0 {
		return v
	}
	grain := math.Pow(10, math.Floor(math.Log10(change*1e-3)))
	n := math.Ceil
	if u < u0 {
		n = math.Floor
	}
	w := n(u/grain-1e-9*math.Copysign(1, u-u0)) * grain
	// Decimal text gives the same bits as the user's file would.
	text := fmt.Sprintf("%.*g", 15, w)
	var back float64
	if _, err := fmt.Sscan(text, &back); err != nil {
		return v
	}
	if r := back*scale + offset; in.f.Check(r) == nil && r >= in.lo && r <= in.hi {
		return r
	}
	return v
}

// rescues words and sorts what was found.
func (x *explainer) rescues(fields []inputField, in []inputResult) {
	for i := range fields {
		f, r := &fields[i], &in[i]
		if f.onlyDates {
			continue
		}
		scale, offset, _ := f.f.Kind.Scale(f.f.ShownUnit())
		shown := func(v float64) float64 { return (v - offset) / scale }
		e := record.Rescue{Key: f.key, Doc: f.f.Doc, Unit: f.f.ShownUnit(), From: shown(f.x0), To: math.NaN(), FromText: f.f.Text(f.x0), Lo: shown(f.lo), Hi: shown(f.hi),
			Published: f.published, Found: r.found, Relative: math.NaN(), Part: math.NaN(),
			LoKind: r.ends[0].kind, HiKind: r.ends[1].kind, LoGyr: gyr(r.ends[0].t), HiGyr: gyr(r.ends[1].t)}
		what := "allowed"
		if f.published {
			what = "published"
		}
		e.Range = fmt.Sprintf("%s to %s, %s", f.f.Text(f.lo), f.f.Text(f.hi), what)
		if !r.found {
			e.Words = "none in range"
			x.out.Rescues = append(x.out.Rescues, e)
			continue
		}
		e.To, e.ToText = shown(r.x), f.f.Text(r.x)
		if f.x0 != 0 {
			e.Relative = r.x/f.x0 - 1
		}
		e.Part = math.Abs(r.x-f.x0) / (f.hi - f.lo)
		e.Outcome, e.TimeGyr = r.f.kind, gyr(r.f.t)
		e.Words = fmt.Sprintf("%s instead of %s: %s", e.ToText, e.FromText, fateWords(&r.f))
		if !f.published {
			e.Words += "; no published range, searched over all that is allowed"
		}
		x.out.Rescues = append(x.out.Rescues, e)
	}
	rank := func(e *record.Rescue) (int, float64) {
		switch {
		case e.Found && e.Published:
			return 0, e.Part
		case e.Found && !math.IsNaN(e.Relative):
			return 1, math.Abs(e.Relative)
		case e.Found:
			return 2, e.Part
		case e.Published:
			return 3, 0
		}
		return 4, 0
	}
	sort.SliceStable(x.out.Rescues, func(i, j int) bool {
		a, u := rank(&x.out.Rescues[i])
		b, v := rank(&x.out.Rescues[j])
		return a < b || a == b && u < v
	})
}

// elasticities words and sorts.
func (x *explainer) elasticities(fields []inputField, in []inputResult) {
	if !x.out.Fails {
		x.out.ElasticWords = "Nothing fails: there is no date to be sensitive."
		return
	}
	still := 0
	for i := range fields {
		f, r := &fields[i], &in[i]
		if f.x0 == 0 {
			continue
		}
		if r.elasticity == 0 && r.near == "" {
			still++
		}
		x.out.Elasticities = append(x.out.Elasticities, record.Elasticity{Key: f.key, Doc: f.f.Doc, At: f.f.Text(f.x0), Value: r.elasticity, Error: r.err, Near: r.near,
			Gyr: r.elasticity * gyr(x.base.t) / 100})
	}
	size := func(e *record.Elasticity) float64 {
		if math.IsNaN(e.Value) {
			return math.Inf(1)
		}
		return math.Abs(e.Value)
	}
	sort.SliceStable(x.out.Elasticities, func(i, j int) bool { return size(&x.out.Elasticities[i]) > size(&x.out.Elasticities[j]) })
	x.out.ElasticWords = fmt.Sprintf("An elasticity of 1 means that 1 %% more of the input moves the date of failure by 1 %%. %d of %d inputs do not move it at all.", still, len(x.out.Elasticities))
}
