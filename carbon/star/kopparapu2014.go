package star

import (
	"math"

	"cycle/carbon/cite"
)

// Kopparapu et al. (2014), table 1: coefficients of the flux limits. Valid for
// 2600 to 7200 K; only the runaway limit depends on the planet's mass.
var (
	k14Venus  = quartic{1.776, 2.136e-4, 2.533e-8, -1.332e-11, -3.097e-15}
	k14Small  = quartic{0.99, 1.209e-4, 1.404e-8, -7.418e-12, -1.713e-15}  // 0.1 Earth masses
	k14Earth  = quartic{1.107, 1.332e-4, 1.580e-8, -8.308e-12, -1.931e-15} // 1 Earth mass
	k14Large  = quartic{1.188, 1.433e-4, 1.707e-8, -8.968e-12, -2.084e-15} // 5 Earth masses
	k14Max    = quartic{0.356, 6.171e-5, 1.698e-9, -3.198e-12, -5.575e-16}
	k14Mars   = quartic{0.32, 5.547e-5, 1.526e-9, -2.874e-12, -5.011e-16}
	k14Source = cite.Ref{Work: cite.Kopparapu2014, Trust: cite.Checked}
)

// kopparapu2014 returns the limits of Kopparapu et al. (2014).
//
// Own choice: between the published masses 0.1, 1 and 5 the runaway limit is
// linear in ln M; outside it is held.
func kopparapu2014(teff, mass float64) []Limit {
	x, held := star5780(teff)
	runaway := k14Earth.at(x)
	switch {
	case mass <= 0.1:
		runaway = k14Small.at(x)
	case mass < 1:
		runaway += math.Log(mass) / math.Log(0.1) * (k14Small.at(x) - runaway)
	case mass >= 5:
		runaway = k14Large.at(x)
	case mass > 1:
		runaway += math.Log(mass) / math.Log(5) * (k14Large.at(x) - runaway)
	}
	return []Limit{
		{RecentVenus, true, false, k14Venus.at(x), held, k14Source},
		{RunawayGreenhouse, true, true, runaway, held, k14Source},
		{MaximumGreenhouse, false, true, k14Max.at(x), held, k14Source},
		{EarlyMars, false, false, k14Mars.at(x), held, k14Source},
	}
}
