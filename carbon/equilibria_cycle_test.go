package carbon

import (
	"context"
	"math"
	"testing"

	"cycle/carbon/climate"
	"cycle/carbon/ocean"
	"cycle/carbon/units"
	"cycle/carbon/weathering"
)

// TestCyclePeriodIsReproducible: the same period at relative tolerances from
// 1e-4 to 1e-7, to 1e-4.
func TestCyclePeriodIsReproducible(t *testing.T) {
	for _, c := range []struct {
		rad    string
		sun, v float64
	}{
		{"kadoya2019", 0.8, 7.5e12}, {"kadoya2019", 0.7, 7.5e12}, {"williams1997", 0.8, 7.5e12}, {"williams1997", 0.9, 5e12},
	} {
		s := NewSetup()
		if err := s.Choose("radiation", c.rad); err != nil {
			t.Fatal(err)
		}
		var first float64
		for _, tol := range []float64{1e-7, 1e-6, 1e-5, 1e-4} {
			y, err := Cycle(context.Background(), s, Conditions{Age: s.RefAge, Sunlight: c.sun * units.SolarFlux, Land: 1, Biology: 1, Crust: 1}, c.v, tol)
			if err != nil {
				t.Fatal(err)
			}
			if first == 0 {
				first = y.PeriodMyr
				t.Logf("%s, S = %g, V = %g Tmol/yr: %.6g Myr, %.4g of them warm, %.1f to %.1f K, %.3g to %.3g bar", c.rad, c.sun, c.v/1e12, y.PeriodMyr, y.WarmMyr, y.ColdestK, y.WarmestK, y.LeastBar, y.MostBar)
			}
			if d := math.Abs(y.PeriodMyr/first - 1); d > 1e-4 {
				t.Errorf("%s, S = %g: period %.8g Myr at a tolerance of %g, off by %.2g from 1e-7", c.rad, c.sun, y.PeriodMyr, tol, d)
			}
		}
	}
}

// constant weathers the same always.
type constant struct{}

func (constant) Fields() []units.Field            { return nil }
func (constant) Bind(weathering.Reference) error  { return nil }
func (constant) Relative(*weathering.Env) float64 { return 1 }
func (constant) Range() weathering.Range          { return weathering.Range{} }

// sharpIce is the co-albedo 0.54 + 0.16 tanh((T − T_s)/w) with ice that goes ten
// times more sharply.
type sharpIce struct{ edge, w float64 }

func (l sharpIce) Fields() []units.Field        { return nil }
func (l sharpIce) Bind(climate.Reference) error { return nil }
func (l sharpIce) Planetary(t, _ float64) float64 {
	return 1 - (0.54 + 0.16*math.Tanh((t-l.edge)/l.w))
}
func (l sharpIce) IceFraction(t float64) float64 {
	return 0.5 * (1 - math.Tanh(10*(t-l.edge)/l.w))
}
func (l sharpIce) Free() (string, units.Range, *float64) { return "", units.Range{}, nil }
func (l sharpIce) Box() climate.Box                      { return climate.Box{} }

// TestPeriodOfARelaxationCycle: exact. Carbon in the air alone, sinks that stop
// under ice and a climate that jumps at two pressures give, in its limit of a
// small heat capacity,
//
//	T = (P_d − P_g)/V + (P_d − P_g)/(W − V)
//
// which is 132 for P_g = 1, P_d = 100, V = 1, W = 4.
func TestPeriodOfARelaxationCycle(t *testing.T) {
	s := NewSetup()
	for section, law := range map[string]string{"radiation": "linear_myhre1998", "weathering.seafloor": "none", "sources": "steady", "interior": "steady", "ocean": "fraction", "star": "steady"} {
		if err := s.Choose(section, law); err != nil {
			t.Fatal(err)
		}
	}
	const q, edge, w = 340.25, 263.15, 0.02
	r := s.radiation.law.(*climate.Linear)
	r.A, r.B, r.K, r.Limit, r.Max = 203.3, 2.09, 0.32*q/math.Log(100), 1e5, 100
	s.albedo.law = sharpIce{edge, w}
	// At a fold Q·0.16 sech²(u)/w = B and T = T_s ± w u; with the law's own
	// A + B (T − 273.15) − K ln(P/278 ppm) = Q a the two pressures follow, the
	// lower of which is set to 0.01 bar by A.
	u := math.Acosh(math.Sqrt(0.16 * q / (w * r.B)))
	left := func(side float64) float64 { return r.B*(edge+side*w*u-273.15) - q*(0.54+0.16*math.Tanh(side*u)) }
	pg := 0.01
	r.A = r.K*math.Log(pg/278e-6) - left(1)
	pd := 278e-6 * math.Exp((r.A+left(-1))/r.K)
	s.land.law = constant{}
	fr := s.ocean.law.(*ocean.Fraction)
	fr.K, fr.Share = 1, 1
	s.RefSun, s.Distance = 4*q, units.AU*math.Sqrt(units.SolarFlux/(4*q))
	s.Limiter, s.LandIce, s.HeatCapacity = 0, 0, 1e7
	s.RidgeRef, s.ArcRef = 2.5e12, 2.5e12
	s.OutgassingScale = 0.25 // W = 4 V
	s.Land, s.Biology = Step{Before: 1, After: 1, Width: 1e9}, Step{Before: 1, After: 1, Width: 1e9}
	s.WaterEscape, s.ColdContrast, s.Content = false, 0, 0.1
	s.End = 3e9
	m, err := NewModel(s)
	if err != nil {
		t.Fatal(err)
	}
	c1, _ := s.ocean.law.Carbon(pg, 280)
	c2, _ := s.ocean.law.Carbon(pd, 280)
	v := s.OutgassingScale * s.OutgassingRef
	want := ((c2-c1)/v + (c2-c1)/(4*v-v)) / units.Myr
	// The same formula with the pressures of a sharp edge is the tabulated 132.
	if unit := (100.0-1)/1 + (100.0-1)/(4-1); unit != 132 || math.Abs(pd/pg/100-1) > 0.05 {
		t.Fatalf("this world does not give 132: %.12g, P_d/P_g = %.6g", unit, pd/pg)
	}
	y, err := m.cycle(context.Background(), 1e-9)
	if err != nil {
		t.Fatal(err)
	}
	t.Logf("period %.9g Myr, exact %.9g", y.PeriodMyr, want)
	if d := math.Abs(y.PeriodMyr/want - 1); d > 1e-6 {
		t.Errorf("period %.9g Myr, want %.9g, off by %.2g", y.PeriodMyr, want, d)
	}
}
