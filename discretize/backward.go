package discretize

import (
	"math/big"

	"steadytick/sdomain"
	"steadytick/zdomain"
)

// backward is the backward difference:
//
//	s = (z−1)/(T·z) = δ/(1 + δT)
//
// Exact over Q. Preserved: stability (the left half plane goes into the circle
// |z − 1/2| < 1/2), order, DC gain, integrators and the leading Laurent coefficient.
// Distortion: damping is added, undamped poles become damped and unstable ones may
// become stable; H − G ≈ −T·(s²/2)·G'(s); zeros at infinity go to z = 0. A model of
// higher numerator than denominator degree stays realizable (poles at z = 0).
// Refused when a pole sits at s = 1/T (z = ∞). (Common practice.)
func backward(m sdomain.Model, _ Spec, T *big.Rat) (zdomain.Model, error) {
	return substitute("backward", m, rat(1), rat(0), T, rat(1), T)
}
