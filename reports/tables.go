package reports

import (
	"encoding/csv"
	"io"
	"math"
	"strconv"
	"strings"

	"github.com/mattn/go-runewidth"
	"github.com/parquet-go/parquet-go"
)

// A sheet is a table of results: every column holds texts or numbers.
type sheet struct {
	name string
	head []string // names with units, as in history.csv
	rows [][]any  // string, float64 or int
}

func (s *sheet) add(cells ...any) { s.rows = append(s.rows, cells) }

// text writes a cell for CSV: ten significant digits, nothing where there is no
// number.
func text(v any) string {
	switch v := v.(type) {
	case string:
		return clean(v)
	case int:
		return strconv.Itoa(v)
	case bool:
		return strconv.FormatBool(v)
	case float64:
		if math.IsNaN(v) || math.IsInf(v, 0) {
			return ""
		}
		if v == 0 {
			v = 0 // no negative zero
		}
		return strconv.FormatFloat(v, 'g', 10, 64)
	}
	return ""
}

// CSV writes the sheet under a header row.
func (s *sheet) csv(w io.Writer) error {
	out := csv.NewWriter(w)
	head := make([]string, len(s.head))
	for i, h := range s.head {
		head[i] = clean(h)
	}
	if err := out.Write(head); err != nil {
		return err
	}
	for _, r := range s.rows {
		line := make([]string, len(r))
		for i, v := range r {
			line[i] = text(v)
		}
		if err := out.Write(line); err != nil {
			return err
		}
	}
	out.Flush()
	return out.Error()
}

// parquet writes the sheet with the same columns: optional doubles and texts.
func (s *sheet) parquet(w io.Writer, meta map[string]string) error {
	group := parquet.Group{}
	at := map[string]int{}
	for i, h := range s.head {
		at[h] = i
		leaf := parquet.String()
		if len(s.rows) > 0 {
			if _, ok := s.rows[0][i].(string); !ok {
				leaf = parquet.Leaf(parquet.DoubleType)
			}
		}
		group[h] = parquet.Optional(leaf)
	}
	schema := parquet.NewSchema(s.name, group)
	opts := []parquet.WriterOption{schema, parquet.Compression(&parquet.Zstd), parquet.CreatedBy("cycle", clean(meta["version"]), "")}
	for _, k := range []string{"title", "scenario_hash", "version"} {
		opts = append(opts, parquet.KeyValueMetadata(k, clean(meta[k])))
	}
	out := parquet.NewGenericWriter[any](w, opts...)
	for i, path := range schema.Columns() {
		j := at[path[0]]
		values := make([]parquet.Value, len(s.rows))
		for k, r := range s.rows {
			v := parquet.NullValue().Level(0, 0, i)
			switch c := r[j].(type) {
			case string:
				v = parquet.ByteArrayValue([]byte(clean(c))).Level(0, 1, i)
			case int:
				v = parquet.DoubleValue(float64(c)).Level(0, 1, i)
			case float64:
				if !math.IsNaN(c) && !math.IsInf(c, 0) {
					v = parquet.DoubleValue(c).Level(0, 1, i)
				}
			}
			values[k] = v
		}
		if _, err := out.ColumnWriters()[i].WriteRowValues(values); err != nil {
			return err
		}
	}
	return out.Close()
}

// header joins a name and a unit as in history.csv.
func header(name, unit string) string {
	name = strings.NewReplacer(".", "_", " ", "_").Replace(name)
	if unit == "" {
		return name
	}
	return name + "_" + strings.NewReplacer("/", "_per_", "%", "percent", " ", "_").Replace(unit)
}

// columns sets texts under one another for a terminal; the last column is cut to
// what is left of the width.
func columns(width int, rows [][]string) []string {
	var wide []int
	for _, r := range rows {
		for i, c := range r {
			if i >= len(wide) {
				wide = append(wide, 0)
			}
			wide[i] = max(wide[i], runewidth.StringWidth(c))
		}
	}
	// The widest columns give way until the last has room.
	room := func() int {
		n := width
		for i := range len(wide) - 1 {
			n -= wide[i] + 2
		}
		return n
	}
	for room() < min(16, width/4) {
		k := 0
		for i := range len(wide) - 1 {
			if wide[i] > wide[k] {
				k = i
			}
		}
		if wide[k] <= 4 {
			break
		}
		wide[k]--
	}
	var out []string
	for _, r := range rows {
		var b strings.Builder
		used := 0
		for i, c := range r {
			if i < len(r)-1 {
				c = short(c, wide[i])
			}
			if i == len(r)-1 {
				b.WriteString(short(c, max(width-used, 8)))
				break
			}
			b.WriteString(c + strings.Repeat(" ", wide[i]-runewidth.StringWidth(c)+2))
			used += wide[i] + 2
		}
		out = append(out, strings.TrimRight(b.String(), " "))
	}
	return out
}
