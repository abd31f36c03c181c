package study

import (
	"math/big"

	"steadytick/internal/dd"
	"steadytick/internal/exact"
	"steadytick/internal/lti"
	"steadytick/loop"
	"steadytick/sdomain"
)

// leading is the first term c·x^order of an expansion about x = 0; a nil
// coefficient is the zero function.
type leading struct {
	order int
	c     *big.Rat
}

func leadingOf(r exact.Ratio) leading {
	if r.IsZero() {
		return leading{}
	}
	start, c := r.Laurent(1)
	return leading{start, c[0]}
}

// staticTracking is the gain from r to y at rest, exact where it is finite:
//
//	T(0) = lim Cr·P / (1 + Cm·P·H)    (x → 0)
//
// cr and cm are exact in s or δ. P and H are the continuous models in both domains: a
// hold equivalent has the leading term of its continuous model when that has no
// zero at the origin, and a zero at the origin makes the limit 0 either way. A
// result of nil means: not decided here.
func staticTracking(cr, cm *exact.Ratio, plant, sensor sdomain.Model) *dd.Float {
	if cr == nil || cm == nil || cm.IsZero() || plant.Ratio.IsZero() || sensor.Ratio.IsZero() {
		return nil
	}
	if cr.IsZero() {
		return &dd.Float{}
	}
	r, m, p, h := leadingOf(*cr), leadingOf(*cm), leadingOf(plant.Ratio), leadingOf(sensor.Ratio)
	if p.order > 0 || h.order > 0 {
		return nil
	}
	loopOrder := m.order + p.order + h.order
	value := new(big.Rat)
	order := 0
	switch {
	case loopOrder < 0: // Cr/(Cm·H)
		order = r.order - m.order - h.order
		value.Mul(m.c, h.c)
		value.Quo(r.c, value)
	case loopOrder == 0:
		order = r.order + p.order
		l := new(big.Rat).Mul(m.c, p.c)
		l.Mul(l, h.c)
		l.Add(l, big.NewRat(1, 1))
		if l.Sign() == 0 {
			return nil
		}
		value.Mul(r.c, p.c)
		value.Quo(value, l)
	default:
		order = r.order + p.order
		value.Mul(r.c, p.c)
	}
	switch {
	case order < 0:
		return nil
	case order > 0:
		return &dd.Float{}
	}
	out := dd.FromRat(value)
	return &out
}

// atRest is the exact controller whose leading term at the origin decides about rest: the mapped one where
// it is exact, else the continuous one, because the other maps (matched, hold, triangle)
// keep the leading term. A prewarped part would not, but that map is exact. Nil: neither.
func atRest(l *loop.Loop, mapped *exact.Ratio, reference bool) *exact.Ratio {
	if mapped != nil {
		return mapped
	}
	for _, t := range l.Controller.Terms {
		for _, p := range t.Parts {
			if p.Map.Method == "prewarped" {
				return nil
			}
		}
	}
	cm, cr, err := continuousTerms(l.Controller)
	if err != nil {
		return nil
	}
	if reference {
		return &cr.Ratio
	}
	return &cm.Ratio
}

// finish joins the loop and fills what is known exactly about a column, which saves cancellations.
func (b *block) finish(l *loop.Loop, cm, cr *exact.Ratio) {
	b.open = b.sys.Loop()
	b.sys.OneDegree = oneDegree(l.Controller)
	if g, ok := staticSensor(l.Sensor); ok {
		h := dd.FromRat(g)
		b.sys.StaticSensor = &h
	}
	b.sys.StaticTracking = staticTracking(cr, cm, l.Plant, l.Sensor.Model)
}

// staticSensor returns the gain of a sensor without dynamics.
func staticSensor(s loop.Sensor) (*big.Rat, bool) {
	r := s.Model.Ratio
	if r.OriginPoles > 0 || r.OriginZeros > 0 || len(r.Num) > 0 || len(r.Den) > 0 || s.Model.Delay.Sign() != 0 {
		return nil, false
	}
	return r.Gain, true
}

// allPoles are the poles of g with those at the origin.
func allPoles(g lti.TF) []dd.Complex {
	return append(make([]dd.Complex, g.OriginPoles), g.Poles...)
}
