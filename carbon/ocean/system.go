package ocean

import (
	"fmt"
	"math"

	"cycle/carbon/units"
)

// MolesPerBar returns the CO₂ in an atmosphere of pure CO₂ per bar of surface
// pressure,
//
//	n = A/(g M_CO₂)
//
// in mol/bar. The column is counted as if it were CO₂ all through: exact where
// CO₂ makes the pressure, which is where the atmosphere's share of the surface
// carbon counts. As a trace gas in air the same partial pressure holds
// M_CO₂/M_air = 1.519 times as much (Trace), then 1-2 % of the surface carbon.
func MolesPerBar(p Planet) float64 {
	return units.PascalPerBar * p.Area / (p.Gravity * units.MolarMassCO2)
}

// MolarMassAir is the mean molar mass of dry air in kg/mol (Trenberth & Smith 2005).
const MolarMassAir = 0.028965

// Trace is by how much more CO₂ a partial pressure means when CO₂ is a trace
// gas in air than in the convention of MolesPerBar.
const Trace = units.MolarMassCO2 / MolarMassAir

// speciate fills the state from the dissolved CO₂ and h = [H⁺]:
//
//	[HCO₃⁻] = K1 [CO₂]/h   [CO₃²⁻] = K2 [HCO₃⁻]/h
//	DIC = [CO₂] + [HCO₃⁻] + [CO₃²⁻]
//	Alk = [HCO₃⁻] + 2 [CO₃²⁻] + B_T KB/(KB + h) + KW/h − h
//	Ω = [Ca²⁺][CO₃²⁻]/Ksp
func (w *Seawater) speciate(k *Constants, p, co2, h float64) State {
	hco3 := k.K1 * co2 / h
	co3 := k.K2 * hco3 / h
	return State{
		P: p, H: h, CO2: co2, HCO3: hco3, CO3: co3,
		DIC:   co2 + hco3 + co3,
		Alk:   hco3 + 2*co3 + w.Boron*k.KB/(k.KB+h) + k.KW/h - h,
		Omega: w.Calcium * co3 / k.Calcite,
	}
}

// none is the state of an ocean that cannot be.
func none() State {
	n := math.NaN()
	return State{n, n, n, n, n, n, n, n}
}

// check refuses a planet without a surface.
func check(p Planet) error {
	if !(p.Area > 0 && p.Gravity > 0 && p.Mass >= 0) || math.IsInf(p.Area+p.Gravity+p.Mass, 1) {
		return fmt.Errorf("ocean: area %g m², gravity %g m/s² and ocean mass %g kg do not make a planet", p.Area, p.Gravity, p.Mass)
	}
	return nil
}
