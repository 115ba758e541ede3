package carbon

import (
	"fmt"
	"math"

	"cycle/carbon/climate"
	"cycle/carbon/interior"
	"cycle/carbon/ocean"
	"cycle/carbon/outgas"
	"cycle/carbon/record"
	"cycle/carbon/star"
	"cycle/carbon/units"
	"cycle/carbon/weathering"
	"cycle/ode/elementary"
)

// A SetupError names the key whose value cannot stand.
type SetupError struct {
	key    string
	Reason string // what was found and what is allowed
}

func (e *SetupError) Error() string { return e.key + ": " + e.Reason }

// Key returns the dotted key.
func (e *SetupError) Key() string { return e.key }

// Model is a planet ready to be integrated: laws bound, albedo solved. It is
// not safe for use by several goroutines.
type Model struct {
	set    *Setup
	planet interior.Planet
	lay    layout

	area      float64 // relative to the Earth's
	dilution  float64 // area/mantle mass relative to the Earth's
	content   float64 // carbon per planet mass, mol/kg
	scale     float64 // of the sources
	ref       outgas.Reference
	deposited float64 // fraction of land carbonate laid down on the seafloor

	lnP0, lnH0      float64 // reference state
	iceNorm         [2]float64
	limNorm         float64
	freeName        string
	free            float64
	balanceResidual float64 // W/m²

	orbit  float64     // S of a star like today's Sun, W/m²
	escape bool        // CO₂ escapes while there is no dynamo
	hold   hold        // drivers that do not change
	from   *State      // where a history starts; nil is the equilibrium of start
	pair   *ocean.Pair // nil when alkalinity is no state

	acidic     bool               // the law of the seafloor looks at [H⁺]
	saturates  weathering.Limited // a law of land with a supply limit of its own, or nil
	saturation float64            // its part of that limit at the reference state

	memo   memo
	airs   airs
	row    record.Row     // scratch of the right-hand side
	state  State          // likewise
	env    weathering.Env // likewise
	source outgas.Input   // likewise
}

// air keeps what depends on temperature, surface carbon and alkalinity alone: the
// columns of the Jacobian for the deep reservoirs do not change it.
type air struct {
	t, c, alk        float64
	p, lnp           float64
	lnh              float64
	albedo, ice, out float64
	moisture         float64 // mixing ratio of water in the stratosphere
	precipitation    float64 // of carbonate, mol/yr, where alkalinity is a state

	// Weathering there, at one age and crust production.
	age, crust          float64
	land, seafloor, use float64 // mol/yr, mol/yr, part of the supply limit
}

// airs keeps the last few: a state and what its Jacobian asks for next to it, in
// temperature, surface carbon and alkalinity.
type airs struct {
	kept [4]air
	turn int
}

// at returns what is kept for a state, or nil.
func (a *airs) at(t, c, alk float64) *air {
	for i := range a.kept {
		if k := &a.kept[i]; k.t == t && k.c == c && k.alk == alk {
			return k
		}
	}
	return nil
}

// next returns the place for another state.
func (a *airs) next() *air {
	a.turn = (a.turn + 1) % len(a.kept)
	return &a.kept[a.turn]
}

// forget empties it.
func (a *airs) forget() {
	for i := range a.kept {
		a.kept[i].t = math.NaN()
	}
}

// present returns the surface carbon in mol that the ocean divides: c itself, but
// positive where the solver, within its tolerance, leaves less than nothing.
func present(c float64) float64 {
	const trace = 1e3 // mol
	if c > 1e12 {
		return c // the rest is below the last bit
	}
	root := math.Sqrt(c*c + 4*trace*trace)
	if c < 0 {
		return 2 * trace * trace / (root - c)
	}
	return 0.5 * (c + root)
}

