package study

import (
	"fmt"
	"math"
	"math/big"

	"steadytick/loop"
)

// columnMetrics are the metrics that are a figure of the sampled column.
var columnMetrics = map[string]func(*Column) Figure{
	"position_constant":     func(c *Column) Figure { return c.PositionConstant },
	"velocity_constant":     func(c *Column) Figure { return c.VelocityConstant },
	"acceleration_constant": func(c *Column) Figure { return c.AccelerationConstant },
	"phase_margin":          func(c *Column) Figure { return c.PhaseMarginDeg },
	"gain_margin":           func(c *Column) Figure { return c.GainMarginDB },
	"modulus_margin":        func(c *Column) Figure { return c.ModulusMargin },
	"delay_margin":          func(c *Column) Figure { return c.DelayMarginS },
	"jitter_margin":         func(c *Column) Figure { return c.JitterMarginS },
	"crossover":             func(c *Column) Figure { return c.CrossoverRadS },
	"bandwidth":             func(c *Column) Figure { return c.BandwidthRadS },
	"overshoot":             func(c *Column) Figure { return c.Transient.OvershootPercent },
	"rise_time":             func(c *Column) Figure { return c.Transient.RiseTimeS },
	"settling_time":         func(c *Column) Figure { return c.Transient.SettlingTimeS },
	"peak_effort":           func(c *Column) Figure { return c.Transient.PeakEffort },
	"recovery_time":         func(c *Column) Figure { return c.Transient.RecoveryTimeS },
	"effort_noise":          func(c *Column) Figure { return c.EffortNoise },
	"stuck_error":           func(c *Column) Figure { return c.StuckError },
}

// metric looks a metric of the sampled loop up by its name in requirements. The value
// is in the metric's base unit; the text says why there is none.
func metric(l *loop.Loop, c *Compare, name string) (Figure, string) {
	if f, why, ok := steadyMetric(c.Sampled, name); ok {
		return f, why
	}
	var f Figure
	switch get := columnMetrics[name]; {
	case get != nil:
		f = get(c.Sampled)
	case name == "samples_per_rise":
		f = c.Sampled.Transient.RiseTimeS
		f.Value /= c.PeriodS
	case name == "limit_cycle":
		if c.AsBuilt != nil && c.AsBuilt.Rest != nil {
			f = c.AsBuilt.Rest.LimitCycle
		}
	case name == "processor_load":
		f = Fig(loadPercent(l))
	default:
		return f, "compare does not evaluate this metric"
	}
	if name == "processor_load" && f.Value == 0 {
		return Figure{}, "timing has no compute time and processor no cost"
	}
	if !f.OK {
		return f, noFigure(l, c, name)
	}
	return f, ""
}

// noFigure says why a metric has no figure. A loop without what makes one has none of it: those count as 0.
func noFigure(l *loop.Loop, c *Compare, name string) string {
	switch name {
	case "effort_noise":
		return "the sensor declares neither noise nor words"
	case "stuck_error":
		return "the file declares nothing that could hold the loop off its place, or friction that no bound is known for"
	case "limit_cycle":
		return "the file declares nothing that quantizes or sticks, or the loop settles or hunts more slowly than the simulation is long"
	case "recovery_time":
		return "the actuator has no limits, or the response does not settle"
	}
	return "the loop has no such figure"
}

// loadPercent is the part of the tick that the processor spends on it, rounded once: a load that is a limit to the last digit meets it.
func loadPercent(l *loop.Loop) float64 {
	load := new(big.Rat).Quo(costOf(l), l.Timing.Period)
	p, _ := load.Mul(load, big.NewRat(100, 1)).Float64()
	return p
}

// judged tells whether compare evaluates the metric at all.
func judged(name string) bool {
	switch name {
	case "word_margin":
		return false
	}
	return true
}

