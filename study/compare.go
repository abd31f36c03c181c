package study

import (
	"context"
	"errors"
	"math"

	"steadytick/internal/lti"
	"steadytick/loop"
)

// Options steers a comparison.
type Options struct {
	Degrade  Degrade                          // zero value: nothing is varied
	Curves   bool                             // fill Compare.Curves for the report
	Version  string                           // for the foot of the report
	Seed     uint64                           // of the noise of the loop as built; 0 is 1
	Progress func(what string, done, all int) // nil: silent
}

func (o Options) seed() uint64 { return max(o.Seed, 1) }

func (o Options) progress(what string, done, all int) {
	if o.Progress != nil {
		o.Progress(what, done, all)
	}
}

// RunCompare is the main job: the continuous loop against the sampled loop at the loop's
// own rate. It returns an error when the loop cannot be analysed at all; an
// unstable loop is a result.
func RunCompare(ctx context.Context, l *loop.Loop, o Options) (*Compare, error) {
	T, _ := l.Timing.Period.Float64()
	delay, _ := l.Timing.LoopDelay().Float64()
	c := &Compare{
		Schema: "steadytick/compare/1", Loop: l.Name, PeriodS: T, LoopDelayS: delay,
		Units:    Units{l.Output, l.Effort},
		LoopFile: string(l.Source), File: l.File, Version: o.Version,
		Warnings: []Warning{},
	}
	cont, sampled, err := bothColumns(l, c)
	if err != nil {
		return nil, err
	}
	if cont != nil {
		c.Continuous = cont.column(l)
	}
	c.Sampled = sampled.column(l)
	if err := simulateAll(ctx, l, c, cont, sampled, o); err != nil {
		return nil, err
	}
	o.progress("as built", 0, 1)
	if c.AsBuilt, err = built(ctx, l, c, cont, sampled, o); err != nil {
		return nil, err
	}
	if err := c.Sampled.addWords(ctx, l, sampled); err != nil {
		return nil, err
	}
	c.DelayLedger = ledger(l, sampled, cont)
	c.Maps = mapNotes(l)
	judge(l, c)
	c.collectWarnings(l, cont, sampled)
	c.Verdict = verdict(c)
	if o.Curves {
		c.addFrequencyAndPoles(cont, sampled)
		o.progress("rates", 1, 1)
		if err := c.Curves.addRates(ctx, l, cont); err != nil {
			return nil, err
		}
	}
	return c, nil
}

// bothColumns assembles and analyses the two columns; cont is nil for a digital controller.
func bothColumns(l *loop.Loop, c *Compare) (cont, sampled *analyzed, err error) {
	b, err := assembleContinuous(l)
	switch {
	case errors.Is(err, errNoContinuous):
		c.warn("no_continuous_column", "%v; the continuous column is null", err)
	case err != nil:
		return nil, nil, err
	default:
		if cont, err = analyze(b); err != nil {
			return nil, nil, err
		}
	}
	h, err := prepare(l)
	if err != nil {
		return nil, nil, err
	}
	if b, err = assembleSampled(l, h, l.Timing.Period, l.Timing.LoopDelay()); err != nil {
		return nil, nil, err
	}
	sampled, err = analyze(b)
	return cont, sampled, err
}

// column turns an analysis into a result column, without what needs simulation.
func (a *analyzed) column(l *loop.Loop) *Column {
	col := a.figures(l, true)
	for i, x := range a.poles.X {
		if a.block.period == nil {
			p := x.Complex128()
			col.Poles = append(col.Poles, [2]float64{real(p), imag(p)})
			continue
		}
		T := a.block.open.Period
		z := [2]float64{1 + T.Mul(x.Re).Float64(), T.Mul(x.Im).Float64()}
		col.Poles = append(col.Poles, z)
		e := a.poles.Equivalent[i]
		col.EquivalentPoles = append(col.EquivalentPoles, [2]float64{real(e), imag(e)})
	}
	return col
}

// figures is column without the lists of poles, and without what lives between the ticks (ripple and worst error of each input)
// unless that is asked for: it is the costliest part where a plant mode turns many times within a tick.
func (a *analyzed) figures(l *loop.Loop, between bool) *Column {
	k := lti.ErrorConstants(lti.Leading(a.block.open))
	col := &Column{
		Stable: a.stable, Type: k.Type,
		PositionConstant: Fig(k.Position.Float64()), VelocityConstant: Fig(k.Velocity.Float64()), AccelerationConstant: Fig(k.Acceleration.Float64()),
		StabilityByPoles: a.byPoles, StabilityByNyquist: a.byNyquist,
		Steady: a.steady(l, between),
	}
	if a.stable {
		for i := range steadyTerms {
			col.TrackingSeries[i], col.LoopSeries[i] = Fig(a.tracking[i]), Fig(a.loopErr[i])
		}
	}
	a.fillMargins(col)
	return col
}

// fillMargins copies margins and crossings in the units of the results.
func (a *analyzed) fillMargins(col *Column) {
	m := a.margins
	const deg = 180 / math.Pi
	inf := Fig(math.Inf(1))
	col.ModulusMargin = Fig(m.Modulus)
	col.PhaseMarginDeg, col.DelayMarginS = inf, inf
	if m.HasCrossover {
		col.CrossoverRadS = Fig(m.Crossover)
	}
	if len(m.GainCrossings) > 0 {
		col.PhaseMarginDeg = Fig(m.PhaseMargin * deg)
	}
	col.GainMarginDB = decibel(m.GainMargin)
	col.GainReductionDB = Figure{}
	if m.GainReduction > 0 {
		col.GainReductionDB = Fig(-20 * math.Log10(m.GainReduction))
	}
	if a.stable {
		col.DelayMarginS = Fig(m.DelayMargin)
		col.BandwidthRadS = a.bandwidth()
		col.JitterMarginS = a.jitterMargin()
	} else {
		col.DelayMarginS = Figure{}
		if len(m.GainCrossings) == 0 {
			col.PhaseMarginDeg = Figure{}
		}
	}
	for _, g := range m.GainCrossings {
		col.GainCrossings = append(col.GainCrossings, Crossing{RadS: g.W, Gain: 1, PhaseDeg: g.Phase * deg, MarginDeg: Fig(g.Margin * deg)})
	}
	greatest := 0.0
	for _, p := range m.PhaseCrossings {
		if p.Gain < 1 {
			greatest = math.Max(greatest, p.Gain)
		}
	}
	for _, p := range m.PhaseCrossings {
		if p.Gain < greatest*listedDown {
			continue
		}
		col.PhaseCrossings = append(col.PhaseCrossings, Crossing{RadS: p.W, Gain: p.Gain, PhaseDeg: 180, MarginDB: decibel(1 / p.Gain)})
	}
}

// listedDown: phase crossings more than 30 dB below the one that sets the gain margin are not listed.
const listedDown = 1 / 31.6

// decibel is 20·log10 of a ratio; 0 means there is none.
func decibel(ratio float64) Figure {
	if !(ratio > 0) {
		return Figure{}
	}
	return Fig(20 * math.Log10(ratio))
}
