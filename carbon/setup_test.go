package carbon

import (
	"context"
	"math"
	"strings"
	"testing"

	"cycle/carbon/cite"
	"cycle/carbon/climate"
	"cycle/carbon/record"
	"cycle/carbon/units"
)

// TestEveryKey walks every section with every law: each law has a form and a
// source, each key a meaning, a source and a default inside its ranges, and a
// unit where it has a dimension. It logs how many there are by the trust in
// their source.
func TestEveryKey(t *testing.T) {
	trust := map[string]int{}
	laws, keys := 0, 0
	seen := map[string]bool{}
	said := func(where string, r cite.Ref) {
		if r.Work == nil && r.Note == "" {
			t.Errorf("%s: no source", where)
		}
		if !seen[where] {
			seen[where] = true
			trust[r.Trust.String()]++
		}
	}
	walk := func(s *Setup) {
		for _, sec := range s.Sections() {
			if sec.Name == "" || sec.Doc == "" {
				t.Errorf("section %q: no meaning", sec.Name)
			}
			names := map[string]bool{}
			if len(sec.Laws) > 0 {
				names["law"] = true
			}
			unique := func(key string) string {
				if names[key] {
					t.Errorf("%s.%s: twice", sec.Name, key)
				}
				names[key] = true
				return sec.Name + "." + sec.Law + "." + key
			}
			for i := range sec.Fields {
				f := &sec.Fields[i]
				where := unique(f.Key)
				v := *f.Value
				switch {
				case f.Key == "" || f.Doc == "":
					t.Errorf("%s: no meaning", where)
				case f.Check(v) != nil:
					t.Errorf("%s: the default: %v", where, f.Check(v))
				case f.Check(f.Min) != nil || f.Check(f.Max) != nil || f.Min >= f.Max:
					t.Errorf("%s: allowed is %g to %g", where, f.Min, f.Max)
				case f.Extrapolates(v):
					t.Errorf("%s: the default %s is outside the published range", where, f.Text(v))
				case f.Published.Stated() && (f.Published.Lo > f.Published.Hi || f.Published.Lo < f.Min || f.Published.Hi > f.Max):
					t.Errorf("%s: the published range %v is not inside the allowed %g to %g", where, f.Published, f.Min, f.Max)
				case f.Off && f.Min != 0:
					t.Errorf("%s: zero switches it off, but is not allowed", where)
				}
				if _, _, ok := f.Kind.Scale(f.ShownUnit()); !ok {
					t.Errorf("%s: unit %q", where, f.ShownUnit())
				}
				back, _, err := f.Kind.Parse(f.Text(v))
				if err != nil || math.Abs(back-v) > 1e-12*math.Abs(v) {
					t.Errorf("%s: %s reads back as %g, %v", where, f.Text(v), back, err)
				}
				said(where, f.Source)
				keys++
			}
			for _, o := range sec.Options {
				where := unique(o.Key)
				ok := false
				for _, a := range o.Allowed {
					ok = ok || a == *o.Value
				}
				if !ok || o.Doc == "" || len(o.Allowed) < 2 {
					t.Errorf("%s: default %q of %v, meaning %q", where, *o.Value, o.Allowed, o.Doc)
				}
				said(where, o.Source)
				keys++
			}
			for _, f := range sec.Flags {
				where := unique(f.Key)
				if f.Doc == "" || f.Value == nil {
					t.Errorf("%s: no meaning", where)
				}
				said(where, f.Source)
				keys++
			}
			if (sec.Table != nil) != (sec.Law == "table") {
				t.Errorf("%s: law %s and its table", sec.Name, sec.Law)
			}
		}
	}
	walk(NewSetup())
	for _, sec := range NewSetup().Sections() {
		for _, c := range sec.Laws {
			laws++
			if c.Doc == "" || c.Form == "" || len(c.Source) == 0 {
				t.Errorf("%s %s: doc %q, form %q, %d sources", sec.Name, c.Name, c.Doc, c.Form, len(c.Source))
			}
			s := NewSetup()
			if err := s.Choose(sec.Name, c.Name); err != nil {
				t.Errorf("%s %s: %v", sec.Name, c.Name, err)
				continue
			}
			walk(s)
		}
	}
	s := NewSetup()
	if !s.Grow("pulse.2") || s.Grow("pulse.0") || s.Grow("pulse.10") || s.Grow("pulse.x") || s.Grow("pulse.1 ") {
		t.Error("sections of pulses")
	}
	walk(s)
	t.Logf("%d laws, %d keys; sources by trust: %s", laws, len(seen), counts(trust))
	if laws < 40 || len(seen) < 150 {
		t.Errorf("%d laws and %d keys: too few were walked", laws, len(seen))
	}
}

