package loop

import (
	"fmt"
	"math"
	"math/big"
	"strings"
	"unicode"
)

// maxRequirements bounds the list.
const maxRequirements = 100

const requirementForm = "name op number unit, such as ramp_error <= 0.02 or phase_margin >= 45 deg"

// requirements reads the list.
func (r *reader) requirements(l *Loop, n *node) {
	if n == nil {
		return
	}
	if n.kind != listNode || len(n.items) > maxRequirements {
		r.report(n.at, fmt.Sprintf("requirements must be a list of at most %d", maxRequirements), requirementForm)
		return
	}
	for _, item := range n.items {
		if item.kind == mapNode || item.kind == emptyNode && !item.broken {
			r.report(item.at, "a requirement is one line of text", requirementForm)
			continue
		}
		t, ok := r.text(item, "a requirement")
		if !ok {
			continue
		}
		q, err := r.requirement(l, item, t)
		if err != nil {
			r.inText(item, err)
			continue
		}
		l.Requirements = append(l.Requirements, q)
	}
}

// requirement reads "name op number unit".
func (r *reader) requirement(l *Loop, n *node, text string) (Requirement, *exprError) {
	name := text
	if i := strings.IndexFunc(text, func(c rune) bool { return !nameRune(c) }); i >= 0 {
		name = text[:i]
	}
	m, ok := FindMetric(name)
	if !ok {
		e := &exprError{0, fmt.Sprintf("%s is not the name of a metric", quote(name)), "one of " + list(metricNames()),
			nearest(name, metricNames())}
		if name == "" {
			e = &exprError{0, "the requirement does not begin with a name", requirementForm, ""}
		}
		return Requirement{}, e
	}
	rest := strings.TrimLeftFunc(text[len(name):], unicode.IsSpace)
	at := len([]rune(text)) - len([]rune(rest))
	op := ""
	for _, o := range []string{"<=", ">=", "<", ">"} {
		if strings.HasPrefix(rest, o) {
			op = o
			break
		}
	}
	if op == "" {
		e := &exprError{at, fmt.Sprintf("there is no comparison after %s", name), "<=, >=, < or >", ""}
		for wrong, right := range map[string]string{"≤": "<=", "≥": ">=", "=<": "<=", "=>": ">="} {
			if strings.HasPrefix(rest, wrong) {
				e.nearest = right
			}
		}
		return Requirement{}, e
	}
	shift := at + len(op)
	v, err := limit(l, m, rest[len(op):])
	if err != nil {
		err.at += shift
		return Requirement{}, err
	}
	if !inRange(v) {
		return Requirement{}, &exprError{shift, "the limit is outside the range of numbers", "0, or a magnitude from 1e-200 to 1e200", ""}
	}
	if m.Inputs != nil && l.first(m.Inputs...) == nil {
		return Requirement{}, &exprError{0, fmt.Sprintf("%s needs an input that is not there", name),
			"an entry of inputs with " + strings.Join(m.Inputs, " or "), ""}
	}
	f, _ := v.Float64()
	return Requirement{Name: name, Op: op, Limit: f, Text: text, Line: n.at.line}, nil
}

// limit reads "number unit" for a metric, in its base unit.
func limit(l *Loop, m Metric, text string) (*big.Rat, *exprError) {
	q, err := parseQuantity(text)
	if err != nil {
		return nil, err
	}
	switch m.Unit {
	case "s":
		return q.inUnits(timeDim, "2 ms")
	case "rad/s":
		hz, err := q.inUnits(frequencyDim, "40 Hz")
		if err != nil {
			return nil, err
		}
		return radians(hz), nil
	case "deg":
		return q.inUnits(angleDim, "45 deg")
	case "dB":
		return q.inUnits(decibelDim, "8 dB")
	case "%":
		return q.inUnits(percentDim, "20 %")
	case "output":
		return ownUnits(q, l.Output)
	case "effort":
		return ownUnits(q, l.Effort)
	case "bits":
		return ownUnits(q, "bits")
	}
	return plainLimit(q, m.Name)
}

// ownUnits takes a bare number, the loop's own unit, or, where that is an angle, the
// other unit of angle.
func ownUnits(q quantity, own string) (*big.Rat, *exprError) {
	if q.unit == "" || q.unit == own {
		return q.value, nil
	}
	u, known := findUnit(q.unit)
	if o, ok := findUnit(own); ok && known && o.dim == angleDim && u.dim == angleDim {
		return new(big.Rat).Quo(new(big.Rat).Mul(q.value, u.factor), o.factor), nil
	}
	return nil, &exprError{q.unitAt, fmt.Sprintf("%s is not the unit of this figure", quote(q.unit)),
		fmt.Sprintf("a number in %s", own), nearest(q.unit, []string{own})}
}

// plainLimit takes a bare number; the modulus margin, a ratio, also % and dB.
func plainLimit(q quantity, name string) (*big.Rat, *exprError) {
	switch {
	case q.unit == "":
		return q.value, nil
	case name == "modulus_margin" && q.unit == "%":
		return new(big.Rat).Quo(q.value, big.NewRat(100, 1)), nil
	case name == "modulus_margin" && q.unit == "dB":
		dB, _ := q.value.Float64()
		v := new(big.Rat)
		if math.Abs(dB) > 1000 || v.SetFloat64(math.Pow(10, dB/20)) == nil {
			return nil, &exprError{0, "the limit is outside the range of numbers", "-1000 dB to 1000 dB", ""}
		}
		return v, nil
	}
	expected := "a number without a unit"
	if name == "modulus_margin" {
		expected = "a number, or one with % or dB"
	}
	return nil, &exprError{q.unitAt, fmt.Sprintf("%s has no unit %s", name, quote(q.unit)), expected, ""}
}
