package scenarios

import (
	"errors"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"time"

	"github.com/google/go-cmp/cmp"
	"pgregory.net/rapid"

	"cycle/carbon"
	"cycle/carbon/units"
)

// write puts a file into a folder of its own and returns its path.
func write(t *testing.T, name, content string) string {
	t.Helper()
	path := filepath.Join(t.TempDir(), name)
	if err := os.WriteFile(path, []byte(content), 0o644); err != nil {
		t.Fatal(err)
	}
	return path
}

func load(t *testing.T, ref string, sets ...string) *Resolved {
	t.Helper()
	r, err := Load(ref, sets)
	if err != nil {
		t.Fatalf("Load(%q, %q): %v", ref, sets, err)
	}
	return r
}

// bits is the content of a setup: every key with its value to the last bit.
func bits(s *carbon.Setup) map[string]string {
	out := map[string]string{}
	for _, sec := range s.Sections() {
		out[sec.Name+".law"] = sec.Law
		for _, f := range sec.Fields {
			out[dotted(sec.Name, f.Key)] = fmt.Sprintf("%x", math.Float64bits(*f.Value))
		}
		for _, o := range sec.Options {
			out[dotted(sec.Name, o.Key)] = *o.Value
		}
		for _, f := range sec.Flags {
			out[dotted(sec.Name, f.Key)] = fmt.Sprint(*f.Value)
		}
		if sec.Table != nil {
			out[sec.Name+".table"] = *sec.Table.Text
		}
	}
	return out
}

func field(t *testing.T, s *carbon.Setup, key string) *units.Field {
	t.Helper()
	for _, sec := range s.Sections() {
		for i := range sec.Fields {
			if dotted(sec.Name, sec.Fields[i].Key) == key {
				return &sec.Fields[i]
			}
		}
	}
	t.Fatalf("there is no field %s", key)
	return nil
}

// Each layer speaks over the one before, and Origin says which it was.
func TestPrecedence(t *testing.T) {
	file := write(t, "p.toml", `base = "earth"
[weathering.land]
efold = "20 K"
exponent = 0.4
`)
	r := load(t, file, "weathering.land.exponent=0.5")
	for key, want := range map[string]struct {
		value  float64
		origin string
	}{
		"orbit.distance":           {units.AU, Default},
		"weathering.land.efold":    {20, File},
		"weathering.land.exponent": {0.5, Set},
	} {
		if got := *field(t, r.Setup, key).Value; got != want.value {
			t.Errorf("%s = %v, want %v", key, got, want.value)
		}
		if got := r.Origin(key); got != want.origin {
			t.Errorf("origin of %s is %q, want %q", key, got, want.origin)
		}
	}
	if r.Setup.Solve != "total" || r.Origin("carbon.solve") != BuiltIn {
		t.Errorf("carbon.solve = %q by %q, want total by the built-in base", r.Setup.Solve, r.Origin("carbon.solve"))
	}
	if r.Name != "p" || r.Title != "p" {
		t.Errorf("name %q, title %q; want those of the file, not of its base", r.Name, r.Title)
	}
}

// The order of lines does not matter, not even for a law and its keys.
func TestOrderOfLines(t *testing.T) {
	want := bits(load(t, write(t, "a.toml", "[weathering.land]\nlaw = \"berner1994\"\nactivation = \"0.05 1/K\"\n")).Setup)
	for _, text := range []string{
		"[weathering.land]\nactivation = \"0.05 1/K\"\nlaw = \"berner1994\"\n",
		"weathering.land.activation = \"0.05 1/K\"\nweathering.land.law = \"berner1994\"\n",
		"weathering = {land = {activation = \"0.05 1/K\", law = \"berner1994\"}}\n",
		"[weathering]\nland.activation = \"0.05 1/K\"\n[star]\n[weathering.land]\nlaw = \"berner1994\"\n",
	} {
		r, err := Parse("b.toml", []byte(text), nil)
		if strings.Contains(text, "[star]") { // TOML forbids this one
			if err == nil {
				t.Errorf("%q loads", text)
			}
			continue
		}
		if err != nil {
			t.Errorf("%q: %v", text, err)
			continue
		}
		if d := cmp.Diff(want, bits(r.Setup)); d != "" {
			t.Errorf("%q: %s", text, d)
		}
	}
}

