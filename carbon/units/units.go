// Package units states the one system of units of the program and converts
// quantities at its two edges: reading a scenario and writing a result.
//
// Inside, plain float64 values are in the base units
//
//	time           yr (Julian, 3.15576e7 s)     amount       mol
//	temperature    K                            amount flux  mol/yr
//	pressure       bar                          heat flux    W/m²
//	mass, length   kg, m                        energy       J, J/mol
//
// so that equations read like equations. CO₂ in "ppm" means 1e-6 bar of partial
// pressure, the convention of the weathering literature for one bar of air.
package units

import (
	"fmt"
	"math"
	"sort"
	"strconv"
	"strings"

	"cycle/carbon/cite"
)

// Physical constants in base units of this package unless stated.
const (
	Year         = 3.15576e7      // s, Julian year
	Gyr          = 1e9            // yr
	Myr          = 1e6            // yr
	Sigma        = 5.670374419e-8 // W m⁻² K⁻⁴, Stefan-Boltzmann (CODATA 2018)
	GasConstant  = 8.314462618    // J mol⁻¹ K⁻¹ (CODATA 2018)
	MolarMassCO2 = 0.04401        // kg/mol
	AU           = 1.495978707e11 // m
	EarthMass    = 5.972e24       // kg
	EarthRadius  = 6.371e6        // m
	EarthArea    = 5.101e14       // m²
	EarthGravity = 9.81           // m/s²
	SolarFlux    = 1361.0         // W/m² at 1 au (Kopp & Lean 2011)
	PascalPerBar = 1e5
	BarPerAtm    = 1.01325
)

// Kind is a physical dimension with the spellings of its units.
type Kind struct {
	Name   string             // what the quantity is, for messages
	Base   string             // the base unit
	Spell  map[string]float64 // unit spelling -> factor to the base unit
	Offset map[string]float64 // unit spelling -> offset in the base unit, for temperatures
}

