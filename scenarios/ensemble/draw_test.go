package ensemble

import (
	"encoding/csv"
	"fmt"
	"math"
	"os"
	"slices"
	"strconv"
	"testing"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/stat"

	"cycle/carbon/units"
	"cycle/scenarios"
	"cycle/scenarios/ensemble/estimate"
)

// The points of the sequence are those of the reference library, in all
// dimensions, at the start and far out.
func TestSobolReference(t *testing.T) {
	f, err := os.Open("testdata/sobol.csv")
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	r := csv.NewReader(f)
	r.Comment = '#'
	rows, err := r.ReadAll()
	if err != nil || len(rows) != 259 {
		t.Fatal(len(rows), err)
	}
	for _, row := range rows {
		i, _ := strconv.Atoi(row[0])
		for c, s := range row[1:] {
			d := c
			if c == 64 {
				d = 255
			}
			want, err := strconv.ParseUint(s, 10, 32)
			if err != nil {
				t.Fatal(err)
			}
			if got := sobol(uint32(i), d); uint64(got) != want {
				t.Fatalf("point %d, dimension %d: %d, reference %d", i, d+1, got, want)
			}
		}
	}
}

// Scrambling keeps the points a net: in every dimension each of the 2^m elementary
// intervals holds one of 2^m points, and so do boxes over the first two dimensions.
func TestScramblingKeepsNet(t *testing.T) {
	d, err := newDesign(Sobol, 3, []string{"a", "b", "c", "d", "e"}, nil, nil)
	if err != nil {
		t.Fatal(err)
	}
	const m = 10
	for j := range 5 {
		seen := make([]bool, 1<<m)
		for i := range 1 << m {
			k := int(d.unit(i)[j] * (1 << m))
			if seen[k] {
				t.Fatalf("dimension %d: two points in interval %d", j, k)
			}
			seen[k] = true
		}
	}
	for q := range m + 1 {
		seen := map[[2]int]bool{}
		for i := range 1 << m {
			u := d.unit(i)
			k := [2]int{int(u[0] * float64(int(1)<<q)), int(u[1] * float64(int(1)<<(m-q)))}
			if seen[k] {
				t.Fatalf("boxes of 2^-%d by 2^-%d: two points in one", q, m-q)
			}
			seen[k] = true
		}
	}
	other, _ := newDesign(Sobol, 4, []string{"a", "b", "c", "d", "e"}, nil, nil)
	if slices.Equal(d.unit(5), other.unit(5)) {
		t.Error("another seed, the same points")
	}
}

// On a smooth integral the error of the scrambled sequence falls faster than
// 1/√N: from 2^8 to 2^14 points by at least 2^5 instead of 2^3, over 30 seeds.
func TestConvergence(t *testing.T) {
	keys := []string{"a", "b", "c", "d", "e"}
	rms := func(kind string, n int) float64 {
		s := 0.0
		for seed := range uint64(30) {
			d, err := newDesign(kind, seed, keys, nil, nil)
			if err != nil {
				t.Fatal(err)
			}
			sum := 0.0
			for i := range n {
				f := 1.0
				for _, u := range d.unit(i) {
					f *= 1 + 0.5*(math.Exp(u)-(math.E-1)) // mean 1
				}
				sum += f
			}
			e := sum/float64(n) - 1
			s += e * e
		}
		return math.Sqrt(s / 30)
	}
	a, b := rms(Sobol, 1<<8), rms(Sobol, 1<<14)
	r := rms(Random, 1<<8)
	slope := math.Log2(a/b) / 6
	t.Logf("error %.2e at 2^8, %.2e at 2^14: N^-%.2f; random %.2e at 2^8", a, b, slope, r)
	if slope < 5./6 {
		t.Errorf("error falls as N^-%.2f", slope)
	}
	if a > r/3 {
		t.Errorf("at 2^8 points %.2e, random draws %.2e", a, r)
	}
	if l := rms(Latin, 1000); l > rms(Random, 1000)/2 {
		t.Errorf("Latin hypercube %.2e", l)
	}
}

// kolmogorov returns √n D of values against a distribution.
func kolmogorov(x []float64, cdf func(float64) float64) float64 {
	slices.Sort(x)
	n, d := float64(len(x)), 0.0
	for i, v := range x {
		f := cdf(v)
		d = max(d, math.Abs(f-float64(i)/n), math.Abs(f-float64(i+1)/n))
	}
	return d * math.Sqrt(n)
}

