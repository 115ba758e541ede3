package climate

import (
	"math"

	"cycle/carbon/cite"
	"cycle/carbon/units"
	"cycle/ode/elementary"
)

// Triple and critical points of water and CO₂.
const (
	WaterTripleT      = 273.16     // K
	WaterTripleP      = 611.657e-5 // bar
	WaterCriticalT    = 647.096    // K
	WaterCriticalP    = 220.64     // bar
	CO2TripleT        = 216.592    // K
	CO2TripleP        = 5.1795     // bar
	CO2CriticalT      = 304.1282   // K
	CO2CriticalP      = 73.773     // bar
	blendHalf         = 1.0        // K, half-width over which two laws are blended at a triple point
	kastingTripleT    = 216.56     // K, where the branches of Kasting (1991) meet
	pascal            = 1 / units.PascalPerBar
	waterVapourSlope  = 7.85951783
	carbonVapourSlope = 7.0602087
)

// WaterLiquid returns the saturation pressure in bar of water over liquid at T in
// K (Wagner & Pruß 2002, the IAPWS-95 auxiliary equation):
//
//	ln(p/p_c) = (T_c/T)(−7.85951783 v + 1.84408259 v^1.5 − 11.7866497 v³
//	            + 22.6807411 v^3.5 − 15.9618719 v⁴ + 1.80122502 v^7.5),  v = 1 − T/T_c
//
// Good from 273.16 to 647.096 K. Above the critical point, where there is no
// saturation, it is continued with the first term alone, an own choice with the
// same value and slope.
func WaterLiquid(t float64) float64 {
	v := 1 - t/WaterCriticalT
	f := -waterVapourSlope * v
	if v > 0 {
		s := math.Sqrt(v) // v^1.5 = s³, v^3.5 = s⁷, v^7.5 = s¹⁵
		v3 := v * v * v
		f += v * (1.84408259*s + v*v*(-11.7866497+22.6807411*s-15.9618719*v+1.80122502*v3*v*s))
	}
	return WaterCriticalP * elementary.Exp(WaterCriticalT/t*f)
}

// WaterIce returns the saturation pressure in bar of water over ice at T in K
// (Murphy & Koop 2005), good from 110 K to the triple point:
//
//	p = exp(9.550426 − 5723.265/T + 3.53068 ln T − 0.00728332 T) Pa
func WaterIce(t float64) float64 {
	return pascal * elementary.Exp(9.550426-5723.265/t+3.53068*elementary.Log(t)-0.00728332*t)
}

// WaterPressure returns the saturation pressure in bar of water at T in K: over
// ice below the triple point, over liquid above. Own choice: within 1 K of the
// triple point the two are blended, which changes neither by more than 0.2 %.
func WaterPressure(t float64) float64 {
	switch w := smoothStep((t - WaterTripleT + blendHalf) / (2 * blendHalf)); w {
	case 0:
		return WaterIce(t)
	case 1:
		return WaterLiquid(t)
	default:
		return (1-w)*WaterIce(t) + w*WaterLiquid(t)
	}
}

// WaterIF97 returns the saturation pressure in bar of water over liquid after
// region 4 of the IAPWS Industrial Formulation 1997 (Wagner et al. 2000), for
// 273.15 K to 647.096 K, where its temperature is held. It is a second opinion on
// WaterLiquid.
func WaterIF97(t float64) float64 {
	t = math.Min(math.Max(t, 273.15), WaterCriticalT)
	const (
		n1, n2, n3, n4, n5 = 1167.0521452767, -724213.16703206, -17.073846940092, 12020.824702470, -3232555.0322333
		n6, n7, n8, n9     = 14.915108613530, -4823.2657361591, 405113.40542057, -0.23855557567849
		n10                = 650.17534844798
	)
	th := t + n9/(t-n10)
	a := (th+n1)*th + n2
	b := (n3*th+n4)*th + n5
	c := (n6*th+n7)*th + n8
	x := 2 * c / (-b + math.Sqrt(b*b-4*a*c))
	return 10 * x * x * x * x // MPa to bar
}

// BoilingPoint returns the temperature in K at which water's saturation pressure
// is p in bar, the inverse of WaterPressure: below the triple-point pressure,
// where there is no liquid, it is where ice sublimates. It is held at the critical
// temperature above the critical pressure, and at 100 K far below.
func BoilingPoint(p float64) float64 {
	if !(p < WaterCriticalP) {
		return WaterCriticalT
	}
	const coldest = 100.0
	if p <= WaterPressure(coldest) {
		return coldest
	}
	// ln p is nearly straight in 1/T: Newton's method from the Clausius-Clapeyron
	// relation, kept inside its bracket.
	lnp := elementary.Log(p)
	lo, hi := coldest, WaterCriticalT
	t := 1 / (1/373.1243 - (lnp-elementary.Log(units.BarPerAtm))/4890)
	for i := 0; i < 60; i++ {
		if !(t > lo && t < hi) {
			t = (lo + hi) / 2
		}
		f := elementary.Log(WaterPressure(t)) - lnp
		if f > 0 {
			hi = t
		} else {
			lo = t
		}
		const h = 1e-3
		slope := (elementary.Log(WaterPressure(t+h)) - elementary.Log(WaterPressure(t-h))) / (2 * h)
		step := f / slope
		t -= step
		if math.Abs(step) < 1e-11*t {
			break
		}
	}
	return t
}

