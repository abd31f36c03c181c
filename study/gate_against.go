package study

import (
	"context"
	"fmt"
	"math"

	"steadytick/loop"
)

// GateAgainst holds a loop against an earlier revision of it, metric by metric.
type GateAgainst struct {
	File             string         `json:"file"` // of the revision before
	Loop             string         `json:"loop"`
	PeriodS          Figure         `json:"period_s"` // of the revision before
	StableBefore     bool           `json:"stable_before"`
	StableAfter      bool           `json:"stable_after"`
	TolerancePercent float64        `json:"tolerance_percent"`
	Changes          []MetricChange `json:"changes"`
	Worse            []string       `json:"worse"`    // "stable" and metrics that got worse by more than the tolerance
	Problems         []string       `json:"problems"` // why the two could not be compared; then only File is filled
	Warnings         []Warning      `json:"warnings"`
}

// GateAgainstProblem is the entry of a revision that could not be compared with.
func GateAgainstProblem(file string, problems []string) *GateAgainst {
	return &GateAgainst{File: file, Problems: problems, Changes: []MetricChange{}, Worse: []string{}, Warnings: []Warning{}}
}

// Verdicts on a metric.
const (
	ChangeSame    = "same"         // equal to 1e-9
	ChangeWithin  = "within"       // worse, but within the tolerance
	ChangeWorse   = "worse"        // worse by more than the tolerance, infinite now, or gone
	ChangeBetter  = "better"       // better
	ChangeNeutral = "changed"      // of a metric that has no better and worse
	ChangeNew     = "new"          // there was no figure before
	ChangeApart   = "not compared" // the two figures answer different questions; see the note
)

// MetricChange is one metric of both revisions, in the units of the revision that is checked.
type MetricChange struct {
	Name             string  `json:"name"`
	Unit             string  `json:"unit"`
	WorseWhen        Worse   `json:"worse_when"` // "higher", "lower" or "" for neither
	Before           Figure  `json:"before"`
	After            Figure  `json:"after"`
	Change           Figure  `json:"change"`         // after − before
	ChangePercent    Figure  `json:"change_percent"` // of |before|
	TolerancePercent float64 `json:"tolerance_percent"`
	Verdict          string  `json:"verdict"`
	Note             string  `json:"note"`

	// Shown is a unit that suits the figures, for readers.
	Shown WrittenUnit `json:"-"`
}

// RunGateAgainst compares a checked loop with the revision before it. The error says that the two cannot be
// compared, or that the one before cannot be analysed.
func RunGateAgainst(ctx context.Context, now *GateLoop, before *loop.Loop, tolerance Tolerance, o GateOptions) (*GateAgainst, error) {
	units, err := unitsBetween(before, now.loop)
	if err != nil {
		return nil, err
	}
	was, err := RunCompare(ctx, before, Options{Progress: o.Progress})
	if err != nil {
		return nil, err
	}
	g := &GateAgainst{
		File: before.File, Loop: before.Name, PeriodS: Fig(was.PeriodS), TolerancePercent: tolerance.Percent,
		StableBefore: was.Sampled.Stable, StableAfter: now.compare.Sampled.Stable,
		Changes: []MetricChange{}, Worse: []string{}, Problems: []string{}, Warnings: was.Warnings,
	}
	if g.StableBefore && !g.StableAfter {
		g.Worse = append(g.Worse, "stable")
	}
	r := revisions{before: before, after: now.loop, was: was, now: now.compare, units: units}
	for _, m := range loop.Metrics() {
		c, ok := r.change(m, tolerance)
		if !ok {
			continue
		}
		g.Changes = append(g.Changes, c)
		if c.Verdict == ChangeWorse {
			g.Worse = append(g.Worse, c.Name)
		}
	}
	return g, nil
}

// revisions are two revisions of a loop.
type revisions struct {
	before, after *loop.Loop
	was, now      *Compare
	units         conversion
}

// conversion takes signals of the revision before to the units of the one after.
type conversion struct{ output, effort float64 }

// unitsBetween finds the conversion, or says that there is none.
func unitsBetween(before, after *loop.Loop) (conversion, error) {
	var c conversion
	for _, x := range []struct {
		what, from, to string
		factor         *float64
	}{{"output", before.Output, after.Output, &c.output}, {"effort", before.Effort, after.Effort, &c.effort}} {
		f, ok := angleFactor(x.from, x.to)
		if !ok {
			return c, fmt.Errorf("the revisions have different units: %s is %q in %s and %q in %s; only rad and deg are converted", x.what, x.from, before.File, x.to, after.File)
		}
		*x.factor = f
	}
	return c, nil
}

