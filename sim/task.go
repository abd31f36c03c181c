package sim

import (
	"errors"
	"fmt"
	"math/big"
)

// Task is one controller on its own clock. Its tick k, k = 0, 1, …:
//
//	Offset + k·Period + jitter            sample the reference and the outputs
//	  + Delay                             the effort computed from them is applied
//
// and held until the next. Delay may be longer than the period.
type Task struct {
	Name   string
	Period *big.Rat // seconds, positive
	Offset *big.Rat // seconds, not negative; nil is 0
	Delay  *big.Rat // seconds from the sample to the update, not negative; nil is 0

	// Jitter, when set, shifts the sample of tick k by that many seconds. Instants must keep their
	// order, and none comes before 0. It must be a function of k alone for two runs to agree. See
	// UniformJitter and MeasuredJitter.
	Jitter func(k int64) float64
	// UpdateOnGrid: the update keeps its place when the sample is shifted, as where updates
	// wait for the next tick.
	UpdateOnGrid bool
	// UpdateShift, when set, shifts the update of tick k likewise; one that would come before its sample or
	// before the update ahead of it comes right after them.
	UpdateShift func(k int64) float64
	// Missed and Stale, when set, tell which ticks do not run (no sample, the effort stays), and which run with
	// the measurement of the tick before. See Chance.
	Missed, Stale func(k int64) bool
	// MeasuredPeriod: what is computed from times (the controller, when it was made for that; an encoder's
	// velocity) takes the time since the last sample, not the nominal period.
	MeasuredPeriod bool

	Controller *Controller
	Reads      []int // outputs sampled, in the order of Term.Read; Reads[0] is "m"
	Drives     []int // inputs of the system driven by the effort; none for an outer loop
	// Reference: 0 takes the reference of the run; i > 0 takes the effort held by task i−1 of the
	// list, as the inner of two nested loops does.
	Reference int

	Sensors  []Sensor // of the outputs read, in the order of Reads; shorter: none for the others
	Limits   Limits   // of the effort; zero value: none
	Bits     int      // of the effort over Limits; 0: no quantization
	Step     float64  // of the effort, in place of Bits
	Slew     float64  // largest change of the effort in units a second; 0: no limit
	Deadband float64  // half width of the dead zone between the held effort and the plant
	Play     float64  // backlash between them, after the dead zone: full width
}

// check finds mistakes of task i in a list of n for the system.
func (t *Task) check(i, n int, s *Continuous) error {
	bad := func(what string) error { return fmt.Errorf("task %d: %s", i, what) }
	switch {
	case t.Period == nil || t.Period.Sign() <= 0:
		return bad("the period must be positive")
	case t.Offset != nil && t.Offset.Sign() < 0 || t.Delay != nil && t.Delay.Sign() < 0:
		return bad("offset and delay must not be negative")
	case t.Controller == nil:
		return bad("no controller")
	case t.Controller.exactPeriod.Cmp(t.Period) != 0:
		return bad("the controller is for another period")
	case t.Reference < 0 || t.Reference > n || t.Reference == i+1:
		return bad("no such reference")
	case !t.Limits.valid() || !finite([]float64{t.Slew, t.Deadband, t.Play}) || t.Slew < 0 || t.Deadband < 0 || t.Play < 0:
		return bad("limits that are not in order")
	case !t.effortConverter().valid():
		return bad("bits of the effort need limits, or a step above 0 in their place")
	case len(t.Sensors) > len(t.Reads):
		return bad("more sensors than outputs read")
	case len(t.Reads) == 0:
		return bad("reads nothing")
	}
	for k := range t.Sensors {
		if err := t.Sensors[k].check(s); err != nil {
			return bad(err.Error())
		}
	}
	for _, k := range t.Controller.reads {
		if k >= len(t.Reads) {
			return bad("a term reads an output that the task does not sample")
		}
	}
	for _, k := range t.Reads {
		if k < 0 || k >= s.outputs {
			return bad("no such output")
		}
	}
	for _, k := range t.Drives {
		if k < 0 || k >= s.inputs {
			return bad("no such input")
		}
	}
	return nil
}

func (t *Task) effortConverter() Converter {
	c := Converter{Bits: t.Bits, Step: t.Step}
	if t.Limits.On {
		c.Low, c.High = t.Limits.Low, t.Limits.High
	}
	return c
}

// orZero is r, or 0 for nil.
func orZero(r *big.Rat) *big.Rat {
	if r == nil {
		return new(big.Rat)
	}
	return r
}

// Drive is a signal on an input of the system, added to what tasks put there.
type Drive struct {
	Input  int
	Signal Signal
}

// RandomDrive is noise on an input of the system.
type RandomDrive struct {
	Input int
	Random
}

// Config describes a run.
type Config struct {
	System       *Continuous
	Tasks        []Task
	Reference    Signal
	Disturbances []Drive
	Random       []RandomDrive // held for a period of the first task each
	Seed         uint64        // of all noise of the run
	Friction     *Friction     // of the plant, through InputFriction; nil: none
	Play         *Play         // at the plant's output; nil: none
	// Ticks is how many periods of the first task are run, at least 1. The run ends with the
	// instant Ticks·Period, whose sample is still taken.
	Ticks int64
	// PointsPerTick is the number of points in a period of the first task at which the run looks at the
	// signals (peak, rms, trace), besides every sample and update; 0 means 8.
	PointsPerTick int
	// MaxPoints bounds the points kept in the trace, and the ticks kept; 0 means 2000, at least 16.
	MaxPoints int
	// TailFrom, when positive, is the first tick of the part of the run that Trace.Tail is about.
	TailFrom int64
	// TailKeep: Trace.Tail.Outputs is wanted.
	TailKeep bool
	// Step, when set, asks for the step figures of output 0 (its first value being 0).
	Step *StepSpec
	// Progress, when set, is called now and then with the part done, 0 to 1.
	Progress func(part float64)
}

// check fills in defaults and finds mistakes.
func (c *Config) check() error {
	if c.System == nil || len(c.Tasks) == 0 {
		return errors.New("a run needs a system and a task")
	}
	if c.Ticks < 1 || c.Ticks > 1<<50 || c.PointsPerTick < 0 || c.PointsPerTick > 1000 || c.MaxPoints < 0 {
		return errors.New("a run needs at least one tick and counts that are not negative")
	}
	for i := range c.Tasks {
		if err := c.Tasks[i].check(i, len(c.Tasks), c.System); err != nil {
			return err
		}
	}
	if err := c.Reference.check(); err != nil {
		return err
	}
	for i := range c.Disturbances {
		d := &c.Disturbances[i]
		if d.Input < 0 || d.Input >= c.System.inputs {
			return fmt.Errorf("disturbance %d: no such input", i)
		}
		if err := d.Signal.check(); err != nil {
			return err
		}
	}
	for i, d := range c.Random {
		if d.Input < 0 || d.Input >= c.System.inputs || !d.valid() {
			return fmt.Errorf("noise %d: no such input, or numbers that are not in order", i)
		}
	}
	if c.Friction != nil && !c.Friction.valid() || c.Play != nil && !(c.Play.Gap >= 0 && finite([]float64{c.Play.Gap})) {
		return errors.New("friction or play with numbers that are not in order")
	}
	if c.Step != nil {
		spec := *c.Step
		if err := spec.check(); err != nil {
			return err
		}
		c.Step = &spec
	}
	if c.PointsPerTick == 0 {
		c.PointsPerTick = 8
	}
	if c.MaxPoints == 0 {
		c.MaxPoints = 2000
	}
	c.MaxPoints = max(c.MaxPoints, 16)
	return nil
}
