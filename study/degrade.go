package study

import (
	"context"
	"errors"
	"math"

	"steadytick/loop"
	"steadytick/sim"
)

// run is a simulated response with what tables need of it.
type run struct {
	trace    *sim.Trace
	peak     Figure
	rms      Figure
	end      float64
	endTime  float64
	diverged bool
}

func newRun(t *sim.Trace) run {
	r := run{trace: t, diverged: t.Diverged, end: t.FinalR - t.FinalY, endTime: t.FinalT}
	if !t.Diverged {
		r.peak, r.rms = Fig(t.PeakError), Fig(t.RMSError)
	}
	return r
}

// simulateAll fills everything that comes from simulation: step figures, the figures of move
// and file inputs, the errors at the end of unbounded ones and the degradation table.
func simulateAll(ctx context.Context, l *loop.Loop, c *Compare, cont, sampled *analyzed, o Options) error {
	list := variants(l, sampled, o.Degrade, o.seed())
	warnStored(c, l, list)
	o.progress("step response", 0, 1)
	if err := transients(ctx, l, c, cont, sampled); err != nil {
		return err
	}
	o.progress("inputs", 0, len(l.Inputs))
	c.Degrade = []DegradeRow{}
	c.Curves = &Curves{}
	all := make([][]outcome, len(l.Inputs))
	added := make([][]Curve, len(l.Inputs))
	err := parallel(len(l.Inputs), func(i int) (err error) {
		all[i], added[i], err = simulateInput(ctx, l, l.Inputs[i], list, cont, sampled, o)
		return err
	})
	if err != nil {
		return err
	}
	for i, in := range l.Inputs {
		c.warnCut(l, in, cont, sampled)
		curves := InputCurves{Input: inputTitle(l, in), Added: added[i]}
		for k, x := range all[i] {
			switch {
			case k == 0 && cont == nil:
				continue
			case k == 0:
				x.fill(l, &c.Continuous.Steady[i], in, cont)
			case k == 1:
				x.fill(l, &c.Sampled.Steady[i], in, sampled)
				c.warnAtLimit(l, i)
			}
			c.Degrade = append(c.Degrade, x.row)
			if x.run.trace != nil {
				curves.add(x.run, x.row.Variant, k > 0, x.row.Stable)
			}
		}
		c.Curves.Inputs = append(c.Curves.Inputs, curves)
	}
	return nil
}

// simulateInput runs the continuous loop (first in the result, empty without one) and the variants
// with one input, and gives the error that each variant adds.
func simulateInput(ctx context.Context, l *loop.Loop, in loop.Input, list []variant, cont, sampled *analyzed, o Options) ([]outcome, []Curve, error) {
	length := cut(l, horizon(l, in, cont, sampled), mostTicksRun)
	runs := make([]outcome, len(list)+1)
	var err error
	for k, v := range list {
		if runs[k+1], err = v.outcome(ctx, l, in, length, k == 0); err != nil {
			return nil, nil, err
		}
	}
	if cont == nil {
		return runs, nil, nil
	}
	var times []float64 // nil: evenly spaced
	if o.Curves {
		times = instants(runs[1:], length)
	}
	if runs[0], err = continuousOutcome(ctx, l, in, length, times, cont); err != nil || !o.Curves || runs[0].run.trace == nil {
		return runs, nil, err
	}
	return runs, addedErrors(runs), nil
}

// outcome is one run with its line of the table; of a move or file, also the run to its end.
type outcome struct {
	row DegradeRow
	run run // trace nil: it could not be run
	end run
}

// tooLongForTwin says what sim.ErrTwinLength means to a user.
const tooLongForTwin = "the continuous loop changes too fast for so long a simulation"

// continuousOutcome runs the continuous twin and keeps the given instants.
func continuousOutcome(ctx context.Context, l *loop.Loop, in loop.Input, length float64, times []float64, cont *analyzed) (outcome, error) {
	r, err := runTwin(ctx, l, in, length, times)
	if errors.Is(err, sim.ErrTwinLength) {
		return outcome{row: DegradeRow{Input: inputTitle(l, in), Variant: "continuous", Ran: false, Stable: cont.stable, Note: tooLongForTwin}}, nil
	}
	out := outcome{run: r}
	if err != nil {
		return out, err
	}
	out.row = row(l, in, "continuous", cont, r)
	if end, ok := endLength(l, in); ok && cont.stable {
		out.end, err = runTwin(ctx, l, in, end, nil)
	}
	return out, err
}

