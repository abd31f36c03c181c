package sim

import "math"

// twinOut takes the pieces of the continuous loop and keeps what is asked for.
type twinOut struct {
	r                    *radau
	cfg                  *TwinConfig
	plantDelay, allDelay float64
	y, m, u              []float64
	sum                  errorSum
	effort               float64
	limited              bool // the effort was at a limit
	find                 *finder
	lastY, lastM, lastU  float64
}

func newTwinOut(w *twin) *twinOut {
	o := &twinOut{r: w.r, cfg: w.cfg}
	o.plantDelay, _ = w.model.plantDelay.Float64()
	o.allDelay, _ = w.model.allDelays.Float64()
	if s := w.cfg.Step; s != nil && s.applies() {
		o.find = newFinder(s.Band)
	}
	o.rest()
	return o
}

// rest is the time before the output can move: the error is the reference.
func (o *twinOut) rest() {
	for _, t := range o.cfg.Times {
		if t < o.plantDelay {
			o.y = append(o.y, 0)
		}
		if t < o.allDelay {
			o.m = append(o.m, 0)
		}
	}
	end := math.Min(o.plantDelay, o.cfg.Duration)
	r := &o.cfg.Reference
	step := end
	if r.w > 0 {
		step = math.Max(1/r.w, end/1e5)
	}
	cuts := append(r.Breakpoints(), end)
	for i, a := range cuts[:len(cuts)-1] {
		b := math.Min(cuts[i+1], end)
		n := math.Ceil((b - a) / step)
		for k := 0.0; k < n; k++ {
			from, to := a+(b-a)*k/n, a+(b-a)*(k+1)/n
			o.errors(&piece{t: from - o.plantDelay, h: to - from, end: to - o.plantDelay})
		}
	}
	if len(r.Breakpoints()) == 0 {
		o.sum.time += end
	}
}

// take uses a piece; ok is false when a signal is too large.
func (o *twinOut) take(p *piece) (ok bool) {
	if !(p.y.size() < tooLarge && p.m.size() < tooLarge && p.u.size() < tooLarge) {
		return false
	}
	final := p.end >= o.cfg.Duration
	emit := func(list *[]float64, v *values, delay float64) {
		for len(*list) < len(o.cfg.Times) {
			t := o.cfg.Times[len(*list)] - delay
			if !(t < p.end || final) {
				break
			}
			*list = append(*list, v.at(o.r, math.Min((t-p.t)/p.h, (p.end-p.t)/p.h)))
		}
	}
	from := len(o.u)
	emit(&o.y, &p.y, o.plantDelay)
	emit(&o.m, &p.m, o.allDelay)
	emit(&o.u, &p.u, 0)
	if l := o.cfg.Limits; l.On {
		for i := from; i < len(o.u); i++ {
			o.u[i] = l.clip(o.u[i]) // interpolation rounds
		}
	}
	o.errors(p)
	o.efforts(p)
	o.figures(p)
	o.ends(p)
	return true
}

// ends keeps the values at the end of the run.
func (o *twinOut) ends(p *piece) {
	at := func(v *values, delay float64) (float64, bool) {
		t := o.cfg.Duration - delay
		if !(t >= p.t && (t <= p.end || p.end >= o.cfg.Duration)) {
			return 0, false
		}
		return v.at(o.r, (t-p.t)/p.h), true
	}
	if v, ok := at(&p.y, o.plantDelay); ok {
		o.lastY = v
	}
	if v, ok := at(&p.m, o.allDelay); ok {
		o.lastM = v
	}
	if v, ok := at(&p.u, 0); ok {
		o.lastU = o.cfg.Limits.clip(v)
	}
}

// portion is the part of a piece of length h that is used; all of it where rounding of the instants
// says a little less or more.
func portion(used, h float64) float64 {
	if c := used / h; math.Abs(c-1) > nearEnd {
		return c
	}
	return 1
}

