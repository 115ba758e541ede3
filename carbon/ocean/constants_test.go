package ocean

import (
	"encoding/csv"
	"math"
	"os"
	"strconv"
	"testing"
)

func TestConstants(t *testing.T) {
	const eval = "evaluation of the printed equation"
	const handbook = "Dickson, Sabine & Christian 2007, chapter 5, S = 35, 25 °C"
	var rows []row
	for _, c := range []struct {
		s, t, lnK0, k0, pK1, pK2, lnKB, lnKW, calcite, aragonite float64
	}{
		{35, 25, -3.561652, 0.02839188, 5.847153, 8.965951, -19.79640, -30.43384, -6.369333, -6.188307},
		{35, 15, -3.284502, 0.03745922, 5.939968, 9.129001, -20.07052, -31.36884, -6.365038, -6.172718},
		{35, 10, -3.126313, 0.04387929, 5.993257, 9.213396, -20.21458, -31.86907, -6.364770, -6.168252},
		{35, 0, -2.766684, 0.06287012, 6.115129, 9.388362, -20.52304, -32.94150, -6.367467, -6.165712},
		{20, 25, -3.483630, 0.03069578, 5.925438, 9.140536, -20.04838, -30.77011, -6.663212, -6.456282},
	} {
		w, k := sea(c.s, c.t)
		at := func(x float64) string { return strconv.FormatFloat(x, 'g', -1, 64) }
		in := "S " + at(c.s) + ", " + at(c.t) + " °C"
		rows = append(rows,
			row{"ln K0", in, math.Log(k.K0), c.lnK0, 1e-5, exact, eval},
			row{"K0", in, k.K0, c.k0, 1e-5 * c.k0, exact, eval},
			row{"pK1", in, ph(k.K1), c.pK1, 1e-5, exact, eval},
			row{"pK2", in, ph(k.K2), c.pK2, 1e-5, exact, eval},
			row{"ln KB", in, math.Log(k.KB), c.lnKB, 1e-5, exact, eval},
			row{"ln KW", in, math.Log(k.KW), c.lnKW, 1e-5, exact, eval},
			row{"log Ksp calcite", in, math.Log10(k.Calcite), c.calcite, 1e-5, exact, eval},
			row{"log Ksp aragonite", in, math.Log10(w.Aragonite(c.t + 273.15)), c.aragonite, 1e-5, exact, eval},
		)
	}
	_, k := sea(35, 25)
	_, cold := sea(35, 15)
	const manual = "example output in the manuals of two seawater-chemistry libraries, calcite at S = 35"
	run(t, append(rows,
		row{"ln K0", "25 °C", math.Log(k.K0), -3.5617, 5e-5, published, handbook},
		row{"pK1", "25 °C", ph(k.K1), 5.8472, 5e-5, published, handbook},
		row{"pK2", "25 °C", ph(k.K2), 8.9660, 5e-5, published, handbook},
		row{"ln KB", "25 °C", math.Log(k.KB), -19.7964, 5e-5, published, handbook},
		row{"ln KW", "25 °C", math.Log(k.KW), -30.434, 5e-4, published, handbook},
		row{"Ksp calcite", "25 °C", k.Calcite, 4.272351e-7, 5e-14, independent, manual},
		row{"Ksp calcite", "15 °C", cold.Calcite, 4.314813e-7, 5e-14, independent, manual},
		row{"K1", "25 °C", k.K1, 1.421828e-6, 1e-12, exact, eval},
		row{"K2", "25 °C", k.K2, 1.081555e-9, 1e-15, exact, eval},
		row{"KB", "25 °C", k.KB, 2.526573e-9, 1e-15, exact, eval},
		row{"KW", "25 °C", k.KW, 6.063864e-14, 1e-20, exact, eval},
		row{"boron, Uppström", "S 35", Boron(35), 4.157576e-4, 1e-10, exact, eval},
		row{"boron, Lee", "S 35", BoronLee(35), 4.326029e-4, 1e-10, exact, eval},
		row{"calcium", "S 35", Calcium(35), 1.028457e-2, 1e-8, exact, eval},
	))
}

