package estimate

import (
	"encoding/csv"
	"math"
	"math/rand"
	"os"
	"slices"
	"strconv"
	"testing"
)

func table(t *testing.T, name string) [][]float64 {
	t.Helper()
	f, err := os.Open("testdata/" + name)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	r := csv.NewReader(f)
	r.Comment, r.TrimLeadingSpace = '#', true
	rows, err := r.ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	var out [][]float64
	for _, row := range rows[1:] {
		var v []float64
		for _, c := range row {
			x, err := strconv.ParseFloat(c, 64)
			if err != nil {
				t.Fatal(err)
			}
			v = append(v, x)
		}
		out = append(out, v)
	}
	return out
}

// Newcombe (1998), Statistics in Medicine 17, 857-872, table I, method 3.
func TestWilson(t *testing.T) {
	for _, c := range []struct {
		k, n   int
		lo, hi float64
	}{{81, 263, 0.2553, 0.3662}, {15, 148, 0.0624, 0.1605}, {0, 20, 0, 0.1611}, {1, 29, 0.0061, 0.1718}, {29, 29, 0.8830, 1}} {
		lo, hi := Wilson(c.k, c.n)
		if math.Abs(lo-c.lo) > 0.5e-4 || math.Abs(hi-c.hi) > 0.5e-4 {
			t.Errorf("%d of %d: %.4f to %.4f, published %.4f to %.4f", c.k, c.n, lo, hi, c.lo, c.hi)
		}
	}
}

// Six histories by hand: cause 0 at 1, censored at 2, cause 1 at 3, both causes at
// 4, cause 0 at 6. Exact fractions.
func TestIncidenceByHand(t *testing.T) {
	by, free := Incidence([]Event{{4, 1}, {1, 0}, {6, 0}, {2, -1}, {3, 1}, {4, 0}}, 2, 0)
	if !slices.Equal(free.Time, []float64{1, 3, 4, 6}) {
		t.Fatal(free.Time)
	}
	for i, want := range [][3]float64{{5. / 6, 1. / 6, 0}, {5. / 8, 1. / 6, 5. / 24}, {5. / 24, 3. / 8, 5. / 12}, {0, 7. / 12, 5. / 12}} {
		for k, got := range []float64{free.Value[i], by[0].Value[i], by[1].Value[i]} {
			if math.Abs(got-want[k]) > 1e-15 {
				t.Errorf("at %v: %v, want %v", free.Time[i], got, want[k])
			}
		}
	}
}

// TestIncidencePublished repeats the worked example of the literature: the weeks
// of remission of 21 patients under 6-mercaptopurine (Freireich et al. 1963,
// Blood 21, 699-716), whose product-limit estimate and Greenwood errors stand in
// the textbooks (Cox & Oakes 1984; Kalbfleisch & Prentice 2002; figures from
// memory). With one cause Aalen-Johansen is the complement of product-limit;
// with the relapses parted into two causes the two incidences must add up to it.
func TestIncidencePublished(t *testing.T) {
	relapsed := []float64{6, 6, 6, 7, 10, 13, 16, 22, 23}
	censored := []float64{6, 9, 10, 11, 17, 19, 20, 25, 32, 32, 34, 35}
	var one, two []Event
	for i, w := range relapsed {
		one = append(one, Event{w, 0})
		two = append(two, Event{w, i % 2})
	}
	for _, w := range censored {
		one, two = append(one, Event{w, -1}), append(two, Event{w, -1})
	}
	by, free := Incidence(one, 1, 0)
	parted, _ := Incidence(two, 2, 0)
	for _, c := range []struct{ week, survival, err float64 }{
		{6, 0.857, 0.076}, {7, 0.807, 0.087}, {10, 0.753, 0.096}, {13, 0.690, 0.107}, {16, 0.627, 0.114}, {22, 0.538, 0.128}, {23, 0.448, 0.135},
	} {
		i, found := slices.BinarySearch(free.Time, c.week)
		if !found {
			t.Fatalf("no step at %v weeks in %v", c.week, free.Time)
		}
		if math.Abs(free.Value[i]-c.survival) > 6e-4 || math.Abs(math.Sqrt(free.Var[i])-c.err) > 6e-4 {
			t.Errorf("%v weeks: %.4f ± %.4f, published %.3f ± %.3f", c.week, free.Value[i], math.Sqrt(free.Var[i]), c.survival, c.err)
		}
		f, _, _ := by[0].At(c.week)
		a, _, _ := parted[0].At(c.week)
		b, _, _ := parted[1].At(c.week)
		if math.Abs(f+free.Value[i]-1) > 1e-14 || math.Abs(a+b-f) > 1e-14 {
			t.Errorf("%v weeks: incidences %.6f + %.6f, whole %.6f, survival %.6f", c.week, a, b, f, free.Value[i])
		}
	}
}

