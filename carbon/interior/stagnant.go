package interior

import (
	"fmt"
	"math"

	"cycle/carbon/cite"
	"cycle/carbon/units"
	"cycle/ode/elementary"
)

// Stagnant is a one-plate planet. Only the lowest part of the lid takes part in
// convection, over the rheological temperature scale ΔT_rh, which makes the
// driving temperature small (Solomatov 1995; Foley & Smye 2018):
//
//	ΔT_rh = R T²/E   Q_conv = c₁ (A k ΔT/d) θ^(−1−β) Ra^β   θ = ΔT/ΔT_rh
//
// With the Earth's mantle under plates as the reference, Ra_c its critical
// Rayleigh number, this is
//
//	Q_conv = c₁ Ra_c^β Q_ref (A/A_E) (ΔT_rh/ΔT_ref)^(1+β) (d/d_E)^(3β−1) (ρg/(ρg)_E)^β (η/η_ref)^(−β)
//
// The lid is as thick as it must be to conduct Q_conv, δ = k (T − ΔT_rh − T_s) A/Q_conv.
// Below it the mantle melts along its adiabat down to the solidus of Katz et
// al. (2003). Crust is produced as mantle passes under the lid,
//
//	s = [Q_conv/(A ΔT_rh) · ∫F dP] / [Q_ref/(A_E ΔT_ref) · ∫F dP at the reference, up to the surface]
//
// (own closure: overturn is heat flow over driving temperature), so it ends
// smoothly when T falls below melting at the base of the lid. Melt carries
// heat out,
//
//	Q = Q_conv + s (A/A_E) ρ_c V_ref [L + c (T − T_s)]
//
// Nothing is recycled. Heat sources carried into the crust by melt are left
// there only in so far as the table of heat sources leaves them out.
type Stagnant struct {
	mantle
	C1     float64 // c₁
	RaC    float64 // Ra_c
	K      float64 // k, thermal conductivity of the lid, W/m/K
	Rho    float64 // ρ, density of the lid, kg/m³
	Alpha  float64 // α, thermal expansion, 1/K
	Latent float64 // L, J/kg
	core
	melting

	flow  float64 // Q_conv at ΔT_rh = ΔT_ref and η_ref, W
	lnDT  float64 // ln ΔT_ref
	lid   float64 // pressure under the lid times Q_conv/(T − ΔT_rh − T_s), GPa W/K
	crust float64 // s over Q_conv/ΔT_rh · ∫F dP, K/W/GPa
	melt  float64 // melt at s = 1, kg/s
}

// The Earth's crust production, V_ref = 3.4 km²/yr × 7.1 km (Rowley 2002;
// White, McKenzie & O'Nions 1992), and the usual density of basalt.
const (
	plateProduction = 3.4e6 // m²/yr
	crustThickness  = 7100  // m
	crustDensity    = 2900  // kg/m³
)

func newStagnant() Law {
	l := &Stagnant{mantle: newMantle(), C1: 0.5, RaC: 1100, K: 4, Rho: 3300, Alpha: 3e-5, Latent: 6e5, core: newCore()}
	l.Mix = 1
	return l
}

// Flow evaluates the law.
func (l *Stagnant) Flow(age, tm, tc float64) Flow {
	rh := tm * tm / l.theta // ΔT_rh
	q := l.flow * elementary.Exp((1+l.Beta)*(elementary.Log(rh)-l.lnDT)-l.Beta*l.lnViscosity(tm))
	f := Flow{Radiogenic: l.at(age)}
	f.Crust = l.crust * q / rh * l.column(tm, l.lid*(tm-rh-l.Surface)/q)
	f.Heat = q + l.melt*f.Crust*(l.Latent+l.C*(tm-l.Surface))
	f.Relative = f.Heat / (l.QRef * l.area)
	if l.core.Flow != 0 {
		f.Core, f.CoreRate, f.Dynamo = l.core.flow(tm, tc)
	}
	f.MantleRate = l.warming * (f.Radiogenic + f.Core - f.Heat)
	return f
}

