package carbon

import (
	"math"
	"testing"

	"cycle/carbon/climate"
	"cycle/carbon/record"
	"cycle/carbon/units"
	"cycle/carbon/weathering"
)

// equilibria returns the steady states of a world at a change g (K) by sunlight.
func (w *world) equilibria(t *testing.T, g float64) *Equilibria {
	t.Helper()
	alb := w.set.albedo.law.Planetary(w.set.RefT, w.set.RefP)
	return w.m.equilibria(Conditions{Age: w.set.RefAge, Sunlight: w.set.RefSun + 4*g*ebmB/(1-alb), Land: 1, Biology: 1, Crust: 1})
}

// only returns the one steady state at v times the reference outgassing.
func only(t *testing.T, e *Equilibria, v float64) *record.Steady {
	t.Helper()
	s := e.States(v * e.m.ref.Total())
	if len(s) != 1 {
		t.Fatalf("%d steady states at v = %g, want 1", len(s), v)
	}
	return &s[0]
}

// TestStatesOfTheLogLinearWorld: exact, T − T₀ = τ (b ln v + a g)/(a τ + b),
// ln P = (ln v − g/τ)/(a + b/τ).
func TestStatesOfTheLogLinearWorld(t *testing.T) {
	b := 3 / math.Ln2
	for _, c := range []struct{ v, g, lnP, dT float64 }{
		{1, 0, 0, 0},
		{2, 0, 1.1253876011, 4.8707733333},
		{0.5, 0, -1.1253876011, -4.8707733333},
		{1, -20, 2.3702060016, -9.7415466667},
		{2, -20, 3.4955936027, -4.8707733333},
		{1, 10, -1.1851030008, 4.8707733333},
	} {
		w := newWorld(t, 0.3, 13.7, b)
		s := only(t, w.equilibria(t, c.g), c.v)
		lnP, dT := math.Log(s.PCO2Bar/w.set.RefP), s.TemperatureK-w.set.RefT
		if math.Abs(lnP-c.lnP) > 1e-8 || math.Abs(dT-c.dT) > 1e-8 {
			t.Errorf("v=%g g=%g: ln P = %.10f, dT = %.10f, want %.10f, %.10f", c.v, c.g, lnP, dT, c.lnP, c.dT)
		}
		if !s.Stable {
			t.Errorf("v=%g g=%g: not stable", c.v, c.g)
		}
		// Surface carbon goes with pressure here, so that its rate of return is
		// (a + b/τ) V/C.
		want := s.SurfaceEmol * 1e18 / (0.3 + b/13.7) / (s.Outgassing * 1e12) / 1e3
		if math.Abs(s.ResponseKyr/want-1) > 1e-6 {
			t.Errorf("v=%g g=%g: response time %.8g kyr, want %.8g", c.v, c.g, s.ResponseKyr, want)
		}
	}
}

// transport is weathering limited by transport: [1 + ε (T − T₀)] P^n.
type transport struct{ eps, n, t0 float64 }

func (l *transport) Fields() []units.Field { return nil }
func (l *transport) Bind(ref weathering.Reference) error {
	l.t0 = ref.T
	return nil
}
func (l *transport) Relative(e *weathering.Env) float64 {
	return math.Max(0, 1+l.eps*(e.T-l.t0)) * math.Exp(l.n*e.LnP)
}
func (l *transport) Range() weathering.Range { return weathering.Range{} }

// TestStatesOfTransportLimitedWeathering: roots of
// ln[1 + 0.03 (b ln P + g)] + 0.316 ln P = ln v, worked by hand.
func TestStatesOfTransportLimitedWeathering(t *testing.T) {
	for _, c := range []struct{ v, g, lnP, dT float64 }{
		{2, 0, 1.5971421747, 6.9125672850},
		{1, -10, 0.7279214681, -6.8494939233},
		{2, -10, 2.2277042921, -0.3583061957},
	} {
		w := newWorld(t, 0.3, 13.7, 3/math.Ln2)
		w.set.land.law = &transport{eps: 0.03, n: 0.316}
		m, err := NewModel(w.set)
		if err != nil {
			t.Fatal(err)
		}
		w.m = m
		s := only(t, w.equilibria(t, c.g), c.v)
		lnP, dT := math.Log(s.PCO2Bar/w.set.RefP), s.TemperatureK-w.set.RefT
		if math.Abs(lnP-c.lnP) > 1e-8 || math.Abs(dT-c.dT) > 1e-8 {
			t.Errorf("v=%g g=%g: ln P = %.10f, dT = %.10f, want %.10f, %.10f", c.v, c.g, lnP, dT, c.lnP, c.dT)
		}
	}
}

