package weathering

import "cycle/carbon/units"

// None is no seafloor weathering at all: its flux is 0, at the reference state
// too. Its Entry says Absent.
type None struct{}

func newNone() Law { return None{} }

// Relative returns 0.
func (None) Relative(*Env) float64 { return 0 }

// Fields lists nothing.
func (None) Fields() []units.Field { return nil }

// Bind needs nothing.
func (None) Bind(Reference) error { return nil }

// Range is everywhere.
func (None) Range() Range { return Range{} }
