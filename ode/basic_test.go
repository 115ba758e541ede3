package ode

import (
	"math"
	"testing"
)

func TestExponential(t *testing.T) {
	for _, rtol := range []float64{1e-4, 1e-6, 1e-8} {
		s, err := NewSolver(&Problem{Dim: 1, Func: func(d []float64, _ float64, y []float64) { d[0] = -y[0] }},
			&Settings{RelTol: rtol})
		if err != nil {
			t.Fatal(err)
		}
		y := []float64{1}
		if _, err := s.Integrate(0, 5, y); err != nil {
			t.Fatal(err)
		}
		if e := math.Abs(y[0]/math.Exp(-5) - 1); e > 20*rtol {
			t.Errorf("rtol %g: relative error %g", rtol, e)
		}
	}
}
