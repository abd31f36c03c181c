package study

import (
	"context"
	"errors"

	"steadytick/internal/dd"
	"steadytick/loop"
	"steadytick/sim"
)

// transients fills the step figures of both columns, at the size of the first step of
// the file (1 without one) and with the actuator's limits.
func transients(ctx context.Context, l *loop.Loop, c *Compare, cont, sampled *analyzed) error {
	in, length := stepRun(l, cont, sampled)
	if cont != nil && cont.stable {
		f, u, err := twinFigures(ctx, l, in, length, cont.stepSpec(l, in))
		switch {
		case errors.Is(err, sim.ErrTwinLength):
			c.warn("no_continuous_simulation", "%s: the continuous column has no step figures and no curves", tooLongForTwin)
		case err != nil:
			return err
		default:
			c.Continuous.Transient = transientOf(f)
			warnSaturation(c, l, "continuous", u)
		}
	}
	return sampledTransient(ctx, l, c, cont, sampled)
}

// stepRun is the step that the step figures belong to, and how long it is run.
func stepRun(l *loop.Loop, cont, sampled *analyzed) (in loop.Input, length float64) {
	in = loop.Input{Kind: "step", Size: 1}
	for _, x := range l.Inputs {
		if x.Kind == "step" && x.Size != 0 {
			in = x
			break
		}
	}
	return in, cut(l, stepLonger*horizon(l, in, cont, sampled), mostTicksStep)
}

// sampledTransient fills the step figures of the sampled column.
func sampledTransient(ctx context.Context, l *loop.Loop, c *Compare, cont, sampled *analyzed) error {
	if !sampled.stable {
		return nil
	}
	in, length := stepRun(l, cont, sampled)
	cfg, err := sampledConfig(l, sampled.block, in, length)
	if err != nil {
		return err
	}
	f, trace, err := sim.StepFigures(ctx, cfg, sampled.stepSpec(l, in))
	if err != nil {
		return err
	}
	c.Sampled.Transient = transientOf(f)
	warnSaturation(c, l, "sampled", trace.U)
	return nil
}

// stepSpec asks for figures about the final value (1 − c0)·size.
func (a *analyzed) stepSpec(l *loop.Loop, in loop.Input) sim.StepSpec {
	return sim.StepSpec{Final: dd.One.Sub(a.trackingDD[0]).Float64() * in.Size, Band: l.SettlingBand}
}

func transientOf(f sim.Figures) Transient {
	fig := func(m sim.Maybe) Figure { return Figure{m.Value, m.OK} }
	t := Transient{
		OvershootPercent: fig(f.OvershootPercent), RiseTimeS: fig(f.RiseTime),
		SettlingTimeS: fig(f.SettlingTime), PeakTimeS: fig(f.PeakTime), PeakEffort: fig(f.PeakEffort),
		RecoveryTimeS: fig(f.RecoveryTime),
	}
	if !t.SettlingTimeS.OK { // the highest value may be still to come
		t.OvershootPercent, t.PeakTimeS = Figure{}, Figure{}
	}
	return t
}

// atLimit tells whether an effort lies at a limit of the actuator.
func atLimit(l *loop.Loop, u float64) bool {
	limits := l.Actuator.Limits
	if limits == nil {
		return false
	}
	near := 1e-9 * (limits[1] - limits[0])
	return u <= limits[0]+near || u >= limits[1]-near
}

// warnAtLimit tells that the simulation of input i ends with the effort at a limit, so that
// the machine does not reach the steady figures, which are those of the linear loop.
func (c *Compare) warnAtLimit(l *loop.Loop, i int) {
	if c.Sampled.Steady[i].AtLimit {
		c.warn("steady_at_limit", "%s: the simulation ends with the effort at its limit: the steady figures are those of the linear loop, which this machine does not reach; errors of that input are not judged", inputTitle(l, l.Inputs[i]))
	}
}

// warnSaturation tells when the step takes the effort, u at its instants, to a limit of the actuator: the
// figures are then not those of the linear loop.
func warnSaturation(c *Compare, l *loop.Loop, column string, u []float64) {
	for _, v := range u {
		if atLimit(l, v) {
			c.warn("effort_saturates", "%s column: the step takes the effort to its limit (%.6g %s): overshoot, rise and settling are those of the limited loop at this size of step, not of the linear one", column, v, l.Effort)
			return
		}
	}
}
