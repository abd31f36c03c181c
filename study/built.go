package study

import (
	"context"
	"math"

	"steadytick/loop"
	"steadytick/sim"
)

// AsBuilt is what the loop does on the hardware that the file declares, from simulation.
type AsBuilt struct {
	Seed       uint64        `json:"seed"`
	Transient  Transient     `json:"transient"`
	Steady     []BuiltSteady `json:"steady"`
	NoiseTicks int64         `json:"noise_ticks"`  // over which effort_noise and output_noise were taken
	Effort     Figure        `json:"effort_noise"` // rms about the mean, holding the step's end
	Output     Figure        `json:"output_noise"`
	Rest       *Rest         `json:"rest"` // null when nothing in the loop quantizes or sticks, or when its rest is too far off to simulate
	TableError Figure        `json:"sensor_table_error"`

	stepAway, noiseAway bool
	stepCut             bool // the step is longer than it was simulated
	away                bool // some run grew without bound: such a loop meets nothing
}

// BuiltSteady is one input once transients are gone, in the last third of a long run; of a move or file, the whole of it.
type BuiltSteady struct {
	Input         string `json:"input"`
	Size          Figure `json:"size"`
	TrackingError Figure `json:"tracking_error"` // mean at the ticks
	WorstError    Figure `json:"worst_error"`    // largest magnitude, at and between the ticks
	Swing         Figure `json:"swing"`          // of the error at the ticks, rms about its mean
	Ripple        Figure `json:"ripple"`         // of the error at and between the ticks, peak to peak; null for a sine
	PeakError     Figure `json:"peak_tracking_error"`
	RMSError      Figure `json:"rms_tracking_error"`
	AtLimit       bool   `json:"effort_at_limit"`

	away bool
}

const (
	// builtLonger: the loop as built is run this many times longer than the others, and looked at in the last third.
	builtLonger = 3
	// builtLeast times the settling of the slowest mode must fit into such a run, e^−12 of its transients: else it says nothing of what is left
	// once they are gone.
	builtLeast = 2
	// mostTicksBuilt bounds the runs: with friction or jitter a tick takes microseconds.
	mostTicksBuilt = 200_000
	// noiseTicks are wanted for the rms of noise: its own relative error is then 1 % or so.
	noiseTicks = 20_000
)

// built runs the loop on its hardware; nil when the file declares none, or the loop is unstable.
func built(ctx context.Context, l *loop.Loop, c *Compare, cont, sampled *analyzed, o Options) (*AsBuilt, error) {
	if !declaresHardware(l) || !sampled.stable {
		return nil, nil
	}
	if why := mechanicsFit(l); why != "" {
		c.warn("not_simulated_as_built", "%s", why)
		return nil, nil
	}
	out := &AsBuilt{Seed: o.seed(), Steady: make([]BuiltSteady, len(l.Inputs))}
	h := horizon(l, loop.Input{Kind: "step", Size: 1}, sampled)
	for _, x := range []struct {
		what string
		most float64
		asks bool
	}{{"at rest", mostTicksRest, quantizes(l)}, {"in steady state", mostTicksBuilt, true}} {
		if ticks := builtLeast * h / c.PeriodS; x.asks && ticks > x.most {
			c.warn("as_built_cut", "the loop as built takes more than %.3g ticks until its transients are gone, longer than it is simulated (%.0f): it has no figures %s; a lower rate would do for so slow a loop", ticks, x.most, x.what)
		}
	}
	err := parallel(len(l.Inputs)+3, func(i int) (err error) {
		switch k := i - len(l.Inputs); k {
		case 0:
			return out.step(ctx, l, cont, sampled)
		case 1:
			return out.noise(ctx, l, sampled, h)
		case 2:
			if quantizes(l) && builtLeast*h <= mostTicksRest*c.PeriodS {
				out.Rest, err = restOf(ctx, l, sampled, h)
			}
			return err
		}
		out.Steady[i], err = builtSteady(ctx, l, l.Inputs[i], sampled, o.seed()+uint64(i)+1)
		return err
	})
	out.away = out.stepAway || out.noiseAway || out.Rest != nil && out.Rest.away
	for i := range out.Steady {
		out.away = out.away || out.Steady[i].away
	}
	if out.away {
		c.warn("as_built_runs_away", "the loop as built grows without bound, though the sampled loop is stable: what the file declares of the hardware breaks the loop, and it meets no requirement")
	}
	for _, in := range l.Inputs {
		if sensorSees(l, in) < horizon(l, in, sampled) {
			c.warn("as_built_out_of_range", "%s: the output leaves the range of the sensor before transients are gone: the loop as built has no steady figures there", inputTitle(l, in))
		}
	}
	if curve := l.Sensor.Curve; curve != nil && err == nil {
		var table *sim.Curve
		if table, err = sim.NewCurve(curve.Output, curve.Electric); err == nil {
			size, _ := table.TableError()
			out.TableError = Fig(size)
		}
	}
	return out, err
}

