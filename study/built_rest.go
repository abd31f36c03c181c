package study

import (
	"context"
	"errors"
	"math"

	"steadytick/loop"
	"steadytick/sim"
)

// Rest is the loop left alone at a constant reference, without noise and disturbances: it stands still with a stuck error,
// or hunts in a limit cycle.
type Rest struct {
	Starts     int    `json:"starts"`      // runs to rest, from different sides to places within a code of the sensor
	Cycling    int    `json:"cycling"`     // of these, the runs that did not come to rest: y or the effort goes on moving
	LimitCycle Figure `json:"limit_cycle"` // largest swing of y, peak to peak; 0 when all came to rest, null when it is slower than the runs are long
	PeriodS    Figure `json:"limit_cycle_period_s"`
	EffortPP   Figure `json:"limit_cycle_effort"` // swing of the effort in that run, peak to peak
	Bound      Figure `json:"limit_cycle_bound"`  // no limit cycle of the words can be larger; null where theory gives none
	away       bool
	StuckError Figure `json:"stuck_error"` // largest error of those that came to rest; null when none did
}

const (
	restStarts = 12
	// stillSwing: a swing below this part of the reference is rounding, not a limit cycle.
	stillSwing = 1e-9
	// restTicks are looked at at least, mostTicksRest run at most.
	restTicks, mostTicksRest = 512, 60_000
)

// restOf searches for limit cycles.
func restOf(ctx context.Context, l *loop.Loop, sampled *analyzed, h float64) (*Rest, error) {
	runs := make([]restRun, restStarts)
	err := parallel(restStarts, func(i int) (err error) {
		runs[i], err = rest(ctx, l, sampled, h, i)
		return err
	})
	if err != nil {
		return nil, err
	}
	out := &Rest{Starts: restStarts, LimitCycle: Fig(0)}
	for _, r := range runs {
		if out.away = out.away || r.away; r.away {
			out.Cycling++
			continue
		}
		if r.still {
			out.StuckError = Fig(math.Max(out.StuckError.Value, math.Abs(r.mean)))
			continue
		}
		out.Cycling++
		if r.cycles && r.swing >= out.LimitCycle.Value {
			out.LimitCycle, out.PeriodS, out.EffortPP = Fig(r.swing), r.period, Fig(r.effort)
		}
	}
	if out.Cycling > 0 && out.LimitCycle.Value == 0 { // the effort creeps, and no swing was seen to its end
		out.LimitCycle = Figure{}
	}
	out.Bound, err = cycleBound(ctx, l, sampled)
	return out, err
}

// restRun is one run to rest.
type restRun struct {
	cycles bool // y swings and goes on swinging
	away   bool // it grew without bound
	still  bool // neither y nor the effort moves any more
	mean   float64
	swing  float64
	effort float64
	period Figure
}

// rest goes to a place near the step's end, even starts from below and odd ones from above, and looks at the last third. A run that
// neither stands still nor has passed through a whole cycle is made longer.
func rest(ctx context.Context, l *loop.Loop, sampled *analyzed, h float64, start int) (restRun, error) {
	T := sampled.seconds()
	ticks := math.Min(math.Max(3*h/T, 3*restTicks), mostTicksRest/3)
	for {
		r, going, err := restFor(ctx, l, sampled, math.Floor(ticks), start)
		if err != nil || !going || ticks >= mostTicksRest {
			return r, err
		}
		ticks = math.Min(5*ticks, mostTicksRest)
	}
}

// restFor is one run of that many ticks; going tells that a longer one would say more.
func restFor(ctx context.Context, l *loop.Loop, sampled *analyzed, ticks float64, start int) (out restRun, going bool, err error) {
	in, _ := stepRun(l, nil, sampled)
	place := in.Size + sensorBin(l)*float64(start)/restStarts
	T := sampled.seconds()
	away := math.Floor(ticks / 3)
	from := 0.75 * place
	if start%2 == 1 {
		from = 1.25 * place
	}
	r, err := sim.Table([]float64{0, away * T, away * T}, []float64{from, from, place})
	if err != nil {
		return out, false, err
	}
	cfg, err := builtConfig(l, sampled.block, in, ticks*T, 1, undisturbed)
	if err != nil {
		return out, false, err
	}
	cfg.Reference, cfg.Disturbances, cfg.PointsPerTick = r, nil, swingPoints(l)
	cfg.TailFrom, cfg.TailKeep = max(1, cfg.Ticks-cfg.Ticks/3), true
	t, err := sim.Run(ctx, cfg)
	if err != nil || t.Diverged {
		return restRun{away: err == nil}, false, err
	}
	out = restRun{mean: t.Tail.MeanError - sampled.tracking[0]*place, swing: t.Tail.Swing, effort: t.Tail.HighestEffort - t.Tail.LowestEffort}
	period, early, late := cycleOf(t.Tail.Outputs, T)
	if late > 3*early && out.swing > math.Abs(place) { // it grows, and the run is too short for that to end it
		return restRun{away: true}, false, nil
	}
	moves := out.swing > stillSwing*math.Max(math.Abs(place), out.swing*1e-3)
	// What is still dying out is no cycle: its swing falls.
	out.cycles, out.period = moves && late > 0.7*early, period
	// An effort that goes on while the output stands, or a swing without a period: the cycle may be longer than the run.
	drifts := out.effort > stillSwing*math.Max(math.Abs(t.Tail.MeanEffort), 1e-300)
	out.still = !drifts && !out.cycles
	return out, drifts && !(out.cycles && period.OK), nil
}

