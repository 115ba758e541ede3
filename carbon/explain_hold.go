package carbon

import (
	"math"

	"cycle/carbon/outgas"
	"cycle/carbon/record"
)

// driver is a slow cause that changes along a history by itself, whatever the
// climate does.
type driver int

const (
	driveSun driver = iota
	driveInterior
	driveSources
	driveLand
	driveBiology
	drivePulses
	drivers
)

// driverWords names the drivers and says what holding one still means.
var driverWords = [drivers]struct{ name, doc string }{
	driveSun:      {"sunlight", "the star's luminosity"},
	driveInterior: {"interior", "the cooling of the mantle, which slows crust production and with it outgassing and seafloor weathering"},
	driveSources:  {"outgassing", "the prescribed change of outgassing with age"},
	driveLand:     {"land", "the land fraction"},
	driveBiology:  {"biology", "the biological enhancement of weathering"},
	drivePulses:   {"pulses", "the passing disturbances; held still, there are none"},
}

// hold keeps drivers at their value of one age; the zero value holds none.
type hold struct {
	age     float64 // yr
	mantleT float64 // K
	coreT   float64 // K
	crust   float64 // crust production; 0 is what the interior gives
	still   [drivers]bool
}

// at returns the age at which a driver is to be read.
func (h *hold) at(d driver, age float64) float64 {
	if h.still[d] {
		return h.age
	}
	return age
}

// holdAt returns a hold of the given drivers at the start of the history.
func (m *Model) holdAtStart(still [drivers]bool) hold {
	h := hold{age: m.set.Start, still: still}
	h.mantleT, h.coreT = m.set.interior.law.Start(m.set.Start)
	return h
}

// changing tells which drivers change between the start and an age, with their
// values at both. The rows are those of the history; its own reservoirs are no
// drivers.
func (m *Model) changing(rows []record.Row, until float64) (is [drivers]bool, from, to [drivers]float64) {
	s := m.set
	for i := range from {
		from[i], to[i] = math.NaN(), math.NaN()
	}
	see := func(d driver, get func(r *record.Row) float64) {
		a := get(&rows[0])
		from[d], to[d] = a, a
		for i := range rows {
			v := get(&rows[i])
			if math.Abs(v-a) > 1e-9*math.Abs(a) {
				is[d] = true
			}
			if rows[i].Age <= until {
				to[d] = v
			}
		}
	}
	// What the star alone does: pulses are a driver of their own.
	clear := m.hold
	m.memo.valid = false
	m.hold.still[drivePulses] = true
	see(driveSun, func(r *record.Row) float64 { return 4 * m.drive(r.Age, r.MantleTemperature, r.CoreTemperature).sun })
	m.hold = clear
	m.memo.valid = false
	see(driveInterior, func(r *record.Row) float64 { return r.Crust })
	see(driveLand, func(r *record.Row) float64 { return r.LandFraction })
	see(driveBiology, func(r *record.Row) float64 { return r.Biology })
	first := &rows[0]
	see(driveSources, func(r *record.Row) float64 {
		// The same reservoirs and crust at both ages: what is left is the law's own age.
		f := s.sources.law.Fluxes(&outgas.Input{Age: r.Age, Crust: first.Crust, Dilution: m.dilution, Area: m.area, Scale: m.scale,
			Mantle: first.Mantle, Seafloor: first.SeafloorCarbon, Continental: first.Continental})
		return f.Ridge + f.Arc + f.Metamorphic
	})
	for _, p := range s.Pulses {
		if p.Start < until && p.Start+p.Duration > s.Start && (p.Carbon != 0 || p.Sunlight != 0) {
			is[drivePulses] = true
		}
	}
	return is, from, to
}
