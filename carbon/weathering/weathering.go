package weathering

import (
	"cycle/carbon/cite"
	"cycle/carbon/units"
)

// Env is the state a law sees.
type Env struct {
	Age   float64 // yr since the star formed
	T     float64 // global mean surface temperature, K
	P     float64 // CO₂ partial pressure, bar
	LnP   float64 // ln(P/P₀) with P₀ of the reference state; shared, so that a power costs one exponential
	Sun   float64 // mean top-of-atmosphere sunlight S/4, W/m²
	Alb   float64 // planetary albedo
	Crust float64 // crust production per area relative to the reference, seafloor laws only
	LnH   float64 // ln([H⁺]/[H⁺]₀) of the ocean, seafloor laws that are Acidic only
}

// Reference is the state at which every relative flux is 1.
type Reference struct {
	T    float64 // K
	P    float64 // bar
	Sun  float64 // mean sunlight S/4, W/m²
	Alb  float64 // planetary albedo
	Flux float64 // the flux at the reference state on an Earth-sized planet, mol/yr
	Land float64 // land area of an Earth-sized planet at the reference state, m²
}

// Law is one weathering law.
type Law interface {
	// Fields lists the parameters a scenario or a prior may change.
	Fields() []units.Field
	// Bind is called once after the parameters are set and before Relative:
	// it normalises the law at the reference state. The error names the
	// parameter that makes the law meaningless.
	Bind(ref Reference) error
	// Relative returns W/W₀ at full land fraction. It must be finite,
	// non-negative and continuously differentiable for 100 K < T < 700 K and
	// 1e-12 bar < P < 1000 bar.
	Relative(e *Env) float64
	// Range returns where the source says the law holds.
	Range() Range
}

// Hydrologic is a law of land that knows about runoff.
type Hydrologic interface {
	// Runoff returns runoff per land area relative to the reference state.
	Runoff(e *Env) float64
}

// Limited is a law of land that knows the supply of fresh rock.
type Limited interface {
	// Saturation returns the flux as a part of the supply limit, in [0, 1]. The
	// limit is the same in all states: Saturation goes with Relative.
	Saturation(e *Env) float64
}

// Acidic marks a law of the seafloor that looks at LnH, which costs time to know.
type Acidic interface{ Acidic() }

// Range is the published range of a law; a zero range is not stated.
type Range struct {
	T units.Range // K
	P units.Range // bar
}

// Entry is one row of a table of laws.
type Entry struct {
	Name   string     // value of the key "law"
	Doc    string     // one line
	Form   string     // the equation, Unicode
	Source []cite.Ref // first the defining work
	New    func() Law // with published defaults
	Absent bool       // there is no such weathering: Relative is 0, at the reference state too
}

// Land lists the laws of continental silicate weathering; the first is the
// default. To add a law, write its file and add its row.
var Land = []Entry{
	{
		Name: "walker1981", New: newWalker1981,
		Doc:    "power of pCO2 times exponential in temperature",
		Form:   "W/W₀ = (p/p₀)^β · exp((T − T₀)/Tₑ)",
		Source: []cite.Ref{{Work: cite.Walker1981, Trust: cite.Checked}},
	},
	{
		Name: "berner1994", New: newBerner1994,
		Doc:    "exponential in temperature, runoff, CO2 with or without fertilised plants",
		Form:   "W/W₀ = f(p) · exp(k ΔT) · [1 + ε ΔT]^a, f = R^½ before and [2R/(1 + R)]^0.4 with plants, R = p/p₀",
		Source: []cite.Ref{{Work: cite.Berner1994, Trust: cite.Memory}, {Work: cite.BernerKothavala2001, Trust: cite.Memory}},
	},
	{
		Name: "arrhenius_runoff", New: newArrheniusRunoff,
		Doc:    "Arrhenius law times runoff",
		Form:   "W/W₀ = (p/p₀)^β · exp(−(E/R)(1/T − 1/T₀)) · [1 + ε ΔT]",
		Source: []cite.Ref{{Work: cite.WhiteBlum1995, Trust: cite.Memory}, {Work: cite.Berner1994, Note: "runoff", Trust: cite.Memory}},
	},
	{
		Name: "menou2015", New: newMenou2015,
		Doc:    "power of pCO2, exponential in temperature, runoff",
		Form:   "W/W₀ = (p/p₀)^β · exp(k ΔT) · [1 + ε ΔT]^a",
		Source: []cite.Ref{{Work: cite.Menou2015, Trust: cite.Memory}, {Work: cite.HaqqMisra2016, Trust: cite.Memory}},
	},
	{
		Name: "krissansentotton2017", New: newKrissansenTotton2017,
		Doc:    "power of pCO2 times exponential in temperature, parameters from 100 Myr of proxies",
		Form:   "W/W₀ = (p/p₀)^α · exp((T − T₀)/Tₑ)",
		Source: []cite.Ref{{Work: cite.KrissansenTotton2017, Trust: cite.Memory}, {Work: cite.Lehmer2020, Where: "table 1"}},
	},
	{
		Name: "foley2015", New: newFoley2015,
		Doc:    "kinetic law that saturates at the supply of eroded rock",
		Form:   "W/W₀ = (1 − exp(−κ k))/(1 − exp(−κ)), k = (p/p₀)^β · (p_sat/p_sat₀)^a · exp(−(E/R)(1/T − 1/T₀))",
		Source: []cite.Ref{{Work: cite.Foley2015, Trust: cite.Checked}},
	},
	{
		Name: "west2012", New: newWest2012,
		Doc:    "weathering zone of finite thickness under erosion; no CO2 but through temperature and runoff",
		Form:   "W ∝ 1 − exp(−K (1 − exp(−k_w q)) · exp(−(E_a/R)(1/T − 1/T_w)) · (z/E)^σ/σ)",
		Source: []cite.Ref{{Work: cite.West2012, Note: "parameter values", Trust: cite.Unsure}},
	},
	{
		Name: "graham2020", New: newGraham2020,
		Doc:    "solute transport by runoff with an energy limit on rain",
		Form:   "W = α/[1/k_eff + m A t_s + α/(q C_eq)]",
		Source: []cite.Ref{{Work: cite.GrahamPierrehumbert2020, Trust: cite.Memory}, {Work: cite.MaherChamberlain2014, Trust: cite.Memory}},
	},
	{
		Name: "abbot2012", New: newAbbot2012,
		Doc:    "power of pCO2, exponential in temperature, precipitation; made for varied land fraction",
		Form:   "W/W₀ = (p/p₀)^b · exp((T − T₀)/Tᵤ) · [1 + a_p (T − T₀)]^a",
		Source: []cite.Ref{{Work: cite.Abbot2012, Trust: cite.Unsure}},
	},
}

