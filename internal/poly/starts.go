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
// A radius outside the range of float64 is held at its end.
func Starts(p Poly) []dd.Complex {
	p = p.Trim()
	low := 0
	for low < len(p) && p[low].Sign() == 0 {
		low++
	}
	var out []dd.Complex
	for range min(low, max(len(p)-1, 0)) {
		out = append(out, dd.Complex{})
	}
	h := hull(p)
	for n := 1; n < len(h); n++ {
		i, j := h[n-1].k, h[n].k
		r := math.Exp2(math.Min(math.Max((h[n-1].log-h[n].log)/float64(j-i), -1000), 1000))
		for m := range j - i {
			a := 2*math.Pi*(float64(m)/float64(j-i)+float64(n)/float64(len(p))) + 0.7
			out = append(out, dd.C(r*math.Cos(a), r*math.Sin(a)))
		}
	}
	return out
}

type corner struct {
	k   int
	log float64 // log2|p_k|
}

// hull is the upper convex hull, from left to right (Andrew's monotone chain).
func hull(p Poly) []corner {
	var h []corner
	for k, c := range p {
		if c.Hi == 0 {
			continue
		}
		f, e := math.Frexp(math.Abs(c.Hi))
		q := corner{k, math.Log2(f) + float64(e)}
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
