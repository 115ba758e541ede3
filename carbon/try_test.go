package carbon

import (
	"context"
	"fmt"
	"testing"
	"time"

	"cycle/carbon/units"
)

func show(name string, f func(s *Setup)) {
	s := NewSetup()
	s.Content = 7.8e-3
	f(s)
	t0 := time.Now()
	r, err := Run(context.Background(), s)
	if err != nil {
		fmt.Println(name, err)
		return
	}
	fmt.Printf("== %s: %s | %s | freezes %d frozen %.2f | steps %d f %d drift %.1g rows %d | %v\n   %s\n", name, r.Outcome.Sentence, r.Outcome.Why, r.Freezes, r.FrozenShare, r.Solver.Steps, r.Solver.FuncEvals, r.CarbonDrift, len(r.Rows), time.Since(t0), r.StartWords)
	for i, m := range r.Marks {
		if i < 6 {
			fmt.Printf("   %s %.4f±%.1g", m.Name, m.TimeGyr, m.ErrorGyr)
		}
	}
	fmt.Println()
	for _, w := range r.Warnings {
		if w.About == "solver" || w.About == "time" {
			fmt.Println("   !", w)
		}
	}
}

func TestTry(t *testing.T) {
	for _, a := range []float64{0.85, 0.9, 1.1, 1.2, 1.3, 1.4, 1.5} {
		show(fmt.Sprintf("a=%g", a), func(s *Setup) { s.Distance = a * units.AU })
		show(fmt.Sprintf("a=%g const land", a), func(s *Setup) { s.Distance = a * units.AU; s.Land.Before = 1; s.Biology.Before = 1 })
	}
	for _, v := range []float64{0.05, 0.1, 0.2, 0.3, 0.5} {
		show(fmt.Sprintf("v=%g", v), func(s *Setup) { s.Content *= v })
		show(fmt.Sprintf("v=%g sfice 0", v), func(s *Setup) { s.Content *= v; s.SeafloorIce = 0 })
	}
	for _, mm := range []float64{0.1, 0.3, 1, 3} {
		show(fmt.Sprintf("M=%g", mm), func(s *Setup) {
			s.Mass = mm * units.EarthMass
			s.Choose("star", "steady")
			s.Distance = 1.08 * units.AU
			s.End = 12e9
			s.Land.Before = 1
			s.Biology.Before = 1
		})
	}
}
