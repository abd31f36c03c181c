package loop

import (
	"fmt"
	"math/big"

	"steadytick/internal/exact"
	"steadytick/sdomain"
)

// Limits of one model as the file gives it.
const (
	maxOrder  = 30   // poles: the numerics are good to 1e-11 up to about 20
	maxCoeffs = 31   // entries of num, den
	maxStates = 20   // rows of A; the exact determinant grows with the fourth power
	maxEntry  = 2000 // bits of an entry of A, B, C, D
)

// model is what a `model:` says: a function of s or of z, or a constant.
type model struct {
	m    sdomain.Model // with z in the place of s for a model in z
	in   variable
	at   place
	node *node
}

// modelForms lists the ways to write a model.
const modelForms = "an expression, {num, den}, {zeros, poles, gain} or {A, B, C, D}"

// model reads n. what names it in messages. The model is proper, not zero and of an
// order that can be computed.
func (r *reader) model(n *node, what string) (model, bool) {
	if n == nil || n.broken {
		return model{}, false
	}
	out := model{at: n.at, node: n}
	var ok bool
	switch n.kind {
	case textNode:
		var v result
		if v, out.in, ok = r.expression(n, what); ok {
			out.m = v.model()
		}
	case mapNode:
		out.m, out.in, ok = r.structured(n, what)
	default:
		r.report(n.at, fmt.Sprintf("%s is %s here", what, n.kind), modelForms)
	}
	if !ok || !r.checkModel(out, what) {
		return model{}, false
	}
	if out.in == sampled && r.zUsed.line == 0 {
		r.zUsed = out.at
	}
	return out, true
}

// structured reads the forms that are mappings.
func (r *reader) structured(n *node, what string) (m sdomain.Model, in variable, ok bool) {
	forms := [][]string{{"num", "den"}, {"zeros", "poles", "gain"}, {"A", "B", "C", "D"}}
	keys := []string{"num", "den", "zeros", "poles", "gain", "A", "B", "C", "D", "variable"}
	s, broken := r.section(n, what, keys...)
	if broken {
		return sdomain.Model{}, "", false
	}
	form := -1
	for i, f := range forms {
		for _, k := range f {
			if !s.has(k) {
				continue
			}
			if form >= 0 && form != i {
				r.report(s.keyAt(k), fmt.Sprintf("%s does not belong to a model with %s", k, forms[form][0]), modelForms)
				return sdomain.Model{}, "", false
			}
			form = i
		}
	}
	in = continuous
	if s.has("variable") {
		word, good := r.choice(s.get("variable"), "variable", "s", "z")
		if !good {
			return sdomain.Model{}, "", false
		}
		in = variable(word)
	}
	switch form {
	case 0:
		m, ok = r.coefficients(s)
	case 1:
		m, ok = r.rootsModel(s)
	case 2:
		m, ok = r.stateSpace(s)
	default:
		r.report(n.at, what+" is an empty mapping", modelForms)
	}
	return m, in, ok
}

// constants reads a list of constants.
func (r *reader) constants(n *node, what string, most int) ([]*big.Rat, bool) {
	if n == nil {
		return nil, false
	}
	if n.kind != listNode {
		r.report(n.at, fmt.Sprintf("%s is %s here", what, n.kind), "a list such as [1, 0.5]")
		return nil, false
	}
	if len(n.items) > most {
		r.report(n.at, fmt.Sprintf("%s has %d entries", what, len(n.items)), fmt.Sprintf("at most %d", most))
		return nil, false
	}
	out, good := []*big.Rat{}, true
	for _, item := range n.items {
		c, ok := r.constant(item, "an entry of "+what)
		good = good && ok
		out = append(out, c)
	}
	return out, good
}

// coefficients reads {num, den}, descending powers.
func (r *reader) coefficients(s *section) (sdomain.Model, bool) {
	num, ok1 := r.coefficientList(s, "num")
	den, ok2 := r.coefficientList(s, "den")
	if !ok1 || !ok2 {
		return sdomain.Model{}, false
	}
	if len(den) == 0 {
		r.report(s.keyAt("den"), "the denominator is zero", "a coefficient other than 0")
		return sdomain.Model{}, false
	}
	ratio, err := exact.FromPolys(num, den)
	if err != nil {
		r.report(s.keyAt("den"), err.Error(), "")
		return sdomain.Model{}, false
	}
	return sdomain.Model{Ratio: ratio, Delay: new(big.Rat)}, true
}

func (r *reader) coefficientList(s *section, key string) (exact.Poly, bool) {
	n := s.need(key, "num and den, coefficients in descending powers")
	c, ok := r.constants(n, key, maxCoeffs)
	if !ok {
		return nil, false
	}
	if len(c) == 0 {
		r.report(n.at, key+" is an empty list", "coefficients in descending powers, such as [1, 0.5]")
		return nil, false
	}
	up := make([]*big.Rat, len(c))
	for i, v := range c {
		up[len(c)-1-i] = v
	}
	return exact.NewPoly(up...), true
}

