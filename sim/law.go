package sim

import (
	"fmt"
	"math"
)

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
		add(s.channels[m.e.layout.playFrom].B, m.x, -1)
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
	m.guard(l)
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
func (m *mechanism) guard(l *law) {
	add := func(row []float64, sign, constant float64, then func(*mechanism)) {
		g := guard{row: make([]float64, len(row)), constant: constant, then: then}
		for i, c := range row {
			g.row[i] = sign * c
		}
		g.slope = l.flow.derived(g.row)
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
		add(l.flow.derived(m.x), 1, 0, (*mechanism).leave)
	default:
		add(l.flow.derived(m.x), -1, 0, (*mechanism).leave)
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
