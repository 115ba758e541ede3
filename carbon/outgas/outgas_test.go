package outgas

import (
	"math"
	"strings"
	"testing"

	"cycle/carbon/units"
)

var ref = Reference{Age: 4.57e9, Ridge: 2.2e12, Arc: 2.5e12, Metamorphic: 2.8e12, Land: 5.75e12, Seafloor: 1.75e12, Continental: 5e21, Mantle: 3e22}

// bound returns every law, bound at ref; the table has a constant 7.5 Tmol/yr.
func bound(t *testing.T) map[string]Law {
	t.Helper()
	out := map[string]Law{}
	for _, e := range Laws {
		l := e.New()
		if tab, ok := l.(*Table); ok {
			if err := tab.Load(strings.NewReader("age_gyr,outgassing_tmol_yr\n0,7.5\n12,7.5\n")); err != nil {
				t.Fatal(err)
			}
		}
		if err := l.Bind(ref); err != nil {
			t.Fatal(e.Name, err)
		}
		out[e.Name] = l
	}
	return out
}

func atReference(l Law) Input {
	tau := 105 * units.Myr
	return Input{Age: ref.Age, Crust: 1, Dilution: 1, Area: 1, Scale: 1, Mantle: ref.Mantle, Seafloor: (ref.Ridge + ref.Arc) * tau, Continental: ref.Continental}
}

// TestReferenceFluxes: at the reference state every law gives the reference
// total (exact, by construction of the rate constants).
func TestReferenceFluxes(t *testing.T) {
	for name, l := range bound(t) {
		in := atReference(l)
		f := l.Fluxes(&in)
		if got := f.Ridge + f.Arc + f.Metamorphic; math.Abs(got/ref.Total()-1) > 1e-12 {
			t.Errorf("%s: total %.6g mol/yr, want %.6g", name, got, ref.Total())
		}
		if got := f.Subducted; math.Abs(got/(ref.Ridge+ref.Arc)-1) > 1e-12 {
			t.Errorf("%s: subducted %.6g mol/yr, want ridge + arc", name, got)
		}
	}
	if d := ref.Deposited(); math.Abs(d-2.95/5.75) > 1e-12 {
		t.Errorf("deposited fraction %.6g, want 2.95/5.75", d)
	}
}

// TestNothingFromNothing: an empty reservoir gives no flux under recycling, and
// every flux is in proportion to crust production and to its reservoir.
func TestNothingFromNothing(t *testing.T) {
	l := bound(t)["recycling"]
	in := atReference(l)
	full := l.Fluxes(&in)
	in.Crust = 3
	if f := l.Fluxes(&in); math.Abs(f.Ridge/full.Ridge-3) > 1e-12 || math.Abs(f.Arc/full.Arc-3) > 1e-12 || math.Abs(f.Metamorphic/full.Metamorphic-3) > 1e-12 {
		t.Error("not in proportion to crust production")
	}
	in = atReference(l)
	in.Mantle, in.Seafloor, in.Continental = 0, 0, 0
	if f := l.Fluxes(&in); f != (Fluxes{}) {
		t.Errorf("%+v out of nothing", f)
	}
	in = atReference(l)
	in.Crust = 0
	if f := l.Fluxes(&in); f != (Fluxes{}) {
		t.Errorf("%+v without any crust production", f)
	}
}

// TestPowerLaw against the decline of heat flow of Krissansen-Totton et al.
// (2018), Q = (1 − τ/4.5)^(−n): values worked from that formula.
func TestPowerLaw(t *testing.T) {
	for _, c := range []struct{ ago, n, want float64 }{ // Gyr before the reference age of 4.5 Gyr
		{1, 0.2, 1.05155}, {1, 0.45, 1.11973}, {1, 0.73, 1.20137}, {2.5, 0.45, 1.44040}, {4.0, 0.2, 1.55185}, {4.0, 0.45, 2.68788}, {4.0, 0.73, 4.97275},
	} {
		l := newPowerLaw().(*PowerLaw)
		l.N, l.M = c.n, 1
		r := ref
		r.Age = 4.5e9
		if err := l.Bind(r); err != nil {
			t.Fatal(err)
		}
		in := atReference(l)
		in.Age = 4.5e9 - c.ago*1e9
		if got := l.Fluxes(&in).Ridge / ref.Total(); math.Abs(got-c.want) > 1e-5 {
			t.Errorf("%g Gyr ago, n = %g: %.5f, want %.5f", c.ago, c.n, got, c.want)
		}
	}
}

func TestTableAndRefusals(t *testing.T) {
	l := newTable().(*Table)
	if err := l.Bind(ref); err == nil {
		t.Error("binds without a table")
	}
	for text, want := range map[string]string{
		"age,flux\n1,2\n2,3\n":                           "line 1",
		"age_gyr,outgassing_tmol_yr\n1,2\n1,3\n":         "line 3",
		"age_gyr,outgassing_tmol_yr\n1,2\n2,NaN\n":       "line 3",
		"age_gyr,outgassing_tmol_yr\n1,-2\n2,3\n":        "line 2",
		"age_gyr,outgassing_tmol_yr\n1,2\n":              "two or more",
		"age_gyr,outgassing_tmol_yr\n1,2,3\n":            "line 2",
		"age_gyr,outgassing_tmol_yr\n1,\"2\n":            "line",
		"":                                               "two or more",
		strings.Repeat("# long\n", units.TableBytes/7+9): "MB",
	} {
		if err := l.Load(strings.NewReader(text)); err == nil || !strings.Contains(err.Error(), want) {
			t.Errorf("%.40q: %v, want %q", text, err, want)
		}
	}
	if err := l.Load(strings.NewReader("age_gyr,outgassing_tmol_yr\n1,2\n3,4\n")); err != nil {
		t.Fatal(err)
	}
	if err := l.Bind(ref); err != nil {
		t.Fatal(err)
	}
	in := atReference(l)
	for _, c := range []struct{ age, want float64 }{{0, 2}, {1e9, 2}, {2e9, 3}, {3e9, 4}, {9e9, 4}} {
		in.Age = c.age
		if got := l.Fluxes(&in).Ridge / 1e12; math.Abs(got-c.want) > 1e-9 {
			t.Errorf("%.3g Gyr: %.4g Tmol/yr, want %g", c.age/1e9, got, c.want)
		}
	}
}

func TestImpossibleReference(t *testing.T) {
	for name, r := range map[string]Reference{
		"too little subduction": {Ridge: 0.5e12, Arc: 0.5e12, Metamorphic: 6e12, Land: 5e12, Seafloor: 2e12, Continental: 5e21, Mantle: 3e22},
		"negative metamorphism": {Ridge: 4e12, Arc: 4e12, Metamorphic: -1e12, Land: 6e12, Seafloor: 3e12, Continental: 5e21, Mantle: 3e22},
	} {
		for _, e := range Laws[:1] {
			if err := e.New().Bind(r); err == nil {
				t.Errorf("%s: %s binds", name, e.Name)
			}
		}
	}
}

// TestFields: every field has a source and a default inside its allowed range.
func TestFields(t *testing.T) {
	for _, e := range Laws {
		for _, f := range e.New().Fields() {
			if f.Source.IsZero() || f.Doc == "" {
				t.Errorf("%s.%s: no source or no meaning", e.Name, f.Key)
			}
			if err := f.Check(*f.Value); err != nil {
				t.Errorf("%s.%s: %v", e.Name, f.Key, err)
			}
		}
	}
}
