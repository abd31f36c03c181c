package study

import (
	"math"
	"math/big"

	"steadytick/loop"
	"steadytick/sim"
)

// quiet says what a run as built leaves out.
type quiet bool

const (
	asDeclared  quiet = false // everything that the file declares
	undisturbed quiet = true  // no noise, no disturbances, regular ticks: only what quantizes or sticks
)

// declaresHardware tells whether the file says more about the hardware than limits and a slew, so that the loop as built
// differs from the sampled one.
func declaresHardware(l *loop.Loop) bool {
	t := l.Timing
	for _, d := range l.Disturbances {
		if d.Kind != "sine" || d.Size != 0 {
			return true
		}
	}
	return quantizes(l) || l.Sensor.Noise > 0 || l.Sensor.Offset != 0 || l.Sensor.Curve != nil ||
		t.Jitter.Sign() > 0 || positive(t.UpdateJitter) || t.Measured != nil || t.Missed != (loop.Chance{}) || t.Stale != (loop.Chance{})
}

// quantizes tells whether something in the loop can hold it off its place for ever: a quantizer, a dead zone, friction or play.
func quantizes(l *loop.Loop) bool {
	return l.Sensor.Bits > 0 || l.Sensor.Step > 0 || l.Sensor.Encoder != nil ||
		l.Actuator.Bits > 0 || l.Actuator.Step > 0 || l.Actuator.Deadband > 0 || l.Friction != nil || l.Backlash != nil
}

// mechanicsFit says why friction or play of the file cannot be simulated, "" where they can: the reader has checked all but this.
func mechanicsFit(l *loop.Loop) string {
	moves := l.Friction != nil || l.Backlash != nil && l.Backlash.AtOutput
	if moves && positive(l.Sensor.Model.Delay) {
		return "friction and play cannot be simulated beside a dead time of the sensor: write it as dead_time of the plant, or as part of conversion"
	}
	return ""
}

func positive(r *big.Rat) bool { return r != nil && r.Sign() > 0 }

// builtConfig is the run of a sampled block with an input for about length seconds on the hardware of the file.
func builtConfig(l *loop.Loop, b *block, in loop.Input, length float64, seed uint64, q quiet) (sim.Config, error) {
	cfg, err := sampledConfig(l, b, in, length)
	if err != nil {
		return cfg, err
	}
	velocity := l.Sensor.Encoder != nil && l.Sensor.Encoder.Velocity
	plant := sim.PlantConfig{Plant: l.Plant, Sensor: l.Sensor.Model, Friction: l.Friction != nil, Position: velocity}
	if f := l.Friction; f != nil {
		plant.Through = f.Through
		cfg.Friction = &sim.Friction{Coulomb: f.Coulomb, Static: f.Static, Viscous: f.Viscous, Velocity: f.Velocity}
	}
	if cfg.System, err = sim.NewPlantWith(plant); err != nil {
		return cfg, err
	}
	cfg.Seed = seed
	cfg.PointsPerTick = min(cfg.PointsPerTick, somePoints)
	task := &cfg.Tasks[0]
	a := l.Actuator
	task.Bits, task.Step, task.Deadband = a.Bits, a.Step, a.Deadband
	if p := l.Backlash; p != nil && p.AtOutput {
		cfg.Play = &sim.Play{Gap: p.Gap}
	} else if p != nil {
		task.Play = p.Gap
	}
	sensor, err := sensorOf(l)
	if err != nil {
		return cfg, err
	}
	if q == asDeclared {
		sensor.Noise = l.Sensor.Noise
		if err := disturb(l, &cfg, &sensor); err != nil {
			return cfg, err
		}
		irregular(l, task, seed)
	}
	task.Sensors = []sim.Sensor{sensor}
	if l.Timing.MeasuredPeriod {
		task.MeasuredPeriod = true
		if task.Controller, err = b.timedController(l); err != nil {
			return cfg, err
		}
	}
	return cfg, nil
}

// sensorOf is the sensor of the file without noise.
func sensorOf(l *loop.Loop) (sim.Sensor, error) {
	s := l.Sensor
	out := sim.Sensor{Offset: s.Offset, Converter: sim.Converter{Bits: s.Bits, Step: s.Step}}
	if s.Bits > 0 {
		out.Converter.Low, out.Converter.High = s.Range[0], s.Range[1]
	}
	if c := s.Curve; c != nil {
		curve, err := sim.NewCurve(c.Output, c.Electric)
		if err != nil {
			return out, err
		}
		out.Curve = curve
	}
	if e := s.Encoder; e != nil {
		out.Encoder = &sim.Encoder{Count: e.Count(), Output: sim.OutputM, Velocity: e.Velocity, ByTime: e.ByTime, Clock: e.Clock}
		if e.Velocity {
			out.Encoder.Output = sim.OutputPosition
		}
	}
	return out, nil
}

