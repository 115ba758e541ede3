package weathering

import (
	"fmt"

	"cycle/carbon/cite"
	"cycle/carbon/units"
	"cycle/ode/elementary"
)

// Foley2015 is the law of Foley (2015) with its supply limit:
//
//	F_w  = F_ws {1 − exp[−(F_k/F_ws) k]}
//	k    = (p/p₀)^β · (p_sat/p_sat₀)^a · exp((E/R)(1/T₀ − 1/T))
//	F_ws = A_land E_max χ ρ/m̄
//
// k is the kinetic rate with rain proportional to the vapour pressure p_sat, and
// F_ws the flux when all eroded rock weathers. F_k is solved so that F_w is the
// reference flux W₀ at the reference state; with κ = F_k/F_ws = −ln(1 − W₀/F_ws)
//
//	W/W₀ = (1 − exp(−κ k))/(1 − exp(−κ))
//
// The paper has T₀ = 285 K, p₀ = 33 Pa, F_k = 6e12 mol/yr, F_ws = 9.5625e15 mol/yr.
type Foley2015 struct {
	Beta      float64 // β
	A         float64 // a
	E         float64 // E, J/mol
	Erosion   float64 // E_max, m/yr
	Cations   float64 // χ, mass fraction of Ca, Mg, K, Na in rock
	Density   float64 // ρ, kg/m³
	MolarMass float64 // m̄, kg per mol of cations

	invT0 float64 // 1/T₀, K⁻¹
	slope float64 // E/R + a L, K
	kappa float64 // κ
	full  float64 // exp(−κ) − 1
	limit float64 // F_ws, mol/yr
}

// foleyVapour is the slope of ln p_sat over −1/T in K,
//
//	p_sat = 610 Pa · exp[−(2469 kJ/kg · 0.018 kg/mol / 8.314)(1/T − 1/273)]
//
// after Foley (2015).
const foleyVapour = 2469e3 * 0.018 / 8.314

func newFoley2015() Law {
	return &Foley2015{Beta: 0.55, A: 0.3, E: 42e3, Erosion: 0.01, Cations: 0.08, Density: 2500, MolarMass: 0.032}
}

func (l *Foley2015) kinetic(e *Env) float64 {
	return elementary.Exp(l.Beta*e.LnP - l.slope*(1/e.T-l.invT0))
}

// Relative returns W/W₀.
func (l *Foley2015) Relative(e *Env) float64 { return expm1(-l.kappa*l.kinetic(e)) / l.full }

// Saturation returns F_w/F_ws.
func (l *Foley2015) Saturation(e *Env) float64 { return -expm1(-l.kappa * l.kinetic(e)) }

// Fields lists the parameters of k and F_ws.
func (l *Foley2015) Fields() []units.Field {
	ref := cite.Ref{Work: cite.Foley2015, Trust: cite.Checked}
	return []units.Field{
		exponentField("exponent", units.Range{}, "exponent β of the CO2 pressure", ref, &l.Beta),
		{Key: "vapour_exponent", Min: 0, Max: 2, Doc: "exponent a of the saturation vapour pressure, for rain", Source: ref, Value: &l.A},
		energyField(units.Range{}, "activation energy E", ref, &l.E),
		{Key: "erosion", Kind: units.Speed, Unit: "mm/yr", Min: 1e-6, Max: 1, Published: units.Range{Lo: 1e-3, Hi: 1e-2}, Doc: "largest erosion E_max", Source: ref, Value: &l.Erosion},
		{Key: "cations", Min: 1e-3, Max: 1, Doc: "mass fraction χ of Ca, Mg, K and Na in rock", Source: ref, Value: &l.Cations},
		{Key: "density", Kind: units.Density, Unit: "kg/m3", Min: 500, Max: 8000, Doc: "density ρ of the regolith", Source: ref, Value: &l.Density},
		{Key: "molar_mass", Kind: units.MolarMass, Unit: "g/mol", Min: 0.01, Max: 0.1, Doc: "mean molar mass m̄ of the cations", Source: ref, Value: &l.MolarMass},
	}
}

// Bind solves κ.
func (l *Foley2015) Bind(ref Reference) error {
	l.invT0 = 1 / ref.T
	l.slope = l.E/units.GasConstant + l.A*foleyVapour
	l.limit = ref.Land * l.Erosion * l.Cations * l.Density / l.MolarMass
	var err error
	if l.kappa, l.full, err = saturation(ref.Flux, l.limit); err != nil {
		return fmt.Errorf("erosion: %w", err)
	}
	return nil
}

// Range is not stated.
func (l *Foley2015) Range() Range { return Range{} }