// breathe returns the air for a temperature, surface carbon and alkalinity.
func (m *Model) breathe(t, c, alk float64) *air {
	if a := m.airs.at(t, c, alk); a != nil {
		return a
	}
	s := m.set
	a := m.airs.next()
	a.t, a.c, a.alk, a.age = t, c, alk, math.NaN()
	if m.pair != nil {
		var h, omega float64
		a.p, h, omega = m.pair.Balance(present(c), alk, t)
		if m.acidic {
			a.lnh = elementary.Log(h)
		}
		a.precipitation = m.pair.Precipitation(omega)
	} else {
		a.p, a.lnh = s.ocean.law.Pressure(present(c), alk, t)
	}
	a.lnp = elementary.Log(a.p)
	a.albedo = s.albedo.law.Planetary(t, a.p)
	a.ice = s.albedo.law.IceFraction(t)
	a.out = s.radiation.law.Outgoing(t, a.p, a.lnp)
	if s.WaterEscape {
		a.moisture = s.Strato.Mixing(t, a.p+s.Nitrogen)
	}
	return a
}

// memo keeps what depends on age and mantle alone: within one column sweep of
// the Jacobian it does not change.
type memo struct {
	age, mantleT, coreT float64
	flow                interior.Flow
	sun                 float64 // S/4, W/m²
	land, biology       float64
	pulse               float64 // mol/yr
	valid               bool
}

// metamorphic returns what is left of the total outgassing, mol/yr.
func (s *Setup) metamorphic() float64 { return s.OutgassingRef - s.RidgeRef - s.ArcRef }

// seafloorRef returns the reference flux of the seafloor, 0 when there is no law.
func (s *Setup) seafloorRef() float64 {
	for _, e := range weathering.Seafloor {
		if e.Name == s.seafloor.name && e.Absent {
			return 0
		}
	}
	return s.SeafloorRef
}

// Check tells whether the numbers fit together; the error has a Key method.
func (s *Setup) Check() error {
	fail := func(key, format string, args ...any) error {
		return &SetupError{key: key, Reason: fmt.Sprintf(format, args...)}
	}
	gyr := func(x float64) string { return units.Time.Format(x, "Gyr") }
	tmol := func(x float64) string { return units.Flux.Format(x, "Tmol/yr") }
	switch {
	case s.End <= s.Start:
		return fail("time.end", "found %s, allowed is more than time.start, %s", gyr(s.End), gyr(s.Start))
	case s.Solve != "nothing" && (s.RefAge <= s.Start || s.RefAge >= s.End):
		return fail("reference.age", "found %s, allowed is between time.start, %s, and time.end, %s, when carbon.solve is %q", gyr(s.RefAge), gyr(s.Start), gyr(s.End), s.Solve)
	case s.metamorphic() < 0:
		return fail("sources.outgassing", "found %s, allowed is at least sources.ridge + sources.arc, %s", tmol(s.OutgassingRef), tmol(s.RidgeRef+s.ArcRef))
	case s.seafloorRef() >= s.OutgassingRef:
		return fail("weathering.seafloor.modern", "found %s, allowed is less than sources.outgassing, %s", tmol(s.SeafloorRef), tmol(s.OutgassingRef))
	}
	return nil
}

// Reference state of an Earth-sized planet.
func (s *Setup) reference() outgas.Reference {
	return outgas.Reference{
		Age: s.RefAge, Ridge: s.RidgeRef, Arc: s.ArcRef, Metamorphic: s.metamorphic(),
		Land: s.OutgassingRef - s.seafloorRef(), Seafloor: s.seafloorRef(),
		Continental: s.ContinentalRef, Mantle: s.MantleRef,
	}
}

