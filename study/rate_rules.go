package study

import (
	"fmt"
	"math"
)

// rulesOfThumb sets common practice beside the computed window. The rules are figures recalled from several textbooks; none has one source.
func (j *rateJob) rulesOfThumb() error {
	j.r.Rules = []RuleOfThumb{}
	add := func(rule string, lo, hi float64) {
		if lo > 0 && !math.IsInf(hi, 0) && !math.IsNaN(hi) {
			j.r.Rules = append(j.r.Rules, RuleOfThumb{rule, Interval{Fig(lo), Fig(hi)}, j.against(lo, hi)})
		}
	}
	if rise, ok, err := j.continuousRise(); err != nil {
		return err
	} else if ok {
		add(fmt.Sprintf("4 to 10 samples in the rise time of the continuous loop (%s s)", number(rise)), 4/rise, 10/rise)
	}
	if j.cont.stable {
		if b := j.cont.bandwidth(); b.OK && !math.IsInf(b.Value, 0) {
			hz := b.Value / (2 * math.Pi)
			add(fmt.Sprintf("20 to 40 times the closed-loop bandwidth (%s)", hertzText(hz)), 20*hz, 40*hz)
		}
	}
	if j.cont.margins.HasCrossover {
		w := j.cont.margins.Crossover
		add(fmt.Sprintf("crossover (%s rad/s) times the tick from 0.5 down to 0.15", number(w)), w/0.5, w/0.15)
	}
	if ti := integralTime(j); ti > 0 {
		add(fmt.Sprintf("tick over integral time (%s s) from 0.3 down to 0.1", number(ti)), 1/(0.3*ti), 1/(0.1*ti))
	}
	return nil
}

// continuousRise is the rise time of the continuous loop, if it has one.
func (j *rateJob) continuousRise() (float64, bool, error) {
	if !j.cont.stable {
		return 0, false, nil
	}
	in, length := stepRun(j.l, j.cont, nil)
	f, _, err := twinFigures(j.ctx, j.l, in, length, j.cont.stepSpec(j.l, in))
	if err != nil {
		if j.ctx.Err() != nil {
			return 0, false, j.ctx.Err()
		}
		return 0, false, nil // too stiff to simulate: no rule then
	}
	return f.RiseTime.Value, f.RiseTime.OK && f.RiseTime.Value > 0, nil
}

// integralTime is Ti = Kp/Ki of a pid with both parts, seconds; 0 for none.
func integralTime(j *rateJob) float64 {
	var p, i float64
	for _, t := range j.l.Controller.Terms {
		if len(t.Parts) != 1 || t.Parts[0].Continuous == nil {
			continue
		}
		start, c := t.Parts[0].Continuous.Laurent(1)
		if len(c) == 0 {
			continue
		}
		v, _ := c[0].Float64()
		switch {
		case t.Name == "p" && start == 0:
			p = v
		case t.Name == "i" && start == -1:
			i = v
		}
	}
	if i == 0 || !(p/i > 0) {
		return 0
	}
	return p / i
}

// against says how a rule compares with the computed window.
func (j *rateJob) against(lo, hi float64) string {
	if len(j.window) == 0 {
		return "no rate works, whatever the rule says"
	}
	low, high := inSpans(j.window, lo), inSpans(j.window, hi)
	slowest := j.window[0].low
	switch {
	case low && high:
		if slowest > 0 && lo > 1.5*slowest {
			return fmt.Sprintf("works; the slowest rate that does is %s times slower than its lower end", number(lo/slowest))
		}
		return "works at both ends"
	case !low && high:
		return "its lower end is too slow for these requirements"
	case low && !high:
		return "its upper end is outside the window"
	case hi < slowest:
		return fmt.Sprintf("misleads here: too slow by a factor of %s at its upper end", number(slowest/hi))
	}
	return "misleads here: neither end works"
}
