// Package odetest holds initial value problems with known answers, to test
// stiff integrators.
//
// Every reference value carries its source: exact (worked by hand), published,
// or computed. "Computed" means an extrapolated linearly implicit Euler code of
// order 12 in 113-bit arithmetic, run at two tolerances whose results agree to
// more digits than are given here, and checked against the published values
// named.
package odetest

import "math"

// Problem is an initial value problem dy/dt = f(t, y), y(T0) = Y0, with its
// solution at T1.
type Problem struct {
	Name   string
	T0, T1 float64
	Y0     []float64

	// Scale is the noise floor of each component per unit of relative
	// tolerance: AbsTol = RelTol·Scale resolves the solution.
	Scale []float64

	Func       func(dydt []float64, t float64, y []float64)
	Jac        func(jac, dfdt []float64, t float64, y []float64) // row-major
	Autonomous bool

	// Ref is the solution at T1; Judged lists the components it is good for
	// (nil means all: others have decayed below the noise floor).
	Ref    []float64
	Judged []int
	Source string
}

// Error returns the largest relative error of y against Ref over the judged
// components.
func (p *Problem) Error(y []float64) float64 {
	worst := 0.0
	judge := func(i int) {
		e := math.Abs(y[i] - p.Ref[i])
		if p.Ref[i] != 0 {
			e /= math.Abs(p.Ref[i])
		}
		if !(e <= worst) {
			worst = e
		}
	}
	if p.Judged == nil {
		for i := range p.Ref {
			judge(i)
		}
		return worst
	}
	for _, i := range p.Judged {
		judge(i)
	}
	return worst
}

// Standard returns the standard problems with published or exact solutions.
func Standard() []*Problem {
	return []*Problem{Robertson(), RobertsonLong(), HIRES(), Oregonator(), VanDerPol(), Kaps(), Arenstorf()}
}

// Robertson is Robertson's autocatalytic reaction (1966) to t = 40.
func Robertson() *Problem {
	return &Problem{
		Name: "Robertson", T1: 40, Y0: []float64{1, 0, 0}, Scale: []float64{1e-3, 1e-8, 1e-3},
		Func: func(d []float64, _ float64, y []float64) {
			a, b := 1e4*y[1]*y[2]-0.04*y[0], 3e7*y[1]*y[1]
			d[0], d[1], d[2] = a, -a-b, b
		},
		Jac: func(j, _ []float64, _ float64, y []float64) {
			j[0], j[1], j[2] = -0.04, 1e4*y[2], 1e4*y[1]
			j[7] = 6e7 * y[1]
			j[3], j[4], j[5] = 0.04, -1e4*y[2]-j[7], -1e4*y[1]
		},
		Autonomous: true,
		Ref:        []float64{0.715827068719405, 9.18553476455776e-6, 0.284163745745830},
		Source:     "computed, 15 digits; an independent code at 1e-12 agrees to 14",
	}
}

// RobertsonLong is Robertson's problem to t = 1e11.
func RobertsonLong() *Problem {
	p := Robertson()
	p.Name, p.T1 = "Robertson, long", 1e11
	p.Scale = []float64{1e-12, 1e-17, 1e-3}
	p.Ref = []float64{2.08334014970129e-8, 8.33336077033478e-14, 0.999999979166515}
	p.Source = "computed; Hairer & Wanner II (1996), IV.10, and the Test Set for IVP Solvers agree to 13.7 digits"
	return p
}

// HIRES is the photomorphogenesis problem of Schäfer (1975).
func HIRES() *Problem {
	return &Problem{
		Name: "HIRES", T1: 321.8122, Y0: []float64{1, 0, 0, 0, 0, 0, 0, 0.0057},
		Scale: []float64{1e-4, 1e-4, 1e-4, 1e-4, 1e-4, 1e-4, 1e-4, 1e-4},
		Func: func(d []float64, _ float64, y []float64) {
			r := 280 * y[5] * y[7]
			d[0] = -1.71*y[0] + 0.43*y[1] + 8.32*y[2] + 0.0007
			d[1] = 1.71*y[0] - 8.75*y[1]
			d[2] = -10.03*y[2] + 0.43*y[3] + 0.035*y[4]
			d[3] = 8.32*y[1] + 1.71*y[2] - 1.12*y[3]
			d[4] = -1.745*y[4] + 0.43*y[5] + 0.43*y[6]
			d[5] = -r + 0.69*y[3] + 1.71*y[4] - 0.43*y[5] + 0.69*y[6]
			d[6] = r - 1.81*y[6]
			d[7] = -r + 1.81*y[6]
		},
		Jac: func(j, _ []float64, _ float64, y []float64) {
			a, b := 280*y[7], 280*y[5]
			j[0], j[1], j[2] = -1.71, 0.43, 8.32
			j[8], j[9] = 1.71, -8.75
			j[18], j[19], j[20] = -10.03, 0.43, 0.035
			j[25], j[26], j[27] = 8.32, 1.71, -1.12
			j[36], j[37], j[38] = -1.745, 0.43, 0.43
			j[43], j[44], j[45], j[46], j[47] = 0.69, 1.71, -0.43-a, 0.69, -b
			j[53], j[54], j[55] = a, -1.81, b
			j[61], j[62], j[63] = -a, 1.81, -b
		},
		Autonomous: true,
		Ref: []float64{7.37131257332567e-4, 1.44248572631618e-4, 5.88872974096758e-5, 1.17565134328315e-3,
			2.38635619883133e-3, 6.23896825274280e-3, 2.84999839518577e-3, 2.85000160481423e-3},
		Source: "published, Hairer & Wanner II (1996), IV.10, to 15 digits",
	}
}

