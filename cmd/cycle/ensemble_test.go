package main

import (
	"bytes"
	"encoding/json"
	"fmt"
	"math/rand"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"testing"
	"time"
)

// cheap is an ensemble whose members cost a millisecond or two.
const cheap = `
title = "Cheap"
[time]
start = "4.3 Gyr"
end = "4.6 Gyr"
[solver]
max_freezes = 3
[uncertain]
"orbit.distance" = { distribution = "uniform", low = "0.9 au", high = "1.15 au" }
"weathering.land.efold" = "published"
"weathering.land.law" = { choices = ["walker1981", "krissansentotton2017"] }
ages = ["4.5 Gyr"]
`

func buildCheap(t *testing.T) (program, scenario string) {
	t.Helper()
	dir := t.TempDir()
	program, scenario = filepath.Join(dir, "cycle"), filepath.Join(dir, "cheap.toml")
	if out, err := exec.Command("go", "build", "-o", program, ".").CombinedOutput(); err != nil {
		t.Fatalf("%v\n%s", err, out)
	}
	if err := os.WriteFile(scenario, []byte(cheap), 0o644); err != nil {
		t.Fatal(err)
	}
	return program, scenario
}

func contents(t *testing.T, dir string) map[string][]byte {
	t.Helper()
	out := map[string][]byte{}
	entries, err := os.ReadDir(dir)
	if err != nil {
		t.Fatal(err)
	}
	for _, e := range entries {
		b, err := os.ReadFile(filepath.Join(dir, e.Name()))
		if err != nil {
			t.Fatal(err)
		}
		out[e.Name()] = b
	}
	return out
}

func sameFolder(t *testing.T, what string, got, want map[string][]byte) {
	t.Helper()
	for name, b := range want {
		if !bytes.Equal(got[name], b) {
			t.Errorf("%s: %s differs (%d and %d bytes)", what, name, len(got[name]), len(b))
		}
	}
	for name := range got {
		if want[name] == nil {
			t.Errorf("%s: %s is left over", what, name)
		}
	}
}

// Killed fifty times at random moments, the ensemble goes on to the same bytes.
func TestEnsembleKilled(t *testing.T) {
	program, scenario := buildCheap(t)
	args := func(out string, more ...string) []string {
		return append([]string{"ensemble", scenario, "--members", "700", "--seed", "3", "--workers", "2", "--out", out, "--quiet", "--csv"}, more...)
	}
	whole := filepath.Join(t.TempDir(), "whole")
	start := time.Now()
	if out, err := exec.Command(program, args(whole)...).CombinedOutput(); err != nil {
		t.Fatalf("%v\n%s", err, out)
	}
	took := time.Since(start)
	want := contents(t, whole)
	rng := rand.New(rand.NewSource(time.Now().UnixNano()))
	dir := filepath.Join(t.TempDir(), "killed")
	kills, ended := 0, 0
	for kills < 50 && ended < 60 {
		c := exec.Command(program, args(dir)...)
		if err := c.Start(); err != nil {
			t.Fatal(err)
		}
		// Mostly soon, sometimes as late as the end.
		wait := time.Duration(float64(took) * 0.12 * rng.Float64())
		if kills%5 == 4 {
			wait = time.Duration(float64(took) * rng.Float64())
		}
		gone := make(chan error, 1)
		go func() { gone <- c.Wait() }()
		select {
		case err := <-gone:
			if err != nil {
				t.Fatalf("after %d kills: %v", kills, err)
			}
			ended++
			sameFolder(t, fmt.Sprintf("after %d kills", kills), contents(t, dir), want)
			os.RemoveAll(dir) // and again from the start
		case <-time.After(wait):
			c.Process.Kill()
			<-gone
			kills++
		}
	}
	if out, err := exec.Command(program, args(dir)...).CombinedOutput(); err != nil {
		t.Fatalf("%v\n%s", err, out)
	}
	sameFolder(t, "in the end", contents(t, dir), want)
	t.Logf("%d kills, %d ensembles that came to their end before the kill", kills, ended)
	if kills < 50 {
		t.Errorf("only %d kills", kills)
	}
}

