package carbon

import (
	"math"
	"testing"

	"cycle/carbon/climate"
	"cycle/carbon/ocean"
	"cycle/carbon/outgas"
	"cycle/carbon/units"
	"cycle/carbon/weathering"
	"cycle/ode"
)

// The log-linear world has closed solutions: outgoing radiation linear in T and
// in ln p, constant albedo, no ice, no limiter,
//
//	T − T₀ = b ln P + g,  W/W₀ = P^a exp[(T − T₀)/τ],  P = p/p₀
//
// Every expected value below is exact: it follows from these two lines.
type world struct {
	a, tau, b float64
	set       *Setup
	m         *Model
}

const ebmB = 2.09 // W m⁻² K⁻¹

// newWorld builds the world out of the program's own laws.
func newWorld(t *testing.T, a, tau, b float64) *world {
	t.Helper()
	s := NewSetup()
	for section, law := range map[string]string{"radiation": "linear_myhre1998", "albedo": "constant", "weathering.land": "walker1981", "weathering.seafloor": "none", "sources": "steady", "ocean": "fraction", "star": "steady"} {
		if err := s.Choose(section, law); err != nil {
			t.Fatal(err)
		}
	}
	r := s.radiation.law.(*climate.Linear)
	r.B, r.K, r.Limit, r.Width, r.Max = ebmB, b*ebmB, 2000, 0.5, 10
	w := s.land.law.(*weathering.Walker1981)
	w.Beta, w.Te = a, tau
	s.ocean.law.(*ocean.Fraction).K = 1
	s.Limiter, s.RidgeRef, s.ArcRef = 0, 2.5e12, 2.5e12
	s.Land, s.Biology = Step{Before: 1, After: 1, Width: 1e9}, Step{Before: 1, After: 1, Width: 1e9}
	m, err := NewModel(s)
	if err != nil {
		t.Fatal(err)
	}
	return &world{a: a, tau: tau, b: b, set: s, m: m}
}

// steadyState returns ln P and T − T₀ where sinks equal v times the reference
// sources, at a change g (K) by sunlight, found by the program's own inversion.
func (w *world) steadyState(t *testing.T, v, g float64) (lnP, dT float64) {
	t.Helper()
	d := w.m.drive(w.set.RefAge, 1623, 1623)
	alb := w.set.albedo.law.Planetary(w.set.RefT, w.set.RefP)
	sun := w.set.RefSun/4 + g*ebmB/(1-alb)
	drive := *d
	drive.sun, drive.land, drive.biology = sun, 1, 1
	excess := func(x float64) float64 {
		st, low, high := w.m.steadyAt(&drive, x)
		if low {
			return 1e3
		}
		if high {
			return -1e3
		}
		return math.Log((st.row.Land + st.row.Seafloor) / (v * w.m.ref.Total()))
	}
	lo, hi := 240.0, 345.0
	for i := 0; i < 200; i++ { // bisection: independent of the root finder under test
		mid := 0.5 * (lo + hi)
		// At fixed sunlight a warmer balance holds more CO₂ and weathers more.
		if e := excess(mid); e > 0 && e < 1e3 || e == -1e3 {
			hi = mid
		} else {
			lo = mid
		}
	}
	st, low, high := w.m.steadyAt(&drive, lo)
	if low || high {
		t.Fatalf("no balance at %v K", lo)
	}
	return math.Log(st.row.PCO2 / w.set.RefP), lo - w.set.RefT
}

