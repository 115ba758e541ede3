package reports

import (
	"bytes"
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

func TestHTMLSize(t *testing.T) {
	for _, c := range []struct {
		r     *record.Run
		limit int
	}{{orrindel(), 600e3}, {quessmere(), 1000e3}} {
		n := len(htmlText(t, c.r))
		t.Logf("%s: %d bytes", c.r.Name, n)
		if n > c.limit {
			t.Errorf("%s takes %d bytes, more than %d", c.r.Name, n, c.limit)
		}
	}
}
