package main

import (
	"encoding/json"
	"html"
	"os"
	"path/filepath"
	"regexp"
	"slices"
	"strings"
	"sync"
	"testing"

	"github.com/mattn/go-runewidth"

	"cycle/scenarios"
)

// A made report is a folder that a command has written, and what it printed.
type madeReport struct {
	name, dir, page, stdout string
}

var made struct {
	sync.Once
	all []madeReport
	err string
}

// allReports makes the run of every built-in scenario and one report of each
// other kind, once for all tests.
func allReports(t *testing.T) []madeReport {
	t.Helper()
	made.Do(func() {
		dir, err := os.MkdirTemp("", "reports-")
		if err != nil {
			made.err = err.Error()
			return
		}
		cheapFile := filepath.Join(dir, "cheap.toml")
		if err := os.WriteFile(cheapFile, []byte(cheap), 0o644); err != nil {
			made.err = err.Error()
			return
		}
		lines := [][]string{}
		for _, b := range scenarios.Builtins() {
			lines = append(lines, []string{"run", b.Name})
		}
		lines = append(lines,
			[]string{"run", "earth", "--set", "weathering.land.law=menou2015", "--set", "interior.exponent=0.31234567891", "--set", "zone.law=kasting1993", "--set", "climate.condensation=kasting1991"},
			[]string{"explain", "ulmere"},
			[]string{"map", "calessa", "--x", "orbit.distance=0.85:1.2 au", "--y", "sources.scale=0.2:5:log", "--cells", "3", "--depth", "1"},
			[]string{"compare", "earth", "earth,weathering.land.law=menou2015", "calessa", "grauvel"},
			[]string{"ensemble", cheapFile, "--members", "48"},
			[]string{"ensemble", cheapFile, "--members", "48", "--design", "latin"},
			[]string{"ensemble", cheapFile, "--members", "48", "--design", "random"},
			[]string{"ensemble", cheapFile, "--members", "50", "--design", "freeze"})
		for i, args := range lines {
			m := madeReport{name: strings.ReplaceAll(strings.Join(args, " "), cheapFile, "cheap"), dir: filepath.Join(dir, string(rune('A'+i)))}
			status, stdout, stderr := call(append(args, "--out", m.dir)...)
			if status != exitOK && status != exitUndecided {
				made.err = m.name + ": " + stderr
				return
			}
			page, err := os.ReadFile(filepath.Join(m.dir, "report.html"))
			if err != nil {
				made.err = err.Error()
				return
			}
			m.page, m.stdout = string(page), stdout
			made.all = append(made.all, m)
		}
	})
	if made.err != "" {
		t.Fatal(made.err)
	}
	return made.all
}

var markup = regexp.MustCompile(`<[^>]*>`)

// element returns the text of the element with an id.
func element(t *testing.T, page, id, end string) string {
	t.Helper()
	_, rest, ok := strings.Cut(page, `id="`+id+`"`)
	if !ok {
		return ""
	}
	_, rest, _ = strings.Cut(rest, ">")
	text, _, ok := strings.Cut(rest, end)
	if !ok {
		t.Fatalf("no end of %s", id)
	}
	return html.UnescapeString(markup.ReplaceAllString(text, ""))
}

// A citation is a family name, who else, and a year.
var citation = regexp.MustCompile(`\p{Lu}[\p{L}-]+(?: & \p{Lu}[\p{L}-]+| et al\.)? (?:19|20)\d\d[a-z]?\b`)

var entry = regexp.MustCompile(`(?s)@(article|book|techreport|incollection|inproceedings|misc)\{([a-z0-9]+),\n(.*?)\n\}`)

