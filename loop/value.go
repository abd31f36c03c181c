package loop

import (
	"fmt"
	"math/big"
	"strings"
)

// text reads n as a single value. A nil n gives false without a word.
func (r *reader) text(n *node, what string) (string, bool) {
	if n == nil || n.broken {
		return "", false
	}
	if n.kind != textNode {
		r.report(n.at, fmt.Sprintf("%s is %s here", what, n.kind), "a single value")
		return "", false
	}
	return n.text, true
}

// choice reads one of a few words.
func (r *reader) choice(n *node, what string, words ...string) (string, bool) {
	t, ok := r.text(n, what)
	if !ok {
		return "", false
	}
	if !contains(words, t) {
		r.reportNear(n.at, fmt.Sprintf("%s is not a value of %s", quote(t), what), "one of "+list(words), nearest(t, words))
		return "", false
	}
	return t, true
}

// constant reads a number or an expression of numbers and symbols.
func (r *reader) constant(n *node, what string) (*big.Rat, bool) {
	if r.strayUnit(n, what) {
		return nil, false
	}
	v, name, ok := r.expression(n, what)
	if !ok {
		return nil, false
	}
	if name != constant || v.c == nil {
		r.report(n.at, fmt.Sprintf("%s depends on %s", what, name), "a number, or an expression of symbols")
		return nil, false
	}
	if !inRange(v.c) {
		r.report(n.at, fmt.Sprintf("%s is outside the range of numbers", what), "0, or a magnitude from 1e-200 to 1e200")
		return nil, false
	}
	return v.c, true
}

// strayUnit reports a number with a unit where a bare one belongs.
func (r *reader) strayUnit(n *node, what string) bool {
	if n == nil || n.kind != textNode {
		return false
	}
	q, err := parseQuantity(n.text)
	if err != nil || q.unit == "" || q.unit == "s" {
		return false
	}
	if _, known := findUnit(q.unit); !known && !contains(r.own, q.unit) {
		return false
	}
	r.inText(n, &exprError{at: q.unitAt, message: fmt.Sprintf("%s carries no unit", what),
		expected: "a bare number: signals are in the units that output and effort name"})
	return true
}

// Bounds of the magnitude of every number that leaves the reader: the figures computed
// from it must stay in the range of a float64, 1e±308.
var smallest, largest = power10(-200), power10(200)

func inRange(v *big.Rat) bool {
	a := new(big.Rat).Abs(v)
	return a.Sign() == 0 || a.Cmp(smallest) >= 0 && a.Cmp(largest) <= 0
}

// float is constant as a float64.
func (r *reader) float(n *node, what string) (float64, bool) {
	c, ok := r.constant(n, what)
	if !ok {
		return 0, false
	}
	f, _ := c.Float64()
	return f, true
}

// notNegative reads a number from 0 on.
func (r *reader) notNegative(n *node, what string) (float64, bool) {
	v, ok := r.float(n, what)
	if ok && v < 0 {
		r.report(n.at, what+" is negative", "0 or a number above 0")
		return 0, false
	}
	return v, ok
}

// positive reads a number above zero.
func (r *reader) positive(n *node, what string) (float64, bool) {
	v, ok := r.float(n, what)
	if ok && v <= 0 {
		r.report(n.at, what+" is not above zero", "a number above 0")
		return 0, false
	}
	return v, ok
}

// fill reads a key that may be left out into to. It reports whether nothing is wrong.
func (s *section) fill(key string, to *float64, read func(n *node, what string) (float64, bool)) bool {
	if !s.has(key) {
		return true
	}
	v, ok := read(s.get(key), key)
	if ok {
		*to = v
	}
	return ok
}

// whole reads an integer from low to high.
func (r *reader) whole(n *node, what string, low, high int64) (int, bool) {
	c, ok := r.constant(n, what)
	if !ok {
		return 0, false
	}
	if !c.IsInt() || c.Cmp(big.NewRat(low, 1)) < 0 || c.Cmp(big.NewRat(high, 1)) > 0 {
		r.report(n.at, fmt.Sprintf("%s %s is not allowed", what, quote(n.text)), fmt.Sprintf("a whole number from %d to %d", low, high))
		return 0, false
	}
	return int(c.Num().Int64()), true
}

// expression reads and computes the expression of n.
func (r *reader) expression(n *node, what string) (v result, name variable, ok bool) {
	t, ok := r.text(n, what)
	if !ok {
		return result{}, "", false
	}
	if word, bad := notFinite(t); bad {
		r.report(n.at, fmt.Sprintf("%s is not a number that can be computed with", quote(word)), numberForm)
		return result{}, "", false
	}
	e, err := parseExpression(t)
	if err != nil {
		r.inText(n, err)
		return result{}, "", false
	}
	name, errs := r.names(e)
	for _, err := range errs {
		r.inText(n, err)
	}
	if len(errs) > 0 {
		return result{}, "", false
	}
	if v, err = r.eval(e); err != nil {
		r.inText(n, err)
		return result{}, "", false
	}
	return v, name, true
}

// notFinite knows the ways to write infinity and "not a number".
func notFinite(t string) (string, bool) {
	word := strings.Trim(strings.ToLower(strings.TrimSpace(t)), "+-.")
	return strings.TrimSpace(t), word == "inf" || word == "nan" || word == "infinity"
}

// quantity reads a number with a unit of one dimension, in the base unit.
func (r *reader) quantity(n *node, what string, dim dimension, example string) (*big.Rat, bool) {
	t, ok := r.text(n, what)
	if !ok {
		return nil, false
	}
	q, err := parseQuantity(t)
	if err == nil {
		var v *big.Rat
		if v, err = q.inUnits(dim, example); err == nil {
			return v, true
		}
	}
	r.inText(n, err)
	return nil, false
}

// seconds reads a time that is not negative.
func (r *reader) seconds(n *node, what string) (*big.Rat, bool) {
	t, ok := r.quantity(n, what, timeDim, "500 us")
	if !ok {
		return nil, false
	}
	if fault := checkSeconds(t); fault != "" {
		r.report(n.at, fmt.Sprintf("%s: %s", what, fault), "0 s, or a time from 1e-15 s to 1e9 s")
		return nil, false
	}
	return t, true
}

// positiveSeconds reads a time above zero.
func (r *reader) positiveSeconds(n *node, what string) (*big.Rat, bool) {
	t, ok := r.seconds(n, what)
	if ok && t.Sign() == 0 {
		r.report(n.at, what+" is zero", "a time above zero")
		return nil, false
	}
	return t, ok
}

// angular reads a frequency above zero, in rad/s.
func (r *reader) angular(n *node, what string) (*big.Rat, bool) {
	f, ok := r.quantity(n, what, frequencyDim, "40 Hz")
	if !ok {
		return nil, false
	}
	if f.Sign() <= 0 || f.Cmp(power10(-12)) < 0 || f.Cmp(power10(15)) > 0 {
		r.report(n.at, what+" is out of range", "a frequency from 1e-12 Hz to 1e15 Hz")
		return nil, false
	}
	return radians(f), true
}

// radians converts Hz to rad/s, exact for a frequency that was written in rad/s.
func radians(hz *big.Rat) *big.Rat { return new(big.Rat).Mul(hz, twoPi) }
