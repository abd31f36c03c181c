package loop

import (
	"fmt"
	"math/big"

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

// plant reads the plant with its dead time.
func (r *reader) plant(l *Loop, n *node) {
	if n == nil {
		return
	}
	s, broken := r.section(n, "plant", "model", "dead_time")
	if broken {
		return
	}
	delay, timed := r.seconds(s.get("dead_time"), "dead_time")
	m, ok := r.continuousModel(s.need("model", "model: "+modelForms), "the plant")
	if !ok {
		return
	}
	if timed {
		var err error
		if m, err = m.WithDelay(delay); err != nil {
			r.report(s.keyAt("dead_time"), err.Error(), "")
		}
	}
	l.Plant = m
}

// sensor reads the sensor; without one the model is 1.
func (r *reader) sensor(l *Loop, n *node) {
	l.Sensor.Model = sdomain.Const(big.NewRat(1, 1))
	if n == nil {
		return
	}
	s, broken := r.section(n, "sensor", "model", "bits", "range")
	if broken {
		return
	}
	if m, ok := r.continuousModel(s.get("model"), "the sensor"); ok {
		l.Sensor.Model = m
	}
	r.converter(s, "range", &l.Sensor.Bits, &l.Sensor.Range)
	if s.has("range") && !s.has("bits") {
		r.report(s.keyAt("range"), "range without bits", "bits: of the converter, or no range")
	}
}

// actuator reads what limits the effort.
func (r *reader) actuator(l *Loop, n *node) {
	if n == nil {
		return
	}
	s, broken := r.section(n, "actuator", "limits", "bits", "slew")
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
	n := s.get(key)
	c, ok := r.constants(n, key, 2)
	if !ok {
		return false
	}
	if len(c) != 2 || c[0].Cmp(c[1]) >= 0 {
		r.report(n.at, fmt.Sprintf("%s are not two rising numbers", key), "[low, high] with low < high")
		return false
	}
	span[0], _ = c[0].Float64()
	span[1], _ = c[1].Float64()
	if !(span[0] < span[1]) {
		r.report(n.at, fmt.Sprintf("%s are too close together", key), "[low, high] with low < high")
		return false
	}
	return true
}
