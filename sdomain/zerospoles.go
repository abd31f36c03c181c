package sdomain

import (
	"fmt"
	"math/big"

	"steadytick/internal/exact"
)

// ConjugateError names a complex zero or pole without its conjugate.
type ConjugateError struct {
	What  string // "zero" or "pole"
	Value [2]*big.Rat
}

func (e *ConjugateError) Error() string {
	re, _ := e.Value[0].Float64()
	im, _ := e.Value[1].Float64()
	return fmt.Sprintf("%s %.6g%+.6gj lacks its conjugate", e.What, re, im)
}

// FromZerosPoles returns
//
//	G(s) = gain · Π(s − zeros_i) / Π(s − poles_i)
//
// Each root is a pair (real, imaginary part) in rad/s. Errors: *ConjugateError
// when complex roots are not closed under conjugation, counted with
// multiplicity; *exact.SizeError.
func FromZerosPoles(zeros, poles [][2]*big.Rat, gain *big.Rat) (Model, error) {
	if n := max(len(zeros), len(poles)); n > exact.MaxOrder {
		return Model{}, &exact.SizeError{What: "order", Got: n, Limit: exact.MaxOrder}
	}
	num, err := rootFactors(zeros, "zero")
	if err != nil {
		return Model{}, err
	}
	den, err := rootFactors(poles, "pole")
	if err != nil {
		return Model{}, err
	}
	r := exact.Const(gain)
	for _, p := range num {
		f, _ := exact.FromPolys(p, exact.IntPoly(1))
		r = r.Mul(f)
	}
	for _, p := range den {
		f, _ := exact.FromPolys(exact.IntPoly(1), p)
		r = r.Mul(f)
	}
	return checked(r, new(big.Rat))
}

// rootFactors returns s − x for real roots and s² − 2·Re(x)·s + |x|² for pairs.
func rootFactors(roots [][2]*big.Rat, what string) ([]exact.Poly, error) {
	var out []exact.Poly
	used := make([]bool, len(roots))
	for i, x := range roots {
		if used[i] {
			continue
		}
		one := big.NewRat(1, 1)
		if x[1].Sign() == 0 {
			out = append(out, exact.NewPoly(new(big.Rat).Neg(x[0]), one))
			continue
		}
		j := conjugate(roots, used, i)
		if j < 0 {
			return nil, &ConjugateError{what, x}
		}
		used[j] = true
		sq := new(big.Rat).Mul(x[0], x[0])
		sq.Add(sq, new(big.Rat).Mul(x[1], x[1]))
		out = append(out, exact.NewPoly(sq, new(big.Rat).Mul(big.NewRat(-2, 1), x[0]), one))
	}
	return out, nil
}

// conjugate returns the index after i of an unused conjugate of root i, −1 when there is none.
func conjugate(roots [][2]*big.Rat, used []bool, i int) int {
	neg := new(big.Rat).Neg(roots[i][1])
	for j := i + 1; j < len(roots); j++ {
		if !used[j] && roots[j][0].Cmp(roots[i][0]) == 0 && roots[j][1].Cmp(neg) == 0 {
			return j
		}
	}
	return -1
}
