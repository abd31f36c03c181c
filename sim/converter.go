package sim

import "math"

// Converter is a uniform quantizer, mid-tread, halves upward. With Bits it has 2^Bits codes,
//
//	q = (High − Low)/2^Bits,  value = Low + code·q,  code = 0 … 2^Bits − 1
//
// and stops at the end codes (IEEE Std 1241 calls q the code bin width; the top code is High − q). With
// Step instead, value = code·Step for every whole code, or within Low … High when those are given. The
// zero value does not quantize.
type Converter struct {
	Bits      int
	Low, High float64
	Step      float64
}

// Value returns the quantized x.
func (c Converter) Value(x float64) float64 {
	if c.Step > 0 {
		v := math.Floor(x/c.Step+0.5) * c.Step
		if c.High > c.Low {
			v = math.Max(c.Low, math.Min(v, c.High))
		}
		return v
	}
	if c.Bits <= 0 {
		return x
	}
	codes := math.Ldexp(1, c.Bits)
	q := (c.High - c.Low) / codes
	code := math.Floor((x-c.Low)/q + 0.5)
	return c.Low + math.Max(0, math.Min(code, codes-1))*q
}

// Bin is the width of a code, 0 without quantization.
func (c Converter) Bin() float64 {
	switch {
	case c.Step > 0:
		return c.Step
	case c.Bits > 0:
		return (c.High - c.Low) / math.Ldexp(1, c.Bits)
	}
	return 0
}

func (c Converter) valid() bool {
	if !finite([]float64{c.Low, c.High, c.Step}) || c.Step < 0 || c.Step > 0 && c.Bits != 0 {
		return false
	}
	return c.Bits == 0 || c.Bits > 0 && c.Bits <= 52 && c.High > c.Low
}
