package ensemble

import (
	"context"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"math"
	"os"
	"path/filepath"
	"regexp"
	"sync"
	"time"

	"cycle/scenarios"
)

// The files of an ensemble's folder.
const (
	planFile     = "plan.json"
	scenarioFile = "scenario.toml"
	// MembersFile is the table of all members.
	MembersFile = "members.parquet"
	// MembersCSV is the same table on request.
	MembersCSV = "members.csv"
)

var (
	shardName   = regexp.MustCompile(`^shard-[0-9]+-of-[0-9]+\.part$`)
	journalName = regexp.MustCompile(`^shard-[0-9]+-of-[0-9]+\.journal-[0-9]+$`)
	otherNames  = regexp.MustCompile(`^(plan\.json|scenario\.toml|members\.parquet|members\.csv|summary\.json|report\.html|job\.sh|gather\.sh|submit\.sh|slurm-[0-9_]+\.out|\.cycle|.*\.tmp-[0-9]+|member-[0-9]+)$`)
)

func partFile(shard, shards int) string { return fmt.Sprintf("shard-%05d-of-%05d.part", shard, shards) }

// folderError is a folder that does not fit the plan.
func folderError(path, what, found, allowed string) error {
	return &scenarios.KeyError{File: path, What: what, Found: found, Allowed: allowed}
}

// Prepare makes the folder of an ensemble or checks the one that is there: it
// must be empty or belong to the same scenario, seed, design, version and number
// of members.
func (p *Plan) Prepare(dir string, shards int) error {
	entries, err := os.ReadDir(dir)
	switch {
	case errors.Is(err, fs.ErrNotExist):
		if err := os.MkdirAll(dir, 0o755); err != nil {
			return err
		}
	case err != nil:
		return err
	}
	planned := false
	for _, e := range entries {
		n := e.Name()
		planned = planned || n == planFile
		if !shardName.MatchString(n) && !journalName.MatchString(n) && !otherNames.MatchString(n) {
			return folderError(dir, "the folder holds what no ensemble wrote and is left alone", fmt.Sprintf("%q in it", n), "")
		}
	}
	if len(entries) > 0 && !planned {
		// Another shard may be at the same place a moment ahead.
		for i := 0; i < 50 && !planned; i++ {
			time.Sleep(20 * time.Millisecond)
			_, err := os.Stat(filepath.Join(dir, planFile))
			planned = err == nil
			entries, _ = os.ReadDir(dir)
			if onlyTemporary(entries) {
				break
			}
		}
		if !planned && !onlyTemporary(entries) {
			return folderError(dir, "the folder was not written by an ensemble and is left alone", fmt.Sprintf("%q in it", entries[0].Name()), "")
		}
	}
	want := p.identity(0, shards)
	if planned {
		have, err := readPlan(dir)
		if err != nil {
			return err
		}
		if d := want.differs(have); d != "" {
			return folderError(dir, "the folder holds another ensemble: "+d, "", "")
		}
		return nil
	}
	data, err := json.MarshalIndent(want, "", "  ")
	if err != nil {
		return err
	}
	if err := replace(filepath.Join(dir, scenarioFile), func(w io.Writer) error {
		_, err := io.WriteString(w, p.Scenario.TOML())
		return err
	}); err != nil {
		return err
	}
	return replace(filepath.Join(dir, planFile), func(w io.Writer) error { _, err := w.Write(append(data, '\n')); return err })
}

var temporary = regexp.MustCompile(`\.tmp-[0-9]+$`)

func onlyTemporary(entries []os.DirEntry) bool {
	for _, e := range entries {
		if !temporary.MatchString(e.Name()) && e.Name() != scenarioFile {
			return false
		}
	}
	return true
}

func readPlan(dir string) (identity, error) {
	var id identity
	path := filepath.Join(dir, planFile)
	data, err := os.ReadFile(path)
	if errors.Is(err, fs.ErrNotExist) {
		return id, folderError(dir, "there is no ensemble in this folder", "no "+planFile, "a folder that cycle ensemble wrote")
	}
	if err != nil {
		return id, err
	}
	if json.Unmarshal(data, &id) != nil || id.Kind != "ensemble shard" || id.Members < 1 || id.Shards < 1 {
		return id, folderError(path, "this is no plan of an ensemble", "", "")
	}
	if id.Format != 1 {
		return id, folderError(path, "written by another version of the program", fmt.Sprintf("format %d", id.Format), "format 1")
	}
	return id, nil
}

