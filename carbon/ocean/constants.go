package ocean

import (
	"math"

	"cycle/carbon/cite"
	"cycle/carbon/units"
	"cycle/ode/elementary"
)

// Constants are the equilibrium constants of seawater at one temperature, in
// mol/kg and on the total pH scale.
type Constants struct {
	K0      float64 // [CO₂]/pCO₂, mol/kg/atm
	K1      float64 // [H⁺][HCO₃⁻]/[CO₂]
	K2      float64 // [H⁺][CO₃²⁻]/[HCO₃⁻]
	KB      float64 // [H⁺][B(OH)₄⁻]/[B(OH)₃]
	KW      float64 // [H⁺][OH⁻], mol²/kg²
	Calcite float64 // [Ca²⁺][CO₃²⁻] at saturation, mol²/kg²
}

// Seawater is the composition of the ocean apart from carbon.
type Seawater struct {
	Salinity float64 // practical salinity
	Calcium  float64 // [Ca²⁺], mol/kg
	Boron    float64 // total boron, mol/kg

	lnK0, lnK1, lnK2, lnKB, lnKW, lnCalcite, lnAragonite series // set by Bind

	kept recent[Constants]
}

// recent keeps what was evaluated at the last two temperatures. A solver asks
// for many states at one temperature and at one next to it.
type recent[V any] struct {
	t    [2]float64
	v    [2]V
	turn int
}

// forget empties it.
func (r *recent[V]) forget() { r.t = [2]float64{math.NaN(), math.NaN()} }

// at returns what is kept at t, or nil.
func (r *recent[V]) at(t float64) *V {
	if r.t[0] == t {
		return &r.v[0]
	}
	if r.t[1] == t {
		return &r.v[1]
	}
	return nil
}

// next returns the place to keep the values at t in.
func (r *recent[V]) next(t float64) *V {
	r.turn = 1 - r.turn
	r.t[r.turn] = t
	return &r.v[r.turn]
}

// newSeawater is today's mean seawater.
func newSeawater() Seawater { return Seawater{Salinity: 35, Calcium: Calcium(35), Boron: Boron(35)} }

// Calcium returns today's calcium at salinity S (Riley & Tongudai 1967), mol/kg:
//
//	[Ca] = (0.02128/40.087)(S/1.80655)
func Calcium(s float64) float64 { return 0.02128 / 40.087 * (s / 1.80655) }

// Boron returns today's total boron at salinity S (Uppström 1974), mol/kg:
//
//	B_T = (0.000232/10.811)(S/1.80655)
func Boron(s float64) float64 { return 0.000232 / 10.811 * (s / 1.80655) }

// BoronLee returns total boron at salinity S after Lee et al. (2010), 4 % more
// than Uppström (1974), mol/kg.
func BoronLee(s float64) float64 { return 0.0002414 / 10.811 * (s / 1.80655) }

// Measured is the range in which all constants were measured: 5 °C from the
// solubility products (Mucci 1983, 5-40 °C), 35 °C from K1 and K2 (Lueker et
// al. 2000, 2-35 °C). KB covers 0-45 °C (Dickson 1990).
var Measured = units.Range{Lo: 278.15, Hi: 308.15}

// The constants are extrapolated to the freezing point of seawater and to the
// hottest ocean of the climate laws, and held outside.
const (
	coldest, coldBlend = 271, 4  // K
	hottest, hotBlend  = 340, 10 // K
)

// Held returns the temperature at which the constants are evaluated: t itself
// from 273 to 335 K, 271 K below 269 K, 340 K above 345 K, twice continuously
// differentiable between.
func Held(t float64) float64 {
	if t < coldest+coldBlend/2 {
		return coldest + coldBlend*ramp((t-coldest)/coldBlend+0.5)
	}
	if t > hottest-hotBlend/2 {
		return hottest - hotBlend*ramp((hottest-t)/hotBlend+0.5)
	}
	return t
}

// ramp is 0 below x = 0 and x − ½ above 1; between, its slope rises as 3x² − 2x³.
func ramp(x float64) float64 {
	switch {
	case x <= 0:
		return 0
	case x >= 1:
		return x - 0.5
	}
	return x * x * x * (1 - 0.5*x)
}

