package reports

import (
	"bytes"
	"context"
	"encoding/csv"
	"encoding/json"
	"encoding/xml"
	"io"
	"math"
	"os"
	"os/exec"
	"path/filepath"
	"strconv"
	"strings"
	"testing"
	"time"

	"cycle/reports/internal/page"
)

// What firefox/check.mjs finds on a page.
type firefoxPage struct {
	Ready, Ground, Engine, Cursor, Focus string
	Width                                int
	Figures                              []struct {
		ID, Title, CSV, SVG string
		Drawing             bool
		Paths, Colours      int
		PNG                 [2]int
	}
	Whole, Zoomed, Again  [][2]float64
	Values, Scales, Boxes int
	Said, Asked           []string
	PDF                   int
}

// A second engine opens every kind of report from a file: Firefox, on a desk in
// light and on a phone in dark, with the same list of checks. It takes a while
// and more packages, so it runs where CYCLE_FIREFOX is set: make firefox.
func TestFirefox(t *testing.T) {
	if os.Getenv("CYCLE_FIREFOX") == "" {
		t.Skip("CYCLE_FIREFOX is not set: the reports were not opened in a second engine (make firefox)")
	}
	find := func(names ...string) string {
		for _, n := range names {
			if p, err := exec.LookPath(n); err == nil {
				return p
			}
		}
		t.Fatalf("no %s on PATH (make firefox installs it)", names[0])
		return ""
	}
	node, firefox := find("node"), find("firefox-esr", "firefox")
	packages, err := filepath.Abs(".npm")
	if err != nil {
		t.Fatal(err)
	}
	if _, err := os.Stat(filepath.Join(packages, "node_modules", "puppeteer-core")); err != nil {
		t.Fatalf("puppeteer-core is missing: %v (make firefox installs it)", err)
	}
	dir := t.TempDir()
	var files []string
	records := map[string]any{}
	for _, s := range reportSorts {
		records[s.name] = s.make()
		path, html := filepath.Join(dir, s.name+".html"), s.html(t, records[s.name])
		if strings.Contains(html, "data:font") {
			t.Errorf("%s carries a font", s.name)
		}
		if err := os.WriteFile(path, []byte(html), 0o666); err != nil {
			t.Fatal(err)
		}
		files = append(files, path)
	}
	for _, v := range []struct {
		scheme        string
		width, height int
		ground        string
	}{{"light", 1280, 900, "rgb(251, 250, 246)"}, {"dark", 390, 844, "rgb(21, 25, 28)"}} {
		ctx, cancel := context.WithTimeout(context.Background(), 15*time.Minute) // a guard against hanging
		cmd := exec.CommandContext(ctx, node, append([]string{filepath.Join("firefox", "check.mjs"), packages, firefox, dir, v.scheme, strconv.Itoa(v.width), strconv.Itoa(v.height)}, files...)...)
		if *shots != "" {
			cmd.Env = append(os.Environ(), "CYCLE_SHOTS="+*shots)
		}
		var out, errs bytes.Buffer
		cmd.Stdout, cmd.Stderr = &out, &errs
		err := cmd.Run()
		cancel()
		if err != nil {
			t.Fatalf("%v: %.3000s", err, errs.String())
		}
		var found map[string]firefoxPage
		if err := json.Unmarshal(out.Bytes(), &found); err != nil {
			t.Fatalf("%v: %.500q", err, out.String())
		}
		for _, s := range reportSorts {
			name := s.name + ", " + v.scheme + ", " + strconv.Itoa(v.width) + " px"
			p := found[s.name+".html"]
			t.Logf("%s: %s, ready after %s ms", name, p.Engine, p.Ready)
			if ms, err := strconv.Atoi(p.Ready); err != nil || ms <= 0 {
				t.Errorf("%s: ready %q", name, p.Ready)
			}
			if len(p.Said) > 0 {
				t.Errorf("%s: the page wrote to the console: %.1000q", name, p.Said)
			}
			if len(p.Asked) == 0 {
				t.Errorf("%s: no request was seen, not even that for the page", name)
			}
			for _, u := range p.Asked {
				// The font of the marks of a list or summary comes with Firefox; no page
				// holds one, and the policy would refuse it.
				if strings.HasPrefix(u, "data:font/woff2;") {
					continue
				}
				if !strings.HasPrefix(u, "file://") && !strings.HasPrefix(u, "blob:") && !strings.HasPrefix(u, "data:image/svg+xml;") {
					t.Errorf("%s: the page asked for %s", name, u)
				}
			}
			if p.Width > v.width || p.Width == 0 {
				t.Errorf("%s: the page is %d px wide", name, p.Width)
			}
			if p.Ground != v.ground {
				t.Errorf("%s: ground %s", name, p.Ground)
			}
			if p.PDF < 20000 {
				t.Errorf("%s: the PDF has %d bytes", name, p.PDF)
			}
			if len(p.Figures) == 0 {
				t.Errorf("%s: no figures", name)
			}
			var data *page.Data
			if s.data != nil {
				data = s.data(records[s.name])
			}
			for _, f := range p.Figures {
				if f.Paths < 2 || f.Colours < 20 || f.PNG[0] != 2700 {
					t.Errorf("%s: %s has %d paths and a PNG of %v px in %d colours", name, f.ID, f.Paths, f.PNG, f.Colours)
				}
				words := ""
				for dec := xml.NewDecoder(strings.NewReader(f.SVG)); ; {
					tok, err := dec.Token()
					if err == io.EOF {
						break
					}
					if err != nil {
						t.Errorf("%s: %s.svg is no XML: %v", name, f.ID, err)
						break
					}
					if text, ok := tok.(xml.CharData); ok {
						words += string(text)
					}
				}
				if !strings.Contains(words, f.Title) {
					t.Errorf("%s: %s.svg lacks its title: %.200q", name, f.ID, words)
				}
				rows, err := csv.NewReader(strings.NewReader(f.CSV)).ReadAll()
				if err != nil || len(rows) < 2 {
					t.Errorf("%s: %s.csv has %d rows, %v", name, f.ID, len(rows), err)
					continue
				}
				if f.Drawing {
					continue
				}
				if len(rows) != data.Rows+1 {
					t.Errorf("%s: %s.csv has %d rows, want %d", name, f.ID, len(rows)-1, data.Rows)
					continue
				}
				for k, header := range rows[0] {
					for _, c := range data.Columns {
						if c.Header != header {
							continue
						}
						for j, want := range c.Values {
							got, err := strconv.ParseFloat(rows[j+1][k], 64)
							if known(want) != (err == nil) || known(want) && math.Abs(got-want) > 1.2e-7*math.Abs(want) {
								t.Fatalf("%s: %s, %s, row %d: %q, want %v", name, f.ID, header, j, rows[j+1][k], want)
							}
						}
					}
				}
			}
			if s.data == nil {
				continue
			}
			if len(p.Whole) == 0 || len(p.Zoomed) != len(p.Whole) || p.Boxes == 0 || p.Scales != p.Boxes || p.Values == 0 || p.Cursor == "" || p.Focus == "none" {
				t.Errorf("%s: %d time axes, %d zoomed; %d of %d scales; %d values at the cursor %q; focus %q", name, len(p.Whole), len(p.Zoomed), p.Scales, p.Boxes, p.Values, p.Cursor, p.Focus)
				continue
			}
			lo, hi := p.Whole[0][0], p.Whole[0][1]
			for i := range p.Whole {
				z := p.Zoomed[i]
				if p.Again[i] != p.Whole[0] || math.Abs(z[0]-(lo+(hi-lo)/4)) > 1e-6 || math.Abs(z[1]-(lo+(hi-lo)/2)) > 1e-6 {
					t.Errorf("%s: axis %d spans %v, zoomed %v, then %v", name, i, p.Whole[i], z, p.Again[i])
				}
			}
		}
	}
}
