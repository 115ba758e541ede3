package star

import "cycle/carbon/cite"

// kasting1993 returns the limits of Kasting, Whitmire & Reynolds (1993) for the
// Sun. The paper's limits for other stars are not built in: outside 5500 to
// 6000 K, an own choice, the limits count as held. The mass does not matter.
func kasting1993(teff, _ float64) []Limit {
	held := !(teff >= 5500 && teff <= 6000)
	ref := cite.Ref{Work: cite.Kasting1993, Note: "for the Sun", Trust: cite.Checked}
	return []Limit{
		{RecentVenus, true, false, 1.76, held, ref},
		{RunawayGreenhouse, true, true, 1.41, held, ref},
		{MoistGreenhouse, true, true, 1.10, held, ref},
		{FirstCondensation, false, true, 0.53, held, ref},
		{MaximumGreenhouse, false, true, 0.36, held, ref},
		{EarlyMars, false, false, 0.32, held, ref},
	}
}
