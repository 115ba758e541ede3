package ode

import (
	"fmt"
	"testing"

	"cycle/ode/odetest"
)

func TestZZ(t *testing.T) {
	th, y0 := odetest.ThermostatMember(0)
	rtol := 1e-4
	at := make([]float64, 4)
	for i := range at {
		at[i] = rtol * odetest.ThermostatScale[i]
	}
	for _, m := range []Method{Rodas5P, RadauIIA3} {
		s, _ := NewSolver(&Problem{Dim: 4, Func: func(d []float64, t float64, y []float64) { th.Func(d, t, y) }}, &Settings{RelTol: rtol, AbsTol: at, Method: m})
		s.Init(0, 4.5, y0[:])
		rej := 0
		for {
			d, err := s.Step()
			if err != nil {
				t.Fatal(err)
			}
			it := 0
			if s.rad != nil {
				it = s.rad.iters
			}
			fmt.Printf("%.3e h %.3e err %.3g comp %d rej %d it %d y %v\n", s.t, s.hOld, s.errNorm, s.errComp, s.stats.RejectedError-rej, it, s.y)
			rej = s.stats.RejectedError
			if d {
				break
			}
		}
	}
}
