package sim

import (
	"context"
	"math"
)

// impulseNoise is Noise along the impulse response: the variance is the sum of its squares.
func impulseNoise(ctx context.Context, cfg Config, difference bool) (NoiseGains, error) {
	sum, out := 0.0, 0.0
	k := &kick{value: 1}
	if difference {
		period, _ := cfg.Tasks[0].Period.Float64()
		k = &kick{value: 1 / period, after: -1 / period}
	}
	err := impulse(ctx, cfg, k, func(u, y float64) (float64, float64) {
		sum += u * u
		out += y * y
		return u * u, y * y
	})
	if err != nil {
		return NoiseGains{}, err
	}
	return NoiseGains{Effort: math.Sqrt(sum), Output: math.Sqrt(out)}, nil
}

// impulse runs the linear loop of the one task of cfg after a kick until what take returns of each sample, two
// numbers that are not negative, has died out: when a good part of the run has added no more than 1e-18 to each sum.
func impulse(ctx context.Context, cfg Config, k *kick, take func(u, y float64) (float64, float64)) error {
	if k.looked == nil {
		cfg.PointsPerTick = 1
	}
	cfg.MaxPoints, cfg.Step, cfg.Progress, cfg.TailFrom, cfg.TailKeep = 16, nil, nil, 0, false
	cfg.Ticks, cfg.Reference, cfg.Disturbances, cfg.Random = mostTicks, Zero(), nil, nil
	cfg.Friction, cfg.Play = nil, nil
	t := cfg.Tasks[0]
	t.Sensors, t.Limits, t.Bits, t.Step, t.Slew, t.Deadband, t.Play = nil, Limits{}, 0, 0, 0, 0, 0
	t.Jitter, t.UpdateShift, t.Missed, t.Stale, t.MeasuredPeriod = nil, nil, nil, nil, false
	if c := *t.Controller; c.antiWindup != NoAntiWindup {
		// Its integrators stand apart; without limits this rule lets them run as the linear loop has them.
		c.antiWindup, c.trackGain, c.timed = Tracking, 0, nil
		t.Controller = &c
	}
	cfg.Tasks = []Task{t}
	e, err := newEngine(&cfg)
	if err != nil {
		return err
	}
	e.kick = k
	var sum, recent [2]float64
	k.took = func(u, y float64) {
		a, b := take(u, y)
		sum[0], sum[1] = sum[0]+a, sum[1]+b
		recent[0], recent[1] = recent[0]+a, recent[1]+b
	}
	next := int64(64)
	for _, h := range e.layout.held {
		delay, _ := e.cfg.System.channels[h.channel].Delay.Float64()
		late, _ := orZero(t.Delay).Float64()
		next = max(next, int64(8*(delay+late)/t.Controller.period)+64)
	}
	for i := range t.Controller.terms {
		next += 8 * int64(t.Controller.terms[i].ticks)
	}
	for n := int64(0); ; {
		in, err := e.line.next()
		if err != nil {
			return err
		}
		if in.tick {
			k.at = 0
		}
		e.act(in)
		k.look(e.y.value(e.z))
		if in.length == 0 || !(sum[0]+sum[1] < 1e200) {
			return ErrNoVariance
		}
		if _, err := e.span(in, 0); err != nil {
			return err
		}
		if !in.tick {
			continue
		}
		if n++; n == next {
			if err := ctx.Err(); err != nil {
				return err
			}
			if recent[0] <= 1e-18*sum[0] && recent[1] <= 1e-18*sum[1] {
				return nil
			}
			recent = [2]float64{}
			next = n + max(n/4, 64) // always a good part of all
		}
	}
}

// kick is an impulse on what the controller reads, or on the effort that it gives: value at the first sample,
// after at the second.
type kick struct {
	value, after float64
	effort       bool
	took         func(u, y float64)     // at every sample
	looked       func(i int, y float64) // at every point, number i of its tick; nil: not wanted
	at           int
}

// look tells of a point.
func (k *kick) look(y float64) {
	if k != nil && k.looked != nil {
		k.looked(k.at, y)
		k.at++
	}
}

// measured and given are what to add at this sample.
func (k *kick) measured() float64 {
	if k == nil || k.effort {
		return 0
	}
	return k.next()
}

func (k *kick) given() float64 {
	if k == nil || !k.effort {
		return 0
	}
	return k.next()
}

func (k *kick) next() float64 {
	v := k.value
	k.value, k.after = k.after, 0
	return v
}
