package lti

import (
	"math"
	"math/cmplx"
)

// response is L at one place of the axis, and the derivative of log L there.
type response struct {
	log  float64    // log|L|
	l    complex128 // L, meaningful for log < largeLog
	dlog complex128 // d log L/dν, or d/dμ on the far side
}

// largeLog: e^300 = 1e130 still has a square within float64; an L beyond it is nowhere near −1.
const largeLog = 300

// distance is |1 + L|.
func (v response) distance() float64 {
	if !(v.log < largeLog) {
		return math.Inf(1) // never the least
	}
	return length(1 + v.l)
}

// length is |v| for a v whose square does not overflow; of one below 1e-154 it is 0 or inexact.
func length(v complex128) float64 { return math.Sqrt(real(v)*real(v) + imag(v)*imag(v)) }

// slope is half the derivative of |1 + L|².
func (v response) slope() float64 { return real(cmplx.Conj(1+v.l) * v.l * v.dlog) }

// product collects complex factors without overflow.
type product struct {
	v complex128
	e int
}

func (p *product) times(re, im float64) {
	x := real(p.v)*re - imag(p.v)*im
	y := real(p.v)*im + imag(p.v)*re
	p.v = complex(x, y)
	if m := x*x + y*y; !(m > 1e-200 && m < 1e200) {
		p.rescale()
	}
}

func (p *product) rescale() {
	m := math.Max(math.Abs(real(p.v)), math.Abs(imag(p.v)))
	_, e := math.Frexp(m)
	p.v = complex(math.Ldexp(real(p.v), -e), math.Ldexp(imag(p.v), -e))
	p.e += e
}

// response returns the product as L with the delay's phase, and the derivative of its logarithm.
func (p *product) response(delay float64, dlog complex128) response {
	r := response{log: math.Log(real(p.v)*real(p.v)+imag(p.v)*imag(p.v))/2 + float64(p.e)*math.Ln2, dlog: dlog}
	if delay != 0 {
		s, c := math.Sincos(delay)
		p.times(c, s)
	}
	r.l = p.value()
	return r
}

// value is the product itself; it may leave the range of float64.
func (p *product) value() complex128 {
	if p.e == 0 {
		return p.v
	}
	return complex(math.Ldexp(real(p.v), p.e), math.Ldexp(imag(p.v), p.e))
}

// nearAt returns L at ν > 0 by its factors,
//
//	jν − p = −a + ju,   u = ν − b,   d/dν log(jν − p) = (u − ja)/(u² + a²)
func (p *plane) nearAt(nu float64) response {
	l := product{v: complex(p.leadFloat, 0)}
	dre, dim := 0.0, 0.0
	for i := range p.factors {
		c := &p.factors[i]
		u := (nu - c.b) - c.bLow
		d := u*u + c.a*c.a
		if d < tiny { // on an undamped root
			u, d = math.Sqrt(tiny), tiny
		}
		if c.sign > 0 {
			l.times(-c.a, u)
			dre, dim = dre+u/d, dim-c.a/d
		} else {
			l.times(-c.a/d, -u/d)
			dre, dim = dre-u/d, dim+c.a/d
		}
	}
	for range p.e {
		l.times(0, nu)
	}
	for range -p.e {
		l.times(0, -1/nu)
	}
	if p.e != 0 {
		dre += float64(p.e) / nu
	}
	f, df := p.delayPhase(nu)
	return l.response(f, complex(dre, dim+df))
}

// farAt returns L at μ = 1/ν by the factors of jν·(1 + jpμ); not for dead time.
//
//	1 + jpμ = (1 − bμ) + jaμ,   d/dμ log(1 + jpμ) = jp/(1 + jpμ)
func (p *plane) farAt(mu float64) response {
	l := product{v: complex(p.leadFloat, 0)}
	var dlog complex128
	for i := range p.factors {
		c := &p.factors[i]
		b := c.b + c.bLow
		re, im := 1-b*mu, c.a*mu
		d := re*re + im*im
		if c.sign > 0 {
			l.times(re, im)
		} else {
			l.times(re/d, -im/d)
		}
		dlog += complex(c.sign*(c.a*im-b*re)/d, c.sign*c.a/d)
	}
	k := -p.slope()
	for range k {
		l.times(0, -mu)
	}
	for range -k {
		l.times(0, 1/mu)
	}
	if k != 0 {
		dlog += complex(float64(k)/mu, 0)
	}
	turn := 0.0
	if p.ticks != 0 {
		n, c := float64(p.ticks), 2/p.period
		turn = 2*n*math.Atan(mu*c) - n*math.Pi
		dlog += complex(0, 2*n*c/(1+mu*mu*c*c))
	}
	return l.response(turn, dlog)
}
