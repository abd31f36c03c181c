package loop

import (
	"fmt"
	"math/big"

	"steadytick/sdomain"
)

// pidForm is a PID controller as numbers of its form. A nil time is a part that is not
// there.
type pidForm struct {
	form       string // parallel, standard, series
	kp, ki, kd *big.Rat
	ti, td, tf *big.Rat // seconds
	weight     *big.Rat // of the set point in the proportional part
	onMeasured bool     // the derivative acts on −m
	pMap       Map
	iMap, dMap Map
}

// pid reads a PID controller into terms; nil when something was reported.
func (r *reader) pid(l *Loop, n *node, timed bool) []Term {
	if n == nil {
		return nil
	}
	s, broken := r.section(n, "pid", "form", "Kp", "K", "Ki", "Kd", "Ti", "Td", "filter", "filter_ratio",
		"derivative_on", "setpoint_weight", "stored", "map", "at")
	if broken {
		return nil
	}
	faults := r.faults
	f := &pidForm{weight: big.NewRat(1, 1)}
	var ok bool
	if f.form, ok = r.choice(s.need("form", "form: parallel, standard or series"), "form", "parallel", "standard", "series"); !ok {
		return nil
	}
	r.pidGains(f, s)
	r.pidStored(f, s, timed)
	if f.form != "parallel" && f.kp != nil {
		f.toGains()
	}
	if word, ok := r.choice(s.get("derivative_on"), "derivative_on", "error", "measurement"); ok {
		f.onMeasured = word == "measurement"
	}
	if w := s.get("setpoint_weight"); w != nil {
		if c, ok := r.constant(w, "setpoint_weight"); ok && c.Sign() < 0 {
			r.report(w.at, "setpoint_weight is negative", "a number from 0 (set point not in the proportional part) to 1")
		} else if ok {
			f.weight = c
		}
	}
	if r.faults == faults && !s.damaged() {
		r.pidFilter(f, s)
		r.pidMaps(f, s)
	} else if r.faults == faults { // a key without a value that nothing has asked for yet
		for _, key := range []string{"filter", "filter_ratio", "map", "at"} {
			s.get(key)
		}
	}
	if r.faults > faults || s.damaged() {
		return nil
	}
	terms := f.terms()
	if len(terms) == 0 {
		r.report(s.at, "every gain of the pid is zero", "one gain other than 0")
	}
	for _, t := range terms {
		for _, p := range t.Parts {
			if !r.checkModel(model{m: *p.Continuous, in: continuous, at: s.at}, "the "+t.Name+" part of the pid") {
				return nil
			}
		}
	}
	return terms
}

// pidGains reads the numbers that belong to the form.
func (r *reader) pidGains(f *pidForm, s *section) {
	own, other := []string{"Kp", "Ki", "Kd"}, []string{"K", "Ti", "Td"}
	if f.form != "parallel" {
		own, other = []string{"Kp", "K", "Ti", "Td"}, []string{"Ki", "Kd"}
	}
	for _, k := range other {
		if s.has(k) {
			r.report(s.keyAt(k), fmt.Sprintf("%s does not belong to the %s form", k, f.form), list(own))
		}
	}
	read := func(key string) *big.Rat {
		c, _ := r.constant(s.get(key), key)
		return c
	}
	if f.form == "parallel" {
		f.kp, f.ki, f.kd = read("Kp"), read("Ki"), read("Kd")
		return
	}
	gain := s.together("Kp", "K")
	if gain == "" {
		s.missing("pid has no Kp", "Kp: the gain of the "+f.form+" form", "Kp", "K")
	} else {
		f.kp = read(gain)
	}
	if n := s.get("Ti"); n != nil {
		f.ti, _ = r.positiveSeconds(n, "Ti")
	}
	if n := s.get("Td"); n != nil {
		f.td, _ = r.seconds(n, "Td")
	}
}

// pidStored undoes the factors of the period in stored numbers.
func (r *reader) pidStored(f *pidForm, s *section, timed bool) {
	n := s.get("stored")
	if n == nil {
		return
	}
	word, ok := r.choice(n, "stored", "plain", "with_period")
	if !ok || word == "plain" {
		return
	}
	if f.form != "parallel" {
		r.report(n.at, "stored: with_period in the "+f.form+" form", "the parallel form, whose stored Ki is Ki·T and Kd is Kd/T")
		return
	}
	if !timed {
		return // the missing period is reported
	}
	r.periodic = true
	if f.ki != nil {
		f.ki = new(big.Rat).Quo(f.ki, r.period)
	}
	if f.kd != nil {
		f.kd = new(big.Rat).Mul(f.kd, r.period)
	}
}

// toGains computes Ki = Kp/Ti and Kd = Kp·Td.
func (f *pidForm) toGains() {
	if f.ti != nil {
		f.ki = new(big.Rat).Quo(f.kp, f.ti)
	}
	if f.td != nil {
		f.kd = new(big.Rat).Mul(f.kp, f.td)
	}
}

func absent(c *big.Rat) bool { return c == nil || c.Sign() == 0 }

