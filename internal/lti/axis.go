package lti

import "math"

// Along the axis log L(jν) is a sum over factors. This file evaluates it with its
// first derivative at a point and bounds its second derivative on an interval,
// which is what the searches need to be certain of what lies between two points:
//
//	d/dν log(jν − p) = 1/(ν − b + ja),   |d²/dν² log(jν − p)| <= 1/min|jν − p|²
//
// The near side uses ν itself, the far side, beyond all corners, its inverse
// μ = 1/ν, in which jν − p = jν·(1 + jpμ).

// logSum collects log Π of magnitudes without overflow.
type logSum struct {
	m float64
	e int
}

func (s *logSum) times(x float64) {
	s.m *= x
	if !(s.m > 1e-150 && s.m < 1e150) {
		m, e := math.Frexp(s.m)
		s.m, s.e = m, s.e+e
	}
}

func (s *logSum) log() float64 { return math.Log(s.m) + float64(s.e)*math.Ln2 }

// tiny keeps the square of a distance from being exactly zero on an undamped root.
const tiny = 1e-300

// gain returns log|L| and its derivative at ν > 0 (at 0 when e is 0).
func (p *plane) gain(nu float64) (f, df float64) {
	s := logSum{m: 1}
	for i := range p.factors {
		c := &p.factors[i]
		u := (nu - c.b) - c.bLow
		d := math.Max(u*u+c.a*c.a, tiny)
		if c.sign > 0 {
			s.times(d)
		} else {
			s.times(1 / d)
		}
		df += c.sign * u / d
	}
	f = p.logK + s.log()/2
	if p.e != 0 {
		f += float64(p.e) * math.Log(nu)
		df += float64(p.e) / nu
	}
	return f, df
}

// phase returns the unwrapped phase of L and its derivative at ν > 0. A factor in
// the left half plane or on the axis runs from −π/2 to π/2, one in the right half
// plane from 3π/2 to π/2; a negative K counts π; (jν)^e counts e·π/2.
func (p *plane) phase(nu float64) (f, df float64) {
	f = p.restPhase() + float64(p.e)*math.Pi/2
	for i := range p.factors {
		c := &p.factors[i]
		u := (nu - c.b) - c.bLow
		angle := math.Atan2(u, math.Abs(c.a))
		if c.a > 0 {
			angle = math.Pi - angle
		}
		f += c.sign * angle
		if c.a != 0 {
			df -= c.sign * c.a / (u*u + c.a*c.a)
		}
	}
	d, dd := p.delayPhase(nu)
	return f + d, df + dd
}

// restPhase is the part of the phase that belongs to the sign of K.
func (p *plane) restPhase() float64 {
	if p.lead.Sign() < 0 {
		return math.Pi
	}
	return 0
}

// delayPhase is the phase of the delay and its derivative.
func (p *plane) delayPhase(nu float64) (f, df float64) {
	if p.ticks != 0 {
		n, h := float64(p.ticks), p.period/2
		return -2 * n * math.Atan(nu*h), -2 * n * h / (1 + nu*nu*h*h)
	}
	return -nu * p.dead, -p.dead
}

// bend bounds the second derivative of the sum over factors on [lo, hi], without the
// e·log ν and without the delay.
func (p *plane) bend(lo, hi float64) float64 {
	m := 0.0
	for i := range p.factors {
		c := &p.factors[i]
		b := c.b + c.bLow
		u := max(0, lo-b, b-hi)
		m += 1 / (u*u + c.a*c.a)
	}
	return m
}

// gainBend bounds |d² log|L|/dν²| on [lo, hi].
func (p *plane) gainBend(lo, hi float64) float64 {
	return p.bend(lo, hi) + p.gainRest(lo)
}

// gainRest is the share of (jν)^e.
func (p *plane) gainRest(lo float64) float64 {
	if p.e == 0 {
		return 0
	}
	return math.Abs(float64(p.e)) / (lo * lo)
}

// phaseBend bounds |d² phase/dν²| on [lo, hi], which holds no undamped root in its
// inside: beside one the phase is constant. For n ticks the delay's is
// 4n·h³ν/(1 + h²ν²)², h = T/2.
func (p *plane) phaseBend(lo, hi float64) float64 {
	m := 0.0
	for i := range p.factors {
		if c := &p.factors[i]; c.a != 0 {
			b := c.b + c.bLow
			u := max(0, lo-b, b-hi)
			m += 1 / (u*u + c.a*c.a)
		}
	}
	return m + p.phaseRest(lo, hi)
}

// phaseRest is the share of the delay.
func (p *plane) phaseRest(lo, hi float64) float64 {
	if p.ticks == 0 {
		return 0
	}
	h := p.period / 2
	q := 1 + h*h*lo*lo
	return 4 * float64(p.ticks) * h * h * h * hi / (q * q)
}

// farGain is log|L| and its derivative with respect to μ = 1/ν.
func (p *plane) farGain(mu float64) (f, df float64) {
	s := logSum{m: 1}
	for i := range p.factors {
		c := &p.factors[i]
		b := c.b + c.bLow
		re, im := 1-b*mu, c.a*mu
		d := re*re + im*im
		if c.sign > 0 {
			s.times(d)
		} else {
			s.times(1 / d)
		}
		df += c.sign * (c.a*im - b*re) / d
	}
	f = p.logK + s.log()/2
	if k := -p.slope(); k != 0 {
		f += float64(k) * math.Log(mu)
		df += float64(k) / mu
	}
	return f, df
}

// farPhase is the phase and its derivative with respect to μ; not for dead time.
func (p *plane) farPhase(mu float64) (f, df float64) {
	f = p.restPhase() + float64(p.slope())*math.Pi/2
	for i := range p.factors {
		c := &p.factors[i]
		b := c.b + c.bLow
		re, im := 1-b*mu, c.a*mu
		f += c.sign * math.Atan2(im, re)
		df += c.sign * c.a / (re*re + im*im)
	}
	if p.ticks != 0 {
		n, c := float64(p.ticks), 2/p.period
		f += -n*math.Pi + 2*n*math.Atan(mu*c)
		df += 2 * n * c / (1 + mu*mu*c*c)
	}
	return f, df
}

// farBend is bend in μ, for μ·|p| <= 1/2.
func (p *plane) farBend(_, hi float64) float64 {
	m := 0.0
	for i := range p.factors {
		q := p.factors[i].mod
		r := 1 - q*hi
		m += q * q / (r * r)
	}
	return m
}

func (p *plane) farGainBend(lo, hi float64) float64 {
	return p.farBend(lo, hi) + p.farGainRest(lo)
}

func (p *plane) farGainRest(lo float64) float64 {
	if k := p.slope(); k != 0 {
		return math.Abs(float64(k)) / (lo * lo)
	}
	return 0
}

func (p *plane) farPhaseBend(lo, hi float64) float64 {
	return p.farBend(lo, hi) + p.farPhaseRest(lo, hi)
}

func (p *plane) farPhaseRest(lo, hi float64) float64 {
	if p.ticks == 0 {
		return 0
	}
	c := 2 / p.period
	q := 1 + c*c*lo*lo
	return 4 * float64(p.ticks) * c * c * c * hi / (q * q)
}
