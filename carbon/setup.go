package carbon

import (
	"fmt"
	"io"

	"cycle/carbon/cite"
	"cycle/carbon/climate"
	"cycle/carbon/interior"
	"cycle/carbon/ocean"
	"cycle/carbon/outgas"
	"cycle/carbon/star"
	"cycle/carbon/units"
	"cycle/carbon/weathering"
)

// Setup is everything a history depends on: the chosen laws with their
// parameters and the numbers of planet, orbit, reference state and solver. A
// new Setup is the Earth. All values are in base units (package units).
//
// Sections describes the same content as a list of keys: reading a scenario,
// error messages, help, priors and the report's input table all walk it.
type Setup struct {
	Title string

	star      slot[star.Law]
	radiation slot[climate.Radiation]
	albedo    slot[climate.Albedo]
	land      slot[weathering.Law]
	seafloor  slot[weathering.Law]
	supply    weathering.Supply
	sources   slot[outgas.Law]
	interior  slot[interior.Law]
	ocean     slot[ocean.Law]

	Distance, Eccentricity float64 // m, -
	Mass, CoreFraction     float64 // kg, -
	ZoneLaw                string

	RefAge, RefT, RefP, RefSun float64 // yr, K, bar, W/m²

	HeatCapacity             float64              // J m⁻² K⁻¹
	FrozenBelow, ThawedAbove float64              // K
	Strato                   climate.Stratosphere // moist from Strato.T
	Nitrogen                 float64              // bar
	EscapeCO2                float64              // mol/yr, only while there is no dynamo
	WaterEscape              bool
	Pulses                   []*Pulse
	ColdContrast             float64 // K
	Condensation             string  // law of CO₂ saturation

	OutgassingRef, RidgeRef, ArcRef float64 // mol/yr; metamorphic is the rest
	SeafloorRef                     float64 // mol/yr
	LandIce, SeafloorIce            float64 // strength under ice, 0 to 1
	Limiter                         float64 // bar

	Land    Step // land fraction relative to the reference state
	Biology Step // biological enhancement relative to the same

	Solve                     string  // what is solved for: total, outgassing or nothing
	Content                   float64 // carbon per planet mass, mol/kg
	OutgassingScale           float64 // multiplies all sources
	OceanFraction             float64 // ocean mass/planet mass
	ContinentalRef, MantleRef float64 // reservoirs at the reference state, mol
	Start, End                float64 // yr
	StartSide                 string  // warm or cold
	Tolerance, MaxStep        float64 // -, yr
	Guard                     bool
	MaxFreezes, MaxSteps      float64
	Lasting                   float64 // a snowball longer than this is a lasting failure, yr
}

// Pulse is a passing disturbance: carbon given to or taken from the surface at a
// constant rate, in exchange with the mantle, or a change of sunlight.
type Pulse struct {
	Start, Duration float64 // yr
	Carbon          float64 // mol, negative for a drawdown
	Sunlight        float64 // relative change while it lasts
}

// MaxPulses is how many pulses a setup may have.
const MaxPulses = 9

// Grow makes a numbered section, "pulse.1" to "pulse.9", and those before it. It
// reports false when the name is no such section.
func (s *Setup) Grow(section string) bool {
	var n int
	if _, err := fmt.Sscanf(section, "pulse.%d", &n); err != nil || section != fmt.Sprintf("pulse.%d", n) || n < 1 || n > MaxPulses {
		return false
	}
	for len(s.Pulses) < n {
		s.Pulses = append(s.Pulses, &Pulse{Start: 4 * units.Gyr, Duration: 1e5})
	}
	return true
}

// Step is a smooth step in time,
//
//	x(t) = x₁ + (x₂ − x₁)·½[1 + tanh((t − t_m)/w)]
type Step struct {
	Before, After float64 // x₁, x₂
	Middle, Width float64 // t_m, w; yr
}

// Section is a group of keys of a scenario.
type Section struct {
	Name    string // dotted, "weathering.land"
	Doc     string
	Laws    []Choice // what the key "law" may be; nil when there is no such key
	Law     string   // the chosen one
	Fields  []units.Field
	Options []Option
	Flags   []Flag
	Table   *Table // set when the chosen law reads a table of the user's
}

// Choice is one law a section offers.
type Choice struct {
	Name, Doc, Form string
	Source          []cite.Ref
}

// Option is a key whose value is one of a few words; Flag one that is true or false.
type (
	Option = units.Option
	Flag   = units.Flag
)

