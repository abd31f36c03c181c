package exact

import (
	"errors"
	"fmt"
	"math/big"
)

// Factor is P^N with P(0) = 1, degree of P at least 1, N at least 1.
type Factor struct {
	P Poly
	N int
}

// Ratio is a rational function over Q in one variable x that keeps its factors:
//
//	G(x) = Gain · x^(OriginZeros − OriginPoles) · ΠNum_i(x) / ΠDen_j(x)
//
// Factors are normalized to the value 1 at x = 0, so Gain is the leading
// coefficient of the expansion about the origin. Factors common to Num and Den
// (and OriginZeros with OriginPoles) are NOT cancelled: they are hidden modes,
// and hiding them is the user's business to hear about. Gain = 0 is the zero function,
// with no factors. Values are immutable. The zero value (nil Gain) is the zero function too.
type Ratio struct {
	Gain                     *big.Rat
	OriginZeros, OriginPoles int
	Num, Den                 []Factor
}

// MaxOrder, MaxBits and MaxTotalBits bound what Check accepts: far more than any
// loop needs (40 states of 17 digits take 2300 bits a coefficient, 100 000 in
// all), and low enough that one operation takes about a second at most.
const (
	MaxOrder     = 100
	MaxBits      = 1 << 13 // of a numerator or denominator of one coefficient, 2466 digits
	MaxTotalBits = 1 << 17 // of all coefficients
)

// ErrZeroDivision is the division by the zero function.
var ErrZeroDivision = errors.New("division by zero")

// SizeError says that a function is beyond MaxOrder, MaxBits or MaxTotalBits.
type SizeError struct {
	What       string // "order", "bits of a coefficient", …
	Got, Limit int
}

func (e *SizeError) Error() string {
	return fmt.Sprintf("model too large: %s %d, at most %d", e.What, e.Got, e.Limit)
}

// Const returns the constant function c.
func Const(c *big.Rat) Ratio { return Ratio{Gain: new(big.Rat).Set(c)} }

// X returns the function x.
func X() Ratio { return Ratio{Gain: big.NewRat(1, 1), OriginZeros: 1} }

// FromPolys returns num/den, each kept as one factor. The error is ErrZeroDivision.
func FromPolys(num, den Poly) (Ratio, error) {
	if den.IsZero() {
		return Ratio{}, ErrZeroDivision
	}
	if num.IsZero() {
		return Const(new(big.Rat)), nil
	}
	cn, kn, p := num.Origin()
	cd, kd, q := den.Origin()
	return Ratio{
		Gain:        new(big.Rat).Quo(cn, cd),
		OriginZeros: kn, OriginPoles: kd,
		Num: addFactor(nil, p, 1), Den: addFactor(nil, q, 1),
	}, nil
}

// addFactor returns list with p^n merged into it, p(0) = 1. It copies the list.
func addFactor(list []Factor, p Poly, n int) []Factor {
	out := append([]Factor(nil), list...)
	if p.Degree() < 1 || n == 0 {
		return out
	}
	for i := range out {
		if out[i].P.Equal(p) {
			out[i].N += n
			return out
		}
	}
	return append(out, Factor{P: p, N: n})
}

// merge returns the product of two factor lists.
func merge(a, b []Factor) []Factor {
	out := append([]Factor(nil), a...)
	for _, f := range b {
		out = addFactor(out, f.P, f.N)
	}
	return out
}

// expand returns the product of the factors.
func expand(list []Factor) Poly {
	out := IntPoly(1)
	for _, f := range list {
		out = out.Mul(f.P.Pow(f.N))
	}
	return out
}

// degree returns the degree of the product of the factors.
func degree(list []Factor) int {
	n := 0
	for _, f := range list {
		n += f.N * f.P.Degree()
	}
	return n
}

// IsZero tells whether r is the zero function.
func (r Ratio) IsZero() bool { return r.Gain == nil || r.Gain.Sign() == 0 }

// Order is the number of poles, origin and hidden modes included.
func (r Ratio) Order() int { return r.OriginPoles + degree(r.Den) }

// RelativeDegree is the number of poles less the number of zeros: the power with
// which G falls at large x. Negative: improper. 0 for the zero function.
func (r Ratio) RelativeDegree() int {
	return r.Order() - r.OriginZeros - degree(r.Num)
}

// NumPoly returns the expanded numerator, gain and origin zeros included.
func (r Ratio) NumPoly() Poly {
	if r.IsZero() {
		return nil
	}
	return expand(r.Num).Scale(r.Gain).Shift(r.OriginZeros)
}

// DenPoly returns the expanded denominator, origin poles included; its first
// non-zero coefficient is 1.
func (r Ratio) DenPoly() Poly { return expand(r.Den).Shift(r.OriginPoles) }

