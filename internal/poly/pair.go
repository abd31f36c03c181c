package poly

import (
	"math"
	"sort"

	"steadytick/internal/dd"
)

// pair makes a set of approximate roots of a real polynomial exactly symmetric:
// every root becomes real or one of two bitwise conjugates, which stand side by
// side, positive imaginary part first. The number of roots does not change.
//
// From the largest imaginary part down, x looks for the free root z nearest to
// its conjugate. If z is nearer to conj(x) than x itself, |z − conj(x)| < 2|Im x|,
// both become their mean, (x + conj(z))/2 and its conjugate; otherwise x is real
// and loses its imaginary part. For separated roots this is never in doubt: the
// one distance is rounding noise, the other is not. For two real roots closer than
// the noise of their cluster it is a choice, and as good as the coefficients allow:
// they come as real roots when their real parts lie further apart than twice
// the larger imaginary part.
//
// moved is the longest way a root was moved, in units of what its error radius
// allows: the set is not that of a real polynomial if it is large.
func pair(x []dd.Complex, radius []float64) (out []dd.Complex, moved float64) {
	idx := make([]int, len(x))
	for i := range idx {
		idx[i] = i
	}
	sort.SliceStable(idx, func(a, b int) bool {
		return math.Abs(x[idx[a]].Im.Hi) > math.Abs(x[idx[b]].Im.Hi)
	})
	used := make([]bool, len(x))
	out = make([]dd.Complex, 0, len(x))
	for _, i := range idx {
		if used[i] {
			continue
		}
		used[i] = true
		best, gap := -1, 2*math.Abs(x[i].Im.Hi)
		for j := range x {
			if used[j] {
				continue
			}
			if d := x[j].Sub(x[i].Conj()).Abs(); d < gap {
				best, gap = j, d
			}
		}
		if best < 0 {
			out = append(out, dd.Real(x[i].Re))
			moved = math.Max(moved, math.Abs(x[i].Im.Hi)/radius[i])
			continue
		}
		used[best] = true
		moved = math.Max(moved, gap/2/math.Max(radius[i], radius[best]))
		m := x[i].Add(x[best].Conj()).Ldexp(-1)
		m.Im = m.Im.Abs()
		out = append(out, m, m.Conj())
	}
	return out, moved
}
