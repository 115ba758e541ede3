package reports

import (
	"context"
	"encoding/csv"
	"encoding/json"
	"encoding/xml"
	"flag"
	"fmt"
	"io"
	"math"
	"os"
	"os/exec"
	"path/filepath"
	"slices"
	"strconv"
	"strings"
	"sync"
	"testing"
	"time"

	"github.com/chromedp/cdproto/emulation"
	"github.com/chromedp/cdproto/network"
	"github.com/chromedp/cdproto/runtime"
	"github.com/chromedp/chromedp"
	"github.com/chromedp/chromedp/kb"

	"cycle/carbon/record"
	"cycle/reports/internal/num"
)

var shots = flag.String("shots", "", "folder to save pictures of the reports to")

// findBrowser returns the headless browser the tests drive. Without one the
// test is skipped, but where CI is set it fails: there the report must be seen.
func findBrowser(t *testing.T) string {
	t.Helper()
	for _, name := range []string{"chromium", "chromium-browser", "google-chrome", "google-chrome-stable", "chrome", "headless-shell"} {
		if path, err := exec.LookPath(name); err == nil {
			return path
		}
	}
	const words = "no Chromium or Chrome found on PATH: the report was not looked at (Debian: apt-get install chromium)"
	if os.Getenv("CI") != "" {
		t.Fatal(words)
	}
	t.Skip(words)
	return ""
}

// A tab is a page open in the browser, with all it said and asked for.
type tab struct {
	*testing.T
	ctx context.Context

	mu       sync.Mutex
	console  []string
	requests []string
}

var browser struct {
	sync.Once
	ctx context.Context
	err error
}

// openTab starts the browser on first use and opens an empty tab.
func openTab(t *testing.T) *tab {
	t.Helper()
	path := findBrowser(t)
	browser.Do(func() {
		opts := append(chromedp.DefaultExecAllocatorOptions[:], chromedp.ExecPath(path), chromedp.NoSandbox)
		alloc, _ := chromedp.NewExecAllocator(context.Background(), opts...)
		browser.ctx, _ = chromedp.NewContext(alloc)
		browser.err = chromedp.Do(browser.ctx)
	})
	if browser.err != nil {
		t.Fatal(browser.err)
	}
	ctx, cancel := chromedp.NewContext(browser.ctx)
	t.Cleanup(cancel)
	b := &tab{T: t, ctx: ctx}
	if err := chromedp.Do(ctx); err != nil {
		t.Fatal(err)
	}
	if _, err := chromedp.Call(ctx, network.Enable, network.EnableParams{}); err != nil {
		t.Fatal(err)
	}
	if err := chromedp.Listen(ctx, func(ev any) {
		b.mu.Lock()
		defer b.mu.Unlock()
		switch ev := ev.(type) {
		case *network.EventRequestWillBeSent:
			b.requests = append(b.requests, ev.Request.URL)
		case *runtime.EventExceptionThrown:
			b.console = append(b.console, fmt.Sprint("exception: ", ev.ExceptionDetails.Text))
		}
	}); err != nil {
		t.Fatal(err)
	}
	messages := chromedp.Console(ctx)
	go func() {
		for m, err := range messages {
			if err != nil {
				return
			}
			b.mu.Lock()
			b.console = append(b.console, m.String())
			b.mu.Unlock()
		}
	}()
	return b
}

func TestMain(m *testing.M) {
	flag.Parse()
	code := m.Run()
	if browser.ctx != nil {
		ctx, cancel := context.WithTimeout(browser.ctx, 10*time.Second)
		chromedp.Cancel(ctx)
		cancel()
	}
	os.Exit(code)
}

// load opens the report of a run.
func (b *tab) load(r *record.Run) {
	b.Helper()
	b.show(htmlText(b.T, r))
}

// show writes a report to a file and opens it; it waits until it is ready.
func (b *tab) show(html string) {
	b.Helper()
	path := filepath.Join(b.TempDir(), "report.html")
	if err := os.WriteFile(path, []byte(html), 0o666); err != nil {
		b.Fatal(err)
	}
	ctx, cancel := context.WithTimeout(b.ctx, 60*time.Second)
	defer cancel()
	if err := chromedp.Do(ctx, chromedp.Navigate("file://"+path), chromedp.WaitReady(chromedp.CSS("html[data-ready]"))); err != nil {
		b.Fatal(err)
	}
}

