package sim

import (
	"context"
	"math"
)

// PeakGains are the largest outputs at the samples that disturbances within ±1, whatever they do from tick to
// tick, can bring about in a linear sampled loop: the sums of the magnitudes of the impulse responses,
//
//	Measurement: of y to what is added to the measurement at a sample
//	Effort:      of y to what is added to the held effort for a tick
//
// A quantizer of bin q is such a disturbance of q/2; so every limit cycle that quantizers can cause lies within these.
type PeakGains struct{ Measurement, Effort float64 }

// Peaks computes the peak gains of the one task of a loop without limits, jitter and quantization. Errors:
// ErrNoVariance where the responses do not die out, ctx.Err(), mistakes in cfg.
func Peaks(ctx context.Context, cfg Config) (PeakGains, error) {
	var out PeakGains
	for _, x := range []struct {
		to     *float64
		effort bool
	}{{&out.Measurement, false}, {&out.Effort, true}} {
		sum := 0.0
		k := &kick{value: 1, effort: x.effort}
		err := impulse(ctx, cfg, k, func(_, y float64) (float64, float64) {
			sum += math.Abs(y)
			return 0, math.Abs(y)
		})
		if err != nil {
			return PeakGains{}, err
		}
		*x.to = sum
	}
	return out, nil
}