func TestIncidenceReference(t *testing.T) {
	var e []Event
	for _, r := range table(t, "aj_data.csv") {
		e = append(e, Event{r[0], int(r[1]) - 1})
	}
	by, free := Incidence(e, 2, 0)
	for _, r := range table(t, "aj_etm.csv") {
		for i, c := range []Curve{free, by[0], by[1]} {
			j, found := slices.BinarySearch(c.Time, r[0])
			if !found {
				j--
			}
			v, x := 0.0, 0.0
			switch {
			case j >= 0:
				v, x = c.Var[j], c.Value[j]
			case i == 0: // before the first event
				x = 1
			}
			if math.Abs(x-r[1+i]) > 1e-12 || math.Abs(v-r[4+i]) > 1e-12 {
				t.Errorf("t = %v, curve %d: %.12f variance %.3e, reference %.12f %.3e", r[0], i, x, v, r[1+i], r[4+i])
			}
		}
	}
}

// Keeping fewer points changes none of them.
func TestIncidenceThinned(t *testing.T) {
	rng := rand.New(rand.NewSource(4))
	var e []Event
	for range 1000 {
		e = append(e, Event{float64(rng.Intn(5000)), rng.Intn(4) - 1})
	}
	all, whole := Incidence(slices.Clone(e), 3, 0)
	some, free := Incidence(e, 3, 40)
	if n := len(free.Time); n != 40 || free.Time[0] != whole.Time[0] || free.Time[n-1] != whole.Time[len(whole.Time)-1] {
		t.Errorf("%d points from %v to %v", n, free.Time[0], free.Time[n-1])
	}
	for k := range some {
		for i, at := range some[k].Time {
			v, lo, hi := all[k].At(at)
			if some[k].Value[i] != v || some[k].Low[i] != lo || some[k].High[i] != hi {
				t.Fatalf("cause %d at %v: %v, whole %v", k, at, some[k].Value[i], v)
			}
		}
	}
}

// Without censoring the incidence is a share and its variance binomial.
func TestIncidenceShare(t *testing.T) {
	var e []Event
	for i := range 100 {
		e = append(e, Event{float64(i + 1), i % 3})
	}
	by, _ := Incidence(e, 3, 0)
	v, _, _ := by[1].At(50)
	if v != 0.17 && math.Abs(v-0.17) > 1e-12 {
		t.Errorf("%v of 100 at 50", v)
	}
	for i, f := range by[1].Value {
		if want := f * (1 - f) / 100; math.Abs(by[1].Var[i]-want) > 1e-12 {
			t.Fatalf("variance %v, want %v", by[1].Var[i], want)
		}
	}
}

// The band holds the truth at its stated rate.
func TestIncidenceCoverage(t *testing.T) {
	rng := rand.New(rand.NewSource(1))
	const reps, n = 500, 80
	in := 0
	for range reps {
		var e []Event
		for range n {
			a, b, c := rng.ExpFloat64(), 2*rng.ExpFloat64(), 4*rng.ExpFloat64()
			x := min(a, b, c)
			e = append(e, Event{x, map[float64]int{a: 0, b: 1, c: -1}[x]})
		}
		by, _ := Incidence(e, 2, 0)
		truth := 1. / 3 * (1 - math.Exp(-1.5*0.8))
		if _, lo, hi := by[1].At(0.8); lo <= truth && truth <= hi {
			in++
		}
	}
	if in < 460 || in > 490 { // 475 ± 3 standard deviations
		t.Errorf("the 95 %% band holds the truth in %d of %d", in, reps)
	}
}

