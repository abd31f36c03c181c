package study

import (
	"math"
	"slices"

	"steadytick/loop"
)

// constraint is one thing that a rate must satisfy.
type constraint struct {
	text    string // for the reader
	name    string // "stable", "runs" or a metric
	op      string
	limit   float64
	unit    string
	implied bool      // not a requirement of the file
	needs   simulated // runs that its figure needs
	figure  func(p *ratePoint) (Figure, string)
}

// slack is how far inside its limit the constraint is at a point, in the unit of its figure: not below zero where it is
// met, below zero where it is not. A loop that cannot run or is unstable meets nothing, −Inf. NaN: there is no figure to judge by.
func (c *constraint) slack(p *ratePoint) float64 {
	switch {
	case c.name == "runs":
		return map[bool]float64{true: 1, false: -1}[p.runs()]
	case !p.runs():
		return math.Inf(-1)
	case c.name == "stable":
		return p.decay()
	case c.name == "processor_load":
		// needs no stable loop
	case !p.stable():
		return math.Inf(-1)
	}
	f, why := c.figure(p)
	if !f.OK || why != "" {
		return math.NaN()
	}
	return slackOf(f.Value, c.op, c.limit)
}

// slackOf is the distance of a value from its limit, positive inside. Two equal infinities have no distance: 0. A strict
// comparison is not met at its limit.
func slackOf(v float64, op string, limit float64) float64 {
	d := v - limit
	if op[0] == '<' {
		d = limit - v
	}
	switch {
	case v == limit && len(op) == 2:
		return 0
	case v == limit:
		return -math.SmallestNonzeroFloat64
	case d == 0: // lost to rounding
		return math.Copysign(math.SmallestNonzeroFloat64, map[bool]float64{true: 1, false: -1}[meets(v, op, limit)])
	}
	return d
}

// met tells what a slack says.
func met(slack float64) bool { return slack >= 0 }

// needsOf tells which runs the figure of a metric needs.
func needsOf(name string) simulated {
	switch name {
	case "overshoot", "rise_time", "settling_time", "peak_effort", "samples_per_rise", "recovery_time":
		return simulated{step: true}
	case "peak_tracking_error", "rms_tracking_error":
		return simulated{tracking: true}
	}
	return simulated{}
}

// betweenTicks tells the metrics that need what lives between the ticks.
func betweenTicks(name string) bool {
	switch name {
	case "step_error", "ramp_error", "parabola_error", "load_error", "ripple":
		return true
	}
	return false
}

// constraints are "stable", that the loop can run, that the processor keeps up, and the requirements of the file (its budget among them), in this order. The
// requirements that no analysis judges are given apart.
func constraints(l *loop.Loop) (list []*constraint, unjudged []loop.Requirement) {
	list = []*constraint{
		{text: "stable", name: "stable", implied: true, unit: "1/s"},
		{text: "can run", name: "runs", implied: true},
	}
	if l.Processor != nil && !slices.ContainsFunc(l.Requirements, func(r loop.Requirement) bool { return r.Name == "processor_load" }) {
		list = append(list, &constraint{ // a budget is a requirement already; without one the cost must still fit
			text: "processor_load <= 100 %", name: "processor_load", op: "<=", limit: 100,
			unit: "%", implied: true, figure: metricOf("processor_load"),
		})
	}
	for _, r := range l.Requirements {
		if !judged(r.Name) || r.Name == "limit_cycle" { // that is searched for at one rate, not over rates
			unjudged = append(unjudged, r)
			continue
		}
		list = append(list, constraintOf(l, r))
	}
	return list, unjudged
}

// constraintOf is a requirement of the file.
func constraintOf(l *loop.Loop, r loop.Requirement) *constraint {
	return &constraint{
		text: r.Text, name: r.Name, op: r.Op, limit: r.Limit, needs: needsOf(r.Name),
		unit: requirementUnit(r.Name, Units{l.Output, l.Effort}), figure: metricOf(r.Name),
	}
}

func metricOf(name string) func(p *ratePoint) (Figure, string) {
	return func(p *ratePoint) (Figure, string) { return metric(p.loop, p.c, name) }
}
