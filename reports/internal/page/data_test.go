package page

import (
	"math"
	"sort"
	"testing"

	"pgregory.net/rapid"
)

// Thinning keeps the ends, the order, every extreme of every bucket and every
// edge of a gap, and it thins.
func TestThin(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		n := rapid.IntRange(1, 400).Draw(t, "n")
		buckets := rapid.IntRange(1, 40).Draw(t, "buckets")
		x, y := make([]float64, n), make([]float64, n)
		at := 0.0
		for i := range x {
			at += rapid.Float64Range(0, 3).Draw(t, "step")
			x[i] = at
			y[i] = rapid.Float64Range(-5, 5).Draw(t, "y")
			if rapid.IntRange(0, 20).Draw(t, "gap") == 0 {
				y[i] = math.NaN()
			}
		}
		set := Thin(x, y, buckets)
		if !sort.IntsAreSorted(set) || set[0] != 0 || set[len(set)-1] != n-1 {
			t.Fatalf("not in order, or an end is missing: %v", set)
		}
		in := map[int]bool{}
		for _, i := range set {
			if in[i] {
				t.Fatalf("row %d twice", i)
			}
			in[i] = true
		}
		for i := 1; i < n; i++ {
			if missing(y[i]) != missing(y[i-1]) && !(in[i] && in[i-1]) {
				t.Fatalf("the edge of a gap at row %d is lost", i)
			}
		}
		// Each dropped row lies between kept rows no farther apart than two
		// buckets, one of which is as low and one as high.
		width := (x[n-1] - x[0]) / float64(buckets)
		for i := range x {
			if in[i] || missing(y[i]) {
				continue
			}
			low, high := false, false
			for _, j := range set {
				if math.Abs(x[j]-x[i]) <= width*(1+1e-9) {
					low = low || y[j] <= y[i]
					high = high || y[j] >= y[i]
				}
			}
			if !low || !high {
				t.Fatalf("row %d (%g) is a spike that is lost", i, y[i])
			}
		}
	})
	x, y := make([]float64, 100000), make([]float64, 100000)
	for i := range x {
		x[i], y[i] = float64(i), math.Sin(float64(i)/50)
	}
	y[70001] = 99
	set := Thin(x, y, 300)
	if len(set) > 4*300+2 {
		t.Errorf("%d of 100000 rows are left", len(set))
	}
	if i := sort.SearchInts(set, 70001); i == len(set) || set[i] != 70001 {
		t.Error("the spike is lost")
	}
}

func TestPackSame(t *testing.T) {
	d := &Data{Rows: 3, Columns: []Column{{Name: "t", Values: []float64{0, 1, 2}}, {Name: "v", Values: []float64{math.NaN(), math.Inf(1), -0.5}}}}
	a, err := d.pack([][]int{{0, 2}})
	if err != nil {
		t.Fatal(err)
	}
	if b, _ := d.pack([][]int{{0, 2}}); a != b {
		t.Error("the same data give other bytes")
	}
	if c, _ := d.pack([][]int{{0, 1}}); a == c {
		t.Error("another choice of rows gives the same bytes")
	}
}

// Shortened numbers are off by no more than the page says, and sign, zero and
// what is no number stay.
func TestShorten(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		v := rapid.Float32().Draw(t, "v")
		drop := rapid.SampledFrom([]int{0, 3, 6, 9, 12}).Draw(t, "drop")
		got := math.Float32frombits(shorten(math.Float32bits(v), drop))
		if v != v || math.IsInf(float64(v), 0) {
			if !missing(float64(got)) {
				t.Fatalf("%v becomes %v", v, got)
			}
			return
		}
		if math.Abs(float64(v)) < 1.2e-38 {
			return // below the normal numbers precision is lost anyway
		}
		if d := math.Abs(float64(got)-float64(v)) / math.Abs(float64(v)); drop == 0 && got != v || d > math.Pow(2, float64(drop-24)) {
			t.Fatalf("%v becomes %v with %d bits dropped, off by %g", v, got, drop, d)
		}
	})
	if z := shorten(0, 9); z != 0 {
		t.Errorf("zero becomes %x", z)
	}
}
