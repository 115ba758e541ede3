package weathering

import (
	"fmt"
	"math"

	"cycle/carbon/cite"
	"cycle/carbon/units"
	"cycle/ode/elementary"
)

// Graham2020 is weathering limited by solute transport after Maher & Chamberlain
// (2014) in the form of Graham & Pierrehumbert (2020), per area of land:
//
//	W     = α/[1/k_eff + m A t_s + α/(q C_eq)],  α = L φ ρ A X_r µ
//	k_eff = k₀ · exp((T − T₀)/Tₑ) · (p/p₀)^β
//	C_eq  = C₀ · (p/p₀)^n
//	q     = Γ · min(P, P_lim),  P = P₀ [1 + ε (T − T₀)],  P_lim = (1 − a) S/4/(L_v ρ_w)
//
// Where q C_eq is small, W = q C_eq and temperature acts through runoff only;
// where it is large, W = α/(1/k_eff + m A t_s). Rain cannot use more energy than
// sunlight brings, P_lim; the minimum is rounded over the last tenth of P_lim.
//
// C₀ is solved so that W is the reference flux on the reference land, which
// leaves aside the unsure unit of the paper's Λ. T₀ = 288 K and p₀ = 280 µbar in
// the paper.
type Graham2020 struct {
	K0       float64 // k₀, mol m⁻² yr⁻¹
	Te       float64 // Tₑ, K
	Beta     float64 // β
	N        float64 // n
	Depth    float64 // L, m
	Porosity float64 // φ
	Density  float64 // ρ, kg of rock per m³ of water
	Area     float64 // A, m²/kg
	Reactive float64 // X_r
	Mu       float64 // µ
	MolMass  float64 // m, kg/mol
	Age      float64 // t_s, yr
	Precip   float64 // P₀, m/yr
	Epsilon  float64 // ε, K⁻¹
	Gamma    float64 // Γ

	Ceq0 float64 // C₀, mol/m³, solved by Bind

	t0      float64 // T₀, K
	precip0 float64 // min(P, P_lim) at the reference state, m/yr
	kinetic float64 // 1/k₀ as part of α/W₀
	aged    float64 // m A t_s as part of α/W₀
	solute  float64 // α/(q₀ C₀) as part of α/W₀
}

func newGraham2020() Law {
	return &Graham2020{K0: 8.7e-6, Te: 11.1, Beta: 0.2, N: 0.316,
		Depth: 1, Porosity: 0.1, Density: 12728, Area: 100, Reactive: 0.36, Mu: math.E * math.E,
		MolMass: 0.27, Age: 1e5, Precip: 0.99, Epsilon: 0.03, Gamma: 0.2}
}

// Relative returns W/W₀.
func (l *Graham2020) Relative(e *Env) float64 {
	return 1 / (l.kinetic*elementary.Exp((l.t0-e.T)/l.Te-l.Beta*e.LnP) + l.aged + l.solute*elementary.Exp(-l.N*e.LnP)*l.precip0/l.precipitation(e))
}

// Runoff returns q/q₀.
func (l *Graham2020) Runoff(e *Env) float64 { return l.precipitation(e) / l.precip0 }

// precipitation returns min(P, P_lim) in m/yr.
func (l *Graham2020) precipitation(e *Env) float64 {
	const latent, water = 2.5e6, 1000 // L_v in J/kg, ρ_w in kg/m³
	limit := (1 - e.Alb) * e.Sun * (units.Year / (latent * water))
	if limit <= 0 {
		return 0
	}
	return below(l.Precip*bracket(1+l.Epsilon*(e.T-l.t0)), limit, 0.1*limit)
}

// alpha returns α, the reactive mineral surface per land surface times µ.
func (l *Graham2020) alpha() float64 {
	return l.Depth * l.Porosity * l.Density * l.Area * l.Reactive * l.Mu
}

