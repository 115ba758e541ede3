package ensemble

import (
	"fmt"
	"math"
	"slices"
	"strings"
	"sync"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/stat"
	"gonum.org/v1/gonum/stat/distuv"
)

// The designs.
const (
	Sobol  = "sobol"  // scrambled Sobol sequence
	Latin  = "latin"  // Latin hypercube in blocks
	Random = "random" // independent draws
	Freeze = "freeze" // pick and freeze, for total sensitivity indices
)

// Designs lists them, the default first.
var Designs = []string{Sobol, Latin, Random, Freeze}

// latinBlock is the number of members of one Latin hypercube. A single one over
// all members would change every member with their number.
const latinBlock = 1000

// design draws the inputs of a member as quantiles in (0, 1).
type design struct {
	kind string
	seed uint64
	keys []string // names of the streams, in order of dimension

	scramble []scrambler

	together []int      // dimensions with rank correlations
	lower    *mat.Dense // Cholesky factor of their normal copula

	mu     sync.Mutex
	blocks map[int]*mat.Dense // Latin hypercubes in use
}

// newDesign makes a design over keys; normal is the correlation matrix of the
// normal copula between some of them, or nil.
func newDesign(kind string, seed uint64, keys []string, together []string, normal *mat.SymDense) (*design, error) {
	d := &design{kind: kind, seed: seed, keys: keys, blocks: map[int]*mat.Dense{}}
	if !slices.Contains(Designs, kind) {
		return nil, fmt.Errorf("unknown design %q, allowed is one of %s", kind, strings.Join(Designs, ", "))
	}
	if kind == Freeze && normal != nil {
		return nil, fmt.Errorf("the design %q needs inputs without rank correlations: an index of one input alone means nothing where two move together", kind)
	}
	switch n := d.dimensions(); {
	case len(keys) == 0:
		return nil, fmt.Errorf("nothing is uncertain")
	case n > MaxDimensions && (kind == Sobol || kind == Freeze):
		return nil, fmt.Errorf("%d dimensions, allowed are at most %d with the design %q", n, MaxDimensions, kind)
	}
	for i := range d.dimensions() {
		name := keys[i%len(keys)]
		if i >= len(keys) {
			name += " again"
		}
		d.scramble = append(d.scramble, newScrambler(seed, name))
	}
	if normal != nil {
		var c mat.Cholesky
		if !c.Factorize(normal) {
			return nil, fmt.Errorf("no joint distribution has these rank correlations together")
		}
		var l mat.TriDense
		c.LTo(&l)
		d.lower = mat.DenseCopyOf(&l)
		for _, k := range together {
			d.together = append(d.together, slices.Index(keys, k))
		}
	}
	return d, nil
}

// dimensions is how many coordinates the underlying points have.
func (d *design) dimensions() int {
	if d.kind == Freeze {
		return 2 * len(d.keys)
	}
	return len(d.keys)
}

// independent tells whether a member is drawn independently of all before it,
// up to what a design does to spread members evenly.
func (d *design) independent(i int) bool {
	return d.kind != Freeze || i%(len(d.keys)+2) < 2
}

// unit returns the quantiles of member i.
func (d *design) unit(i int) []float64 {
	k := len(d.keys)
	u := make([]float64, k)
	switch d.kind {
	case Sobol:
		for j := range u {
			u[j] = d.scramble[j].unit(sobol(uint32(i), j))
		}
	case Random:
		for j, key := range d.keys {
			u[j] = unit(stream(d.seed, uint64(i), key))
		}
	case Latin:
		b := d.block(i / latinBlock)
		copy(u, b.RawRowView(i%latinBlock))
		return u // the block is correlated as a whole
	case Freeze:
		// Rows of one base point: A, B, then A with one column of B each.
		base, row := uint32(i/(k+2)), i%(k+2)
		for j := range u {
			dim := j
			if row == 1 || row == j+2 {
				dim = k + j
			}
			u[j] = d.scramble[dim].unit(sobol(base, dim))
		}
	}
	d.correlate(u)
	return u
}

