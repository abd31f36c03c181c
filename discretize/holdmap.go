package discretize

import (
	"math/big"

	"steadytick/sdomain"
	"steadytick/zdomain"
)

// holdMap is the hold (step-invariant) equivalent of a controller: Hold without delay.
//
//	H(z) = (1 − z^-1) · Z{G(s)/s}
//
// Preserved: stability, order, DC gain, integrators and the leading Laurent
// coefficient, the step response at the ticks. Distortion: about T/2 of lag, since the input
// is taken as held since the last tick, H − G ≈ −T·(s/2)·G(s); of several zeros at s = 0 one stays at z = 1.
func holdMap(m sdomain.Model, _ Spec, T *big.Rat) (zdomain.Model, error) {
	return Hold(m, T, new(big.Rat))
}
