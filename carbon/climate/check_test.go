package climate

import (
	"fmt"
	"math"
	"sort"
	"strings"
	"testing"

	"cycle/carbon/cite"
	"cycle/carbon/units"
)

// Kinds of check. Independent values come from an evaluation of the same
// published formula by other code.
const (
	published   = "published"
	exact       = "exact"
	independent = "independent"
	practice    = "common practice, no source"
	memory      = "from memory"
)

// check compares one number with one that did not come from this package.
type check struct {
	law, input     string
	got, want, tol float64 // tol is absolute
	kind, source   string
}

// run tests the rows and reports how many there are of each kind.
func run(t *testing.T, checks []check) {
	t.Helper()
	count := map[string]int{}
	for _, c := range checks {
		count[c.kind]++
		if c.kind == "" || c.source == "" {
			t.Errorf("%s %s: no kind or source", c.law, c.input)
		}
		if !(math.Abs(c.got-c.want) <= c.tol) {
			t.Errorf("%s %s: got %.9g, want %.9g ± %.2g (%s: %s)", c.law, c.input, c.got, c.want, c.tol, c.kind, c.source)
		}
	}
	var parts []string
	for k, n := range count {
		parts = append(parts, fmt.Sprintf("%d %s", n, k))
	}
	sort.Strings(parts)
	t.Logf("%d checks: %s", len(checks), strings.Join(parts, ", "))
}

// out is the outgoing radiation of a law at its defaults.
func out(law string, t, p float64) float64 { return radiation(law).Outgoing(t, p, math.Log(p)) }

func radiation(law string) Radiation {
	for _, e := range Radiations {
		if e.Name == law {
			return e.New()
		}
	}
	panic(law)
}

// grid is a table of outgoing radiation: rows are pressures, columns temperatures.
func grid(law, source string, tol float64, temps []float64, rows [][]float64) (cs []check) {
	for _, r := range rows {
		for i, t := range temps {
			cs = append(cs, check{law, fmt.Sprintf("F at %g bar, %g K", r[0], t), out(law, t, r[0]), r[i+1], tol, independent, source})
		}
	}
	return cs
}

