package record

// Comparison sets histories side by side.
type Comparison struct {
	Format  int    `json:"format"`
	Version string `json:"version"`
	Command string `json:"-"`

	Names   []string     `json:"scenarios"`
	Differ  []Difference `json:"inputs_that_differ"`
	Agree   int          `json:"inputs_that_agree"`
	Runs    []*Run       `json:"-"`       // in the order of Names
	Results []Result     `json:"results"` // likewise
	Margins []MarginRow  `json:"margins"`
	Words   string       `json:"words"` // what sets them apart, in one sentence
	Works   []Work       `json:"works"`
}

// Difference is one input in which the scenarios differ.
type Difference struct {
	Key    string   `json:"key"`
	Doc    string   `json:"meaning"`
	Values []string `json:"values"` // with unit, one a scenario; empty where the key does not exist
}

// Result is what became of one scenario.
type Result struct {
	Name        string   `json:"scenario"`
	Hash        string   `json:"hash"`
	Outcome     Outcome  `json:"outcome"`
	Liquid      float64  `json:"liquid_water_gyr"` // from the start to the failure
	Freezes     int      `json:"freezes"`
	FrozenShare float64  `json:"frozen_share"`
	Start       State    `json:"start"`
	Reference   State    `json:"reference"`
	Feedback    Feedback `json:"feedback"`
}

// MarginRow is one kind of margin over all scenarios.
type MarginRow struct {
	Boundary string    `json:"boundary"`
	Side     string    `json:"side"`
	Unit     string    `json:"unit"`
	Values   []float64 `json:"values"`   // NaN where there is none
	TimeGyr  []float64 `json:"time_gyr"` // of the closest approach
}
