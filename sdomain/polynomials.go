package sdomain

import (
	"math/big"

	"steadytick/internal/exact"
)

// FromPolynomials returns num/den, coefficients in DESCENDING powers of s as a
// loop file gives them. Errors: exact.ErrZeroDivision for a den that is empty or all
// zeros, *exact.SizeError. An empty or zero num is the zero function.
func FromPolynomials(num, den []*big.Rat) (Model, error) {
	r, err := exact.FromPolys(ascending(num), ascending(den))
	if err != nil {
		return Model{}, err
	}
	return checked(r, new(big.Rat))
}

func ascending(c []*big.Rat) exact.Poly {
	out := make([]*big.Rat, len(c))
	for i, v := range c {
		out[len(c)-1-i] = v
	}
	return exact.NewPoly(out...)
}
