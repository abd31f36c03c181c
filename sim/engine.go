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

// efforts keeps the efforts on their way, by the number of their sample.
type efforts struct {
	ring  []float64 // its length a power of two
	count int64     // samples so far
}

// push stores the next effort; oldest is the lowest number still wanted.
func (q *efforts) push(u float64, oldest int64) {
	if oldest = max(oldest, 0); q.count-oldest >= int64(len(q.ring)) {
		grown := make([]float64, max(8, 2*len(q.ring)))
		for k := oldest; k < q.count; k++ {
			grown[k&int64(len(grown)-1)] = q.at(k)
		}
		q.ring = grown
	}
	q.ring[q.count&int64(len(q.ring)-1)] = u
	q.count++
}

func (q *efforts) at(k int64) float64 { return q.ring[k&int64(len(q.ring)-1)] }

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

// act does what is due at an instant.
func (e *engine) act(in *instant) {
	if in.t >= e.change {
		e.turn(in.t)
	}
	if in.tick {
		for i := range e.layout.shaken {
			n := &e.layout.shaken[i]
			e.w[n.column] = n.step()
		}
	}
	for _, i := range in.samples {
		t := &e.tasks[i]
		if t.skip > 0 {
			t.skip--
			continue
		}
		e.sample(i, t, in.t)
	}
	for _, i := range in.updates {
		e.apply(&e.tasks[i])
	}
	for _, k := range in.arrive {
		h := &e.layout.held[k]
		if q := &e.tasks[h.task].efforts; h.next >= 0 && h.next < q.count {
			e.w[h.column] = h.felt(&e.tasks[h.task], q.at(h.next))
		}
		h.next++
	}
}

// felt is what the plant feels of an effort: a dead zone and play take their part.
func (h *held) felt(t *taskState, u float64) float64 {
	if t.Deadband > 0 {
		u = deadband(u, t.Deadband)
	}
	if t.Play > 0 {
		h.stands = play(h.stands, u, t.Play)
		return h.stands
	}
	return u
}

// sample is tick k of task i at the instant now: it is missed, or it reads and computes.
func (e *engine) sample(i int, t *taskState, now float64) {
	k := t.count
	t.count++
	if t.Missed != nil && t.Missed(k) {
		for j := range t.sensors {
			t.sensors[j].pass()
		}
		t.efforts.push(t.effort, e.oldest(i, t))
		return
	}
	period := t.Controller.period
	if t.MeasuredPeriod && t.begun && now > t.sampled {
		period = now - t.sampled
	}
	t.sampled, t.begun = now, true
	if k > 0 && t.Stale != nil && t.Stale(k) {
		copy(t.kept, t.m)
		e.read(t, now, period, k) // the sensor goes on all the same; what it gives is lost
		copy(t.m, t.kept)
	} else {
		e.read(t, now, period, k)
	}
	e.compute(i, t, now, period)
}

// read takes the measurements of sample k.
func (e *engine) read(t *taskState, now, period float64, k int64) {
	if t.sensors == nil {
		for j, p := range t.reads {
			t.m[j] = p.value(e.z)
		}
		if e.kick != nil {
			t.m[0] += e.kick.measured()
		}
		return
	}
	for j, p := range t.reads {
		at := 0.0
		if t.positions[j] != nil {
			at = t.positions[j].value(e.z)
		}
		t.m[j] = t.sensors[j].measure(p.value(e.z), at, now, period, k)
	}
}

// compute is the controller of task i with what it has sampled at t.
func (e *engine) compute(i int, t *taskState, now, period float64) {
	var r float64
	if t.Reference > 0 {
		r = e.tasks[t.Reference-1].held
	} else {
		r = t.reference.at(now)
	}
	v := t.state.effort(r, t.m, period)
	u := t.act.hold(v)
	t.state.advance(v, t.act.last)
	t.effort = u
	if e.kick != nil {
		e.kick.took(u, e.y.value(e.z))
		u += e.kick.given()
		t.effort = u
	}
	t.efforts.push(u, e.oldest(i, t))
	if orZeroSign(t.Delay) == 0 {
		t.held = u // tasks later in the list see it at once
	}
	if e.tail != nil && i == 0 && now >= e.tail.from {
		y := e.y.value(e.z)
		e.tail.tick(u, y, r-y)
	}
	if i == 0 {
		e.ticks.add(&row{t: now, r: r, y: e.y.value(e.z), m: t.m[0], u: u})
	}
}

// oldest is the lowest number of a sample of task i whose effort is still wanted.
func (e *engine) oldest(i int, t *taskState) int64 {
	oldest := t.applied
	for k := range e.layout.held {
		if h := &e.layout.held[k]; h.task == i {
			oldest = min(oldest, h.next)
		}
	}
	return oldest
}

