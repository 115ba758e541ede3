package main

import (
	"bytes"
	"errors"
	"flag"
	"fmt"
	"io/fs"
	"os"
	"os/exec"
	"path/filepath"
	"regexp"
	"sort"
	"strings"
	"syscall"
	"testing"
	"time"

	"cycle/scenarios"
)

var update = flag.Bool("update", false, "rewrite the dialogues that differ")

// With CYCLE_AS_COMMAND set the test binary is the command itself, so that a test
// can start it as a process of its own.
func TestMain(m *testing.M) {
	if os.Getenv("CYCLE_AS_COMMAND") != "" {
		main()
	}
	os.Exit(m.Run())
}

// call runs one command line in this process.
func call(args ...string) (status int, stdout, stderr string) {
	var out, err bytes.Buffer
	status = cycle(strings.NewReader(""), &out, &err, args)
	return status, out.String(), err.String()
}

// tree lists everything below the working folder, with sizes.
func tree(t *testing.T) string {
	t.Helper()
	var lines []string
	err := filepath.WalkDir(".", func(path string, d fs.DirEntry, err error) error {
		if err != nil || path == "." {
			return err
		}
		info, err := d.Info()
		if err != nil {
			return err
		}
		if d.IsDir() {
			lines = append(lines, path+"/")
		} else {
			lines = append(lines, fmt.Sprintf("%s %d", path, info.Size()))
		}
		return nil
	})
	if err != nil {
		t.Fatal(err)
	}
	sort.Strings(lines)
	return strings.Join(lines, "\n")
}

// Dialogues in testdata/*.txt are repeated, each in an empty folder. A line
// that begins with
//
//	#   is a comment
//	$   is a command: cycle ..., ls [DIR], rm FILE, or write FILE
//	|   is a line for the file of "write FILE"
//
// and what follows a command is what it prints, standard output before standard
// error, then "exit N" unless the status is 0. A line "..." stands for any lines,
// "..." within a line for any text.
// go test ./cmd/cycle -run Dialogues -update rewrites what differs.
func TestDialogues(t *testing.T) {
	files, err := filepath.Glob("testdata/*.txt")
	if err != nil || len(files) == 0 {
		t.Fatal("no dialogues", err)
	}
	for _, file := range files {
		abs, err := filepath.Abs(file)
		if err != nil {
			t.Fatal(err)
		}
		t.Run(strings.TrimSuffix(filepath.Base(file), ".txt"), func(t *testing.T) {
			t.Chdir(t.TempDir())
			dialogue(t, abs)
		})
	}
}

func dialogue(t *testing.T, file string) {
	data, err := os.ReadFile(file)
	if err != nil {
		t.Fatal(err)
	}
	lines := strings.Split(strings.TrimSuffix(string(data), "\n"), "\n")
	var result []string
	changed := false
	for i := 0; i < len(lines); {
		line := lines[i]
		i++
		result = append(result, line)
		cmd, isCommand := strings.CutPrefix(line, "$ ")
		if !isCommand {
			if line != "" && !strings.HasPrefix(line, "#") {
				t.Fatalf("line %d: %q belongs to no command", i, line)
			}
			continue
		}
		at := i
		var input, want []string
		for i < len(lines) && !strings.HasPrefix(lines[i], "$ ") && !strings.HasPrefix(lines[i], "# ") {
			if text, ok := strings.CutPrefix(lines[i], "|"); ok {
				input = append(input, strings.TrimPrefix(text, " "))
				result = append(result, lines[i])
			} else {
				want = append(want, lines[i])
			}
			i++
		}
		blank := 0 // empty lines before the next command only set it apart
		for len(want) > 0 && want[len(want)-1] == "" {
			want, blank = want[:len(want)-1], blank+1
		}
		got := perform(t, cmd, input)
		if matches(want, got) {
			result = append(result, want...)
		} else {
			changed = true
			result = append(result, got...)
			if !*update {
				t.Errorf("%s:%d: $ %s\n--- got\n%s\n--- want\n%s", filepath.Base(file), at, cmd, strings.Join(got, "\n"), strings.Join(want, "\n"))
			}
		}
		for ; blank > 0; blank-- {
			result = append(result, "")
		}
	}
	if changed && *update {
		if err := os.WriteFile(file, []byte(strings.Join(result, "\n")+"\n"), 0o644); err != nil {
			t.Fatal(err)
		}
	}
}

