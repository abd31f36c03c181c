package study

import (
	"math"

	"steadytick/loop"
)

// builtMetric looks a metric up in the loop as built; OK is false where that has none.
func builtMetric(b *AsBuilt, name string) Figure {
	if b == nil {
		return Figure{}
	}
	t := b.Transient
	switch name {
	case "overshoot":
		return t.OvershootPercent
	case "rise_time":
		return t.RiseTimeS
	case "settling_time":
		return t.SettlingTimeS
	case "peak_effort":
		return t.PeakEffort
	case "recovery_time":
		return t.RecoveryTimeS
	case "effort_noise":
		return b.Effort
	case "stuck_error":
		if b.Rest != nil {
			return b.Rest.StuckError
		}
	case "limit_cycle":
		if b.Rest != nil {
			return b.Rest.LimitCycle
		}
	}
	return b.steadyMetric(name)
}

// steadyMetric finds the metrics that belong to an input.
func (b *AsBuilt) steadyMetric(name string) Figure {
	kinds := map[string]string{"step_error": "step", "ramp_error": "ramp", "parabola_error": "parabola", "load_error": "load_step"}
	worst := Figure{}
	for _, s := range b.Steady {
		f := Figure{}
		switch {
		case name == "peak_tracking_error":
			f = s.PeakError
		case name == "rms_tracking_error":
			f = s.RMSError
		case name == "ripple" && !s.AtLimit:
			f = s.Ripple
		case kinds[name] == s.Input && !s.AtLimit:
			return s.WorstError
		}
		if f.OK && (!worst.OK || f.Value > worst.Value) {
			worst = f
		}
	}
	return worst
}

// worse is the figure that a requirement is held against: that of the sampled loop, or that of the loop as built where it is
// the worse of the two. An effort at its limit in the sampled loop leaves the requirement unjudged either way.
func worse(l *loop.Loop, c *Compare, r loop.Requirement, v Figure, why string) (Figure, string, string) {
	b := builtMetric(c.AsBuilt, r.Name)
	switch {
	case !b.OK || math.IsNaN(b.Value):
		return v, why, "sampled"
	case !v.OK && why == noFigure(l, c, r.Name):
		return b, "", asBuilt
	case v.OK && why == "" && slackOf(b.Value, r.Op, r.Limit) < slackOf(v.Value, r.Op, r.Limit):
		return b, "", asBuilt
	}
	if r.Name == "limit_cycle" {
		return v, why, asBuilt
	}
	return v, why, "sampled"
}

// failsAsBuilt tells whether the loop as built misses a requirement by having no figure: it grows without bound, or its step, of which
// the sampled loop has the figures, does not settle.
func failsAsBuilt(c *Compare, name string) bool {
	b := c.AsBuilt
	switch {
	case b == nil:
		return false
	case b.away:
		return true
	case name == "overshoot" || name == "settling_time":
		return !b.stepCut && c.Sampled.Transient.SettlingTimeS.OK && !b.Transient.SettlingTimeS.OK
	}
	return false
}
