package study

import (
	"fmt"
	"math"
	"strings"

	"steadytick/discretize"
	"steadytick/internal/dd"
	"steadytick/internal/lti"
	"steadytick/loop"
)

func (a *analyzed) warn(code, format string, args ...any) {
	a.warnings = append(a.warnings, Warning{code, fmt.Sprintf(format, args...)})
}

func (c *Compare) warn(code, format string, args ...any) {
	c.Warnings = append(c.Warnings, Warning{code, fmt.Sprintf(format, args...)})
}

// warnings looks for what a reader of the figures must know.
func (c *Compare) collectWarnings(l *loop.Loop, cont, sampled *analyzed) {
	warnUnstable(c, cont, sampled)
	warnHidden(c, l, cont, sampled)
	warnSensor(c, l)
	warnReference(c, l)
	warnPathological(c, l)
	warnMaps(c, l)
	warnNyquist(c, l)
	warnNoFigure(c)
	for _, a := range []*analyzed{cont, sampled} {
		if a == nil {
			continue
		}
		c.Warnings = append(c.Warnings, a.warnings...)
		if !a.poles.Complete {
			c.warn("poles_incomplete", "%s column: a loop with delay has more poles than can be listed; the %d dominant ones found are given, and the argument count, not the list, decides on stability", a.name(), len(a.poles.X))
		}
	}
}

func (a *analyzed) name() string {
	if a.block.period == nil {
		return "continuous"
	}
	return "sampled"
}

func warnUnstable(c *Compare, cont, sampled *analyzed) {
	for _, a := range []*analyzed{cont, sampled} {
		if a == nil || a.stable {
			continue
		}
		worst := ""
		if len(a.poles.Equivalent) > 0 && (a.poles.Unstable > 0 || !a.byNyquist && a.byPoles) {
			p := a.poles.Equivalent[0]
			worst = fmt.Sprintf(" (rightmost pole %s rad/s)", complexText(p))
		}
		c.warn("unstable", "the %s loop is unstable%s: it has no steady error, and every figure that needs stability is left out", a.name(), worst)
	}
}

func complexText(p complex128) string {
	if imag(p) == 0 {
		return fmt.Sprintf("%.4g", real(p))
	}
	return fmt.Sprintf("%.4g ± %.4gj", real(p), math.Abs(imag(p)))
}

// warnHidden reports modes that cancel between the blocks of the loop: they do not
// show in the response from r to y, yet they live in the machine.
func warnHidden(c *Compare, l *loop.Loop, cont, sampled *analyzed) {
	if cont != nil {
		for _, p := range hiddenModes(cont.block.open) {
			reportHidden(c, "continuous", p, p.Re.Float64() < 0)
		}
	}
	for _, p := range hiddenModes(sampled.block.open) {
		if sampled.block.open.Period.Mul(p.Re) == dd.One.Neg() && p.Im.Sign() == 0 {
			continue // z = 0: a register that a zero of the map meets is no mode of the machine
		}
		z := dd.Complex{Re: dd.One.Add(sampled.block.open.Period.Mul(p.Re)), Im: sampled.block.open.Period.Mul(p.Im)}
		reportHidden(c, "sampled", z, lti.Inside(p, sampled.block.open.Period))
	}
}

func reportHidden(c *Compare, column string, p dd.Complex, stable bool) {
	if p.Im.Sign() < 0 {
		return // one line for a conjugate pair
	}
	variable := "s"
	if column == "sampled" {
		variable = "z"
	}
	if stable {
		c.warn("hidden_mode", "%s loop: a pole and a zero cancel at %s = %s; the mode decays, but the response from r to y does not show it; it can ring in the effort, between the ticks or after a disturbance", column, variable, complexText(p.Complex128()))
		return
	}
	c.warn("hidden_unstable_mode", "%s loop: stable only on paper. A pole and a zero cancel at %s = %s: the response from r to y hides a mode that does not decay, so the loop is counted as unstable", column, variable, complexText(p.Complex128()))
}

// warnSensor tells when the sensor makes the error constants mislead.
func warnSensor(c *Compare, l *loop.Loop) {
	h := leadingOf(l.Sensor.Model.Ratio)
	if h.c == nil {
		return
	}
	gain, _ := h.c.Float64()
	follows := c.Sampled.TrackingSeries[0].OK && c.Sampled.TrackingSeries[0].Value == 0 // a prefilter makes up for it
	if (h.order != 0 || gain != 1) && !follows {
		text := fmt.Sprintf("the sensor's gain at rest is %.6g, not 1", gain)
		if h.order != 0 {
			text = "the sensor passes nothing at rest, or integrates"
		}
		c.warn("sensor_gain", "%s: y follows r divided by it, so the tracking error r − y does not go to the loop error r − m; scale the reference or the sensor", text)
	}
	if _, static := staticSensor(l.Sensor); static || !oneDegree(l.Controller) {
		return // of two degrees of freedom see warnReference
	}
	for _, col := range []*Column{c.Continuous, c.Sampled} {
		if col == nil || !col.Stable || col.Type < 1 {
			continue
		}
		k := col.Type
		if k > 2 {
			k = 2
		}
		constant := map[int]Figure{1: col.VelocityConstant, 2: col.AccelerationConstant}[k]
		predicted := 1 / constant.Value
		if !constant.OK || math.Abs(col.TrackingSeries[1].Value-map[int]float64{1: predicted, 2: 0}[k]) <= 1e-9*math.Abs(predicted) {
			continue
		}
		name := "sampled"
		if col == c.Continuous {
			name = "continuous"
		}
		c.warn("sensor_dynamics", "%s loop: the sensor has dynamics, so the error constants predict the loop error r − m, not the tracking error r − y: per unit of slope the loop error is %.6g s, the tracking error %.6g s",
			name, col.LoopSeries[1].Value, col.TrackingSeries[1].Value)
		return
	}
}