// The dimensions a scenario may use. A nil *Kind is a pure number.
var (
	Number      *Kind
	Time        = &Kind{Name: "time", Base: "yr", Spell: map[string]float64{"yr": 1, "a": 1, "year": 1, "years": 1, "kyr": 1e3, "ka": 1e3, "Myr": 1e6, "Ma": 1e6, "Gyr": 1e9, "Ga": 1e9, "s": 1 / Year, "d": 86400 / Year}}
	Temperature = &Kind{Name: "temperature", Base: "K", Spell: map[string]float64{"K": 1, "°C": 1, "degC": 1, "C": 1},
		Offset: map[string]float64{"°C": 273.15, "degC": 273.15, "C": 273.15}}
	Interval     = &Kind{Name: "temperature difference", Base: "K", Spell: map[string]float64{"K": 1, "°C": 1, "degC": 1}}
	Pressure     = &Kind{Name: "pressure", Base: "bar", Spell: map[string]float64{"bar": 1, "mbar": 1e-3, "µbar": 1e-6, "ubar": 1e-6, "microbar": 1e-6, "Pa": 1e-5, "hPa": 1e-3, "kPa": 1e-2, "MPa": 10, "atm": BarPerAtm, "ppm": 1e-6, "ppmv": 1e-6, "PAL": 280e-6}}
	Flux         = &Kind{Name: "carbon flux", Base: "mol/yr", Spell: map[string]float64{"mol/yr": 1, "Gmol/yr": 1e9, "Tmol/yr": 1e12, "Emol/yr": 1e18, "Emol/Gyr": 1e9, "Emol/Myr": 1e12, "Mt CO2/yr": 1e9 / MolarMassCO2, "Gt CO2/yr": 1e12 / MolarMassCO2, "Mt C/yr": 1e9 / 0.012011, "Pg C/yr": 1e12 / 0.012011}}
	Amount       = &Kind{Name: "amount of carbon", Base: "mol", Spell: map[string]float64{"mol": 1, "Tmol": 1e12, "Pmol": 1e15, "Emol": 1e18, "Zmol": 1e21, "Pg C": 1e12 / 0.012011, "Gt C": 1e12 / 0.012011, "kg C": 1 / 0.012011}}
	Content      = &Kind{Name: "carbon per mass", Base: "mol/kg", Spell: map[string]float64{"mol/kg": 1, "mmol/kg": 1e-3, "µmol/kg": 1e-6, "umol/kg": 1e-6, "mg/kg": 1e-6 / 0.012011, "ppm": 1e-6 / 0.012011}}
	Conc         = &Kind{Name: "concentration", Base: "mol/kg", Spell: map[string]float64{"mol/kg": 1, "mmol/kg": 1e-3, "µmol/kg": 1e-6, "umol/kg": 1e-6}}
	MolarEnergy  = &Kind{Name: "molar energy", Base: "J/mol", Spell: map[string]float64{"J/mol": 1, "kJ/mol": 1e3, "kcal/mol": 4184}}
	HeatFlux     = &Kind{Name: "energy flux", Base: "W/m2", Spell: map[string]float64{"W/m2": 1, "W/m²": 1, "W m-2": 1, "W m^-2": 1, "W/m^2": 1, "mW/m2": 1e-3, "mW/m²": 1e-3, "S0": SolarFlux}}
	Power        = &Kind{Name: "power", Base: "W", Spell: map[string]float64{"W": 1, "GW": 1e9, "TW": 1e12}}
	Mass         = &Kind{Name: "mass", Base: "kg", Spell: map[string]float64{"kg": 1, "g": 1e-3, "t": 1e3, "M_E": EarthMass, "Earth masses": EarthMass, "M_earth": EarthMass, "oceans": 1.35e21}}
	SolarMass    = &Kind{Name: "stellar mass", Base: "M_sun", Spell: map[string]float64{"M_sun": 1, "Msun": 1, "solar masses": 1}}
	Length       = &Kind{Name: "length", Base: "m", Spell: map[string]float64{"m": 1, "cm": 1e-2, "km": 1e3, "au": AU, "AU": AU, "R_E": EarthRadius}}
	Speed        = &Kind{Name: "rate of length", Base: "m/yr", Spell: map[string]float64{"m/yr": 1, "mm/yr": 1e-3, "cm/yr": 1e-2}}
	Angle        = &Kind{Name: "angle", Base: "deg", Spell: map[string]float64{"deg": 1, "°": 1, "rad": 180 / math.Pi}}
	HeatCapacity = &Kind{Name: "heat capacity per area", Base: "J/m2/K", Spell: map[string]float64{"J/m2/K": 1, "J/m²/K": 1, "J m-2 K-1": 1, "J/(m2 K)": 1, "MJ/m2/K": 1e6}}
	PerKelvin    = &Kind{Name: "relative change per kelvin", Base: "1/K", Spell: map[string]float64{"1/K": 1, "K-1": 1, "K^-1": 1, "/K": 1, "%/K": 0.01}}
	FluxPerK     = &Kind{Name: "energy flux per kelvin", Base: "W/m2/K", Spell: map[string]float64{"W/m2/K": 1, "W/m²/K": 1, "W m-2 K-1": 1}}
	ArealFlux    = &Kind{Name: "carbon flux per area", Base: "mol/m2/yr", Spell: map[string]float64{"mol/m2/yr": 1, "mol/m²/yr": 1, "mmol/m2/yr": 1e-3}}
	Volumetric   = &Kind{Name: "concentration by volume", Base: "mol/m3", Spell: map[string]float64{"mol/m3": 1, "mol/m³": 1, "mmol/L": 1, "mol/L": 1e3, "µmol/L": 1e-3, "umol/L": 1e-3}}
	Density      = &Kind{Name: "density", Base: "kg/m3", Spell: map[string]float64{"kg/m3": 1, "kg/m³": 1, "g/cm3": 1e3}}
	MolarMass    = &Kind{Name: "molar mass", Base: "kg/mol", Spell: map[string]float64{"kg/mol": 1, "g/mol": 1e-3}}
	SurfaceArea  = &Kind{Name: "specific surface area", Base: "m2/kg", Spell: map[string]float64{"m2/kg": 1, "m²/kg": 1, "m2/g": 1e3}}
	Erosion      = &Kind{Name: "erosion", Base: "kg/m2/yr", Spell: map[string]float64{"kg/m2/yr": 1, "t/km2/yr": 1e-3, "t km-2 yr-1": 1e-3}}
	SpecificHeat = &Kind{Name: "specific heat", Base: "J/kg/K", Spell: map[string]float64{"J/kg/K": 1, "J kg-1 K-1": 1}}
	SpecificPow  = &Kind{Name: "heating per mass", Base: "W/kg", Spell: map[string]float64{"W/kg": 1, "pW/kg": 1e-12}}
	Conductivity = &Kind{Name: "thermal conductivity", Base: "W/m/K", Spell: map[string]float64{"W/m/K": 1, "W m-1 K-1": 1}}
)

