package study

import (
	"fmt"
	"math"
	"math/big"

	"steadytick/loop"
)

// computeEffect finds what a microsecond more of compute time does to both ends of the window: the bound is found again with
// a little more compute time, and the difference is given for a microsecond.
//
//	step = 1 us, or a two-hundredth of the tick where that is less
func (j *rateJob) computeEffect() error {
	if j.r.Pick == nil {
		return nil
	}
	e := &ComputeEffect{}
	p := j.r.Pick
	if p.SlowestHz.OK {
		if err := j.lowerEffect(e, p); err != nil {
			return err
		}
	} else {
		e.Note = "the window has no lower end in the range"
	}
	if p.FastestHz.OK {
		work := seconds(j.l.Timing.Compute) + seconds(j.l.Timing.Conversion)
		switch at := p.FastestHz.Value; {
		case p.BindsAbove == j.list[1].text && work > 0: // the work fills the tick: f = 1/work
			e.UpperHzPerUS = Fig(-at * 1e-6 / work)
		case j.named(p.BindsAbove, "processor_load"): // f = budget/cost
			if cost := seconds(costOf(j.l)); cost > 0 {
				e.UpperHzPerUS = Fig(-at * 1e-6 / cost)
			}
		}
	}
	j.r.ComputeEffect = e
	return nil
}

// costOf is the processor time of a tick, seconds.
func costOf(l *loop.Loop) *big.Rat {
	if l.Processor != nil && l.Processor.Cost != nil {
		return l.Processor.Cost
	}
	return l.Timing.Compute
}

// named tells whether a constraint's text belongs to a metric.
func (j *rateJob) named(text, name string) bool {
	for _, c := range j.list {
		if c.text == text && c.name == name {
			return true
		}
	}
	return false
}

func (j *rateJob) lowerEffect(e *ComputeEffect, p *Pick) error {
	if j.l.Timing.Update != loop.WhenReady {
		e.LowerHzPerUS, e.LowerPercent = Fig(0), Fig(0)
		e.Note = "none: the effort is applied at a fixed instant, whatever the compute time, as long as it is ready by then"
		return nil
	}
	var c *constraint
	for _, x := range j.list {
		if x.text == p.BindsBelow {
			c = x
		}
	}
	if c == nil || c.name == "runs" {
		return nil
	}
	at := p.SlowestHz.Value
	step := math.Min(1e-6, 1/(200*at))
	late := *j.sweep
	late.extra = new(big.Rat).SetFloat64(step)
	scan := &rateScan{ctx: j.ctx, s: &late, m: j.scan.m, list: j.list, known: map[float64]*ratePoint{}}
	moved, ok, err := scan.near(c, at)
	if err != nil || !ok {
		e.Note = "the bound does not move smoothly with the compute time"
		return err
	}
	e.LowerHzPerUS = Fig((moved - at) / (step * 1e6))
	e.LowerPercent = Fig(100 * e.LowerHzPerUS.Value / at)
	e.Note = fmt.Sprintf("each microsecond of compute time moves the slowest rate by %s %%", number(e.LowerPercent.Value))
	return nil
}

// near finds the bound of a constraint that is met above it, near a rate.
func (w *rateScan) near(c *constraint, hz float64) (float64, bool, error) {
	for d := 1e-4; d < 0.5; d *= 4 {
		a, err := w.slackAt(c, hz*(1-d))
		if err != nil {
			return 0, false, err
		}
		b, err := w.slackAt(c, hz*(1+d))
		if err != nil {
			return 0, false, err
		}
		if !met(a) && met(b) {
			f, err := w.bound(c, sample{hz * (1 - d), a}, sample{hz * (1 + d), b})
			return f, err == nil, err
		}
	}
	return 0, false, nil
}
