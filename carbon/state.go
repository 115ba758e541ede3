package carbon

// The state vector. Temperatures come first, one per latitude band (one band
// in the global mean); carbon is in mol. Nothing outside this file indexes the
// vector.
//
// Surface carbon is a state as it stands, not its logarithm: fluxes between
// reservoirs then add up to zero in every stage of the integrator, and carbon
// is conserved to rounding.
type layout struct {
	bands       int // number of temperatures
	surface     int
	seafloor    int
	continental int
	mantle      int
	mantleT     int
	water       int
	coreT       int // -1 when it is no state
	alk         int // likewise
	escaped     int // likewise
	n           int
}

func newLayout(core, alk, escape bool) layout {
	l := layout{bands: 1, coreT: -1, alk: -1, escaped: -1}
	next := l.bands
	take := func() int { next++; return next - 1 }
	l.surface, l.seafloor, l.continental, l.mantle, l.mantleT, l.water = take(), take(), take(), take(), take(), take()
	if core {
		l.coreT = take()
	}
	if alk {
		l.alk = take()
	}
	if escape {
		l.escaped = take()
	}
	l.n = next
	return l
}

// State is the state of a planet at one time.
type State struct {
	T           float64 // global mean surface temperature, K
	Surface     float64 // carbon of atmosphere and ocean, mol
	Seafloor    float64 // seafloor carbonate, mol
	Continental float64 // continental carbonate, mol
	Mantle      float64 // mantle carbon, mol
	MantleT     float64 // mantle temperature, K
	CoreT       float64 // core temperature, K; 0 when it is no state
	Water       float64 // water inventory, kg
	Alk         float64 // alkalinity of the ocean, mol; 0 when it is no state
	Escaped     float64 // carbon lost to space, mol; 0 when it is no state
}

// Carbon returns the sum over all reservoirs and what escaped, mol.
func (s *State) Carbon() float64 {
	return s.Surface + s.Seafloor + s.Continental + s.Mantle + s.Escaped
}

func (l *layout) unpack(s *State, y []float64) {
	s.T = y[0]
	s.Surface = y[l.surface]
	s.Seafloor = y[l.seafloor]
	s.Continental = y[l.continental]
	s.Mantle = y[l.mantle]
	s.MantleT = y[l.mantleT]
	s.Water = y[l.water]
	if l.coreT >= 0 {
		s.CoreT = y[l.coreT]
	}
	if l.alk >= 0 {
		s.Alk = y[l.alk]
	}
	if l.escaped >= 0 {
		s.Escaped = y[l.escaped]
	}
}

func (l *layout) pack(y []float64, s *State) {
	y[0] = s.T
	y[l.surface] = s.Surface
	y[l.seafloor] = s.Seafloor
	y[l.continental] = s.Continental
	y[l.mantle] = s.Mantle
	y[l.mantleT] = s.MantleT
	y[l.water] = s.Water
	if l.coreT >= 0 {
		y[l.coreT] = s.CoreT
	}
	if l.alk >= 0 {
		y[l.alk] = s.Alk
	}
	if l.escaped >= 0 {
		y[l.escaped] = s.Escaped
	}
}

// names returns what each component is, for statistics and messages.
func (l *layout) names() []string {
	out := make([]string, l.n)
	out[0] = "temperature"
	out[l.surface] = "surface carbon"
	out[l.seafloor] = "seafloor carbonate"
	out[l.continental] = "continental carbonate"
	out[l.mantle] = "mantle carbon"
	out[l.mantleT] = "mantle temperature"
	out[l.water] = "water"
	if l.coreT >= 0 {
		out[l.coreT] = "core temperature"
	}
	if l.alk >= 0 {
		out[l.alk] = "alkalinity"
	}
	if l.escaped >= 0 {
		out[l.escaped] = "escaped carbon"
	}
	return out
}
