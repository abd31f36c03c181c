package study

import (
	"fmt"
	"math"

	"steadytick/loop"
)

// GateCause is what a missed requirement points at.
type GateCause struct {
	// Kind is one of
	//
	//	design      the continuous loop misses it as well: no sample rate helps
	//	sampling    hold, conversion, compute, waiting, or the controller map
	//	type        integrators or gain at rest are missing
	//	sensor      the sensor stands between y and what the firmware sees
	//	reference   prefilter, feedforward or set-point weight
	//	ripple      what lives between the ticks
	//	actuator    the effort reaches its limit
	//	processor   the compute time
	//	hardware    the sampled loop meets it; the words, noise, ticks and mechanics that the file declares do not
	//	words       the word lengths and the noise of the sensor, or what sticks at rest
	//	unstable    the loop is unstable and meets nothing
	Kind string `json:"kind"`
	Text string `json:"text"`

	// The largest entry of the delay ledger that sampling brought in, where lag is the cause.
	Item    string `json:"item"` // "" where it is not
	Seconds Figure `json:"seconds"`
	Degrees Figure `json:"degrees"`
}

func causef(kind, format string, args ...any) *GateCause {
	return &GateCause{Kind: kind, Text: fmt.Sprintf(format, args...)}
}

// causeOf finds the nearest cause of a missed requirement. The continuous column is the witness: what it misses
// too is not the doing of sampling.
func causeOf(l *loop.Loop, c *Compare, r GateRequirement) *GateCause {
	if !c.Sampled.Stable {
		return causef("unstable", "the loop is unstable: it meets no requirement, whatever its figures")
	}
	if alone, why := metric(l, c, r.Name); r.From == asBuilt && alone.OK && why == "" && meets(alone.Value, r.Op, r.Limit.Value) {
		return causef("hardware", "the sampled loop alone has %s and meets it: what the file declares of the hardware makes the difference", r.withUnit(alone))
	}
	switch r.Name {
	case "effort_noise":
		return causef("words", "the noise and the codes of the sensor reach the effort with the gain of the controller: a finer sensor, a slower or more filtered derivative, or less gain at high frequency")
	case "stuck_error", "limit_cycle":
		return causef("words", "codes, dead zone, friction or play hold the loop off its place: finer codes, or an integrator where a stuck error is the matter; none of them is cured by the sample rate alone")
	case "step_error", "ramp_error", "parabola_error":
		return steadyCause(l, c, r)
	case "load_error":
		return loadCause(l, c, r)
	case "position_constant", "velocity_constant", "acceleration_constant":
		return constantCause(c, r)
	case "ripple":
		return rippleCause(c, r)
	case "peak_tracking_error", "rms_tracking_error":
		return followCause(l, c, r)
	case "overshoot", "rise_time", "settling_time", "peak_effort", "recovery_time":
		return stepCause(l, c, r)
	case "samples_per_rise":
		return samplesCause(c, r)
	case "processor_load":
		return processorCause(c, r)
	}
	return marginCause(c, r)
}

// designMisses tells whether the continuous loop misses the requirement as well.
func designMisses(c *Compare, r GateRequirement) bool {
	switch {
	case c.Continuous == nil:
		return false
	case !c.Continuous.Stable:
		return true
	}
	return r.Continuous.OK && !meets(r.Continuous.Value, r.Op, r.Limit.Value)
}

// designCause says that the design is the cause, and what sampling adds to it.
func designCause(c *Compare, r GateRequirement) *GateCause {
	if !c.Continuous.Stable {
		return causef("design", "the continuous loop is unstable: mend the design before the sample rate")
	}
	g := causef("design", "the continuous loop has %s and misses it too: the design, not the sampling", r.withUnit(r.Continuous))
	before, after := r.Continuous.Value, r.Value.Value
	worse := after < before
	if r.Op == "<=" || r.Op == "<" {
		worse = after > before
	}
	if by := math.Abs(after - before); worse && !math.IsInf(by, 0) && by > 1e-3*math.Abs(before) {
		g.Text += fmt.Sprintf("; sampling takes another %s", r.withUnit(Fig(by)))
	}
	return g
}

