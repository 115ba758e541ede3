package reports

import (
	"os"
	"path/filepath"
	"strings"
	"sync"
	"testing"
)

// axeVersion is the one the Makefile installs.
const axeVersion = "4.14.1"

var axeSource = sync.OnceValues(func() (string, error) {
	path := os.Getenv("CYCLE_AXE")
	if path == "" {
		path = filepath.Join(".npm", "node_modules", "axe-core", "axe.min.js")
	}
	b, err := os.ReadFile(path)
	return string(b), err
})

// accessible checks the page with axe-core against WCAG 2.2, level AA, and its
// list of good practice. The library is run by the browser's own console, past
// the policy of the page, and stays out of the repository.
func (b *tab) accessible(name string) {
	b.Helper()
	source, err := axeSource()
	if err != nil {
		words := "axe-core is missing (" + err.Error() + "): the report was not checked for access; make browser installs it into reports/.npm, or name its file in CYCLE_AXE"
		if os.Getenv("CI") != "" {
			b.Fatal(words)
		}
		b.Log(words)
		return
	}
	if eval[string](b, `window.axe ? axe.version : ""`) == "" {
		eval[bool](b, source+"\n;true")
		if v := eval[string](b, `axe.version`); v != axeVersion {
			b.Logf("axe-core %s instead of %s", v, axeVersion)
		}
	}
	type finding struct {
		ID, Impact, Help string
		Tags             []string
		Nodes            []string
	}
	type result struct {
		Violations []finding
		Passes     int
	}
	const tags = `["wcag2a", "wcag2aa", "wcag21a", "wcag21aa", "wcag22aa", "best-practice"]`
	r := evalJSON[result](b, `await axe.run(document, {runOnly: {type: "tag", values: `+tags+`}, resultTypes: ["violations"]}).then(r => ({Passes: r.passes.length, Violations: r.violations.map(v => ({ID: v.id, Impact: v.impact, Help: v.help, Tags: v.tags, Nodes: v.nodes.map(n => n.target.join(" ") + ": " + n.html.slice(0, 160) + " " + (n.any[0] ? n.any[0].message : ""))}))}))`)
	if r.Passes < 15 {
		b.Errorf("%s: only %d rules found anything to check", name, r.Passes)
	}
	for _, f := range r.Violations {
		b.Errorf("%s: %s (%s): %s\n\t%s", name, f.ID, f.Impact, f.Help, strings.Join(f.Nodes[:min(3, len(f.Nodes))], "\n\t"))
	}
}

// The check of access sees what it should: a page with a picture without words
// and grey text on grey is found out.
func TestAxeSees(t *testing.T) {
	if _, err := axeSource(); err != nil && os.Getenv("CI") == "" {
		t.Skip("axe-core is missing; make browser installs it")
	}
	b := openTab(t)
	b.show(`<!doctype html><html lang="en" data-ready="1"><title>x</title><main><h1>x</h1><p style="color:#aaa;background:#fff">grey</p><button></button></main>`)
	source, err := axeSource()
	if err != nil {
		t.Fatal(err)
	}
	eval[bool](b, source+"\n;true")
	ids := evalJSON[[]string](b, `await axe.run().then(r => r.violations.map(v => v.id))`)
	for _, want := range []string{"color-contrast", "button-name"} {
		if !strings.Contains(strings.Join(ids, " "), want) {
			t.Errorf("axe-core finds %v, not %s", ids, want)
		}
	}
}