// NewModel binds the laws of a setup and solves the free albedo at the
// reference state. The laws stay those of the setup: one model at a time may
// use a setup.
func NewModel(s *Setup) (*Model, error) {
	if err := s.Check(); err != nil {
		return nil, err
	}
	bind := func(section string, err error) error {
		if err == nil {
			return nil
		}
		return &SetupError{key: section, Reason: err.Error()}
	}
	m := &Model{set: s, scale: s.OutgassingScale, content: s.Content}
	m.planet = interior.NewPlanet(s.Mass/units.EarthMass, s.CoreFraction)
	earth := interior.NewPlanet(1, earthCore)
	m.area = m.planet.Area / earth.Area
	m.dilution = m.area / (m.planet.MantleMass / earth.MantleMass)
	m.orbit = star.Sunlight(1, s.Distance, s.Eccentricity)
	m.escape = s.EscapeCO2 > 0 && s.interior.law.HasCore()
	m.lay = newLayout(s.interior.law.HasCore(), s.ocean.law.HasAlkalinity(), m.escape)
	m.pair, _ = s.ocean.law.(*ocean.Pair)
	m.saturates, _ = s.land.law.(weathering.Limited)
	_, m.acidic = s.seafloor.law.(weathering.Acidic)

	m.ref = s.reference()
	m.deposited = m.ref.Deposited()
	m.lnP0 = elementary.Log(s.RefP)
	sun := s.RefSun / 4

	cref := climate.Reference{T: s.RefT, P: s.RefP, Sun: sun}
	if err := bind("star", s.star.law.Bind()); err != nil {
		return nil, err
	}
	if end := s.star.law.End(); end <= s.Start {
		return nil, &SetupError{key: "time.start", Reason: fmt.Sprintf("found %s, allowed is before the star leaves the main sequence or its table ends, %s", units.Time.Format(s.Start, "Gyr"), units.Time.Format(end, "Gyr"))}
	}
	if err := bind("radiation", s.radiation.law.Bind(cref)); err != nil {
		return nil, err
	}
	if err := bind("albedo", s.albedo.law.Bind(cref)); err != nil {
		return nil, err
	}
	res, err := climate.SolveFree(s.radiation.law, s.albedo.law, cref)
	if err != nil {
		return nil, bind("albedo", err)
	}
	m.balanceResidual = res
	if name, _, v := s.albedo.law.Free(); v != nil {
		m.freeName, m.free = name, *v
	}
	if err := bind("interior", s.interior.law.Bind(m.planet, s.RefAge)); err != nil {
		return nil, err
	}
	if err := m.magma(); err != nil {
		return nil, err
	}
	if err := bind("sources", s.sources.law.Bind(m.ref)); err != nil {
		return nil, err
	}
	if err := bind("ocean", s.ocean.law.Bind(ocean.Planet{Area: m.planet.Area, Gravity: m.planet.Gravity, Mass: s.OceanFraction * s.Mass})); err != nil {
		return nil, err
	}
	alb := s.albedo.law.Planetary(s.RefT, s.RefP)
	wref := weathering.Reference{T: s.RefT, P: s.RefP, Sun: sun, Alb: alb, Flux: m.ref.Land, Land: 0.3 * units.EarthArea}
	if err := bind("weathering.land", s.land.law.Bind(wref)); err != nil {
		return nil, err
	}
	if m.saturates != nil {
		m.saturation = m.saturates.Saturation(&weathering.Env{Age: s.RefAge, T: s.RefT, P: s.RefP, Sun: sun, Alb: alb})
	}
	s.supply.Law = s.land.law
	if err := bind("weathering.land", s.supply.Bind(wref)); err != nil {
		return nil, err
	}
	wref.Flux = m.ref.Seafloor
	if err := bind("weathering.seafloor", s.seafloor.law.Bind(wref)); err != nil {
		return nil, err
	}
	ice := s.albedo.law.IceFraction(s.RefT)
	m.iceNorm = [2]float64{1 / (1 - (1-s.LandIce)*ice), 1 / (1 - (1-s.SeafloorIce)*ice)}
	m.limNorm = (s.RefP + s.Limiter) / s.RefP
	c, alk := m.carbonAt(s.RefP, s.RefT, s.OutgassingRef*m.area)
	m.lnH0 = elementary.Log(s.ocean.law.Solve(c, alk, s.RefT).H)
	return m, nil
}