func (b *tab) viewport(width, height int64, dark bool) {
	b.Helper()
	scheme := "light"
	if dark {
		scheme = "dark"
	}
	if err := chromedp.Do(b.ctx, chromedp.EmulateViewport(width, height)); err != nil {
		b.Fatal(err)
	}
	if _, err := chromedp.Call(b.ctx, emulation.SetEmulatedMedia, emulation.SetEmulatedMediaParams{Features: []*emulation.MediaFeature{{Name: "prefers-color-scheme", Value: scheme}}}); err != nil {
		b.Fatal(err)
	}
}

// eval runs an expression in the page.
func eval[T any](b *tab, expr string) T {
	b.Helper()
	v, err := chromedp.Run(b.ctx, chromedp.Evaluate[T](expr, chromedp.EvalAwaitPromise))
	if err != nil {
		b.Fatalf("%s: %v", expr, err)
	}
	return v
}

// settle waits for the page to have drawn what was asked.
func (b *tab) settle() {
	b.Helper()
	eval[bool](b, `new Promise(r => requestAnimationFrame(() => requestAnimationFrame(() => setTimeout(() => r(true), 30))))`)
}

// quiet checks that the page said nothing and asked for nothing but itself.
func (b *tab) quiet() {
	b.Helper()
	b.settle()
	b.mu.Lock()
	defer b.mu.Unlock()
	if len(b.console) > 0 {
		b.Errorf("the page wrote to the console: %.2000q", b.console)
	}
	for _, u := range b.requests {
		// A drawing is made a PNG of its own text.
		if !strings.HasPrefix(u, "file://") && !strings.HasPrefix(u, "blob:file://") && !strings.HasPrefix(u, "data:image/svg+xml;") {
			b.Errorf("the page asked for %.200s", u)
		}
	}
	if len(b.requests) == 0 {
		b.Error("no request was seen, not even that for the page: the test sees nothing")
	}
}

func (b *tab) picture(name string, action chromedp.Action[[]byte]) {
	b.Helper()
	png, err := chromedp.Run(b.ctx, action)
	if err != nil {
		b.Fatal(err)
	}
	if *shots != "" {
		if err := os.WriteFile(filepath.Join(*shots, name), png, 0o666); err != nil {
			b.Fatal(err)
		}
	}
}

// opened is the report of a run on a desk.
func opened(t *testing.T, r *record.Run) *tab {
	t.Helper()
	return openedPage(t, htmlText(t, r))
}

// openedPage is a report on a desk.
func openedPage(t *testing.T, html string) *tab {
	t.Helper()
	b := openTab(t)
	b.viewport(1280, 900, false)
	b.show(html)
	// What the page saves is kept for the test instead of going to a folder.
	eval[bool](b, `(window.kept = [], (f => { URL.createObjectURL = blob => { kept.push(blob); return f.call(URL, blob); }; })(URL.createObjectURL),
		HTMLAnchorElement.prototype.click = function () { kept.push(this.download); }, true)`)
	return b
}

// saved presses a button and returns the name and the text that were saved.
func saved(b *tab, selector string) (name, text string) {
	b.Helper()
	eval[bool](b, `(kept.length = 0, document.querySelector(`+strconvQuote(selector)+`).click(), true)`)
	text = eval[string](b, `new Promise((done, fail) => { const t0 = Date.now(); (function wait() { if (kept.length === 2) kept[0].text().then(done); else if (Date.now() - t0 > 15000) fail(new Error("nothing was saved")); else setTimeout(wait, 20); })(); })`)
	return eval[string](b, `kept[1]`), text
}

func strconvQuote(s string) string {
	j, _ := json.Marshal(s)
	return string(j)
}

// axes gives the span of the time axis of every figure.
func axes(b *tab) [][2]float64 {
	b.Helper()
	text := eval[string](b, `JSON.stringify([...document.querySelectorAll(".figure")].flatMap(f => { const n = f.querySelectorAll(".plot").length; return [...f.querySelectorAll(".plot")].map(p => JSON.parse(p.dataset.span)); }))`)
	var out [][2]float64
	if err := json.Unmarshal([]byte(text), &out); err != nil {
		b.Fatal(err)
	}
	return out
}