// Fields lists the parameters.
func (l *Stagnant) Fields() []units.Field {
	fields := l.mantle.fields()
	for i := range fields {
		switch f := &fields[i]; f.Key {
		case "activation_energy":
			f.Min = 100e3 // a lid needs a viscosity that falls with temperature
		case "reference_temperature":
			f.Min = 1400 // the Earth's mantle melts
		case "geochemical":
			f.Source = cite.Ref{Work: cite.McDonoughSun1995, Note: "the crust of a one-plate planet is taken to hold the share that continents hold", Trust: cite.OwnChoice}
		}
	}
	fields = append(fields,
		units.Field{Key: "lid_constant", Min: 0.05, Max: 5, Doc: "constant c₁ of the heat flow under a stagnant lid", Source: cite.Ref{Work: cite.FoleySmye2018, Note: "with β = 1/3", Trust: cite.Memory}, Value: &l.C1},
		units.Field{Key: "critical_rayleigh", Min: 100, Max: 5000, Published: units.Range{Lo: 450, Hi: 1100}, Doc: "critical Rayleigh number Ra_c of the reference under plates", Source: cite.Ref{Work: cite.TurcotteSchubert2002, Trust: cite.Memory}, Value: &l.RaC},
		units.Field{Key: "conductivity", Kind: units.Conductivity, Min: 0.5, Max: 20, Doc: "thermal conductivity of the lid", Source: cite.Ref{Work: cite.Baumeister2023}, Value: &l.K},
		units.Field{Key: "lid_density", Kind: units.Density, Min: 1000, Max: 8000, Doc: "density of the lid", Source: cite.Ref{Note: "upper mantle", Trust: cite.Practice}, Value: &l.Rho},
		units.Field{Key: "expansion", Kind: units.PerKelvin, Min: 1e-6, Max: 1e-4, Doc: "thermal expansion, sets the adiabat that melts", Source: cite.Ref{Work: cite.TurcotteSchubert2002, Trust: cite.Memory}, Value: &l.Alpha},
		units.Field{Key: "latent_heat", Kind: latentKind, Unit: "kJ/kg", Min: 1e5, Max: 2e6, Doc: "latent heat of melting", Source: cite.Ref{Work: cite.Baumeister2023}, Value: &l.Latent},
	)
	return append(fields, l.core.fields()...)
}

// latentKind is the dimension of the latent heat.
var latentKind = &units.Kind{Name: "energy per mass", Base: "J/kg", Spell: map[string]float64{"J/kg": 1, "kJ/kg": 1e3}}

// Bind normalises the law to the Earth under plates.
func (l *Stagnant) Bind(p Planet, referenceAge float64) error {
	if err := l.mantle.bind(&p, referenceAge); err != nil {
		return err
	}
	dT := l.TRef - l.Surface
	l.lnDT = elementary.Log(dT)
	l.flow = l.C1 * math.Pow(l.RaC, l.Beta) * l.QRef * l.area * l.geometry
	l.lid = 1e-9 * l.Rho * p.Gravity * l.K * p.Area
	l.melting = melting{slope: 1e9 * l.Alpha / (l.Rho * l.C), latent: l.Latent / l.C}
	reference := l.column(l.TRef, 0)
	if !(reference > 0) {
		return fmt.Errorf("interior: the reference mantle at %g K does not melt", l.TRef)
	}
	l.crust = dT / (l.area * l.QRef * reference)
	l.melt = crustDensity * plateProduction * crustThickness / units.Year * l.area
	return l.core.bind(&p, l.Beta, l.TRef, l.geometry)
}

// Start returns the temperatures at the start.
func (l *Stagnant) Start(float64) (tm, tc float64) { return l.Begin, l.Begin + l.core.Start }

// HasCore reports whether the core has a heat flow.
func (l *Stagnant) HasCore() bool { return l.core.Flow != 0 }

// Range is not stated.
func (l *Stagnant) Range() units.Range { return units.Range{} }