// TestReference compares constants and the full system with a second
// implementation in 40 digits; see testdata/ocean_reference.py.
func TestReference(t *testing.T) {
	f, err := os.Open("testdata/ocean_reference.csv")
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	r := csv.NewReader(f)
	r.Comment = '#'
	records, err := r.ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	worst, n := 0.0, 0
	for _, rec := range records[1:] {
		v := make([]float64, len(rec))
		for i := range rec {
			if v[i], err = strconv.ParseFloat(rec[i], 64); err != nil {
				t.Fatal(err)
			}
		}
		T, S, dic, alk := v[0], v[1], v[2], v[3]
		w, k := sea(S, T-273.15)
		s := beaker(t, S, T-273.15, dic, alk, Boron)
		got := []float64{ph(s.H), s.CO2, s.HCO3, s.CO3, s.P / 1.01325, s.Omega, s.Omega * k.Calcite / w.Aragonite(T),
			k.K0, k.K1, k.K2, k.KB, k.KW, k.Calcite, w.Aragonite(T)}
		for i, g := range got {
			e := math.Abs(g/v[4+i] - 1)
			worst = max(worst, e)
			if !(e < 1e-10) {
				t.Errorf("%s at T %g, S %g, DIC %g, ALK %g: got %.12g, want %.12g", records[0][4+i], T, S, dic, alk, g, v[4+i])
			}
		}
		n++
	}
	if n < 100 {
		t.Errorf("%d states, want at least 100", n)
	}
	t.Logf("%d states, largest relative difference %.1e", n, worst)
}

// TestHeld: the identity where the constants were measured, constant far out,
// and without kink between.
func TestHeld(t *testing.T) {
	for T := 273.0; T <= 335; T += 0.5 {
		if Held(T) != T {
			t.Errorf("Held(%g) = %g", T, Held(T))
		}
	}
	run(t, []row{
		{"Held", "100 K", Held(100), 271, 0, exact, "definition"},
		{"Held", "269 K", Held(269), 271, 0, exact, "definition"},
		{"Held", "345 K", Held(345), 340, 0, exact, "definition"},
		{"Held", "700 K", Held(700), 340, 0, exact, "definition"},
	})
	const h = 1e-3
	curve := func(T float64) float64 { return (Held(T+h) - 2*Held(T) + Held(T-h)) / (h * h) }
	for T := 260.0; T < 350; T += 0.1 {
		// The steepest change of the curvature is 6/W² per kelvin with W = 4 K.
		if jump := math.Abs(curve(T+0.1) - curve(T)); jump > 0.04 || Held(T+h) < Held(T) {
			t.Errorf("second derivative jumps by %g at %g K", jump, T)
		}
	}
}

// TestExtrapolation: between freezing and the upper hold every constant keeps
// the sign of its slope, except the solubility of calcite, which has one
// maximum near 12 °C, and that of aragonite, with one near 2 °C.
func TestExtrapolation(t *testing.T) {
	w, _ := sea(35, 25)
	for name, f := range map[string]func(Constants) float64{
		"1/K0": func(k Constants) float64 { return 1 / k.K0 },
		"K1":   func(k Constants) float64 { return k.K1 },
		"K2":   func(k Constants) float64 { return k.K2 },
		"KB":   func(k Constants) float64 { return k.KB },
		"KW":   func(k Constants) float64 { return k.KW },
	} {
		for T := 269.5; T < 344; T++ {
			if !(f(w.At(T+0.5)) > f(w.At(T))) {
				t.Errorf("%s does not rise at %g K", name, T)
			}
		}
	}
	turns := func(f func(float64) float64) (at []float64) {
		for T := 270.0; T < 344; T += 0.5 {
			if f(T) > f(T-0.5) && f(T) > f(T+0.5) {
				at = append(at, T)
			}
			if f(T) < f(T-0.5) && f(T) < f(T+0.5) {
				t.Errorf("a solubility product has a minimum at %g K", T)
			}
		}
		return at
	}
	for name, f := range map[string]func(float64) float64{
		"calcite": func(T float64) float64 { return w.At(T).Calcite }, "aragonite": w.Aragonite,
	} {
		if at := turns(f); len(at) != 1 || at[0] > 288 {
			t.Errorf("%s has its maxima at %v K", name, at)
		}
	}
}
