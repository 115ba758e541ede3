package interior

import (
	"errors"
	"math"

	"cycle/carbon/cite"
	"cycle/carbon/units"
	"cycle/ode/elementary"
)

// core is an optional core that cools into the mantle: an indicator of the
// dynamo's lifetime. Its heat flow follows the boundary layer at its surface
// by the law of the mantle above it,
//
//	Q_c = Q_c,ref (A_c/A_c,E) (ΔT/ΔT_ref)^(1+β) (d/d_E)^(3β−1) (ρg/(ρg)_E)^β
//
// with ΔT = T_c − T_m, both as potential temperatures, so that the adiabats
// of mantle and core drop out. The viscosity of the lowest mantle is taken
// constant (own choice). The core cools without freezing (no inner core, no
// latent heat):
//
//	M_c c_c dT_c/dt = −Q_c
//
// A dynamo needs more than the core conducts along its adiabat, which grows
// with the core's area, gravity and temperature:
//
//	Q_c > Q_ad (M_c/M_c,E)(T_c/T_c,ref)
type core struct {
	Flow    float64 // Q_c,ref, W; 0 leaves the core out
	Excess  float64 // ΔT_ref, K
	Start   float64 // ΔT at the start, K
	Heat    float64 // c_c, J/kg/K
	Adiabat float64 // Q_ad, W
	scale   float64 // W
	cooling float64 // −1/(M_c c_c), K/yr per W
	adiabat float64 // W/K
	beta    float64
}

func newCore() core { return core{Excess: 1500, Start: 2200, Heat: 840, Adiabat: 10e12} }

func (c *core) fields() []units.Field {
	return []units.Field{
		{Key: "core_flow", Kind: units.Power, Unit: "TW", Min: 0, Max: 50e12, Published: units.Range{Lo: 5e12, Hi: 17e12}, Off: true, Doc: "heat flow from the core at the reference state; 0 leaves the core out", Source: cite.Own("off unless wanted; 8-12 TW in reviews"), Value: &c.Flow},
		{Key: "core_excess", Kind: units.Interval, Unit: "K", Min: 100, Max: 4000, Doc: "temperature of the core above the mantle at the reference state, both as potential temperatures", Source: cite.Own("with core_start it gives the reference flow at 4.57 Gyr"), Value: &c.Excess},
		{Key: "core_start", Kind: units.Interval, Unit: "K", Min: 0, Max: 4000, Doc: "temperature of the core above the mantle at the start", Source: cite.Own("a core that formed hot"), Value: &c.Start},
		{Key: "core_heat", Kind: units.SpecificHeat, Min: 100, Max: 5000, Doc: "specific heat of the core", Source: cite.Ref{Note: "liquid iron at core pressure", Trust: cite.Unsure}, Value: &c.Heat},
		{Key: "core_adiabat", Kind: units.Power, Unit: "TW", Min: 0, Max: 50e12, Published: units.Range{Lo: 10e12, Hi: 15e12}, Doc: "heat the Earth's core conducts along its adiabat; more than that drives a dynamo", Source: cite.Ref{Work: cite.Pozzo2012, Note: "lower end, as the inner core's help is left out", Trust: cite.Memory}, Value: &c.Adiabat},
	}
}

// bind takes the mantle's reference temperature and what planet and β make of the flow.
func (c *core) bind(p *Planet, beta, tRef, geometry float64) error {
	if c.Flow == 0 {
		return nil
	}
	if !(p.CoreFraction > 0) {
		return errors.New("core_flow needs a core: the planet's core fraction is 0")
	}
	ratio := p.CoreRadius / earth.CoreRadius
	c.beta = beta
	c.scale = c.Flow * ratio * ratio * geometry
	mass := p.Mass * p.CoreFraction
	c.cooling = -units.Year / (mass * c.Heat)
	c.adiabat = c.Adiabat * mass / (earth.Mass * earth.CoreFraction) / (tRef + c.Excess)
	return nil
}

// flow returns the heat in W that leaves the core, its rate of change of
// temperature in K/yr, and whether it drives a dynamo.
func (c *core) flow(mantle, tc float64) (q, rate float64, dynamo bool) {
	x := (tc - mantle) / c.Excess
	if x != 0 {
		q = c.scale * x * elementary.Exp(c.beta*elementary.Log(math.Abs(x)))
	}
	return q, c.cooling * q, q > c.adiabat*tc
}