// steadyMetric finds the metrics that belong to an input.
func steadyMetric(s *Column, name string) (f Figure, why string, ok bool) {
	kinds := map[string]string{"step_error": "step", "ramp_error": "ramp", "parabola_error": "parabola", "load_error": "load_step"}
	if kind, found := kinds[name]; found {
		for _, e := range s.Steady {
			if e.Input != kind {
				continue
			}
			if !e.WorstError.OK {
				return Figure{}, "the loop is unstable", true
			}
			if e.AtLimit {
				return e.WorstError, "the simulation of this input ends with the effort at its limit, so the steady error of the linear loop is not reached", true
			}
			return e.WorstError, "", true
		}
		return Figure{}, fmt.Sprintf("inputs has no %s", kind), true
	}
	pick := map[string]func(Steady) Figure{
		"ripple":              func(e Steady) Figure { return e.Ripple },
		"peak_tracking_error": func(e Steady) Figure { return e.PeakError },
		"rms_tracking_error":  func(e Steady) Figure { return e.RMSError },
	}[name]
	if pick == nil {
		return Figure{}, "", false
	}
	worst := Figure{}
	for _, e := range s.Steady {
		if v := pick(e); v.OK && (!worst.OK || v.Value > worst.Value) {
			worst = v
		}
	}
	if !worst.OK {
		why = "no input of the file has this figure (peak and rms belong to a move or a file), or the loop is unstable"
	}
	return worst, why, true
}

// MetricUnit is the base unit of a metric by its name in requirements, "" for a plain number.
func MetricUnit(name string, u Units) string { return requirementUnit(name, u) }

// requirementUnit is the base unit in which a metric is compared and printed.
func requirementUnit(name string, u Units) string {
	switch name {
	case "step_error", "ramp_error", "parabola_error", "load_error", "ripple", "peak_tracking_error", "rms_tracking_error", "stuck_error", "limit_cycle":
		return u.Output
	case "phase_margin":
		return "deg"
	case "gain_margin":
		return "dB"
	case "delay_margin", "jitter_margin", "rise_time", "settling_time", "recovery_time":
		return "s"
	case "crossover", "bandwidth":
		return "rad/s"
	case "overshoot", "processor_load":
		return "%"
	case "peak_effort", "effort_noise":
		return u.Effort
	case "word_margin":
		return "bits"
	}
	return ""
}

// judge evaluates the requirements of the loop file on the sampled loop.
func judge(l *loop.Loop, c *Compare) {
	c.Requirements = []Requirement{}
	for _, r := range l.Requirements {
		v, why := metric(l, c, r.Name)
		v, why, from := worse(l, c, r, v, why)
		out := Requirement{Name: r.Name, Op: r.Op, Limit: r.Limit, Value: v, Unit: requirementUnit(r.Name, c.Units), From: from}
		switch {
		case !judged(r.Name):
			c.warn("requirement_not_judged", "requirement %q cannot be judged: %s", r.Text, why)
		case c.Sampled.Stable && failsAsBuilt(c, r.Name):
			met := false
			out.Met, out.Value, out.From = &met, Figure{}, asBuilt
		case !c.Sampled.Stable: // an unstable loop meets nothing, whatever its figures
			met := false
			out.Met = &met
		case v.OK && why == "":
			met := meets(v.Value, r.Op, r.Limit)
			out.Met = &met
		default:
			c.warn("requirement_not_judged", "requirement %q cannot be judged: %s", r.Text, why)
		}
		c.Requirements = append(c.Requirements, out)
	}
}

// meets compares; a NaN meets nothing.
func meets(v float64, op string, limit float64) bool {
	switch op {
	case "<=":
		return v <= limit
	case "<":
		return v < limit
	case ">=":
		return v >= limit
	case ">":
		return v > limit
	}
	return false
}

// errorMagnitude is for charts: finite or NaN.
func errorMagnitude(f Figure) float64 {
	if !f.OK || math.IsInf(f.Value, 0) {
		return math.NaN()
	}
	return math.Abs(f.Value)
}
