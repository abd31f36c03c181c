package study

import (
	"math"
	"math/cmplx"

	"steadytick/internal/lti"
)

// jitterMargin is the bound on delays that may vary within [0, δ] from tick to tick without
// losing stability,
//
//	δ = 1 / max ω·|T(jω)|,   T = L/(1 + L)
//
// in seconds (Kao and Lincoln, Automatica 40, 2004; from memory). Sampled, ω runs to π/T; continuous, to
// infinity. It is a sufficient condition: a loop may bear more.
func (a *analyzed) jitterMargin() Figure {
	scan := a.scan
	f := func(w float64) float64 {
		l := scan.At(w)
		return w * cmplx.Abs(l/(1+l))
	}
	half := math.Inf(1)
	if a.block.period != nil {
		half = math.Pi / a.seconds()
	}
	grid := frequencyGrid([]*analyzed{a}, 200)
	for len(grid) > 0 && grid[len(grid)-1] >= half {
		grid = grid[:len(grid)-1]
	}
	if !math.IsInf(half, 0) {
		grid = append(grid, half)
	}
	// From above: |T| = |1 − 1/(1+L)| <= 1 + 1/min|1+L|, so that below some ω nothing can exceed the best.
	most := 1 + 1/a.margins.Modulus
	best, at := 0.0, 0
	for i := len(grid) - 1; i >= 0 && !(grid[i]*most < best); i-- {
		if v := f(grid[i]); v > best {
			best, at = v, i
		}
	}
	lo, hi := grid[max(at-1, 0)], grid[min(at+1, len(grid)-1)]
	best = math.Max(best, f(greatestAt(f, lo, hi)))
	if a.block.period == nil {
		best = math.Max(best, slopeAtInfinity(a.block.open))
	}
	if !(best > 0) {
		return Fig(math.Inf(1))
	}
	return Fig(1 / best)
}

// slopeAtInfinity is lim ω·|T(jω)|, ω → ∞, of a continuous loop: the gain of the highest powers for
// a relative degree of 1, infinite for 0.
func slopeAtInfinity(l lti.TF) float64 {
	switch {
	case l.IsZero() || l.RelativeDegree() > 1:
		return 0
	case l.RelativeDegree() < 1:
		return math.Inf(1)
	}
	return l.Num[len(l.Num)-1].Abs().Float64()
}