// perform runs one command of a dialogue.
func perform(t *testing.T, cmd string, input []string) []string {
	args := split(cmd)
	var text string
	switch args[0] {
	case "cycle":
		status, out, err := call(args[1:]...)
		text = out + err
		if status != 0 {
			text += fmt.Sprintf("exit %d\n", status)
		}
	case "ls":
		dir := "."
		if len(args) > 1 {
			dir = args[1]
		}
		entries, err := os.ReadDir(dir)
		if err != nil {
			t.Fatal(err)
		}
		for _, e := range entries {
			text += e.Name() + "\n"
		}
	case "rm":
		if err := os.Remove(args[1]); err != nil {
			t.Fatal(err)
		}
	case "write":
		if err := os.MkdirAll(filepath.Dir(args[1]), 0o755); err != nil {
			t.Fatal(err)
		}
		if err := os.WriteFile(args[1], []byte(strings.Join(input, "\n")+"\n"), 0o644); err != nil {
			t.Fatal(err)
		}
	default:
		t.Fatalf("no command %q", args[0])
	}
	text = strings.TrimRight(text, "\n")
	if text == "" {
		return nil
	}
	return strings.Split(text, "\n")
}

// split cuts a command line at spaces outside of quotes.
func split(s string) []string {
	var out []string
	for _, m := range regexp.MustCompile(`(?:[^\s"']+|"[^"]*"|'[^']*')+`).FindAllString(s, -1) {
		out = append(out, strings.NewReplacer(`"`, "", `'`, "").Replace(m))
	}
	return out
}

// matches compares lines; "..." stands for any number of them.
func matches(want, got []string) bool {
	if len(want) == 0 {
		return len(got) == 0
	}
	if want[0] == "..." {
		for i := 0; i <= len(got); i++ {
			if matches(want[1:], got[i:]) {
				return true
			}
		}
		return false
	}
	if len(got) == 0 {
		return false
	}
	parts := strings.Split(strings.TrimRight(want[0], " "), "...")
	for i := range parts {
		parts[i] = regexp.QuoteMeta(parts[i])
	}
	line := regexp.MustCompile("^" + strings.Join(parts, ".*") + "$")
	return line.MatchString(strings.TrimRight(got[0], " ")) && matches(want[1:], got[1:])
}

