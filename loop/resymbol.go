package loop

import (
	"fmt"
	"math/big"
	"slices"
	"strings"
)

// WithSymbols is the same loop with other values for the named symbols, with every check again. A symbol that is computed from others is
// computed afresh unless it is named itself; options carry over. The file is not taken apart again, only what is written in it is computed
// again, and input files are not read again: the result shares their rows with l. A name that the file does not have is a problem.
func (l *Loop) WithSymbols(values map[string]*big.Rat) (*Loop, Problems) {
	o := l.options
	o.Symbols = values
	r := l.again(o)
	out := r.loop(l.tree)
	if len(r.problems) > 0 {
		return nil, r.problems.sorted(l.File)
	}
	out.File, out.Source, out.open, out.options, out.periodic, out.tree = l.File, l.Source, l.open, o, r.periodic, l.tree
	return out, nil
}

// DrawSymbols goes through the symbols in the order of the file. draw is given each with the value that follows from those before it, as
// drawn, and returns the value to take in its place; nil keeps it. The result has the values taken.
func (l *Loop) DrawSymbols(draw func(Symbol) *big.Rat) ([]Symbol, Problems) {
	r := l.again(l.options)
	r.draw = draw
	out := &Loop{}
	for _, e := range l.tree.entries {
		if e.key == "symbols" && !e.value.broken && e.value.kind != emptyNode {
			r.readSymbols(out, e.value)
		}
	}
	if len(r.problems) > 0 {
		return nil, r.problems.sorted(l.File)
	}
	return out.Symbols, nil
}

// again is a reader for the tree of l, which it does not change: it may run beside others.
func (l *Loop) again(o Options) *reader {
	r := &reader{file: l.File, open: l.open, options: o}
	r.symbols = map[string]*big.Rat{}
	r.source = func() []string { return textLines(l.Source) }
	r.tables = l.Inputs
	return r
}

// textLines are the lines of a file as messages show them.
func textLines(src []byte) []string {
	text := strings.ReplaceAll(strings.TrimPrefix(string(src), "\ufeff"), "\r\n", "\n")
	return strings.Split(text, "\n")
}

// table is the input file of a name that was read before, nil for none.
func (r *reader) table(name string) *Input {
	i := slices.IndexFunc(r.tables, func(in Input) bool { return in.Kind == "file" && in.File == name })
	if i < 0 {
		return nil
	}
	return &r.tables[i]
}

// taken is the value of a symbol: the one drawn or given in its place, else its own.
func (r *reader) taken(e entry, s Symbol) *big.Rat {
	v := s.Value
	switch given := r.options.Symbols[s.Name]; {
	case r.draw != nil:
		if d := r.draw(s); d != nil {
			v = d
		}
	case given != nil:
		v = given
	}
	if v != s.Value && !inRange(v) {
		r.report(e.at, fmt.Sprintf("the value taken for the symbol %s is outside the range of numbers", s.Name), "0, or a magnitude from 1e-200 to 1e200")
		return s.Value
	}
	return v
}

// checkGiven reports names given in place of symbols that the file does not have.
func (r *reader) checkGiven(l *Loop) {
	var names []string
	for name := range r.options.Symbols {
		if !slices.ContainsFunc(l.Symbols, func(s Symbol) bool { return s.Name == name }) {
			names = append(names, name)
		}
	}
	slices.Sort(names)
	for _, name := range names {
		r.reportNear(place{}, fmt.Sprintf("a value is given for %s, which is no symbol of the file", quote(name)), "a name of the symbols section", nearest(name, r.known))
	}
}
