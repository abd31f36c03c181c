package poly

import (
	"math"
	"math/cmplx"

	"steadytick/internal/dd"
)

// horner evaluates p near any magnitude without overflow. For |x| about 2^e it
// works on the scaled polynomial
//
//	q(y) = 2^-s·p(2^e·y),  q_k = p_k·2^(e·k − s),  max |q_k| in [1/2, 1)
//
// with y = x/2^e, 1/2 <= |y| < √2. A q_k that underflows is below 2^-900 of the
// largest one. The scaled coefficients are kept, one set for each e met. Points are
// given as x/2^shift, so that roots near the ends of the range keep their low words.
type horner struct {
	p     Poly
	shift int
	views map[int]*view
}

type view struct {
	c     []dd.Float
	f     []float64
	scale int // s
}

func newHorner(p Poly, shift int) *horner {
	return &horner{p: p, shift: shift, views: map[int]*view{}}
}

// binade returns the e of x; x must be finite and not zero.
func binade(x dd.Complex) int {
	_, e := math.Frexp(math.Max(math.Abs(x.Re.Hi), math.Abs(x.Im.Hi)))
	return e
}

// view is the scaled polynomial for points near 2^e.
func (h *horner) view(e int) *view {
	if v, ok := h.views[e]; ok {
		return v
	}
	s, g := math.MinInt, e+h.shift
	for k, c := range h.p {
		if c.Hi != 0 {
			_, ec := math.Frexp(c.Hi)
			s = max(s, ec+g*k)
		}
	}
	v := &view{c: make([]dd.Float, len(h.p)), f: make([]float64, len(h.p)), scale: s}
	for k, c := range h.p {
		v.c[k] = c.Ldexp(g*k - s)
		v.f[k] = v.c[k].Hi
	}
	h.views[e] = v
	return v
}

// sample is one evaluation in the scaled variable: the value, its derivative by
// y, the bound of the rounding errors of the value, and the exponent e.
type sample struct {
	p, dp complex128
	bound float64
	e     int
}

// atRoot tells that the value cannot be told from zero.
func (s sample) atRoot() bool { return s.noise() <= 1 }

// noise is the value in units of its error bound.
func (s sample) noise() float64 { return cmplx.Abs(s.p) / s.bound }

// double evaluates in double-double. The bound of |computed − exact| is the
// running one. With ε = dd.Eps for one real operation, a complex product errs by
// (√2 + 1)·ε < 2.5ε of itself (√2ε: four products, by |ac|+|bd| <= √2|z||w| in
// norm; ε: two sums) and the real addition of q_k by ε, so that the steps
//
//	s_k = s_(k+1)·y + q_k       |error of s_k| <= ε·g_k
//	g_k = |y|·(g_(k+1) + 2.5·|s_(k+1)|) + |s_k|,  g_n = 0
//
// hold to first order in ε. The float64 arithmetic of g itself, n < 10^6 steps
// of 4 roundings, is covered by the factor 1 + 2^-30.
func (h *horner) double(x dd.Complex) sample {
	e := binade(x)
	c := h.view(e).c
	y := x.Ldexp(-e)
	ay := cmplx.Abs(y.Complex128())
	n := len(c) - 1
	s, d := dd.Real(c[n]), dd.Complex{}
	as, g := math.Abs(c[n].Hi), 0.0
	for k := n - 1; k >= 0; k-- {
		d = d.Mul(y).Add(s)
		s = s.Mul(y)
		s.Re = s.Re.Add(c[k])
		g = ay * (g + 2.5*as)
		as = s.Abs()
		g += as
	}
	return sample{s.Complex128(), d.Complex128(), g * dd.Eps * (1 + 0x1p-30), e}
}

// single evaluates in float64 at x rounded to float64; the bound is the same with
// ε = 2^-52, which also covers the rounding of the coefficients (2^-53 each).
func (h *horner) single(x dd.Complex) sample {
	e := binade(x)
	f := h.view(e).f
	xx := x.Ldexp(-e)
	y := complex(xx.Re.Hi, xx.Im.Hi)
	ay := cmplx.Abs(y)
	n := len(f) - 1
	s, d := complex(f[n], 0), complex(0, 0)
	as, g := math.Abs(f[n]), math.Abs(f[n])
	for k := n - 1; k >= 0; k-- {
		d = d*y + s
		s = s*y + complex(f[k], 0)
		g = ay * (g + 2.5*as)
		as = cmplx.Abs(s)
		g += as + math.Abs(f[k])
	}
	return sample{s, d, g * 0x1p-52, e}
}
