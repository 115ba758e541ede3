package carbon

import (
	"context"
	"math"
	"reflect"
	"testing"

	"cycle/carbon/record"
	"cycle/carbon/units"
)

func earth(t *testing.T) *record.Run {
	t.Helper()
	s := NewSetup()
	s.Solve = "total"
	r, err := Run(context.Background(), s)
	if err != nil {
		t.Fatal(err)
	}
	return r
}

// marked returns the date of the first mark of a name, NaN without one.
func marked(r *record.Run, name string) float64 {
	for _, m := range r.Marks {
		if m.Name == name {
			return m.TimeGyr
		}
	}
	return math.NaN()
}

// TestEarth: the Earth with the published defaults, from 0.2 Gyr to its end.
func TestEarth(t *testing.T) {
	r := earth(t)
	within := func(what string, got, lo, hi float64, source string) {
		t.Helper()
		t.Logf("%s: %.6g (%g to %g; %s)", what, got, lo, hi, source)
		if !(got >= lo && got <= hi) {
			t.Errorf("%s: %.6g, want %g to %g (%s)", what, got, lo, hi, source)
		}
	}
	ref := r.Reference
	within("temperature at the reference age, K", ref.TemperatureK, 287.9, 288.1, "common practice, no source: pre-industrial mean 287-288 K")
	within("CO2 at the reference age, ppm", ref.PCO2Bar*1e6, 277, 283, "common practice, no source: pre-industrial 280 ppm")
	within("pH at the reference age", ref.PH, 7.7, 8.4, "common practice, no source: about 8.1")
	if r.Freezes != 0 {
		t.Errorf("froze %d times", r.Freezes)
	}
	for i := range r.Rows {
		row := &r.Rows[i]
		ago := (4.57e9 - row.Age) / 1e9
		if gyr(row.Age) < r.Outcome.TimeGyr && row.Temperature < 273.15 {
			t.Errorf("%.4g Gyr: %.5g K, below freezing", gyr(row.Age), row.Temperature)
		}
		if ago >= 2.5 && ago <= 4 {
			if row.Temperature < 273 || row.Temperature > 310 || row.PCO2 < 1e-3 {
				t.Errorf("Archean, %.3g Gyr ago: %.5g K at %.3g bar; want 273-310 K (Krissansen-Totton et al. 2018: 0-50 °C) above 1e-3 bar", ago, row.Temperature, row.PCO2)
			}
		}
	}
	within("150 ppm crossed after the reference age, Gyr", marked(r, record.MarkC3)-4.57, 0.05, 0.6, "Lovelock & Whitfield 1982: 0.1; Mello & Friaca 2019: 0.17 +0.32/-0.11")
	within("10 ppm crossed after the reference age, Gyr", marked(r, record.MarkC4)-4.57, 0.6, 1.6, "Caldeira & Kasting 1992: 0.9-1.5; Mello & Friaca 2019: 0.84 +0.27/-0.10")
	within("hot end after the reference age, Gyr", r.Outcome.TimeGyr-4.57, 0.8, 2, "Caldeira & Kasting 1992: 1.5; Mello & Friaca 2019: 1.63; common practice: 1-2 Gyr")
	if k := r.Outcome.Kind; k != record.RunawayGreen && k != record.MoistGreen {
		t.Errorf("outcome %q, want a hot one", k)
	}
	within("pH 4.0 Gyr ago", at(r, 0.57).PH, 6.2, 7.2, "Krissansen-Totton et al. 2018: 6.6 +0.6/-0.4")
	within("pH 2.5 Gyr ago", at(r, 2.07).PH, 6.5, 7.7, "Krissansen-Totton et al. 2018: 7.0 +0.7/-0.5")
	within("response time of surface carbon today, kyr", r.Feedback.ResponseKyr, 170, 400, "Colbourn et al. 2015: 170-380; Archer 2005: about 400")
	within("forcing of a doubling, W/m2", r.Feedback.Forcing, 3.3, 4.4, "Myhre et al. 1998: 3.71; Byrne & Goldblatt 2014: 3.87")
	within("numerical error of the end relative to its date", r.Outcome.ErrorGyr/r.Outcome.TimeGyr, 0, 1e-3, "this program's promise")
}

// at returns the row next to an age in Gyr.
func at(r *record.Run, age float64) *record.Row {
	best := &r.Rows[0]
	for i := range r.Rows {
		if math.Abs(gyr(r.Rows[i].Age)-age) < math.Abs(gyr(best.Age)-age) {
			best = &r.Rows[i]
		}
	}
	return best
}

// TestCarbonIsConserved over whole histories, cycles included.
func TestCarbonIsConserved(t *testing.T) {
	for name, set := range map[string]func(s *Setup){
		"earth":  func(s *Setup) { s.Solve = "total" },
		"cycles": func(s *Setup) { s.Content, s.Distance = 7.8e-3, 1.15*units.AU },
	} {
		s := NewSetup()
		set(s)
		r, err := Run(context.Background(), s)
		if err != nil {
			t.Fatal(err)
		}
		t.Logf("%s: drift %.2g of %.3g mol", name, r.CarbonDrift, r.CarbonMol)
		if r.CarbonDrift > 1e-9 {
			t.Errorf("%s: carbon drifts by %.3g", name, r.CarbonDrift)
		}
		// The printed reservoirs must say the same.
		first, last := r.Rows[0], r.Rows[len(r.Rows)-1]
		sum := func(x record.Row) float64 { return x.Surface + x.SeafloorCarbon + x.Continental + x.Mantle }
		if d := math.Abs(sum(last)/sum(first) - 1); d > 1e-9 {
			t.Errorf("%s: printed reservoirs drift by %.3g", name, d)
		}
	}
}

