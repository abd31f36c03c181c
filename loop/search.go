package loop

import "math/big"

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
	out.From, out.To = r.end(s, "from"), r.end(s, "to")
	if out.From != nil && out.To != nil && out.From.Cmp(out.To) >= 0 {
		r.report(s.keyAt("to"), "from is not below to", "rate: {from: 50 Hz, to: 50 kHz}")
		return
	}
	l.Search = out
}

// end reads one end of the range in Hz, nil when it is not there or wrong.
func (r *reader) end(s *section, key string) *big.Rat {
	v := s.get(key)
	if v == nil {
		return nil
	}
	f, ok := r.quantity(v, key, frequencyDim, "50 Hz")
	if !ok {
		return nil
	}
	if fault := checkRate(f); fault != "" {
		r.report(v.at, fault, "a rate from 1e-6 Hz to 1e9 Hz")
		return nil
	}
	return f
}
