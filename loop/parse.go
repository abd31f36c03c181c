package loop

import (
	"errors"
	"fmt"
	"io"
	"math/big"
	"os"
	"path/filepath"
	"strings"
)

// Options override what a loop file says, for the flags of a command.
type Options struct {
	// Period replaces the tick of the timing section, in seconds; nil keeps it.
	Period *big.Rat
	// Map replaces the maps of the controller's model or pid: a method, or "prewarped
	// at 40 Hz"; "" keeps them. Prefilter and feedforward keep their own.
	Map string
	// Symbols replaces the values of symbols by name; nil keeps them. Symbols computed from them follow.
	Symbols map[string]*big.Rat
}

// maxSymbols bounds the symbols section.
const maxSymbols = 200

// maxCSV bounds an input file in bytes.
const maxCSV = 32 << 20

// Load reads the loop file at path. Files that it names are looked up beside it.
func Load(path string) (*Loop, Problems) { return LoadWith(path, Options{}) }

// LoadWith is Load with overrides.
func LoadWith(path string, o Options) (*Loop, Problems) {
	src, err := readLimited(path, maxBytes)
	if err != nil {
		return nil, Problems{{File: path, Message: err.Error()}}
	}
	open := func(name string) ([]byte, error) {
		if !filepath.IsAbs(name) {
			name = filepath.Join(filepath.Dir(path), name)
		}
		return readLimited(name, maxCSV)
	}
	return ParseWith(path, src, open, o)
}

// readLimited reads one byte more than most allows at most, so that the reader can tell.
func readLimited(path string, most int64) ([]byte, error) {
	info, err := os.Stat(path)
	if err == nil && !info.Mode().IsRegular() {
		return nil, fmt.Errorf("cannot read it: not a regular file")
	}
	f, err := os.Open(path)
	if err != nil {
		var pe *os.PathError
		if errors.As(err, &pe) {
			err = pe.Err
		}
		return nil, fmt.Errorf("cannot read it: %v", err)
	}
	defer f.Close()
	src, err := io.ReadAll(io.LimitReader(f, most+1))
	if err != nil {
		return nil, fmt.Errorf("cannot read it: %v", err)
	}
	return src, nil
}

// Parse reads a loop file from its text. file names it in messages; open reads the
// input files that it names, as written there; nil refuses them. The Loop is nil exactly
// when there are problems.
func Parse(file string, src []byte, open func(path string) ([]byte, error)) (*Loop, Problems) {
	return ParseWith(file, src, open, Options{})
}

// ParseWith is Parse with overrides.
func ParseWith(file string, src []byte, open func(path string) ([]byte, error), o Options) (*Loop, Problems) {
	text := strings.ReplaceAll(strings.TrimPrefix(string(src), "\ufeff"), "\r\n", "\n")
	r := &reader{file: file, open: open, options: o}
	if len(src) <= maxBytes {
		r.lines = strings.Split(text, "\n")
	}
	r.symbols = map[string]*big.Rat{}
	guard(r, src)
	if len(r.problems) > 0 {
		return nil, r.problems.sorted(file)
	}
	root := yamlTree(r, text)
	if root == nil || root.broken {
		return nil, r.problems.sorted(file)
	}
	l := r.loop(root)
	if len(r.problems) > 0 {
		return nil, r.problems.sorted(file)
	}
	l.File, l.Source, l.open, l.options, l.periodic, l.tree = file, append([]byte(nil), src...), open, o, r.periodic, root
	return l, nil
}

