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

// Div returns a/b, scaled so that no square overflows.
func (a Complex) Div(b Complex) Complex {
	m := math.Max(math.Abs(b.Re.Hi), math.Abs(b.Im.Hi))
	if m == 0 || math.IsInf(m, 0) || math.IsNaN(m) {
		return FromComplex(a.Complex128() / b.Complex128())
	}
	_, e := math.Frexp(m)
	bs := Complex{b.Re.Ldexp(-e), b.Im.Ldexp(-e)}
	n := bs.Re.Mul(bs.Re).Add(bs.Im.Mul(bs.Im))
	q := a.Mul(bs.Conj())
	return Complex{q.Re.Div(n).Ldexp(-e), q.Im.Div(n).Ldexp(-e)}
}

// Abs returns |a| in float64, good to float64 accuracy.
func (a Complex) Abs() float64 { return math.Hypot(a.Re.Hi, a.Im.Hi) }

// IsZero tells whether both parts are exactly zero.
func (a Complex) IsZero() bool { return a.Re.Hi == 0 && a.Im.Hi == 0 }

// IsFinite tells whether both parts are finite.
func (a Complex) IsFinite() bool { return a.Re.IsFinite() && a.Im.IsFinite() }

// Complex128 rounds both parts to float64.
func (a Complex) Complex128() complex128 { return complex(a.Re.Float64(), a.Im.Float64()) }
