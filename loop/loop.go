package loop

import (
	"math/big"

	"steadytick/internal/exact"
	"steadytick/sdomain"
)

// Loop is a loop file that has been read and found consistent. All times are
// exact seconds, frequencies exact rad/s or Hz as named, in *big.Rat; nothing is nil unless said.
type Loop struct {
	File           string // name as given, for messages and the report
	Source         []byte // the text as read
	Name           string // loop:
	Output, Effort string // unit names of the signals
	Symbols        []Symbol
	Plant          sdomain.Model // dead_time included in Delay
	Friction       *Friction     // of the plant, nil: none
	Backlash       *Backlash     // of the plant, nil: none
	Sensor         Sensor
	Controller     Controller
	Actuator       Actuator
	Timing         Timing
	Inputs         []Input
	Requirements   []Requirement
	SettlingBand   float64    // fraction of the final value, default 0.02
	Timer          *Timer     // nil: not given
	Processor      *Processor // nil: not given
	Search         *RateRange // the rate section, nil: not given
	Disturbances   []Disturbance

	open     func(path string) ([]byte, error) // as given to Parse, for WithRate and WithMap
	options  Options
	prewarp  prewarp
	periodic bool  // more than Timing.Period depends on the period
	tree     *node // of the file, for WithSymbols; nobody changes it
}

// Symbol is a named number of the symbols section.
type Symbol struct {
	Name   string
	Value  *big.Rat
	Spread *big.Rat // fraction of the value, nil when not given
}

// Sensor is the analog path from y to the sampled m, and its converter.
type Sensor struct {
	Model sdomain.Model // 1 when the file has no sensor
	Bits  int           // 0: no quantization
	Range [2]float64    // of the converter, in output units (of the curve's, with a Curve); valid when Bits > 0

	Step    float64  // size of a code, in place of Bits and Range: a converter without ends; 0: none
	Noise   float64  // rms of white noise on every sample, in the units of the converter
	Offset  float64  // added before the conversion, in the units of the converter
	Encoder *Encoder // nil: none; then neither Bits nor Step
	Curve   *Curve   // nil: straight
}

// Controller computes
//
//	u = Σ_terms Π_parts(term) · (Weight·F·r − m)  +  FF·r
//
// with the prefilter F (1 when nil) and the feedforward FF (0 when nil).
type Controller struct {
	Terms       []Term
	Prefilter   *Part
	Feedforward *Part
	AntiWindup  AntiWindup
	// Digital is true when any part is a z model: there is then no continuous column.
	Digital bool
}

// Term is one summand of the controller: a product of parts that acts on
// Weight·(filtered r) − m. Weight is 1 for a plain model, the set-point weight for the P part of
// a PID, 0 for a derivative on the measurement.
type Term struct {
	Name   string // "model", "p", "i", "d", …
	Parts  []Part
	Weight *big.Rat
}

// Part is one model and how it becomes digital. Exactly one of Continuous and Digital is set.
type Part struct {
	Continuous *sdomain.Model
	Digital    *exact.Ratio // in z, valid at Timing.Period
	Map        Map          // for Continuous only
}

// Map names a controller map with its parameter.
type Map struct {
	Method string   // tustin prewarped matched forward backward hold triangle
	At     *big.Rat // prewarped: frequency in rad/s, else nil
}

// AntiWindup is what the integrator does while the effort is limited.
type AntiWindup struct {
	// Kind is "none"; "clamp": the integrator is held within Clamp; "stop": no integration while the effort is
	// limited; "stop_outward": none while it is limited and what is integrated drives it further out;
	// "tracking": back-calculation.
	Kind         string
	TrackingTime *big.Rat   // seconds, for "tracking"
	Clamp        [2]float64 // for "clamp", effort units: the actuator's limits when not given
}

// Actuator is what limits the effort. Nil Limits: none.
type Actuator struct {
	Limits *[2]float64
	Bits   int     // 0: no quantization; needs Limits
	Slew   float64 // effort units per second, 0: unlimited

	Step     float64 // size of a code in place of Bits, 0: none
	Deadband float64 // half width: the plant feels nothing within ±Deadband, and u less ±Deadband outside
}

