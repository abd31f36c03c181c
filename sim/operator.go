package sim

// operator is the solution of a collocation system as a linear map of what is known, column by
// column: the states at the start; then, at the stages, the reference by each delay and the
// disturbance, the constant 1 as one column, and the delayed measurements.
type operator struct{ columns [][]float64 }

// worthwhile is how often a matrix is used before its operator is built: about the number of
// solves that building takes.
const worthwhile = 24

// solution solves the system of collocate for s. Where a matrix is used often, and no lag lies in the
// piece itself, its operator is used instead: it skips the signals that stay 0.
func (w *twin) solution(reg *regime, s *stretch, f *lu) []float64 {
	f.used++
	if s.own || f.used < worthwhile {
		b := w.rightSide(reg, s, w.x)
		f.solve(b)
		return b
	}
	if f.op == nil {
		f.op = w.operator(reg, s.h, f)
	}
	out := make([]float64, f.n)
	col := 0
	add := func(k float64) {
		if k != 0 {
			for i, v := range f.op.columns[col] {
				out[i] += k * v
			}
		}
		col++
	}
	for _, v := range w.x {
		add(v)
	}
	for k := range w.model.ng - 1 {
		for i := 1; i <= stages; i++ {
			add(s.g[i][k])
		}
	}
	add(1)
	for j := range s.q {
		for i := 1; i <= stages; i++ {
			add(s.q[j][i])
		}
	}
	return out
}

// operator solves for one known after the other.
func (w *twin) operator(reg *regime, h float64, f *lu) *operator {
	op := &operator{}
	x := make([]float64, w.model.n)
	s := &stretch{h: h, q: make([]values, w.model.nq)}
	for i := range s.g {
		s.g[i] = make([]float64, w.model.ng)
	}
	solve := func() {
		b := w.rightSide(reg, s, x)
		f.solve(b)
		op.columns = append(op.columns, b)
	}
	with := func(v *float64) {
		*v = 1
		solve()
		*v = 0
	}
	for i := range x {
		with(&x[i])
	}
	last := w.model.ng - 1
	for k := range last {
		for i := 1; i <= stages; i++ {
			with(&s.g[i][k])
		}
	}
	for i := range s.g {
		s.g[i][last] = 1
	}
	solve()
	for i := range s.g {
		s.g[i][last] = 0
	}
	for j := range s.q {
		for i := 1; i <= stages; i++ {
			with(&s.q[j][i])
		}
	}
	return op
}
