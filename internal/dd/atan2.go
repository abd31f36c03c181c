package dd

import "math"

// Atan2 returns the angle of the point (x, y) in (−π, π], with the signs of zero
// as math.Atan2 treats them. One Newton step from the float64 value t:
//
//	θ = t + d,  d = (y·cos t − x·sin t)/(x·cos t + y·sin t) = tan(θ − t)
//
// |d| < 2^-50·|θ|, so that tan and its argument agree to d³/3 < 2^-151.
func Atan2(y, x Float) Float {
	m := math.Max(math.Abs(x.Hi), math.Abs(y.Hi))
	t := math.Atan2(y.Hi, x.Hi)
	if x.Hi == 0 || y.Hi == 0 || overflowed(m) {
		return axisAngle(t)
	}
	if x.Hi > 0 && math.Abs(y.Hi) < 0x1p-110*x.Hi {
		return y.Div(x) // θ = y/x·(1 − (y/x)²/3)
	}
	_, e := math.Frexp(m)
	x, y = x.Ldexp(-e), y.Ldexp(-e)
	s, c := SinCos(New(t))
	d := y.Mul(c).Sub(x.Mul(s)).Div(x.Mul(c).Add(y.Mul(s)))
	return New(t).Add(d)
}

// axisAngle turns a float64 multiple of π/4 into the double-double one.
func axisAngle(t float64) Float {
	if math.IsNaN(t) || t == 0 {
		return New(t)
	}
	return Pi.Ldexp(-2).MulFloat(math.RoundToEven(t / (math.Pi / 4)))
}
