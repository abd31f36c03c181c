// Package lti holds the numerics that the continuous and the sampled domain
// share: transfer functions in one variable x, which is s when the period is
// zero and δ = (z−1)/T otherwise, so that z = 1 + δT and the left half plane
// and the unit disc are the two ends of one family. Everything is computed in
// double-double arithmetic; integrators are an integer, never a number near zero.
package lti

import (
	"steadytick/internal/dd"
	"steadytick/internal/poly"
)

// TF is a real transfer function
//
//	G(x) = x^(OriginZeros−OriginPoles) · Num(x) / Π_i (x − Poles[i]) · D
//	D    = e^(−s·DeadTime)   when Period = 0
//	D    = z^(−Ticks)        when Period > 0
//
// Num(0) ≠ 0 unless G is the zero function (Num empty); no pole is exactly 0;
// complex poles come as exact conjugate pairs; an exactly multiple pole is listed
// as bitwise equal values. Poles and zeros are not cancelled against each other.
// Of OriginZeros and OriginPoles both may be positive: a hidden mode at the origin.
type TF struct {
	Num                      poly.Poly
	Poles                    []dd.Complex
	OriginZeros, OriginPoles int
	Period                   dd.Float // seconds; 0 for the continuous domain
	Ticks                    int      // whole ticks of delay, sampled domain only
	DeadTime                 dd.Float // seconds, continuous domain only

	zeros []dd.Complex // roots of Num, nil when not known; see FindZeros
}
