package main

import (
	"context"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"os"
	"os/signal"
	"path/filepath"
	"runtime"
	"runtime/debug"
	"strconv"
	"strings"
	"syscall"
	"time"

	"github.com/spf13/pflag"
	"github.com/vbauerster/mpb/v8"
	"github.com/vbauerster/mpb/v8/decor"
	"golang.org/x/term"

	"cycle/carbon/record"
	"cycle/reports"
	"cycle/scenarios"
	"cycle/scenarios/ensemble"
)

// ensembleFlags are those of cycle ensemble and cycle gather.
type ensembleFlags struct {
	members, workers, member, slurm int
	seed                            uint64
	design, shard, progress         string
	submit, csv                     bool
}

var ensembleCommand = command{
	name: "ensemble", args: "SCENARIO", short: "many histories from the declared uncertainties",
	minArgs: 1, maxArgs: 1, run: runEnsemble,
	flags: func(f *pflag.FlagSet, o *options) {
		e := &o.ensemble
		f.IntVar(&e.members, "members", 1024, "how many `N` histories")
		f.Uint64Var(&e.seed, "seed", 1, "`S` names the draws")
		f.IntVar(&e.workers, "workers", runtime.NumCPU(), "`K` at a time")
		f.StringVar(&e.design, "design", ensemble.Sobol, "`D`: "+strings.Join(ensemble.Designs, ", "))
		f.StringVar(&e.shard, "shard", "", "compute only part `i/n`")
		f.IntVar(&e.member, "member", -1, "run member `I` alone and in full")
		f.IntVar(&e.slurm, "slurm", 0, "write a Slurm job array of `N` shards")
		f.BoolVar(&e.submit, "submit", false, "with --slurm: submit it")
		f.BoolVar(&e.csv, "csv", false, "write members.csv too")
		f.StringVar(&e.progress, "progress", "auto", "`HOW`: auto, plain or none")
		f.StringVar(&o.out, "out", "", "write the results into `DIR`; default is the scenario's name and -ensemble")
		setFlag(f, o)
		quietFlag(f, o)
	},
	usage: `
Draws the keys of the section [uncertain] from their distributions, runs a history
for every draw and tells the shares of the outcomes, when each comes, and what decides
it, all with their sampling errors. A member is a function of scenario, seed and
index: more members leave the first ones as they are.

  --members N        how many histories; default 1024
  --seed S           names the draws; default 1
  --design D         sobol (default), latin, random, or freeze, which costs many more
                     members and gives total sensitivity indices
  --workers K        histories at a time; default is the number of cores
  --member I         run member I alone, in full, with history and report
  --csv              write members.csv too
  --out DIR          folder of the results; default is the scenario's name and -ensemble
  --set KEY=VALUE    a value over that of the scenario, which makes the key certain;
                     repeatable
  --progress HOW     auto (default), plain or none
  --quiet            print nothing unless something is wrong

On several machines:

  --shard i/n        compute only part i of n into the folder; cycle gather joins them
  --slurm N          write a job array of N shards and the job that joins them
  --submit           with --slurm: hand them to sbatch

The folder holds report.html, summary.json, members.parquet (a row for each member:
drawn values, outcome, dates, end, with units in the metadata) and scenario.toml. When
the command is interrupted, even by kill -9, the same command goes on where it
stopped, to the same bytes.

  cycle ensemble earth_uncertain --members 1000
`,
}

var gatherCommand = command{
	name: "gather", args: "DIR", short: "join the shards of an ensemble",
	minArgs: 1, maxArgs: 1, run: gather,
	flags: func(f *pflag.FlagSet, o *options) {
		f.BoolVar(&o.ensemble.csv, "csv", false, "write members.csv too")
		quietFlag(f, o)
	},
	usage: `
Joins the shards that cycle ensemble --shard has computed into DIR, after checking that
all are there, whole, and from the same scenario, seed and version. The result is the
same, byte for byte, as that of one run without shards.

  --csv              write members.csv too
  --quiet            print nothing unless something is wrong

  cycle gather earth_uncertain-ensemble
`,
}

// memoryLimit is where the collector of garbage begins to work harder. The columns
// of a million members take half of it.
const memoryLimit = 180 << 20

