package carbon

import (
	"context"
	"fmt"
	"math"

	"cycle/carbon/record"
	"cycle/carbon/star"
	"cycle/carbon/units"
)

// heldSpan is how long a planet under steady conditions is followed, yr.
const heldSpan = 12 * units.Gyr

// held returns the planet under conditions that do not change, with an
// outgassing of v mol/yr: a steady star, no pulses, an interior held by the
// variant that runs it.
func (s *Setup) held(c Conditions, v float64) (*Setup, error) {
	h := s.Clone()
	for section, law := range map[string]string{"star": "steady", "sources": "steady"} {
		if err := h.Choose(section, law); err != nil {
			return nil, err
		}
	}
	*h.Number("star.end").Value = 1e13
	*h.Number("star.luminosity").Value = 1
	// S goes with 1/d².
	h.Distance = units.AU * math.Sqrt(star.Sunlight(1, units.AU, h.Eccentricity)/c.Sunlight)
	h.Land = Step{Before: c.Land, After: c.Land, Width: 1e9}
	h.Biology = Step{Before: c.Biology, After: c.Biology, Width: 1e9}
	h.Pulses = nil
	h.Solve = "nothing"
	h.Content = 0.1 // a mantle that does not run out
	h.End = h.Start + heldSpan
	m, err := NewModel(h.Clone())
	if err != nil {
		return nil, err
	}
	h.OutgassingScale = v / (m.ref.Total() * m.area)
	return h, nil
}

// holding returns a model of a held planet.
func holding(h *Setup, c Conditions) (*Model, error) {
	m, err := NewModel(h)
	if err != nil {
		return nil, err
	}
	var still [drivers]bool
	still[driveInterior] = true
	m.hold = m.holdAtStart(still)
	m.hold.crust = c.Crust
	return m, nil
}

// Cycle integrates the limit cycle under steady conditions with an outgassing
// of v mol/yr at a relative tolerance and measures its last turn: from one loss
// of the warm branch to the next. The history itself runs ten times tighter,
// since a turn passes two folds and gathers an error of a few tolerances. The
// error says so where there is no cycle.
func Cycle(ctx context.Context, s *Setup, c Conditions, v, rtol float64) (*record.Cycle, error) {
	h, err := s.held(c, v)
	if err != nil {
		return nil, err
	}
	m, err := holding(h, c)
	if err != nil {
		return nil, err
	}
	return m.cycle(ctx, rtol/10)
}

// cycle measures the last of a few turns of a model whose drivers do not change.
func (m *Model) cycle(ctx context.Context, rtol float64) (*record.Cycle, error) {
	m.set.MaxFreezes = 5
	h, err := m.integrate(ctx, m.set.End, rtol, true)
	if err != nil {
		return nil, err
	}
	n := len(h.frozen)
	if n < 4 {
		return nil, fmt.Errorf("carbon: no limit cycle: the planet froze %d times up to %.4g Gyr, where the history %s", n, gyr(h.end), h.reason)
	}
	a, b := h.frozen[n-2], h.frozen[n-1]
	out := &record.Cycle{PeriodMyr: (b.begun() - a.begun()) / units.Myr, FrozenMyr: (a.end - a.begun()) / units.Myr,
		ColdestK: math.Inf(1), WarmestK: math.Inf(-1), LeastBar: math.Inf(1), MostBar: 0}
	out.WarmMyr = out.PeriodMyr - out.FrozenMyr
	for i := range h.rows {
		r := &h.rows[i]
		if r.Age < a.begun() || r.Age > b.begun() {
			continue
		}
		out.ColdestK, out.WarmestK = math.Min(out.ColdestK, r.Temperature), math.Max(out.WarmestK, r.Temperature)
		out.LeastBar, out.MostBar = math.Min(out.LeastBar, r.PCO2), math.Max(out.MostBar, r.PCO2)
	}
	return out, nil
}
