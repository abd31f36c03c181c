package study

import (
	"math"

	"steadytick/internal/dd"
	"steadytick/internal/lti"
)

const (
	// suspectZero: a pole where the numerator is smaller than this part of the sum of its terms is
	// looked at more closely. Cheap filter only.
	suspectZero = 1e-8
	// sameRoot is the relative distance at which a zero and a pole count as cancelling. Roots
	// of a numerator of double-double coefficients are good to 1e-15 even when double.
	sameRoot = 1e-10
)

// hiddenModes lists the poles of the open loop that a zero of it cancels, the origin
// included: they stay poles of the closed loop, but not of its response.
func hiddenModes(l lti.TF) []dd.Complex {
	var out []dd.Complex
	for range min(l.OriginZeros, l.OriginPoles) {
		out = append(out, dd.Complex{})
	}
	var zeros []dd.Complex
	used := map[int]bool{}
	for _, p := range l.Poles {
		if numeratorSize(l, p) > suspectZero {
			continue
		}
		if zeros == nil {
			var err error
			if zeros, err = l.Num.Roots(); err != nil {
				return out
			}
		}
		for i, z := range zeros {
			if !used[i] && p.Sub(z).Abs() <= sameRoot*p.Abs() {
				used[i] = true
				out = append(out, p)
				break
			}
		}
	}
	return out
}

// numeratorSize is |Num(p)| over the sum of the magnitudes of its terms.
func numeratorSize(l lti.TF, p dd.Complex) float64 {
	sum, power := 0.0, 1.0
	for _, c := range l.Num {
		sum += math.Abs(c.Hi) * power
		power *= p.Abs()
	}
	return l.Num.Eval(p).Abs() / sum
}
