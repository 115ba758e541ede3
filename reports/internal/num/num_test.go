package num

import (
	"math"
	"testing"
)

func TestNumbers(t *testing.T) {
	nan, inf := math.NaN(), math.Inf(1)
	for _, c := range []struct{ got, want string }{
		{Sig(287.9999999, 4), "288.0"},
		{Sig(9.996, 3), "10.0"},
		{Sig(0.00028, 3), "2.80e-4"},
		{Sig(-1234567, 3), "-1.23e6"},
		{Sig(123456.7, 3), "123457"},
		{Sig(999999.9, 3), "1.00e6"},
		{Sig(0, 3), "0"},
		{Sig(nan, 3), Missing},
		{Sig(inf, 3), Missing},
		{Fix(-0.0001, 2), "0.00"},
		{Fix(-3.5, 1), "-3.5"},
		{Short(7.5, 4), "7.5"},
		{Short(0.0002, 3), "2e-4"},
		{Short(100, 3), "100"},
		{Pretty("-2.8e-4"), "−2.8\u00a0×\u00a010⁻⁴"},
		{Pretty("-12.5"), "−12.5"},
		{Pretty("4.1e-4 ppm"), "4.1\u00a0×\u00a010⁻⁴ ppm"},
		{Pretty("e-folding"), "e-folding"},
		{Pretty(Missing), Missing},
		{Pressure(2.8e-4), "280 ppm"},
		{Pressure(0.5), "0.5 bar"},
		{Pressure(nan), Missing},
		{Age(4.57), "4.570 Gyr"},
		{Age(0.00001), "0.000010 Gyr"},
		{Date(1.9391, 0.002), "1.939 ± 0.002 Gyr"},
		{Date(1.93918, 0.00031), "1.9392 ± 0.0003 Gyr"},
		{Date(1.93918, 0.5), "1.94 ± 0.50 Gyr"},
		{Date(1.93918, 1e-10), "1.9392 Gyr ± below 1 yr"},
		{Date(1.93918, 4.21e-7), "1.9392 Gyr ± 421 yr"},
		{Date(1.93918, 3.4e-6), "1.9392 Gyr ± 3 kyr"},
		{Date(1.93918, nan), "1.939 Gyr (numerical error not known)"},
		{Date(nan, 1), Missing},
		{Ago(1.94, 4.57), "2.63 Gyr before"},
		{Ago(5.77, 4.57), "1.2 Gyr after"},
		{Ago(4.57, 4.57), "at"},
		{Span(0.0123), "12.3 Myr"},
		{Span(2e-8), "20 yr"},
		{Percent(0.125), "12.5 %"},
		{With(Missing, "K"), Missing},
		{Unit("W/m2"), "W/m²"},
		{Count(1, "freeze", "freezes"), "1 freeze"},
	} {
		if c.got != c.want {
			t.Errorf("got %q, want %q", c.got, c.want)
		}
	}
}
