package discretize

import (
	"math/big"

	"steadytick/sdomain"
	"steadytick/zdomain"
)

// tustin is the trapezoidal rule (bilinear map):
//
//	s = (2/T)·(z−1)/(z+1) = δ/(1 + δT/2)
//
// Exact over Q. Preserved: stability both ways, order, DC gain, integrators and the
// leading Laurent coefficient (error constants). Distortion: frequencies,
// ω_digital = (2/T)·atan(ω·T/2), so a 300 Hz notch at 1 kHz lands at 240.6 Hz; zeros at
// infinity go to z = −1; H − G ≈ −T²·(s³/12)·G'(s). A model of higher numerator than denominator degree gets
// poles at z = −1, on the unit circle. Refused when a pole sits at s = 2/T (z = ∞).
// (Tustin, 1947, from memory; common practice.)
func tustin(m sdomain.Model, _ Spec, T *big.Rat) (zdomain.Model, error) {
	half := new(big.Rat).Mul(T, big.NewRat(1, 2))
	return substitute("tustin", m, rat(1), rat(0), half, rat(1), T)
}
