// Package poly holds real polynomials with double-double coefficients and
// finds their roots. Coefficients stand in ascending powers: p[k] belongs to
// x^k. A nil or empty slice is the zero polynomial. No function changes its arguments.
package poly

import "steadytick/internal/dd"

// Poly is a real polynomial, ascending powers.
type Poly []dd.Float

// Const returns the polynomial of degree 0 with value c.
func Const(c dd.Float) Poly { return Poly{c} }

// Degree is the index of the highest non-zero coefficient, −1 for zero.
func (p Poly) Degree() int {
	for i := len(p) - 1; i >= 0; i-- {
		if p[i].Sign() != 0 {
			return i
		}
	}
	return -1
}

// Trim drops zero leading coefficients (exact zeros only).
func (p Poly) Trim() Poly { return p[:p.Degree()+1] }

// Add returns p + q.
func (p Poly) Add(q Poly) Poly {
	if len(p) < len(q) {
		p, q = q, p
	}
	out := append(Poly(nil), p...)
	for i, c := range q {
		out[i] = out[i].Add(c)
	}
	return out
}

// Scale returns c·p.
func (p Poly) Scale(c dd.Float) Poly {
	out := make(Poly, len(p))
	for i, v := range p {
		out[i] = v.Mul(c)
	}
	return out
}

// Mul returns p·q.
func (p Poly) Mul(q Poly) Poly {
	if len(p) == 0 || len(q) == 0 {
		return nil
	}
	out := make(Poly, len(p)+len(q)-1)
	for i, a := range p {
		for j, b := range q {
			out[i+j] = out[i+j].Add(a.Mul(b))
		}
	}
	return out
}

// Shift returns x^n·p, n >= 0.
func (p Poly) Shift(n int) Poly {
	out := make(Poly, n, n+len(p))
	return append(out, p...)
}

// Derivative returns dp/dx.
func (p Poly) Derivative() Poly {
	if len(p) < 2 {
		return nil
	}
	out := make(Poly, len(p)-1)
	for i := range out {
		out[i] = p[i+1].MulFloat(float64(i + 1))
	}
	return out
}

// Eval returns p(x) by Horner's rule.
func (p Poly) Eval(x dd.Complex) dd.Complex {
	var s dd.Complex
	for i := len(p) - 1; i >= 0; i-- {
		s = s.Mul(x)
		s.Re = s.Re.Add(p[i])
	}
	return s
}

// EvalReal returns p(x) for real x.
func (p Poly) EvalReal(x dd.Float) dd.Float {
	var s dd.Float
	for i := len(p) - 1; i >= 0; i-- {
		s = s.Mul(x).Add(p[i])
	}
	return s
}
