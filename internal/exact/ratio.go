package exact

import "math/big"

// Factor is P^N with P(0) = 1, degree of P at least 1, N at least 1.
type Factor struct {
	P Poly
	N int
}

// Ratio is a rational function over Q in one variable x that keeps its factors:
//
//	G(x) = Gain · x^(OriginZeros − OriginPoles) · ΠNum_i(x) / ΠDen_j(x)
//
// Factors are normalized to the value 1 at x = 0, so Gain is the leading
// coefficient of the expansion about the origin. Factors common to Num and Den
// (and OriginZeros with OriginPoles) are NOT cancelled: they are hidden modes,
// and hiding them is the user's business to hear about. Gain = 0 is the zero function,
// with no factors. Values are immutable.
type Ratio struct {
	Gain                     *big.Rat
	OriginZeros, OriginPoles int
	Num, Den                 []Factor
}
