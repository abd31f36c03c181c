package dd

import "math"

// Log returns the natural logarithm: −Inf for 0, NaN below 0. By
//
//	a = m·2^k,  √½ <= m < √2,  log a = k·ln 2 + log1p(m − 1)
//
// m − 1 has full relative accuracy, so a close to 1 loses nothing; for k ≠ 0 the
// two terms cancel by a factor of 3 at most.
func Log(a Float) Float {
	if a.Hi <= 0 || overflowed(a.Hi) {
		return Float{Hi: math.Log(a.Hi)}
	}
	m, k := math.Frexp(a.Hi)
	if m < math.Sqrt2/2 {
		k--
	}
	l := log1pSmall(a.Ldexp(-k).Sub(One))
	return l.Add(Ln2.MulFloat(float64(k)))
}

// Log1p returns log(1 + x) with full relative accuracy also for small x:
// −Inf for −1, NaN below.
func Log1p(x Float) Float {
	if x.Hi > -0.5 && x.Hi < 1 {
		return log1pSmall(x)
	}
	return Log(One.Add(x))
}

// log1pSmall is log(1 + x) for −0.5 <= x <= 1: one step of Newton's method from
// the float64 value y, whose relative error is below 2^-51,
//
//	log(1 + x) = y + log1p(d),  d = (x − expm1(y))/(1 + expm1(y))
//
// with log1p(d) = d − d²/2 and |d| < 2^-50·|x|.
func log1pSmall(x Float) Float {
	y := math.Log1p(x.Hi)
	e := Expm1(New(y))
	d := x.Sub(e).Div(One.Add(e))
	return New(y).Add(d.Sub(New(d.Hi * d.Hi / 2)))
}
