package page

import (
	"bytes"
	"compress/gzip"
	"encoding/base64"
	"encoding/binary"
	"math"
	"sort"

	"cycle/reports/internal/num"
)

// A Column is one quantity of the data behind the figures, in shown units.
type Column struct {
	Name   string // machine name, unique
	Header string // in the CSV
	Title  string // for people
	Unit   string // "" for a pure number
	Values []float64
}

// Data is the one set of rows behind all figures of a page. The first column
// is the time in Gyr and is kept in full; the others travel in single
// precision, about seven digits, which is more than the solver earns.
type Data struct {
	Columns []Column
	Rows    int

	drop   int    // bits of the mantissa left out, so that a long history stays small
	packed string // what the page carries
}

// settle leaves out digits until the rows take no more than room, in characters.
// All rows stay: a history of hundreds of cycles can still be zoomed.
func (d *Data) settle(sets [][]int, room int) error {
	for _, d.drop = range []int{0, 3, 6, 9, 12} {
		var err error
		if d.packed, err = d.pack(sets); err != nil || len(d.packed) <= room {
			return err
		}
	}
	return nil
}

// Precision says how exact the rows of the page are. Finish must have been called.
func (d *Data) Precision() string {
	if d.drop == 0 {
		return "in single precision, about seven digits"
	}
	return "rounded to " + num.Pretty(num.Short(math.Pow(2, float64(d.drop-24)), 2)) + " of each value, so that the page stays small"
}

// Column returns the column of a name, or nil.
func (d *Data) Column(name string) *Column {
	for i := range d.Columns {
		if d.Columns[i].Name == name {
			return &d.Columns[i]
		}
	}
	return nil
}

// present reports whether a column holds any number.
func (c *Column) present() bool {
	for _, v := range c.Values {
		if !missing(v) {
			return true
		}
	}
	return false
}

func missing(v float64) bool { return math.IsNaN(v) || math.IsInf(v, 0) }

// pack writes the columns and the sets of thinned rows as gzip in base64. The
// bytes of a column stand apart by significance, each value as the difference
// from the one before, so that smooth histories become small. Missing values
// are NaN.
func (d *Data) pack(sets [][]int) (string, error) {
	var raw bytes.Buffer
	for i, c := range d.Columns {
		if i == 0 {
			words := make([]uint64, len(c.Values))
			for j, v := range c.Values {
				words[j] = math.Float64bits(v)
			}
			planes(&raw, words, 8)
			continue
		}
		words := make([]uint64, len(c.Values))
		before := uint32(0)
		for j, v := range c.Values {
			f := float32(v)
			if missing(v) || missing(float64(f)) {
				f = float32(math.NaN())
			}
			if f == 0 {
				f = 0
			}
			bits := math.Float32bits(f)
			if f != f {
				bits = 0x7fc00000
			} else {
				bits = shorten(bits, d.drop)
			}
			diff := bits - before
			words[j] = uint64(diff<<1 ^ uint32(int32(diff)>>31)) // small for both signs
			before = bits
		}
		planes(&raw, words, 4)
	}
	for _, set := range sets {
		bits := make([]byte, (d.Rows+7)/8)
		for _, j := range set {
			bits[j/8] |= 1 << (j % 8)
		}
		raw.Write(bits)
	}
	return packBytes(raw.Bytes())
}

// shorten rounds a number in single precision, as its bits, to fewer of them.
func shorten(bits uint32, drop int) uint32 {
	if drop == 0 || bits&0x7f800000 >= 0x7f000000 { // next to infinity
		return bits
	}
	return (bits + 1<<(drop-1)) &^ (1<<drop - 1)
}

// planes writes the first byte of every word, then the second, and so on.
func planes(w *bytes.Buffer, words []uint64, size int) {
	var b [8]byte
	for p := range size {
		for _, u := range words {
			binary.LittleEndian.PutUint64(b[:], u)
			w.WriteByte(b[p])
		}
	}
}

func packBytes(raw []byte) (string, error) {
	var b bytes.Buffer
	z, err := gzip.NewWriterLevel(&b, gzip.BestCompression)
	if err != nil {
		return "", err
	}
	if _, err := z.Write(raw); err != nil {
		return "", err
	}
	if err := z.Close(); err != nil {
		return "", err
	}
	return base64.StdEncoding.EncodeToString(b.Bytes()), nil
}

// Thin picks the rows to draw of a curve: all of them when there are few, else
// of each of the buckets of equal time the first, the last, the least and the
// largest value, so that no spike is lost. Where values begin or cease to be
// missing, both neighbours are kept, so that a gap stays a gap. x must ascend.
func Thin(x, y []float64, buckets int) []int {
	n := len(x)
	if n <= 4*buckets {
		all := make([]int, n)
		for i := range all {
			all[i] = i
		}
		return all
	}
	keep := map[int]bool{0: true, n - 1: true}
	for i := 1; i < n; i++ {
		if missing(y[i]) != missing(y[i-1]) {
			keep[i-1], keep[i] = true, true
		}
	}
	width := (x[n-1] - x[0]) / float64(buckets)
	for a := 0; a < n; {
		b := a + 1
		end := x[0] + width*(math.Floor((x[a]-x[0])/width)+1)
		for b < n && x[b] < end {
			b++
		}
		least, most := -1, -1
		for i := a; i < b; i++ {
			if missing(y[i]) {
				continue
			}
			if least < 0 || y[i] < y[least] {
				least = i
			}
			if most < 0 || y[i] > y[most] {
				most = i
			}
		}
		keep[a], keep[b-1] = true, true
		if least >= 0 {
			keep[least], keep[most] = true, true
		}
		a = b
	}
	out := make([]int, 0, len(keep))
	for i := range keep {
		out = append(out, i)
	}
	sort.Ints(out)
	return out
}

// spread picks about n rows of a table: evenly in time, with the given times
// kept, first and last included.
func spread(x []float64, n int, also []float64) []int {
	keep := map[int]bool{}
	if len(x) == 0 {
		return nil
	}
	near := func(t float64) {
		i := sort.SearchFloat64s(x, t)
		if i == len(x) || i > 0 && t-x[i-1] < x[i]-t {
			i--
		}
		keep[i] = true
	}
	for i := range n {
		near(x[0] + (x[len(x)-1]-x[0])*float64(i)/float64(n-1))
	}
	for _, t := range also {
		if !missing(t) {
			near(t)
		}
	}
	out := make([]int, 0, len(keep))
	for i := range keep {
		out = append(out, i)
	}
	sort.Ints(out)
	return out
}
