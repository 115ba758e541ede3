package interior

import "cycle/carbon/cite"

// Laws lists the thermal histories; the first is the default. To add a law,
// write its file and add its row.
var Laws = []Entry{
	{"plates", "parameterised convection under plate tectonics", "M c dT/dt = M H − Q,  Q = Q_ref (A/A_E) (ΔT/ΔT_ref)^(1+β) (d/d_E)^(3β−1) (ρg)^β (η/η_ref)^(−β)", []cite.Ref{{Work: cite.SchubertStevensonCassen1980, Trust: cite.Memory}, {Work: cite.TurcotteSchubert2002, Note: "heat sources"}, {Work: cite.McDonoughSun1995, Note: "heat sources", Trust: cite.Memory}, {Work: cite.KrissansenTotton2018, Note: "crust production", Trust: cite.Memory}}, newPlates},
}
