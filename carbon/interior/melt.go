package interior

import "math"

// solidus returns the melting temperature of dry mantle rock in K at a pressure
// in GPa (Katz, Spiegelman & Langmuir 2003):
//
//	T_sol = 1085.7 °C + 132.9 P − 5.1 P²
func solidus(p float64) float64 { return solidusA + p*(solidusB-solidusC*p) }

// lherzoliteLiquidus is where the same rock with clinopyroxene would be all
// melted, in K (Katz, Spiegelman & Langmuir 2003):
//
//	T_liq = 1475.0 °C + 80.0 P − 3.2 P²
func lherzoliteLiquidus(p float64) float64 { return 1475.0 + celsius + p*(80.0-3.2*p) }

const (
	celsius                      = 273.15
	solidusA, solidusB, solidusC = 1085.7 + celsius, 132.9, 5.1
)

// melting is decompression melting along the mantle adiabat.
type melting struct {
	slope  float64 // d ln T/dP along the adiabat, α/(ρ c), 1/GPa
	latent float64 // L/c, K
}

// fraction returns the melt fraction of mantle of potential temperature t that
// has risen to a pressure p. The heat of melting comes out of the superheat:
//
//	F = (T (1 + αP/(ρc)) − T_sol)/(T_liq − T_sol + L/c)
//
// between 0 and 1, bent over smoothly near 1.
func (m *melting) fraction(t, p float64) float64 {
	sol := solidus(p)
	f := (t*(1+m.slope*p) - sol) / (lherzoliteLiquidus(p) - sol + m.latent)
	if f < 0 {
		return 0
	}
	return hold(f, 1, 0.4)
}

// deepest is the pressure in GPa below which melt is not counted: it would be
// too dense to rise, and the solidus of Katz et al. bends over.
const deepest, deepestBlend = 9, 2

// bottom returns the pressure in GPa at which the adiabat meets the solidus, 0
// where it does not.
func (m *melting) bottom(t float64) float64 {
	b, c := solidusB-m.slope*t, t-solidusA
	if c <= 0 {
		return 0
	}
	// solidusC P² − b P + c = 0, the smaller root
	d := b*b - 4*solidusC*c
	if b <= 0 || d <= 0 {
		return deepest
	}
	return hold(2*c/(b+math.Sqrt(d)), deepest, deepestBlend)
}

// column returns ∫F dP in GPa from a pressure up to the solidus, by Gauss'
// rule with three points. It starts as the square of the superheat.
func (m *melting) column(t, top float64) float64 {
	bottom := m.bottom(t)
	if !(bottom > top) {
		return 0
	}
	mid, half := 0.5*(bottom+top), 0.5*(bottom-top)
	d := half * math.Sqrt(0.6)
	return half / 9 * (5*m.fraction(t, mid-d) + 8*m.fraction(t, mid) + 5*m.fraction(t, mid+d))
}

// hold returns x held below a limit: x itself up to limit − w/2, the limit from
// limit + w/2 on, twice continuously differentiable.
func hold(x, limit, w float64) float64 {
	y := (limit-x)/w + 0.5
	switch {
	case y >= 1:
		return x
	case y <= 0:
		return limit
	}
	return limit - w*y*y*y*(1-0.5*y)
}
