package sim

import "math"

// maxStalled is how many switches are made at one instant before time is made to go on.
const maxStalled = 6

// atOnce is the part of a piece within which an event counts as being at its start.
const atOnce = 1e-9

// change is an event: its function rises through 0 and leads to a new state.
type change struct {
	f  values
	to func(slope float64) state
}

// changes lists what can end the present state over s. With integrators that anti-windup
// stops, stopped is: at a limit and what they would integrate drives further out.
func (w *twin) changes(s *stretch) []change {
	lim := &w.model.limits
	if !lim.On {
		return nil
	}
	stops := len(w.model.integrators) > 0 && w.model.antiWindup != NoAntiWindup
	atHigh := func(slope float64) state { return state{md: high, frozen: stops && slope > 0} }
	atLow := func(slope float64) state { return state{md: low, frozen: stops && slope < 0} }
	free := func(float64) state { return state{} }
	if w.state.md == linear {
		return []change{{plus(s.v, 1, -lim.High), atHigh}, {plus(s.v, -1, lim.Low), atLow}}
	}
	sign, limit, again := 1.0, lim.High, atHigh
	if w.state.md == low {
		sign, limit, again = -1, lim.Low, atLow
	}
	if w.state.slide {
		rise := s.v.slope(w.r)
		pull := plus(s.slope, -sign*s.h, 0)
		for i := range pull {
			pull[i] -= sign * rise[i]
		}
		stay := state{md: w.state.md, frozen: true}
		return []change{{plus(rise, sign, 0), func(float64) state { return stay }}, {pull, free}}
	}
	list := []change{{plus(s.v, -sign, sign*limit), free}}
	if stops {
		turn := -sign
		if !w.state.frozen {
			turn = sign
		}
		list = append(list, change{plus(s.slope, turn, 0), again})
	}
	return list
}

// plus returns k·v + c.
func plus(v values, k, c float64) values {
	for i := range v {
		v[i] = k*v[i] + c
	}
	return v
}

// event finds the first change over s, at the part theta of it.
func (w *twin) event(s *stretch) (theta float64, ev *change) {
	list := w.changes(s)
	theta = math.Inf(1)
	for i := range list {
		// Rounding of the function is not a change: 1e-12 of the span of the limits or of the size.
		size := math.Max(list[i].f.size(), 1e-3*(w.model.limits.High-w.model.limits.Low))
		if th, ok := w.rises(&list[i].f, 1e-12*size); ok && th < theta {
			theta, ev = th, &list[i]
		}
	}
	if w.stalled >= maxStalled && ev != nil && theta <= atOnce {
		return w.r.grid[2], ev
	}
	return theta, ev
}

// rises finds where f first goes from below 0 to above tol.
func (w *twin) rises(f *values, tol float64) (theta float64, ok bool) {
	g := f.onGrid(w.r)
	at := func(x float64) float64 { return f.at(w.r, x) }
	for i := 1; i <= gridPoints; i++ {
		lo, hi := w.r.grid[i-1], w.r.grid[i]
		if g[i] > tol {
			return rootOf(at, lo, hi, math.Min(g[i-1], 0), g[i]), true
		}
		// A top between the points that may reach above.
		if i < gridPoints && g[i] > g[i-1] && g[i] >= g[i+1] && g[i]+(g[i]-math.Min(g[i-1], g[i+1])) > 0 {
			x, top := highest(at, lo, w.r.grid[i+1])
			if top > tol {
				if g[i] > 0 {
					hi = w.r.grid[i]
					return rootOf(at, lo, hi, math.Min(g[i-1], 0), g[i]), true
				}
				return rootOf(at, lo, x, g[i-1], top), true
			}
		}
	}
	return 0, false
}

// highest finds the top of f between a and b by golden section to 1e-9 of b − a, where f is
// flat to 1e-18 of its bend.
func highest(f func(float64) float64, a, b float64) (x, top float64) {
	const ratio = 0.6180339887498949
	c, d := b-ratio*(b-a), a+ratio*(b-a)
	fc, fd := f(c), f(d)
	for range 44 { // 0.618^44 = 6e-10
		if fc > fd {
			b, d, fd = d, c, fc
			c = b - ratio*(b-a)
			fc = f(c)
		} else {
			a, c, fc = c, d, fd
			d = a + ratio*(b-a)
			fd = f(d)
		}
	}
	if fc > fd {
		return c, fc
	}
	return d, fd
}

// enter goes over to the state that ev leads to, at the part theta of s.
//
// Stopping the integrators at a limit can leave the loop neither way to go: with them
// stopped the effort falls back below the limit, with them running it is pushed over it. It then
// stays on the limit, the integrators going on just so fast that it does (the mean of quick
// switching, Filippov). That is known by the switch back at the same instant.
func (w *twin) enter(ev *change, s *stretch, theta float64) {
	from := w.state
	w.state = ev.to(s.slope.at(w.r, theta))
	if w.state.md != linear {
		w.out.limited = true
	}
	w.length = math.Min(w.first, s.h)
	if w.stalled < 2 || w.model.antiWindup != StopOutward {
		return
	}
	switch {
	case from.frozen && !from.slide:
		w.state = state{md: from.md, slide: true}
	case w.state.frozen && !from.slide:
		w.state.frozen, w.state.slide = false, true
	}
}

// hold sets the first integrator so that the computed effort is at the limit, at the end of a
// piece on which it is held there.
func (w *twin) hold(s *stretch, theta float64, cut bool) {
	v := s.v[stages]
	if cut {
		v = s.v.at(w.r, theta)
	}
	limit := w.model.limits.High
	if w.state.md == low {
		limit = w.model.limits.Low
	}
	w.x[w.model.integrators[0]] += limit - v
}

// settle chooses the mode after a jump of the inputs, and at the start, from the effort that the linear
// loop would have now.
func (w *twin) settle() {
	lim := &w.model.limits
	if !lim.On {
		return
	}
	reg := w.regime(state{})
	g := w.exogenous(w.t, w.t, w.first*1e-3)
	q := make([]values, len(w.lags))
	for j, lag := range w.lags {
		q[j][0] = w.past.measurement(w.t-lag, after)
	}
	v := w.value(reg.v, w.x, g, q, 0)
	span := 1e-12 * (lim.High - lim.Low)
	md := linear
	if v > lim.High+span {
		md = high
	} else if v < lim.Low-span {
		md = low
	} else if w.state.md != linear && (math.Abs(v-lim.High) <= span || math.Abs(v-lim.Low) <= span) {
		return
	}
	w.state = state{md: md}
	slope := w.value(w.regime(w.state).slope, w.x, g, q, 0)
	if len(w.model.integrators) > 0 && w.model.antiWindup != NoAntiWindup {
		w.state.frozen = md == high && slope > 0 || md == low && slope < 0
	}
}