// Bad input: status, message, and nothing written.
func TestBadInput(t *testing.T) {
	write := func(name, content string) func(t *testing.T) {
		return func(t *testing.T) {
			if err := os.WriteFile(name, []byte(content), 0o644); err != nil {
				t.Fatal(err)
			}
		}
	}
	all := func(fs ...func(*testing.T)) func(*testing.T) {
		return func(t *testing.T) {
			for _, f := range fs {
				f(t)
			}
		}
	}
	mkdir := func(name string) func(t *testing.T) {
		return func(t *testing.T) {
			if err := os.Mkdir(name, 0o755); err != nil {
				t.Fatal(err)
			}
		}
	}
	bad := []string{"run", "bad.toml"}
	for _, c := range []struct {
		name   string
		before func(*testing.T)
		args   []string
		status int
		parts  []string // in this order
	}{
		{"unknown key", write("bad.toml", "\n[weathering.land]\nefodl = \"20 K\"\n"), bad, 2, []string{"bad.toml:3: weathering.land.efodl: unknown key", "allowed is a key of [weathering.land]", "efold", "did you mean \"weathering.land.efold\"?", "cycle keys weathering.land"}},
		{"wrong type", write("bad.toml", "orbit.distance = 1\n"), bad, 2, []string{"bad.toml:1: orbit.distance: found the number 1; allowed is a length with its unit, 0.05 to 10 au"}},
		{"missing unit", write("bad.toml", "orbit.distance = \"1\"\n"), bad, 2, []string{"bad.toml:1: orbit.distance: found \"1\", which has no unit", "units are m, AU"}},
		{"wrong unit", write("bad.toml", "orbit.distance = \"1 K\"\n"), bad, 2, []string{"bad.toml:1: orbit.distance: found \"1 K\", \"K\" is no unit of length", "units are m"}},
		{"out of range", write("bad.toml", "orbit.distance = \"99 au\"\n"), bad, 2, []string{"bad.toml:1: orbit.distance: found \"99 au\", which is out of range; allowed is 0.05 to 10 au"}},
		{"NaN", write("bad.toml", "orbit.eccentricity = nan\n"), bad, 2, []string{"bad.toml:1: orbit.eccentricity: found the number nan, which is not finite; allowed is a finite number, 0 to 0.8"}},
		{"infinity", write("bad.toml", "orbit.eccentricity = inf\n"), bad, 2, []string{"bad.toml:1: orbit.eccentricity: found the number inf"}},
		{"duplicate key", write("bad.toml", "[orbit]\neccentricity = 0\neccentricity = 0\n"), bad, 2, []string{"bad.toml:3: orbit.eccentricity: set twice, first in line 2"}},
		{"syntax error", write("bad.toml", "[orbit]\neccentricity 0\n"), bad, 2, []string{"bad.toml:2: TOML syntax: "}},
		{"binary file", write("bad.toml", "PK\x03\x04\x00\x00"), bad, 2, []string{"bad.toml:1: this is no text file", "zero byte"}},
		{"line of 3 MB", write("bad.toml", "notes = \""+strings.Repeat("x", 3_000_000)+"\"\n"), bad, 2, []string{"bad.toml: the file is too large; found 2.86 MiB; allowed is at most 1 MiB"}},
		{"end before start", write("bad.toml", "[time]\nstart = \"5 Gyr\"\n\nend = \"4 Gyr\"\n"), bad, 2, []string{"bad.toml:4: time.end: found 4 Gyr, allowed is more than time.start, 5 Gyr"}},
		{"no such scenario", nil, []string{"run", "eearth"}, 2, []string{"eearth: there is no such file", "did you mean \"earth\"?"}},
		{"folder for a scenario", mkdir("here"), []string{"run", "here"}, 2, []string{"here: found a folder; allowed is a file"}},
		{"unreadable scenario", func(t *testing.T) {
			if err := os.Symlink("loop.toml", "loop.toml"); err != nil {
				t.Skip(err)
			}
		}, []string{"run", "loop.toml"}, 1, []string{"loop.toml: cannot be read: "}},
		{"output below a file", write("file", ""), []string{"run", "earth", "--out", "file/out"}, 1, []string{"file/out: the results cannot be written: ", "--out DIR"}},
		{"output is a file", write("out", ""), []string{"run", "earth", "--out", "out"}, 2, []string{"out: the output folder is a file", "--out DIR"}},
		{"output where nothing can be made", func(t *testing.T) {
			if _, err := os.Stat("/proc/self"); err != nil {
				t.Skip("no /proc")
			}
		}, []string{"run", "earth", "--out", "/proc/cycle-out"}, 1, []string{"/proc/cycle-out: the results cannot be written: ", "--out DIR"}},
		{"foreign folder", all(mkdir("earth"), write("earth/letters.txt", "dear")), []string{"run", "earth"}, 2, []string{"earth: the folder was not written by cycle and is left alone; found \"letters.txt\" in it", "choose another folder with --out DIR"}},
		{"foreign folder with a marker", all(mkdir("earth"), write("earth/.cycle", "{}"), write("earth/letters.txt", "dear")), []string{"run", "earth"}, 2, []string{"earth: the folder was not written by cycle"}},
		{"the folder one is in", nil, []string{"run", "earth", "--out", "."}, 2, []string{"the output folder would replace the folder you are in"}},
		{"a folder above", nil, []string{"run", "earth", "--out", "../.."}, 2, []string{"the output folder would replace the folder you are in"}},
		{"output without a name", nil, []string{"run", "earth", "--out="}, 0, nil}, // the default, see below
		{"bad --set", nil, []string{"run", "earth", "--set", "planet.mas=1 M_E"}, 2, []string{"--set: planet.mas: unknown key", "did you mean \"planet.mass\"?"}},
		{"--set without a value", nil, []string{"run", "earth", "--set", "planet.mass"}, 2, []string{"--set: found \"planet.mass\"; allowed is KEY=VALUE"}},
		{"--set without an argument", nil, []string{"run", "earth", "--set"}, 2, []string{"flag needs an argument: --set"}},
		{"unquoted value", nil, []string{"run", "earth", "--set", "planet.mass=3", "M_E"}, 2, []string{"unexpected argument \"M_E\""}},
		{"unknown flag", nil, []string{"run", "earth", "--quite"}, 2, []string{"unknown flag: --quite", "did you mean --quiet?"}},
		{"unknown command", nil, []string{"chek"}, 2, []string{"unknown command \"chek\"", "did you mean cycle check?"}},
		{"scenario for a command", nil, []string{"earth.toml"}, 2, []string{"unknown command \"earth.toml\"", "cycle run earth.toml"}},
		{"no command", nil, nil, 2, []string{"cycle run SCENARIO"}},
		{"no scenario", nil, []string{"check"}, 2, []string{"SCENARIO is missing"}},
		{"unknown section", nil, []string{"keys", "orbits"}, 2, []string{"orbits: there is no such section or key", "did you mean \"orbit\"?"}},
		{"bad name", nil, []string{"new", "../x"}, 2, []string{"NAME: found \"../x\"; allowed is up to 64 letters"}},
		{"name taken", write("x.toml", "mine"), []string{"new", "x"}, 2, []string{"x.toml is there already and is left alone"}},
		{"several problems", write("bad.toml", "orbit.distance = 1\nplanet.mass = 2\n"), []string{"check", "bad.toml"}, 2, []string{"error: bad.toml:1: orbit.distance", "error: bad.toml:2: planet.mass"}},
	} {
		t.Run(c.name, func(t *testing.T) {
			t.Chdir(t.TempDir())
			if c.before != nil {
				c.before(t)
			}
			before := tree(t)
			status, stdout, stderr := call(c.args...)
			if status != c.status {
				t.Errorf("status %d, want %d\n%s", status, c.status, stderr)
			}
			if c.status == 0 {
				return
			}
			if after := tree(t); after != before {
				t.Errorf("something was written:\n%s\nbefore:\n%s", after, before)
			}
			if stdout != "" {
				t.Errorf("standard output has %q", stdout)
			}
			rest := stderr
			for _, p := range c.parts {
				i := strings.Index(rest, p)
				if i < 0 {
					t.Fatalf("%q is missing in, or out of order:\n%s", p, stderr)
				}
				rest = rest[i+len(p):]
			}
			for _, line := range strings.Split(strings.TrimSuffix(stderr, "\n"), "\n") {
				if len(c.args) > 0 && !strings.HasPrefix(line, "cycle: error: ") && !strings.HasPrefix(line, "cycle: hint: ") {
					t.Errorf("a line is neither error nor hint: %q", line)
				}
			}
		})
	}
}

