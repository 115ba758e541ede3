package ocean

import "cycle/carbon/cite"

// Laws lists the partitions of surface carbon; the first is the default. To add
// a law, write its file and add its row.
var Laws = []Entry{
	{"saturated", "ocean in saturation with calcite, closed form", "C = n p + M (K0 p + √(K0 p K1 [CO₃]/K2) + [CO₃]),  [CO₃] = Ω Ksp/[Ca]", append([]cite.Ref{{Note: "closed form", Trust: cite.Derived}}, constantSources...), newSaturated},
	{"pair", "full system of carbon and alkalinity, carbonate precipitating by saturation", "A/M = [CO₂](K1/h + 2 K1 K2/h²) + B_T KB/(KB + h) + KW/h − h,  F = k (Ω − 1)^ν", append([]cite.Ref{{Work: cite.Dickson2007, Where: "chapter 2", Trust: cite.Memory}, {Work: cite.KrissansenTotton2017, Note: "precipitation", Trust: cite.Memory}}, constantSources...), newPair},
	{"fraction", "fixed share of the atmosphere", "C = C₀ [φ p/p₀ + (1 − φ)(p/p₀)^(1/k)]", append([]cite.Ref{cite.Own("the simplest partition, for comparison")}, constantSources...), newFraction},
}
