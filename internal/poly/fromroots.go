package poly

import (
	"fmt"
	"sort"

	"steadytick/internal/dd"
)

// FromRoots returns the monic real polynomial Π (x − r_i), 1 for no roots.
// Complex roots must come with their bitwise conjugate, anywhere in the list;
// a missing one is a bug of the caller and panics. Factors are multiplied from the
// smallest root up. Coefficients that overflow are infinite (see dd.IsFinite).
//
// The error of a coefficient is within 4n·Eps of that of Π (x + |r_i|), so that
// roots in one half-plane lose next to nothing.
func FromRoots(roots []dd.Complex) Poly {
	r := append([]dd.Complex(nil), roots...)
	sort.SliceStable(r, func(i, j int) bool { return r[i].Abs() < r[j].Abs() })
	used := make([]bool, len(r))
	p := Const(dd.One)
	for i, a := range r {
		if used[i] {
			continue
		}
		used[i] = true
		if a.Im.Sign() == 0 {
			p = p.timesMonic(a.Re.Neg())
			continue
		}
		j := i + 1
		for j < len(r) && (used[j] || r[j] != a.Conj()) {
			j++
		}
		if j == len(r) {
			panic(fmt.Sprintf("poly.FromRoots: no conjugate for the root %v", a.Complex128()))
		}
		used[j] = true
		p = p.timesMonic(a.Re.Mul(a.Re).Add(a.Im.Mul(a.Im)), a.Re.Ldexp(1).Neg())
	}
	return p
}

// timesMonic multiplies by x^n + c[n-1]·x^(n-1) + … + c[0].
func (p Poly) timesMonic(c ...dd.Float) Poly {
	out := p.Shift(len(c))
	for i, a := range p {
		for j, b := range c {
			out[i+j] = out[i+j].Add(a.Mul(b))
		}
	}
	return out
}
