package sim

import "errors"

// Sensor is the way from an output to the number that the firmware computes with. In this order: disturbances
// are added; a curve that is not straight is followed; offset and noise are added; the converter
// quantizes; the firmware's table straightens the curve again. Or an encoder counts: then disturbances, offset and noise are
// added to the position that it counts, or to the velocity that it gives. The zero value passes the output on.
type Sensor struct {
	Disturbances []Signal // in output units
	Random       []Random // in output units, new values at every sample
	Curve        *Curve
	Offset       float64 // offset and noise are what the converter sees: of the curve's units, with a curve
	Noise        float64 // rms, white, a new value at every sample
	Converter    Converter
	Encoder      *Encoder
}

// Random is noise of the given rms; Band is the corner of its first-order spectrum in rad/s, 0 for white.
type Random struct{ RMS, Band float64 }

func (r Random) valid() bool { return r.RMS >= 0 && r.Band >= 0 && finite([]float64{r.RMS, r.Band}) }

var errSensor = errors.New("a sensor with numbers that are not in order")

func (s *Sensor) check(system *Continuous) error {
	ok := s.Converter.valid() && finite([]float64{s.Offset, s.Noise}) && s.Noise >= 0
	for i := range s.Disturbances {
		if err := s.Disturbances[i].check(); err != nil {
			return err
		}
	}
	for _, r := range s.Random {
		ok = ok && r.valid()
	}
	if e := s.Encoder; e != nil {
		ok = ok && e.valid() && e.Output >= 0 && e.Output < system.outputs
	}
	if !ok {
		return errSensor
	}
	return nil
}

// plain tells whether the sensor passes the output on as it is.
func (s *Sensor) plain() bool {
	return len(s.Disturbances) == 0 && len(s.Random) == 0 && s.Curve == nil && s.Offset == 0 && s.Noise == 0 &&
		s.Converter == Converter{} && s.Encoder == nil
}

// sensorState is a sensor while it runs.
type sensorState struct {
	*Sensor
	dice         dice
	disturbances []cursor
	random       []coloured
	encoder      *encoderState
	last         float64 // what it gave last
}

// newSensor: stream tells sensors apart; period is the nominal time between samples.
func newSensor(s *Sensor, seed, stream uint64, period float64) sensorState {
	const apart = 64 // streams of one sensor
	first := streamSensor + stream*apart
	out := sensorState{Sensor: s, dice: newDice(seed, first)}
	for i := range s.Disturbances {
		out.disturbances = append(out.disturbances, cursor{signal: &s.Disturbances[i]})
	}
	for i, r := range s.Random {
		out.random = append(out.random, newColoured(newDice(seed, first+1+uint64(i)), r.RMS, r.Band, period))
	}
	if s.Encoder != nil {
		out.encoder = &encoderState{Encoder: s.Encoder}
	}
	return out
}

// pass is a sample that is not taken: noise with a memory goes on.
func (s *sensorState) pass() {
	for i := range s.random {
		s.random[i].next()
	}
}

// measure is the number that the firmware gets at sample k, at the instant now, when the output is x and
// the position of the encoder, if any, is at; period is what the firmware takes for the time since its last sample.
func (s *sensorState) measure(x, at, now, period float64, k int64) float64 {
	extra := 0.0
	for i := range s.disturbances {
		extra += s.disturbances[i].at(now)
	}
	for i := range s.random {
		extra += s.random[i].next()
	}
	if s.encoder != nil {
		extra += s.Offset
		if s.Noise > 0 {
			extra += s.Noise * s.dice.normal(k)
		}
		if s.Encoder.Velocity {
			s.last = s.encoder.read(at, now, period) + extra
		} else {
			s.last = s.encoder.read(at+extra, now, period)
		}
		return s.last
	}
	x += extra
	if s.Curve != nil {
		x = s.Curve.Electric(x)
	}
	x += s.Offset
	if s.Noise > 0 {
		x += s.Noise * s.dice.normal(k)
	}
	x = s.Converter.Value(x)
	if s.Curve != nil {
		x = s.Curve.Straightened(x)
	}
	s.last = x
	return x
}
