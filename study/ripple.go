package study

import (
	"errors"
	"math"
	"math/cmplx"

	"steadytick/internal/dd"
	"steadytick/internal/lti"
	"steadytick/loop"
)

// ripple is what lives between the ticks at steady state, about the error that
// the ticks show: its highest and lowest deviation, signed, for polynomial inputs; for a sine, high is the
// largest error amplitude.
type ripple struct{ high, low, peakToPeak float64 }

// ripplePolynomial computes the ripple for a step, ramp or parabola of size a, whose
// order is n = 0, 1, 2. The effort u = Cr/(1 + L)·r is then of order n − k, k the order of
// Cr/(1 + L) at the origin (the integrators of the plant, as a rule):
//
//	n − k <= 0   constant or zero: the hold hides nothing, no ripple
//	n − k  = 1   a staircase of equal steps: a ripple that stays
//	n − k  = 2   steps that grow: a ripple that grows for ever, infinite
//
// In the middle case, with y(kT+θ) = t0·r + t1·δr + t2·δ²r from the series of the response at
// offset θ and the asymptote g of the ticks continued through time, the deviation is
//
//	step:      a·(1 − c0 − t0)
//	ramp:      a·(θ(1−c0) − t1 − c1)
//	parabola:  a·((1−c0)θ²/2 − c1·θ − t1·T/2 − t2 − c2 − c1·T/2)
func (a *analyzed) ripplePolynomial(in loop.Input) ripple {
	n := map[string]int{"step": 0, "ramp": 1, "parabola": 2}[in.Kind] - a.effortOrder()
	switch {
	case n <= 0 || in.Size == 0:
		return ripple{}
	case n >= 2:
		inf := math.Inf(1)
		return ripple{inf, -inf, inf}
	}
	c := a.trackingDD
	half := a.block.open.Period.Ldexp(-1)
	rest := dd.One.Sub(c[0])
	at := a.offsetResponse()
	lo, hi := extremes(a.block.held.smoothParts(), func(o *offset) float64 {
		t, err := at(o)
		if err != nil {
			return math.NaN()
		}
		th := o.seconds()
		var d dd.Float
		switch in.Kind {
		case "step":
			d = rest.Sub(t[0])
		case "ramp":
			d = th.Mul(rest).Sub(t[1]).Sub(c[1])
		case "parabola":
			d = th.Mul(th).Ldexp(-1).Mul(rest).Sub(c[1].Mul(th)).Sub(t[1].Mul(half))
			d = d.Sub(t[2]).Sub(c[2]).Sub(c[1].Mul(half))
		}
		return d.MulFloat(in.Size).Float64()
	})
	return ripple{hi, lo, hi - lo}
}

// effortOrder is the order at the origin of Cr/(1 + L), from r to u: exact, by the integrators and zeros there.
func (a *analyzed) effortOrder() int {
	cr, _ := lti.Leading(a.block.sys.Cr)
	open, _ := lti.Leading(a.block.open)
	return cr - min(0, open)
}

// rippleSine compares the response at each offset with the sine through the ticks.
func (a *analyzed) rippleSine(in loop.Input, w float64) ripple {
	size := math.Abs(in.Size)
	atTick, cr, open := a.block.toOutput(w), a.block.sys.Cr.Freq(w), 1+a.block.open.Freq(w)
	var worst float64
	at := func(o *offset) float64 {
		s := a.block.held.seenAt(o)
		if s.err != nil {
			return math.NaN()
		}
		turn := cmplx.Rect(1, w*o.seconds().Float64())
		y := cr * s.g.Freq(w) / open
		worst = math.Max(worst, cmplx.Abs(turn-y)*size)
		return cmplx.Abs(turn*atTick-y) * size
	}
	_, hi := extremes(a.block.held.smoothParts(), at)
	return ripple{high: worst, low: -hi, peakToPeak: 2 * hi}
}

// offsetResponse prepares the series t0, t1, t2 of the response from r to y at any offset θ,
//
//	y(kT+θ) = Cr/(1 + L) · Gθ · r
//
// with Gθ the hold equivalent seen θ after the tick, the only part that changes.
func (a *analyzed) offsetResponse() func(*offset) ([3]dd.Float, error) {
	b := a.block
	terms := 4 + 2*(b.open.OriginPoles+b.open.OriginZeros) + b.sys.Cr.OriginPoles + b.sys.Cr.OriginZeros
	l := b.open.Series(terms)
	one := make([]dd.Float, terms+max(l.Start, 0)-min(l.Start, 0))
	one[-min(l.Start, 0)] = dd.One
	front, err := b.sys.Cr.Series(terms).Div(lti.NewLaurent(min(l.Start, 0), one).Add(l))
	return func(o *offset) (t [3]dd.Float, _ error) {
		if err != nil {
			return t, err
		}
		s := b.held.seenAt(o)
		if s.err != nil {
			return t, s.err
		}
		g := s.laurent(terms)
		for k := range t {
			var known bool
			if t[k], known = front.ProductCoefficient(g, k); !known {
				return t, errors.New("series too short")
			}
		}
		return t, nil
	}
}
