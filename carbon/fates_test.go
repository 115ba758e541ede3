package carbon

import (
	"bytes"
	"context"
	"errors"
	"math"
	"reflect"
	"strings"
	"testing"

	"cycle/carbon/record"
	"cycle/carbon/units"
)

// plain is a planet whose histories are short.
func plain() *Setup {
	s := cooling()
	s.End = 3e9
	return s
}

var (
	mapX = AxisRange{Key: "orbit.distance", Lo: 0.9 * units.AU, Hi: 1.3 * units.AU}
	mapY = AxisRange{Key: "sources.scale", Lo: 0.2, Hi: 5, Log: true}
)

func mapped(t testing.TB, s *Setup, x, y AxisRange, opt FateOptions) *record.Map {
	t.Helper()
	m, err := Fates(context.Background(), s, x, y, opt)
	if err != nil {
		t.Fatal(err)
	}
	return m
}

// same compares two maps bit for bit, but for the pointers in them.
func same(t *testing.T, what string, a, b *record.Map) {
	t.Helper()
	p, q := *a, *b
	p.Run, q.Run = nil, nil
	for _, m := range []*record.Map{&p, &q} {
		for i := range m.Cells { // NaN is not equal to itself
			if math.IsNaN(m.Cells[i].TimeGyr) {
				m.Cells[i].TimeGyr = -1
			}
			for k := range m.Cells[i].Corners {
				if math.IsNaN(m.Cells[i].Corners[k]) {
					m.Cells[i].Corners[k] = -1
				}
			}
		}
		for i := range m.Lines {
			for k := range m.Lines[i].Y {
				if math.IsNaN(m.Lines[i].Y[k]) {
					m.Lines[i].Y[k] = -1
				}
			}
		}
	}
	if !reflect.DeepEqual(p, q) {
		t.Errorf("%s: the maps differ", what)
	}
}

// TestMapIsTheSame whatever the workers, and after an interruption at any byte.
func TestMapIsTheSame(t *testing.T) {
	var journal bytes.Buffer
	opt := FateOptions{Cells: 4, Depth: 1, Workers: 1, Journal: &journal}
	a := mapped(t, plain(), mapX, mapY, opt)
	opt.Workers, opt.Journal = 3, nil
	calls := 0
	opt.Progress = func(done, total int) {
		calls++
		if done < 1 || done > total {
			t.Errorf("progress %d of %d", done, total)
		}
	}
	same(t, "three workers", a, mapped(t, plain(), mapX, mapY, opt))
	if calls != len(a.Points) {
		t.Errorf("progress was called %d times for %d points", calls, len(a.Points))
	}
	whole := journal.String()
	for _, part := range []float64{0, 0.003, 0.6, 1} {
		cut := int(part * float64(len(whole)))
		rest := bytes.NewBufferString(whole[:cut])
		fresh := 0
		b := mapped(t, plain(), mapX, mapY, FateOptions{Cells: 4, Depth: 1, Resume: strings.NewReader(whole[:cut]), Journal: rest, Progress: func(int, int) { fresh++ }})
		same(t, "resumed", a, b)
		if part > 0.3 && fresh > int((1-part)*float64(len(a.Points)))+2 {
			t.Errorf("with %.0f %% kept, %d of %d points were computed again", 100*part, fresh, len(a.Points))
		}
		// What the two runs left behind resumes in turn.
		again := 0
		same(t, "resumed twice", a, mapped(t, plain(), mapX, mapY, FateOptions{Cells: 4, Depth: 1, Resume: rest, Progress: func(int, int) { again++ }}))
		if again > 1 && cut > 60 {
			t.Errorf("after both runs %d points were computed again", again)
		}
	}
	// Another scenario must not use it.
	s := plain()
	s.Mass *= 1.01
	_, err := Fates(context.Background(), s, mapX, mapY, FateOptions{Cells: 4, Depth: 1, Resume: strings.NewReader(whole)})
	var je *JournalError
	if !errors.As(err, &je) {
		t.Errorf("a journal of another planet: error %v, want a *JournalError", err)
	}
}

