package climate

import (
	"cycle/carbon/cite"
	"cycle/carbon/units"
)

// WilliamsAlbedo is the planetary albedo of Williams & Kasting (1997), appendix,
// without clouds: a quadratic in the surface albedo a_s, the cosine of the zenith
// angle µ, T and p, with one set of coefficients for 190-280 K and one for
// 280-370 K. The sets differ by up to 0.035 at 280 K; own choice: they are blended
// over 275-285 K.
//
// The surface albedo, which stands for clouds as well, is an own choice:
//
//	a_s = a_w + (a_i − a_w)·½[1 − tanh((T − T_c)/w)]
//
// a_w is solved at the reference state. T in K, p in bar; 1e-5 to 10 bar.
type WilliamsAlbedo struct {
	Warm, Ice float64 // a_w, a_i
	iceEdge           // T_c, w
	Mu        float64 // µ
}

func newWilliamsAlbedo() Albedo {
	return &WilliamsAlbedo{Warm: 0.3, Ice: 0.66, iceEdge: defaultIceEdge, Mu: 0.5}
}

var williamsAlbedoBox = Box{T: units.Range{Lo: 190, Hi: 370}, P: units.Range{Lo: 1e-5, Hi: 10}}

// williamsCold is the fit for 190-280 K: a is a_s, m is µ.
func williamsCold(a, m, t, p float64) float64 {
	return -6.8910e-1 + 1.0460*a + 7.8054e-3*t - 2.8373e-3*p - 2.8899e-1*m - 3.7412e-2*a*p - 6.3499e-3*m*p +
		2.0122e-1*a*m - 1.8508e-3*a*t + 1.3649e-4*m*t + 9.8581e-5*p*t + 7.3239e-2*a*a - 1.6555e-5*t*t + 6.5817e-4*p*p + 8.1218e-2*m*m
}

// williamsWarm is the fit for 280-370 K.
func williamsWarm(a, m, t, p float64) float64 {
	return 1.1082 + 1.5172*a - 5.7993e-3*t + 1.9705e-2*p - 1.8670e-1*m - 3.1355e-2*a*p - 1.0214e-2*m*p +
		2.0986e-1*a*m - 3.7098e-3*a*t - 1.1335e-4*m*t + 5.3714e-5*p*t + 7.5887e-2*a*a + 9.2690e-6*t*t - 4.1327e-4*p*p + 6.3298e-2*m*m
}

// Planetary returns A.
func (l *WilliamsAlbedo) Planetary(t, p float64) float64 {
	t, _ = hold(williamsAlbedoBox.T, t)
	p, _ = hold(williamsAlbedoBox.P, p)
	a := l.Warm + (l.Ice-l.Warm)*l.IceFraction(t)
	switch w := smoothStep((t - 275) / 10); w {
	case 0:
		return williamsCold(a, l.Mu, t, p)
	case 1:
		return williamsWarm(a, l.Mu, t, p)
	default:
		return (1-w)*williamsCold(a, l.Mu, t, p) + w*williamsWarm(a, l.Mu, t, p)
	}
}

// smoothStep is 0 below x = 0, 1 above x = 1 and 10x³ − 15x⁴ + 6x⁵ between, with
// two continuous derivatives.
func smoothStep(x float64) float64 {
	if x <= 0 {
		return 0
	}
	if x >= 1 {
		return 1
	}
	return x * x * x * (10 + x*(6*x-15))
}

// Free is the surface albedo without ice.
func (l *WilliamsAlbedo) Free() (string, units.Range, *float64) {
	return "surface albedo without ice", units.Range{Lo: 0, Hi: 0.6}, &l.Warm
}

// Box returns 190-370 K, 1e-5 to 10 bar.
func (l *WilliamsAlbedo) Box() Box { return williamsAlbedoBox }

// Bind needs nothing.
func (l *WilliamsAlbedo) Bind(Reference) error { return nil }

// Fields lists the surface and the zenith angle.
func (l *WilliamsAlbedo) Fields() []units.Field {
	fields := []units.Field{
		{Key: "ice", Min: 0.4, Max: 0.9, Doc: "surface albedo of ice, clouds included", Source: cite.Own("gives the planetary albedo 0.62 over ice of North 1975 at 240 K"), Value: &l.Ice},
		{Key: "zenith_cosine", Min: 0.2, Max: 1, Doc: "mean cosine µ of the zenith angle", Source: cite.Own("mean over the sunlit hemisphere"), Value: &l.Mu},
	}
	return append(fields, l.iceEdge.fields()...)
}