// The text for a methods section cites exactly the works whose BibTeX the page
// holds: those of the laws, values and methods used.
func TestMethodsText(t *testing.T) {
	for _, m := range allReports(t) {
		text := element(t, m.page, "methods", "</blockquote>")
		bib := element(t, m.page, "bibtex", "</code>")
		if text == "" || bib == "" {
			t.Errorf("%s: no text or no BibTeX", m.name)
			continue
		}
		// What BibTeX holds, as it would be cited.
		want, count := map[string]string{}, map[string]int{}
		entries := entry.FindAllStringSubmatch(bib, -1)
		if n := strings.Count(bib, "@"); n != len(entries) {
			t.Errorf("%s: %d entries of BibTeX, %d can be read", m.name, n, len(entries))
		}
		keys := map[string]bool{}
		for _, e := range entries {
			if keys[e[2]] {
				t.Errorf("%s: BibTeX key %s twice", m.name, e[2])
			}
			keys[e[2]] = true
			if strings.Count(e[3], "{") != strings.Count(e[3], "}") {
				t.Errorf("%s: braces of %s do not match", m.name, e[2])
			}
			field := func(name string) string {
				f := regexp.MustCompile(`(?m)^  ` + name + ` = \{(.*)\},?$`).FindStringSubmatch(e[3])
				if f == nil {
					t.Errorf("%s: %s has no %s", m.name, e[2], name)
					return ""
				}
				return f[1]
			}
			field("title")
			var families []string
			for _, a := range strings.Split(field("author"), " and ") {
				family, _, _ := strings.Cut(a, ",")
				families = append(families, family)
			}
			short := families[0]
			switch {
			case len(families) == 2:
				short += " & " + families[1]
			case len(families) > 2:
				short += " et al."
			}
			short += " " + field("year")
			count[short]++
			want[e[2]] = short
		}
		cited := map[string]bool{}
		for _, c := range citation.FindAllString(text, -1) {
			cited[c] = true
			if !slices.ContainsFunc(slices.Collect(values(want)), func(s string) bool { return c == s || count[s] > 1 && strings.HasPrefix(c, s) }) {
				t.Errorf("%s: the text cites %q, which BibTeX lacks", m.name, c)
			}
		}
		for key, s := range want {
			if count[s] > 1 {
				s += "a"
			}
			if !cited[s] && !strings.Contains(text, s) {
				t.Errorf("%s: the text does not cite %s, %s", m.name, key, s)
			}
		}
		// The reference list has as many works.
		_, list, _ := strings.Cut(m.page, `id="references"`)
		list, _, _ = strings.Cut(list, "</ul>")
		if n := strings.Count(list, "<li"); n != len(entries) {
			t.Errorf("%s: %d references, %d entries of BibTeX", m.name, n, len(entries))
		}
		if !strings.Contains(text, "with cycle "+version) || !strings.Contains(text, "conditional on these assumptions") {
			t.Errorf("%s: the text does not name the program, or no condition:\n%s", m.name, text)
		}
	}
}

func values(m map[string]string) func(func(string) bool) {
	return func(yield func(string) bool) {
		for _, v := range m {
			if !yield(v) {
				return
			}
		}
	}
}

// Every law of a result stands in the text by its name, and another law changes
// it.
func TestMethodsLaws(t *testing.T) {
	texts := map[string]string{}
	for _, m := range allReports(t) {
		if !strings.HasPrefix(m.name, "run ") {
			continue
		}
		text := element(t, m.page, "methods", "</blockquote>")
		texts[m.name] = text
		var s struct {
			Laws []struct {
				Part, Name, Source string
				Works              []string
			}
			Works []struct{ Key, Short string }
		}
		data, err := os.ReadFile(filepath.Join(m.dir, "summary.json"))
		if err != nil || json.Unmarshal(data, &s) != nil || len(s.Laws) < 9 {
			t.Fatalf("%s: %v, %d laws", m.name, err, len(s.Laws))
		}
		for _, l := range s.Laws {
			if !strings.Contains(text, "law "+l.Name) {
				t.Errorf("%s: the text does not name the law %s of %s", m.name, l.Name, l.Part)
			}
			for _, k := range l.Works {
				i := slices.IndexFunc(s.Works, func(w struct{ Key, Short string }) bool { return w.Key == k })
				if i < 0 || !strings.Contains(text, s.Works[i].Short) {
					t.Errorf("%s: the work %s behind %s is not cited", m.name, k, l.Name)
				}
			}
		}
	}
	var other string
	for name, text := range texts {
		if strings.Contains(name, "menou2015") {
			other = text
		}
	}
	if strings.Contains(other, "walker1981") || !strings.Contains(other, "2016 (law menou2015") || !strings.Contains(other, "Kasting et al. 1993 (law kasting1993") ||
		!strings.Contains(other, "condensation kasting1991 (chosen here, Kasting 1991)") || !strings.Contains(other, "exponent 0.312346 (chosen here") {
		t.Errorf("the chosen laws and values do not stand in the text:\n%s", other)
	}
}

