package sim

import "errors"

// Friction is dry and viscous friction that works on a moving part through InputFriction,
//
//	F = sign(v)·Coulomb + Viscous·v     while it moves
//	F holds v = 0 as long as |F| <= Static needs no more
//
// v being the output y itself (Velocity) or its rate. Units: those of the input per unit of v.
type Friction struct {
	Coulomb, Static, Viscous float64
	Velocity                 bool
}

// Play is backlash of full width Gap between the plant's output and what it drives, which stands still
// until the play is used up,
//
//	y = max( min(y before, x + Gap/2), x − Gap/2 )
//
// x being the output without it. It starts in the middle.
type Play struct{ Gap float64 }

// ErrMechanism is a friction or play that the system cannot have: the friction force must accelerate the
// part directly (two poles more than zeros to a position, one to a velocity), the output with play must
// not follow the effort at once, and neither goes with a dead time of the sensor.
var ErrMechanism = errors.New("friction or play that does not fit the plant: the force must accelerate the part directly, the output must not jump, the sensor must have no dead time")

func (f *Friction) valid() bool {
	return f.Coulomb >= 0 && f.Static >= f.Coulomb && f.Viscous >= 0 && finite([]float64{f.Coulomb, f.Static, f.Viscous})
}

// motion is what friction does: slipping up or down, or sticking.
type motion int

const (
	slipsUp motion = iota
	slipsDown
	sticks
	motions
)

// contact is where the play is: within it, or pushing up or down.
type contact int

const (
	loose contact = iota
	pushesUp
	pushesDown
	contacts
)

// law is the linear system of one motion and one contact.
type law struct {
	flow     *flow
	key      string
	outputs  []probe
	guards   []guard
	distance float64 // longest stretch that is looked at by its ends alone
}

// guard is a quantity, linear in z = (x, w) and with its rate, that must stay above 0 in a law; what happens when it
// does not.
type guard struct {
	row, slope []float64
	constant   float64
	then       func(m *mechanism)
}

func (g *guard) value(z []float64) float64 { return dot(g.row, z) + g.constant }
func (g *guard) rate(z []float64) float64  { return dot(g.slope, z) }

func dot(row, z []float64) float64 {
	sum := 0.0
	for i, c := range row {
		sum += c * z[i]
	}
	return sum
}
