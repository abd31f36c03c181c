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
	list := variants(l, sampled, o.Degrade)
	steps := len(l.Inputs)*(len(list)+1) + 2
	done := 0
	tick := func(what string) {
		done++
		o.progress(what, done, steps)
	}
	if err := transients(ctx, l, c, cont, sampled, tick); err != nil {
		return err
	}
	c.Degrade = []DegradeRow{}
	c.Curves = &Curves{}
	for i, in := range l.Inputs {
		length := horizon(l, in, cont, sampled)
		curves := InputCurves{Input: inputTitle(l, in)}
		if cont != nil {
			tick("continuous")
			if err := c.simulateContinuous(ctx, l, i, length, cont, &curves); err != nil {
				return err
			}
		}
		for k, v := range list {
			tick(v.name)
			if err := c.simulateVariant(ctx, l, i, length, v, k == 0, &curves); err != nil {
				return err
			}
		}
		c.Curves.Inputs = append(c.Curves.Inputs, curves)
	}
	return nil
}

// simulateContinuous runs the continuous twin with input i.
func (c *Compare) simulateContinuous(ctx context.Context, l *loop.Loop, i int, length float64, cont *analyzed, curves *InputCurves) error {
	in := l.Inputs[i]
	r, err := runTwin(ctx, l, in, length)
	if errors.Is(err, sim.ErrTwinLength) {
		c.Degrade = append(c.Degrade, DegradeRow{Input: inputTitle(l, in), Variant: "continuous", Stable: cont.stable, Note: err.Error()})
		return nil
	}
	if err != nil {
		return err
	}
	c.Degrade = append(c.Degrade, row(l, in, "continuous", cont, r))
	curves.add(r, "continuous", nil)
	fillFromRun(&c.Continuous.Steady[i], in, cont, r)
	if end, ok := endLength(l, in); ok && cont.stable {
		if r, err = runTwin(ctx, l, in, end); err != nil {
			return err
		}
		c.Continuous.Steady[i].fillEnd(r)
	}
	return nil
}

// simulateVariant runs a variant of the sampled loop with input i; own: it is the loop itself.
func (c *Compare) simulateVariant(ctx context.Context, l *loop.Loop, i int, length float64, v variant, own bool, curves *InputCurves) error {
	in := l.Inputs[i]
	if v.run == nil {
		c.Degrade = append(c.Degrade, DegradeRow{Input: inputTitle(l, in), Variant: v.name, Note: "cannot run: " + v.note})
		return nil
	}
	r, err := v.simulate(ctx, in, length)
	if err != nil {
		return err
	}
	c.Degrade = append(c.Degrade, v.row(l, in, r))
	curves.add(r, v.name, &v)
	if !own {
		return nil
	}
	fillFromRun(&c.Sampled.Steady[i], in, v.run, r)
	if end, ok := endLength(l, in); ok && v.run.stable {
		if r, err = v.simulate(ctx, in, end); err != nil {
			return err
		}
		c.Sampled.Steady[i].fillEnd(r)
	}
	return nil
}

// row is one line of the degradation table.
func row(l *loop.Loop, in loop.Input, name string, a *analyzed, r run) DegradeRow {
	out := DegradeRow{Input: inputTitle(l, in), Variant: name, Stable: a.stable, PeakError: r.peak, RMSError: r.rms}
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
	if v.converters {
		out.SteadyError = Figure{}
		out.Note = "simulated with the word lengths of the file; its steady error is not predicted by linear analysis"
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
			s.EndError = Fig(g[0].Value + g[1].Value*t + g[2].Value*t*t)
			s.EndTimeS = Fig(t)
		}
	}
}

// endLength is the time to the first tick at or after the end of a move or file;
// false for other inputs.
func endLength(l *loop.Loop, in loop.Input) (float64, bool) {
	if in.Kind != "move" && in.Kind != "file" {
		return 0, false
	}
	signal, _, err := signalOf(in)
	if err != nil {
		return 0, false
	}
	T, _ := l.Timing.Period.Float64()
	return math.Max(1, math.Ceil(signal.Duration()/T*(1-1e-12))) * T, true
}

// fillEnd notes the error with which a run ended.
func (s *Steady) fillEnd(r run) {
	if !r.diverged {
		s.EndError, s.EndTimeS = Fig(r.end), Fig(r.endTime)
	}
}
