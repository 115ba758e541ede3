// Package outgas holds the laws by which carbon returns from the solid planet
// to its surface.
//
// Three reservoirs feed the surface: the mantle through ridges, seafloor
// carbonate through arcs when it is subducted, continental carbonate through
// metamorphism. Every law moves carbon between reservoirs; none makes any.
package outgas

import (
	"cycle/carbon/cite"
	"cycle/carbon/units"
)

// Reference is the carbon cycle of an Earth-sized planet at the reference state,
// in which the carbonate reservoirs are steady.
type Reference struct {
	Age                     float64 // yr
	Ridge, Arc, Metamorphic float64 // sources, mol/yr
	Land, Seafloor          float64 // sinks, mol/yr
	Continental, Mantle     float64 // reservoirs, mol
}

// Total returns the sum of the sources, mol/yr.
func (r Reference) Total() float64 { return r.Ridge + r.Arc + r.Metamorphic }

// Deposited returns the fraction of land-weathering carbonate that is laid down
// on the seafloor, so that seafloor carbonate is steady:
//
//	δ = (ridge + arc − seafloor weathering)/land weathering
//
// ridge + arc is what subduction takes away, the ridge's part of it going to
// the mantle.
func (r Reference) Deposited() float64 { return (r.Ridge + r.Arc - r.Seafloor) / r.Land }

// Input is what the fluxes depend on.
type Input struct {
	Age                           float64 // yr
	Crust                         float64 // crust production per area relative to the reference
	Dilution                      float64 // (area/mantle mass) relative to the Earth's
	Area                          float64 // area relative to the Earth's
	Scale                         float64 // the scenario's factor on all sources
	Mantle, Seafloor, Continental float64 // reservoirs, mol
}

// Fluxes is what one law moves, mol/yr.
type Fluxes struct {
	Ridge       float64 // mantle to surface
	Arc         float64 // seafloor carbonate to surface
	Metamorphic float64 // continental carbonate to surface
	Subducted   float64 // seafloor carbonate to arc and mantle together
	Foundered   float64 // continental carbonate to the mantle
}

// Law gives the fluxes.
type Law interface {
	Fields() []units.Field
	// Bind is called once after the parameters are set.
	Bind(ref Reference) error
	Fluxes(in *Input) Fluxes
}

// Entry is one row of the table of laws.
type Entry struct {
	Name   string
	Doc    string
	Form   string
	Source []cite.Ref
	New    func() Law
}

// Laws lists the laws; the first is the default.
var Laws = []Entry{
	{"recycling", "ridges, arcs and metamorphism, each in proportion to its reservoir and to crust production", "F = k·s·C per reservoir; arcs return a fixed part of what is subducted", []cite.Ref{{Work: cite.SleepZahnle2001, Note: "structure", Trust: cite.Memory}, {Work: cite.Foley2015, Note: "structure", Trust: cite.Memory}}, newRecycling},
	{"steady", "a constant flux from the mantle", "F = F₀", []cite.Ref{cite.Own("the simplest assumption")}, newSteady},
	{"powerlaw", "a flux that declines with age as a power", "F = F₀ (t/t₀)^(−n m)", []cite.Ref{{Work: cite.KrissansenTotton2018, Trust: cite.Memory}}, newPowerLaw},
	{"table", "the user's table of total outgassing", "F(t) from the table", []cite.Ref{{Note: "the user's table"}}, newTable},
}
