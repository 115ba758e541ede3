package scenarios

import (
	"embed"
	"path"
	"sort"
	"strings"
)

//go:embed builtin/*.toml
var builtinFiles embed.FS

// Builtin is a scenario that comes with the program.
type Builtin struct {
	Name  string // what the user types
	Title string
	Doc   string // the first comment of its file
}

// Builtins lists the scenarios that come with the program, the Earth first.
func Builtins() []Builtin {
	entries, err := builtinFiles.ReadDir("builtin")
	if err != nil {
		panic("scenarios: embedded folder is missing: " + err.Error()) // broken build
	}
	var out []Builtin
	for _, e := range entries {
		name := strings.TrimSuffix(e.Name(), ".toml")
		data, _ := builtinSource(name)
		b := Builtin{Name: name, Title: name, Doc: firstComment(data)}
		for _, line := range strings.Split(string(data), "\n") {
			if raw, ok := strings.CutPrefix(line, "title = "); ok {
				if v, ok := parseValue(raw); ok && v.shape == text {
					b.Title = v.text
				}
				break
			}
		}
		out = append(out, b)
	}
	sort.SliceStable(out, func(i, j int) bool { return out[i].Name == "earth" && out[j].Name != "earth" })
	return out
}

// builtinSource returns the TOML of a built-in scenario.
func builtinSource(name string) ([]byte, bool) {
	if !validName(name) {
		return nil, false
	}
	data, err := builtinFiles.ReadFile(path.Join("builtin", name+".toml"))
	return data, err == nil
}

func builtinNames() []string {
	var out []string
	for _, b := range Builtins() {
		out = append(out, b.Name)
	}
	return out
}

// firstComment joins the comment lines a file begins with.
func firstComment(data []byte) string {
	var lines []string
	for _, line := range strings.Split(string(data), "\n") {
		c, ok := strings.CutPrefix(line, "#")
		if !ok {
			break
		}
		lines = append(lines, strings.TrimSpace(c))
	}
	return strings.Join(lines, " ")
}
