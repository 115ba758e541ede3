package main

import (
	"fmt"
	"slices"
	"strings"

	"github.com/spf13/pflag"

	"cycle/scenarios"
)

var keysCommand = command{
	name: "keys", args: "[SECTION]", short: "every key: meaning, unit, default, range, source",
	minArgs: 0, maxArgs: 1, run: keys,
	flags: func(*pflag.FlagSet, *options) {},
	usage: `
Lists the keys a scenario may set, with meaning, default, allowed and published range,
units and the source of the default; for a section with a choice of laws, also the
laws. SECTION may be a full key as well, or "uncertain": how a key is given a
distribution instead of a value, for cycle ensemble.

  cycle keys weathering.land
`,
}

func keys(u *ui, _ *options, args []string) int {
	section := ""
	if len(args) > 0 {
		section = args[0]
	}
	list, err := scenarios.Keys(section)
	if err != nil {
		return u.fail(err)
	}
	now, start := "\x00", true
	for i := range list {
		k := &list[i]
		if k.Section != now {
			now = k.Section
			if !start {
				fmt.Fprintln(u.out)
			}
			if now == "" {
				fmt.Fprintln(u.out, "above the first section")
			} else {
				fmt.Fprintf(u.out, "[%s] %s\n", now, scenarios.SectionDoc(now))
			}
			if section != k.Dotted() || k.Name == "law" {
				for _, l := range scenarios.Laws(now) {
					fmt.Fprintf(u.out, "\n  law = %q\n      %s\n      %s\n      %s\n", l.Name, l.Doc, l.Form, l.Source)
				}
			}
		}
		start = false
		fmt.Fprintf(u.out, "\n  %s = %s", k.Name, k.Default)
		if k.Laws != nil {
			fmt.Fprintf(u.out, "   (law %s)", strings.Join(k.Laws, ", "))
		}
		fmt.Fprintf(u.out, "\n      %s\n      allowed %s", k.Doc, k.Allowed)
		if k.Published != "" {
			fmt.Fprintf(u.out, "; published %s", k.Published)
		}
		fmt.Fprintln(u.out)
		if k.Units != nil {
			units := slices.Clone(k.Units)
			fmt.Fprintf(u.out, "      a %s, in %s\n", k.Kind, strings.Join(units, ", "))
		}
		fmt.Fprintf(u.out, "      source: %s\n", k.Source)
	}
	return exitOK
}
