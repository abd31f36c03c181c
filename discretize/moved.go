package discretize

import (
	"math"

	"steadytick/internal/dd"
	"steadytick/sdomain"
	"steadytick/zdomain"
)

// Moved is a pole that its map has put outside the unit circle.
type Moved struct{ S, Z complex128 }

// MovedOutside lists the poles of m in the closed left half plane (the origin
// apart) that mapped has outside or on the unit circle. Of the maps of this package
// only the forward difference does that; it is recognized by mapped being m itself with
// δ for s, and then z = 1 + sT. Of a conjugate pair both are listed. Where poles
// cannot be found the list is empty (Map has reported that already).
func MovedOutside(m sdomain.Model, mapped zdomain.Model) []Moved {
	if mapped.Exact == nil || !m.Ratio.Sub(*mapped.Exact).IsZero() {
		return nil
	}
	poles, err := m.Ratio.Poles()
	if err != nil {
		return nil
	}
	T := dd.FromRat(mapped.Period)
	var out []Moved
	for _, s := range poles {
		// |1 + sT|² − 1 = T·(2·Re s + T·|s|²), without the subtraction of ones
		size := s.Re.Mul(s.Re).Add(s.Im.Mul(s.Im)).Mul(T)
		if s.Re.Sign() > 0 || s.Re.Ldexp(1).Add(size).Sign() < 0 {
			continue
		}
		z := s.Scale(T)
		z.Re = z.Re.Add(dd.One)
		if v := z.Complex128(); !math.IsNaN(real(v)) {
			out = append(out, Moved{s.Complex128(), v})
		}
	}
	return out
}
