package carbon

import (
	"context"
	"math"
	"strings"
	"testing"

	"cycle/carbon/climate"
	"cycle/carbon/record"
	"cycle/carbon/units"
)

func ran(t *testing.T, s *Setup) *record.Run {
	t.Helper()
	r, err := Run(context.Background(), s)
	if err != nil {
		t.Fatal(err)
	}
	return r
}

// planet returns the Earth, without the solve, with the given laws.
func planet(t *testing.T, laws map[string]string) *Setup {
	t.Helper()
	s := NewSetup()
	for section, law := range laws {
		if err := s.Choose(section, law); err != nil {
			t.Fatal(err)
		}
	}
	s.Content = 7.8e-3
	return s
}

// between interpolates the rows of a history at an age in yr.
func between(t *testing.T, r *record.Run, age float64, get func(*record.Row) float64) float64 {
	t.Helper()
	for i := 1; i < len(r.Rows); i++ {
		if a, b := &r.Rows[i-1], &r.Rows[i]; b.Age >= age {
			w := (age - a.Age) / (b.Age - a.Age)
			return (1-w)*get(a) + w*get(b)
		}
	}
	t.Fatalf("the history ends before %.3g Gyr", gyr(age))
	return 0
}

// TestCarbonIsConservedByEveryPart: whatever the laws move, the sum of all
// reservoirs and of what escaped stays within 1e-9 of itself.
func TestCarbonIsConservedByEveryPart(t *testing.T) {
	for name, set := range map[string]func() *Setup{
		"pair":           func() *Setup { return planet(t, map[string]string{"ocean": "pair"}) },
		"fraction":       func() *Setup { return planet(t, map[string]string{"ocean": "fraction"}) },
		"stagnant lid":   func() *Setup { return planet(t, map[string]string{"interior": "stagnant"}) },
		"power law":      func() *Setup { return planet(t, map[string]string{"sources": "powerlaw", "interior": "powerlaw"}) },
		"steady sources": func() *Setup { return planet(t, map[string]string{"sources": "steady"}) },
		"escape": func() *Setup {
			s := planet(t, nil)
			s.EscapeCO2, *s.Number("interior.core_flow").Value = 0.5e12, 8e12
			return s
		},
		"escape and pair": func() *Setup {
			s := planet(t, map[string]string{"ocean": "pair"})
			s.EscapeCO2, *s.Number("interior.core_flow").Value = 0.5e12, 8e12
			return s
		},
		"pulses": func() *Setup {
			s := planet(t, nil)
			s.Grow("pulse.3")
			*s.Pulses[0] = Pulse{Start: 1e9, Duration: 1e5, Carbon: 3e18}
			*s.Pulses[1] = Pulse{Start: 2e9, Duration: 1e6, Carbon: -5e19} // more than there is
			*s.Pulses[2] = Pulse{Start: 4e9, Duration: 40, Sunlight: -0.06}
			return s
		},
		"cycles and pair": func() *Setup {
			s := planet(t, map[string]string{"ocean": "pair"})
			s.Distance, s.MaxFreezes = 1.15*units.AU, 5
			return s
		},
	} {
		r := ran(t, set())
		first, last := r.Rows[0], r.Rows[len(r.Rows)-1]
		sum := func(x *record.Row) float64 {
			return x.Surface + x.SeafloorCarbon + x.Continental + x.Mantle + x.Escaped
		}
		d := math.Abs(sum(&last)/sum(&first) - 1)
		t.Logf("%s: drift %.2g, printed %.2g; %s", name, r.CarbonDrift, d, r.Outcome.Kind)
		if r.CarbonDrift > 1e-9 || d > 1e-9 {
			t.Errorf("%s: carbon drifts by %.3g, the printed reservoirs by %.3g", name, r.CarbonDrift, d)
		}
		for i := range r.Rows {
			if x := &r.Rows[i]; math.Abs(x.Total/sum(x)-1) > 1e-14 {
				t.Fatalf("%s: the printed total is not the sum of its parts at %.4g Gyr", name, gyr(x.Age))
			}
		}
	}
}

