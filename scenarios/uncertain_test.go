package scenarios

import (
	"math"
	"strings"
	"testing"
)

const uncertainText = `base = "earth"
[uncertain]
"weathering.land.efold" = { distribution = "uniform", low = "10 K", high = "40 K" }
"weathering.land.law" = { choices = ["walker1981", "krissansentotton2017", "graham2020"], weights = [2, 1, 0.1] }
"sources.outgassing" = "published"
"reference.temperature" = { distribution = "normal", mean = "15 °C", sd = "2 °C", at_least = "283 K", at_most = "293 K" }
"weathering.seafloor.under_ice" = { distribution = "triangular", low = 0, mode = 0.5, high = 1 }
"weathering.land.supply_limit" = { distribution = "log-uniform", low = "8 Tmol/yr", high = "1 Emol/yr" }
"time.from" = { choices = ["warm", "cold"] }
"solver.guard" = { choices = [true, false] }
correlations = [
  { between = ["weathering.land.efold", "sources.outgassing"], rank = 0.5 }, # why not
]
ages = ["0.57 Gyr", "2.07 Gyr"]

[uncertain."planet.mass"]
distribution = "log-normal"
median = "1 M_E"
sigma = 0.3

[uncertain.orbit]
distance = { distribution = "uniform", low = "0.95 au", high = "1.05 au" }
`

func TestUncertain(t *testing.T) {
	r, err := Parse("x.toml", []byte(uncertainText), nil)
	if err != nil {
		t.Fatal(err)
	}
	u := r.Uncertain
	if u == nil || len(u.Priors) != 10 || len(u.Correlations) != 1 || len(u.Ages) != 2 {
		t.Fatalf("%+v", u)
	}
	if p := u.Prior("reference.temperature"); p.Mean != 288.15 || math.Abs(p.SD-2) > 1e-12 || p.AtLeast != 283 || p.AtMost != 293 {
		t.Errorf("normal: %+v", p)
	}
	if p := u.Prior("orbit.distance"); p == nil || p.Shape != Uniform {
		t.Errorf("a key below a header: %+v", p)
	}
	if got, want := r.Words(u.Prior("weathering.land.efold")), "uniform, 10 to 40 K"; got != want {
		t.Errorf("%q, want %q", got, want)
	}
	if got, want := r.Words(u.Prior("sources.outgassing")), "uniform over the published range, 6 to 10 Tmol/yr"; got != want {
		t.Errorf("%q, want %q", got, want)
	}
	back, err := Parse("y.toml", []byte(r.TOML()), nil)
	if err != nil {
		t.Fatal(err)
	}
	if back.EnsembleHash() != r.EnsembleHash() || back.uncertainTOML() != r.uncertainTOML() {
		t.Errorf("the section does not read back:\n%s\n%s", r.uncertainTOML(), back.uncertainTOML())
	}
	plain, err := Load("earth", nil)
	if err != nil {
		t.Fatal(err)
	}
	if plain.EnsembleHash() == r.EnsembleHash() || plain.Hash() != r.Hash() {
		t.Error("the section is part of the ensemble and of nothing else")
	}
	_, err = Parse("x.toml", []byte(strings.Replace(uncertainText, "correlations", "#", 1)), []string{"planet.mass=2 M_E"})
	if err == nil {
		t.Error("the list without its key was read")
	}
	set, err := Parse("x.toml", []byte(uncertainText), []string{"planet.mass=2 M_E"})
	if err != nil {
		t.Fatal(err)
	}
	if set.Uncertain.Prior("planet.mass") != nil || len(set.Uncertain.Priors) != 9 {
		t.Error("a key given by --set is still uncertain")
	}
}

