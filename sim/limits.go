package sim

import "math"

// Converter is a uniform quantizer of 2^Bits codes,
//
//	q = (High − Low)/2^Bits,  value = Low + code·q,  code = 0 … 2^Bits − 1
//
// rounding to the nearest code, halves upward, and stopping at the end codes (IEEE Std 1241
// calls q the code bin width; the top code is High − q). Bits = 0: no quantization.
type Converter struct {
	Bits      int
	Low, High float64
}

// Value returns the quantized x.
func (c Converter) Value(x float64) float64 {
	if c.Bits <= 0 {
		return x
	}
	codes := math.Ldexp(1, c.Bits)
	q := (c.High - c.Low) / codes
	code := math.Floor((x-c.Low)/q + 0.5)
	return c.Low + math.Max(0, math.Min(code, codes-1))*q
}

func (c Converter) valid() bool {
	return c.Bits == 0 || c.Bits > 0 && c.Bits <= 52 && c.High > c.Low && finite([]float64{c.Low, c.High})
}

// Limits bound the effort. The zero value does not limit.
type Limits struct {
	On        bool
	Low, High float64
}

func (l Limits) valid() bool { return !l.On || l.High > l.Low && finite([]float64{l.Low, l.High}) }

// clip returns v within the limits.
func (l Limits) clip(v float64) float64 {
	if !l.On {
		return v
	}
	return math.Max(l.Low, math.Min(v, l.High))
}

// actuator is the way from the computed effort to the held one: limits, slew, quantizer.
// The slew runs on the effort before its quantization, so that a slow slew is not lost in it.
type actuator struct {
	limits    Limits
	converter Converter
	rise      float64 // largest change in a tick, +Inf for no limit
	last      float64
}

// hold returns the effort that will be held for the computed effort v.
func (a *actuator) hold(v float64) float64 {
	u := a.limits.clip(v)
	if u > a.last+a.rise {
		u = a.last + a.rise
	} else if u < a.last-a.rise {
		u = a.last - a.rise
	}
	a.last = u
	return a.converter.Value(u)
}
