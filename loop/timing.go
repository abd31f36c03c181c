package loop

import (
	"fmt"
	"math/big"
)

// timing reads the time-line of a tick. It reports whether the period is known.
func (r *reader) timing(t *Timing, top *section) bool {
	*t = Timing{Period: big.NewRat(1, 1), Conversion: new(big.Rat), Compute: new(big.Rat), Jitter: new(big.Rat),
		Latency: new(big.Rat), UpdateJitter: new(big.Rat)}
	n := top.need("timing", "timing: with rate or period")
	if n == nil {
		return false
	}
	s, broken := r.section(n, "timing", "rate", "period", "conversion", "compute", "update", "jitter",
		"latency", "update_jitter", "measured", "missed", "stale", "period_used")
	if broken {
		return false
	}
	r.timingAt = s.keyAt("rate")
	if s.has("period") {
		r.timingAt = s.keyAt("period")
	}
	known := r.tick(s, &t.Period)
	if known {
		r.filePeriod, r.period = t.Period, t.Period
		r.overridePeriod(t)
	}
	for key, v := range map[string]**big.Rat{"conversion": &t.Conversion, "compute": &t.Compute, "jitter": &t.Jitter,
		"latency": &t.Latency, "update_jitter": &t.UpdateJitter} {
		if x, ok := r.seconds(s.get(key), key); ok {
			*v = x
		}
	}
	r.update(t, s.get("update"))
	r.measured(t, s)
	t.Missed = r.chance(s.get("missed"), "missed")
	t.Stale = r.chance(s.get("stale"), "stale")
	if word, ok := r.choice(s.get("period_used"), "period_used", "nominal", "measured"); ok {
		t.MeasuredPeriod = word == "measured"
	}
	return known
}

// overridePeriod puts the period of the options in force.
func (r *reader) overridePeriod(t *Timing) {
	p := r.options.Period
	if p == nil {
		return
	}
	fault := "a sample rate must be above zero"
	if p.Sign() > 0 {
		fault = checkRate(new(big.Rat).Inv(p))
	}
	if fault != "" {
		r.report(r.timingAt, "--rate: "+fault, "a rate from 1e-6 Hz to 1e9 Hz")
		return
	}
	t.Period = new(big.Rat).Set(p)
	r.period = t.Period
}

// tick reads rate or period of s into seconds.
func (r *reader) tick(s *section, period **big.Rat) bool {
	switch s.together("rate", "period") {
	case "rate":
		n := s.get("rate")
		f, ok := r.quantity(n, "rate", frequencyDim, "2 kHz")
		if !ok {
			return false
		}
		if fault := checkRate(f); fault != "" {
			r.report(n.at, fault, "a rate from 1e-6 Hz to 1e9 Hz")
			return false
		}
		*period = new(big.Rat).Inv(f)
		return true
	case "period":
		n := s.get("period")
		p, ok := r.positiveSeconds(n, "period")
		if !ok {
			return false
		}
		if fault := checkRate(new(big.Rat).Inv(p)); fault != "" {
			r.report(n.at, fault, "a period from 1 ns to 1e6 s")
			return false
		}
		*period = p
		return true
	}
	s.missing(s.name+" has neither rate nor period", "one of rate: 2 kHz and period: 500 us", "rate", "period")
	return false
}

// update reads when the new effort is applied: when_ready, next_tick or {after: time}.
func (r *reader) update(t *Timing, n *node) {
	if n == nil || n.broken {
		return
	}
	const forms = "when_ready, next_tick or {after: 250 us}"
	switch n.kind {
	case textNode:
		switch n.text {
		case "when_ready":
			t.Update = WhenReady
		case "next_tick":
			t.Update = NextTick
		default:
			r.reportNear(n.at, fmt.Sprintf("%s is not an update rule", quote(n.text)), forms,
				nearest(n.text, []string{"when_ready", "next_tick"}))
		}
	case mapNode:
		s, broken := r.section(n, "update", "after")
		if broken {
			return
		}
		if x, ok := r.seconds(s.need("after", "after: the time from the sample"), "after"); ok {
			t.Update, t.UpdateAfter = After, x
		}
	default:
		r.report(n.at, fmt.Sprintf("update is %s here", n.kind), forms)
	}
}
