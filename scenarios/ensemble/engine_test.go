package ensemble

import (
	"bytes"
	"context"
	"io"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"time"

	"cycle/carbon"
	"cycle/carbon/record"
	"cycle/scenarios"
)

// small is an ensemble of planets that cost little: no anchoring, a short span,
// and members that freeze, cycle, boil, or cannot be.
const small = `
[time]
start = "4 Gyr"
end = "4.6 Gyr"
[solver]
max_freezes = 3
[land]
before = 1
[biology]
before = 1
[uncertain]
"orbit.distance" = { distribution = "uniform", low = "0.85 au", high = "1.25 au" }
"weathering.land.efold" = "published"
"weathering.land.law" = { choices = ["walker1981", "krissansentotton2017", "menou2015"], weights = [2, 1, 1] }
"weathering.seafloor.under_ice" = { distribution = "triangular", low = 0, mode = 0.3, high = 1 }
"sources.arc" = { distribution = "log-normal", median = "2.5 Tmol/yr", sigma = 0.5 }
ages = ["4.1 Gyr", "4.5 Gyr"]
`

func smallPlan(t testing.TB, members int, design string) *Plan {
	t.Helper()
	r, err := scenarios.Parse("small.toml", []byte(small), nil)
	if err != nil {
		t.Fatal(err)
	}
	p, err := NewPlan(r, "test", 7, design, members)
	if err != nil {
		t.Fatal(err)
	}
	return p
}

func runAll(t *testing.T, p *Plan, dir string, shards, workers int) {
	t.Helper()
	if err := p.Prepare(dir, shards); err != nil {
		t.Fatal(err)
	}
	for s := shards; s >= 1; s-- {
		if err := p.Run(context.Background(), dir, Options{Shard: s, Shards: shards, Workers: workers}); err != nil {
			t.Fatal(err)
		}
	}
	if err := p.Gather(dir, shards, true); err != nil {
		t.Fatal(err)
	}
}

func members(t *testing.T, dir string) []byte {
	t.Helper()
	b, err := os.ReadFile(filepath.Join(dir, MembersFile))
	if err != nil {
		t.Fatal(err)
	}
	return b
}

// The same bytes for any number of workers and of shards.
func TestSameBytes(t *testing.T) {
	const n = 64
	var want []byte
	for _, c := range []struct{ shards, workers int }{{1, 1}, {1, 2}, {1, 7}, {3, 2}, {16, 1}} {
		dir := filepath.Join(t.TempDir(), "e")
		runAll(t, smallPlan(t, n, Sobol), dir, c.shards, c.workers)
		got := members(t, dir)
		if want == nil {
			want = got
		} else if !bytes.Equal(got, want) {
			t.Errorf("%d shards and %d workers give other bytes", c.shards, c.workers)
		}
		left, _ := filepath.Glob(filepath.Join(dir, "shard-*"))
		if len(left) > 0 {
			t.Errorf("left over: %v", left)
		}
	}
	kinds := map[record.Kind]int{}
	dir := filepath.Join(t.TempDir(), "e")
	p := smallPlan(t, n, Sobol)
	runAll(t, p, dir, 2, 2)
	if err := p.Each(dir, func(rec []float64) error { r := p.row(rec); kinds[r.Kind]++; return nil }); err != nil {
		t.Fatal(err)
	}
	t.Log(kinds)
	if len(kinds) < 3 {
		t.Errorf("the ensemble is too even to test with: %v", kinds)
	}
}

// A member is a function of its index: more members leave the first ones alone.
func TestExtend(t *testing.T) {
	for _, d := range Designs {
		a, b := smallPlan(t, 10, d), smallPlan(t, 100000, d)
		for i := range 10 {
			u, v := a.Unit(i), b.Unit(i)
			for j := range u {
				if u[j] != v[j] || !(u[j] > 0 && u[j] < 1) {
					t.Fatalf("%s: member %d is %v and %v", d, i, u, v)
				}
			}
		}
		x, err := a.Member(context.Background(), 3)
		if err != nil {
			t.Fatal(err)
		}
		y, _ := b.Member(context.Background(), 3)
		if x.TimeGyr != y.TimeGyr || x.Kind != y.Kind || x.Steps != y.Steps {
			t.Errorf("%s: %+v and %+v", d, x, y)
		}
	}
}

