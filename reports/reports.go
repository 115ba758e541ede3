// Package reports turns a finished record.Run into what people and programs
// read: the verdict on a terminal, summary.json, history.csv, history.parquet
// and report.html. It sees carbon/record only and computes nothing but
// formatting: every number it shows stands in the record.
//
// The same run gives the same bytes: nothing written here holds a date, a
// random number or the name of a machine.
package reports

import (
	"strings"

	"cycle/carbon/record"
)

// clean makes a text of the record fit for one line of a terminal: control
// characters, line breaks and marks that turn the direction of writing become
// spaces, so that a title cannot move the cursor or reorder the line.
func clean(s string) string {
	s = strings.Map(func(r rune) rune {
		switch {
		case r < 0x20, r >= 0x7f && r < 0xa0, r == 0x2028, r == 0x2029,
			r >= 0x200b && r <= 0x200f, r >= 0x202a && r <= 0x202e, r >= 0x2066 && r <= 0x2069, r == 0xfeff:
			return ' '
		}
		return r
	}, strings.ToValidUTF8(s, "\ufffd"))
	return strings.Join(strings.Fields(s), " ")
}

// titleOf is the title of the run, or its name when it has none.
func titleOf(r *record.Run) string {
	if t := clean(r.Title); t != "" {
		return t
	}
	return clean(r.Name)
}
