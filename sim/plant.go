package sim

import (
	"math/big"

	"steadytick/internal/exact"
	"steadytick/sdomain"
)

// Inputs and outputs of a system made by NewPlant.
const (
	InputEffort      = 0
	InputDisturbance = 1 // at the plant's input, within the dead time
	InputOutput      = 2 // added to the plant's output, before the sensor
	InputFriction    = 3 // a force on the plant, without dead time
	OutputY          = 0
	OutputM          = 1
	OutputPosition   = 2 // the integral of m
)

// PlantConfig describes a plant with its sensor,
//
//	y = Plant·(u + d) − Through·F + output disturbance,  m = Sensor·y
type PlantConfig struct {
	Plant, Sensor sdomain.Model
	// Friction gives the system InputFriction, a force F that acts through Through, or nil: through the plant
	// itself without its dead time. Plant/Through must be proper.
	Friction bool
	Through  *sdomain.Model
	// Position gives it OutputPosition.
	Position bool
}

// NewPlant joins a plant and a sensor with the inputs InputEffort, InputDisturbance and InputOutput, and the
// outputs OutputY and OutputM. See NewPlantWith.
func NewPlant(plant, sensor sdomain.Model) (*Continuous, error) {
	return NewPlantWith(PlantConfig{Plant: plant, Sensor: sensor})
}

// NewPlantWith makes the system of a plant. A dead time of the sensor is carried by a second copy of the plant that
// runs behind by it; friction cannot stand beside that. Errors: ErrImproper, ErrRange, ErrMechanism, those of the models.
func NewPlantWith(cfg PlantConfig) (*Continuous, error) {
	p, force, err := plantChain(&cfg)
	if err != nil {
		return nil, err
	}
	h, err := realizeModel(cfg.Sensor)
	if err != nil {
		return nil, err
	}
	tp, th := deadTime(cfg.Plant), deadTime(cfg.Sensor)
	both := p.after(h)
	s := &Continuous{inputs: 4, outputs: 2, steps: map[string]*advance{}}
	if th.Sign() == 0 {
		s.n, s.a = both.n, both.a
		s.c = append(append(s.c, padded(p.c, 0, both.n)...), both.c...)
		s.feed(both.b, []float64{p.d, both.d}, tp)
		s.channel(InputOutput, padded(h.b, p.n, both.n), []float64{1, h.d}, nil)
		if cfg.Friction {
			s.channel(InputFriction, padded(force, 0, both.n), []float64{0, 0}, nil)
		}
	} else {
		if cfg.Friction {
			return nil, ErrMechanism
		}
		n := p.n + both.n
		s.n, s.a = n, make([]float64, n*n)
		for i := range p.n {
			copy(s.a[i*n:], p.a[i*p.n:(i+1)*p.n])
		}
		for i := range both.n {
			copy(s.a[(p.n+i)*n+p.n:], both.a[i*both.n:(i+1)*both.n])
		}
		s.c = append(append(s.c, padded(p.c, 0, n)...), padded(both.c, p.n, n)...)
		s.feed(padded(p.b, 0, n), []float64{p.d, 0}, tp)
		s.feed(padded(both.b, p.n, n), []float64{0, both.d}, new(big.Rat).Add(tp, th))
		s.channel(InputOutput, make([]float64, n), []float64{1, 0}, nil)
		s.channel(InputOutput, padded(h.b, 2*p.n, n), []float64{0, h.d}, th)
	}
	if cfg.Position {
		s.integrate(OutputM)
	}
	if s.n > maxOrder {
		return nil, ErrRange
	}
	return s, nil
}

// plantChain realizes the plant, and the way of a friction force into its states.
func plantChain(cfg *PlantConfig) (p *chain, force []float64, err error) {
	if !cfg.Friction || cfg.Through == nil {
		p, err = realizeModel(cfg.Plant)
		if err != nil {
			return nil, nil, err
		}
		if cfg.Friction && p.d != 0 {
			return nil, nil, ErrMechanism
		}
		return p, p.b, nil
	}
	through, err := realizeModel(*cfg.Through)
	if err != nil {
		return nil, nil, err
	}
	before, err := quotient(cfg.Plant.Ratio, cfg.Through.Ratio)
	if err != nil {
		return nil, nil, err
	}
	lead, err := realizeModel(sdomain.Model{Ratio: before, Delay: new(big.Rat)})
	if err != nil {
		return nil, nil, err
	}
	if through.d != 0 {
		return nil, nil, ErrMechanism
	}
	p = lead.after(through)
	return p, padded(through.b, lead.n, p.n), nil
}

// quotient is a/b with the common factors cancelled.
func quotient(a, b exact.Ratio) (exact.Ratio, error) {
	if a.IsZero() || b.IsZero() {
		return exact.Ratio{}, ErrMechanism
	}
	num, den := a.NumPoly().Mul(b.DenPoly()), a.DenPoly().Mul(b.NumPoly())
	if g := num.GCD(den); g.Degree() > 0 {
		num, _ = num.DivMod(g)
		den, _ = den.DivMod(g)
	}
	return exact.FromPolys(num, den)
}

// channel adds one way into the system.
func (s *Continuous) channel(input int, b, d []float64, delay *big.Rat) {
	if delay == nil {
		delay = new(big.Rat)
	}
	s.channels = append(s.channels, Channel{Input: input, Delay: delay, B: b, D: d})
}

// feed adds one way into the system for u and the same for d.
func (s *Continuous) feed(b, d []float64, delay *big.Rat) {
	s.channel(InputEffort, b, d, delay)
	s.channel(InputDisturbance, b, d, delay)
}

// integrate adds a state that integrates output k, and an output that shows it.
func (s *Continuous) integrate(k int) {
	n := s.n + 1
	a := make([]float64, n*n)
	for i := range s.n {
		copy(a[i*n:], s.a[i*s.n:(i+1)*s.n])
	}
	copy(a[s.n*n:], s.c[k*s.n:(k+1)*s.n])
	var c []float64
	for o := range s.outputs {
		c = append(c, padded(s.c[o*s.n:(o+1)*s.n], 0, n)...)
	}
	for i := range s.channels {
		ch := &s.channels[i]
		ch.B = append(padded(ch.B, 0, s.n), ch.D[k])
		ch.D = append(append([]float64(nil), ch.D...), 0)
	}
	show := make([]float64, n)
	show[s.n] = 1
	s.n, s.a, s.c = n, a, append(c, show...)
	s.outputs++
}

func realizeModel(m sdomain.Model) (*chain, error) {
	tf, err := m.TF()
	if err != nil {
		return nil, err
	}
	return realizeExact(tf, m.Ratio)
}

// deadTime is the delay of m, 0 when it has none.
func deadTime(m sdomain.Model) *big.Rat {
	if m.Delay == nil {
		return new(big.Rat)
	}
	return m.Delay
}
