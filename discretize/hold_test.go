package discretize

import (
	"math"
	"math/big"
	"testing"

	"steadytick/internal/dd"
	"steadytick/internal/exact"
	"steadytick/internal/poly"
	"steadytick/sdomain"
	"steadytick/zdomain"
)

// dec reads an exact decimal.
func dec(t testing.TB, s string) *big.Rat {
	t.Helper()
	r, ok := new(big.Rat).SetString(s)
	if !ok {
		t.Fatalf("bad number %q", s)
	}
	return r
}

// model returns num/den, ascending integer coefficients.
func model(t testing.TB, num, den []int64) sdomain.Model {
	t.Helper()
	r, err := exact.FromPolys(exact.IntPoly(num...), exact.IntPoly(den...))
	if err != nil {
		t.Fatal(err)
	}
	return sdomain.Model{Ratio: r, Delay: new(big.Rat)}
}

// zCoefficients expands m, without its whole ticks, to ascending powers of z with monic
// denominator: for tests only, at periods where that loses nothing that is checked.
func zCoefficients(m zdomain.Model) (num, den []float64) {
	T := dd.FromRat(m.Period)
	expand := func(p poly.Poly) poly.Poly { // δ = (z−1)/T
		var out poly.Poly
		for i := len(p) - 1; i >= 0; i-- {
			out = out.Mul(poly.Poly{dd.One.Div(T).Neg(), dd.One.Div(T)}).Add(poly.Const(p[i]))
		}
		return out
	}
	n := expand(m.TF.Num.Shift(m.TF.OriginZeros))
	d := expand(poly.FromRoots(m.TF.Poles).Shift(m.TF.OriginPoles))
	lead := d[len(d)-1]
	for _, v := range n {
		num = append(num, v.Div(lead).Float64())
	}
	for _, v := range d {
		den = append(den, v.Div(lead).Float64())
	}
	return num, den
}

func near(t *testing.T, what string, got, want []float64, tol float64) {
	t.Helper()
	for len(got) < len(want) {
		got = append(got, 0)
	}
	for i, g := range got {
		w := 0.0
		if i < len(want) {
			w = want[i]
		}
		if !(math.Abs(g-w) <= tol) {
			t.Errorf("%s[%d] = %.15g, want %.15g", what, i, g, w)
		}
	}
}

// TestHoldKnown: worked examples found in textbooks (e.g. Ogata, Discrete-Time
// Control Systems; from memory), recomputed with 50-digit arithmetic. Tolerances:
// half a unit of the last digit given.
func TestHoldKnown(t *testing.T) {
	for _, c := range []struct {
		name     string
		num, den []int64
		T, delay string
		n, d     []float64 // ascending powers of z
		ticks    int
		tol      float64
	}{
		{"1/(s(s+1))", []int64{1}, []int64{0, 1, 1}, "1", "0",
			[]float64{0.264241117657115, 0.367879441171442}, []float64{0.367879441171442, -1.36787944117144, 1}, 0, 5e-15},
		{"1/(s+1), half a tick", []int64{1}, []int64{1, 1}, "1", "0.5",
			[]float64{0.238651218541, 0.393469340287}, []float64{0, -0.367879441171, 1}, 0, 5e-13},
		{"1/(s+1), 3 1/2 ticks", []int64{1}, []int64{1, 1}, "1", "3.5",
			[]float64{0.238651218541, 0.393469340287}, []float64{0, -0.367879441171, 1}, 3, 5e-13},
		// exact rationals: nothing but the expansion to z, below 2^-100
		{"1/s², half a tick", []int64{1}, []int64{0, 0, 1}, "1", "0.5",
			[]float64{0.125, 0.75, 0.125}, []float64{0, 1, -2, 1}, 0, 1e-30},
		{"1/s²", []int64{1}, []int64{0, 0, 1}, "0.25", "0",
			[]float64{0.03125, 0.03125}, []float64{1, -2, 1}, 0, 1e-30},
		// 10(s+1)/s² at T = 0.1: check value "Error constants", recomputed. 0.1 is not dyadic,
		// hence the rounding of the float64 literals, 2^-53.
		{"10(s+1)/s²", []int64{10, 10}, []int64{0, 0, 1}, "0.1", "0",
			[]float64{-0.95, 1.05}, []float64{1, -2, 1}, 0, 0x1p-53},
	} {
		m, err := Hold(model(t, c.num, c.den), dec(t, c.T), dec(t, c.delay))
		if err != nil {
			t.Errorf("%s: %v", c.name, err)
			continue
		}
		n, d := zCoefficients(m)
		near(t, c.name+" num", n, c.n, c.tol)
		near(t, c.name+" den", d, c.d, c.tol)
		if m.TF.Ticks != c.ticks {
			t.Errorf("%s: %d ticks, want %d", c.name, m.TF.Ticks, c.ticks)
		}
	}
}
