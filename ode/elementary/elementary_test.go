package elementary

import (
	"fmt"
	"math"
	"math/big"
	"math/rand/v2"
	"testing"
)

// expBig returns e^x from the series of e^(x/2^20), squared 20 times.
func expBig(x float64) *big.Float {
	const prec, halvings = 300, 20
	y := new(big.Float).SetPrec(prec).SetFloat64(x)
	y.SetMantExp(y, -halvings)
	sum := new(big.Float).SetPrec(prec).SetInt64(1)
	term := new(big.Float).SetPrec(prec).SetInt64(1)
	for n := int64(1); n < 60; n++ {
		term.Mul(term, y)
		term.Quo(term, new(big.Float).SetPrec(prec).SetInt64(n))
		sum.Add(sum, term)
	}
	for range halvings {
		sum.Mul(sum, sum)
	}
	return sum
}

// units returns |got − want| in units in the last place of want.
func units(got float64, want *big.Float) float64 {
	w, _ := want.Float64()
	d, _ := new(big.Float).SetPrec(300).Sub(new(big.Float).SetPrec(300).SetFloat64(got), want).Float64()
	return math.Abs(d) / (math.Nextafter(math.Abs(w), math.Inf(1)) - math.Abs(w))
}

func TestExpAccuracy(t *testing.T) {
	src := rand.New(rand.NewPCG(1, 2))
	worst, at := 0.0, 0.0
	for i := range 20000 {
		x := (2*src.Float64() - 1) * 700
		switch i % 4 {
		case 1:
			x /= 100
		case 2:
			x = math.Copysign(math.Exp(-30*src.Float64()), x)
		case 3: // next to the end of a row
			x = (math.Floor(x) + 0.5) * math.Ln2 / rows * (1 + 1e-12*(src.Float64()-0.5))
		}
		if u := units(Exp(x), expBig(x)); u > worst {
			worst, at = u, x
		}
	}
	t.Logf("largest error %.3f units in the last place, at %g", worst, at)
	if worst > 0.56 {
		t.Errorf("Exp(%v): error of %.3f units in the last place", at, worst)
	}
}

// The logarithm is judged by Newton's correction from the big exponential.
func TestLogAccuracy(t *testing.T) {
	src := rand.New(rand.NewPCG(3, 4))
	worst, at := 0.0, 0.0
	for i := range 20000 {
		x := math.Exp((2*src.Float64() - 1) * 700)
		switch i % 4 {
		case 1:
			x = 1 + (2*src.Float64()-1)*0.02
		case 2:
			x = 1 + (2*src.Float64()-1)*math.Exp(-30*src.Float64())
		case 3:
			x = 0.5 + src.Float64()
		}
		got := Log(x)
		if x == 1 {
			if got != 0 {
				t.Errorf("Log(1) = %v", got)
			}
			continue
		}
		e := expBig(got)
		// ln x = got + ln(x/e) = got + 2 (x−e)/(x+e) to 1e-48
		bx := new(big.Float).SetPrec(300).SetFloat64(x)
		num := new(big.Float).SetPrec(300).Sub(bx, e)
		num.Quo(num, new(big.Float).SetPrec(300).Add(bx, e))
		num.Mul(num, new(big.Float).SetPrec(300).SetInt64(2))
		want := num.Add(num, new(big.Float).SetPrec(300).SetFloat64(got))
		if u := units(got, want); u > worst {
			worst, at = u, x
		}
	}
	t.Logf("largest error %.3f units in the last place, at %g", worst, at)
	if worst > 0.56 {
		t.Errorf("Log(%v): error of %.3f units in the last place", at, worst)
	}
}

// Abramowitz & Stegun, Handbook of Mathematical Functions (1964), tables 1.1,
// 4.2 and 4.4 (from memory).
func TestHandbook(t *testing.T) {
	for _, c := range []struct {
		what      string
		got, want float64
	}{
		{"e", Exp(1), 2.718281828459045235},
		{"e^-1", Exp(-1), 0.367879441171442322},
		{"e^0.5", Exp(0.5), 1.648721270700128147},
		{"e^10", Exp(10), 22026.46579480671652},
		{"ln 2", Log(2), 0.693147180559945309},
		{"ln 3", Log(3), 1.098612288668109691},
		{"ln 10", Log(10), 2.302585092994045684},
		{"ln pi", Log(math.Pi), 1.144729885849400174},
	} {
		if math.Abs(c.got-c.want) > 0x1p-52*c.want {
			t.Errorf("%s = %v, want %v", c.what, c.got, c.want)
		}
	}
}

func TestSpecialValues(t *testing.T) {
	for _, x := range []float64{0, math.Copysign(0, -1), 1, -1, math.Inf(1), math.Inf(-1), math.NaN(),
		math.MaxFloat64, -math.MaxFloat64, math.SmallestNonzeroFloat64, 0x1p-1022, 0x1p-1023,
		709, 709.7, 709.9, -708, -708.3, -745, -746, math.Nextafter(709, 0), math.Nextafter(-708, 0)} {
		t.Run(fmt.Sprint(x), func(t *testing.T) {
			same := func(name string, got, want float64) {
				if got != want && !(math.IsNaN(got) && math.IsNaN(want)) && !(math.Abs(got-want) <= 0x1p-51*math.Abs(want)) {
					t.Errorf("%s(%v) = %v, want %v", name, x, got, want)
				}
			}
			same("Exp", Exp(x), math.Exp(x))
			same("Log", Log(x), math.Log(x))
		})
	}
}

// Growing arguments give growing values, also from row to row, but for a last
// bit of the logarithm.
func TestMonotone(t *testing.T) {
	for i := -200; i < 200; i++ {
		x := (float64(i) + 0.5) * math.Ln2 / rows
		for j := range 200 {
			a := x + float64(j-100)*0x1p-54*math.Abs(x)
			b := math.Nextafter(a, math.Inf(1))
			if Exp(b) < Exp(a) {
				t.Fatalf("Exp falls at %v", a)
			}
		}
		b := uint64(lowest) + uint64(i+300)<<shift
		for j := range 200 {
			a := math.Float64frombits(b + uint64(j) - 100)
			if l := Log(a); Log(math.Nextafter(a, 3)) < l-0x1p-52*math.Abs(l) {
				t.Fatalf("Log falls at %v", a)
			}
		}
	}
}

var sink float64

// The argument depends on the last result, as in a right-hand side.
func BenchmarkExp(b *testing.B) { chain(b, Exp) }

func BenchmarkMathExp(b *testing.B) { chain(b, math.Exp) }

func BenchmarkLog(b *testing.B) { chain(b, func(x float64) float64 { return Log(2 + x) }) }

func BenchmarkMathLog(b *testing.B) { chain(b, func(x float64) float64 { return math.Log(2 + x) }) }

func chain(b *testing.B, f func(float64) float64) {
	x := 1.0
	for b.Loop() {
		x = f(0.1 * x)
	}
	sink = x
}