func runEnsemble(u *ui, o *options, args []string) int {
	defer debug.SetMemoryLimit(debug.SetMemoryLimit(memoryLimit))
	ctx, stop := signal.NotifyContext(context.Background(), syscall.SIGINT, syscall.SIGTERM)
	defer stop()
	e := &o.ensemble
	r, err := scenarios.Load(args[0], o.sets)
	if err != nil {
		return u.fail(err)
	}
	p, err := ensemble.NewPlan(r, version, e.seed, e.design, e.members)
	if err != nil {
		return u.fail(err)
	}
	switch {
	case e.workers < 1 || e.workers > 4096:
		return u.fail(&scenarios.KeyError{Key: "--workers", Found: strconv.Itoa(e.workers), Allowed: "1 to 4096"})
	case e.progress != "auto" && e.progress != "plain" && e.progress != "none":
		return u.fail(&scenarios.KeyError{Key: "--progress", Found: strconv.Quote(e.progress), Allowed: `"auto", "plain" or "none"`, Near: scenarios.Nearest(e.progress, []string{"auto", "plain", "none"})})
	case e.slurm < 0 || e.slurm > e.members:
		return u.fail(&scenarios.KeyError{Key: "--slurm", Found: strconv.Itoa(e.slurm), Allowed: "1 to the number of members"})
	case e.submit && e.slurm == 0:
		return u.fail(&scenarios.KeyError{Key: "--submit", What: "only with --slurm N"})
	}
	if e.member >= 0 {
		return u.oneMember(ctx, o, r, p)
	}
	dir := o.out
	if dir == "" {
		dir = r.Name + "-ensemble"
	}
	shard, shards := 1, 1
	if e.shard != "" {
		if shard, shards, err = parseShard(e.shard, e.members); err != nil {
			return u.fail(err)
		}
	}
	if e.slurm > 0 {
		shards = e.slurm
	}
	if err := p.Prepare(dir, shards); err != nil {
		return u.failEnsemble(dir, err)
	}
	if e.slurm > 0 {
		return u.slurm(dir, p, e)
	}
	show := u.progress(e.progress, o.quiet)
	if !(shards == 1 && p.Finished(dir)) {
		err = p.Run(ctx, dir, ensemble.Options{Shard: shard, Shards: shards, Workers: e.workers, Progress: show.update})
		show.done()
		if err != nil {
			return u.failEnsemble(dir, err)
		}
	}
	if shards > 1 {
		if !o.quiet {
			fmt.Fprintf(u.out, "%s: shard %d/%d is computed; when all are, join them with: cycle gather %s\n", filepath.Clean(dir), shard, shards, dir)
		}
		return exitOK
	}
	return u.finishEnsemble(ctx, o, dir, p, shards)
}

func gather(u *ui, o *options, args []string) int {
	ctx, stop := signal.NotifyContext(context.Background(), syscall.SIGINT, syscall.SIGTERM)
	defer stop()
	defer debug.SetMemoryLimit(debug.SetMemoryLimit(memoryLimit))
	dir := args[0]
	p, shards, err := ensemble.Open(dir, version)
	if err != nil {
		return u.failEnsemble(dir, err)
	}
	return u.finishEnsemble(ctx, o, dir, p, shards)
}

// finishEnsemble joins the shards and writes what the ensemble says.
func (u *ui) finishEnsemble(ctx context.Context, o *options, dir string, p *ensemble.Plan, shards int) int {
	if err := p.Gather(dir, shards, o.ensemble.csv); err != nil {
		return u.failEnsemble(dir, err)
	}
	s, err := p.Summarise(ctx, dir)
	if err != nil {
		return u.failEnsemble(dir, err)
	}
	files := ensembleFiles(s)
	list := []string{ensemble.MembersFile, "plan.json", "scenario.toml"}
	for _, f := range files {
		if err := ensemble.WriteFile(dir, f.name, f.write); err != nil {
			return u.failEnsemble(dir, fmt.Errorf("%s: %w", f.name, err))
		}
		list = append(list, f.name)
	}
	if o.ensemble.csv {
		list = append(list, ensemble.MembersCSV)
	}
	m := manifest{Format: 1, Files: map[string]string{}}
	for _, n := range list {
		sum, err := ensemble.Sum(dir, n)
		if err != nil {
			return u.failEnsemble(dir, err)
		}
		m.Files[n] = sum
	}
	text, err := json.MarshalIndent(m, "", "  ")
	if err == nil {
		err = ensemble.WriteFile(dir, marker, func(w io.Writer) error { _, err := w.Write(append(text, '\n')); return err })
	}
	if err != nil {
		return u.failEnsemble(dir, err)
	}
	if !o.quiet {
		width, color := u.size()
		if err := reports.EnsembleTerminal(u.out, s, reports.TerminalOptions{Width: width, Color: color}); err != nil {
			u.error("standard output: " + err.Error())
			return exitFailed
		}
		var shown []string
		for _, f := range list {
			if f != "plan.json" {
				shown = append(shown, f)
			}
		}
		fmt.Fprintf(u.out, "\n%s: %s\n", filepath.Clean(dir), strings.Join(shown, ", "))
	}
	if s.Undecided == s.Independent {
		return exitUndecided
	}
	return exitOK
}

func ensembleFiles(s *record.Ensemble) []outFile {
	return []outFile{
		{"summary.json", func(w io.Writer) error { return reports.EnsembleJSON(w, s) }},
		{"report.html", func(w io.Writer) error { return reports.EnsembleHTML(w, s) }},
	}
}

