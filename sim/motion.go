package sim

import "math"

// turn sets the driven columns for the instant t.
func (e *engine) turn(t float64) {
	e.change = math.Inf(1)
	for i := range e.layout.driven {
		d := &e.layout.driven[i]
		d.start(t, e.w)
		e.change = math.Min(e.change, d.change)
	}
}

// propagate goes from t to end, h seconds, p being the prepared step of h or nil.
func (e *engine) propagate(p *advance, t, h float64) error {
	end := t + h
	// A change of piece within a rounding of the end waits for the next step.
	const near = 1e-12
	for last := end - near*h; e.change < last; p = nil {
		if c := e.change; c > t {
			if err := e.free(nil, t, c-t); err != nil {
				return err
			}
			t = c
			h = end - t
		}
		e.turn(t)
	}
	if err := e.free(p, t, h); err != nil {
		return err
	}
	for i := range e.layout.driven {
		if d := &e.layout.driven[i]; d.width > 1 {
			d.start(end, e.w)
		}
	}
	return nil
}

// free propagates over h seconds without a change of the inputs.
func (e *engine) free(p *advance, t, h float64) error {
	if e.parts != nil {
		return e.parts.free(t, h, p != nil)
	}
	return e.stretch(p, t, h)
}

// stretch propagates over h seconds in one linear system.
func (e *engine) stretch(p *advance, t, h float64) error {
	e.begin()
	if err := e.move(p, h); err != nil {
		return err
	}
	e.end(t, h)
	return nil
}

// begin and end tell those who follow the run within stretches.
func (e *engine) begin() {
	if e.watch != nil {
		e.watch.before(e)
	}
	for i := range e.marks {
		e.marks[i].before(e)
	}
}

func (e *engine) end(t, h float64) {
	if e.watch != nil {
		e.watch.after(e, t, h)
	}
	for i := range e.marks {
		e.marks[i].after(e, t, h)
	}
}

// move carries the state over h seconds.
func (e *engine) move(p *advance, h float64) error {
	if p == nil {
		return e.flow.advanceBy(e.z, e.carry, h)
	}
	p.apply(e.z, e.carry, e.dx)
	if e.followed {
		e.flow.turn(e.w, h)
	}
	return nil
}

// prepared is the step of the part of the present interval in the present system; nil without whole or
// where none is prepared.
func (e *engine) prepared(whole bool) (*advance, error) {
	in := e.current
	if !whole || in == nil || in.part == nil {
		return nil, nil
	}
	if p, ok := in.laws[e.parts.now]; ok {
		return p, nil
	}
	p, err := e.cfg.System.step(e.flow, e.key, in.part)
	if err != nil {
		return nil, err
	}
	if in.laws == nil {
		in.laws = map[*law]*advance{}
	}
	in.laws[e.parts.now] = p
	return p, nil
}

// look records the point at t and returns the tracking error.
func (e *engine) look(t float64) (err float64, ok bool) {
	p := row{t: t, r: e.r.at(t), y: e.y.value(e.z), u: e.tasks[0].held}
	p.m = p.y
	if e.m != e.y {
		p.m = e.m.value(e.z)
	}
	if !(math.Abs(p.y)+math.Abs(p.m)+math.Abs(p.u)+math.Abs(p.r) < tooLarge) {
		return 0, false
	}
	e.points.add(&p)
	e.kick.look(p.y)
	err = p.r - p.y
	if e.tail != nil && t >= e.tail.from {
		e.tail.look(p.y, err)
	}
	if math.Abs(err) > e.sum.peak {
		e.sum.look(t, err)
	}
	return err, true
}

// span propagates over the interval after an instant whose tracking error is err; ok is false when a
// signal is too large.
func (e *engine) span(in *instant, err float64) (ok bool, fault error) {
	e.current = in
	h := in.length / float64(in.parts)
	sum := in.weights[0] * err * err
	for j := 1; j <= in.parts; j++ {
		from := in.t + float64(j-1)*h
		if fault = e.propagate(in.step, from, h); fault != nil {
			return false, fault
		}
		if j < in.parts {
			if err, ok = e.look(in.t + float64(j)*h); !ok {
				return false, nil
			}
		} else {
			t := in.t + in.length
			err = e.r.at(t) - e.y.value(e.z)
			if !(math.Abs(err) < tooLarge) {
				return false, nil
			}
			if e.y.direct {
				e.sum.look(t, err)
			}
		}
		sum += in.weights[j] * err * err
	}
	e.sum.add(sum)
	e.sum.time += in.length
	return true, nil
}
