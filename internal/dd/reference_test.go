package dd

import (
	"encoding/json"
	"fmt"
	"math"
	"math/big"
	"os"
	"testing"
)

// bigOf is the exact value of a finite a.
func bigOf(a Float) *big.Float {
	x := new(big.Float).SetPrec(2500).SetFloat64(a.Hi)
	return x.Add(x, new(big.Float).SetFloat64(a.Lo))
}

// miss is |got − want| as a float64; NaN when got is not finite.
func miss(got Float, want *big.Float) float64 {
	if !got.IsFinite() || math.IsNaN(got.Lo) {
		return math.NaN()
	}
	d := new(big.Float).SetPrec(2500).Sub(bigOf(got), want)
	f, _ := d.Float64()
	return math.Abs(f)
}

type refCase struct {
	F string
	X []float64
	Y []string
}

func (c refCase) real(i int) Float { return Float{c.X[2*i], c.X[2*i+1]} }
func (c refCase) complex() Complex { return Complex{c.real(0), c.real(1)} }

// values are the reference parts, 60 digits: 2^-199 relative.
func (c refCase) values(t *testing.T) (v []*big.Float, f []float64) {
	for _, s := range c.Y {
		x, _, err := big.ParseFloat(s, 10, 220, big.ToNearestEven)
		if err != nil {
			t.Fatal(err)
		}
		a, _ := x.Float64()
		v, f = append(v, x), append(f, math.Abs(a))
	}
	return v, f
}

func parts(z Complex) []Float { return []Float{z.Re, z.Im} }

// refFunctions calls the function of a case and gives the tolerance of each part,
// |y| being the reference. The bounds are those of the doc comments.
var refFunctions = map[string]func(c refCase, y []float64) (got []Float, tol []float64){
	"exp":   func(c refCase, y []float64) ([]Float, []float64) { return []Float{Exp(c.real(0))}, rel(y) },
	"expm1": func(c refCase, y []float64) ([]Float, []float64) { return []Float{Expm1(c.real(0))}, rel(y) },
	"log":   func(c refCase, y []float64) ([]Float, []float64) { return []Float{Log(c.real(0))}, rel(y) },
	"log1p": func(c refCase, y []float64) ([]Float, []float64) { return []Float{Log1p(c.real(0))}, rel(y) },
	"atan2": func(c refCase, y []float64) ([]Float, []float64) {
		return []Float{Atan2(c.real(0), c.real(1))}, rel(y)
	},
	"hypot": func(c refCase, y []float64) ([]Float, []float64) {
		return []Float{Hypot(c.real(0), c.real(1))}, rel(y)
	},
	"sincos": func(c refCase, y []float64) ([]Float, []float64) {
		s, co := SinCos(c.real(0))
		tol := rel(y)
		if x := math.Abs(c.X[0]); x <= 0x1p50 {
			tol[0] += x * 0x1p-157
			tol[1] += x * 0x1p-157
		}
		return []Float{s, co}, tol
	},
	"cexp": func(c refCase, y []float64) ([]Float, []float64) {
		z := c.complex()
		return parts(CExp(z)), expTol(z, y)
	},
	"cexpm1": func(c refCase, y []float64) ([]Float, []float64) {
		z := c.complex()
		tol := expTol(z, y)
		h := math.Sin(z.Im.Hi / 2)
		tol[0] = 0x1p-97 * (math.Abs(math.Expm1(z.Re.Hi)) + 2*h*h)
		return parts(CExpm1(z)), tol
	},
	"clog": func(c refCase, y []float64) ([]Float, []float64) {
		z := c.complex()
		tol := rel(y)
		if a := z.Abs(); a > 0.5 && a < 2.9 { // the larger part is between 1/2 and 2
			tol[0] += 0x1p-102
		}
		return parts(CLog(z)), tol
	},
	"clog1p": func(c refCase, y []float64) ([]Float, []float64) {
		w := c.complex()
		tol := rel(y)
		if w.Abs() < 0.5 {
			tol[0] = 0x1p-98 * (math.Abs(w.Re.Hi) + w.Im.Hi*w.Im.Hi)
		} else {
			tol[0] += 0x1p-102
		}
		return parts(CLog1p(w)), tol
	},
	"csqrt": func(c refCase, y []float64) ([]Float, []float64) {
		return parts(CSqrt(c.complex())), []float64{y[0] * 0x1p-100, y[1] * 0x1p-100}
	},
}

func rel(y []float64) []float64 {
	tol := make([]float64, len(y))
	for i, v := range y {
		tol[i] = v * 0x1p-98
	}
	return tol
}

// expTol is 2^-97 relative, and e^a times the absolute error of sine and cosine.
func expTol(z Complex, y []float64) []float64 {
	n := math.Exp(z.Re.Hi) * math.Abs(z.Im.Hi) * 0x1p-157
	return []float64{y[0]*0x1p-97 + n, y[1]*0x1p-97 + n}
}

// Source: mpmath at 80 digits, testdata/reference.py.
func TestReference(t *testing.T) {
	raw, err := os.ReadFile("testdata/reference.json")
	if err != nil {
		t.Fatal(err)
	}
	var cases []refCase
	if err := json.Unmarshal(raw, &cases); err != nil {
		t.Fatal(err)
	}
	worst, count := map[string]float64{}, map[string]int{}
	for _, c := range cases {
		f, ok := refFunctions[c.F]
		if !ok {
			t.Fatalf("no function %q", c.F)
		}
		want, size := c.values(t)
		got, tol := f(c, size)
		for i := range want {
			d := miss(got[i], want[i])
			// 2^-1060: what an underflow of a low word may cost.
			if !(d <= tol[i]+0x1p-1060) {
				t.Errorf("%s(%v) part %d = %v, want %s: off by %.3g, tolerance %.3g", c.F, c.X, i, got[i], c.Y[i], d, tol[i])
			}
			key := fmt.Sprint(c.F, " part ", i)
			if d > 0 {
				worst[key] = math.Max(worst[key], d/tol[i])
			}
			count[c.F]++
		}
	}
	for f := range refFunctions {
		if count[f] < 40 {
			t.Errorf("only %d values for %s", count[f], f)
		}
	}
	for k, v := range worst {
		t.Logf("%-14s worst error %.3g of its tolerance", k, v)
	}
}