// oneMember runs one member alone and in full.
func (u *ui) oneMember(ctx context.Context, o *options, r *scenarios.Resolved, p *ensemble.Plan) int {
	i := o.ensemble.member
	if i >= p.Members {
		return u.fail(&scenarios.KeyError{Key: "--member", Found: strconv.Itoa(i), Allowed: fmt.Sprintf("0 to %d", p.Members-1)})
	}
	dir := o.out
	if dir == "" {
		dir = fmt.Sprintf("%s-member-%d", r.Name, i)
	}
	if err := checkFolder(dir); err != nil {
		return u.failFolder(dir, err)
	}
	m, err := p.Resolved(ctx, i)
	if err != nil {
		return u.interrupted()
	}
	result, err := history(ctx, m)
	if err != nil {
		return u.failRun(m, err)
	}
	result.Seed = p.Seed
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

// parseShard reads "i/n".
func parseShard(s string, members int) (i, n int, err error) {
	a, b, ok := strings.Cut(s, "/")
	i, e1 := strconv.Atoi(a)
	n, e2 := strconv.Atoi(b)
	if !ok || e1 != nil || e2 != nil || i < 1 || i > n || n > members {
		return 0, 0, &scenarios.KeyError{Key: "--shard", Found: strconv.Quote(s), Allowed: fmt.Sprintf("i/n, such as 1/4, with n at most the number of members, %d", members)}
	}
	return i, n, nil
}

// failEnsemble tells what went wrong in the folder of an ensemble.
func (u *ui) failEnsemble(dir string, err error) int {
	var key *scenarios.KeyError
	var keys *scenarios.Errors
	switch {
	case errors.Is(err, context.Canceled):
		u.error("interrupted; what is computed is kept in " + filepath.Clean(dir))
		u.hint("the same command goes on from there")
		return exitInterrupted
	case errors.As(err, &key), errors.As(err, &keys):
		status := u.fail(err)
		if key != nil && strings.HasPrefix(key.File, filepath.Clean(dir)) {
			u.hint("choose another folder with --out DIR, or give the options that this one was begun with")
		}
		return status
	}
	u.error(fmt.Sprintf("%s: %v", filepath.Clean(dir), err))
	u.hint("what is computed is kept; the same command goes on from there, once the folder can be written")
	return exitFailed
}

// slurm writes the jobs of a cluster and submits them when asked.
func (u *ui) slurm(dir string, p *ensemble.Plan, e *ensembleFlags) int {
	program, err := os.Executable()
	if err != nil {
		return u.fail(err)
	}
	job, err := ensemble.WriteJobs(dir, program, p, e.slurm, e.csv)
	if err != nil {
		return u.failEnsemble(dir, err)
	}
	if !e.submit {
		fmt.Fprintf(u.out, "%s: job.sh (array of %d shards), gather.sh, submit.sh\n", filepath.Clean(dir), e.slurm)
		fmt.Fprintf(u.out, "submit them with: sh %s\n", filepath.Join(dir, "submit.sh"))
		return exitOK
	}
	ids, err := job.Submit()
	if err != nil {
		u.error(err.Error())
		u.hint("the jobs are written; submit them by hand with: sh %s", filepath.Join(dir, "submit.sh"))
		return exitFailed
	}
	fmt.Fprintf(u.out, "%s: submitted as jobs %s\n", filepath.Clean(dir), strings.Join(ids, " and "))
	return exitOK
}

// progressLine shows how far a long computation is: a bar on a terminal, a plain
// line now and then elsewhere.
type progressLine struct {
	update func(done, total int)
	done   func()
}

// plainEvery is the time between two plain lines.
const plainEvery = 10 * time.Second

func (u *ui) progress(how string, quiet bool) progressLine {
	f := os.Stderr
	switch {
	case quiet || how == "none":
		return progressLine{func(int, int) {}, func() {}}
	case how == "auto" && term.IsTerminal(int(f.Fd())):
		var bars *mpb.Progress
		var bar *mpb.Bar
		return progressLine{func(done, total int) {
			if bar == nil {
				bars = mpb.New(mpb.WithOutput(f), mpb.WithWidth(40))
				bar = bars.AddBar(int64(total),
					mpb.PrependDecorators(decor.CountersNoUnit("%d/%d members ")),
					mpb.AppendDecorators(decor.Percentage(), decor.AverageSpeed(0, "  %.0f/s"), decor.AverageETA(decor.ET_STYLE_GO, decor.WCSyncSpace)))
				bar.SetRefill(int64(done))
				bar.DecoratorAverageAdjust(time.Now())
			}
			bar.SetCurrent(int64(done))
		}, func() {
			if bar != nil {
				bar.Abort(false)
				bars.Wait()
			}
		}}
	}
	var start, last time.Time
	first := 0
	return progressLine{func(done, total int) {
		now := time.Now()
		if start.IsZero() {
			start, last, first = now, now, done
			return
		}
		if now.Sub(last) < plainEvery {
			return
		}
		last = now
		rate := float64(done-first) / now.Sub(start).Seconds()
		left := ""
		if rate > 0 {
			left = ", " + (time.Duration(float64(total-done)/rate) * time.Second).String() + " left"
		}
		fmt.Fprintf(u.err, "cycle: %d of %d members, %.0f %%, %.3g/s%s\n", done, total, 100*float64(done)/float64(total), rate, left)
		u.err.Flush()
	}, func() {}}
}