// A law chosen by a later layer brings its own parameters; those given to the
// law before it are gone, and so is the memory of who gave them.
func TestLawChangedByLaterLayer(t *testing.T) {
	file := write(t, "a.toml", "[weathering.land]\nexponent = 0.9\nunder_ice = 0.5\n")
	r := load(t, file, "weathering.land.law=abbot2012")
	fresh := load(t, write(t, "b.toml", "[weathering.land]\nlaw = \"abbot2012\"\nunder_ice = 0.5\n"))
	if d := cmp.Diff(bits(fresh.Setup), bits(r.Setup)); d != "" {
		t.Error(d)
	}
	if got := r.Origin("weathering.land.exponent"); got != Default {
		t.Errorf("origin of the exponent is %q, want default", got)
	}
	if got := r.Origin("weathering.land.under_ice"); got != File {
		t.Errorf("origin of under_ice is %q, want file: it belongs to no law", got)
	}
}

func TestQuantities(t *testing.T) {
	for _, c := range []struct {
		text string
		key  string
		want float64
	}{
		{`weathering.land.efold=20 K`, "weathering.land.efold", 20},
		{`weathering.land.efold="20 K"`, "weathering.land.efold", 20},
		{`weathering.land.efold='20 °C'`, "weathering.land.efold", 20},
		{`reference.temperature = 15 °C`, "reference.temperature", 288.15},
		{`reference.co2=0.3 mbar`, "reference.co2", 3e-4},
		{`orbit.distance=1e8 km`, "orbit.distance", 1e11},
		{`orbit.eccentricity=0`, "orbit.eccentricity", 0},
		{`orbit.eccentricity=-0.0`, "orbit.eccentricity", 0},
		{`solver.max_freezes=1_000`, "solver.max_freezes", 1000},
		{`solver.max_freezes=0x10`, "solver.max_freezes", 16},
		{`pulse.2.carbon=-3 Emol`, "pulse.2.carbon", -3e18},
	} {
		r, err := Load("earth", []string{c.text})
		if err != nil {
			t.Errorf("%s: %v", c.text, err)
			continue
		}
		got := *field(t, r.Setup, c.key).Value
		if math.Abs(got-c.want) > 1e-15*math.Abs(c.want) || math.Signbit(got) != math.Signbit(c.want) {
			t.Errorf("%s: %v, want %v", c.text, got, c.want)
		}
	}
}

const csvText = "age_gyr,outgassing_tmol_yr\n# \"comment\" \\ with\ttab\n0.1,30\n9,3\n"

