package main

import (
	"go/parser"
	"go/token"
	"io/fs"
	"os/exec"
	"path/filepath"
	"strconv"
	"strings"
	"testing"
)

const module = "cycle"

// floors is the layout of the program, ground first. A package may import what
// lies below it; what else it may import stands beside it.
var floors = []map[string][]string{
	{"carbon/units": {"carbon/cite"}, "carbon/cite": nil, "ode": nil, "ode/odetest": {"ode"}},
	{"carbon/record": nil},
	{"carbon/star": nil, "carbon/climate": nil, "carbon/weathering": nil, "carbon/outgas": nil, "carbon/interior": nil, "carbon/ocean": nil},
	{"carbon": nil},
	{"scenarios": nil, "scenarios/ensemble": {"scenarios"}},
	{"reports": {"reports/assets"}, "reports/assets": nil},
	{"cmd/cycle": nil},
}

// only is stricter: these see nothing of the program but what is listed.
var only = map[string][]string{
	"reports":        {"carbon/record", "reports/assets"},
	"reports/assets": {},
	"carbon/record":  {},
	"carbon/cite":    {},
	"carbon/units":   {"carbon/cite"},
	"ode":            {},
	"ode/odetest":    {"ode"},
}

// Imports point downward only. Internal packages belong to the folder they stand in.
func TestImports(t *testing.T) {
	floor := map[string]int{}
	for i, row := range floors {
		for p := range row {
			floor[p] = i
		}
	}
	home := func(pkg string) string {
		for p := pkg; p != "." && p != ""; p = filepath.ToSlash(filepath.Dir(p)) {
			if _, ok := floor[p]; ok {
				return p
			}
		}
		return ""
	}
	root := filepath.Join("..", "..")
	seen := map[string]bool{}
	err := filepath.WalkDir(root, func(path string, d fs.DirEntry, err error) error {
		if err != nil {
			return err
		}
		if d.IsDir() {
			if name := d.Name(); path != root && (strings.HasPrefix(name, ".") || name == "testdata") {
				return filepath.SkipDir
			}
			return nil
		}
		if !strings.HasSuffix(path, ".go") || strings.HasSuffix(path, "_test.go") {
			return nil
		}
		rel, err := filepath.Rel(root, filepath.Dir(path))
		if err != nil {
			return err
		}
		pkg := filepath.ToSlash(rel)
		f, err := parser.ParseFile(token.NewFileSet(), path, nil, parser.ImportsOnly)
		if err != nil {
			return err
		}
		if f.Name.Name == "main" && pkg != "cmd/cycle" {
			return nil // a tool stands on the roof, wherever it is kept
		}
		from := home(pkg)
		if from == "" {
			t.Errorf("%s has no place in the layout", pkg)
			return nil
		}
		seen[from] = true
		for _, imp := range f.Imports {
			name, err := strconv.Unquote(imp.Path.Value)
			if err != nil {
				return err
			}
			target, ours := strings.CutPrefix(name, module+"/")
			if !ours {
				continue
			}
			to := home(target)
			if to == from {
				continue
			}
			beside := false
			for _, p := range floors[floor[from]][from] {
				beside = beside || p == to
			}
			if !beside && floor[to] >= floor[from] {
				t.Errorf("%s imports %s, which does not lie below it", pkg, target)
			}
			if list, strict := only[from]; strict {
				ok := false
				for _, p := range list {
					ok = ok || p == to
				}
				if !ok {
					t.Errorf("%s imports %s, allowed is %v", pkg, target, list)
				}
			}
		}
		return nil
	})
	if err != nil {
		t.Fatal(err)
	}
	for p := range floor {
		if !seen[p] && p != "scenarios/ensemble" { // not built yet
			t.Errorf("the layout names %s, which is not there", p)
		}
	}
}

// Whatever is linked into the program shows its licence.
func TestLicences(t *testing.T) {
	out := mustRun(t, "licences")
	if read(t, "licences/cycle.txt") != read(t, filepath.Join("..", "..", "LICENSE")) {
		t.Error("the licence of the program is not that of the repository")
	}
	list, err := exec.Command("go", "list", "-deps", "-f", "{{with .Module}}{{.Path}}{{end}}", ".").Output()
	if err != nil {
		t.Skip("no go command: ", err)
	}
	linked := map[string]bool{}
	for _, m := range strings.Fields(string(list)) {
		if m != module {
			linked[m] = true
		}
	}
	shown := map[string]bool{}
	for _, l := range libraries {
		shown[l.module] = true
		text := read(t, "licences/"+l.file+".txt")
		if len(text) < 200 || !strings.Contains(out, l.module+"\n===") {
			t.Errorf("%s shows no licence", l.module)
		}
	}
	for m := range linked {
		if !shown[m] {
			t.Errorf("%s is linked in and shows no licence", m)
		}
	}
}
