package scenarios

import (
	"context"
	"math"
	"testing"

	"cycle/carbon"
	"cycle/carbon/record"
)

// fates is what becomes of every scenario that comes with the program: outcome
// and date, within bounds of a few percent around what this program gives. The
// planets are invented; for the Earth the bounds are those of the literature.
var fates = map[string]struct {
	kind    record.Kind
	lo, hi  float64 // Gyr
	freezes [2]int  // fewest, most
}{
	// Caldeira & Kasting 1992: 1.5 Gyr from now; Mello & Friaca 2019: 1.63; common
	// practice, no source: in 1-2 Gyr.
	"earth":           {record.RunawayGreen, 5.57, 6.57, [2]int{0, 0}},
	"earth_uncertain": {record.RunawayGreen, 5.57, 6.57, [2]int{0, 0}},
	"ember":           {record.RunawayGreen, 5.57, 6.57, [2]int{0, 0}},
	"calessa":         {record.RunawayGreen, 3.6, 3.9, [2]int{0, 0}},
	"velda":           {record.MoistGreen, 4.2, 4.5, [2]int{0, 0}},
	"brask":           {record.MoistGreen, 0.58, 0.66, [2]int{0, 0}},
	"grauvel":         {record.BeyondRange, 0.55, 0.62, [2]int{0, 0}},
	"sirocel":         {record.WaterLost, 1.8, 1.95, [2]int{0, 0}},
	"dravik":          {record.Snowball, 0.87, 0.95, [2]int{1, 1}},
	"ulmere":          {record.Condensation, 1.0, 1.1, [2]int{1, 1}},
	"orvane":          {record.LimitCycles, 2.25, 2.45, [2]int{40, 40}},
	"pellin":          {record.LimitCycles, 0.36, 0.41, [2]int{40, 40}},
	"lidden":          {record.LimitCycles, 1.65, 1.85, [2]int{10, 40}},
	"tessarin":        {record.Temperate, 8, 8, [2]int{0, 0}},
	"halvane":         {record.StarLeft, 10, 10, [2]int{0, 0}},
	"quillon":         {record.Undecided, 1.5, 2.5, [2]int{0, 0}},
}

// TestBuiltinFates runs every scenario at two tolerances: the outcome is that of
// the table, and its date moves by less than 0.1 % unless it is undecided.
func TestBuiltinFates(t *testing.T) {
	seen := map[record.Kind]string{}
	names := map[string]bool{}
	for _, b := range Builtins() {
		names[b.Name] = true
		want, ok := fates[b.Name]
		if !ok {
			t.Errorf("%s: no expected fate", b.Name)
			continue
		}
		run := func(tolerance string) *record.Run {
			r, err := Load(b.Name, []string{"solver.tolerance=" + tolerance})
			if err != nil {
				t.Fatalf("%s: %v", b.Name, err)
			}
			run, err := carbon.Run(context.Background(), r.Setup)
			if err != nil {
				t.Fatalf("%s: %v", b.Name, err)
			}
			return run
		}
		loose, tight := run("1e-5"), run("1e-6")
		seen[loose.Outcome.Kind] = b.Name
		for _, r := range []*record.Run{loose, tight} {
			o := r.Outcome
			if o.Kind != want.kind || !(o.TimeGyr >= want.lo && o.TimeGyr <= want.hi) {
				t.Errorf("%s: %s at %.6g Gyr, want %s at %g to %g", b.Name, o.Kind, o.TimeGyr, want.kind, want.lo, want.hi)
			}
			if r.Freezes < want.freezes[0] || r.Freezes > want.freezes[1] {
				t.Errorf("%s: %d freezes, want %v", b.Name, r.Freezes, want.freezes)
			}
			if r.CarbonDrift > 1e-9 {
				t.Errorf("%s: carbon drifts by %.2g", b.Name, r.CarbonDrift)
			}
			if want.kind != record.Undecided && !(o.ErrorGyr <= 1e-3*o.TimeGyr) {
				t.Errorf("%s: %.6g ± %.2g Gyr", b.Name, o.TimeGyr, o.ErrorGyr)
			}
		}
		moves := math.Abs(tight.Outcome.TimeGyr/loose.Outcome.TimeGyr - 1)
		if want.kind != record.Undecided && moves > 1e-3 {
			t.Errorf("%s: the date moves by %.2g of itself between tolerances 1e-5 and 1e-6", b.Name, moves)
		}
		t.Logf("%s: %s at %.6f Gyr, moves by %.1g", b.Name, loose.Outcome.Kind, loose.Outcome.TimeGyr, moves)
	}
	for _, k := range record.Kinds {
		if seen[k] == "" {
			t.Errorf("no scenario ends in %q", k)
		}
	}
	for name := range fates {
		if !names[name] {
			t.Errorf("%s: an expected fate without a scenario", name)
		}
	}
}

// TestEmberRecovers: both disturbances of Ember pass, the burst of carbon within a
// few of the response times of its surface carbon.
func TestEmberRecovers(t *testing.T) {
	r, err := Load("ember", nil)
	if err != nil {
		t.Fatal(err)
	}
	run, err := carbon.Run(context.Background(), r.Setup)
	if err != nil {
		t.Fatal(err)
	}
	if len(run.Recoveries) != 2 {
		t.Fatalf("%d recoveries, want 2", len(run.Recoveries))
	}
	burst, winter := run.Recoveries[0], run.Recoveries[1]
	tau := run.Feedback.ResponseKyr
	t.Logf("response time %.0f kyr; burst %+.2f K, recovers in %.0f kyr; winter %+.2f K, in %.3g kyr", tau, burst.PeakKelvin, burst.RecoveryKyr, winter.PeakKelvin, winter.RecoveryKyr)
	if !(burst.PeakKelvin > 0.5 && burst.RecoveryKyr > 0.3*tau && burst.RecoveryKyr < 3*tau) {
		t.Errorf("burst: %+v, response time %.0f kyr", burst, tau)
	}
	if !(winter.PeakKelvin < -0.5) {
		t.Errorf("winter: %+v", winter)
	}
}
