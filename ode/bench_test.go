package ode

import (
	"testing"

	"cycle/ode/odetest"
)

// thermostatSolver returns a solver for members of the thermostat ensemble
// and a function that runs one.
func thermostatSolver(tb testing.TB, rtol float64, analytic bool, guard Guard, events bool) func(member int) Result {
	tb.Helper()
	var th odetest.Thermostat
	p := &Problem{Dim: 4, Func: func(d []float64, t float64, y []float64) { th.Func(d, t, y) }}
	if analytic {
		p.Jac = func(j, dt []float64, t float64, y []float64) { th.Jac(j, dt, t, y) }
	}
	if events {
		p.Events = []Event{
			{Func: func(_ float64, y []float64) float64 { return y[0] - 255 }},
			{Func: func(_ float64, y []float64) float64 { return y[1] - 1 }},
		}
	}
	at := make([]float64, 4)
	for i := range at {
		at[i] = rtol * odetest.ThermostatScale[i]
	}
	s, err := NewSolver(p, &Settings{RelTol: rtol, AbsTol: at, Guard: guard})
	if err != nil {
		tb.Fatal(err)
	}
	var times [45]float64
	for k := range times {
		times[k] = odetest.ThermostatT1 * float64(k+1) / 45
	}
	dst := make([]float64, 4*45)
	y := make([]float64, 4)
	return func(m int) Result {
		var y0 [4]float64
		th, y0 = odetest.ThermostatMember(m)
		copy(y, y0[:])
		var r Result
		var err error
		if events {
			r, err = s.IntegrateAt(dst, times[:], 0, y)
		} else {
			r, err = s.Integrate(0, odetest.ThermostatT1, y)
		}
		if err != nil {
			tb.Fatal(err)
		}
		return r
	}
}

func BenchmarkThermostat(b *testing.B) {
	for _, c := range []struct {
		name     string
		analytic bool
		guard    Guard
		events   bool
	}{
		{"full", false, Guard{}, true},
		{"analytic", true, Guard{}, true},
		{"guard-off", false, Guard{Off: true}, true},
		{"end-only", false, Guard{}, false},
	} {
		b.Run(c.name, func(b *testing.B) {
			run := thermostatSolver(b, 1e-5, c.analytic, c.guard, c.events)
			b.ReportAllocs()
			steps, m := 0, 0
			for b.Loop() {
				r := run(m & 255)
				steps += r.Stats.Steps + r.Stats.Rejected()
				m++
			}
			b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(steps), "ns/step")
		})
	}
}

func BenchmarkThermostatFunc(b *testing.B) {
	th, y := odetest.ThermostatMember(0)
	var d [4]float64
	for b.Loop() {
		th.Func(d[:], 1, y[:])
	}
}

// BenchmarkOverhead measures a step on four components with a right-hand
// side that costs next to nothing; subtract 13 times BenchmarkOverheadFunc.
func BenchmarkOverhead(b *testing.B) {
	s, err := NewSolver(&Problem{Dim: 4, Func: linear4, Autonomous: false},
		&Settings{RelTol: 1e-6, AbsTol: []float64{1e-9}, MaxSteps: 1 << 30, MaxStep: 1e-3})
	if err != nil {
		b.Fatal(err)
	}
	y := []float64{1, 1, 1, 1}
	b.ReportAllocs()
	n := 0
	for b.Loop() {
		copy(y, []float64{1, 1, 1, 1})
		r, err := s.Integrate(0, 1, y)
		if err != nil {
			b.Fatal(err)
		}
		n += r.Stats.Steps
	}
	b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(n), "ns/step")
}

func linear4(d []float64, t float64, y []float64) {
	_, _ = d[3], y[3]
	d[0] = -1000*y[0] + y[1]
	d[1] = y[0] - 10*y[1]
	d[2] = y[1] - y[2]
	d[3] = y[2] - 0.1*y[3]
}

func BenchmarkOverheadFunc(b *testing.B) {
	y, d := [4]float64{1, 1, 1, 1}, [4]float64{}
	f := Func(linear4)
	for b.Loop() {
		f(d[:], 0, y[:])
	}
}