func TestRadiationChecks(t *testing.T) {
	var cs []check
	add := func(c ...check) { cs = append(cs, c...) }

	add(grid("williams1997", "Williams & Kasting 1997, appendix", 2e-3, []float64{200, 250, 273.15, 288, 300, 340}, [][]float64{
		{1e-5, 70.634, 180.639, 225.670, 250.595, 267.828, 300.920},
		{1e-4, 67.210, 169.942, 213.922, 239.272, 257.580, 299.887},
		{2.8e-4, 66.522, 168.283, 211.714, 236.678, 254.656, 295.747},
		{3.3e-4, 66.401, 168.039, 211.387, 236.288, 254.209, 295.065},
		{1e-3, 65.319, 165.945, 208.764, 233.310, 250.936, 290.772},
		{1e-2, 60.754, 155.199, 196.591, 220.943, 238.904, 283.716},
		{0.1, 53.488, 130.930, 168.172, 191.838, 210.614, 269.026},
		{1, 47.672, 93.044, 118.652, 137.097, 153.312, 217.175},
		{3, 47.673, 71.830, 87.282, 99.717, 111.562, 165.732},
	})...)
	add(grid("kadoya2019", "Kadoya & Tajika 2019, appendix", 2e-3, []float64{150, 200, 250, 273.15, 288, 300, 320, 350}, [][]float64{
		{1e-5, 23.950, 82.009, 179.936, 226.847, 250.300, 263.240, 271.508, 269.207},
		{2.8e-4, 23.605, 78.259, 168.668, 212.024, 234.968, 249.095, 262.571, 267.648},
		{1e-3, 23.500, 76.277, 163.831, 205.566, 227.941, 242.140, 257.090, 266.329},
		{1e-2, 23.338, 71.429, 152.169, 191.342, 213.305, 228.239, 246.729, 263.345},
		{0.1, 23.442, 64.916, 129.987, 163.326, 184.118, 200.138, 224.586, 253.528},
		{1, 24.345, 57.214, 84.737, 99.817, 113.907, 129.128, 162.985, 222.950},
		{3, 22.782, 56.667, 67.551, 74.686, 82.167, 90.476, 111.004, 174.448},
		{10, 22.653, 56.909, 62.834, 63.621, 65.201, 67.340, 73.453, 97.319},
	})...)
	add(
		check{"kadoya2019", "F at 288 K, 280 ppm against williams1997", out("kadoya2019", 288, 2.8e-4), out("williams1997", 288, 2.8e-4), 2, independent, "two fits to different radiation models"},
		check{"kadoya2019", "S/S0 at 273 K, 10 bar, albedo 0.45", 4 * out("kadoya2019", 273, 10) / (1 - 0.45) / units.SolarFlux, 0.35, 0.015, published, "maximum greenhouse of Kopparapu et al. 2013 and 2014: 0.35 to 0.356"},
		check{"kadoya2019", "F at 1 bar from below", radiation("kadoya2019").Outgoing(288, 1, -1e-13), 113.907, 2e-3, independent, "Kadoya & Tajika 2019, appendix"},
		between("kadoya2019", "radiation limit, W/m²", out("kadoya2019", 350, 2.8e-4), 262, 310, published, "Goldblatt et al. 2013: 282; Kasting 1988: 310; fit within 20 W/m²"),
		between("williams1997", "radiation limit, W/m²", out("williams1997", 360, 2.8e-4), 282, 310, published, "Goldblatt et al. 2013: 282; Kasting 1988: 310"),
	)

	// The paper on early glaciation: A, B and F.
	const ice = "Caldeira & Kasting 1992, Nature 359"
	for _, v := range [][6]float64{
		{1e-4, -341.0082, 2.0257, 130.974, 212.305, 242.386}, {3e-4, -326.4, 1.953, 128.649, 207.062, 236.064}, {1e-3, -319.0025, 1.9089, 125.769, 202.411, 230.758},
		{1e-2, -309.6047, 1.8322, 117.301, 190.865, 218.073}, {0.1, -272.7627, 1.6069, 101.640, 166.156, 190.019},
	} {
		a, b := caldeiraLine(math.Log(v[0] / 3e-4))
		add(check{"caldeira1992", fmt.Sprint("A at ", v[0], " bar"), a, v[1], 1e-4, independent, ice},
			check{"caldeira1992", fmt.Sprint("B at ", v[0], " bar"), b, v[2], 5.1e-5, independent, ice})
		for i, temp := range []float64{233, 273.15, 288} {
			add(check{"caldeira1992", fmt.Sprintf("F at %g bar, %g K", v[0], temp), out("caldeira1992", temp, v[0]), v[i+3], 1e-3, independent, ice})
		}
	}

	const life = "Caldeira & Kasting 1992, Nature 360"
	for _, v := range [][6]float64{
		{1e-5, 18.615, 22.274, 30.367, 38.501, 54.242}, {2.8e-4, 21.953, 25.261, 32.875, 40.659, 55.876}, {3e-4, 22.050, 25.347, 32.947, 40.721, 55.923},
		{1e-3, 24.032, 27.117, 34.425, 41.987, 56.870}, {1e-2, 30.467, 32.835, 39.161, 46.008, 59.819},
	} {
		for i, temp := range []float64{263, 273, 288, 300, 320} {
			add(check{"caldeira1992life", fmt.Sprintf("ΔT at %g bar, %g K", v[0], temp), caldeiraWarming(temp, math.Log(v[0])), v[i+1], 1e-3, independent, life})
		}
	}
	add(check{"caldeira1992life", "greenhouse warming at 288 K", caldeiraWarming(288, math.Log(3e-4)), 33, 0.2, practice, "the greenhouse effect of today's Earth is 33 K"})
	for _, v := range [][3]float64{{1368, 2.8e-4, 287.32654}, {1368, 3.2e-4, 287.87357}, {1368, 5.6e-4, 290.39181}, {1361, 2.8e-4, 286.09855}, {1500, 1e-5, 309.53734}} {
		got := steady(radiation("caldeira1992life"), &CaldeiraAlbedo{iceEdge: defaultIceEdge}, v[0]/4, v[1], 275, 315)
		add(check{"caldeira1992life", fmt.Sprintf("steady T at %g W/m², %g bar", v[0], v[1]), got, v[2], 1e-4, independent, life})
	}

	// The line alone: the smooth minimum lowers F by w e^(−(F∞−L)/w) and less.
	const north = "North, Cahalan & Coakley 1981"
	for _, law := range []string{"linear_myhre1998", "linear_byrne2014"} {
		l := radiation(law).(*Linear)
		add(check{law, "L at 15 °C", l.line(288.15, ln278ppm), 234.65, 1e-9, exact, north + ": A + B t"},
			check{law, "L at -10 °C", l.line(263.15, ln278ppm), 182.40, 1e-9, exact, north + ": A + B t"},
			check{law, "dL/dT", l.line(289, ln278ppm) - l.line(288, ln278ppm), 2.09, 1e-12, exact, north},
			check{law, "F at 15 °C", l.Outgoing(288.15, 278e-6, ln278ppm), 234.65, 0.005, exact, north + ", 47 W/m² below the limit"},
			check{law, "F far above the limit", l.Outgoing(380, 278e-6, ln278ppm), 282, 1e-4, exact, "the radiation limit"},
			check{law, "F where L is at the limit", l.Outgoing(273.15+(282-203.3)/2.09, 278e-6, ln278ppm), 282 - 6*math.Ln2, 1e-9, exact, "limit − w ln 2"})
	}
	forcing := func(law string, c float64) float64 {
		l := radiation(law).(*Linear)
		return l.line(280, ln278ppm) - l.line(280, math.Log(c))
	}
	const c0 = 278e-6
	add(
		check{"linear_myhre1998", "forcing of 2x", forcing("linear_myhre1998", 2*c0), 3.708337, 1e-6, independent, "Myhre et al. 1998: 5.35 ln(C/C0)"},
		check{"linear_myhre1998", "forcing of 2x", forcing("linear_myhre1998", 2*c0), 3.7, 0.05, published, "Myhre et al. 1998"},
		check{"linear_myhre1998", "forcing of 4x", forcing("linear_myhre1998", 4*c0), 7.416675, 1e-6, independent, "Myhre et al. 1998"},
		check{"linear_myhre1998", "forcing of 10x", forcing("linear_myhre1998", 10*c0), 12.318830, 1e-6, independent, "Myhre et al. 1998"},
		check{"linear_byrne2014", "forcing of 2x", forcing("linear_byrne2014", 2*c0), 3.874920, 1e-6, memory, "Byrne & Goldblatt 2014"},
		check{"linear_byrne2014", "forcing of 10x", forcing("linear_byrne2014", 10*c0), 14.317493, 1e-6, memory, "Byrne & Goldblatt 2014"},
		check{"linear_byrne2014", "forcing of 10,000 ppm", forcing("linear_byrne2014", 1e-2), 24.066059, 1e-6, memory, "Byrne & Goldblatt 2014"},
	)
	run(t, cs)
}