// swingPoints is how many points of a tick show the swing of y between the ticks: two, and eight of each period of the fastest mode
// of the plant, forty at most. At a rate that hides a mode nearly all of a swing lies between the ticks.
func swingPoints(l *loop.Loop) int {
	g, err := l.Plant.TF()
	if err != nil {
		return fewPoints
	}
	fastest := 0.0
	for _, p := range g.Poles {
		fastest = math.Max(fastest, math.Abs(p.Im.Float64()))
	}
	T, _ := l.Timing.Period.Float64()
	return int(math.Min(manyPoints, math.Max(fewPoints, math.Ceil(8*fastest*T/(2*math.Pi)))))
}

// cycleOf is the mean time between the upward passings of the middle of y, given at every tick of T seconds, and the swings in
// both halves of that time.
func cycleOf(y []float64, T float64) (period Figure, early, late float64) {
	span := func(y []float64) (low, high float64) {
		low, high = math.Inf(1), math.Inf(-1)
		for _, v := range y {
			low, high = math.Min(low, v), math.Max(high, v)
		}
		return low, high
	}
	if len(y) < 8 {
		return Figure{}, 0, 0
	}
	a, b := span(y[:len(y)/2])
	c, d := span(y[len(y)/2:])
	low, high := math.Min(a, c), math.Max(b, d)
	upper, lower := low+0.6*(high-low), low+0.4*(high-low)
	up, passed := false, []int{}
	for i, v := range y {
		if v > upper && !up {
			if i > 0 {
				passed = append(passed, i)
			}
			up = true
		} else if v < lower {
			up = false
		}
	}
	if n := len(passed); n > 1 {
		period = Fig(T * float64(passed[n-1]-passed[0]) / float64(n-1))
	}
	return period, b - a, d - c
}

// sensorBin is the step of what the sensor can tell, in output units, 0 when it tells everything.
func sensorBin(l *loop.Loop) float64 {
	s := l.Sensor
	c := sim.Converter{Bits: s.Bits, Low: s.Range[0], High: s.Range[1], Step: s.Step}
	switch {
	case s.Encoder != nil && s.Encoder.Velocity:
		T, _ := l.Timing.Period.Float64()
		return s.Encoder.Count() / T
	case s.Encoder != nil:
		return s.Encoder.Count()
	case s.Curve != nil:
		return c.Bin() * steepest(l)
	}
	return c.Bin()
}

// steepest is the largest slope of the sensor's table, output units by electric unit.
func steepest(l *loop.Loop) float64 {
	c, most := l.Sensor.Curve, 0.0
	for i := 1; i < len(c.Output); i++ {
		most = math.Max(most, math.Abs((c.Output[i]-c.Output[i-1])/(c.Electric[i]-c.Electric[i-1])))
	}
	return most
}

// effortBin is the step of the effort, 0 for none.
func effortBin(l *loop.Loop) float64 {
	c := sim.Converter{Bits: l.Actuator.Bits, Step: l.Actuator.Step}
	if l.Actuator.Limits != nil {
		c.Low, c.High = l.Actuator.Limits[0], l.Actuator.Limits[1]
	}
	return c.Bin()
}

// hidden is how far the effort that the plant feels may lie from the computed one at rest: half a code, the dead zone, half the play,
// and friction that acts at the plant's input; ok is false where friction gives no such bound.
func hiddenEffort(l *loop.Loop) (size float64, ok bool) {
	size = effortBin(l)/2 + l.Actuator.Deadband
	if b := l.Backlash; b != nil && !b.AtOutput {
		size += b.Gap / 2
	}
	if f := l.Friction; f != nil {
		if f.Through != nil || f.Viscous > 0 {
			return 0, false
		}
		size += f.Static
	}
	return size, true
}

// cycleBound is the largest swing that the words can cause, peak to peak: every quantizer is a disturbance of half a code (an
// encoder's velocity by counts: of a whole one), and the peak gains of the linear loop say what such disturbances can do.
func cycleBound(ctx context.Context, l *loop.Loop, sampled *analyzed) (Figure, error) {
	effort, ok := hiddenEffort(l)
	if !ok || l.Sensor.Encoder != nil && l.Sensor.Encoder.ByTime {
		return Figure{}, nil
	}
	in, length := stepRun(l, nil, sampled)
	cfg, err := sampledConfig(l, sampled.block, in, length)
	if err != nil {
		return Figure{}, err
	}
	cfg.PointsPerTick = swingPoints(l)
	g, err := sim.Peaks(ctx, cfg)
	if errors.Is(err, sim.ErrNoVariance) {
		return Figure{}, nil
	}
	if err != nil {
		return Figure{}, err
	}
	measured := sensorBin(l) / 2
	if e := l.Sensor.Encoder; e != nil && e.Velocity {
		measured = sensorBin(l)
	}
	bound := g.Measurement*measured + g.Effort*effort
	if b := l.Backlash; b != nil && b.AtOutput {
		gain, static := staticSensor(l.Sensor)
		if !static {
			return Figure{}, nil
		}
		h, _ := gain.Float64()
		bound += (1 + g.Measurement*math.Abs(h)) * b.Gap / 2
	}
	return Fig(2 * bound), nil
}
