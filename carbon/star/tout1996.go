package star

import (
	"math"

	"cycle/carbon/cite"
	"cycle/carbon/units"
)

// Tout1996 is a star of solar composition (Z = 0.02) and any mass M of a
// habitable planet's host. Zero-age luminosity and radius are those of Tout et
// al. (1996), the lifetime that of Hurley et al. (2000).
//
// How the star brightens is an own choice, not a published law: it goes through
// the brightening of Gough (1981) at the pace of its own lifetime,
//
//	L(t) = (5/7) L_Z(M)/L_Z(1) · 1.4/[1 + (2/5)(1 − s)],   s = t/t_ref
//	t_ref = 4.57 Gyr · t_MS(M)/t_MS(1)
//
// so that at one solar mass it is Gough's law exactly; the factor
// (5/7)/L_Z(1) = 1.024 is the difference between the zero ages of the two works.
// The effective temperature starts at that of the zero age and, again an own
// choice, rises until s = 1 in the proportion in which the Sun's did.
//
// Contraction before the zero age, which lasts long in small stars, is left out.
type Tout1996 struct {
	Mass float64 // M, solar masses

	now, ref, end, temp float64 // L at s = 1, t_ref in yr, t_MS in yr, T_eff at zero age in K
}

func newTout1996() Law { return &Tout1996{Mass: 1} }

// zeroAge returns L and R in solar units (Tout et al. 1996, eqs. 1 and 2, Z = 0.02).
func zeroAge(m float64) (l, r float64) {
	pow := math.Pow
	l = (0.39704170*pow(m, 5.5) + 8.52762600*pow(m, 11)) /
		(0.00025546 + pow(m, 3) + 5.43288900*pow(m, 5) + 5.56357900*pow(m, 7) + 0.78866060*pow(m, 8) + 0.00586685*pow(m, 9.5))
	r = (1.71535900*pow(m, 2.5) + 6.59778800*pow(m, 6.5) + 10.08855000*pow(m, 11) + 1.01249500*pow(m, 19) + 0.07490166*pow(m, 19.5)) /
		(0.01077422 + 3.08223400*pow(m, 2) + 17.84778000*pow(m, 8.5) + pow(m, 18.5) + 0.00022582*pow(m, 19.5))
	return l, r
}

// effective returns T_eff = 5772 K (L/R²)^¼.
func effective(l, r float64) float64 { return SunTemperature * sqrt(sqrt(l/(r*r))) }

// lifetime returns the time to the base of the giant branch and the lifetime on
// the main sequence in yr (Hurley et al. 2000, eqs. 4-7, Z = 0.02).
func lifetime(m float64) (giant, main float64) {
	pow := math.Pow
	giant = 1e6 * (1593.890 + 2706.708*pow(m, 4) + 146.6143*pow(m, 5.5) + pow(m, 7)) /
		(0.04141960*pow(m, 2) + 0.3426349*pow(m, 7))
	mu := math.Max(0.5, 1-0.01*math.Max(19.49814*pow(m, -4.903830), 0.05212154+1.312179*pow(m, -0.8073972)))
	return giant, math.Max(mu, 0.95) * giant
}

// Bind computes what does not change with age.
func (l *Tout1996) Bind() error {
	lum, r := zeroAge(l.Mass)
	sunLum, _ := zeroAge(1)
	_, sunLife := lifetime(1)
	_, l.end = lifetime(l.Mass)
	l.ref = 4.57 * units.Gyr * l.end / sunLife
	l.now = lum / sunLum
	l.temp = effective(lum, r)
	return nil
}

// Luminosity returns L/L☉, held at the end of the main sequence.
func (l *Tout1996) Luminosity(age float64) float64 {
	return l.now / (1 + 0.4*(1-math.Min(age, l.end)/l.ref))
}

// Temperature returns the effective temperature in K.
func (l *Tout1996) Temperature(age float64) float64 {
	const rise = SunTemperature/5597.34 - 1 // the Sun's since its zero age, Tout et al. 1996
	return l.temp * (1 + rise*math.Min(age/l.ref, 1))
}

// End returns the lifetime on the main sequence.
func (l *Tout1996) End() float64 { return l.end }

// Range returns the ages that correspond to Gough's 0.2 to 6.5 Gyr.
func (l *Tout1996) Range() units.Range {
	k := l.ref / 4.57
	return units.Range{Lo: 0.2 * k, Hi: 6.5 * k}
}

// Fields lists the mass.
func (l *Tout1996) Fields() []units.Field {
	return []units.Field{
		{Key: "mass", Kind: units.SolarMass, Min: 0.1, Max: 5, Published: units.Range{Lo: 0.1, Hi: 5}, Doc: "mass of the star; the source goes on to 100", Source: cite.Ref{Work: cite.Tout1996, Note: "the Sun", Trust: cite.Checked}, Value: &l.Mass},
	}
}
