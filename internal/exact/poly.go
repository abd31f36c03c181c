// Package exact holds polynomials and rational functions over the rational
// numbers. The type of a loop, its integrators and its hidden modes are decided
// here, where zero means zero.
package exact

import "math/big"

// Poly is a polynomial over Q, ascending powers: p[k] belongs to x^k. The
// zero polynomial has length 0; a non-zero one has a non-zero last coefficient.
type Poly []*big.Rat
