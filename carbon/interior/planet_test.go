package interior

import (
	"fmt"
	"math"
	"testing"

	"cycle/carbon/units"
)

func TestPlanet(t *testing.T) {
	const zeng, valencia = "Zeng, Sasselov & Jacobsen 2016, formula", "Valencia, O'Connell & Sasselov 2006: R ~ M^0.27"
	var rows []row
	for _, c := range []struct{ mass, core, radius float64 }{
		{1, 0.33, 1.000700}, {1, 0.26, 1.015400}, {2, 0.33, 1.206878}, {5, 0.33, 1.546019}, {8, 0.20, 1.803315},
	} {
		p := NewPlanet(c.mass, c.core)
		rows = append(rows, row{"R/R_E", fmt.Sprint(c.mass, c.core), p.Radius / units.EarthRadius, c.radius, 1e-6, exact, zeng})
	}
	ge := gravitational * units.EarthMass / (units.EarthRadius * units.EarthRadius)
	one := NewPlanet(1, 0.33)
	relative := func(m float64) float64 { return NewPlanet(m, 0.33).Radius / one.Radius }
	shell := 4. / 3 * math.Pi * (math.Pow(one.Radius, 3) - math.Pow(one.CoreRadius, 3))
	run(t, append(rows,
		row{"g/g_E", "5, 0.33", NewPlanet(5, 0.33).Gravity / ge, 2.091898, 2e-6, exact, zeng},
		row{"R ratio", "2", relative(2), 1.205808, 0.01, memory, valencia},
		row{"R ratio", "5", relative(5), 1.544265, 0.01, memory, valencia},
		row{"R ratio", "10", relative(10), 1.862087, 0.01, memory, valencia},
		row{"g", "Earth", one.Gravity, 9.81, 0.02, common, "Earth"},
		row{"area", "Earth", one.Area, 5.101e14, 0.01e14, common, "Earth"},
		row{"core radius", "Earth", one.CoreRadius, 3480e3, 500, common, "Earth, seismology"},
		row{"mantle depth", "Earth", one.MantleDepth, 2890e3, 10e3, memory, "Schubert, Stevenson & Cassen 1980"},
		row{"mantle mass", "Earth", one.MantleMass, 4.03e24, 0.04e24, memory, "McDonough & Sun 1995"},
		row{"mantle density", "Earth", one.mantleDensity(), one.MantleMass / shell, 1e-9, exact, "mass over volume"},
		row{"core radius", "no core", NewPlanet(1, 0).CoreRadius, 0, 0, exact, "no core"},
	))
	for _, m := range []float64{0.05, 0.3, 1, 3, 8} {
		p := NewPlanet(m, 0.33)
		if d := p.CoreRadius/p.Radius - one.CoreRadius/one.Radius; math.Abs(d) > 1e-12 {
			t.Errorf("the core of a planet of %g Earth masses takes another share of its radius", m)
		}
		if math.Abs(p.Gravity*p.Radius*p.Radius/(gravitational*p.Mass)-1) > 1e-12 {
			t.Errorf("gravity of %g Earth masses", m)
		}
	}
	if r := MassRange(); r.Holds(0.3) || !r.Holds(1) || !r.Holds(8) {
		t.Errorf("mass range %v", r)
	}
	if r := CoreRange(); r.Holds(0.5) || !r.Holds(0.33) {
		t.Errorf("core range %v", r)
	}
}

// released returns the energy in J/kg that a table released from a time in
// years before present until now:
//
//	∫H dt = Σ hᵢ Cᵢ (τᵢ/ln 2)(2^(t/τᵢ) − 1)
func released(table *[4]isotope, ago, secondsPerYear float64) float64 {
	var e float64
	for i := range table {
		s := &table[i]
		e += s.power * s.content * s.halfLife / math.Ln2 * math.Expm1(ago/s.halfLife*math.Ln2)
	}
	return e * secondsPerYear
}

