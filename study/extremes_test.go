package study

import (
	"math"
	"math/big"
	"testing"
)

// Closed forms: sin over [0, 4] has its extremes 1 and sin 4; a kink between two parts
// is an end of both; exp(−300x) needs the parabolas or finds its ends.
func TestExtremes(t *testing.T) {
	rat := func(x float64) *big.Rat { return new(big.Rat).SetFloat64(x) }
	of := func(f func(float64) float64) func(*offset) float64 {
		return func(o *offset) float64 { return f(o.seconds().Float64()) }
	}
	one := []*part{newPart(rat(0), rat(4), 16)}
	two := []*part{newPart(rat(0), rat(1), 14), newPart(rat(1), rat(3), 14)}
	dip := (math.Pi - math.Atan(1.0/7)) / 7 // of cos(7x)·exp(−x): tan 7x = −1/7
	for name, c := range map[string]struct {
		parts  []*part
		f      func(float64) float64
		lo, hi float64
	}{
		"sine":     {one, math.Sin, math.Sin(4), 1},
		"kink":     {two, func(x float64) float64 { return -math.Abs(x - 1) }, -2, 0},
		"boundary": {one, func(x float64) float64 { return math.Exp(-300 * x) }, math.Exp(-1200), 1},
		"fast":     {one, func(x float64) float64 { return math.Cos(7*x) * math.Exp(-x) }, math.Cos(7*dip) * math.Exp(-dip), 1},
	} {
		lo, hi := extremes(c.parts, of(c.f))
		// 1e-10 of the range: what extremes confirms
		if !(math.Abs(lo-c.lo) <= 2e-10) || !(math.Abs(hi-c.hi) <= 2e-10) {
			t.Errorf("%s: %.12g … %.12g, want %.12g … %.12g", name, lo, hi, c.lo, c.hi)
		}
	}
	if lo, hi := extremes(one, of(func(x float64) float64 { return math.NaN() })); !math.IsNaN(lo) || !math.IsNaN(hi) {
		t.Errorf("NaN became %g … %g", lo, hi)
	}
}
