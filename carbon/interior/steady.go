package interior

import (
	"cycle/carbon/cite"
	"cycle/carbon/units"
)

// Steady is an interior that does not change: q at all ages.
type Steady struct {
	prescribed
	Relative float64 // q
}

func newSteady() Law { return &Steady{prescribed: newPrescribed(), Relative: 1} }

// Flow returns the same at all ages.
func (l *Steady) Flow(_, _, _ float64) Flow { return l.flow(l.Relative) }

// Fields lists q, Q_ref and m.
func (l *Steady) Fields() []units.Field {
	return append([]units.Field{
		{Key: "relative", Min: 1e-3, Max: 100, Doc: "heat flow per area relative to the Earth's today", Source: cite.Own("the Earth today"), Value: &l.Relative},
	}, l.fields()...)
}

// Bind fixes the planet.
func (l *Steady) Bind(p Planet, _ float64) error {
	l.prescribed.bind(&p)
	return nil
}

// Range is not stated.
func (l *Steady) Range() units.Range { return units.Range{} }
