package discretize

import (
	"math/big"

	"steadytick/sdomain"
	"steadytick/zdomain"
)

// forward is the forward (Euler) difference:
//
//	s = (z−1)/T = δ
//
// Exact over Q. Preserved: order, relative degree, DC gain, integrators and the
// leading Laurent coefficient. NOT preserved: stability. A pole at s goes to
// z = 1 + sT, outside the unit circle unless |1 + sT| < 1: a derivative filter with
// Tf/T = 0.25 goes to z = −3. MovedOutside lists such poles. Distortion: damping
// is taken away, H − G ≈ T·(s²/2)·G'(s). (Common practice.)
func forward(m sdomain.Model, _ Spec, T *big.Rat) (zdomain.Model, error) {
	return substitute("forward", m, rat(1), rat(0), rat(0), rat(1), T)
}
