package interior

import (
	"fmt"
	"math"

	"cycle/carbon/cite"
	"cycle/carbon/units"
	"cycle/ode/elementary"
)

// mantle is what the laws of convection share: heat sources, heat capacity
// and viscosity. The reference state is the Earth's mantle today.
type mantle struct {
	Beta    float64 // β of Nu = (Ra/Ra_c)^β
	E       float64 // activation energy of the viscosity, J/mol
	C       float64 // specific heat, J/kg/K
	TRef    float64 // potential temperature at the reference state, K
	QRef    float64 // the Earth's mantle heat flow there, W
	Surface float64 // T_s, K
	Heating float64 // factor on the heat sources
	Mix     float64 // share of the geochemical table
	Begin   float64 // mantle temperature at the start, K

	sources
	geometry float64 // (d/d_E)^(3β−1) (ρg/(ρg)_E)^β
	area     float64 // A/A_E
	warming  float64 // K/yr per W
	theta    float64 // E/R, K
	invRef   float64 // 1/T_ref, 1/K
}

func newMantle() mantle {
	return mantle{Beta: 1. / 3, E: 300e3, C: 1200, TRef: 1623, QRef: 36e12, Surface: 288, Heating: 1, Begin: 2000}
}

func (m *mantle) fields() []units.Field {
	conv := cite.Ref{Work: cite.SchubertStevensonCassen1980, Trust: cite.Memory}
	return []units.Field{
		{Key: "exponent", Min: 0, Max: 0.4, Published: units.Range{Lo: 0, Hi: 1. / 3}, Doc: "exponent β of Nu = (Ra/Ra_c)^β", Source: conv, Value: &m.Beta},
		{Key: "activation_energy", Kind: units.MolarEnergy, Unit: "kJ/mol", Min: 0, Max: 600e3, Published: units.Range{Lo: 240e3, Hi: 350e3}, Doc: "activation energy of the mantle's viscosity", Source: conv, Value: &m.E},
		{Key: "specific_heat", Kind: units.SpecificHeat, Min: 100, Max: 5000, Published: units.Range{Lo: 1100, Hi: 1250}, Doc: "specific heat of the mantle", Source: conv, Value: &m.C},
		{Key: "reference_temperature", Kind: units.Temperature, Unit: "K", Min: 1200, Max: 2200, Doc: "potential temperature of the Earth's mantle today", Source: cite.Ref{Work: cite.Herzberg2010, Note: "1350 °C"}, Value: &m.TRef},
		{Key: "reference_flow", Kind: units.Power, Unit: "TW", Min: 1e12, Max: 200e12, Published: units.Range{Lo: 36e12, Hi: 39e12}, Doc: "heat lost by the Earth's mantle at the reference temperature", Source: cite.Ref{Work: cite.Jaupart2007, Trust: cite.Memory}, Value: &m.QRef},
		{Key: "surface_temperature", Kind: units.Temperature, Unit: "K", Min: 0, Max: 450, Doc: "temperature at the top of the convecting mantle", Source: cite.Own("close to the surface; 10 K change the flow by 1 %"), Value: &m.Surface},
		{Key: "heating", Min: 0, Max: 20, Doc: "factor on the radiogenic heat sources", Source: cite.Own("1 is the table"), Value: &m.Heating},
		{Key: "geochemical", Min: 0, Max: 1, Doc: "share of the heat sources taken from McDonough & Sun 1995 less the continents, the rest from Turcotte & Schubert 2002", Source: cite.Ref{Work: cite.TurcotteSchubert2002, Note: "calibrated to the heat loss"}, Value: &m.Mix},
		{Key: "start_temperature", Kind: units.Temperature, Unit: "K", Min: 1000, Max: 4000, Doc: "temperature of the mantle at the start", Source: cite.Own("forgotten within about 0.5 Gyr when β is 1/3"), Value: &m.Begin},
	}
}

