package lti

import (
	"errors"
	"math"

	"steadytick/internal/dd"
)

// Laurent is a truncated Laurent series about x = 0,
//
//	Σ_{k<len(C)} C[k]·x^(Start+k) + O(x^(Start+len(C)))
//
// C[0] may be zero (leading zeros mean a higher order). Operations keep as many
// terms as both operands determine.
type Laurent struct {
	Start int
	C     []dd.Float
	// size[k] bounds the sum of the magnitudes of everything that was added up to
	// make C[k]: the same recursions with absolute values. Rounding is measured against it.
	size []float64
}

// cancelled is the fraction of its size below which a coefficient is noise:
// 1e-26 = 2·10^5 units of 2^-104. A coefficient is reached through at most a few
// thousand operations (order 20, ten blocks), each with an error of one unit
// of the terms it joins (size counts them all), and the numbers put in are exact to a few
// hundred units (poles and numerators of hold equivalents, after their squarings).
// A true coefficient that small next to its terms would have lost all but 6 of its 32
// digits; the factor T in sampled series is 1e-7 at least and never makes it.
const cancelled = 1e-26

// ErrZeroSeries says that a series was divided by one whose known terms are all zero.
var ErrZeroSeries = errors.New("division by a series without a non-zero term")

// NewLaurent returns the series with exact coefficients c; c is copied.
func NewLaurent(start int, c []dd.Float) Laurent {
	a := Laurent{Start: start, C: append([]dd.Float(nil), c...), size: make([]float64, len(c))}
	for k, v := range c {
		a.size[k] = math.Abs(v.Hi)
	}
	return a
}

// magnitude is size[k], or |C[k]| for a series that was written as a literal.
func (a Laurent) magnitude(k int) float64 {
	if k < len(a.size) {
		return a.size[k]
	}
	return math.Abs(a.C[k].Hi)
}

// Coefficient returns the coefficient of x^k; false when it is beyond the known terms.
func (a Laurent) Coefficient(k int) (dd.Float, bool) {
	if k < a.Start {
		return dd.Zero, true
	}
	if k-a.Start >= len(a.C) {
		return dd.Zero, false
	}
	return a.C[k-a.Start], true
}

// Order is the exponent of the first non-zero term; false when all known terms are zero.
func (a Laurent) Order() (int, bool) {
	for k, c := range a.C {
		if c.Sign() != 0 {
			return a.Start + k, true
		}
	}
	return 0, false
}

// ProductCoefficient returns the coefficient of x^k of a·b, without the others; false when it is beyond the
// terms that both determine. What cancels is left as it comes.
func (a Laurent) ProductCoefficient(b Laurent, k int) (dd.Float, bool) {
	n := k - a.Start - b.Start
	if n >= min(len(a.C), len(b.C)) {
		return dd.Zero, false
	}
	sum := dd.Zero
	for j := 0; j <= n; j++ {
		sum = sum.Add(a.C[j].Mul(b.C[n-j]))
	}
	return sum, true
}

// Mul returns a·b.
func (a Laurent) Mul(b Laurent) Laurent {
	n := min(len(a.C), len(b.C))
	out := Laurent{Start: a.Start + b.Start, C: make([]dd.Float, n), size: make([]float64, n)}
	for k := range n {
		for j := 0; j <= k; j++ {
			out.C[k] = out.C[k].Add(a.C[j].Mul(b.C[k-j]))
			out.size[k] += a.magnitude(j) * b.magnitude(k-j)
		}
	}
	return out
}

// Scale returns c·a.
func (a Laurent) Scale(c dd.Float) Laurent {
	out := Laurent{Start: a.Start, C: make([]dd.Float, len(a.C)), size: make([]float64, len(a.C))}
	for k, v := range a.C {
		out.C[k], out.size[k] = v.Mul(c), a.magnitude(k)*math.Abs(c.Hi)
	}
	return out
}

// Div returns a/b,
//
//	q_k = (a_k − Σ_{j=1..k} b_j·q_(k−j)) / b_0
//
// after leading exact zeros of b are dropped. The error is ErrZeroSeries.
func (a Laurent) Div(b Laurent) (Laurent, error) {
	start, ok := b.Order()
	if !ok {
		return Laurent{}, ErrZeroSeries
	}
	skip := start - b.Start
	n := min(len(a.C), len(b.C)-skip)
	out := Laurent{Start: a.Start - start, C: make([]dd.Float, n), size: make([]float64, n)}
	lead := b.C[skip]
	for k := range n {
		v, m := a.C[k], a.magnitude(k)
		for j := 1; j <= k; j++ {
			v = v.Sub(b.C[skip+j].Mul(out.C[k-j]))
			m += b.magnitude(skip+j) * out.size[k-j]
		}
		out.C[k], out.size[k] = v.Div(lead), m/math.Abs(lead.Hi)
	}
	return out, nil
}

// Add returns a + b from the lower of the two starts. A term that cancels to less than
// 1e-26 of what was added (see cancelled) is exactly zero in the result.
func (a Laurent) Add(b Laurent) Laurent {
	start := min(a.Start, b.Start)
	end := min(a.Start+len(a.C), b.Start+len(b.C))
	n := max(end-start, 0)
	out := Laurent{Start: start, C: make([]dd.Float, n), size: make([]float64, n)}
	for k := range n {
		for _, s := range [2]Laurent{a, b} {
			if i := start + k - s.Start; i >= 0 {
				out.C[k] = out.C[k].Add(s.C[i])
				out.size[k] += s.magnitude(i)
			}
		}
		if math.Abs(out.C[k].Hi) <= cancelled*out.size[k] {
			out.C[k] = dd.Zero
		}
	}
	return out
}

// Sub returns a − b, as Add does.
func (a Laurent) Sub(b Laurent) Laurent { return a.Add(b.Scale(dd.One.Neg())) }