// apply makes the next effort of a task the held one.
func (e *engine) apply(t *taskState) {
	if t.applied >= 0 && t.applied < t.efforts.count {
		t.held = t.efforts.at(t.applied)
		if t == &e.tasks[0] {
			if a := math.Abs(t.held); a > e.effort {
				e.effort = a
			}
		}
	}
	t.applied++
}

func orZeroSign(r *big.Rat) int { return orZero(r).Sign() }

// turn sets the driven columns for the instant t.
func (e *engine) turn(t float64) {
	e.change = math.Inf(1)
	for i := range e.layout.driven {
		d := &e.layout.driven[i]
		d.start(t, e.w)
		e.change = math.Min(e.change, d.change)
	}
}

// propagate goes from t to end, h seconds, p being the prepared step of h or nil.
func (e *engine) propagate(p *advance, t, h float64) error {
	end := t + h
	// A change of piece within a rounding of the end waits for the next step.
	const near = 1e-12
	for last := end - near*h; e.change < last; p = nil {
		if c := e.change; c > t {
			if err := e.free(nil, t, c-t); err != nil {
				return err
			}
			t = c
			h = end - t
		}
		e.turn(t)
	}
	if err := e.free(p, t, h); err != nil {
		return err
	}
	for i := range e.layout.driven {
		if d := &e.layout.driven[i]; d.width > 1 {
			d.start(end, e.w)
		}
	}
	return nil
}

// free propagates over h seconds without a change of the inputs.
func (e *engine) free(p *advance, t, h float64) error {
	if e.parts != nil {
		return e.parts.free(t, h, p != nil)
	}
	return e.stretch(p, t, h)
}

// stretch propagates over h seconds in one linear system.
func (e *engine) stretch(p *advance, t, h float64) error {
	e.begin()
	if err := e.move(p, h); err != nil {
		return err
	}
	e.end(t, h)
	return nil
}

// begin and end tell those who follow the run within stretches.
func (e *engine) begin() {
	if e.watch != nil {
		e.watch.before(e)
	}
	for i := range e.marks {
		e.marks[i].before(e)
	}
}

func (e *engine) end(t, h float64) {
	if e.watch != nil {
		e.watch.after(e, t, h)
	}
	for i := range e.marks {
		e.marks[i].after(e, t, h)
	}
}

// move carries the state over h seconds.
func (e *engine) move(p *advance, h float64) error {
	if p == nil {
		return e.flow.advanceBy(e.z, e.carry, h)
	}
	p.apply(e.z, e.carry, e.dx)
	if e.followed {
		e.flow.turn(e.w, h)
	}
	return nil
}

// prepared is the step of the part of the present interval in the present system; nil without whole or
// where none is prepared.
func (e *engine) prepared(whole bool) (*advance, error) {
	in := e.current
	if !whole || in == nil || in.part == nil {
		return nil, nil
	}
	if p, ok := in.laws[e.parts.now]; ok {
		return p, nil
	}
	p, err := e.cfg.System.step(e.flow, e.key, in.part)
	if err != nil {
		return nil, err
	}
	if in.laws == nil {
		in.laws = map[*law]*advance{}
	}
	in.laws[e.parts.now] = p
	return p, nil
}

// look records the point at t and returns the tracking error.
func (e *engine) look(t float64) (err float64, ok bool) {
	p := row{t: t, r: e.r.at(t), y: e.y.value(e.z), u: e.tasks[0].held}
	p.m = p.y
	if e.m != e.y {
		p.m = e.m.value(e.z)
	}
	if !(math.Abs(p.y)+math.Abs(p.m)+math.Abs(p.u)+math.Abs(p.r) < tooLarge) {
		return 0, false
	}
	e.points.add(&p)
	e.kick.look(p.y)
	err = p.r - p.y
	if e.tail != nil && t >= e.tail.from {
		e.tail.look(p.y, err)
	}
	if math.Abs(err) > e.sum.peak {
		e.sum.look(t, err)
	}
	return err, true
}

// span propagates over the interval after an instant whose tracking error is err; ok is false when a
// signal is too large.
func (e *engine) span(in *instant, err float64) (ok bool, fault error) {
	e.current = in
	h := in.length / float64(in.parts)
	sum := in.weights[0] * err * err
	for j := 1; j <= in.parts; j++ {
		from := in.t + float64(j-1)*h
		if fault = e.propagate(in.step, from, h); fault != nil {
			return false, fault
		}
		if j < in.parts {
			if err, ok = e.look(in.t + float64(j)*h); !ok {
				return false, nil
			}
		} else {
			t := in.t + in.length
			err = e.r.at(t) - e.y.value(e.z)
			if !(math.Abs(err) < tooLarge) {
				return false, nil
			}
			if e.y.direct {
				e.sum.look(t, err)
			}
		}
		sum += in.weights[j] * err * err
	}
	e.sum.add(sum)
	e.sum.time += in.length
	return true, nil
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
