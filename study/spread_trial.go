package study

import (
	"errors"
	"math"
	"math/big"
	"slices"

	"steadytick/loop"
)

// spreadRow is one trial: what a line of a part file holds.
type spreadRow struct {
	trial   int64
	symbols []float64 // of the drawn symbols
	failed  string    // why it could not be analysed, "" where it was
	stable  bool
	decay   Figure   // of the slowest mode, 1/s: negative where it grows
	figures []Figure // by spreadJob.metrics; of an unstable loop only what needs no stability
}

// evaluate analyses a loop and takes its figures. The error is that of an interrupted run; everything else is a failed trial.
func (j *spreadJob) evaluate(k int64, l *loop.Loop) (*spreadRow, error) {
	row := &spreadRow{trial: k}
	p, err := j.point(l)
	if ctx := j.ctx.Err(); ctx != nil {
		return nil, ctx
	}
	if err != nil {
		row.failed = err.Error()
		return row, nil
	}
	row.stable, row.decay = p.stable(), Fig(p.decay())
	row.figures = make([]Figure, len(j.metrics))
	for i, name := range j.metrics {
		if !row.stable && name != "processor_load" {
			continue
		}
		if f, why := metric(l, p.c, name); why == "" && !math.IsNaN(f.Value) {
			row.figures[i] = f
		}
	}
	return row, nil
}

// point is the loop at its own rate with the figures asked for.
func (j *spreadJob) point(l *loop.Loop) (*ratePoint, error) {
	s, err := newSweeper(l, nil)
	if err != nil {
		return nil, err
	}
	held, err := s.held.at(l.Timing.Period, l.Timing.LoopDelay())
	if err != nil {
		return nil, err
	}
	hz, _ := new(big.Rat).Inv(l.Timing.Period).Float64()
	p := &ratePoint{hz: hz, period: l.Timing.Period, loop: l, words: slices.Contains(j.metrics, "effort_noise") || slices.Contains(j.metrics, "stuck_error")}
	if err := p.analyse(held, j.between); err != nil {
		return nil, err
	}
	if !j.want.any() || !p.stable() {
		return p, nil
	}
	if s.cont, err = continuousOf(l); err != nil { // how long a run is depends on it, as in a comparison
		return nil, err
	}
	return p, s.simulate(j.ctx, p, j.want)
}

// continuousOf is the continuous loop, nil for a controller in z.
func continuousOf(l *loop.Loop) (*analyzed, error) {
	b, err := assembleContinuous(l)
	if errors.Is(err, errNoContinuous) {
		return nil, nil
	}
	if err != nil {
		return nil, err
	}
	return analyze(b)
}

// figure is a metric of a row.
func (j *spreadJob) figure(row *spreadRow, name string) Figure {
	if row.failed != "" {
		return Figure{}
	}
	for i, m := range j.metrics {
		if m == name {
			return row.figures[i]
		}
	}
	return Figure{}
}

// slack is how far inside its limit a constraint is in a trial, as constraint.slack has it: −Inf for what is unstable or failed, NaN
// where there is no figure to judge by.
func (j *spreadJob) slack(c *constraint, row *spreadRow) float64 {
	switch {
	case row.failed != "":
		return math.Inf(-1)
	case c.name == "stable":
		return row.decay.Value
	case !row.stable && c.name != "processor_load":
		return math.Inf(-1)
	}
	f := j.figure(row, c.name)
	if !f.OK {
		return math.NaN()
	}
	return slackOf(f.Value, c.op, c.limit)
}

// values are the symbols of a row by name.
func (j *spreadJob) values(row *spreadRow) SymbolValues {
	out := SymbolValues{}
	for i, v := range row.symbols {
		out = append(out, SymbolValue{j.symbols[i].Name, v})
	}
	return out
}
