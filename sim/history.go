package sim

import "sort"

// piece is a stretch of the continuous loop from t to end; its polynomials are over t to t + h,
// h >= end − t.
type piece struct {
	t, h, end float64
	y, m, u   values
}

// history keeps the pieces that a lag still looks back to.
type history struct {
	r    *radau
	list []piece
	past float64 // longest lag
}

// side says which limit is meant at a jump.
type side int

const (
	before side = iota
	after
)

// near is how far from the end of a piece, as a part of its length, an instant counts as the end:
// well above the rounding of sums of times, far below what the polynomial changes over.
const nearEnd = 1e-9

// measurement returns m̂ at t; 0 before the start.
func (h *history) measurement(t float64, s side) float64 {
	n := len(h.list)
	i := sort.Search(n, func(i int) bool {
		p := &h.list[i]
		slack := nearEnd * (p.end - p.t)
		if s == before {
			return p.end+slack >= t
		}
		return p.end-slack > t
	})
	if i == n {
		if n == 0 {
			return 0
		}
		i = n - 1
	}
	p := &h.list[i]
	if slack := nearEnd * (p.end - p.t); i == 0 && (t < p.t-slack || s == before && t <= p.t+slack) {
		return 0 // at rest before the start; older pieces are dropped only when out of reach
	}
	return p.m.at(h.r, (t-p.t)/p.h)
}

// add appends a piece and drops those out of reach.
func (h *history) add(p piece) {
	if h.past == 0 {
		return
	}
	h.list = append(h.list, p)
	if n := len(h.list); n > 64 && h.list[n/2].end < p.t-h.past*1.01 {
		h.list = append(h.list[:0], h.list[n/2:]...)
	}
}
