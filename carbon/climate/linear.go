package climate

import (
	"cycle/carbon/cite"
	"cycle/carbon/units"
	"cycle/ode/elementary"
)

// Linear is the linear law of Budyko (1969) and North (1975) with a CO₂ forcing,
// below a radiation limit:
//
//	L = A + B (T − 273.15 K) − k x − q x²,   x = ln(p/278 ppm)
//	F = F∞ − w ln[1 + exp((F∞ − L)/w)]             W/m²
//
// F is the smooth minimum of L and the limit F∞, lower by w ln 2 where they meet.
// A and B are those of North, Cahalan & Coakley (1981); k and q those of
//
//	Myhre et al. (1998)        k = 5.35, q = 0        up to about 1000 ppm
//	Byrne & Goldblatt (2014)   k = 5.32, q = 0.39     200 to 10,000 ppm (unsure)
//
// The forcing is held above the pressure co2_max, by default the end of the
// published range, and, own choice, below 1e-5 bar, where the other fits end.
// The limit is that of Goldblatt et al. (2013); the smooth minimum is an own
// choice. Temperatures: own choice, 200-380 K.
type Linear struct {
	A, B         float64 // W/m², W/m²/K
	K, Q         float64 // W/m²
	Limit, Width float64 // F∞, w; W/m²
	Max          float64 // CO₂ pressure above which the forcing is held, bar

	source cite.Ref // of K and Q
	box    edges
}

func newLinear(k, q, max float64, source cite.Ref) *Linear {
	l := &Linear{A: 203.3, B: 2.09, K: k, Q: q, Limit: 282, Width: 6, Max: max, source: source}
	_ = l.Bind(Reference{}) // never fails
	return l
}

func newLinearMyhre() Radiation {
	return newLinear(5.35, 0, 1e-3, cite.Ref{Work: cite.Myhre1998, Trust: cite.Checked})
}

func newLinearByrne() Radiation {
	return newLinear(5.32, 0.39, 1e-2, cite.Ref{Work: cite.ByrneGoldblatt2014, Trust: cite.Memory})
}

// ln278ppm is ln 278e-6.
const ln278ppm = -8.187889444273637

// line returns L of a state inside the box.
func (l *Linear) line(t, lnp float64) float64 {
	x := lnp - ln278ppm
	return l.A + l.B*(t-273.15) - x*(l.K+l.Q*x)
}

// Outgoing returns F in W/m².
func (l *Linear) Outgoing(t, _, lnp float64) float64 {
	t, lnp = l.box.hold(t, lnp)
	return softMin(l.line(t, lnp), l.Limit, l.Width)
}

// softMin is −w ln(e^(−a/w) + e^(−b/w)): the smaller of a and b, lowered by at
// most w ln 2 where they meet.
func softMin(a, b, w float64) float64 {
	d := (b - a) / w
	switch {
	case d > 40: // the rest is below the last bit
		return a
	case d < -40:
		return b
	}
	return b - w*elementary.Log(1+elementary.Exp(d))
}

// Bind fixes the box.
func (l *Linear) Bind(Reference) error {
	l.box = newEdges(200, 380, 1e-5, l.Max)
	return nil
}

// Box returns 200-380 K, 1e-5 bar to the end of the forcing.
func (l *Linear) Box() Box { return l.box.Box }

// Fields lists the line, the forcing and the limit.
func (l *Linear) Fields() []units.Field {
	north := cite.Ref{Work: cite.NorthCahalanCoakley1981, Trust: cite.Memory}
	fields := []units.Field{
		{Key: "a", Kind: units.HeatFlux, Min: 50, Max: 400, Published: units.Range{Lo: 201.4, Hi: 212.2}, Doc: "outgoing radiation A at 273.15 K and 278 ppm of CO2", Source: north, Value: &l.A},
		{Key: "b", Kind: units.FluxPerK, Min: 0.5, Max: 5, Published: units.Range{Lo: 1.45, Hi: 2.09}, Doc: "slope B of the outgoing radiation", Source: north, Value: &l.B},
		{Key: "forcing", Kind: units.HeatFlux, Min: 3, Max: 15, Doc: "radiative forcing k per e-fold of CO2", Source: l.source, Value: &l.K},
	}
	if l.source.Work == cite.ByrneGoldblatt2014 {
		fields = append(fields, units.Field{Key: "forcing_square", Kind: units.HeatFlux, Min: 0, Max: 0.4, Doc: "coefficient q of the square of the e-folds of CO2", Source: l.source, Value: &l.Q})
	}
	return append(fields,
		units.Field{Key: "co2_max", Kind: units.Pressure, Min: 1e-4, Max: 10, Published: units.Range{Lo: l.published(), Hi: l.published()}, Doc: "CO2 pressure above which the forcing is held", Source: l.source, Value: &l.Max},
		units.Field{Key: "radiation_limit", Kind: units.HeatFlux, Min: 200, Max: 2000, Published: units.Range{Lo: 282, Hi: 310}, Doc: "radiation limit of a moist atmosphere", Source: cite.Ref{Work: cite.Goldblatt2013, Trust: cite.Checked}, Value: &l.Limit},
		units.Field{Key: "limit_width", Kind: units.HeatFlux, Min: 0.5, Max: 30, Doc: "width of the passage to the limit", Source: cite.Own("shifts today's outgoing radiation by less than 0.01 W/m2"), Value: &l.Width},
	)
}

// published returns the end of the range of the forcing, bar.
func (l *Linear) published() float64 {
	if l.source.Work == cite.Myhre1998 {
		return 1e-3
	}
	return 1e-2
}
