package interior

import (
	"math"
	"strings"
	"testing"
)

// The kinds of a check value.
const (
	published = "published" // seen in print
	exact     = "exact"     // worked out from the printed equations by other means
	common    = "common practice"
	memory    = "from memory"
)

// row is one check value; tol is absolute.
type row struct {
	law    string
	input  string
	got    float64
	want   float64
	tol    float64
	kind   string
	source string
}

// run checks all rows and logs their number by kind.
func run(t *testing.T, rows []row) {
	t.Helper()
	count := map[string]int{}
	for _, r := range rows {
		count[r.kind]++
		if !(math.Abs(r.got-r.want) <= r.tol) {
			t.Errorf("%s at %s: got %.9g, want %.9g ± %.1g (%s: %s)", r.law, r.input, r.got, r.want, r.tol, r.kind, r.source)
		}
	}
	t.Logf("checks: %v", count)
}

const now = 4.57e9 // yr

// bound returns a law with its defaults on a planet; a table law gets a table.
func bound(t testing.TB, name string, p Planet) Law {
	t.Helper()
	for _, e := range Laws {
		if e.Name == name {
			l := e.New()
			fill(t, l)
			if err := l.Bind(p, now); err != nil {
				t.Fatal(err)
			}
			return l
		}
	}
	t.Fatalf("no law %q", name)
	return nil
}

func fill(t testing.TB, l Law) {
	t.Helper()
	if u, ok := l.(*Table); ok {
		if err := u.Load(strings.NewReader("age_gyr,relative_heat_flow\n0,5\n1,3\n4.57,1\n10,0.4\n")); err != nil {
			t.Fatal(err)
		}
	}
}

// history integrates a law from an age and temperatures to another age, both
// in Gyr, by the classical Runge-Kutta method in steps of 1 Myr.
func history(l Law, from, to, tm, tc float64, each func(age, tm, tc float64) bool) (float64, float64) {
	n := int(math.Round(math.Abs(to-from) * 1000))
	h := (to - from) * 1e9 / float64(n)
	rate := func(a, m, c float64) (float64, float64) {
		f := l.Flow(a, m, c)
		return f.MantleRate, f.CoreRate
	}
	for i := range n {
		a := from*1e9 + float64(i)*h
		m1, c1 := rate(a, tm, tc)
		m2, c2 := rate(a+h/2, tm+h/2*m1, tc+h/2*c1)
		m3, c3 := rate(a+h/2, tm+h/2*m2, tc+h/2*c2)
		m4, c4 := rate(a+h, tm+h*m3, tc+h*c3)
		tm += h / 6 * (m1 + 2*m2 + 2*m3 + m4)
		tc += h / 6 * (c1 + 2*c2 + 2*c3 + c4)
		if each != nil && !each(a+h, tm, tc) {
			break
		}
	}
	return tm, tc
}
