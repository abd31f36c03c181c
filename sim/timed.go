package sim

import (
	"errors"

	"steadytick/sdomain"
)

// TimedPart is a continuous model with the rule by which it becomes a difference equation,
//
//	x ← x + h·((1−α)·(A·x + B·in)before + α·(A·x + B·in)now),  h = Stretch·period
//
// Ahead is α: 0 forward difference, ½ trapezoidal rule (tustin), 1 backward difference. Stretch is 1, and
// tan(ωT/2)/(ωT/2) for a trapezoidal rule that is exact at ω with the nominal period T.
type TimedPart struct {
	Model          sdomain.Model
	Ahead, Stretch float64
}

// TimedConfig lists, for each term of a controller, the parts whose product it is.
type TimedConfig struct {
	Terms                  [][]TimedPart
	Prefilter, Feedforward *TimedPart
}

// timedPart is a part prepared: a chain, and integrators taken out of it.
type timedPart struct {
	chain          *chain
	rho            []float64
	ahead, stretch float64
}

type timedController struct {
	terms                  [][]timedPart
	prefilter, feedforward *timedPart
	integrating            int
}

func newTimed(t *TimedConfig, cfg *ControllerConfig) (*timedController, error) {
	if len(t.Terms) != len(cfg.Terms) || (t.Prefilter == nil) != (cfg.Prefilter == nil) || (t.Feedforward == nil) != (cfg.Feedforward == nil) {
		return nil, errors.New("the timed parts are not those of the controller")
	}
	c := &timedController{}
	for _, list := range t.Terms {
		var parts []timedPart
		for i := range list {
			p, err := newTimedPart(&list[i], cfg.AntiWindup != NoAntiWindup)
			if err != nil {
				return nil, err
			}
			if len(p.rho) > 0 {
				c.integrating++
			}
			parts = append(parts, *p)
		}
		c.terms = append(c.terms, parts)
	}
	var err error
	if t.Prefilter != nil {
		if c.prefilter, err = newTimedPart(t.Prefilter, false); err != nil {
			return nil, err
		}
	}
	if t.Feedforward != nil {
		c.feedforward, err = newTimedPart(t.Feedforward, false)
	}
	return c, err
}

func newTimedPart(p *TimedPart, split bool) (*timedPart, error) {
	if !(p.Ahead >= 0 && p.Ahead <= 1) || !(p.Stretch > 0) || !finite([]float64{p.Stretch}) || deadTime(p.Model).Sign() != 0 {
		return nil, errors.New("a timed part needs a share from 0 to 1, a positive stretch, and no dead time")
	}
	g, err := p.Model.TF()
	if err != nil {
		return nil, err
	}
	out := &timedPart{ahead: p.Ahead, stretch: p.Stretch}
	if split {
		out.rho, g = splitIntegrators(g)
	}
	if len(out.rho) == 0 {
		out.chain, err = realizeExact(g, p.Model.Ratio)
	} else {
		out.chain, err = realize(g, nil)
	}
	return out, err
}

// timedState is a part while it runs.
type timedState struct {
	*timedPart
	x, rate  []float64 // states; A·x + B·in at the tick before
	i, iRate []float64 // integrators; what they integrated at the tick before
	then     []float64 // integrators at the tick before
	withheld bool      // the increment of the tick before does not count
	rest     []float64
	solver   *lu // of I − α·h·A
	solved   float64
}

func (p *timedPart) start() timedState {
	n, k := p.chain.n, len(p.rho)
	return timedState{
		timedPart: p, x: make([]float64, n), rate: make([]float64, n), rest: make([]float64, n),
		i: make([]float64, k), iRate: make([]float64, k), then: make([]float64, k),
	}
}

// output is the output for the input in of this tick, period seconds after the one before.
func (s *timedState) output(in, period float64) float64 {
	h := s.stretch * period
	s.states(in, h)
	copy(s.then, s.i)
	for j := len(s.i) - 1; j >= 0; j-- {
		rate := s.rho[j] * in
		if j+1 < len(s.i) {
			rate += s.i[j+1]
		}
		if !s.withheld || s.ahead > 0 {
			s.i[j] += h * ((1-s.ahead)*s.iRate[j] + s.ahead*rate)
		}
		s.iRate[j] = rate
	}
	s.withheld = false
	out := s.chain.output(s.x, in)
	if len(s.i) > 0 {
		out += s.i[0]
	}
	return out
}