// Every distribution, by random draws: of 200 Kolmogorov-Smirnov statistics of
// each, about 5 % exceed the 5 % point 1.358, and none the 1e-6 point 2.69.
func TestDistributions(t *testing.T) {
	inf := math.Inf(1)
	f := &units.Field{Key: "x", Min: 0.001, Max: 1000, Published: units.Range{Lo: 2, Hi: 7}}
	phi := func(x float64) float64 { return 0.5 * math.Erfc(-x/math.Sqrt2) }
	clip := func(f func(float64) float64, lo, hi float64) func(float64) float64 {
		a, b := f(lo), f(hi)
		return func(x float64) float64 { return min(max((f(x)-a)/(b-a), 0), 1) }
	}
	tri := func(a, c, b float64) func(float64) float64 {
		return func(x float64) float64 {
			if x < c {
				return (x - a) * (x - a) / ((b - a) * (c - a))
			}
			return 1 - (b-x)*(b-x)/((b-a)*(b-c))
		}
	}
	for _, c := range []struct {
		p   scenarios.Prior
		cdf func(float64) float64
	}{
		{scenarios.Prior{Shape: scenarios.Uniform, Low: 1, High: 5}, func(x float64) float64 { return (x - 1) / 4 }},
		{scenarios.Prior{Shape: scenarios.Published}, func(x float64) float64 { return (x - 2) / 5 }},
		{scenarios.Prior{Shape: scenarios.LogUniform, Low: 0.1, High: 100}, func(x float64) float64 { return math.Log(x/0.1) / math.Log(1000) }},
		{scenarios.Prior{Shape: scenarios.Triangular, Low: 1, Mode: 2, High: 7}, tri(1, 2, 7)},
		{scenarios.Prior{Shape: scenarios.Normal, Mean: 500, SD: 20}, func(x float64) float64 { return phi((x - 500) / 20) }},
		{scenarios.Prior{Shape: scenarios.Normal, Mean: 5, SD: 2, AtLeast: 4, AtMost: 8}, clip(func(x float64) float64 { return phi((x - 5) / 2) }, 4, 8)},
		{scenarios.Prior{Shape: scenarios.Normal, Mean: 1, SD: 3}, clip(func(x float64) float64 { return phi((x - 1) / 3) }, 0.001, 1000)},
		{scenarios.Prior{Shape: scenarios.LogNormal, Median: 3, Sigma: 0.5}, func(x float64) float64 { return phi(math.Log(x/3) / 0.5) }},
		{scenarios.Prior{Shape: scenarios.LogNormal, Median: 3, Sigma: 0.5, AtMost: 4}, clip(func(x float64) float64 { return phi(math.Log(x/3) / 0.5) }, 0, 4)},
	} {
		if c.p.AtLeast == 0 {
			c.p.AtLeast = -inf
		}
		if c.p.AtMost == 0 {
			c.p.AtMost = inf
		}
		const sets, n = 200, 500
		over := 0
		for seed := range uint64(sets) {
			x := make([]float64, n)
			for i := range x {
				x[i] = value(&c.p, f, unit(stream(seed, uint64(i), "x")))
			}
			ks := kolmogorov(x, c.cdf)
			if ks > 1.358 {
				over++
			}
			if ks > 2.69 {
				t.Errorf("%s: a statistic of %.2f", c.p.Shape, ks)
			}
		}
		if over > 22 || over < 1 { // 10 ± 3.1, 4 standard deviations
			t.Errorf("%+v: %d of %d statistics exceed the 5 %% point", c.p, over, sets)
		}
	}
	// Weighted choices.
	p := scenarios.Prior{Shape: scenarios.Chosen, Choices: []string{"a", "b", "c"}, Weights: []float64{2, 1, 0.1}}
	count := make([]float64, 3)
	const n = 31000
	for i := range n {
		count[choice(&p, unit(stream(1, uint64(i), "c")))]++
	}
	chi := stat.ChiSquare(count, []float64{20000, 10000, 1000})
	if chi > 13.8 { // 0.1 % point of 2 degrees
		t.Errorf("choices %v, chi-square %.1f", count, chi)
	}
}

