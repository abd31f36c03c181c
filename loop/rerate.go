package loop

import "math/big"

// WithRate is the same loop at another tick of period seconds. Where nothing but the tick itself depends on the period, the
// result shares everything else with l, numbers included, which nobody may change; otherwise, and where the loop cannot run at that
// rate, the file is read again.
func (l *Loop) WithRate(period *big.Rat) (*Loop, Problems) {
	if other := l.sharing(period); other != nil {
		return other, nil
	}
	o := l.options
	o.Period = new(big.Rat).Set(period)
	return ParseWith(l.File, l.Source, l.open, o)
}

// sharing is the loop at another period as far as it can be had without reading the file again, nil where it cannot.
func (l *Loop) sharing(period *big.Rat) *Loop {
	if l.periodic || l.Controller.Digital || period.Sign() <= 0 || checkRate(new(big.Rat).Inv(period)) != "" || !l.prewarps(period) {
		return nil
	}
	out := *l
	out.Timing.Period = new(big.Rat).Set(period)
	out.options.Period = out.Timing.Period
	probe := &reader{file: l.File}
	probe.check(&out, &section{r: probe})
	if len(probe.problems) > 0 {
		return nil
	}
	return &out
}

// prewarps tells whether every prewarp frequency lies below half the rate.
func (l *Loop) prewarps(period *big.Rat) bool {
	parts := []*Part{l.Controller.Prefilter, l.Controller.Feedforward}
	for _, t := range l.Controller.Terms {
		for i := range t.Parts {
			parts = append(parts, &t.Parts[i])
		}
	}
	for _, p := range parts {
		if p != nil && p.Map.At != nil && new(big.Rat).Mul(p.Map.At, period).Cmp(pi) >= 0 {
			return false
		}
	}
	return true
}