func TestZoomLinksAllAxes(t *testing.T) {
	b := opened(t, quessmere())
	before := axes(b)
	if n := eval[int](b, `document.querySelectorAll(".plot path[stroke='#a1330f']").length`); n < 7 {
		t.Errorf("the outcome is drawn only %d times", n)
	}
	if len(before) != 8 {
		t.Fatalf("%d figures", len(before))
	}
	// Typed.
	eval[bool](b, `(() => { const f = document.getElementById("from"), t = document.getElementById("to"); f.value = "2"; t.value = "2.5"; t.dispatchEvent(new Event("change")); return true; })()`)
	b.settle()
	for i, a := range axes(b) {
		if a != [2]float64{2, 2.5} {
			t.Errorf("figure %d spans %v after the zoom", i, a)
		}
	}
	// What lies outside the window is gone: the date of the outcome, 1.2 Gyr.
	if n := eval[int](b, `document.querySelectorAll(".plot path[stroke='#a1330f']").length`); n != 0 {
		t.Errorf("the outcome is drawn %d times in a window that does not hold it", n)
	}
	// The cursor stays in view.
	if s := eval[string](b, `document.getElementById("now").value`); !strings.HasPrefix(s, "at 2.2") {
		t.Errorf("the cursor is left behind: %s", s)
	}
	// Every row is drawn once the window is narrow.
	rows := 0
	for _, row := range quessmere().Rows {
		if row.Age >= 2e9 && row.Age <= 2.5e9 {
			rows++
		}
	}
	if n := eval[int](b, `Number(document.querySelector("#ocean .plot").dataset.rows)`); n < rows || n > rows+3 {
		t.Errorf("%d rows are drawn of a window that holds %d", n, rows)
	}
	// Dragged, from 2.1 to about 2.3 Gyr on the ledger.
	eval[bool](b, `(document.querySelector("#fluxes").scrollIntoView({behavior: "instant"}), true)`)
	b.settle()
	at := eval[[]float64](b, `(() => { const s = document.querySelector("#fluxes .stage").getBoundingClientRect(), x = t => s.left + 64 + (s.width - 82) * (t - 2) / 0.5; return [x(2.1), x(2.3), s.top + 150]; })()`)
	if err := chromedp.Do(b.ctx, chromedp.DragAndDropXY(at[0], at[2], at[1], at[2])); err != nil {
		t.Fatal(err)
	}
	b.settle()
	first := axes(b)[0]
	if math.Abs(first[0]-2.1) > 0.01 || math.Abs(first[1]-2.3) > 0.01 {
		t.Errorf("dragging from 2.1 to 2.3 Gyr gives %v", first)
	}
	for i, a := range axes(b) {
		if a != first {
			t.Errorf("figure %d spans %v, the first %v", i, a, first)
		}
	}
	// Before present: the same span, counted from the reference age.
	eval[bool](b, `(document.querySelector("[name=clock][value=before]").click(), true)`)
	b.settle()
	for i, a := range axes(b) {
		if math.Abs(a[0]-(first[0]-4.57)) > 1e-9 || math.Abs(a[1]-(first[1]-4.57)) > 1e-9 {
			t.Errorf("figure %d spans %v before present", i, a)
		}
	}
	if s := eval[string](b, `document.querySelector("#ocean .plot").textContent`); !strings.Contains(s, "Gyr before (+ after) 4.57 Gyr") {
		t.Errorf("the time axis is not named anew: %.200q", s)
	}
	eval[bool](b, `(document.getElementById("whole").click(), true)`)
	b.settle()
	for i, a := range axes(b) {
		if math.Abs(a[0]-(before[i][0]-4.57)) > 1e-9 {
			t.Errorf("figure %d spans %v, not the whole history", i, a)
		}
	}
	b.quiet()
}

