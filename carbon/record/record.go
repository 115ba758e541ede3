// Package record is a finished result as plain data: what the model hands to
// the terminal, the tables and the report. It holds no physics; everything a
// reader is shown stands here as a field.
package record

// Kind is the vocabulary of outcomes.
type Kind string

// The outcomes.
const (
	Temperate    Kind = "temperate throughout"
	Snowball     Kind = "snowball"
	LimitCycles  Kind = "limit cycles"
	MoistGreen   Kind = "moist greenhouse"
	RunawayGreen Kind = "runaway greenhouse"
	Condensation Kind = "CO2 condensation"
	WaterLost    Kind = "water lost"
	StarLeft     Kind = "star left the main sequence"
	BeyondRange  Kind = "beyond model range"
	Undecided    Kind = "undecided"
)

// Kinds lists all outcomes in the order they are shown.
var Kinds = []Kind{Temperate, Snowball, LimitCycles, MoistGreen, RunawayGreen, Condensation, WaterLost, StarLeft, BeyondRange, Undecided}

// The climate states of episodes.
const (
	StateTemperate = "temperate"
	StateSnowball  = "snowball"
	StateMoist     = "moist greenhouse"
	StateRunaway   = "runaway greenhouse"
	StateBeyond    = "beyond model range"
)

// States lists all climate states in the order they are shown.
var States = []string{StateTemperate, StateSnowball, StateMoist, StateRunaway, StateBeyond}

// The marks of a history.
const (
	MarkBranchLost   = "warm branch lost"
	MarkFroze        = "froze"
	MarkThawed       = "thawed"
	MarkC3           = "below 150 ppm"
	MarkC4           = "below 10 ppm"
	MarkSupply       = "supply limit reached"
	MarkMoist        = "stratosphere moist"
	MarkRadiation    = "radiation limit exceeded"
	MarkCondensation = "condensation onset"
	MarkOutgassing   = "outgassing below what the warm state needs"
	MarkDynamo       = "dynamo off"
	MarkPulse        = "pulse"
	MarkRecovered    = "recovered from the pulse"
)

// Words for what is no outcome of the climate but a doubt about liquid water.
const (
	BelowTriple = "surface pressure below the triple point of water"
	MantleEmpty = "the mantle holds less carbon than none"
)

// Outcome names the first lasting failure, or says there is none.
type Outcome struct {
	Kind     Kind    `json:"kind"`
	TimeGyr  float64 `json:"time_gyr"`  // age of the star at the failure; the end of the history when there is none
	ErrorGyr float64 `json:"error_gyr"` // numerical error of the date
	Sentence string  `json:"sentence"`  // the verdict in one sentence
	Why      string  `json:"why"`       // what brought it about, at a glance
}

// Episode is a span spent in one climate state.
type Episode struct {
	State string  `json:"state"`
	Start float64 `json:"start_gyr"`
	End   float64 `json:"end_gyr"`
}

// Mark is a dated crossing.
type Mark struct {
	Name     string  `json:"name"`
	TimeGyr  float64 `json:"time_gyr"`
	ErrorGyr float64 `json:"error_gyr"` // numerical error of the date; NaN when the second run has no such mark
}

// State is a climate state with its fluxes, at the reference age.
type State struct {
	AgeGyr       float64 `json:"age_gyr"`
	TemperatureK float64 `json:"temperature_k"`
	PCO2Bar      float64 `json:"pco2_bar"`
	PH           float64 `json:"ph"`
	Outgassing   float64 `json:"outgassing_tmol_yr"`
	Land         float64 `json:"land_weathering_tmol_yr"`
	Seafloor     float64 `json:"seafloor_weathering_tmol_yr"`
	MantleK      float64 `json:"mantle_temperature_k"`
	Residual     float64 `json:"residual"` // ln(pCO2/reference pCO2) left after the solve; 0 when nothing is solved
	Solved       string  `json:"solved"`   // what was solved for, with its value; empty when nothing was
	Reached      bool    `json:"reached"`  // false when the history ends before the reference age
}

