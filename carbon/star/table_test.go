package star

import (
	"math"
	"strings"
	"testing"

	"cycle/carbon/units"
)

func TestTable(t *testing.T) {
	l := &Table{}
	if err := l.Bind(); err == nil {
		t.Error("binds without a table")
	}
	csv := "# a star of mine\nage_gyr, luminosity\n0.5,0.7\n1,0.7\n# later\n3,1.0\n"
	if err := l.Load(strings.NewReader("\ufeff" + csv)); err != nil {
		t.Fatal(err)
	}
	if err := l.Bind(); err != nil {
		t.Fatal(err)
	}
	for _, c := range [][2]float64{{0, 0.7}, {0.5, 0.7}, {0.75, 0.7}, {1, 0.7}, {3, 1}, {99, 1}} {
		if got := l.Luminosity(c[0] * 1e9); got != c[1] {
			t.Errorf("%g Gyr: got %g, want %g (exact: the user's rows)", c[0], got, c[1])
		}
	}
	if l.End() != 3e9 || l.Range().Lo != 0.5e9 || l.Temperature(2e9) != SunTemperature {
		t.Errorf("end %g, range %v, temperature %g", l.End(), l.Range(), l.Temperature(2e9))
	}
	if !strings.HasSuffix(*l.Text(), csv) {
		t.Errorf("text %q", *l.Text())
	}
	if err := l.Load(strings.NewReader("age_gyr,luminosity,temperature_k\n0,1,3000\n1,1,3100\n")); err != nil || l.Bind() != nil {
		t.Fatal(err)
	}
	if got := l.Temperature(0.5e9); math.Abs(got-3050) > 1e-9 {
		t.Errorf("temperature half way: %g", got)
	}
}

func TestTableRefusals(t *testing.T) {
	for _, c := range []struct{ csv, want string }{
		{"", "two or more"},
		{"age_gyr,luminosity\n1,1\n", "found 1 rows"},
		{"age,lum\n1,1\n", "line 1: found the columns \"age,lum\""},
		{"age_gyr,luminosity\n1,1\n1,1.1\n", "line 3: found the age 1 Gyr"},
		{"age_gyr,luminosity\n2,1\n1,1.1\n", "line 3"},
		{"age_gyr,luminosity\n# note\n1,bright\n", "line 3: found \"bright\" in column luminosity"},
		{"age_gyr,luminosity\n1,NaN\n", "line 2"},
		{"age_gyr,luminosity\n1,inf\n", "line 2"},
		{"age_gyr,luminosity\n1,0\n", "1e-05 to 100000"},
		{"age_gyr,luminosity\n-1,1\n", "column age_gyr"},
		{"age_gyr,luminosity\n1,1,5772\n", "found 3 columns, allowed is 2"},
		{"age_gyr,luminosity\n1\n", "found 1 columns"},
		{"age_gyr,luminosity\n1,\"1\n", "line 2"},
		{"age_gyr,luminosity,temperature_k\n1,1,500\n", "column temperature_k"},
		{"age_gyr,luminosity\n1," + strings.Repeat("9", 500) + "\n", "..."},
		{strings.Repeat("#", units.TableBytes+2), "MB"},
	} {
		l := &Table{}
		_ = l.Load(strings.NewReader("age_gyr,luminosity\n0,1\n1,1\n"))
		err := l.Load(strings.NewReader(c.csv))
		if err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("%.40q: got %v, want %q in it", c.csv, err, c.want)
		}
		if err != nil && len(err.Error()) > 300 {
			t.Errorf("%.40q: message of %d bytes", c.csv, len(err.Error()))
		}
		if l.End() != 1e9 {
			t.Errorf("%.40q: a refused table replaces the old one", c.csv)
		}
	}
}

// FuzzTable: whatever loads is finite, positive and stays between its rows.
func FuzzTable(f *testing.F) {
	f.Add("age_gyr,luminosity\n0,1\n1,1\n", 0.5)
	f.Add("age_gyr,luminosity,temperature_k\n0,1,3000\n1e-9,1e5,3000\n10000,1e-5,5e4\n", 1e-10)
	f.Fuzz(func(t *testing.T, csv string, gyr float64) {
		l := &Table{}
		if l.Load(strings.NewReader(csv)) != nil || math.IsNaN(gyr) {
			return
		}
		if err := l.Bind(); err != nil {
			t.Fatal(err)
		}
		lo, hi := math.Inf(1), 0.0
		for _, x := range l.lum {
			lo, hi = math.Min(lo, x), math.Max(hi, x)
		}
		if x := l.Luminosity(gyr * 1e9); !(x >= lo*(1-1e-6)-1e-9*hi && x <= hi*(1+1e-6)) {
			t.Fatalf("L = %g outside %g to %g", x, lo, hi)
		}
		if x := l.Temperature(gyr * 1e9); !(x > 900 && x < 60000) {
			t.Fatalf("T = %g", x)
		}
	})
}