// TestFeedbackOfEveryClosure: every radiation with every albedo states forcing and
// sensitivity at the reference state, as the laws themselves give them and as the
// energy balance solved again for doubled CO₂ confirms.
func TestFeedbackOfEveryClosure(t *testing.T) {
	for _, rad := range climate.Radiations {
		for _, alb := range climate.Albedos {
			s := NewSetup()
			if err := s.Choose("radiation", rad.Name); err != nil {
				t.Fatal(err)
			}
			if err := s.Choose("albedo", alb.Name); err != nil {
				t.Fatal(err)
			}
			s.Start, s.End = 4.5*units.Gyr, 4.6*units.Gyr
			s.Content = 7.8e-3
			r, err := Run(context.Background(), s)
			if err != nil {
				t.Errorf("%s, %s: %v", rad.Name, alb.Name, err)
				continue
			}
			m, err := NewModel(s)
			if err != nil {
				t.Fatal(err)
			}
			ref := climate.Reference{T: s.RefT, P: s.RefP, Sun: s.RefSun / 4}
			forcing := climate.Forcing(s.radiation.law, ref)
			sens, err := climate.Sensitivity(s.radiation.law, s.albedo.law, ref)
			if err != nil {
				t.Errorf("%s, %s: %v", rad.Name, alb.Name, err)
				continue
			}
			got := r.Feedback
			if got.Forcing != forcing || got.Sensitivity != sens {
				t.Errorf("%s, %s: states %g W/m2 and %g K, the laws give %g and %g", rad.Name, alb.Name, got.Forcing, got.Sensitivity, forcing, sens)
			}
			if !(forcing > 0.5 && forcing < 10 && sens > 0.3 && sens < 10) {
				t.Errorf("%s, %s: %g W/m2, %g K a doubling", rad.Name, alb.Name, forcing, sens)
			}
			// Warming under slightly more CO₂ by the energy balance, per doubling.
			const more = 1e-3 // e-folds
			f := func(x float64) float64 { return m.imbalance(ref.Sun, x, s.RefP*math.Exp(more)) }
			warm := bracketed(f, s.RefT-1, s.RefT+1, f(s.RefT-1), f(s.RefT+1), 1e-14) - s.RefT
			// The forcing of a doubling is not twice that of half of it: compare slopes.
			slope := (m.imbalance(ref.Sun, s.RefT, s.RefP*math.Exp(more)) - m.imbalance(ref.Sun, s.RefT, s.RefP)) / more
			full := m.imbalance(ref.Sun, s.RefT, 2*s.RefP) - m.imbalance(ref.Sun, s.RefT, s.RefP)
			if again := warm / more / slope * full; math.Abs(again/sens-1) > 2e-3 {
				t.Errorf("%s, %s: %g K a doubling, the balance solved again gives %g", rad.Name, alb.Name, sens, again)
			}
			t.Logf("%s, %s: %.2f W/m2 and %.2f K a doubling", rad.Name, alb.Name, forcing, sens)
		}
	}
}

