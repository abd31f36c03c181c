package loop

import (
	"fmt"
	"math/big"
	"strings"
)

// maxPostscale bounds how many periods of the counter make a tick.
const maxPostscale = 65536

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
	t.Clock, good = r.clock(s.need("clock", "clock: 72 MHz"))
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

// clockUnits are those of a clock: it counts pulses, and turns of a shaft or of a phasor are no way to write that.
var clockUnits = []string{"Hz", "kHz", "MHz"}

// clock reads the frequency of a clock, in Hz.
func (r *reader) clock(n *node) (*big.Rat, bool) {
	t, ok := r.text(n, "clock")
	if !ok {
		return nil, false
	}
	q, err := parseQuantity(t)
	var f *big.Rat
	if err == nil {
		f, err = q.inUnits(frequencyDim, "72 MHz")
	}
	if err == nil && !contains(clockUnits, q.unit) {
		err = &exprError{q.unitAt, fmt.Sprintf("%s is not a unit of a clock", quote(q.unit)), "one of " + list(clockUnits), ""}
	}
	if err != nil {
		err.expected = strings.Replace(err.expected, list(unitNames(frequencyDim)), list(clockUnits), 1)
		r.inText(n, err)
		return nil, false
	}
	if f.Cmp(power10(-6)) < 0 || f.Cmp(power10(12)) > 0 {
		r.report(n.at, "clock is out of range", "a frequency from 1e-6 Hz to 1e12 Hz")
		return nil, false
	}
	return f, true
}
