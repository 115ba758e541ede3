package page

import (
	"math"
	"regexp"
	"strconv"
	"strings"
	"testing"
)

// linear is a colour in linear RGB, 0 to 1.
type linear [3]float64

func parse(t *testing.T, s string) linear {
	t.Helper()
	v, err := strconv.ParseUint(strings.TrimPrefix(s, "#"), 16, 32)
	if err != nil || len(s) != 7 {
		t.Fatalf("%q is no colour", s)
	}
	var c linear
	for i := range c {
		x := float64(v>>(16-8*i)&255) / 255
		if x <= 0.04045 {
			c[i] = x / 12.92
		} else {
			c[i] = math.Pow((x+0.055)/1.055, 2.4)
		}
	}
	return c
}

func (c linear) luminance() float64 { return 0.2126*c[0] + 0.7152*c[1] + 0.0722*c[2] }

func contrast(a, b linear) float64 {
	x, y := a.luminance(), b.luminance()
	return (math.Max(x, y) + 0.05) / (math.Min(x, y) + 0.05)
}

// lab is CIE L*a*b* under D65.
func (c linear) lab() [3]float64 {
	f := func(v float64) float64 {
		if v > 216.0/24389 {
			return math.Cbrt(v)
		}
		return (24389.0/27*v + 16) / 116
	}
	x := f((0.4124564*c[0] + 0.3575761*c[1] + 0.1804375*c[2]) / 0.95047)
	y := f(0.2126729*c[0] + 0.7151522*c[1] + 0.0721750*c[2])
	z := f((0.0193339*c[0] + 0.1191920*c[1] + 0.9503041*c[2]) / 1.08883)
	return [3]float64{116*y - 16, 500 * (x - y), 200 * (y - z)}
}

func distance(a, b linear) float64 {
	p, q := a.lab(), b.lab()
	return math.Sqrt((p[0]-q[0])*(p[0]-q[0]) + (p[1]-q[1])*(p[1]-q[1]) + (p[2]-q[2])*(p[2]-q[2]))
}

// visions are the full deficiencies of Machado, Oliveira & Fernandes (2009,
// IEEE Trans. Vis. Comput. Graph. 15, 1291-1298), in linear RGB.
var visions = map[string][3][3]float64{
	"normal":       {{1, 0, 0}, {0, 1, 0}, {0, 0, 1}},
	"protanopia":   {{0.152286, 1.052583, -0.204868}, {0.114503, 0.786281, 0.099216}, {-0.003882, -0.048116, 1.051998}},
	"deuteranopia": {{0.367322, 0.860646, -0.227968}, {0.280085, 0.672501, 0.047413}, {-0.011820, 0.042940, 0.968881}},
	"tritanopia":   {{1.255528, -0.076749, -0.178779}, {-0.078411, 0.930809, 0.147602}, {0.004733, 0.691367, 0.303900}},
}

func (c linear) seen(m [3][3]float64) linear {
	var out linear
	for i := range out {
		out[i] = math.Min(math.Max(m[i][0]*c[0]+m[i][1]*c[1]+m[i][2]*c[2], 0), 1)
	}
	return out
}

// Colours that stand side by side stay apart for every kind of colour vision.
func TestColourVision(t *testing.T) {
	for _, group := range []string{"state.", "flux.", "pool.", "zone."} {
		var roles []string
		for r := range Palette {
			if strings.HasPrefix(r, group) {
				roles = append(roles, r)
			}
		}
		for i, a := range roles {
			for _, b := range roles[i+1:] {
				for name, m := range visions {
					for _, set := range []string{"light", "dark"} {
						x, y := Palette[a].Light, Palette[b].Light
						if set == "dark" {
							x, y = Palette[a].Dark, Palette[b].Dark
						}
						if d := distance(parse(t, x).seen(m), parse(t, y).seen(m)); d < 14 {
							t.Errorf("%s, %s: %s and %s are only %.1f apart", set, name, a, b, d)
						}
					}
				}
			}
		}
	}
}

// Text has the contrast of WCAG 2.2 AA (4.5) on both grounds, curves that of
// graphics (3).
func TestContrast(t *testing.T) {
	for _, c := range []struct {
		roles string
		least float64
	}{
		{"ink quiet accent alarm", 4.5},
		{"pool.surface pool.seafloor pool.continental pool.mantle pool.total flux.land flux.seafloor", 3},
	} {
		for _, r := range strings.Fields(c.roles) {
			for _, ground := range []string{"paper", "panel"} {
				if k := contrast(parse(t, Palette[r].Light), parse(t, Palette[ground].Light)); k < c.least {
					t.Errorf("light: %s on %s has contrast %.2f", r, ground, k)
				}
				if k := contrast(parse(t, Palette[r].Dark), parse(t, Palette[ground].Dark)); k < c.least {
					t.Errorf("dark: %s on %s has contrast %.2f", r, ground, k)
				}
			}
		}
	}
	// Words in the bands of states: dark, but light on the darkest.
	for r, tone := range Palette {
		if !strings.HasPrefix(r, "state.") {
			continue
		}
		word := Palette["ink"].Light
		if r == "state.runaway" {
			word = Palette["paper"].Light
		}
		for _, c := range []string{tone.Light, tone.Dark} {
			if k := contrast(parse(t, word), parse(t, c)); k < 4.5 {
				t.Errorf("words on %s %s have contrast %.2f", r, c, k)
			}
		}
	}
}

// The style sheet names only colours that exist.
func TestStyleNamesColours(t *testing.T) {
	for _, m := range regexp.MustCompile(`var\((--[a-z-]+)\)`).FindAllStringSubmatch(css, -1) {
		found := false
		for r := range Palette {
			found = found || cssName(r) == m[1]
		}
		if !found {
			t.Errorf("the style sheet uses %s, which is not in the palette", m[1])
		}
	}
}
