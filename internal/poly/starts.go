package poly

import (
	"math"

	"steadytick/internal/dd"
)

// Starts returns one starting point for each root of p, exact zero roots
// included, from the Newton polygon: the upper convex hull of the points
// (k, log2|p_k|). An edge from i to j carries j−i roots of a modulus about
//
//	r = |p_i/p_j|^(1/(j−i))
//
// (Bini, "Numerical computation of polynomial zeros by means of Aberth's method",
// Numerical Algorithms 13, 1996; from memory). They are spread evenly on that circle,
// turned so that no two are conjugate: a symmetric set could not leave the symmetry.
// A radius outside the range of float64 is held at 2^±1000.
func Starts(p Poly) []dd.Complex {
	p = p.Trim()
	low := 0
	for low < len(p) && p[low].Sign() == 0 {
		low++
	}
	if low == len(p) {
		return nil
	}
	return append(make([]dd.Complex, low), circles(hull(p, 0))...)
}

// circles gives the starting points of the edges of a hull.
func circles(h []corner) []dd.Complex {
	var out []dd.Complex
	for n := 1; n < len(h); n++ {
		r := math.Exp2(math.Min(math.Max(radius(h[n-1], h[n]), -1000), 1000))
		m := h[n].k - h[n-1].k
		for i := range m {
			a := 2*math.Pi*(float64(i)/float64(m)+float64(n)/float64(h[len(h)-1].k+1)) + 0.7
			out = append(out, dd.C(r*math.Cos(a), r*math.Sin(a)))
		}
	}
	return out
}

// radius is log2 of the modulus that belongs to an edge.
func radius(a, b corner) float64 { return (a.log - b.log) / float64(b.k-a.k) }

type corner struct {
	k   int
	log float64 // log2|p_k|
}

// hull is the upper convex hull of p(2^shift·x), from left to right (Andrew's monotone chain).
func hull(p Poly, shift int) []corner {
	var h []corner
	for k, c := range p {
		if c.Hi == 0 {
			continue
		}
		f, e := math.Frexp(math.Abs(c.Hi))
		q := corner{k, math.Log2(f) + float64(e+shift*k)}
		for len(h) >= 2 && !right(h[len(h)-2], h[len(h)-1], q) {
			h = h[:len(h)-1]
		}
		h = append(h, q)
	}
	return h
}

// right tells whether a→b→c turns clockwise.
func right(a, b, c corner) bool {
	return (b.log-a.log)*float64(c.k-b.k) > (c.log-b.log)*float64(b.k-a.k)
}