// Seafloor lists the laws of seafloor basalt weathering; the first is the default.
var Seafloor = []Entry{
	{
		Name: "coogan2015", New: newCoogan2015,
		Doc:    "Arrhenius law of the pore-water temperature, proportional to crust production",
		Form:   "W/W₀ = s^ν · (p/p₀)^α · exp(−(E/R)(1/Tₚ − 1/Tₚ₀))",
		Source: []cite.Ref{{Work: cite.CooganDosso2015, Trust: cite.Memory}, {Work: cite.KrissansenTotton2018, Note: "temperature of the pore water", Trust: cite.Memory}},
	},
	{
		Name: "none", New: newNone, Absent: true,
		Doc:    "no seafloor weathering",
		Form:   "W = 0",
		Source: []cite.Ref{cite.Own("the limit of land weathering alone")},
	},
	{
		Name: "brady1997", New: newBrady1997,
		Doc:    "Arrhenius law of the deep-ocean temperature with a weak power of pCO2",
		Form:   "W/W₀ = s^ν · (p/p₀)^α · exp(−(E/R)(1/T_d − 1/T_d₀))",
		Source: []cite.Ref{{Work: cite.BradyGislason1997}},
	},
	{
		Name: "sleep2001", New: newSleep2001,
		Doc:    "proportional to crust production and dissolved CO2, no temperature",
		Form:   "W/W₀ = s^ν · (p/p₀)^α",
		Source: []cite.Ref{{Work: cite.SleepZahnle2001, Note: "structure only", Trust: cite.Unsure}},
	},
	{
		Name: "krissansentotton2018", New: newKrissansenTotton2018,
		Doc:    "Arrhenius law of the pore-water temperature with a power of [H+]",
		Form:   "W/W₀ = s^β · exp(−(E/R)(1/Tₚ − 1/Tₚ₀)) · ([H⁺]/[H⁺]₀)^γ",
		Source: []cite.Ref{{Work: cite.KrissansenTotton2018, Trust: cite.Memory}, {Work: cite.Lehmer2020, Where: "table 1"}},
	},
}

// exponentField describes an exponent of the CO₂ pressure.
func exponentField(key string, published units.Range, doc string, ref cite.Ref, value *float64) units.Field {
	return units.Field{Key: key, Min: 0, Max: 2, Published: published, Doc: doc, Source: ref, Value: value}
}

// energyField describes an activation energy.
func energyField(published units.Range, doc string, ref cite.Ref, value *float64) units.Field {
	return units.Field{Key: "activation_energy", Kind: units.MolarEnergy, Unit: "kJ/mol", Min: 0, Max: 2e5, Published: published, Doc: doc, Source: ref, Value: value}
}

// efoldField describes the warming that multiplies a rate by e.
func efoldField(published units.Range, doc string, ref cite.Ref, value *float64) units.Field {
	return units.Field{Key: "efold", Kind: units.Interval, Unit: "K", Min: 2, Max: 200, Published: published, Doc: doc, Source: ref, Value: value}
}

// runoffField describes the growth of runoff or precipitation per kelvin.
func runoffField(key string, published units.Range, doc string, ref cite.Ref, value *float64) units.Field {
	return units.Field{Key: key, Kind: units.PerKelvin, Unit: "1/K", Min: 0, Max: 0.1, Published: published, Doc: doc, Source: ref, Value: value}
}
