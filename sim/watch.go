package sim

// stepWatch feeds the output of a run to a finder, stretch by stretch.
type stepWatch struct {
	find  *finder
	final float64
	slope []float64 // y' as a row over states and columns
	z     []float64 // at the start of the stretch
	v0, d float64
}

// newStepWatch prepares y' = (c d)·[A B; 0 S]·(x, w).
func newStepWatch(e *engine, spec *StepSpec) *stepWatch {
	s := &stepWatch{find: newFinder(spec.Band), final: spec.Final, z: make([]float64, len(e.z))}
	s.refresh(e)
	return s
}

// refresh follows a change of the system.
func (s *stepWatch) refresh(e *engine) { s.slope = e.flow.derived(e.y.row) }

// derived is the rate of the output with the row c over (x, w), as a row: c·[A B; 0 S].
func (f *flow) derived(c []float64) []float64 {
	N := f.n + f.m
	out := make([]float64, N)
	for i, c := range c {
		if c == 0 {
			continue
		}
		for j := range N {
			a := f.aug.v[i*N+j].Hi
			if j >= f.n {
				a /= f.scale[j-f.n]
			}
			if i >= f.n {
				a *= f.scale[i-f.n]
			}
			out[j] += c * a
		}
	}
	return out
}

// value and slope at a state, as parts of the final value.
func (s *stepWatch) at(e *engine, z []float64) (v, d float64) {
	for i, a := range z {
		d += s.slope[i] * a
	}
	return e.y.value(z) / s.final, d / s.final
}

// before is called at the start of a stretch.
func (s *stepWatch) before(e *engine) {
	copy(s.z, e.z)
	s.v0, s.d = s.at(e, e.z)
}

// after is called at its end, t + h, with the columns turned to that instant.
func (s *stepWatch) after(e *engine, t, h float64) {
	v1, d1 := s.at(e, e.z)
	s.find.add(span01{t: t, h: h, v0: s.v0, d0: s.d, v1: v1, d1: d1, at: func(theta float64) (float64, float64) {
		z := append([]float64(nil), s.z...)
		if err := e.flow.advanceBy(z, make([]float64, e.flow.n), theta); err != nil {
			return s.v0, 0 // cannot be: the whole stretch was passed without overflow
		}
		return s.at(e, z)
	}})
}