// Table is a key that takes a user's CSV: a path under Key+"_file", or the
// text itself under Key+"_csv".
type Table struct {
	Key  string
	Doc  string
	Load func(io.Reader) error // replaces the content; errors name line, found and allowed
	Text *string               // the CSV as loaded
}

// slot is a chosen law of one kind.
type slot[L any] struct {
	choices []Choice
	makers  []func() L
	name    string
	law     L
}

func (s *slot[L]) add(c Choice, mk func() L) {
	s.choices = append(s.choices, c)
	s.makers = append(s.makers, mk)
	if s.name == "" {
		s.name, s.law = c.Name, mk()
	}
}

func (s *slot[L]) choose(name string) bool {
	for i, c := range s.choices {
		if c.Name == name {
			if s.name != name {
				s.name, s.law = name, s.makers[i]()
			}
			return true
		}
	}
	return false
}

// NewSetup returns the Earth with the published defaults.
func NewSetup() *Setup {
	s := &Setup{
		Title:    "Earth",
		Distance: units.AU, Mass: units.EarthMass, CoreFraction: 0.33, Eccentricity: 0,
		RefAge: 4.57 * units.Gyr, RefT: 288, RefP: 280e-6, RefSun: units.SolarFlux,
		HeatCapacity: 2.1e9, FrozenBelow: 255, ThawedAbove: 268, ColdContrast: 30,
		Strato: *climate.NewStratosphere(), Nitrogen: 0.78, WaterEscape: true,
		OutgassingRef: 7.5e12, RidgeRef: 2.2e12, ArcRef: 2.5e12, SeafloorRef: 1.75e12,
		LandIce: 0, SeafloorIce: 1, Limiter: 1e-7,
		Land:    Step{Before: 0.1, After: 1, Middle: 2.0 * units.Gyr, Width: 0.5 * units.Gyr},
		Biology: Step{Before: 0.2, After: 1, Middle: 4.15 * units.Gyr, Width: 0.05 * units.Gyr},
		Solve:   "nothing", Content: 3.5e22 / units.EarthMass, OutgassingScale: 1, OceanFraction: 1.35e21 / units.EarthMass,
		ContinentalRef: 5e21, MantleRef: 3e22,
		Start: 0.2 * units.Gyr, End: 9 * units.Gyr, StartSide: "warm",
		Tolerance: 1e-5, MaxStep: 20 * units.Myr, Guard: true, MaxFreezes: 60, MaxSteps: 200000, Lasting: 1 * units.Gyr,
	}
	for _, e := range star.Laws {
		s.star.add(Choice{e.Name, e.Doc, e.Form, e.Source}, e.New)
	}
	for _, e := range climate.Radiations {
		s.radiation.add(Choice{e.Name, e.Doc, e.Form, e.Source}, e.New)
	}
	for _, e := range climate.Albedos {
		s.albedo.add(Choice{e.Name, e.Doc, e.Form, e.Source}, e.New)
	}
	for _, e := range weathering.Land {
		s.land.add(Choice{e.Name, e.Doc, e.Form, e.Source}, e.New)
	}
	for _, e := range weathering.Seafloor {
		s.seafloor.add(Choice{e.Name, e.Doc, e.Form, e.Source}, e.New)
	}
	for _, e := range outgas.Laws {
		s.sources.add(Choice{e.Name, e.Doc, e.Form, e.Source}, e.New)
	}
	for _, e := range interior.Laws {
		s.interior.add(Choice{e.Name, e.Doc, e.Form, e.Source}, e.New)
	}
	for _, e := range ocean.Laws {
		s.ocean.add(Choice{e.Name, e.Doc, e.Form, e.Source}, e.New)
	}
	s.ZoneLaw = star.Zones[0].Name
	s.Condensation = climate.Condensations[0].Name
	return s
}

// Choose selects a law of a section by name; it resets that law's parameters
// to their defaults when the name changes.
func (s *Setup) Choose(section, law string) error {
	var ok bool
	switch section {
	case "star":
		ok = s.star.choose(law)
	case "radiation":
		ok = s.radiation.choose(law)
	case "albedo":
		ok = s.albedo.choose(law)
	case "weathering.land":
		ok = s.land.choose(law)
	case "weathering.seafloor":
		ok = s.seafloor.choose(law)
	case "sources":
		ok = s.sources.choose(law)
	case "interior":
		ok = s.interior.choose(law)
	case "ocean":
		ok = s.ocean.choose(law)
	default:
		return fmt.Errorf("carbon: section %q has no laws to choose from", section)
	}
	if !ok {
		return fmt.Errorf("carbon: %q is no law of section %q", law, section)
	}
	return nil
}

