package study

import (
	"context"
	"math"

	"steadytick/loop"
	"steadytick/sim"
)

const (
	keptPoints = 1000    // of a run, for the charts
	csvPoints  = 1 << 20 // of a run, for --csv: every instant looked at, of which there are 8·10⁵ at most
	// fewPoints are looked at in a tick of a long run: more ticks than denseTicks make up for them.
	fewPoints, somePoints, manyPoints = 2, 8, 40
	denseTicks, sparseTicks           = 400, 20_000
)

// pointsPerTick keeps the number of points of a run between about 10⁴ and 10⁵.
func pointsPerTick(ticks int64) int {
	switch {
	case ticks < denseTicks:
		return manyPoints
	case ticks < sparseTicks:
		return somePoints
	}
	return fewPoints
}

// sampledConfig is the run of a sampled block with an input for about length seconds, with the actuator's limits and slew
// but no other hardware.
func sampledConfig(l *loop.Loop, b *block, in loop.Input, length float64) (sim.Config, error) {
	system, err := sim.NewPlant(l.Plant, l.Sensor.Model)
	if err != nil {
		return sim.Config{}, err
	}
	controller, err := b.controllerOf(l)
	if err != nil {
		return sim.Config{}, err
	}
	r, d, err := signalOf(in)
	if err != nil {
		return sim.Config{}, err
	}
	T, _ := b.period.Float64()
	task := sim.Task{
		Name: "loop", Period: b.period, Delay: b.delay, Controller: controller,
		Reads: []int{sim.OutputM}, Drives: []int{sim.InputEffort},
		Limits: limitsOf(l), Slew: l.Actuator.Slew,
	}
	ticks := int64(math.Max(1, math.Ceil(length/T*(1-1e-12))))
	return sim.Config{
		System: system, Tasks: []sim.Task{task}, Reference: r,
		Disturbances: []sim.Drive{{Input: sim.InputDisturbance, Signal: d}},
		Ticks:        ticks, PointsPerTick: pointsPerTick(ticks), MaxPoints: keptPoints,
	}, nil
}

// simulate runs the variant with an input for about length seconds.
func (v variant) simulate(ctx context.Context, in loop.Input, length float64) (run, error) {
	cfg, err := sampledConfig(v.loop, v.run.block, in, length)
	if v.built {
		cfg, err = builtConfig(v.loop, v.run.block, in, length, v.seed, asDeclared)
	}
	if err != nil {
		return run{}, err
	}
	t, err := sim.Run(ctx, cfg)
	if err != nil {
		return run{}, err
	}
	return newRun(t), nil
}
