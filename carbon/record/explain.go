package record

// Explanation says why a history ends as it does, how close it was, what would
// have changed it and whether another law would say otherwise.
type Explanation struct {
	Format  int    `json:"format"`
	Title   string `json:"title"`
	Name    string `json:"scenario"`
	Hash    string `json:"hash"`    // of the resolved scenario
	Version string `json:"version"` // of the program
	Command string `json:"-"`       // that repeats it

	Run       *Run    `json:"-"` // the history that is explained
	Outcome   Outcome `json:"outcome"`
	Fails     bool    `json:"fails"`     // false: nothing fails, and the rescues are what would bring a failure
	Clock     string  `json:"clock"`     // which kind of failure is timed: "freezing", "overheating", an outcome; empty when nothing fails
	Histories int     `json:"histories"` // computed for this explanation

	Drivers      []Driver      `json:"drivers"`      // slow causes that change in this history
	Combinations []Combination `json:"combinations"` // of drivers that change and drivers held still
	Cause        Cause         `json:"cause"`

	Margins   []Margin     `json:"margins"`   // closest approach to every boundary
	Distances []Distance   `json:"distances"` // to failure, through time
	Curves    []Equilibria `json:"curves"`    // of steady states at the start, at the failure and at the reference age

	Rescues      []Rescue     `json:"rescues"`      // by smallness against the published uncertainty
	Elasticities []Elasticity `json:"elasticities"` // by size
	ElasticWords string       `json:"elasticity_words"`

	Variants []LawVariant `json:"laws"` // the same planet under other laws
	Spread   Spread       `json:"spread"`
	Warnings []Warning    `json:"warnings"`
	Works    []Work       `json:"works"` // of the laws and of the methods
}

// Driver is a slow cause that changes by itself along the history.
type Driver struct {
	Name string  `json:"name"`
	Doc  string  `json:"meaning"`
	From float64 `json:"at_start"` // in Unit; NaN where there is no one number
	To   float64 `json:"at_failure"`
	Unit string  `json:"unit"`
}

// Combination is the history with some drivers held at their start.
type Combination struct {
	Changing []string `json:"changing"` // drivers that change
	Still    []string `json:"still"`    // drivers held still
	Outcome  Kind     `json:"outcome"`
	TimeGyr  float64  `json:"time_gyr"` // of the failure, or of the end of the history
	Clock    string   `json:"clock"`
	Censored bool     `json:"censored"` // no failure up to the end: the date is a bound
	Words    string   `json:"words"`
}

// Share is the part one driver has in the date.
type Share struct {
	Driver string  `json:"driver"`
	Gyr    float64 `json:"gyr"` // by which it moves the date; negative brings the failure nearer
}

// Cause says which drivers brought the failure about. Shares are Shapley values:
// the mean, over all orders in which the drivers may be let go, of how much each
// moves the date. They add up to Whole.
type Cause struct {
	Shares    []Share  `json:"shares"` // empty when they would mislead
	WholeGyr  float64  `json:"whole_gyr"`
	Mixed     bool     `json:"mixed"`      // combinations fail in different ways: no shares
	Bounds    bool     `json:"bounds"`     // some combinations never fail: shares are bounds
	Necessary []string `json:"necessary"`  // drivers without which there is no such failure
	Enough    []string `json:"sufficient"` // drivers that bring it about alone
	Words     string   `json:"words"`
}

