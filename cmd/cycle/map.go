package main

import (
	"context"
	"crypto/sha256"
	"encoding/hex"
	"errors"
	"fmt"
	"io"
	"os"
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

var mapCommand = command{
	name: "map", args: "SCENARIO", short: "which fate where, over any two keys, with the exact boundaries",
	minArgs: 1, maxArgs: 1, run: mapFates,
	flags: func(f *pflag.FlagSet, o *options) {
		f.StringVar(&o.out, "out", "", "write the results into `DIR`; default is the scenario's name and -map")
		f.StringVar(&o.x, "x", "", "horizontal axis, `KEY=LO:HI`")
		f.StringVar(&o.y, "y", "", "vertical axis, `KEY=LO:HI`")
		f.IntVar(&o.cells, "cells", 16, "first grid of `N` by N cells")
		f.IntVar(&o.depth, "depth", 4, "halve cells up to `N` times where outcomes differ")
		setFlag(f, o)
		quietFlag(f, o)
	},
	usage: `
Runs the history over two keys, on a grid that is halved where outcomes differ, and
draws which fate awaits where. Without axes it maps steady sunlight against steady
outgassing, where the exact boundaries of the equilibrium analysis hold.

  --x KEY=LO:HI      horizontal axis: orbit.distance="0.8 au:1.4 au"; with :log behind
                     it, logarithmic. Any numeric key, or sunlight, or outgassing: with
                     one of these two, planets under steady conditions
  --y KEY=LO:HI      vertical axis
  --cells N          first grid of N by N cells; default 16
  --depth N          halve cells up to N times where outcomes differ; default 4, so
                     that a boundary is known to 1/256 of each axis
  --out DIR          folder of the results; default is the scenario's name and -map
  --set KEY=VALUE    a value over that of the scenario; repeatable
  --quiet            print nothing unless something is wrong

The folder holds report.html, map.json, points.csv, points.parquet, lines.csv and
scenario.toml. What was computed is kept when the command is interrupted, and the
same command goes on from there.

  cycle map orvane --x orbit.distance="0.9 au:1.5 au" --y sources.scale=0.1:10:log
`,
}

func mapFates(u *ui, o *options, args []string) int {
	ctx, stop := signal.NotifyContext(context.Background(), syscall.SIGINT, syscall.SIGTERM)
	defer stop()
	r, err := scenarios.Load(args[0], o.sets)
	if err != nil {
		return u.fail(err)
	}
	var axes [2]carbon.AxisRange
	for i, a := range []struct{ flag, text, usual string }{{"--x", o.x, "sunlight=700 W/m2:1700 W/m2"}, {"--y", o.y, "outgassing=0.3 Tmol/yr:60 Tmol/yr:log"}} {
		if a.text == "" {
			a.text = a.usual
		}
		if axes[i], err = parseAxis(r.Setup, a.text); err != nil {
			u.error(a.flag + ": " + err.Error())
			u.hint("an axis is written %s KEY=LO:HI; cycle keys lists the keys", a.flag)
			return exitUsage
		}
	}
	for _, n := range []struct {
		flag      string
		v, lo, hi int
	}{{"--cells", o.cells, 2, 256}, {"--depth", o.depth, 0, 8}} {
		if n.v < n.lo || n.v > n.hi {
			u.error(fmt.Sprintf("%s: found %d, allowed is %d to %d", n.flag, n.v, n.lo, n.hi))
			return exitUsage
		}
	}
	dir := o.out
	if dir == "" {
		dir = r.Name + "-map"
	}
	if err := checkFolder(dir); err != nil {
		return u.failFolder(dir, err)
	}
	opt := carbon.FateOptions{Cells: o.cells, Depth: o.depth, Version: version}
	if o.depth == 0 {
		opt.Depth = -1
	}
	// Beside the folder, under a name that belongs to this very map.
	id := sha256.Sum256([]byte(fmt.Sprintln(version, r.Hash(), axes, o.cells, o.depth)))
	clean := filepath.Clean(dir)
	journal := filepath.Join(filepath.Dir(clean), "."+filepath.Base(clean)+"."+hex.EncodeToString(id[:5])+".points")
	undo, err := makeParents(filepath.Dir(clean))
	if err != nil {
		undo()
		return u.failFolder(dir, err)
	}
	m, kept, err := resumable(ctx, r, axes, opt, journal, o.quiet)
	if err != nil {
		var ae *carbon.AxisError
		switch {
		case errors.Is(err, context.Canceled) && kept:
			u.error("interrupted; what was computed is kept in " + journal)
			u.hint("the same command goes on from there")
			return exitInterrupted
		case errors.As(err, &ae):
			u.error(ae.Error())
			return exitUsage
		}
		var pe *os.PathError
		if errors.As(err, &pe) {
			return u.failFolder(dir, err)
		}
		return u.failRun(r, err)
	}
	m.Name, m.Title, m.Hash, m.Version = r.Name, r.Title, r.Hash(), version
	m.Command = fmt.Sprintf("cycle map scenario.toml --x %s --y %s --cells %d --depth %d", axisText(r.Setup, axes[0]), axisText(r.Setup, axes[1]), o.cells, o.depth)
	fillRun(m.Run, r)
	files := []outFile{
		{"report.html", func(w io.Writer) error { return reports.MapHTML(w, m) }},
		{"map.json", func(w io.Writer) error { return reports.MapJSON(w, m) }},
		{"points.csv", func(w io.Writer) error { return reports.MapCSV(w, m) }},
		{"points.parquet", func(w io.Writer) error { return reports.MapParquet(w, m) }},
		{"lines.csv", func(w io.Writer) error { return reports.MapLinesCSV(w, m) }},
		{"scenario.toml", func(w io.Writer) error { _, err := io.WriteString(w, r.TOML()); return err }},
	}
	status := u.deliver(ctx, o, dir, files, func(opt reports.TerminalOptions) error { return reports.MapTerminal(u.out, m, opt) })
	if status == exitOK {
		os.Remove(journal) // it has done its work; failing to go, it does no harm
	}
	return status
}

// resumable maps with the journal of an earlier attempt; kept tells whether
// points are in it when it fails.
func resumable(ctx context.Context, r *scenarios.Resolved, axes [2]carbon.AxisRange, opt carbon.FateOptions, journal string, quiet bool) (m *record.Map, kept bool, err error) {
	if old, err := os.Open(journal); err == nil {
		defer old.Close()
		opt.Resume = old
	}
	f, err := os.OpenFile(journal, os.O_APPEND|os.O_CREATE|os.O_WRONLY, 0o644)
	if err != nil {
		return nil, false, err
	}
	defer func() {
		if info, e := f.Stat(); e == nil && info.Size() > 200 {
			kept = true
		}
		f.Close()
		if err != nil && !kept {
			os.Remove(journal)
		}
	}()
	opt.Journal = f
	step, clear := newProgress("map", quiet)
	opt.Progress = step
	m, err = carbon.Fates(ctx, r.Setup, axes[0], axes[1], opt)
	clear()
	return m, kept, err
}

// parseAxis reads KEY=LO:HI or KEY=LO:HI:log. A low end without unit has that of
// the high end.
func parseAxis(s *carbon.Setup, text string) (carbon.AxisRange, error) {
	var a carbon.AxisRange
	key, span, ok := strings.Cut(text, "=")
	a.Key = strings.TrimSpace(key)
	if !ok || a.Key == "" {
		return a, fmt.Errorf("found %q, which has no KEY=", text)
	}
	f := s.AxisField(a.Key)
	if f == nil {
		return a, fmt.Errorf("%q is no numeric key of this scenario", a.Key)
	}
	part := strings.Split(span, ":")
	if len(part) == 3 && strings.TrimSpace(part[2]) == "log" {
		a.Log = true
		part = part[:2]
	}
	if len(part) != 2 {
		return a, fmt.Errorf("%s: found %q, allowed is LO:HI or LO:HI:log", a.Key, span)
	}
	hi, unit, err := f.Kind.Parse(part[1])
	if err != nil {
		return a, fmt.Errorf("%s: %w", a.Key, err)
	}
	lo, _, err := f.Kind.Parse(part[0])
	if err != nil && unit != "" {
		lo, _, err = f.Kind.Parse(strings.TrimSpace(part[0]) + " " + unit)
	}
	if err != nil {
		return a, fmt.Errorf("%s: %w", a.Key, err)
	}
	a.Lo, a.Hi = lo, hi
	for _, v := range []float64{lo, hi} {
		if err := f.Check(v); err != nil {
			return a, fmt.Errorf("%s: %w", a.Key, err)
		}
	}
	if lo >= hi {
		return a, fmt.Errorf("%s: found %s to %s, allowed is from a lower to a higher value", a.Key, f.Text(lo), f.Text(hi))
	}
	if a.Log && lo <= 0 {
		return a, fmt.Errorf("%s: found %s, allowed is a positive value on a logarithmic axis", a.Key, f.Text(lo))
	}
	return a, nil
}

// axisText writes an axis as an argument of a shell.
func axisText(s *carbon.Setup, a carbon.AxisRange) string {
	f := s.AxisField(a.Key)
	t := a.Key + "=\"" + f.Text(a.Lo) + ":" + f.Text(a.Hi)
	if a.Log {
		t += ":log"
	}
	return t + "\""
}
