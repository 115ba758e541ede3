package scenarios

import (
	"os"
	"path/filepath"
	"strings"
	"testing"
	"time"
)

// Whatever a stranger writes: no panic, no hang, and what loads is written and
// loads again to the same planet.
func FuzzLoad(f *testing.F) {
	files, _ := filepath.Glob("builtin/*.toml")
	for _, name := range files {
		data, err := os.ReadFile(name)
		if err != nil {
			f.Fatal(err)
		}
		f.Add(string(data), "weathering.land.efold=20 K")
	}
	r, err := Load("earth", []string{"sources.law=table", "sources.table_csv=" + csvText, "pulse.2.carbon=1 Emol"})
	if err != nil {
		f.Fatal(err)
	}
	f.Add(r.TOML(), "")
	f.Add(Template("x"), "solver.guard=false")
	f.Add("title = \"\\u202e<script>\"\nnotes = '''\n\"\\\n'''\n[orbit]\neccentricity = 0x1\n[pulse.3]\nsunlight = -1e-3\n", "orbit.distance=\"1 au\"")
	f.Add(uncertainText, "planet.mass=1 M_E")
	f.Add("weathering = {land = {law = \"berner1994\"}, limiter = \"1 mbar\"}\nbase = \"earth\"", "title='a'")
	f.Fuzz(func(t *testing.T, text, set string) {
		if strings.Contains(text, "_file") || strings.Contains(set, "_file") {
			t.Skip("no reading of the disk in a fuzz test")
		}
		var sets []string
		if set != "" {
			sets = []string{set}
		}
		start := time.Now()
		r, err := Parse("fuzz.toml", []byte(text), sets)
		if d := time.Since(start); d > time.Minute { // a hang
			t.Fatalf("takes %v", d)
		}
		if err != nil {
			if msg := err.Error(); msg == "" || len(msg) > 1<<16 {
				t.Fatalf("message of %d bytes", len(msg))
			}
			return
		}
		back, err := Parse("scenario.toml", []byte(r.TOML()), nil)
		if err != nil {
			t.Fatalf("the resolved scenario does not load: %v", err)
		}
		if back.Hash() != r.Hash() || back.EnsembleHash() != r.EnsembleHash() || back.Title != r.Title || back.Name != r.Name || back.Notes != r.Notes {
			t.Fatalf("became another scenario:\n%s\n%s", r.TOML(), back.TOML())
		}
		for _, in := range r.Inputs() {
			if strings.ContainsAny(in.Value, "\n\x1b") {
				t.Fatalf("%s has a value of several lines: %q", in.Key, in.Value)
			}
		}
	})
}
