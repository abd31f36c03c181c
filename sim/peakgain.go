package sim

import (
	"context"
	"math"
)

// PeakGains are the largest outputs that disturbances within ±1, whatever they do from tick to tick, can bring
// about in a linear sampled loop: the sums of the magnitudes of the impulse responses,
//
//	Measurement: of y to what is added to the measurement at a sample
//	Effort:      of y to what is added to the held effort for a tick
//
// each the largest over the offsets from the sample at which y is looked at. A quantizer of bin q is such a
// disturbance of q/2; so every limit cycle that quantizers can cause lies within these.
type PeakGains struct{ Measurement, Effort float64 }

// Peaks computes the peak gains of the one task of a loop without limits, jitter and quantization, looking at
// cfg.PointsPerTick offsets in a tick besides the instants of sample and update. Errors: ErrNoVariance where the responses do not
// die out, ctx.Err(), mistakes in cfg.
func Peaks(ctx context.Context, cfg Config) (PeakGains, error) {
	var out PeakGains
	for _, x := range []struct {
		to     *float64
		effort bool
	}{{&out.Measurement, false}, {&out.Effort, true}} {
		var sums []float64 // by the number of the look within its tick
		k := &kick{value: 1, effort: x.effort, looked: func(i int, y float64) {
			if i == len(sums) {
				sums = append(sums, 0)
			}
			sums[i] += math.Abs(y)
		}}
		err := impulse(ctx, cfg, k, func(_, y float64) (float64, float64) { return 0, math.Abs(y) })
		if err != nil {
			return PeakGains{}, err
		}
		for _, s := range sums {
			*x.to = math.Max(*x.to, s)
		}
	}
	return out, nil
}
