package interior

import (
	"math"

	"cycle/ode/elementary"
)

// isotope is one heat source: h C is its heating per mass of mantle today.
type isotope struct {
	name     string
	power    float64 // h, W per kg of isotope
	content  float64 // C, kg per kg of mantle today
	halfLife float64 // yr
}

// turcotteSchubert is the mean mantle of Turcotte & Schubert (2002), 7.39e-12
// W/kg today. It is calibrated to the Earth's heat loss.
var turcotteSchubert = [4]isotope{
	{"238U", 94.6e-6, 30.8e-9, 4.47e9},
	{"235U", 569e-6, 0.22e-9, 0.704e9},
	{"232Th", 26.4e-6, 124e-9, 14.0e9},
	{"40K", 29.2e-6, 36.9e-9, 1.25e9},
}

// bulkSilicateEarth has the U 20.3 ppb, Th 79.5 ppb and K 240 ppm of McDonough
// & Sun (1995), 19.8 TW in 4.03e24 kg today. It is the mantle together with the
// continents.
var bulkSilicateEarth = [4]isotope{
	{"238U", 94.65e-6, 20.3e-9 * 0.9927, 4.468e9},
	{"235U", 568.7e-6, 20.3e-9 * 0.0072, 0.7038e9},
	{"232Th", 26.38e-6, 79.5e-9, 14.05e9},
	{"40K", 29.17e-6, 240e-6 * 1.19e-4, 1.25e9},
}

// continentShare is the part of the bulk silicate Earth's heating that sits in
// the continental crust: 7 of 19.8 TW. All isotopes are taken to be shared alike.
const continentShare = 7 / 19.83

// heating returns the radiogenic heating of a table in W/kg, t years before present:
//
//	H(t) = Σ hᵢ Cᵢ 2^(t/τᵢ)
func heating(table *[4]isotope, ago float64) float64 {
	var h float64
	for i := range table {
		s := &table[i]
		h += s.power * s.content * math.Exp2(ago/s.halfLife)
	}
	return h
}

// sources is a mix of tables, ready for the hot path: H = Σ wᵢ exp(−λᵢ t).
type sources struct {
	weight [8]float64 // W at the age of zero
	rate   [8]float64 // λ, 1/yr
	n      int

	age, heat float64 // the last age asked for, yr, and H there
}

// bind mixes the share w of the mantle of McDonough & Sun (1995), without the
// continents, with the rest of Turcotte & Schubert (2002), for a mass in kg.
func (s *sources) bind(w, factor, mass, now float64) {
	s.n, s.age = 0, math.NaN()
	add := func(table *[4]isotope, share float64) {
		if share == 0 {
			return
		}
		for _, i := range table {
			s.rate[s.n] = math.Ln2 / i.halfLife
			s.weight[s.n] = share * factor * mass * i.power * i.content * elementary.Exp(now*s.rate[s.n])
			s.n++
		}
	}
	add(&turcotteSchubert, 1-w)
	add(&bulkSilicateEarth, w*(1-continentShare))
}

// at returns the heating in W at an age in yr.
func (s *sources) at(age float64) float64 {
	if age == s.age {
		return s.heat
	}
	var h float64
	for i := range s.n {
		h += s.weight[i] * elementary.Exp(-s.rate[i]*age)
	}
	s.age, s.heat = age, h
	return h
}