// outcome runs the variant; own says that it is the loop itself.
func (v variant) outcome(ctx context.Context, l *loop.Loop, in loop.Input, length float64, own bool) (outcome, error) {
	if v.run == nil {
		return outcome{row: DegradeRow{Input: inputTitle(l, in), Variant: v.name, Note: "cannot run: " + v.note}}, nil
	}
	r, err := v.simulate(ctx, in, length)
	if err != nil {
		return outcome{}, err
	}
	out := outcome{run: r, row: v.row(l, in, r)}
	if end, ok := endLength(l, in); ok && own && v.run.stable {
		out.end, err = v.simulate(ctx, in, end)
	}
	return out, err
}

// fill copies the figures of the runs into the steady row of the input.
func (x outcome) fill(l *loop.Loop, s *Steady, in loop.Input, a *analyzed) {
	if x.run.trace == nil {
		return
	}
	s.AtLimit = a.stable && atLimit(l, x.run.trace.FinalU)
	fillFromRun(s, in, a, x.run)
	if x.end.trace != nil && !x.end.diverged {
		s.EndError, s.EndTimeS = Fig(x.end.end), Fig(x.end.endTime)
		s.PeakError, s.RMSError = x.end.peak, x.end.rms // over the input itself, not the settling after it
	}
}

// row is one line of the degradation table.
func row(l *loop.Loop, in loop.Input, name string, a *analyzed, r run) DegradeRow {
	out := DegradeRow{Input: inputTitle(l, in), Variant: name, Ran: true, Stable: a.stable, PeakError: r.peak, RMSError: r.rms}
	switch {
	case !a.stable:
		out.PeakError, out.RMSError = Figure{}, Figure{}
		out.Note = "unstable"
	case r.diverged:
		out.Note = "grows without bound"
	}
	if a.stable {
		for _, s := range a.steadyOf(l, in) {
			out.SteadyError = s
		}
	}
	return out
}

func (v variant) row(l *loop.Loop, in loop.Input, r run) DegradeRow {
	out := row(l, in, v.name, v.run, r)
	period, _ := v.run.block.period.Float64()
	delay, _ := v.run.block.delay.Float64()
	out.PeriodS, out.LoopDelayS = Fig(period), Fig(delay)
	if v.built && v.run.stable {
		out.SteadyError = Figure{}
		out.Note = "simulated on the hardware of the file; its steady error is not predicted by linear analysis"
	}
	return out
}

// steadyOf is the steady tracking error at the ticks for an input that has one; empty otherwise.
func (a *analyzed) steadyOf(l *loop.Loop, in loop.Input) []Figure {
	s := Steady{Input: in.Kind}
	switch in.Kind {
	case "step", "ramp", "parabola":
		return []Figure{reached(polynomialError(in.Kind, in.Size, a.trackingDD, a.block.open.Period))}
	case "sine":
		w, _ := in.Frequency.Float64()
		e := 1 - a.block.toOutput(w)
		return []Figure{Fig(math.Hypot(real(e), imag(e)) * math.Abs(in.Size))}
	case "load_step":
		a.steadyLoad(l, in, &s)
		return []Figure{s.TrackingError}
	}
	return nil
}

// fillFromRun copies the figures of a run into the steady table: of a move or file, and of
// inputs whose error grows, the error reached at the end.
func fillFromRun(s *Steady, in loop.Input, a *analyzed, r run) {
	if !a.stable || r.diverged {
		return
	}
	switch in.Kind {
	case "move", "file":
		s.PeakError, s.RMSError = r.peak, r.rms
	case "ramp", "parabola":
		if s.Asymptote != nil && math.IsInf(s.TrackingError.Value, 0) {
			t := r.endTime
			g := s.Asymptote
			s.EndError, s.EndTimeS = Fig(g[0].Value+g[1].Value*t+g[2].Value*t*t), Fig(t)
			if s.AtLimit {
				s.EndError = Fig(r.end)
			}
		}
	}
}

// mostTicksEnd bounds the run to the end of a move or file: some seconds of work.
const mostTicksEnd = 10_000_000

// endLength is the time to the first tick at or after the end of a move or file; false for other
// inputs, and for one of more than mostTicksEnd ticks (the warning of a cut run covers it).
func endLength(l *loop.Loop, in loop.Input) (float64, bool) {
	if in.Kind != "move" && in.Kind != "file" {
		return 0, false
	}
	signal, _, err := signalOf(in)
	if err != nil {
		return 0, false
	}
	T, _ := l.Timing.Period.Float64()
	ticks := math.Max(1, math.Ceil(signal.Duration()/T*(1-1e-12)))
	return ticks * T, ticks <= mostTicksEnd
}
