package study

import (
	"fmt"
	"math"

	"steadytick/internal/lti"
	"steadytick/loop"
)

// kindOrder is the order of a polynomial input: a loop of that type follows it with a constant error.
var kindOrder = map[string]int{"step": 0, "ramp": 1, "parabola": 2}

// steadyCause is for the steady error of a step, ramp or parabola.
func steadyCause(l *loop.Loop, c *Compare, r GateRequirement) *GateCause {
	kind := map[string]string{"step_error": "step", "ramp_error": "ramp", "parabola_error": "parabola"}[r.Name]
	s := steadyOfKind(c, kind)
	switch {
	case r.Op != "<=" && r.Op != "<":
		return otherwise(c, r)
	case math.IsInf(r.Value.Value, 0):
		return growingCause(l, c, r, s)
	case meets(math.Abs(s.TrackingError.Value), r.Op, r.Limit.Value):
		return causef("ripple", "at the ticks the error is %s and would meet it; the held effort leaves %s of ripple between them, which a faster rate makes smaller",
			r.withUnit(absFigure(s.TrackingError)), r.withUnit(s.Ripple))
	case meets(math.Abs(s.LoopError.Value), r.Op, r.Limit.Value):
		return besideTheLoop(l, r, s)
	}
	return typeCause(l, c, r, s)
}

// otherwise compares with the continuous loop where nothing nearer is known.
func otherwise(c *Compare, r GateRequirement) *GateCause {
	if designMisses(c, r) {
		return designCause(c, r)
	}
	if !r.Continuous.OK {
		return lagCause(c, lagOf(c), "")
	}
	return causef("sampling", "sampling moves it from %s to %s", r.withUnit(r.Continuous), r.withUnit(r.Value))
}

func steadyOfKind(c *Compare, kind string) Steady {
	for _, s := range c.Sampled.Steady {
		if s.Input == kind {
			return s
		}
	}
	return Steady{}
}

// growingCause is for an error without bound: too low a type, or something outside the loop that keeps y from
// following although the loop error stays.
func growingCause(l *loop.Loop, c *Compare, r GateRequirement, s Steady) *GateCause {
	if s.LoopError.OK && !math.IsInf(s.LoopError.Value, 0) {
		return besideTheLoop(l, r, s)
	}
	missing := kindOrder[s.Input] - c.Sampled.Type
	if missing <= 0 && !oneDegree(l.Controller) {
		return referenceCause(c, r)
	}
	if missing <= 0 {
		return otherwise(c, r)
	}
	g := causef("type", "a loop of type %d cannot follow a %s, the error grows without bound: it takes %s in the controller", c.Sampled.Type, s.Input, integrators(missing))
	g.Text += sameInContinuous(c, r)
	return g
}

func integrators(n int) string {
	if n == 1 {
		return "one more integrator"
	}
	return fmt.Sprintf("%d more integrators", n)
}

// sameInContinuous says that the continuous loop misses the requirement too.
func sameInContinuous(c *Compare, r GateRequirement) string {
	if !designMisses(c, r) || !c.Continuous.Stable {
		return ""
	}
	if has := r.withUnit(r.Continuous); has != r.withUnit(r.Value) {
		return fmt.Sprintf("; the continuous loop has %s and misses it too, so no sample rate helps", has)
	}
	return "; the continuous loop has the same, so no sample rate helps"
}

// besideTheLoop is for a tracking error that the loop error r − m does not show: the sensor makes the difference.
func besideTheLoop(l *loop.Loop, r GateRequirement, s Steady) *GateCause {
	loopError := fmt.Sprintf("the loop error r − m, which the firmware sees, is %s", r.withUnit(absFigure(s.LoopError)))
	if meets(math.Abs(s.LoopError.Value), r.Op, r.Limit.Value) {
		loopError += " and would meet it"
	}
	tracking := "the tracking error r − y " + r.withUnit(absFigure(s.TrackingError))
	if math.IsInf(s.TrackingError.Value, 0) {
		tracking = "the tracking error r − y grows without bound"
	}
	why := "the sensor stands between y and m"
	if lag := sensorLag(l); lag != 0 {
		why = fmt.Sprintf("the sensor's lag of %s stands between y and m", timeText(lag))
	}
	if gain, ok := sensorGain(l); ok && gain != 1 {
		why = fmt.Sprintf("the sensor's gain at rest is %s, not 1", number(gain))
	}
	return causef("sensor", "%s, %s: %s", loopError, tracking, why)
}

// referenceCause is for an error that no gain of the loop sets alone.
func referenceCause(c *Compare, r GateRequirement) *GateCause {
	return causef("reference", "a prefilter, feedforward or set-point weight acts on r outside the loop, so the error is not that of the loop's type and gain at rest alone%s", sameInContinuous(c, r))
}

