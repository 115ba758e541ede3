package reports

import (
	"bufio"
	"io"
	"math"
	"strconv"
	"strings"

	"github.com/parquet-go/parquet-go"

	"cycle/carbon/record"
)

// ColumnName is the name of a column in history.csv and history.parquet: the
// machine name, then the unit, joined so that pandas and R take it as it is.
// "/" is written per and "%" percent: temperature_K, sunlight_W_per_m2,
// outgassing_Tmol_per_yr, hot_margin_percent, ph.
func ColumnName(c *record.Column) string {
	if c.Unit == "" {
		return c.Name
	}
	return c.Name + "_" + strings.NewReplacer("/", "_per_", "%", "percent", " ", "_").Replace(c.Unit)
}

// digits is how many significant digits a column is written with: ten, which
// is more than any tolerance of the solver earns, and fourteen for the age, so
// that rows of a fast passage stay distinct.
func digits(c *record.Column) int {
	if c.Name == "age" {
		return 14
	}
	return 10
}

// number writes a value of a column in the fewest characters that hold its
// digits; a missing or infinite value is empty.
func number(c *record.Column, v float64) string {
	if math.IsNaN(v) || math.IsInf(v, 0) {
		return ""
	}
	if v == 0 {
		v = 0 // no negative zero
	}
	return strconv.FormatFloat(v, 'g', digits(c), 64)
}

// HistoryCSV writes the history as history.csv: one header row of ColumnName,
// then one row for each record.Row in order of age, with the columns of
// record.Columns in their order. The decimal sign is a point, fields are
// separated by commas, lines end in a line feed. Numbers have ten significant
// digits (the age fourteen). A value that was not computed, or is infinite, is
// an empty field.
func HistoryCSV(w io.Writer, r *record.Run) error {
	b := bufio.NewWriter(w)
	for i := range record.Columns {
		if i > 0 {
			b.WriteByte(',')
		}
		b.WriteString(ColumnName(&record.Columns[i]))
	}
	b.WriteByte('\n')
	for j := range r.Rows {
		for i := range record.Columns {
			if i > 0 {
				b.WriteByte(',')
			}
			c := &record.Columns[i]
			b.WriteString(number(c, c.Value(&r.Rows[j])))
		}
		b.WriteByte('\n')
	}
	return b.Flush()
}

// HistoryParquet writes the history as history.parquet: the rows and the
// columns of history.csv under the same names, as optional doubles compressed
// with zstd, unrounded. Parquet sorts the columns by name. A value that was
// not computed, or is infinite, is null. The metadata hold, for each column X,
// "unit.X" (absent for a pure number) and "title.X", and of the run "title",
// "scenario_hash" and "version".
func HistoryParquet(w io.Writer, r *record.Run) error {
	group := parquet.Group{}
	byName := map[string]*record.Column{}
	opts := []parquet.WriterOption{
		parquet.Compression(&parquet.Zstd),
		parquet.CreatedBy("cycle", clean(r.Version), ""),
		parquet.KeyValueMetadata("title", clean(r.Title)),
		parquet.KeyValueMetadata("scenario_hash", clean(r.Hash)),
		parquet.KeyValueMetadata("version", clean(r.Version)),
	}
	for i := range record.Columns {
		c := &record.Columns[i]
		name := ColumnName(c)
		group[name] = parquet.Optional(parquet.Leaf(parquet.DoubleType))
		byName[name] = c
		opts = append(opts, parquet.KeyValueMetadata("title."+name, c.Title))
		if c.Unit != "" {
			opts = append(opts, parquet.KeyValueMetadata("unit."+name, c.Unit))
		}
	}
	schema := parquet.NewSchema("history", group)
	out := parquet.NewGenericWriter[any](w, append(opts, schema)...)
	values := make([]parquet.Value, len(r.Rows))
	for i, path := range schema.Columns() {
		c := byName[path[0]]
		for j := range r.Rows {
			v := c.Value(&r.Rows[j])
			if math.IsNaN(v) || math.IsInf(v, 0) {
				values[j] = parquet.NullValue().Level(0, 0, i)
			} else {
				values[j] = parquet.DoubleValue(v).Level(0, 1, i)
			}
		}
		if _, err := out.ColumnWriters()[i].WriteRowValues(values); err != nil {
			return err
		}
	}
	return out.Close()
}