// TestPairFollowsTheSaturatedOcean: where alkalinity is a state, carbonate leaves
// as fast as it is weathered within some ten thousand years, and climate and CO₂
// are those of the saturated ocean: both are set by weathering alone.
func TestPairFollowsTheSaturatedOcean(t *testing.T) {
	sat, pair := ran(t, planet(t, nil)), ran(t, planet(t, map[string]string{"ocean": "pair"}))
	temp := func(r *record.Row) float64 { return r.Temperature }
	lnP := func(r *record.Row) float64 { return math.Log(r.PCO2) }
	for _, age := range []float64{0.5e9, 1e9, 2e9, 3e9, 4e9, 4.57e9, 5.5e9} {
		dT := between(t, pair, age, temp) - between(t, sat, age, temp)
		dlnP := between(t, pair, age, lnP) - between(t, sat, age, lnP)
		if math.Abs(dT) > 0.1 || math.Abs(dlnP) > 0.02 {
			t.Errorf("%.3g Gyr: the pair is %+.3f K and %+.4f in ln p from the saturated ocean", gyr(age), dT, dlnP)
		}
		if gap := between(t, pair, age, func(r *record.Row) float64 { return r.Burial/(r.Land+r.Seafloor) - 1 }); math.Abs(gap) > 0.02 {
			t.Errorf("%.3g Gyr: burial and weathering differ by %.2g", gyr(age), gap)
		}
	}
	// Where precipitation is that of its reference saturation, the chemistry agrees too.
	a, b := at(sat, 4.57), at(pair, 4.57)
	if math.Abs(b.Omega/a.Omega-1) > 0.05 || math.Abs(b.DIC/a.DIC-1) > 0.05 || math.Abs(b.PH-a.PH) > 0.02 {
		t.Errorf("at the reference age: Ω %.3f and %.3f, DIC %.4g and %.4g, pH %.3f and %.3f", a.Omega, b.Omega, a.DIC, b.DIC, a.PH, b.PH)
	}
	if g := math.Abs(pair.Feedback.Gain/sat.Feedback.Gain - 1); g > 1e-3 {
		t.Errorf("gain %.5f and %.5f", sat.Feedback.Gain, pair.Feedback.Gain)
	}
	if x := pair.Feedback.ResponseKyr / sat.Feedback.ResponseKyr; !(x > 0.8 && x < 1.1) {
		t.Errorf("response time %.1f and %.1f kyr", sat.Feedback.ResponseKyr, pair.Feedback.ResponseKyr)
	}
	if d := math.Abs(pair.Outcome.TimeGyr/sat.Outcome.TimeGyr - 1); pair.Outcome.Kind != sat.Outcome.Kind || d > 1e-4 {
		t.Errorf("%s at %.5f Gyr and %s at %.5f", sat.Outcome.Kind, sat.Outcome.TimeGyr, pair.Outcome.Kind, pair.Outcome.TimeGyr)
	}
}