// replace writes a file whole or not at all.
func replace(path string, write func(io.Writer) error) (err error) {
	f, err := os.CreateTemp(filepath.Dir(path), filepath.Base(path)+".tmp-*")
	if err != nil {
		return err
	}
	defer func() {
		if err != nil {
			f.Close()
			os.Remove(f.Name())
		}
	}()
	if err := write(f); err != nil {
		return err
	}
	if err := f.Chmod(0o644); err != nil {
		return err
	}
	if err := f.Sync(); err != nil {
		return err
	}
	if err := f.Close(); err != nil {
		return err
	}
	return os.Rename(f.Name(), path)
}

// Options of Run.
type Options struct {
	Shard, Shards int // 1 of 1 is the whole ensemble
	Workers       int
	Progress      func(done, total int) // called now and then from one goroutine; may be nil
}

// window is how many members may be under way or finished out of order.
const window = 1024

// Run computes the members of one shard into a folder that Prepare has seen. It
// goes on where an earlier run stopped. When ctx ends, what is finished is kept
// and the error is that of ctx.
func (p *Plan) Run(ctx context.Context, dir string, o Options) error {
	if o.Shard < 1 || o.Shards < o.Shard || o.Shards > p.Members {
		return &scenarios.KeyError{Key: "--shard", Found: fmt.Sprintf("%d/%d", o.Shard, o.Shards), Allowed: fmt.Sprintf("1/1 to %d/%d", p.Members, p.Members)}
	}
	lo, hi := span(p.Members, o.Shard, o.Shards)
	final := filepath.Join(dir, partFile(o.Shard, o.Shards))
	id := p.identity(o.Shard, o.Shards)
	lay := newLayout(id)
	if n, err := lay.count(final, id, lo); err == nil {
		if n == hi-lo {
			if o.Progress != nil {
				o.Progress(hi-lo, hi-lo)
			}
			return nil
		}
		return folderError(final, "the file of this shard is damaged", fmt.Sprintf("%d good members of %d", n, hi-lo), "a whole file, or none: delete it to compute the shard again")
	} else if !errors.Is(err, fs.ErrNotExist) {
		return wrongPart(final, err)
	}
	j, done, err := openJournal(dir, lay, id, lo, hi)
	if err != nil {
		return err
	}
	defer j.file.Close()
	if err := p.compute(ctx, j, lo, hi, lo+done, o); err != nil {
		if f := j.flush(); f != nil && !errors.Is(err, f) {
			err = errors.Join(err, f)
		}
		j.file.Sync()
		return err
	}
	if err := j.flush(); err != nil {
		return err
	}
	if err := j.file.Sync(); err != nil {
		return err
	}
	// Whoever comes first gives the shard its name; the bytes are the same.
	err = os.Rename(j.file.Name(), final)
	if errors.Is(err, fs.ErrNotExist) {
		// Another run of the shard took the journal's members over and removed it.
		if n, e := lay.count(final, id, lo); e == nil && n == hi-lo {
			err = nil
		} else {
			err = replace(final, func(w io.Writer) error {
				_, err := io.Copy(w, io.NewSectionReader(j.file, 0, math.MaxInt64))
				return err
			})
		}
	}
	if err != nil {
		return err
	}
	syncDir(dir)
	old, _ := filepath.Glob(filepath.Join(dir, fmt.Sprintf("shard-%05d-of-%05d.journal-*", o.Shard, o.Shards)))
	for _, name := range old {
		os.Remove(name)
	}
	return nil
}

func wrongPart(path string, err error) error {
	var foreign errForeign
	if errors.As(err, &foreign) {
		return folderError(path, "the file belongs to another ensemble: "+foreign.why, "", "")
	}
	return err
}

func syncDir(dir string) {
	if d, err := os.Open(dir); err == nil {
		d.Sync()
		d.Close()
	}
}

// count returns the number of good records of a file.
func (l layout) count(path string, id identity, lo int) (int, error) {
	f, err := os.Open(path)
	if err != nil {
		return 0, err
	}
	defer f.Close()
	n, _, err := l.scan(f, id, lo, nil)
	return n, err
}

