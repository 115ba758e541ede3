package interior

import (
	"math"
	"testing"

	"cycle/carbon/units"
)

func TestSolidus(t *testing.T) {
	const katz = "Katz, Spiegelman & Langmuir 2003"
	m := bound(t, "stagnant", earth).(*Stagnant).melting
	var rows []row
	for p, want := range []float64{1085.7, 1213.5, 1331.1, 1438.5} {
		rows = append(rows, row{"solidus, °C", "GPa", solidus(float64(p)) - celsius, want, 1e-9, exact, katz})
	}
	ridge := m.column(1623, 0) * 1e9 / (3300 * earth.Gravity) / 1e3
	slope := (m.column(1633, 0) - m.column(1613, 0)) / 20 * 1e9 / (3300 * earth.Gravity) / 1e3
	// The foot of the melting column is a root of adiabat against solidus.
	foot := m.bottom(1700)
	// Gauss' rule against many trapezoids.
	sum, n := 0.0, 20000
	for i := range n {
		sum += m.fraction(1700, foot*(float64(i)+0.5)/float64(n)) * foot / float64(n)
	}
	run(t, append(rows,
		row{"liquidus, °C", "0 GPa", lherzoliteLiquidus(0) - celsius, 1475, 1e-9, exact, katz},
		row{"liquidus, °C", "2 GPa", lherzoliteLiquidus(2) - celsius, 1475 + 160 - 12.8, 1e-9, exact, katz},
		row{"foot of melting, K", "1700 K", 1700*(1+m.slope*foot) - solidus(foot), 0, 1e-9, exact, "adiabat on the solidus"},
		row{"∫F dP, GPa", "1700 K", m.column(1700, 0), sum, 2e-3 * sum, exact, "summed up"},
		row{"crust under a ridge, km", "1350 °C", ridge, 7.1, 5, memory, "White, McKenzie & O'Nions 1992: 7.1 ± 0.8 km; only the ratio is used"},
		row{"crust per temperature, km/K", "1350 °C", slope, 0.08, 0.02, memory, "0.06-0.1 km/K near present"},
		row{"largest melt fraction", "1350 °C", m.fraction(1623, 0), 0.3, 0.1, published, "about 30 % for the hotter Archean mantle, Herzberg, Condie & Korenaga 2010"},
		row{"crust production, km³/yr", "Earth", plateProduction * crustThickness / 1e9, 22, 2.2, memory, "20-24 km³/yr, Rowley 2002"},
		row{"melt", "below the solidus", m.column(1350, 0), 0, 0, exact, "no melt"},
	))
}

// TestLidLaw: the normalised law against the form of the papers,
// Q = c₁ (A k ΔT/d) θ^(−4/3) Ra^(1/3), with the reference under plates giving
// the viscosity.
func TestLidLaw(t *testing.T) {
	l := bound(t, "stagnant", earth).(*Stagnant)
	const k, rho, alpha, kappa = 4, 4000, 3e-5, 1e-6
	dRef := l.TRef - l.Surface
	// Viscosity at the reference from Q_ref = A k ΔT/d (Ra/Ra_c)^(1/3).
	ra := l.RaC * math.Pow(l.QRef/(earth.Area*k*dRef/earth.MantleDepth), 3)
	etaRef := rho * earth.Gravity * alpha * dRef * math.Pow(earth.MantleDepth, 3) / (kappa * ra)
	for tm := 1000.0; tm <= 1800; tm += 200 { // no melt
		eta := etaRef * math.Exp(l.E/units.GasConstant*(1/tm-1/l.TRef))
		dT := tm - l.Surface
		theta := l.E * dT / (units.GasConstant * tm * tm)
		_, nu, _ := rayleigh(rho, earth.Gravity, alpha, dT, earth.MantleDepth, kappa, eta, 1, 1./3, k)
		want := l.C1 * earth.Area * k * dT / earth.MantleDepth * math.Pow(theta, -4./3) * nu
		f := l.Flow(now, tm, 0)
		if f.Crust != 0 || math.Abs(f.Heat/want-1) > 1e-12 {
			t.Errorf("%g K: %g W and crust %g, want %g W and none", tm, f.Heat, f.Crust, want)
		}
	}
	// Crust is overturn times melt over the same for the Earth under plates.
	for _, mass := range []float64{0.1, 1, 5} {
		p := NewPlanet(mass, 0.33)
		l := bound(t, "stagnant", p).(*Stagnant)
		f := l.Flow(now, 2000, 0)
		q := (f.Heat - l.melt*f.Crust*(6e5+1200*(2000-288))) / p.Area
		rh := units.GasConstant * 2000 * 2000 / l.E
		lid := k * (2000 - rh - 288) / q // m
		column := l.column(2000, 3300*p.Gravity*lid*1e-9)
		want := q / rh * column / (l.QRef / earth.Area / dRef * l.column(l.TRef, 0))
		if !(want > 1) || math.Abs(f.Crust/want-1) > 1e-9 {
			t.Errorf("%g Earth masses: crust %g, want %g", mass, f.Crust, want)
		}
	}
	// Heat carried by melt.
	f := l.Flow(now, 1950, 0)
	q := l.flow * math.Exp((4./3)*math.Log(units.GasConstant*1950*1950/l.E/dRef)) * math.Exp(-l.E/units.GasConstant*(1/1950.-1/l.TRef)/3)
	carried := crustDensity * plateProduction * crustThickness / units.Year * f.Crust * (6e5 + 1200*(1950-288))
	if f.Crust <= 0 || math.Abs((f.Heat-carried)/q-1) > 1e-9 {
		t.Errorf("heat %g W less %g W by melt is not the %g W conducted", f.Heat, carried, q)
	}
	if f.Recycling != 0 {
		t.Errorf("a stagnant lid recycles %g", f.Recycling)
	}
}

// TestVolcanism: under a stagnant lid volcanism is strong at first and ends
// after 1 to 5 Gyr (Foley & Smye 2018); with plates it goes on.
func TestVolcanism(t *testing.T) {
	end := func(mass float64) (last, early float64) {
		l := bound(t, "stagnant", NewPlanet(mass, 0.33))
		m0, c0 := l.Start(0)
		history(l, 0.1, 10, m0, c0, func(age, tm, tc float64) bool {
			f := l.Flow(age, tm, tc)
			if f.Crust > 1e-3 {
				last = age / 1e9
			}
			if math.Abs(age-0.5e9) < 0.6e6 {
				early = f.Crust
			}
			return true
		})
		return last, early
	}
	last, early := end(1)
	small, _ := end(0.1)
	t.Logf("volcanism ends at %.2f Gyr on one Earth mass, %.2f Gyr on 0.1", last, small)
	p := bound(t, "plates", earth)
	tm, _ := history(p, 0.1, 0.5, 2000, 0, nil)
	with := p.Flow(0.5e9, tm, 0).Crust
	run(t, []row{
		{"end of volcanism, Gyr", "one Earth mass", last, 3, 2, published, "Foley & Smye 2018: 1-5 Gyr"},
	})
	if !(early > with) {
		t.Errorf("crust production at 0.5 Gyr is %g under a lid, %g with plates; Kite, Manga & Gaidos 2009: stronger early", early, with)
	}
	if !(small < last) {
		t.Errorf("a small planet keeps its volcanoes longer: %g against %g Gyr", small, last)
	}
}
