package reports

import (
	"bytes"
	"encoding/csv"
	"encoding/json"
	"flag"
	"io"
	"math"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"testing"
	"unicode"

	"github.com/google/go-cmp/cmp"
	"github.com/mattn/go-runewidth"
	"github.com/parquet-go/parquet-go"

	"cycle/carbon/record"
)

var update = flag.Bool("update", false, "rewrite the golden files under testdata")

// golden compares with a file under testdata, or rewrites it with -update.
func golden(t *testing.T, name, got string) {
	t.Helper()
	path := filepath.Join("testdata", name)
	if *update {
		if err := os.MkdirAll("testdata", 0o777); err != nil {
			t.Fatal(err)
		}
		if err := os.WriteFile(path, []byte(got), 0o666); err != nil {
			t.Fatal(err)
		}
		return
	}
	want, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	if d := cmp.Diff(string(want), got); d != "" {
		t.Errorf("%s (-want +got; -update rewrites it):\n%s", name, d)
	}
}

func terminalText(t *testing.T, r *record.Run, o TerminalOptions) string {
	t.Helper()
	var b bytes.Buffer
	if err := Terminal(&b, r, o); err != nil {
		t.Fatal(err)
	}
	return b.String()
}

func TestTerminalGolden(t *testing.T) {
	golden(t, "orrindel.txt", terminalText(t, orrindel(), TerminalOptions{}))
	golden(t, "quessmere.txt", terminalText(t, quessmere(), TerminalOptions{}))
	golden(t, "quessmere-colour.txt", terminalText(t, quessmere(), TerminalOptions{Width: 100, Color: true}))
	golden(t, "absurd.txt", terminalText(t, absurd(), TerminalOptions{}))
}

// The verdict fits a terminal whatever the texts, and no text of a scenario
// reaches the terminal as a control character.
func TestTerminalFits(t *testing.T) {
	runs := []*record.Run{orrindel(), quessmere(), absurd(), {}}
	for _, s := range hostileTexts {
		runs = append(runs, hostile(s))
	}
	many := orrindel()
	for range 60 {
		many.Warnings = append(many.Warnings, many.Warnings[0])
		many.Margins = append(many.Margins, many.Margins[0])
	}
	runs = append(runs, many)
	for _, r := range runs {
		for _, width := range []int{0, 20, 60, 80, 100} {
			text := terminalText(t, r, TerminalOptions{Width: width})
			lines := strings.Split(strings.TrimSuffix(text, "\n"), "\n")
			if limit := min(max(width, 60), 100); width != 0 {
				for _, l := range lines {
					if n := runewidth.StringWidth(l); n > limit {
						t.Errorf("title %.20q, width %d: a line of %d columns: %.90q", r.Title, width, n, l)
					}
				}
			}
			if (width == 0 || width >= 80) && len(lines) > 25 {
				t.Errorf("title %.20q: %d lines", r.Title, len(lines))
			}
			for _, c := range text {
				if c != '\n' && (unicode.IsControl(c) || unicode.Is(unicode.Bidi_Control, c)) {
					t.Errorf("title %.20q: control character %U in the text", r.Title, c)
					break
				}
			}
		}
	}
	if s := terminalText(t, many, TerminalOptions{}); !strings.Contains(s, "more in report.html") {
		t.Errorf("63 doubts, and the verdict does not say that some are left out:\n%s", s)
	}
}

func summaryText(t *testing.T, r *record.Run) string {
	t.Helper()
	var b bytes.Buffer
	if err := SummaryJSON(&b, r); err != nil {
		t.Fatal(err)
	}
	return b.String()
}

func TestSummaryGolden(t *testing.T) {
	golden(t, "orrindel.json", summaryText(t, orrindel()))
	golden(t, "absurd.json", summaryText(t, absurd()))
}

func TestSummaryValid(t *testing.T) {
	r := orrindel()
	r.Feedback = record.Feedback{Gain: none, ResponseKyr: math.Inf(1), Sensitivity: math.Inf(-1)}
	r.Seed = math.MaxUint64
	r.Scenario, r.Command = "SECRET", "SECRET"
	r.Inputs[0].Origin = "SECRET"
	for _, title := range hostileTexts {
		r.Title = title
		text := summaryText(t, r)
		if strings.Contains(text, "SECRET") || strings.Contains(text, "NaN") || strings.Contains(text, "Inf") {
			t.Errorf("summary holds what it must not:\n%.2000s", text)
		}
		dec := json.NewDecoder(strings.NewReader(text))
		dec.UseNumber()
		var got struct {
			Format   int
			Title    string
			Seed     json.Number
			Feedback map[string]any
			Marks    []map[string]any
			Inputs   any
		}
		if err := dec.Decode(&got); err != nil {
			t.Fatalf("title %.30q: %v", title, err)
		}
		if got.Format != 1 || got.Title != strings.ToValidUTF8(title, "\ufffd") || got.Seed != "18446744073709551615" {
			t.Errorf("format %d, title %.40q, seed %s", got.Format, got.Title, got.Seed)
		}
		if got.Feedback["gain"] != nil || got.Feedback["response_time_kyr"] != nil || got.Marks[3]["error_gyr"] != nil {
			t.Errorf("a missing number is not null: %v, %v", got.Feedback, got.Marks[3])
		}
	}
	// Empty lists are lists.
	if s := summaryText(t, &record.Run{}); strings.Contains(s, "null") || !strings.Contains(s, `"marks": []`) {
		t.Errorf("an empty run has null:\n%s", s)
	}
}

