package climate

import (
	"cycle/carbon/cite"
	"cycle/carbon/units"
	"cycle/ode/elementary"
)

// iceEdge is the share of the surface under ice as a smooth ramp of the global
// mean temperature, an own choice:
//
//	½[1 − tanh((T − T_c)/w)]
type iceEdge struct {
	Centre, Width float64 // T_c, w; K
}

var defaultIceEdge = iceEdge{Centre: 263, Width: 10}

// IceFraction returns the share of the surface under ice.
func (e *iceEdge) IceFraction(t float64) float64 {
	// ½(1 − tanh x) = 1/(1 + e^2x)
	return 1 / (1 + elementary.Exp(2*(t-e.Centre)/e.Width))
}

func (e *iceEdge) fields() []units.Field {
	return []units.Field{
		{Key: "centre", Kind: units.Temperature, Unit: "K", Min: 240, Max: 280, Doc: "global mean temperature at which half the surface is under ice", Source: cite.Own("a scan of ramps: keeps today's climate away from the fold"), Value: &e.Centre},
		{Key: "width", Kind: units.Interval, Unit: "K", Min: 3, Max: 40, Doc: "half-width of the ramp", Source: cite.Own("below 3 K the ice edge becomes a step"), Value: &e.Width},
	}
}