// TestMapTellsWhatRunsTell: points of the map against histories run alone, and
// the cells tile the map and are small wherever outcomes meet.
func TestMapTellsWhatRunsTell(t *testing.T) {
	m := mapped(t, plain(), mapX, mapY, FateOptions{Cells: 5, Depth: 2})
	for i := 0; i < len(m.Points); i += 9 {
		p := &m.Points[i]
		s := plain()
		s.Distance, s.OutgassingScale = p.X*units.AU, p.Y
		if f := lone(t, s, s.Tolerance); f.kind != p.Kind || math.Abs(gyr(f.t)-p.TimeGyr) > 1e-12 {
			t.Errorf("%g au, %g: %s at %.9g Gyr, run alone %s at %.9g", p.X, p.Y, p.Kind, p.TimeGyr, f.kind, gyr(f.t))
		}
	}
	area, mixed := 0, 0
	at := map[[2]int]record.Kind{}
	for _, p := range m.Points {
		at[[2]int{p.I, p.J}] = p.Kind
	}
	for _, c := range m.Cells {
		area += c.Size * c.Size
		if c.Mixed {
			mixed++
			if c.Size != 1 {
				t.Errorf("the cell at %d, %d has mixed outcomes and is %d wide", c.I, c.J, c.Size)
			}
		}
		for _, q := range [][2]int{{c.I, c.J}, {c.I + c.Size, c.J}, {c.I, c.J + c.Size}, {c.I + c.Size, c.J + c.Size}} {
			if k, ok := at[q]; !ok {
				t.Errorf("the cell at %d, %d has no point at its corner", c.I, c.J)
			} else if !c.Mixed && k != c.Kind {
				t.Errorf("the cell at %d, %d is %s and has %s at a corner", c.I, c.J, c.Kind, k)
			}
		}
	}
	if area != m.N*m.N || mixed < 10 {
		t.Errorf("cells cover %d of %d, %d are mixed", area, m.N*m.N, mixed)
	}
	sum := 0.0
	for _, s := range m.Shares {
		sum += s.Share
	}
	if math.Abs(sum-1) > 1e-12 {
		t.Errorf("shares add up to %v", sum)
	}
	if len(m.Path) < 10 {
		t.Errorf("the scenario's path has %d points", len(m.Path))
	}
}

// TestLinesOfTheSteadyPlane: wherever the map of steady planets changes its
// outcome, an exact boundary is near, and every boundary separates outcomes.
func TestLinesOfTheSteadyPlane(t *testing.T) {
	s := NewSetup()
	x := AxisRange{Key: AxisSunlight, Lo: 900, Hi: 1300}
	y := AxisRange{Key: AxisOutgassing, Lo: 1e12, Hi: 40e12, Log: true}
	m := mapped(t, s, x, y, FateOptions{Cells: 8, Depth: 2})
	if len(m.Lines) != 3 {
		t.Fatalf("%d boundaries, want 3", len(m.Lines))
	}
	near := func(c *record.FateCell) bool {
		for _, l := range m.Lines {
			for k := 1; k < len(l.X); k++ {
				const slack = 0.5
				n := float64(m.N)
				if clip(m.X.Part(l.X[k-1])*n, m.Y.Part(l.Y[k-1])*n, m.X.Part(l.X[k])*n, m.Y.Part(l.Y[k])*n, float64(c.I)-slack, float64(c.J)-slack, float64(c.I+c.Size)+slack, float64(c.J+c.Size)+slack) {
					return true
				}
			}
		}
		return false
	}
	mixed, away := 0, 0
	for i := range m.Cells {
		if c := &m.Cells[i]; c.Mixed {
			mixed++
			if !near(c) {
				away++
				t.Logf("mixed cell at %.5g W/m2, %.4g Tmol/yr has no boundary near", m.X.At(c.I, m.N), m.Y.At(c.J, m.N))
			}
		}
	}
	if mixed < 30 || away > mixed/50 {
		t.Errorf("%d of %d mixed cells have no boundary near", away, mixed)
	}
	if !m.Steady || !math.IsNaN(m.X.Own) {
		t.Errorf("steady %v, own sunlight %v", m.Steady, m.X.Own)
	}
}

// TestAxesAreChecked.
func TestAxesAreChecked(t *testing.T) {
	for _, c := range []struct {
		x    AxisRange
		want string
	}{
		{AxisRange{Key: "orbit.size", Lo: 1, Hi: 2}, "no numeric key"},
		{AxisRange{Key: "solver.tolerance", Lo: 1e-6, Hi: 1e-4}, "no numeric key"},
		{AxisRange{Key: "orbit.distance", Lo: 2 * units.AU, Hi: 1 * units.AU}, "lower to a higher"},
		{AxisRange{Key: "orbit.distance", Lo: 0, Hi: 1 * units.AU}, "allowed is"},
		{AxisRange{Key: "orbit.eccentricity", Lo: 0, Hi: 0.5, Log: true}, "positive"},
		{AxisRange{Key: "orbit.distance", Lo: math.NaN(), Hi: units.AU}, "finite"},
		{mapY, "same key"},
	} {
		_, err := Fates(context.Background(), plain(), c.x, mapY, FateOptions{})
		var ae *AxisError
		if !errors.As(err, &ae) || !strings.Contains(err.Error(), c.want) {
			t.Errorf("%+v: error %v, want an *AxisError with %q", c.x, err, c.want)
		}
	}
}

func BenchmarkFates(b *testing.B) {
	for i := 0; i < b.N; i++ {
		m := mapped(b, cooling(), mapX, mapY, FateOptions{})
		b.ReportMetric(float64(len(m.Points)), "histories/op")
	}
}