// between is a check on an interval.
func between(law, input string, got, lo, hi float64, kind, source string) check {
	return check{law, input, got, (lo + hi) / 2, (hi - lo) / 2, kind, source}
}

// steady returns the balanced temperature between two temperatures.
func steady(r Radiation, a Albedo, sun, p, lo, hi float64) float64 {
	return root(func(t float64) float64 { return Imbalance(r, a, sun, t, p) }, lo, hi)
}

// root returns where f falls through 0, by bisection.
func root(f func(float64) float64, lo, hi float64) float64 {
	if !(f(lo) > 0 && f(hi) < 0) {
		return math.NaN()
	}
	for i := 0; i < 60; i++ {
		if mid := (lo + hi) / 2; f(mid) > 0 {
			lo = mid
		} else {
			hi = mid
		}
	}
	return (lo + hi) / 2
}

// TestWalker: the greenhouse formula itself, and the steady states it has
// together with the weathering law of the same paper,
//
//	0.3 ln P + (T − 285)/13.7 = ln v
func TestWalker(t *testing.T) {
	const source = "Walker, Hays & Kasting 1981; numeric roots of the closed form"
	sun0 := units.SolarFlux / 4
	world := func(n float64) (Radiation, Albedo) {
		r, a := &Walker1981{N: n}, newConstant()
		if _, err := SolveFree(r, a, Reference{T: 285, P: 280e-6, Sun: sun0}); err != nil {
			t.Fatal(err)
		}
		return r, a
	}
	var cs []check
	r, a := world(0.364)
	cs = append(cs, check{"walker1981", "Tₑ at 285 K", math.Pow(out("walker1981", 285, 280e-6)/units.Sigma, 0.25), 253.4, 1e-9, exact, "2 Tₑ = 285 + 226.4 − 4.6"})
	for _, v := range [][3]float64{{2, 1, 286.3202}, {10, 1, 291.0355}, {100, 1, 304.9900}, {1, 0.7, 241.7655}, {100, 0.7, 261.7555}} {
		cs = append(cs, check{"walker1981", fmt.Sprintf("T at %g PAL, S/S0 = %g", v[0], v[1]), steady(r, a, v[1]*sun0, v[0]*280e-6, 201, 319), v[2], 1e-4, independent, "Walker, Hays & Kasting 1981"})
	}
	for _, v := range [][5]float64{
		{0.364, 1, 1, 1, 285}, {0.364, 2, 1, 4.47528, 288.33700}, {0.364, 0.5, 1, 0.16909, 282.80874}, {0.364, 1, 0.7, 137.36663, 264.76789},
		{0.364, 1, 0.9, 7.41699, 276.76449}, {0.364, 1, 1.1, 0.09701, 294.58850}, {0.364, 3, 0.7, 350.23680, 275.97210}, {0.364, 5, 0.7, 504.12556, 281.47349},
		{0.346, 2, 1, 4.61653, 288.20928}, {0.346, 1, 0.7, 164.18109, 264.03501}, {0.346, 1, 0.9, 7.76747, 276.57473},
	} {
		r, a := world(v[0])
		temp := func(lnP float64) float64 { return steady(r, a, v[2]*sun0, 280e-6*math.Exp(lnP), 201, 319) }
		lo, hi := math.Log(1e-3), math.Log(2000.)
		for i := 0; i < 60; i++ {
			if mid := (lo + hi) / 2; 0.3*mid+(temp(mid)-285)/13.7 < math.Log(v[1]) {
				lo = mid
			} else {
				hi = mid
			}
		}
		in := fmt.Sprintf("n = %g, v = %g, S/S0 = %g", v[0], v[1], v[2])
		cs = append(cs, check{"walker1981", "P, " + in, math.Exp(lo), v[3], math.Max(1e-4*v[3], 5e-6), independent, source},
			check{"walker1981", "T, " + in, temp(lo), v[4], 1e-4, independent, source})
	}
	run(t, cs)
}

