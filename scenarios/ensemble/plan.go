// Package ensemble runs many histories of one scenario whose uncertain keys are
// drawn from their distributions, and says what they have in common.
//
// Start with NewPlan. A member is a pure function of the scenario, the seed, the
// design and its index (Plan.Member), so that workers, shards, order and machine
// do not matter and more members leave the first ones as they are. Run computes
// the members of a shard into a folder and goes on where a killed run stopped;
// Gather joins the shards into members.parquet; Summarise reads that file.
package ensemble

import (
	"context"
	"errors"
	"fmt"
	"math"
	"slices"
	"strings"

	"cycle/carbon"
	"cycle/carbon/record"
	"cycle/carbon/units"
	"cycle/scenarios"
)

// Plan is an ensemble before anything is computed.
type Plan struct {
	Scenario *scenarios.Resolved
	Seed     uint64
	Design   string
	Members  int
	Version  string // of the program

	design  *design
	priors  []scenarios.Prior
	order   []int // priors as they are applied: choices of law before numbers
	columns []column
}

// MaxMembers bounds the number of members: the points of the sequence.
const MaxMembers = 1 << 30

// NewPlan makes a plan. The error names the key or the option that cannot stand.
func NewPlan(r *scenarios.Resolved, version string, seed uint64, designName string, members int) (*Plan, error) {
	if r.Uncertain == nil || len(r.Uncertain.Priors) == 0 {
		return nil, &scenarios.KeyError{File: r.File, Key: "uncertain", What: "nothing in this scenario is uncertain", Allowed: `a section [uncertain] such as "weathering.land.efold" = "published"`}
	}
	if members < 1 || members > MaxMembers {
		return nil, &scenarios.KeyError{Key: "--members", Found: fmt.Sprint(members), Allowed: fmt.Sprintf("1 to %d", MaxMembers)}
	}
	p := &Plan{Scenario: r, Seed: seed, Design: designName, Members: members, Version: version, priors: r.Uncertain.Priors}
	var keys []string
	for i := range p.priors {
		keys = append(keys, p.priors[i].Key)
		p.order = append(p.order, i)
	}
	slices.SortStableFunc(p.order, func(a, b int) int { return rank(&p.priors[a]) - rank(&p.priors[b]) })
	together, normal := r.Uncertain.Normal()
	var err error
	if p.design, err = newDesign(designName, seed, keys, together, normal); err != nil {
		return nil, &scenarios.KeyError{Key: "--design", What: err.Error()}
	}
	p.columns = p.table()
	return p, nil
}

// rank orders priors: laws, other words, numbers.
func rank(p *scenarios.Prior) int {
	switch {
	case strings.HasSuffix(p.Key, ".law"):
		return 0
	case p.Shape == scenarios.Chosen:
		return 1
	}
	return 2
}

// Unit returns the quantiles of a member's inputs, in order of the priors.
func (p *Plan) Unit(i int) []float64 { return p.design.unit(i) }

// Independent tells whether a member counts for shares and dates.
func (p *Plan) Independent(i int) bool { return p.design.independent(i) }

// DesignWords describes the design.
func (p *Plan) DesignWords() string { return p.design.words() }

// Setup returns the setup of a member and its drawn values: a number in base
// units, or the index of a choice. A value that does not apply under the
// member's laws is NaN.
func (p *Plan) Setup(i int) (*carbon.Setup, []float64) { return p.draw(p.Unit(i)) }

func (p *Plan) draw(u []float64) (*carbon.Setup, []float64) {
	s := p.Scenario.Setup.Clone()
	values := make([]float64, len(u))
	var sections []carbon.Section
	for _, j := range p.order {
		pr := &p.priors[j]
		values[j] = math.NaN()
		dot := strings.LastIndexByte(pr.Key, '.')
		section, name := pr.Key[:dot], pr.Key[dot+1:]
		if pr.Shape == scenarios.Chosen {
			values[j] = float64(choice(pr, u[j]))
			if name == "law" {
				// The reader has tried every choice.
				if err := s.Choose(section, pr.Choices[int(values[j])]); err != nil {
					panic(err)
				}
				continue
			}
		}
		if sections == nil {
			sections = s.Sections()
		}
		for k := range sections {
			if sec := &sections[k]; sec.Name == section {
				values[j] = set(sec, name, pr, u[j], values[j])
			}
		}
	}
	return s, values
}

