package charts

import (
	"fmt"
	"math"
	"testing"
)

type rgb [3]float64 // linear light, 0 to 1

func parseColor(t *testing.T, hex string) rgb {
	t.Helper()
	var v [3]int
	if _, err := fmt.Sscanf(hex, "#%02x%02x%02x", &v[0], &v[1], &v[2]); err != nil {
		t.Fatal(hex, err)
	}
	var out rgb
	for i := range v {
		c := float64(v[i]) / 255
		if c <= 0.04045 { // sRGB, IEC 61966-2-1
			out[i] = c / 12.92
		} else {
			out[i] = math.Pow((c+0.055)/1.055, 2.4)
		}
	}
	return out
}

func apply(m [3][3]float64, c rgb) rgb {
	var out rgb
	for i := range m {
		out[i] = min(1, max(0, m[i][0]*c[0]+m[i][1]*c[1]+m[i][2]*c[2]))
	}
	return out
}

// lab is CIE 1976 L*a*b* under D65.
func lab(c rgb) [3]float64 {
	xyz := [3]float64{
		(0.4124*c[0] + 0.3576*c[1] + 0.1805*c[2]) / 0.9505,
		0.2126*c[0] + 0.7152*c[1] + 0.0722*c[2],
		(0.0193*c[0] + 0.1192*c[1] + 0.9505*c[2]) / 1.089,
	}
	for i, v := range xyz {
		if v > 216.0/24389 {
			xyz[i] = math.Cbrt(v)
		} else {
			xyz[i] = (24389.0/27*v + 16) / 116
		}
	}
	return [3]float64{116*xyz[1] - 16, 500 * (xyz[0] - xyz[1]), 200 * (xyz[1] - xyz[2])}
}

// Complete loss of one kind of cone: Machado, Oliveira and Fernandes, "A physiologically-based model for
// simulation of color vision deficiency", IEEE TVCG 15(6), 2009, severity 1.0 (figures from memory).
var sight = map[string][3][3]float64{
	"full":          {{1, 0, 0}, {0, 1, 0}, {0, 0, 1}},
	"without red":   {{0.152286, 1.052583, -0.204868}, {0.114503, 0.786281, 0.099216}, {-0.003882, -0.048116, 1.051998}},
	"without green": {{0.367322, 0.860646, -0.227968}, {0.280085, 0.672501, 0.047413}, {-0.011820, 0.042940, 0.968881}},
	"without blue":  {{1.255528, -0.076749, -0.178779}, {-0.078411, 0.930809, 0.147602}, {0.004733, 0.691367, 0.303900}},
}

// A distance of 2.3 in L*a*b* is just seen on large patches side by side (common practice); five times
// that is asked here, for thin lines apart from each other.
func TestPaletteForEverySight(t *testing.T) {
	colors := []string{ink, rust, blue, ochre, violet, steel}
	for name, m := range sight {
		for i, a := range colors {
			for _, b := range colors[:i] {
				p, q := lab(apply(m, parseColor(t, a))), lab(apply(m, parseColor(t, b)))
				d := math.Hypot(math.Hypot(p[0]-q[0], p[1]-q[1]), p[2]-q[2])
				if !(d >= 11.5) {
					t.Errorf("sight %s: %s and %s are %.1f apart", name, a, b, d)
				}
			}
		}
	}
}

// Lines need a contrast of 3:1 against the page (WCAG 2.1, 1.4.11), text 4.5:1 (1.4.3).
func TestContrastOnWhite(t *testing.T) {
	for color, least := range map[string]float64{ink: 3, rust: 4.5, blue: 3, ochre: 3, violet: 3, steel: 3, grey: 3, textColor: 4.5, axisColor: 4.5} {
		c := parseColor(t, color)
		if got := 1.05 / (0.2126*c[0] + 0.7152*c[1] + 0.0722*c[2] + 0.05); !(got >= least) {
			t.Errorf("%s has a contrast of %.2f on white, want %.1f", color, got, least)
		}
	}
}

// Without any colour each style must still differ from every other.
func TestStylesDifferWithoutColour(t *testing.T) {
	seen := map[string]bool{}
	for _, s := range append([]style{referenceStyle, continuousStyle, sampledStyle}, furtherStyles...) {
		k := fmt.Sprint(s.Dash, s.Symbol)
		if seen[k] {
			t.Errorf("dash and symbol %s stand twice", k)
		}
		seen[k] = true
	}
}