// Shards on the command line join to what one run gives.
func TestEnsembleShards(t *testing.T) {
	dir := t.TempDir()
	scenario := filepath.Join(dir, "cheap.toml")
	if err := os.WriteFile(scenario, []byte(cheap), 0o644); err != nil {
		t.Fatal(err)
	}
	base := []string{"ensemble", scenario, "--members", "90", "--seed", "5"}
	call := func(status int, args ...string) (string, string) {
		t.Helper()
		var out, msg bytes.Buffer
		if got := cycle(nil, &out, &msg, args); got != status {
			t.Fatalf("%v: status %d, want %d\n%s%s", args, got, status, out.String(), msg.String())
		}
		return out.String(), msg.String()
	}
	whole, parts := filepath.Join(dir, "whole"), filepath.Join(dir, "parts")
	text, _ := call(exitOK, append(base, "--out", whole)...)
	for _, w := range []string{"Cheap", "runaway greenhouse", "limit cycles", "more"} {
		if !strings.Contains(text, w) {
			t.Errorf("the terminal lacks %q:\n%s", w, text)
		}
	}
	call(exitOK, append(base, "--out", parts, "--shard", "2/3")...)
	_, msg := call(exitUsage, "gather", parts)
	if !strings.Contains(msg, "2 of 3 shards are not finished") || !strings.Contains(msg, "no shard 1/3, 3/3") {
		t.Error(msg)
	}
	_, msg = call(exitUsage, append(base, "--out", parts, "--shard", "1/4")...)
	if !strings.Contains(msg, "number of shards 3 instead of 4") {
		t.Error(msg)
	}
	call(exitOK, append(base, "--out", parts, "--shard", "1/3")...)
	call(exitOK, append(base, "--out", parts, "--shard", "3/3")...)
	call(exitOK, "gather", parts)
	a, b := contents(t, whole), contents(t, parts)
	for _, name := range []string{"members.parquet", "summary.json", "scenario.toml"} {
		if !bytes.Equal(a[name], b[name]) {
			t.Errorf("%s differs", name)
		}
	}
	var s struct {
		Format  int
		Members int
		Shares  []struct {
			Kind  string
			Count int
		}
	}
	if err := json.Unmarshal(a["summary.json"], &s); err != nil || s.Format != 1 || s.Members != 90 || len(s.Shares) < 2 {
		t.Errorf("%+v, %v", s, err)
	}
	for _, c := range []struct{ arg, val, want string }{
		{"--shard", "0/3", `--shard: found "0/3"`}, {"--shard", "x", `allowed is i/n`}, {"--members", "0", "--members: found 0"},
		{"--design", "sobl", `unknown design "sobl"`}, {"--workers", "0", "--workers: found 0"}, {"--member", "90", "--member: found 90"}, {"--progress", "pain", `--progress: found "pain"`},
	} {
		_, msg := call(exitUsage, append(append([]string{}, base...), c.arg, c.val, "--out", filepath.Join(dir, "none"))...)
		if !strings.Contains(msg, c.want) {
			t.Errorf("%s %s: %s", c.arg, c.val, msg)
		}
	}
	if _, err := os.Stat(filepath.Join(dir, "none")); err == nil {
		t.Error("a folder was made in spite of an error")
	}
	_, msg = call(exitUsage, "ensemble", "earth", "--out", filepath.Join(dir, "none"))
	if !strings.Contains(msg, "nothing in this scenario is uncertain") {
		t.Error(msg)
	}
	// One member alone.
	text, _ = call(exitOK, append(base, "--member", "4", "--out", filepath.Join(dir, "four"))...)
	if !strings.Contains(text, "Cheap, member 4 of seed 5") || !strings.Contains(text, "history.csv") {
		t.Error(text)
	}
	var alone, row struct {
		Outcome struct {
			Kind string
			Time float64 `json:"time_gyr"`
		}
	}
	if err := json.Unmarshal(contents(t, filepath.Join(dir, "four"))["summary.json"], &alone); err != nil {
		t.Fatal(err)
	}
	call(exitOK, append(base, "--out", filepath.Join(dir, "csv"), "--csv")...)
	lines := strings.Split(string(contents(t, filepath.Join(dir, "csv"))["members.csv"]), "\n")
	cells := map[string]string{}
	for i, name := range strings.Split(lines[0], ",") {
		cells[name] = strings.Split(lines[5], ",")[i]
	}
	row.Outcome.Kind = cells["outcome"]
	fmt.Sscan(cells["outcome_age_Gyr"], &row.Outcome.Time)
	if row.Outcome.Kind != alone.Outcome.Kind || fmt.Sprintf("%.9f", row.Outcome.Time) != fmt.Sprintf("%.9f", alone.Outcome.Time) {
		t.Errorf("member 4 alone %+v, in the table %+v", alone, row)
	}
}

// The scripts of a job array.
func TestEnsembleJobs(t *testing.T) {
	dir := t.TempDir()
	scenario := filepath.Join(dir, "cheap.toml")
	if err := os.WriteFile(scenario, []byte(cheap), 0o644); err != nil {
		t.Fatal(err)
	}
	out := filepath.Join(dir, "it's jobs")
	var text, msg bytes.Buffer
	if got := cycle(nil, &text, &msg, []string{"ensemble", scenario, "--members", "60", "--slurm", "4", "--out", out}); got != exitOK {
		t.Fatal(msg.String())
	}
	f := contents(t, out)
	for name, want := range map[string]string{"job.sh": `--shard "$SLURM_ARRAY_TASK_ID/4"`, "gather.sh": " gather .", "submit.sh": "--array=1-4"} {
		if !strings.Contains(string(f[name]), want) {
			t.Errorf("%s lacks %q:\n%s", name, want, f[name])
		}
		if o, err := exec.Command("sh", "-n", filepath.Join(out, name)).CombinedOutput(); err != nil {
			t.Errorf("%s: %v %s", name, err, o)
		}
	}
	t.Setenv("PATH", dir)
	if got := cycle(nil, &text, &msg, []string{"ensemble", scenario, "--members", "60", "--slurm", "4", "--submit", "--out", out}); got != exitFailed || !strings.Contains(msg.String(), "sbatch") {
		t.Errorf("without sbatch: %d %s", got, msg.String())
	}
}