// A table may stand in a file beside the scenario, or in the scenario itself.
func TestTable(t *testing.T) {
	dir := t.TempDir()
	for name, content := range map[string]string{
		"t.csv":  "\ufeff" + csvText,
		"a.toml": "[sources]\ntable_file = \"t.csv\"\nlaw = \"table\"\n",
		"b.toml": "[sources]\nlaw = \"table\"\ntable_csv = '''\n" + csvText + "'''\n",
	} {
		if err := os.WriteFile(filepath.Join(dir, name), []byte(content), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	a, b := load(t, filepath.Join(dir, "a.toml")), load(t, filepath.Join(dir, "b.toml"))
	if d := cmp.Diff(bits(a.Setup), bits(b.Setup)); d != "" {
		t.Error(d)
	}
	if a.Hash() != b.Hash() {
		t.Error("the two have different hashes")
	}
	if bits(a.Setup)["sources.table"] != csvText {
		t.Errorf("the table is %q", bits(a.Setup)["sources.table"])
	}
	roundTrip(t, a)
}

// roundTrip writes a scenario, loads it and expects the same to the last bit.
func roundTrip(t interface {
	Helper()
	Fatalf(string, ...any)
}, r *Resolved) {
	t.Helper()
	text := r.TOML()
	back, err := Parse("scenario.toml", []byte(text), nil)
	if err != nil {
		t.Fatalf("the resolved scenario does not load: %v\n%s", err, text)
	}
	if d := cmp.Diff(bits(r.Setup), bits(back.Setup)); d != "" {
		t.Fatalf("values differ after writing and loading:\n%s", d)
	}
	if r.Hash() != back.Hash() {
		t.Fatalf("hash %s became %s", r.Hash(), back.Hash())
	}
	if r.Title != back.Title || r.Name != back.Name || r.Notes != back.Notes || r.Setup.Title != back.Setup.Title {
		t.Fatalf("title %q, name %q, notes %q became %q, %q, %q", r.Title, r.Name, r.Notes, back.Title, back.Name, back.Notes)
	}
	again, err := Parse("scenario.toml", []byte(back.TOML()), nil)
	if err != nil || again.TOML() != back.TOML() {
		t.Fatalf("a second round gives another text (%v)", err)
	}
}

// Whatever a user sets, the resolved scenario repeats it to the last bit.
func TestRoundTrip(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		s := fullSetup()
		var sets []string
		for _, sec := range s.Sections() {
			if sec.Laws != nil && rapid.Bool().Draw(t, "choose") {
				law := rapid.SampledFrom(sec.Laws).Draw(t, sec.Name).Name
				if law == "table" { // needs a table, see TestTable
					continue
				}
				if err := s.Choose(sec.Name, law); err != nil {
					t.Fatal(err)
				}
				sets = append(sets, sec.Name+".law="+law)
			}
		}
		for _, sec := range s.Sections() {
			for i := range sec.Fields {
				f := &sec.Fields[i]
				if rapid.IntRange(0, 3).Draw(t, "set") > 0 {
					continue
				}
				v := rapid.Float64Range(f.Min, f.Max).Draw(t, f.Key)
				sets = append(sets, dotted(sec.Name, f.Key)+"="+f.Kind.Format(v, anyUnit(t, f)))
			}
			for _, o := range sec.Options {
				sets = append(sets, dotted(sec.Name, o.Key)+"="+rapid.SampledFrom(o.Allowed).Draw(t, o.Key))
			}
			for _, f := range sec.Flags {
				sets = append(sets, dotted(sec.Name, f.Key)+"="+boolText(rapid.Bool().Draw(t, f.Key)))
			}
		}
		title := rapid.StringMatching(`[^\pC"]{0,20}"?`).Draw(t, "title")
		notes := rapid.StringOf(rapid.RuneFrom([]rune("ab \n\t\"\\'#=[]é漢\u202e"))).Draw(t, "notes")
		r, err := Parse("p.toml", []byte("title = "+tomlString(title)+"\nnotes = "+tomlText(notes)+"\n"), sets)
		if err != nil {
			var ke *KeyError
			if errors.As(err, &ke) && ke.Found == "" { // two keys that do not fit together
				t.Skip(err)
			}
			t.Fatal(err)
		}
		if r.Notes != notes {
			t.Fatalf("notes %q became %q", notes, r.Notes)
		}
		roundTrip(t, r)
	})
}

func anyUnit(t *rapid.T, f *units.Field) string {
	if f.Kind == nil {
		return ""
	}
	return rapid.SampledFrom(f.Kind.Spellings()).Draw(t, "unit of "+f.Key)
}

// The hash follows the values and nothing else.
func TestHash(t *testing.T) {
	base := load(t, "earth").Hash()
	if len(base) != 16 {
		t.Errorf("hash %q", base)
	}
	same := load(t, write(t, "other.toml", "title = \"Other\"\nnotes = \"n\"\ncarbon.solve = \"total\"\norbit.distance = \"149597870700 m\"\n")).Hash()
	if same != base {
		t.Errorf("title, notes and spelling change the hash: %s, %s", base, same)
	}
	for _, set := range []string{"orbit.distance=1.0000000000000002 au", "weathering.land.law=berner1994", "solver.guard=false", "time.from=cold", "pulse.1.sunlight=0"} {
		if load(t, "earth", set).Hash() == base {
			t.Errorf("%s leaves the hash as it is", set)
		}
	}
}

// An input names a source for the value it has: the default's source only while
// the value is the default.
func TestInputs(t *testing.T) {
	r := load(t, "earth", "weathering.land.efold=50 K", "sources.arc=2.5 Tmol/yr")
	found := 0
	for _, in := range r.Inputs() {
		if in.Value == "" || in.Doc == "" || in.Origin == "" || in.Source == "" || in.Allowed == "" {
			t.Errorf("%s lacks something: %+v", in.Key, in)
		}
		switch in.Key {
		case "weathering.land.efold":
			found++
			if in.Value != "50 K" || in.Origin != Set || !in.Outside || !strings.HasPrefix(in.Source, "set by the user; default 13.7 K: Walker") {
				t.Errorf("%+v", in)
			}
		case "sources.arc":
			found++
			if in.Origin != Set || in.Outside || !strings.HasPrefix(in.Source, "Marty") {
				t.Errorf("%+v", in)
			}
		case "carbon.solve":
			found++
			if in.Origin != BuiltIn || !strings.HasPrefix(in.Source, "set by the built-in scenario; default nothing") {
				t.Errorf("%+v", in)
			}
		}
	}
	if found != 3 {
		t.Errorf("%d of 3 keys seen", found)
	}
}