func TestAlbedoChecks(t *testing.T) {
	var cs []check
	const wk = "Williams & Kasting 1997, appendix"
	for _, v := range [][9]float64{
		{0.2, 0.5, 3e-4, 0.2690, 0.2508, 0.2220, 0.2374, 0.2267, 0.1960}, {0.2, 0.5, 1, 0.2788, 0.2635, 0.2368, 0.2604, 0.2501, 0.2210},
		{0.3, 0.5, 3e-4, 0.3448, 0.3210, 0.2885, 0.2995, 0.2859, 0.2432}, {0.6, 0.5, 3e-4, 0.5808, 0.5403, 0.4968, 0.4950, 0.4725, 0.3942},
		{0.3, 0.25, 5, 0.4304, 0.4204, 0.3971, 0.4301, 0.4189, 0.3857}, {0.1, 1.0, 3e-4, 0.1369, 0.1262, 0.1026, 0.1255, 0.1174, 0.0967},
	} {
		// A surface of one albedo, through the law where it does not blend.
		l := &WilliamsAlbedo{Warm: v[0], Ice: v[0], iceEdge: defaultIceEdge, Mu: v[1]}
		in := fmt.Sprintf("a_s = %g, µ = %g, %g bar, ", v[0], v[1], v[2])
		for i, temp := range []float64{230, 260, 280, 280.001, 288, 320} {
			got := l.Planetary(temp, v[2])
			switch i {
			case 2:
				got = williamsCold(v[0], v[1], temp, v[2])
			case 3:
				got = williamsWarm(v[0], v[1], temp, v[2])
			}
			cs = append(cs, check{"williams1997", in + fmt.Sprint(temp, " K"), got, v[3+i], 1e-4, independent, wk})
		}
		cs = append(cs, check{"williams1997", in + "blend at 280 K", l.Planetary(280, v[2]), (williamsCold(v[0], v[1], 280, v[2]) + williamsWarm(v[0], v[1], 280, v[2])) / 2, 1e-12, exact, "half of each branch"})
	}
	const life = "Caldeira & Kasting 1992, Nature 360"
	c := newCaldeiraAlbedo()
	for _, v := range [][2]float64{{273, 0.32636}, {288, 0.29949}, {300, 0.28076}, {320, 0.25503}} {
		cs = append(cs, check{"caldeira1992", fmt.Sprint(v[0], " K"), c.Planetary(v[0], 1e-3), v[1], 5.1e-6, independent, life})
	}
	ramp := &Ramp{Warm: 0.3, Ice: 0.62, iceEdge: defaultIceEdge, Rayleigh: 0.1}
	layer := func(a, r float64) float64 { return 1 - (1-r)*(1-a)/(1-r*a) }
	cs = append(cs,
		check{"ramp", "at the centre", ramp.Planetary(263, 0), 0.46, 1e-12, exact, "half way between 0.3 and 0.62"},
		check{"ramp", "far above", ramp.Planetary(400, 0), 0.3, 1e-9, exact, "no ice"},
		check{"ramp", "far below", ramp.Planetary(120, 0), 0.62, 1e-9, exact, "all ice"},
		check{"ramp", "10 bar without ice", ramp.Planetary(400, 10), layer(0.3, 0.5), 1e-9, exact, "layer of r = ½ above 0.3"},
		check{"ramp", "ice fraction half a width above", ramp.IceFraction(268), (1 - math.Tanh(0.5)) / 2, 1e-12, exact, "½(1 − tanh ½)"},
		check{"williams1997", "ice at 240 K", (&WilliamsAlbedo{Warm: 0.66, Ice: 0.66, iceEdge: defaultIceEdge, Mu: 0.5}).Planetary(240, 3e-4), 0.62, 0.005, memory, "North 1975: co-albedo 0.38 over ice"},
	)
	run(t, cs)
}

