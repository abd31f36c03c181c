package loop

import (
	"fmt"
	"math/big"
	"strings"

	"steadytick/sdomain"
)

// methods are the controller maps.
var methods = []string{"tustin", "prewarped", "matched", "forward", "backward", "hold", "triangle"}

// controller reads model or pid and what belongs to it. timed tells that the period is known.
func (r *reader) controller(l *Loop, n *node, timed bool) {
	l.Controller.AntiWindup.Kind = "none"
	if n == nil {
		return
	}
	s, broken := r.section(n, "controller", "model", "map", "at", "rate", "period", "pid",
		"anti_windup", "feedforward", "prefilter")
	if broken {
		return
	}
	switch s.together("model", "pid") {
	case "model":
		if p, ok := r.part(s, "the controller", r.options.Map); ok {
			l.Controller.Terms = []Term{{Name: "model", Parts: []Part{*p}, Weight: big.NewRat(1, 1)}}
		}
	case "pid":
		for _, k := range []string{"map", "at"} {
			if s.has(k) {
				r.report(s.keyAt(k), k+" beside pid", k+" within pid")
			}
		}
		l.Controller.Terms = r.pid(l, s.get("pid"), timed)
	default:
		s.missing("controller has neither model nor pid", "one of model and pid", "model", "pid")
	}
	l.prewarp = r.prewarp // before prefilter and feedforward, which have their own
	l.Controller.Feedforward = r.sidePart(s.get("feedforward"), "feedforward")
	l.Controller.Prefilter = r.sidePart(s.get("prefilter"), "prefilter")
	r.antiWindup(l, s.get("anti_windup"))
	l.Controller.Digital = r.zUsed.line > 0
	r.ownRate(s, timed)
}

// ownRate checks that a z model runs at its own rate.
func (r *reader) ownRate(s *section, timed bool) {
	if s.has("rate") || s.has("period") {
		var own *big.Rat
		key := "rate"
		if !s.has(key) {
			key = "period"
		}
		switch known := r.tick(s, &own); {
		case r.zUsed.line == 0:
			r.report(s.keyAt(key), key+" in a controller without a model in z", "timing: has the rate of the loop")
		case known && timed && own.Cmp(r.filePeriod) != 0:
			r.report(s.keyAt(key), fmt.Sprintf("the z model is made for a period of %s, the loop runs at %s",
				showSeconds(own), showSeconds(r.filePeriod)), "the same rate as in timing: a z model is valid at one rate only")
		}
	}
	if r.zUsed.line > 0 && timed && r.options.Period != nil && r.options.Period.Cmp(r.filePeriod) != 0 {
		r.report(r.zUsed, fmt.Sprintf("a z model made for a period of %s cannot run at %s",
			showSeconds(r.filePeriod), showSeconds(r.options.Period)), "the rate of the file, or a model in s with a map")
	}
}

// showSeconds prints a time for a message.
func showSeconds(t *big.Rat) string {
	f, _ := t.Float64()
	for _, u := range []struct {
		name string
		size float64
	}{{"s", 1}, {"ms", 1e-3}, {"us", 1e-6}} {
		if f >= u.size {
			return fmt.Sprintf("%.9g %s", f/u.size, u.name)
		}
	}
	return fmt.Sprintf("%.9g ns", f*1e9)
}

// sidePart reads feedforward or prefilter.
func (r *reader) sidePart(n *node, what string) *Part {
	if n == nil {
		return nil
	}
	s, broken := r.section(n, what, "model", "map", "at")
	if broken {
		return nil
	}
	p, _ := r.part(s, "the "+what, "")
	return p
}

// part reads model, map and at of s. override is another map, "" for none.
func (r *reader) part(s *section, what, override string) (*Part, bool) {
	m, ok := r.model(s.need("model", "model: "+modelForms), what)
	if !ok {
		return nil, false
	}
	if m.m.Delay != nil && m.m.Delay.Sign() != 0 {
		r.report(m.at, what+" has a dead time", "exp() in the plant or the sensor; a delay of n ticks is z^-n in a model in z")
		return nil, false
	}
	if m.in == sampled {
		for _, k := range []string{"map", "at"} {
			if s.has(k) {
				r.report(s.keyAt(k), fmt.Sprintf("%s of a model in z", k), "no "+k+": the model is digital already")
				return nil, false
			}
		}
		if override != "" {
			r.report(m.at, "a model in z has no map to replace", "no --map, or a model in s")
			return nil, false
		}
		ratio := m.m.Ratio
		return &Part{Digital: &ratio}, true
	}
	out := &Part{Continuous: &m.m, Map: Map{Method: "tustin"}}
	if m.in == constant && !s.has("map") && override == "" {
		if s.has("at") {
			r.report(s.keyAt("at"), "at without map", "map: prewarped")
			return nil, false
		}
		return out, true // every map leaves a constant as it is
	}
	out.Map, ok = r.mapping(s, what, override)
	return out, ok
}