// series is the logarithm of a constant as all of them are published,
//
//	a + b/T + c ln T + d T + e T²
//
// with the salinity already in the coefficients.
type series struct{ one, inv, log, lin, sq float64 }

// at evaluates the series with the shared 1/T and ln T.
func (s *series) at(t, inv, lnT float64) float64 {
	return s.one + s.inv*inv + s.log*lnT + t*(s.lin+t*s.sq)
}

// plus returns s + f q.
func (s series) plus(f float64, q series) series {
	return series{s.one + f*q.one, s.inv + f*q.inv, s.log + f*q.log, s.lin + f*q.lin, s.sq + f*q.sq}
}

// times returns f s.
func (s series) times(f float64) series { return series{}.plus(f, s) }

// Bind evaluates what depends on salinity.
func (w *Seawater) Bind() {
	w.kept.forget()
	s := w.Salinity
	w.lnK0 = lnK0(s)
	w.lnK1, w.lnK2 = pK1(s).times(-math.Ln10), pK2(s).times(-math.Ln10)
	w.lnKB, w.lnKW = lnKB(s), lnKW(s)
	w.lnCalcite, w.lnAragonite = logCalcite(s).times(math.Ln10), logAragonite(s).times(math.Ln10)
}

// At evaluates all constants at a surface temperature in K, held by Held.
func (w *Seawater) At(t float64) Constants { return *w.constants(t) }

// constants is At by reference to what is kept.
func (w *Seawater) constants(t float64) *Constants {
	t = Held(t)
	if k := w.kept.at(t); k != nil {
		return k
	}
	inv, lnT := 1/t, elementary.Log(t)
	k := w.kept.next(t)
	*k = Constants{
		K0:      elementary.Exp(w.lnK0.at(t, inv, lnT)),
		K1:      elementary.Exp(w.lnK1.at(t, inv, lnT)),
		K2:      elementary.Exp(w.lnK2.at(t, inv, lnT)),
		KB:      elementary.Exp(w.lnKB.at(t, inv, lnT)),
		KW:      elementary.Exp(w.lnKW.at(t, inv, lnT)),
		Calcite: elementary.Exp(w.lnCalcite.at(t, inv, lnT)),
	}
	return k
}

// Aragonite returns the solubility product of aragonite in mol²/kg².
func (w *Seawater) Aragonite(t float64) float64 {
	t = Held(t)
	return elementary.Exp(w.lnAragonite.at(t, 1/t, elementary.Log(t)))
}

// lnK0 is the solubility of CO₂ (Weiss 1974), K0 in mol/kg/atm:
//
//	ln K0 = 93.4517 (100/T) − 60.2409 + 23.3585 ln(T/100) + S [0.023517 − 0.023656 (T/100) + 0.0047036 (T/100)²]
func lnK0(s float64) series {
	const ln100 = 2 * math.Ln10
	return series{one: -60.2409 - 23.3585*ln100 + s*0.023517, inv: 93.4517 * 100, log: 23.3585,
		lin: -s * 0.023656 / 100, sq: s * 0.0047036 / 1e4}
}

// pK1 is the first dissociation of carbonic acid (Lueker, Dickson & Keeling 2000):
//
//	pK1 = 3633.86/T − 61.2172 + 9.67770 ln T − 0.011555 S + 0.0001152 S²
func pK1(s float64) series {
	return series{one: -61.2172 - 0.011555*s + 0.0001152*s*s, inv: 3633.86, log: 9.67770}
}

// pK2 is the second dissociation of carbonic acid (Lueker, Dickson & Keeling 2000):
//
//	pK2 = 471.78/T + 25.9290 − 3.16967 ln T − 0.01781 S + 0.0001122 S²
func pK2(s float64) series {
	return series{one: 25.9290 - 0.01781*s + 0.0001122*s*s, inv: 471.78, log: -3.16967}
}

