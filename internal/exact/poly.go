// Package exact holds polynomials and rational functions over the rational
// numbers. The type of a loop, its integrators and its hidden modes are decided
// here, where zero means zero.
//
// Conventions: coefficients stand in ascending powers; values are immutable (no
// function changes its receiver or its arguments, and results share no memory
// that anyone may change); a nil *big.Rat is a bug in the caller.
//
// Limits: the cost of a sum or of roots grows with the order and with the
// digits of the coefficients. Whoever builds a Ratio from text calls Check after
// each step and so never waits longer than for one step at the bounds MaxOrder
// and MaxBits.
package exact

import (
	"math/big"

	"steadytick/internal/dd"
	"steadytick/internal/poly"
)

// Poly is a polynomial over Q, ascending powers: p[k] belongs to x^k. The
// zero polynomial has length 0; a non-zero one has a non-zero last coefficient.
type Poly []*big.Rat

// NewPoly returns the polynomial with these coefficients, ascending; zero
// leading coefficients are dropped and the numbers are copied.
func NewPoly(c ...*big.Rat) Poly {
	out := make(Poly, len(c))
	for i, v := range c {
		out[i] = new(big.Rat).Set(v)
	}
	return out.trim()
}

// IntPoly returns the polynomial with these integer coefficients, ascending.
func IntPoly(c ...int64) Poly {
	out := make(Poly, len(c))
	for i, v := range c {
		out[i] = new(big.Rat).SetInt64(v)
	}
	return out.trim()
}

// trim drops zero leading coefficients.
func (p Poly) trim() Poly {
	n := len(p)
	for n > 0 && p[n-1].Sign() == 0 {
		n--
	}
	return p[:n]
}

// Degree is the highest power, −1 for the zero polynomial.
func (p Poly) Degree() int { return len(p.trim()) - 1 }

// IsZero tells whether p is the zero polynomial.
func (p Poly) IsZero() bool { return p.Degree() < 0 }

// Equal tells whether p and q have the same coefficients.
func (p Poly) Equal(q Poly) bool {
	p, q = p.trim(), q.trim()
	if len(p) != len(q) {
		return false
	}
	for i := range p {
		if p[i].Cmp(q[i]) != 0 {
			return false
		}
	}
	return true
}

// Add returns p + q.
func (p Poly) Add(q Poly) Poly {
	if len(p) < len(q) {
		p, q = q, p
	}
	out := newLen(len(p))
	for i := range p {
		out[i].Set(p[i])
	}
	for i := range q {
		out[i].Add(out[i], q[i])
	}
	return out.trim()
}

// newLen returns n zero coefficients, to be filled.
func newLen(n int) Poly {
	out := make(Poly, n)
	for i := range out {
		out[i] = new(big.Rat)
	}
	return out
}

// Sub returns p − q.
func (p Poly) Sub(q Poly) Poly { return p.Add(q.Scale(big.NewRat(-1, 1))) }

// Scale returns c·p.
func (p Poly) Scale(c *big.Rat) Poly {
	out := make(Poly, len(p))
	for i, v := range p {
		out[i] = new(big.Rat).Mul(v, c)
	}
	return out.trim()
}

// Mul returns p·q. The product is formed over common denominators, so that only
// the result is reduced to lowest terms.
func (p Poly) Mul(q Poly) Poly {
	p, q = p.trim(), q.trim()
	if len(p) == 0 || len(q) == 0 {
		return nil
	}
	a, da := p.integers()
	b, db := q.integers()
	c := make([]big.Int, len(a)+len(b)-1)
	var t big.Int
	for i, u := range a {
		for j, v := range b {
			c[i+j].Add(&c[i+j], t.Mul(u, v))
		}
	}
	den := new(big.Int).Mul(da, db)
	out := make(Poly, len(c))
	for i := range c {
		out[i] = new(big.Rat).SetFrac(&c[i], den)
	}
	return out
}

// Pow returns p^n, n >= 0.
func (p Poly) Pow(n int) Poly {
	out := IntPoly(1)
	for i := 0; i < n; i++ {
		out = out.Mul(p)
	}
	return out
}

// Shift returns x^n·p, n >= 0.
func (p Poly) Shift(n int) Poly {
	p = p.trim()
	if len(p) == 0 {
		return nil
	}
	return append(newLen(n), p...)
}

// Derivative returns dp/dx.
func (p Poly) Derivative() Poly {
	if len(p) < 2 {
		return nil
	}
	out := make(Poly, len(p)-1)
	for i := range out {
		out[i] = new(big.Rat).SetInt64(int64(i + 1))
		out[i].Mul(out[i], p[i+1])
	}
	return out.trim()
}

// Eval returns p(x) by Horner's rule.
func (p Poly) Eval(x *big.Rat) *big.Rat {
	s := new(big.Rat)
	for i := len(p) - 1; i >= 0; i-- {
		s.Mul(s, x)
		s.Add(s, p[i])
	}
	return s
}

// DivMod returns quotient and remainder, p = quo·q + rem with deg rem < deg q.
// It panics when q is zero, as integer division does.
func (p Poly) DivMod(q Poly) (quo, rem Poly) {
	q = q.trim()
	if len(q) == 0 {
		panic("exact: polynomial division by zero")
	}
	rem = NewPoly(p...)
	if len(rem) < len(q) {
		return nil, rem
	}
	quo = newLen(len(rem) - len(q) + 1)
	lead := q[len(q)-1]
	for k := len(quo) - 1; k >= 0; k-- {
		f := quo[k]
		f.Quo(rem[k+len(q)-1], lead)
		if f.Sign() == 0 {
			continue
		}
		for j, v := range q {
			rem[k+j].Sub(rem[k+j], new(big.Rat).Mul(f, v))
		}
	}
	return quo.trim(), rem[:len(q)-1].trim()
}

// Origin splits p = c·x^k·q with q(0) = 1. The zero polynomial gives c = 0, k = 0 and q = 1.
func (p Poly) Origin() (c *big.Rat, k int, q Poly) {
	p = p.trim()
	if len(p) == 0 {
		return new(big.Rat), 0, IntPoly(1)
	}
	for p[k].Sign() == 0 {
		k++
	}
	c = new(big.Rat).Set(p[k])
	return c, k, p[k:].Scale(new(big.Rat).Inv(c))
}

// Lead returns the leading coefficient, 0 for the zero polynomial.
func (p Poly) Lead() *big.Rat {
	p = p.trim()
	if len(p) == 0 {
		return new(big.Rat)
	}
	return new(big.Rat).Set(p[len(p)-1])
}

// DD rounds each coefficient to double-double.
func (p Poly) DD() poly.Poly {
	out := make(poly.Poly, len(p))
	for i, v := range p {
		out[i] = dd.FromRat(v)
	}
	return out
}

// integers returns integers a and den > 0 with p = Σ a[k]·x^k / den.
func (p Poly) integers() (a []*big.Int, den *big.Int) {
	den = big.NewInt(1)
	var g big.Int
	for _, v := range p {
		g.GCD(nil, nil, den, v.Denom())
		den.Mul(den, new(big.Int).Quo(v.Denom(), &g))
	}
	a = make([]*big.Int, len(p))
	for i, v := range p {
		a[i] = new(big.Int).Quo(den, v.Denom())
		a[i].Mul(a[i], v.Num())
	}
	return a, den
}
