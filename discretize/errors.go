package discretize

import (
	"fmt"
	"math/big"
)

// ImproperError tells of a model, or a result, whose numerator has a higher
// degree than its denominator: it would need future samples.
type ImproperError struct {
	Method string
	Excess int  // degree of the numerator minus degree of the denominator
	Mapped bool // the mapped controller is improper, not the model itself
}

func (e *ImproperError) Error() string {
	if e.Mapped {
		return fmt.Sprintf("%s: the mapped controller needs samples %d ticks ahead (a zero at infinity was mapped to infinity, or a pole of the model lies where this map has z = ∞)", e.Method, e.Excess)
	}
	return fmt.Sprintf("%s: the model is improper, its numerator is %d degrees higher than its denominator", e.Method, e.Excess)
}

// DelayError tells of a delay that the method cannot make: a part of a tick in a
// controller, an output asked for more than a tick ahead, or too many ticks to count.
type DelayError struct {
	Method string
	Ticks  *big.Rat // the delay in ticks
	Reason string
}

func (e *DelayError) Error() string {
	return fmt.Sprintf("%s: a delay of %s ticks: %s", e.Method, e.Ticks.FloatString(6), e.Reason)
}

// GrowthError tells of poles (or, for the matched map, zeros) so far on the right
// that e^{pT} multiplies to more than e^600.
type GrowthError struct {
	What string  // "pole" or "zero"
	PT   float64 // sum of Re p·T over those with Re p > 0
}

func (e *GrowthError) Error() string {
	return fmt.Sprintf("the unstable %ss of the model grow by e^%.4g within one period (limit e^%d): no sampled model at this rate is meaningful", e.What, e.PT, maxGrowth)
}

// RangeError tells of numbers outside what the arithmetic can hold.
type RangeError struct {
	What         string
	Value, Limit float64
}

func (e *RangeError) Error() string {
	return fmt.Sprintf("%s is %.4g, outside what the arithmetic holds (limit %.4g)", e.What, e.Value, e.Limit)
}

// PeriodError tells of a period that is not positive.
type PeriodError struct{ T *big.Rat }

func (e *PeriodError) Error() string {
	if e.T == nil {
		return "no period given"
	}
	return fmt.Sprintf("the period must be positive, not %s s", e.T.FloatString(9))
}

// MethodError tells of a map that does not exist.
type MethodError struct{ Method string }

func (e *MethodError) Error() string {
	return fmt.Sprintf("unknown map %q, expected one of %v", e.Method, Methods())
}

// AtError tells of a prewarping frequency that is missing, not positive, or not
// below half the sample rate.
type AtError struct{ At, Nyquist float64 } // rad/s; At = 0 when missing

func (e *AtError) Error() string {
	if e.At <= 0 {
		return "prewarped: needs a positive frequency at which to be exact"
	}
	return fmt.Sprintf("prewarped: %.6g rad/s is not below half the sample rate, %.6g rad/s", e.At, e.Nyquist)
}
