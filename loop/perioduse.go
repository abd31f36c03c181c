package loop

import "fmt"

// measurable are the maps whose formulas hold for a tick of any length: they have T in them. The others have numbers
// that were computed for one T.
var measurable = []string{"forward", "backward", "tustin", "prewarped"}

// checkPeriodUsed: a program that computes with the measured time between two ticks has formulas with that time in them.
func (r *reader) checkPeriodUsed(l *Loop, top *section) {
	if !l.Timing.MeasuredPeriod {
		return
	}
	c := top.values["controller"]
	if r.periodic {
		r.report(c.find("pid").find("stored").at, "stored: with_period and period_used: measured contradict each other: numbers with the nominal period in them are not computed with the measured one",
			"stored: plain, or period_used: nominal")
	}
	terms := []Part{}
	for _, t := range l.Controller.Terms {
		terms = append(terms, t.Parts...)
	}
	r.measurable(terms, c.find("pid"), r.options.Map)
	if p := l.Controller.Prefilter; p != nil {
		r.measurable([]Part{*p}, c.find("prefilter"), "")
	}
	if p := l.Controller.Feedforward; p != nil {
		r.measurable([]Part{*p}, c.find("feedforward"), "")
	}
}

// measurable reports the first part that cannot run with the measured period. own is the section with its map;
// override is the map in the place of that one, "" for none.
func (r *reader) measurable(parts []Part, own entry, override string) {
	const expected = "one of forward, backward, tustin, prewarped, or period_used: nominal"
	for _, p := range parts {
		switch {
		case p.Digital != nil:
			r.report(own.find("model").at, "a model in z with period_used: measured: its numbers are made for one period", "a model in s with a map, or period_used: nominal")
			return
		case constantPart(p) || contains(measurable, p.Map.Method):
			continue
		}
		at := own.find("map")
		for _, key := range []string{"i", "d"} { // a map for each part of a pid
			if one := at.find(key); one.key == key && one.value.text == p.Map.Method {
				at = one
			}
		}
		what := "map "
		if override != "" {
			what, at = "--map ", own
		}
		r.report(at.at, fmt.Sprintf("%s%s with period_used: measured: its numbers are made for one period", what, p.Map.Method), expected)
		return
	}
}

// constantPart tells whether a part is a number, which every map leaves as it is.
func constantPart(p Part) bool {
	return p.Continuous != nil && p.Continuous.Ratio.Order() == 0 && p.Continuous.Ratio.RelativeDegree() == 0
}
