package carbon

import (
	"context"
	"fmt"
	"math"
	"sort"
	"testing"
	"time"

	"cycle/carbon/record"
	"cycle/ode"
)

// A combination is one law of every kind.
type combination map[string]string

// kindsOfLaws lists the sections with laws and the names of their laws, without
// users' tables.
func kindsOfLaws() (sections []string, laws map[string][]string) {
	laws = map[string][]string{}
	for _, sec := range NewSetup().Sections() {
		if len(sec.Laws) == 0 {
			continue
		}
		sections = append(sections, sec.Name)
		for _, c := range sec.Laws {
			if c.Name != "table" {
				laws[sec.Name] = append(laws[sec.Name], c.Name)
			}
		}
	}
	return sections, laws
}

// combinations lists every pair of laws of different kinds at least once, and
// beyond that every combination of radiation, albedo and ocean, whose laws cost
// most: the other kinds go round.
func combinations() (out []combination) {
	sections, laws := kindsOfLaws()
	defaults := func() combination {
		c := combination{}
		for _, s := range sections {
			c[s] = laws[s][0]
		}
		return c
	}
	for i, a := range sections {
		for _, b := range sections[i+1:] {
			for _, la := range laws[a] {
				for _, lb := range laws[b] {
					c := defaults()
					c[a], c[b] = la, lb
					out = append(out, c)
				}
			}
		}
	}
	n := 0
	for _, r := range laws["radiation"] {
		for _, a := range laws["albedo"] {
			for _, o := range laws["ocean"] {
				for _, l := range laws["weathering.land"] {
					c := combination{"radiation": r, "albedo": a, "ocean": o, "weathering.land": l}
					for _, s := range sections {
						if c[s] == "" {
							c[s] = laws[s][n%len(laws[s])]
							n++
						}
					}
					out = append(out, c)
				}
			}
		}
	}
	return out
}

func (c combination) String() string {
	sections, laws := kindsOfLaws()
	s := ""
	for _, k := range sections {
		if c[k] != laws[k][0] {
			s += fmt.Sprintf(" %s=%s", k, c[k])
		}
	}
	if s == "" {
		return " all at their default"
	}
	return s
}

// setup returns the Earth with the laws of the combination.
func (c combination) setup(tb testing.TB) (*Setup, *Model) {
	s := NewSetup()
	for section, law := range c {
		if err := s.Choose(section, law); err != nil {
			tb.Fatal(err)
		}
	}
	s.Content = 7.8e-3 // as the Earth, without the solve
	m, err := NewModel(s)
	if err != nil {
		tb.Fatal(c, err)
	}
	return s, m
}

// BenchmarkCombinations measures one history at the default tolerance with
// every combination and reports the slowest of those that neither freeze nor
// swing, how many of them take more than 5 ms, and per cycle the slowest of the
// others, a cycle being a freeze or a swing and the first 5 ms not counted. A time
// is the shortest of five, each from another sweep over all combinations: what else
// the machine does for a while does not lengthen all five.
func BenchmarkCombinations(b *testing.B) {
	type cost struct {
		c      combination
		s      *Setup
		m      *Model
		ms     float64
		cycles int
		stats  ode.Stats
		kind   record.Kind
	}
	var all []cost
	for b.Loop() {
		all = all[:0]
		for _, c := range combinations() {
			s, m := c.setup(b)
			all = append(all, cost{c: c, s: s, m: m, ms: math.Inf(1)})
		}
		for range 5 {
			for i := range all {
				x := &all[i]
				start := time.Now()
				h, err := x.m.integrate(context.Background(), x.s.End, x.s.Tolerance, false)
				if err != nil {
					b.Fatal(err)
				}
				x.ms = math.Min(x.ms, time.Since(start).Seconds()*1e3)
				x.cycles, x.stats, x.kind = len(h.frozen)+h.swings.count/2, h.stats, x.m.judge(h).kind
			}
		}
	}
	sort.Slice(all, func(i, j int) bool { return all[i].ms > all[j].ms })
	var sum, slow, cycle float64
	over, cycling := 0, 0
	for i, x := range all {
		sum += x.ms
		if x.cycles > 0 {
			cycling++
			cycle = math.Max(cycle, (x.ms-5)/float64(x.cycles))
		} else if slow = math.Max(slow, x.ms); x.ms > 5 {
			over++
		}
		if i < 10 {
			b.Logf("%.2f ms, %d cycles, %d steps, %d evaluations, %s:%s", x.ms, x.cycles, x.stats.Steps, x.stats.FuncEvals, x.kind, x.c)
		}
	}
	b.ReportMetric(float64(len(all)), "combinations")
	b.ReportMetric(float64(cycling), "cycling")
	b.ReportMetric(sum/float64(len(all)), "ms/history")
	b.ReportMetric(slow, "slowest-ms")
	b.ReportMetric(float64(over), "above-5ms")
	b.ReportMetric(cycle, "slowest-ms/cycle")
}
