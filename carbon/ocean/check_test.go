package ocean

import (
	"math"
	"testing"

	"cycle/carbon/units"
)

// The kinds of a check value.
const (
	published   = "published"   // seen in print, or cross-checked with a second law
	exact       = "exact"       // worked out from the printed equations by other means
	independent = "independent" // output of other code
	common      = "common practice"
	memory      = "from memory"
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

func ph(h float64) float64 { return -math.Log10(h) }

// sea returns today's seawater at a salinity, and its constants at t °C.
func sea(s, celsius float64) (Seawater, Constants) {
	w := Seawater{Salinity: s, Calcium: Calcium(s), Boron: Boron(s)}
	w.Bind()
	return w, w.At(celsius + 273.15)
}

// beaker solves the full system for a kilogram of seawater without air.
func beaker(t *testing.T, s, celsius, dic, alk float64, boron func(float64) float64) State {
	t.Helper()
	l := newPair().(*Pair)
	l.Salinity, l.Calcium, l.Boron = s, Calcium(s), boron(s)
	if err := l.Bind(Planet{Area: 1e-30, Gravity: 9.81, Mass: 1}); err != nil {
		t.Fatal(err)
	}
	return l.Solve(dic, alk, celsius+273.15)
}

var earth = Planet{Area: units.EarthArea, Gravity: units.EarthGravity, Mass: 1.35e21}

// bound returns a law with its defaults on the Earth.
func bound(t testing.TB, e Entry) Law {
	t.Helper()
	l := e.New()
	if err := l.Bind(earth); err != nil {
		t.Fatal(err)
	}
	return l
}
