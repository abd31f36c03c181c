package dd

import (
	"math"
	"math/cmplx"
)

// Hypot returns √(x² + y²) without overflow or underflow of the squares.
func Hypot(x, y Float) Float {
	m := math.Max(math.Abs(x.Hi), math.Abs(y.Hi))
	if m == 0 || overflowed(x.Hi) || overflowed(y.Hi) {
		return New(math.Hypot(x.Hi, y.Hi))
	}
	_, e := math.Frexp(m)
	x, y = x.Ldexp(-e), y.Ldexp(-e)
	return x.Mul(x).Add(y.Mul(y)).Sqrt().Ldexp(e)
}

// CSqrt returns the square root with Re >= 0; on the negative real axis Im has
// the sign of z.Im, zero counting by its sign bit. By
//
//	m = √((|x| + |z|)/2),  √z = m + j·y/(2m) for x >= 0, |y|/(2m) ± j·m else
//
// without cancellation: each part is within 2^-100 relative.
func CSqrt(z Complex) Complex {
	big := math.Max(math.Abs(z.Re.Hi), math.Abs(z.Im.Hi))
	if big == 0 {
		return Complex{Im: z.Im}
	}
	if overflowed(big) || math.IsNaN(z.Re.Hi) || math.IsNaN(z.Im.Hi) {
		return FromComplex(cmplx.Sqrt(z.Complex128()))
	}
	_, e := math.Frexp(big)
	e &^= 1 // even, so that 2^(e/2) is exact
	w := z.Ldexp(-e)
	m := w.Re.Abs().Add(Hypot(w.Re, w.Im)).Ldexp(-1).Sqrt()
	n := w.Im.Abs().Div(m.Ldexp(1))
	if w.Re.Hi < 0 {
		m, n = n, m
	}
	if math.Signbit(z.Im.Hi) {
		n = n.Neg()
	}
	return Complex{m, n}.Ldexp(e / 2)
}
