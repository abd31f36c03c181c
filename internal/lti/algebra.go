package lti

import (
	"errors"
	"fmt"

	"steadytick/internal/dd"
	"steadytick/internal/poly"
)

// ErrDelay says that two transfer functions with different delays were added:
// the sum is not of the form of TF.
var ErrDelay = errors.New("a sum of transfer functions with different delays has no common delay")

// Constant returns the static gain c at a period (0 for the continuous domain).
func Constant(c, period dd.Float) TF {
	g := TF{Period: period}
	if c.Sign() != 0 {
		g.Num = poly.Const(c)
	}
	return g
}

// IsZero tells whether g is the zero function.
func (g TF) IsZero() bool { return len(g.Num) == 0 }

// Order is the number of poles without the delay, hidden ones included.
func (g TF) Order() int { return len(g.Poles) + g.OriginPoles }

// RelativeDegree is the number of poles less the number of zeros, the delay apart.
func (g TF) RelativeDegree() int { return g.Order() - g.OriginZeros - g.Num.Degree() }

// samePeriod panics on a bug of the caller: transfer functions of two periods
// have no common variable.
func samePeriod(a, b TF) {
	if a.Period != b.Period {
		panic(fmt.Sprintf("lti: periods %g s and %g s mixed", a.Period.Float64(), b.Period.Float64()))
	}
}

// Scale returns c·g. The result keeps the poles of g unless c is 0.
func (g TF) Scale(c dd.Float) TF {
	if c.Sign() == 0 {
		return TF{Period: g.Period}
	}
	g.Num = g.Num.Scale(c)
	return g
}

// Mul returns a·b; delays add, nothing is cancelled. Different periods are a bug of
// the caller and panic.
func (a TF) Mul(b TF) TF {
	samePeriod(a, b)
	if a.IsZero() || b.IsZero() {
		return TF{Period: a.Period}
	}
	return TF{
		zeros:       bothZeros(a, b),
		Num:         a.Num.Mul(b.Num),
		Poles:       append(append([]dd.Complex(nil), a.Poles...), b.Poles...),
		OriginZeros: a.OriginZeros + b.OriginZeros,
		OriginPoles: a.OriginPoles + b.OriginPoles,
		Period:      a.Period,
		Ticks:       a.Ticks + b.Ticks,
		DeadTime:    a.DeadTime.Add(b.DeadTime),
	}
}

// bothZeros are the zeros of a product, nil unless those of one factor are known and those of the other are or
// can be found.
func bothZeros(a, b TF) []dd.Complex {
	if a.zeros == nil && b.zeros == nil {
		return nil
	}
	a, b = a.FindZeros(), b.FindZeros()
	if a.zeros == nil || b.zeros == nil {
		return nil
	}
	return append(append(make([]dd.Complex, 0, len(a.zeros)+len(b.zeros)), a.zeros...), b.zeros...)
}

// Add returns a + b over the least common denominator: a pole that stands in
// both, bitwise equal, is counted once. Low-order numerator coefficients that sum
// to exactly zero become zeros at the origin; a coefficient that should cancel but
// leaves rounding noise does not, so structure is decided over exact rationals, not here.
// The error is ErrDelay. Different periods are a bug of the caller and panic.
func (a TF) Add(b TF) (TF, error) {
	samePeriod(a, b)
	switch {
	case a.IsZero():
		return b, nil
	case b.IsZero():
		return a, nil
	case a.Ticks != b.Ticks || a.DeadTime != b.DeadTime:
		return TF{}, ErrDelay
	}
	onlyA, onlyB := difference(a.Poles, b.Poles), difference(b.Poles, a.Poles)
	origin := max(a.OriginPoles, b.OriginPoles)
	na := a.Num.Mul(poly.FromRoots(onlyB)).Shift(a.OriginZeros + origin - a.OriginPoles)
	nb := b.Num.Mul(poly.FromRoots(onlyA)).Shift(b.OriginZeros + origin - b.OriginPoles)
	num := na.Add(nb).Trim()
	if len(num) == 0 {
		return TF{Period: a.Period}, nil
	}
	low := 0
	for num[low].Sign() == 0 {
		low++
	}
	return TF{
		Num:         num[low:],
		Poles:       append(append([]dd.Complex(nil), a.Poles...), onlyB...),
		OriginZeros: low,
		OriginPoles: origin,
		Period:      a.Period,
		Ticks:       a.Ticks,
		DeadTime:    a.DeadTime,
	}, nil
}

// difference returns the members of a that are not in b, with multiplicity.
func difference(a, b []dd.Complex) []dd.Complex {
	used := make([]bool, len(b))
	var out []dd.Complex
next:
	for _, p := range a {
		for j, q := range b {
			if !used[j] && p == q {
				used[j] = true
				continue next
			}
		}
		out = append(out, p)
	}
	return out
}
