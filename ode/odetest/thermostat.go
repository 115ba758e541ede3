package odetest

import (
	"math"

	"cycle/ode/elementary"
)

// Thermostat is a test problem with the time scales of a planet's carbon
// cycle: surface temperature, carbon at the surface, in the crust and in the
// mantle. Its constants are chosen to make a hard problem, not to describe a
// planet. Time is in Gyr, temperature in K, carbon in 1e18 mol; the eigenvalues
// are near -3e8, -2e3, -1 and -0.1 per Gyr. Some members cross an ice–albedo
// fold, where the fast equilibrium of temperature ceases to exist.
//
//	S   = 240 / (1 + 0.2 (1 − t/4.57))            absorbed at albedo 0.3, W/m²
//	a   = warm + (cold−warm)/2 (1 − tanh((T−Ti)/Wi)) absorbed fraction's loss
//	OLR = 235 + B (T−288) − F ln(C/C0)
//	T'  = (S (1−a)/0.7 − OLR) · Heat
//	W   = W0 exp(Beta ln(C/C0) + (T−288)/Te)
//	V   = V0 exp(−t/4) M,  R = kr K,  D = kd K
//	C'  = V + R − W,  K' = W − R − D,  M' = D − V
type Thermostat struct {
	Heat, B, F, Ti, Wi, Warm, Cold float64
	W0, Beta, Te, C0               float64
	V0, Kr, Kd                     float64
}

// ThermostatT1 is the end of the interval, which starts at 0.
const ThermostatT1 = 4.5

// ThermostatScale is the noise floor of each component per unit of relative
// tolerance.
var ThermostatScale = [4]float64{1, 1e-2, 1, 1}

// ThermostatMember draws member i of an ensemble of parameters and initial
// states, from a Kronecker sequence.
func ThermostatMember(i int) (th Thermostat, y0 [4]float64) {
	var u [8]float64
	for k, p := range [...]float64{2, 3, 5, 7, 11, 13, 17, 19} {
		v := float64(i+1) * math.Sqrt(p)
		u[k] = v - math.Floor(v)
	}
	th = Thermostat{
		Heat: 1.5e8, B: 1.8 + 0.6*u[0], F: 5.35 * (0.8 + 0.6*u[1]), Ti: 262, Wi: 8 + 6*u[2], Warm: 0.29, Cold: 0.60,
		W0: 8000 * (0.4 + 0.5*u[3]), Beta: 0.2 + 0.3*u[4], Te: 10 + 8*u[5], C0: 3,
		V0: 0.4 * (0.5 + 1.2*u[6]), Kr: 0.5, Kd: 1,
	}
	y0 = [4]float64{280 + 20*u[7], 60 * (1 + 4*u[0]), 4000, 20000}
	return th, y0
}

// Func is the right-hand side.
func (p *Thermostat) Func(d []float64, t float64, y []float64) {
	_ = d[3]
	_ = y[3]
	l := elementary.Log(y[1] / p.C0)
	x := y[0] - 288
	alb := p.Warm + (p.Cold-p.Warm)/(1+elementary.Exp(2*(y[0]-p.Ti)/p.Wi))
	s := 240 / (1 + 0.2*(1-t/4.57))
	w := p.W0 * elementary.Exp(p.Beta*l+x/p.Te)
	v := p.V0 * elementary.Exp(-0.25*t) * y[3]
	r, q := p.Kr*y[2], p.Kd*y[2]
	d[0] = (s*(1-alb)/0.7 - 235 - p.B*x + p.F*l) * p.Heat
	d[1] = v + r - w
	d[2] = w - r - q
	d[3] = q - v
}

// Jac is the Jacobian of Func, row-major, and its time derivative.
func (p *Thermostat) Jac(j, dfdt []float64, t float64, y []float64) {
	_ = j[15]
	_ = dfdt[3]
	_ = y[3]
	l := elementary.Log(y[1] / p.C0)
	x := y[0] - 288
	q := 1 / (1 + elementary.Exp(2*(y[0]-p.Ti)/p.Wi)) // ½ (1 − tanh)
	alb := p.Warm + (p.Cold-p.Warm)*q
	g := 1 / (1 + 0.2*(1-t/4.57))
	s := 240 * g
	w := p.W0 * elementary.Exp(p.Beta*l+x/p.Te)
	v0 := p.V0 * elementary.Exp(-0.25*t)
	wt, wc := w/p.Te, w*p.Beta/y[1]
	j[0], j[1] = (s*2*(p.Cold-p.Warm)*q*(1-q)/(p.Wi*0.7)-p.B)*p.Heat, p.F/y[1]*p.Heat
	j[4], j[5], j[6], j[7] = -wt, -wc, p.Kr, v0
	j[8], j[9], j[10] = wt, wc, -p.Kr-p.Kd
	j[14], j[15] = p.Kd, -v0
	dfdt[0] = 240 * g * g * (0.2 / 4.57) * (1 - alb) / 0.7 * p.Heat
	dfdt[1] = -0.25 * v0 * y[3]
	dfdt[3] = 0.25 * v0 * y[3]
}