func memory(w *cite.Work, note string) cite.Ref {
	return cite.Ref{Work: w, Note: note, Trust: cite.Memory}
}
func practice(note string) cite.Ref { return cite.Ref{Note: note, Trust: cite.Practice} }

// Sections lists every key with its present value, in file order. The value
// pointers are live; the fields depend on the chosen laws, so call it again
// after Choose.
func (s *Setup) Sections() []Section {
	table := func(law any) *Table {
		if l, ok := law.(interface {
			Load(io.Reader) error
			Text() *string
		}); ok {
			return &Table{Key: "table", Doc: "the user's table", Load: l.Load, Text: l.Text()}
		}
		return nil
	}
	out := []Section{
		{Name: "star", Doc: "luminosity through time", Laws: s.star.choices, Law: s.star.name, Fields: s.star.law.Fields(), Table: table(s.star.law)},
		{Name: "orbit", Doc: "where the planet goes round", Fields: []units.Field{
			{Key: "distance", Kind: units.Length, Unit: "au", Min: 0.05 * units.AU, Max: 10 * units.AU, Doc: "semi-major axis", Source: practice("Earth"), Value: &s.Distance},
			{Key: "eccentricity", Min: 0, Max: 0.8, Doc: "eccentricity; only the mean flux counts", Source: cite.Own("a circular orbit"), Value: &s.Eccentricity},
		}},
		{Name: "planet", Doc: "bulk properties; radius, gravity, area, mantle follow from them", Fields: []units.Field{
			{Key: "mass", Kind: units.Mass, Unit: "M_E", Min: 0.05 * units.EarthMass, Max: 8 * units.EarthMass, Published: units.Range{Lo: units.EarthMass, Hi: 8 * units.EarthMass}, Doc: "mass; the published range is that of the mass-radius relation", Source: cite.Ref{Work: cite.Zeng2016}, Value: &s.Mass},
			{Key: "core_fraction", Min: 0, Max: 0.6, Published: units.Range{Lo: 0, Hi: 0.4}, Doc: "core mass over planet mass", Source: cite.Ref{Work: cite.Zeng2016, Note: "0.33 for the Earth"}, Value: &s.CoreFraction},
			{Key: "ocean_fraction", Min: 1e-7, Max: 0.05, Doc: "ocean mass over planet mass", Source: practice("Earth, 1.35e21 kg of ocean"), Value: &s.OceanFraction},
		}},
		{Name: "reference", Doc: "the state at which every weathering law is 1 and the energy balance closes", Fields: []units.Field{
			{Key: "age", Kind: units.Time, Unit: "Gyr", Min: 0.1e9, Max: 12e9, Doc: "age of the star at the reference state", Source: memory(cite.Gough1981, "present age of the Sun"), Value: &s.RefAge},
			{Key: "temperature", Kind: units.Temperature, Unit: "K", Min: 275, Max: 310, Published: units.Range{Lo: 287, Hi: 288}, Doc: "global mean surface temperature", Source: practice("pre-industrial mean"), Value: &s.RefT},
			{Key: "co2", Kind: units.Pressure, Unit: "ppm", Min: 50e-6, Max: 5e-3, Doc: "CO2 partial pressure", Source: practice("pre-industrial level"), Value: &s.RefP},
			{Key: "sunlight", Kind: units.HeatFlux, Unit: "W/m2", Min: 1000, Max: 1600, Published: units.Range{Lo: 1360, Hi: 1370}, Doc: "stellar flux at the reference state", Source: memory(cite.KoppLean2011, ""), Value: &s.RefSun},
		}},
		{Name: "radiation", Doc: "outgoing long-wave radiation", Laws: s.radiation.choices, Law: s.radiation.name, Fields: s.radiation.law.Fields()},
		{Name: "albedo", Doc: "planetary albedo; its free value is solved at the reference state", Laws: s.albedo.choices, Law: s.albedo.name, Fields: s.albedo.law.Fields()},
		{Name: "climate", Doc: "heat capacity and the temperatures that name a state", Fields: []units.Field{
			{Key: "heat_capacity", Kind: units.HeatCapacity, Unit: "MJ/m2/K", Min: 1e7, Max: 1e11, Doc: "of the column that warms and cools; 500 m of water", Source: cite.Own("dates change by less than 0.3 % from 10 m to 5 km of water"), Value: &s.HeatCapacity},
			{Key: "frozen_below", Kind: units.Temperature, Unit: "K", Min: 220, Max: 262, Doc: "a snowball starts below", Source: cite.Own("colder than the ramp's unstable branch"), Value: &s.FrozenBelow},
			{Key: "thawed_above", Kind: units.Temperature, Unit: "K", Min: 262, Max: 280, Doc: "a snowball ends above", Source: cite.Own("warmer than the ramp's unstable branch"), Value: &s.ThawedAbove},
			{Key: "cold_contrast", Kind: units.Interval, Unit: "K", Min: 0, Max: 80, Doc: "coldest place colder than the mean by, for CO2 condensation", Source: cite.Own("of the size of today's pole-to-mean contrast"), Value: &s.ColdContrast},
		}, Options: []Option{
			{Key: "condensation", Doc: "saturation pressure of CO2", Allowed: condensationNames(), Source: s.condensationSource(), Own: true, Value: &s.Condensation},
		}},
		{Name: "weathering", Doc: "what both sinks share", Fields: []units.Field{
			{Key: "limiter", Kind: units.Pressure, Unit: "bar", Min: 1e-9, Max: 1e-5, Doc: "CO2 pressure below which all sinks vanish", Source: cite.Own("keeps carbon from being overdrawn"), Value: &s.Limiter},
		}},
		{Name: "weathering.land", Doc: "silicate weathering on land", Laws: s.land.choices, Law: s.land.name, Fields: append([]units.Field{
			s.supply.LimitField(),
			{Key: "under_ice", Min: 0, Max: 1, Doc: "strength under ice, 0 to 1", Source: cite.Own("frozen ground does not weather"), Value: &s.LandIce},
		}, s.land.law.Fields()...)},
		{Name: "weathering.seafloor", Doc: "weathering of the ocean crust", Laws: s.seafloor.choices, Law: s.seafloor.name, Fields: append([]units.Field{
			{Key: "modern", Kind: units.Flux, Unit: "Tmol/yr", Min: 0, Max: 6e12, Published: units.Range{Lo: 0.2e12, Hi: 3e12}, Doc: "flux at the reference state of an Earth-sized planet", Source: memory(cite.Foley2015, "inside 1.5-2.5 of Alt & Teagle 1999"), Value: &s.SeafloorRef},
			{Key: "under_ice", Min: 0, Max: 1, Published: units.Range{Lo: 0, Hi: 1}, Doc: "strength under a frozen ocean, 0 to 1; decides permanent snowball or cycles", Source: cite.Own("open question; varied in published studies"), Value: &s.SeafloorIce},
		}, s.seafloor.law.Fields()...)},
		{Name: "land", Doc: "land fraction relative to the reference, a smooth step in time", Fields: s.Land.fields("land fraction",
			units.Range{Lo: 0, Hi: 1}, memory(cite.KrissansenTotton2018, "early value inside the published range 0-1"), cite.Own("most continental growth by 2.5 Gyr ago"))},
		{Name: "biology", Doc: "biological enhancement of land weathering relative to the reference, a smooth step in time", Fields: s.Biology.fields("biological enhancement",
			units.Range{Lo: 0.1, Hi: 1}, practice("weathering before vascular plants 0.15-0.25 of modern"), practice("spread of vascular plants about 0.42 Gyr ago"))},
		{Name: "sources", Doc: "outgassing", Laws: s.sources.choices, Law: s.sources.name, Fields: append([]units.Field{
			{Key: "outgassing", Kind: units.Flux, Unit: "Tmol/yr", Min: 0.01e12, Max: 200e12, Published: units.Range{Lo: 6e12, Hi: 10e12}, Doc: "all sources of an Earth-sized planet at the reference state; also the sum of the sinks there", Source: cite.Ref{Work: cite.HaqqMisra2016, Note: "inside 6-10 of Lehmer et al. 2020", Trust: cite.Memory}, Value: &s.OutgassingRef},
			{Key: "ridge", Kind: units.Flux, Unit: "Tmol/yr", Min: 0, Max: 100e12, Published: units.Range{Lo: 1.3e12, Hi: 3.1e12}, Doc: "the part from mid-ocean ridges", Source: memory(cite.MartyTolstikhin1998, ""), Value: &s.RidgeRef},
			{Key: "arc", Kind: units.Flux, Unit: "Tmol/yr", Min: 0, Max: 100e12, Published: units.Range{Lo: 1.5e12, Hi: 3.6e12}, Doc: "the part from arcs; what is left of the total is metamorphic", Source: memory(cite.MartyTolstikhin1998, ""), Value: &s.ArcRef},
			{Key: "scale", Min: 0.001, Max: 100, Doc: "multiplies every source, the sinks' reference fluxes left as they are", Source: cite.Own("1 is the reference state"), Value: &s.OutgassingScale},
		}, s.sources.law.Fields()...), Table: table(s.sources.law)},
		{Name: "interior", Doc: "thermal history of the mantle", Laws: s.interior.choices, Law: s.interior.name, Fields: s.interior.law.Fields(), Options: options(s.interior.law), Flags: flags(s.interior.law), Table: table(s.interior.law)},
		{Name: "ocean", Doc: "division of surface carbon", Laws: s.ocean.choices, Law: s.ocean.name, Fields: s.ocean.law.Fields()},
		{Name: "carbon", Doc: "how much carbon there is", Options: []Option{
			{Key: "solve", Doc: "what is solved so that the history passes through the reference state: total (carbon), outgassing (its scale) or nothing", Allowed: []string{"total", "outgassing", "nothing"}, Source: cite.Own("invented planets are not anchored"), Value: &s.Solve},
		}, Fields: []units.Field{
			{Key: "content", Kind: units.Content, Unit: "mmol/kg", Min: 1e-6, Max: 1, Doc: "all carbon over planet mass; where the solve starts when solve is total", Source: practice("3.5e22 mol on Earth: mantle 3e22, carbonates 5e21"), Value: &s.Content},
			{Key: "continental", Kind: units.Amount, Unit: "Emol", Min: 1e19, Max: 1e23, Doc: "continental carbonate at the reference state; sets its turnover", Source: practice("sedimentary carbonate, about 5e21 mol"), Value: &s.ContinentalRef},
			{Key: "mantle", Kind: units.Amount, Unit: "Emol", Min: 1e20, Max: 1e24, Published: units.Range{Lo: 1e22, Hi: 1e23}, Doc: "mantle carbon at the reference state; sets its turnover", Source: practice("several 1e22 mol"), Value: &s.MantleRef},
		}},
		{Name: "atmosphere", Doc: "what is in the air besides CO2 and vapour, and what leaves it", Fields: []units.Field{
			{Key: "nitrogen", Kind: units.Pressure, Unit: "bar", Min: 0, Max: 100, Doc: "partial pressure of nitrogen; it counts for the boiling point and for escape", Source: practice("today's Earth"), Value: &s.Nitrogen},
			{Key: "co2_escape", Kind: units.Flux, Unit: "Tmol/yr", Min: 0, Max: 100e12, Off: true, Doc: "loss of CO2 to space while there is no dynamo; 0 is none", Source: cite.Own("no general law: only at the user's rate"), Value: &s.EscapeCO2},
		}},
		{Name: "water", Doc: "loss of water through a moist stratosphere", Fields: s.Strato.Fields(), Flags: []Flag{
			{Key: "escape", Doc: "water escapes as fast as hydrogen diffuses through the stratosphere", Source: cite.Ref{Work: cite.Kasting1993, Note: "diffusion limit", Trust: cite.Memory}, Value: &s.WaterEscape},
		}},
		{Name: "zone", Doc: "limits of the habitable zone to show; they decide nothing", Options: []Option{
			{Key: "law", Doc: "whose limits", Allowed: zoneNames(), Source: s.zoneLaw().Source[0], Own: true, Value: &s.ZoneLaw},
		}},
		{Name: "time", Doc: "span of the history; time is the age of the star", Fields: []units.Field{
			{Key: "start", Kind: units.Time, Unit: "Gyr", Min: 0.01e9, Max: 10e9, Doc: "start", Source: cite.Own("after the magma ocean and the fastest brightening"), Value: &s.Start},
			{Key: "end", Kind: units.Time, Unit: "Gyr", Min: 0.02e9, Max: 20e9, Doc: "end, unless the star leaves the main sequence first", Source: cite.Own("long enough to see the hot end"), Value: &s.End},
			{Key: "lasting", Kind: units.Time, Unit: "Gyr", Min: 0.01e9, Max: 10e9, Doc: "a snowball that lasts longer is a lasting failure", Source: cite.Own("longer than any limit cycle of an Earth-sized planet"), Value: &s.Lasting},
		}, Options: []Option{
			{Key: "from", Doc: "the equilibrium the history starts from is reached from this side", Allowed: []string{"warm", "cold"}, Source: cite.Own("a hot young planet"), Value: &s.StartSide},
		}},
		{Name: "solver", Doc: "accuracy", Fields: []units.Field{
			{Key: "tolerance", Min: 1e-10, Max: 1e-3, Doc: "relative tolerance", Source: cite.Own("dates of failure to 0.1 % from 1e-4 down"), Value: &s.Tolerance},
			{Key: "max_step", Kind: units.Time, Unit: "Myr", Min: 1e4, Max: 1e9, Doc: "no step is longer", Source: cite.Own("keeps a short unstable window from being jumped"), Value: &s.MaxStep},
			{Key: "max_steps", Min: 50, Max: 1e8, Doc: "attempted steps after which the history is given up as undecided", Source: cite.Own("some hundred times what a history takes"), Value: &s.MaxSteps},
			{Key: "max_freezes", Min: 3, Max: 10000, Doc: "the history stops after so many freezes", Source: cite.Own("bounds the cost of limit cycles"), Value: &s.MaxFreezes},
		}, Flags: []Flag{
			{Key: "guard", Doc: "stability guard: a lost climate branch is located, never followed", Source: cite.Own("general stiff solvers follow a lost branch"), Value: &s.Guard},
		}},
	}
	for i, p := range s.Pulses {
		out = append(out, Section{Name: fmt.Sprintf("pulse.%d", i+1), Doc: "a passing disturbance", Fields: []units.Field{
			{Key: "start", Kind: units.Time, Unit: "Gyr", Min: 0, Max: 20e9, Doc: "age at which it begins", Source: user, Value: &p.Start},
			{Key: "duration", Kind: units.Time, Unit: "kyr", Min: 1, Max: 1e9, Doc: "how long it lasts", Source: user, Value: &p.Duration},
			{Key: "carbon", Kind: units.Amount, Unit: "Emol", Min: -1e22, Max: 1e22, Doc: "carbon given to the surface out of the mantle; negative for a drawdown", Source: user, Value: &p.Carbon},
			{Key: "sunlight", Min: -0.99, Max: 1, Doc: "relative change of sunlight while it lasts", Source: user, Value: &p.Sunlight},
		}})
	}
	return out
}

