package loop

import (
	"fmt"
	"math"
	"math/big"
)

// Bounds of a measured interval, in nominal periods: anything outside is a file of another loop, or has other units.
const leastInterval, mostInterval = 0.01, 100

// measured reads a file of tick times. The period in force is known, or wrong and reported.
func (r *reader) measured(t *Timing, s *section) {
	n := s.get("measured")
	if n == nil {
		return
	}
	s.together("jitter", "measured")
	headers := []string{"interval_s", "interval_s,delay_s"}
	name, src, ok := r.openCSV(n, headers[0]+" or "+headers[1])
	if !ok {
		return
	}
	m := &Measured{File: name}
	period := math.NaN()
	if r.period != nil {
		period, _ = r.period.Float64()
	}
	shape := csvShape{headers: headers, least: 1, most: maxRows, row: "the interval between two samples in s, and with delay_s the time from the sample to the update in s"}
	header, ok := r.csv(name, src, shape, func(v []float64) (message, expected string) { return m.add(v, period) })
	if !ok {
		return
	}
	if header == headers[1] && s.has("update_jitter") {
		r.report(s.keyAt("update_jitter"), "update_jitter beside measured delays", "no update_jitter: the file of measured has the column delay_s")
	}
	t.Measured = m
}

// add takes a row. It tells what is wrong with it, "" for nothing. A period of NaN is not known.
func (m *Measured) add(v []float64, period float64) (message, expected string) {
	interval := v[0]
	switch {
	case interval <= 0:
		return "the interval is not above zero", "the time between two samples, in s"
	case interval < leastInterval*period || interval > mostInterval*period:
		return fmt.Sprintf("an interval of %.6g s in a loop with a tick of %.6g s", interval, period),
			fmt.Sprintf("%g to %g ticks: the file and timing must belong together, and intervals are in s", leastInterval, float64(mostInterval))
	case len(v) > 1 && v[1] < 0:
		return "the delay is negative", "the time from the sample to the update, in s"
	case len(v) > 1 && v[1] > maxTicks*period:
		return fmt.Sprintf("a delay of %.6g s in a loop with a tick of %.6g s", v[1], period), fmt.Sprintf("at most %d ticks", maxTicks)
	}
	if len(m.Interval) == 0 {
		m.shortest = interval
		if len(v) > 1 {
			m.soonest = v[1]
		}
	}
	m.Interval = append(m.Interval, interval)
	m.shortest, m.longest = math.Min(m.shortest, interval), math.Max(m.longest, interval)
	if len(v) > 1 {
		m.Delay = append(m.Delay, v[1])
		m.soonest, m.latest = math.Min(m.soonest, v[1]), math.Max(m.latest, v[1])
	}
	return "", ""
}

// checkMeasured: what was measured can belong to the tick, which the options may have changed since the file was read.
func (r *reader) checkMeasured(l *Loop, top *section) {
	m := l.Timing.Measured
	if m == nil {
		return
	}
	period, _ := l.Timing.Period.Float64()
	if m.shortest < leastInterval*period || m.longest > mostInterval*period {
		r.report(within(top, "timing", "measured"), fmt.Sprintf("measured intervals from %.6g s to %.6g s do not belong to a tick of %s",
			m.shortest, m.longest, showSeconds(l.Timing.Period)), fmt.Sprintf("%g to %g ticks", leastInterval, float64(mostInterval)))
	}
}

// delays are the shortest and the longest time from a sample to its update, without jitter.
func (l *Loop) delays() (least, most *big.Rat) {
	m := l.Timing.Measured
	if m == nil || m.Delay == nil {
		d := l.Timing.LoopDelay()
		return d, d
	}
	return new(big.Rat).SetFloat64(m.soonest), new(big.Rat).SetFloat64(m.latest)
}
