package record

import (
	"reflect"
	"testing"
)

// TestColumns: names are unique, every column reads a field of its own and
// every field of a row is a column.
func TestColumns(t *testing.T) {
	names := map[string]bool{}
	for _, c := range Columns {
		if names[c.Name] {
			t.Errorf("column %q twice", c.Name)
		}
		names[c.Name] = true
		if c.Title == "" || !(c.Scale > 0) {
			t.Errorf("column %q has no title or scale", c.Name)
		}
		if ColumnNamed(c.Name).Title != c.Title {
			t.Errorf("column %q is not found by its name", c.Name)
		}
	}
	if ColumnNamed("nothing") != nil {
		t.Error("found a column that is not there")
	}
	rt := reflect.TypeFor[Row]()
	for i := range rt.NumField() {
		var r Row
		reflect.ValueOf(&r).Elem().Field(i).SetFloat(42)
		readers := 0
		for _, c := range Columns {
			if c.Get(&r) == 42 {
				readers++
				if got := c.Value(&r); got != 42/c.Scale {
					t.Errorf("%s: %v, want %v", c.Name, got, 42/c.Scale)
				}
			}
		}
		if readers != 1 {
			t.Errorf("field %s is read by %d columns", rt.Field(i).Name, readers)
		}
	}
}