// fastest is the crust production relative to the Earth's above which there is
// no crust: at 10,000 all of it would be younger than some ten thousand years.
const fastest = 1e4

// magma refuses an interior that starts as a magma ocean.
func (m *Model) magma() error {
	law := m.set.interior.law
	tm, tc := law.Start(m.set.Start)
	crust := law.Flow(m.set.Start, tm, tc).Crust
	if crust <= fastest {
		return nil
	}
	key := "interior.crust_exponent"
	if m.set.Number("interior.start_temperature") != nil {
		key = "interior.start_temperature"
	}
	return &SetupError{key: key, Reason: fmt.Sprintf("found a crust made %.3g times as fast as the Earth's at the start, allowed is up to %g times: beyond, there is an ocean of magma", crust, float64(fastest))}
}

// carbonAt returns surface carbon and alkalinity, mol, at a CO₂ pressure in bar
// and a temperature in K. Where alkalinity is a state, the ocean is as saturated
// as it takes to bury the flux, mol/yr.
func (m *Model) carbonAt(p, t, flux float64) (c, alk float64) {
	if l := m.pair; l != nil {
		keep := l.Omega
		// The inverse of the precipitation law, by its own normalisation.
		unit := l.Precipitation(2)
		l.Omega = 1 + elementary.Exp(elementary.Log(math.Max(flux, 1)/unit)/l.Order)
		c, alk = l.Carbon(p, t)
		l.Omega = keep
		return c, alk
	}
	return m.set.ocean.law.Carbon(p, t)
}

// earthCore is the core mass fraction at which reference fluxes hold.
const earthCore = 0.33

// at returns x(t) of a smooth step.
func (p *Step) at(age float64) float64 {
	if p.Before == p.After || age-p.Middle > 25*p.Width {
		return p.After
	}
	// ½(1 + tanh x) = 1/(1 + e^(−2x))
	return p.Before + (p.After-p.Before)/(1+elementary.Exp(-2*(age-p.Middle)/p.Width))
}

// during tells whether a pulse is on.
func (m *Model) during(p *Pulse, age float64) bool {
	return !m.hold.still[drivePulses] && age >= p.Start && age < p.Start+p.Duration
}

// sunlight returns S in W/m², pulses included.
func (m *Model) sunlight(age float64) float64 {
	s := m.set
	sun := m.orbit * s.star.law.Luminosity(m.hold.at(driveSun, age))
	for _, p := range s.Pulses {
		if m.during(p, age) {
			sun *= 1 + p.Sunlight
		}
	}
	return sun
}

// drive fills the memo for an age and the interior's temperatures.
func (m *Model) drive(age, mantleT, coreT float64) *memo {
	d := &m.memo
	if d.valid && d.age == age && d.mantleT == mantleT && d.coreT == coreT {
		return d
	}
	s := m.set
	if !d.valid || d.age != age {
		d.sun = m.sunlight(age) / 4
		d.pulse = 0
		for _, p := range s.Pulses {
			if m.during(p, age) {
				d.pulse += p.Carbon / p.Duration
			}
		}
		d.land = s.Land.at(m.hold.at(driveLand, age))
		d.biology = s.Biology.at(m.hold.at(driveBiology, age))
	}
	if m.hold.still[driveInterior] {
		d.flow = s.interior.law.Flow(m.hold.age, m.hold.mantleT, m.hold.coreT)
		d.flow.MantleRate, d.flow.CoreRate = 0, 0
		if m.hold.crust > 0 {
			d.flow.Crust = m.hold.crust
		}
	} else {
		d.flow = s.interior.law.Flow(age, mantleT, coreT)
	}
	d.age, d.mantleT, d.coreT, d.valid = age, mantleT, coreT, true
	return d
}

// limit is ℓ(p), 1 at the reference state: all that takes carbon from the
// surface vanishes with it.
func (m *Model) limit(p float64) float64 { return m.limNorm * p / (p + m.set.Limiter) }

