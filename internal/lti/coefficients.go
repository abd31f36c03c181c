package lti

import (
	"math"

	"steadytick/internal/dd"
	"steadytick/internal/poly"
)

// TrackingByCoefficients is a second route to TrackingSeries that shares no series
// algebra with it: the closed loop is written as one fraction of polynomials,
//
//	T(x) = (… + n1·x + n0)/(… + d1·x + d0)
//
// and, by the final value theorem applied to one input after the other,
//
//	c0 = (d0 − n0)/d0,   ck = ((dk − nk) − Σ_{j<k} cj·d(k−j))/d0
//
// Delays enter as the low-order terms of their expansion in the numerators. A
// difference dk − nk below 1e-26 of its terms is zero (see cancelled). The route does not use
// StaticTracking. A closed loop with a pole at x = 0 gives +Inf in every entry.
func (s System) TrackingByCoefficients(n int) []dd.Float {
	terms := n + s.spare()
	num, den := s.closedFraction(terms)
	low := 0
	for low < terms && den[low].Sign() == 0 {
		if num[low].Sign() != 0 {
			return infinite(make([]dd.Float, n))
		}
		low++
	}
	if terms-low < n {
		return infinite(make([]dd.Float, n))
	}
	num, den = num[low:], den[low:]
	out := make([]dd.Float, n)
	for k := range out {
		v := den[k].Sub(num[k])
		if math.Abs(v.Hi) <= cancelled*(math.Abs(den[k].Hi)+math.Abs(num[k].Hi)) {
			v = dd.Zero
		}
		for j := range k {
			v = v.Sub(out[j].Mul(den[k-j]))
		}
		out[k] = v.Div(den[0])
		if !out[k].IsFinite() {
			return infinite(out)
		}
	}
	return out
}

// closedFraction returns numerator and denominator of T, the first terms of each.
// Factors that both would contain by the structure of the loop are left out.
func (s System) closedFraction(terms int) (num, den poly.Poly) {
	mul := func(f ...poly.Poly) poly.Poly {
		p := poly.Const(dd.One)
		for _, q := range f {
			p = lowOrder(p.Mul(q), terms)
		}
		return p
	}
	nr, dr := s.Cr.fraction(terms)
	nc, dc := s.Cm.fraction(terms)
	ny, dy := s.Gy.fraction(terms)
	nm, dm := s.Gm.fraction(terms)
	switch {
	case s.OneDegree && s.StaticSensor != nil:
		num = mul(nc, ny)
		den = mul(dc, dy).Add(num.Scale(*s.StaticSensor))
	case s.OneDegree:
		num = mul(nc, ny, dm)
		den = mul(dy, mul(dc, dm).Add(mul(nc, nm)))
	default:
		num = mul(nr, ny, dc, dm)
		den = mul(dr, dy, mul(dc, dm).Add(mul(nc, nm)))
	}
	return lowOrder(num, terms), lowOrder(den, terms)
}

// fraction returns g as numerator and denominator polynomials, low-order terms.
func (g TF) fraction(terms int) (num, den poly.Poly) {
	num = g.Num.Shift(g.OriginZeros)
	if d, ok := g.delaySeries(terms); ok {
		num = num.Mul(poly.Poly(d.C))
	}
	den = poly.FromRoots(g.Poles).Shift(g.OriginPoles)
	return lowOrder(num, terms), lowOrder(den, terms)
}

// lowOrder is p cut or padded with zeros to exactly n coefficients.
func lowOrder(p poly.Poly, n int) poly.Poly {
	out := make(poly.Poly, n)
	copy(out, p)
	return out
}
