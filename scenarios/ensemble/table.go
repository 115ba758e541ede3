package ensemble

import (
	"bufio"
	"fmt"
	"io"
	"math"
	"slices"
	"strconv"
	"strings"

	"github.com/parquet-go/parquet-go"

	"cycle/carbon/record"
	"cycle/carbon/units"
	"cycle/scenarios"
)

// column is one column of members.parquet and one number of the journal.
type column struct {
	name, unit, title string
	words             []string // of an enumeration: the number is the index
	integer           bool
	scale, offset     float64 // shown value = (value − offset)/scale
	get               func(*Row) float64
}

// shown returns the value as the table has it.
func (c *column) shown(v float64) float64 {
	v = (v - c.offset) / c.scale
	if math.IsInf(v, 0) {
		return math.NaN()
	}
	return v
}

var unitNames = strings.NewReplacer("/", "_per_", "%", "percent", " ", "_")

func columnName(name, unit string) string {
	name = strings.NewReplacer(".", "_", " ", "_").Replace(name)
	if unit != "" {
		name += "_" + unitNames.Replace(unit)
	}
	return name
}

// table lists the columns of the members: index, drawn values, outcome, dates,
// end, climate at the ages asked for.
func (p *Plan) table() []column {
	var out []column
	add := func(name, unit, title string, get func(*Row) float64) *column {
		out = append(out, column{name: columnName(name, unit), unit: unit, title: title, scale: 1, get: get})
		return &out[len(out)-1]
	}
	add("member", "", "index of the member, from 0", func(r *Row) float64 { return float64(r.Index) }).integer = true
	for j := range p.priors {
		pr := &p.priors[j]
		get := func(r *Row) float64 { return r.Values[j] }
		if pr.Shape == scenarios.Chosen {
			add(pr.Key, "", "drawn: "+pr.Key, get).words = pr.Choices
			continue
		}
		f := p.fieldOf(pr)
		c := add(pr.Key, f.ShownUnit(), "drawn: "+f.Doc, get)
		c.scale, c.offset, _ = f.Kind.Scale(f.ShownUnit())
	}
	var kinds []string
	for _, k := range record.Kinds {
		kinds = append(kinds, string(k))
	}
	add("outcome", "", "the first lasting failure", func(r *Row) float64 { return float64(slices.Index(record.Kinds, r.Kind)) }).words = kinds
	add("outcome_age", "Gyr", "age of the star at the outcome", func(r *Row) float64 { return r.TimeGyr })
	add("status", "", "how the history ended", func(r *Row) float64 { return float64(slices.Index(record.Statuses, r.Status)) }).words = record.Statuses
	for i, c := range record.Clocks {
		add("first "+c, "Gyr", "age of the star when first: "+c, func(r *Row) float64 { return r.Clocks[i] })
	}
	add("end_age", "Gyr", "age of the star at the end of the history", func(r *Row) float64 { return r.EndGyr })
	add("end_temperature", "K", "temperature at the end", func(r *Row) float64 { return r.EndT })
	add("end_pco2", "bar", "CO2 partial pressure at the end", func(r *Row) float64 { return r.EndP })
	add("end_ph", "", "pH of the ocean at the end", func(r *Row) float64 { return r.EndPH })
	add("coldest", "K", "lowest temperature up to the failure", func(r *Row) float64 { return r.ColdestK })
	add("hottest", "K", "highest temperature up to the failure", func(r *Row) float64 { return r.HottestK })
	add("freezes", "", "number of freezes", func(r *Row) float64 { return float64(r.Freezes) }).integer = true
	add("frozen_share", "", "part of the history spent frozen", func(r *Row) float64 { return r.FrozenShare })
	solved, unit := "what was solved for", ""
	switch p.Scenario.Setup.Solve {
	case "total":
		solved, unit = "total carbon, solved for", "mol"
	case "outgassing":
		solved = "scale of the sources, solved for"
	}
	add("solved", unit, solved, func(r *Row) float64 { return r.Solved })
	add("residual", "", "ln(pCO2/reference pCO2) left after the solve", func(r *Row) float64 { return r.Residual })
	add("carbon_drift", "", "largest relative change of total carbon", func(r *Row) float64 { return r.Drift })
	add("steps", "", "steps of the solver", func(r *Row) float64 { return float64(r.Steps) }).integer = true
	add("evaluations", "", "evaluations of the right-hand side", func(r *Row) float64 { return float64(r.Evals) }).integer = true
	for i, age := range p.Scenario.Uncertain.Ages {
		at := strings.ReplaceAll(units.Time.Format(age, "Gyr"), " ", "")
		say := " at " + units.Time.Format(age, "Gyr")
		add("temperature at "+at, "K", "temperature"+say, func(r *Row) float64 { return r.At[i].Temperature })
		add("pco2 at "+at, "bar", "CO2 partial pressure"+say, func(r *Row) float64 { return r.At[i].PCO2 })
		add("ph at "+at, "", "pH of the ocean"+say, func(r *Row) float64 { return r.At[i].PH })
	}
	return out
}