func read(t *testing.T, path string) string {
	t.Helper()
	data, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	return string(data)
}

// mustRun runs a command that has to succeed.
func mustRun(t *testing.T, args ...string) (stdout string) {
	t.Helper()
	status, stdout, stderr := call(args...)
	if status != exitOK || stderr != "" {
		t.Fatalf("cycle %s: status %d\n%s", strings.Join(args, " "), status, stderr)
	}
	return stdout
}

// The same scenario gives the same bytes, and so does the resolved scenario.
func TestSameBytes(t *testing.T) {
	t.Chdir(t.TempDir())
	first := mustRun(t, "run", "earth", "--out", "a", "--set", "weathering.land.efold=20 K")
	second := mustRun(t, "run", "earth", "--out", "b", "--set", "weathering.land.efold=20 K")
	for _, f := range resultFiles(nil) {
		if read(t, "a/"+f.name) != read(t, "b/"+f.name) {
			t.Errorf("%s differs between two runs", f.name)
		}
	}
	if read(t, "a/.cycle") != read(t, "b/.cycle") || strings.Replace(first, "a:", "b:", 1) != second {
		t.Error("the list of files or the verdict differs between two runs")
	}
	mustRun(t, "run", "a/scenario.toml", "--out", "c")
	for _, name := range []string{"history.csv", "history.parquet", "summary.json"} {
		if read(t, "a/"+name) != read(t, "c/"+name) {
			t.Errorf("cycle run scenario.toml gives another %s", name)
		}
	}
	// As the report says: inside the folder, where it replaces nothing by default.
	if status, _, stderr := call("run", "a/scenario.toml", "--quiet"); status != exitOK {
		t.Errorf("status %d: %s", status, stderr)
	}
	if read(t, "earth/history.csv") != read(t, "a/history.csv") {
		t.Error("cycle run a/scenario.toml gives another history.csv")
	}
}