// unitSensor tells whether m = y.
func unitSensor(l *loop.Loop) bool {
	g, static := staticSensor(l.Sensor)
	if !static {
		return false
	}
	f, exact := g.Float64()
	return exact && f == 1
}

// sensorGain is the sensor's gain at rest; false where it is not finite or zero.
func sensorGain(l *loop.Loop) (float64, bool) {
	h := leadingOf(l.Sensor.Model.Ratio)
	if h.c == nil || h.order != 0 {
		return 0, false
	}
	g, _ := h.c.Float64()
	return g, true
}

// sensorLag is the sensor's lag at rest in seconds, 0 for a static one.
func sensorLag(l *loop.Loop) float64 {
	if _, static := staticSensor(l.Sensor); static {
		return 0
	}
	return sensorItem(l, 0, false).Seconds
}

// typeCause is for the constant error of a loop whose type is the order of the input,
//
//	step      size/(1 + Kp)    type 0
//	ramp      slope/Kv         type 1
//	parabola  acceleration/Ka  type 2
//
// which is the loop error of a controller that acts on r − m alone.
func typeCause(l *loop.Loop, c *Compare, r GateRequirement, s Steady) *GateCause {
	n := c.Sampled.Type
	if !oneDegree(l.Controller) {
		return referenceCause(c, r)
	}
	if n != kindOrder[s.Input] {
		return otherwise(c, r)
	}
	formula := map[string]string{
		"step":     fmt.Sprintf("size/(1 + Kp) = %s/(1 + %s)", number(s.Size.Value), number(c.Sampled.PositionConstant.Value)),
		"ramp":     fmt.Sprintf("slope/Kv = %s/%s", number(s.Size.Value), number(c.Sampled.VelocityConstant.Value)),
		"parabola": fmt.Sprintf("acceleration/Ka = %s/%s", number(s.Size.Value), number(c.Sampled.AccelerationConstant.Value)),
	}[s.Input]
	which := "error"
	if !unitSensor(l) {
		which = "loop error r − m"
	}
	g := causef("type", "a loop of type %d has a steady %s %s of %s = %s: another integrator or more gain at rest", n, s.Input, which, formula, r.withUnit(absFigure(s.LoopError)))
	if lag := sensorLag(l); lag != 0 {
		g.Text += fmt.Sprintf("; the sensor's lag of %s makes the tracking error %s", timeText(lag), r.withUnit(absFigure(s.TrackingError)))
	}
	g.Text += sameInContinuous(c, r)
	return g
}

// loadCause is for the steady error under a load step.
func loadCause(l *loop.Loop, c *Compare, r GateRequirement) *GateCause {
	if _, sampled, err := bothColumns(l, &Compare{}); err == nil && (r.Op == "<=" || r.Op == "<") {
		if order, _ := lti.Leading(sampled.block.sys.Cm); order >= 0 {
			g := causef("type", "nothing in the controller integrates, so a constant load leaves an error: an integrator in the controller removes it, more gain at rest makes it smaller")
			g.Text += sameInContinuous(c, r)
			return g
		}
	}
	return otherwise(c, r)
}

// constantCause is for Kp, Kv and Ka.
func constantCause(c *Compare, r GateRequirement) *GateCause {
	order := map[string]int{"position_constant": 0, "velocity_constant": 1, "acceleration_constant": 2}[r.Name]
	n := c.Sampled.Type
	if r.Op == "<=" || r.Op == "<" {
		return otherwise(c, r)
	}
	var g *GateCause
	switch {
	case n < order:
		g = causef("type", "in a loop of type %d it is 0: it takes %s", n, integrators(order-n))
	case n == order:
		g = causef("type", "in a loop of type %d it is the gain at rest: more gain there, or another integrator, which makes it infinite", n)
	default:
		return otherwise(c, r)
	}
	g.Text += sameInContinuous(c, r)
	return g
}

// rippleCause is for the metric ripple: the worst input.
func rippleCause(c *Compare, r GateRequirement) *GateCause {
	worst := Steady{}
	for _, s := range c.Sampled.Steady {
		if s.Ripple.OK && s.Ripple == r.Value {
			worst = s
			break
		}
	}
	what := InputLabel(worst, c.Units)
	if math.IsInf(r.Value.Value, 1) {
		return causef("ripple", "under the %s the steps of the held effort grow for ever, and the ripple with them: the loop must not be asked to follow it for ever, or the plant needs an integrator", what)
	}
	return causef("ripple", "the held effort leaves it between the ticks under the %s, where the continuous loop has none: a faster rate makes it smaller", what)
}