// TestSameSetupSameBits: two runs agree in every number.
func TestSameSetupSameBits(t *testing.T) {
	a, b := earth(t), earth(t)
	if len(a.Rows) != len(b.Rows) {
		t.Fatalf("%d and %d rows", len(a.Rows), len(b.Rows))
	}
	for i := range a.Rows {
		for _, c := range record.Columns {
			if x, y := c.Get(&a.Rows[i]), c.Get(&b.Rows[i]); math.Float64bits(x) != math.Float64bits(y) {
				t.Fatalf("row %d, %s: %v and %v", i, c.Name, x, y)
			}
		}
	}
	a.Rows, b.Rows = nil, nil
	if !reflect.DeepEqual(a.Outcome, b.Outcome) || !reflect.DeepEqual(a.Solver, b.Solver) {
		t.Error("outcome or statistics differ")
	}
}

// TestPrintedFluxesAreIntegrated: the change of every reservoir between rows is
// the integral of the printed fluxes (trapezoidal, so loosely), and the printed
// balance is the sum of its parts exactly.
func TestPrintedFluxesAreIntegrated(t *testing.T) {
	r := earth(t)
	var cont, sea float64
	for i := 1; i < len(r.Rows); i++ {
		a, b := &r.Rows[i-1], &r.Rows[i]
		if d := b.Outgassing - b.Ridge - b.Arc - b.Metamorphic - b.Pulse; math.Abs(d) > 1e-9*b.Outgassing {
			t.Fatalf("row %d: outgassing differs from its parts by %g", i, d)
		}
		half := 0.5 * (b.Age - a.Age)
		cont += half * (a.Land - a.Deposited - a.Metamorphic + b.Land - b.Deposited - b.Metamorphic)
		sea += half * (a.Seafloor + a.Deposited - a.Subducted + b.Seafloor + b.Deposited - b.Subducted)
	}
	first, last := r.Rows[0], r.Rows[len(r.Rows)-1]
	if got := last.Continental - first.Continental; math.Abs(cont/got-1) > 0.01 {
		t.Errorf("continental carbonate grew by %.4g mol, its fluxes sum to %.4g", got, cont)
	}
	if got := last.SeafloorCarbon - first.SeafloorCarbon; math.Abs(sea-got) > 0.05*first.SeafloorCarbon {
		t.Errorf("seafloor carbonate grew by %.4g mol, its fluxes sum to %.4g", got, sea)
	}
}

// TestIndependentOfTheStart: starting later changes the end by less than 1e-3
// (no start-up transient is counted as a fate).
func TestIndependentOfTheStart(t *testing.T) {
	end := func(start float64) float64 {
		s := NewSetup()
		s.Content, s.Start = 7.8e-3, start
		r, err := Run(context.Background(), s)
		if err != nil {
			t.Fatal(err)
		}
		return r.Outcome.TimeGyr
	}
	a := end(0.2e9)
	for _, start := range []float64{0.1e9, 0.5e9, 1e9} {
		if b := end(start); math.Abs(b/a-1) > 1e-3 {
			t.Errorf("started at %.2g Gyr the planet ends at %.5f Gyr, from 0.2 Gyr at %.5f", gyr(start), b, a)
		}
	}
}

// TestTroubleWhileSolvingIsUndecided: numerical trouble while solving for the
// reference state is an outcome, not an error.
func TestTroubleWhileSolvingIsUndecided(t *testing.T) {
	s := NewSetup()
	s.Solve, s.MaxSteps = "total", 60
	r, err := Run(context.Background(), s)
	if err != nil {
		t.Fatal(err)
	}
	if r.Outcome.Kind != record.Undecided || len(r.Rows) == 0 || len(r.Warnings) == 0 {
		t.Errorf("outcome %q with %d rows and %d warnings", r.Outcome.Kind, len(r.Rows), len(r.Warnings))
	}
}

func BenchmarkHistory(b *testing.B) {
	s := NewSetup()
	s.Content = 7.8e-3
	m, err := NewModel(s)
	if err != nil {
		b.Fatal(err)
	}
	b.ReportAllocs()
	var steps, evals int
	for b.Loop() {
		h, err := m.integrate(context.Background(), s.End, s.Tolerance, false)
		if err != nil {
			b.Fatal(err)
		}
		steps, evals = h.stats.Steps, h.stats.FuncEvals
	}
	b.ReportMetric(float64(steps), "steps")
	b.ReportMetric(float64(evals), "f")
}

func BenchmarkRun(b *testing.B) {
	for b.Loop() {
		s := NewSetup()
		s.Solve = "total"
		if _, err := Run(context.Background(), s); err != nil {
			b.Fatal(err)
		}
	}
}
