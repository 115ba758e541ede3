package reports

import (
	"html/template"
	"io"

	"cycle/carbon/record"
)

var firstPage = template.Must(template.New("report").Parse(`<!doctype html>
<html lang="en"><head><meta charset="utf-8"><meta http-equiv="Content-Security-Policy" content="default-src 'none'; base-uri 'none'; form-action 'none'">
<title>{{.Outcome.Sentence}}</title></head><body><h1>{{.Outcome.Sentence}}</h1><p>{{.Outcome.Why}}</p>
<ul>{{range .Warnings}}<li>{{.About}}: {{.Words}}</li>{{end}}</ul></body></html>
`))

// HTML writes the run as report.html: one file that needs nothing else.
func HTML(w io.Writer, r *record.Run) error { return firstPage.Execute(w, r) }