// set gives a key of a section its value and returns it.
func set(sec *carbon.Section, name string, p *scenarios.Prior, u, chosen float64) float64 {
	for i := range sec.Fields {
		if f := &sec.Fields[i]; f.Key == name && p.Shape != scenarios.Chosen {
			*f.Value = value(p, f, u)
			return *f.Value
		}
	}
	for i := range sec.Options {
		if o := &sec.Options[i]; o.Key == name {
			*o.Value = p.Choices[int(chosen)]
			return chosen
		}
	}
	for i := range sec.Flags {
		if f := &sec.Flags[i]; f.Key == name {
			*f.Value = p.Choices[int(chosen)] == "true"
			return chosen
		}
	}
	return math.NaN()
}

// Row is a member with its drawn values.
type Row struct {
	Index  int
	Values []float64 // as Setup gives them
	record.Member
}

// Member computes one member. The only error is that of ctx: whatever else goes
// wrong is a row with the outcome record.Undecided and a status.
func (p *Plan) Member(ctx context.Context, i int) (row Row, err error) {
	s, values := p.Setup(i)
	row = Row{Index: i, Values: values}
	x, err := fate(ctx, s, p.Scenario.Uncertain.Ages)
	if err != nil {
		return row, err
	}
	row.Member = *x
	for len(row.At) < len(p.Scenario.Uncertain.Ages) {
		nan := math.NaN()
		row.At = append(row.At, record.Snapshot{Temperature: nan, PCO2: nan, PH: nan})
	}
	return row, nil
}

// fate is carbon.Fate with a row for values that do not fit together, and for a
// fault of the program: one member must not take the others with it.
func fate(ctx context.Context, s *carbon.Setup, ages []float64) (x *record.Member, err error) {
	defer func() {
		if recover() != nil {
			x, err = carbon.Unrun(s, record.StatusFault), nil
		}
	}()
	x, err = carbon.Fate(ctx, s, ages)
	var setup *carbon.SetupError
	switch {
	case err == nil:
		return x, nil
	case ctx.Err() != nil:
		return nil, ctx.Err()
	case errors.As(err, &setup):
		return carbon.Unrun(s, record.StatusImpossible), nil
	}
	return carbon.Unrun(s, record.StatusFault), nil
}

// fieldOf returns the field of a number among the priors under the first law
// that has it: its unit and meaning.
func (p *Plan) fieldOf(pr *scenarios.Prior) *units.Field {
	if f := p.Scenario.Setup.Number(pr.Key); f != nil {
		return f
	}
	for i := range p.priors {
		l := &p.priors[i]
		section, isLaw := strings.CutSuffix(l.Key, ".law")
		if !isLaw || !strings.HasPrefix(pr.Key, section+".") {
			continue
		}
		for _, c := range l.Choices {
			s := p.Scenario.Setup.Clone()
			if s.Choose(section, c) == nil {
				if f := s.Number(pr.Key); f != nil {
					return f
				}
			}
		}
	}
	return nil
}

// Alone returns the setup of one member to be run in full: the planet of its row,
// with what was solved for as a number. The only error is that of ctx.
func (p *Plan) Alone(ctx context.Context, i int) (*carbon.Setup, error) {
	s, _ := p.Setup(i)
	if s.Solve == "nothing" {
		return s, nil
	}
	row, err := p.Member(ctx, i)
	if err != nil || math.IsNaN(row.Solved) {
		return s, err
	}
	if s.Solve == "total" {
		s.Content = row.Solved / s.Mass
	} else {
		s.OutgassingScale = row.Solved
	}
	s.Solve = "nothing"
	return s, nil
}

// Resolved returns one member as a scenario of its own, every drawn value spelled
// out to the last bit. The only error is that of ctx.
func (p *Plan) Resolved(ctx context.Context, i int) (*scenarios.Resolved, error) {
	r := p.Scenario
	_, values := p.Setup(i)
	s, err := p.Alone(ctx, i)
	if err != nil {
		return nil, err
	}
	origins := map[string]string{}
	for k, o := range r.Origins {
		origins[k] = o
	}
	for q := range p.priors {
		if !math.IsNaN(values[q]) {
			origins[p.priors[q].Key] = Drawn
		}
	}
	if was := r.Setup.Solve; was != s.Solve {
		origins["carbon.solve"] = Drawn
		origins[map[string]string{"total": "carbon.content", "outgassing": "sources.scale"}[was]] = "solved"
	}
	s.Title = fmt.Sprintf("%s, member %d of seed %d", r.Title, i, p.Seed)
	return &scenarios.Resolved{Name: fmt.Sprintf("%s-member-%d", r.Name, i), Title: s.Title, Notes: r.Notes, File: r.File, Setup: s, Origins: origins}, nil
}

// Drawn is the origin of a value that an ensemble drew.
const Drawn = "drawn"
