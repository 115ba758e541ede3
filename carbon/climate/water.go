package climate

import (
	"math"

	"cycle/carbon/cite"
	"cycle/carbon/units"
	"cycle/ode/elementary"
)

// EscapeCoefficient is the constant of diffusion-limited escape from the Earth in
// hydrogen atoms per cm² and s (Hunten 1973; Kasting & Catling 2003).
const EscapeCoefficient = 2.5e13

// EscapeFlux returns the diffusion-limited escape of hydrogen in atoms per cm² and
// s for a mixing ratio f of water in the stratosphere (Hunten 1973):
//
//	Φ = 2.5e13 f_T,   f_T = 2 f(H₂O)
//
// The other carriers of hydrogen are left out, and so is the bound that the
// star's extreme ultraviolet sets, which makes Φ an upper estimate.
func EscapeFlux(f float64) float64 { return EscapeCoefficient * 2 * f }

// WaterLoss returns the loss of water in kg/yr from a planet of the given surface
// area in m².
func WaterLoss(f, area float64) float64 {
	const (
		avogadro   = 6.02214076e23 // mol⁻¹
		molarWater = 0.01801528    // kg/mol
	)
	atoms := EscapeFlux(f) * 1e4 * area * units.Year // per yr
	return atoms / 2 / avogadro * molarWater
}

// LossTime returns the time in yr in which an ocean of the given mass in kg
// escapes.
func LossTime(ocean, f, area float64) float64 { return ocean / WaterLoss(f, area) }

// Stratosphere tells how moist the stratosphere is from the surface temperature:
//
//	1/f = 1/(f_m exp((T − T_m)/w)) + 1/q,   q = e/(e + p_dry)
//
// with e the saturation pressure of water. f_m = 3e-3 at T_m = 340 K is the moist
// greenhouse of Kasting (1988) and Kasting et al. (1993). The exponential and its
// scale w are own choices: 7.5 K gives today's 3 ppm at 288 K. f never exceeds the
// mixing ratio q at the surface.
type Stratosphere struct {
	T     float64 // T_m, K
	F     float64 // f_m
	Width float64 // w, K
}

// NewStratosphere returns the moist greenhouse with its defaults.
func NewStratosphere() *Stratosphere { return &Stratosphere{T: 340, F: 3e-3, Width: 7.5} }

// Mixing returns f at the surface temperature t in K under dry air, CO₂ included,
// of the pressure dry in bar.
func (s *Stratosphere) Mixing(t, dry float64) float64 {
	e := WaterPressure(t)
	// The exponent is bounded so that no factor overflows.
	x := s.F * elementary.Exp(math.Min((t-s.T)/s.Width, 300))
	q := e / (e + math.Max(dry, 0))
	return x * q / (x + q)
}

// Fields lists threshold, mixing ratio and scale.
func (s *Stratosphere) Fields() []units.Field {
	moist := cite.Ref{Work: cite.Kasting1988, Trust: cite.Memory}
	return []units.Field{
		{Key: "moist_temperature", Kind: units.Temperature, Unit: "K", Min: 300, Max: 380, Doc: "surface temperature at which the stratosphere turns moist", Source: moist, Value: &s.T},
		{Key: "moist_mixing_ratio", Min: 1e-4, Max: 0.1, Doc: "mixing ratio of water in the stratosphere at that temperature", Source: moist, Value: &s.F},
		{Key: "moist_width", Kind: units.Interval, Unit: "K", Min: 1, Max: 30, Doc: "warming that multiplies the mixing ratio by e", Source: cite.Own("today's stratosphere holds about 3 ppm"), Value: &s.Width},
	}
}
