package carbon

import (
	"context"
	"fmt"
	"math"
	"strconv"
	"strings"

	"cycle/carbon/record"
)

// Named is a setup with the name it goes by in a comparison.
type Named struct {
	Name  string
	Setup *Setup
}

// CompareOptions steers Compare; the zero value is the default.
type CompareOptions struct {
	Workers  int // 0: one for each processor
	Progress func(done, total int)
}

// Compare runs every setup and sets the histories side by side: only the inputs
// that differ, outcomes, dates and margins. A *NamedError tells which setup
// cannot stand. Hashes, inputs, version and command are left to the caller.
func Compare(ctx context.Context, sets []Named, opt CompareOptions) (*record.Comparison, error) {
	c := &record.Comparison{Format: 1, Runs: make([]*record.Run, len(sets))}
	copies := make([]*Setup, len(sets))
	for i, s := range sets {
		c.Names = append(c.Names, s.Name)
		copies[i] = s.Setup.Clone()
	}
	done := 0
	err := each(ctx, opt.Workers, len(sets), func() {
		done++
		if opt.Progress != nil {
			opt.Progress(done, len(sets))
		}
	}, func(i int) error {
		r, err := Run(ctx, copies[i])
		if err != nil {
			if ctx.Err() != nil {
				return ctx.Err()
			}
			return &NamedError{i, sets[i].Name, err}
		}
		r.Name = sets[i].Name
		c.Runs[i] = r
		return nil
	})
	if err != nil {
		return nil, err
	}
	differences(c, sets)
	seen := map[string]bool{}
	for i, r := range c.Runs {
		liquid := math.Max(0, r.Outcome.TimeGyr-gyr(sets[i].Setup.Start))
		c.Results = append(c.Results, record.Result{Name: r.Name, Outcome: r.Outcome, Liquid: liquid, Freezes: r.Freezes, FrozenShare: r.FrozenShare, Start: r.Start, Reference: r.Reference, Feedback: r.Feedback})
		for _, w := range r.Works {
			if !seen[w.Key] {
				seen[w.Key] = true
				c.Works = append(c.Works, w)
			}
		}
		for _, g := range r.Margins {
			row := -1
			for k := range c.Margins {
				if m := &c.Margins[k]; m.Boundary == g.Boundary && m.Side == g.Side && m.Unit == g.Unit {
					row = k
				}
			}
			if row < 0 {
				m := record.MarginRow{Boundary: g.Boundary, Side: g.Side, Unit: g.Unit}
				for range sets {
					m.Values, m.TimeGyr = append(m.Values, math.NaN()), append(m.TimeGyr, math.NaN())
				}
				row, c.Margins = len(c.Margins), append(c.Margins, m)
			}
			c.Margins[row].Values[i], c.Margins[row].TimeGyr[i] = g.Value, g.TimeGyr
		}
	}
	c.Words = compareWords(c)
	return c, nil
}

// NamedError tells which of several setups an error belongs to.
type NamedError struct {
	Index int
	Name  string
	Err   error
}

func (e *NamedError) Error() string { return e.Name + ": " + e.Err.Error() }

// Unwrap returns the error itself.
func (e *NamedError) Unwrap() error { return e.Err }

// keyed is one input as text.
type keyed struct{ key, doc, text string }

// inputsOf lists every input of a setup.
func inputsOf(s *Setup) []keyed {
	var out []keyed
	for _, sec := range s.Sections() {
		if sec.Laws != nil {
			out = append(out, keyed{sec.Name + ".law", sec.Doc, sec.Law})
		}
		for _, o := range sec.Options {
			out = append(out, keyed{sec.Name + "." + o.Key, o.Doc, *o.Value})
		}
		for _, f := range sec.Flags {
			out = append(out, keyed{sec.Name + "." + f.Key, f.Doc, strconv.FormatBool(*f.Value)})
		}
		for _, f := range sec.Fields {
			out = append(out, keyed{sec.Name + "." + f.Key, f.Doc, f.Text(*f.Value)})
		}
		if sec.Table != nil && *sec.Table.Text != "" {
			n := len(strings.Split(strings.TrimSpace(*sec.Table.Text), "\n"))
			out = append(out, keyed{sec.Name + "." + sec.Table.Key, sec.Table.Doc, fmt.Sprintf("%d lines, %s", n, short(*sec.Table.Text))})
		}
	}
	return out
}

// differences keeps the inputs that are not the same everywhere, in the order of
// the sections.
func differences(c *record.Comparison, sets []Named) {
	at := make([]map[string]string, len(sets))
	var order []keyed
	place := map[string]int{}
	for i, s := range sets {
		at[i] = map[string]string{}
		after := -1
		for _, k := range inputsOf(s.Setup) {
			at[i][k.key] = k.text
			if p, ok := place[k.key]; ok {
				after = p
				continue
			}
			// A key that only some have stands behind the one it follows there.
			after++
			order = append(order[:after], append([]keyed{k}, order[after:]...)...)
			for j := range order {
				place[order[j].key] = j
			}
		}
	}
	for _, k := range order {
		d := record.Difference{Key: k.key, Doc: k.doc}
		same := true
		for i := range sets {
			v := at[i][k.key]
			d.Values = append(d.Values, v)
			same = same && v == at[0][k.key]
		}
		if same {
			c.Agree++
		} else {
			c.Differ = append(c.Differ, d)
		}
	}
}

// compareWords says in a sentence what sets the results apart.
func compareWords(c *record.Comparison) string {
	if len(c.Results) == 0 {
		return ""
	}
	first, last := 0, 0
	kinds := map[record.Kind]bool{}
	for i := range c.Results {
		r := &c.Results[i]
		kinds[r.Outcome.Kind] = true
		if r.Outcome.TimeGyr < c.Results[first].Outcome.TimeGyr {
			first = i
		}
		if r.Outcome.TimeGyr > c.Results[last].Outcome.TimeGyr {
			last = i
		}
	}
	inputs := fmt.Sprintf("%d inputs differ", len(c.Differ))
	if len(c.Differ) == 1 {
		inputs = "1 input differs"
	}
	if len(c.Differ) == 0 {
		inputs = "no input differs"
	}
	end := func(i int) string {
		o := &c.Results[i].Outcome
		return fmt.Sprintf("%s (%s at %.4g Gyr)", c.Names[i], o.Kind, o.TimeGyr)
	}
	what := "all end alike"
	if len(kinds) > 1 {
		what = fmt.Sprintf("%d different outcomes", len(kinds))
	}
	if first == last {
		return fmt.Sprintf("%s; %s, at the same time", inputs, what)
	}
	return fmt.Sprintf("%s; %s, first %s, last %s", inputs, what, end(first), end(last))
}

// short identifies a text by a few digits of a sum over it.
func short(s string) string {
	h := uint64(14695981039346656037)
	for i := 0; i < len(s); i++ {
		h = (h ^ uint64(s[i])) * 1099511628211
	}
	return fmt.Sprintf("sum %08x", uint32(h^h>>32))
}