// step fills the step figures.
func (b *AsBuilt) step(ctx context.Context, l *loop.Loop, cont, sampled *analyzed) error {
	in, length := stepRun(l, cont, sampled)
	shown := cut(l, length, mostTicksBuilt)
	b.stepCut = shown < length*(1-1e-9)
	cfg, err := builtConfig(l, sampled.block, in, shown, b.Seed, asDeclared)
	if err != nil {
		return err
	}
	f, t, err := sim.StepFigures(ctx, cfg, sampled.stepSpec(l, in))
	b.Transient = transientOf(f)
	b.stepAway = err == nil && t.Diverged
	return err
}

// noise holds the loop at the end of the step and takes effort and error about their means.
func (b *AsBuilt) noise(ctx context.Context, l *loop.Loop, sampled *analyzed, h float64) error {
	in, _ := stepRun(l, nil, sampled)
	T := sampled.seconds()
	settle := builtLeast * h
	if settle > mostTicksBuilt*T {
		return nil
	}
	cfg, err := builtConfig(l, sampled.block, in, settle+noiseTicks*T, b.Seed, asDeclared)
	if err != nil {
		return err
	}
	cfg.PointsPerTick, cfg.TailFrom = 1, int64(math.Round(settle/T))
	t, err := sim.Run(ctx, cfg)
	b.noiseAway = err == nil && t.Diverged
	if err == nil && !t.Diverged && t.Tail.Ticks > 0 {
		b.NoiseTicks, b.Effort, b.Output = t.Tail.Ticks, Fig(t.Tail.EffortRMS), Fig(t.Tail.ErrorRMS)
	}
	return err
}

// builtSteady runs one input.
func builtSteady(ctx context.Context, l *loop.Loop, in loop.Input, sampled *analyzed, seed uint64) (BuiltSteady, error) {
	out := BuiltSteady{Input: in.Kind, Size: blankSteady(in).Size}
	length, whole := endLength(l, in)
	if !whole {
		h := horizon(l, in, sampled)
		if builtLeast*h > mostTicksBuilt*sampled.seconds() {
			return out, nil
		}
		length = builtLonger * h
		if seen := sensorSees(l, in); seen < length/builtLonger {
			return out, nil // out of the sensor's range before transients are gone
		} else {
			length = math.Min(length, seen)
		}
	}
	cfg, err := builtConfig(l, sampled.block, in, cut(l, length, mostTicksBuilt), seed, asDeclared)
	if err != nil {
		return out, err
	}
	cfg.TailFrom = max(1, cfg.Ticks-cfg.Ticks/builtLonger)
	t, err := sim.Run(ctx, cfg)
	if err != nil || t.Diverged {
		out.away = err == nil
		return out, err
	}
	out.AtLimit = atLimit(l, t.FinalU)
	if whole {
		out.PeakError, out.RMSError = Fig(t.PeakError), Fig(t.RMSError)
		return out, nil
	}
	out.WorstError = Fig(t.Tail.WorstError)
	if t.Tail.Ticks > 0 {
		out.TrackingError, out.Swing = Fig(t.Tail.MeanError), Fig(t.Tail.ErrorRMS)
	}
	if in.Kind != "sine" {
		out.Ripple = Fig(t.Tail.ErrorSpan)
	}
	return out, nil
}

// sensorSees is how long, in seconds, a reference that grows stays within nine tenths of the range of the sensor.
func sensorSees(l *loop.Loop, in loop.Input) float64 {
	s := l.Sensor
	low, high := math.Inf(-1), math.Inf(1)
	switch {
	case s.Curve != nil:
		low, high = s.Curve.Output[0], s.Curve.Output[len(s.Curve.Output)-1]
	case s.Bits > 0:
		low, high = s.Range[0], s.Range[1]
	}
	end := 0.9 * high
	if in.Size < 0 {
		end = 0.9 * low
	}
	switch in.Kind {
	case "ramp":
		return math.Max(0, end/in.Size)
	case "parabola":
		return math.Sqrt(math.Max(0, 2*end/in.Size))
	}
	return math.Inf(1)
}
