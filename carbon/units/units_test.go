package units

import (
	"errors"
	"math"
	"testing"

	"pgregory.net/rapid"
)

// TestConversions checks handbook conversions. Sources: arithmetic on the
// molar mass of CO₂ (44.01 g/mol) and of carbon (12.011 g/mol); BIPM for °C and atm.
func TestConversions(t *testing.T) {
	for _, c := range []struct {
		kind *Kind
		text string
		want float64
	}{
		{Flux, "7.5 Tmol/yr", 7.5e12},
		{Flux, "44.01 Mt CO2/yr", 1e12},
		{Flux, "12.011 Mt C/yr", 1e12},
		{Flux, "1e3 Emol/Gyr", 1e12},
		{Amount, "38000 Pg C", 3.16376654733161e18},
		{Pressure, "280 ppm", 280e-6},
		{Pressure, "33Pa", 33e-5},
		{Pressure, "1 atm", 1.01325},
		{Temperature, "15 °C", 288.15},
		{Temperature, "-10 degC", 263.15},
		{Interval, "13.7 K", 13.7},
		{Time, "4.57 Gyr", 4.57e9},
		{Time, "31557600 s", 1},
		{Length, "0.9 au", 0.9 * 1.495978707e11},
		{MolarEnergy, "50 kJ/mol", 5e4},
		{Mass, "0.1 M_E", 5.972e23},
		{Content, "12.011 mg/kg", 1e-3},
		{Number, "0.3", 0.3},
		{HeatFlux, "1 S0", 1361},
	} {
		got, _, err := c.kind.Parse(c.text)
		if err != nil || math.Abs(got-c.want) > 1e-12*math.Abs(c.want) {
			t.Errorf("%q: got %v, %v, want %v", c.text, got, err, c.want)
		}
	}
}

func TestRefusals(t *testing.T) {
	for _, c := range []struct {
		kind *Kind
		text string
	}{
		{Flux, "7.5"}, {Flux, "7.5 K"}, {Flux, "Tmol/yr"}, {Flux, ""}, {Flux, "nan Tmol/yr"}, {Flux, "inf Tmol/yr"},
		{Flux, "1e999 Tmol/yr"}, {Flux, "1e308 Tmol/yr"}, {Number, "3 K"}, {Number, "0x1p3"}, {Interval, "_1_ K"}, {Time, "4,57 Gyr"}, {Time, "1 2 Gyr"},
	} {
		v, _, err := c.kind.Parse(c.text)
		var pe *ParseError
		if !errors.As(err, &pe) {
			t.Errorf("%q: got %v, %v, want a *ParseError", c.text, v, err)
		}
	}
}

// TestFormat: the unit asked for where it reads back to the same bits, else one
// that does.
func TestFormat(t *testing.T) {
	for _, c := range []struct {
		kind  *Kind
		value float64
		unit  string
		want  string
	}{
		{Time, 4.57e9, "Gyr", "4.57 Gyr"},
		{Time, 4.15e9, "Gyr", "4150 Myr"},
		{Flux, 7.5e12, "Tmol/yr", "7.5 Tmol/yr"},
		{Temperature, 288, "K", "288 K"},
		{Number, 0.3, "", "0.3"},
	} {
		if got := c.kind.Format(c.value, c.unit); got != c.want {
			t.Errorf("%v in %s: %q, want %q", c.value, c.unit, got, c.want)
		}
	}
}

// TestRoundTrip: whatever is formatted reads back to the same bits.
func TestRoundTrip(t *testing.T) {
	kinds := []*Kind{Number, Time, Temperature, Pressure, Flux, Amount, Length, MolarEnergy, HeatFlux, Mass}
	rapid.Check(t, func(t *rapid.T) {
		k := rapid.SampledFrom(kinds).Draw(t, "kind")
		unit := ""
		if k != nil {
			unit = rapid.SampledFrom(k.Spellings()).Draw(t, "unit")
		}
		v := rapid.Float64Range(-1e12, 1e12).Draw(t, "value")
		back, _, err := k.Parse(k.Format(v, unit))
		if err != nil || back != v {
			t.Fatalf("%v as %q reads back as %v, %v", v, k.Format(v, unit), back, err)
		}
	})
}
