package ocean

import (
	"fmt"
	"math"
	"testing"

	"cycle/carbon/units"
)

// TestFullSystem holds the full system to states worked out from the printed
// equations; no published worked example was found.
func TestFullSystem(t *testing.T) {
	const src = "worked out from the printed equations, total boron of Uppström 1974"
	var rows []row
	for _, c := range []struct {
		t, dic, alk, pH, co2, hco3, co3, micro, calcite, aragonite float64
	}{
		{25, 2.0e-3, 2.3e-3, 8.045791, 1.123715e-5, 1.775393e-3, 2.133703e-4, 395.7875, 5.13633, 3.38553},
		{15, 2.0e-3, 2.3e-3, 8.198922, 9.810826e-6, 1.780980e-3, 2.092088e-4, 261.9068, 4.98659, 3.20247},
		{25, 2.1e-3, 2.3e-3, 7.857656, 1.884564e-5, 1.930695e-3, 1.504590e-4, 663.7686, 3.62191, 2.38732},
		{0, 2.15e-3, 2.3e-3, 8.126706, 1.966631e-5, 2.019762e-3, 1.105718e-4, 312.8085, 2.65031, 1.66549},
		{25, 2.2e-3, 2.3e-3, 7.618493, 3.507642e-5, 2.071835e-3, 9.308859e-5, 1235.4384, 2.24086, 1.47703},
		{25, 5.0e-3, 5.0e-3, 7.366038, 1.434391e-4, 4.737536e-3, 1.190252e-4, 5052.1172, 2.86522, 1.88857},
		{25, 2.0e-2, 1.9e-2, 7.027501, 1.225318e-3, 1.856081e-2, 2.138683e-4, 43157.35, 5.14832, 3.39344},
	} {
		s := beaker(t, 35, c.t, c.dic, c.alk, Boron)
		w, k := sea(35, c.t)
		in := fmt.Sprintf("%g °C, DIC %g, ALK %g", c.t, c.dic, c.alk)
		add := func(law string, got, want float64) {
			rows = append(rows, row{law, in, got, want, 1e-5 * want, exact, src})
		}
		rows = append(rows, row{"pH", in, ph(s.H), c.pH, 1e-5, exact, src})
		add("CO2", s.CO2, c.co2)
		add("HCO3", s.HCO3, c.hco3)
		add("CO3", s.CO3, c.co3)
		add("fCO2", s.P/units.BarPerAtm*1e6, c.micro)
		add("Ω calcite", s.Omega, c.calcite)
		add("Ω aragonite", s.Omega*k.Calcite/w.Aragonite(c.t+273.15), c.aragonite)
		add("DIC", s.DIC, c.dic)
		add("ALK", s.Alk, c.alk)
	}

	w, k := sea(35, 25)
	h := math.Pow(10, -8.2)
	alk := 2.34e-3 - w.Boron*k.KB/(k.KB+h) - k.KW/h + h
	co2 := alk / (k.K1 / h * (1 + 2*k.K2/h))
	s := w.speciate(&k, co2/k.K0, co2, h)
	lee := beaker(t, 35, 25, 2.0e-3, 2.3e-3, BoronLee)
	const from = "pH 8.2, ALK 2.34e-3, 25 °C"
	run(t, append(rows,
		row{"ALK", from, s.Alk, 2.34e-3, 1e-12, exact, src},
		row{"DIC", from, s.DIC, 1.9365197e-3, 2e-8, exact, src},
		row{"CO2", from, s.CO2, 7.308394e-6, 1e-10, exact, src},
		row{"HCO3", from, s.HCO3, 1.646907e-3, 2e-8, exact, src},
		row{"CO3", from, s.CO3, 2.823043e-4, 3e-9, exact, src},
		row{"fCO2", from, s.P * 1e6, 257.4114, 3e-3, exact, src},
		row{"Ω calcite", from, s.Omega, 6.79574, 7e-5, exact, src},
		row{"pH", "boron of Lee et al. 2010", ph(lee.H), 8.040139, 1e-5, exact, src},
		row{"fCO2", "boron of Lee et al. 2010", lee.P / units.BarPerAtm * 1e6, 401.4959, 4e-3, exact, src},
		row{"pH", "DIC/ALK 2.0/2.2, no boron, no water", ph(guess(&k, 1, 2.0e-3, 2.2e-3)), 8.0412377, 1e-6, exact, "closed form of the carbonate alkalinity"},
		row{"tropical surface pH", "DIC 2.0, ALK 2.3, 25 °C", ph(beaker(t, 35, 25, 2.0e-3, 2.3e-3, Boron).H), 8.05, 0.05, common, "modern tropical surface ocean"},
	))
}

// TestRevelle: d ln p/d ln DIC at constant alkalinity.
func TestRevelle(t *testing.T) {
	const e = 1e-4
	up, down := beaker(t, 35, 25, 2.0e-3*math.Exp(e), 2.3e-3, Boron), beaker(t, 35, 25, 2.0e-3*math.Exp(-e), 2.3e-3, Boron)
	run(t, []row{{"Revelle factor", "DIC 2.0, ALK 2.3, 25 °C", math.Log(up.P/down.P) / (2 * e), 9.5956, 1e-3, exact, "worked out from the printed equations"}})
}

