package odetest

import "math"

// Brusselator is the one-dimensional Brusselator with diffusion on N interior
// points, u and v interleaved: 2N unknowns, two sub- and superdiagonals
// (Hairer & Wanner II (1996), IV.1, with α = 1/50). It has no exact solution;
// Ref is nil.
func Brusselator(N int) *Problem {
	c := 0.02 * float64((N+1)*(N+1))
	p := &Problem{
		Name: "Brusselator", T1: 10, Autonomous: true,
		Y0: make([]float64, 2*N), Scale: make([]float64, 2*N),
		Func: func(d []float64, _ float64, y []float64) {
			y, d = y[:2*N], d[:2*N]
			ul, vl := 1.0, 3.0
			u, v := y[0], y[1]
			for i := 0; i < 2*N; i += 2 {
				ur, vr := 1.0, 3.0
				if i < 2*N-2 {
					ur, vr = y[i+2], y[i+3]
				}
				uuv := u * u * v
				d[i] = 1 + uuv - 4*u + c*(ul-2*u+ur)
				d[i+1] = 3*u - uuv + c*(vl-2*v+vr)
				ul, vl, u, v = u, v, ur, vr
			}
		},
		Source: "none",
	}
	for i := range N {
		p.Y0[2*i] = 1 + math.Sin(2*math.Pi*float64(i+1)/float64(N+1))
		p.Y0[2*i+1] = 3
		p.Scale[2*i], p.Scale[2*i+1] = 1e-2, 1e-2
	}
	return p
}

// Chain is a closed chain of 20 species with rates from 1e-2 to 3e4: each
// turns into the next, helped by another. The total is conserved exactly. It
// has no exact solution; Ref is nil.
func Chain() *Problem {
	const n = 20
	p := &Problem{
		Name: "chain", T1: 100, Autonomous: true,
		Y0: make([]float64, n), Scale: make([]float64, n),
		Func: func(d []float64, _ float64, y []float64) {
			y, d = y[:n], d[:n]
			k := 1e-2
			clear(d)
			for i := range n {
				j, m := (i+1)%n, (i+7)%n
				r := k*y[i] + 0.1*k*y[i]*y[m]
				d[i] -= r
				d[j] += r
				k *= 2.2
			}
		},
		Source: "none",
	}
	for i := range n {
		if i%4 == 0 {
			p.Y0[i] = 1
		}
		p.Scale[i] = 1e-6
	}
	return p
}
