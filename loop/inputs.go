package loop

import (
	"fmt"
	"math"
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

// fileInput reads a CSV file with the header t_s,r and rising times.
func (r *reader) fileInput(in *Input, n *node) bool {
	if n != nil && n.kind == textNode {
		if t := r.table(n.text); t != nil {
			in.File, in.Times, in.Values = n.text, t.Times, t.Values
			return true
		}
	}
	name, src, ok := r.openCSV(n, "t_s,r")
	in.File = name
	if !ok {
		return false
	}
	in.Times, in.Values, ok = r.timeSeries(name, src, "r")
	return ok
}

// timeSeries reads a signal over time: the header t_s and the name of the signal, times from 0 on that rise.
func (r *reader) timeSeries(name string, src []byte, signal string) (times, values []float64, ok bool) {
	shape := csvShape{headers: []string{"t_s," + signal}, least: 2, most: maxRows, row: "the time in s and " + signal}
	_, ok = r.csv(name, src, shape, func(v []float64) (message, expected string) {
		t := v[0]
		switch {
		case t < 0 || t > 1e9:
			return "the time is out of range", "0 to 1e9 s"
		case len(times) > 0 && !(t > times[len(times)-1]):
			return "the times do not rise", fmt.Sprintf("a time above %g", times[len(times)-1])
		}
		times, values = append(times, t), append(values, v[1])
		return "", ""
	})
	return times, values, ok
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