func TestRadiogenic(t *testing.T) {
	const ts, bse = "table of Turcotte & Schubert 2002", "composition of McDonough & Sun 1995"
	rel := func(law, in string, got, want, tol float64, kind, src string) row {
		return row{law, in, got, want, tol * want, kind, src}
	}
	var rows []row
	for i, want := range []float64{2.914e-12, 0.1252e-12, 3.274e-12, 1.077e-12} {
		s := turcotteSchubert[i]
		rows = append(rows, row{"H, W/kg", s.name, s.power * s.content, want, 0.5e-15, published, ts})
	}
	for _, c := range [][3]float64{{0, 7.38994e-12, 1}, {1, 9.05324e-12, 1.22508}, {2, 1.17506e-11, 1.59009}, {3, 1.65250e-11, 2.23615}, {4, 2.57358e-11, 3.48255}, {4.5, 3.35235e-11, 4.53637}} {
		in := fmt.Sprintf("%g Gyr ago", c[0])
		h := heating(&turcotteSchubert, c[0]*1e9)
		rows = append(rows, rel("H, W/kg", in, h, c[1], 1e-5, exact, ts), rel("H/H(0)", in, h/heating(&turcotteSchubert, 0), c[2], 1e-5, exact, ts))
	}
	const mass = 4.03e24
	for _, c := range [][3]float64{{0, 19.83, 1}, {1, 24.60, 1.2404}, {2, 32.39, 1.6333}, {3, 46.19, 2.3293}, {4, 72.66, 3.664}, {4.5, 94.88, 4.785}} {
		in := fmt.Sprintf("%g Gyr ago", c[0])
		h := heating(&bulkSilicateEarth, c[0]*1e9) * mass / 1e12
		rows = append(rows, row{"H, TW", in, h, c[1], 0.01, exact, bse}, row{"H/H(0)", in, h / (heating(&bulkSilicateEarth, 0) * mass / 1e12), c[2], 1e-3, exact, bse})
	}
	rock := (3.387e-3*240e-6 + 26.18*79.5e-9 + 98.29*20.3e-9) * 1e-6 * mass / 1e12
	total := heating(&bulkSilicateEarth, 0) * mass / 1e12
	energy := released(&turcotteSchubert, 4.5e9, units.Year)

	// The hot path against the tables, and its sum over time against the integral.
	var s sources
	s.bind(0, 1, 1, now)
	quad, n := 0.0, 4500
	for i := range n {
		a, h := now-4.5e9+4.5e9*float64(i)/float64(n), 4.5e9/float64(n)
		quad += h / 6 * (s.at(a) + 4*s.at(a+h/2) + s.at(a+h)) * units.Year
	}
	var mix sources
	mix.bind(0.25, 2, 10, now)
	run(t, append(rows,
		row{"rock formula, TW", "K 240 ppm, Th 79.5 ppb, U 20.3 ppb", rock, 19.70, 0.01, published, "McDonough, Šrámek & Wipperfurth 2020"},
		row{"H, TW", "rock formula", total, rock, 0.2, published, "McDonough, Šrámek & Wipperfurth 2020"},
		row{"H, TW", "bulk silicate Earth", total, 19.9, 3.0, published, "McDonough, Šrámek & Wipperfurth 2020"},
		row{"H, TW", "mantle without continents", total * (1 - continentShare), 13, 0.5, published, "about 7 TW in the continental crust"},
		row{"H, TW", "4.0e24 kg", heating(&turcotteSchubert, 0) * 4.0e24 / 1e12, 29.6, 0.05, exact, ts},
		rel("∫H dt, J/kg", "4.5 Gyr", energy, 2.1344066e6, 1e-7, exact, ts),
		rel("∫H dt, J/kg", "4.5 Gyr, summed up", quad, 2.1344066e6, 1e-7, exact, ts),
		row{"heating, K", "4.5 Gyr, 1200 J/kg/K", energy / 1200, 1778.67, 0.005, exact, ts},
		rel("H", "mixed tables", mix.at(now-2e9), 20*(0.75*heating(&turcotteSchubert, 2e9)+0.25*(1-continentShare)*heating(&bulkSilicateEarth, 2e9)), 1e-12, exact, "sum of the tables"),
	))
}
