package study

import (
	"fmt"
	"math"
	"math/big"
	"math/cmplx"

	"steadytick/loop"
	"steadytick/sim"
)

const (
	// settledAfter: the slowest mode has fallen to e^−6 = 0.25 % when a run ends.
	settledAfter = 6
	// stepLonger: the step figures look this many times longer, e^−12, so that a slow tail settles in view.
	stepLonger = 2
	// mostTicksRun bounds a run, mostTicksStep the run for the step figures (about a second of work); a
	// loop that needs more ticks to settle is run as far as that, and a warning says so.
	mostTicksRun  = 400_000
	mostTicksStep = 4_000_000
	// fewestTicksRun shows the staircase even of a loop that settles at once.
	fewestTicksRun = 12
)

// signalOf is the reference and the disturbance that an input puts on the loop.
func signalOf(in loop.Input) (r, d sim.Signal, err error) {
	r, d = sim.Zero(), sim.Zero()
	switch in.Kind {
	case "step":
		r = sim.Step(in.Size)
	case "ramp":
		r = sim.Ramp(in.Size)
	case "parabola":
		r = sim.Parabola(in.Size)
	case "sine":
		w, _ := in.Frequency.Float64()
		r = sim.Sine(in.Size, w)
	case "move":
		r, err = sim.Move(in.Move.Distance, in.Move.Velocity, in.Move.Acceleration, in.Move.Jerk)
	case "file":
		r, err = sim.Table(in.Times, in.Values)
	case "load_step":
		d = sim.Step(in.Size)
	default:
		err = fmt.Errorf("input kind %q has no signal", in.Kind)
	}
	return r, d, err
}

// horizon is how long a loop should be simulated for an input, seconds: until the slowest
// mode of the columns that are stable has died out, several periods of a sine, and the
// whole of a move or file with the settling after it.
func horizon(l *loop.Loop, in loop.Input, columns ...*analyzed) float64 {
	decay := 0.0
	for _, a := range columns {
		if a != nil && a.stable {
			decay = math.Max(decay, a.slowest())
		}
	}
	if decay == 0 { // nothing is stable: show a few swings of the fastest growth
		for _, a := range columns {
			if a != nil && len(a.poles.Equivalent) > 0 {
				decay = math.Max(decay, 1/math.Max(cmplx.Abs(a.poles.Equivalent[0]), 1e-9))
			}
		}
	}
	T, _ := l.Timing.Period.Float64()
	delay, _ := new(big.Rat).Add(l.Plant.Delay, l.Timing.LoopDelay()).Float64()
	length := settledAfter*decay + 2*delay
	switch in.Kind {
	case "sine":
		w, _ := in.Frequency.Float64()
		length = math.Max(length, 3*2*math.Pi/w)
	case "move", "file":
		if r, _, err := signalOf(in); err == nil {
			length = r.Duration() + length/2
		}
	}
	return math.Max(length, fewestTicksRun*T)
}

// cut bounds the length of a run by a number of ticks.
func cut(l *loop.Loop, length, mostTicks float64) float64 {
	T, _ := l.Timing.Period.Float64()
	return math.Min(length, mostTicks*T)
}

// warnCut tells that runs end before the loop has settled.
func (c *Compare) warnCut(l *loop.Loop, in loop.Input, columns ...*analyzed) {
	length := horizon(l, in, columns...)
	if shown := cut(l, length, mostTicksRun); shown < length*(1-1e-9) {
		c.warn("run_cut", "%s: the simulation ends after %d ticks (%.4g s), long before the loop has settled (%.4g s): its peak, rms and curves cover that time only; a lower rate would do for so slow a loop",
			inputTitle(l, in), mostTicksRun, shown, length)
	}
}

// slowest is the time constant of the slowest closed-loop mode, seconds.
func (a *analyzed) slowest() float64 {
	slow := 0.0
	for _, p := range a.poles.Equivalent {
		if real(p) < 0 && !math.IsInf(real(p), 0) {
			slow = math.Max(slow, -1/real(p))
		}
	}
	return slow
}

// controllerOf builds the difference equations of a sampled block.
func (b *block) controllerOf(l *loop.Loop) (*sim.Controller, error) {
	cfg := sim.ControllerConfig{Period: b.period, Prefilter: b.prefilter, Feedforward: b.feedforward}
	for _, t := range b.terms {
		w, _ := t.weight.Float64()
		cfg.Terms = append(cfg.Terms, sim.Term{Model: t.model, Weight: w})
	}
	cfg.AntiWindup, cfg.TrackingTime = antiWindupOf(l)
	return sim.NewController(cfg)
}

func antiWindupOf(l *loop.Loop) (sim.AntiWindup, float64) {
	switch l.Controller.AntiWindup.Kind {
	case "stop_outward":
		return sim.Clamp, 0
	case "tracking":
		t, _ := l.Controller.AntiWindup.TrackingTime.Float64()
		return sim.Tracking, t
	}
	return sim.NoAntiWindup, 0
}

func limitsOf(l *loop.Loop) sim.Limits {
	if l.Actuator.Limits == nil {
		return sim.Limits{}
	}
	return sim.Limits{On: true, Low: l.Actuator.Limits[0], High: l.Actuator.Limits[1]}
}
