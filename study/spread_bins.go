package study

import (
	"math"
	"slices"
)

const (
	// binBits: a bin is at most 2^−10 = 0.98e-3 of its distance from the reference wide.
	binBits  = 10
	binsPage = 1 << binBits
	// rankBits: bins of the rank sums are 2^−6 wide; what shares one is a tie.
	rankBits = 6
	rankPage = 1 << rankBits
	// innermost: what lies nearer to the reference than this part of it counts as the reference, for figures are good to about 1e-9.
	innermost = 0x1p-30
)

// bins counts values in bins that are fixed before the first value comes, so that what they hold depends neither on the order of the values
// nor on how they were split among machines. The bin of v is told by
//
//	d = |v − reference|     sign of v − reference, exponent of d, its 10 leading mantissa bits
//
// so that the edges are floats with 42 zero bits, fine at the reference and coarse far from it: a quantile is known to 1e-3 of its distance
// from the reference, which is the nominal figure. Memory is at most some 60 pages of 10 kB for values within 32 times the reference.
type bins struct {
	reference float64
	nearest   float64 // distance that counts as none
	symbols   int
	at        binCell // values at the reference
	pages     map[int]*binPage
}

// binPage holds the bins of one exponent on one side of the reference.
type binPage struct {
	counts [binsPage]int64
	ranks  []binCell // rankPage of them
}

// binCell counts values with the sums of their symbols' grades.
type binCell struct {
	count  int64
	grades []float64
}

func newBins(reference Figure, symbols int) *bins {
	b := &bins{symbols: symbols, pages: map[int]*binPage{}, at: binCell{grades: make([]float64, symbols)}}
	if reference.OK && !math.IsInf(reference.Value, 0) {
		b.reference = reference.Value
		b.nearest = math.Abs(b.reference) * innermost
	}
	return b
}

// side is the number of a page: above the reference 1 + the biased exponent, below it the negative of that.
func side(below bool, exponent int) int {
	if below {
		return -1 - exponent
	}
	return 1 + exponent
}

// add counts a finite value; grades are those of the trial's symbols.
func (b *bins) add(v float64, grades []float64) {
	cell := &b.at
	if d := v - b.reference; math.Abs(d) > b.nearest {
		bits := math.Float64bits(math.Abs(d))
		page := b.page(side(d < 0, int(bits>>52)))
		sub := bits >> (52 - binBits) & (binsPage - 1)
		page.counts[sub]++
		cell = &page.ranks[sub>>(binBits-rankBits)]
	}
	cell.count++
	for i, g := range grades {
		cell.grades[i] += g
	}
}

func (b *bins) page(n int) *binPage {
	p := b.pages[n]
	if p == nil {
		p = &binPage{ranks: make([]binCell, rankPage)}
		for i := range p.ranks {
			p.ranks[i].grades = make([]float64, b.symbols)
		}
		b.pages[n] = p
	}
	return p
}

// ascending are the numbers of the pages by rising value; 0 stands for the reference itself.
func (b *bins) ascending() []int {
	out := []int{0}
	for n := range b.pages {
		out = append(out, n)
	}
	slices.Sort(out) // below the reference the largest distance has the most negative number
	return out
}

// bin is an occupied bin with its edges.
type bin struct {
	low, high float64
	count     int64
}

// each calls f for every occupied bin by rising value.
func (b *bins) each(f func(bin)) {
	for _, n := range b.ascending() {
		if n == 0 {
			if b.at.count > 0 {
				f(bin{b.reference, b.reference, b.at.count})
			}
			continue
		}
		p := b.pages[n]
		for i := range p.counts {
			if n < 0 {
				i = binsPage - 1 - i
			}
			if p.counts[i] > 0 {
				low, high := b.edges(n, i)
				f(bin{low, high, p.counts[i]})
			}
		}
	}
}

// edges are the lower and the upper edge of bin i of a page.
func (b *bins) edges(n, i int) (low, high float64) {
	exponent := uint64(n - 1)
	if n < 0 {
		exponent = uint64(-1 - n)
	}
	inner := exponent<<52 | uint64(i)<<(52-binBits)
	near, far := math.Float64frombits(inner), math.Float64frombits(inner+1<<(52-binBits))
	if math.IsInf(far, 0) {
		far = math.MaxFloat64
	}
	if n < 0 {
		return b.reference - far, b.reference - near
	}
	return b.reference + near, b.reference + far
}

// quantiles gives for each share p, ascending, the value of rank ⌈p·n⌉ of the n counted (the inverse of the empirical distribution
// function), its place within its bin in proportion to the rank, and never beyond the least and the largest value.
func (b *bins) quantiles(shares []float64, n int64, least, largest float64) []Figure {
	out := make([]Figure, len(shares))
	before, next := int64(0), 0
	b.each(func(c bin) {
		for next < len(shares) {
			rank := max(1, int64(math.Ceil(shares[next]*float64(n))))
			if rank > before+c.count {
				break
			}
			part := (float64(rank-before) - 0.5) / float64(c.count)
			v := c.low + (c.high-c.low)*part
			out[next] = Fig(math.Max(least, math.Min(largest, v)))
			next++
		}
		before += c.count
	})
	return out
}

// histogramBars is how many bars a histogram has.
const histogramBars = 24

// histogram puts the bins into bars of equal width from the least to the largest value, each by its middle; nil where the values do not
// differ by more than the bins tell.
func (b *bins) histogram(least, largest float64) *SpreadHistogram {
	width := (largest - least) / histogramBars
	if !(width > b.nearest/histogramBars) || math.IsInf(width, 0) {
		return nil
	}
	h := &SpreadHistogram{From: least, To: largest, Counts: make([]int64, histogramBars)}
	b.each(func(c bin) {
		middle := c.low + (c.high-c.low)/2
		i := int((middle - least) / width)
		h.Counts[max(0, min(histogramBars-1, i))] += c.count
	})
	return h
}