// rootsModel reads {zeros, poles, gain}; a complex entry is a pair [re, im].
func (r *reader) rootsModel(s *section) (sdomain.Model, bool) {
	zeros, ok1 := r.roots(s.get("zeros"), "zeros")
	poles, ok2 := r.roots(s.get("poles"), "poles")
	gain, ok3 := r.constant(s.need("gain", "gain: the factor before the products"), "gain")
	if !ok1 && s.has("zeros") || !ok2 && s.has("poles") || !ok3 {
		return sdomain.Model{}, false
	}
	m, err := sdomain.FromZerosPoles(zeros, poles, gain)
	if err != nil {
		at := s.keyAt("poles")
		if e, ok := err.(*sdomain.ConjugateError); ok && e.What == "zero" {
			at = s.keyAt("zeros")
		}
		r.report(at, err.Error(), "complex entries in pairs, [re, im] and [re, -im]")
		return sdomain.Model{}, false
	}
	return m, true
}

func (r *reader) roots(n *node, what string) ([][2]*big.Rat, bool) {
	if n == nil {
		return nil, false
	}
	if n.kind != listNode || len(n.items) > maxOrder {
		r.report(n.at, what+" must be a list", fmt.Sprintf("at most %d entries, such as [-3, [-1, 2], [-1, -2]]", maxOrder))
		return nil, false
	}
	out, good := [][2]*big.Rat{}, true
	for _, item := range n.items {
		if item.kind != listNode {
			c, ok := r.constant(item, "an entry of "+what)
			out, good = append(out, [2]*big.Rat{c, new(big.Rat)}), good && ok
			continue
		}
		c, ok := r.constants(item, "an entry of "+what, 2)
		if ok && len(c) != 2 {
			r.report(item.at, "a complex entry has two parts", "[re, im]")
			ok = false
		}
		if good = good && ok; ok {
			out = append(out, [2]*big.Rat{c[0], c[1]})
		}
	}
	return out, good
}

// stateSpace reads {A, B, C, D}. B, C and D may be flat lists, D a number, 0 when missing.
func (r *reader) stateSpace(s *section) (sdomain.Model, bool) {
	a, ok1 := r.matrix(s.need("A", "the state matrix, rows first"), "A", false)
	n := len(a)
	b, ok2 := r.matrix(s.need("B", "the input column"), "B", n != 1)
	c, ok3 := r.matrix(s.need("C", "the output row"), "C", false)
	d, ok4 := [][]*big.Rat{{new(big.Rat)}}, true
	if s.has("D") {
		d, ok4 = r.matrix(s.get("D"), "D", false)
	}
	if !ok1 || !ok2 || !ok3 || !ok4 {
		return sdomain.Model{}, false
	}
	for _, m := range []struct {
		key        string
		got        [][]*big.Rat
		rows, cols int
	}{{"A", a, n, n}, {"B", b, n, 1}, {"C", c, 1, n}, {"D", d, 1, 1}} {
		if !shaped(m.got, m.rows, m.cols) {
			r.report(s.keyAt(m.key), fmt.Sprintf("%s does not fit %d states", m.key, n),
				fmt.Sprintf("%d × %d numbers (one input, one output)", m.rows, m.cols))
			return sdomain.Model{}, false
		}
	}
	m, err := sdomain.FromStateSpace(a, b, c, d)
	if err != nil {
		r.report(s.at, err.Error(), "")
		return sdomain.Model{}, false
	}
	return m, true
}

func shaped(m [][]*big.Rat, rows, cols int) bool {
	if len(m) != rows {
		return false
	}
	for _, row := range m {
		if len(row) != cols {
			return false
		}
	}
	return true
}

// matrix reads rows of constants. A flat list is a column when column says so, else a
// row; a single value is 1 × 1.
func (r *reader) matrix(n *node, what string, column bool) ([][]*big.Rat, bool) {
	if n == nil {
		return nil, false
	}
	if n.kind == textNode {
		c, ok := r.constant(n, what)
		return [][]*big.Rat{{c}}, ok && r.shortEntries(n, what, c)
	}
	if n.kind != listNode || len(n.items) == 0 || len(n.items) > maxStates {
		r.report(n.at, what+" must be a list of rows", fmt.Sprintf("1 to %d rows, such as [[0, 1], [-2, -3]]", maxStates))
		return nil, false
	}
	if n.items[0].kind != listNode {
		c, ok := r.constants(n, what, maxStates)
		if !ok || !r.shortEntries(n, what, c...) {
			return nil, false
		}
		if !column {
			return [][]*big.Rat{c}, true
		}
		var out [][]*big.Rat
		for _, v := range c {
			out = append(out, []*big.Rat{v})
		}
		return out, true
	}
	var out [][]*big.Rat
	good := true
	for _, item := range n.items {
		row, ok := r.constants(item, "a row of "+what, maxStates)
		good = good && ok && r.shortEntries(item, what, row...)
		out = append(out, row)
	}
	return out, good
}

func (r *reader) shortEntries(n *node, what string, c ...*big.Rat) bool {
	for _, v := range c {
		if v != nil && bits(v) > maxEntry {
			r.report(n.at, fmt.Sprintf("an entry of %s has about %d digits", what, bits(v)*3/10), "fewer digits")
			return false
		}
	}
	return true
}