// weather fills the fluxes of both sinks at temperature t (K) and CO₂ pressure
// p (bar) into a row that already has sunlight, albedo, land, biology and crust.
//
//	W_land = W₀ (A/A_E) f_land S(f_bio i_land ℓ(p) w_land(T, p))
//	W_sea  = W₀ (A/A_E) i_sea ℓ(p) w_sea(T, p)
//	ℓ(p)   = p/(p + p_ℓ), i = 1 − (1 − σ)·ice, both relative to the reference state
//
// σ is the strength under ice, S the supply limit, S(k) = k without one.
func (m *Model) weather(r *record.Row, lnp, lnh float64) {
	s, env := m.set, &m.env
	*env = weathering.Env{Age: r.Age, T: r.Temperature, P: r.PCO2, LnP: lnp - m.lnP0, Sun: r.Sunlight / 4, Alb: r.Albedo, Crust: r.Crust, LnH: lnh - m.lnH0}
	lim := m.limit(r.PCO2)
	relative := s.land.law.Relative(env)
	kinetic := m.kinetic(relative, r.PCO2, r.Biology, r.Ice)
	r.Land = m.ref.Land * m.area * r.LandFraction * s.supply.Of(kinetic)
	r.SupplyUse = m.supplyUse(relative, kinetic)
	r.Seafloor = 0
	if m.ref.Seafloor > 0 {
		r.Seafloor = m.ref.Seafloor * m.area * m.iceNorm[1] * (1 - (1-s.SeafloorIce)*r.Ice) * lim * s.seafloor.law.Relative(env)
	}
}

// kinetic returns what the supply limit bounds: f_bio i_land ℓ(p) w_land(T, p).
func (m *Model) kinetic(relative, p, biology, ice float64) float64 {
	return biology * m.iceNorm[0] * (1 - (1-m.set.LandIce)*ice) * m.limit(p) * relative
}

// supplyUse returns land weathering as a part of its supply limit, that of the
// wrapper or of the law itself; 0 without one.
func (m *Model) supplyUse(relative, kinetic float64) float64 {
	return math.Max(m.set.supply.Use(kinetic), m.saturation*relative)
}

// diagnose evaluates every law once: what it puts into the row is what the
// derivative sums and what the tables print. The rest of the ocean's
// chemistry is left to describe.
func (m *Model) diagnose(r *record.Row, age float64, y *State) {
	s := m.set
	d := m.drive(age, y.MantleT, y.CoreT)
	r.Age = age
	r.Temperature = y.T
	r.Sunlight = 4 * d.sun
	r.LandFraction, r.Biology = d.land, d.biology
	r.MantleTemperature, r.CoreTemperature = y.MantleT, y.CoreT
	r.HeatFlow, r.Radiogenic, r.Crust = d.flow.Heat, d.flow.Radiogenic, d.flow.Crust
	r.CoreHeat = d.flow.Core
	r.Surface, r.SeafloorCarbon, r.Continental, r.Mantle = y.Surface, y.Seafloor, y.Continental, y.Mantle
	r.Escaped, r.Water = y.Escaped, y.Water
	r.Total = y.Carbon()

	a := m.breathe(y.T, y.Surface, y.Alk)
	r.PCO2 = a.p
	r.Albedo, r.Ice, r.Outgoing, r.Moisture = a.albedo, a.ice, a.out, a.moisture
	r.Absorbed = d.sun * (1 - r.Albedo)
	if a.age != age || a.crust != r.Crust {
		m.weather(r, a.lnp, a.lnh)
		a.age, a.crust, a.land, a.seafloor, a.use = age, r.Crust, r.Land, r.Seafloor, r.SupplyUse
	}
	r.Land, r.Seafloor, r.SupplyUse = a.land, a.seafloor, a.use

	in := &m.source
	*in = outgas.Input{Age: m.hold.at(driveSources, age), Crust: r.Crust, Dilution: m.dilution, Area: m.area, Scale: m.scale, Mantle: y.Mantle, Seafloor: y.Seafloor, Continental: y.Continental}
	f := s.sources.law.Fluxes(in)
	r.Ridge, r.Arc, r.Metamorphic = f.Ridge, f.Arc, f.Metamorphic
	r.Pulse = d.pulse
	if r.Pulse < 0 {
		r.Pulse *= m.limit(r.PCO2) // what is not there cannot be taken
	}
	r.Outgassing = f.Ridge + f.Arc + f.Metamorphic + r.Pulse
	r.Burial = r.Land + r.Seafloor
	r.Deposited = m.deposited * r.Land
	if m.pair != nil {
		// Carbonate leaves as it precipitates, shared as weathering would have it.
		weathered := r.Burial
		r.Burial = a.precipitation
		r.Deposited *= part(r.Burial, weathered)
	}
	r.Imbalance = r.Outgassing - r.Burial
	r.Subducted = f.Subducted
	r.Foundered = f.Foundered
}