// CO2Pressure returns the saturation pressure in bar of CO₂ at T in K (Span &
// Wagner 1996): sublimation below the triple point, vapour pressure above,
//
//	ln(p/p_t) = (T_t/T)(−14.740846 s + 2.4327015 s^1.9 − 5.3061778 s^2.9),       s = 1 − T/T_t
//	ln(p/p_c) = (T_c/T)(−7.0602087 v + 1.9391218 v^1.5 − 1.6463597 v² − 3.2995634 v⁴),  v = 1 − T/T_c
//
// Own choices: within 1 K of the triple point the two are blended, and above the
// critical point, where there is no saturation, the first term goes on alone.
func CO2Pressure(t float64) float64 {
	switch w := smoothStep((t - CO2TripleT + blendHalf) / (2 * blendHalf)); w {
	case 0:
		return co2Ice(t)
	case 1:
		return co2Liquid(t)
	default:
		return (1-w)*co2Ice(t) + w*co2Liquid(t)
	}
}

func co2Liquid(t float64) float64 {
	v := 1 - t/CO2CriticalT
	f := -carbonVapourSlope * v
	if v > 0 {
		f += v * (1.9391218*math.Sqrt(v) + v*(-1.6463597-3.2995634*v*v))
	}
	return CO2CriticalP * elementary.Exp(CO2CriticalT/t*f)
}

func co2Ice(t float64) float64 {
	s := 1 - t/CO2TripleT
	f := -14.740846 * s
	if s > 0 {
		f += elementary.Exp(1.9*elementary.Log(s)) * (2.4327015 - 5.3061778*s)
	}
	return CO2TripleP * elementary.Exp(CO2TripleT/t*f)
}

// CO2Kasting1991 returns the saturation pressure in bar of CO₂ at T in K as used
// by Kasting (1991), p in atm:
//
//	log₁₀ p = 6.760956 − 1284.07/(T − 4.718) + 1.256e-4 (T − 143.15)                    T < 216.56 K
//	log₁₀ p = 3.128082 − 867.2124/T + 1.865612e-2 T − 7.248820e-5 T² + 9.3e-8 T³       above
//
// Own choices: the branches, which meet in value, are blended within 1 K, and above
// the critical point the law is continued as CO2Pressure is.
func CO2Kasting1991(t float64) float64 {
	switch w := smoothStep((t - kastingTripleT + blendHalf) / (2 * blendHalf)); w {
	case 0:
		return kastingIce(t)
	case 1:
		return kastingLiquid(t)
	default:
		return (1-w)*kastingIce(t) + w*kastingLiquid(t)
	}
}

func kastingIce(t float64) float64 {
	return units.BarPerAtm * elementary.Exp(math.Ln10*(6.760956-1284.07/(t-4.718)+1.256e-4*(t-143.15)))
}

func kastingLiquid(t float64) float64 {
	x := math.Min(t, CO2CriticalT)
	log := 3.128082 - 867.2124/x + x*(1.865612e-2+x*(-7.248820e-5+x*9.3e-8))
	return units.BarPerAtm * elementary.Exp(math.Ln10*log+carbonVapourSlope*(1-CO2CriticalT/math.Max(t, CO2CriticalT)))
}

// CondensationEntry is one row of the table of CO₂ saturation laws.
type CondensationEntry struct {
	Name     string
	Doc      string
	Form     string
	Source   []cite.Ref
	Pressure func(t float64) float64 // bar at T in K
}

// Condensations lists the laws of CO₂ saturation; the first is the default.
var Condensations = []CondensationEntry{
	{"span1996", "reference equation of state, sublimation and vapour pressure", "ln(p/p_t) = (T_t/T) Σ cᵢ s^kᵢ,  ln(p/p_c) = (T_c/T) Σ dᵢ v^lᵢ", []cite.Ref{{Work: cite.SpanWagner1996, Trust: cite.Checked}, cite.Own("blend at the triple point, continuation above the critical point")}, CO2Pressure},
	{"kasting1991", "handbook fits as used for early Mars", "log₁₀ p = 6.760956 − 1284.07/(T − 4.718) + 1.256e-4 (T − 143.15),  T < 216.56 K", []cite.Ref{{Work: cite.Kasting1991, Trust: cite.Checked}, cite.Own("blend of the branches, continuation above the critical point")}, CO2Kasting1991},
}
