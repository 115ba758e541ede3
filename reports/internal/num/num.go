// Package num writes numbers for readers: a sensible number of digits, never
// the noise of binary fractions, and words for what is missing.
package num

import (
	"math"
	"strconv"
	"strings"
)

// Missing is what stands where a number was not computed.
const Missing = "–"

// Sig writes v with n significant digits in plain characters ("2.80e-4"). It
// never rounds away digits before the decimal point of a number below a
// million.
func Sig(v float64, n int) string {
	if math.IsNaN(v) || math.IsInf(v, 0) {
		return Missing
	}
	if v == 0 {
		return "0"
	}
	// Rounding first: 9.996 at three digits is 10.0, not 9.996 with one digit.
	r, _ := strconv.ParseFloat(strconv.FormatFloat(v, 'e', n-1, 64), 64)
	exp := int(math.Floor(math.Log10(math.Abs(r))))
	if exp < -3 || exp >= 6 {
		s := strconv.FormatFloat(v, 'e', n-1, 64)
		mant, e, _ := strings.Cut(s, "e")
		x, _ := strconv.Atoi(e)
		return mant + "e" + strconv.Itoa(x)
	}
	return Fix(v, max(n-1-exp, 0))
}

// Fix writes v with the given number of decimals.
func Fix(v float64, decimals int) string {
	if math.IsNaN(v) || math.IsInf(v, 0) {
		return Missing
	}
	s := strconv.FormatFloat(v, 'f', decimals, 64)
	if strings.Trim(s, "-0.") == "" {
		s = strings.TrimPrefix(s, "-")
	}
	return s
}

// Trim drops zeros at the end of the decimals: "7.50" is "7.5", "2.00e-4" is "2e-4".
func Trim(s string) string {
	mant, exp, hasExp := strings.Cut(s, "e")
	if strings.Contains(mant, ".") {
		mant = strings.TrimRight(strings.TrimRight(mant, "0"), ".")
	}
	if hasExp {
		return mant + "e" + exp
	}
	return mant
}

// Short writes v with at most n significant digits and no zeros at the end.
func Short(v float64, n int) string { return Trim(Sig(v, n)) }

// Pretty turns the number at the start of a text into typeset characters and
// leaves the rest: "-2.8e-4 bar" becomes "−2.8 × 10⁻⁴ bar".
func Pretty(s string) string {
	end := len(s)
	if i := strings.IndexByte(s, ' '); i >= 0 {
		end = i
	}
	n, rest := s[:end], s[end:]
	if _, err := strconv.ParseFloat(n, 64); err != nil {
		return s
	}
	mant, exp, ok := strings.Cut(n, "e")
	mant = strings.Replace(mant, "-", "−", 1)
	if ok {
		mant += "\u00a0×\u00a010" + Raised(exp) // no line break inside a number
	}
	return mant + rest
}

// Raised writes an integer in superscript.
func Raised(s string) string {
	return strings.NewReplacer("-", "⁻", "0", "⁰", "1", "¹", "2", "²", "3", "³", "4", "⁴", "5", "⁵", "6", "⁶", "7", "⁷", "8", "⁸", "9", "⁹").Replace(s)
}

// Unit typesets a unit: "W/m2" becomes "W/m²".
func Unit(u string) string { return strings.ReplaceAll(u, "m2", "m²") }

// With joins a number and its unit; a pure number stays alone.
func With(s, unit string) string {
	switch {
	case unit == "" || s == Missing:
		return s
	case unit == "%":
		return s + " %"
	}
	return s + " " + unit
}

// Pressure writes a partial pressure given in bar: in ppm below 0.01 bar (one
// ppm is 1e-6 bar), in bar above.
func Pressure(bar float64) string {
	if math.IsNaN(bar) || math.IsInf(bar, 0) {
		return Missing
	}
	if math.Abs(bar) < 0.01 {
		return With(Short(bar*1e6, 3), "ppm")
	}
	return With(Short(bar, 3), "bar")
}

// Age writes an age in Gyr with its unit.
func Age(gyr float64) string { return With(Fix(gyr, decimals(gyr, 3)), "Gyr") }

// decimals gives a date of the first million years the digits it needs.
func decimals(gyr float64, least int) int {
	if a := math.Abs(gyr); a > 0 && a < 0.001 {
		return 6
	}
	return least
}

// Date writes an age in Gyr with its numerical error: "1.939 ± 0.002 Gyr". The
// error decides the digits, at most four decimals (0.1 Myr).
func Date(gyr, err float64) string {
	switch {
	case math.IsNaN(gyr) || math.IsInf(gyr, 0):
		return Missing
	case math.IsNaN(err) || math.IsInf(err, 0):
		return Age(gyr) + " (numerical error not known)"
	}
	err = math.Abs(err)
	if err < 0.5e-4 {
		return Fix(gyr, 4) + " Gyr ± " + small(err)
	}
	d := min(max(int(math.Ceil(-math.Log10(err)-1e-9)), 2), 4)
	return Fix(gyr, d) + " ± " + Fix(err, d) + " Gyr"
}

// small writes an error below 0.1 Myr, given in Gyr, as headlines do.
func small(gyr float64) string {
	switch yr := gyr * 1e9; {
	case yr >= 1000:
		return Fix(yr/1e3, 0) + " kyr"
	case yr >= 1:
		return Fix(yr, 0) + " yr"
	}
	return "below 1 yr"
}

// Ago writes a date as time from a present: "2.63 Gyr before" or "1.20 Gyr after".
func Ago(gyr, present float64) string {
	d := gyr - present
	switch {
	case math.IsNaN(d) || math.IsInf(d, 0):
		return Missing
	case math.Abs(d) < 0.0005:
		return "at"
	case d < 0:
		return With(Short(-d, 3), "Gyr") + " before"
	}
	return With(Short(d, 3), "Gyr") + " after"
}

// Span writes a length of time given in Gyr in the unit that suits it.
func Span(gyr float64) string {
	switch a := math.Abs(gyr); {
	case math.IsNaN(gyr) || math.IsInf(gyr, 0):
		return Missing
	case a >= 1:
		return With(Short(gyr, 3), "Gyr")
	case a >= 1e-3:
		return With(Short(gyr*1e3, 3), "Myr")
	case a >= 1e-6:
		return With(Short(gyr*1e6, 3), "kyr")
	}
	return With(Short(gyr*1e9, 3), "yr")
}

// Percent writes a share between 0 and 1.
func Percent(share float64) string { return With(Short(share*100, 3), "%") }

// Count writes "1 freeze" or "3 freezes".
func Count(n int, one, many string) string {
	if n == 1 {
		return "1 " + one
	}
	return strconv.Itoa(n) + " " + many
}
