package study

import (
	"context"
	"fmt"

	"steadytick/loop"
	"steadytick/sdomain"
	"steadytick/sim"
)

// twinConfig is the continuous loop as designed with an input, for length seconds.
func twinConfig(l *loop.Loop, in loop.Input, length float64) (sim.TwinConfig, error) {
	r, d, err := signalOf(in)
	if err != nil {
		return sim.TwinConfig{}, err
	}
	cfg := sim.TwinConfig{
		Plant: l.Plant, Sensor: l.Sensor.Model, Limits: limitsOf(l),
		Reference: r, Disturbance: d, Duration: length,
	}
	cfg.AntiWindup, cfg.TrackingTime = antiWindupOf(l)
	for _, t := range l.Controller.Terms {
		m := t.Parts[0].Continuous
		for _, p := range t.Parts[1:] {
			product, err := m.Mul(*p.Continuous)
			if err != nil {
				return cfg, err
			}
			m = &product
		}
		w, _ := t.Weight.Float64()
		cfg.Terms = append(cfg.Terms, sim.TwinTerm{Model: *m, Weight: w})
	}
	part := func(p *loop.Part) *sdomain.Model {
		if p == nil {
			return nil
		}
		return p.Continuous
	}
	cfg.Prefilter, cfg.Feedforward = part(l.Controller.Prefilter), part(l.Controller.Feedforward)
	return cfg, nil
}

// runTwin simulates the continuous loop and keeps the given instants, evenly spaced ones for nil.
func runTwin(ctx context.Context, l *loop.Loop, in loop.Input, length float64, times []float64) (run, error) {
	cfg, err := twinConfig(l, in, length)
	if err != nil {
		return run{}, err
	}
	cfg.Times = times
	t, err := sim.Twin(ctx, cfg)
	if err != nil {
		return run{}, fmt.Errorf("continuous loop: %w", err)
	}
	return newRun(&sim.Trace{
		T: t.T, R: t.R, Y: t.Y, M: t.M, U: t.U,
		FinalT: t.FinalT, FinalR: t.FinalR, FinalY: t.FinalY, FinalM: t.FinalM, FinalU: t.FinalU,
		PeakError: t.PeakError, PeakErrorTime: t.PeakErrorTime, RMSError: t.RMSError,
		PeakEffort: t.PeakEffort, Diverged: t.Diverged,
	}), nil
}

// twinFigures are the step figures of the continuous loop, and its effort at even instants.
func twinFigures(ctx context.Context, l *loop.Loop, in loop.Input, length float64, spec sim.StepSpec) (sim.Figures, []float64, error) {
	cfg, err := twinConfig(l, in, length)
	if err != nil {
		return sim.Figures{}, nil, err
	}
	cfg.Step = &spec
	t, err := sim.Twin(ctx, cfg)
	if err != nil {
		return sim.Figures{}, nil, fmt.Errorf("continuous loop: %w", err)
	}
	return t.Step, t.U, nil
}
