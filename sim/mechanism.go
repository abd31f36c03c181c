package sim

import "math"

// mechanism switches the laws of a plant with friction or play. Within a law the system is linear and is
// propagated exactly; a law ends where one of its guards comes to 0, found by its value and slope at
// the ends of stretches and to the last digits by false position.
type mechanism struct {
	e        *engine
	friction *Friction
	play     *Play
	base     matrices

	x, v, vRate []float64 // rows over z: the output without play, the velocity, the rate of that without friction
	force       []float64 // of friction on the states; gain is what it does to vRate
	gain        float64
	fColumn     int // column of z with the dry friction, −F; −1: none
	pColumn     int // column of z with what is added to y by the play; −1: none

	motion  motion
	contact contact
	laws    [motions][contacts]*law
	now     *law
	before  []float64 // z at the start of a stretch
	carry   []float64

	probe, probeCarry []float64 // see at
}

// matrices are A, B and S of a flow, rows of rows.
type matrices struct {
	n, m    int
	a, b, s []float64
}

// newMechanism returns nil when the run has neither friction nor play. Error: ErrMechanism.
func newMechanism(e *engine) (*mechanism, error) {
	cfg := e.cfg
	if cfg.Friction == nil && cfg.Play == nil {
		return nil, nil
	}
	s := cfg.System
	m := &mechanism{
		e: e, friction: cfg.Friction, play: cfg.Play, base: e.layout.matrices(s), fColumn: -1, pColumn: -1,
		motion: sticks, contact: loose, before: make([]float64, len(e.z)), carry: make([]float64, s.n),
		probe: make([]float64, len(e.z)), probeCarry: make([]float64, s.n),
	}
	N := len(e.z)
	m.x = make([]float64, N)
	copy(m.x, s.c[OutputY*s.n:(OutputY+1)*s.n])
	for k := range e.layout.columns {
		if k != e.layout.play && e.layout.through(s, OutputY)[k] != 0 && !e.layout.added(s, k) {
			return nil, ErrMechanism
		}
	}
	if !e.layout.single {
		return nil, ErrMechanism
	}
	if m.play != nil {
		m.pColumn = s.n + e.layout.play
	}
	if m.friction == nil {
		m.motion = slipsUp
	} else {
		m.fColumn = s.n + e.layout.friction
		m.v = e.flow.derived(m.x)
		if m.friction.Velocity {
			m.v = m.x
		}
		m.force = s.channels[e.layout.frictionFrom].B
		m.vRate = e.flow.derived(m.v)
		m.gain = m.vRate[m.fColumn]
		direct := false
		for _, c := range m.v[s.n:] {
			direct = direct || c != 0
		}
		if !(m.gain > 0) || direct {
			return nil, ErrMechanism
		}
		m.vRate[m.fColumn] = 0 // the dry force is told apart
	}
	return m, m.enter()
}

// law returns the system of the present motion and contact, made when first needed.
func (m *mechanism) enter() error {
	p := &m.laws[m.motion][m.contact]
	if *p == nil {
		*p = m.newLaw()
	}
	m.now = *p
	e := m.e
	e.flow, e.key = m.now.flow, m.now.key
	copy(e.outputs, m.now.outputs)
	if e.watch != nil {
		e.watch.refresh(e)
	}
	if m.fColumn >= 0 {
		e.z[m.fColumn] = 0
		switch m.motion {
		case slipsUp:
			e.z[m.fColumn] = -m.friction.Coulomb
		case slipsDown:
			e.z[m.fColumn] = m.friction.Coulomb
		}
	}
	switch m.contact {
	case pushesUp:
		e.z[m.pColumn] = -m.play.Gap / 2
	case pushesDown:
		e.z[m.pColumn] = m.play.Gap / 2
	}
	return nil
}

// stop is a part that slipped and has come to rest: it sticks, or turns round.
func (m *mechanism) stop() {
	z := m.e.z
	v := dot(m.v, z)
	for i, f := range m.force { // at rest to the last digit
		z[i] -= f * v / m.gain
	}
	switch need := dot(m.vRate, z) / m.gain; {
	case math.Abs(need) <= m.friction.Static*(1-1e-12): // one that is just loose goes on
		m.motion = sticks
	case need > 0:
		m.motion = slipsUp
	default:
		m.motion = slipsDown
	}
}

// leave is a play that is no longer pushed: what it drives stays where it is.
func (m *mechanism) leave() {
	at := dot(m.x, m.e.z) + m.e.z[m.pColumn]
	m.contact = loose
	m.e.z[m.pColumn] = at
}

// settle takes up what a jump of the inputs has changed, at one instant.
func (m *mechanism) settle() error {
	for range 8 {
		g := m.broken(m.e.z)
		if g == nil {
			return nil
		}
		g.then(m)
		if err := m.enter(); err != nil {
			return err
		}
	}
	return nil
}

// broken is a guard that does not hold at z and is not about to: one at 0 that rises is kept.
func (m *mechanism) broken(z []float64) *guard {
	for i := range m.now.guards {
		g := &m.now.guards[i]
		if v := g.value(z); v < 0 && !(v > -m.slack(g, z) && g.rate(z) > 0) || v <= m.slack(g, z) && g.rate(z) < 0 && g.constant == 0 {
			return g
		}
	}
	return nil
}

// slack is the rounding of a guard at z.
func (m *mechanism) slack(g *guard, z []float64) float64 {
	sum := math.Abs(g.constant)
	for i, c := range g.row {
		sum += math.Abs(c * z[i])
	}
	return 1e-14 * sum
}