// The numbers the page saves and shows are those of the record.
func TestNumbersBehind(t *testing.T) {
	r := orrindel()
	r.Rows[3].Temperature = none
	b := opened(t, r)
	check := func(selector, wantName string, names ...string) {
		t.Helper()
		name, text := saved(b, selector)
		if name != wantName {
			t.Errorf("saved as %s, want %s", name, wantName)
		}
		rows, err := csv.NewReader(strings.NewReader(text)).ReadAll()
		if err != nil {
			t.Fatal(err)
		}
		if len(rows) != len(r.Rows)+1 || len(rows[0]) != len(names) {
			t.Fatalf("%s: %d rows of %d columns, want %d of %d", selector, len(rows)-1, len(rows[0]), len(r.Rows), len(names))
		}
		for k, name := range names {
			c := record.ColumnNamed(name)
			if rows[0][k] != ColumnName(c) {
				t.Errorf("column %d is %s, want %s", k, rows[0][k], ColumnName(c))
			}
			for j := range r.Rows {
				want := c.Value(&r.Rows[j])
				if !known(want) {
					if rows[j+1][k] != "" {
						t.Fatalf("%s, row %d: %q for a missing value", name, j, rows[j+1][k])
					}
					continue
				}
				got, err := strconv.ParseFloat(rows[j+1][k], 64)
				tol := 1.2e-7 // one step of single precision
				if name == "age" {
					tol = 1e-13
				}
				if err != nil || math.Abs(got-want) > tol*math.Abs(want) {
					t.Fatalf("%s, row %d: %q, want %v", name, j, rows[j+1][k], want)
				}
			}
		}
	}
	check(`[data-save=csv][data-figure=history]`, "orrindel-history.csv", "age", "temperature", "pco2", "sunlight")
	check(`[data-save=csv][data-figure=zone]`, "orrindel-zone.csv", "age", "zone_early_mars", "zone_recent_venus", "zone_outer", "zone_inner", "flux")
	var all []string
	for _, c := range record.Columns {
		all = append(all, c.Name)
	}
	check(`[data-save=rows]`, "orrindel-history.csv", all...)
	if name, text := saved(b, `[data-from=scenario]`); name != "orrindel.toml" || text != r.Scenario {
		t.Errorf("the scenario is saved as %s:\n%s", name, text)
	}
	if name, text := saved(b, `[data-from=bibtex]`); name != "orrindel.bib" || !strings.Contains(text, r.Works[1].BibTeX) {
		t.Errorf("the references are saved as %s:\n%s", name, text)
	}
	// The table on the page: each age and temperature stands in the record.
	cells := eval[[][]string](b, `[...document.querySelectorAll("#history tbody tr")].map(r => [...r.cells].map(c => c.textContent))`)
	if len(cells) < 20 {
		t.Fatalf("%d rows in the table", len(cells))
	}
	for _, row := range cells {
		found := false
		for j := range r.Rows {
			age, temp := r.Rows[j].Age/1e9, r.Rows[j].Temperature
			found = found || row[0] == num.Pretty(num.Short(age, 7)) && row[1] == num.Pretty(num.Short(temp, 5))
		}
		if !found {
			t.Errorf("no row of the record has age %s and temperature %s", row[0], row[1])
		}
	}
	b.quiet()
}

func TestSavedPictures(t *testing.T) {
	r := orrindel()
	r.Title = hostileTexts[0] + hostileTexts[5] + hostileTexts[3]
	b := opened(t, r)
	for _, f := range []string{"history", "fluxes", "zone"} {
		name, text := saved(b, `[data-save=svg][data-figure=`+f+`]`)
		if name != "orrindel-"+f+".svg" {
			t.Errorf("saved as %s", name)
		}
		dec := xml.NewDecoder(strings.NewReader(text))
		paths := 0
		for {
			tok, err := dec.Token()
			if err == io.EOF {
				break
			}
			if err != nil {
				t.Fatalf("%s is no XML: %v", f, err)
			}
			if el, ok := tok.(xml.StartElement); ok {
				paths++
				if el.Name.Local == "script" || el.Name.Local == "img" || el.Name.Local == "foreignObject" {
					t.Errorf("%s holds an element %s", f, el.Name.Local)
				}
			}
		}
		if paths < 40 || !strings.Contains(text, "Gyr") {
			t.Errorf("%s: %d elements, no picture", f, paths)
		}
		if *shots != "" {
			os.WriteFile(filepath.Join(*shots, name), []byte(text), 0o666)
		}
	}
	eval[bool](b, `(kept.length = 0, document.querySelector("[data-save=png][data-figure=fluxes]").click(), true)`)
	head := eval[[]int](b, `new Promise((done, fail) => { const t0 = Date.now(); (function wait() { if (kept.length === 2) kept[0].arrayBuffer().then(a => { const v = new DataView(a); done([v.getUint32(0), v.getUint32(16), v.getUint32(20), a.byteLength]); }); else if (Date.now() - t0 > 20000) fail(new Error("nothing was saved")); else setTimeout(wait, 20); })(); })`)
	if head[0] != 0x89504e47 || head[1] != 2700 || head[2] < 1200 || head[3] < 20000 {
		t.Errorf("the PNG begins with %x, has %d by %d px and %d bytes", head[0], head[1], head[2], head[3])
	}
	b.quiet()
}

// No text of a record becomes markup or code, and none breaks the layout.
func TestHostileTexts(t *testing.T) {
	for _, text := range hostileTexts {
		b := openTab(t)
		b.viewport(390, 844, false)
		b.load(hostile(text))
		if v := eval[bool](b, `"HURT" in window`); v {
			t.Errorf("%.40q ran as code", text)
		}
		if n := eval[int](b, `document.querySelectorAll("img, iframe, object, embed, link, base, svg svg, [onerror], [onload]").length`); n > 0 {
			t.Errorf("%.40q made %d elements", text, n)
		}
		if n := eval[int](b, `document.scripts.length`); n != 5 {
			t.Errorf("%.40q: %d scripts", text, n)
		}
		if n := eval[int](b, `document.querySelectorAll(".plot svg").length`); n != 8 {
			t.Errorf("%.40q: %d figures are drawn", text, n)
		}
		for _, width := range []int64{390, 1280} {
			b.viewport(width, 844, false)
			b.settle()
			if w := eval[int64](b, `document.documentElement.scrollWidth`); w > width {
				t.Errorf("%.40q: the page is %d px wide at %d px", text, w, width)
			}
			if h := eval[int64](b, `document.querySelector("header").offsetHeight`); h > 1200 {
				t.Errorf("%.40q: the head of the page is %d px high at %d px", text, h, width)
			}
		}
		b.quiet()
	}
}