// TestSaturation: pH falls by exactly 0.5 per tenfold pCO₂.
func TestSaturation(t *testing.T) {
	const src = "h = √(K0 p K1 K2/[CO3]), S = 35, 25 °C"
	at := func(omega, calcium, atm float64) State {
		l := newSaturated().(*Saturated)
		l.Omega, l.Calcium = omega, calcium
		if err := l.Bind(earth); err != nil {
			t.Fatal(err)
		}
		c, _ := l.Carbon(atm*units.BarPerAtm, 298.15)
		return l.Solve(c, 0, 298.15)
	}
	ca := Calcium(35)
	rows := []row{
		{"HCO3", "Ω 1, 280e-6 atm", at(1, ca, 280e-6).HCO3, 6.588944e-4, 7e-10, exact, src},
		{"HCO3", "Ω 1, 2.8e-3 atm", at(1, ca, 2.8e-3).HCO3, 2.083607e-3, 2e-9, exact, src},
		{"pH", "Ω 1, 1 atm", ph(at(1, ca, 1).H), 5.989196, 1e-6, exact, src},
		{"pH", "Ω 5, 280e-6 atm", ph(at(5, ca, 280e-6).H), 8.115101, 1e-6, exact, src},
		{"pH", "tenfold calcium, Ω 1", ph(at(1, 10*ca, 280e-6).H) - ph(at(1, ca, 280e-6).H), -0.5, 1e-12, exact, src},
		{"Ω", "Ω 5", at(5, ca, 280e-6).Omega, 5, 0, exact, src},
	}
	for i, want := range []float64{7.765616, 7.265616, 6.765616, 6.265616} {
		p := 280e-6 * math.Pow(10, float64(i))
		rows = append(rows, row{"pH", fmt.Sprintf("Ω 1, %g atm", p), ph(at(1, ca, p).H), want, 1e-6, exact, src},
			row{"pH step", fmt.Sprintf("Ω 5, %g atm", p), ph(at(5, ca, 10*p).H) - ph(at(5, ca, p).H), -0.5, 1e-12, exact, src})
	}
	run(t, rows)
}

// TestConventions pins how gas pressure becomes moles.
func TestConventions(t *testing.T) {
	n := MolesPerBar(earth)
	const pure, arith = "column of pure CO2, g 9.81 m/s², 5.101e14 m²", "arithmetic with 12.011 g/mol of carbon"
	l := bound(t, Laws[0]).(*Saturated)
	c, _ := l.Carbon(280e-6, 288.15)
	air := 5.148e18 * earth.Gravity / earth.Area / units.PascalPerBar // bar
	run(t, []row{
		{"mol per bar", "Earth", n, 1.1815e20, 1e17, exact, pure},
		{"bar of 5e21 mol", "Earth", 5e21 / n, 42.3, 0.05, exact, pure},
		{"mol/yr of 7 bar/Gyr", "Earth", 7 * n / 1e9, 8.27e11, 5e8, exact, pure},
		{"bar/Gyr of 7.5e12 mol/yr", "Earth", 7.5e12 * 1e9 / n, 63.5, 0.05, exact, pure},
		{"Myr to 0.12 bar at 7.5e12 mol/yr", "no ocean", 0.12 * n / 7.5e12 / 1e6, 1.890, 1e-3, exact, pure},
		{"Myr to 0.3 bar at 7.5e12 mol/yr", "no ocean", 0.3 * n / 7.5e12 / 1e6, 4.726, 1e-3, exact, pure},
		{"trace factor", "air of 28.965 g/mol", Trace, 1.519, 5e-4, exact, "M_CO2/M_air"},
		{"280 ppm as a trace gas, mol", "5.148e18 kg of air", 280e-6 * air * Trace * n, 4.976e16, 5e12, exact, "280e-6 × 5.148e18 kg / 28.965 g/mol"},
		{"1 ppm as a trace gas, mol", "5.148e18 kg of air", 1e-6 * air * Trace * n, 1.7773e14, 5e9, exact, "1e-6 × 5.148e18 kg / 28.965 g/mol"},
		{"pre-industrial air, mol", "280 ppm", 280e-6 * air * Trace * n, 590e15 / 12.011, 1e15, memory, "590 Pg C"},
		{"ocean inventory, mol", "38,000 Pg C", 38000e15 / 12.011, 3.164e18, 1e15, exact, arith},
		{"carbonate, mol", "6e7 Pg C", 6e7 * 1e15 / 12.011, 5e21, 1e19, memory, "sedimentary carbonate about 5e21 mol"},
		{"surface carbon, mol", "saturated, 280 ppm, 15 °C", c, 3.164e18, 0.4e18, memory, "38,000 Pg C in the ocean, mostly colder and deeper water"},
		{"share of the air", "default of fraction", newFraction().(*Fraction).Share, 280e-6 * n / (38590e15 / 12.011), 5e-5, exact, arith},
		{"fixed carbonate", "0.30 Emol at 2.2e-4 mol/kg", 2.2e-4 * earth.Mass, 0.30e18, 5e15, exact, "floor of the surface carbon"},
	})
	// Trace CO2 in air against the pure column: what the convention costs.
	if lost := (Trace - 1) * n * 280e-6 / c; lost > 0.01 {
		t.Errorf("the pure column misses %.2g of the surface carbon at 280 ppm, want below 1 %%", lost)
	}
}