// loop reads the whole file. Sections that others need come first.
func (r *reader) loop(root *node) *Loop {
	s, broken := r.section(root, "the loop file", "loop", "output", "effort", "symbols", "plant", "controller",
		"sensor", "actuator", "timing", "inputs", "requirements", "settling_band", "timer", "processor", "rate", "disturbances")
	s.at = place{1, 1}
	if broken {
		return nil
	}
	l := &Loop{Output: "units", Effort: "units", SettlingBand: 0.02}
	l.Name, _ = r.text(s.need("loop", "a name for the loop"), "loop")
	if t, ok := r.text(s.get("output"), "output"); ok {
		l.Output = t
	}
	if t, ok := r.text(s.get("effort"), "effort"); ok {
		l.Effort = t
	}
	r.own = []string{l.Output, l.Effort}
	r.readSymbols(l, s.get("symbols"))
	timed := r.timing(&l.Timing, s)
	r.plant(l, s.need("plant", "plant: {model: …}"))
	r.sensor(l, s.get("sensor"))
	r.actuator(l, s.get("actuator"))
	r.controller(l, s.need("controller", "controller: with model or pid"), timed)
	r.inputs(l, s.get("inputs"))
	r.requirements(l, s.get("requirements"))
	r.settlingBand(l, s.get("settling_band"))
	r.timer(l, s.get("timer"))
	r.processor(l, s.get("processor"))
	r.search(l, s.get("rate"))
	r.disturbances(l, s.get("disturbances"))
	if len(r.problems) == 0 {
		r.check(l, s)
	}
	return l
}

// readSymbols reads the symbols in order: an expression may use the earlier ones.
func (r *reader) readSymbols(l *Loop, n *node) {
	defer r.checkGiven(l)
	if n == nil {
		return
	}
	if n.kind != mapNode {
		r.report(n.at, fmt.Sprintf("symbols is %s here", n.kind), "a mapping such as {J: 0.018, b: 0.09}")
		return
	}
	if len(n.entries) > maxSymbols {
		r.report(n.at, fmt.Sprintf("%d symbols", len(n.entries)), fmt.Sprintf("at most %d", maxSymbols))
		return
	}
	for _, e := range n.entries {
		r.symbol(l, e)
	}
}

func (r *reader) symbol(l *Loop, e entry) {
	good := true
	switch {
	case contains(reserved, e.key):
		r.report(e.at, fmt.Sprintf("%s cannot be a symbol", quote(e.key)), "a name other than "+list(reserved))
		good = false
	case !isName(e.key):
		r.report(e.at, fmt.Sprintf("%s is not a name", quote(e.key)), "letters, digits and _, not beginning with a digit")
		good = false
	}
	out := Symbol{Name: e.key}
	value := e.value
	if value.kind == mapNode {
		s, _ := r.section(value, "the symbol "+e.key, "value", "spread")
		value = s.need("value", "value: a number")
		out.Spread = r.spread(s.get("spread"))
	} else if value.kind == emptyNode && !value.broken {
		r.report(e.at, fmt.Sprintf("the symbol %s has no value", e.key), "a number")
	}
	if value == nil || value.kind == emptyNode {
		value = &node{broken: true}
	}
	var ok bool
	out.Value, ok = r.constant(value, "the symbol "+e.key)
	if !ok {
		out.Value = big.NewRat(1, 1) // reported; later expressions that use it are still read
	}
	if good {
		if ok {
			out.Value = r.taken(e, out)
		}
		r.symbols[e.key] = out.Value
		r.known = append(r.known, e.key)
		l.Symbols = append(l.Symbols, out)
	}
}

// spread reads a tolerance in %, as a fraction; nil for none or a wrong one.
func (r *reader) spread(n *node) *big.Rat {
	if n == nil {
		return nil
	}
	v, ok := r.quantity(n, "spread", percentDim, "20 %")
	if !ok {
		return nil
	}
	if v.Sign() < 0 || v.Cmp(big.NewRat(100, 1)) >= 0 {
		r.report(n.at, "spread is out of range", "0 % up to below 100 %")
		return nil
	}
	return v.Quo(v, big.NewRat(100, 1))
}

// settlingBand reads the band of settling, a fraction of the final value.
func (r *reader) settlingBand(l *Loop, n *node) {
	if n == nil {
		return
	}
	v, ok := r.quantity(n, "settling_band", percentDim, "2 %")
	if !ok {
		return
	}
	if v.Cmp(big.NewRat(1, 1000)) < 0 || v.Cmp(big.NewRat(50, 1)) > 0 {
		r.report(n.at, "settling_band is out of range", "0.001 % to 50 %")
		return
	}
	l.SettlingBand, _ = v.Quo(v, big.NewRat(100, 1)).Float64()
}
