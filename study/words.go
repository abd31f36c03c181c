package study

import (
	"context"
	"errors"
	"math"

	"steadytick/internal/lti"
	"steadytick/loop"
	"steadytick/sim"
)

// wordFigures are the figures of the linear loop that follow from the words and the noise of the file.
type wordFigures struct{ effort, output, stuck Figure }

// noiseInputs are the standard deviations of what is added to the measurement: white, and as the difference of white noise over
// the period. A quantizer that is kept busy adds q²/12 (Widrow; IEEE Std 1241; from memory).
func noiseInputs(l *loop.Loop) (white, differenced float64) {
	s := l.Sensor
	scale := 1.0
	if s.Curve != nil {
		scale = steepest(l)
	}
	q := sim.Converter{Bits: s.Bits, Low: s.Range[0], High: s.Range[1], Step: s.Step}.Bin()
	white = scale * math.Hypot(s.Noise, q/math.Sqrt(12))
	for _, d := range l.Disturbances {
		if d.Kind == "noise" && d.At == "sensor" && d.Band == nil {
			white = math.Hypot(white, d.Size)
		}
	}
	if e := s.Encoder; e != nil {
		count := e.Count()
		switch {
		case !e.Velocity:
			white = math.Hypot(white, count/math.Sqrt(12))
		case !e.ByTime:
			differenced = count / math.Sqrt(12)
		}
	}
	return white, differenced
}

// noisy tells whether the file declares anything that makes noise in the measurement.
func noisy(l *loop.Loop) bool {
	white, differenced := noiseInputs(l)
	return white > 0 || differenced > 0
}

// words computes effort_noise, output_noise and stuck_error of a stable sampled loop.
func words(ctx context.Context, l *loop.Loop, a *analyzed) (wordFigures, error) {
	var out wordFigures
	if !a.stable {
		return out, nil
	}
	out.stuck = stuckError(l, a)
	white, differenced := noiseInputs(l)
	if white == 0 && differenced == 0 {
		return out, nil
	}
	in, length := stepRun(l, nil, a)
	cfg, err := sampledConfig(l, a.block, in, length)
	if err != nil {
		return out, err
	}
	effort, output := 0.0, 0.0
	for _, x := range []struct {
		deviation  float64
		difference bool
	}{{white, false}, {differenced, true}} {
		if x.deviation == 0 {
			continue
		}
		g, err := sim.Noise(ctx, cfg, x.difference)
		if errors.Is(err, sim.ErrNoVariance) {
			return out, nil
		}
		if err != nil {
			return out, err
		}
		effort = math.Hypot(effort, g.Effort*x.deviation)
		output = math.Hypot(output, g.Output*x.deviation)
	}
	out.effort, out.output = Fig(effort), Fig(output)
	return out, nil
}

// stuckError is the steady error that the words of the file can hold for ever,
//
//	|y/d|·(half a code of the effort, dead zone, play, static friction) + |y/m|·(half a code of the sensor + |offset| + table error)
//
// the two gains at rest being those of the linear loop from the plant's input and from the measurement to the output; play at
// the output adds half its gap times 1/(1 + L), which an integrator anywhere makes 0. An integrator in the controller makes the first gain 0: then the loop hunts instead.
// Not applicable where the file declares nothing of that kind, or friction that gives no bound.
func stuckError(l *loop.Loop, a *analyzed) Figure {
	s := l.Sensor
	if !quantizes(l) && s.Offset == 0 && s.Curve == nil {
		return Figure{}
	}
	effort, ok := hiddenEffort(l)
	if !ok {
		return Figure{}
	}
	load := 0.0
	if effort > 0 {
		if load, ok = loadGain(a.block.sys.Cm, l); !ok {
			return Figure{}
		}
	}
	scale := 1.0
	measured := 0.0
	if s.Curve != nil {
		scale = steepest(l)
		if table, err := sim.NewCurve(s.Curve.Output, s.Curve.Electric); err == nil {
			measured, _ = table.TableError()
		}
	}
	if s.Encoder == nil || !s.Encoder.Velocity { // a velocity from counts is right in the mean: no count is lost
		measured += sensorBin(l) / 2
	}
	measured += math.Abs(s.Offset) * scale
	h := leadingOf(s.Model.Ratio)
	through := 0.0
	if h.c != nil && h.order == 0 {
		hc, _ := h.c.Float64()
		through = math.Abs(atRestGain(a) / hc)
	}
	total := math.Abs(load)*effort + through*measured
	if b := l.Backlash; b != nil && b.AtOutput {
		total += math.Abs(1-atRestGain(a)) * b.Gap / 2
	}
	return Fig(total)
}

// atRestGain is L/(1 + L) at rest.
func atRestGain(a *analyzed) float64 {
	order, c := lti.Leading(a.block.open)
	lead := c.Float64()
	switch {
	case order < 0:
		return 1
	case order > 0:
		return 0
	}
	return lead / (1 + lead)
}

// addWords fills the figures of words and noise.
func (c *Column) addWords(ctx context.Context, l *loop.Loop, a *analyzed) error {
	w, err := words(ctx, l, a)
	c.EffortNoise, c.OutputNoise, c.StuckError = w.effort, w.output, w.stuck
	return err
}

// requiresWords tells whether a requirement names one of these figures: where none does, a sweep over rates saves them.
func requiresWords(l *loop.Loop) bool {
	for _, r := range l.Requirements {
		if r.Name == "effort_noise" || r.Name == "stuck_error" {
			return true
		}
	}
	return false
}

// declares tells whether the file says what a metric of the hardware comes from; a limit cycle is searched for by compare alone.
func declares(l *loop.Loop, metric string) bool {
	switch metric {
	case "effort_noise":
		return noisy(l)
	case "stuck_error":
		return quantizes(l) || l.Sensor.Offset != 0 || l.Sensor.Curve != nil
	case "limit_cycle":
		return false
	case "recovery_time":
		return l.Actuator.Limits != nil
	}
	return true
}