func TestSteadyStatesOfTheLogLinearWorld(t *testing.T) {
	ecs3 := 3 / math.Ln2
	for _, c := range []struct {
		a, b, v, g float64
		lnP, dT    float64
	}{
		{0.3, ecs3, 1, 0, 0, 0},
		{0.3, ecs3, 2, 0, 1.1253876011, 4.8707733333},
		{0.3, ecs3, 0.5, 0, -1.1253876011, -4.8707733333},
		{0.3, ecs3, 1, -20, 2.3702060016, -9.7415466667},
		{0.3, ecs3, 2, -20, 3.4955936027, -4.8707733333},
		{0.3, ecs3, 1, 10, -1.1851030008, 4.8707733333},
		{0.3, 4, 2, 0, 1.1709144727, 4.6836578908},
		{0.3, 4, 1, -20, 2.4660912454, -10.1356350185},
		{0, ecs3, 2, 0, 9.4961163737 / ecs3, 9.4961163737},                   // without CO₂ dependence: τ ln v
		{0.5, ecs3, 2, 0, 41.1 / (6.85 + ecs3) / ecs3, 41.1 / (6.85 + ecs3)}, // τ ln 2·b/(a τ + b), where τ b ln 2 = 41.1
	} {
		w := newWorld(t, c.a, 13.7, c.b)
		lnP, dT := w.steadyState(t, c.v, c.g)
		if math.Abs(lnP-c.lnP) > 1e-8 || math.Abs(dT-c.dT) > 1e-8 {
			t.Errorf("a=%g b=%.4g v=%g g=%g: ln P = %.10f, dT = %.10f, want %.10f, %.10f", c.a, c.b, c.v, c.g, lnP, dT, c.lnP, c.dT)
		}
	}
}

// TestGreenhouseFormulaOfWalker checks steady states of the weathering law with
// the greenhouse formula of the same paper, T = 2 T_e + 4.6 P^n − 226.4 K, for
// the reference temperature of 285 K. Roots of the two published equations.
func TestGreenhouseFormulaOfWalker(t *testing.T) {
	for _, c := range []struct{ n, v, sun, p, temp float64 }{
		{0.364, 1, 1, 1, 285},
		{0.364, 2, 1, 4.47528, 288.33700},
		{0.364, 0.5, 1, 0.16909, 282.80874},
		{0.364, 1, 0.7, 137.36663, 264.76789},
		{0.364, 1, 0.9, 7.41699, 276.76449},
		{0.364, 1, 1.1, 0.09701, 294.58850},
		{0.364, 3, 0.7, 350.23680, 275.97210},
		{0.364, 5, 0.7, 504.12556, 281.47349},
		{0.346, 2, 1, 4.61653, 288.20928},
		{0.346, 1, 0.7, 164.18109, 264.03501},
		{0.346, 1, 0.9, 7.76747, 276.57473},
	} {
		s := NewSetup()
		s.RefT = 285
		for section, law := range map[string]string{"radiation": "walker1981", "albedo": "constant", "weathering.seafloor": "none"} {
			if err := s.Choose(section, law); err != nil {
				t.Fatal(err)
			}
		}
		s.radiation.law.(*climate.Walker1981).N = c.n
		s.Limiter = 0
		m, err := NewModel(s)
		if err != nil {
			t.Fatal(err)
		}
		d := *m.drive(s.RefAge, 1600, 0)
		d.sun, d.land, d.biology = c.sun*s.RefSun/4, 1, 1
		st, low, high := m.steadyAt(&d, c.temp)
		if low || high {
			t.Errorf("%+v: no balance", c)
			continue
		}
		// The temperature given balances at the pressure given, and weathering is v there.
		if got := st.row.PCO2 / s.RefP; math.Abs(got/c.p-1) > 2e-4 {
			t.Errorf("%+v: P = %.6f", c, got)
		}
		if got := st.row.Land / m.ref.Land; math.Abs(got/c.v-1) > 2e-4 {
			t.Errorf("%+v: W/W0 = %.6f", c, got)
		}
	}
}