// A ParseError tells why a quantity could not be read.
type ParseError struct {
	Found  string // the text
	Kind   *Kind
	Reason string
}

func (e *ParseError) Error() string {
	if e.Kind == nil {
		return fmt.Sprintf("found %s, %s", quote(e.Found), e.Reason)
	}
	return fmt.Sprintf("found %s, %s; a %s is written like \"1 %s\" (units: %s)", quote(e.Found), e.Reason, e.Kind.Name, e.Kind.Base, strings.Join(e.Kind.Spellings(), ", "))
}

// quote shortens a long text before quoting it.
func quote(s string) string {
	if r := []rune(s); len(r) > 60 {
		s = string(r[:57]) + "..."
	}
	return strconv.Quote(s)
}

// Spellings lists the units of the kind, the base unit first.
func (k *Kind) Spellings() []string {
	if k == nil {
		return nil
	}
	var out []string
	for s := range k.Spell {
		if s != k.Base {
			out = append(out, s)
		}
	}
	sort.Strings(out)
	return append([]string{k.Base}, out...)
}

// Scale returns the factor and the offset, in the base unit, of a spelling.
func (k *Kind) Scale(unit string) (factor, offset float64, ok bool) {
	if k == nil {
		return 1, 0, unit == ""
	}
	f, ok := k.Spell[unit]
	return f, k.Offset[unit], ok
}

// Parse reads "13.7 K" as the base value and the unit as written. The number
// must be finite; a missing or foreign unit is an error of type *ParseError.
func (k *Kind) Parse(text string) (value float64, unit string, err error) {
	fail := func(reason string) (float64, string, error) {
		return 0, "", &ParseError{Found: text, Kind: k, Reason: reason}
	}
	t := strings.TrimSpace(text)
	end := 0
	for end < len(t) && strings.IndexByte("+-.0123456789eE", t[end]) >= 0 {
		// An exponent needs a digit or a sign behind it; otherwise the e starts a unit.
		if (t[end] == 'e' || t[end] == 'E') && !(end+1 < len(t) && strings.IndexByte("+-0123456789", t[end+1]) >= 0) {
			break
		}
		end++
	}
	num, err := strconv.ParseFloat(t[:end], 64)
	if err != nil {
		if math.IsInf(num, 0) {
			return fail("the number is too large")
		}
		return fail("which does not start with a finite number")
	}
	unit = strings.TrimSpace(t[end:])
	if unit == "" && k != nil {
		return fail("which has no unit")
	}
	f, off, ok := k.Scale(unit)
	if !ok {
		if k == nil {
			return fail("a pure number has no unit")
		}
		return fail(fmt.Sprintf("%q is no unit of %s", unit, k.Name))
	}
	value = num*f + off
	if math.IsNaN(value) || math.IsInf(value, 0) {
		return fail("the number is too large")
	}
	return value, unit, nil
}

