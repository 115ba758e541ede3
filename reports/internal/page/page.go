// Package page is the kit every report is built of: one file with its styles,
// its script, the data and the library that draws, under a content security
// policy that allows nothing else; figures over one linked time axis; the
// palette. It knows nothing of a run: what is shown comes in as words, columns
// and figures.
//
// Nothing that comes in can become markup or code. Words go through
// html/template or into JSON with < > & escaped; the script reads the JSON as
// data, and looks functions and colours up by name in tables of its own, only
// where the kit's own options name them.
package page

import (
	"bytes"
	"crypto/sha256"
	_ "embed"
	"encoding/base64"
	"encoding/json"
	"fmt"
	"html/template"
	"io"
	"math"
	"sort"
	"strings"
	"sync"

	"cycle/reports/assets"
	"cycle/reports/internal/num"
)

//go:embed page.css
var css string

//go:embed page.js
var script string

//go:embed page.tmpl
var kit string

// A Document is a report before it is written.
type Document struct {
	Title   string // of the window
	Label   string // one line that names the result in saved figures
	File    string // stem of the names of saved files
	Body    any    // what the template "body" is given
	Data    *Data
	Figures []*Figure
	Room    int // characters the rows may take; 0 for what a page of many histories has

	// The time axis all figures share.
	Episodes []Episode
	Marks    []Mark
	Outcome  float64 // the date drawn through all figures; NaN for none
	Present  float64 // the age that counts as present; NaN for none
}

// An Episode is a span in one climate state.
type Episode struct {
	Role string  `json:"role"` // of the palette, "state.snowball"
	Name string  `json:"name"`
	From float64 `json:"from"`
	To   float64 `json:"to"`
}

// A Mark is a dated crossing in the rail.
type Mark struct {
	Time   float64 `json:"time"`
	Number string  `json:"number"` // "" for a repetition
	Name   string  `json:"name"`
}

// Parse reads the template of a report, which must define "body" and may use
// the kit's "figure" and "clock", the functions below and its own.
func Parse(name, text string, funcs template.FuncMap) (*template.Template, error) {
	t, err := template.New(name).Funcs(funcs).Funcs(template.FuncMap{
		"class": func(role string) string { return "c" + strings.ReplaceAll("."+role, ".", "-") },
		"unit":  num.Unit,
	}).Parse(kit)
	if err != nil {
		return nil, err
	}
	return t.Parse(text)
}

// Finish settles the figures against the data, drops those without numbers,
// and returns the ones that remain.
func (d *Document) Finish() error {
	index := 0
	var also []float64
	for _, m := range d.Marks {
		if m.Number != "" {
			also = append(also, m.Time)
		}
	}
	if !missing(d.Present) {
		also = append(also, d.Present)
	}
	var figures []*Figure
	for _, f := range d.Figures {
		if d.Data.Rows < 2 {
			break
		}
		if err := f.finish(d.Data, &index, also); err != nil {
			return err
		}
		if len(f.Curves) > 0 {
			figures = append(figures, f)
		}
	}
	d.Figures = figures
	room := d.Room
	if room == 0 {
		room = 1300e3 // in a page of 2 MB
	}
	return d.Data.settle(d.sets(), room)
}

// sets are the rows that are drawn of each curve.
func (d *Document) sets() [][]int {
	var sets [][]int
	for _, f := range d.Figures {
		for _, c := range f.Curves {
			sets = append(sets, c.set)
		}
	}
	return sets
}

// Write writes the document as one HTML file. Finish must have been called.
func (d *Document) Write(w io.Writer, t *template.Template) error {
	var body bytes.Buffer
	if err := t.ExecuteTemplate(&body, "body", d.Body); err != nil {
		return err
	}
	style := paletteCSS() + roleCSS() + css + d.heights()

	sets := d.sets()
	specs := []any{}
	for _, f := range d.Figures {
		specs = append(specs, f.spec())
	}
	columns := []any{}
	for _, c := range d.Data.Columns {
		columns = append(columns, map[string]string{"name": c.Name, "header": c.Header})
	}
	data, err := json.Marshal(map[string]any{
		"rows": d.Data.Rows, "columns": columns, "curves": len(sets), "figures": specs,
		"episodes": orEmpty(d.Episodes), "marks": orEmpty(d.Marks), "outcome": orNull(d.Outcome), "present": orNull(d.Present),
		"palette": paletteJSON(), "label": d.Label, "file": d.File,
	})
	if err != nil {
		return err
	}
	library, err := libraryHash()
	if err != nil {
		return err
	}

	policy := fmt.Sprintf("default-src 'none'; img-src data: blob:; style-src %s; script-src %s %s; base-uri 'none'; form-action 'none'",
		hash(style), hash(script), library)
	out := &errWriter{w: w}
	out.write(`<!doctype html>
<html lang="en">
<head>
<meta charset="utf-8">
<meta http-equiv="Content-Security-Policy" content="` + policy + `">
<meta name="viewport" content="width=device-width, initial-scale=1">
<meta name="referrer" content="no-referrer">
<title>` + template.HTMLEscapeString(d.Title) + `</title>
<style>` + style + `</style>
</head>
<body>
`)
	out.write(body.String())
	out.write("\n<script type=\"application/json\" id=\"page-data\">" + string(data) + "</script>\n")
	out.write("<script type=\"text/plain\" id=\"page-rows\">" + d.Data.packed + "</script>\n")
	out.write("<script type=\"text/plain\" id=\"page-library\">" + base64.StdEncoding.EncodeToString(assets.EChartsGzip) + "</script>\n")
	out.write("<script>" + script + "</script>\n</body>\n</html>\n")
	return out.err
}

type errWriter struct {
	w   io.Writer
	err error
}

func (e *errWriter) write(s string) {
	if e.err == nil {
		_, e.err = io.WriteString(e.w, s)
	}
}

// libraryHash names the library, as the browser runs it, in the policy.
var libraryHash = sync.OnceValues(func() (string, error) {
	js, err := assets.ECharts()
	return hash(string(js)), err
})

// hash names a style or script in the policy.
func hash(s string) string {
	sum := sha256.Sum256([]byte(s))
	return "'sha256-" + base64.StdEncoding.EncodeToString(sum[:]) + "'"
}

func orNull(v float64) any {
	if math.IsNaN(v) || math.IsInf(v, 0) {
		return nil
	}
	return v
}

func orEmpty[T any](s []T) []T {
	if s == nil {
		return []T{}
	}
	return s
}

// heights reserves the place of each chart before the script has drawn it.
func (d *Document) heights() string {
	var b strings.Builder
	for _, f := range d.Figures {
		fmt.Fprintf(&b, "#%s .plot{height:%dpx}\n", f.ID, f.Height)
	}
	return b.String()
}

// roleCSS gives shapes of inline drawings the colours of the palette.
func roleCSS() string {
	var roles []string
	for r := range Palette {
		roles = append(roles, r)
	}
	sort.Strings(roles)
	var b strings.Builder
	for _, r := range roles {
		fmt.Fprintf(&b, ".c%s{fill:var(%s);stroke:var(%s)}\n", strings.ReplaceAll("."+r, ".", "-"), cssName(r), cssName(r))
	}
	return b.String()
}