// TestRelaxationInTime integrates the world's surface carbon with the program's
// right-hand side and compares with the closed solutions of
//
//	dP/dt = v − P^n,  time in units of M₀/V₀
//
// where P is proportional to surface carbon.
func TestRelaxationInTime(t *testing.T) {
	run := func(w *world, v, p0, until float64) float64 {
		m, s := w.m, w.set
		m.scale = v
		// A thin skin: temperature follows carbon without a lag that would show.
		s.HeatCapacity = 1
		c0, _ := s.ocean.law.Carbon(s.RefP, s.RefT)
		unit := c0 / m.ref.Total() // yr
		y := make([]float64, m.lay.n)
		st := State{T: s.RefT + w.b*math.Log(p0), Surface: p0 * c0, Mantle: 1e30, MantleT: 1600}
		m.lay.pack(y, &st)
		f := func(dy []float64, tt float64, y []float64) { m.derivative(dy, s.RefAge, y) }
		at := m.atol(1e-10)
		at[m.lay.surface] = 1
		sol, err := ode.NewSolver(&ode.Problem{Dim: m.lay.n, Func: f, Autonomous: true}, &ode.Settings{RelTol: 1e-10, AbsTol: at, InitialStep: 1e-3, Guard: ode.Guard{Off: true}})
		if err != nil {
			t.Fatal(err)
		}
		if _, err := sol.Integrate(0, until*unit, y); err != nil {
			t.Fatal(err)
		}
		return y[m.lay.surface] / c0
	}
	check := func(name string, got, want float64) {
		t.Helper()
		if math.Abs(got-want) > 1e-7 {
			t.Errorf("%s: P = %.9f, want %.9f", name, got, want)
		}
	}
	cold := 1e12 // K: no temperature dependence
	w := newWorld(t, 1, cold, 4)
	check("n = 1", run(w, 2, 1, 1), 1.6321205588) // v + (P₀ − v) e^−t
	w = newWorld(t, 0.5, cold, 4)
	check("n = 1/2", run(w, 2, 1, 1.7725887222), 2.25) // t = −2(√P − √P₀) − 2v ln[(v − √P)/(v − √P₀)]
	ecs3 := 3 / math.Ln2
	for _, c := range []struct{ t, p float64 }{{1, 1.76440069}, {5, 2.83376123}, {10, 3.04830692}, {20, 3.08080445}} {
		w = newWorld(t, 0.3, 13.7, ecs3)
		check("full law", run(w, 2, 1, c.t), c.p)
	}
}

// TestThermostatRemoved: with constant weathering, carbon grows at V − W₀;
// 25 % too much outgassing doubles 3.2e18 mol in 1.7067 Myr at 7.5 Tmol/yr.
func TestThermostatRemoved(t *testing.T) {
	w := newWorld(t, 0, 1e12, 4)
	var dy [8]float64
	st := State{T: w.set.RefT, Surface: 3.2e18, Mantle: 1e22, MantleT: 1600}
	y := make([]float64, w.m.lay.n)
	w.m.scale = 1.25
	w.m.lay.pack(y, &st)
	w.m.derivative(dy[:w.m.lay.n], w.set.RefAge, y)
	if got := 3.2e18 / dy[w.m.lay.surface] / units.Myr; math.Abs(got-1.7067) > 5e-5 {
		t.Errorf("doubling takes %.5f Myr, want 1.7067", got)
	}
}

// TestReferenceIsSteady: at the reference state of an Earth-sized planet the
// carbonate reservoirs neither grow nor shrink, whatever the shares.
func TestReferenceIsSteady(t *testing.T) {
	s := NewSetup()
	m, err := NewModel(s)
	if err != nil {
		t.Fatal(err)
	}
	r := s.sources.law.(*outgas.Recycling)
	sub := m.ref.Ridge + m.ref.Arc
	f := r.Fluxes(&outgas.Input{Crust: 1, Dilution: 1, Area: 1, Scale: 1, Mantle: m.ref.Mantle, Seafloor: sub * r.Tau, Continental: m.ref.Continental})
	for name, x := range map[string][2]float64{
		"seafloor":    {m.ref.Seafloor + m.deposited*m.ref.Land, f.Subducted},
		"continental": {(1 - m.deposited) * m.ref.Land, f.Metamorphic},
		"mantle":      {f.Subducted - f.Arc, f.Ridge},
		"surface":     {f.Ridge + f.Arc + f.Metamorphic, s.OutgassingRef},
	} {
		if math.Abs(x[0]/x[1]-1) > 1e-12 {
			t.Errorf("%s: in %.6g, out %.6g mol/yr", name, x[0], x[1])
		}
	}
}
