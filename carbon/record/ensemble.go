package record

// Clocks are the events of a history that an ensemble dates, each at its first
// time, whatever the outcome.
var Clocks = [...]string{MarkBranchLost, MarkFroze, MarkThawed, MarkC3, MarkC4, MarkSupply, MarkMoist, string(RunawayGreen), MarkCondensation, string(WaterLost), MarkDynamo}

// The ways a member ends.
const (
	StatusEnd        = "end of the history"
	StatusTable      = "end of the star's table"
	StatusStar       = "end of the main sequence"
	StatusHot        = "hot edge of the radiation law"
	StatusCold       = "cold edge of the radiation law"
	StatusDense      = "dense edge of the radiation law"
	StatusDry        = "water lost"
	StatusCondense   = "CO2 condenses"
	StatusFreezes    = "largest number of freezes"
	StatusMissed     = "froze or overheated instead of reaching the reference state"
	StatusSolver     = "the solver could not go on"
	StatusUnanchored = "no history through the reference state"
	StatusImpossible = "the values do not fit together"
	StatusFault      = "the program failed"
)

// Statuses lists them in the order they are shown; the last four have no outcome.
var Statuses = []string{StatusEnd, StatusTable, StatusStar, StatusHot, StatusCold, StatusDense, StatusDry, StatusCondense, StatusFreezes, StatusMissed, StatusSolver, StatusUnanchored, StatusImpossible, StatusFault}

// Member is one member of an ensemble: what a row of members.parquet holds
// besides the drawn values. What a history did not reach is NaN.
type Member struct {
	Kind        Kind
	TimeGyr     float64              // age of the star at the failure, or at the end
	Status      string               // how the history ended, one of Statuses
	Clocks      [len(Clocks)]float64 // Gyr, as in Clocks
	EndGyr      float64
	EndT        float64 // K
	EndP        float64 // bar
	EndPH       float64
	ColdestK    float64 // up to the failure
	HottestK    float64 // likewise
	Freezes     int
	FrozenShare float64 // of the history
	Solved      float64 // total carbon in mol or scale of the sources, when that was solved for
	Residual    float64 // ln(pCO2/reference pCO2) left after the solve
	Drift       float64 // of total carbon, relative
	Steps       int
	Evals       int        // of the right-hand side
	At          []Snapshot // at the ages the scenario asks for
}

// Snapshot is the climate at one age.
type Snapshot struct {
	Temperature float64 // K
	PCO2        float64 // bar
	PH          float64
}

// Interval is a value with its 95 % interval.
type Interval struct {
	Value float64 `json:"value"`
	Low   float64 `json:"low"`
	High  float64 `json:"high"`
}

// FateShare is how many members came to one outcome. The lower share counts
// undecided members as something else, the upper one as this outcome; each has a
// Wilson interval.
type FateShare struct {
	Kind       Kind     `json:"kind"`
	Count      int      `json:"count"`
	Of         int      `json:"of"`         // independent members, undecided ones included
	Share      Interval `json:"share"`      // undecided members count as none of these
	WithAll    Interval `json:"with_all"`   // every undecided member counts as this outcome
	Typical    int      `json:"typical"`    // index of a typical member; -1 when there is none
	DateWords  string   `json:"date_words"` // the median date in words
	MembersFor int      `json:"members_for_halving"`
}

// Curve is a probability through time with its pointwise 95 % band.
type Curve struct {
	Name    string    `json:"name"`
	TimeGyr []float64 `json:"time_gyr"`
	Value   []float64 `json:"value"`
	Low     []float64 `json:"low"`
	High    []float64 `json:"high"`
}

// Quantile is one quantile of a date with a distribution-free 95 % interval.
type Quantile struct {
	P       float64  `json:"p"`
	TimeGyr Interval `json:"time_gyr"`
}

// Dates are the dates of one clock.
type Dates struct {
	Clock     string     `json:"clock"`
	Failure   bool       `json:"failure"` // an outcome; otherwise a mark, whatever the outcome
	Count     int        `json:"count"`   // members that have the date
	Quantiles []Quantile `json:"quantiles"`
}

// Sensitivity says how much one uncertain input decides of one quantity.
type Sensitivity struct {
	Input   string   `json:"input"`
	First   Interval `json:"first_order"`  // share of the variance explained by this input alone
	Total   Interval `json:"total"`        // with all interactions; NaN when the design cannot tell
	Partial Interval `json:"partial_rank"` // partial rank correlation; NaN for a choice
}

