package dd

import "math"

// Complex is a double-double complex number.
type Complex struct{ Re, Im Float }

// C returns a + jb exactly.
func C(a, b float64) Complex { return Complex{New(a), New(b)} }

// FromComplex returns c exactly.
func FromComplex(c complex128) Complex { return C(real(c), imag(c)) }

// Real returns x as a complex number.
func Real(x Float) Complex { return Complex{Re: x} }

// Add returns a + b.
func (a Complex) Add(b Complex) Complex { return Complex{a.Re.Add(b.Re), a.Im.Add(b.Im)} }

// Sub returns a − b.
func (a Complex) Sub(b Complex) Complex { return Complex{a.Re.Sub(b.Re), a.Im.Sub(b.Im)} }

// Neg returns −a.
func (a Complex) Neg() Complex { return Complex{a.Re.Neg(), a.Im.Neg()} }

// Conj returns the conjugate.
func (a Complex) Conj() Complex { return Complex{a.Re, a.Im.Neg()} }

// Mul returns a·b.
func (a Complex) Mul(b Complex) Complex {
	return Complex{
		a.Re.Mul(b.Re).Sub(a.Im.Mul(b.Im)),
		a.Re.Mul(b.Im).Add(a.Im.Mul(b.Re)),
	}
}

// Scale returns a·x.
func (a Complex) Scale(x Float) Complex { return Complex{a.Re.Mul(x), a.Im.Mul(x)} }

// Div returns a/b, scaled so that no square overflows. The error is within
// 6·Eps of |a/b| (norm-wise: a part much smaller than the other may lose digits).
func (a Complex) Div(b Complex) Complex {
	m := math.Max(math.Abs(b.Re.Hi), math.Abs(b.Im.Hi))
	n := math.Max(math.Abs(a.Re.Hi), math.Abs(a.Im.Hi))
	if moderate(m) && moderate(n) {
		return a.div(b)
	}
	if m == 0 || n == 0 || overflowed(m) || overflowed(n) {
		return FromComplex(a.Complex128() / b.Complex128())
	}
	_, em := math.Frexp(m)
	_, en := math.Frexp(n)
	return a.Ldexp(-en).div(b.Ldexp(-em)).Ldexp(en - em)
}

func (a Complex) div(b Complex) Complex {
	n := b.Re.Mul(b.Re).Add(b.Im.Mul(b.Im))
	q := a.Mul(b.Conj())
	return Complex{q.Re.Div(n), q.Im.Div(n)}
}

// Ldexp returns a·2^n.
func (a Complex) Ldexp(n int) Complex { return Complex{a.Re.Ldexp(n), a.Im.Ldexp(n)} }

// Abs returns |a| in float64, good to float64 accuracy.
func (a Complex) Abs() float64 { return math.Hypot(a.Re.Hi, a.Im.Hi) }

// IsZero tells whether both parts are exactly zero.
func (a Complex) IsZero() bool { return a.Re.Hi == 0 && a.Im.Hi == 0 }

// IsFinite tells whether both parts are finite.
func (a Complex) IsFinite() bool { return a.Re.IsFinite() && a.Im.IsFinite() }

// Complex128 rounds both parts to float64.
func (a Complex) Complex128() complex128 { return complex(a.Re.Float64(), a.Im.Float64()) }
