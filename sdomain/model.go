// Package sdomain holds continuous models: exact rational functions of s with
// their factors and a dead time, their algebra, their Laurent series and their
// error constants.
//
// Conventions: s in rad/s, dead time in seconds; coefficient lists are
// ascending unless a function says otherwise; nothing is cancelled, so that a
// pole-zero cancellation written by the user stays visible as a hidden mode (Ratio.Hidden).
//
// Limits: exact.MaxOrder and exact.MaxBits, checked after each operation; a
// model with a dead time is a single product Ratio·e^(−s·Delay), so sums of different dead
// times and divisions by a dead time are refused.
package sdomain

import (
	"math/big"

	"steadytick/internal/dd"
	"steadytick/internal/exact"
	"steadytick/internal/lti"
)

// Model is G(s) = Ratio(s) · e^(−s·Delay), Delay in seconds, never negative.
// Values are immutable.
type Model struct {
	Ratio exact.Ratio
	Delay *big.Rat
}

// delay returns the dead time; a nil Delay (the zero value) is 0.
func (m Model) delay() *big.Rat {
	if m.Delay == nil {
		return new(big.Rat)
	}
	return m.Delay
}

// Proper tells whether G is finite at large s: no more zeros than poles.
func (m Model) Proper() bool { return m.RelativeDegree() >= 0 }

// StrictlyProper tells whether G vanishes at large s: more poles than zeros, or the zero function.
func (m Model) StrictlyProper() bool { return m.Ratio.IsZero() || m.RelativeDegree() > 0 }

// RelativeDegree is the number of poles less the number of zeros; 0 for the zero function.
func (m Model) RelativeDegree() int { return m.Ratio.RelativeDegree() }

// DCGain returns lim G(s) for s → 0. With order = 0 the gain is finite. With order
// > 0 it is infinite as gain/s^order, gain being the leading coefficient.
func (m Model) DCGain() (gain *big.Rat, order int) {
	if m.Ratio.IsZero() {
		return new(big.Rat), 0
	}
	order = m.Ratio.OriginPoles - m.Ratio.OriginZeros
	if order < 0 {
		return new(big.Rat), 0
	}
	return new(big.Rat).Set(m.Ratio.Gain), order
}

// Laurent returns the first n terms of the expansion about s = 0,
//
//	G(s) = Σ_{k<n} c[k]·s^(start+k) + …,   c[0] ≠ 0
//
// exact, with the Taylor series Σ (−s·Delay)^k/k! of the dead time included. The zero
// function gives start 0 and zeros.
func (m Model) Laurent(n int) (start int, c []*big.Rat) {
	start, c = m.Ratio.Laurent(n)
	tau := m.delay()
	if tau.Sign() == 0 {
		return start, c
	}
	e := make([]*big.Rat, len(c))
	for k := range e {
		if k == 0 {
			e[k] = big.NewRat(1, 1)
			continue
		}
		e[k] = new(big.Rat).Mul(e[k-1], tau)
		e[k].Mul(e[k], big.NewRat(-1, int64(k)))
	}
	out := make([]*big.Rat, len(c))
	var t big.Rat
	for k := range out {
		out[k] = new(big.Rat)
		for j := 0; j <= k; j++ {
			out[k].Add(out[k], t.Mul(c[j], e[k-j]))
		}
	}
	return start, out
}

// TF returns the model for numerical work. Numerator coefficients are folded
// and expanded in Q and rounded once; poles are correctly rounded. Errors:
// exact.ErrRange, exact.ErrRoots.
func (m Model) TF() (lti.TF, error) {
	num, poles, err := m.Ratio.Numeric()
	if err != nil {
		return lti.TF{}, err
	}
	return lti.TF{
		Num: num, Poles: poles,
		OriginZeros: m.Ratio.OriginZeros, OriginPoles: m.Ratio.OriginPoles,
		DeadTime: dd.FromRat(m.delay()),
	}, nil
}
