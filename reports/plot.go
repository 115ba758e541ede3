package reports

import (
	"fmt"
	"math"
	"strings"

	"cycle/carbon/record"
	"cycle/reports/internal/num"
)

// A plot is a drawing without a script: what is not a curve over time. It
// scales with the page and prints; its colours are those of the palette.
type plot struct {
	ID, Title, Alt string
	Caption        []string
	Doubts         []string // stand below the caption
	W, H           float64
	L, T, R, B     float64 // the frame
	X, Y           plotAxis
	Areas, Lines   []plotPath
	Dots           []plotDot
	Keys           []plotKey
	Hatched        bool // the fills of the map's patterns are needed
	Numbers        *plotNumbers
}

type plotAxis struct {
	Name   string
	Lo, Hi float64
	Log    bool
	Ticks  []plotTick
}

type plotTick struct {
	At    float64
	Label string
}

type plotPath struct {
	Role, D, Dash, Pattern string
	Wide, Halo             bool
}

type plotDot struct {
	X, Y, R       float64
	Role          string
	Label, Anchor string
	LX, LY        float64
	Open          bool
}

type plotKey struct {
	Role, Dash, Pattern, Name string
	Area, Dot                 bool
}

// newPlot sets an empty frame.
func newPlot(id, title string, x, y plotAxis) *plot {
	p := &plot{ID: id, Title: title, W: 900, H: 460, L: 76, T: 16, X: x, Y: y}
	p.R, p.B = p.W-18, p.H-52
	p.X.Ticks, p.Y.Ticks = p.ticks(&p.X, true), p.ticks(&p.Y, false)
	return p
}

func (p *plot) px(v float64) float64 { return p.L + (p.R-p.L)*part(&p.X, v) }
func (p *plot) py(v float64) float64 { return p.B - (p.B-p.T)*part(&p.Y, v) }

func part(a *plotAxis, v float64) float64 {
	if a.Log {
		return math.Log(v/a.Lo) / math.Log(a.Hi/a.Lo)
	}
	return (v - a.Lo) / (a.Hi - a.Lo)
}

// ticks places round values on an axis.
func (p *plot) ticks(a *plotAxis, across bool) []plotTick {
	place := p.py
	if across {
		place = p.px
	}
	var out []plotTick
	add := func(v float64) {
		if q := part(a, v); q >= -1e-9 && q <= 1+1e-9 {
			out = append(out, plotTick{round1(place(v)), num.Pretty(num.Short(v, 4))})
		}
	}
	if a.Log {
		decades := math.Log10(a.Hi / a.Lo)
		for e := math.Floor(math.Log10(a.Lo)); e <= math.Ceil(math.Log10(a.Hi)); e++ {
			for _, m := range []float64{1, 2, 5} {
				if m == 1 || decades < 3 {
					add(m * math.Pow(10, e))
				}
			}
		}
		return out
	}
	step := niceStep((a.Hi - a.Lo) / 7)
	for k := math.Ceil(a.Lo/step - 1e-9); k*step <= a.Hi*(1+1e-12)+1e-12; k++ {
		add(k * step)
	}
	return out
}

func round1(v float64) float64 { return math.Round(v*10) / 10 }

// line makes the path of a curve, cut at the frame and broken where there is no
// value.
func (p *plot) line(xs, ys []float64) string {
	var b strings.Builder
	endX, endY := nan(), nan()
	for i := 1; i < len(xs); i++ {
		ax, ay, bx, by, ok := cut(part(&p.X, xs[i-1]), part(&p.Y, ys[i-1]), part(&p.X, xs[i]), part(&p.Y, ys[i]))
		if !ok {
			continue
		}
		at := func(x, y float64) string {
			return fmt.Sprintf("%.1f %.1f", p.L+(p.R-p.L)*x, p.B-(p.B-p.T)*y)
		}
		if ax != endX || ay != endY {
			b.WriteString("M" + at(ax, ay))
		}
		b.WriteString("L" + at(bx, by))
		endX, endY = bx, by
	}
	return b.String()
}

// cut keeps the part of a segment inside the unit square (Liang-Barsky).
func cut(ax, ay, bx, by float64) (x0, y0, x1, y1 float64, ok bool) {
	for _, v := range []float64{ax, ay, bx, by} {
		if math.IsNaN(v) || math.IsInf(v, 0) {
			return 0, 0, 0, 0, false
		}
	}
	t0, t1 := 0.0, 1.0
	for _, e := range [4][2]float64{{ax - bx, ax}, {bx - ax, 1 - ax}, {ay - by, ay}, {by - ay, 1 - ay}} {
		d, q := e[0], e[1]
		switch {
		case d == 0 && q < 0:
			return 0, 0, 0, 0, false
		case d < 0:
			t0 = math.Max(t0, q/d)
		case d > 0:
			t1 = math.Min(t1, q/d)
		}
	}
	if t0 > t1 {
		return 0, 0, 0, 0, false
	}
	x0, y0, x1, y1 = ax, ay, bx, by
	if t0 > 0 {
		x0, y0 = ax+t0*(bx-ax), ay+t0*(by-ay)
	}
	if t1 < 1 {
		x1, y1 = ax+t1*(bx-ax), ay+t1*(by-ay)
	}
	return x0, y0, x1, y1, true
}

func (p *plot) curve(role, dash string, wide bool, xs, ys []float64) bool {
	d := p.line(xs, ys)
	if !strings.Contains(d, "L") {
		return false
	}
	p.Lines = append(p.Lines, plotPath{Role: role, D: d, Dash: dash, Wide: wide})
	return true
}

func (p *plot) dot(role, label string, x, y float64, open bool) {
	qx, qy := part(&p.X, x), part(&p.Y, y)
	if !(qx >= 0 && qx <= 1 && qy >= 0 && qy <= 1) {
		return
	}
	d := plotDot{X: round1(p.px(x)), Y: round1(p.py(y)), R: 5, Role: role, Label: label, Anchor: "start", Open: open}
	d.LX, d.LY = d.X+9, d.Y-8
	if qx > 0.75 {
		d.Anchor, d.LX = "end", d.X-9
	}
	if qy > 0.93 {
		d.LY = d.Y + 18
	}
	p.Dots = append(p.Dots, d)
}

// dashName is a dash pattern by name, for the template.
func dashName(d string) string {
	switch d {
	case "dashed":
		return "7 4"
	case "dotted":
		return "2 3"
	}
	return "none"
}

// kindPattern tells outcomes of the same colour apart.
func kindPattern(k record.Kind) string {
	switch k {
	case record.LimitCycles, record.WaterLost, record.Undecided:
		return "hatch"
	case record.Condensation, record.StarLeft:
		return "dots"
	}
	return ""
}

// barOf is a bar of a table: its length as a part of the longest, and which way.
type barOf struct {
	X, W float64
	Role string
}

// bars scales numbers to bars on a field of 160 by 12, with zero in the middle
// where some are negative.
func bars(values []float64, role string) []barOf {
	most, negative := 0.0, false
	for _, v := range values {
		if known(v) {
			most = math.Max(most, math.Abs(v))
			negative = negative || v < 0
		}
	}
	out := make([]barOf, len(values))
	for i, v := range values {
		if !known(v) || most == 0 {
			continue
		}
		const wide = 160
		b := barOf{Role: role, W: round1(math.Max(math.Abs(v)/most*wide, 1))}
		if negative {
			b.W = round1(math.Max(b.W/2, 1))
			b.X = wide / 2
			if v < 0 {
				b.X -= b.W
			}
		}
		out[i] = b
	}
	return out
}