// TestWarnings: every kind of doubt is raised by what it is about, and by nothing
// on the Earth before it warms.
func TestWarnings(t *testing.T) {
	choose := func(s *Setup, section, law string) {
		if err := s.Choose(section, law); err != nil {
			t.Fatal(err)
		}
	}
	set := func(s *Setup, key string, v float64) { *s.Number(key).Value = v }
	type warning struct {
		about, words string
		set          func(s *Setup)
	}
	cases := []warning{
		{"solver", "guard is off", func(s *Setup) { s.Guard = false }},
		{"solver", "the solver stopped", func(s *Setup) { s.MaxSteps = 100 }},
		{"solver", "stopped at 3 freezes", func(s *Setup) { s.Distance, s.MaxFreezes, s.End = 1.15*units.AU, 3, 9e9 }},
		{"time", "born frozen", func(s *Setup) { s.Distance, s.Content = 1.5*units.AU, 1e-6 }},
		{"time", "sunlight exceeds", func(s *Setup) { s.Distance = 0.7 * units.AU }},
		{"weathering.land", "exponent = 0.9 is outside its published range", func(s *Setup) { set(s, "weathering.land.exponent", 0.9) }},
		{"atmosphere", record.BelowTriple, func(s *Setup) { s.Nitrogen, s.Distance, s.Content = 0, 1.4*units.AU, 1e-6 }},
		{"carbon", record.MantleEmpty, func(s *Setup) { choose(s, "sources", "steady"); s.Content = 1e-4 }},
		{"star", "outside its range of age", func(s *Setup) { s.Start = 0.1e9 }},
		{"interior", "outside its range of age", func(s *Setup) { choose(s, "interior", "powerlaw"); s.End = 5e9 }},
		{"radiation", "outside its range of CO2", func(s *Setup) { s.End = 6e9 }},
		{"albedo", "outside its range of temperature", func(s *Setup) { choose(s, "albedo", "caldeira1992"); s.Distance = 1.35 * units.AU }},
		{"albedo", "outside its range of CO2", func(s *Setup) { choose(s, "albedo", "williams1997"); s.End = 6e9 }},
		{"weathering.seafloor", "outside its range of temperature", func(s *Setup) { choose(s, "weathering.seafloor", "brady1997"); s.End = 9e9 }},
		{"ocean", "outside its range of temperature", func(s *Setup) { s.End = 9e9 }},
	}
	base := func() *Setup {
		s := NewSetup()
		s.Content, s.End = 7.8e-3, 4.4*units.Gyr
		return s
	}
	calm, err := Run(context.Background(), base())
	if err != nil {
		t.Fatal(err)
	}
	if len(calm.Warnings) > 0 {
		t.Errorf("warnings without a cause: %+v", calm.Warnings)
	}
	for _, c := range cases {
		s := base()
		c.set(s)
		r, err := Run(context.Background(), s)
		if err != nil {
			t.Errorf("%s, %s: %v", c.about, c.words, err)
			continue
		}
		if !warned(r, c.about, c.words) {
			t.Errorf("%s: no warning %q in %+v (%s)", c.about, c.words, r.Warnings, r.Outcome.Sentence)
		}
	}
	// What no setup is known to bring about, by its cause.
	m, err := NewModel(base())
	if err != nil {
		t.Fatal(err)
	}
	h, err := m.integrate(context.Background(), m.set.End, 1e-5, true)
	if err != nil {
		t.Fatal(err)
	}
	other := *h
	other.frozen = []span{{lost: 1e9, start: 1e9, end: math.NaN()}}
	h.drift, m.balanceResidual = 1e-6, 1
	b := &builder{m: m, h: h, run: &record.Run{}}
	b.dates(&other)
	b.warnings(0.005)
	for _, c := range []warning{{"carbon", "drifts", nil}, {"carbon", "the reference state is missed", nil}, {"albedo", "energy balance at the reference state", nil}, {"solver", "not numerically settled", nil}} {
		if !warned(b.run, c.about, c.words) {
			t.Errorf("%s: no warning %q in %+v", c.about, c.words, b.run.Warnings)
		}
	}
	for _, w := range b.run.Warnings {
		if strings.Contains(w.Words, "NaN") {
			t.Errorf("warning with no number: %s", w.Words)
		}
	}
}
