package dd

import "math"

// CExp returns e^z = e^a·(cos b + j·sin b) for z = a + jb. An exactly zero sine
// stays zero beside an infinite e^a.
func CExp(z Complex) Complex {
	s, c := SinCos(z.Im)
	return Complex{timesExp(c, z.Re), timesExp(s, z.Re)}
}

// timesExp is v·e^a without overflow or underflow of e^a alone.
func timesExp(v, a Float) Float {
	if v.Hi == 0 {
		return v
	}
	if math.Abs(a.Hi) < 600 {
		return v.Mul(Exp(a))
	}
	h := Exp(a.Ldexp(-1))
	return v.Mul(h).Mul(h)
}

// CExpm1 returns e^z − 1, z = a + jb, by
//
//	Re = expm1(a)·cos b − 2·sin²(b/2)
//	Im = e^a·sin b
//
// Both terms of the real part are exact to 2^-97, so the error of the result is
// within 2^-97·(|expm1 a| + 2·sin²(b/2)): full accuracy for small z and near the
// imaginary axis, in each part apart. Relative digits of the real part are lost
// only where it passes through zero, near a = b²/2.
func CExpm1(z Complex) Complex {
	s, c := SinCos(z.Im)
	if z.Re.Hi > 600 {
		return Complex{timesExp(c, z.Re), timesExp(s, z.Re)}
	}
	h, _ := SinCos(z.Im.Ldexp(-1))
	re := Expm1(z.Re).Mul(c).Sub(h.Mul(h).Ldexp(1))
	return Complex{re, timesExp(s, z.Re)}
}
