package sim

// blockState is a block of a controller while it runs.
type blockState struct {
	*block
	x, dx []float64
	carry []float64 // what rounding dropped from x, see advance.apply
	i, ic []float64 // integrators, i[0] goes to the output, and what rounding dropped
	queue []float64 // inputs on their way, when the block has a delay
	head  int
	in    float64 // input of this tick, after the delay
	// Of a single integrator: its value as used at this tick and at the one before.
	used, before float64
}

func (b *block) start() blockState {
	return blockState{
		block: b,
		x:     make([]float64, b.chain.n), dx: make([]float64, b.chain.n),
		carry: make([]float64, b.chain.n),
		i:     make([]float64, len(b.rho)), ic: make([]float64, len(b.rho)), queue: make([]float64, b.ticks),
	}
}

// output is the output at this tick for the input e of this tick.
func (s *blockState) output(e float64) float64 {
	if len(s.queue) > 0 {
		e, s.queue[s.head] = s.queue[s.head], e
		if s.head++; s.head == len(s.queue) {
			s.head = 0
		}
	}
	s.in = e
	sum := s.chain.output(s.x, e)
	if len(s.i) > 0 {
		sum += s.i[0]
	}
	return sum
}

// next carries the states without the integrators to the next tick,
//
//	x ← x + T·(A·x + B·in)
func (s *blockState) next(period float64) {
	for i := range s.dx {
		s.dx[i] = period * s.chain.rate(i, s.x, s.in)
	}
	accumulate(s.x, s.carry, s.dx)
	for i, v := range s.x {
		s.x[i] = settled(v)
	}
}

// settled is v, or 0 where it has died out: numbers below the normal ones are slow, a hundredfold on common processors.
func settled(v float64) float64 {
	if v < 1e-290 && v > -1e-290 {
		return 0
	}
	return v
}

// slope is what the last integrator integrates, per second.
func (s *blockState) slope() float64 {
	switch len(s.i) {
	case 0:
		return 0
	case 1:
		return s.rho[0] * s.in
	}
	return s.rho[0]*s.in + s.i[1]
}

// integrate carries the integrators to the next tick,
//
//	i[j] ← i[j] + T·(ρ[j]·in + i[j+1])
//
// extra is added to the last one; with hold, the increments of the integrators in front of it stay away.
func (s *blockState) integrate(period, extra float64, hold bool) {
	for j := range s.i {
		up := 0.0
		if j+1 < len(s.i) {
			up = s.i[j+1]
		}
		if !hold || j == 0 {
			accumulate(s.i[j:j+1], s.ic[j:], []float64{period * (s.rho[j]*s.in + up)})
		}
	}
	if len(s.i) > 0 && extra != 0 {
		accumulate(s.i[:1], s.ic, []float64{extra})
	}
}

// undo is integrate at a tick whose increment does not count. A single integrator goes back to its value
// at the tick before, and takes from this tick's input only what the next tick would use of it.
func (s *blockState) undo(period float64) {
	if len(s.i) != 1 || s.ahead == 0 {
		return // nothing of this tick's input is in it yet
	}
	s.used = s.before
	s.i[0], s.ic[0] = s.before+(period*s.rho[0]-s.ahead)*s.in, 0
}

// clamp keeps each integrator, as used at this tick, within low and high, and returns what that changes in the output.
func (s *blockState) clamp(low, high float64) float64 {
	change := 0.0
	for j := range s.i {
		ahead := 0.0
		if j == 0 {
			ahead = s.ahead * s.in
		}
		used := s.i[j] + ahead
		kept := used
		if kept < low {
			kept = low
		} else if kept > high {
			kept = high
		}
		if kept != used {
			s.i[j], s.ic[j] = kept-ahead, 0
			if j == 0 {
				change = kept - used
			}
		}
	}
	return change
}

// controllerState is a controller while it runs.
type controllerState struct {
	*Controller
	terms                  []blockState
	prefilter, feedforward *blockState
}

// start is the controller at rest; measured asks for the one that takes the measured period.
func (c *Controller) start(measured bool) stepper {
	if measured && c.timed != nil {
		return c.timed.start(c)
	}
	return c.fixed()
}

func (c *Controller) fixed() *controllerState {
	s := &controllerState{Controller: c, terms: make([]blockState, len(c.terms))}
	for i := range c.terms {
		s.terms[i] = c.terms[i].start()
	}
	if c.prefilter != nil {
		b := c.prefilter.start()
		s.prefilter = &b
	}
	if c.feedforward != nil {
		b := c.feedforward.start()
		s.feedforward = &b
	}
	return s
}

// stepper is a controller while it runs: at each tick effort and then advance.
type stepper interface {
	// effort returns the computed effort v of this tick, before any limit; period is the time since the tick before.
	effort(r float64, m []float64, period float64) float64
	// advance goes on to the next tick, knowing the computed effort v and the held one u.
	advance(v, u float64)
}

func (s *controllerState) effort(r float64, m []float64, _ float64) float64 {
	v := 0.0
	if s.feedforward != nil {
		v = s.feedforward.output(r)
		s.feedforward.next(s.period)
	}
	if s.prefilter != nil {
		in := r
		r = s.prefilter.output(in)
		s.prefilter.next(s.period)
	}
	for k := range s.terms {
		t := &s.terms[k]
		v += t.output(s.weights[k]*r - m[s.reads[k]])
		if s.antiWindup == Clamp {
			v += t.clamp(s.low, s.high)
		}
	}
	return v
}

func (s *controllerState) advance(v, u float64) {
	slope := 0.0
	if s.antiWindup == StopOutward || s.antiWindup == Tracking {
		for k := range s.terms {
			slope += s.terms[k].slope()
		}
	}
	outward := v > u && slope > 0 || v < u && slope < 0
	for k := range s.terms {
		t := &s.terms[k]
		t.next(s.period)
		if len(t.i) == 1 {
			t.used = t.i[0] + t.ahead*t.in
		}
		switch s.antiWindup {
		case StopOutward, Stop:
			if outward || s.antiWindup == Stop && v != u {
				t.undo(s.period)
			} else {
				t.integrate(s.period, 0, false)
			}
		case Tracking:
			t.integrate(s.period, s.trackGain*(u-v), outward)
		case Clamp:
			t.integrate(s.period, 0, false)
		}
		t.before = t.used
	}
}
