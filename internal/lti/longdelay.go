package lti

import (
	"math"
	"math/cmplx"
	"sort"

	"steadytick/internal/dd"
)

// chain is the search for the dominant roots of a loop with a long delay τ,
//
//	D(x)·e^(sτ) + N(x) = 0,   x = s or (e^(sT) − 1)/T
//
// in float64 and in the variable s. Most roots form a chain close to the axis,
// spaced by about 2π/τ, which Newton's method finds on the branches
//
//	s·τ = ln(−L0(x(s))) + j·2πk,   L0 = N/D
//
// The others lie near open-loop poles or near the closed-loop poles without delay; from
// there Newton's method runs on the function itself with the roots already found
// divided out.
type chain struct {
	zeros, poles []complex128
	origin       float64 // oz − op
	op           int
	logLead      complex128
	T, tau       float64
	small        float64      // 1/τ or, where that is less, the smallest root without delay: what two roots are told apart by
	found        []complex128 // upper half
}

func newChain(f factored) *chain {
	c := &chain{
		origin: float64(f.oz - f.op), op: f.op, T: f.period.Float64(),
		tau:     f.dead.Float64() + f.period.Float64()*float64(f.ticks),
		logLead: cmplx.Log(complex(f.lead.Hi, 0)),
	}
	c.small = 1 / c.tau
	for _, z := range f.zeros {
		c.zeros = append(c.zeros, z.Complex128())
	}
	for _, p := range f.poles {
		c.poles = append(c.poles, p.Complex128())
	}
	return c
}

// point returns x(s) and dx/ds.
func (c *chain) point(s complex128) (x, dx complex128) {
	if c.T == 0 {
		return s, 1
	}
	a, b := real(s)*c.T, imag(s)*c.T
	h := math.Sin(b / 2)
	v := complex(math.Expm1(a)*math.Cos(b)-2*h*h, math.Exp(a)*math.Sin(b))
	return v / complex(c.T, 0), 1 + v
}

// log returns ln L0 on some branch, its derivative in s, and that of ln D.
func (c *chain) log(s complex128) (v, dv, dD complex128) {
	x, dx := c.point(s)
	v = c.logLead
	for _, z := range c.zeros {
		v += cmplx.Log(x - z)
		dv += 1 / (x - z)
	}
	for _, p := range c.poles {
		v -= cmplx.Log(x - p)
		dv -= 1 / (x - p)
		dD += 1 / (x - p)
	}
	if c.origin != 0 {
		v += complex(c.origin, 0) * cmplx.Log(x)
		dv += complex(c.origin, 0) / x
	}
	if c.op != 0 {
		dD += complex(float64(c.op), 0) / x
	}
	return v, dv * dx, dD * dx
}

// remainder is the distance of s from the nearest branch, zero at a root.
func (c *chain) remainder(s, logL0 complex128) complex128 {
	g := s*complex(c.tau, 0) - logL0
	return complex(real(g), math.Remainder(imag(g)-math.Pi, 2*math.Pi))
}

// follow runs Newton's method on the nearest branch from s.
func (c *chain) follow(s complex128) (complex128, bool) {
	for range 40 {
		v, dv, _ := c.log(s)
		step := c.remainder(s, v) / (complex(c.tau, 0) - dv)
		size := cmplx.Abs(step)
		if cmplx.IsNaN(step) || cmplx.IsInf(step) {
			return s, false
		}
		if limit := cmplx.Abs(s)/2 + 2*math.Pi/c.tau; size > limit {
			step *= complex(limit/size, 0)
		}
		s -= step
		if size <= 1e-13*(cmplx.Abs(s)+1/c.tau) {
			return s, true
		}
	}
	return s, false
}

