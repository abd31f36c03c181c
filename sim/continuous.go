package sim

import (
	"fmt"
	"math"
	"math/big"
	"sync"

	"steadytick/internal/dd"
)

// Continuous is a linear continuous system with several inputs and outputs and a dead
// time on the way from an input to the states it drives,
//
//	x' = A·x + Σ_c B_c·in_c(t − τ_c)
//	y  = C·x + Σ_c D_c·in_c(t − τ_c)
//
// with c over its channels: an input with two dead times (one to y, another to a
// measurement) has two channels. It is immutable and may serve several runs at once.
type Continuous struct {
	n, inputs, outputs int
	a, c               []float64 // n×n, outputs×n, row by row
	channels           []Channel

	mu    sync.Mutex
	steps map[string]*advance // prepared steps by layout and length
}

// Channel is one way from an input into a Continuous.
type Channel struct {
	Input int       // which input
	Delay *big.Rat  // dead time in seconds, nil for none
	B     []float64 // into the states, n numbers
	D     []float64 // straight to the outputs, one number for each
}

// NewContinuous makes a system of A (n×n) and C (outputs×n) and its channels; inputs are
// numbered 0 to inputs−1. Errors: shapes that do not fit, numbers that are not
// finite, a negative dead time.
func NewContinuous(a, c [][]float64, inputs int, channels []Channel) (*Continuous, error) {
	n, outs := len(a), len(c)
	if n > maxOrder || outs == 0 {
		return nil, fmt.Errorf("a system needs an output and at most %d states", maxOrder)
	}
	s := &Continuous{n: n, inputs: inputs, outputs: outs, steps: map[string]*advance{}}
	for _, row := range a {
		s.a = append(s.a, row...)
	}
	for _, row := range c {
		s.c = append(s.c, row...)
	}
	ok := len(s.a) == n*n && len(s.c) == outs*n && finite(s.a) && finite(s.c)
	for i, row := range append(append([][]float64(nil), a...), c...) {
		ok = ok && (i >= n || len(row) == n) && len(row) == n
	}
	for _, ch := range channels {
		ok = ok && len(ch.B) == n && len(ch.D) == outs && finite(ch.B) && finite(ch.D) &&
			ch.Input >= 0 && ch.Input < inputs && (ch.Delay == nil || ch.Delay.Sign() >= 0)
		if ch.Delay == nil {
			ch.Delay = new(big.Rat)
		}
		ch.Delay = new(big.Rat).Set(ch.Delay)
		ch.B = append([]float64(nil), ch.B...)
		ch.D = append([]float64(nil), ch.D...)
		s.channels = append(s.channels, ch)
	}
	if !ok {
		return nil, fmt.Errorf("the matrices of the system do not fit together")
	}
	return s, nil
}

func finite(list []float64) bool {
	for _, v := range list {
		if math.IsNaN(v) || math.IsInf(v, 0) {
			return false
		}
	}
	return true
}

// padded puts v at position at among n zeros.
func padded(v []float64, at, n int) []float64 {
	out := make([]float64, n)
	copy(out[at:], v)
	return out
}

// step returns the prepared step of h seconds of a flow built on this system with the layout
// named by key, shared between runs.
func (s *Continuous) step(f *flow, key string, h *big.Rat) (*advance, error) {
	key = key + " " + h.RatString()
	s.mu.Lock()
	p := s.steps[key]
	s.mu.Unlock()
	if p != nil {
		return p, nil
	}
	p, err := f.step(dd.FromRat(h))
	if err != nil {
		return nil, err
	}
	s.mu.Lock()
	defer s.mu.Unlock()
	if len(s.steps) < 1000 { // a bound on what is kept, far above what a study needs
		s.steps[key] = p
	}
	return p, nil
}
