package study

import (
	"fmt"
	"math"
	"strings"

	"steadytick/loop"
)

// stepCause is for the figures of the step response. An effort at its limit is named before the margin: the step is then no
// longer that of the linear loop.
func stepCause(l *loop.Loop, c *Compare, r GateRequirement) *GateCause {
	if limited := stepLimited(c); limited && r.Name != "peak_effort" {
		return actuatorCause(l, c, r, "the step")
	}
	if designMisses(c, r) {
		return designCause(c, r)
	}
	return lagCause(c, lagOf(c), fromContinuous(c, r))
}

// fromContinuous introduces a figure that the continuous loop meets.
func fromContinuous(c *Compare, r GateRequirement) string {
	if !r.Continuous.OK {
		return ""
	}
	text := fmt.Sprintf("the continuous loop has %s", r.withUnit(r.Continuous))
	was, now := c.Continuous.PhaseMarginDeg, c.Sampled.PhaseMarginDeg
	if was.OK && now.OK && !math.IsInf(was.Value, 0) && !math.IsInf(now.Value, 0) && now.Value < was.Value {
		text += fmt.Sprintf("; its phase margin of %s° falls to %s°", number(was.Value), number(now.Value))
	}
	return text + ": "
}

// stepLimited tells whether the sampled step takes the effort to a limit.
func stepLimited(c *Compare) bool {
	for _, w := range c.Warnings {
		if w.Code == "effort_saturates" && strings.HasPrefix(w.Text, "sampled") {
			return true
		}
	}
	return false
}

// actuatorCause names the actuator's limits, and what the continuous loop, limited likewise, makes of them.
func actuatorCause(l *loop.Loop, c *Compare, r GateRequirement, what string) *GateCause {
	limits := l.Actuator.Limits
	g := causef("actuator", "%s takes the effort to the actuator's limit (%s to %s %s)", what, number(limits[0]), number(limits[1]), l.Effort)
	switch {
	case !r.Continuous.OK:
	case designMisses(c, r):
		g.Text += fmt.Sprintf("; the continuous loop, limited likewise, has %s and misses it too: the design, not the sampling", r.withUnit(r.Continuous))
	default:
		g.Text += fmt.Sprintf("; the continuous loop, limited likewise, has %s, so sampling has its part in it", r.withUnit(r.Continuous))
	}
	return g
}

// followCause is for the tracking error over a move or a file.
func followCause(l *loop.Loop, c *Compare, r GateRequirement) *GateCause {
	for i, in := range l.Inputs {
		if (in.Kind == "move" || in.Kind == "file") && runLimited(l, c, i) {
			return actuatorCause(l, c, r, "the "+in.Kind)
		}
	}
	if designMisses(c, r) {
		return designCause(c, r)
	}
	return lagCause(c, lagOf(c), fromContinuous(c, r))
}

// runLimited tells whether the sampled run of input i takes the effort to a limit. The curves keep the extremes.
func runLimited(l *loop.Loop, c *Compare, i int) bool {
	if c.Curves == nil || i >= len(c.Curves.Inputs) {
		return false
	}
	for _, u := range c.Curves.Inputs[i].Effort {
		for _, v := range u.Y {
			if u.Step && atLimit(l, v) {
				return true
			}
		}
	}
	return false
}

// samplesCause is for samples_per_rise = rise time over T.
func samplesCause(c *Compare, r GateRequirement) *GateCause {
	rise := c.Sampled.Transient.RiseTimeS.Value
	if r.Op == ">=" || r.Op == ">" {
		return causef("sampling", "the step rises in %s, ticks are %s apart: about %s or more would do, if the rise time stays", timeText(rise), timeText(c.PeriodS), hertzText(r.Limit.Value/rise))
	}
	return causef("sampling", "the step rises in %s, ticks are %s apart: about %s or less would do, if the rise time stays", timeText(rise), timeText(c.PeriodS), hertzText(r.Limit.Value/rise))
}

// processorCause is for processor_load = cost of a tick over T.
func processorCause(c *Compare, r GateRequirement) *GateCause {
	cost := r.Value.Value / 100 * c.PeriodS
	if (r.Op == "<=" || r.Op == "<") && r.Limit.Value > 0 {
		return causef("processor", "a tick costs %s of its %s: at most %s, or a rate of %s or less, would meet it",
			timeText(cost), timeText(c.PeriodS), timeText(r.Limit.Value/100*c.PeriodS), hertzText(r.Limit.Value/100/cost))
	}
	return causef("processor", "a tick costs %s of its %s", timeText(cost), timeText(c.PeriodS))
}