// correlate moves quantiles by the normal copula
//
//	z = L Φ⁻¹(u),  u' = Φ(z)
//
// It is what the reordering of Iman & Conover (1982) with normal scores becomes
// for many members, and unlike it concerns one member alone.
func (d *design) correlate(u []float64) {
	n := len(d.together)
	if n == 0 {
		return
	}
	z := make([]float64, n)
	for a, j := range d.together {
		z[a] = distuv.UnitNormal.Quantile(u[j])
	}
	for a := n - 1; a >= 0; a-- {
		x := 0.0
		for b := 0; b <= a; b++ {
			x += d.lower.At(a, b) * z[b]
		}
		// Never the ends of the interval, however far out.
		u[d.together[a]] = math.Min(math.Max(distuv.UnitNormal.CDF(x), 0x1p-54), 1-0x1p-53)
	}
}

// block returns a Latin hypercube (McKay, Beckman & Conover 1979). Every key has a
// stream of its own, which the one of gonum.org/v1/gonum/stat/samplemv has not.
func (d *design) block(n int) *mat.Dense {
	d.mu.Lock()
	defer d.mu.Unlock()
	if b := d.blocks[n]; b != nil {
		return b
	}
	if len(d.blocks) >= 8 {
		oldest := n
		for k := range d.blocks {
			oldest = min(oldest, k)
		}
		delete(d.blocks, oldest)
		if len(d.blocks) >= 8 {
			clear(d.blocks)
		}
	}
	b := mat.NewDense(latinBlock, len(d.keys), nil)
	for j, key := range d.keys {
		src := stream(d.seed, uint64(n), "latin hypercube of "+key)
		for i, at := range permutation(src, latinBlock) {
			b.Set(i, j, (float64(at)+unit(src))/latinBlock)
		}
	}
	d.reorder(b)
	d.blocks[n] = b
	return b
}

// reorder gives a finished sample its rank correlations (Iman & Conover 1982):
// the columns stay what they are, only their order changes. The scores are those
// of van der Waerden.
func (d *design) reorder(b *mat.Dense) {
	n := len(d.together)
	if n == 0 {
		return
	}
	scores := mat.NewDense(latinBlock, n, nil)
	for a, j := range d.together {
		for i, at := range ranks(mat.Col(nil, j, b)) {
			scores.Set(i, a, distuv.UnitNormal.Quantile(float64(at+1)/(latinBlock+1)))
		}
	}
	var have mat.SymDense
	stat.CorrelationMatrix(&have, scores, nil)
	var c mat.Cholesky
	if !c.Factorize(&have) {
		return // fewer members than inputs: nothing can be done
	}
	var q mat.TriDense
	c.LTo(&q)
	var inv, turn, moved mat.Dense
	if inv.Inverse(&q) != nil {
		return
	}
	turn.Mul(d.lower, &inv)
	moved.Mul(scores, turn.T())
	for a, j := range d.together {
		col := mat.Col(nil, j, b)
		slices.Sort(col)
		for i, at := range ranks(mat.Col(nil, a, &moved)) {
			b.Set(i, j, col[at])
		}
	}
}

// ranks returns the rank of every value, from 0.
func ranks(x []float64) []int {
	order := make([]int, len(x))
	for i := range order {
		order[i] = i
	}
	slices.SortStableFunc(order, func(a, b int) int {
		switch {
		case x[a] < x[b]:
			return -1
		case x[a] > x[b]:
			return 1
		}
		return 0
	})
	out := make([]int, len(x))
	for r, i := range order {
		out[i] = r
	}
	return out
}

// words describes a design.
func (d *design) words() string {
	switch d.kind {
	case Sobol:
		return fmt.Sprintf("Sobol sequence in %d dimensions (Joe & Kuo 2008), nested uniform scrambling (Owen 1995)", len(d.keys))
	case Latin:
		return fmt.Sprintf("Latin hypercubes of %d members each (McKay et al. 1979), so that more members leave the first ones as they are", latinBlock)
	case Freeze:
		return fmt.Sprintf("pick and freeze (Saltelli et al. 2010): base points of a scrambled Sobol sequence in %d dimensions, %d members for each", 2*len(d.keys), len(d.keys)+2)
	}
	return "independent random draws"
}
