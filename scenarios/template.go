package scenarios

import (
	"fmt"
	"slices"
	"strings"
)

// mainKeys are what a first planet is made of: a new scenario explains them,
// ready to be edited. otherKeys are explained behind a "#". The rest is named.
var (
	mainKeys = []string{
		"star.law", "orbit.distance", "orbit.eccentricity", "planet.mass",
		"radiation.law", "weathering.land.law", "weathering.land.exponent", "weathering.land.efold",
		"weathering.seafloor.law", "sources.law", "sources.outgassing", "interior.law",
		"carbon.solve", "carbon.content", "time.start", "time.end",
	}
	otherKeys = []string{
		"planet.core_fraction", "planet.ocean_fraction", "reference.temperature", "reference.co2",
		"albedo.law", "weathering.land.supply_limit", "weathering.seafloor.modern", "weathering.seafloor.under_ice",
		"land.before", "land.middle", "biology.before", "biology.middle", "sources.scale",
		"interior.exponent", "ocean.law", "zone.law", "time.from", "time.lasting", "solver.tolerance", "solver.guard",
	}
)

const templateColumns = 96

// Template returns a scenario to start from, the Earth.
func Template(name string) string {
	r, err := Parse(name+".toml", nil, nil)
	if err != nil {
		panic("scenarios: the defaults do not load: " + err.Error()) // broken build
	}
	var b strings.Builder
	comment(&b, "A planet to edit. What stands behind \"#\" is a comment; a key behind \"#\" shows its default, and removing the \"#\" makes the line yours. Quantities carry their unit, in any usual spelling: \"1 au\" or \"149.6e6 km\".")
	b.WriteString("#\n")
	width := len(name) + len("cycle check .toml")
	for _, line := range [][2]string{
		{"cycle check " + name + ".toml", "shows every value with its origin and source"},
		{"cycle run " + name + ".toml", "computes the history"},
		{"cycle keys", "explains every key and every law"},
	} {
		fmt.Fprintf(&b, "#     %-*s   %s\n", width, line[0], line[1])
	}
	fmt.Fprintf(&b, "\ntitle = %s\n# notes = \"\"\n\n", tomlString(name))
	comment(&b, "A built-in scenario to start from instead of the defaults: "+words(builtinNames())+".")
	b.WriteString("# base = \"earth\"\n")
	section, more := "", []string(nil)
	flush := func() {
		if more != nil {
			comment(&b, "more: "+strings.Join(more, ", ")+" (cycle keys "+section+")")
		}
		more = nil
	}
	for _, e := range r.entries() {
		if e.section != section {
			flush()
			section = e.section
			b.WriteString("\n")
			comment(&b, SectionDoc(section))
			fmt.Fprintf(&b, "[%s]\n", section)
		}
		lead := ""
		switch {
		case slices.Contains(mainKeys, e.key()):
		case slices.Contains(otherKeys, e.key()):
			lead = "# "
		default:
			more = append(more, e.name)
			continue
		}
		about := e.doc
		if e.name == "law" {
			about = "which law"
		}
		about += ": " + e.allowed
		if e.published != "" {
			about += "; published " + e.published
		}
		comment(&b, about+" ["+e.source+"]")
		b.WriteString(lead + e.name + " = " + e.toml + "\n")
	}
	flush()
	c := known()
	for _, name := range numbered {
		section := name + ".1"
		b.WriteString("\n")
		comment(&b, SectionDoc(section)+"; also ["+name+".2] and so on")
		fmt.Fprintf(&b, "# [%s]\n", section)
		for i := range c.keys {
			if k := &c.keys[i]; k.Section == section {
				comment(&b, k.Doc+": "+k.Allowed)
				fmt.Fprintf(&b, "# %s = %s\n", k.Name, k.Default)
			}
		}
	}
	b.WriteString("\n")
	comment(&b, "Distributions instead of values, for cycle ensemble "+name+".toml (cycle keys uncertain): \"published\" is uniform over the range the key's source gives.")
	for _, line := range templateUncertain {
		b.WriteString("# " + line + "\n")
	}
	return b.String()
}

// templateUncertain is an example of the section [uncertain].
var templateUncertain = []string{
	"[uncertain]",
	`"weathering.land.efold" = "published"`,
	`"sources.outgassing" = { distribution = "uniform", low = "6 Tmol/yr", high = "10 Tmol/yr" }`,
	`"land.middle" = { distribution = "normal", mean = "2 Gyr", sd = "0.3 Gyr", at_least = "1 Gyr" }`,
	`"weathering.land.law" = { choices = ["walker1981", "krissansentotton2017"], weights = [2, 1] }`,
	`correlations = [ { between = ["weathering.land.efold", "sources.outgassing"], rank = 0.3 } ]`,
	`ages = ["2.07 Gyr"]`,
}

// comment writes wrapped comment lines.
func comment(b *strings.Builder, text string) {
	const lead = "# "
	width := 0
	for _, word := range strings.Fields(text) {
		switch {
		case width == 0:
			b.WriteString(lead)
			width = len(lead)
		case width+1+len(word) > templateColumns:
			b.WriteString("\n" + lead)
			width = len(lead)
		default:
			b.WriteByte(' ')
			width++
		}
		b.WriteString(word)
		width += len(word)
	}
	b.WriteByte('\n')
}
