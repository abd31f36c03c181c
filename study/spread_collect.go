package study

import (
	"fmt"
	"math"
	"strings"

	"steadytick/loop"
)

// result makes the result of what the tally holds.
func (j *spreadJob) result() (*Spread, error) {
	corners, err := j.corners()
	if err != nil {
		return nil, err
	}
	sens, err := j.sensitivities()
	if err != nil {
		return nil, err
	}
	r := &Spread{
		Schema: "steadytick/spread/1", Loop: j.l.Name, PeriodS: seconds(j.l.Timing.Period), Map: mapName(j.l), Draw: j.o.Draw, Trials: j.trials, Seed: j.o.Seed, Simulated: j.want.any(),
		CornersNote: j.cornersNote(), Failures: append([]SpreadFailure{}, j.tally.failures...), StepPercent: 100 * sensitivityStep,
		Warnings: []Warning{}, Units: Units{j.l.Output, j.l.Effort}, LoopFile: string(j.l.Source), File: j.l.File, Version: j.o.Version,
	}
	for _, s := range j.symbols {
		r.Symbols = append(r.Symbols, spreadSymbol(s))
	}
	t := j.tally
	r.Yield = SpreadYield{j.counted(t.met, t.count, j.o.Draw != DrawCorners), t.stable, t.unstable, t.failed}
	if corners != nil {
		r.Corners = &SpreadCorners{j.counted(corners.met, corners.count, false), corners.stable, corners.unstable, corners.failed}
	}
	for i := range j.metrics {
		r.Metrics = append(r.Metrics, j.metricResult(i, corners, sens))
	}
	j.requirementResults(r, corners)
	if j.o.Required.OK {
		reached := r.Yield.Percent >= j.o.Required.Value && len(leftOut(r)) == 0
		r.Yield.Required, r.Yield.Reached = j.o.Required, &reached
	}
	if err := j.warnings(r); err != nil {
		return nil, err
	}
	binding := j.binding(r)
	r.Verdict = spreadVerdict(r, binding)
	if j.o.Curves {
		r.Curves, err = j.curves(r, binding)
	}
	return r, err
}

func spreadSymbol(s loop.Symbol) SpreadSymbol {
	v, _ := s.Value.Float64()
	p, _ := s.Spread.Float64()
	low, high := v*(1-p), v*(1+p)
	return SpreadSymbol{Name: s.Name, Nominal: v, Percent: 100 * p, Low: low, High: high}
}

// shares are those of SpreadQuantiles.
var shares = []float64{0.01, 0.05, 0.25, 0.5, 0.75, 0.95, 0.99}

func (j *spreadJob) metricResult(i int, corners *spreadTally, sens [][]Figure) SpreadMetric {
	name, m := j.metrics[i], j.tally.metrics[i]
	out := SpreadMetric{
		Name: name, Unit: requirementUnit(name, Units{j.l.Output, j.l.Effort}), Nominal: j.nominal.figures[i],
		Count: m.count, Infinite: m.infinite, Without: m.without, Worse: directionOf(name, j.l.Requirements),
		Lowest: j.seen(m.lowest, Fig(m.low), j.o.Draw == DrawCorners), Top: j.seen(m.highest, Fig(m.high), j.o.Draw == DrawCorners),
	}
	if m.count > 0 {
		out.Mean, out.Min, out.Max = Fig(m.mean), Fig(m.least), Fig(m.most)
		q := m.bins.quantiles(shares, m.count, m.least, m.most)
		out.Quantiles = SpreadQuantiles{q[0], q[1], q[2], q[3], q[4], q[5], q[6]}
		out.Histogram = m.bins.histogram(m.least, m.most)
	}
	if m.count > 1 {
		out.Deviation = Fig(math.Sqrt(math.Max(0, m.squares) / float64(m.count-1)))
	}
	if corners != nil {
		c := corners.metrics[i]
		out.LowCor, out.TopCor = j.seen(c.lowest, Fig(c.low), true), j.seen(c.highest, Fig(c.high), true)
	}
	for k, s := range j.symbols {
		spread, _ := s.Spread.Float64()
		d := sens[k][i]
		over := d
		over.Value *= 100 * spread
		out.Sensitivities = append(out.Sensitivities, Sensitivity{s.Name, d, over, m.bins.rankCorrelation(k, m.count, m.sums[k])})
	}
	return out
}

