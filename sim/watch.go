package sim

// stepWatch feeds the output of a run to a finder, stretch by stretch.
type stepWatch struct {
	find  *finder
	final float64
	slope []float64 // y' as a row over states and columns
	x, w  []float64 // at the start of the stretch
	v0, d float64
}

// newStepWatch prepares y' = (c d)·[A B; 0 S]·(x, w).
func newStepWatch(e *engine, spec *StepSpec) *stepWatch {
	f := e.flow
	N := f.n + f.m
	s := &stepWatch{
		find: newFinder(spec.Band), final: spec.Final, slope: make([]float64, N),
		x: make([]float64, f.n), w: make([]float64, f.m),
	}
	row := append(append([]float64(nil), e.y.c...), e.y.d...)
	for i, c := range row {
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
			s.slope[j] += c * a
		}
	}
	return s
}

// value and slope at a state, as parts of the final value.
func (s *stepWatch) at(e *engine, x, w []float64) (v, d float64) {
	for i, a := range x {
		d += s.slope[i] * a
	}
	for i, a := range w {
		d += s.slope[len(x)+i] * a
	}
	return e.y.value(x, w) / s.final, d / s.final
}

// before is called at the start of a stretch.
func (s *stepWatch) before(e *engine) {
	copy(s.x, e.x)
	copy(s.w, e.w)
	s.v0, s.d = s.at(e, e.x, e.w)
}

// after is called at its end, t + h, with the columns turned to that instant.
func (s *stepWatch) after(e *engine, t, h float64) {
	v1, d1 := s.at(e, e.x, e.w)
	s.find.add(span01{t: t, h: h, v0: s.v0, d0: s.d, v1: v1, d1: d1, at: func(theta float64) (float64, float64) {
		x, w := append([]float64(nil), s.x...), append([]float64(nil), s.w...)
		if err := e.flow.advanceBy(x, w, theta); err != nil {
			return s.v0, 0 // cannot be: the whole stretch was passed without overflow
		}
		return s.at(e, x, w)
	}})
}