// Check returns a *SizeError when r has more than MaxOrder poles or zeros, or a
// coefficient of more than MaxBits bits, or MaxTotalBits in all.
func (r Ratio) Check() error {
	if n := max(r.Order(), r.OriginZeros+degree(r.Num)); n > MaxOrder {
		return &SizeError{"order", n, MaxOrder}
	}
	n, total := 0, 0
	if r.Gain != nil {
		n = ratBits(r.Gain)
	}
	for _, list := range [][]Factor{r.Num, r.Den} {
		for _, f := range list {
			for _, c := range f.P {
				n = max(n, ratBits(c))
				total += c.Num().BitLen() + c.Denom().BitLen()
			}
		}
	}
	switch {
	case n > MaxBits:
		return &SizeError{"bits of a coefficient", n, MaxBits}
	case total > MaxTotalBits:
		return &SizeError{"bits of all coefficients", total, MaxTotalBits}
	}
	return nil
}

func ratBits(a *big.Rat) int { return max(a.Num().BitLen(), a.Denom().BitLen()) }

// Mul returns r·q. Nothing is cancelled.
func (r Ratio) Mul(q Ratio) Ratio {
	if r.IsZero() || q.IsZero() {
		return Const(new(big.Rat))
	}
	return Ratio{
		Gain:        new(big.Rat).Mul(r.Gain, q.Gain),
		OriginZeros: r.OriginZeros + q.OriginZeros,
		OriginPoles: r.OriginPoles + q.OriginPoles,
		Num:         merge(r.Num, q.Num), Den: merge(r.Den, q.Den),
	}
}

// Neg returns −r.
func (r Ratio) Neg() Ratio {
	if r.IsZero() {
		return Const(new(big.Rat))
	}
	r.Gain = new(big.Rat).Neg(r.Gain)
	return r
}

// inv returns 1/r, r not zero.
func (r Ratio) inv() Ratio {
	return Ratio{
		Gain:        new(big.Rat).Inv(r.Gain),
		OriginZeros: r.OriginPoles, OriginPoles: r.OriginZeros,
		Num: r.Den, Den: r.Num,
	}
}

// Div returns r/q. Nothing is cancelled: x/x keeps a zero and a pole at the
// origin. The error is ErrZeroDivision.
func (r Ratio) Div(q Ratio) (Ratio, error) {
	if q.IsZero() {
		return Ratio{}, ErrZeroDivision
	}
	return r.Mul(q.inv()), nil
}

// Pow returns r^n. Errors: ErrZeroDivision for 0^n with n <= 0, *SizeError when the
// result would be beyond MaxOrder or MaxBits (nothing is computed then).
func (r Ratio) Pow(n int) (Ratio, error) {
	if r.IsZero() {
		if n <= 0 {
			return Ratio{}, ErrZeroDivision
		}
		return r, nil
	}
	// Far beyond every bound, and so that products below do not overflow.
	if const32 := 1 << 20; n > const32 || n < -const32 {
		return Ratio{}, &SizeError{"exponent", n, const32}
	}
	if n < 0 {
		r, n = r.inv(), -n
	}
	if k := n * max(r.Order(), r.OriginZeros+degree(r.Num)); k > MaxOrder {
		return Ratio{}, &SizeError{"order", k, MaxOrder}
	}
	// (b−1)·n < bits of the power; ±1 stays small for every n.
	if k := n * (ratBits(r.Gain) - 1); k > MaxBits {
		return Ratio{}, &SizeError{"bits of a coefficient", k, MaxBits}
	}
	out := Ratio{
		Gain:        ratPow(r.Gain, n),
		OriginZeros: n * r.OriginZeros, OriginPoles: n * r.OriginPoles,
	}
	if n > 0 {
		out.Num, out.Den = powers(r.Num, n), powers(r.Den, n)
	}
	return out, nil
}

func powers(list []Factor, n int) []Factor {
	out := append([]Factor(nil), list...)
	for i := range out {
		out[i].N *= n
	}
	return out
}

// Eval returns r(x); ok is false at a pole (a hidden one too).
func (r Ratio) Eval(x *big.Rat) (v *big.Rat, ok bool) {
	if r.IsZero() {
		return new(big.Rat), true
	}
	v = new(big.Rat).Set(r.Gain)
	v.Mul(v, ratPow(x, r.OriginZeros))
	for _, f := range r.Num {
		v.Mul(v, ratPow(f.P.Eval(x), f.N))
	}
	d := ratPow(x, r.OriginPoles)
	for _, f := range r.Den {
		d.Mul(d, ratPow(f.P.Eval(x), f.N))
	}
	if d.Sign() == 0 {
		return nil, false
	}
	return v.Quo(v, d), true
}
