package sim

import (
	"fmt"
	"math"
)

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

// row is (a, b) of a linear functional over z after one more derivative: r·[A B; 0 S].
func (k *matrices) derived(r []float64) []float64 {
	N := k.n + k.m
	out := make([]float64, N)
	for i, c := range r {
		if c == 0 {
			continue
		}
		for j := range N {
			out[j] += c * k.at(i, j)
		}
	}
	return out
}

// at is an entry of [A B; 0 S].
func (k *matrices) at(i, j int) float64 {
	switch {
	case i < k.n && j < k.n:
		return k.a[i*k.n+j]
	case i < k.n:
		return k.b[i*k.m+j-k.n]
	case j >= k.n:
		return k.s[(i-k.n)*k.m+j-k.n]
	}
	return 0
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
		m.v = m.base.derived(m.x)
		if m.friction.Velocity {
			m.v = m.x
		}
		m.force = make([]float64, s.n)
		for i := range m.force {
			m.force[i] = m.base.at(i, m.fColumn)
		}
		m.vRate = m.base.derived(m.v)
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

// newLaw builds matrices, outputs and guards of the present motion and contact.
func (m *mechanism) newLaw() *law {
	s := m.e.cfg.System
	k := matrices{m.base.n, m.base.m, append([]float64(nil), m.base.a...), append([]float64(nil), m.base.b...), m.base.s}
	add := func(col, row []float64, factor float64) {
		for i, c := range col {
			for j := range k.n {
				k.a[i*k.n+j] += factor * c * row[j]
			}
			for j := range k.m {
				k.b[i*k.m+j] += factor * c * row[k.n+j]
			}
		}
	}
	if m.friction != nil {
		if m.motion == sticks {
			add(m.force, m.vRate, -1/m.gain)
		} else {
			add(m.force, m.v, -m.friction.Viscous)
		}
	}
	l := &law{}
	rows := make([][]float64, s.outputs)
	for o := range rows {
		rows[o] = append(append([]float64(nil), s.c[o*s.n:(o+1)*s.n]...), m.e.layout.through(s, o)...)
	}
	if m.play != nil && m.contact == loose {
		// What the play adds to y is then its place less x: x itself is taken out everywhere.
		in := make([]float64, k.n)
		for i := range in {
			in[i] = m.base.at(i, m.pColumn)
		}
		add(in, m.x, -1)
		for o := range rows {
			through := rows[o][m.pColumn]
			for j, c := range m.x {
				rows[o][j] -= through * c
			}
		}
	}
	for _, r := range rows {
		l.outputs = append(l.outputs, newProbe(r[:s.n], r[s.n:]))
	}
	l.flow = newFlow(k.n, k.m, k.a, k.b, k.s)
	l.key = fmt.Sprintf("%s law %d %d %v %v", m.e.layout.key(), m.motion, m.contact, m.friction, m.play != nil)
	l.distance = stretchLimit(k.n, k.a)
	m.guard(l, &k)
	return l
}

// stretchLimit is how long a stretch may be for its guards to be judged by values and slopes at the ends: a third of
// a radian of the fastest motion that the matrix may have (its largest row sum bounds the eigenvalues; that of a
// balanced matrix is near them).
func stretchLimit(n int, a []float64) float64 {
	most := 0.0
	for i := range n {
		for j := range n {
			// |a_ij·a_ji| is the square of the frequency of a pair of states that drive each other.
			if w := math.Sqrt(math.Abs(a[i*n+j] * a[j*n+i])); i != j && w > most {
				most = w
			}
		}
	}
	if most == 0 {
		return math.Inf(1)
	}
	return 1 / most
}

// guard lists what ends the present law.
func (m *mechanism) guard(l *law, k *matrices) {
	add := func(row []float64, sign, constant float64, then func(*mechanism)) {
		g := guard{row: make([]float64, len(row)), constant: constant, then: then}
		for i, c := range row {
			g.row[i] = sign * c
		}
		g.slope = k.derived(g.row)
		l.guards = append(l.guards, g)
	}
	switch {
	case m.friction == nil:
	case m.motion == sticks:
		need := m.need()
		add(need, -1, m.friction.Static, func(m *mechanism) { m.motion = slipsUp })
		add(need, 1, m.friction.Static, func(m *mechanism) { m.motion = slipsDown })
	case m.motion == slipsUp:
		add(m.v, 1, 0, (*mechanism).stop)
	default:
		add(m.v, -1, 0, (*mechanism).stop)
	}
	switch {
	case m.play == nil:
	case m.contact == loose: // the place of the play is in its column
		gap := append([]float64(nil), m.x...)
		gap[m.pColumn]--
		add(gap, -1, m.play.Gap/2, func(m *mechanism) { m.contact = pushesUp })
		add(gap, 1, m.play.Gap/2, func(m *mechanism) { m.contact = pushesDown })
	case m.contact == pushesUp:
		add(k.derived(m.x), 1, 0, (*mechanism).leave)
	default:
		add(k.derived(m.x), -1, 0, (*mechanism).leave)
	}
}

// need is the force, as a row over z, that friction must take up for the part to stay at rest.
func (m *mechanism) need() []float64 {
	row := make([]float64, len(m.vRate))
	for i, c := range m.vRate {
		row[i] = c / m.gain
	}
	return row
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

// mostEvents bounds the changes of law in one stretch between two instants: a part that hunts about rest
// faster than that is left where it is until the next stretch.
const mostEvents = 200

// free propagates over h seconds from t, through every change of law; full tells that h is the whole part of
// the interval that steps are prepared for.
func (m *mechanism) free(t, h float64, full bool) error {
	e := m.e
	if err := m.settle(); err != nil {
		return err
	}
	for events := 0; h > 0; events++ {
		part := math.Min(h, math.Max(m.now.distance, h/64))
		copy(m.before, e.z)
		copy(m.carry, e.carry)
		p, err := e.prepared(full && part == h)
		if err != nil {
			return err
		}
		e.begin()
		if err := e.move(p, part); err != nil {
			return err
		}
		theta, g := m.first(part)
		if events >= mostEvents {
			g = nil
		}
		if g != nil {
			part = theta
			copy(e.z, m.before)
			copy(e.carry, m.carry)
			if err := e.move(nil, part); err != nil {
				return err
			}
		}
		e.end(t, part)
		if g != nil {
			g.then(m)
			if err := m.enter(); err != nil {
				return err
			}
		}
		full = false
		t += part
		h -= part
	}
	return nil
}

// first is the earliest instant after the start of a stretch of h seconds at which a guard comes to 0, nil when
// none does. The state is at its end.
func (m *mechanism) first(h float64) (theta float64, out *guard) {
	theta = h
	for i := range m.now.guards {
		g := &m.now.guards[i]
		v0, v1 := g.value(m.before), g.value(m.e.z)
		d0, d1 := g.rate(m.before), g.rate(m.e.z)
		if v0 <= m.slack(g, m.before) && d0 > 0 {
			v0 = math.SmallestNonzeroFloat64 // it has just come from 0
		}
		end := h
		if v1 >= 0 {
			if !(d0 < 0 && d1 > 0) {
				continue
			}
			// Down and up again: the lowest point tells.
			end = rootOf(func(x float64) float64 { return g.rate(m.at(x)) }, 0, h, d0, d1)
			if v1 = g.value(m.at(end)); v1 >= 0 {
				continue
			}
		}
		at := 0.0
		if v0 > 0 {
			at = m.cross(g, end, v0, v1)
		}
		if out == nil || at < theta {
			theta, out = at, g
		}
	}
	return theta, out
}

// cross is where g falls through 0 between the start of the stretch, where it is v0 or has just come from 0, and end.
func (m *mechanism) cross(g *guard, end, v0, v1 float64) float64 {
	a := 0.0
	if v0 == math.SmallestNonzeroFloat64 {
		// Up from 0 and down again: its highest point lies between.
		a = rootOf(func(x float64) float64 { return g.rate(m.at(x)) }, 0, end, g.rate(m.before), g.rate(m.at(end)))
		if v0 = g.value(m.at(a)); !(v0 > 0) {
			return a
		}
	}
	return rootOf(func(x float64) float64 { return g.value(m.at(x)) }, a, end, v0, v1)
}

// at is the state theta seconds after the start of the stretch.
func (m *mechanism) at(theta float64) []float64 {
	copy(m.probe, m.before)
	copy(m.probeCarry, m.carry)
	if err := m.now.flow.advanceBy(m.probe, m.probeCarry, theta); err != nil {
		return m.before // cannot be: the whole stretch was passed without overflow
	}
	return m.probe
}
