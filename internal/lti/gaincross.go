package lti

import (
	"math"
	"sort"
)

// gainCrossings returns every ν with |L(jν)| = 1, ascending. The axis is cut at the
// corners; between them the search of isolate.go is certain. Below the lowest corner
// and above the highest, where log|L| is a straight line of slope k in log ν up to the
// N factors' bend, the line is solved.
//
// An L with |L| = 1 everywhere (unitGain) has none.
func (p *plane) gainCrossings() []float64 {
	if p.unitGain() {
		return nil
	}
	p.evals = searchBudget
	near := curve{at: p.gain, bend: p.gainBend}
	out := p.search(near, p.e, p.lowEnd(), p.corners())
	far := curve{at: p.farGain, bend: p.farGainBend}
	end := 1 / (4 * float64(p.count()) * p.large)
	tail := p.search(far, -p.slope(), end, []float64{1 / p.farStart()})
	for _, mu := range tail {
		if mu > 0 {
			out = append(out, 1/mu)
		}
	}
	sort.Float64s(out)
	return out
}

// count is the number of factors, 1 at least.
func (p *plane) count() int { return max(len(p.factors), 1) }

// lowEnd is ν0 = small/(4N): up to it N corners bend log|L| by
//
//	N·ν0/(small − ν0) <= 1/3
//
// in all, so that with an integrator or differentiator (|e| >= 1) it is monotone.
func (p *plane) lowEnd() float64 { return p.small / (4 * float64(p.count())) }

// farStart is where the far side begins: μ·|p| <= 1/2 there.
func (p *plane) farStart() float64 { return 2 * p.large }

// corners are the cuts of the near side from lowEnd to farStart.
func (p *plane) corners() []float64 {
	out := []float64{p.lowEnd(), p.farStart()}
	for _, f := range p.factors {
		out = append(out, f.mod, math.Abs(f.b))
	}
	sort.Float64s(out)
	kept := out[:0]
	for _, v := range out {
		if v >= p.lowEnd() && (len(kept) == 0 || v > kept[len(kept)-1]) {
			kept = append(kept, v)
		}
	}
	return kept
}

// search finds the crossings of |L| = 1 from 0 to the last cut; end is where the
// straight part ends, |L| ~ t^k below it.
func (p *plane) search(c curve, k int, end float64, cuts []float64) []float64 {
	var out []float64
	if k == 0 {
		out = c.crossings(0, end, &p.evals)
	} else if t, ok := straight(c, k, end); ok {
		out = append(out, t)
	}
	from := end
	for _, cut := range cuts {
		if cut > from {
			out = append(out, c.crossings(from, cut, &p.evals)...)
			from = cut
		}
	}
	p.exhausted = p.exhausted || p.evals <= 0
	return out
}

// straight solves f = 0 below end where f is k·log t but for a bend of at most 1/3.
func straight(c curve, k int, end float64) (float64, bool) {
	f, _ := c.at(end)
	if f == 0 || f > 0 != (k > 0) {
		return 0, false
	}
	guess := end * math.Exp(-f/float64(k))
	lo, hi := guess/1.5, math.Min(guess*1.5, end)
	if !(lo > 0) {
		return 0, false
	}
	return c.solve(lo, hi, 0, k > 0), true
}

// unitGain tells whether |L| is 1 at every frequency, an all-pass: at nine places
// spread over the corners log|L| is zero to its rounding.
func (p *plane) unitGain() bool {
	if p.e != 0 || p.slope() != 0 {
		return false
	}
	for _, nu := range p.probes() {
		if f, _ := p.gain(nu); !(math.Abs(f) <= touching) {
			return false
		}
	}
	return true
}

// probes are places for telling an identity from a crossing.
func (p *plane) probes() []float64 {
	out := make([]float64, 9)
	lo, hi := p.small/16, 16*p.large
	for i := range out {
		out[i] = lo * math.Pow(hi/lo, (float64(i)+0.37)/9)
	}
	return out
}