// Every key of every law has what a listing shows, a default inside its range and
// a published range inside what is allowed.
func TestKeys(t *testing.T) {
	all, err := Keys("")
	if err != nil {
		t.Fatal(err)
	}
	seen := map[string]bool{}
	for _, k := range all {
		id := k.Dotted() + strings.Join(k.Laws, ",")
		if seen[id] {
			t.Errorf("%s stands twice", id)
		}
		seen[id] = true
		for what, s := range map[string]string{"kind": k.Kind, "default": k.Default, "allowed": k.Allowed, "doc": k.Doc, "source": k.Source} {
			if strings.TrimSpace(s) == "" {
				t.Errorf("%s %v has no %s", k.Dotted(), k.Laws, what)
			}
		}
	}
	for _, sec := range fullSetup().Sections() {
		laws := sec.Laws
		if laws == nil {
			laws = []carbon.Choice{{}}
		}
		for _, law := range laws {
			s := fullSetup()
			if law.Name != "" {
				if err := s.Choose(sec.Name, law.Name); err != nil {
					t.Fatal(err)
				}
			}
			for _, sec2 := range s.Sections() {
				if sec2.Name != sec.Name {
					continue
				}
				for i := range sec2.Fields {
					f := &sec2.Fields[i]
					if err := f.Check(*f.Value); err != nil || !(f.Min < f.Max) {
						t.Errorf("%s.%s under %q: %v; %v to %v", sec.Name, f.Key, law.Name, err, f.Min, f.Max)
					}
					if p := f.Published; p.Stated() && !(f.Min <= p.Lo && p.Lo <= p.Hi && p.Hi <= f.Max) {
						t.Errorf("%s.%s under %q: published %v is not inside %v to %v", sec.Name, f.Key, law.Name, p, f.Min, f.Max)
					}
				}
			}
		}
	}
	for section, want := range map[string]string{"weathering": "weathering.land.efold", "weathering.land": "weathering.land.efold", "orbit.distance": "orbit.distance", "": "title", "pulse.1": "pulse.1.carbon"} {
		list, err := Keys(section)
		ok := false
		for i := range list {
			ok = ok || list[i].Dotted() == want
		}
		if err != nil || !ok {
			t.Errorf("Keys(%q) lacks %s (%v)", section, want, err)
		}
	}
	var ke *KeyError
	if _, err := Keys("orbits"); !errors.As(err, &ke) || ke.Near != "orbit" {
		t.Errorf("Keys(orbits): %v", err)
	}
}

// The built-in scenarios load, say what they are and differ from each other.
func TestBuiltins(t *testing.T) {
	list := Builtins()
	if len(list) == 0 || list[0].Name != "earth" {
		t.Fatalf("%+v", list)
	}
	hashes := map[string]string{}
	for _, b := range list {
		r := load(t, b.Name)
		if r.Name != b.Name || r.Title != b.Title || len(b.Doc) < 40 {
			t.Errorf("%+v resolves to %q, %q", b, r.Name, r.Title)
		}
		if other := hashes[r.Hash()]; other != "" {
			t.Errorf("%s and %s are the same planet", b.Name, other)
		}
		hashes[r.Hash()] = b.Name
		roundTrip(t, r)
	}
}

// A new scenario holds the defaults, whatever of it is uncommented.
func TestTemplate(t *testing.T) {
	text := Template("myplanet")
	r := load(t, write(t, "myplanet.toml", text))
	if d := cmp.Diff(bits(carbon.NewSetup()), bits(r.Setup)); d != "" {
		t.Error(d)
	}
	for _, key := range append(append([]string(nil), mainKeys...), otherKeys...) {
		if known().byDotted[key] == nil {
			t.Errorf("there is no key %s", key)
		}
	}
	for _, sec := range carbon.NewSetup().Sections() {
		if !strings.Contains(text, "\n["+sec.Name+"]\n") {
			t.Errorf("section %s is missing", sec.Name)
		}
	}
	// With every commented key live it is still the same planet, pulse and
	// distributions aside.
	var live []string
	for _, line := range strings.Split(text, "\n") {
		bare := strings.TrimPrefix(line, "# ")
		if key, _, ok := strings.Cut(bare, " = "); ok && isBare(key) && key != "base" || strings.HasPrefix(bare, "[pulse") || strings.HasPrefix(bare, "[uncertain]") || strings.HasPrefix(bare, `"`) && strings.Contains(bare, `" = `) {
			line = bare
		}
		live = append(live, line)
	}
	r = load(t, write(t, "live.toml", strings.Join(live, "\n")))
	want := carbon.NewSetup()
	want.Grow("pulse.1")
	if d := cmp.Diff(bits(want), bits(r.Setup)); d != "" {
		t.Error(d)
	}
}

