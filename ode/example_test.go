package ode_test

import (
	"fmt"
	"log"
	"math"

	"cycle/ode"
)

// A fast variable x follows a branch of equilibria, x = √(μ), while μ falls
// slowly. At μ = 0 the branch ends. The event and the loss of stability give
// the same date, up to the time the departure takes.
func Example() {
	p := &ode.Problem{
		Dim: 2,
		Func: func(d []float64, t float64, y []float64) {
			x, mu := y[0], y[1]
			d[0] = 1e6 * (mu - x*x) * (1 + x/4) // fast; x = -4 catches what falls
			d[1] = -0.1                         // slow
		},
		Events: []ode.Event{{
			Name: "gone", Direction: ode.Falling, Terminal: 1,
			Func: func(_ float64, y []float64) float64 { return y[0] + 1 },
		}},
	}
	s, err := ode.NewSolver(p, &ode.Settings{RelTol: 1e-5, AbsTol: []float64{1e-8}})
	if err != nil {
		log.Fatal(err)
	}
	y := []float64{1, 1}
	r, err := s.Integrate(0, 20, y)
	if err != nil {
		log.Fatal(err)
	}
	for _, l := range r.Losses {
		fmt.Printf("lost at %.2f, direction of x: %v\n", l.T, math.Abs(l.Mode[0]) > math.Abs(l.Mode[1]))
	}
	for _, e := range r.Events {
		fmt.Printf("%s at %.2f\n", e.Name, e.T)
	}
	fmt.Println(r.Status)
	// Output:
	// lost at 10.00, direction of x: true
	// gone at 10.00
	// terminated by an event
}

// The state at given times, and what the solver says of its work.
func ExampleSolver_IntegrateAt() {
	p := &ode.Problem{
		Dim:  1,
		Func: func(d []float64, t float64, y []float64) { d[0] = -1e4 * (y[0] - math.Cos(t)) },
	}
	s, err := ode.NewSolver(p, nil)
	if err != nil {
		log.Fatal(err)
	}
	times := []float64{1, 2, 3}
	out := make([]float64, len(times))
	if _, err := s.IntegrateAt(out, times, 0, []float64{0}); err != nil {
		log.Fatal(err)
	}
	for i, t := range times {
		fmt.Printf("%g %.4f\n", t, out[i])
	}
	// Output:
	// 1 0.5404
	// 2 -0.4161
	// 3 -0.9900
}
