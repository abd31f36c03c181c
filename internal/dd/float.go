// Package dd is double-double arithmetic: a real number is the unevaluated sum
// of two float64, Hi + Lo with |Lo| <= ulp(Hi)/2, about 106 bits or 32 decimal
// digits. It exists because a loop polynomial loses digits to clustered and
// widely spread roots; 16 spare digits keep the 1e-11 and 1e-8 targets with
// room for the condition numbers met in practice.
//
// Conventions: values are immutable; the zero value is 0; results of an
// overflow are Inf in Hi with Lo = 0 and are found with IsFinite; an underflow
// loses low bits gradually, as in float64 (full accuracy above 1e-290).
//
// Error bounds, u = 2^-53, in the absence of underflow: Add and Sub 3u², MulFloat 2u²,
// Mul 4u² relative (Joldes, Muller and Popescu, "Tight and rigorous error bounds
// for basic building blocks of double-word arithmetic", ACM TOMS 44, 2017; bounds
// from memory). Div: 2u² from the first product, u² from the last sum, higher
// orders below u²/8: under 4u². Sqrt: u²/2 from Newton's step, 2u² from rounding it.
// Elementary functions are within 2^-98 relative where nothing else is said.
package dd

import (
	"math"
	"math/big"
)

// Eps is 4u² = 2^-104, a safe unit roundoff for one operation of this package.
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

// overflowed tells whether x is Inf or NaN.
func overflowed(x float64) bool { return !(math.Abs(x) <= math.MaxFloat64) }

// norm renormalizes; an overflow is Inf with Lo = 0, never Inf + NaN.
func norm(hi, lo float64) Float {
	s, e := quickTwoSum(hi, lo)
	if overflowed(s) {
		return Float{Hi: s}
	}
	return Float{s, e}
}

// Add returns a + b.
func (a Float) Add(b Float) Float {
	s, e := twoSum(a.Hi, b.Hi)
	if overflowed(s) {
		return Float{Hi: s}
	}
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
	if overflowed(p) {
		return Float{Hi: p}
	}
	t := math.FMA(a.Hi, b.Lo, a.Lo*b.Lo)
	return norm(p, e+math.FMA(a.Lo, b.Hi, t))
}

// MulFloat returns a·x.
func (a Float) MulFloat(x float64) Float {
	p, e := twoProd(a.Hi, x)
	if overflowed(p) {
		return Float{Hi: p}
	}
	return norm(p, math.FMA(a.Lo, x, e))
}

// Ldexp returns a·2^n.
func (a Float) Ldexp(n int) Float {
	hi := math.Ldexp(a.Hi, n)
	if overflowed(hi) {
		return Float{Hi: hi}
	}
	return norm(hi, math.Ldexp(a.Lo, n))
}

// wide and narrow bound the magnitudes whose products, quotients and rounding
// errors (2^-106 smaller, twice) are still normal float64 numbers.
const (
	wide   = 0x1p400
	narrow = 0x1p-400
)

func moderate(x float64) bool {
	x = math.Abs(x)
	return x <= wide && x >= narrow
}

// Div returns a/b; b = 0 gives Inf or NaN as in float64.
func (a Float) Div(b Float) Float {
	if moderate(a.Hi) && moderate(b.Hi) {
		return a.div(b)
	}
	q := a.Hi / b.Hi
	if a.Hi == 0 || b.Hi == 0 || overflowed(a.Hi) || overflowed(b.Hi) {
		return Float{Hi: q}
	}
	_, ea := math.Frexp(a.Hi)
	_, eb := math.Frexp(b.Hi)
	return a.Ldexp(-ea).div(b.Ldexp(-eb)).Ldexp(ea - eb)
}

// div is long division with three float64 quotients, for moderate operands.
func (a Float) div(b Float) Float {
	q1 := a.Hi / b.Hi
	r := a.Sub(b.MulFloat(q1))
	q2 := r.Hi / b.Hi
	r = r.Sub(b.MulFloat(q2))
	q3 := r.Hi / b.Hi
	s, e := quickTwoSum(q1, q2)
	return Float{s, e}.Add(Float{Hi: q3})
}

// Sqrt returns the square root; a negative argument gives NaN. One Newton step
// from the float64 root x, whose relative error u = 2^-53 leaves u²/2.
func (a Float) Sqrt() Float {
	if a.Hi <= 0 || overflowed(a.Hi) {
		return Float{Hi: math.Sqrt(a.Hi)}
	}
	if !moderate(a.Hi) {
		_, e := math.Frexp(a.Hi)
		e &^= 1
		return a.Ldexp(-e).Sqrt().Ldexp(e / 2)
	}
	x := math.Sqrt(a.Hi)
	r := a.Sub(New(x).MulFloat(x)).Hi / (2 * x)
	return norm(x, r)
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
func (a Float) IsFinite() bool { return !overflowed(a.Hi) }

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
