package main

import (
	"context"
	"fmt"
	"io"
	"os/signal"
	"path/filepath"
	"strings"
	"syscall"

	"github.com/spf13/pflag"

	"cycle/carbon"
	"cycle/carbon/record"
	"cycle/carbon/units"
	"cycle/reports"
	"cycle/scenarios"
)

var explainCommand = command{
	name: "explain", args: "SCENARIO", short: "why it fails, how close it was, what would have saved it",
	minArgs: 1, maxArgs: 1, run: explain,
	flags: func(f *pflag.FlagSet, o *options) {
		f.StringVar(&o.out, "out", "", "write the results into `DIR`; default is the scenario's name and -explain")
		f.StringVar(&o.postpone, "postpone", "", "a rescue need only put the failure off by `TIME`")
		setFlag(f, o)
		quietFlag(f, o)
	},
	usage: `
Runs many variants of one history and tells which slow drivers brought the failure
about, how close the planet came to each boundary, the smallest change of every
parameter that avoids the failure, how strongly its date hangs on each input, and
what other published laws make of the same planet. Where nothing fails it looks for
what would bring a failure.

  --out DIR          folder of the results; default is the scenario's name and -explain
  --postpone TIME    look for what puts the failure off by so much, not for what
                     avoids it: --postpone "0.5 Gyr"
  --set KEY=VALUE    a value over that of the scenario; repeatable
  --quiet            print nothing unless something is wrong

The folder holds report.html, explanation.json, combinations.csv, rescues.csv,
elasticities.csv, laws.csv, distances.csv and scenario.toml.

  cycle explain orvane
`,
}

func explain(u *ui, o *options, args []string) int {
	ctx, stop := signal.NotifyContext(context.Background(), syscall.SIGINT, syscall.SIGTERM)
	defer stop()
	opt := carbon.ExplainOptions{}
	if o.postpone != "" {
		v, _, err := units.Time.Parse(o.postpone)
		if err != nil || v <= 0 {
			reason := "allowed is a time above zero, like \"0.5 Gyr\""
			if err != nil {
				reason = err.Error()
			} else {
				reason = fmt.Sprintf("found %q, %s", o.postpone, reason)
			}
			u.error("--postpone: " + reason)
			return exitUsage
		}
		opt.Postpone = v
	}
	r, err := scenarios.Load(args[0], o.sets)
	if err != nil {
		return u.fail(err)
	}
	dir := o.out
	if dir == "" {
		dir = r.Name + "-explain"
	}
	if err := checkFolder(dir); err != nil {
		return u.failFolder(dir, err)
	}
	step, clear := newProgress("explain", o.quiet)
	opt.Progress = step
	e, err := carbon.Explain(ctx, r.Setup, opt)
	clear()
	if err != nil {
		return u.failRun(r, err)
	}
	e.Name, e.Title, e.Hash, e.Version = r.Name, r.Title, r.Hash(), version
	e.Command = "cycle explain scenario.toml"
	if o.postpone != "" {
		e.Command += " --postpone \"" + units.Time.Format(opt.Postpone, "Gyr") + "\""
	}
	fillRun(e.Run, r)
	files := []outFile{
		{"report.html", func(w io.Writer) error { return reports.ExplainHTML(w, e) }},
		{"explanation.json", func(w io.Writer) error { return reports.ExplanationJSON(w, e) }},
		{"combinations.csv", func(w io.Writer) error { return reports.CombinationsCSV(w, e) }},
		{"rescues.csv", func(w io.Writer) error { return reports.RescuesCSV(w, e) }},
		{"elasticities.csv", func(w io.Writer) error { return reports.ElasticitiesCSV(w, e) }},
		{"laws.csv", func(w io.Writer) error { return reports.LawsCSV(w, e) }},
		{"distances.csv", func(w io.Writer) error { return reports.DistancesCSV(w, e) }},
		{"scenario.toml", func(w io.Writer) error { _, err := io.WriteString(w, r.TOML()); return err }},
	}
	status := u.deliver(ctx, o, dir, files, func(opt reports.TerminalOptions) error { return reports.ExplainTerminal(u.out, e, opt) })
	if status == exitOK && e.Outcome.Kind == record.Undecided {
		return exitUndecided
	}
	return status
}

// fillRun fills in what only the caller of a run knows.
func fillRun(run *record.Run, r *scenarios.Resolved) {
	run.Name, run.Title = r.Name, r.Title
	run.Inputs, run.Scenario, run.Hash = r.Inputs(), r.TOML(), r.Hash()
	run.Version = version
	run.Command = "cycle run scenario.toml"
}

// deliver writes the folder and prints what it tells.
func (u *ui) deliver(ctx context.Context, o *options, dir string, files []outFile, say func(reports.TerminalOptions) error) int {
	if ctx.Err() != nil {
		return u.interrupted()
	}
	if err := writeFolder(dir, files); err != nil {
		return u.failFolder(dir, err)
	}
	if o.quiet {
		return exitOK
	}
	width, color := u.size()
	if err := say(reports.TerminalOptions{Width: width, Color: color}); err != nil {
		u.error("standard output: " + err.Error())
		return exitFailed
	}
	fmt.Fprintf(u.out, "\n%s: %s\n", filepath.Clean(dir), strings.Join(names(files), ", "))
	return exitOK
}