// describe adds to a diagnosed row what no rate depends on.
func (m *Model) describe(r *record.Row, y *State) {
	chem := m.set.ocean.law.Solve(present(y.Surface), y.Alk, y.T)
	r.DIC, r.Alk, r.Omega, r.PH = chem.DIC, chem.Alk, chem.Omega, -math.Log10(chem.H)
	r.Pressure = m.set.Nitrogen + r.PCO2 + climate.WaterPressure(r.Temperature)
	r.Boiling = climate.BoilingPoint(r.Pressure)
}

// part returns a/b, and 1 when b is 0: what is buried is then taken to be all
// from the seafloor, which has a part of its own.
func part(a, b float64) float64 {
	if b == 0 {
		return 1
	}
	return a / b
}

// derivative is the right-hand side: it calls diagnose and sums its fluxes.
//
//	c dT/dt           = (S/4)(1 − A) − F
//	dC_surface/dt     = ridge + arc + metamorphic + pulse − burial − escape
//	dC_seafloor/dt    = burial − (1 − δ) burial_land − subducted
//	dC_continental/dt = (1 − δ) burial_land − metamorphic − foundered
//	dC_mantle/dt      = subducted − arc + foundered − ridge − pulse
//	dA_ocean/dt       = 2 (W_land + W_sea) − 2 burial
//	dT_mantle/dt      from the interior
//	dM_water/dt       = −escape through the stratosphere
//
// The escape of carbon and a pulse that takes carbon away end with it, as ℓ(p).
// burial = W_land + W_sea unless alkalinity is a state; then it is the
// precipitation of carbonate, and burial_land its share W_land/(W_land + W_sea).
func (m *Model) derivative(dydt []float64, age float64, y []float64) {
	st, r := &m.state, &m.row
	m.lay.unpack(st, y)
	m.diagnose(r, age, st)
	flow := &m.memo.flow
	weathered := r.Land + r.Seafloor
	land := r.Land
	if m.pair != nil {
		land *= part(r.Burial, weathered)
	}
	rate := State{
		T:           (r.Absorbed - r.Outgoing) * units.Year / m.set.HeatCapacity,
		Surface:     r.Imbalance,
		Seafloor:    r.Burial - (land - r.Deposited) - r.Subducted,
		Continental: land - r.Deposited - r.Metamorphic - r.Foundered,
		Mantle:      r.Subducted - r.Arc + r.Foundered - r.Ridge - r.Pulse,
		MantleT:     flow.MantleRate,
		CoreT:       flow.CoreRate,
		Alk:         2 * (weathered - r.Burial),
	}
	if m.escape && !flow.Dynamo && st.Surface > 0 {
		rate.Escaped = m.set.EscapeCO2 * m.limit(r.PCO2)
		rate.Surface -= rate.Escaped
	}
	if m.set.WaterEscape && st.Water > 0 {
		rate.Water = -climate.WaterLoss(r.Moisture, m.planet.Area)
	}
	m.lay.pack(dydt, &rate)
}
