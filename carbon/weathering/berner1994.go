package weathering

import (
	"cycle/carbon/cite"
	"cycle/carbon/units"
	"cycle/ode/elementary"
)

// Berner1994 is the weathering feedback of GEOCARB II, Berner (1994):
//
//	W/W₀ = f(p) · exp(k ΔT) · [1 + ε ΔT]^a,  ΔT = T − T₀
//
// k = 0.09 K⁻¹ stands for about 62 kJ/mol, ε = 0.038 K⁻¹ for the growth of runoff
// and a = 0.65 for its dilution. With R = p/p₀ the direct effect of CO₂ is
//
//	f = R^n            before vascular plants, n = 1/2
//	f = [2R/(1 + R)]^φ with plants, φ = 0.4, which saturates at 2^φ
//
// and for a planet part of the way (Plants = w) the geometric mean f₀^(1−w) f₁^w,
// an own choice. T₀ = 288 K in the paper.
type Berner1994 struct {
	K          float64 // k, K⁻¹
	Epsilon    float64 // ε, K⁻¹
	A          float64 // a
	Plants     float64 // w, 0 before vascular plants, 1 today
	N          float64 // n
	Fertilised float64 // φ
	t0         float64 // T₀, K
	p0         float64 // p₀, bar
}

func newBerner1994() Law {
	return &Berner1994{K: 0.09, Epsilon: 0.038, A: 0.65, Plants: 1, N: 0.5, Fertilised: 0.4}
}

// Relative returns W/W₀.
func (l *Berner1994) Relative(e *Env) float64 {
	dt := e.T - l.t0
	f := (1 - l.Plants) * l.N * e.LnP
	if l.Plants > 0 {
		f -= l.Plants * l.Fertilised * elementary.Log(0.5+0.5*l.p0/e.P) // 2R/(1 + R) = 1/(½ + ½/R)
	}
	return elementary.Exp(f + l.K*dt + l.A*lnBracket(1+l.Epsilon*dt))
}

// Runoff returns 1 + ε ΔT.
func (l *Berner1994) Runoff(e *Env) float64 { return bracket(1 + l.Epsilon*(e.T-l.t0)) }

// Fields lists k, ε, a, w, n and φ.
func (l *Berner1994) Fields() []units.Field {
	ref := cite.Ref{Work: cite.Berner1994, Trust: cite.Memory}
	return []units.Field{
		{Key: "activation", Kind: units.PerKelvin, Unit: "1/K", Min: 0, Max: 0.3, Doc: "growth k of the rate constant with temperature", Source: ref, Value: &l.K},
		runoffField("runoff", units.Range{Lo: 0.025, Hi: 0.045}, "growth ε of runoff with temperature", cite.Ref{Work: cite.Berner1994, Note: "range Berner & Kothavala 2001, cold and warm times", Trust: cite.Memory}, &l.Epsilon),
		{Key: "runoff_exponent", Min: 0, Max: 2, Doc: "exponent a of runoff, below 1 for dilution", Source: ref, Value: &l.A},
		{Key: "plants", Min: 0, Max: 1, Doc: "cover of vascular plants: 0 before them, 1 today", Source: cite.Ref{Work: cite.Berner1994, Note: "today; between 0 and 1 an own geometric mean", Trust: cite.Memory}, Value: &l.Plants},
		exponentField("exponent", units.Range{}, "exponent n of the CO2 pressure before vascular plants", ref, &l.N),
		exponentField("fertilisation", units.Range{}, "exponent φ of the CO2 fertilisation of plants", ref, &l.Fertilised),
	}
}

// Bind fixes T₀ and p₀.
func (l *Berner1994) Bind(ref Reference) error {
	l.t0, l.p0 = ref.T, ref.P
	return nil
}

// Range is not stated: the law was made for the last 570 Myr.
func (l *Berner1994) Range() Range { return Range{} }
