package study

import (
	"math"
	"sort"
)

// product is p·n of a timer with the least p that makes it.
type product struct{ x, p uint64 }

const (
	// mostScanned: to find the divisors of a whole number costs about as much as so many divisions.
	mostScanned = 1 << 14
	// mostWalked bounds the whole numbers tried for each product; see nearest.
	mostWalked = 1 << 14
	// fallbackScan is the number of prescalers gone through after that.
	fallbackScan = 1 << 20
)

// nearest lists the first k products on the way from one whole number to another, both included, in that order: downwards or upwards.
//
// The products that can be among them have p and n in a range each (span). Either the shorter of the two is gone through, which is exact,
// and ends early where no whole number is left out. Or, where that takes longer, whole numbers are tried one after another by their
// divisors, exact as well. A p of the range divides one whole number in p, so that products lie about
//
//	gap = 1/∑(1/p) <= highP/(highP − lowP + 1) + 1
//
// apart if their places are as good as random. With registers of 32 bits the first way takes at most 2²³ steps (0.1 s), the second is taken with a
// gap of at most 2⁹. It gives up after 2¹⁴ whole numbers a product, 32 times that gap, which has not been seen; the nearest of the 2²⁰ least
// prescalers are then given, which need not be the nearest of all.
func (r *timerRates) nearest(from, to uint64, down bool, k int) []product {
	s := &timerSearch{from: max(from, 1), to: min(to, r.most()), down: down, k: k}
	if down {
		s.from, s.to = min(from, r.most()), max(to, 1)
	}
	if k < 1 || s.from < 1 || down && s.from < s.to || !down && s.from > s.to {
		return nil
	}
	lowP, highP := s.span(r.mostP, r.mostN)
	lowN, highN := s.span(r.mostN, r.mostP)
	spanP, spanN := highP-lowP+1, highN-lowN+1
	gap := highP/spanP + 1
	switch {
	case min(spanP, spanN) > r.scan*gap:
		if !s.byDivisors(r) {
			s.prescalers(lowP, min(highP, lowP+fallbackScan), r.mostN)
		}
	case spanP <= spanN:
		s.prescalers(lowP, highP, r.mostN)
	default:
		s.counts(lowN, highN, r.mostP)
	}
	return s.found
}

// timerSearch collects the products of one search.
type timerSearch struct {
	from, to uint64
	down     bool
	k        int
	found    []product // nearest to from first, distinct
}

// span is the range of the factors up to own that can stand in one of the first k products, the other factor running up to other.
//
//	down:  own factor a >= from/other − k + 1, for ⌊from/other⌋ … ⌊from/other⌋ − k + 1 times other make k products that are greater than those of lesser a
//	up:    a <= from + k − 1, for from … from + k − 1 times 1 make k products that are less than those of greater a
func (s *timerSearch) span(own, other uint64) (low, high uint64) {
	k := uint64(s.k)
	if s.down {
		low = max(1, s.from/other-min(k-1, s.from/other), ceilOf(s.to, other))
		return low, min(own, s.from)
	}
	high = s.from + min(k-1, math.MaxUint64-s.from)
	return ceilOf(s.from, other), min(own, high, s.to)
}

// ceilOf is ⌈x/y⌉ for x >= 1.
func ceilOf(x, y uint64) uint64 { return (x-1)/y + 1 }

// prescalers goes through p, ascending: the first to make a product is the least.
func (s *timerSearch) prescalers(low, high, mostN uint64) {
	for p := low; p <= high && !s.complete(); p++ {
		s.multiples(p, mostN, func(uint64) uint64 { return p })
	}
}

// counts goes through n, descending: the first to make a product goes with the least p.
func (s *timerSearch) counts(low, high, mostP uint64) {
	for n := high; n >= low && !s.complete(); n-- { // low is 1 at least
		s.multiples(n, mostP, func(p uint64) uint64 { return p })
	}
}

// multiples adds a·b with b up to most, nearest first, as long as they are wanted. p tells the prescaler factor by b.
func (s *timerSearch) multiples(a, most uint64, p func(b uint64) uint64) {
	if s.down {
		for b := min(most, s.from/a); b >= 1 && a*b >= s.to && s.add(a*b, p(b)); b-- {
		}
		return
	}
	last := min(most, s.to/a)
	for b := ceilOf(s.from, a); b <= last && s.add(a*b, p(b)); b++ {
	}
}

// byDivisors tries whole numbers one after another. It tells whether it came to the end.
func (s *timerSearch) byDivisors(r *timerRates) bool {
	x := s.from
	for range r.walk * uint64(s.k) {
		if p := r.leastPrescaler(x); p > 0 {
			s.add(x, p)
		}
		if x == s.to || s.full() {
			return true
		}
		if s.down {
			x--
		} else {
			x++
		}
	}
	return false
}

// leastPrescaler is the least p with p·n = x, 0 where the timer does not make x.
func (r *timerRates) leastPrescaler(x uint64) uint64 {
	least, low := uint64(0), ceilOf(x, r.mostN)
	if low == 1 {
		return 1
	}
	for _, d := range divisors(x) {
		if d >= low && d <= r.mostP && (least == 0 || d < least) {
			least = d
		}
	}
	return least
}

func (s *timerSearch) distance(x uint64) uint64 {
	if s.down {
		return s.from - x
	}
	return x - s.from
}

func (s *timerSearch) full() bool { return len(s.found) == s.k }

// complete tells that nothing nearer can come: there are k, and no whole number between them is left out.
func (s *timerSearch) complete() bool {
	return s.full() && s.distance(s.found[s.k-1].x) == uint64(s.k)-1
}

// add puts a product in its place, if it is new and near enough; of equal ones the first stays, whose p is the least by the order in which they
// come. It tells whether one farther away could be wanted.
func (s *timerSearch) add(x, p uint64) bool {
	if s.full() && s.distance(x) > s.distance(s.found[s.k-1].x) {
		return false
	}
	at := sort.Search(len(s.found), func(i int) bool { return s.distance(s.found[i].x) >= s.distance(x) })
	if at < len(s.found) && s.found[at].x == x {
		return true
	}
	if !s.full() {
		s.found = append(s.found, product{})
	}
	copy(s.found[at+1:], s.found[at:])
	s.found[at] = product{x, p}
	return true
}