// TestPulseRecoversInTheResponseTime: a small burst or drawdown decays to 1/e in
// the response time of surface carbon there. Where alkalinity is a state, most of
// it is neutralised first, within tens of thousands of years (Archer 2005: mean
// lifetime 30-35 kyr), and the rest decays in the response time.
func TestPulseRecoversInTheResponseTime(t *testing.T) {
	for _, ocean := range []string{"saturated", "pair", "fraction"} {
		for _, carbon := range []float64{3e16, -3e16} {
			s := planet(t, map[string]string{"ocean": ocean})
			s.End = 4.8e9
			s.Tolerance = 1e-9 // for rows as dense as the tail needs
			calm := ran(t, s)
			s.Grow("pulse.1")
			*s.Pulses[0] = Pulse{Start: 4.6e9, Duration: 1e3, Carbon: carbon}
			r := ran(t, s)
			rec := r.Recoveries[0]
			response := at(r, 4.6).Response / 1e3
			t.Logf("%s, %+.2g Emol: ln p by %+.3f, recovers in %.1f kyr, response time %.1f kyr", ocean, carbon/1e18, rec.PeakLnCO2, rec.RecoveryKyr, response)
			if (rec.PeakLnCO2 > 0) != (carbon > 0) || (rec.PeakKelvin > 0) != (carbon > 0) {
				t.Errorf("%s, %+.2g Emol: peak %+.3f K", ocean, carbon/1e18, rec.PeakKelvin)
			}
			if ocean != "pair" && math.Abs(rec.RecoveryKyr/response-1) > 0.05 {
				t.Errorf("%s, %+.2g Emol: recovers in %.1f kyr, response time %.1f", ocean, carbon/1e18, rec.RecoveryKyr, response)
			}
			if ocean == "pair" && !(rec.RecoveryKyr > 5 && rec.RecoveryKyr < 60) {
				t.Errorf("%s, %+.2g Emol: neutralised in %.1f kyr", ocean, carbon/1e18, rec.RecoveryKyr)
			}
			lnP := func(r *record.Row) float64 { return math.Log(r.PCO2) }
			rest := func(age float64) float64 { return between(t, r, age, lnP) - between(t, calm, age, lnP) }
			const a, b = 4.6e9 + 100e3, 4.6e9 + 300e3
			if tail := (b - a) / math.Log(rest(a)/rest(b)) / 1e3; math.Abs(tail/response-1) > 0.1 {
				t.Errorf("%s, %+.2g Emol: the tail decays in %.1f kyr, response time %.1f", ocean, carbon/1e18, tail, response)
			}
			if math.IsNaN(marked(r, record.MarkPulse)) || math.IsNaN(marked(r, record.MarkRecovered)) {
				t.Errorf("%s: marks %+v", ocean, r.Marks)
			}
		}
	}
}

// TestPassingSunlight: a dimming cools while it lasts and is over with it.
func TestPassingSunlight(t *testing.T) {
	s := planet(t, nil)
	s.Grow("pulse.1")
	*s.Pulses[0] = Pulse{Start: 4.6e9, Duration: 300, Sunlight: -0.02}
	s.End = 4.7e9
	r := ran(t, s)
	rec := r.Recoveries[0]
	// −2 % of (S/4)(1 − A) over the damping that the stated sensitivity implies.
	row := at(r, 4.59)
	want := -0.02 * row.Absorbed / (r.Feedback.Forcing / r.Feedback.Sensitivity)
	t.Logf("%+.2f K, %+.2f K by the stated sensitivity", rec.PeakKelvin, want)
	if !(rec.PeakKelvin < 0 && math.Abs(rec.PeakKelvin/want-1) < 0.3) {
		t.Errorf("cools by %.3f K, want about %.3f", rec.PeakKelvin, want)
	}
	if r.Freezes != 0 {
		t.Errorf("froze %d times", r.Freezes)
	}
	if last := &r.Rows[len(r.Rows)-1]; math.Abs(last.Temperature-row.Temperature) > 1 {
		t.Errorf("%.2f K long after, %.2f K before", last.Temperature, row.Temperature)
	}
}

// TestDynamo: with a heat flow from the core the dynamo ends where that falls
// below what the core conducts, later the hotter the core; the core only cools.
func TestDynamo(t *testing.T) {
	last := 0.0
	for _, flow := range []float64{8e12, 9e12, 10e12} {
		s := planet(t, nil)
		*s.Number("interior.core_flow").Value = flow
		s.End = 5e9
		r := ran(t, s)
		off := marked(r, record.MarkDynamo)
		t.Logf("%.3g TW at the reference state: dynamo off at %.3f Gyr", flow/1e12, off)
		if !(off > last) {
			t.Errorf("%.3g TW: dynamo off at %.3f Gyr, before at %.3f", flow/1e12, off, last)
		}
		last = off
		for i := 1; i < len(r.Rows); i++ {
			if a, b := &r.Rows[i-1], &r.Rows[i]; !(b.CoreTemperature < a.CoreTemperature || b.Age == a.Age) || !(b.CoreHeat > 0) {
				t.Fatalf("%.4g Gyr: core at %.6g K with %.3g W", gyr(b.Age), b.CoreTemperature, b.CoreHeat)
			}
		}
	}
	if r := ran(t, planet(t, nil)); !math.IsNaN(marked(r, record.MarkDynamo)) {
		t.Error("a dynamo without a core")
	}
}