// mapping reads map and at of s.
func (r *reader) mapping(s *section, what, override string) (Map, bool) {
	if override != "" {
		var own *big.Rat // it serves only a map that asks for it
		if n := s.get("at"); n != nil {
			own, _ = r.angular(n, "at")
		}
		m, ok := r.overridden(override, own, s, s.keyAt("at"))
		r.prewarp = prewarp{own, m.At}
		return m, ok
	}
	at := r.prewarpFrequency(s)
	n := s.need("map", fmt.Sprintf("map: how %s becomes digital, one of %s", what, list(methods)))
	word, ok := r.choice(n, "map", methods...)
	if !ok {
		return Map{}, false
	}
	if word != "prewarped" {
		if s.has("at") {
			r.report(s.keyAt("at"), "at with map "+word, "at only with map: prewarped")
			return Map{}, false
		}
		return Map{Method: word}, true
	}
	if !s.has("at") {
		r.report(n.at, "map prewarped without its frequency", "at: a frequency beside map")
	}
	return Map{word, at}, at != nil
}

// prewarpFrequency reads at, in rad/s, nil when it is missing or wrong.
func (r *reader) prewarpFrequency(s *section) *big.Rat {
	n := s.get("at")
	if n == nil {
		return nil
	}
	w, ok := r.angular(n, "at")
	if !ok || !r.belowNyquist(w, n.at) {
		return nil
	}
	r.prewarp = prewarp{w, w}
	return w
}

// belowNyquist checks w < π/T in rad/s, T being the period in force.
func (r *reader) belowNyquist(w *big.Rat, at place) bool {
	if r.period == nil {
		return true // the timing is reported
	}
	if new(big.Rat).Mul(w, r.period).Cmp(pi) < 0 {
		return true
	}
	f, _ := new(big.Rat).Inv(new(big.Rat).Add(r.period, r.period)).Float64()
	r.report(at, "the prewarp frequency is not below half the sample rate", fmt.Sprintf("a frequency below %.9g Hz", f))
	return false
}

// overridden reads Options.Map. at is the file's own prewarp frequency, which stands at ownAt, nil for none.
func (r *reader) overridden(text string, at *big.Rat, s *section, ownAt place) (Map, bool) {
	word, rest, split := strings.Cut(strings.TrimSpace(text), " at ")
	fail := func(message, expected, near string) (Map, bool) {
		r.reportNear(s.at, message, expected, near)
		return Map{}, false
	}
	if !contains(methods, word) {
		return fail(fmt.Sprintf("--map: %s is not a map", quote(word)), "one of "+list(methods), nearest(word, methods))
	}
	if word != "prewarped" {
		if split {
			return fail("--map: only prewarped has a frequency", "", "")
		}
		return Map{Method: word}, true
	}
	if !split {
		if at == nil {
			return fail("--map prewarped without a frequency", `"prewarped at 40 Hz", or at: in the file`, "")
		}
		return Map{word, at}, r.belowNyquist(at, ownAt)
	}
	q, e := parseQuantity(rest)
	var f *big.Rat
	if e == nil {
		f, e = q.inUnits(frequencyDim, "40 Hz")
	}
	if e != nil {
		return fail("--map: "+e.message, e.expected, e.nearest)
	}
	if f.Sign() <= 0 {
		return fail("--map: the frequency is not above zero", "", "")
	}
	w := radians(f)
	return Map{word, w}, r.belowNyquist(w, s.at)
}

// rational is num/den as a model, ascending coefficients; den is not zero.
func rational(num, den []*big.Rat) sdomain.Model {
	m, err := sdomain.FromPolynomials(reversed(num), reversed(den))
	if err != nil {
		panic("loop: " + err.Error()) // a bug here: the callers' denominators are not zero
	}
	return m
}

func reversed(c []*big.Rat) []*big.Rat {
	out := make([]*big.Rat, len(c))
	for i, v := range c {
		out[len(c)-1-i] = v
	}
	return out
}
