package lti

import (
	"math"

	"steadytick/internal/dd"
)

// Series returns the first n terms of g about x = 0, delay included, beginning
// at x^(OriginZeros−OriginPoles). The zero function gives n zeros from x^0.
//
// Each pole divides the series of the numerator by (x − p):
//
//	q_k = (q_(k−1) − a_k)/p
//
// and the delay multiplies it by Σ (−sτ)^k/k!, or by
//
//	z^(−d) = (1 + δT)^(−d) = Σ C(−d, k)·(δT)^k
func (g TF) Series(n int) Laurent {
	if g.IsZero() {
		return NewLaurent(0, make([]dd.Float, n))
	}
	c := make([]dd.Complex, n)
	size := make([]float64, n)
	for k := range min(n, len(g.Num)) {
		c[k], size[k] = dd.Real(g.Num[k]), math.Abs(g.Num[k].Hi)
	}
	for _, p := range g.Poles {
		var q dd.Complex
		var m float64
		for k := range c {
			q = q.Sub(c[k]).Div(p)
			m = (m + size[k]) / p.Abs()
			c[k], size[k] = q, m
		}
	}
	out := Laurent{Start: g.OriginZeros - g.OriginPoles, C: make([]dd.Float, n), size: size}
	for k := range c {
		out.C[k] = c[k].Re // conjugate pairs leave the imaginary part to rounding
	}
	if d, ok := g.delaySeries(n); ok {
		out = out.Mul(d)
	}
	return out
}

// delaySeries is the series of the delay alone; false when there is none.
func (g TF) delaySeries(n int) (Laurent, bool) {
	if g.Ticks == 0 && g.DeadTime.Sign() == 0 {
		return Laurent{}, false
	}
	c := make([]dd.Float, n)
	term := dd.One
	for k := range c {
		if k > 0 {
			step := g.DeadTime
			if g.Ticks != 0 {
				step = g.Period.MulFloat(float64(g.Ticks + k - 1))
			}
			term = term.Mul(step).Neg().Div(dd.New(float64(k)))
		}
		c[k] = term
	}
	return NewLaurent(0, c), true
}
