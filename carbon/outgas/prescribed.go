package outgas

import (
	"errors"
	"io"
	"math"

	"gonum.org/v1/gonum/interp"

	"cycle/carbon/cite"
	"cycle/carbon/units"
	"cycle/ode/elementary"
)

// prescribed gives a total flux from the mantle and lets both carbonate
// reservoirs return to the mantle at their reference turnover, so that carbon
// is conserved.
type prescribed struct {
	turnover
	total float64 // F₀, mol/yr
}

func (l *prescribed) Bind(ref Reference) error {
	l.total = ref.Total()
	return l.bind(ref)
}

func (l *prescribed) fluxes(in *Input, relative float64) Fluxes {
	return Fluxes{
		Ridge:     relative * l.total * in.Area * in.Scale,
		Subducted: in.Seafloor / l.Tau,
		Foundered: in.Continental * l.meta,
	}
}

// Steady is a constant outgassing, F = F₀.
type Steady struct{ prescribed }

func newSteady() Law { return &Steady{prescribed{turnover: newTurnover()}} }

// Fields lists the subduction time.
func (l *Steady) Fields() []units.Field { return l.fields() }

// Fluxes returns the fluxes.
func (l *Steady) Fluxes(in *Input) Fluxes { return l.fluxes(in, 1) }

// PowerLaw is outgassing that declines with the heat flow Q of Krissansen-Totton,
// Arney & Catling (2018):
//
//	F = F₀ Q^m,  Q = (1 − τ/4.5 Gyr)^(−n)
//
// with τ the time before present, so that Q = (t/t₀)^(−n) in age t; t₀ is the
// reference age here. Held below 0.05 t₀, where it is singular.
type PowerLaw struct {
	prescribed
	N, M float64
	t0   float64 // yr

	age, relative float64 // the last age asked for, yr, and F/F₀ there
}

func newPowerLaw() Law {
	return &PowerLaw{prescribed: prescribed{turnover: newTurnover()}, N: 0.365, M: 1.5}
}

// Fields lists n and m.
func (l *PowerLaw) Fields() []units.Field {
	return append([]units.Field{
		{Key: "heat_exponent", Min: 0, Max: 2, Published: units.Range{Lo: 0, Hi: 0.73}, Doc: "exponent n of the decline of heat flow", Source: cite.Ref{Work: cite.Lehmer2020, Note: "middle of the published range"}, Value: &l.N},
		{Key: "outgassing_exponent", Min: 0, Max: 4, Published: units.Range{Lo: 1, Hi: 2}, Doc: "exponent m of outgassing against heat flow", Source: cite.Ref{Work: cite.Lehmer2020, Note: "middle of the published range"}, Value: &l.M},
	}, l.fields()...)
}

// Bind fixes t₀.
func (l *PowerLaw) Bind(ref Reference) error {
	l.t0, l.age = ref.Age, math.NaN()
	return l.prescribed.Bind(ref)
}

// Fluxes returns the fluxes.
func (l *PowerLaw) Fluxes(in *Input) Fluxes {
	if in.Age != l.age {
		x := math.Max(in.Age/l.t0, 0.05)
		l.age, l.relative = in.Age, elementary.Exp(-l.N*l.M*elementary.Log(x))
	}
	return l.fluxes(in, l.relative)
}

// Table is total outgassing from a user's CSV with the columns age_gyr and
// outgassing_tmol_yr, of this planet (not scaled with its size), interpolated
// monotonically and held at both ends.
type Table struct {
	prescribed
	text     string
	ages, vs []float64 // yr, mol/yr
	curve    interp.FritschButland
}

func newTable() Law { return &Table{prescribed: prescribed{turnover: newTurnover()}} }

// Fields lists the subduction time.
func (l *Table) Fields() []units.Field { return l.fields() }

// Text returns the CSV as loaded.
func (l *Table) Text() *string { return &l.text }

// Load reads the CSV.
func (l *Table) Load(r io.Reader) error {
	cols, text, err := units.ReadTable(r, units.TableColumn{Name: "outgassing_tmol_yr", Lo: 0, Hi: 1e4})
	if err != nil {
		return err
	}
	for i := range cols[1] {
		cols[1][i] *= 1e12
	}
	l.ages, l.vs, l.text = cols[0], cols[1], text
	return nil
}

// Bind needs a loaded table.
func (l *Table) Bind(ref Reference) error {
	if len(l.ages) == 0 {
		return errors.New("the law \"table\" needs a table of outgassing: set table_file")
	}
	if err := l.curve.Fit(l.ages, l.vs); err != nil {
		return err
	}
	return l.prescribed.Bind(ref)
}

// Fluxes returns the fluxes.
func (l *Table) Fluxes(in *Input) Fluxes {
	a := math.Min(math.Max(in.Age, l.ages[0]), l.ages[len(l.ages)-1])
	f := l.fluxes(in, 1)
	f.Ridge = l.curve.Predict(a) * in.Scale
	return f
}