// What is wrong is said with file, line, key, what was found and what is allowed.
func TestUncertainErrors(t *testing.T) {
	for _, c := range []struct{ line, want string }{
		{`"weathering.land.efolt" = "published"`, `x.toml:2: uncertain."weathering.land.efolt": unknown key`},
		{`"weathering.land.efold" = { distribution = "unifrom", low = "1 K", high = "2 K" }`, `found "unifrom"; allowed is "uniform"`},
		{`"weathering.land.efold" = { distribution = "uniform", low = 10, high = "40 K" }`, `uncertain."weathering.land.efold".low: found the number 10, which has no unit; allowed is a temperature difference with its unit`},
		{`"weathering.land.efold" = { distribution = "uniform", low = "40 K", high = "10 K" }`, `found 10 K; allowed is more than low, 40 K`},
		{`"weathering.land.efold" = { distribution = "uniform", low = "1 K", high = "10 K" }`, `found 1 K, which is out of range; allowed is`},
		{`"weathering.land.efold" = { distribution = "uniform", low = "10 K" }`, `needs low, high; found no high`},
		{`"weathering.land.efold" = { distribution = "uniform", low = "10 K", high = "20 K", sd = "1 K" }`, `has no such word; allowed is "distribution", "low" or "high"`},
		{`"weathering.land.efold" = { distribution = "uniform", low = "10 K", hihg = "20 K" }`, `unknown word in a distribution`},
		{`"weathering.land.efold" = { choices = ["a", "b"] }`, `this key is a number; found choices`},
		{`"weathering.land.efold" = "publishde"`, `found "publishde"; allowed is "published"`},
		{`"weathering.land.efold" = nan`, `allowed is "published"`},
		{`"weathering.land.efold" = { distribution = "normal", mean = "10 K", sd = "0 K" }`, `.sd: found "0 K"; allowed is more than zero`},
		{`"weathering.land.efold" = { distribution = "log-normal", median = "10 K", sigma = nan }`, `no finite number`},
		{`"weathering.land.efold" = { distribution = "normal", mean = "10 K", sd = "3 K", at_least = "20 K" }`, `the middle of the distribution lies outside its bounds`},
		{`"weathering.land.efold" = { distribution = "log-uniform", low = "-1 K", high = "20 K" }`, `found -1 K; allowed is more than zero`},
		{`"weathering.land.efold" = { distribution = "triangular", low = "10 K", mode = "9 K", high = "20 K" }`, `.mode: found 9 K; allowed is from low to high`},
		{`"weathering.land.law" = { choices = ["walker1981", "walker1982"] }`, `found "walker1982"`},
		{`"weathering.land.law" = { choices = ["walker1981"] }`, `found 1 of them; allowed is two or more`},
		{`"weathering.land.law" = { choices = ["walker1981", "walker1981"] }`, `"walker1981" twice`},
		{`"weathering.land.law" = { choices = ["walker1981", "graham2020"], weights = [1] }`, `found 1 weights; allowed is a list of 2 numbers`},
		{`"weathering.land.law" = { choices = ["walker1981", "graham2020"], weights = [1, -1] }`, `allowed is finite numbers above zero`},
		{`"weathering.land.law" = "published"`, `this key is a choice`},
		{`"star.law" = { choices = ["gough1981", "table"] }`, `a law that needs a table`},
		{`"orbit.distance" = "published"`, `no range was published for this key`},
		{`"title" = "published"`, `this key cannot be uncertain`},
		{`correlations = [{ between = ["a", "b"], rank = 0.1 }]`, `found "a"; allowed is numbers that are uncertain`},
		{`correlations = [{ between = ["a"], rank = 0.1 }]`, `allowed is a list of`},
		{`correlations = 3`, `allowed is a list of`},
		{`ages = ["0.01 Gyr"]`, `uncertain.ages: found "0.01 Gyr"; allowed is a list`},
		{`"weathering.land.exponent_of_nothing".low = 3`, `unknown key`},
	} {
		_, err := Parse("x.toml", []byte("[uncertain]\n"+c.line+"\n"), nil)
		if err == nil || !strings.Contains(err.Error(), c.want) || !strings.HasPrefix(err.Error(), "x.toml:2: uncertain.") {
			t.Errorf("%s\n got %v\nwant %s", c.line, err, c.want)
		}
	}
	if _, err := Parse("x.toml", []byte("uncertain = 3\n"), nil); err == nil || !strings.Contains(err.Error(), "x.toml:1: uncertain: found the number 3") {
		t.Error(err)
	}
	const three = `[uncertain]
"weathering.land.efold" = "published"
"sources.ridge" = "published"
"sources.arc" = "published"
correlations = [{ between = ["sources.ridge", "sources.arc"], rank = 0.9 }, { between = ["weathering.land.efold", "sources.arc"], rank = 0.9 }, { between = ["weathering.land.efold", "sources.ridge"], rank = -0.9 }]
[weathering.land]
law = "krissansentotton2017"
`
	if _, err := Parse("x.toml", []byte(three), nil); err == nil || !strings.Contains(err.Error(), "x.toml:5: uncertain.correlations: no joint distribution") {
		t.Error(err)
	}
}

// The example at the end of a new scenario holds once its "#" are taken away, and
// every word a distribution may have is explained.
func TestUncertainExplained(t *testing.T) {
	text := Template("mine")
	_, example, ok := strings.Cut(text, "# [uncertain]\n")
	if !ok {
		t.Fatal("a new scenario shows no distributions")
	}
	r, err := Parse("mine.toml", []byte(text+"\n[uncertain]\n"+strings.ReplaceAll(example, "# ", "")), nil)
	if err != nil {
		t.Fatal(err)
	}
	if u := r.Uncertain; u == nil || len(u.Priors) != 4 || len(u.Correlations) != 1 || len(u.Ages) != 1 {
		t.Errorf("the example gives %+v", r.Uncertain)
	}
	keys, err := Keys("uncertain")
	if err != nil {
		t.Fatal(err)
	}
	told := map[string]bool{}
	for _, k := range keys {
		told[k.Name] = true
		if k.Doc == "" || k.Allowed == "" || k.Default == "" || k.Source == "" || k.Section != "uncertain" {
			t.Errorf("not explained: %+v", k)
		}
	}
	for _, w := range specWords {
		if !told[`"KEY".`+w] {
			t.Errorf("the word %s is not explained", w)
		}
	}
	for _, s := range shapes {
		if s.name != Published && !strings.Contains(keys[1].Allowed, s.name) {
			t.Errorf("the distribution %s is not named", s.name)
		}
	}
}
