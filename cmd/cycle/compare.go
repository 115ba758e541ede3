package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"os/signal"
	"strings"
	"syscall"

	"github.com/spf13/pflag"

	"cycle/carbon"
	"cycle/carbon/record"
	"cycle/reports"
	"cycle/scenarios"
)

var compareCommand = command{
	name: "compare", args: "A B ...", short: "scenarios or laws side by side",
	minArgs: 1, maxArgs: 99, run: compare,
	flags: func(f *pflag.FlagSet, o *options) {
		f.StringVar(&o.out, "out", "", "write the results into `DIR`; default is compare")
		setFlag(f, o)
		quietFlag(f, o)
	},
	usage: `
Sets scenarios side by side: what differs in input, and only that; outcomes, dates,
margins, and all histories on the same axes. A scenario may carry a law or a value
of its own behind a comma, so that one planet can be compared under several laws.

  --out DIR          folder of the results; default is compare
  --set KEY=VALUE    a value over that of every scenario; repeatable
  --quiet            print nothing unless something is wrong

The folder holds report.html, comparison.json, inputs.csv, results.csv,
histories.csv and histories.parquet.

  cycle compare earth earth,weathering.land.law=menou2015 calessa
`,
}

func compare(u *ui, o *options, args []string) int {
	ctx, stop := signal.NotifyContext(context.Background(), syscall.SIGINT, syscall.SIGTERM)
	defer stop()
	if len(args) < 2 {
		u.error("a comparison takes two scenarios or more")
		u.hint("for one alone: cycle run %s", args[0])
		return exitUsage
	}
	dir := o.out
	if dir == "" {
		dir = "compare"
	}
	var all []*scenarios.Resolved
	var sets []carbon.Named
	seen := map[string]int{}
	for _, arg := range args {
		part := strings.Split(arg, ",")
		r, err := scenarios.Load(part[0], append(part[1:len(part):len(part)], o.sets...))
		if err != nil {
			return u.fail(err)
		}
		name := r.Name
		if len(part) > 1 {
			name += ", " + strings.Join(part[1:], ", ")
		}
		if seen[name]++; seen[name] > 1 {
			name = fmt.Sprintf("%s (%d)", name, seen[name])
		}
		all = append(all, r)
		sets = append(sets, carbon.Named{Name: name, Setup: r.Setup})
	}
	if err := checkFolder(dir); err != nil {
		return u.failFolder(dir, err)
	}
	step, clear := newProgress("compare", o.quiet)
	c, err := carbon.Compare(ctx, sets, carbon.CompareOptions{Progress: step})
	clear()
	if err != nil {
		var ne *carbon.NamedError
		if errors.As(err, &ne) {
			return u.failRun(all[ne.Index], ne.Err)
		}
		return u.failRun(all[0], err)
	}
	c.Version = version
	c.Command = "cycle compare " + strings.Join(quoted(args), " ")
	for _, s := range o.sets {
		c.Command += " --set " + strings.Join(quoted([]string{s}), "")
	}
	for i, r := range all {
		fillRun(c.Runs[i], r)
		c.Runs[i].Name = c.Names[i]
		c.Results[i].Hash = r.Hash()
	}
	files := []outFile{
		{"report.html", func(w io.Writer) error { return reports.CompareHTML(w, c) }},
		{"comparison.json", func(w io.Writer) error { return reports.ComparisonJSON(w, c) }},
		{"inputs.csv", func(w io.Writer) error { return reports.ComparedInputsCSV(w, c) }},
		{"results.csv", func(w io.Writer) error { return reports.ComparedResultsCSV(w, c) }},
		{"histories.csv", func(w io.Writer) error { return reports.HistoriesCSV(w, c) }},
		{"histories.parquet", func(w io.Writer) error { return reports.HistoriesParquet(w, c) }},
	}
	status := u.deliver(ctx, o, dir, files, func(opt reports.TerminalOptions) error { return reports.CompareTerminal(u.out, c, opt) })
	if status == exitOK {
		for i := range c.Results {
			if c.Results[i].Outcome.Kind == record.Undecided {
				return exitUndecided
			}
		}
	}
	return status
}

// quoted puts arguments in quotes where a shell needs them.
func quoted(args []string) []string {
	var out []string
	for _, a := range args {
		if strings.ContainsAny(a, " '\"$*?;&|<>()[]{}\\!#~`") {
			a = "'" + strings.ReplaceAll(a, "'", `'\''`) + "'"
		}
		out = append(out, a)
	}
	return out
}