// A gap in the record is a gap in the curve, in the middle and at the ends.
func TestGaps(t *testing.T) {
	r := orrindel()
	for i := 300; i < 400; i++ {
		r.Rows[i].Temperature = none
	}
	for i := range r.Rows {
		r.Rows[i].PH = none
		r.Rows[i].DIC, r.Rows[i].Alk = math.Inf(1), none
	}
	b := opened(t, r)
	if n := eval[int](b, `document.querySelectorAll("#ocean").length`); n != 0 {
		t.Error("a figure without numbers is shown")
	}
	// The longest path in ink of the first figure is the temperature: broken once.
	moves := eval[[]int](b, `[...document.querySelectorAll("#history .plot path[stroke='#1c2529']")].map(p => (p.getAttribute("d").match(/M/g) || []).length)`)
	if !slices.Contains(moves, 2) {
		t.Errorf("no curve is broken in two: %v", moves)
	}
	b.quiet()
}

// The cursor reads all curves at one time, from the keyboard too; a curve can
// be hidden.
func TestCursorAndKey(t *testing.T) {
	r := orrindel()
	b := opened(t, r)
	eval[bool](b, `(document.getElementById("cursor").focus(), true)`)
	if err := chromedp.Do(b.ctx, chromedp.KeyEvent(kb.Home), chromedp.KeyEvent(kb.ArrowRight), chromedp.KeyEvent(kb.ArrowRight)); err != nil {
		t.Fatal(err)
	}
	b.settle()
	if got, want := eval[string](b, `document.querySelector("#history .value").textContent`), "289.2 K"; got != want {
		t.Errorf("the temperature at the cursor is %q, want %q (row 2: %v)", got, want, r.Rows[2].Temperature)
	}
	if got := eval[string](b, `document.getElementById("cursor").getAttribute("aria-valuetext")`); got != "0.313348 Gyr" {
		t.Errorf("the cursor is at %q for a screen reader", got)
	}
	if got := eval[string](b, `document.querySelector("#history .plot").getAttribute("aria-label")`); !strings.Contains(got, "Climate through time") || !strings.Contains(got, "coldest") {
		t.Errorf("the figure is called %q", got)
	}
	before := eval[int](b, `document.querySelectorAll("#reservoirs .plot path").length`)
	eval[bool](b, `(document.querySelector("#reservoirs .key button").click(), true)`)
	b.settle()
	if after := eval[int](b, `document.querySelectorAll("#reservoirs .plot path").length`); after >= before {
		t.Errorf("%d paths with all curves, %d with one hidden", before, after)
	}
	b.quiet()
}

func TestPrint(t *testing.T) {
	b := openTab(t)
	b.viewport(1280, 900, true) // printed from a dark page, on white paper
	b.load(orrindel())
	pdf, err := chromedp.Run(b.ctx, chromedp.PrintToPDF(chromedp.PDFPaper(chromedp.PaperA4)))
	if err != nil {
		t.Fatal(err)
	}
	if !strings.HasPrefix(string(pdf), "%PDF-") || len(pdf) < 50000 {
		t.Errorf("the PDF has %d bytes", len(pdf))
	}
	if *shots != "" {
		os.WriteFile(filepath.Join(*shots, "orrindel.pdf"), pdf, 0o666)
	}
	// While printing, charts have the width of the paper and its colours.
	got := eval[[]string](b, `(() => { dispatchEvent(new Event("beforeprint")); const s = document.querySelector("#history .plot svg"), r = [s.getAttribute("width"), String(s.querySelectorAll("path[stroke='#1c2529']").length > 0)]; dispatchEvent(new Event("afterprint")); return r; })()`)
	if got[0] != "700" || got[1] != "true" {
		t.Errorf("printed with width %s, in ink on white: %s", got[0], got[1])
	}
	b.settle()
	if w := eval[int](b, `Number(document.querySelector("#history .plot svg").getAttribute("width")) - document.querySelector("#history .stage").clientWidth`); w != 0 {
		t.Errorf("after printing the chart is %d px wider than its place", w)
	}
	b.quiet()
}
