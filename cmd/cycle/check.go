package main

import (
	"fmt"
	"strings"
	"unicode"
	"unicode/utf8"

	"github.com/spf13/pflag"

	"cycle/carbon"
	"cycle/carbon/record"
	"cycle/scenarios"
)

var checkCommand = command{
	name: "check", args: "SCENARIO", short: "read and resolve; print every value with unit, origin and source; run nothing",
	minArgs: 1, maxArgs: 1, run: check,
	flags: func(f *pflag.FlagSet, o *options) { setFlag(f, o); quietFlag(f, o) },
	usage: `
Reads a scenario and prints every value with its unit, who set it (default, built-in,
file or --set), what is allowed and where the value comes from. A "!" marks a value
outside the range its source gives. Of the section [uncertain] it tells every
distribution with its unit. Nothing is computed or written.

  --set KEY=VALUE    a value over that of the scenario; repeatable
  --quiet            print nothing unless something is wrong

  cycle check earth --set planet.mass="3 M_E"
`,
}

func check(u *ui, o *options, args []string) int {
	r, err := scenarios.Load(args[0], o.sets)
	if err != nil {
		return u.fail(err)
	}
	m, err := carbon.NewModel(r.Setup) // do the laws fit together?
	if err != nil {
		return u.failRun(r, err)
	}
	if o.quiet {
		return exitOK
	}
	fmt.Fprintf(u.out, "%s (%s), hash %s\n", visible(r.Title), r.Name, r.Hash())
	inputs := r.Inputs()
	keyW, valW, originW, allowedW := 0, 0, 0, 0
	for _, in := range inputs {
		keyW = max(keyW, utf8.RuneCountInString(leaf(in.Key)))
		valW = max(valW, utf8.RuneCountInString(in.Value))
		originW = max(originW, len(in.Origin))
		allowedW = max(allowedW, utf8.RuneCountInString(allowedWords(in)))
	}
	section, outside := "", 0
	for _, in := range inputs {
		if s := strings.TrimSuffix(in.Key, "."+leaf(in.Key)); s != section {
			section = s
			fmt.Fprintf(u.out, "\n[%s] %s\n", section, scenarios.SectionDoc(section))
		}
		mark := " "
		if in.Outside {
			mark = "!"
			outside++
		}
		fmt.Fprintf(u.out, "%s %s  %s  %s  %s  %s\n", mark, pad(leaf(in.Key), keyW), pad(in.Value, valW), pad(in.Origin, originW), pad(allowedWords(in), allowedW), in.Source)
	}
	uncertainty(u, r, inputs)
	forcing, sensitivity := m.Response()
	fmt.Fprintf(u.out, "\nat the reference state: CO2 forcing %.3g W/m2 a doubling, sensitivity %.3g K a doubling at fixed sunlight\n", forcing, sensitivity)
	set := 0
	for _, in := range inputs {
		if in.Origin != scenarios.Default {
			set++
		}
	}
	fmt.Fprintf(u.out, "%d values, %d of them set, %s\n", len(inputs), set, outsideWords(inputs, outside))
	return exitOK
}

// uncertainty lists the section [uncertain]: every key with its distribution in
// its unit, and where its value and range come from.
func uncertainty(u *ui, r *scenarios.Resolved, inputs []record.Input) {
	if r.Uncertain == nil {
		return
	}
	fmt.Fprintf(u.out, "\n[uncertain] %s\n", scenarios.SectionDoc("uncertain"))
	var rows [][2]string
	keyW, distW := 0, 0
	for i := range r.Uncertain.Priors {
		p := &r.Uncertain.Priors[i]
		rows = append(rows, [2]string{p.Key, r.Words(p)})
		keyW, distW = max(keyW, len(p.Key)), max(distW, utf8.RuneCountInString(r.Words(p)))
	}
	for _, row := range rows {
		source := "a key of another law"
		for _, in := range inputs {
			if in.Key == row[0] {
				source = allowedWords(in) + "; " + in.Source
			}
		}
		fmt.Fprintf(u.out, "  %s  %s  %s\n", pad(row[0], keyW), pad(row[1], min(distW, 60)), source)
	}
	for _, c := range r.Uncertain.Correlations {
		fmt.Fprintf(u.out, "  %s and %s: rank correlation %g\n", c.A, c.B, c.Rank)
	}
	words := "1 key is uncertain"
	if n := len(rows); n != 1 {
		words = fmt.Sprintf("%d keys are uncertain", n)
	}
	if n := len(r.Uncertain.Correlations); n > 0 {
		words += fmt.Sprintf(", %d of their pairs correlated", n)
	}
	fmt.Fprintf(u.out, "%s; run and explain take the values above, cycle ensemble draws from these\n", words)
}

func outsideWords(inputs []record.Input, n int) string {
	if n == 0 {
		return "none outside its published range"
	}
	var keys []string
	for _, in := range inputs {
		if in.Outside {
			keys = append(keys, in.Key)
		}
	}
	return fmt.Sprintf("%d outside the published range: %s", n, strings.Join(keys, ", "))
}

func leaf(key string) string { return key[strings.LastIndexByte(key, '.')+1:] }

// visible replaces what could disturb a terminal, such as marks that turn the
// direction of writing.
func visible(s string) string {
	return strings.Map(func(c rune) rune {
		if unicode.IsPrint(c) {
			return c
		}
		return ' '
	}, s)
}

func pad(s string, width int) string {
	return s + strings.Repeat(" ", max(0, width-utf8.RuneCountInString(s)))
}

// allowedWords is what is allowed, in a column: a long list of words only counts
// them, "cycle keys" has the list.
func allowedWords(in record.Input) string {
	if n := strings.Count(in.Allowed, "\"") / 2; n > 3 {
		return fmt.Sprintf("one of %d (cycle keys %s)", n, in.Key)
	}
	return in.Allowed
}
