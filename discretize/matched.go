package discretize

import (
	"math"
	"math/big"

	"steadytick/internal/dd"
	"steadytick/internal/lti"
	"steadytick/internal/poly"
	"steadytick/sdomain"
	"steadytick/zdomain"
)

// matched is the pole-zero map:
//
//	each pole and each finite zero   z = e^{sT},   δ = (e^{sT} − 1)/T
//	zeros at infinity                one stays at infinity, the others go to z = −1
//	gain                             lim_{δ→0} δ^-n·H(δ) = lim_{s→0} s^-n·G(s)
//
// n is the order of G at the origin: 0 for a model without integrators and zeros
// there, when it is the DC gain that is matched; −1 with one integrator, when it is the
// velocity constant; see MatchedGain. One zero stays at infinity so that a result needs
// its input one tick late only when the model was strictly proper.
//
// Preserved: stability, order, poles exactly, DC gain, integrators, zeros at the
// origin. Distortion: gain away from DC (of order (ωT)²), half a tick of lag from the
// zero at infinity. (Common practice; conventions differ on the zeros at infinity.)
func matched(m sdomain.Model, _ Spec, T *big.Rat) (zdomain.Model, error) {
	td := dd.FromRat(T)
	r := m.Ratio
	if r.IsZero() {
		return sampled(lti.TF{Period: td}, T)
	}
	rel := r.RelativeDegree()
	if rel < 0 {
		return zdomain.Model{}, &ImproperError{Method: "matched", Excess: -rel}
	}
	poles, err := matchedRoots("pole", r.Poles, td)
	if err != nil {
		return zdomain.Model{}, err
	}
	zeros, err := matchedRoots("zero", r.Zeros, td)
	if err != nil {
		return zdomain.Model{}, err
	}
	for range rel - 1 {
		zeros = append(zeros, dd.Real(dd.Two.Div(td).Neg()))
	}
	_, lead := r.Laurent(1)
	num := poly.FromRoots(zeros)
	gain := dd.FromRat(lead[0]).Mul(negProduct(poles))
	if g := math.Abs(gain.Hi); !(g >= 1/maxGain && g <= maxGain) {
		return zdomain.Model{}, &RangeError{"the gain of the mapped controller", g, maxGain}
	}
	num = num.Scale(gain.Div(num[0]))
	num[0] = gain
	return sampled(lti.TF{
		Num: num, Poles: poles, Period: td,
		OriginZeros: r.OriginZeros, OriginPoles: r.OriginPoles,
	}, T)
}

// matchedRoots maps roots one by one, conjugates and equal ones alike.
func matchedRoots(what string, roots func() ([]dd.Complex, error), T dd.Float) ([]dd.Complex, error) {
	x, err := roots()
	if err != nil {
		return nil, err
	}
	p := Plant{lambda: sortPoles(x), num: len(x)}
	if err := checkRoots(what, x, T); err != nil {
		return nil, err
	}
	return p.deltaPoles(T), nil
}

// MatchedGain returns the order n of m at s = 0, G ≈ g·s^n, at which the matched
// map takes its gain: 0 means the DC gain, −1 the velocity constant, 1 the slope of a
// differentiator. It is 0 for the zero function.
func MatchedGain(m sdomain.Model) int {
	if m.Ratio.IsZero() {
		return 0
	}
	return m.Ratio.OriginZeros - m.Ratio.OriginPoles
}
