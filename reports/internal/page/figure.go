package page

import (
	"encoding/json"
	"fmt"
	"math"
	"strings"

	"github.com/go-echarts/go-echarts/v2/charts"
	"github.com/go-echarts/go-echarts/v2/opts"
	"github.com/go-echarts/go-echarts/v2/types"

	"cycle/reports/internal/num"
)

// A Figure is one or more panels over one time axis, with its caption, the
// doubts that concern it and the numbers behind it.
type Figure struct {
	ID      string // in the page, unique
	Title   string
	Caption []string // sentences that state the numbers of this very result
	Doubts  []string
	Marks   []MarkLine // dated marks listed below, numbered as in the rail
	Panels  []Panel

	// Filled by the kit.
	Curves []*Curve // of all panels, in order: the key
	Height int
	Table  Table
	option json.RawMessage
}

// MarkLine is a row of the list of marks.
type MarkLine struct{ Number, Name, Date string }

// A Panel is one pair of axes.
type Panel struct {
	Name    string // of the vertical axis
	Unit    string
	Log     bool
	Decades int  // most decades a logarithmic axis shows below its top; 0 for all
	Mirror  bool // values below zero are shown without their sign (a ledger)
	Trim    bool // a spike may leave the frame, which then says how far it goes
	Height  int  // pixels
	Curves  []Curve
	Limits  []Limit
	Rail    bool // climate states and marks instead of curves
}

// How a curve is drawn.
const (
	Line  = ""
	Stack = "stack" // part of a stack that grows from zero upwards
	Sink  = "sink"  // part of a stack that grows from zero downwards
	Band  = "band"  // area between the column and Upper
)

// A Curve draws one column of the data.
type Curve struct {
	Column string
	Upper  string // second column of a band
	Name   string // in the key; the column's title when empty
	Role   string // of the palette
	Kind   string
	Dash   string // "", "dashed" or "dotted"
	Wide   bool

	// Filled by the kit.
	Lone   bool // the only curve of its panel: it needs no telling apart
	Unit   string
	Figure string
	Index  int // among all curves of the page
	set    []int
}

// A Limit is a line across a panel at a value that means something.
type Limit struct {
	Value float64 `json:"value"`
	Words string  `json:"words"` // "" for a plain line
}

// A Table shows a thin choice of the rows behind a figure.
type Table struct {
	Head  []string
	Rows  [][]string
	Of    int // rows in all
	Label string
}

const (
	railHeight  = 29 // and a row for each label
	railRow     = 15
	gapHeight   = 50 // between panels: name of the axis above each
	topHeight   = 30
	footHeight  = 46
	thinBuckets = 360
)

// finish settles a figure against the data: drops curves without numbers and
// panels without curves, thins the rest and writes the chart's option.
func (f *Figure) finish(d *Data, index *int, also []float64) error {
	x := d.Columns[0].Values
	var panels []Panel
	for _, p := range f.Panels {
		var curves []Curve
		for _, c := range p.Curves {
			col := d.Column(c.Column)
			if col == nil || !col.present() {
				continue
			}
			if c.Name == "" {
				c.Name = col.Title
			}
			c.Unit = num.Unit(col.Unit)
			c.Figure = f.ID
			c.Index = *index
			*index++
			c.set = Thin(x, col.Values, thinBuckets)
			curves = append(curves, c)
		}
		p.Curves = curves
		if len(curves) > 0 || p.Rail {
			panels = append(panels, p)
		}
	}
	f.Panels = panels
	// The parts of a stack are drawn at the same rows.
	for i := range f.Panels {
		unite(f.Panels[i].Curves, d.Rows)
		for j := range f.Panels[i].Curves {
			f.Panels[i].Curves[j].Lone = len(f.Panels[i].Curves) == 1
			f.Curves = append(f.Curves, &f.Panels[i].Curves[j])
		}
	}
	if len(f.Curves) == 0 {
		return nil
	}
	f.table(d, also)
	return f.build()
}

// unite gives all parts of a stack the rows of any of them.
func unite(curves []Curve, rows int) {
	all := make([]bool, rows)
	for _, c := range curves {
		if c.Kind == Stack || c.Kind == Sink {
			for _, j := range c.set {
				all[j] = true
			}
		}
	}
	var set []int
	for j, in := range all {
		if in {
			set = append(set, j)
		}
	}
	for i := range curves {
		if curves[i].Kind == Stack || curves[i].Kind == Sink {
			curves[i].set = set
		}
	}
}

// tableRows is about how many rows the page shows of the numbers behind a figure.
const tableRows = 32

func (f *Figure) table(d *Data, also []float64) {
	cols := []*Column{&d.Columns[0]}
	seen := map[string]bool{d.Columns[0].Name: true}
	add := func(name string) {
		if c := d.Column(name); c != nil && !seen[name] {
			seen[name] = true
			cols = append(cols, c)
		}
	}
	for _, c := range f.Curves {
		add(c.Column)
		if c.Upper != "" {
			add(c.Upper)
		}
	}
	for _, c := range cols {
		head := c.Title
		if c.Unit != "" {
			head += ", " + num.Unit(c.Unit)
		}
		f.Table.Head = append(f.Table.Head, head)
	}
	for _, j := range spread(d.Columns[0].Values, tableRows, also) {
		var row []string
		for i, c := range cols {
			digits := 5
			if i == 0 {
				digits = 7
			}
			row = append(row, num.Pretty(num.Short(c.Values[j], digits)))
		}
		f.Table.Rows = append(f.Table.Rows, row)
	}
	f.Table.Of = d.Rows
	f.Table.Label = "Numbers behind: " + f.Title
}