// TestEscapeOfCarbon: CO₂ escapes at the given rate while there is no dynamo, not
// before and not without a core.
func TestEscapeOfCarbon(t *testing.T) {
	const rate = 0.2e12 // mol/yr
	s := planet(t, nil)
	s.EscapeCO2, *s.Number("interior.core_flow").Value = rate, 8e12
	s.End = 4e9
	r := ran(t, s)
	off := marked(r, record.MarkDynamo) * 1e9
	escaped := func(age float64) float64 {
		return between(t, r, age, func(x *record.Row) float64 { return x.Escaped })
	}
	if on := escaped(off-20*units.Myr) - escaped(off-500*units.Myr); on != 0 {
		t.Errorf("%.3g mol escape while there is a dynamo", on)
	}
	if got, want := escaped(3.9e9)-escaped(off+100e6), rate*(3.9e9-off-100e6); math.Abs(got/want-1) > 0.01 {
		t.Errorf("%.4g mol escape without a dynamo, want %.4g", got, want)
	}
	bare := planet(t, nil)
	bare.EscapeCO2, bare.End = rate, 1e9
	if r := ran(t, bare); r.Rows[len(r.Rows)-1].Escaped != 0 {
		t.Error("carbon escapes without a core that could have a dynamo")
	}
}

// TestWaterLeaves: the inventory falls by what diffuses through the stratosphere,
// and only when asked to; when a hundredth is left the water is lost.
func TestWaterLeaves(t *testing.T) {
	s := planet(t, map[string]string{"radiation": "williams1997"})
	s.Distance, s.OceanFraction = 0.93*units.AU, 2.26e-7
	r := ran(t, s)
	if r.Outcome.Kind != record.WaterLost {
		t.Fatalf("%s", r.Outcome.Sentence)
	}
	m, err := NewModel(s)
	if err != nil {
		t.Fatal(err)
	}
	lost := 0.0
	for i := 1; i < len(r.Rows); i++ {
		a, b := &r.Rows[i-1], &r.Rows[i]
		if b.Water > a.Water {
			t.Fatalf("water gathers at %.4g Gyr", gyr(b.Age))
		}
		lost += 0.5 * (b.Age - a.Age) * (climate.WaterLoss(a.Moisture, m.planet.Area) + climate.WaterLoss(b.Moisture, m.planet.Area))
	}
	first, last := r.Rows[0].Water, r.Rows[len(r.Rows)-1].Water
	if math.Abs(lost/(first-last)-1) > 0.01 {
		t.Errorf("%.4g kg lost, the fluxes sum to %.4g", first-last, lost)
	}
	if math.Abs(last/first-dry) > 1e-4 {
		t.Errorf("ends with %.4g of its water", last/first)
	}
	s.WaterEscape = false
	if r := ran(t, s); r.Rows[len(r.Rows)-1].Water != first || r.Outcome.Kind == record.WaterLost {
		t.Errorf("water leaves though it may not: %s", r.Outcome.Sentence)
	}
}