// Format writes a base value in a unit so that Parse gives the same value back.
func (k *Kind) Format(value float64, unit string) string {
	f, off, ok := k.Scale(unit)
	if !ok {
		f, off, unit = 1, 0, k.Base
	}
	shown := (value - off) / f
	// Prefer the shortest spelling that reads back to the same bits.
	for _, digits := range []int{15, 16, 17} {
		s := strconv.FormatFloat(shown, 'g', digits, 64)
		back, _ := strconv.ParseFloat(s, 64)
		if back*f+off == value {
			return join(s, unit)
		}
	}
	// Another unit may read back exactly: 4.15e9 yr is 4150 Myr, but not 4.15 Gyr.
	if k != nil {
		best := join(strconv.FormatFloat(value, 'g', -1, 64), k.Base)
		for _, other := range k.Spellings() {
			if !strings.HasSuffix(other, k.Base) { // keep to multiples of the base unit
				continue
			}
			f, off := k.Spell[other], k.Offset[other]
			s := strconv.FormatFloat((value-off)/f, 'g', 15, 64)
			back, _ := strconv.ParseFloat(s, 64)
			if back*f+off == value && !strings.Contains(s, "e") && (strings.Contains(best, "e") || len(join(s, other)) < len(best)) {
				best = join(s, other)
			}
		}
		return best
	}
	return join(strconv.FormatFloat(shown, 'g', -1, 64), unit)
}

func join(num, unit string) string {
	if unit == "" {
		return num
	}
	return num + " " + unit
}

// Field is one number a scenario may set: what `cycle keys` lists, what an error
// message quotes, what a prior varies and what a report's input table shows.
type Field struct {
	Key       string   // last part of the dotted key
	Kind      *Kind    // dimension; nil is a pure number
	Unit      string   // unit to show; "" is the base unit
	Min, Max  float64  // allowed, in base units, ends included
	Published Range    // range the source gives, in base units; zero when none
	Off       bool     // zero switches off what the field stands for
	Doc       string   // one sentence
	Source    cite.Ref // where the default comes from
	Value     *float64 // where the value lives; holds the default after construction
}

// Range is a closed interval; the zero Range means "not stated".
type Range struct{ Lo, Hi float64 }

// Stated reports whether the range is known.
func (r Range) Stated() bool { return r != Range{} }

// Holds reports whether x is inside a stated range; an unstated range holds everything.
func (r Range) Holds(x float64) bool { return !r.Stated() || (x >= r.Lo && x <= r.Hi) }

// Extrapolates reports whether a value is outside the published range; zero is
// not where it means "off".
func (f *Field) Extrapolates(value float64) bool {
	return !f.Published.Holds(value) && !(f.Off && value == 0)
}

// ShownUnit returns the unit a value of the field is shown in.
func (f *Field) ShownUnit() string {
	if f.Unit != "" || f.Kind == nil {
		return f.Unit
	}
	return f.Kind.Base
}

// Text formats a base value in the field's unit.
func (f *Field) Text(value float64) string { return f.Kind.Format(value, f.ShownUnit()) }

// Check returns an error when a value is not finite or outside the allowed range.
func (f *Field) Check(value float64) error {
	if math.IsNaN(value) || math.IsInf(value, 0) {
		return fmt.Errorf("found %v, allowed is a finite number", value)
	}
	if value < f.Min || value > f.Max {
		return fmt.Errorf("found %s, allowed is %s to %s", f.Text(value), f.Text(f.Min), f.Text(f.Max))
	}
	return nil
}

// Option is a key whose value is one of a few words.
type Option struct {
	Key     string
	Doc     string
	Allowed []string
	Source  cite.Ref
	Own     bool // the source is that of the value, not of the default
	Value   *string
}

// Flag is a key that is true or false.
type Flag struct {
	Key    string
	Doc    string
	Source cite.Ref
	Value  *bool
}