// Feedback says how strong the thermostat is at the reference age.
type Feedback struct {
	Gain        float64 `json:"gain"`                       // d ln W/d ln pCO2 along the energy balance
	ResponseKyr float64 `json:"response_time_kyr"`          // e-folding time of surface carbon
	Sensitivity float64 `json:"sensitivity_k_per_doubling"` // at fixed sunlight, with the ice-albedo feedback; NaN where the reference state does not damp
	Forcing     float64 `json:"forcing_w_m2_per_doubling"`  // of CO2
	AtStateOf   string  `json:"at"`                         // the state it is evaluated at
}

// Margin is the closest approach to one boundary.
type Margin struct {
	Boundary string  `json:"boundary"`
	Side     string  `json:"side"` // cold or hot
	TimeGyr  float64 `json:"time_gyr"`
	Value    float64 `json:"value"`
	Unit     string  `json:"unit"`
	Words    string  `json:"words"` // the sentence
}

// Recovery says how a pulse passed.
type Recovery struct {
	Pulse       string  `json:"pulse"` // what it was
	StartGyr    float64 `json:"start_gyr"`
	EndGyr      float64 `json:"end_gyr"`
	PeakKelvin  float64 `json:"peak_k"`       // largest change of temperature against the undisturbed planet
	PeakLnCO2   float64 `json:"peak_ln_pco2"` // largest change of ln pCO2
	RecoveryKyr float64 `json:"recovery_kyr"` // from the peak until 1/e of it is left; NaN when it never is
}

// Warning is a doubt that every rendering carries.
type Warning struct {
	About string `json:"about"` // section or law
	Words string `json:"words"`
}

// Solver is what the integrator did.
type Solver struct {
	Method       string         `json:"method"`
	RelTol       float64        `json:"relative_tolerance"`
	Steps        int            `json:"steps"`
	Rejected     map[string]int `json:"rejected"` // by cause
	FuncEvals    int            `json:"function_evaluations"`
	MinStepYr    float64        `json:"smallest_step_yr"`
	MaxStepYr    float64        `json:"largest_step_yr"`
	Limiting     map[string]int `json:"limiting"` // component -> steps it limited
	Guard        bool           `json:"stability_guard"`
	Status       string         `json:"status"`
	TightenedTol float64        `json:"relative_tolerance_of_error_run"`
	Works        []string       `json:"works"` // keys of the works behind the method
}

// Zone is one limit of the habitable zone and when the planet crosses it.
type Zone struct {
	Name    string    `json:"name"`
	Inner   bool      `json:"inner"`
	Conserv bool      `json:"conservative"`
	Crossed []float64 `json:"crossed_gyr"` // ages at which the planet's flux crosses the limit
}

// Stay is the time the planet spends inside a zone.
type Stay struct {
	Name     string  `json:"name"` // conservative or optimistic
	EnterGyr float64 `json:"enter_gyr"`
	LeaveGyr float64 `json:"leave_gyr"`
	Inside   bool    `json:"inside"` // false: never inside
}

// Input is one value of the resolved scenario.
type Input struct {
	Key     string `json:"key"`
	Value   string `json:"value"` // with unit
	Doc     string `json:"meaning"`
	Origin  string `json:"origin"`  // default, built-in, file, --set, solved
	Source  string `json:"source"`  // publication or reason
	Allowed string `json:"allowed"` // range
	Outside bool   `json:"outside_published_range"`

	Works []string `json:"works"` // keys of the works behind the value, or behind the default it replaces
}

// Law is one chosen law.
type Law struct {
	Part   string `json:"part"`
	Name   string `json:"name"`
	Doc    string `json:"doc"`
	Form   string `json:"equation"`
	Source string `json:"source"`
	Range  string `json:"published_range"` // where the source says it holds

	Works []string `json:"works"` // keys of the works it rests on
}

