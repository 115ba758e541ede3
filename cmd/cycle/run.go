package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"os/signal"
	"path/filepath"
	"strings"
	"syscall"

	"github.com/spf13/pflag"

	"cycle/carbon"
	"cycle/carbon/record"
	"cycle/reports"
	"cycle/scenarios"
)

var runCommand = command{
	name: "run", args: "SCENARIO", short: "one history: what becomes of the planet, when and why",
	minArgs: 1, maxArgs: 1, run: run,
	flags: func(f *pflag.FlagSet, o *options) {
		f.StringVar(&o.out, "out", "", "write the results into `DIR`; default is the scenario's name")
		setFlag(f, o)
		quietFlag(f, o)
	},
	usage: `
Integrates one history and tells the verdict: what ends the planet's habitability,
when, with what numerical error, and how narrow the margin was. SCENARIO is a TOML
file or the name of a built-in planet.

  --out DIR          folder of the results; default is the scenario's name
  --set KEY=VALUE    a value over that of the scenario; repeatable
  --quiet            print nothing unless something is wrong

The folder holds report.html, summary.json, history.csv, history.parquet and
scenario.toml, which repeats the run. It appears whole or not at all, and replaces
an older one only if cycle wrote that and nobody has changed it since.

  cycle run earth --set weathering.land.efold="20 K" --out earth-20K
`,
}

func run(u *ui, o *options, args []string) int {
	ctx, stop := signal.NotifyContext(context.Background(), syscall.SIGINT, syscall.SIGTERM)
	defer stop()
	r, err := scenarios.Load(args[0], o.sets)
	if err != nil {
		return u.fail(err)
	}
	dir := o.out
	if dir == "" {
		dir = r.Name
	}
	// Before anything is computed: may the result be written at all?
	if err := checkFolder(dir); err != nil {
		return u.failFolder(dir, err)
	}
	result, err := history(ctx, r)
	if err != nil {
		return u.failRun(r, err)
	}
	files := resultFiles(result)
	if ctx.Err() != nil {
		return u.interrupted()
	}
	if err := writeFolder(dir, files); err != nil {
		return u.failFolder(dir, err)
	}
	if !o.quiet {
		width, color := u.size()
		if err := reports.Terminal(u.out, result, reports.TerminalOptions{Width: width, Color: color}); err != nil {
			u.error("standard output: " + err.Error())
			return exitFailed
		}
		fmt.Fprintf(u.out, "\n%s: %s\n", filepath.Clean(dir), strings.Join(names(files), ", "))
	}
	if result.Outcome.Kind == record.Undecided {
		return exitUndecided
	}
	return exitOK
}

// history runs a resolved scenario and fills in what only the caller knows.
func history(ctx context.Context, r *scenarios.Resolved) (*record.Run, error) {
	result, err := carbon.Run(ctx, r.Setup)
	if err != nil {
		return nil, err
	}
	result.Name, result.Title = r.Name, r.Title
	result.Inputs, result.Scenario, result.Hash = r.Inputs(), r.TOML(), r.Hash()
	result.Version = version
	result.Command = "cycle run scenario.toml"
	return result, nil
}

// resultFiles lists the files of one history.
func resultFiles(r *record.Run) []outFile {
	return []outFile{
		{"report.html", func(w io.Writer) error { return reports.HTML(w, r) }},
		{"summary.json", func(w io.Writer) error { return reports.SummaryJSON(w, r) }},
		{"history.csv", func(w io.Writer) error { return reports.HistoryCSV(w, r) }},
		{"history.parquet", func(w io.Writer) error { return reports.HistoryParquet(w, r) }},
		{"scenario.toml", func(w io.Writer) error { _, err := io.WriteString(w, r.Scenario); return err }},
	}
}

// failRun tells why a resolved scenario gave no history.
func (u *ui) failRun(r *scenarios.Resolved, err error) int {
	if errors.Is(err, context.Canceled) {
		return u.interrupted()
	}
	var keyed interface{ Key() string }
	if errors.As(err, &keyed) {
		return u.fail(r.Problem(keyed.Key(), err))
	}
	return u.fail(err)
}

func (u *ui) interrupted() int {
	u.error("interrupted; nothing was written")
	return exitInterrupted
}

// failFolder tells why the result was not written: 2 when the folder is the
// user's, 1 when the file system failed.
func (u *ui) failFolder(dir string, err error) int {
	var mine *folderError
	if errors.As(err, &mine) {
		u.error(mine.Error())
		u.hint("choose another folder with --out DIR")
		return exitUsage
	}
	u.error(fmt.Sprintf("%s: the results cannot be written: %v", dir, err))
	u.hint("choose another folder with --out DIR")
	return exitFailed
}
