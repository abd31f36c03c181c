package sim

import (
	"context"
	"math"
)

// plain tells whether the run is of one task on a linear plant with an ideal sensor, on regular ticks and without
// disturbances: the loop in its usual form. runPlain follows it with the operations of act, look and span
// in their order, so that both give the same bits, at a third of the time.
func (e *engine) plain() bool {
	if e.general || len(e.tasks) != 1 || e.parts != nil || e.watch != nil || e.kick != nil || e.followed || e.tail != nil ||
		len(e.layout.driven) > 0 || len(e.layout.shaken) > 0 || e.y.direct || e.m.direct {
		return false
	}
	t := &e.tasks[0]
	_, regular := e.line.(*cycle)
	state, fixed := t.state.(*controllerState)
	return regular && fixed && t.sensors == nil && t.Missed == nil && t.Stale == nil && t.Deadband == 0 && t.Play == 0 &&
		!t.MeasuredPeriod && t.Reference == 0 && len(t.reads) == 1 && state.prefilter == nil && state.feedforward == nil
}

// plainRun is what runPlain keeps at hand.
type plainRun struct {
	*engine
	task     *taskState
	state    *controllerState
	line     *cycle
	constant bool // the reference is level from the start on
	level    float64
	same     bool    // m is y
	y        float64 // the output now
	square   float64 // ∫e²dt since it was last handed on
	time     float64
	first    []firstOrder // the controller, when it is of such blocks without anti-windup; else nil
	simple   bool         // the actuator has limits at most
}

// runPlain is run for a plain engine.
func (e *engine) runPlain(ctx context.Context) (diverged bool, err error) {
	p := &plainRun{engine: e, task: &e.tasks[0], line: e.line.(*cycle), same: e.m == e.y}
	p.state = p.task.state.(*controllerState)
	p.constant, p.level = e.cfg.Reference.level()
	p.y = e.y.value(e.z)
	p.first = firstOrders(p.state)
	p.simple = p.task.Bits == 0 && p.task.Step == 0 && math.IsInf(p.task.act.rise, 1)
	length := float64(e.cfg.Ticks) * p.task.Controller.period
	for {
		if err := ctx.Err(); err != nil {
			return false, err
		}
		if e.cfg.Progress != nil {
			e.cfg.Progress(math.Min(1, p.line.now()/length))
		}
		going, ok := p.stretch(checkEvery)
		e.sum.add(p.square)
		e.sum.time += p.time
		p.square, p.time = 0, 0
		if !going {
			return !ok, nil
		}
	}
}

// at is the reference.
func (p *plainRun) at(t float64) float64 {
	if p.constant {
		return p.level
	}
	return p.r.at(t)
}

// stretch goes through n instants with the intervals after them; going is false at the end of the run, ok when that is
// not because a signal is too large.
func (p *plainRun) stretch(n int) (going, ok bool) {
	z, output, list := p.z, p.engine.y.row, p.line.list
	few := len(p.carry) <= 4
	y := p.y
	for ; n > 0; n-- {
		in := &list[p.line.at]
		turn, index := p.line.turn, p.line.at
		last := p.line.turn == p.line.end && p.line.at == p.line.endAt
		if p.line.at++; p.line.at == len(list) {
			p.line.at = 0
			p.line.turn++
		}
		r, t := p.level, 0.0 // the instant is not worked out where nothing needs it
		if !p.constant || last || in.parts > 1 {
			t = p.line.instant(turn, index)
			r = p.at(t)
		}
		if len(in.samples) > 0 {
			if u, taken := p.sample(r, y); taken && (last || !p.ticks.dull(y, u, r-y)) {
				p.ticks.add(&row{t: p.line.instant(turn, index), r: r, y: y, m: p.task.m[0], u: u})
			}
		}
		if len(in.updates) > 0 {
			p.apply(p.task)
		}
		for _, k := range in.arrive {
			h := &p.layout.held[k]
			if q := &p.task.efforts; h.next >= 0 && h.next < q.count {
				p.w[h.column] = q.at(h.next)
			}
			h.next++
		}
		miss := r - y
		if last || !p.points.dull(y, p.task.held, miss) { // a dull error is no new peak
			if !p.point(p.line.instant(turn, index), r, y, last) {
				return false, false
			}
			if last {
				return false, true
			}
		}
		sum := in.weights[0] * miss * miss
		if in.parts > 1 {
			if sum, ok = p.parts(in, t, sum); !ok {
				return false, false
			}
			y = p.y
		} else {
			if few {
				in.step.applyFour(z, p.carry)
			} else {
				in.step.apply(z, p.carry, p.dx)
			}
			y = along(output, z)
			if !p.constant {
				r = p.r.at(t + in.length)
			}
			miss = r - y
			sum += in.weights[1] * miss * miss
		}
		p.square += sum
		p.time += in.length
	}
	p.y = y
	return true, true
}

