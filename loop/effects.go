package loop

import (
	"steadytick/sdomain"
)

// Encoder counts marks of a turning or sliding part, in place of a converter.
type Encoder struct {
	CountsPerTurn int64
	Turn          float64 // one turn in the units of the position: output units, or output units times a second
	Velocity      bool    // false: the output is the position that is counted; true: its rate
	ByTime        bool    // velocity from the time between two counts; false: from the counts of a tick
	Clock         float64 // Hz, of the timer that times the counts; 0: times without error
}

// Count is the size of one count in units of the position.
func (e *Encoder) Count() float64 { return e.Turn / float64(e.CountsPerTurn) }

// Curve is a sensor that is not straight, such as a thermistor: what the converter sees for an output.
// Between the points the sensor follows a smooth monotone curve, the firmware a straight line.
type Curve struct {
	File     string    // as written, "" when the points stand in the file
	Output   []float64 // rising, at least two
	Electric []float64 // what the converter sees there, rising or falling throughout
}

// Friction is dry and viscous friction of a moving part of the plant,
//
//	y = plant·(u + d) − Through·F(v)
//	F = sign(v)·Coulomb + Viscous·v,  at rest up to Static
//
// in the units of Through's input: effort units when it acts at the plant input.
type Friction struct {
	Coulomb, Static, Viscous float64
	Velocity                 bool           // v is the output itself; false: the output is a position and v its rate
	Through                  *sdomain.Model // from the friction force to the output; nil: it acts at the plant input, after the dead time
}

// Backlash is play of width Gap: what it drives stands still until the play is used up.
type Backlash struct {
	Gap      float64 // full width, above 0, in effort units at the input, output units at the output
	AtOutput bool    // false: between the actuator and the plant
}

// Chance is how often a tick goes wrong. Zero: never.
type Chance struct {
	Probability float64 // 0 … 1, independent from tick to tick
	Every       int64   // every n-th tick, n ≥ 2; 0: not given
}

// Measured is a file of measured tick times, repeated when the run is longer.
type Measured struct {
	File     string
	Interval []float64 // seconds between two samples
	Delay    []float64 // seconds from the sample to the update; nil when the file has no such column

	shortest, longest, soonest, latest float64 // of Interval and of Delay, so that another rate costs no search
}