// What a user can do wrong, and what the message says about it. The file is
// named bad.toml; want is the beginning of the message after the folder.
func TestBadInput(t *testing.T) {
	for _, c := range []struct {
		name, content, want string
		near                string
	}{
		{"unknown key", "[orbit]\ndistanse = \"1 au\"\n", "bad.toml:2: orbit.distanse: unknown key; allowed is a key of [orbit]: distance, eccentricity", "orbit.distance"},
		{"unknown key above", "titel = \"x\"\n", "bad.toml:1: titel: unknown key", "title"},
		{"key in the wrong section", "\n\n[weathering]\nefold = \"20 K\"\n", "bad.toml:4: weathering.efold: unknown key; allowed is a key of [weathering]: limiter", "weathering.land.efold"},
		{"unknown section", "[obrit]\ndistance = 3\n", "bad.toml:1: obrit: unknown section; allowed is star, orbit", "orbit"},
		{"key as section", "[orbit.distance]\n", "bad.toml:1: orbit.distance: this is a key, not a section", ""},
		{"section as key", "orbit = 3\n", "bad.toml:1: orbit: this is a section, not a key", ""},
		{"list of tables", "[[orbit]]\ndistance = 3\n", "bad.toml:1: orbit: found a list of tables, [[orbit]]; allowed is a section, [orbit]", ""},
		{"number for quantity", "[orbit]\ndistance = 1\n", "bad.toml:2: orbit.distance: found the number 1; allowed is a length with its unit, 0.05 to 10 au, written distance = \"1 au\"", ""},
		{"text for number", "[orbit]\neccentricity = \"0.1\"\n", "bad.toml:2: orbit.eccentricity: found \"0.1\"; allowed is a number without unit and quotes, 0 to 0.8", ""},
		{"date for number", "[orbit]\neccentricity = 2001-01-01\n", "bad.toml:2: orbit.eccentricity: found a date 2001-01-01; allowed is a number", ""},
		{"list for text", "title = [1]\n", "bad.toml:1: title: found a list; allowed is a text in quotes", ""},
		{"table for number", "[orbit]\neccentricity = {a = 1}\n", "bad.toml:2: orbit.eccentricity: found a table; allowed is a number", ""},
		{"text for flag", "solver.guard = \"true\"\n", "bad.toml:1: solver.guard: found \"true\"; allowed is true or false", ""},
		{"flag for word", "time.from = true\n", "bad.toml:1: time.from: found the word true; allowed is \"warm\" or \"cold\"", ""},
		{"no unit", "[weathering.land]\nefold = \"13.7\"\n", "bad.toml:2: weathering.land.efold: found \"13.7\", which has no unit; allowed is a temperature difference with its unit, 2 to 200 K; units are K", ""},
		{"wrong unit", "[weathering.land]\nefold = \"13.7 yr\"\n", "bad.toml:2: weathering.land.efold: found \"13.7 yr\", \"yr\" is no unit of temperature difference", ""},
		{"no number", "orbit.distance = \"far au\"\n", "bad.toml:1: orbit.distance: found \"far au\", which does not start with a finite number", ""},
		{"out of range", "orbit.distance = \"50 au\"\n", "bad.toml:1: orbit.distance: found \"50 au\", which is out of range; allowed is 0.05 to 10 au", ""},
		{"out of range, other unit", "orbit.distance = \"1 km\"\n", "bad.toml:1: orbit.distance: found \"1 km\" = 6.68459e-9 au, which is out of range; allowed is 0.05 to 10 au", ""},
		{"NaN", "orbit.eccentricity = nan\n", "bad.toml:1: orbit.eccentricity: found the number nan, which is not finite; allowed is a finite number, 0 to 0.8", ""},
		{"infinity", "solver.tolerance = -inf\n", "bad.toml:1: solver.tolerance: found the number -inf, which is not finite", ""},
		{"too large for a number", "solver.tolerance = 1e999\n", "bad.toml:1: solver.tolerance: found the number 1e999, which is not finite", ""},
		{"integer too large", "solver.tolerance = 99999999999999999999\n", "bad.toml:1: solver.tolerance: found the number 99999999999999999999, which is out of range", ""},
		{"NaN as quantity", "orbit.distance = \"nan au\"\n", "bad.toml:1: orbit.distance: found \"nan au\", which does not start with a finite number", ""},
		{"infinite quantity", "orbit.distance = \"1e999 au\"\n", "bad.toml:1: orbit.distance: found \"1e999 au\", the number is too large", ""},
		{"duplicate key", "[orbit]\ndistance = \"1 au\"\ndistance = \"2 au\"\n", "bad.toml:3: orbit.distance: set twice, first in line 2", ""},
		{"duplicate dotted", "orbit.distance = \"1 au\"\n[orbit]\ndistance = \"1 au\"\n", "bad.toml:3: orbit.distance: set twice, first in line 1", ""},
		{"duplicate section", "[orbit]\n[planet]\n[orbit]\n", "bad.toml:3: orbit: the section [orbit] stands here a second time, first in line 1", ""},
		{"section after dotted keys", "orbit.distance = \"1 au\"\n[orbit]\neccentricity = 0\n", "bad.toml:2: orbit: table orbit already exists", ""},
		{"syntax", "title = \"x\"\n[orbit\n", "bad.toml:2: TOML syntax: ", ""},
		{"syntax, value", "title = \"x\"\norbit.eccentricity = = 1\n", "bad.toml:2: TOML syntax: unexpected character U+003D '=' at start of value (column 22)", ""},
		{"open text", "title = \"x\n", "bad.toml:1: TOML syntax: ", ""},
		{"binary", "\x7fELF\x02\x01\x01\x00\x00", "bad.toml:1: this is no text file; found a zero byte; allowed is TOML in UTF-8", ""},
		{"Latin-1", "title = \"a\"\nnotes = \"caf\xe9\"\n", "bad.toml:2: this is not UTF-8; found the byte 0xe9; allowed is TOML in UTF-8", ""},
		{"line of 3 MB", "title = \"" + strings.Repeat("x", 3<<20) + "\"\n", "bad.toml: the file is too large; found 3.00 MiB; allowed is at most 1 MiB", ""},
		{"title on two lines", "title = \"a\\nb\"\n", "bad.toml:1: title: found \"a\\nb\"; allowed is one line of text without control characters", ""},
		{"escape in the title", "title = \"\\u001b[2J\"\n", "bad.toml:1: title: found \"\\x1b[2J\"; allowed is one line", ""},
		{"name with a slash", "name = \"../x\"\n", "bad.toml:1: name: found \"../x\"; allowed is up to 64 letters", ""},
		{"unknown law", "weathering.land.law = \"walker81\"\n", "bad.toml:1: weathering.land.law: found \"walker81\"; allowed is \"walker1981\", ", "walker1981"},
		{"number as law", "weathering.land.law = 1\n", "bad.toml:1: weathering.land.law: found the number 1; allowed is \"walker1981\", ", ""},
		{"key of another law", "sources.table_csv = \"x\"\n", "bad.toml:1: sources.table_csv: the law \"recycling\" has no such key; allowed is under \"table\"", ""},
		{"key of other laws", "weathering.land.plants = 1\n", "bad.toml:1: weathering.land.plants: the law \"walker1981\" has no such key; allowed is under \"berner1994\"", ""},
		{"unknown base", "base = \"eart\"\n", "bad.toml:1: base: found \"eart\"; allowed is one of the built-in \"earth\"", "earth"},
		{"table law without table", "sources.law = \"table\"\n", "bad.toml:1: sources.law: the law \"table\" needs a table; allowed is sources.table_file = \"FILE.csv\"", ""},
		{"bad table", "[sources]\nlaw = \"table\"\ntable_csv = \"age_gyr,outgassing_tmol_yr\\n1,x\\n\"\n", "bad.toml:3: sources.table_csv: the table: line 2: found \"x\" in column", ""},
		{"table given twice", "[sources]\nlaw = \"table\"\ntable_csv = \"age_gyr,outgassing_tmol_yr\\n1,2\\n3,4\\n\"\ntable_file = \"x.csv\"\n", "bad.toml:4: sources.table_file: the table is given twice, the first time by sources.table_csv", ""},
		{"missing table", "[sources]\nlaw = \"table\"\ntable_file = \"none.csv\"\n", "bad.toml:3: sources.table_file: ", ""},
		{"a pulse too many", "[pulse.10]\nstart = \"1 Gyr\"\n", "bad.toml:1: pulse.10: unknown section", "pulse.1"},
		{"control character in a key", "\"a\\u001bb\" = 1\n", "bad.toml:1: \"a\\u001Bb\": unknown key", ""},
		{"end before start", "time.start = \"5 Gyr\"\ntime.end = \"4 Gyr\"\n", "bad.toml:2: time.end: ", ""},
	} {
		t.Run(c.name, func(t *testing.T) {
			path := write(t, "bad.toml", c.content)
			r, err := Load(path, nil)
			if err == nil {
				t.Fatalf("loads as %s", r.Hash())
			}
			got := strings.TrimPrefix(err.Error(), filepath.Dir(path)+"/")
			if !strings.HasPrefix(got, c.want) {
				t.Errorf("got  %s\nwant %s", got, c.want)
			}
			if strings.Contains(got, "\n") {
				t.Errorf("more than one problem:\n%s", got)
			}
			var ke *KeyError
			if !errors.As(err, &ke) {
				t.Fatalf("%T holds no *KeyError", err)
			}
			if ke.Near != c.near {
				t.Errorf("nearest is %q, want %q", ke.Near, c.near)
			}
		})
	}
}