// openJournal starts a journal of its own with the good records of the longest
// one that an earlier run left. No file of another process is written to: a shard
// may run twice at a time.
func openJournal(dir string, lay layout, id identity, lo, hi int) (*journal, int, error) {
	pattern := fmt.Sprintf("shard-%05d-of-%05d.journal-", id.Shard, id.Shards)
	old, err := filepath.Glob(filepath.Join(dir, pattern+"*"))
	if err != nil {
		return nil, 0, err
	}
	best, bestN, bestEnd := "", 0, int64(0)
	counts := map[string]int{}
	for _, name := range old {
		f, err := os.Open(name)
		if errors.Is(err, fs.ErrNotExist) {
			continue
		}
		if err != nil {
			return nil, 0, err
		}
		n, end, err := lay.scan(f, id, lo, nil)
		f.Close()
		if err != nil {
			return nil, 0, wrongPart(name, err)
		}
		counts[name] = n
		if n > bestN {
			best, bestN, bestEnd = name, n, end
		}
	}
	f, err := os.CreateTemp(dir, pattern+"*")
	if err != nil {
		return nil, 0, err
	}
	fail := func(err error) (*journal, int, error) {
		f.Close()
		os.Remove(f.Name())
		return nil, 0, err
	}
	if err := f.Chmod(0o644); err != nil {
		return fail(err)
	}
	if best == "" {
		_, err = f.Write(lay.head)
	} else {
		var src *os.File
		if src, err = os.Open(best); err == nil {
			_, err = io.CopyN(f, src, bestEnd)
			src.Close()
		}
	}
	if err != nil {
		return fail(err)
	}
	if err := f.Sync(); err != nil {
		return fail(err)
	}
	for name, n := range counts {
		if n <= bestN {
			os.Remove(name)
		}
	}
	return &journal{layout: lay, file: f}, min(bestN, hi-lo), nil
}

// compute runs members from next to hi on several workers and adds them to the
// journal in order.
func (p *Plan) compute(ctx context.Context, j *journal, lo, hi, next int, o Options) error {
	ctx, stop := context.WithCancel(ctx)
	defer stop()
	type result struct {
		i   int
		rec []float64
	}
	results := make(chan result, window)
	tokens := make(chan struct{}, window) // one for each member between its start and the journal
	var mu sync.Mutex
	var failure error
	at := next
	var wg sync.WaitGroup
	for range max(1, o.Workers) {
		wg.Add(1)
		go func() {
			defer wg.Done()
			for {
				select {
				case tokens <- struct{}{}:
				case <-ctx.Done():
					return
				}
				mu.Lock()
				i := at
				at++
				mu.Unlock()
				if i >= hi || ctx.Err() != nil {
					return
				}
				row, err := p.Member(ctx, i)
				if err != nil {
					mu.Lock()
					if failure == nil {
						failure = err
					}
					mu.Unlock()
					stop()
					return
				}
				results <- result{i, p.numbers(&row)} // there is room for every token
			}
		}()
	}
	go func() { wg.Wait(); close(results) }()

	waiting := make([][]float64, window)
	wanted := next
	tick := time.NewTicker(200 * time.Millisecond)
	defer tick.Stop()
	synced := time.Now()
	report := func() {
		if o.Progress != nil {
			o.Progress(wanted-lo, hi-lo)
		}
	}
	report()
	var werr error
	for open := true; open; {
		select {
		case r, ok := <-results:
			if !ok {
				open = false
				break
			}
			waiting[r.i%window] = r.rec
			for rec := waiting[wanted%window]; rec != nil; rec = waiting[wanted%window] {
				waiting[wanted%window] = nil
				if werr == nil {
					if werr = j.add(rec); werr != nil {
						stop()
					}
				}
				wanted++
				<-tokens
			}
			if werr == nil && len(results) == 0 {
				if werr = j.flush(); werr != nil { // what is written survives a kill
					stop()
				}
			}
		case <-tick.C:
			if werr == nil {
				if werr = j.flush(); werr == nil && time.Since(synced) > 5*time.Second {
					werr = j.file.Sync()
					synced = time.Now()
				}
				if werr != nil {
					stop()
				}
			}
			report()
		}
	}
	switch {
	case werr != nil:
		return werr
	case wanted == hi:
		report()
		return nil
	case failure != nil:
		return failure
	}
	return ctx.Err()
}