var user = cite.Ref{Note: "the user's"}

func (p *Step) fields(what string, published units.Range, value, when cite.Ref) []units.Field {
	return []units.Field{
		{Key: "before", Min: 0, Max: 5, Published: published, Doc: what + " before the step", Source: value, Value: &p.Before},
		{Key: "after", Min: 0, Max: 5, Doc: what + " after the step", Source: cite.Own("1 is the reference state"), Value: &p.After},
		{Key: "middle", Kind: units.Time, Unit: "Gyr", Min: 0, Max: 20e9, Doc: "age at the middle of the step", Source: when, Value: &p.Middle},
		{Key: "width", Kind: units.Time, Unit: "Gyr", Min: 1e6, Max: 10e9, Doc: "half-width of the step", Source: when, Value: &p.Width},
	}
}

func options(law any) []Option {
	if l, ok := law.(interface{ Options() []Option }); ok {
		return l.Options()
	}
	return nil
}

func flags(law any) []Flag {
	if l, ok := law.(interface{ Flags() []Flag }); ok {
		return l.Flags()
	}
	return nil
}

func condensationNames() []string {
	var out []string
	for _, e := range climate.Condensations {
		out = append(out, e.Name)
	}
	return out
}

// condensation returns the chosen law: bar over K.
func (s *Setup) condensation() func(float64) float64 {
	for _, e := range climate.Condensations {
		if e.Name == s.Condensation {
			return e.Pressure
		}
	}
	return climate.CO2Pressure
}

func (s *Setup) condensationSource() cite.Ref {
	for _, e := range climate.Condensations {
		if e.Name == s.Condensation {
			return e.Source[0]
		}
	}
	return climate.Condensations[0].Source[0]
}

// zoneLaw returns the chosen limits.
func (s *Setup) zoneLaw() star.ZoneLaw {
	for _, z := range star.Zones {
		if z.Name == s.ZoneLaw {
			return z
		}
	}
	return star.Zones[0]
}

// starTable reports whether the luminosity ends with its data, not with the star.
func (s *Setup) starTable() bool {
	for _, e := range star.Laws {
		if e.Name == s.star.name {
			return e.DataEnd
		}
	}
	return false
}

func zoneNames() []string {
	var out []string
	for _, z := range star.Zones {
		out = append(out, z.Name)
	}
	return out
}
