package loop

import (
	"math/big"
	"slices"
)

// WithRate is the same loop at another tick of period seconds, with every check again; options carry over. Where nothing but the tick
// itself depends on the period this costs microseconds: the result then shares everything else with l, numbers and slices included, so that
// nobody may change either. Otherwise, and where the loop cannot run at that rate, the file is read again, which gives the messages.
func (l *Loop) WithRate(period *big.Rat) (*Loop, Problems) {
	if other := l.sharing(period); other != nil {
		return other, nil
	}
	o := l.options
	o.Period = new(big.Rat).Set(period)
	return ParseWith(l.File, l.Source, l.open, o)
}

// WithMap is the same loop with another map for the controller, written as Options.Map; "" gives the maps of the file. It shares what
// WithRate shares, except for the terms of the controller.
func (l *Loop) WithMap(method string) (*Loop, Problems) {
	if other := l.mapped(method); other != nil {
		return other, nil
	}
	o := l.options
	o.Map = method
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
	return out.ifSound()
}

// mapped is the loop with another map without reading the file again, nil where it cannot be had so.
func (l *Loop) mapped(method string) *Loop {
	if method == "" {
		return nil // the maps of the file are not kept
	}
	probe := &reader{file: l.File, period: l.Timing.Period}
	m, ok := probe.overridden(method, l.prewarp.file, &section{r: probe}, place{})
	if !ok {
		return nil
	}
	out := *l
	out.Controller.Terms = cloneTerms(l.Controller.Terms)
	for _, t := range out.Controller.Terms {
		for i := range t.Parts {
			if t.Parts[i].Continuous == nil {
				return nil
			}
			t.Parts[i].Map = m
		}
	}
	out.options.Map = method
	out.prewarp.used = m.At
	return out.ifSound()
}

// ifSound is l, nil when a check of the whole file would report it.
func (l *Loop) ifSound() *Loop {
	probe := &reader{file: l.File}
	if probe.check(l, &section{r: probe}); probe.faults > 0 {
		return nil
	}
	return l
}

// cloneTerms copies the terms and their lists of parts; the models stay shared.
func cloneTerms(terms []Term) []Term {
	out := slices.Clone(terms)
	for i := range out {
		out[i].Parts = slices.Clone(out[i].Parts)
	}
	return out
}

// prewarp holds the prewarp frequencies of the controller, rad/s: that of the file (nil: none), and the one in force, which differs from it
// with another map (nil: none).
type prewarp struct{ file, used *big.Rat }

// prewarps tells whether every prewarp frequency in force lies below half the rate.
func (l *Loop) prewarps(period *big.Rat) bool {
	list := []*big.Rat{l.prewarp.used}
	for _, p := range []*Part{l.Controller.Prefilter, l.Controller.Feedforward} {
		if p != nil {
			list = append(list, p.Map.At)
		}
	}
	for _, w := range list {
		if w != nil && new(big.Rat).Mul(w, period).Cmp(pi) >= 0 {
			return false
		}
	}
	return true
}