// Oregonator is the model of Field & Noyes (1974) of the
// Belousov–Zhabotinskii reaction.
func Oregonator() *Problem {
	const s, q, w = 77.27, 8.375e-6, 0.161
	return &Problem{
		Name: "Oregonator", T1: 360, Y0: []float64{1, 2, 3}, Scale: []float64{1e-2, 1e-2, 1e-2},
		Func: func(d []float64, _ float64, y []float64) {
			d[0] = s * (y[1] + y[0]*(1-q*y[0]-y[1]))
			d[1] = (y[2] - (1+y[0])*y[1]) / s
			d[2] = w * (y[0] - y[2])
		},
		Jac: func(j, _ []float64, _ float64, y []float64) {
			j[0], j[1] = s*(1-2*q*y[0]-y[1]), s*(1-y[0])
			j[3], j[4], j[5] = -y[1]/s, -(1+y[0])/s, 1/s
			j[6], j[8] = w, -w
		},
		Autonomous: true,
		Ref:        []float64{1.00081487031852, 1228.17852154988, 132.055494284651},
		Source:     "published, Hairer & Wanner II (1996), IV.10; computed agrees to 12.8 digits",
	}
}

// VanDerPol is the relaxation oscillator of van der Pol (1926) with
// ε = 1e-6.
func VanDerPol() *Problem {
	return &Problem{
		Name: "van der Pol", T1: 2, Y0: []float64{2, 0}, Scale: []float64{1e-2, 1e-2},
		Func: func(d []float64, _ float64, y []float64) {
			d[0], d[1] = y[1], ((1-y[0]*y[0])*y[1]-y[0])*1e6
		},
		Jac: func(j, _ []float64, _ float64, y []float64) {
			j[1] = 1
			j[2], j[3] = (-2*y[0]*y[1]-1)*1e6, (1-y[0]*y[0])*1e6
		},
		Autonomous: true,
		Ref:        []float64{1.7061677321705, -0.8928097010248},
		Source:     "published, Hairer & Wanner II (1996), IV.10, to 13 digits",
	}
}

// Kaps is the singular perturbation problem of Kaps (1981) with ε = 1e-8.
func Kaps() *Problem {
	const e = 1e8
	return &Problem{
		Name: "Kaps", T1: 1, Y0: []float64{1, 1}, Scale: []float64{1e-3, 1e-3},
		Func: func(d []float64, _ float64, y []float64) {
			d[0] = -(2+e)*y[0] + e*y[1]*y[1]
			d[1] = y[0] - y[1] - y[1]*y[1]
		},
		Jac: func(j, _ []float64, _ float64, y []float64) {
			j[0], j[1], j[2], j[3] = -(2 + e), 2*e*y[1], 1, -1-2*y[1]
		},
		Autonomous: true,
		Ref:        []float64{math.Exp(-2), math.Exp(-1)},
		Source:     "exact: y1 = exp(-2t), y2 = exp(-t)",
	}
}

// Arenstorf is a periodic orbit of the restricted three-body problem, not
// stiff.
func Arenstorf() *Problem {
	const m = 0.012277471
	y0 := []float64{0.994, 0, 0, -2.00158510637908252}
	return &Problem{
		Name: "Arenstorf", T1: 17.06521656015796, Y0: y0, Scale: []float64{1e-3, 1e-3, 1e-3, 1e-3},
		Func: func(d []float64, _ float64, y []float64) {
			a, b := y[0]+m, y[0]-1+m
			r1, r2 := a*a+y[1]*y[1], b*b+y[1]*y[1]
			r1, r2 = r1*math.Sqrt(r1), r2*math.Sqrt(r2)
			d[0], d[1] = y[2], y[3]
			d[2] = y[0] + 2*y[3] - (1-m)*a/r1 - m*b/r2
			d[3] = y[1] - 2*y[2] - (1-m)*y[1]/r1 - m*y[1]/r2
		},
		Jac: func(j, _ []float64, _ float64, y []float64) {
			a, b := y[0]+m, y[0]-1+m
			s1, s2 := a*a+y[1]*y[1], b*b+y[1]*y[1]
			r1, r2 := (1-m)/(s1*math.Sqrt(s1)), m/(s2*math.Sqrt(s2))
			q1, q2 := 3*r1/s1, 3*r2/s2
			j[2], j[7] = 1, 1
			j[8], j[9], j[11] = 1-r1-r2+q1*a*a+q2*b*b, (q1*a+q2*b)*y[1], 2
			j[12], j[13], j[14] = (q1*a+q2*b)*y[1], 1-r1-r2+(q1+q2)*y[1]*y[1], -2
		},
		Autonomous: true,
		Ref:        y0,
		Source:     "published period, Hairer, Nørsett & Wanner I (1993), II.0; closes to 12 digits",
	}
}