// An older result is replaced; what the user put there or changed is not.
func TestReplace(t *testing.T) {
	t.Chdir(t.TempDir())
	mustRun(t, "run", "earth", "--quiet")
	old := read(t, "earth/summary.json")
	mustRun(t, "run", "earth", "--quiet", "--set", "planet.mass=0.9 M_E")
	if read(t, "earth/summary.json") == old {
		t.Error("the older result is still there")
	}
	if entries, err := os.ReadDir("."); err != nil || len(entries) != 1 {
		t.Errorf("something was left beside the folder: %v", entries)
	}
	want := tree(t)
	for name, spoil := range map[string]func() error{
		"added":   func() error { return os.WriteFile("earth/notes.txt", nil, 0o644) },
		"changed": func() error { return os.WriteFile("earth/scenario.toml", []byte("title = \"x\"\n"), 0o644) },
		"folder":  func() error { return os.Mkdir("earth/more", 0o755) },
		"link": func() error {
			return errors.Join(os.Rename("earth/scenario.toml", "same.toml"), os.Symlink("../same.toml", "earth/scenario.toml"))
		},
		"no list": func() error { return os.Remove("earth/.cycle") },
	} {
		if err := spoil(); err != nil {
			t.Fatal(err)
		}
		before := tree(t)
		status, _, stderr := call("run", "earth", "--quiet")
		if status != exitUsage || !strings.Contains(stderr, "is left alone") || !strings.Contains(stderr, "--out DIR") {
			t.Errorf("%s: status %d, %s", name, status, stderr)
		}
		if tree(t) != before {
			t.Errorf("%s: the folder was touched", name)
		}
		if err := errors.Join(os.RemoveAll("earth"), os.RemoveAll("same.toml")); err != nil {
			t.Fatal(err)
		}
		mustRun(t, "run", "earth", "--quiet", "--set", "planet.mass=0.9 M_E")
		if got := tree(t); got != want {
			t.Errorf("%s: left behind\n%s\nwant\n%s", name, got, want)
		}
	}
	// A link to a folder of ours stays a link.
	if err := errors.Join(os.Rename("earth", "real"), os.Symlink("real", "earth")); err != nil {
		t.Skip(err)
	}
	mustRun(t, "run", "earth", "--quiet")
	if info, err := os.Lstat("earth"); err != nil || info.Mode()&fs.ModeSymlink == 0 {
		t.Error("the link was replaced by a folder")
	}
	if read(t, "real/summary.json") != old {
		t.Error("the folder behind the link has not the new result")
	}
	// Empty folders may be filled, missing ones are made.
	if err := os.Mkdir("empty", 0o755); err != nil {
		t.Fatal(err)
	}
	mustRun(t, "run", "earth", "--quiet", "--out", "empty")
	mustRun(t, "run", "earth", "--quiet", "--out", "x/y/z")
	if read(t, "empty/summary.json") != old || read(t, "x/y/z/summary.json") != old {
		t.Error("another result in another folder")
	}
}

