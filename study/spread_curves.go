package study

import (
	"math"
	"math/big"

	"steadytick/loop"
)

// curves is what the report draws: the histograms, and the step response of the loop as written, the worst trial and the worst corner of the
// requirement that binds.
func (j *spreadJob) curves(r *Spread, b bound) (*SpreadCurves, error) {
	c := &SpreadCurves{Binding: b.requirement.Requirement}
	if b.requirement.Name == "stable" && b.metric != nil && b.worst != b.requirement.Worst {
		c.Binding = b.metric.Name
	}
	for _, m := range r.Metrics {
		if m.Histogram != nil {
			c.Histogram = append(c.Histogram, j.bars(m))
		}
	}
	return c, j.stepCurves(c, b)
}

// bars makes a staircase of a histogram.
func (j *spreadJob) bars(m SpreadMetric) SpreadBars {
	h := m.Histogram
	out := SpreadBars{Metric: m.Name, Unit: m.Unit, Nominal: m.Nominal, Bars: Curve{Name: "trials", Step: true}}
	width := (h.To - h.From) / float64(len(h.Counts))
	at := func(x float64, n int64) {
		out.Bars.X, out.Bars.Y = append(out.Bars.X, x), append(out.Bars.Y, float64(n))
	}
	at(h.From, 0)
	for i, n := range h.Counts {
		at(h.From+float64(i)*width, n)
	}
	at(h.To, h.Counts[len(h.Counts)-1])
	at(h.To, 0)
	for _, c := range j.list {
		if c.name == m.Name {
			out.Limits = append(out.Limits, LimitLine{c.op, c.limit})
		}
	}
	return out
}

// stepCase is a loop whose step response is drawn.
type stepCase struct {
	name string
	loop *loop.Loop
	run  *analyzed
}

// stepCurves simulates the step of the file, 1 without one.
func (j *spreadJob) stepCurves(c *SpreadCurves, b bound) error {
	list, err := j.stepCases(b)
	if err != nil {
		return err
	}
	in, length := j.stepLength(list)
	c.StepInput = inputTitle(j.l, in)
	step := j.progress("step responses", len(list))
	var drawn InputCurves
	for i, x := range list {
		in, _ := stepRun(x.loop, nil, x.run) // its size may depend on a symbol
		r, err := variant{loop: x.loop, run: x.run}.simulate(j.ctx, in, length)
		if err != nil {
			return err
		}
		drawn.add(r, x.name, false, x.run.stable)
		step(i + 1)
	}
	c.Step = drawn.Response
	return nil
}

func (j *spreadJob) stepCases(b bound) ([]stepCase, error) {
	var out []stepCase
	for _, x := range []struct {
		name string
		at   *WorstCase
		skip bool
	}{{"as written", nil, false}, {"worst trial", b.worst, b.worst == nil || j.o.Draw == DrawCorners}, {"worst corner", b.corner, b.corner == nil}} {
		if x.skip {
			continue
		}
		l, a, err := j.block(x.at)
		if err != nil {
			return nil, err
		}
		out = append(out, stepCase{x.name, l, a})
	}
	return out, nil
}

// longerShown: a worst case that settles slower is shown up to this many times longer than the loop as written.
const longerShown = 2

// stepLength is how long the step is shown, seconds.
func (j *spreadJob) stepLength(list []stepCase) (in loop.Input, length float64) {
	for i, x := range list {
		step, needed := stepRun(x.loop, nil, x.run)
		needed = cut(x.loop, needed/stepLonger, mostTicksRun)
		switch {
		case i == 0:
			in, length = step, needed
		case x.run.stable:
			length = math.Max(length, math.Min(needed, longerShown*length))
		}
	}
	return in, length
}

// block is the loop with the symbols of a case, nil for those of the file, and its analysis.
func (j *spreadJob) block(at *WorstCase) (*loop.Loop, *analyzed, error) {
	l := j.l
	if at != nil {
		values := map[string]*big.Rat{}
		for _, s := range at.Symbols {
			values[s.Name] = decimalOf(s.Value)
		}
		var problems loop.Problems
		if l, problems = j.l.WithSymbols(values); len(problems) > 0 {
			return nil, nil, problems
		}
	}
	h, err := prepare(l)
	if err != nil {
		return nil, nil, err
	}
	b, err := assembleSampled(l, h, l.Timing.Period, l.Timing.LoopDelay())
	if err != nil {
		return nil, nil, err
	}
	a, err := analyze(b)
	return l, a, err
}

// decimalOf is the shortest decimal that reads as v: the value that was drawn.
func decimalOf(v float64) *big.Rat {
	out, _ := new(big.Rat).SetString(string(appendFigure(nil, Fig(v))))
	return out
}
