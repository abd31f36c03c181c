package lti

import (
	"math"
	"math/cmplx"
	"sort"

	"steadytick/internal/dd"
)

// dominant returns the upper half of the most rightmost roots of a loop with a
// long delay or dead time, in the units of ch and f, and whether they are certainly all that
// lie right of the last: the argument count along a line just left of it gives their
// number. Where roots are missing, up to three rounds of further starts are made.
func dominant(ch characteristic, f factored, limit int) (half []dd.Complex, complete bool) {
	c := newChain(f)
	places := c.places(ch)
	c.branches(limit/2+24, cornerOf(f))
	c.near(places)
	for round := range 4 {
		half = c.polished(ch)
		half, sigma, ok := cutAt(half, ch, limit)
		if !ok {
			return half, len(half) > 0 && total(half)+ch.hidden >= f.order()
		}
		switch want, ok := countRight(f, sigma); {
		case !ok, want < total(half)+ch.hiddenRight(sigma):
			return half, false
		case want == total(half)+ch.hiddenRight(sigma):
			return half, true
		case round < 3:
			c.fill(sigma, round)
		}
	}
	half, _, _ = cutAt(half, ch, limit)
	return half, false
}

// order is the number of roots: poles and ticks; a dead time has no end of them.
func (f factored) order() int {
	if f.dead.Sign() != 0 {
		return math.MaxInt
	}
	return len(f.poles) + f.op + f.ticks
}

// hiddenRight is the number of hidden roots at the origin that a line at sigma has on its right.
func (c characteristic) hiddenRight(sigma float64) int {
	if sigma < 0 {
		return c.hidden
	}
	return 0
}

// cornerOf is the greatest modulus of a pole or zero.
func cornerOf(f factored) float64 {
	m := 0.0
	for _, list := range [2][]dd.Complex{f.zeros, f.poles} {
		for _, r := range list {
			m = math.Max(m, r.Abs())
		}
	}
	return m
}

// total counts an upper half with its conjugates.
func total(half []dd.Complex) int {
	n := 0
	for _, x := range half {
		n++
		if x.Im.Sign() != 0 {
			n++
		}
	}
	return n
}

// polished brings the roots found to double-double and drops those that meet.
func (c *chain) polished(ch characteristic) []dd.Complex {
	var out []dd.Complex
next:
	for i, s := range c.found {
		x, _ := c.point(s)
		if imag(s) == 0 || c.T != 0 && math.Abs(imag(s)*c.T-math.Pi) < 1e-9 {
			x = complex(real(x), 0)
		}
		r := ch.polish(dd.FromComplex(x))
		if math.Abs(r.Im.Hi) <= 1e-20*r.Abs() {
			r.Im = dd.Zero
		}
		r.Im = r.Im.Abs()
		if !r.IsFinite() || !(r.Sub(dd.FromComplex(x)).Abs() <= 1e-3*(cmplx.Abs(x)+c.small)) {
			continue
		}
		for _, q := range out {
			if q.Sub(r).Abs() <= 1e-9*(r.Abs()+c.small) {
				continue next
			}
		}
		out = append(out, r)
		c.found[i] = equivalent(r, ch.period)
	}
	return out
}

// cutAt keeps the limit rightmost roots and returns a line between them and the rest;
// false when there is no rest.
func cutAt(half []dd.Complex, ch characteristic, limit int) ([]dd.Complex, float64, bool) {
	right := func(x dd.Complex) float64 { return real(equivalent(x, ch.period)) }
	half = append([]dd.Complex(nil), half...)
	sort.SliceStable(half, func(i, j int) bool { return right(half[i]) > right(half[j]) })
	n := 0
	for i, x := range half {
		if n >= limit {
			return half[:i], (right(half[i-1]) + right(x)) / 2, i > 0
		}
		n += total([]dd.Complex{x})
	}
	return half, 0, false
}

// countRight counts the roots right of the line Re s = sigma by the argument.
func countRight(f factored, sigma float64) (n int, ok bool) {
	p, err := newPlane(f.shifted(dd.New(sigma)))
	if err != nil || p.endless() {
		return 0, false
	}
	n, marginal := p.unstable(p.gainCrossings())
	return n, !marginal || p.hidden && !p.exhausted
}

// fill makes further starts: in the gaps of the chain, then over the rectangle that the
// roots known so far span.
func (c *chain) fill(sigma float64, round int) {
	if round == 0 {
		c.gaps()
		return
	}
	top, right := 1/c.tau, sigma+1/c.tau
	for _, s := range c.found {
		if real(s) >= sigma {
			top, right = math.Max(top, imag(s)), math.Max(right, real(s))
		}
	}
	for _, p := range c.poles {
		right = math.Max(right, real(p))
	}
	n := 8 << round
	var places []complex128
	for i := range n {
		for j := range 3 {
			places = append(places, complex(
				sigma+(right-sigma)*(float64(j)+0.5)/3,
				top*(float64(i)+0.3)/float64(n)))
		}
	}
	c.near(places)
}

// gaps starts between neighbours of the chain that are further apart in height than
// 1.2 times the spacing 2π/τ, and below the first.
func (c *chain) gaps() {
	list := append([]complex128(nil), c.found...)
	sort.Slice(list, func(i, j int) bool { return imag(list[i]) < imag(list[j]) })
	spacing := 2 * math.Pi / c.tau
	var places []complex128
	last := complex(0, 0)
	for i, s := range list {
		if i == 0 {
			last = complex(real(s), 0)
		}
		n := int(math.Min(imag(s-last)/spacing+0.8, 16))
		for k := 1; k < n; k++ {
			f := complex(float64(k)/float64(n), 0)
			places = append(places, last+(s-last)*f)
		}
		last = s
	}
	for _, p := range places[:min(len(places), 200)] {
		if r, ok := c.deflated(p); ok {
			c.add(r)
		}
	}
}