// states carries the states without the integrators to this tick.
func (s *timedState) states(in, h float64) {
	n := s.chain.n
	if n == 0 {
		return
	}
	for i := range s.rest {
		s.rest[i] = s.x[i] + h*((1-s.ahead)*s.rate[i]+s.ahead*s.chain.b[i]*in)
	}
	if s.ahead > 0 {
		s.solve(s.ahead * h)
	}
	copy(s.x, s.rest)
	for i := range s.rate {
		s.rate[i] = s.chain.rate(i, s.x, in)
	}
}

// solve overwrites rest with (I − g·A)⁻¹·rest. A singular matrix, a period that meets a pole on the right, leaves it.
func (s *timedState) solve(g float64) {
	n := s.chain.n
	if s.solver == nil || s.solved != g {
		m := make([]float64, n*n)
		for i := range n {
			for j := range n {
				m[i*n+j] = -g * s.chain.a[i*n+j]
			}
			m[i*n+i]++
		}
		f, ok := factor(m, n)
		if !ok {
			return
		}
		s.solver, s.solved = f, g
	}
	s.solver.solve(s.rest)
}

// timedRun is a controller that runs on the measured period.
type timedRun struct {
	*Controller
	terms                  [][]timedState
	prefilter, feedforward *timedState
	gain                   float64 // of back-calculation, for a period of 1 s
	period                 float64
	slope                  float64
}

func (t *timedController) start(c *Controller) *timedRun {
	r := &timedRun{Controller: c}
	for _, list := range t.terms {
		var parts []timedState
		for i := range list {
			parts = append(parts, list[i].start())
		}
		r.terms = append(r.terms, parts)
	}
	if t.prefilter != nil {
		s := t.prefilter.start()
		r.prefilter = &s
	}
	if t.feedforward != nil {
		s := t.feedforward.start()
		r.feedforward = &s
	}
	r.gain = c.trackGain / c.period
	return r
}

func (r *timedRun) effort(ref float64, m []float64, period float64) float64 {
	r.period, r.slope = period, 0
	v := 0.0
	if r.feedforward != nil {
		v = r.feedforward.output(ref, period)
	}
	if r.prefilter != nil {
		ref = r.prefilter.output(ref, period)
	}
	for k := range r.terms {
		signal := r.weights[k]*ref - m[r.reads[k]]
		for j := range r.terms[k] {
			s := &r.terms[k][j]
			signal = s.output(signal, period)
			if len(s.i) == 0 {
				continue
			}
			r.slope += s.iRate[0]
			if r.antiWindup == Clamp {
				signal += s.clamp(r.low, r.high)
			}
		}
		v += signal
	}
	return v
}

// clamp keeps the integrators within their bounds and returns what that changes in the output.
func (s *timedState) clamp(low, high float64) float64 {
	before := s.i[0]
	for j := range s.i {
		if s.i[j] < low {
			s.i[j] = low
		} else if s.i[j] > high {
			s.i[j] = high
		}
	}
	return s.i[0] - before
}

func (r *timedRun) advance(v, u float64) {
	outward := v > u && r.slope > 0 || v < u && r.slope < 0
	for k := range r.terms {
		for j := range r.terms[k] {
			s := &r.terms[k][j]
			if len(s.i) == 0 {
				continue
			}
			switch {
			case r.antiWindup == Tracking:
				s.i[0] += r.gain * r.period * (u - v)
				if outward && s.ahead > 0 {
					copy(s.i[1:], s.then[1:])
				}
			case r.antiWindup == StopOutward && outward, r.antiWindup == Stop && v != u:
				if s.withheld = true; s.ahead > 0 {
					copy(s.i, s.then)
				}
			}
		}
	}
}