func TestSaturationChecks(t *testing.T) {
	var cs []check
	const wp, if97 = "Wagner & Pruß 2002", "IAPWS-IF97 region 4"
	for _, v := range [][3]float64{
		{273.16, 611.6571, 611.6570}, {288.15, 1705.677, 1705.745}, {300, 3536.718, 3536.58941}, {320, 10546.38, 10545.34}, {340, 27189.00, 27187.38},
		{373.1243, 101325.0, 101325.0}, {500, 2639223, 2638897.76}, {600, 12344837, 12344314.6},
	} {
		in := fmt.Sprint(v[0], " K")
		cs = append(cs, check{"WaterLiquid", in, WaterLiquid(v[0]) * 1e5, v[1], 1e-6 * v[1], independent, wp},
			check{"WaterIF97", in, WaterIF97(v[0]) * 1e5, v[2], 1e-6 * v[2], independent, if97},
			check{"WaterLiquid", in + " against IF97", WaterLiquid(v[0]) / WaterIF97(v[0]), 1, 1.5e-4, independent, "two IAPWS laws"})
	}
	const release = "IAPWS release on IF97, table 35"
	cs = append(cs,
		check{"WaterIF97", "300 K", WaterIF97(300) / 10, 3.53658941e-3, 5e-12, published, release},
		check{"WaterIF97", "500 K", WaterIF97(500) / 10, 2.63889776, 5e-9, published, release},
		check{"WaterIF97", "600 K", WaterIF97(600) / 10, 12.3443146, 5e-8, published, release},
		check{"WaterLiquid", "triple point, Pa", WaterLiquid(273.16) * 1e5, 611.657, 5e-4, published, "triple point of water"},
		check{"WaterIce", "triple point, Pa", WaterIce(273.16) * 1e5, 611.657, 5e-3, published, "triple point of water"},
		check{"WaterPressure", "triple point, Pa", WaterPressure(273.16) * 1e5, 611.657, 5e-3, published, "triple point of water"},
		check{"WaterIce", "200 K, Pa", WaterIce(200) * 1e5, 0.162691, 1e-6, independent, "Murphy & Koop 2005"},
		check{"WaterIce", "250 K, Pa", WaterIce(250) * 1e5, 76.0239, 1e-4, independent, "Murphy & Koop 2005"},
		check{"WaterPressure", "250 K is over ice", WaterPressure(250), WaterIce(250), 0, exact, "below the triple point"},
		check{"WaterPressure", "300 K is over liquid", WaterPressure(300), WaterLiquid(300), 0, exact, "above the triple point"},
		check{"WaterLiquid", "critical point, bar", WaterLiquid(WaterCriticalT), 220.64, 1e-9, exact, wp},
		check{"BoilingPoint", "1 atm", BoilingPoint(units.BarPerAtm), 373.1243, 1e-4, published, "normal boiling point"},
		check{"BoilingPoint", "triple-point pressure", BoilingPoint(WaterTripleP), 273.16, 1e-3, published, "triple point of water"},
		check{"BoilingPoint", "critical pressure", BoilingPoint(WaterCriticalP), WaterCriticalT, 0, exact, "critical point"},
	)
	const sw, k91 = "Span & Wagner 1996", "Kasting 1991"
	for _, v := range [][3]float64{{150, 842.646, 849.312}, {194.686, 101329.5, 103215.3}, {240, 1282503.8, 1282903.8}, {273.15, 3485028, 3481658}, {300, 6713066, 6714112}} {
		in := fmt.Sprint(v[0], " K")
		cs = append(cs, check{"CO2Pressure", in, CO2Pressure(v[0]) * 1e5, v[1], 1e-6 * v[1], independent, sw},
			check{"CO2Kasting1991", in, CO2Kasting1991(v[0]) * 1e5, v[2], 1e-6 * v[2], independent, k91},
			check{"CO2Pressure", in + " against Kasting 1991", CO2Pressure(v[0]) / CO2Kasting1991(v[0]), 1, 0.03, independent, "two laws"})
	}
	cs = append(cs,
		check{"co2Ice", "triple point, Pa", co2Ice(216.592) * 1e5, 517950, 0.01, independent, sw},
		check{"co2Liquid", "triple point, Pa", co2Liquid(216.592) * 1e5, 517950, 60, independent, sw},
		check{"kastingLiquid", "216.592 K, Pa", kastingLiquid(216.592) * 1e5, 518855, 1, independent, k91},
		check{"CO2Pressure", "sublimation at 1 atm, K", CO2Pressure(194.686) / units.BarPerAtm, 1, 1e-4, published, "normal sublimation point of CO2 194.686 K"},
		check{"CO2Pressure", "critical point, bar", CO2Pressure(CO2CriticalT), 73.773, 1e-9, exact, sw},
	)
	run(t, cs)
}