func TestQuantileCoverage(t *testing.T) {
	rng := rand.New(rand.NewSource(2))
	for _, p := range []float64{0.05, 0.5, 0.95} {
		in := 0
		for range 1000 {
			x := make([]float64, 150)
			for i := range x {
				x[i] = rng.ExpFloat64()
			}
			slices.Sort(x)
			v, lo, hi := Quantile(x, p)
			if q := -math.Log1p(-p); lo <= q && q <= hi {
				in++
			}
			if !(lo <= v && v <= hi) {
				t.Fatal(v, lo, hi)
			}
		}
		if in < 935 || in > 985 {
			t.Errorf("quantile %v: in %d of 1000", p, in)
		}
	}
}

// model is a function of uniform inputs with published indices.
type model struct {
	name         string
	k            int
	f            func(u []float64) float64
	first, total []float64
}

// The function of Ishigami & Homma (1990) with a = 7, b = 0.1 and the g-function of
// Sobol with a = (0, 1, 4.5, 9, 99, 99, 99, 99) (Saltelli & Sobol 1995), with their
// analytic indices (Saltelli et al. 2008, Global sensitivity analysis).
func models() []model {
	const a, b = 7, 0.1
	pi4 := math.Pow(math.Pi, 4)
	v1, v2, v13 := 0.5*math.Pow(1+b*pi4/5, 2), a*a/8., 8*b*b*pi4*pi4/225
	v := v1 + v2 + v13
	ishi := model{"Ishigami", 3, func(u []float64) float64 {
		x := func(i int) float64 { return math.Pi * (2*u[i] - 1) }
		return math.Sin(x(0)) + a*math.Pow(math.Sin(x(1)), 2) + b*math.Pow(x(2), 4)*math.Sin(x(0))
	}, []float64{v1 / v, v2 / v, 0}, []float64{(v1 + v13) / v, v2 / v, v13 / v}}
	as := []float64{0, 1, 4.5, 9, 99, 99, 99, 99}
	g := model{"g-function", 8, func(u []float64) float64 {
		y := 1.0
		for i, a := range as {
			y *= (math.Abs(4*u[i]-2) + a) / (1 + a)
		}
		return y
	}, nil, nil}
	all := 1.0
	for _, a := range as {
		all *= 1 + 1/(3*(1+a)*(1+a))
	}
	for _, a := range as {
		vi := 1 / (3 * (1 + a) * (1 + a))
		g.first = append(g.first, vi/(all-1))
		g.total = append(g.total, vi*all/(1+vi)/(all-1))
	}
	return []model{ishi, g}
}

// The published figures of the two functions, as printed.
func TestModels(t *testing.T) {
	m := models()
	for i, want := range []float64{0.3139, 0.4424, 0} {
		if math.Abs(m[0].first[i]-want) > 0.5e-4 {
			t.Errorf("Ishigami S%d = %.4f, printed %.4f", i+1, m[0].first[i], want)
		}
	}
	for i, want := range []float64{0.716, 0.179, 0.0237, 0.0072} {
		if math.Abs(m[1].first[i]-want) > 0.5e-3 {
			t.Errorf("g-function S%d = %.4f, printed %.4f", i+1, m[1].first[i], want)
		}
	}
}

