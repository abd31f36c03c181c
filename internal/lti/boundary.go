package lti

import (
	"math"
	"math/cmplx"

	"steadytick/internal/dd"
)

// boundary returns the point of the stability boundary at ω rad/s,
//
//	x = jω                                        T = 0
//	x = (e^(jωT) − 1)/T = (−2·sin²(ωT/2) + j·sin ωT)/T
//
// the second form without the subtraction that would lose ωT of the digits.
func boundary(w, period dd.Float) dd.Complex {
	if period.Sign() == 0 {
		return dd.Complex{Im: w}
	}
	s, c := dd.SinCos(w.Mul(period).Ldexp(-1))
	return dd.Complex{
		Re: s.Mul(s).Ldexp(1).Neg().Div(period),
		Im: s.Mul(c).Ldexp(1).Div(period),
	}
}

// Inside tells whether x lies strictly inside the stability region: Re s < 0, or
// |1 + Tδ| < 1 tested as 2·Re δ + T·|δ|² < 0, which does not cancel near δ = 0.
func Inside(x dd.Complex, period dd.Float) bool { return excess(x, period).Sign() < 0 }

// excess is 2·Re x + T·|x|², negative inside the stability region; half of it is,
// to first order in the distance, the distance from the boundary.
func excess(x dd.Complex, period dd.Float) dd.Float {
	return x.Re.Ldexp(1).Add(period.Mul(x.Re.Mul(x.Re).Add(x.Im.Mul(x.Im))))
}

// onBoundary is the relative distance below which a point counts as lying on
// the stability boundary: 1e-12 of its own modulus, far above the arithmetic
// (1e-28 for a simple root) and far below any damping that a model means.
const onBoundary = 1e-12

// nearBoundary tells whether x is closer to the boundary than onBoundary·|x|.
func nearBoundary(x dd.Complex, period dd.Float) bool {
	return math.Abs(excess(x, period).Float64()) <= 2*onBoundary*x.Abs()
}

// power returns x^n, n >= 0, by squaring; relative error about n·Eps.
func power(x dd.Complex, n int) dd.Complex {
	r := dd.Real(dd.One)
	for ; n > 0; n >>= 1 {
		if n&1 == 1 {
			r = r.Mul(x)
		}
		x = x.Mul(x)
	}
	return r
}

// At returns g(x) in double-double arithmetic. At a pole the result is not finite.
func (g TF) At(x dd.Complex) dd.Complex {
	switch {
	case g.IsZero():
		return dd.Complex{}
	case g.DeadTime.Sign() != 0:
		return g.rational(x).Mul(dd.CExp(x.Scale(g.DeadTime).Neg()))
	case g.Ticks != 0:
		z := dd.Complex{Re: dd.One.Add(x.Re.Mul(g.Period)), Im: x.Im.Mul(g.Period)}
		return g.rational(x).Mul(power(dd.Real(dd.One).Div(z), g.Ticks))
	}
	return g.rational(x)
}

// rational is At without the delay. Factors of numerator and denominator are
// taken in turn, so that no partial product leaves the range of float64.
func (g TF) rational(x dd.Complex) dd.Complex {
	v := g.Num.Eval(x)
	for _, p := range g.Poles {
		v = v.Div(x.Sub(p))
	}
	for range g.OriginZeros - g.OriginPoles {
		v = v.Mul(x)
	}
	for range g.OriginPoles - g.OriginZeros {
		v = v.Div(x)
	}
	return v
}

// response returns g on the boundary at ω rad/s, ω in double-double.
func (g TF) response(w dd.Float) dd.Complex {
	v := g.rational(boundary(w, g.Period))
	angle := g.DeadTime
	if g.Ticks != 0 {
		angle = g.Period.MulFloat(float64(g.Ticks))
	}
	if angle.Sign() == 0 {
		return v
	}
	s, c := dd.SinCos(w.Mul(angle).Neg())
	return v.Mul(dd.Complex{Re: c, Im: s})
}

// Freq returns g at ω rad/s on the stability boundary, delay included, to full
// float64 accuracy. At a pole it is complex infinity. See Scan for many frequencies.
func (g TF) Freq(w float64) complex128 {
	if g.IsZero() {
		return 0
	}
	v := g.response(dd.New(w)).Complex128()
	if cmplx.IsNaN(v) || cmplx.IsInf(v) {
		return cmplx.Inf()
	}
	return v
}
