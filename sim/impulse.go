package sim

import (
	"context"
	"math"
)

// impulseNoise is Noise along the impulse response: the variance is the sum of its squares.
func impulseNoise(ctx context.Context, cfg Config, difference bool) (NoiseGains, error) {
	cfg.PointsPerTick, cfg.MaxPoints, cfg.Step, cfg.Progress = 1, 16, nil, nil
	cfg.Ticks, cfg.Reference = mostTicks, Zero()
	t := cfg.Tasks[0]
	t.Sensors, t.Limits, t.Bits, t.Step, t.Slew, t.Deadband, t.Play = nil, Limits{}, 0, 0, 0, 0, 0
	t.Jitter, t.UpdateShift, t.Missed, t.Stale = nil, nil, nil, nil
	cfg.Tasks = []Task{t}
	e, err := newEngine(&cfg)
	if err != nil {
		return NoiseGains{}, err
	}
	period := t.Controller.period
	sum, out := 0.0, 0.0
	recent, recentOut := 0.0, 0.0 // of the last stretch
	stretch := int64(64)
	for _, h := range e.layout.held {
		delay, _ := e.cfg.System.channels[h.channel].Delay.Float64()
		stretch = max(stretch, int64(8*delay/period)+64)
	}
	e.kick = &kick{value: 1}
	if difference {
		e.kick = &kick{value: 1 / period, after: -1 / period}
	}
	e.kick.took = func(u, y float64) {
		sum += u * u
		out += y * y
		recent += u * u
		recentOut += y * y
	}
	for k := int64(0); ; {
		in, err := e.line.next()
		if err != nil {
			return NoiseGains{}, err
		}
		e.act(in)
		if in.length == 0 || !(sum+out < 1e200) {
			return NoiseGains{}, ErrNoVariance
		}
		if _, err := e.span(in, 0); err != nil {
			return NoiseGains{}, err
		}
		if !in.tick {
			continue
		}
		if k++; k == stretch {
			if err := ctx.Err(); err != nil {
				return NoiseGains{}, err
			}
			if recent <= 1e-18*sum && recentOut <= 1e-18*out {
				return NoiseGains{Effort: math.Sqrt(sum), Output: math.Sqrt(out)}, nil
			}
			recent, recentOut, stretch = 0, 0, k+max(k/4, 64) // always a good part of all
		}
	}
}

// kick is an impulse on what the controller reads: value at the first sample, after at the second.
type kick struct {
	value, after float64
	took         func(u, y float64)
}

// next is what to add at this sample.
func (k *kick) next() float64 {
	v := k.value
	k.value, k.after = k.after, 0
	return v
}
