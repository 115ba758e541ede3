package main

import (
	"bytes"
	"encoding/json"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"testing"
	"time"
)

// folder lists a folder of results.
func folder(t *testing.T, dir string) string {
	t.Helper()
	entries, err := os.ReadDir(dir)
	if err != nil {
		t.Fatal(err)
	}
	var out []string
	for _, e := range entries {
		out = append(out, e.Name())
	}
	return strings.Join(out, " ")
}

func TestExplainCommand(t *testing.T) {
	t.Chdir(t.TempDir())
	status, stdout, stderr := call("explain", "ulmere")
	if status != exitOK || stderr != "" {
		t.Fatalf("status %d, %s", status, stderr)
	}
	if got, want := folder(t, "ulmere-explain"), ".cycle combinations.csv distances.csv elasticities.csv explanation.json laws.csv report.html rescues.csv scenario.toml"; got != want {
		t.Errorf("the folder holds %s, want %s", got, want)
	}
	for _, want := range []string{"Cause", "Margin", "Rescue", "Elasticity", "Other laws", "ulmere-explain: "} {
		if !strings.Contains(stdout, want) {
			t.Errorf("the answer does not speak of %q:\n%s", want, stdout)
		}
	}
	var v struct {
		Outcome struct{ Kind string } `json:"outcome"`
		Laws    []any                 `json:"laws"`
	}
	data, err := os.ReadFile("ulmere-explain/explanation.json")
	if err != nil || json.Unmarshal(data, &v) != nil || v.Outcome.Kind == "" || len(v.Laws) < 100 {
		t.Errorf("explanation.json: %v, %q, %d laws", err, v.Outcome.Kind, len(v.Laws))
	}
	// The resolved scenario explains itself the same way.
	if status, _, stderr := call("explain", "ulmere-explain/scenario.toml", "--out", "again", "--quiet"); status != exitOK || stderr != "" {
		t.Fatalf("again: status %d, %s", status, stderr)
	}
	again, err := os.ReadFile("again/explanation.json")
	if err != nil || !bytes.Equal(data, again) {
		t.Error("the resolved scenario gives another explanation")
	}
	for _, c := range []struct {
		args []string
		want string
	}{
		{[]string{"explain", "ulmere", "--postpone", "0.5"}, "no unit"},
		{[]string{"explain", "ulmere", "--postpone", "-1 Gyr"}, "above zero"},
		{[]string{"explain", "ulmere", "--postpone", "3 K"}, "no unit of time"},
		{[]string{"explain", "nowhere"}, "nowhere"},
	} {
		if status, _, stderr := call(c.args...); status != exitUsage || !strings.Contains(stderr, c.want) {
			t.Errorf("%v: status %d, %q; want %d and %q", c.args, status, stderr, exitUsage, c.want)
		}
	}
}

func TestCompareCommand(t *testing.T) {
	t.Chdir(t.TempDir())
	status, stdout, stderr := call("compare", "calessa", "calessa,weathering.land.law=menou2015", "--out", "c")
	if status != exitOK || stderr != "" {
		t.Fatalf("status %d, %s", status, stderr)
	}
	if got, want := folder(t, "c"), ".cycle comparison.json histories.csv histories.parquet inputs.csv report.html results.csv"; got != want {
		t.Errorf("the folder holds %s, want %s", got, want)
	}
	if !strings.Contains(stdout, "menou2015") || strings.Contains(stdout, "orbit.distance") {
		t.Errorf("only the law and its parameters differ:\n%s", stdout)
	}
	for _, c := range []struct {
		args []string
		want string
	}{
		{[]string{"compare", "calessa"}, "two scenarios"},
		{[]string{"compare", "calessa", "calessa,orbit.size=1"}, "orbit.size"},
	} {
		if status, _, stderr := call(c.args...); status != exitUsage || !strings.Contains(stderr, c.want) {
			t.Errorf("%v: status %d, %q; want %d and %q", c.args, status, stderr, exitUsage, c.want)
		}
	}
}

