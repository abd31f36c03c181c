package study

import (
	"context"
	"errors"
	"slices"

	"steadytick/loop"
	"steadytick/sim"
)

// addedError is what sampling and delay add to the tracking error: y of the continuous
// loop less y of each variant, at the instants of the variant. The continuous loop is
// computed at all of them in one run, so nothing is interpolated.
func addedError(ctx context.Context, l *loop.Loop, in loop.Input, runs []outcome) ([]Curve, error) {
	var times []float64
	for _, x := range runs {
		if x.run.trace != nil {
			times = append(times, x.run.trace.T...)
		}
	}
	if len(times) == 0 {
		return nil, nil
	}
	slices.Sort(times)
	times = slices.Compact(times)
	end := times[len(times)-1]
	cfg, err := twinConfig(l, in, end)
	if err != nil || !(end > 0) {
		return nil, err
	}
	cfg.Times = times
	twin, err := sim.Twin(ctx, cfg)
	if errors.Is(err, sim.ErrTwinLength) {
		return nil, nil // a warning says that the continuous loop could not be simulated
	}
	if err != nil {
		return nil, err
	}
	var out []Curve
	for _, x := range runs {
		if t := x.run.trace; t != nil {
			out = append(out, difference(x.row.Variant, t, twin))
		}
	}
	return out, nil
}

// difference is twin.Y − t.Y at the instants of t, as far as both go and the run is shown.
func difference(name string, t *sim.Trace, twin *sim.TwinTrace) Curve {
	c := Curve{Name: name}
	k := 0
	for i, at := range t.T[:shownPoints(t.R, t.Y)] {
		for k < len(twin.T) && twin.T[k] < at {
			k++
		}
		if k == len(twin.T) {
			break
		}
		c.X, c.Y = append(c.X, at), append(c.Y, twin.Y[k]-t.Y[i])
	}
	return c
}
