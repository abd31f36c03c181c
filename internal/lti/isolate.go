package lti

import "math"

// curve is a smooth function of one variable with a bound on its bend, to be
// searched for the points where it meets the levels base + k·step (k any integer;
// only base when step is 0).
type curve struct {
	at         func(t float64) (f, df float64)
	bend       func(lo, hi float64) float64 // of |f''|
	base, step float64
	skip       func(lo, hi float64) bool // intervals not worth searching; nil: none
}

// first returns the lowest level at or above v; false when there is none.
func (c curve) first(v float64) (float64, bool) {
	if c.step == 0 {
		return c.base, v <= c.base
	}
	return c.base + c.step*math.Ceil((v-c.base)/c.step), true
}

// maxHalvings stops at intervals of 2^-60 of a first one: there the two ends are
// the same float64 for all purposes.
const maxHalvings = 60

type span struct {
	lo, hi float64
	depth  int
}

// crossings returns, in ascending order, every t in [lo, hi] where the curve meets
// a level. With m the middle of an interval of half-width h and M the bound on f”
//
//	|f(t) − f(m)| <= |f'(m)|·h + M·h²/2
//
// excludes intervals without a level, and |f'(m)| > M·h makes f monotone, so
// that the ends tell all (of up to 256 levels); everything else is halved. Where the curve
// stays within 1e-12 of a level, at a tangent or over a band, it only touches: a single
// level (|L| = 1) then yields one point for the whole stretch, or none when it begins at t = 0 and
// the level is only the limit at rest; repeated ones (phase) none,
// rounding being all that could tell where to put it.
// The search stops when *budget evaluations are used up.
func (c curve) crossings(lo, hi float64, budget *int) []float64 {
	var out []float64
	touched := math.Inf(-1) // end of the last stretch that touches
	stack := []span{{lo, hi, 0}}
	for len(stack) > 0 && *budget > 0 && len(out) < maxLevels {
		s := stack[len(stack)-1]
		stack = stack[:len(stack)-1]
		if !(s.lo < s.hi) || c.skip != nil && c.skip(s.lo, s.hi) {
			continue
		}
		*budget--
		m := middle(s.lo, s.hi)
		h := math.Max(m-s.lo, s.hi-m)
		f, df := c.at(m)
		bend := c.bend(s.lo, s.hi)
		reach := math.Abs(df)*h + bend*h*h/2
		level, ok := c.first(f - reach)
		switch {
		case !ok || level > f+reach:
		case math.Abs(df) > bend*h && (reach < 256*c.step || c.step == 0):
			*budget -= 2
			out = c.monotone(s.lo, s.hi, out)
		case reach <= touching || s.depth >= maxHalvings || !(s.lo < m && m < s.hi):
			near, ok := c.first(f - touching)
			if ok && near <= f+touching && c.step == 0 && s.lo > touched && s.lo > 0 {
				out = append(out, m)
			}
			touched = s.hi
		default:
			stack = append(stack, span{m, s.hi, s.depth + 1}, span{s.lo, m, s.depth + 1})
		}
	}
	return out
}

// touching is how near a curve that does not cross must come to a level: log|L| and
// phase are sums of some 20 terms of up to about 30, so good to 1e-13.
const touching = 1e-12

// middle halves an interval: by ratio when it spans more than a factor of 4.
func middle(lo, hi float64) float64 {
	if lo > 0 && hi > 4*lo {
		return math.Sqrt(lo) * math.Sqrt(hi)
	}
	return lo + (hi-lo)/2
}

// monotone appends the levels met in [lo, hi), f monotone there. A level exactly at an
// end belongs to the upper side, so that neighbours do not both claim it.
func (c curve) monotone(lo, hi float64, out []float64) []float64 {
	fl, _ := c.at(lo)
	fh, _ := c.at(hi)
	low, high := math.Min(fl, fh), math.Max(fl, fh)
	start := len(out)
	k := 0.0
	if c.step != 0 {
		k = math.Floor((low-c.base)/c.step) - 1 // one early: the quotient is rounded
	}
	for range maxLevels {
		level := c.base + k*c.step
		if level > high {
			break
		}
		if level > low { // in (low, high], always by the same number for a level
			out = append(out, c.solve(lo, hi, level, fl < level))
		}
		if c.step == 0 {
			break
		}
		k++
	}
	if fh < fl {
		for i, j := start, len(out)-1; i < j; i, j = i+1, j-1 {
			out[i], out[j] = out[j], out[i]
		}
	}
	return out
}

// maxLevels bounds the crossings of one search.
const maxLevels = 20000

// solve finds the level in [lo, hi] by Newton's method, held in a bracket by
// bisection; rising tells that f is below the level at lo. 80 steps are enough for
// bisection alone to exhaust the 53 bits.
func (c curve) solve(lo, hi, level float64, rising bool) float64 {
	t := middle(lo, hi)
	for range 80 {
		f, df := c.at(t)
		if f == level {
			return t
		}
		if f < level == rising {
			lo = t
		} else {
			hi = t
		}
		next := t - (f-level)/df
		if !(next > lo && next < hi) {
			next = middle(lo, hi)
		}
		if math.Abs(next-t) <= 0x1p-53*math.Abs(t) || !(lo < hi) {
			return next
		}
		t = next
	}
	return t
}
