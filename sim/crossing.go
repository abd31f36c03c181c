package sim

import "math"

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
