package carbon

import (
	"fmt"
	"reflect"
	"strings"

	"cycle/carbon/units"
)

// Clone returns a deep copy: a model made of one does not touch the other, so
// that every worker of a pool may have its own.
func (s *Setup) Clone() *Setup {
	c := *s
	c.star.law = copied(s.star.law)
	c.radiation.law = copied(s.radiation.law)
	c.albedo.law = copied(s.albedo.law)
	c.land.law = copied(s.land.law)
	c.seafloor.law = copied(s.seafloor.law)
	c.sources.law = copied(s.sources.law)
	c.interior.law = copied(s.interior.law)
	c.ocean.law = copied(s.ocean.law)
	c.supply.Law = nil
	c.Pulses = nil
	for _, p := range s.Pulses {
		q := *p
		c.Pulses = append(c.Pulses, &q)
	}
	// A table is loaded again, so that nothing made from it is shared.
	for _, sec := range c.Sections() {
		if sec.Table == nil || *sec.Table.Text == "" {
			continue
		}
		if err := sec.Table.Load(strings.NewReader(*sec.Table.Text)); err != nil {
			panic(fmt.Sprintf("carbon: a table that was read once cannot be read again: %v", err))
		}
	}
	return &c
}

// copied returns a law with parameters of its own. What a law derives from
// them it makes anew when it is bound.
func copied[L any](law L) L {
	v := reflect.ValueOf(law)
	if v.Kind() != reflect.Pointer {
		return law
	}
	n := reflect.New(v.Type().Elem())
	n.Elem().Set(v.Elem())
	return n.Interface().(L)
}

// Number returns the field of a dotted key of the present laws, or nil.
func (s *Setup) Number(key string) *units.Field {
	for _, sec := range s.Sections() {
		name, ok := strings.CutPrefix(key, sec.Name+".")
		if !ok {
			continue
		}
		for i := range sec.Fields {
			if sec.Fields[i].Key == name {
				return &sec.Fields[i]
			}
		}
	}
	return nil
}
