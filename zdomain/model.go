// Package zdomain holds sampled models in the variable δ = (z−1)/T: their
// poles, stability, error constants and margins.
package zdomain

import (
	"math/big"

	"steadytick/internal/exact"
	"steadytick/internal/lti"
)

// Model is a sampled transfer function at one period. TF.Period equals Period.
// Exact is the same function (without its delay of TF.Ticks) as an exact rational function of δ where
// there is one (a digital model, or a rational map of a continuous one), else nil.
type Model struct {
	TF     lti.TF
	Exact  *exact.Ratio
	Period *big.Rat // seconds
}