// A folder that is not ours is refused before anything is computed.
func TestRefuseEarly(t *testing.T) {
	t.Chdir(t.TempDir())
	if err := errors.Join(os.Mkdir("earth", 0o755), os.WriteFile("earth/x", nil, 0o644)); err != nil {
		t.Fatal(err)
	}
	done := make(chan int, 1)
	go func() {
		status, _, _ := call(slow...)
		done <- status
	}()
	select {
	case status := <-done:
		if status != exitUsage {
			t.Errorf("status %d", status)
		}
	case <-time.After(15 * time.Second):
		t.Fatal("computes first")
	}
}

// slow is a command line that takes far longer than any test.
var slow = []string{"run", "earth", "--set", "solver.tolerance=1e-10", "--set", "solver.max_step=0.01 Myr", "--set", "solver.max_steps=1e8"}

// A quiet run prints nothing; an undecided fate is told by the status.
func TestStatus(t *testing.T) {
	t.Chdir(t.TempDir())
	if out := mustRun(t, "run", "earth", "--quiet"); out != "" {
		t.Errorf("a quiet run prints %q", out)
	}
	if out := mustRun(t, "check", "earth", "--quiet"); out != "" {
		t.Errorf("a quiet check prints %q", out)
	}
	status, out, stderr := call("run", "earth", "--out", "u", "--set", "solver.max_steps=60", "--set", "carbon.solve=nothing")
	if status != exitUndecided || stderr != "" || !strings.Contains(strings.ToLower(out), "undecided") {
		t.Errorf("status %d, want %d\n%s%s", status, exitUndecided, out, stderr)
	}
	if _, err := os.Stat("u/summary.json"); err != nil {
		t.Error("an undecided result is a result: ", err)
	}
}

// failing is an output that takes nothing.
type failing struct{}

func (failing) Write([]byte) (int, error) { return 0, syscall.ENOSPC }

func TestFullStandardOutput(t *testing.T) {
	t.Chdir(t.TempDir())
	for _, args := range [][]string{{"run", "earth"}, {"check", "earth"}, {"keys"}, {"help"}, {"version"}, {"licences"}} {
		var stderr bytes.Buffer
		if status := cycle(nil, failing{}, &stderr, args); status != exitFailed || !strings.Contains(stderr.String(), "standard output: ") {
			t.Errorf("cycle %s: status %d, %q", args[0], status, stderr.String())
		}
	}
}

// Every command prints its help, which ends in an example that runs.
func TestHelp(t *testing.T) {
	t.Chdir(t.TempDir())
	for _, c := range commands() {
		help := mustRun(t, c.name, "--help")
		if other := mustRun(t, "help", c.name); other != help {
			t.Errorf("cycle help %s differs from cycle %s --help", c.name, c.name)
		}
		lines := strings.Split(strings.TrimSuffix(help, "\n"), "\n")
		example := lines[len(lines)-1]
		args := split(strings.TrimPrefix(example, "  cycle "))
		if strings.Contains(help, "--cells") { // the example, only coarser
			args = append(args, "--cells", "2", "--depth", "1")
		}
		if !strings.HasPrefix(example, "  cycle "+c.name) {
			t.Errorf("the help of %s ends in %q", c.name, example)
		} else if status, _, stderr := call(args...); status != exitOK {
			t.Errorf("%s: status %d, %s", example, status, stderr)
		}
		for _, line := range lines {
			if len([]rune(line)) > 92 {
				t.Errorf("%s: a line of %d characters", c.name, len([]rune(line)))
			}
		}
		if !strings.Contains(usage(), "cycle "+c.name) {
			t.Errorf("the usage does not name %s", c.name)
		}
	}
	for _, b := range scenarios.Builtins() {
		if !strings.Contains(usage(), b.Name) {
			t.Errorf("the usage does not name %s", b.Name)
		}
	}
}