// UpdateRule tells when a new effort reaches the actuator.
type UpdateRule int

const (
	// WhenReady applies the effort conversion + compute after the sample.
	WhenReady UpdateRule = iota
	// NextTick applies it at the next tick.
	NextTick
	// After applies it at a fixed offset from the sample.
	After
)

// Timing is the time-line of a tick, exact seconds.
type Timing struct {
	Period              *big.Rat
	Conversion, Compute *big.Rat
	Update              UpdateRule
	UpdateAfter         *big.Rat // for After
	Jitter              *big.Rat // peak, of the sampling instant

	Latency        *big.Rat  // interrupt entry, from the value in memory to the start of the computation; 0 when not given
	UpdateJitter   *big.Rat  // peak, of the update instant; 0 when not given
	Measured       *Measured // nil: none; then no Jitter
	Missed         Chance    // ticks that do not run: no sample, the effort stays
	Stale          Chance    // ticks that get the measurement of the tick before
	MeasuredPeriod bool      // the firmware computes with the measured time between two ticks, not with the nominal period
}

// LoopDelay is the time from the sample to the update, exact seconds.
func (t Timing) LoopDelay() *big.Rat {
	switch t.Update {
	case NextTick:
		return new(big.Rat).Set(t.Period)
	case After:
		return new(big.Rat).Set(t.UpdateAfter)
	}
	d := new(big.Rat).Add(t.Conversion, t.Compute)
	if t.Latency != nil {
		d.Add(d, t.Latency)
	}
	return d
}

// Counting is how a timer counts.
type Counting int

const (
	// CountUp counts 0 … reload and starts again: reload + 1 counts a tick.
	CountUp Counting = iota
	// CountCenter counts 0 … reload … 0: 2·reload counts a tick.
	CountCenter
)

// Timer is the hardware timer that makes the ticks. The prescaler divides its clock by
// (prescaler + 1); every postscale-th period of the counter is a tick.
type Timer struct {
	Clock         *big.Rat // Hz
	PrescalerBits int      // 0: no prescaler, 32 at most
	ReloadBits    int      // 1 … 32
	Counting      Counting
	Postscale     int // 1 or more
}

// Processor is what a tick costs it.
type Processor struct {
	Cost   *big.Rat // seconds of processor time a tick, from cost or from cost_cycles and clock; nil: not given, timing.compute stands for it
	Budget *big.Rat // the part of the tick that the loop may use, 1 when not given
}

// RateRange is the range of rates to search, Hz; an end that is nil is found by the program.
type RateRange struct{ From, To *big.Rat }

// Disturbance is one entry of disturbances.
type Disturbance struct {
	Kind      string   // "sine", "step", "noise" or "file"
	Name      string   // "" when not given
	At        string   // where it enters: "input" (plant input), "output" or "sensor"
	Size      float64  // sine: amplitude, 0 when not given: only its frequency is known; step: height; noise: rms
	SizeExact *big.Rat // nil when not given
	Frequency *big.Rat // sine: rad/s
	Time      *big.Rat // step: seconds from the start
	Band      *big.Rat // noise: −3 dB corner of its first-order spectrum in rad/s; nil: white, a new value every tick
	File      string   // file: as written
	Times     []float64
	Values    []float64
}

// Input is one entry of inputs.
type Input struct {
	Kind      string  // step ramp parabola sine move file load_step
	Size      float64 // step, ramp (slope), parabola (acceleration), sine amplitude, load_step
	SizeExact *big.Rat
	Frequency *big.Rat // sine: rad/s
	Move      *Move
	File      string    // file: path as written
	Times     []float64 // file: seconds, rising
	Values    []float64 // file: r
}

// Move is a rest-to-rest motion with limits, in output units and seconds.
type Move struct{ Distance, Velocity, Acceleration, Jerk float64 }

// Requirement is `name op number unit`; Limit is in the metric's base unit
// (s for times, rad/s for frequencies, deg, dB, % as they are).
type Requirement struct {
	Name  string
	Op    string // <= >= < >
	Limit float64
	Text  string // as written
	Line  int
}
