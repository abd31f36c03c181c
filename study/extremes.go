package study

import "math"

// extremes finds the least and the greatest value of f over the parts, NaN where f is NaN.
// In each part f is interpolated at its Chebyshev instants. Where the last coefficients of the interpolant
// do not show that it holds to confirmed of the range of f, its extreme is confirmed by one value of f, and where
// that is off by more, successive parabolas through values of f take over.
func extremes(parts []*part, f func(*offset) float64) (lo, hi float64) {
	lo, hi = math.Inf(1), math.Inf(-1)
	for _, p := range parts {
		at := func(x float64) float64 { return f(p.at(x)) }
		c := chebyshev(p.nodes, f)
		hi = math.Max(hi, c.peak(at))
		c.flip()
		lo = math.Min(lo, -c.peak(func(x float64) float64 { return -at(x) }))
	}
	return lo, hi
}

// samples are values of a smooth function at the Chebyshev points of [0, 1],
//
//	x_i = (1 − cos(πi/n))/2,   i = 0 … n
type samples struct{ x, y []float64 }

func chebyshevPoint(i, n int) float64 {
	switch i {
	case 0:
		return 0
	case n:
		return 1
	}
	return (1 - math.Cos(math.Pi*float64(i)/float64(n))) / 2
}

// chebyshev samples f at the Chebyshev instants of an interval.
func chebyshev(nodes []*offset, f func(*offset) float64) samples {
	s := samples{make([]float64, len(nodes)), make([]float64, len(nodes))}
	for i, o := range nodes {
		s.x[i], s.y[i] = o.x, f(o)
	}
	return s
}

// tail bounds how far the interpolant may be from f by the last coefficients of its Chebyshev series,
//
//	a_k = (2/n)·Σ'' y_i·cos(πik/n),   k = n−3 … n−1
//
// the first and last term of the sum halved; those left out are smaller still for a function whose coefficients fall
// geometrically, as those of exponentials do. Four times their sum of magnitudes is the bound.
func (s samples) tail() float64 {
	n := len(s.y) - 1
	sum := 0.0
	for k := n - 3; k < n; k++ {
		a := 0.0
		for i, y := range s.y {
			c := y * math.Cos(math.Pi*float64(i*k%(2*n))/float64(n))
			if i == 0 || i == n {
				c /= 2
			}
			a += c
		}
		sum += math.Abs(a) * 2 / float64(n)
	}
	return 4 * sum
}

func (s samples) flip() {
	for i := range s.y {
		s.y[i] = -s.y[i]
	}
}

// value is the interpolant by the barycentric formula for Chebyshev points: weights
// (−1)^i, halved at the ends (Berrut and Trefethen, SIAM Review 46, 2004).
func (s samples) value(x float64) float64 {
	num, den := 0.0, 0.0
	for i, xi := range s.x {
		d := x - xi
		if d == 0 {
			return s.y[i]
		}
		w := 1 / d
		if i%2 == 1 {
			w = -w
		}
		if i == 0 || i == len(s.x)-1 {
			w /= 2
		}
		num, den = num+w*s.y[i], den+w
	}
	return num / den
}

// confirmed is how well the interpolant must hold at its extreme, relative to the range of f: the
// target for ripple is 1e-8.
const confirmed = 1e-10

// peak is the greatest value of the function f that was sampled.
func (s samples) peak(f func(float64) float64) float64 {
	k, low := 0, s.y[0]
	for i, y := range s.y {
		if math.IsNaN(y) {
			return y
		}
		if y > s.y[k] {
			k = i
		}
		low = math.Min(low, y)
	}
	best := s.y[k]
	if best == low || k == 0 || k == len(s.x)-1 {
		return best
	}
	x := greatestAt(s.value, s.x[k-1], s.x[k+1])
	if s.tail() <= confirmed*(best-low) {
		return math.Max(best, s.value(x))
	}
	v := f(x)
	if math.Abs(v-s.value(x)) <= confirmed*(best-low) {
		return math.Max(best, v)
	}
	return math.Max(math.Max(best, v), parabolas(s.x[k-1:k+2], s.y[k-1:k+2], f))
}

// greatestAt is where f is greatest between lo and hi, for one maximum there: steps to the top of the
// parabola through the three best places, golden sections where those do not close in fast enough
// (Brent, Algorithms for Minimization without Derivatives, 1973, chapter 5; from memory). It ends at a place
// known to 4e-10 of the bracket; at a maximum that leaves 1e-18 of the value.
func greatestAt(f func(float64) float64, lo, hi float64) float64 {
	const golden = 0.3819660112501051 // (3 − √5)/2
	tol := 4e-10 * (hi - lo)
	x := lo + golden*(hi-lo)
	w, v := x, x
	fx := f(x)
	fw, fv := fx, fx
	step, before := 0.0, 0.0
	for range 60 {
		middle := (lo + hi) / 2
		if math.Abs(x-middle) <= 2*tol-(hi-lo)/2 {
			break
		}
		p, q := 0.0, 0.0
		if math.Abs(before) > tol { // top of the parabola through x, w, v at x + p/q
			r := (x - w) * (fv - fx)
			q = (x - v) * (fw - fx)
			p = (x-v)*q - (x-w)*r
			q = 2 * (q - r)
			if q > 0 {
				p = -p
			}
			q = math.Abs(q)
		}
		if q != 0 && math.Abs(p) < math.Abs(q*before/2) && p > q*(lo-x) && p < q*(hi-x) {
			step, before = p/q, step
		} else {
			before = hi - x
			if x >= middle {
				before = lo - x
			}
			step = golden * before
		}
		if math.Abs(step) < tol {
			step = math.Copysign(tol, step)
		}
		u := x + step
		fu := f(u)
		switch {
		case fu >= fx:
			if u >= x {
				lo = x
			} else {
				hi = x
			}
			v, fv, w, fw, x, fx = w, fw, x, fx, u, fu
		default:
			if u < x {
				lo = u
			} else {
				hi = u
			}
			if fu >= fw || w == x {
				v, fv, w, fw = w, fw, u, fu
			} else if fu >= fv || v == x || v == w {
				v, fv = u, fu
			}
		}
	}
	return x
}

// parabolas refines the middle one of three points by successive parabolas. A place known to 1e-7 gives
// a value known to 1e-14 of the curve's height.
func parabolas(xs, ys []float64, f func(float64) float64) float64 {
	x, y := [3]float64(xs), [3]float64(ys)
	best := y[1]
	for range 12 {
		d1, d2 := (y[1]-y[0])/(x[1]-x[0]), (y[2]-y[1])/(x[2]-x[1])
		curve := (d2 - d1) / (x[2] - x[0])
		top := (x[0]+x[1])/2 - d1/(2*curve)
		if !(curve < 0) || !(top > x[0] && top < x[2]) || math.Abs(top-x[1]) < 1e-7 {
			return best
		}
		v := f(top)
		best = math.Max(best, v)
		x, y = narrow(x, y, top, v)
	}
	return best
}

// narrow puts the new point into the bracket and keeps the highest in the middle.
func narrow(x, y [3]float64, top, v float64) ([3]float64, [3]float64) {
	if top > x[1] {
		if v > y[1] {
			return [3]float64{x[1], top, x[2]}, [3]float64{y[1], v, y[2]}
		}
		return [3]float64{x[0], x[1], top}, [3]float64{y[0], y[1], v}
	}
	if v > y[1] {
		return [3]float64{x[0], top, x[1]}, [3]float64{y[0], v, y[1]}
	}
	return [3]float64{top, x[1], x[2]}, [3]float64{v, y[1], y[2]}
}
