package lti

import (
	"math"
	"math/cmplx"
	"sort"
)

// Bandwidth returns the lowest ω, in rad/s, at which |t| has fallen by 3 dB, exactly to
// 1/√2 of dc = |t(0)|; +Inf when it does not fall so far up to limit (π/T, or +Inf:
// then up to 1000 times the highest mark). marks are poles and zeros of t as s in
// rad/s: between them the response is smooth on the scale of their distance from the
// axis, and the grid is as fine there, so that no narrow dip is missed. dc must be
// above 0. The result is good to the last digits of t.
func Bandwidth(t func(w float64) complex128, dc float64, marks []complex128, limit float64) float64 {
	level := dc / math.Sqrt2
	return firstBelow(func(w float64) float64 { return cmplx.Abs(t(w)) - level }, responseGrid(marks, limit))
}

// firstBelow is where f first falls below 0 on an ascending grid, dips between its points
// included; +Inf when it does not.
func firstBelow(f func(w float64) float64, grid []float64) float64 {
	before, last := 0.0, 0.0 // the two values before this one
	for i, w := range grid {
		v := f(w)
		if v < 0 {
			if i == 0 {
				return fall(f, 0, w)
			}
			return fall(f, grid[i-1], w)
		}
		if i >= 2 && last <= before && last <= v {
			if bottom, ok := dip(f, grid[i-2], grid[i]); ok {
				return fall(f, grid[i-2], bottom)
			}
		}
		before, last = last, v
	}
	return math.Inf(1)
}

// gridPerOctave gives 6 points an octave: without a mark nearby |t| follows a power of ω.
const gridPerOctave = 6

// responseGrid is ascending: octaves from a hundredth of the lowest mark, and beside
// each mark the steps of its own half-width.
func responseGrid(marks []complex128, limit float64) []float64 {
	low, high := math.Inf(1), 0.0
	for _, m := range marks {
		if r := cmplx.Abs(m); r > 0 && !math.IsInf(r, 1) {
			low, high = math.Min(low, r), math.Max(high, r)
		}
	}
	if high == 0 {
		low, high = 1, 1
		if !math.IsInf(limit, 1) {
			low, high = limit/100, limit
		}
	}
	low, high = math.Min(low, limit)/100, math.Min(high*1000, limit)
	points := math.Min(gridPerOctave*math.Log2(high/low), 4000)
	grid := make([]float64, 0, int(points)+1+11*len(marks))
	for i := 0.0; i <= points; i++ {
		grid = append(grid, low*math.Pow(high/low, i/points))
	}
	for _, m := range marks {
		width := math.Abs(real(m))
		for _, d := range [...]float64{-4, -2, -1, -0.5, -0.25, 0, 0.25, 0.5, 1, 2, 4} {
			if w := math.Abs(imag(m)) + d*width; w > low && w < high {
				grid = append(grid, w)
			}
		}
	}
	sort.Float64s(grid)
	return grid
}

// fall finds the sign change of f between lo (f >= 0) and hi (f < 0) by bisection and
// secants in turn; 120 steps exhaust the float64 numbers between.
func fall(f func(float64) float64, lo, hi float64) float64 {
	b := f(hi)
	a, known := 0.0, false
	for i := range 120 {
		w := lo + (hi-lo)/2
		if known && i%2 == 1 {
			if s := (lo*b - hi*a) / (b - a); s > lo && s < hi {
				w = s
			}
		}
		if !(w > lo && w < hi) {
			break
		}
		if v := f(w); v < 0 {
			hi, b = w, v
		} else {
			lo, a, known = w, v, true
		}
	}
	return hi
}

// dip looks for f < 0 between lo and hi, f with one minimum there, by golden section.
func dip(f func(float64) float64, lo, hi float64) (float64, bool) {
	g := (math.Sqrt(5) - 1) / 2
	x, y := hi-g*(hi-lo), lo+g*(hi-lo)
	fx, fy := f(x), f(y)
	for range 60 {
		switch {
		case fx < 0:
			return x, true
		case fy < 0:
			return y, true
		case hi-lo <= 1e-9*hi:
			return 0, false
		case fx < fy:
			hi, y, fy = y, x, fx
			x = hi - g*(hi-lo)
			fx = f(x)
		default:
			lo, x, fx = x, y, fy
			y = lo + g*(hi-lo)
			fy = f(y)
		}
	}
	return 0, false
}

// Bandwidth returns the bandwidth of the response from r to y, given the closed-loop
// poles; false when |T(0)| is 0 or not finite. Errors as for TF.Scan.
func (s System) Bandwidth(poles Poles) (w float64, ok bool, err error) {
	dc := ResponseSeries(s, 1)[0].Abs().Float64()
	if !(dc > 0 && !math.IsInf(dc, 1)) {
		return 0, false, nil
	}
	scan, err := s.Scan()
	if err != nil {
		return 0, false, err
	}
	limit := math.Inf(1)
	if T := s.Gy.Period.Float64(); T > 0 {
		limit = math.Pi / T
	}
	marks := append([]complex128(nil), poles.Equivalent...)
	for _, g := range []*Scan{scan.cr, scan.gy} {
		marks = append(marks, g.marks()...)
	}
	grid := responseGrid(marks, limit)
	level := dc / math.Sqrt2
	loop := s.Loop()
	delay := loop.DeadTime.Float64() + loop.Period.Float64()*float64(loop.Ticks)
	grid = withComb(grid, delay, func(w float64) bool { return scan.least(w) < combSlack*level })
	return firstBelow(func(w float64) float64 { return cmplx.Abs(scan.Tracking(w)) - level }, grid), true, nil
}

// least is the smallest |T| near ω for any phase of the loop, |Cr·Gy|/(1 + |L|): how low the dips of a
// long delay can reach.
func (s *SystemScan) least(w float64) float64 {
	return cmplx.Abs(s.cr.At(w)*s.gy.At(w)) / (1 + cmplx.Abs(s.Loop(w)))
}

const (
	// combSlack allows for the change of the envelope between two points of the grid, whose marks keep
	// it to less.
	combSlack = 1.25
	// combPoints are taken in each turn of the delay; combMost in all (some 50 ms).
	combPoints = 16
	combMost   = 200_000
)

// withComb adds points between those of the grid where a long delay turns |T| up and down faster than the
// grid follows and a dip can reach the level: from the low end until combMost are used up.
func withComb(grid []float64, delay float64, reaches func(w float64) bool) []float64 {
	if !(delay > 0) || len(grid) == 0 {
		return grid
	}
	step := 2 * math.Pi / (combPoints * delay)
	out := grid[:1:1]
	left := combMost
	below := reaches(grid[0])
	for i, w := range grid[1:] {
		from := grid[i]
		next := reaches(w)
		if n := int(math.Min((w-from)/step, combMost)); (below || next) && n > 1 && n <= left {
			left -= n
			for k := 1; k < n; k++ {
				out = append(out, from+(w-from)*float64(k)/float64(n))
			}
		}
		out, below = append(out, w), next
	}
	return out
}

// marks are zeros and poles as places along the axis in rad/s: a root a + jb in w shows at
// ν = |b| with the half-width |a|.
func (s *Scan) marks() []complex128 {
	if s.p == nil {
		return nil
	}
	var out []complex128
	for _, f := range s.p.factors {
		b := math.Abs(f.b)
		w := s.p.omega(b)
		width := math.Ldexp(math.Abs(f.a)/s.p.stretch(b), s.p.scale)
		out = append(out, complex(-width, w))
	}
	return out
}
