package interior

import (
	"math"

	"cycle/carbon/units"
)

// gravitational is the constant of gravitation in m³ kg⁻¹ s⁻² (CODATA 2018).
const gravitational = 6.67430e-11

// coreDensity is the mean density in kg/m³ of the core of a planet as dense as
// the Earth: it gives the Earth's core, a third of its mass, a radius of 3480 km.
const coreDensity = 11164

// earth is the planet that all relative laws compare with.
var earth = NewPlanet(1, 0.33)

// NewPlanet returns the bulk properties of a rocky planet from its mass in
// Earth masses and the share of its core, with the radius of Zeng, Sasselov &
// Jacobsen (2016):
//
//	R/R_E = (1.07 − 0.21 CMF) (M/M_E)^(1/3.7)
//	g = G M/R²
//
// The paper covers MassRange and CoreRange; smaller planets are extrapolated.
// The core's mean density is taken to be the same multiple of the planet's as
// in the Earth (own choice: both are compressed alike), so that
//
//	r_c/R = 3480 km/R_Earth · (CMF/0.33)^(1/3)
func NewPlanet(massEarths, coreFraction float64) Planet {
	p := Planet{Mass: massEarths * units.EarthMass, CoreFraction: coreFraction}
	p.Radius = (1.07 - 0.21*coreFraction) * math.Pow(massEarths, 1/3.7) * units.EarthRadius
	p.Gravity = gravitational * p.Mass / (p.Radius * p.Radius)
	p.Area = 4 * math.Pi * p.Radius * p.Radius
	p.CoreRadius = p.Radius * math.Cbrt(coreFraction*earthDensity/coreDensity)
	p.MantleDepth = p.Radius - p.CoreRadius
	p.MantleMass = (1 - coreFraction) * p.Mass
	return p
}

// earthDensity is the mean density of NewPlanet(1, 0.33) in kg/m³.
const earthDensity = units.EarthMass / (4. / 3 * math.Pi * earthRadius * earthRadius * earthRadius)
const earthRadius = (1.07 - 0.21*0.33) * units.EarthRadius

// MassRange is the range of the mass-radius relation in Earth masses.
func MassRange() units.Range { return units.Range{Lo: 1, Hi: 8} }

// CoreRange is the range of the mass-radius relation in core mass fraction.
func CoreRange() units.Range { return units.Range{Lo: 0, Hi: 0.4} }

// mantleDensity returns the mean density of the mantle in kg/m³.
func (p *Planet) mantleDensity() float64 {
	return p.MantleMass / (4. / 3 * math.Pi * (p.Radius*p.Radius*p.Radius - p.CoreRadius*p.CoreRadius*p.CoreRadius))
}
