package star

import (
	"math"

	"cycle/carbon/cite"
	"cycle/carbon/units"
)

// Names of the zone limits, from the inner to the outer.
const (
	RecentVenus       = "recent Venus"
	RunawayGreenhouse = "runaway greenhouse"
	MoistGreenhouse   = "moist greenhouse"
	FirstCondensation = "first CO2 condensation"
	MaximumGreenhouse = "maximum greenhouse"
	EarlyMars         = "early Mars"
)

// Limit is one edge of a published habitable zone.
type Limit struct {
	Name         string
	Inner        bool    // edge towards the star
	Conservative bool    // edge of the conservative zone; otherwise of the optimistic one
	Flux         float64 // stellar flux at the edge in units of the solar constant
	Held         bool    // the star is outside the range of the law; Flux is that of the range's end
	Source       cite.Ref
}

// Distance returns the distance of the limit from a star of the given
// luminosity (Sun = 1) in m: d = 1 au √(L/Flux).
func (l Limit) Distance(luminosity float64) float64 { return units.AU * sqrt(luminosity/l.Flux) }

// ZoneLaw is one published set of limits.
type ZoneLaw struct {
	Name   string
	Doc    string
	Source []cite.Ref
	// Limits returns the edges for an effective temperature in K and a planet's
	// mass in Earth masses, from the inner to the outer.
	Limits func(teff, massEarths float64) []Limit
}

// Zones lists the published limits; the first is the default.
var Zones = []ZoneLaw{
	{"kopparapu2014", "one-dimensional, cloud-free climate model; the runaway limit depends on the planet's mass", []cite.Ref{{Work: cite.Kopparapu2014, Trust: cite.Checked}, cite.Own("interpolation in ln M between the published masses")}, kopparapu2014},
	{"kopparapu2013", "one-dimensional, cloud-free climate model with a moist greenhouse limit, as corrected by the erratum", []cite.Ref{{Work: cite.Kopparapu2013, Where: "table 3, erratum", Trust: cite.Checked}}, kopparapu2013},
	{"kasting1993", "the classical limits, built in for the Sun only", []cite.Ref{{Work: cite.Kasting1993, Trust: cite.Checked}}, kasting1993},
}

// InZone reports whether a planet at a relative flux is between the inner and
// the outer edge of the conservative or the optimistic zone, edges included.
// Where a law gives two edges of a kind, the one that makes the zone narrower
// counts.
func InZone(limits []Limit, relativeFlux float64, conservative bool) bool {
	inner, outer := math.Inf(1), 0.0
	for _, l := range limits {
		switch {
		case l.Conservative != conservative:
		case l.Inner:
			inner = math.Min(inner, l.Flux)
		default:
			outer = math.Max(outer, l.Flux)
		}
	}
	return relativeFlux <= inner && relativeFlux >= outer && outer > 0
}

// quartic is a flux limit as a polynomial in T* = T_eff − 5780 K:
//
//	S = S☉ + a T* + b T*² + c T*³ + d T*⁴
type quartic struct{ sun, a, b, c, d float64 }

// at returns S at T*.
func (q *quartic) at(x float64) float64 { return (((q.d*x+q.c)*x+q.b)*x+q.a)*x + q.sun }

// star5780 returns T* held to the range of the Kopparapu laws, 2600 to 7200 K,
// and whether it had to be held.
func star5780(teff float64) (x float64, held bool) {
	t := math.Min(math.Max(teff, 2600), 7200)
	return t - 5780, t != teff
}
