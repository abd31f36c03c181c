package zdomain

import (
	"errors"
	"math/big"

	"steadytick/internal/exact"
)

// ErrPeriods is an operation on models of different periods.
var ErrPeriods = errors.New("the two models have different periods")

// Mul returns a·b. It stays exact when both factors are; whole ticks of delay add. Nothing is cancelled.
func (a Model) Mul(b Model) (Model, error) {
	if a.Period.Cmp(b.Period) != 0 {
		return Model{}, ErrPeriods
	}
	ticks := a.TF.Ticks + b.TF.Ticks
	if a.Exact != nil && b.Exact != nil {
		return fromExact(a.Exact.Mul(*b.Exact), a.Period, ticks)
	}
	return Model{TF: a.TF.Mul(b.TF), Period: a.Period}, nil
}

// Add returns a + b, with the least common denominator when both are exact.
// Summands with different whole-tick delays are refused unless one of them is zero.
func (a Model) Add(b Model) (Model, error) {
	switch {
	case a.Period.Cmp(b.Period) != 0:
		return Model{}, ErrPeriods
	case a.isZero():
		return b, nil
	case b.isZero():
		return a, nil
	}
	if a.Exact != nil && b.Exact != nil && a.TF.Ticks == b.TF.Ticks {
		return fromExact(a.Exact.Add(*b.Exact), a.Period, a.TF.Ticks)
	}
	sum, err := a.TF.Add(b.TF)
	return Model{TF: sum, Period: a.Period}, err
}

// Scale returns c·a.
func (a Model) Scale(c *big.Rat) (Model, error) {
	k, err := FromDelta(exact.Const(c), a.Period)
	if err != nil {
		return Model{}, err
	}
	return k.Mul(a)
}

func (a Model) isZero() bool { return len(a.TF.Num) == 0 }

func fromExact(r exact.Ratio, t *big.Rat, ticks int) (Model, error) {
	m, err := FromDelta(r, t)
	m.TF.Ticks = ticks
	return m, err
}