// Ctrl-C keeps what is finished, and the run goes on to the same bytes.
func TestInterrupted(t *testing.T) {
	const n = 512 // more than any machine computes before the first stop
	want := filepath.Join(t.TempDir(), "e")
	runAll(t, smallPlan(t, n, Sobol), want, 1, 2)
	dir := filepath.Join(t.TempDir(), "e")
	p := smallPlan(t, n, Sobol)
	if err := p.Prepare(dir, 1); err != nil {
		t.Fatal(err)
	}
	stops := 0
	for {
		ctx, cancel := context.WithCancel(context.Background())
		// Ever later, so that a slow machine gets beyond a member.
		timer := time.AfterFunc(time.Duration(40+5*stops)*time.Millisecond, cancel)
		err := p.Run(ctx, dir, Options{Shard: 1, Shards: 1, Workers: 2})
		timer.Stop()
		cancel()
		if err == nil {
			break
		}
		if stops++; err != context.Canceled || stops > n {
			t.Fatal(err)
		}
	}
	if stops == 0 {
		t.Error("never stopped")
	}
	if err := p.Gather(dir, 1, false); err != nil {
		t.Fatal(err)
	}
	if !bytes.Equal(members(t, dir), members(t, want)) {
		t.Error("other bytes after interruptions")
	}
}