// marginCause is for what lag takes from: margins, crossover and bandwidth.
func marginCause(c *Compare, r GateRequirement) *GateCause {
	lag := lagOf(c)
	switch r.Name {
	case "gain_margin":
		lag = lagAt(c, gainMarginRadS(c.Sampled), "where the gain margin is taken")
	case "modulus_margin":
		lag = lagAt(c, nearestRadS(c.Sampled), "the crossing nearest to −1")
	}
	if designMisses(c, r) {
		g := designCause(c, r)
		if short := math.Abs(r.Continuous.Value - r.Limit.Value); lag.worst.Item != "" && math.Abs(r.Value.Value-r.Continuous.Value) > short {
			g.Text += ": " + lag.text()
			g.blame(lag.worst)
		}
		return g
	}
	text := ""
	if r.Continuous.OK {
		text = fmt.Sprintf("the continuous loop has %s; ", r.withUnit(r.Continuous))
	}
	if r.Name == "crossover" {
		text += "the hold and the controller map move it, a pure delay does not; "
	}
	return lagCause(c, lag, text)
}

// gainMarginRadS is the phase crossing that gives the gain margin, 0 when there is none.
func gainMarginRadS(c *Column) float64 {
	for _, p := range c.PhaseCrossings {
		if p.MarginDB == c.GainMarginDB {
			return p.RadS
		}
	}
	return 0
}

// nearestRadS is the crossing of either kind at which L comes nearest to −1, 0 when there is none:
//
//	abs(1 + L) = 2·sin(margin/2)  where abs(L) = 1,   abs(1 − gain)  where the phase is −180°
func nearestRadS(c *Column) float64 {
	at, least := 0.0, math.Inf(1)
	for _, g := range c.GainCrossings {
		if d := 2 * math.Abs(math.Sin(g.MarginDeg.Value*degree/2)); d < least {
			at, least = g.RadS, d
		}
	}
	for _, p := range c.PhaseCrossings {
		if d := math.Abs(1 - p.Gain); d < least {
			at, least = p.RadS, d
		}
	}
	return at
}

// text is the lag in a sentence.
func (a addedLag) text() string {
	return fmt.Sprintf("sampling adds %s° of lag at %s, the largest part by the %s (%s, %s°)",
		number(a.total), a.at, a.worst.Item, timeText(a.worst.Seconds), number(a.worst.Degrees.Value))
}

// blame names an entry of the ledger.
func (g *GateCause) blame(i LedgerItem) {
	g.Item, g.Seconds, g.Degrees = i.Item, Fig(i.Seconds), i.Degrees
}

// lagCause is the largest entry of the delay ledger that sampling brought in, after an introduction.
func lagCause(c *Compare, lag addedLag, before string) *GateCause {
	if lag.worst.Item != "" {
		g := causef("sampling", "%s", before+lag.text())
		g.blame(lag.worst)
		return g
	}
	longest := longestDelay(c)
	if longest.Seconds <= 0 || c.Sampled.CrossoverRadS.OK {
		return causef("sampling", "%s", before+"hold and controller map change the loop's response, though they add no lag at crossover")
	}
	g := causef("sampling", "%sthe longest delay that sampling brought in is the %s (%s); there is no crossover to count its degrees at", before, longest.Item, timeText(longest.Seconds))
	g.blame(longest)
	return g
}

// longestDelay is the longest entry of the ledger that sampling brought in.
func longestDelay(c *Compare) LedgerItem {
	var worst LedgerItem
	for _, i := range c.DelayLedger {
		if i.Item != itemDeadTime && i.Item != itemSensor && i.Item != itemMap && i.Seconds > worst.Seconds {
			worst = i
		}
	}
	return worst
}

// stableCauses are the warnings that explain instability by themselves, nearest first.
var stableCauses = []struct{ code, kind string }{
	{"hidden_unstable_mode", "design"},
	{"unstable_outside_loop", "reference"},
	{"map_moved_pole", "sampling"},
	{"verdicts_disagree", "sampling"},
}

// stableCause says why the sampled loop is unstable.
func stableCause(c *Compare) *GateCause {
	if c.Continuous != nil && !c.Continuous.Stable {
		return causef("design", "the continuous loop is unstable too: mend the design before the sample rate")
	}
	for _, x := range stableCauses {
		for _, w := range c.Warnings {
			if w.Code == x.code {
				return causef(x.kind, "%s", w.Text)
			}
		}
	}
	cont := c.Continuous
	if half := math.Pi / c.PeriodS; cont != nil && cont.CrossoverRadS.OK && cont.CrossoverRadS.Value >= half {
		return causef("sampling", "the continuous loop crosses over at %s rad/s, above half the sample rate (%s rad/s)",
			number(cont.CrossoverRadS.Value), number(half))
	}
	text := ""
	if cont != nil && cont.PhaseMarginDeg.OK {
		text = fmt.Sprintf("the continuous loop is stable with %s° of phase margin; ", number(cont.PhaseMarginDeg.Value))
	}
	return lagCause(c, lagOf(c), text)
}
