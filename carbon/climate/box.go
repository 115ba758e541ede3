package climate

import (
	"cycle/carbon/units"
	"cycle/ode/elementary"
)

// HoldT returns t moved to the nearest end of the box and whether it had to move.
func (b Box) HoldT(t float64) (held float64, moved bool) { return hold(b.T, t) }

// HoldP returns the CO₂ pressure p moved to the nearest end of the box and
// whether it had to move.
func (b Box) HoldP(p float64) (held float64, moved bool) { return hold(b.P, p) }

func hold(r units.Range, x float64) (float64, bool) {
	switch {
	case !r.Stated():
		return x, false
	case x < r.Lo:
		return r.Lo, true
	case x > r.Hi:
		return r.Hi, true
	}
	return x, false
}

// edges is a box with the logarithms of its pressures, for the laws' own use.
type edges struct {
	Box
	lnLo, lnHi float64
}

func newEdges(tLo, tHi, pLo, pHi float64) edges {
	return edges{Box{T: units.Range{Lo: tLo, Hi: tHi}, P: units.Range{Lo: pLo, Hi: pHi}}, elementary.Log(pLo), elementary.Log(pHi)}
}

// hold moves a state to the nearest point of the box.
func (e *edges) hold(t, lnp float64) (float64, float64) {
	if t < e.T.Lo {
		t = e.T.Lo
	} else if t > e.T.Hi {
		t = e.T.Hi
	}
	if lnp < e.lnLo {
		lnp = e.lnLo
	} else if lnp > e.lnHi {
		lnp = e.lnHi
	}
	return t, lnp
}
