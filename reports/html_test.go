package reports

import (
	"bytes"
	"encoding/json"
	"html"
	"regexp"
	"strings"
	"testing"

	"cycle/carbon/record"
)

func htmlText(t *testing.T, r *record.Run) string {
	t.Helper()
	var b bytes.Buffer
	if err := HTML(&b, r); err != nil {
		t.Fatal(err)
	}
	return b.String()
}

// The whole report stays small enough to be mailed, and the same run gives the
// same bytes.
func TestHTMLSize(t *testing.T) {
	for _, c := range []struct {
		r     *record.Run
		limit int
	}{{orrindel(), 600e3}, {quessmere(), 1000e3}} {
		text := htmlText(t, c.r)
		t.Logf("%s: %d bytes", c.r.Name, len(text))
		if len(text) > c.limit {
			t.Errorf("%s takes %d bytes, more than %d", c.r.Name, len(text), c.limit)
		}
		if text != htmlText(t, c.r) {
			t.Errorf("%s: the same run gives other bytes", c.r.Name)
		}
	}
}

var (
	dropped = regexp.MustCompile(`(?s)<(script|style)[ >].*?</(script|style)>|<pre.*?</pre>`)
	breaks  = regexp.MustCompile(`</?(p|div|h[1-6]|li|ul|ol|dt|dd|dl|tr|table|section|header|figure|figcaption|details|summary|button|text|svg|label|fieldset|blockquote)\b[^>]*>`)
	tags    = regexp.MustCompile(`<[^>]*>`)
)

// words is what a reader finds on the page, line by line; the licences, the
// scenario and the tables' cells in one line a row.
func words(page string) string {
	s := dropped.ReplaceAllString(page, "")
	s = regexp.MustCompile(`</t[dh]>`).ReplaceAllString(s, " | ")
	s = breaks.ReplaceAllString(s, "\n")
	s = html.UnescapeString(tags.ReplaceAllString(s, ""))
	var out []string
	for _, l := range strings.Split(s, "\n") {
		if l = strings.Join(strings.Fields(l), " "); l != "" {
			out = append(out, l)
		}
	}
	return strings.Join(out, "\n") + "\n"
}

// The words of the page, from hand-made records: the absurd one shows that
// every number comes out as given, and none is computed.
func TestHTMLGolden(t *testing.T) {
	golden(t, "orrindel.words.txt", words(htmlText(t, orrindel())))
	golden(t, "quessmere.words.txt", words(htmlText(t, quessmere())))
	golden(t, "absurd.words.txt", words(htmlText(t, absurd())))
	golden(t, "empty.words.txt", words(htmlText(t, &record.Run{})))
}

// The policy lets nothing in but the page's own parts, and the page names no
// other place to load from.
func TestHTMLPolicy(t *testing.T) {
	text := htmlText(t, orrindel())
	policy := regexp.MustCompile(`<meta http-equiv="Content-Security-Policy" content="([^"]*)">`).FindStringSubmatch(text)
	if policy == nil {
		t.Fatal("no policy")
	}
	hash := `'sha256-[A-Za-z0-9+/]{43}='`
	want := regexp.MustCompile(`^default-src 'none'; img-src data: blob:; style-src ` + hash + `; script-src ` + hash + ` ` + hash + `; base-uri 'none'; form-action 'none'$`)
	if !want.MatchString(policy[1]) {
		t.Errorf("policy: %s", policy[1])
	}
	if strings.Index(text, policy[0]) > strings.Index(text, "<title>") {
		t.Error("the policy stands after what it should guard")
	}
	shell := regexp.MustCompile(`(?s)<script.*?</script>|<pre.*?</pre>`).ReplaceAllString(text, "")
	for _, bad := range []string{" src=", "http://", "https://", "@import", "url(", " style=", " onclick="} {
		if i := strings.Index(shell, bad); i >= 0 {
			t.Errorf("the page holds %q: %.100s", bad, shell[i:])
		}
	}
}

// Whatever a text of the record holds, the page's own data stay data.
func TestHTMLHostile(t *testing.T) {
	for _, text := range hostileTexts {
		page := htmlText(t, hostile(text))
		for _, bad := range []string{"<img", "<svg onload", "<!--", "</style><"} {
			if strings.Contains(dropped.ReplaceAllString(page, ""), bad) {
				t.Errorf("%.30q: %s reaches the page as markup", text, bad)
			}
		}
		if n := strings.Count(page, "<script"); n != 4 {
			t.Errorf("%.30q: %d scripts", text, n)
		}
		data := regexp.MustCompile(`(?s)id="page-data">(.*?)</script>`).FindStringSubmatch(page)
		if data == nil || !json.Valid([]byte(data[1])) {
			t.Errorf("%.30q: the data of the page are no JSON", text)
		}
		if len(page) > 2<<20 {
			t.Errorf("%.30q: %d bytes", text, len(page))
		}
	}
}