// numbers packs a row.
func (p *Plan) numbers(r *Row) []float64 {
	out := make([]float64, len(p.columns))
	for i := range p.columns {
		out[i] = p.columns[i].get(r)
	}
	return out
}

// rowGroup is the number of members of one row group.
const rowGroup = 8192

// parquetWriter streams members into members.parquet.
type parquetWriter struct {
	cols  []column // in the order of the schema
	from  []int    // their place in a record
	out   *parquet.GenericWriter[any]
	cells [][]parquet.Value
	n     int
}

func (p *Plan) newParquet(w io.Writer) *parquetWriter {
	group := parquet.Group{}
	at := map[string]int{}
	meta := func(k, v string) parquet.WriterOption { return parquet.KeyValueMetadata(k, v) }
	opts := []parquet.WriterOption{
		parquet.Compression(&parquet.Zstd), parquet.CreatedBy("cycle", p.Version, ""),
		meta("title", p.Scenario.Title), meta("scenario_hash", p.Scenario.EnsembleHash()), meta("version", p.Version),
		meta("seed", strconv.FormatUint(p.Seed, 10)), meta("design", p.Design),
	}
	for i := range p.columns {
		c := &p.columns[i]
		at[c.name] = i
		switch {
		case c.words != nil:
			group[c.name] = parquet.Optional(parquet.Encoded(parquet.String(), &parquet.RLEDictionary))
		case c.integer:
			group[c.name] = parquet.Optional(parquet.Leaf(parquet.Int64Type))
		default:
			group[c.name] = parquet.Optional(parquet.Leaf(parquet.DoubleType))
		}
		opts = append(opts, meta("title."+c.name, c.title))
		if c.unit != "" {
			opts = append(opts, meta("unit."+c.name, c.unit))
		}
	}
	for j := range p.priors {
		opts = append(opts, meta("key."+p.columns[1+j].name, p.priors[j].Key))
	}
	schema := parquet.NewSchema("members", group)
	t := &parquetWriter{out: parquet.NewGenericWriter[any](w, append(opts, schema)...)}
	for _, path := range schema.Columns() {
		i := at[path[0]]
		t.cols, t.from = append(t.cols, p.columns[i]), append(t.from, i)
	}
	t.cells = make([][]parquet.Value, len(t.cols))
	return t
}

func (t *parquetWriter) write(rec []float64) error {
	for i := range t.cols {
		c, v := &t.cols[i], rec[t.from[i]]
		cell := parquet.NullValue().Level(0, 0, i)
		switch x := c.shown(v); {
		case math.IsNaN(x):
		case c.words != nil:
			cell = parquet.ByteArrayValue([]byte(c.words[int(x)])).Level(0, 1, i)
		case c.integer:
			cell = parquet.Int64Value(int64(x)).Level(0, 1, i)
		default:
			cell = parquet.DoubleValue(x).Level(0, 1, i)
		}
		t.cells[i] = append(t.cells[i], cell)
	}
	if t.n++; t.n == rowGroup {
		return t.flush()
	}
	return nil
}

func (t *parquetWriter) flush() error {
	if t.n == 0 {
		return nil
	}
	for i := range t.cells {
		if _, err := t.out.ColumnWriters()[i].WriteRowValues(t.cells[i]); err != nil {
			return err
		}
		t.cells[i] = t.cells[i][:0]
	}
	t.n = 0
	return t.out.Flush()
}

func (t *parquetWriter) close() error {
	if err := t.flush(); err != nil {
		return err
	}
	return t.out.Close()
}

// csvWriter writes the same table as CSV, unrounded; what is missing is empty.
type csvWriter struct {
	cols []column
	out  *bufio.Writer
}

