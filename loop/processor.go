package loop

import (
	"fmt"
	"math/big"
)

// maxPostscale bounds how many periods of the counter make a tick.
const maxPostscale = 65536

// hertz reads a frequency in Hz above zero.
func (r *reader) hertz(n *node, what, example string) (*big.Rat, bool) {
	f, ok := r.quantity(n, what, frequencyDim, example)
	if !ok {
		return nil, false
	}
	if f.Cmp(power10(-6)) < 0 || f.Cmp(power10(12)) > 0 {
		r.report(n.at, what+" is out of range", "a frequency from 1e-6 Hz to 1e12 Hz")
		return nil, false
	}
	return f, true
}

// timer reads the hardware timer that makes the ticks.
func (r *reader) timer(l *Loop, n *node) {
	if n == nil {
		return
	}
	s, broken := r.section(n, "timer", "clock", "prescaler_bits", "reload_bits", "counting", "postscale")
	if broken {
		return
	}
	t := &Timer{Postscale: 1}
	good := true
	t.Clock, good = r.hertz(s.need("clock", "clock: 72 MHz"), "clock", "72 MHz")
	take := func(key string, v *node, low, high int64, to *int) {
		if v == nil {
			good = good && !s.has(key)
			return
		}
		x, ok := r.whole(v, key, low, high)
		*to, good = x, good && ok
	}
	take("prescaler_bits", s.get("prescaler_bits"), 0, 32, &t.PrescalerBits)
	take("reload_bits", s.need("reload_bits", "reload_bits: 16, of the register that ends the count"), 1, 32, &t.ReloadBits)
	take("postscale", s.get("postscale"), 1, maxPostscale, &t.Postscale)
	if v := s.get("counting"); v != nil {
		word, ok := r.choice(v, "counting", "up", "center")
		if good = good && ok; word == "center" {
			t.Counting = CountCenter
		}
	}
	if good && s.has("reload_bits") {
		l.Timer = t
	}
}

// processor reads what a tick costs and how much of it the loop may use.
func (r *reader) processor(l *Loop, n *node) {
	if n == nil {
		return
	}
	s, broken := r.section(n, "processor", "cost", "budget", "clock", "cost_cycles")
	if broken {
		return
	}
	p := &Processor{Budget: big.NewRat(1, 1)}
	if v := s.get("budget"); v != nil {
		if b, ok := r.quantity(v, "budget", percentDim, "40 %"); ok {
			if b.Sign() <= 0 || b.Cmp(big.NewRat(100, 1)) > 0 {
				r.report(v.at, "budget is out of range", "above 0 %, up to 100 %")
			} else {
				p.Budget = b.Quo(b, big.NewRat(100, 1))
			}
		}
	}
	switch s.together("cost", "cost_cycles") {
	case "cost":
		if s.has("clock") {
			r.report(s.keyAt("clock"), "clock beside cost", "clock only with cost_cycles")
		}
		if c, ok := r.positiveSeconds(s.get("cost"), "cost"); ok {
			p.Cost = c
		}
	case "cost_cycles":
		p.Cost = r.cycles(s)
	default:
		if s.has("clock") {
			r.report(s.keyAt("clock"), "clock without cost_cycles", "cost_cycles: of a tick, beside clock")
		}
		if l.Timing.Compute.Sign() == 0 && !s.damaged() {
			s.missing("processor has neither cost nor cost_cycles, and timing has no compute time in their place",
				"cost: 55 us, the processor time of a tick", "cost", "cost_cycles")
		}
	}
	l.Processor = p
}

// cycles is the time of cost_cycles at clock, seconds; nil when something is wrong.
func (r *reader) cycles(s *section) *big.Rat {
	clock, ok := r.hertz(s.need("clock", "clock: of the processor, 72 MHz, beside cost_cycles"), "clock", "72 MHz")
	n := s.get("cost_cycles")
	if n == nil {
		return nil
	}
	c, fine := r.constant(n, "cost_cycles")
	if fine && (c.Sign() <= 0 || c.Cmp(power10(15)) > 0) {
		r.report(n.at, "cost_cycles is out of range", "a number of processor cycles, above 0")
		fine = false
	}
	if !ok || !fine {
		return nil
	}
	return new(big.Rat).Quo(c, clock)
}

// search reads the range of rates that the command rate looks at.
func (r *reader) search(l *Loop, n *node) {
	if n == nil {
		return
	}
	if n.kind == textNode {
		r.report(n.at, "rate is a single value here", "the sample rate belongs to timing: {rate: 2 kHz}; rate: {from: 50 Hz, to: 50 kHz} is the range to search")
		return
	}
	s, broken := r.section(n, "rate", "from", "to")
	if broken {
		return
	}
	out := &RateRange{}
	for key, to := range map[string]**big.Rat{"from": &out.From, "to": &out.To} {
		v := s.get(key)
		if v == nil {
			continue
		}
		f, ok := r.quantity(v, key, frequencyDim, "50 Hz")
		if !ok {
			continue
		}
		if fault := checkRate(f); fault != "" {
			r.report(v.at, fault, "a rate from 1e-6 Hz to 1e9 Hz")
			continue
		}
		*to = f
	}
	if out.From != nil && out.To != nil && out.From.Cmp(out.To) >= 0 {
		r.report(s.keyAt("to"), "from is not below to", "rate: {from: 50 Hz, to: 50 kHz}")
		return
	}
	l.Search = out
}

// maxDisturbances bounds the list.
const maxDisturbances = 20

var disturbanceKinds = []string{"sine"}

// disturbances reads the list of disturbances, each a mapping with one key.
func (r *reader) disturbances(l *Loop, n *node) {
	if n == nil {
		return
	}
	if n.kind != listNode || len(n.items) > maxDisturbances {
		r.report(n.at, fmt.Sprintf("disturbances must be a list of at most %d", maxDisturbances), "entries such as - sine: {frequency: 310 Hz}")
		return
	}
	for _, item := range n.items {
		s, broken := r.section(item, "a disturbance", disturbanceKinds...)
		if broken {
			continue
		}
		if len(item.entries) != 1 {
			r.report(item.at, fmt.Sprintf("a disturbance with %d keys", len(item.entries)), "one disturbance in one entry, each with its own dash")
			continue
		}
		if v := s.get("sine"); v != nil {
			if d, ok := r.sineDisturbance(v); ok {
				l.Disturbances = append(l.Disturbances, d)
			}
		}
	}
}

// sineDisturbance reads a vibration or a ripple of known frequency.
func (r *reader) sineDisturbance(n *node) (Disturbance, bool) {
	d := Disturbance{Kind: "sine", At: "output"}
	s, broken := r.section(n, "sine", "name", "at", "size", "frequency")
	if broken {
		return d, false
	}
	good := true
	if v := s.get("name"); v != nil {
		d.Name, good = r.text(v, "name")
	}
	if v := s.get("at"); v != nil {
		word, ok := r.choice(v, "at", "input", "output", "sensor")
		d.At, good = word, good && ok
	}
	if v := s.get("size"); v != nil {
		var in Input
		good = r.size(&in, v, "the size of the sine") && good
		d.Size, d.SizeExact = in.Size, in.SizeExact
	}
	w, ok := r.angular(s.need("frequency", "frequency: 310 Hz"), "frequency")
	d.Frequency = w
	return d, good && ok
}