func TestMapCommand(t *testing.T) {
	t.Chdir(t.TempDir())
	status, stdout, stderr := call("map", "calessa", "--x", "orbit.distance=0.85:1.2 au", "--y", "sources.scale=0.2:5:log", "--cells", "3", "--depth", "1")
	if status != exitOK || stderr != "" {
		t.Fatalf("status %d, %s", status, stderr)
	}
	if got, want := folder(t, "calessa-map"), ".cycle lines.csv map.json points.csv points.parquet report.html scenario.toml"; got != want {
		t.Errorf("the folder holds %s, want %s", got, want)
	}
	if got := folder(t, "."); got != "calessa-map" {
		t.Errorf("left behind: %s", got)
	}
	if !strings.Contains(stdout, "orbit.distance, au") || !strings.Contains(stdout, "of the map") {
		t.Errorf("the map is not drawn:\n%s", stdout)
	}
	for _, c := range []struct {
		args []string
		want string
	}{
		{[]string{"map", "calessa", "--x", "orbit.distance"}, "KEY="},
		{[]string{"map", "calessa", "--x", "orbit.distance=1 au"}, "LO:HI"},
		{[]string{"map", "calessa", "--x", "orbit.distance=1:2"}, "no unit"},
		{[]string{"map", "calessa", "--x", "orbit.distance=2 au:1 au"}, "lower"},
		{[]string{"map", "calessa", "--x", "orbit.distance=1 au:99 au"}, "allowed is"},
		{[]string{"map", "calessa", "--x", "star.law=1:2"}, "no numeric key"},
		{[]string{"map", "calessa", "--x", "orbit.eccentricity=0:0.5:log"}, "positive"},
		{[]string{"map", "calessa", "--cells", "1"}, "--cells"},
		{[]string{"map", "calessa", "--x", "sources.scale=1:2", "--y", "sources.scale=1:2"}, "same key"},
	} {
		if status, _, stderr := call(c.args...); status != exitUsage || !strings.Contains(stderr, c.want) {
			t.Errorf("%v: status %d, %q; want %d and %q", c.args, status, stderr, exitUsage, c.want)
		}
	}
	if got := folder(t, "."); got != "calessa-map" {
		t.Errorf("mistakes left behind: %s", got)
	}
}

// TestMapSurvivesBeingKilled: a map that is killed without warning goes on from
// its points and gives the same bytes as one that was left alone.
func TestMapSurvivesBeingKilled(t *testing.T) {
	t.Chdir(t.TempDir())
	self, err := os.Executable()
	if err != nil {
		t.Fatal(err)
	}
	args := []string{"map", "calessa", "--x", "orbit.distance=0.85 au:1.3 au", "--y", "sources.scale=0.2:5:log", "--cells", "6", "--depth", "2", "--quiet", "--out", "m"}
	cmd := exec.Command(self, args...)
	cmd.Env = append(os.Environ(), "CYCLE_AS_COMMAND=1")
	if err := cmd.Start(); err != nil {
		t.Fatal(err)
	}
	journal := func() (string, int64) {
		names, _ := filepath.Glob(".m.*.points")
		if len(names) != 1 {
			return "", 0
		}
		info, err := os.Stat(names[0])
		if err != nil {
			return "", 0
		}
		return names[0], info.Size()
	}
	for deadline := time.Now().Add(time.Minute); ; time.Sleep(2 * time.Millisecond) {
		if _, n := journal(); n > 600 {
			break
		}
		if time.Now().After(deadline) {
			cmd.Process.Kill()
			t.Fatal("no point was kept within a minute")
		}
	}
	cmd.Process.Kill()
	cmd.Wait()
	name, size := journal()
	if size == 0 {
		t.Fatal("the map was finished before it could be killed: it tests nothing")
	}
	// And the last line is torn.
	if err := os.Truncate(name, size-7); err != nil {
		t.Fatal(err)
	}
	if status, _, stderr := call(args...); status != exitOK || stderr != "" {
		t.Fatalf("going on: status %d, %s", status, stderr)
	}
	args[len(args)-1] = "alone"
	if status, _, stderr := call(args...); status != exitOK || stderr != "" {
		t.Fatalf("alone: status %d, %s", status, stderr)
	}
	for _, f := range []string{"map.json", "points.csv", "points.parquet", "lines.csv", "report.html"} {
		a, err := os.ReadFile("m/" + f)
		if err != nil {
			t.Fatal(err)
		}
		b, err := os.ReadFile("alone/" + f)
		if err != nil || !bytes.Equal(a, b) {
			t.Errorf("%s differs (%v)", f, err)
		}
	}
	if got := folder(t, "."); got != "alone m" {
		t.Errorf("left behind: %s", got)
	}
}