func (p *Plan) newCSV(w io.Writer) *csvWriter {
	t := &csvWriter{p.columns, bufio.NewWriterSize(w, 1<<16)}
	for i := range t.cols {
		if i > 0 {
			t.out.WriteByte(',')
		}
		t.out.WriteString(t.cols[i].name)
	}
	t.out.WriteByte('\n')
	return t
}

func (t *csvWriter) write(rec []float64) error {
	for i := range t.cols {
		if i > 0 {
			t.out.WriteByte(',')
		}
		c := &t.cols[i]
		switch x := c.shown(rec[i]); {
		case math.IsNaN(x):
		case c.words != nil:
			t.out.WriteString(c.words[int(x)])
		default:
			t.out.WriteString(strconv.FormatFloat(x, 'g', -1, 64))
		}
	}
	return t.out.WriteByte('\n')
}

// reader gives members.parquet back as records, a batch at a time.
func readMembers(r io.ReaderAt, size int64, p *Plan, each func(rec []float64) error) error {
	f, err := parquet.OpenFile(r, size)
	if err != nil {
		return err
	}
	if h, _ := f.Lookup("scenario_hash"); h != p.Scenario.EnsembleHash() {
		return fmt.Errorf("members of another scenario, %s instead of %s", h, p.Scenario.EnsembleHash())
	}
	cols := f.Schema().Columns()
	if len(cols) != len(p.columns) {
		return fmt.Errorf("%d columns instead of %d", len(cols), len(p.columns))
	}
	at := make([]int, len(cols))
	for i, path := range cols {
		at[i] = slices.IndexFunc(p.columns, func(c column) bool { return c.name == path[0] })
		if at[i] < 0 {
			return fmt.Errorf("a column %q that does not belong here", path[0])
		}
	}
	rec := make([]float64, len(p.columns))
	for _, g := range f.RowGroups() {
		n := int(g.NumRows())
		all := make([][]float64, len(cols))
		for i, chunk := range g.ColumnChunks() {
			c := &p.columns[at[i]]
			vals, err := appendChunk(nil, chunk, c)
			if err != nil {
				return err
			}
			if len(vals) != n {
				return fmt.Errorf("%d values of %s instead of %d", len(vals), c.name, n)
			}
			all[i] = vals
		}
		for j := range n {
			for i := range all {
				rec[at[i]] = all[i][j]
			}
			if err := each(rec); err != nil {
				return err
			}
		}
	}
	return nil
}

// appendChunk appends the values of one column of a row group.
func appendChunk(out []float64, chunk parquet.ColumnChunk, c *column) ([]float64, error) {
	pages := chunk.Pages()
	defer pages.Close()
	buf := make([]parquet.Value, 1024)
	for {
		page, err := pages.ReadPage()
		if err == io.EOF {
			return out, nil
		}
		if err != nil {
			return nil, err
		}
		values := page.Values()
		for {
			m, err := values.ReadValues(buf)
			for _, v := range buf[:m] {
				x := math.NaN()
				switch {
				case v.IsNull():
				case c.words != nil:
					x = float64(slices.Index(c.words, string(v.ByteArray())))
				case c.integer:
					x = float64(v.Int64())
				default:
					x = v.Double()*c.scale + c.offset
				}
				out = append(out, x)
			}
			if err == io.EOF {
				break
			}
			if err != nil {
				parquet.Release(page)
				return nil, err
			}
		}
		parquet.Release(page)
	}
}

// row unpacks a record.
func (p *Plan) row(rec []float64) Row {
	k := len(p.priors)
	r := Row{Index: int(rec[0]), Values: slices.Clone(rec[1 : 1+k])}
	v := rec[1+k:]
	take := func() float64 { x := v[0]; v = v[1:]; return x }
	r.Kind, r.TimeGyr, r.Status = record.Kinds[int(take())], take(), record.Statuses[int(take())]
	for i := range r.Clocks {
		r.Clocks[i] = take()
	}
	r.EndGyr, r.EndT, r.EndP, r.EndPH, r.ColdestK, r.HottestK = take(), take(), take(), take(), take(), take()
	r.Freezes, r.FrozenShare, r.Solved, r.Residual, r.Drift = int(take()), take(), take(), take(), take()
	r.Steps, r.Evals = int(take()), int(take())
	for range p.Scenario.Uncertain.Ages {
		r.At = append(r.At, record.Snapshot{Temperature: take(), PCO2: take(), PH: take()})
	}
	return r
}