// sample is the tick of the task, when it is taken; u is its effort.
func (p *plainRun) sample(r, y float64) (u float64, taken bool) {
	k := p.task
	if k.skip > 0 {
		k.skip--
		return 0, false
	}
	m := y
	if !p.same {
		m = along(p.m.row, p.z)
	}
	k.m[0] = m
	v, u := p.compute(r, m)
	if p.state.antiWindup != NoAntiWindup {
		p.state.advance(v, k.act.last)
	}
	k.effort = u
	k.count++
	k.efforts.push(u, p.oldest(0, k))
	if k.Delay == nil || k.Delay.Sign() == 0 {
		k.held = u
	}
	return u, true
}

// parts is the interval after an instant at t in several parts.
func (p *plainRun) parts(in *instant, t, sum float64) (float64, bool) {
	h := in.length / float64(in.parts)
	for j := 1; j <= in.parts; j++ {
		in.step.apply(p.z, p.carry, p.dx)
		p.y = along(p.engine.y.row, p.z)
		at := t + in.length
		if j < in.parts {
			at = t + float64(j)*h
		}
		r := p.at(at)
		miss := r - p.y
		if j < in.parts && !p.points.dull(p.y, p.task.held, miss) && !p.point(at, r, p.y, false) {
			return sum, false
		}
		sum += in.weights[j] * miss * miss
	}
	return sum, true
}

// point looks at the signals at an instant that is kept, is extreme in its group, or has the largest error so far, so
// that a signal that grows without bound comes here; ok is false when one is too large.
func (p *plainRun) point(t, r, y float64, last bool) (ok bool) {
	u := p.task.held
	if !(math.Abs(y)+math.Abs(u)+math.Abs(r) < tooLarge) {
		return false
	}
	miss := r - y
	if last || !p.points.dull(y, u, miss) {
		m := y
		if !p.same {
			m = along(p.m.row, p.z)
		}
		p.points.add(&row{t: t, r: r, y: y, m: m, u: u})
	}
	if a := math.Abs(miss); a > p.sum.peak {
		p.sum.peak, p.sum.peakTime = a, t
	}
	return true
}

// firstOrder is a block of the controller with one state or none.
type firstOrder struct{ weight, a, b, c, d, period, x, carry float64 }

// firstOrders is the controller at rest, nil when it has other blocks, delays or anti-windup.
func firstOrders(s *controllerState) []firstOrder {
	if s.antiWindup != NoAntiWindup {
		return nil
	}
	var out []firstOrder
	for k := range s.terms {
		b := s.terms[k].chain
		f := firstOrder{weight: s.weights[k], d: b.d, period: s.period}
		if b.n > 1 || len(s.terms[k].queue) > 0 {
			return nil
		}
		if b.n == 1 {
			f.a, f.b, f.c = b.a[0], b.b[0], b.c[0]
		}
		out = append(out, f)
	}
	return out
}

// compute is the controller, without anti-windup taken along to the next tick, and the actuator.
func (p *plainRun) compute(r, m float64) (v, u float64) {
	for k := range p.first {
		b := &p.first[k]
		in := b.weight*r - m
		v += b.d*in + b.c*b.x
		x, dropped := exactSum(b.x, b.period*(b.b*in+b.a*b.x)+b.carry)
		b.x, b.carry = settled(x), dropped
	}
	if p.first == nil {
		p.task.m[0] = m
		v = p.state.effort(r, p.task.m, 0)
		if p.state.antiWindup == NoAntiWindup {
			p.state.advance(v, v)
		}
	}
	if p.simple {
		p.task.act.last = p.task.act.limits.clip(v)
		return v, p.task.act.last
	}
	return v, p.task.act.hold(v)
}

// along is row·z, the row being as short as its last entry that counts.
func along(row, z []float64) float64 {
	sum := 0.0
	z = z[:len(row)]
	for i, c := range row {
		sum += c * z[i]
	}
	return sum
}

// level is the value of a signal that is one constant from the start on.
func (s *Signal) level() (constant bool, value float64) {
	if s.w > 0 || len(s.starts) > 1 {
		return false, 0
	}
	if len(s.starts) == 0 {
		return true, 0
	}
	c := s.coef[0]
	return c[1] == 0 && c[2] == 0 && c[3] == 0, c[0]
}
