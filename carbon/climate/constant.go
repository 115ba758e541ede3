package climate

import "cycle/carbon/units"

// Constant is the same planetary albedo at every state, with no ice anywhere.
// The one number is solved at the reference state.
type Constant struct {
	A float64
}

func newConstant() Albedo { return &Constant{A: 0.3} }

// Planetary returns A.
func (l *Constant) Planetary(_, _ float64) float64 { return l.A }

// IceFraction returns 0.
func (l *Constant) IceFraction(float64) float64 { return 0 }

// Free is A.
func (l *Constant) Free() (string, units.Range, *float64) {
	return "planetary albedo", units.Range{Lo: 0, Hi: 0.9}, &l.A
}

// Box is not stated.
func (l *Constant) Box() Box { return Box{} }

// Bind needs nothing.
func (l *Constant) Bind(Reference) error { return nil }

// Fields is empty: the number is solved, not set.
func (l *Constant) Fields() []units.Field { return nil }
