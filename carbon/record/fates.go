package record

import "math"

// Axis is one axis of a map of fates.
type Axis struct {
	Key  string  `json:"key"`
	Doc  string  `json:"meaning"`
	Unit string  `json:"unit"` // shown; empty for a pure number
	Lo   float64 `json:"lo"`   // in Unit
	Hi   float64 `json:"hi"`
	Log  bool    `json:"log"`
	Own  float64 `json:"own"` // the scenario's own value, NaN where it has no one value
}

// FatePoint is one history of a map. X and Y are in the units of the axes.
type FatePoint struct {
	I, J    int     `json:"-"` // on the finest lattice
	X       float64 `json:"x"`
	Y       float64 `json:"y"`
	Kind    Kind    `json:"outcome"` // Undecided also where the values make no planet
	TimeGyr float64 `json:"time_gyr"`
	Words   string  `json:"words"` // why the values make no planet; else empty
}

// FateCell is a square of the lattice, Size finest cells wide. Mixed cells lie on
// a boundary; they are as small as the lattice allows.
type FateCell struct {
	I, J, Size int
	Kind       Kind
	TimeGyr    float64    // mean of the corners that share the kind
	Corners    [4]float64 // dates at (0,0), (1,0), (0,1), (1,1); NaN where the kind is another
	Mixed      bool
}

// BoundaryLine is one exact boundary of the equilibrium analysis, in the units
// of the axes; NaN breaks the line.
type BoundaryLine struct {
	Name   string    `json:"name"`
	Words  string    `json:"words"`
	AgeGyr float64   `json:"age_gyr"` // whose conditions it holds for
	X      []float64 `json:"x"`
	Y      []float64 `json:"y"`
}

// PathPoint is where the scenario itself is at one age.
type PathPoint struct {
	AgeGyr float64 `json:"age_gyr"`
	X      float64 `json:"x"`
	Y      float64 `json:"y"`
}

// Map says which fate awaits where, over two keys.
type Map struct {
	Format  int    `json:"format"`
	Title   string `json:"title"`
	Name    string `json:"scenario"`
	Hash    string `json:"hash"`
	Version string `json:"version"`
	Command string `json:"-"`

	X      Axis           `json:"x"`
	Y      Axis           `json:"y"`
	N      int            `json:"lattice"` // finest cells along each axis
	Steady bool           `json:"steady"`  // histories under steady sunlight and outgassing
	Meant  string         `json:"meaning"` // what every point is, in words
	Points []FatePoint    `json:"-"`       // in order of I, then J
	Cells  []FateCell     `json:"-"`       // the leaves, which tile the map
	Lines  []BoundaryLine `json:"boundaries"`
	Path   []PathPoint    `json:"path"`
	Shares []KindShare    `json:"shares"`
	Run    *Run           `json:"-"` // the scenario's own history
	Works  []Work         `json:"works"`

	Warnings []Warning `json:"warnings"`
}

// KindShare is the part of the map's area one outcome takes.
type KindShare struct {
	Kind  Kind    `json:"outcome"`
	Share float64 `json:"share"`
}

// At returns the value on an axis of a place on the finest lattice of n cells,
// in the axis's unit.
func (a *Axis) At(i, n int) float64 {
	return a.Value(float64(i) / float64(n))
}

// Value returns the value at a part of the axis, 0 at its low and 1 at its high
// end.
func (a *Axis) Value(q float64) float64 {
	switch {
	case q == 0:
		return a.Lo
	case q == 1:
		return a.Hi
	case a.Log:
		return a.Lo * math.Pow(a.Hi/a.Lo, q)
	}
	return a.Lo + (a.Hi-a.Lo)*q
}

// Part is the inverse of Value.
func (a *Axis) Part(v float64) float64 {
	if a.Log {
		return math.Log(v/a.Lo) / math.Log(a.Hi/a.Lo)
	}
	return (v - a.Lo) / (a.Hi - a.Lo)
}