// Stated intervals hold the analytic index at the stated rate: 500 repetitions.
func TestIndicesCoverage(t *testing.T) {
	const reps, n = 500, 400
	for _, m := range models() {
		rng := rand.New(rand.NewSource(5))
		s, tot, given := make([]int, m.k), make([]int, m.k), make([]int, m.k)
		for range reps {
			f := Freeze{AB: make([][]float64, m.k)}
			ins := make([]Input, m.k)
			var y []float64
			for range n {
				a, b := make([]float64, m.k), make([]float64, m.k)
				for i := range a {
					a[i], b[i] = rng.Float64(), rng.Float64()
				}
				f.A, f.B = append(f.A, m.f(a)), append(f.B, m.f(b))
				for i := range a {
					x := slices.Clone(a)
					x[i] = b[i]
					f.AB[i] = append(f.AB[i], m.f(x))
					ins[i].U = append(ins[i].U, a[i], b[i])
				}
				y = append(y, f.A[len(f.A)-1], f.B[len(f.B)-1])
			}
			first, total := f.Indices(400, rng.Intn)
			for i := range m.k {
				if first[i].Low <= m.first[i] && m.first[i] <= first[i].High {
					s[i]++
				}
				if total[i].Low <= m.total[i] && m.total[i] <= total[i].High {
					tot[i]++
				}
				if g := FirstOrder(ins[i], y); g.Low <= m.first[i] && m.first[i] <= g.High {
					given[i]++
				}
			}
		}
		t.Logf("%s: in the 95 %% interval of %d: first %v, total %v, first from given data %v", m.name, reps, s, tot, given)
		for i := range m.k {
			for what, in := range map[string]int{"first": s[i], "total": tot[i]} {
				if in < 460 { // 475 less 3 standard deviations
					t.Errorf("%s, %s index of input %d: in the interval %d times of %d", m.name, what, i+1, in, reps)
				}
			}
			if given[i] < 460 {
				t.Errorf("%s, first index from given data of input %d: in the interval %d times of %d", m.name, i+1, given[i], reps)
			}
		}
	}
}

// A sum of a choice and a number: the shares are known.
func TestChoices(t *testing.T) {
	rng := rand.New(rand.NewSource(3))
	const n = 4000
	in := []Input{{Choice: make([]int, n), N: 3}, {U: make([]float64, n)}, {U: make([]float64, n)}}
	y := make([]float64, n)
	for j := range y {
		c := rng.Intn(3)
		in[0].Choice[j] = c
		in[1].U[j], in[2].U[j] = rng.Float64(), rng.Float64()
		y[j] = float64(c) + 2*in[1].U[j] // variances 2/3 and 4/12
	}
	for i, want := range []float64{2. / 3, 1. / 3, 0} {
		if g := FirstOrder(in[i], y); math.Abs(g.Value-want) > 0.03 || g.Low > want || g.High < want {
			t.Errorf("input %d: %+v, want %v", i, g, want)
		}
	}
	if g := Group(in[:1], y); math.Abs(g.Value-2./3) > 0.03 {
		t.Errorf("group: %+v", g)
	}
	if p := PartialRank(in, y); !(p[1].Value > 0.95) || !(math.Abs(p[2].Value) < 0.05) || !math.IsNaN(p[0].Value) {
		t.Errorf("partial: %+v", p)
	}
}

// A partial rank correlation of normal variables is the partial correlation: with
// r_xy = 0.5, r_xz = 0.6, r_yz = 0.7, (0.5 − 0.42)/√(0.64·0.51) = 0.1400 (exact).
func TestPartialRank(t *testing.T) {
	rng := rand.New(rand.NewSource(9))
	const n = 40000
	x, z, y := make([]float64, n), make([]float64, n), make([]float64, n)
	for j := range x {
		a, b, c := rng.NormFloat64(), rng.NormFloat64(), rng.NormFloat64()
		x[j] = a
		z[j] = 0.6*a + 0.8*b
		l := (0.7 - 0.3) / 0.8
		y[j] = 0.5*a + l*b + math.Sqrt(1-0.25-l*l)*c
	}
	p := PartialRank([]Input{{U: x}, {U: z}}, y)
	// Ranks of normal variables: r_s = 6/π asin(r/2), then the same formula.
	rs := func(r float64) float64 { return 6 / math.Pi * math.Asin(r/2) }
	a, b, c := rs(0.5), rs(0.6), rs(0.7)
	want := (a - b*c) / math.Sqrt((1-b*b)*(1-c*c))
	if math.Abs(p[0].Value-want) > 0.012 || p[0].Low > want || p[0].High < want {
		t.Errorf("%+v, want %v", p[0], want)
	}
}

func TestRank(t *testing.T) {
	if got := Rank([]float64{3, 1, 3, 2}); !slices.Equal(got, []float64{2.5, 0, 2.5, 1}) {
		t.Error(got)
	}
}
