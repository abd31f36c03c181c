package discretize

import (
	"math/big"

	"steadytick/internal/dd"
	"steadytick/sdomain"
	"steadytick/zdomain"
)

// prewarped is the trapezoidal rule made exact at one frequency ω = spec.At:
//
//	s = k·δ/(1 + δT/2),   k = (ωT/2)/tan(ωT/2),   0 < ω < π/T
//
// k is rounded to 106 bits and then taken as an exact rational. Preserved:
// stability both ways, order, DC gain, integrators, and the response at ω exactly (to that
// rounding). Distortion: all other frequencies; k < 1 scales s near DC, so an
// integrator's gain grows by 1/k: with ωT = 1, by 9.3 %. Refused at and
// above half the sample rate, where k is 0 or negative. (Common practice.)
func prewarped(m sdomain.Model, spec Spec, T *big.Rat) (zdomain.Model, error) {
	nyquist := dd.Pi.Div(dd.FromRat(T)).Float64()
	if spec.At == nil || spec.At.Sign() <= 0 {
		return zdomain.Model{}, &AtError{0, nyquist}
	}
	k, ok := warp(spec.At, T)
	if !ok {
		at, _ := spec.At.Float64()
		return zdomain.Model{}, &AtError{at, nyquist}
	}
	half := new(big.Rat).Mul(T, big.NewRat(1, 2))
	return substitute("prewarped", m, k, rat(0), half, rat(1), T)
}

// warp returns k; ok is false at and above half the sample rate. A frequency
// given in Hz reaches here as a rounded multiple of π, hence the margin: 2^-40
// is far wider than that rounding and far narrower than any useful frequency.
func warp(at, T *big.Rat) (k *big.Rat, ok bool) {
	x := dd.FromRat(new(big.Rat).Mul(at, T)).Ldexp(-1) // ωT/2
	limit := dd.Pi.Ldexp(-1).MulFloat(1 - 0x1p-40)
	if !x.IsFinite() || x.Cmp(limit) >= 0 {
		return nil, false
	}
	s, c := dd.SinCos(x)
	if s.Sign() == 0 { // ωT below 1e-308
		return rat(1), true
	}
	return x.Mul(c).Div(s).Rat(), true
}
