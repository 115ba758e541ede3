// Package interior turns a planet's mass into its bulk properties and gives
// the laws by which its mantle cools and its crust is renewed.
package interior

import (
	"cycle/carbon/cite"
	"cycle/carbon/units"
)

// Planet is what follows from mass and core fraction; SI units.
type Planet struct {
	Mass         float64 // kg
	CoreFraction float64 // core mass/planet mass
	Radius       float64 // m
	Gravity      float64 // surface gravity, m/s²
	Area         float64 // m²
	CoreRadius   float64 // m
	MantleDepth  float64 // m
	MantleMass   float64 // kg
}

// Flow is the state of the interior at one time.
type Flow struct {
	Heat       float64 // heat lost by the mantle through the surface, W
	Radiogenic float64 // radiogenic heating of the mantle, W
	Core       float64 // heat from the core into the mantle, W; 0 without a core
	Relative   float64 // heat flow per area relative to the Earth's at the reference state
	Crust      float64 // crust production per area relative to the Earth's at the reference state
	Recycling  float64 // turnover of plates relative to the same; 0 under a stagnant lid
	MantleRate float64 // dT_m/dt, K/yr
	CoreRate   float64 // dT_c/dt, K/yr
	Dynamo     bool    // core heat flow above what the core conducts
}

// Law is a thermal history.
type Law interface {
	Fields() []units.Field
	// Bind is called once after the parameters are set.
	Bind(p Planet, referenceAge float64) error
	// Start returns the temperatures of mantle and core at the start, K.
	Start(age float64) (mantle, core float64)
	// HasCore reports whether the core temperature is a state.
	HasCore() bool
	// Flow evaluates the law at an age in yr and temperatures in K. It must
	// be finite and smooth for temperatures from 500 to 6000 K.
	Flow(age, mantle, core float64) Flow
	// Range returns the ages in yr for which the source or the table holds;
	// zero when not stated.
	Range() units.Range
}

// Entry is one row of the table of laws.
type Entry struct {
	Name   string
	Doc    string
	Form   string
	Source []cite.Ref
	New    func() Law
}
