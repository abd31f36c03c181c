package study

import (
	"math"
)

// drawnMetrics are the figures that the report draws over the rate: margins, then errors.
var drawnMetrics = []string{
	"phase_margin", "gain_margin", "modulus_margin", "delay_margin", "jitter_margin", "bandwidth",
	"step_error", "ramp_error", "parabola_error", "load_error", "ripple",
	"overshoot", "rise_time", "settling_time", "peak_effort", "peak_tracking_error", "rms_tracking_error",
}

// mostTimerRates bounds the realizable rates drawn as ticks.
const mostTimerRates = 100

// draw fills the curves of the report.
func (j *rateJob) draw() error {
	if !j.o.Curves {
		return nil
	}
	v := &RateCurves{}
	for i, c := range j.list {
		if j.judges(c) {
			v.Bars = append(v.Bars, RateBar{c.text, j.closed(j.spans[i])})
		}
	}
	v.Window = j.closed(j.window)
	if t := j.l.Timer; t != nil {
		v.TimerHz = timerList(t, j.lo, j.hi, mostTimerRates)
	}
	scans := append([]*rateScan{j.scan}, j.others...)
	for _, name := range drawnMetrics {
		if o := j.overRate(name, scans); len(o.Curves) > 0 {
			v.OverRate = append(v.OverRate, o)
		}
	}
	for _, f := range j.r.Folding {
		c := Curve{Name: f.Name}
		for _, p := range j.scan.points {
			c.X, c.Y = append(c.X, p.hz), append(c.Y, folded(f.FrequencyHz, p.hz))
		}
		v.Folding = append(v.Folding, c)
	}
	for _, m := range j.r.Maps {
		var list []rateSpan
		for _, s := range m.WindowHz {
			x := rateSpan{0, math.Inf(1)}
			if s.Low.OK {
				x.low = s.Low.Value
			}
			if s.High.OK {
				x.high = s.High.Value
			}
			list = append(list, x)
		}
		v.Maps = append(v.Maps, RateBar{m.Map, j.closed(list)})
	}
	j.r.Curves = v
	return nil
}

// closed puts the ends of the range in place of open ends.
func (j *rateJob) closed(spans []rateSpan) [][2]float64 {
	var out [][2]float64
	for _, s := range spans {
		if x := [2]float64{math.Max(s.low, j.lo), math.Min(s.high, j.hi)}; x[0] <= x[1] {
			out = append(out, x)
		}
	}
	return out
}

// overRate is one figure over the rate under each map, where the loop is stable and the figure finite.
func (j *rateJob) overRate(name string, scans []*rateScan) OverRate {
	o := OverRate{Metric: name, Unit: requirementUnit(name, j.r.Units)}
	for _, w := range scans {
		c := Curve{Name: w.m.name}
		for _, p := range w.points {
			if !p.stable() || !p.has(needsOf(name)) {
				continue
			}
			f, _ := metric(p.loop, p.c, name)
			if f.OK && !math.IsInf(f.Value, 0) {
				c.X, c.Y = append(c.X, p.hz), append(c.Y, f.Value)
			}
		}
		if len(c.X) > 1 {
			o.Curves = append(o.Curves, c)
		}
	}
	for _, r := range j.l.Requirements {
		if r.Name == name && !math.IsInf(r.Limit, 0) {
			o.Limits = append(o.Limits, LimitLine{r.Op, r.Limit})
		}
	}
	return o
}