// build writes the option of the chart with the typed builder. Functions and
// colours are named ("@number", "@flux.arc") and looked up by the page's script
// in fixed tables, under fixed keys only; data are named by column and filled
// in by the script. No text of a record gets here but the figure's own words.
func (f *Figure) build() error {
	chart := charts.NewLine()
	chart.XAxisList, chart.YAxisList = nil, nil
	top := 0
	for i, p := range f.Panels {
		height := p.Height
		if p.Rail {
			height = railHeight + railRow*min(max(len(f.Marks), 1), 4)
		}
		if i == 0 && p.Rail {
			top = 4
		} else if i == 0 {
			top = topHeight
		}
		chart.GridList = append(chart.GridList, opts.Grid{Top: px(top), Height: px(height), Left: "64", Right: "18"})
		last := i == len(f.Panels)-1
		xa := opts.XAxis{Type: "value", GridIndex: i, SplitLine: &opts.SplitLine{Show: opts.Bool(false)},
			AxisTick:  &opts.AxisTick{Show: opts.Bool(!p.Rail)},
			AxisLabel: &opts.AxisLabel{Show: opts.Bool(last), Formatter: "@time"}}
		if last {
			xa.Name, xa.NameLocation, xa.NameGap = "@clock", "middle", 28
		}
		format, kind := types.FuncStr("@number"), "value"
		switch {
		case p.Log:
			format, kind = "@power", "log"
		case p.Mirror:
			format = "@size"
		}
		name := p.Name
		if p.Unit != "" {
			name += ", " + num.Unit(p.Unit)
		}
		ya := opts.YAxis{Type: kind, GridIndex: i, Name: name, NameLocation: "end", NameGap: 13,
			Show: opts.Bool(!p.Rail), AxisLabel: &opts.AxisLabel{Formatter: format}, SplitNumber: 4}
		chart.ExtendXAxis(xa)
		chart.ExtendYAxis(ya)
		if p.Rail {
			chart.MultiSeries = append(chart.MultiSeries, charts.SingleSeries{Type: types.ChartCustom, Id: fmt.Sprint("rail", i), XAxisIndex: i, YAxisIndex: i, RenderItem: "@rail"})
			top += height + 34
			continue
		}
		chart.MultiSeries = append(chart.MultiSeries, charts.SingleSeries{Type: types.ChartCustom, Id: fmt.Sprint("shade", i), XAxisIndex: i, YAxisIndex: i, RenderItem: "@shade"})
		for _, c := range p.Curves {
			s := charts.SingleSeries{Name: c.Name, Id: fmt.Sprint("curve", c.Index), XAxisIndex: i, YAxisIndex: i}
			switch c.Kind {
			case Line:
				s.Type, s.ShowSymbol, s.ConnectNulls = types.ChartLine, opts.Bool(false), opts.Bool(false)
				width := float32(1.6)
				if c.Wide {
					width = 2.4
				}
				s.LineStyle = &opts.LineStyle{Color: "@" + c.Role, Width: width, Type: c.Dash}
				s.ItemStyle = &opts.ItemStyle{Color: "@" + c.Role}
			default:
				s.Type, s.RenderItem = types.ChartCustom, "@area"
				s.ItemStyle = &opts.ItemStyle{Color: "@" + c.Role}
			}
			chart.MultiSeries = append(chart.MultiSeries, s)
		}
		chart.MultiSeries = append(chart.MultiSeries, charts.SingleSeries{Type: types.ChartCustom, Id: fmt.Sprint("limits", i), XAxisIndex: i, YAxisIndex: i, RenderItem: "@limits"})
		top += height + gapHeight
	}
	f.Height = top - gapHeight + footHeight
	chart.Validate()
	option := chart.JSON()
	for _, unused := range []string{"title", "legend", "tooltip", "toolbox", "color"} {
		delete(option, unused)
	}
	b, err := json.Marshal(option)
	f.option = b
	return err
}

func px(n int) string { return fmt.Sprint(n) }

// spec is what the script needs of a figure beside the option.
func (f *Figure) spec() map[string]any {
	var panels []any
	for _, p := range f.Panels {
		curves := []any{}
		for _, c := range p.Curves {
			curves = append(curves, map[string]any{"id": fmt.Sprint("curve", c.Index), "index": c.Index, "column": c.Column, "upper": c.Upper, "kind": c.Kind, "name": c.Name, "unit": c.Unit})
		}
		limits := []Limit{}
		for _, l := range p.Limits {
			if !missing(l.Value) && !(p.Log && l.Value <= 0) {
				limits = append(limits, l)
			}
		}
		panels = append(panels, map[string]any{"log": p.Log, "trim": p.Trim, "decades": p.Decades, "mirror": p.Mirror, "unit": num.Unit(p.Unit), "rail": p.Rail, "curves": curves, "limits": limits})
	}
	return map[string]any{"id": f.ID, "title": f.Title, "option": f.option, "panels": panels, "height": f.Height}
}

// Alt is the text a screen reader gives for the figure.
func (f *Figure) Alt() string { return f.Title + ". " + strings.Join(f.Caption, " ") }

// LogWorthy reports whether positive values span enough decades to need a
// logarithmic axis.
func LogWorthy(cols ...*Column) bool {
	least, most := math.Inf(1), 0.0
	for _, c := range cols {
		if c == nil {
			continue
		}
		for _, v := range c.Values {
			if missing(v) {
				continue
			}
			if v <= 0 {
				return false
			}
			least, most = math.Min(least, v), math.Max(most, v)
		}
	}
	return most > 30*least
}
