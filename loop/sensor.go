package loop

import (
	"math/big"

	"steadytick/sdomain"
)

// sensor reads the sensor; without one the model is 1.
func (r *reader) sensor(l *Loop, n *node) {
	l.Sensor.Model = sdomain.Const(big.NewRat(1, 1))
	if n == nil {
		return
	}
	s, broken := r.section(n, "sensor", "model", "bits", "range", "step", "noise", "offset", "encoder", "curve")
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
	s.together("bits", "step", "encoder")
	s.together("encoder", "curve")
	s.fill("step", &l.Sensor.Step, r.positive)
	s.fill("noise", &l.Sensor.Noise, r.notNegative)
	s.fill("offset", &l.Sensor.Offset, r.float)
	l.Sensor.Encoder = r.encoder(l, s.get("encoder"))
	l.Sensor.Curve = r.curve(s.get("curve"))
}