// errors adds the tracking error of a piece, whose output appears later by the dead time
// of the plant: ∫e² by Gauss's rule, exact for the polynomials that they are, and the peak.
func (o *twinOut) errors(p *piece) {
	from := p.t + o.plantDelay
	to := math.Min(p.end+o.plantDelay, o.cfg.Duration)
	if !(to > from) {
		return
	}
	r := &o.cfg.Reference
	k := -1
	if r.w == 0 && len(r.starts) > 0 {
		k = r.piece(math.Max(0, from+(to-from)/2))
	}
	reference := func(c float64) float64 {
		t := from + c*p.h
		if k >= 0 {
			return r.inPiece(k, t)
		}
		return r.At(math.Max(t, 0))
	}
	part := portion(to-from, p.h)
	sum := 0.0
	for i, x := range o.r.gaussX {
		y := 0.0
		if part == 1 {
			y = p.y.weighted(&o.r.gaussAt[i])
		} else {
			y = p.y.at(o.r, x*part)
		}
		e := reference(x*part) - y
		sum += o.r.gaussW[i] * e * e
	}
	o.sum.add(sum * (to - from))
	o.sum.time += to - from
	c, v := o.peak(&p.y, part, o.sum.peak, func(c, y float64) float64 { return math.Abs(reference(c) - y) })
	o.sum.look(from+c*p.h, v)
}

// peak finds the highest value of f(c, v(c)) for c in [0, part] if it is above floor; else something
// lower.
func (o *twinOut) peak(v *values, part, floor float64, f func(c, v float64) float64) (c, top float64) {
	g := v.onGrid(o.r)
	for i, x := range o.r.grid {
		if part != 1 {
			g[i] = v.at(o.r, x*part)
		}
		g[i] = f(x*part, g[i])
		if g[i] > top {
			c, top = x*part, g[i]
		}
	}
	at := func(c float64) float64 { return f(c, v.at(o.r, c)) }
	for i := 1; i < gridPoints; i++ {
		if g[i] >= g[i-1] && g[i] >= g[i+1] && 2*g[i]-math.Min(g[i-1], g[i+1]) > math.Max(floor, top) {
			if x, v := highest(at, o.r.grid[i-1]*part, o.r.grid[i+1]*part); v > top {
				c, top = x, v
			}
		}
	}
	return c, top
}

func (o *twinOut) efforts(p *piece) {
	part := portion(p.end-p.t, p.h)
	_, v := o.peak(&p.u, part, o.effort, func(_, u float64) float64 { return math.Abs(u) })
	if l := o.cfg.Limits; l.On {
		v = math.Min(v, math.Max(math.Abs(l.Low), math.Abs(l.High)))
	}
	o.effort = math.Max(o.effort, v)
}

// figures feeds the finder with the piece between the points of the grid.
func (o *twinOut) figures(p *piece) {
	if o.find == nil {
		return
	}
	from, to := p.t+o.plantDelay, math.Min(p.end+o.plantDelay, o.cfg.Duration)
	if !(to > from) {
		return
	}
	final := o.cfg.Step.Final
	slope := p.y.slope(o.r)
	part := portion(to-from, p.h)
	value := func(c float64) (v, d float64) {
		return p.y.at(o.r, c) / final, slope.at(o.r, c) / p.h / final
	}
	v0, d0 := value(0)
	for i := 1; i <= gridPoints; i++ {
		a, b := o.r.grid[i-1]*part, o.r.grid[i]*part
		v1, d1 := value(b)
		o.find.add(span01{t: from + a*p.h, h: (b - a) * p.h, v0: v0, d0: d0, v1: v1, d1: d1,
			at: func(th float64) (float64, float64) { return value(a + th/p.h) }})
		v0, d0 = v1, d1
	}
}

// trace ends the run.
func (o *twinOut) trace(diverged bool, pieces int) *TwinTrace {
	n := min(len(o.y), len(o.m), len(o.u))
	t := &TwinTrace{
		T: append([]float64(nil), o.cfg.Times[:n]...), Y: o.y[:n], M: o.m[:n], U: o.u[:n],
		PeakError: o.sum.peak, PeakErrorTime: o.sum.peakTime, RMSError: o.sum.rms(),
		PeakEffort: o.effort, Diverged: diverged, Pieces: pieces,
		FinalT: o.cfg.Duration, FinalY: o.lastY, FinalM: o.lastM, FinalU: o.lastU,
	}
	t.FinalR = o.cfg.Reference.At(t.FinalT)
	for _, at := range t.T {
		t.R = append(t.R, o.cfg.Reference.At(at))
	}
	if diverged {
		t.FinalT, t.FinalR, t.FinalY, t.FinalM, t.FinalU = 0, 0, 0, 0, 0
		if n > 0 {
			t.FinalT, t.FinalR, t.FinalY, t.FinalM, t.FinalU = t.T[n-1], t.R[n-1], t.Y[n-1], t.M[n-1], t.U[n-1]
		}
	} else if o.find != nil {
		t.Step = o.find.figures(o.effort, o.cfg.Limits.On, o.limited)
	}
	return t
}
