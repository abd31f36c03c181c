package sim

import (
	"errors"
	"fmt"
	"math"
	"sort"
)

// ErrSignal is a signal whose numbers are not finite or not in order.
var ErrSignal = errors.New("a signal needs finite numbers")

// Signal is a reference or a disturbance: 0 for t < 0, then either a sine or
// polynomial pieces of degree at most 3,
//
//	value = c0 + c1·τ + c2·τ² + c3·τ³,  τ = t − start of the piece
//
// the last piece going on for ever. It is continuous from the right. The zero value is
// the signal that stays 0. Values are immutable.
type Signal struct {
	starts   []float64 // rising, starts[0] = 0
	coef     [][4]float64
	size, w  float64 // sine, when w > 0
	duration float64
}

// Zero is the signal that stays 0.
func Zero() Signal { return Signal{} }

// Step is a for t >= 0.
func Step(a float64) Signal { return single(a, 0, 0) }

// Ramp is a·t.
func Ramp(a float64) Signal { return single(0, a, 0) }

// Parabola is a·t²/2: a is the acceleration.
func Parabola(a float64) Signal { return single(0, 0, a/2) }

func single(c0, c1, c2 float64) Signal {
	return Signal{starts: []float64{0}, coef: [][4]float64{{c0, c1, c2, 0}}}
}

// Sine is a·sin(w·t), w in rad/s; w = 0 is the signal that stays 0, and w < 0 turns the sign.
func Sine(a, w float64) Signal {
	if w == 0 {
		return Zero()
	}
	if w < 0 {
		return Signal{size: -a, w: -w}
	}
	return Signal{size: a, w: w}
}

// Table goes through the points (times[i], values[i]) in straight lines and holds the
// last value. Before the first time it is 0 when that time is after 0. Times must rise; a
// row with a time below 0 is refused. Two rows at one time make a jump.
func Table(times, values []float64) (Signal, error) {
	if len(times) == 0 || len(times) != len(values) {
		return Signal{}, fmt.Errorf("%w: a table needs as many times as values, at least one", ErrSignal)
	}
	var s Signal
	if times[0] > 0 {
		s.add(0, [4]float64{})
	}
	for i, t := range times {
		if math.IsNaN(t) || math.IsInf(t, 0) || math.IsNaN(values[i]) || math.IsInf(values[i], 0) {
			return Signal{}, fmt.Errorf("%w: row %d", ErrSignal, i+1)
		}
		if t < 0 || i > 0 && t < times[i-1] {
			return Signal{}, fmt.Errorf("%w in order: the time of row %d does not rise from 0", ErrSignal, i+1)
		}
		slope := 0.0
		if i+1 < len(times) {
			if times[i+1] == t {
				continue
			}
			slope = (values[i+1] - values[i]) / (times[i+1] - t)
		}
		if math.IsInf(slope, 0) || math.IsNaN(slope) {
			return Signal{}, fmt.Errorf("%w: the slope after row %d", ErrSignal, i+1)
		}
		s.add(t, [4]float64{values[i], slope, 0, 0})
	}
	s.duration = times[len(times)-1]
	return s, nil
}

// add appends a piece; a piece of no length is replaced.
func (s *Signal) add(start float64, c [4]float64) {
	if n := len(s.starts); n > 0 && s.starts[n-1] == start {
		s.coef[n-1] = c
		return
	}
	s.starts = append(s.starts, start)
	s.coef = append(s.coef, c)
}

// At returns the value at t.
func (s *Signal) At(t float64) float64 {
	if t < 0 {
		return 0
	}
	if s.w > 0 {
		return s.size * math.Sin(s.w*t)
	}
	if len(s.starts) == 0 {
		return 0
	}
	return s.inPiece(s.piece(t), t)
}

// piece is the index of the piece that holds at t >= 0.
func (s *Signal) piece(t float64) int {
	if n := len(s.starts); n < 2 || t >= s.starts[n-1] {
		return max(n-1, 0)
	}
	return sort.Search(len(s.starts), func(i int) bool { return s.starts[i] > t }) - 1
}

// inPiece evaluates piece i at t, which may lie outside it.
func (s *Signal) inPiece(i int, t float64) float64 {
	tau := t - s.starts[i]
	c := &s.coef[i]
	return c[0] + tau*(c[1]+tau*(c[2]+tau*c[3]))
}

// Breakpoints returns the instants where the signal is not smooth, rising; the
// first is 0. Nil for the signal that stays 0.
func (s *Signal) Breakpoints() []float64 {
	if s.w > 0 {
		return []float64{0}
	}
	return append([]float64(nil), s.starts...)
}

// Duration is the time after which the signal holds its last value: the end of a move, the last
// row of a table; 0 for an endless signal.
func (s *Signal) Duration() float64 { return s.duration }

// IsZero tells whether the signal stays 0.
func (s *Signal) IsZero() bool {
	if s.w > 0 {
		return s.size == 0
	}
	for _, c := range s.coef {
		if c != [4]float64{} {
			return false
		}
	}
	return true
}

// degree is the highest power in any piece.
func (s *Signal) degree() int {
	d := 0
	for _, c := range s.coef {
		for k := range c {
			if c[k] != 0 {
				d = max(d, k)
			}
		}
	}
	return d
}

// check refuses numbers that are not finite.
func (s *Signal) check() error {
	bad := math.IsNaN(s.size) || math.IsInf(s.size, 0) || math.IsNaN(s.w) || math.IsInf(s.w, 0)
	for _, c := range s.coef {
		for _, v := range c {
			bad = bad || math.IsNaN(v) || math.IsInf(v, 0)
		}
	}
	if bad {
		return ErrSignal
	}
	return nil
}
