package loop

import (
	"fmt"

	"steadytick/sdomain"
)

// continuousModel reads a model that must be in s or constant.
func (r *reader) continuousModel(n *node, what string) (sdomain.Model, bool) {
	m, ok := r.model(n, what)
	if !ok {
		return sdomain.Model{}, false
	}
	if m.in == sampled {
		r.zUsed = place{}
		r.report(m.at, what+" is in z", "a model in s: only the controller can be digital")
		return sdomain.Model{}, false
	}
	return m.m, true
}

// plant reads the plant with its dead time and its moving parts.
func (r *reader) plant(l *Loop, n *node) {
	if n == nil {
		return
	}
	s, broken := r.section(n, "plant", "model", "dead_time", "friction", "backlash")
	if broken {
		return
	}
	delay, timed := r.seconds(s.get("dead_time"), "dead_time")
	m, ok := r.continuousModel(s.need("model", "model: "+modelForms), "the plant")
	l.Backlash = r.backlash(s.get("backlash"))
	if !ok {
		r.friction(s.get("friction"), s.keyAt("friction"), nil)
		return
	}
	l.Friction = r.friction(s.get("friction"), s.keyAt("friction"), &m)
	if timed {
		var err error
		if m, err = m.WithDelay(delay); err != nil {
			r.report(s.keyAt("dead_time"), err.Error(), "")
		}
	}
	l.Plant = m
}

// actuator reads what limits the effort.
func (r *reader) actuator(l *Loop, n *node) {
	if n == nil {
		return
	}
	s, broken := r.section(n, "actuator", "limits", "bits", "slew", "step", "deadband")
	if broken {
		return
	}
	var limits [2]float64
	if r.converter(s, "limits", &l.Actuator.Bits, &limits) {
		l.Actuator.Limits = &limits
	}
	if n := s.get("slew"); n != nil {
		if v, ok := r.float(n, "slew"); ok && v <= 0 {
			r.report(n.at, "slew is not above zero", fmt.Sprintf("the largest change, in %s per second", l.Effort))
		} else {
			l.Actuator.Slew = v
		}
	}
	s.together("bits", "step")
	s.fill("step", &l.Actuator.Step, r.positive)
	s.fill("deadband", &l.Actuator.Deadband, r.notNegative)
}

// converter reads bits and its range, a list [low, high], under the given key. It
// reports whether the range is there and good.
func (r *reader) converter(s *section, key string, bits *int, span *[2]float64) bool {
	if n := s.get("bits"); n != nil {
		*bits, _ = r.whole(n, "bits", 1, 32)
		if !s.has(key) {
			r.report(s.keyAt("bits"), fmt.Sprintf("bits without %s", key), key+": [low, high], which the codes divide")
		}
	}
	v, ok := r.span(s.get(key), key)
	if ok {
		*span = v
	}
	return ok
}

// span reads two rising numbers. A nil n gives false without a word.
func (r *reader) span(n *node, what string) (span [2]float64, ok bool) {
	c, ok := r.constants(n, what, 2)
	if !ok {
		return span, false
	}
	if len(c) != 2 || c[0].Cmp(c[1]) >= 0 {
		r.report(n.at, fmt.Sprintf("%s are not two rising numbers", what), "[low, high] with low < high")
		return span, false
	}
	span[0], _ = c[0].Float64()
	span[1], _ = c[1].Float64()
	if !(span[0] < span[1]) {
		r.report(n.at, fmt.Sprintf("%s are too close together", what), "[low, high] with low < high")
		return span, false
	}
	return span, true
}