// new writes a scenario that check and run take as it is.
func TestNew(t *testing.T) {
	t.Chdir(t.TempDir())
	mustRun(t, "new", "myplanet")
	mustRun(t, "check", "myplanet.toml")
	mustRun(t, "run", "myplanet.toml", "--quiet")
	if _, err := os.Stat("myplanet/report.html"); err != nil {
		t.Error(err)
	}
	if err := os.Symlink("nowhere", "link.toml"); err == nil {
		if status, _, _ := call("new", "link"); status != exitUsage {
			t.Errorf("a link to nowhere is overwritten: status %d", status)
		}
	}
}

// A title is text and nothing else, however odd.
func TestOddTitle(t *testing.T) {
	t.Chdir(t.TempDir())
	title := "</script><img src=x onerror=alert(1)> \u202eevil\u202c 'quoted' \\\"too\\\" " + strings.Repeat("long ", 2000)
	if err := os.WriteFile("odd.toml", []byte("title = \""+title+"\"\n"), 0o644); err != nil {
		t.Fatal(err)
	}
	if out := mustRun(t, "check", "odd.toml"); strings.ContainsRune(out, '\u202e') || !strings.Contains(out, "</script>") {
		t.Errorf("%.200q", out)
	}
	if out := mustRun(t, "run", "odd.toml"); strings.ContainsRune(out, '\u202e') {
		t.Errorf("%.200q", out)
	}
	first := read(t, "odd/summary.json")
	mustRun(t, "run", "odd/scenario.toml", "--quiet") // replaces the folder it lies in
	if read(t, "odd/summary.json") != first {
		t.Error("the resolved scenario gives another summary.json")
	}
}

// Stopped from outside, the command leaves nothing behind.
func TestInterrupt(t *testing.T) {
	t.Chdir(t.TempDir())
	self, err := os.Executable()
	if err != nil {
		t.Fatal(err)
	}
	cmd := exec.Command(self, slow...)
	cmd.Env = append(os.Environ(), "CYCLE_AS_COMMAND=1")
	var stderr bytes.Buffer
	cmd.Stderr = &stderr
	if err := cmd.Start(); err != nil {
		t.Fatal(err)
	}
	done := make(chan error, 1)
	go func() { done <- cmd.Wait() }()
	time.Sleep(500 * time.Millisecond)
	if err := cmd.Process.Signal(os.Interrupt); err != nil {
		t.Fatal(err)
	}
	select {
	case <-done:
	case <-time.After(time.Minute):
		cmd.Process.Kill()
		t.Fatal("goes on after an interrupt")
	}
	if got := cmd.ProcessState.ExitCode(); got != exitInterrupted || !strings.Contains(stderr.String(), "interrupted") {
		t.Errorf("status %d, %s", got, stderr.String())
	}
	if left := tree(t); left != "" {
		t.Errorf("left behind:\n%s", left)
	}
}

// Output to a file or a pipe has no colour and no terminal's width.
func TestNoColour(t *testing.T) {
	t.Chdir(t.TempDir())
	if out := mustRun(t, "run", "earth"); strings.Contains(out, "\x1b") {
		t.Errorf("escape codes: %q", out)
	}
	for _, args := range [][]string{{"check", "earth"}, {"keys"}, {"help"}} {
		if out := mustRun(t, args...); strings.Contains(out, "\x1b") {
			t.Errorf("escape codes in %s", args[0])
		}
	}
}