// TestSupplyLimit: exact. Calibrated to 1 at the reference state, weathering
// without CO₂ dependence under a limit of twice the reference flux balances at
// dT = τ ln[ln(1 − v/2)/ln(1 − 1/2)], and at no state when v ≥ 2.
func TestSupplyLimit(t *testing.T) {
	w := newWorld(t, 0, 13.7, 3/math.Ln2)
	w.set.supply.Limit = 2 * w.set.OutgassingRef
	m, err := NewModel(w.set)
	if err != nil {
		t.Fatal(err)
	}
	w.m = m
	// The sunlight is chosen such that the states lie inside the pressures of the box.
	for _, c := range []struct{ v, g, dT float64 }{{1, 0, 0}, {1.5, 0, 9.4961163737}, {1.9, 0, 20.0527122070}, {1.99, 0, 27.8644603143}, {1.9999, 10, 13.7 * math.Log(math.Log(5e-5)/math.Log(0.5))}} {
		e := w.equilibria(t, c.g)
		s := only(t, e, c.v)
		if dT := s.TemperatureK - w.set.RefT; math.Abs(dT-c.dT) > 1e-8 {
			t.Errorf("v=%g: dT = %.10f, want %.10f", c.v, dT, c.dT)
		}
		if limit := e.Boundaries().SupplyLimit; math.Abs(limit/(2*w.set.OutgassingRef/1e12)-1) > 1e-14 {
			t.Errorf("supply limit %.16g Tmol/yr, want %.16g", limit, 2*w.set.OutgassingRef/1e12)
		}
	}
	for _, v := range []float64{2, 2.0000001, 3} {
		if s := w.equilibria(t, 10).States(v * m.ref.Total()); len(s) > 0 {
			t.Errorf("v=%g: %d steady states at %.6g K, want none above the supply limit", v, len(s), s[0].TemperatureK)
		}
	}
}

// stepIce is co-albedo 0.70 above −10 °C and 0.38 below.
type stepIce struct{ edge float64 }

func (l stepIce) Fields() []units.Field        { return nil }
func (l stepIce) Bind(climate.Reference) error { return nil }
func (l stepIce) Planetary(t, _ float64) float64 {
	if t > l.edge {
		return 1 - 0.70
	}
	return 1 - 0.38
}
func (l stepIce) IceFraction(t float64) float64 {
	if t > l.edge {
		return 0
	}
	return 1
}
func (l stepIce) Free() (string, units.Range, *float64) { return "", units.Range{}, nil }
func (l stepIce) Box() climate.Box                      { return climate.Box{} }

// TestFoldsOfStepIce: exact. A + B T = Q a with A = 203.3, B = 2.09 and a = 0.70
// above −10 °C, 0.38 below: the warm climate ends at Q = (A − 10 B)/0.70, the
// cold one at (A − 10 B)/0.38.
func TestFoldsOfStepIce(t *testing.T) {
	w := newWorld(t, 0.3, 13.7, 3/math.Ln2)
	r := w.set.radiation.law.(*climate.Linear)
	r.A, r.Limit = 203.3, 5000
	w.set.albedo.law = stepIce{edge: 263.15}
	m, err := NewModel(w.set)
	if err != nil {
		t.Fatal(err)
	}
	// The pressure at which the forcing of CO₂ against the law's own 278 ppm is 0.
	folds := m.sunFolds(278e-6)
	if len(folds) != 2 {
		t.Fatalf("%d folds, want 2: %+v", len(folds), folds)
	}
	for i, want := range []float64{(203.3 - 20.9) / 0.38, (203.3 - 20.9) / 0.70} {
		f := folds[i]
		if got := f.f / 4; math.Abs(got/want-1) > 1e-8 || math.Abs(f.x-263.15) > 1e-6 || f.max != (i == 0) {
			t.Errorf("fold %d at Q = %.8f W/m2, %.8f K, maximum %v; want %.8f at 263.15 K", i, got, f.x, f.max, want)
		}
	}
	if math.Abs((203.3-20.9)/0.70-260.571429) > 1e-6 || (203.3-20.9)/0.38 != 480 {
		t.Error("the closed form does not give the tabulated values 260.571429 and 480")
	}
}

