package lti

import (
	"math"

	"steadytick/internal/dd"
)

// System is a feedback loop,
//
//	u = Cr·r − Cm·m,   y = Gy·u,   m = Gm·u,   L = Cm·Gm
//
// all four at one period. Gm contains the plant as well as the sensor: in the sampled
// domain the hold equivalent of their product.
type System struct {
	Cr, Cm, Gy, Gm TF
	// OneDegree says that Cr and Cm are the same controller, acting on r − m.
	OneDegree bool
	// StaticSensor is h where Gm is h·Gy, a sensor without dynamics; nil otherwise.
	StaticSensor *dd.Float
	// StaticTracking is the gain from r to y at x = 0 where it is known exactly; nil otherwise.
	StaticTracking *dd.Float
}

// Loop returns L = Cm·Gm.
func (s System) Loop() TF { return s.Cm.Mul(s.Gm) }

// TrackingSeries returns c0 … c(n−1) of 1 − T, T from r to y: r − y = Σ ck·r⁽ᵏ⁾ once
// transients are gone. With OneDegree and a static sensor h
//
//	1 − T = (1 − 1/h) + (1/h)·1/(1 + L)
//
// and the series of 1/(1+L) begins with exactly as many zeros as L has integrators.
// Otherwise
//
//	1 − T = (1 + L − Cr·Gy)/(1 + L)
//
// where leading terms of L and Cr·Gy cancel; what is left below 1e-26 of the
// terms (see cancelled) is set to zero. c0 is exact when StaticTracking is given.
//
// A closed loop with a pole at x = 0 has no such series: every entry is +Inf.
func (s System) TrackingSeries(n int) []dd.Float {
	var out []dd.Float
	if s.OneDegree && s.StaticSensor != nil && s.StaticSensor.Sign() != 0 {
		inv := dd.One.Div(*s.StaticSensor)
		out = s.sensitivity(n)
		for k := range out {
			out[k] = out[k].Mul(inv)
		}
		if n > 0 {
			out[0] = out[0].Add(dd.One.Sub(inv))
		}
	} else {
		out = s.errorSeries(s.Gy, n)
	}
	if s.StaticTracking != nil && n > 0 && out[0].IsFinite() {
		out[0] = dd.One.Sub(*s.StaticTracking)
	}
	return out
}

// LoopErrorSeries returns the series of r − m, what the firmware sees, as
// TrackingSeries does; with OneDegree it is that of 1/(1+L) for every sensor.
func (s System) LoopErrorSeries(n int) []dd.Float {
	if s.OneDegree {
		return s.sensitivity(n)
	}
	return s.errorSeries(s.Gm, n)
}

// ResponseSeries returns the first n coefficients of the response from r to y,
// Cr·Gy/(1 + L), about x = 0; +Inf as for TrackingSeries.
func ResponseSeries(s System, n int) []dd.Float {
	num, den := s.numeratorSeries(s.Gy, n)
	return taylor(num, den, n)
}

// sensitivity is the series of 1/(1 + L).
func (s System) sensitivity(n int) []dd.Float {
	l := s.Loop().Series(n + s.spare())
	one := unitSeries(min(l.Start, 0), len(l.C)+max(l.Start, 0))
	return taylor(unitSeries(0, len(one.C)), one.Add(l), n)
}

// errorSeries is the series of 1 − Cr·G/(1 + L) for G = Gy or Gm.
func (s System) errorSeries(g TF, n int) []dd.Float {
	num, den := s.numeratorSeries(g, n)
	return taylor(den.Sub(num), den, n)
}

// numeratorSeries returns the series of Cr·G and of 1 + L.
func (s System) numeratorSeries(g TF, n int) (num, den Laurent) {
	n += s.spare()
	l := s.Loop().Series(n)
	num = s.Cr.Series(n).Mul(g.Series(n))
	den = unitSeries(min(l.Start, 0), n+max(l.Start, 0)).Add(l)
	return num, den
}

// spare is how many more terms than asked for are carried: the origin factors
// shift the series against each other by at most their number.
func (s System) spare() int {
	n := 1
	for _, g := range [4]TF{s.Cr, s.Cm, s.Gy, s.Gm} {
		n += g.OriginPoles + g.OriginZeros
	}
	return n
}

// unitSeries is the constant 1 written from x^start, n terms; start <= 0.
func unitSeries(start, n int) Laurent {
	c := make([]dd.Float, n)
	if -start < n {
		c[-start] = dd.One
	}
	return NewLaurent(start, c)
}

// taylor returns the coefficients of x^0 … x^(n−1) of num/den, noise set to zero
// (see cancelled), or +Inf where the quotient has a pole at x = 0 or den vanishes.
func taylor(num, den Laurent, n int) []dd.Float {
	out := make([]dd.Float, n)
	q, err := num.Div(den)
	order, nonzero := q.Order()
	if err != nil || nonzero && order < 0 {
		return infinite(out)
	}
	for k := range out {
		c, known := q.Coefficient(k)
		if !known || !c.IsFinite() {
			return infinite(out)
		}
		if i := k - q.Start; i >= 0 && math.Abs(c.Hi) <= cancelled*q.magnitude(i) {
			c = dd.Zero
		}
		out[k] = c
	}
	return out
}

func infinite(out []dd.Float) []dd.Float {
	for k := range out {
		out[k] = dd.New(math.Inf(1))
	}
	return out
}