func (m *mantle) bind(p *Planet, referenceAge float64) error {
	if !(p.Mass > 0 && p.MantleMass > 0 && p.MantleDepth > 0) {
		return fmt.Errorf("interior: a planet of %g kg with core fraction %g has no mantle", p.Mass, p.CoreFraction)
	}
	rhoG := p.mantleDensity() * p.Gravity / (earth.mantleDensity() * earth.Gravity)
	m.geometry = math.Pow(p.MantleDepth/earth.MantleDepth, 3*m.Beta-1) * math.Pow(rhoG, m.Beta)
	m.area = p.Area / earth.Area
	m.theta, m.invRef = m.E/units.GasConstant, 1/m.TRef
	m.warming = units.Year / (p.MantleMass * m.C)
	m.sources.bind(m.Mix, m.Heating, p.MantleMass, referenceAge)
	return nil
}

// lnViscosity returns ln(η/η_ref) = (E/R)(1/T − 1/T_ref).
func (m *mantle) lnViscosity(t float64) float64 { return m.theta * (1/t - m.invRef) }

// Plates is parameterised convection under plate tectonics (Schubert, Stevenson
// & Cassen 1980):
//
//	M c dT/dt = M H(t) − Q + Q_c
//	Nu = (Ra/Ra_c)^β   Ra = ρ g α ΔT d³/(κ η)   η ∝ exp(E/(R T))
//	Q = Q_ref (A/A_E) (ΔT/ΔT_ref)^(1+β) (d/d_E)^(3β−1) (ρg/(ρg)_E)^β (η/η_ref)^(−β)
//
// with ΔT = T − T_s. Normalised to the Earth's mantle today, so that Ra_c and
// the transport properties drop out. H is radiogenic heating, Q_c the heat of
// the core. Crust is produced, and plates turn over, as
//
//	s = q^m   q = (Q/A)/(Q_ref/A_E)
//
// after Krissansen-Totton, Arney & Catling (2018), m = 1 to 2.
type Plates struct {
	mantle
	M float64 // m
	core

	lnDT float64 // ln ΔT_ref
	flow float64 // Q_ref (A/A_E) (d/d_E)^(3β−1) (ρg)^β, W
}

func newPlates() Law { return &Plates{mantle: newMantle(), M: 1, core: newCore()} }

// Flow evaluates the law.
func (l *Plates) Flow(age, tm, tc float64) Flow {
	rel := elementary.Exp((1+l.Beta)*(elementary.Log(tm-l.Surface)-l.lnDT) - l.Beta*l.lnViscosity(tm))
	f := Flow{Heat: l.flow * rel, Radiogenic: l.at(age), Relative: l.geometry * rel}
	if l.core.Flow != 0 {
		f.Core, f.CoreRate, f.Dynamo = l.core.flow(tm, tc)
	}
	f.MantleRate = l.warming * (f.Radiogenic + f.Core - f.Heat)
	f.Crust = f.Relative
	if l.M != 1 {
		f.Crust = elementary.Exp(l.M * elementary.Log(f.Relative))
	}
	f.Recycling = f.Crust
	return f
}

// Fields lists the parameters.
func (l *Plates) Fields() []units.Field {
	return append(append(l.mantle.fields(), crustField(&l.M)), l.core.fields()...)
}

func crustField(v *float64) units.Field {
	return units.Field{Key: "crust_exponent", Min: 0, Max: 4, Published: units.Range{Lo: 1, Hi: 2}, Doc: "exponent m of crust production over heat flow", Source: cite.Ref{Work: cite.KrissansenTotton2018, Trust: cite.Memory}, Value: v}
}

// Bind normalises the law to the Earth.
func (l *Plates) Bind(p Planet, referenceAge float64) error {
	if err := l.mantle.bind(&p, referenceAge); err != nil {
		return err
	}
	l.lnDT = elementary.Log(l.TRef - l.Surface)
	l.flow = l.QRef * l.area * l.geometry
	return l.core.bind(&p, l.Beta, l.TRef, l.geometry)
}

// Start returns the temperatures at the start.
func (l *Plates) Start(float64) (tm, tc float64) { return l.Begin, l.Begin + l.core.Start }

// HasCore reports whether the core has a heat flow.
func (l *Plates) HasCore() bool { return l.core.Flow != 0 }

// Range is not stated.
func (l *Plates) Range() units.Range { return units.Range{} }