// TestTurnsOfTheTwoModeIceLine: the fold finder against the two-mode energy
// balance of North (1975), whose ice-line relation Q(x) is exact:
//
//	Q(x) = (T_s + A/B)/Σ H_n(x) P_n(x)/[n(n+1) D + B],  n = 0, 2
func TestTurnsOfTheTwoModeIceLine(t *testing.T) {
	const a, b, d, s2, af, ai, ts = 203.3, 2.09, 0.6, -0.477, 0.70, 0.38, -10
	q := func(x float64) float64 {
		h0 := ai + (af-ai)*(x+s2*(x*x*x-x)/2)
		h2 := ai*s2 + 5*(af-ai)*((x*x*x-x)/2+s2*(9*math.Pow(x, 5)/5-2*x*x*x+x)/4)
		return (ts + a/b) / (h0/b + h2*(3*x*x-1)/2/(6*d+b))
	}
	turns := turnsOf(q, 0, 1, 40)
	want := []turn{{0.546890, 306.774338, false}, {0.902150, 318.759709, true}}
	if len(turns) != len(want) {
		t.Fatalf("%d turns, want %d: %+v", len(turns), len(want), turns)
	}
	for i, w := range want {
		if g := turns[i]; math.Abs(g.x-w.x) > 2e-6 || math.Abs(g.f-w.f) > 1e-6 || g.max != w.max {
			t.Errorf("turn %d at x = %.8f, Q = %.8f, maximum %v; want %.6f, %.6f, %v", i, g.x, g.f, g.max, w.x, w.f, w.max)
		}
		if s := slope5(q, turns[i].x, 1e-3); math.Abs(s) > 1e-8*turns[i].f {
			t.Errorf("turn %d: slope %.3g W/m2 left", i, s)
		}
	}
}

// TestJacobianIsSingularAtFolds: at a fold the temperature's derivative of the
// full model at fixed carbon vanishes, found here by differences of the model's
// own derivative, for oceans with and without alkalinity as a state.
func TestJacobianIsSingularAtFolds(t *testing.T) {
	for _, ocean := range []string{"saturated", "pair", "fraction"} {
		for _, rad := range []string{"kadoya2019", "williams1997"} {
			s := NewSetup()
			if s.Choose("ocean", ocean) != nil {
				continue
			}
			if err := s.Choose("radiation", rad); err != nil {
				t.Fatal(err)
			}
			for _, sun := range []float64{0.7, 0.8, 0.9} {
				e, err := NewEquilibria(s, Conditions{Age: s.RefAge, Sunlight: sun * units.SolarFlux, Land: 1, Biology: 1, Crust: 1})
				if err != nil {
					t.Fatal(err)
				}
				folds := e.Folds()
				names := map[string]int{}
				for i := range folds {
					f := &folds[i]
					names[f.Name]++
					j := e.Jacobian(&f.Steady)
					// Against the size of the Planck response.
					if x := math.Abs(j[0][0]) * s.HeatCapacity / units.Year / (4 * units.Sigma * math.Pow(f.TemperatureK, 3)); x > 1e-8 {
						t.Errorf("%s, %s, S = %g: at %.6f K the Jacobian is off singular by %.3g", ocean, rad, sun, f.TemperatureK, x)
					}
					// On both sides it is not singular.
					for _, d := range []float64{-1e-3, 1e-3} {
						n, ok := e.at(f.Sheet, f.TemperatureK+d)
						if !ok {
							continue
						}
						z := e.steady(&n)
						k := e.Jacobian(&z)
						if k[0][0]*d*map[bool]float64{true: 1, false: -1}[f.Name != record.FoldCold] <= 0 {
							t.Errorf("%s, %s, S = %g: at %.6f K growth does not change sign", ocean, rad, sun, f.TemperatureK)
						}
					}
				}
				if names[record.FoldCold] < 1 || names[record.FoldThaw] < 1 {
					t.Errorf("%s, %s, S = %g: folds %v, want a cold and a deglaciation fold", ocean, rad, sun, names)
				}
			}
		}
	}
}

// TestSteep: the imbalance of no pair of laws rises by steep or more as it gets
// colder by one kelvin, with the steepest line of the linear laws and four times
// the Earth's sunlight. The search for the start counts on it.
func TestSteep(t *testing.T) {
	sections, laws := kindsOfLaws()
	for _, radiation := range laws["radiation"] {
		for _, albedo := range laws["albedo"] {
			c := combination{}
			for _, s := range sections {
				c[s] = laws[s][0]
			}
			c["radiation"], c["albedo"] = radiation, albedo
			s, m := c.setup(t)
			if v := s.Number("radiation.b"); v != nil {
				*v.Value = v.Max
			}
			sun := s.RefSun
			lo, hi := m.pressures()
			bottom := math.Max(s.FrozenBelow-90, s.radiation.law.Box().T.Lo)
			for temp := bottom; temp < m.top(); temp++ {
				for x := math.Log(lo); x < math.Log(hi); x += 0.2 {
					p := math.Exp(x)
					if rise := m.imbalance(sun, temp, p) - m.imbalance(sun, temp+1, p); !(rise < steep) {
						t.Fatalf("%s, %s: at %g K and %g bar the imbalance rises by %.3g W/m2 to the cold", radiation, albedo, temp, p, rise)
					}
				}
			}
		}
	}
}
