package ocean

import "cycle/carbon/cite"

// Laws lists the partitions of surface carbon; the first is the default. To add
// a law, write its file and add its row.
var Laws = []Entry{
	{"saturated", "ocean in saturation with calcite, closed form", "C = n p + M (K0 p + √(K0 p K1 [CO₃]/K2) + [CO₃]),  [CO₃] = Ω Ksp/[Ca]", append([]cite.Ref{{Note: "closed form", Trust: cite.Derived}}, constantSources...), newSaturated},
}
