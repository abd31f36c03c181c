// Package dd is double-double arithmetic: a real number is the unevaluated sum
// of two float64, Hi + Lo with |Lo| <= ulp(Hi)/2, about 106 bits or 32 decimal
// digits. It exists because a loop polynomial loses digits to clustered and
// widely spread roots; 16 spare digits keep the 1e-11 and 1e-8 targets with
// room for the condition numbers met in practice.
//
// Conventions: values are immutable; the zero value is 0; results of an
// overflow are Inf or NaN in Hi and are found with IsFinite.
//
// Error bounds: Add, Sub, Mul and Div are within 4·2^-106 relative in the absence of
// underflow (Dekker, 1971; Joldes, Muller and Popescu, "Tight and rigorous error
// bounds for basic building blocks of double-word arithmetic", ACM TOMS 44, 2017;
// bounds from memory). Elementary functions are within about 2^-98 relative.
package dd

import (
	"math"
	"math/big"
)

// Eps is 2^-104, a safe unit roundoff for one operation of this package.
const Eps = 4.930380657631324e-32

// Float is a double-double number.
type Float struct{ Hi, Lo float64 }

// Zero, One and Two are the small constants.
var (
	Zero = Float{}
	One  = Float{Hi: 1}
	Two  = Float{Hi: 2}
)

// New returns x exactly.
func New(x float64) Float { return Float{Hi: x} }

func twoSum(a, b float64) (s, e float64) {
	s = a + b
	v := s - a
	return s, (a - (s - v)) + (b - v)
}

func quickTwoSum(a, b float64) (s, e float64) {
	s = a + b
	return s, b - (s - a)
}

func twoProd(a, b float64) (p, e float64) {
	p = a * b
	return p, math.FMA(a, b, -p)
}

// norm renormalizes and keeps an overflow from becoming Inf + NaN.
func norm(hi, lo float64) Float {
	s, e := quickTwoSum(hi, lo)
	if math.IsInf(s, 0) || math.IsNaN(s) {
		return Float{Hi: s}
	}
	return Float{s, e}
}

// Add returns a + b.
func (a Float) Add(b Float) Float {
	s, e := twoSum(a.Hi, b.Hi)
	t, f := twoSum(a.Lo, b.Lo)
	s, e = quickTwoSum(s, e+t)
	return norm(s, e+f)
}

// Sub returns a − b.
func (a Float) Sub(b Float) Float { return a.Add(b.Neg()) }

// Neg returns −a.
func (a Float) Neg() Float { return Float{-a.Hi, -a.Lo} }

// Abs returns |a|.
func (a Float) Abs() Float {
	if a.Hi < 0 {
		return a.Neg()
	}
	return a
}

// Mul returns a·b.
func (a Float) Mul(b Float) Float {
	p, e := twoProd(a.Hi, b.Hi)
	return norm(p, e+(a.Hi*b.Lo+a.Lo*b.Hi))
}

// MulFloat returns a·x.
func (a Float) MulFloat(x float64) Float {
	p, e := twoProd(a.Hi, x)
	return norm(p, math.FMA(a.Lo, x, e))
}

// Ldexp returns a·2^n.
func (a Float) Ldexp(n int) Float { return Float{math.Ldexp(a.Hi, n), math.Ldexp(a.Lo, n)} }

// Div returns a/b; b = 0 gives Inf or NaN as in float64.
func (a Float) Div(b Float) Float {
	q1 := a.Hi / b.Hi
	if math.IsInf(q1, 0) || math.IsNaN(q1) || math.IsInf(b.Hi, 0) {
		return Float{Hi: q1}
	}
	r := a.Sub(b.MulFloat(q1))
	q2 := r.Hi / b.Hi
	r = r.Sub(b.MulFloat(q2))
	q3 := r.Hi / b.Hi
	s, e := quickTwoSum(q1, q2)
	return Float{s, e}.Add(Float{Hi: q3})
}

// Sqrt returns the square root; a negative argument gives NaN.
func (a Float) Sqrt() Float {
	if a.Hi <= 0 {
		return Float{Hi: math.Sqrt(a.Hi)}
	}
	x := math.Sqrt(a.Hi)
	if math.IsInf(x, 0) {
		return Float{Hi: x}
	}
	r := New(x).Add(a.Sub(New(x).MulFloat(x)).Div(New(2 * x)))
	return r
}

// Sign is −1, 0 or 1.
func (a Float) Sign() int {
	switch {
	case a.Hi > 0:
		return 1
	case a.Hi < 0:
		return -1
	}
	return 0
}

// Cmp compares a with b: −1, 0 or 1.
func (a Float) Cmp(b Float) int { return a.Sub(b).Sign() }

// IsFinite tells whether a is neither infinite nor NaN.
func (a Float) IsFinite() bool { return !math.IsInf(a.Hi, 0) && !math.IsNaN(a.Hi) }

// Float64 rounds to float64.
func (a Float) Float64() float64 { return a.Hi + a.Lo }

// FromRat rounds an exact rational to double-double.
func FromRat(r *big.Rat) Float {
	hi, _ := r.Float64()
	if math.IsInf(hi, 0) {
		return Float{Hi: hi}
	}
	rest := new(big.Rat).SetFloat64(hi)
	rest.Sub(r, rest)
	lo, _ := rest.Float64()
	return norm(hi, lo)
}

// Rat returns a as an exact rational; a must be finite.
func (a Float) Rat() *big.Rat {
	r := new(big.Rat).SetFloat64(a.Hi)
	return r.Add(r, new(big.Rat).SetFloat64(a.Lo))
}
