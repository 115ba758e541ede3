package interior

import "cycle/carbon/cite"

// Laws lists the thermal histories; the first is the default. To add a law,
// write its file and add its row.
var Laws = []Entry{
	{"plates", "parameterised convection under plate tectonics", "M c dT/dt = M H − Q,  Q = Q_ref (A/A_E) (ΔT/ΔT_ref)^(1+β) (d/d_E)^(3β−1) (ρg)^β (η/η_ref)^(−β)", []cite.Ref{{Work: cite.SchubertStevensonCassen1980, Trust: cite.Memory}, {Work: cite.TurcotteSchubert2002, Note: "heat sources"}, {Work: cite.McDonoughSun1995, Note: "heat sources", Trust: cite.Memory}, {Work: cite.KrissansenTotton2018, Note: "crust production", Trust: cite.Memory}}, newPlates},
	{"stagnant", "parameterised convection under a stagnant lid, crust from melt below it", "M c dT/dt = M H − Q,  Q_conv = c₁ Ra_c^β Q_ref (A/A_E) (ΔT_rh/ΔT_ref)^(1+β) (η/η_ref)^(−β) …,  ΔT_rh = R T²/E", []cite.Ref{{Work: cite.FoleySmye2018, Trust: cite.Memory}, {Work: cite.Solomatov1995, Trust: cite.Memory}, {Work: cite.Katz2003, Note: "solidus and liquidus", Trust: cite.Memory}, {Work: cite.McDonoughSun1995, Note: "heat sources", Trust: cite.Memory}, {Work: cite.Rowley2002, Note: "the Earth's plate production", Trust: cite.Memory}, {Work: cite.White1992, Note: "the Earth's crust", Trust: cite.Memory}, {Work: cite.Baumeister2023, Note: "latent heat, conductivity"}}, newStagnant},
	{"powerlaw", "heat flow falling as a power of time", "q = (1 − t/4.5 Gyr)^(−n)", []cite.Ref{{Work: cite.KrissansenTotton2018, Trust: cite.Memory}, {Work: cite.Lehmer2020, Note: "range of n"}}, newPowerLaw},
	{"steady", "heat flow that does not change", "q = const", []cite.Ref{cite.Own("for comparison")}, newSteady},
	{"table", "heat flow from a user's CSV", "q(t) by monotone cubics", []cite.Ref{cite.Own("the user's"), {Work: cite.FritschButland1984, Note: "interpolation", Trust: cite.Memory}}, newTable},
}