// Work is one entry of the reference list.
type Work struct {
	Key    string `json:"key"`
	Short  string `json:"short"` // as cited in a text: "Walker et al. 1981"
	Text   string `json:"text"`
	BibTeX string `json:"bibtex"`
}

// Run is one finished history.
type Run struct {
	Format      int        `json:"format"`
	Title       string     `json:"title"`
	Name        string     `json:"scenario"`
	Hash        string     `json:"hash"`    // of the resolved scenario
	Version     string     `json:"version"` // of the program
	Seed        uint64     `json:"seed"`
	Outcome     Outcome    `json:"outcome"`
	Start       State      `json:"start"`
	StartWords  string     `json:"start_words"`
	Reference   State      `json:"reference"`
	Feedback    Feedback   `json:"feedback"`
	Episodes    []Episode  `json:"episodes"`
	Marks       []Mark     `json:"marks"`
	Margins     []Margin   `json:"margins"`
	ZoneLaw     string     `json:"zone_law"`
	Zones       []Zone     `json:"zones"`
	Stays       []Stay     `json:"stays"`
	Recoveries  []Recovery `json:"recoveries"`
	FrozenShare float64    `json:"frozen_share"` // of the history, 0 to 1
	Freezes     int        `json:"freezes"`
	CarbonMol   float64    `json:"carbon_mol"`   // total
	CarbonDrift float64    `json:"carbon_drift"` // largest |change of the total|/total
	Solver      Solver     `json:"solver"`
	Laws        []Law      `json:"laws"`
	Warnings    []Warning  `json:"warnings"`
	Inputs      []Input    `json:"-"`
	Works       []Work     `json:"works"`
	Command     string     `json:"-"` // that repeats the run

	ReferenceAgeGyr float64 `json:"reference_age_gyr"`
	Rows            []Row   `json:"-"` // the history, in order of age
	Scenario        string  `json:"-"` // the resolved scenario, TOML
}

// Row is the diagnosed state at one time, in base units (see carbon/units).
// Everything that is printed or drawn against time is a field here.
type Row struct {
	Age float64 // yr

	// climate
	Temperature float64 // K
	PCO2        float64 // bar
	Sunlight    float64 // S, W/m²
	Albedo      float64
	Ice         float64 // fraction of the surface under ice
	Absorbed    float64 // W/m²
	Outgoing    float64 // W/m²

	// ocean
	PH, DIC, Alk, Omega float64 // -, mol/kg, mol/kg, -

	// fluxes, mol/yr
	Ridge, Arc, Metamorphic float64
	Pulse                   float64 // user-given bursts
	Outgassing              float64 // sum of the sources
	Land, Seafloor          float64 // silicate weathering
	Burial                  float64 // carbonate laid down: both sinks, or precipitation where alkalinity is a state
	Imbalance               float64 // sources minus burial
	Deposited               float64 // land carbonate laid down on the seafloor
	Subducted               float64 // seafloor carbonate leaving with the plates
	Foundered               float64 // continental carbonate returned to the mantle

	// reservoirs, mol
	Surface, SeafloorCarbon, Continental, Mantle, Total float64
	Escaped                                             float64 // lost to space; counts in the total

	// drivers
	LandFraction, Biology float64 // relative to the reference
	SupplyUse             float64 // land weathering/supply limit

	// interior
	MantleTemperature, CoreTemperature float64 // K
	HeatFlow, Radiogenic               float64 // W
	Crust                              float64 // crust production relative to the reference
	CoreHeat                           float64 // W

	// water
	Pressure float64 // surface pressure: nitrogen, CO₂ and vapour, bar
	Boiling  float64 // boiling point at that pressure, K
	Moisture float64 // mixing ratio of water in the stratosphere
	Water    float64 // inventory, kg

	// zone: flux and limits relative to today's Earth
	Flux                                                         float64
	RecentVenus, InnerConservative, OuterConservative, EarlyMars float64

	// distance to failure
	WarmNeeds  float64 // outgassing at which the warm state is lost, mol/yr
	ColdMargin float64 // outgassing/WarmNeeds
	ColdKelvin float64 // temperature above the cold fold, K
	HotMargin  float64 // sunlight to the radiation limit at this CO2, fraction of today's
	Gain       float64 // d ln W/d ln pCO2
	Response   float64 // e-folding time of surface carbon, yr
}

