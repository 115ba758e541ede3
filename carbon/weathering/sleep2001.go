package weathering

import (
	"cycle/carbon/cite"
	"cycle/carbon/units"
	"cycle/ode/elementary"
)

// Sleep2001 is the carbonatisation of ocean crust in the structure of Sleep &
// Zahnle (2001), proportional to crust production and to dissolved CO₂:
//
//	W/W₀ = s^ν · (p/p₀)^α
//
// with ν = α = 1, dissolved CO₂ taken proportional to its pressure (Henry's law
// at a fixed temperature). Their exact formula is not reproduced here. They let
// spreading, hence s, grow as the square of heat flow, which package interior
// decides. There is no temperature: alone it is no thermostat of temperature.
type Sleep2001 struct {
	Alpha float64 // α
	Nu    float64 // ν
}

func newSleep2001() Law { return &Sleep2001{Alpha: 1, Nu: 1} }

// Relative returns W/W₀.
func (l *Sleep2001) Relative(e *Env) float64 {
	return power(e.Crust, l.Nu) * elementary.Exp(l.Alpha*e.LnP)
}

// Fields lists α and ν.
func (l *Sleep2001) Fields() []units.Field {
	return []units.Field{
		exponentField("co2_exponent", units.Range{Lo: 0.25, Hi: 1}, "exponent α of the CO2 pressure", cite.Ref{Work: cite.SleepZahnle2001, Note: "proportional to dissolved CO2; 0.25 in Foley 2015 and Abbot et al. 2012", Trust: cite.Unsure}, &l.Alpha),
		crustField(cite.Ref{Work: cite.SleepZahnle2001, Trust: cite.Memory}, &l.Nu),
	}
}

// Bind needs nothing.
func (l *Sleep2001) Bind(Reference) error { return nil }

// Range is not stated.
func (l *Sleep2001) Range() Range { return Range{} }
