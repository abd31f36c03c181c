package study

import (
	"math"
	"math/cmplx"

	"steadytick/internal/dd"
	"steadytick/internal/lti"
	"steadytick/loop"
)

// steadyTerms is how many coefficients of a tracking series a result carries.
const steadyTerms = 4

// polynomialError turns a tracking series c into the steady error
// g0 + g1·t + g2·t² of an input of the given kind and size, T = 0 for the
// continuous column:
//
//	step a:      r = a           e = c0·a
//	ramp a:      r = a·t         e = c0·a·t + c1·a
//	parabola a:  r = a·t²/2      e = c0·a·t²/2 + c1·a·(t + T/2) + c2·a
//
// because the first forward difference of a·(kT)²/2, over T, is a·(kT + T/2).
func polynomialError(kind string, a float64, c []dd.Float, T dd.Float) (g [3]float64) {
	scaled := func(v dd.Float) float64 { return v.MulFloat(a).Float64() }
	switch kind {
	case "step":
		g[0] = scaled(c[0])
	case "ramp":
		g[0], g[1] = scaled(c[1]), scaled(c[0])
	case "parabola":
		g[0], g[1], g[2] = scaled(c[2].Add(c[1].Mul(T).Ldexp(-1))), scaled(c[1]), scaled(c[0].Ldexp(-1))
	}
	return g
}

// reached is the asymptote's value as an error figure: infinite where it grows.
func reached(g [3]float64) Figure {
	if g[1] != 0 || g[2] != 0 {
		return Fig(math.Inf(1))
	}
	return Fig(g[0])
}

// steady fills the steady errors of a stable column. Of an unstable one only
// the inputs are named.
func (a *analyzed) steady(l *loop.Loop, between bool) []Steady {
	var out []Steady
	for _, in := range l.Inputs {
		s := blankSteady(in)
		switch in.Kind {
		case "step", "ramp", "parabola":
			a.steadyPolynomial(in, &s, between)
		case "sine":
			a.steadySine(in, &s, between)
		case "load_step":
			a.steadyLoad(l, in, &s)
		}
		out = append(out, s)
	}
	return out
}

func (a *analyzed) steadyPolynomial(in loop.Input, s *Steady, between bool) {
	if !a.stable {
		return
	}
	T := a.block.open.Period
	g := polynomialError(in.Kind, in.Size, a.trackingDD, T)
	s.TrackingError = reached(g)
	s.LoopError = reached(polynomialError(in.Kind, in.Size, a.loopErrDD, T))
	s.Asymptote = &[3]Figure{Fig(g[0]), Fig(g[1]), Fig(g[2])}
	if a.block.period == nil {
		s.WorstError = absFigure(s.TrackingError)
		return
	}
	if !between {
		return
	}
	r := a.ripplePolynomial(in)
	s.Ripple = Fig(r.peakToPeak)
	s.WorstError = absFigure(s.TrackingError)
	if !math.IsInf(s.TrackingError.Value, 0) {
		s.WorstError = Fig(math.Max(math.Abs(g[0]+r.high), math.Abs(g[0]+r.low)))
	}
}

func absFigure(f Figure) Figure { return Figure{math.Abs(f.Value), f.OK} }

// steadySine gives amplitude and phase of the error E = 1 − T(jω) for a sine of
// the reference, at the ticks.
func (a *analyzed) steadySine(in loop.Input, s *Steady, between bool) {
	w, _ := in.Frequency.Float64()
	if !a.stable {
		return
	}
	e := 1 - a.block.toOutput(w)
	s.TrackingError = Fig(cmplx.Abs(e) * math.Abs(in.Size))
	s.PhaseDeg = Fig(cmplx.Phase(e) * 180 / math.Pi)
	s.LoopError = Fig(cmplx.Abs(1-a.block.toMeasurement(w)) * math.Abs(in.Size))
	if !between {
		return
	}
	s.WorstError = s.TrackingError
	if a.block.period != nil {
		r := a.rippleSine(in, w)
		s.Ripple, s.WorstError = Fig(r.peakToPeak), Fig(r.high)
	}
}

// steadyLoad is the steady error r − y = −y for a step of d at the plant input.
// With everything at rest between and at the ticks the hold plays no part:
//
//	y/d = lim P/(1 + Cm·P·H)   (x → 0)
//
// decided by the orders of the leading terms, the same in both columns.
func (a *analyzed) steadyLoad(l *loop.Loop, in loop.Input, s *Steady) {
	if !a.stable {
		return
	}
	y, ok := loadGain(a.block.sys.Cm, l)
	if !ok {
		return
	}
	s.TrackingError = Fig(-y * in.Size)
	h := leadingOf(l.Sensor.Model.Ratio)
	m := 0.0
	if h.order == 0 && h.c != nil && !math.IsInf(y, 0) {
		g, _ := h.c.Float64()
		m = g * y
	}
	s.LoopError = Fig(-m * in.Size)
	s.Asymptote = &[3]Figure{s.TrackingError, Fig(0), Fig(0)}
	s.WorstError = absFigure(s.TrackingError)
	if a.block.period != nil {
		s.Ripple = Fig(0)
	}
}

// loadGain is y/d at rest; false where the limit is not finite.
func loadGain(cm lti.TF, l *loop.Loop) (float64, bool) {
	p, h := leadingOf(l.Plant.Ratio), leadingOf(l.Sensor.Model.Ratio)
	pc, _ := p.c.Float64()
	if cm.IsZero() || h.c == nil {
		return pc, p.order == 0
	}
	hc, _ := h.c.Float64()
	start, lead := lti.Leading(cm)
	cc := lead.Float64()
	order := start + p.order + h.order
	switch {
	case order < 0:
		k := -(start + h.order) // y/d ~ x^k / (C·H)
		if k > 0 {
			return 0, true
		}
		return 1 / (cc * hc), k == 0
	case p.order > 0:
		return 0, true
	case p.order < 0:
		return 0, false
	case order == 0:
		return pc / (1 + cc*pc*hc), true
	}
	return pc, true
}
