package sim

import (
	"fmt"
	"math"
	"math/big"
)

// tooLarge is where a run stops: far beyond any machine, far from overflow, so that no
// Inf or NaN comes out of an unstable loop.
const tooLarge = 1e100

// probe is one output as a row over states and columns, cut short where it is 0.
type probe struct {
	row    []float64
	direct bool // some column goes straight to the output
}

func newProbe(c, d []float64) probe {
	row := append(append([]float64(nil), c...), d...)
	for len(row) > 0 && row[len(row)-1] == 0 {
		row = row[:len(row)-1]
	}
	return probe{row, len(row) > len(c)}
}

// value is the output at z = (x, w).
func (p *probe) value(z []float64) float64 {
	sum := 0.0
	z = z[:len(p.row)]
	for i, c := range p.row {
		sum += c * z[i]
	}
	return sum
}

// taskState is a task while it runs.
type taskState struct {
	*Task
	state     stepper
	act       actuator
	reads     []*probe
	sensors   []sensorState // none: all outputs are read as they are
	positions []*probe      // of the encoders, nil for other sensors
	m, kept   []float64     // the measurements; those of the tick before, while they are wanted
	count     int64         // samples so far, missed ones too
	sampled   float64       // instant of the last sample that was taken
	begun     bool          // one was taken
	effort    float64       // last computed, as held
	skip      int64         // instants of the cycle before the first sample
	efforts   efforts
	applied   int64 // number of the sample whose effort is applied next
	held      float64
	reference cursor
}

// engine is a run in progress.
type engine struct {
	cfg     *Config
	layout  *layout
	flow    *flow
	key     string
	outputs []probe
	y, m    *probe
	z       []float64 // states, then columns
	w       []float64 // the columns of z
	carry   []float64 // what rounding dropped from the states
	dx      []float64
	change  float64 // earliest change of piece of a driven column
	tasks   []taskState
	line    timeline
	r       cursor
	current *instant
	parts   *mechanism // nil: none
	marks   []marks    // of encoders that time their marks

	kick     *kick // nil: none
	tail     *tail // nil: not asked for
	general  bool  // never the shorter way of a plain run; for tests
	followed bool  // inputs that move are wanted at the end of every stretch

	points *decimator
	ticks  *decimator
	sum    errorSum
	effort float64 // largest magnitude held by the first task
	watch  *stepWatch
}

func newEngine(cfg *Config) (*engine, error) {
	if err := cfg.check(); err != nil {
		return nil, err
	}
	s := cfg.System
	e := &engine{cfg: cfg, layout: newLayout(cfg), tasks: make([]taskState, len(cfg.Tasks))}
	base := e.layout.matrices(s)
	e.flow, e.key = newFlow(base.n, base.m, base.a, base.b, base.s), e.layout.key()
	e.z, e.dx = make([]float64, s.n+e.layout.columns), e.flow.scratch()
	e.w, e.carry = e.z[s.n:], make([]float64, s.n)
	for k := range s.outputs {
		e.outputs = append(e.outputs, newProbe(s.c[k*s.n:(k+1)*s.n], e.layout.through(s, k)))
	}
	e.y, e.m = &e.outputs[0], &e.outputs[cfg.Tasks[0].Reads[0]]
	e.r = cursor{signal: &cfg.Reference}
	for i := range e.tasks {
		e.tasks[i] = e.newTask(i, &cfg.Tasks[i])
	}
	line, err := newCycle(e)
	if err != nil {
		return nil, err
	}
	perTick := int64(roundParts(cfg.PointsPerTick)) + 8
	if line != nil {
		e.line = line
		perTick = line.points(e)
	} else {
		d, err := newAgenda(e)
		if err != nil {
			return nil, err
		}
		e.line = d
		perTick = d.points(e, perTick)
	}
	e.points = newDecimator(cfg.Ticks*perTick+1, cfg.MaxPoints)
	e.ticks = newDecimator(cfg.Ticks+1, cfg.MaxPoints)
	e.change = math.Inf(1)
	for i := range e.layout.driven {
		e.change = math.Min(e.change, e.layout.driven[i].change)
	}
	if cfg.Step != nil && cfg.Step.applies() {
		e.watch = newStepWatch(e, cfg.Step)
	}
	if cfg.TailFrom > 0 {
		keep := int64(0)
		if cfg.TailKeep {
			keep = min(max(cfg.Ticks-cfg.TailFrom+2, 1), 1<<20)
		}
		e.tail = newTail(float64(cfg.TailFrom)*e.tasks[0].Controller.period, keep)
	}
	e.timeMarks()
	if e.parts, err = newMechanism(e); err != nil {
		return nil, err
	}
	e.followed = e.watch != nil || e.parts != nil || len(e.marks) > 0
	return e, nil
}

func (e *engine) newTask(i int, t *Task) taskState {
	s := taskState{
		Task: t, state: t.Controller.start(t.MeasuredPeriod), m: make([]float64, len(t.Reads)), kept: make([]float64, len(t.Reads)),
		act:       actuator{limits: t.Limits, converter: t.effortConverter(), rise: math.Inf(1)},
		reference: cursor{signal: &e.cfg.Reference},
	}
	if t.Slew > 0 {
		s.act.rise = t.Slew * t.Controller.period
	}
	s.act.last = t.Limits.clip(0)
	s.effort = s.act.converter.Value(s.act.last)
	for _, k := range t.Reads {
		s.reads = append(s.reads, &e.outputs[k])
	}
	ideal := true
	for k := range t.Sensors {
		ideal = ideal && t.Sensors[k].plain()
	}
	if ideal {
		return s
	}
	s.positions = make([]*probe, len(t.Reads))
	for k := range t.Reads {
		sensor := &Sensor{}
		if k < len(t.Sensors) {
			sensor = &t.Sensors[k]
		}
		if sensor.Encoder != nil {
			s.positions[k] = &e.outputs[sensor.Encoder.Output]
		}
		s.sensors = append(s.sensors, newSensor(sensor, e.cfg.Seed, uint64(i*maxReads+k), t.Controller.period))
	}
	return s
}

// interval prepares what follows an instant.
func (e *engine) interval(in *instant, gap *big.Rat) error {
	in.length, _ = gap.Float64()
	e.divide(in)
	if in.length == 0 {
		return nil
	}
	in.part = new(big.Rat).Quo(gap, new(big.Rat).SetInt64(int64(in.parts)))
	var err error
	in.step, err = e.cfg.System.step(e.flow, e.key, in.part)
	return err
}

// divide chooses the points of an interval by its share of a tick.
func (e *engine) divide(in *instant) {
	share := in.length / e.tasks[0].Controller.period
	in.parts = roundParts(int(math.Round(share * float64(e.cfg.PointsPerTick))))
	in.weights = quadrature(in.parts, in.length)
}

// points is how many rows a period of the first task has at most.
func (c *cycle) points(e *engine) int64 {
	n := 0
	for i := range c.list {
		n += c.list[i].parts
	}
	ticks := c.period.Float64() / e.tasks[0].Controller.period
	return int64(math.Ceil(float64(n)/math.Round(ticks) - 1e-9))
}

// name describes task i in messages.
func (t *taskState) name(i int) string {
	if t.Name != "" {
		return t.Name
	}
	return fmt.Sprintf("task %d", i)
}