// disturb adds the disturbances of the file where they enter.
func disturb(l *loop.Loop, cfg *sim.Config, sensor *sim.Sensor) error {
	inputs := map[string]int{"input": sim.InputDisturbance, "output": sim.InputOutput}
	for _, d := range l.Disturbances {
		if d.Kind == "noise" {
			r := sim.Random{RMS: d.Size}
			if d.Band != nil {
				r.Band, _ = d.Band.Float64()
			}
			if d.At == "sensor" {
				sensor.Random = append(sensor.Random, r)
			} else {
				cfg.Random = append(cfg.Random, sim.RandomDrive{Input: inputs[d.At], Random: r})
			}
			continue
		}
		s, err := disturbanceSignal(d)
		if err != nil {
			return err
		}
		if d.At == "sensor" {
			sensor.Disturbances = append(sensor.Disturbances, s)
		} else {
			cfg.Disturbances = append(cfg.Disturbances, sim.Drive{Input: inputs[d.At], Signal: s})
		}
	}
	return nil
}

func disturbanceSignal(d loop.Disturbance) (sim.Signal, error) {
	switch d.Kind {
	case "sine":
		w, _ := d.Frequency.Float64()
		return sim.Sine(d.Size, w), nil
	case "file":
		return sim.Table(d.Times, d.Values)
	}
	at := 0.0
	if d.Time != nil {
		at, _ = d.Time.Float64()
	}
	if at == 0 {
		return sim.Step(d.Size), nil
	}
	return sim.Table([]float64{0, at, at}, []float64{0, 0, d.Size})
}

// irregular gives the task the ticks of the file: jitter, measured intervals, missed and stale ticks.
func irregular(l *loop.Loop, task *sim.Task, seed uint64) {
	t := l.Timing
	period, _ := t.Period.Float64()
	grid := t.Update == loop.NextTick // the timer applies it, whatever the sample does
	if t.Jitter.Sign() > 0 {
		peak, _ := t.Jitter.Float64()
		task.Jitter, task.UpdateOnGrid = sim.UniformJitter(seed, false, peak), grid
	}
	if m := t.Measured; m != nil {
		at := sim.MeasuredJitter(m.Interval, period)
		task.Jitter = at
		switch {
		case m.Delay != nil:
			task.Delay, task.UpdateShift = new(big.Rat), sim.Repeated(m.Delay)
		case grid:
			task.UpdateOnGrid, task.UpdateShift = true, func(k int64) float64 { return at(k + 1) }
		}
	}
	if positive(t.UpdateJitter) {
		peak, _ := t.UpdateJitter.Float64()
		task.UpdateShift = sim.UniformJitter(seed, true, peak)
	}
	task.Missed = chanceOf(t.Missed).On(seed, false)
	task.Stale = chanceOf(t.Stale).On(seed, true)
}

func chanceOf(c loop.Chance) sim.Chance {
	return sim.Chance{Probability: c.Probability, Every: c.Every}
}

// timedController is the controller of the block for the measured period.
func (b *block) timedController(l *loop.Loop) (*sim.Controller, error) {
	cfg := b.controllerConfig(l)
	timed := &sim.TimedConfig{}
	part := func(p *loop.Part) sim.TimedPart {
		out := sim.TimedPart{Model: *p.Continuous, Ahead: aheadOf(p), Stretch: 1}
		if p.Map.Method == "prewarped" {
			w, _ := p.Map.At.Float64()
			period, _ := b.period.Float64()
			out.Stretch = math.Tan(w*period/2) / (w * period / 2)
		}
		return out
	}
	for _, t := range l.Controller.Terms {
		var list []sim.TimedPart
		for i := range t.Parts {
			list = append(list, part(&t.Parts[i]))
		}
		timed.Terms = append(timed.Terms, list)
	}
	for _, x := range []struct {
		from *loop.Part
		to   **sim.TimedPart
	}{{l.Controller.Prefilter, &timed.Prefilter}, {l.Controller.Feedforward, &timed.Feedforward}} {
		if x.from != nil {
			p := part(x.from)
			*x.to = &p
		}
	}
	cfg.Timed = timed
	return sim.NewController(cfg)
}

// aheadOf is how much of this tick's input a map's integrator has taken up before it is used: see sim.AntiWindup.
func aheadOf(p *loop.Part) float64 {
	if p.Continuous == nil {
		return 0
	}
	switch p.Map.Method {
	case "tustin", "prewarped", "triangle":
		return 0.5
	case "backward":
		return 1
	}
	return 0
}
