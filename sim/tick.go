package sim

import (
	"math"
	"math/big"
)

// act does what is due at an instant.
func (e *engine) act(in *instant) {
	if in.t >= e.change {
		e.turn(in.t)
	}
	if in.tick {
		for i := range e.layout.shaken {
			n := &e.layout.shaken[i]
			e.w[n.column] = n.step()
		}
	}
	for _, i := range in.samples {
		t := &e.tasks[i]
		if t.skip > 0 {
			t.skip--
			continue
		}
		e.sample(i, t, in.t)
	}
	for _, i := range in.updates {
		e.apply(&e.tasks[i])
	}
	for _, k := range in.arrive {
		h := &e.layout.held[k]
		if q := &e.tasks[h.task].efforts; h.next >= 0 && h.next < q.count {
			e.w[h.column] = h.felt(&e.tasks[h.task], q.at(h.next))
		}
		h.next++
	}
}

// felt is what the plant feels of an effort: a dead zone and play take their part.
func (h *held) felt(t *taskState, u float64) float64 {
	if t.Deadband > 0 {
		u = deadband(u, t.Deadband)
	}
	if t.Play > 0 {
		h.stands = play(h.stands, u, t.Play)
		return h.stands
	}
	return u
}

// sample is tick k of task i at the instant now: it is missed, or it reads and computes.
func (e *engine) sample(i int, t *taskState, now float64) {
	k := t.count
	t.count++
	if t.Missed != nil && t.Missed(k) {
		for j := range t.sensors {
			t.sensors[j].pass()
		}
		t.efforts.push(t.effort, e.oldest(i, t))
		return
	}
	period := t.Controller.period
	if t.MeasuredPeriod && t.begun && now > t.sampled {
		period = now - t.sampled
	}
	t.sampled, t.begun = now, true
	if k > 0 && t.Stale != nil && t.Stale(k) {
		copy(t.kept, t.m)
		e.read(t, now, period, k) // the sensor goes on all the same; what it gives is lost
		copy(t.m, t.kept)
	} else {
		e.read(t, now, period, k)
	}
	e.compute(i, t, now, period)
}

// read takes the measurements of sample k.
func (e *engine) read(t *taskState, now, period float64, k int64) {
	if t.sensors == nil {
		for j, p := range t.reads {
			t.m[j] = p.value(e.z)
		}
		if e.kick != nil {
			t.m[0] += e.kick.measured()
		}
		return
	}
	for j, p := range t.reads {
		at := 0.0
		if t.positions[j] != nil {
			at = t.positions[j].value(e.z)
		}
		t.m[j] = t.sensors[j].measure(p.value(e.z), at, now, period, k)
	}
}

// compute is the controller of task i with what it has sampled at t.
func (e *engine) compute(i int, t *taskState, now, period float64) {
	var r float64
	if t.Reference > 0 {
		r = e.tasks[t.Reference-1].held
	} else {
		r = t.reference.at(now)
	}
	v := t.state.effort(r, t.m, period)
	u := t.act.hold(v)
	t.state.advance(v, t.act.last)
	t.effort = u
	if e.kick != nil {
		e.kick.took(u, e.y.value(e.z))
		u += e.kick.given()
		t.effort = u
	}
	t.efforts.push(u, e.oldest(i, t))
	if orZeroSign(t.Delay) == 0 {
		t.held = u // tasks later in the list see it at once
	}
	if e.tail != nil && i == 0 && now >= e.tail.from {
		y := e.y.value(e.z)
		e.tail.tick(u, y, r-y)
	}
	if i == 0 {
		e.ticks.add(&row{t: now, r: r, y: e.y.value(e.z), m: t.m[0], u: u})
	}
}

// oldest is the lowest number of a sample of task i whose effort is still wanted.
func (e *engine) oldest(i int, t *taskState) int64 {
	oldest := t.applied
	for k := range e.layout.held {
		if h := &e.layout.held[k]; h.task == i {
			oldest = min(oldest, h.next)
		}
	}
	return oldest
}

// apply makes the next effort of a task the held one.
func (e *engine) apply(t *taskState) {
	if t.applied >= 0 && t.applied < t.efforts.count {
		t.held = t.efforts.at(t.applied)
		if t == &e.tasks[0] {
			if a := math.Abs(t.held); a > e.effort {
				e.effort = a
			}
		}
	}
	t.applied++
}

func orZeroSign(r *big.Rat) int { return orZero(r).Sign() }