// All problems of a file are told at once, in file order, up to ten.
func TestAllProblems(t *testing.T) {
	path := write(t, "bad.toml", `[orbit]
distanse = "1 au"
eccentricity = "0.1"
[weathering.land]
efold = "20"
law = "walker"
`)
	_, err := Load(path, []string{"planet.mass=1 K", "nonsense", "mass=3"})
	var es *Errors
	if !errors.As(err, &es) {
		t.Fatalf("%T %v", err, err)
	}
	var got []string
	for _, e := range es.List {
		got = append(got, fmt.Sprintf("%s:%d %s", filepath.Base(e.File), e.Line, e.Key))
	}
	want := []string{"bad.toml:2 orbit.distanse", "bad.toml:3 orbit.eccentricity", "bad.toml:5 weathering.land.efold", "bad.toml:6 weathering.land.law", "--set:0 ", "--set:0 mass", "--set:0 planet.mass"}
	if d := cmp.Diff(want, got); d != "" {
		t.Error(d)
	}
	path = write(t, "many.toml", strings.Repeat("[x]\n", 1000))
	_, err = Load(path, nil)
	if !errors.As(err, &es) || len(es.List) != maxErrors || !es.More || !strings.HasSuffix(err.Error(), "more problems may follow") {
		t.Errorf("%v", err)
	}
}