// TestNothingLeftAtTheSurface: a planet whose outgassing has ceased runs out of
// surface carbon; its history goes on, with a CO₂ pressure above zero.
func TestNothingLeftAtTheSurface(t *testing.T) {
	for _, land := range []string{"west2012", "walker1981", "arrhenius_runoff"} {
		s := planet(t, map[string]string{"interior": "stagnant", "ocean": "fraction", "weathering.land": land})
		s.Distance = 0.95 * units.AU
		r := ran(t, s)
		if r.Outcome.Kind != record.RunawayGreen {
			t.Errorf("%s: %s", land, r.Outcome.Sentence)
		}
		for i := range r.Rows {
			if x := &r.Rows[i]; !(x.PCO2 > 0) || x.Surface < -1e-9*r.CarbonMol {
				t.Fatalf("%s: %.4g mol and %.4g bar at %.4g Gyr", land, x.Surface, x.PCO2, gyr(x.Age))
			}
		}
		if last := r.Rows[len(r.Rows)-1].Surface; last > 1e12 {
			t.Errorf("%s: %.3g mol are left: this planet does not test it", land, last)
		}
	}
	before := 0.0
	for _, c := range []float64{-1e12, -1e9, -1e3, -1, 0, 1, 1e3, 1e9, 9.99e11, 1.01e12, 1e18} {
		x := present(c)
		if !(x > before) || c > 1e9 && math.Abs(x/c-1) > 1e-15 {
			t.Errorf("%g mol count as %g, less than that as %g", c, x, before)
		}
		before = x
	}
}

// TestPairOffBalance: where burial is not what weathers, each reservoir of
// carbonate gets its share of what is buried, and alkalinity the rest.
func TestPairOffBalance(t *testing.T) {
	s := planet(t, map[string]string{"ocean": "pair"})
	m, err := NewModel(s)
	if err != nil {
		t.Fatal(err)
	}
	st, _ := m.start()
	st.Alk *= 1.02 // more saturated than weathering calls for
	y, dy := make([]float64, m.lay.n), make([]float64, m.lay.n)
	m.lay.pack(y, &st)
	m.derivative(dy, s.Start, y)
	r := &m.row
	weathered := r.Land + r.Seafloor
	if !(r.Burial > 1.1*weathered) {
		t.Fatalf("burial %.4g of %.4g mol/yr: not off balance", r.Burial, weathered)
	}
	for name, x := range map[string][2]float64{
		"alkalinity":  {dy[m.lay.alk], 2 * (weathered - r.Burial)},
		"surface":     {dy[m.lay.surface], r.Outgassing - r.Burial},
		"continental": {dy[m.lay.continental], (1-m.deposited)*r.Land*r.Burial/weathered - r.Metamorphic},
		"seafloor":    {dy[m.lay.seafloor], (r.Seafloor+m.deposited*r.Land)*r.Burial/weathered - r.Subducted},
	} {
		if math.Abs(x[0]/x[1]-1) > 1e-12 {
			t.Errorf("%s: %.6g mol/yr, want %.6g", name, x[0], x[1])
		}
	}
}

// TestSolveFromTooLittleCarbon: a history that stops at its last freeze before the
// reference age asks for more carbon, and the solve finds it.
func TestSolveFromTooLittleCarbon(t *testing.T) {
	for _, content := range []float64{0.5e-3, 2e-3} {
		s := NewSetup()
		s.Solve, s.Content, s.MaxFreezes = "total", content, 3
		s.Land, s.Biology = Step{Before: 1, After: 1, Width: 1e9}, Step{Before: 1, After: 1, Width: 1e9}
		m, err := NewModel(s)
		if err != nil {
			t.Fatal(err)
		}
		if h, err := m.integrate(context.Background(), s.RefAge, 1e-5, false); err != nil || h.reason != endFreezes {
			t.Fatalf("content %g: %v, %v: this planet does not test it", content, h.reason, err)
		}
		if r := ran(t, s); math.Abs(r.Reference.PCO2Bar/s.RefP-1) > 1e-5 {
			t.Errorf("content %g: %.6g bar at the reference age", content, r.Reference.PCO2Bar)
		}
	}
}

