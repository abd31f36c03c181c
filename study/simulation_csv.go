package study

import (
	"context"
	"errors"
	"io"

	"steadytick/loop"
	"steadytick/sim"
)

// SimulationCSV is one simulated input, ready to be written.
type SimulationCSV struct {
	trace *sim.Trace
	twin  *sim.TwinTrace
}

// Write writes one row an instant: t_s, r, y, m, u, and y and u of the continuous twin
// (empty without one).
func (s SimulationCSV) Write(w io.Writer) error { return sim.WriteCSV(w, s.trace, s.twin) }

// Simulate runs input number i (from 0) of the file through the loop as it will run,
// on the hardware that the file declares, and through its continuous twin at the same instants.
func Simulate(ctx context.Context, l *loop.Loop, i int, o Options) (SimulationCSV, error) {
	cont, sampled, err := bothColumns(l, &Compare{})
	if err != nil {
		return SimulationCSV{}, err
	}
	if why := mechanicsFit(l); why != "" {
		return SimulationCSV{}, errors.New(why)
	}
	in := l.Inputs[i]
	length := cut(l, horizon(l, in, cont, sampled), mostTicksRun)
	cfg, err := builtConfig(l, sampled.block, in, length, o.seed(), asDeclared)
	if err != nil {
		return SimulationCSV{}, err
	}
	cfg.MaxPoints = csvPoints
	o.progress("simulation for --csv", 0, 1)
	var out SimulationCSV
	if out.trace, err = sim.Run(ctx, cfg); err != nil {
		return out, err
	}
	if cont == nil {
		return out, nil
	}
	twin, err := twinConfig(l, in, out.trace.FinalT)
	if err != nil {
		return out, err
	}
	twin.Times = out.trace.T
	out.twin, err = sim.Twin(ctx, twin)
	return out, err
}