func TestSetErrors(t *testing.T) {
	for set, want := range map[string]string{
		"efold":                          `--set: found "efold"; allowed is KEY=VALUE`,
		"=3":                             `--set: found "=3"; allowed is KEY=VALUE`,
		"orbit.distance=1":               `--set: orbit.distance: found "1", which has no unit`,
		"orbit.distance=\"1 au":          `--set: orbit.distance: found "\"1 au"; allowed is a text with closed quotes`,
		"orbit.eccentricity=\"0.1\"":     `--set: orbit.eccentricity: found "0.1"; allowed is a number without unit and quotes`,
		"orbit.eccentricity=0.1 # x\n=2": `--set: orbit.eccentricity: found`,
		"solver.guard=no":                `--set: solver.guard: found "no"; allowed is true or false`,
		"base=earth":                     `--set: base: a base can only be chosen in a file`,
		"orbit=3":                        `--set: orbit: this is a section, not a key`,
		"title=a\x1bb":                   `--set: title: found "a\x1bb"`,
	} {
		if _, err := Load("earth", []string{set}); err == nil || !strings.HasPrefix(err.Error(), want) {
			t.Errorf("--set %s: %v, want %s", set, err, want)
		}
	}
}

// What is no scenario at all.
func TestReferences(t *testing.T) {
	dir := t.TempDir()
	t.Chdir(dir)
	if err := os.MkdirAll("earth", 0o755); err != nil { // the results of a run before
		t.Fatal(err)
	}
	if r := load(t, "earth"); r.File != "" {
		t.Errorf("a folder hides the built-in scenario: %q", r.File)
	}
	for name, content := range map[string]string{"world.toml": "title = \"w\"\n", "earth/scenario.toml": ""} {
		if err := os.WriteFile(name, []byte(content), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	for ref, want := range map[string][2]string{
		"erth":    {"erth: there is no such file", "earth"},
		"world":   {"world: there is no such file", "world.toml"},
		"./earth": {"./earth: found a folder; allowed is a file", "earth/scenario.toml"},
		"":        {"there is no such file", ""},
	} {
		_, err := Load(ref, nil)
		var ke *KeyError
		if !errors.As(err, &ke) || ke.Error() != want[0] || ke.Near != want[1] {
			t.Errorf("%q: %v", ref, err)
		}
	}
	// A file that hides the name of a built-in scenario is what the user wants.
	if err := os.RemoveAll("earth"); err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile("earth", []byte("title = \"mine\"\n"), 0o644); err != nil {
		t.Fatal(err)
	}
	if r := load(t, "earth"); r.Title != "mine" {
		t.Errorf("title %q", r.Title)
	}
	// The file system fails: a link to itself cannot be read by anybody.
	if err := os.Symlink("loop.toml", "loop.toml"); err == nil {
		var fe *FileError
		if _, err := Load("loop.toml", nil); !errors.As(err, &fe) || !strings.HasPrefix(err.Error(), "loop.toml: cannot be read: ") {
			t.Errorf("loop: %T %v", err, err)
		}
	}
}

func TestNameFromFile(t *testing.T) {
	for file, want := range map[string]string{
		"a/b/my planet.toml": "my-planet", "world.v2.toml": "world.v2", ".toml": "scenario", "..": "scenario", "Größe.toml": "Gr--e",
		"-x.toml": "x", strings.Repeat("a", 100) + ".toml": strings.Repeat("a", 64), "x..toml": "x",
	} {
		if got := nameFrom(file); got != want || !validName(got) {
			t.Errorf("%q gives %q, want %q", file, got, want)
		}
	}
}

// Files made to be slow to read are read, or refused, in no time.
func TestHostileFiles(t *testing.T) {
	many := func(format string) string {
		var b strings.Builder
		for i := 0; b.Len() < maxFile-100; i++ {
			fmt.Fprintf(&b, format, i)
		}
		return b.String()
	}
	for name, content := range map[string]string{
		"keys":     many("k%d=1\n"),
		"sections": many("[k%d]\n"),
		"same":     strings.Repeat("[orbit]\n", maxFile/8),
		"good":     "[orbit]\n" + many("k%d=1\n"),
		"inline":   "orbit={" + many("k%d=1,") + "k=1}\n",
		"tiny":     "orbit={" + strings.Repeat("a=1,", maxFile/4-10) + "a=1}\n",
		"dots":     strings.Repeat("a.", maxFile/2-2) + "a=1",
		"dotted":   "[" + strings.Repeat("a.", maxFile/2-4) + "a]",
		"lists":    "a=" + strings.Repeat("[", maxFile-2),
		"nested":   "orbit=" + strings.Repeat("{orbit=", maxFile/8),
		"newlines": strings.Repeat("\n", maxFile-1) + "a",
		"longkey":  strings.Repeat("a", maxFile-2) + "=1",
		"quoted":   "\"" + strings.Repeat("a", maxFile-5) + "\"=1",
		"pulses":   many("[pulse.%d]\n"),
	} {
		// Work that grows faster than the file would hang here: a quadratic
		// reader needs hours for a megabyte of short keys.
		done := make(chan error, 1)
		go func() {
			_, err := Parse("x.toml", []byte(content), nil)
			done <- err
		}()
		var err error
		select {
		case err = <-done:
		case <-time.After(2 * time.Minute):
			t.Fatalf("%s: hangs", name)
		}
		if err == nil || len(err.Error()) > 20000 {
			t.Errorf("%s: %.300v", name, err)
		}
	}
}

func TestNearest(t *testing.T) {
	all := known().dotted()
	for word, want := range map[string]string{
		"weathering.land.efodl": "weathering.land.efold", "land.efold": "weathering.land.efold", "efold": "weathering.land.efold",
		"orbit.distence": "orbit.distance", "ORBIT.DISTANCE": "orbit.distance", "zzzzzzzzzz": "", "": "", "solver.gaurd": "solver.guard",
	} {
		if got := Nearest(word, all); got != want {
			t.Errorf("Nearest(%q) = %q, want %q", word, got, want)
		}
	}
}