// Whatever stands in the folder that does not belong there is told, and nothing
// is mixed.
func TestFolder(t *testing.T) {
	const n = 24
	whole := filepath.Join(t.TempDir(), "whole")
	runAll(t, smallPlan(t, n, Sobol), whole, 1, 2)
	want := members(t, whole)
	put := func(dir, name, text string) {
		if err := os.WriteFile(filepath.Join(dir, name), []byte(text), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	shards := func(dir string, p *Plan) {
		t.Helper()
		if err := p.Prepare(dir, 3); err != nil {
			t.Fatal(err)
		}
		for s := 1; s <= 3; s++ {
			if err := p.Run(context.Background(), dir, Options{Shard: s, Shards: 3, Workers: 2}); err != nil {
				t.Fatal(err)
			}
		}
	}
	fails := func(what string, err error, words ...string) {
		t.Helper()
		if err == nil {
			t.Errorf("%s: no error", what)
			return
		}
		for _, w := range words {
			if !strings.Contains(err.Error(), w) {
				t.Errorf("%s: %q lacks %q", what, err, w)
			}
		}
	}
	t.Run("foreign", func(t *testing.T) {
		dir := t.TempDir()
		put(dir, "thesis.tex", "years of work")
		fails("a folder of the user's", smallPlan(t, n, Sobol).Prepare(dir, 1), `"thesis.tex"`)
	})
	t.Run("plan", func(t *testing.T) {
		dir := t.TempDir()
		shards(dir, smallPlan(t, n, Sobol))
		other := smallPlan(t, n, Sobol)
		other.Seed = 8
		fails("another seed", other.Prepare(dir, 3), "seed 7 instead of 8")
		fails("another design", smallPlan(t, n, Random).Prepare(dir, 3), "design sobol instead of random")
		fails("another number", smallPlan(t, n+1, Sobol).Prepare(dir, 3), "number of members 24 instead of 25")
		newer := smallPlan(t, n, Sobol)
		newer.Version = "test2"
		fails("another version", newer.Prepare(dir, 3), "version of the program test instead of test2")
		_, _, err := Open(dir, "test2")
		fails("another version", err, "another version of the program", "test2")
		r, err := scenarios.Parse("small.toml", []byte(small), []string{"planet.mass=2 M_E"})
		if err != nil {
			t.Fatal(err)
		}
		heavy, err := NewPlan(r, "test", 7, Sobol, n)
		if err != nil {
			t.Fatal(err)
		}
		fails("another scenario", heavy.Prepare(dir, 3), "scenario ")
	})
	t.Run("missing", func(t *testing.T) {
		dir := t.TempDir()
		p := smallPlan(t, n, Sobol)
		shards(dir, p)
		os.Remove(filepath.Join(dir, partFile(2, 3)))
		fails("a shard is missing", p.Gather(dir, 3, false), "1 of 3 shards are not finished", "no shard 2/3")
	})
	t.Run("damaged", func(t *testing.T) {
		dir := t.TempDir()
		p := smallPlan(t, n, Sobol)
		shards(dir, p)
		path := filepath.Join(dir, partFile(2, 3))
		b, _ := os.ReadFile(path)
		put(dir, partFile(2, 3), string(b[:len(b)-7]))
		fails("truncated", p.Gather(dir, 3, false), "damaged", "7 good members of 8")
		fails("truncated", p.Run(context.Background(), dir, Options{Shard: 2, Shards: 3, Workers: 1}), "damaged")
		b[len(b)/2] ^= 4
		put(dir, partFile(2, 3), string(b))
		fails("one bit", p.Gather(dir, 3, false), "damaged")
		put(dir, partFile(2, 3), "hello\n")
		fails("no journal", p.Gather(dir, 3, false), "no journal of an ensemble")
		first, _ := os.ReadFile(filepath.Join(dir, partFile(1, 3)))
		put(dir, partFile(2, 3), string(first))
		fails("the wrong shard", p.Gather(dir, 3, false), "shard 1 instead of 2")
		if _, err := os.Stat(filepath.Join(dir, MembersFile)); err == nil {
			t.Error("a table was written in spite of it")
		}
		os.Remove(path)
		if err := p.Run(context.Background(), dir, Options{Shard: 2, Shards: 3, Workers: 1}); err != nil {
			t.Fatal(err)
		}
		if err := p.Gather(dir, 3, false); err != nil || !bytes.Equal(members(t, dir), want) {
			t.Errorf("after computing the shard again: %v", err)
		}
		if err := p.Gather(dir, 3, false); err != nil {
			t.Errorf("gathering twice: %v", err)
		}
	})
	t.Run("torn", func(t *testing.T) {
		dir := t.TempDir()
		p := smallPlan(t, n, Sobol)
		shards(dir, p)
		b, _ := os.ReadFile(filepath.Join(dir, partFile(2, 3)))
		os.Remove(filepath.Join(dir, partFile(2, 3)))
		for i, cut := range []int{0, 5, len(b) / 2, len(b) - 3} {
			put(dir, "shard-00002-of-00003.journal-"+string('1'+rune(i)), string(b[:cut]))
		}
		if err := p.Run(context.Background(), dir, Options{Shard: 2, Shards: 3, Workers: 1}); err != nil {
			t.Fatal(err)
		}
		if err := p.Gather(dir, 3, false); err != nil || !bytes.Equal(members(t, dir), want) {
			t.Errorf("after torn journals: %v", err)
		}
	})
	t.Run("table", func(t *testing.T) {
		dir := t.TempDir()
		p := smallPlan(t, n, Sobol)
		runAll(t, p, dir, 1, 2)
		put(dir, MembersFile, string(want[:len(want)/2]))
		if p.Finished(dir) {
			t.Error("half a table counts as finished")
		}
		if err := p.Run(context.Background(), dir, Options{Shard: 1, Shards: 1, Workers: 2}); err != nil {
			t.Fatal(err)
		}
		if err := p.Gather(dir, 1, false); err != nil || !bytes.Equal(members(t, dir), want) {
			t.Errorf("after half a table: %v", err)
		}
	})
}

// A shard that runs twice at a time loses nothing and counts nothing twice.
func TestTwice(t *testing.T) {
	const n = 40
	want := filepath.Join(t.TempDir(), "e")
	runAll(t, smallPlan(t, n, Sobol), want, 1, 2)
	dir := t.TempDir()
	p, q := smallPlan(t, n, Sobol), smallPlan(t, n, Sobol)
	if err := p.Prepare(dir, 2); err != nil {
		t.Fatal(err)
	}
	errs := make(chan error)
	for _, x := range []*Plan{p, q, p} {
		go func() {
			for s := 1; s <= 2; s++ {
				if err := x.Run(context.Background(), dir, Options{Shard: s, Shards: 2, Workers: 1}); err != nil {
					errs <- err
					return
				}
			}
			errs <- nil
		}()
	}
	for range 3 {
		if err := <-errs; err != nil {
			t.Error(err)
		}
	}
	if err := p.Gather(dir, 2, false); err != nil {
		t.Fatal(err)
	}
	if !bytes.Equal(members(t, dir), members(t, want)) {
		t.Error("other bytes when a shard runs twice")
	}
}

// A full disk is an error that says so; what was written stays good.
func TestDiskFull(t *testing.T) {
	p := smallPlan(t, 20, Sobol)
	full, err := os.OpenFile("/dev/full", os.O_WRONLY, 0)
	if err != nil {
		t.Fatal(err)
	}
	defer full.Close()
	j := &journal{layout: newLayout(p.identity(1, 1)), file: full}
	err = p.compute(context.Background(), j, 0, 20, 0, Options{Workers: 2})
	if err == nil || !strings.Contains(err.Error(), "no space left on device") {
		t.Errorf("%v", err)
	}
	// A result that cannot be written leaves the one before it.
	dir := t.TempDir()
	path := filepath.Join(dir, "x")
	if err := os.WriteFile(path, []byte("old"), 0o644); err != nil {
		t.Fatal(err)
	}
	if err := replace(path, func(w io.Writer) error { w.Write([]byte("new")); return io.ErrShortWrite }); err == nil {
		t.Error("no error")
	}
	if b, _ := os.ReadFile(path); string(b) != "old" {
		t.Errorf("the old file is %q", b)
	}
	if left, _ := os.ReadDir(dir); len(left) != 1 {
		t.Errorf("%d files left", len(left))
	}
	// A folder that cannot be made.
	if err := p.Prepare(filepath.Join(path, "below"), 1); err == nil {
		t.Error("a folder below a file")
	}
}

// Values that do not fit together and a fault of the program are rows.
func TestEveryMemberIsARow(t *testing.T) {
	r, err := scenarios.Parse("x.toml", []byte("[uncertain]\n\"sources.arc\" = { distribution = \"uniform\", low = \"1 Tmol/yr\", high = \"100 Tmol/yr\" }\nages = [\"1 Gyr\"]\n"), nil)
	if err != nil {
		t.Fatal(err)
	}
	p, err := NewPlan(r, "test", 1, Sobol, 64)
	if err != nil {
		t.Fatal(err)
	}
	bad := 0
	for i := range 8 {
		row, err := p.Member(context.Background(), i)
		if err != nil {
			t.Fatal(err)
		}
		if len(p.numbers(&row)) != len(p.columns) {
			t.Error("a row of another length")
		}
		if row.Status == record.StatusImpossible {
			bad++
		}
		back := p.row(p.numbers(&row))
		if back.Kind != row.Kind || back.Status != row.Status || back.Steps != row.Steps {
			t.Errorf("%+v came back as %+v", row, back)
		}
	}
	if bad == 0 {
		t.Error("no member drew more from arcs than there is")
	}
	s := r.Setup.Clone()
	s.Pulses = []*carbon.Pulse{nil}
	x, err := fate(context.Background(), s, nil) // a fault
	if err != nil || x.Status != record.StatusFault {
		t.Errorf("%+v, %v", x, err)
	}
}

// A table is read back to the bit.
func TestTable(t *testing.T) {
	dir := t.TempDir()
	p := smallPlan(t, 24, Latin)
	runAll(t, p, dir, 1, 2)
	i := 0
	err := p.Each(dir, func(rec []float64) error {
		row, err := p.Member(context.Background(), i)
		if err != nil {
			return err
		}
		for c, want := range p.numbers(&row) {
			got := rec[c]
			if p.columns[c].scale != 1 && math.Abs(got-want) <= 4e-16*math.Abs(want) {
				continue // shown in another unit
			}
			if got != want && !(math.IsNaN(got) && math.IsNaN(want)) {
				t.Errorf("member %d, %s: %v, want %v", i, p.columns[c].name, got, want)
			}
		}
		i++
		return nil
	})
	if err != nil || i != 24 {
		t.Fatal(i, err)
	}
	text, err := os.ReadFile(filepath.Join(dir, MembersCSV))
	if err != nil {
		t.Fatal(err)
	}
	lines := strings.Split(strings.TrimSpace(string(text)), "\n")
	if len(lines) != 25 || !strings.HasPrefix(lines[0], "member,orbit_distance_au,weathering_land_efold_K,") {
		t.Errorf("%d lines, %q", len(lines), lines[0])
	}
}