// factor is what a figure of the metric before is multiplied with.
func (c conversion) factor(m loop.Metric) float64 {
	switch m.Unit {
	case "output":
		return c.output
	case "effort":
		return c.effort
	}
	return 1
}

// change compares one metric; false where neither revision has a figure.
func (r revisions) change(m loop.Metric, tolerance Tolerance) (MetricChange, bool) {
	before, _ := figureOf(r.before, r.was, m.Name)
	after, why := figureOf(r.after, r.now, m.Name)
	c := MetricChange{
		Name: m.Name, Unit: requirementUnit(m.Name, r.now.Units), WorseWhen: directionOf(m.Name, r.after.Requirements),
		Before: before, After: after, TolerancePercent: tolerance.of(m.Name),
	}
	c.Before.Value *= r.units.factor(m)
	if !c.Before.OK && !c.After.OK {
		return c, false
	}
	if c.Before.OK && c.After.OK {
		if d := c.After.Value - c.Before.Value; c.After.Value == c.Before.Value {
			c.Change, c.ChangePercent = Fig(0), Fig(0)
		} else if c.Change = Fig(d); c.Before.Value != 0 && !math.IsInf(d, 0) {
			c.ChangePercent = Fig(100 * d / math.Abs(c.Before.Value))
		}
	}
	c.Shown = suitedUnit(c.Unit, shownSize(c))
	apart := r.apart(m.Name)
	switch {
	case !r.was.Sampled.Stable:
		c.Verdict, c.Note = ChangeApart, "the loop before is unstable, so its figures are no measure"
	case !c.Before.OK:
		c.Verdict, c.Note = ChangeNew, "no figure before"
	case !c.After.OK && c.WorseWhen != Neutral && !c.worst():
		c.Verdict, c.Note = ChangeWorse, "no figure any more: "+why
	case !c.After.OK:
		c.Verdict, c.Note = ChangeNeutral, "no figure any more: "+why
	case apart != "":
		c.Verdict, c.Note = ChangeApart, apart
	default:
		c.Verdict = judgeChange(c, r.floor(m.Name))
	}
	return c, true
}

// worst tells whether the figure before is one that cannot get worse: an infinite error.
func (c MetricChange) worst() bool {
	return c.WorseWhen == WorseUp && math.IsInf(c.Before.Value, 1) || c.WorseWhen == WorseDown && math.IsInf(c.Before.Value, -1)
}

// shownSize is the figure before, or the one after where there was none or no size.
func shownSize(c MetricChange) float64 {
	if c.Before.OK && c.Before.Value != 0 && !math.IsInf(c.Before.Value, 0) {
		return c.Before.Value
	}
	if c.After.OK && !math.IsInf(c.After.Value, 0) {
		return c.After.Value
	}
	return 0
}

// figureOf is a metric that a requirement could be judged by.
func figureOf(l *loop.Loop, c *Compare, name string) (Figure, string) {
	if !judged(name) {
		return Figure{}, ""
	}
	f, why := metric(l, c, name)
	if why != "" {
		f.OK = false
	}
	if !c.Sampled.Stable && !f.OK {
		why = "the loop is unstable"
	}
	return f, why
}

// noChange: figures that agree to this part of their size are the same. It is above the rounding of a converted
// angle and of a figure that another rate leaves alone (error constants hold to 1e-11), and below any tolerance of use.
const noChange = 1e-9

// judgeChange is the verdict on two figures. A figure may get worse by
//
//	tolerance · |before|     or, where the figure before is 0, tolerance · floor
func judgeChange(c MetricChange, floor float64) string {
	before, after := c.Before.Value, c.After.Value
	size := math.Abs(before)
	worse := after - before
	if c.WorseWhen == WorseDown {
		worse = -worse
	}
	switch {
	case before == after || !math.IsInf(before, 0) && !math.IsInf(after, 0) && math.Abs(worse) <= noChange*size:
		return ChangeSame
	case c.WorseWhen == Neutral:
		return ChangeNeutral
	case worse < 0:
		return ChangeBetter
	case math.IsInf(before, 0) || math.IsInf(after, 0):
		return ChangeWorse
	case before == 0:
		size = floor
	}
	if worse <= c.TolerancePercent/100*size {
		return ChangeWithin
	}
	return ChangeWorse
}