// Evenly spread designs have each marginal nearly exact.
func TestMarginals(t *testing.T) {
	for _, kind := range []string{Sobol, Latin, Freeze} {
		d, err := newDesign(kind, 11, []string{"a", "b", "c"}, nil, nil)
		if err != nil {
			t.Fatal(err)
		}
		for j := range 3 {
			var x []float64
			for i := 0; len(x) < 2000; i++ {
				if d.independent(i) {
					x = append(x, d.unit(i)[j])
				}
			}
			if ks := kolmogorov(x, func(u float64) float64 { return u }); ks > 0.2 {
				t.Errorf("%s, input %d: √n D = %.3f", kind, j, ks)
			}
		}
	}
}

// Rank correlations come out as asked, the marginals stay.
func TestCorrelations(t *testing.T) {
	const text = `
[weathering.land]
law = "krissansentotton2017"
[uncertain]
"weathering.land.efold" = "published"
"sources.ridge" = "published"
"sources.arc" = { distribution = "log-normal", median = "2.5 Tmol/yr", sigma = 0.3 }
"planet.mass" = "published"
correlations = [
  { between = ["sources.ridge", "sources.arc"], rank = 0.7 },
  { between = ["weathering.land.efold", "sources.arc"], rank = -0.4 },
]
`
	r, err := scenarios.Parse("x.toml", []byte(text), nil)
	if err != nil {
		t.Fatal(err)
	}
	want := map[[2]int]float64{{1, 2}: 0.7, {0, 2}: -0.4, {0, 1}: 0, {0, 3}: 0, {1, 3}: 0, {2, 3}: 0}
	for _, kind := range []string{Sobol, Latin, Random} {
		p, err := NewPlan(r, "test", 5, kind, 4000)
		if err != nil {
			t.Fatal(err)
		}
		cols := make([][]float64, 4)
		for i := range 4000 {
			for j, v := range p.Unit(i) {
				cols[j] = append(cols[j], v)
			}
		}
		tol := 0.05 // random: 3 standard errors
		if kind != Random {
			tol = 0.025
		}
		for pair, w := range want {
			if pair == [2]int{0, 1} {
				continue // follows from the two others
			}
			c := stat.Correlation(estimate.Rank(cols[pair[0]]), estimate.Rank(cols[pair[1]]), nil)
			if math.Abs(c-w) > tol {
				t.Errorf("%s: rank correlation of inputs %v is %.3f, asked for %g", kind, pair, c, w)
			}
		}
		for j := range 4 {
			if ks := kolmogorov(slices.Clone(cols[j]), func(u float64) float64 { return u }); ks > 1.63 {
				t.Errorf("%s: marginal %d: √n D = %.2f", kind, j, ks)
			}
		}
		if kind == Latin { // the strata of a block are kept
			for j := range 4 {
				x := slices.Clone(cols[j][:latinBlock])
				slices.Sort(x)
				for i, v := range x {
					if int(v*latinBlock) != i {
						t.Fatalf("stratum %d of input %d is empty", i, j)
					}
				}
			}
		}
	}
	if _, err := NewPlan(r, "test", 5, Freeze, 100); err == nil {
		t.Error("pick and freeze with correlated inputs")
	}
	m := mat.NewSymDense(2, []float64{1, 2, 2, 1})
	if _, err := newDesign(Random, 1, []string{"a", "b"}, []string{"a", "b"}, m); err == nil {
		t.Error("a correlation of two")
	}
}

// A new key leaves the draws of the others alone, whatever the design.
func TestNewKey(t *testing.T) {
	for _, kind := range []string{Sobol, Latin, Random} {
		a, _ := newDesign(kind, 1, []string{"x", "y"}, nil, nil)
		b, _ := newDesign(kind, 1, []string{"x", "y", "z"}, nil, nil)
		for i := range 50 {
			if u, v := a.unit(i), b.unit(i); u[0] != v[0] || u[1] != v[1] {
				t.Fatalf("%s: member %d: %v and %v", kind, i, u, v)
			}
		}
	}
}

func ExamplePlan_Unit() {
	r, _ := scenarios.Parse("x.toml", []byte("[uncertain]\n\"weathering.land.efold\" = { distribution = \"uniform\", low = \"10 K\", high = \"40 K\" }\n"), nil)
	p, _ := NewPlan(r, "1", 1, Sobol, 4)
	n := 0
	for i := range 4 {
		n |= 1 << int(4*p.Unit(i)[0])
	}
	fmt.Printf("%04b\n", n) // one member in each quarter
	// Output: 1111
}
