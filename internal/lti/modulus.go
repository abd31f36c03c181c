package lti

import (
	"math"
)

// modulus returns the least |1 + L| along the boundary and the ν where it is (+Inf:
// at infinite frequency). marks are places where it is likely to be small; they only make
// the search short.
//
// On an interval of half-width h about m, with ℓ = log L and M the bound on |ℓ”|,
// L stays within |L(m)|·(e^r − 1) of L(m), r = |ℓ'|·h + M·h²/2, and log|L| within the same
// bound made with the derivative of log|L| alone. So |1 + L| is at least
//
//	max( |1 + L(m)| − |L(m)|·(e^r − 1),  |1 − e^(range of log|L|)| )
//
// Intervals whose bound is above the best value found are dropped, others halved until
// r < 0.02. There 1 + L is a nearly straight arc with one minimum at most, which a
// sign change of the derivative shows.
func (p *plane) modulus(marks []float64) (least, at float64) {
	p.evals = searchBudget
	s := &lowest{p: p, best: math.Inf(1)}
	s.ends()
	for _, nu := range marks {
		s.offer(nu)
	}
	s.descend()
	cuts := p.corners()
	from := 0.0
	if p.e != 0 {
		from = s.lowest(p.lowEnd())
	}
	for _, cut := range cuts {
		s.search(side{p, false}, from, cut)
		from = cut
	}
	s.beyond(from)
	return s.best, s.at
}

// lowest is a search for the least |1 + L|.
type lowest struct {
	p        *plane
	best, at float64
}

// side is the near or the far half of the axis: L at a place with the derivative of its logarithm, and
// bounds on the second derivatives of log|L| and of log L.
type side struct {
	p   *plane
	far bool
}

func (s side) at(t float64) response {
	if s.far {
		return s.p.farAt(t)
	}
	return s.p.nearAt(t)
}

// bends bounds the second derivatives of log|L| and of log L itself on [lo, hi].
func (s side) bends(lo, hi float64) (gain, both float64) {
	if s.far {
		gain = s.p.farGainBend(lo, hi)
		return gain, gain + s.p.farPhaseRest(lo, hi)
	}
	gain = s.p.gainBend(lo, hi)
	return gain, gain + s.p.phaseRest(lo, hi)
}

// nu is the ν of the place t.
func (s side) nu(t float64) float64 {
	if s.far {
		return 1 / t
	}
	return t
}

// ends offers rest and infinite frequency.
func (s *lowest) ends() {
	p := s.p
	if p.e >= 0 {
		l := 0.0
		if p.e == 0 {
			f, _ := p.gain(0)
			l = math.Exp(f)
			if p.start().reversed() {
				l = -l
			}
		}
		s.offerValue(0, math.Abs(1+l))
	}
	switch k := p.slope(); {
	case k < 0:
		s.offerValue(math.Inf(1), 1)
	case k == 0 && p.dead != 0:
		s.offerValue(math.Inf(1), math.Abs(1-math.Exp(p.logK)))
	case k == 0:
		l := math.Exp(p.logK)
		if p.end().reversed() {
			l = -l
		}
		s.offerValue(math.Inf(1), math.Abs(1+l))
	}
}

func (s *lowest) offerValue(nu, v float64) {
	if v < s.best {
		s.best, s.at = v, nu
	}
}

// offer evaluates |1 + L| at ν.
func (s *lowest) offer(nu float64) {
	if nu > 0 && !math.IsInf(nu, 1) {
		s.offerValue(nu, s.p.nearAt(nu).distance())
	}
}

// descend improves the best place so far by a few secant steps on the slope of |1 + L|²: the search drops more
// intervals at once when the best value is near the least.
func (s *lowest) descend() {
	if !(s.at > 0) || math.IsInf(s.at, 1) {
		return
	}
	slope := func(t float64) float64 {
		v := s.p.nearAt(t)
		s.offerValue(t, v.distance())
		return v.slope()
	}
	x, y := s.at, s.at*(1+0x1p-6)
	a, b := slope(x), slope(y)
	for range 8 {
		z := y - b*(y-x)/(b-a)
		if !(z > s.at/2 && z < s.at*2) {
			return
		}
		x, a = y, b
		y, b = z, slope(z)
		if math.Abs(y-x) <= 1e-6*y { // 1e-12 in value, and the search goes on from there
			return
		}
	}
}

