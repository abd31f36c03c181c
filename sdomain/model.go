// Package sdomain holds continuous models: exact rational functions of s with
// their factors and a dead time, their Laurent series, frequency response,
// error constants and margins.
package sdomain

import (
	"math/big"

	"steadytick/internal/exact"
)

// Model is G(s) = Ratio(s) · e^(−s·Delay), Delay in seconds, never negative.
// Values are immutable.
type Model struct {
	Ratio exact.Ratio
	Delay *big.Rat
}