// lnKB is the dissociation of boric acid (Dickson 1990):
//
//	ln KB = (−8966.90 − 2890.53 S^½ − 77.942 S + 1.728 S^(3/2) − 0.0996 S²)/T
//	        + 148.0248 + 137.1942 S^½ + 1.62142 S
//	        + (−24.4344 − 25.085 S^½ − 0.2474 S) ln T + 0.053105 S^½ T
func lnKB(s float64) series {
	r := math.Sqrt(s)
	return series{
		inv: -8966.90 - 2890.53*r - 77.942*s + 1.728*s*r - 0.0996*s*s,
		one: 148.0248 + 137.1942*r + 1.62142*s,
		log: -24.4344 - 25.085*r - 0.2474*s, lin: 0.053105 * r}
}

// lnKW is the ion product of water (Millero 1995):
//
//	ln KW = −13847.26/T + 148.9652 − 23.6521 ln T + (118.67/T − 5.977 + 1.0495 ln T) S^½ − 0.01615 S
func lnKW(s float64) series {
	return series{inv: -13847.26, one: 148.9652 - 0.01615*s, log: -23.6521}.
		plus(math.Sqrt(s), series{inv: 118.67, one: -5.977, log: 1.0495})
}

// logCalcite is the solubility product of calcite (Mucci 1983); the logarithm
// is to base 10:
//
//	log Ksp = −171.9065 − 0.077993 T + 2839.319/T + 71.595 log T
//	          + (−0.77712 + 0.0028426 T + 178.34/T) S^½ − 0.07711 S + 0.0041249 S^(3/2)
func logCalcite(s float64) series {
	r := math.Sqrt(s)
	return series{one: -171.9065 - 0.07711*s + 0.0041249*s*r, lin: -0.077993, inv: 2839.319, log: 71.595 / math.Ln10}.
		plus(r, series{one: -0.77712, lin: 0.0028426, inv: 178.34})
}

// logAragonite is the solubility product of aragonite (Mucci 1983), base 10:
//
//	log Ksp = −171.945 − 0.077993 T + 2903.293/T + 71.595 log T
//	          + (−0.068393 + 0.0017276 T + 88.135/T) S^½ − 0.10018 S + 0.0059415 S^(3/2)
func logAragonite(s float64) series {
	r := math.Sqrt(s)
	return series{one: -171.945 - 0.10018*s + 0.0059415*s*r, lin: -0.077993, inv: 2903.293, log: 71.595 / math.Ln10}.
		plus(r, series{one: -0.068393, lin: 0.0017276, inv: 88.135})
}

// Sources of the constants, for the tables of laws.
var constantSources = []cite.Ref{
	{Work: cite.Weiss1974, Note: "K0", Trust: cite.Checked},
	{Work: cite.Lueker2000, Note: "K1, K2", Trust: cite.Checked},
	{Work: cite.Dickson1990, Note: "KB", Trust: cite.Checked},
	{Work: cite.Millero1995, Note: "KW", Trust: cite.Checked},
	{Work: cite.Mucci1983, Note: "Ksp", Trust: cite.Checked},
}

func (w *Seawater) fields() []units.Field {
	return []units.Field{
		{Key: "salinity", Min: 1, Max: 50, Published: units.Range{Lo: 19, Hi: 43}, Doc: "practical salinity of the ocean", Source: cite.Ref{Work: cite.Dickson2007, Note: "reference seawater", Trust: cite.Memory}, Value: &w.Salinity},
		{Key: "calcium", Kind: units.Conc, Unit: "mmol/kg", Min: 1e-4, Max: 1, Doc: "dissolved calcium", Source: cite.Ref{Work: cite.RileyTongudai1967, Note: "at salinity 35", Trust: cite.Memory}, Value: &w.Calcium},
		{Key: "boron", Kind: units.Conc, Unit: "mmol/kg", Min: 0, Max: 0.1, Published: units.Range{Lo: Boron(35), Hi: BoronLee(35)}, Doc: "total dissolved boron", Source: cite.Ref{Work: cite.Uppstrom1974, Note: "at salinity 35; Lee et al. 2010 have 0.4326 mmol/kg", Trust: cite.Memory}, Value: &w.Boron},
	}
}
