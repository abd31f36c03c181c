package loop

import (
	"bytes"
	"fmt"
	"math"
	"strconv"
	"strings"
)

// inputKinds in the order in which messages list them.
var inputKinds = []string{"step", "ramp", "parabola", "sine", "move", "file", "load_step"}

// maxInputs bounds the list of inputs: each is simulated several times.
const maxInputs = 20

// inputs reads the list of inputs, each a mapping with one key.
func (r *reader) inputs(l *Loop, n *node) {
	if n == nil {
		return
	}
	if n.kind != listNode || len(n.items) > maxInputs {
		r.report(n.at, fmt.Sprintf("inputs must be a list of at most %d", maxInputs), "entries such as - step: 1")
		return
	}
	for _, item := range n.items {
		s, broken := r.section(item, "an input", inputKinds...)
		if broken {
			continue
		}
		if len(item.entries) != 1 {
			r.report(item.at, fmt.Sprintf("an input with %d keys", len(item.entries)), "one input in one entry, each with its own dash")
			continue
		}
		kind := item.entries[0].key
		if v := s.get(kind); v != nil {
			if in, ok := r.input(kind, v); ok {
				l.Inputs = append(l.Inputs, in)
			}
		}
	}
}

func (r *reader) input(kind string, n *node) (Input, bool) {
	in := Input{Kind: kind}
	switch kind {
	case "sine":
		s, broken := r.section(n, "sine", "size", "frequency")
		if broken {
			return in, false
		}
		sized := r.size(&in, s.need("size", "size: the amplitude"), "the size of the sine")
		w, ok := r.angular(s.need("frequency", "frequency: 0.5 Hz"), "frequency")
		in.Frequency = w
		return in, ok && sized
	case "move":
		return in, r.move(&in, n)
	case "file":
		return in, r.fileInput(&in, n)
	}
	return in, r.size(&in, n, "the size of the "+kind)
}

// size reads the size of an input, in the loop's own units.
func (r *reader) size(in *Input, n *node, what string) bool {
	c, ok := r.constant(n, what)
	if !ok {
		return false
	}
	if c.Sign() == 0 {
		r.report(n.at, what+" is zero", "a number other than 0")
		return false
	}
	in.SizeExact = c
	in.Size, _ = c.Float64()
	return true
}

// move reads a motion profile; all four figures are positive.
func (r *reader) move(in *Input, n *node) bool {
	s, broken := r.section(n, "move", "distance", "velocity", "acceleration", "jerk")
	if broken {
		return false
	}
	m, good := &Move{}, true
	for _, f := range []struct {
		key string
		to  *float64
	}{{"distance", &m.Distance}, {"velocity", &m.Velocity}, {"acceleration", &m.Acceleration}, {"jerk", &m.Jerk}} {
		v := s.need(f.key, f.key+": a number above 0, in output units and seconds")
		x, ok := r.float(v, f.key)
		if ok && !(x > 0) {
			r.report(v.at, f.key+" is not above zero", "a number above 0")
			ok = false
		}
		*f.to, good = x, good && ok
	}
	if good && !(moveTime(m) < 1e9) {
		r.report(s.at, "the move takes longer than 1e9 s", "")
		good = false
	}
	in.Move = m
	return good
}

// moveTime is an upper bound of the duration of a move in seconds: the phases of
// constant velocity, acceleration and jerk one after another.
func moveTime(m *Move) float64 {
	d := m.Distance
	return d/m.Velocity + 2*math.Sqrt(d/m.Acceleration) + 4*math.Cbrt(d/m.Jerk) +
		2*m.Velocity/m.Acceleration + 2*m.Acceleration/m.Jerk
}

// maxRows bounds an input file.
const maxRows = 1_000_000

// fileInput reads a CSV file with the header t_s,r and rising times.
func (r *reader) fileInput(in *Input, n *node) bool {
	name, ok := r.text(n, "file")
	if !ok {
		return false
	}
	in.File = name
	if t := r.table(name); t != nil {
		in.Times, in.Values = t.Times, t.Values
		return true
	}
	if r.open == nil || name == "" || strings.ContainsRune(name, 0) {
		r.report(n.at, "input files cannot be opened here", "")
		return false
	}
	src, err := r.open(name)
	if err != nil {
		r.report(n.at, fmt.Sprintf("file %s: %v", quote(name), err), "a CSV file with the header t_s,r")
		return false
	}
	return r.csv(in, name, src)
}

// csv fills Times and Values. Its problems name the CSV file; only the first is told.
func (r *reader) csv(in *Input, name string, src []byte) bool {
	fail := func(line int, text, message, expected string) bool {
		if len(text) > 200 {
			text = text[:200]
		}
		r.faults++
		r.problems = append(r.problems, Problem{File: name, Line: line, Column: min(line, 1), LineText: text,
			Message: message, Expected: expected})
		return false
	}
	if len(src) > maxCSV {
		return fail(0, "", "the input file is too long", fmt.Sprintf("at most %d bytes", maxCSV))
	}
	src = bytes.TrimPrefix(src, []byte("\xef\xbb\xbf"))
	line := 0
	for len(src) > 0 {
		raw, rest, _ := bytes.Cut(src, []byte("\n"))
		src = rest
		line++
		text := strings.TrimSpace(string(raw))
		if line == 1 {
			if head := strings.ReplaceAll(text, " ", ""); head != "t_s,r" {
				return fail(1, text, "this is not the header of an input file", "t_s,r")
			}
			continue
		}
		if text == "" {
			continue
		}
		t, v, message := csvRow(text)
		switch {
		case message != "":
			return fail(line, text, message, "two numbers: the time in s and r")
		case t < 0 || t > 1e9:
			return fail(line, text, "the time is out of range", "0 to 1e9 s")
		case len(in.Times) > 0 && !(t > in.Times[len(in.Times)-1]):
			return fail(line, text, "the times do not rise", fmt.Sprintf("a time above %g", in.Times[len(in.Times)-1]))
		case len(in.Times) == maxRows:
			return fail(line, "", "the input file has too many rows", fmt.Sprintf("at most %d", maxRows))
		}
		in.Times, in.Values = append(in.Times, t), append(in.Values, v)
	}
	if len(in.Times) < 2 {
		return fail(0, "", "the input file has fewer than two rows", "the header t_s,r and two rows or more")
	}
	return true
}

// csvRow reads "t,r"; message is what is wrong, "" for nothing.
func csvRow(text string) (t, v float64, message string) {
	a, b, found := strings.Cut(text, ",")
	if !found || strings.Contains(b, ",") {
		return 0, 0, "this row does not have two columns"
	}
	for _, f := range []struct {
		s  string
		to *float64
	}{{strings.TrimSpace(a), &t}, {strings.TrimSpace(b), &v}} {
		if strings.Trim(f.s, "0123456789+-.eE") != "" || len(f.s) > 2*maxDigits {
			return 0, 0, fmt.Sprintf("%s is not a number", quote(f.s))
		}
		x, err := strconv.ParseFloat(f.s, 64)
		if err != nil || math.Abs(x) > 1e200 {
			return 0, 0, fmt.Sprintf("%s is not a number, or out of range", quote(f.s))
		}
		*f.to = x
	}
	return t, v, ""
}

// first is the first input of one of the kinds, nil for none.
func (l *Loop) first(kinds ...string) *Input {
	for i := range l.Inputs {
		if contains(kinds, l.Inputs[i].Kind) {
			return &l.Inputs[i]
		}
	}
	return nil
}