// Column is one output quantity; CSV, Parquet, terminal and report walk the
// one list of them.
type Column struct {
	Name  string // machine name
	Title string // for people
	Unit  string // shown unit; "" for a pure number
	Scale float64
	Get   func(*Row) float64
}

// Value returns the shown value: base value over Scale.
func (c *Column) Value(r *Row) float64 { return c.Get(r) / c.Scale }

// Columns lists every output quantity in file order.
var Columns = []Column{
	{"age", "Age of the star", "Gyr", 1e9, func(r *Row) float64 { return r.Age }},
	{"temperature", "Surface temperature", "K", 1, func(r *Row) float64 { return r.Temperature }},
	{"pco2", "CO₂ partial pressure", "bar", 1, func(r *Row) float64 { return r.PCO2 }},
	{"sunlight", "Sunlight", "W/m2", 1, func(r *Row) float64 { return r.Sunlight }},
	{"albedo", "Planetary albedo", "", 1, func(r *Row) float64 { return r.Albedo }},
	{"ice", "Ice cover", "", 1, func(r *Row) float64 { return r.Ice }},
	{"absorbed", "Absorbed sunlight", "W/m2", 1, func(r *Row) float64 { return r.Absorbed }},
	{"outgoing", "Outgoing radiation", "W/m2", 1, func(r *Row) float64 { return r.Outgoing }},
	{"ph", "Ocean pH", "", 1, func(r *Row) float64 { return r.PH }},
	{"dic", "Dissolved inorganic carbon", "mmol/kg", 1e-3, func(r *Row) float64 { return r.DIC }},
	{"alkalinity", "Alkalinity", "mmol/kg", 1e-3, func(r *Row) float64 { return r.Alk }},
	{"saturation", "Calcite saturation", "", 1, func(r *Row) float64 { return r.Omega }},
	{"outgassing", "Outgassing", "Tmol/yr", 1e12, func(r *Row) float64 { return r.Outgassing }},
	{"ridge", "Ridge outgassing", "Tmol/yr", 1e12, func(r *Row) float64 { return r.Ridge }},
	{"arc", "Arc outgassing", "Tmol/yr", 1e12, func(r *Row) float64 { return r.Arc }},
	{"metamorphic", "Metamorphic outgassing", "Tmol/yr", 1e12, func(r *Row) float64 { return r.Metamorphic }},
	{"pulse", "Pulses", "Tmol/yr", 1e12, func(r *Row) float64 { return r.Pulse }},
	{"land_weathering", "Land weathering", "Tmol/yr", 1e12, func(r *Row) float64 { return r.Land }},
	{"seafloor_weathering", "Seafloor weathering", "Tmol/yr", 1e12, func(r *Row) float64 { return r.Seafloor }},
	{"burial", "Carbonate burial", "Tmol/yr", 1e12, func(r *Row) float64 { return r.Burial }},
	{"imbalance", "Sources minus burial", "Tmol/yr", 1e12, func(r *Row) float64 { return r.Imbalance }},
	{"deposited", "Land carbonate laid down on the seafloor", "Tmol/yr", 1e12, func(r *Row) float64 { return r.Deposited }},
	{"subducted", "Seafloor carbonate subducted", "Tmol/yr", 1e12, func(r *Row) float64 { return r.Subducted }},
	{"foundered", "Continental carbonate returned to the mantle", "Tmol/yr", 1e12, func(r *Row) float64 { return r.Foundered }},
	{"surface_carbon", "Surface carbon", "Emol", 1e18, func(r *Row) float64 { return r.Surface }},
	{"seafloor_carbon", "Seafloor carbonate", "Emol", 1e18, func(r *Row) float64 { return r.SeafloorCarbon }},
	{"continental_carbon", "Continental carbonate", "Emol", 1e18, func(r *Row) float64 { return r.Continental }},
	{"mantle_carbon", "Mantle carbon", "Emol", 1e18, func(r *Row) float64 { return r.Mantle }},
	{"total_carbon", "Total carbon", "Emol", 1e18, func(r *Row) float64 { return r.Total }},
	{"escaped_carbon", "Carbon escaped to space", "Emol", 1e18, func(r *Row) float64 { return r.Escaped }},
	{"land_fraction", "Land fraction, relative", "", 1, func(r *Row) float64 { return r.LandFraction }},
	{"biology", "Biological enhancement, relative", "", 1, func(r *Row) float64 { return r.Biology }},
	{"supply_use", "Land weathering over its supply limit", "", 1, func(r *Row) float64 { return r.SupplyUse }},
	{"mantle_temperature", "Mantle temperature", "K", 1, func(r *Row) float64 { return r.MantleTemperature }},
	{"core_temperature", "Core temperature", "K", 1, func(r *Row) float64 { return r.CoreTemperature }},
	{"heat_flow", "Mantle heat flow", "TW", 1e12, func(r *Row) float64 { return r.HeatFlow }},
	{"radiogenic", "Radiogenic heating", "TW", 1e12, func(r *Row) float64 { return r.Radiogenic }},
	{"crust_production", "Crust production, relative", "", 1, func(r *Row) float64 { return r.Crust }},
	{"flux", "Flux relative to Earth's today", "", 1, func(r *Row) float64 { return r.Flux }},
	{"zone_recent_venus", "Recent Venus limit", "", 1, func(r *Row) float64 { return r.RecentVenus }},
	{"zone_inner", "Inner limit, conservative", "", 1, func(r *Row) float64 { return r.InnerConservative }},
	{"zone_outer", "Outer limit, conservative", "", 1, func(r *Row) float64 { return r.OuterConservative }},
	{"zone_early_mars", "Early Mars limit", "", 1, func(r *Row) float64 { return r.EarlyMars }},
	{"warm_state_needs", "Outgassing the warm state needs", "Tmol/yr", 1e12, func(r *Row) float64 { return r.WarmNeeds }},
	{"cold_margin", "Outgassing over what the warm state needs", "", 1, func(r *Row) float64 { return r.ColdMargin }},
	{"cold_kelvin", "Temperature above the cold fold", "K", 1, func(r *Row) float64 { return r.ColdKelvin }},
	{"hot_margin", "Sunlight left to the radiation limit", "%", 1e-2, func(r *Row) float64 { return r.HotMargin }},
	{"gain", "Feedback gain", "", 1, func(r *Row) float64 { return r.Gain }},
	{"response_time", "Response time of surface carbon", "kyr", 1e3, func(r *Row) float64 { return r.Response }},
	{"core_heat", "Heat from the core", "TW", 1e12, func(r *Row) float64 { return r.CoreHeat }},
	{"pressure", "Surface pressure", "bar", 1, func(r *Row) float64 { return r.Pressure }},
	{"boiling", "Boiling point", "K", 1, func(r *Row) float64 { return r.Boiling }},
	{"moisture", "Water in the stratosphere, mixing ratio", "", 1, func(r *Row) float64 { return r.Moisture }},
	{"water", "Water inventory", "kg", 1, func(r *Row) float64 { return r.Water }},
}

// ColumnNamed returns the column of a machine name, or nil.
func ColumnNamed(name string) *Column {
	for i := range Columns {
		if Columns[i].Name == name {
			return &Columns[i]
		}
	}
	return nil
}