// The scenario in the page is that of the folder, byte for byte, and the page
// names version, hash and the command that repeats the result.
func TestReuse(t *testing.T) {
	for _, m := range allReports(t) {
		if !strings.HasPrefix(m.name, "compare") {
			want, err := os.ReadFile(filepath.Join(m.dir, "scenario.toml"))
			if err != nil {
				t.Fatal(err)
			}
			_, rest, _ := strings.Cut(m.page, `<code id="scenario">`)
			got, _, _ := strings.Cut(rest, "</code>")
			if html.UnescapeString(got) != string(want) {
				t.Errorf("%s: the scenario in the page is not scenario.toml", m.name)
			}
		} else if n := strings.Count(m.page, "Resolved scenario <bdi>"); n != 4 {
			t.Errorf("%s: %d resolved scenarios", m.name, n)
		}
		if !strings.HasPrefix(element(t, m.page, "command", "</code>"), "cycle "+strings.Fields(m.name)[0]+" ") {
			t.Errorf("%s: no command", m.name)
		}
		for _, want := range []string{"<dt>Version</dt><dd>" + version, "no advice on the climate of today", "<h2>Caution</h2>"} {
			if !strings.Contains(m.page, want) {
				t.Errorf("%s: the page lacks %q", m.name, want)
			}
		}
		if !regexp.MustCompile(`<dd>(<code>)?[0-9a-f]{16}`).MatchString(m.page) {
			t.Errorf("%s: no hash", m.name)
		}
	}
}

var (
	hidden = regexp.MustCompile(`(?s)<(script|style|pre)[ >].*?</(script|style|pre)>|<code id=.*?</code>`)
	digits = regexp.MustCompile(`[0-9][0-9.,]*[0-9]`)
	// A hash, a version or a reference is no quantity.
	identity = regexp.MustCompile(`(^|[^.0-9a-f])[0-9a-f]{12,}|\b[0-9]+\.[0-9]+\.[0-9]+\b`)
)

// tooLong returns the numbers of a text with more than seven significant digits.
func tooLong(text string) []string {
	var out []string
	for _, n := range digits.FindAllString(identity.ReplaceAllString(text, " "), -1) {
		plain := strings.Trim(strings.NewReplacer(".", "", ",", "").Replace(n), "0")
		if len(plain) > 7 && strings.Count(n, ".") < 2 {
			out = append(out, n)
		}
	}
	return out
}

// Nobody reads more than seven digits: neither on the page nor on the terminal.
// Scenario, CSV and JSON keep them all.
func TestDigits(t *testing.T) {
	if got := tooLong("a 0.3333333333333333 b 287.99999999 c 0.000226055 d 1361 e 0.1.0 f e1c740c5c465a351"); len(got) != 2 {
		t.Fatalf("the test finds %q", got)
	}
	for _, m := range allReports(t) {
		page := html.UnescapeString(markup.ReplaceAllString(hidden.ReplaceAllString(m.page, " "), " "))
		page, _, _ = strings.Cut(page, "The works behind exactly")
		for _, n := range tooLong(page) {
			i := strings.Index(page, n)
			t.Errorf("%s: the page shows %s: %q", m.name, n, page[max(0, i-60):min(len(page), i+40)])
		}
		said := strings.ReplaceAll(m.stdout, m.dir, "DIR")
		for _, n := range tooLong(said) {
			t.Errorf("%s: the terminal shows %s", m.name, n)
		}
		for _, bad := range []string{"NaN", "+Inf", "e-0", "e+0"} {
			if strings.Contains(said, bad) || strings.Contains(page, bad) {
				t.Errorf("%s: %q is shown", m.name, bad)
			}
		}
	}
}

