package study

import "math"

// gradeSums are sums over the trials that have a figure.
type gradeSums struct{ sum, square float64 }

func (s *gradeSums) add(g float64) { s.sum += g; s.square += g * g }

// rankCorrelation is the correlation between the ranks of the values and the grade of symbol i over the same trials:
//
//	ρ = Σ_b (R_b − R̄)·(S_b − n_b·ḡ) / √(Σ_b n_b·(R_b − R̄)² · Σ (g − ḡ)²)
//
// with n_b values and the sum S_b of their grades in bin b, R_b the middle of its ranks and R̄ = (n + 1)/2. This is Spearman's
// coefficient (C. Spearman, "The proof and measurement of association between two things", American Journal of Psychology 15, 1904;
// from memory) with the symbol's rank taken from its distribution in place of the sample, which n trials tell apart by about 1/n, and with
// values nearer to each other than 1/64 of their distance from the reference as ties. Not OK where one of the two does not vary.
func (b *bins) rankCorrelation(i int, n int64, g gradeSums) Figure {
	if n < 2 {
		return Figure{}
	}
	mean := g.sum / float64(n)
	middle := (float64(n) + 1) / 2
	before := 0.0
	cross, spread := 0.0, 0.0
	take := func(c *binCell) {
		if c.count == 0 {
			return
		}
		k := float64(c.count)
		rank := before + (k+1)/2 - middle
		cross += rank * (c.grades[i] - k*mean)
		spread += k * rank * rank
		before += k
	}
	for _, page := range b.ascending() {
		if page == 0 {
			take(&b.at)
			continue
		}
		cells := b.pages[page].ranks
		for k := range cells {
			if page < 0 {
				k = rankPage - 1 - k
			}
			take(&cells[k])
		}
	}
	grades := g.square - g.sum*mean
	if !(spread > 0) || !(grades > 1e-12*g.square) { // grades that are all alike leave a rounding
		return Figure{}
	}
	return Fig(math.Max(-1, math.Min(1, cross/math.Sqrt(spread*grades))))
}
