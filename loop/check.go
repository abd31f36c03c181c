package loop

import (
	"fmt"
	"math/big"
	"strings"

	"steadytick/sdomain"
)

// maxTicks bounds all delay together, in ticks.
const maxTicks = 1_000_000

// check looks at what several sections say together. Every section by itself is fine.
func (r *reader) check(l *Loop, top *section) {
	r.checkTiming(l, top)
	r.checkMeasured(l, top)
	r.checkPeriodUsed(l, top)
	r.checkProcessor(l, top)
	r.checkWindup(l, top)
	r.checkReference(l, top)
	r.checkDelay(l, top)
	r.checkSampledLoop(l, top)
	r.checkContinuousLoop(l, top)
}

// within is the place of a key of a section, the section's own place when it has none.
func within(top *section, name, key string) place {
	e, ok := top.values[name]
	if !ok {
		return top.at
	}
	return e.find(key).at
}

// find is the entry of a key within e, e itself where there is none.
func (e entry) find(key string) entry {
	if e.value != nil {
		for _, x := range e.value.entries {
			if x.key == key {
				return x
			}
		}
	}
	return e
}

// checkTiming: what happens between the sample and the update fits the tick.
func (r *reader) checkTiming(l *Loop, top *section) {
	t := l.Timing
	work := new(big.Rat).Add(t.Conversion, t.Compute)
	work.Add(work, t.Latency)
	parts := []string{"conversion", "compute"}
	if t.Latency.Sign() > 0 {
		parts = []string{"conversion", "latency", "compute"}
	}
	at := within(top, "timing", "compute")
	for _, key := range []string{"conversion", "latency"} {
		if at == within(top, "timing", "") {
			at = within(top, "timing", key)
		}
	}
	if work.Cmp(t.Period) > 0 {
		last := len(parts) - 1
		r.report(at, fmt.Sprintf("%s and %s take %s, longer than the tick of %s", list(parts[:last]), parts[last], showSeconds(work), showSeconds(t.Period)),
			"a slower rate, or less to do in one tick")
	}
	if t.Update == After && t.UpdateAfter.Cmp(work) < 0 {
		r.report(within(top, "timing", "update"), fmt.Sprintf("the update comes %s after the sample, before the effort is known at %s",
			showSeconds(t.UpdateAfter), showSeconds(work)), "after: "+strings.Join(parts, " + ")+" or more")
	}
	for _, j := range []struct {
		key, what string
		peak      *big.Rat
	}{{"jitter", "samples", t.Jitter}, {"update_jitter", "updates", t.UpdateJitter}} {
		if twice := new(big.Rat).Add(j.peak, j.peak); twice.Cmp(t.Period) >= 0 {
			r.report(within(top, "timing", j.key), fmt.Sprintf("with a jitter of %s peak the %s of a tick of %s can change order",
				showSeconds(j.peak), j.what, showSeconds(t.Period)), "less than half a tick")
		}
	}
}

func (r *reader) checkWindup(l *Loop, top *section) {
	if l.Controller.AntiWindup.Kind != "none" && l.Actuator.Limits == nil {
		r.report(within(top, "controller", "anti_windup"), "anti_windup without limits of the actuator",
			"actuator: {limits: [low, high]}")
	}
}

// checkReference: the reference must reach the effort somehow.
func (r *reader) checkReference(l *Loop, top *section) {
	for _, t := range l.Controller.Terms {
		if t.Weight.Sign() != 0 {
			return
		}
	}
	if l.Controller.Feedforward == nil {
		r.report(within(top, "controller", "pid"), "the reference has no effect: every part with a weight acts on the measurement only",
			"an integral part, a setpoint_weight above 0 or a feedforward")
	}
}

// deadTime is the dead time of plant and sensor together, seconds.
func (l *Loop) deadTime() *big.Rat {
	sum := new(big.Rat)
	for _, m := range []sdomain.Model{l.Plant, l.Sensor.Model} {
		if m.Delay != nil {
			sum.Add(sum, m.Delay)
		}
	}
	return sum
}

func (r *reader) checkDelay(l *Loop, top *section) {
	_, most := l.delays()
	ticks := new(big.Rat).Add(l.deadTime(), most)
	ticks.Quo(ticks, l.Timing.Period)
	if ticks.Cmp(big.NewRat(maxTicks, 1)) > 0 {
		f, _ := ticks.Float64()
		r.report(within(top, "plant", "dead_time"), fmt.Sprintf("all delay together is %.7g ticks", f),
			fmt.Sprintf("at most %d ticks: a slower rate, or less dead time", maxTicks))
	}
}

// direct reports whether plant and sensor pass a jump of u to m at once.
func (l *Loop) direct() bool {
	return l.Plant.RelativeDegree() == 0 && l.Sensor.Model.RelativeDegree() == 0 && l.deadTime().Sign() == 0
}

// feedthrough reports whether the part answers in the same tick, once digital. The maps
// forward and hold keep a strictly proper model so; every other map gives it a direct
// part (for some parameters that part is zero; such a loop is refused all the same).
func (p Part) feedthrough() bool {
	if p.Digital != nil {
		return p.Digital.RelativeDegree() == 0
	}
	return p.Continuous.RelativeDegree() == 0 || p.Map.Method != "forward" && p.Map.Method != "hold"
}

// checkSampledLoop refuses a loop in which the effort of a tick needs the sample that it
// changes itself.
func (r *reader) checkSampledLoop(l *Loop, top *section) {
	if least, _ := l.delays(); !l.direct() || least.Sign() != 0 {
		return
	}
	for _, t := range l.Controller.Terms {
		through := true
		for _, p := range t.Parts {
			through = through && p.feedthrough()
		}
		if through {
			r.report(within(top, "timing", "compute"), "algebraic loop: plant and sensor answer at once, and no time passes from the sample to the update",
				"a compute time, update: next_tick, or a lag in the plant or the sensor")
			return
		}
	}
}

// checkContinuousLoop refuses 1 + C·P·H = 0 at infinite frequency, where the equations of
// the continuous loop have no solution.
func (r *reader) checkContinuousLoop(l *Loop, top *section) {
	if l.Controller.Digital || !l.direct() {
		return
	}
	sum := new(big.Rat)
	for _, t := range l.Controller.Terms {
		v := big.NewRat(1, 1)
		for _, p := range t.Parts {
			v.Mul(v, atInfinity(p.Continuous.Ratio))
		}
		sum.Add(sum, v)
	}
	sum.Mul(sum, atInfinity(l.Plant.Ratio))
	sum.Mul(sum, atInfinity(l.Sensor.Model.Ratio))
	if sum.Cmp(big.NewRat(-1, 1)) == 0 {
		r.report(within(top, "controller", "model"), "algebraic loop: at high frequency controller, plant and sensor multiply to -1, so that the continuous loop has no solution",
			"another gain, or a lag in the plant or the sensor")
	}
}