// pidFilter reads the lag of the derivative: filter, or filter_ratio N with Tf = Td/N.
func (r *reader) pidFilter(f *pidForm, s *section) {
	key := s.together("filter", "filter_ratio")
	if absent(f.kd) {
		if key != "" {
			r.report(s.keyAt(key), key+" without a derivative part", "no "+key)
		}
		return
	}
	switch key {
	case "filter":
		f.tf, _ = r.positiveSeconds(s.get("filter"), "filter")
	case "filter_ratio":
		n := s.get("filter_ratio")
		ratio, ok := r.constant(n, "filter_ratio")
		if !ok {
			return
		}
		if ratio.Sign() <= 0 {
			r.report(n.at, "filter_ratio is not above zero", "N in Tf = Td/N, commonly 5 to 20")
			return
		}
		if absent(f.kp) || new(big.Rat).Quo(f.kd, f.kp).Sign() <= 0 {
			r.report(n.at, "filter_ratio needs Kp and Kd of one sign (Td = Kd/Kp)", "filter: a time")
			return
		}
		f.tf = new(big.Rat).Quo(f.kd, new(big.Rat).Mul(f.kp, ratio))
	default:
		r.report(s.at, "the derivative has no filter: the controller is improper",
			"filter: a time, or filter_ratio: N for Td/N")
	}
}

// pidMaps reads one map for all parts, or one each for i and d.
func (r *reader) pidMaps(f *pidForm, s *section) {
	n := s.get("map")
	if n == nil || n.kind != mapNode || r.options.Map != "" {
		m, _ := r.pidMap(f, s)
		f.pMap, f.iMap, f.dMap = m, m, m
		return
	}
	per, broken := r.section(n, "map of pid", "i", "d")
	if broken {
		return
	}
	at := r.prewarpFrequency(s)
	prewarped := false
	one := func(key string, used bool) Map {
		if !used {
			if per.has(key) {
				r.report(per.keyAt(key), fmt.Sprintf("a map for %s, which this pid does not have", key), "no "+key)
			}
			return Map{}
		}
		word, ok := r.choice(per.need(key, key+": one of "+list(methods)), "map", methods...)
		if ok && word == "prewarped" {
			prewarped = true
			if !s.has("at") {
				r.report(per.keyAt(key), "map prewarped without its frequency", "at: a frequency beside map")
			}
			return Map{word, at}
		}
		return Map{Method: word}
	}
	f.pMap = Map{Method: "tustin"} // of a constant, which every map leaves as it is
	f.iMap = one("i", !absent(f.ki))
	f.dMap = one("d", !absent(f.kd))
	if s.has("at") && !prewarped {
		r.report(s.keyAt("at"), "at without map: prewarped", "no at")
	}
}

// pidMap reads one map for all parts; a P controller needs none.
func (r *reader) pidMap(f *pidForm, s *section) (Map, bool) {
	if absent(f.ki) && absent(f.kd) && !s.has("map") && !s.has("at") && r.options.Map == "" {
		return Map{Method: "tustin"}, true
	}
	return r.mapping(s, "the pid", r.options.Map)
}

// terms writes the PID as the sum that Controller documents:
//
//	parallel, standard:  Kp·(b·r − m) + Ki/s·(r − m) + Kd·s/(Tf·s + 1)·(c·r − m)
//	series:              (Kp + Ki/s) · (Td·s + 1)/(Tf·s + 1)
//
// c is 1, or 0 with the derivative on the measurement. The series form with that is
//
//	(Kp·b + Ki/s)·r − (Kp + Ki/s)·m − (Kp + Ki/s)·(Td − Tf)·s/(Tf·s + 1)·m
func (f *pidForm) terms() []Term {
	if f.form == "series" {
		return f.series()
	}
	var out []Term
	if !absent(f.kp) {
		out = append(out, Term{"p", []Part{f.p()}, f.weight})
	}
	if !absent(f.ki) {
		out = append(out, Term{"i", []Part{f.i()}, big.NewRat(1, 1)})
	}
	if !absent(f.kd) {
		d := rational([]*big.Rat{new(big.Rat), f.kd}, []*big.Rat{big.NewRat(1, 1), f.tf})
		out = append(out, Term{"d", []Part{{Continuous: &d, Map: f.dMap}}, f.derivativeWeight()})
	}
	return out
}

func (f *pidForm) derivativeWeight() *big.Rat {
	if f.onMeasured {
		return new(big.Rat)
	}
	return big.NewRat(1, 1)
}

func (f *pidForm) p() Part {
	m := sdomain.Const(f.kp)
	return Part{Continuous: &m, Map: f.pMap}
}

func (f *pidForm) i() Part {
	m := rational([]*big.Rat{f.ki}, []*big.Rat{new(big.Rat), big.NewRat(1, 1)})
	return Part{Continuous: &m, Map: f.iMap}
}

// pi is Kp + Ki/s, or Kp alone.
func (f *pidForm) pi() Part {
	if absent(f.ki) {
		return f.p()
	}
	m := rational([]*big.Rat{f.ki, f.kp}, []*big.Rat{new(big.Rat), big.NewRat(1, 1)})
	return Part{Continuous: &m, Map: f.iMap}
}

func (f *pidForm) series() []Term {
	if absent(f.kp) {
		return nil
	}
	one := big.NewRat(1, 1)
	var lead []Part
	if !absent(f.kd) && !f.onMeasured {
		m := rational([]*big.Rat{one, f.td}, []*big.Rat{one, f.tf})
		lead = []Part{{Continuous: &m, Map: f.dMap}}
	}
	var out []Term
	if f.weight.Cmp(one) == 0 {
		out = append(out, Term{"pi", append([]Part{f.pi()}, lead...), one})
	} else {
		out = append(out, Term{"p", append([]Part{f.p()}, lead...), f.weight})
		if !absent(f.ki) {
			out = append(out, Term{"i", append([]Part{f.i()}, lead...), one})
		}
	}
	if !absent(f.kd) && f.onMeasured && f.td.Cmp(f.tf) != 0 {
		m := rational([]*big.Rat{new(big.Rat), new(big.Rat).Sub(f.td, f.tf)}, []*big.Rat{one, f.tf})
		out = append(out, Term{"d", []Part{f.pi(), {Continuous: &m, Map: f.dMap}}, new(big.Rat)})
	}
	return out
}