// TestVerdictOfAStoppedHistory: a stay that had just begun when the solver stopped
// is no lasting failure; one that lasted is.
func TestVerdictOfAStoppedHistory(t *testing.T) {
	m, err := NewModel(planet(t, nil))
	if err != nil {
		t.Fatal(err)
	}
	open := func(start float64) []span { return []span{{lost: start, start: start, end: math.NaN()}} }
	for _, c := range []struct {
		h    history
		want record.Kind
	}{
		{history{end: 3e9, reason: endSolver, frozen: open(2.9e9)}, record.Undecided},
		{history{end: 3e9, reason: endSolver, frozen: open(1.9e9)}, record.Snowball},
		{history{end: 3e9, reason: endTime, frozen: open(2.9e9)}, record.Snowball},
		{history{end: 3e9, reason: endSolver, moist: open(2.999e9)}, record.Undecided},
		{history{end: 3e9, reason: endSolver, moist: open(2.9e9)}, record.MoistGreen},
		{history{end: 3e9, reason: endCondense, frozen: open(2.9e9)}, record.Condensation},
		{history{end: 3e9, reason: endSwings, swings: swings{start: 2.5e9}}, record.BeyondRange},
		{history{end: 3e9, reason: endSwings, swings: swings{start: 2.5e9}, frozen: open(1e9)}, record.Snowball},
		{history{end: 3e9, reason: endDry}, record.WaterLost},
		{history{end: 3e9, reason: endStar}, record.StarLeft},
		{history{end: 3e9, reason: endTable}, record.Temperate},
	} {
		if got := m.judge(&c.h); got.kind != c.want {
			t.Errorf("%s with %d freezes, %d moist stays: %q, want %q", c.h.reason, len(c.h.frozen), len(c.h.moist), got.kind, c.want)
		}
	}
}

// TestSwingsAreCounted: swings that follow one another count, a trend and swings
// far apart or of less than a kelvin do not.
func TestSwingsAreCounted(t *testing.T) {
	count := func(f func(t float64) float64, step float64) int {
		var w swings
		for i := 0; i < 4000; i++ {
			t := 1e9 + step*float64(i)
			w.see(t, f(t))
		}
		return w.count
	}
	wave := func(amplitude, period float64) func(float64) float64 {
		return func(t float64) float64 { return 300 + amplitude*math.Sin(2*math.Pi*t/period) }
	}
	// 4000 steps of 250 yr are 100 periods of 10 kyr.
	if n := count(wave(5, 1e4), 250); n < 195 || n > 205 {
		t.Errorf("%d turns of 100 swings", n)
	}
	if n := count(wave(0.4, 1e4), 250); n != 0 {
		t.Errorf("%d turns of swings of less than a kelvin", n)
	}
	if n := count(wave(5, 1e8), 2.5e6); n > 2 {
		t.Errorf("%d turns of swings of 100 Myr", n)
	}
	if n := count(func(t float64) float64 { return 280 + 20*(t-1e9)/1e6 }, 250); n != 0 {
		t.Errorf("%d turns of a trend", n)
	}
}

// TestEndlessSwings: a warm climate may swing by a few kelvin within millennia, as
// the ocean gives off CO₂ where it warms. It does not freeze; the history is cut
// after as many swings as it may have freezes, and says so.
func TestEndlessSwings(t *testing.T) {
	s := planet(t, map[string]string{"albedo": "williams1997", "sources": "powerlaw", "weathering.land": "graham2020"})
	s.OutgassingScale, s.MaxFreezes = 20, 8
	r := ran(t, s)
	t.Logf("%s (%d steps)", r.Outcome.Sentence, r.Solver.Steps)
	if r.Outcome.Kind != record.BeyondRange || !strings.Contains(r.Outcome.Sentence, "swings between") || !warned(r, "solver", "8 swings") {
		t.Errorf("%+v, %+v", r.Outcome, r.Warnings)
	}
	if r.Freezes != 0 || r.Solver.Steps > 3000 {
		t.Errorf("%d freezes, %d steps", r.Freezes, r.Solver.Steps)
	}
	if n := len(r.Episodes); n == 0 || r.Episodes[n-1].State != record.StateBeyond {
		t.Errorf("episodes %+v", r.Episodes)
	}
	for _, row := range r.Rows {
		if row.Temperature < 273.15 || row.Temperature > 340 {
			t.Fatalf("%.4g K at %.4g Gyr", row.Temperature, gyr(row.Age))
		}
	}
}
