package exact

import (
	"math/big"

	"steadytick/internal/dd"
	"steadytick/internal/poly"
)

// Numeric returns r in the form that the numerics work with,
//
//	r(x) = x^(OriginZeros − OriginPoles) · num(x) / Π(x − poles_i)
//
// The leading coefficients of the denominator factors are folded into num in Q,
// and each coefficient of num is rounded once. The zero function has an empty num and no
// poles. Errors: ErrRange, ErrRoots.
func (r Ratio) Numeric() (num poly.Poly, poles []dd.Complex, err error) {
	if r.IsZero() {
		return nil, nil, nil
	}
	poles, err = r.Poles()
	if err != nil {
		return nil, nil, err
	}
	gain := new(big.Rat).Set(r.Gain)
	for _, f := range r.Den {
		gain.Quo(gain, ratPow(f.P.Lead(), f.N))
	}
	p := expand(r.Num).Scale(gain)
	num = p.DD()
	for i, c := range num {
		if !c.IsFinite() || (c.Sign() == 0) != (p[i].Sign() == 0) {
			return nil, nil, ErrRange
		}
	}
	return num, poles, nil
}