// deflated runs Newton's method from s on the function divided by the roots found.
func (c *chain) deflated(s complex128) (complex128, bool) {
	for range 60 {
		v, dv, dD := c.log(s)
		w := v - s*complex(c.tau, 0) // ln L
		part := complex(1, 0)        // L/(1 + L)
		if real(w) < 300 {
			l := cmplx.Exp(w)
			part = l / (1 + l)
		}
		rate := dD + complex(c.tau, 0) + part*(dv-complex(c.tau, 0))
		for _, r := range c.found {
			rate -= 1 / (s - r)
			if imag(r) != 0 {
				rate -= 1 / (s - cmplx.Conj(r))
			}
		}
		step := 1 / rate
		size := cmplx.Abs(step)
		if cmplx.IsNaN(step) || cmplx.IsInf(step) {
			return s, false
		}
		if limit := cmplx.Abs(s)/2 + math.Pi/c.tau; size > limit {
			step *= complex(limit/size, 0)
		}
		s -= step
		if size <= 1e-12*(cmplx.Abs(s)+c.small) {
			return s, true
		}
	}
	return s, false
}

// add keeps a root unless it is known, folded into the upper half and, sampled,
// into the strip |Im s| <= π/T.
func (c *chain) add(s complex128) {
	if c.T != 0 {
		s = complex(real(s), math.Remainder(imag(s), 2*math.Pi/c.T))
	}
	s = complex(real(s), math.Abs(imag(s)))
	if imag(s) < 1e-10*(cmplx.Abs(s)+c.small) {
		s = complex(real(s), 0)
	}
	for _, r := range c.found {
		if cmplx.Abs(s-r) <= 1e-9*(cmplx.Abs(s)+c.small) {
			return
		}
	}
	c.found = append(c.found, s)
}

// maxBranches bounds the branches looked at for one loop.
const maxBranches = 20000

// branches follows the most promising branches: the root of branch k lies about
// ln|L0(jω)|/τ to the right of jω, ω = (2πk + arg(−L0))/τ.
func (c *chain) branches(count int, corner float64) {
	last := int(math.Min(maxBranches, corner*c.tau/(2*math.Pi)+float64(2*count)))
	if c.T != 0 {
		last = int(math.Min(float64(last), math.Round(c.tau/c.T)/2+1))
	}
	type start struct {
		s     complex128
		right float64
	}
	list := make([]start, 0, last+1)
	for k := range last + 1 {
		w := (float64(k) + 0.25) * 2 * math.Pi / c.tau
		v, _, _ := c.log(complex(0, w))
		turn := math.Remainder(w*c.tau-imag(v)-math.Pi, 2*math.Pi) / c.tau
		list = append(list, start{complex(real(v)/c.tau, w-turn), real(v)})
	}
	sort.SliceStable(list, func(i, j int) bool { return list[i].right > list[j].right })
	for _, s := range list[:min(len(list), count)] {
		if r, ok := c.follow(s.s); ok {
			c.add(r)
		}
	}
}

// near runs the deflated method from each place and from beside it.
func (c *chain) near(places []complex128) {
	for _, p := range places {
		size := cmplx.Abs(p) + c.small
		for _, d := range []complex128{1e-3i, 0.1 + 0.1i, -0.2 + 0.05i} {
			if r, ok := c.deflated(p + d*complex(size, 0)); ok {
				c.add(r)
			}
		}
	}
}

// places are open-loop poles and closed-loop poles without delay, as s; the smallest sets c.small.
func (c *chain) places(ch characteristic) []complex128 {
	var out []complex128
	keep := func(x dd.Complex) {
		if s := equivalent(x, ch.period); x.Im.Sign() >= 0 && !cmplx.IsInf(s) && !cmplx.IsNaN(s) {
			out = append(out, s)
			if size := cmplx.Abs(s); size > 0 {
				c.small = math.Min(c.small, size)
			}
		}
	}
	for _, p := range ch.poles {
		keep(p)
	}
	if ch.op > 0 {
		keep(dd.Complex{})
	}
	if roots, err := ch.expanded(0).Roots(); err == nil {
		for _, r := range roots {
			keep(r)
		}
	}
	return out
}