// Whatever is printed fits 80 columns, holds no colour in a pipe and no space at
// the end of a line.
func TestColumns(t *testing.T) {
	for _, m := range allReports(t) {
		lines := strings.Split(strings.TrimSuffix(m.stdout, "\n"), "\n")
		for i, l := range lines {
			if strings.HasPrefix(l, m.dir) { // the files written
				continue
			}
			if n := runewidth.StringWidth(l); n > 80 {
				t.Errorf("%s, line %d: %d columns: %q", m.name, i+1, n, l)
			}
			if strings.TrimRight(l, " ") != l {
				t.Errorf("%s, line %d ends in a space: %q", m.name, i+1, l)
			}
		}
		if strings.Contains(m.stdout, "\x1b") {
			t.Errorf("%s: colour in a pipe", m.name)
		}
	}
}

var (
	inputRow = regexp.MustCompile(`<tr[^>]*><th scope="row"><code>([a-z0-9_.]+)</code></th><td data-label="Value"><b>([^<]*)</b>`)
	pure     = regexp.MustCompile(`^[-−0-9.e+]+$`)
)

// A quantity with a dimension has its unit behind it wherever a table shows it.
func TestUnits(t *testing.T) {
	keys, err := scenarios.Keys("")
	if err != nil {
		t.Fatal(err)
	}
	dimension := map[string]bool{}
	for i := range keys {
		if keys[i].Units != nil {
			dimension[keys[i].Dotted()] = true
		}
	}
	seen := 0
	for _, m := range allReports(t) {
		for _, row := range inputRow.FindAllStringSubmatch(m.page, -1) {
			if dimension[row[1]] {
				seen++
				if pure.MatchString(html.UnescapeString(row[2])) {
					t.Errorf("%s: %s is shown as %s, without a unit", m.name, row[1], row[2])
				}
			}
		}
		// A column of numbers over time names its unit, or is a pure number.
		for _, h := range regexp.MustCompile(`<th scope="col">([^<]*)</th>`).FindAllStringSubmatch(m.page, -1) {
			name := html.UnescapeString(h[1])
			for word, unit := range map[string]string{"temperature": "K", "pressure": "bar", "Sunlight": "", "weathering": "Tmol/yr", "Age": "Gyr"} {
				if strings.HasSuffix(name, word) && unit != "" && name != "Age" {
					t.Errorf("%s: a column is called %q, without its unit %s", m.name, name, unit)
				}
			}
		}
	}
	if seen < 500 {
		t.Errorf("only %d values with a dimension were found", seen)
	}
}

// check tells how many keys are uncertain, and each with its distribution, unit
// and source.
func TestCheckUncertain(t *testing.T) {
	status, stdout, stderr := call("check", "earth_uncertain")
	if status != exitOK || stderr != "" {
		t.Fatalf("status %d, %s", status, stderr)
	}
	for _, want := range []string{"[uncertain] ", "uniform, 6 to 10 Tmol/yr ", "Haqq-Misra et al. 2016", "12 keys are uncertain", "weathering.land.efold                  uniform, 10 to 40 K"} {
		if !strings.Contains(stdout, want) {
			t.Errorf("check does not tell %q", want)
		}
	}
	if _, stdout, _ := call("check", "earth"); strings.Contains(stdout, "uncertain") {
		t.Error("a scenario without distributions speaks of them")
	}
	if status, stdout, _ := call("keys", "uncertain"); status != exitOK || !strings.Contains(stdout, `"log-uniform"`) {
		t.Errorf("keys does not explain the section:\n%s", stdout)
	}
}
