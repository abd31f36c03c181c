package sim

import (
	"context"
	"math"
)

// Trace is what a run keeps. The slices of one group have equal length.
type Trace struct {
	// Points, time rising: reference, output, measurement before its conversion, effort held by
	// the first task. Where more were looked at than kept, those kept include the extremes.
	T, R, Y, M, U []float64
	// Ticks of the first task: instant, reference, output, measurement as converted, effort as
	// computed there. Thinned in the same way.
	TickT, TickR, TickY, TickM, TickU []float64

	// Final values, at the instant FinalT; FinalU is the effort held then.
	FinalT, FinalR, FinalY, FinalM, FinalU float64

	// The tracking error r − y over all points looked at, kept or not.
	PeakError, PeakErrorTime, RMSError float64
	// PeakEffort is the largest magnitude held by the first task.
	PeakEffort float64
	// Tail holds what Config.TailFrom asks for.
	Tail Tail
	// Step holds the figures asked for by Config.Step.
	Step Figures
	// Diverged: a signal passed 1e100 and the run ended there.
	Diverged bool
}

// Run simulates the sampled loop. The error is ctx.Err() when ctx ends, or says what is wrong
// with cfg; a loop that grows without bound is no error, see Trace.Diverged. Memory depends
// on MaxPoints and on the efforts on their way through dead times, not on Ticks.
func Run(ctx context.Context, cfg Config) (*Trace, error) {
	e, err := newEngine(&cfg)
	if err != nil {
		return nil, err
	}
	return e.run(ctx)
}

// checkEvery is how many instants pass between two looks at the context.
const checkEvery = 4096

func (e *engine) run(ctx context.Context) (*Trace, error) {
	if e.plain() {
		diverged, err := e.runPlain(ctx)
		if err != nil {
			return nil, err
		}
		if e.cfg.Progress != nil {
			e.cfg.Progress(1)
		}
		return e.trace(diverged), nil
	}
	length := float64(e.cfg.Ticks) * e.tasks[0].Controller.period
	diverged := false
	for n := 0; ; n++ {
		in, err := e.line.next()
		if err != nil {
			return nil, err
		}
		if n%checkEvery == 0 {
			if err := ctx.Err(); err != nil {
				return nil, err
			}
			if e.cfg.Progress != nil {
				e.cfg.Progress(math.Min(1, in.t/length))
			}
		}
		e.act(in)
		miss, ok := e.look(in.t)
		if !ok {
			diverged = true
			break
		}
		if in.length == 0 {
			break
		}
		if ok, err = e.span(in, miss); err != nil {
			return nil, err
		}
		if !ok {
			diverged = true
			break
		}
	}
	if e.cfg.Progress != nil {
		e.cfg.Progress(1)
	}
	return e.trace(diverged), nil
}

func (e *engine) trace(diverged bool) *Trace {
	t := &Trace{
		PeakError: e.sum.peak, PeakErrorTime: e.sum.peakTime, RMSError: e.sum.rms(),
		PeakEffort: e.effort, Diverged: diverged,
	}
	t.Tail = e.tail.figures()
	if e.watch != nil && !diverged {
		t.Step = e.watch.find.figures(e.effort, e.tasks[0].Limits.On, e.tasks[0].act.limited)
	}
	last := e.points.last
	t.FinalT, t.FinalR, t.FinalY, t.FinalM, t.FinalU = last.t, last.r, last.y, last.m, last.u
	t.T, t.R, t.Y, t.M, t.U = columns(e.points.rows())
	t.TickT, t.TickR, t.TickY, t.TickM, t.TickU = columns(e.ticks.rows())
	return t
}

func columns(rows []row) (t, r, y, m, u []float64) {
	for _, p := range rows {
		t, r, y, m, u = append(t, p.t), append(r, p.r), append(y, p.y), append(m, p.m), append(u, p.u)
	}
	return t, r, y, m, u
}
