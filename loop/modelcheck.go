package loop

import (
	"fmt"
	"math/big"

	"steadytick/internal/exact"
)

// maxModelBits bounds the longest coefficient of a finished model: enough for thirty
// 17-digit factors or for powers of pi, and quick to analyse exactly.
const maxModelBits = 6000

// checkModel refuses a model that cannot run or cannot be computed with.
func (r *reader) checkModel(m model, what string) bool {
	ratio := m.m.Ratio
	if ratio.IsZero() {
		r.report(m.at, what+" is identically zero", "a model that is not zero")
		return false
	}
	order, longest := size(ratio)
	zeros := ratio.Order() - ratio.RelativeDegree()
	if ratio.RelativeDegree() < 0 {
		name := "s"
		expected := "no more zeros than poles; a fast pole, such as 1/(0.001*s + 1), makes a derivative realizable"
		if m.in == sampled {
			name, expected = "z", "no more zeros than poles; multiply by z^-1 for every tick that the formula looks ahead"
		}
		r.report(m.at, fmt.Sprintf("%s is improper: %s^%d above, %s^%d below", what, name, zeros, name, ratio.Order()), expected)
		return false
	}
	if order > maxOrder {
		r.report(m.at, fmt.Sprintf("%s is of order %d", what, order), fmt.Sprintf("at most %d", maxOrder))
		return false
	}
	if longest > maxModelBits {
		r.report(m.at, fmt.Sprintf("%s has coefficients of about %d digits", what, longest*3/20),
			fmt.Sprintf("at most %d digits", maxModelBits*3/20))
		return false
	}
	if !coefficientsInRange(ratio) {
		r.report(m.at, what+" has numbers outside the range of computation", "magnitudes from 1e-200 to 1e200")
		return false
	}
	return true
}

// coefficientsInRange looks at the gain and at every coefficient of the factors, which
// have the value 1 at the origin.
func coefficientsInRange(r exact.Ratio) bool {
	if !inRange(r.Gain) {
		return false
	}
	for _, list := range [][]exact.Factor{r.Num, r.Den} {
		for _, f := range list {
			for _, c := range f.P {
				if !inRange(c) {
					return false
				}
			}
		}
	}
	return true
}

// atInfinity is lim m for large s (or z): 0 for more poles than zeros. m is proper.
func atInfinity(r exact.Ratio) *big.Rat {
	if r.IsZero() || r.RelativeDegree() > 0 {
		return new(big.Rat)
	}
	return leading(r)
}

// leading is lim m·s^d for large s, d poles more than zeros: the quotient of the leading coefficients. m is not zero.
func leading(r exact.Ratio) *big.Rat {
	lead := func(list []exact.Factor) *big.Rat {
		p := big.NewRat(1, 1)
		for _, f := range list {
			for range f.N {
				p.Mul(p, f.P[len(f.P)-1])
			}
		}
		return p
	}
	v := new(big.Rat).Mul(r.Gain, lead(r.Num))
	return v.Quo(v, lead(r.Den))
}