// Sensitivities are those of one quantity.
type Sensitivities struct {
	Quantity string        `json:"quantity"` // in words, with unit
	Clock    string        `json:"clock"`
	Count    int           `json:"count"` // members with the event
	Of       int           `json:"of"`
	Method   string        `json:"method"`
	Note     string        `json:"note"`   // what the design cannot tell, and what to run instead
	Laws     Interval      `json:"laws"`   // share of the variance the choices of law explain together; NaN without choices
	Rest     Interval      `json:"others"` // what is left to the numbers and their interplay with the laws
	Inputs   []Sensitivity `json:"inputs"`
}

// Border is the closest pair of members with different outcomes.
type Border struct {
	A        Kind    `json:"a"`
	B        Kind    `json:"b"`
	MemberA  int     `json:"member_a"`
	MemberB  int     `json:"member_b"`
	Distance float64 `json:"distance"` // root mean square difference of the inputs, in quantiles
	Apart    string  `json:"apart"`    // the input that differs most, in words
}

// UncertainInput is one line of the section [uncertain].
type UncertainInput struct {
	Key          string `json:"key"`
	Distribution string `json:"distribution"` // in words, with units
	Doc          string `json:"meaning"`
	Column       string `json:"column"` // of members.parquet
}

// AtAge is the spread of the climate at one age, among the members that have not
// failed by then.
type AtAge struct {
	AgeGyr   float64 `json:"age_gyr"`
	Quantity string  `json:"quantity"`
	Unit     string  `json:"unit"`
	Count    int     `json:"count"`
	// Quantiles at 2.5, 16, 50, 84 and 97.5 %.
	Q025 float64 `json:"q025"`
	Q16  float64 `json:"q16"`
	Q50  float64 `json:"q50"`
	Q84  float64 `json:"q84"`
	Q975 float64 `json:"q975"`
}

// ByLaw are the dates of one outcome under one choice of law.
type ByLaw struct {
	Key     string   `json:"key"`
	Choice  string   `json:"choice"`
	Kind    Kind     `json:"kind"`
	Count   int      `json:"count"`
	Of      int      `json:"of"`
	Share   Interval `json:"share"`
	Median  float64  `json:"median_gyr"`
	LowGyr  float64  `json:"q05_gyr"`
	HighGyr float64  `json:"q95_gyr"`
}

// Typical is the history of a typical member.
type Typical struct {
	Kind   Kind  `json:"kind"`
	Member int   `json:"member"`
	Rows   []Row `json:"-"`
}

// Ensemble is the summary of many histories.
type Ensemble struct {
	Format      int              `json:"format"`
	Kind        string           `json:"kind"` // "ensemble"
	Title       string           `json:"title"`
	Name        string           `json:"scenario"`
	Hash        string           `json:"hash"` // of the resolved scenario with its section [uncertain]
	Version     string           `json:"version"`
	Seed        uint64           `json:"seed"`
	Design      string           `json:"design"`
	DesignWords string           `json:"design_words"`
	Members     int              `json:"members"`
	Independent int              `json:"independent"` // members that count for shares, dates and bands
	Undecided   int              `json:"undecided"`   // of them
	StartGyr    float64          `json:"start_gyr"`
	EndGyr      float64          `json:"end_gyr"`
	RefAgeGyr   float64          `json:"-"`        // the age that counts as present
	Sentence    string           `json:"sentence"` // the verdict in one sentence
	Uncertain   []UncertainInput `json:"uncertain"`
	Correlated  []string         `json:"correlations"`
	Shares      []FateShare      `json:"shares"`
	Liquid      Curve            `json:"liquid_water"` // probability that surface water is still liquid
	Incidence   []Curve          `json:"cumulative_incidence"`
	Dates       []Dates          `json:"dates"`
	Sensitive   []Sensitivities  `json:"sensitivities"`
	ByLaw       []ByLaw          `json:"by_law"`
	Borders     []Border         `json:"borders"`
	AtAges      []AtAge          `json:"at_ages"`
	Statuses    []StatusCount    `json:"statuses"`
	Worth       string           `json:"more_members"` // what more members would be worth
	Laws        []Law            `json:"laws"`         // all that a member may have
	Works       []Work           `json:"works"`
	Warnings    []Warning        `json:"warnings"`
	Inputs      []Input          `json:"-"`
	Scenario    string           `json:"-"` // the resolved scenario, TOML
	Command     string           `json:"-"` // that repeats the ensemble
	Typical     []Typical        `json:"-"`
}

// StatusCount is how many members ended in one way.
type StatusCount struct {
	Status string `json:"status"`
	Count  int    `json:"count"`
}