func TestLimitAndLossChecks(t *testing.T) {
	var cs []check
	best, at := 0.0, 0.0
	for x := 240.0; x < 270; x += 1e-3 {
		if f := SteamFlux(x, 0.01, 9.8); f > best {
			best, at = f, x
		}
	}
	const n = "Nakajima, Hayashi & Abe 1992"
	cs = append(cs,
		check{"SteamFlux", "maximum", best, 385.309, 0.01, independent, n},
		check{"SteamFlux", "maximum", best, 385, 0.5, published, n},
		check{"SteamFlux", "temperature of the maximum", at, 254.814, 2e-3, independent, n},
		check{"SunForLimit", "282 W/m², albedo 0.25", SunForLimit(282, 0.25), 1504, 0.5, exact, "4F/(1 − A)"},
		check{"SunForLimit", "282 W/m², albedo 0.3", SunForLimit(282, 0.3), 1611.4, 0.05, exact, "4F/(1 − A)"},
		check{"SunForLimit", "291 W/m², albedo 0.25", SunForLimit(291, 0.25), 1552, 0.5, exact, "4F/(1 − A)"},
		check{"SunForLimit", "in solar constants", SunForLimit(282, 0.25) / units.SolarFlux, 1.105, 5e-4, exact, "4F/(1 − A)"},
	)
	const h = "Hunten 1973, 1.4e21 kg of water"
	for _, v := range [][3]float64{{1e-3, 5.0e10, 11.628}, {3e-3, 1.5e11, 3.876}, {1e-2, 5.0e11, 1.163}} {
		in := fmt.Sprint("f = ", v[0])
		cs = append(cs, check{"EscapeFlux", in, EscapeFlux(v[0]), v[1], 1e-3 * v[1], independent, h},
			check{"LossTime", in + ", Gyr", LossTime(1.4e21, v[0], units.EarthArea) / 1e9, v[2], 1e-3 * v[2], independent, h})
	}
	s := NewStratosphere()
	cs = append(cs,
		check{"Stratosphere", "340 K under 1 bar", s.Mixing(340, 1), 3e-3, 1e-4, memory, "Kasting 1988"},
		between("Stratosphere", "288 K under 1 bar, ppm", 1e6*s.Mixing(288, 1), 2, 6, practice, "today's stratosphere holds a few ppm of water"),
		check{"Stratosphere", "600 K without air", s.Mixing(600, 0), 1, 1e-3, exact, "steam alone"},
	)
	run(t, cs)
}

func checkField(t *testing.T, law string, f units.Field) {
	t.Helper()
	if f.Source.IsZero() || f.Doc == "" || f.Value == nil {
		t.Errorf("%s %s: no source, doc or value", law, f.Key)
		return
	}
	if err := f.Check(*f.Value); err != nil {
		t.Errorf("%s %s: default: %v", law, f.Key, err)
	}
	if p := f.Published; p.Stated() && !(f.Min <= p.Lo && p.Lo <= p.Hi && p.Hi <= f.Max && p.Holds(*f.Value)) {
		t.Errorf("%s %s: published %v, allowed %g to %g, default %g", law, f.Key, p, f.Min, f.Max, *f.Value)
	}
	if f.Source.Trust == cite.Seen {
		t.Errorf("%s %s: claims to have been seen in the source", law, f.Key)
	}
}