// Fields lists all but C₀ and Γ = 0.2, which only C₀ takes up.
func (l *Graham2020) Fields() []units.Field {
	ref := cite.Ref{Work: cite.GrahamPierrehumbert2020, Trust: cite.Memory}
	mc := cite.Ref{Work: cite.MaherChamberlain2014, Trust: cite.Memory}
	return []units.Field{
		{Key: "rate", Kind: units.ArealFlux, Unit: "mol/m2/yr", Min: 1e-8, Max: 1e-2, Doc: "dissolution rate k₀ at the reference state", Source: ref, Value: &l.K0},
		efoldField(units.Range{}, "warming Tₑ that multiplies the dissolution rate by e", ref, &l.Te),
		exponentField("exponent", units.Range{}, "exponent β of the CO2 pressure in the dissolution rate", ref, &l.Beta),
		exponentField("equilibrium_exponent", units.Range{}, "exponent n of the CO2 pressure in the equilibrium concentration", ref, &l.N),
		{Key: "depth", Kind: units.Length, Unit: "m", Min: 0.01, Max: 100, Doc: "length L of the flow path", Source: ref, Value: &l.Depth},
		{Key: "porosity", Min: 0.01, Max: 1, Doc: "porosity φ", Source: cite.Ref{Work: cite.GrahamPierrehumbert2020, Trust: cite.Unsure}, Value: &l.Porosity},
		{Key: "density", Kind: units.Density, Unit: "kg/m3", Min: 100, Max: 1e5, Doc: "mass ρ of rock per volume of water", Source: ref, Value: &l.Density},
		{Key: "surface_area", Kind: units.SurfaceArea, Unit: "m2/kg", Min: 1, Max: 1e4, Doc: "specific surface area A of the minerals", Source: ref, Value: &l.Area},
		{Key: "reactive", Min: 0.01, Max: 1, Doc: "fraction X_r of reactive minerals", Source: ref, Value: &l.Reactive},
		{Key: "scaling", Min: 1, Max: 100, Doc: "scaling constant µ = e²", Source: mc, Value: &l.Mu},
		{Key: "molar_mass", Kind: units.MolarMass, Unit: "kg/mol", Min: 0.05, Max: 1, Doc: "molar mass m of the minerals", Source: ref, Value: &l.MolMass},
		{Key: "soil_age", Kind: units.Time, Unit: "kyr", Min: 0, Max: 1e8, Doc: "age t_s of the soil", Source: ref, Value: &l.Age},
		{Key: "precipitation", Kind: units.Speed, Unit: "m/yr", Min: 0.01, Max: 10, Doc: "precipitation P₀ at the reference state", Source: ref, Value: &l.Precip},
		runoffField("precipitation_sensitivity", units.Range{Lo: 0.02, Hi: 0.1}, "growth ε of precipitation with temperature", ref, &l.Epsilon),
	}
}

// Bind solves C₀.
func (l *Graham2020) Bind(ref Reference) error {
	l.t0 = ref.T
	l.precip0 = l.precipitation(&Env{T: ref.T, Sun: ref.Sun, Alb: ref.Alb})
	if !(l.precip0 > 0) {
		return fmt.Errorf("precipitation: the reference state has no sunlight to evaporate water: S/4 = %g W/m², albedo %g", ref.Sun, ref.Alb)
	}
	w0, alpha := ref.Flux/ref.Land, l.alpha()
	if !(w0 > 0) || math.IsInf(w0, 0) {
		return fmt.Errorf("rate: found a reference flux of %g mol/yr on %g m² of land, needed is a positive flux on some land", ref.Flux, ref.Land)
	}
	l.kinetic = w0 / (alpha * l.K0)
	l.aged = w0 * l.MolMass * l.Area * l.Age / alpha
	l.solute = 1 - l.kinetic - l.aged
	if !(l.solute > 0) {
		return fmt.Errorf("rate, soil_age: rock dissolves at most %.3g mol/m2/yr, the reference flux needs %.3g", w0/(l.kinetic+l.aged), w0)
	}
	l.Ceq0 = w0 / (l.solute * l.Gamma * l.precip0)
	return nil
}

// Range is not stated.
func (l *Graham2020) Range() Range { return Range{} }
