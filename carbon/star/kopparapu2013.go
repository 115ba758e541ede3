package star

import "cycle/carbon/cite"

// Kopparapu et al. (2013), table 3 as corrected by the erratum (2013, ApJ 770,
// 82): coefficients of the flux limits for 2600 to 7200 K and one Earth mass.
// The first printing differs by up to 2 % and is superseded.
var (
	k13Venus   = quartic{1.7763, 1.4335e-4, 3.3954e-9, -7.6364e-12, -1.1950e-15}
	k13Runaway = quartic{1.0385, 1.2456e-4, 1.4612e-8, -7.6345e-12, -1.7511e-15}
	k13Moist   = quartic{1.0146, 8.1884e-5, 1.9394e-9, -4.3618e-12, -6.8260e-16}
	k13Max     = quartic{0.3507, 5.9578e-5, 1.6707e-9, -3.0058e-12, -5.1925e-16}
	k13Mars    = quartic{0.3207, 5.4471e-5, 1.5275e-9, -2.1709e-12, -3.8282e-16}
	k13Source  = cite.Ref{Work: cite.Kopparapu2013, Where: "table 3, erratum", Trust: cite.Checked}
)

// kopparapu2013 returns the limits of Kopparapu et al. (2013) with the erratum;
// the mass does not matter.
func kopparapu2013(teff, _ float64) []Limit {
	x, held := star5780(teff)
	return []Limit{
		{RecentVenus, true, false, k13Venus.at(x), held, k13Source},
		{RunawayGreenhouse, true, true, k13Runaway.at(x), held, k13Source},
		{MoistGreenhouse, true, true, k13Moist.at(x), held, k13Source},
		{MaximumGreenhouse, false, true, k13Max.at(x), held, k13Source},
		{EarlyMars, false, false, k13Mars.at(x), held, k13Source},
	}
}
