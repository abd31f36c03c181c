package dd

import "math"

// ln 2 in four words; the first two have 42 bits, so that their products with a
// whole number below 2^11 are exact. Words 3 and 4 are rounded in the product.
// Computed with mpmath at 400 bits (testdata/reference.py, "constants").
const (
	ln2a = 0x1.62e42fefa3800p-1
	ln2b = 0x1.ef35793c76000p-45
	ln2c = 0x1.cc01f97b57800p-87
	ln2d = 0x1.03cd0c99ca62ep-130
)

// Ln2 is the natural logarithm of 2.
var Ln2 = Float{0x1.62e42fefa39efp-1, 0x1.abc9e3b39803fp-56}

// inverseFactorial[n] is 1/n!. The factorials up to 27! have at most 70 odd bits
// and are exact here.
var inverseFactorial = func() (t [28]Float) {
	f := One
	t[0] = One
	for n := 1; n < len(t); n++ {
		f = f.MulFloat(float64(n))
		t[n] = One.Div(f)
	}
	return t
}()

// Exp returns e^x; +Inf above 709.78, 0 below −745.2. By
//
//	x = k·ln 2 + r,  |r| <= ln2/2,  e^x = 2^k·(1 + expm1(r))
func Exp(x Float) Float {
	switch {
	case math.IsNaN(x.Hi):
		return x
	case x.Hi > 710:
		return Float{Hi: math.Inf(1)}
	case x.Hi < -746:
		return Zero
	}
	k := math.RoundToEven(x.Hi / Ln2.Hi)
	r := x.Sub(New(k * ln2a)).Sub(New(k * ln2b)).Sub(New(ln2c).Add(New(ln2d)).MulFloat(k))
	return One.Add(expm1Small(r)).Ldexp(int(k))
}

// Expm1 returns e^x − 1 with full relative accuracy also for small x. Above the
// switch at 0.35 the difference loses a factor e^x/|e^x−1| < 3.5 at most.
func Expm1(x Float) Float {
	if math.Abs(x.Hi) < 0.35 {
		return expm1Small(x)
	}
	return Exp(x).Sub(One)
}

// expm1Small is e^r − 1 for |r| <= 0.36, by Taylor's series of t = r/64 and six doublings
//
//	E(2t) = E(t)·(2 + E(t)),  E(t) = e^t − 1
//
// |t| < 0.0057: 12 terms leave t^12/13! < 2^-122 of the sum. A doubling adds
// 3u² + 4u² of its result; together below 6·7u² + 7u² < 2^-100 relative.
func expm1Small(r Float) Float {
	if math.Abs(r.Hi) < 0x1p-110 {
		return r // r/2 is below u²/8 of it
	}
	t := r.Ldexp(-6)
	s := inverseFactorial[12]
	for n := 11; n >= 1; n-- {
		s = s.Mul(t).Add(inverseFactorial[n])
	}
	s = s.Mul(t)
	for range 6 {
		s = s.Mul(Two.Add(s))
	}
	return s
}