// Distance is how far the planet is from failing at one time, each way. NaN
// where there is no such boundary.
type Distance struct {
	AgeGyr         float64 `json:"age_gyr"`
	TemperatureK   float64 `json:"temperature_k"`
	PCO2Bar        float64 `json:"pco2_bar"`
	Outgassing     float64 `json:"outgassing_tmol_yr"`
	SunlightWm2    float64 `json:"sunlight_w_m2"`
	ColdFactor     float64 `json:"cold_outgassing_factor"` // outgassing over what the warm state needs
	ColdSun        float64 `json:"cold_sunlight_percent"`  // that could be lost before the warm state is lost
	ColdKelvin     float64 `json:"cold_k"`                 // above the cold fold
	HotFactor      float64 `json:"hot_outgassing_factor"`  // that the warm state would bear, over outgassing
	HotSun         float64 `json:"hot_sunlight_percent"`   // to the radiation limit at this CO2
	HotKelvin      float64 `json:"hot_k"`                  // below the moist threshold
	SupplyPercent  float64 `json:"supply_percent"`         // of its supply limit that land weathering uses
	Gain           float64 `json:"gain"`
	ResponseKyr    float64 `json:"response_time_kyr"`
	FoldK          float64 `json:"cold_fold_k"`
	FoldOutgassing float64 `json:"warm_state_needs_tmol_yr"`
}

// Rescue is the smallest change of one parameter that avoids the failure, puts
// it off, or, where nothing fails, brings one.
type Rescue struct {
	Key       string  `json:"key"`
	Doc       string  `json:"meaning"`
	Unit      string  `json:"unit"`
	From      float64 `json:"from"` // in Unit
	To        float64 `json:"to"`   // in Unit; NaN when there is none in range
	FromText  string  `json:"from_text"`
	ToText    string  `json:"to_text"` // empty when there is none
	Lo, Hi    float64 `json:"-"`       // range searched, in Unit
	Range     string  `json:"range"`   // in words
	Published bool    `json:"range_is_published"`
	Found     bool    `json:"found"`
	Relative  float64 `json:"relative_change"` // To/From − 1
	Part      float64 `json:"part_of_range"`   // |change| over the width of the range
	Outcome   Kind    `json:"outcome"`         // after the change
	TimeGyr   float64 `json:"time_gyr"`
	LoKind    Kind    `json:"outcome_at_low_end"`
	HiKind    Kind    `json:"outcome_at_high_end"`
	LoGyr     float64 `json:"time_at_low_end_gyr"`
	HiGyr     float64 `json:"time_at_high_end_gyr"`
	Words     string  `json:"words"`
}

// Elasticity is d ln t/d ln x of the date of failure.
type Elasticity struct {
	Key   string  `json:"key"`
	Doc   string  `json:"meaning"`
	At    string  `json:"at"` // value with unit
	Value float64 `json:"value"`
	Error float64 `json:"error"` // numerical
	Gyr   float64 `json:"gyr_per_percent"`
	Near  string  `json:"near"` // empty, or how the failure changes close by
}

// LawVariant is the same planet under other laws.
type LawVariant struct {
	Changed  []string `json:"changed"` // "weathering.land = menou2015"
	Parts    []string `json:"parts"`
	Laws     []string `json:"laws"`
	Outcome  Kind     `json:"outcome"`
	TimeGyr  float64  `json:"time_gyr"`
	Clock    string   `json:"clock"`
	Same     bool     `json:"same_failure"`
	Censored bool     `json:"censored"`
	Words    string   `json:"words"` // why it could not be computed, or empty
}

// PartSpread is how far the choice of one part's law moves the date.
type PartSpread struct {
	Part      string  `json:"part"`
	Laws      int     `json:"laws"`
	Otherwise int     `json:"fail_otherwise"` // fail in another way, or not at all
	EarlyGyr  float64 `json:"earliest_gyr"`
	LateGyr   float64 `json:"latest_gyr"`
}

// Spread compares the choice of law with the published uncertainty of parameters.
type Spread struct {
	ByPart         []PartSpread `json:"by_part"`
	LawGyr         float64      `json:"by_law_gyr"`       // half-width, parts added in quadrature
	ParameterGyr   float64      `json:"by_parameter_gyr"` // half-width, parameters added in quadrature
	LawOtherwise   int          `json:"laws_fail_otherwise"`
	LawCount       int          `json:"laws"`
	ParamOtherwise int          `json:"range_ends_fail_otherwise"`
	ParamCount     int          `json:"range_ends"`
	Words          string       `json:"words"`
}