func TestHistoryCSV(t *testing.T) {
	r := orrindel()
	r.Rows[3].Temperature = none
	r.Rows[4].ColdMargin = math.Inf(1)
	var b bytes.Buffer
	if err := HistoryCSV(&b, r); err != nil {
		t.Fatal(err)
	}
	rows, err := csv.NewReader(&b).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	if len(rows) != len(r.Rows)+1 {
		t.Fatalf("%d rows, want %d", len(rows)-1, len(r.Rows))
	}
	golden(t, "header.csv", strings.Join(rows[0], "\n")+"\n")
	seen := map[string]bool{}
	for i := range record.Columns {
		c := &record.Columns[i]
		if seen[rows[0][i]] {
			t.Errorf("column %s twice", rows[0][i])
		}
		seen[rows[0][i]] = true
		for j := range r.Rows {
			text, want := rows[j+1][i], c.Value(&r.Rows[j])
			if math.IsNaN(want) || math.IsInf(want, 0) {
				if text != "" {
					t.Fatalf("%s, row %d: %q for a missing value", c.Name, j, text)
				}
				continue
			}
			got, err := strconv.ParseFloat(text, 64)
			if err != nil || math.Abs(got-want) > 1e-9*math.Abs(want) {
				t.Fatalf("%s, row %d: %q, want %v", c.Name, j, text, want)
			}
		}
	}
	// Two rows a week apart keep their order.
	r.Rows = []record.Row{{Age: 4.5e9}, {Age: 4.5e9 + 0.02}}
	b.Reset()
	if err := HistoryCSV(&b, r); err != nil {
		t.Fatal(err)
	}
	rows, _ = csv.NewReader(&b).ReadAll()
	if rows[1][0] == rows[2][0] {
		t.Errorf("ages a week apart are both written %s", rows[1][0])
	}
}

func TestHistoryParquet(t *testing.T) {
	r := orrindel()
	r.Rows[3].Temperature = none
	r.Rows[4].ColdMargin = math.Inf(1)
	var b bytes.Buffer
	if err := HistoryParquet(&b, r); err != nil {
		t.Fatal(err)
	}
	for range 5 {
		var again bytes.Buffer
		if err := HistoryParquet(&again, r); err != nil {
			t.Fatal(err)
		}
		if !bytes.Equal(b.Bytes(), again.Bytes()) {
			t.Fatal("the same run gives other bytes")
		}
	}
	f, err := parquet.OpenFile(bytes.NewReader(b.Bytes()), int64(b.Len()))
	if err != nil {
		t.Fatal(err)
	}
	if f.NumRows() != int64(len(r.Rows)) {
		t.Fatalf("%d rows, want %d", f.NumRows(), len(r.Rows))
	}
	if u, _ := f.Lookup("unit.outgassing_Tmol_per_yr"); u != "Tmol/yr" {
		t.Errorf("unit of outgassing in the metadata is %q", u)
	}
	if codec := f.Metadata().RowGroups[0].Columns[0].MetaData.Codec.String(); !strings.EqualFold(codec, "zstd") {
		t.Errorf("compressed with %s", codec)
	}
	columns := f.Schema().Columns()
	if len(columns) != len(record.Columns) {
		t.Fatalf("%d columns, want %d", len(columns), len(record.Columns))
	}
	at := map[string]int{}
	for i, p := range columns {
		at[p[0]] = i
	}
	rows := make([]parquet.Row, len(r.Rows))
	reader := f.RowGroups()[0].Rows()
	defer reader.Close()
	if n, err := reader.ReadRows(rows); n != len(rows) || err != nil && err != io.EOF {
		t.Fatal(n, err)
	}
	for i := range record.Columns {
		c := &record.Columns[i]
		k, ok := at[ColumnName(c)]
		if !ok {
			t.Fatalf("no column %s", ColumnName(c))
		}
		for j := range r.Rows {
			got, want := rows[j][k], c.Value(&r.Rows[j])
			if math.IsNaN(want) || math.IsInf(want, 0) {
				if !got.IsNull() {
					t.Fatalf("%s, row %d: %v for a missing value", c.Name, j, got)
				}
			} else if got.IsNull() || got.Double() != want {
				t.Fatalf("%s, row %d: %v, want %v", c.Name, j, got, want)
			}
		}
	}
}