// lowest returns where the search begins when log|L| has a straight part below end:
// where |L| is so large or so small that |1 + L| is above the best.
func (s *lowest) lowest(end float64) float64 {
	f, _ := s.p.gain(end)
	for range 2000 {
		if math.Abs(1-math.Exp(f)) >= s.best && (f > 0) == (s.p.e < 0) {
			break
		}
		end /= 2
		f, _ = s.p.gain(end)
	}
	return end
}

// beyond searches from the last corner to infinite frequency.
func (s *lowest) beyond(from float64) {
	p := s.p
	if p.dead == 0 {
		end := 1 / from
		start := 0.0
		if p.slope() != 0 {
			start = end * 0x1p-60
		}
		s.search(side{p, true}, start, end)
		return
	}
	for range 200 { // octaves; |L| falls or is nearly constant
		f, _ := p.gain(from)
		if f < 0 && 1-math.Exp(f) >= s.best {
			return
		}
		if p.slope() == 0 && 1-math.Exp(f) >= s.best*(1-1e-9) {
			return
		}
		s.search(side{p, false}, from, 2*from)
		from *= 2
	}
}

// search looks for the least value on [lo, hi] of the near or the far variable.
func (s *lowest) search(on side, lo, hi float64) {
	stack := []span{{lo, hi, 0}}
	for len(stack) > 0 && s.p.evals > 0 {
		q := stack[len(stack)-1]
		stack = stack[:len(stack)-1]
		if !(q.lo < q.hi) {
			continue
		}
		s.p.evals--
		m := middle(q.lo, q.hi)
		h := math.Max(m-q.lo, q.hi-m)
		v := on.at(m)
		gain, both := on.bends(q.lo, q.hi)
		r := length(v.dlog)*h + both*h*h/2
		g := math.Abs(real(v.dlog))*h + gain*h*h/2
		switch {
		case floor(v, r, g) >= s.best:
		case r < 0.02 || q.depth >= maxHalvings:
			s.bottom(on, q.lo, q.hi)
		default:
			stack = append(stack, span{m, q.hi, q.depth + 1}, span{q.lo, m, q.depth + 1})
		}
	}
}

// floor bounds |1 + L| from below, given L in the middle, the reach r of log L
// and the reach g of log|L|.
func floor(v response, r, g float64) float64 {
	f := v.log
	bound := math.Inf(-1)
	if f < largeLog {
		bound = v.distance() - math.Exp(f)*math.Expm1(r)
	}
	switch {
	case f > g:
		return math.Max(bound, math.Expm1(f-g))
	case f < -g:
		return math.Max(bound, -math.Expm1(f+g))
	}
	return bound
}

// bottom finds the minimum of |1 + L|² on an interval with one minimum at most, by
// the sign of its half derivative Re(conj(1+L)·L·ℓ') and the Illinois form of the false
// position rule (Dahlquist and Björck; from memory).
func (s *lowest) bottom(on side, lo, hi float64) {
	slope := func(t float64) float64 {
		v := on.at(t)
		s.offerValue(on.nu(t), v.distance())
		return v.slope()
	}
	a, b := slope(lo), slope(hi)
	if !(a < 0 && b > 0) {
		return
	}
	last := 0
	for range 60 {
		t := (lo*b - hi*a) / (b - a)
		if !(t > lo && t < hi) {
			return
		}
		f := slope(t)
		switch {
		case f == 0 || hi-lo <= 1e-11*hi: // an error of 1e-11 in place is 1e-22 in value
			return
		case f < 0:
			lo, a = t, f
			if last < 0 {
				b /= 2
			}
			last = -1
		default:
			hi, b = t, f
			if last > 0 {
				a /= 2
			}
			last = 1
		}
	}
}