// requirementResults fills the requirements, the ones that are not judged last.
func (j *spreadJob) requirementResults(r *Spread, corners *spreadTally) {
	for i, c := range j.list {
		q := j.tally.judged[i]
		out := SpreadRequirement{
			Requirement: c.text, Name: c.name, Op: c.op, Limit: Fig(c.limit), Unit: c.unit, Implied: c.implied, Judged: j.judges(c),
			Nominal: j.figure(j.nominal, c.name), Met: q.met, Missed: q.missed, Unjudged: q.unjudged, Percent: percentOf(q.met, j.tally.count),
			Worst: j.worstOf(c, q, j.o.Draw == DrawCorners),
		}
		if c.name == "stable" {
			out.Limit, out.Nominal = Figure{}, j.nominal.decay
		}
		if j.o.Draw != DrawCorners {
			out.Interval = wilson(q.met, j.tally.count)
		}
		if corners != nil {
			out.Corner, out.CornersMet = j.worstOf(c, corners.judged[i], true), Fig(float64(corners.judged[i].met))
		}
		if !out.Judged {
			out.Note = "the loop as written has no such figure; the requirement is left out of the yield"
		}
		r.Requirements = append(r.Requirements, out)
	}
	for _, q := range j.refused {
		r.Requirements = append(r.Requirements, SpreadRequirement{
			Requirement: q.Text, Name: q.Name, Op: q.Op, Limit: Fig(q.Limit), Unit: requirementUnit(q.Name, r.Units),
			Note: "no analysis gives this figure; the requirement is left out of the yield",
		})
	}
}

func (j *spreadJob) worstOf(c *constraint, q *judgedTally, corner bool) *WorstCase {
	if q.worst == nil {
		return nil
	}
	value := j.figure(q.worst, c.name)
	if c.name == "stable" {
		value = q.worst.decay
	}
	return j.seen(q.worst, value, corner)
}

// leftOut names the requirements that no trial can be held to; what cannot be judged is no pass.
func leftOut(r *Spread) []string {
	var out []string
	for _, q := range r.Requirements {
		if !q.Judged {
			out = append(out, q.Requirement)
		}
	}
	return out
}

// warnings tells what puts the result in doubt, and what a comparison of the loop as written warns of.
func (j *spreadJob) warnings(r *Spread) error {
	warn := func(code, format string, args ...any) {
		r.Warnings = append(r.Warnings, Warning{code, fmt.Sprintf(format, args...)})
	}
	if !j.nominal.stable {
		warn("nominal_unstable", "the loop as written is unstable: there are no sensitivities, and the yield is that of a design to be mended first")
	}
	for _, q := range r.Requirements {
		if !q.Judged {
			warn("requirement_not_judged", "requirement %q cannot be judged: %s", q.Requirement, q.Note)
		} else if q.Unjudged > 0 {
			warn("figure_missing", "requirement %q: %d trials are stable and have no such figure; they do not count as met", q.Requirement, q.Unjudged)
		}
	}
	if f := r.Yield.Failed; f > 0 {
		var reasons []string
		for _, x := range r.Failures {
			reasons = append(reasons, fmt.Sprintf("%d times %s (first in trial %d)", x.Count, x.Reason, x.First))
		}
		warn("trials_failed", "%d trials could not be analysed and count as not met: %s", f, strings.Join(reasons, "; "))
	}
	if c := r.Corners; c != nil && j.o.Draw != DrawCorners && r.Yield.Met == r.Yield.Of && c.Met < c.Of {
		warn("corners_fail", "every trial meets all requirements, but %d of the %d corners do not: the trials came nowhere near them", c.Of-c.Met, c.Of)
	}
	c, err := RunCompare(j.ctx, j.l, Options{})
	if err != nil {
		return err
	}
	for _, w := range c.Warnings {
		if w.Code != "no_continuous_column" && w.Code != "requirement_not_judged" {
			warn(w.Code, "as written: %s", w.Text)
		}
	}
	return nil
}
