package reports

import (
	"context"
	"flag"
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"sync"
	"testing"
	"time"

	"github.com/chromedp/cdproto/emulation"
	"github.com/chromedp/cdproto/network"
	"github.com/chromedp/cdproto/runtime"
	"github.com/chromedp/chromedp"

	"cycle/carbon/record"
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

// load writes the report to a file and opens it; it waits until it is ready.
func (b *tab) load(r *record.Run) {
	b.Helper()
	path := filepath.Join(b.TempDir(), "report.html")
	if err := os.WriteFile(path, []byte(htmlText(b.T, r)), 0o666); err != nil {
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
		if !strings.HasPrefix(u, "file://") && !strings.HasPrefix(u, "blob:file://") {
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

func TestPictures(t *testing.T) {
	if *shots == "" {
		t.SkipNow()
	}
	for _, r := range []*record.Run{orrindel(), quessmere()} {
		for _, v := range []struct {
			name          string
			width, height int64
			dark          bool
		}{{"desktop", 1280, 800, false}, {"dark", 1280, 800, true}, {"phone", 390, 844, false}} {
			b := openTab(t)
			b.viewport(v.width, v.height, v.dark)
			b.load(r)
			b.settle()
			b.picture(r.Name+"-"+v.name+"-first.png", chromedp.CaptureScreenshot())
			b.picture(r.Name+"-"+v.name+".png", chromedp.FullScreenshot(100))
			b.quiet()
			t.Log(r.Name, v.name, "ready after", eval[string](b, `document.documentElement.dataset.ready`), "ms")
		}
	}
}
