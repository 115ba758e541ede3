package interior

import (
	"cycle/carbon/cite"
	"cycle/carbon/units"
	"cycle/ode/elementary"
)

// prescribed is what the laws share that prescribe the heat flow instead of
// cooling a mantle: the mantle stays at its reference temperature.
type prescribed struct {
	M    float64 // exponent of crust production
	QRef float64 // the Earth's mantle heat flow at the reference state, W
	area float64 // A/A_E
}

func newPrescribed() prescribed { return prescribed{M: 1, QRef: newMantle().QRef} }

func (l *prescribed) fields() []units.Field {
	m := newMantle()
	for _, f := range m.fields() {
		if f.Key == "reference_flow" {
			f.Value = &l.QRef
			return []units.Field{f, crustField(&l.M)}
		}
	}
	return nil
}

func (l *prescribed) bind(p *Planet) { l.area = p.Area / earth.Area }

// flow returns the state at a relative heat flow per area.
func (l *prescribed) flow(rel float64) Flow {
	s := rel
	if l.M != 1 {
		s = elementary.Exp(l.M * elementary.Log(rel))
	}
	return Flow{Heat: l.QRef * l.area * rel, Relative: rel, Crust: s, Recycling: s}
}

// Start returns today's temperature of the Earth's mantle; it is not used.
func (l *prescribed) Start(float64) (mantle, core float64) {
	t := newMantle().TRef
	return t, t
}

// HasCore is false.
func (l *prescribed) HasCore() bool { return false }

// PowerLaw is the heat flow of Krissansen-Totton, Arney & Catling (2018),
//
//	q = (1 − t/4.5 Gyr)^(−n)
//
// with t before the reference age, singular 4.5 Gyr before it. There the base
// is held smoothly at 0.05, in force from t = 4.1 Gyr on; Range tells. It is
// used per area, alike for planets of any mass.
type PowerLaw struct {
	prescribed
	N float64 // n

	reference float64 // yr
}

func newPowerLaw() Law { return &PowerLaw{prescribed: newPrescribed(), N: 0.365} }

// Constants of the power law, and where its base is held.
const (
	powerSpan            = 4.5 * units.Gyr
	powerFloor, powerFix = 0.05, 0.08
)

// Flow evaluates the law; the temperatures do not matter.
func (l *PowerLaw) Flow(age, _, _ float64) Flow {
	base := -hold(-(1 - (l.reference-age)/powerSpan), -powerFloor, powerFix)
	return l.flow(elementary.Exp(-l.N * elementary.Log(base)))
}

// Fields lists n, Q_ref and m.
func (l *PowerLaw) Fields() []units.Field {
	return append([]units.Field{
		{Key: "decline", Min: 0, Max: 2, Published: units.Range{Lo: 0, Hi: 0.73}, Doc: "exponent n of the decline of the heat flow", Source: cite.Ref{Work: cite.KrissansenTotton2018, Note: "middle of the range 0-0.73 in Lehmer et al. 2020", Trust: cite.Memory}, Value: &l.N},
	}, l.fields()...)
}

// Bind fixes the reference age.
func (l *PowerLaw) Bind(p Planet, referenceAge float64) error {
	l.prescribed.bind(&p)
	l.reference = referenceAge
	return nil
}

// Range returns the ages from where the base is not held to the reference age.
func (l *PowerLaw) Range() units.Range {
	return units.Range{Lo: max(0, l.reference-powerSpan*(1-powerFloor-powerFix/2)), Hi: l.reference}
}