// warnReference tells when a prefilter, a feedforward or a set-point weight makes the error constants
// mislead: they are those of the loop, which these do not pass.
func warnReference(c *Compare, l *loop.Loop) {
	if oneDegree(l.Controller) || !c.Sampled.Stable || c.Sampled.Type != 1 {
		return
	}
	s := c.Sampled
	predicted := 1 / s.VelocityConstant.Value
	if math.Abs(s.LoopSeries[1].Value-predicted) <= 1e-9*math.Abs(predicted) {
		return
	}
	c.warn("reference_path", "a prefilter, feedforward or set-point weight acts on r outside the loop, so 1/Kv = %.6g s predicts neither error: per unit of slope the loop error is %.6g s, the tracking error %.6g s", predicted, s.LoopSeries[1].Value, s.TrackingSeries[1].Value)
}

// warnStored tells when the study's rates change the controller itself.
func warnStored(c *Compare, l *loop.Loop, list []variant) {
	own, _, err := continuousTerms(l.Controller)
	if err != nil {
		return
	}
	for _, v := range list {
		if v.loop == nil || v.loop == l {
			continue
		}
		if other, _, err := continuousTerms(v.loop.Controller); err == nil && !other.Ratio.Sub(own.Ratio).IsZero() {
			c.warn("stored_gains", "Ki and Kd are stored with the period, so the lines at other rates run the stored numbers with another Ki and Kd: they show what the firmware would do at that rate, not what sampling costs")
			return
		}
	}
}

// warnPathological reports plant modes that the sample rate makes invisible.
func warnPathological(c *Compare, l *loop.Loop) {
	pairs, err := discretize.Pathological(l.Plant, l.Timing.Period)
	if err != nil {
		return // Hold has reported it
	}
	for _, p := range pairs {
		c.warn("pathological_rate", "pathological rate: the plant mode at %.6g rad/s swings through a whole number of half turns (%d) in each tick (to within %.2g rad), so the samples cannot see it or the effort cannot move it; change the rate",
			p.Frequency, p.K, p.Closeness)
	}
}

// warnMaps reports controller poles that a map moved out of the unit circle.
func warnMaps(c *Compare, l *loop.Loop) {
	for _, t := range l.Controller.Terms {
		for _, p := range t.Parts {
			warnMoved(c, l, p, "of term "+t.Name)
		}
	}
	if p := l.Controller.Prefilter; p != nil {
		warnMoved(c, l, *p, "of the prefilter")
	}
	if p := l.Controller.Feedforward; p != nil {
		warnMoved(c, l, *p, "of the feedforward")
	}
}

func warnMoved(c *Compare, l *loop.Loop, p loop.Part, whose string) {
	if p.Continuous == nil {
		return
	}
	m, err := mapPart(p, l.Timing.Period)
	if err != nil {
		return // the assembly has reported it
	}
	for _, v := range discretize.MovedOutside(*p.Continuous, m) {
		c.warn("map_moved_pole", "the %s map moves the stable controller pole s = %s %s to z = %s, outside the unit circle; use tustin or backward there, or a higher rate",
			p.Map.Method, complexText(v.S), whose, complexText(v.Z))
	}
}

// warnNyquist reports sines that the sampled loop cannot tell from slower ones.
func warnNyquist(c *Compare, l *loop.Loop) {
	for _, in := range l.Inputs {
		if in.Kind != "sine" {
			continue
		}
		w, _ := in.Frequency.Float64()
		if w*c.PeriodS >= math.Pi {
			c.warn("sine_above_half_rate", "the sine at %.6g rad/s lies at or above half the sample rate (%.6g rad/s): the ticks see a slower sine", w, math.Pi/c.PeriodS)
		}
	}
}

// warnNoFigure gives the reason for figures of a stable column that are null or infinite.
func warnNoFigure(c *Compare) {
	for _, x := range []struct {
		name string
		col  *Column
	}{{"continuous", c.Continuous}, {"sampled", c.Sampled}} {
		if x.col == nil || !x.col.Stable {
			continue
		}
		var missing []string
		add := func(f Figure, what, why string) {
			if !f.OK {
				missing = append(missing, what+" ("+why+")")
			}
		}
		add(x.col.CrossoverRadS, "crossover", "the loop gain never passes through 1, so phase and delay margin are infinite")
		add(x.col.BandwidthRadS, "bandwidth", "the response does not start from a finite gain at rest")
		add(x.col.Transient.SettlingTimeS, "step figures", "the step response has no final value other than zero, or did not settle in the simulated time")
		if len(missing) > 0 {
			c.warn("no_figure", "%s column, not applicable: %s", x.name, strings.Join(missing, "; "))
		}
	}
}
