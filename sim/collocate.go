package sim

import "math"

// stretch is a candidate for the next piece: all signals at its nodes.
type stretch struct {
	h                 float64
	x                 []values // states
	g                 [stages + 1][]float64
	q                 []values // delayed measurements
	y, m, u, v, slope values
	own               bool // a lag is shorter than h
}

// factored names the matrix of a regime and a length.
type factored struct {
	key int
	h   float64
}

// maxFactored bounds what is kept; the lengths come from a ladder of halvings, so few are needed.
const maxFactored = 64

// collocate solves the loop over h from the present state,
//
//	X_i = x0 + h·Σ_k a_ik·(A·X_k + F·(g_k, q_k)),   i = 1 … s
//	q_jk = m̂(t + c_k·h − lag_j): from the history, or for c_k·h > lag_j from the
//	       polynomial through m̂_0 … m̂_s of this very piece
//	m̂_i = row of m̂ at (X_i, g_i, q_i)
//
// a linear system in the X and, when a lag is shorter than h, the m̂. So a dead time far below
// the dynamics costs no short steps. ok is false for a singular matrix.
func (w *twin) collocate(reg *regime, h float64) (s *stretch, ok bool) {
	n := w.model.n
	s = &stretch{h: h, x: make([]values, n), q: make([]values, w.model.nq)}
	for i := range s.g {
		s.g[i] = w.exogenous(w.t+w.r.node[i]*h, w.t, h)
	}
	for j := range s.q {
		s.own = s.own || w.isOwn(stages, j, h)
	}
	w.recall(s)
	if s.own {
		m0 := w.value(reg.m, w.x, s.g[0], s.q, 0)
		w.ownPart(s, func(e *[stages + 1]float64) float64 { return e[0] * m0 })
	}
	f, ok := w.matrix(reg, s)
	if !ok {
		return nil, false
	}
	b := w.solution(reg, s, f)
	for i := range n {
		s.x[i][0] = w.x[i]
		for k := range stages {
			s.x[i][k+1] = b[k*n+i]
		}
	}
	if s.own {
		mu := b[stages*n:]
		w.ownPart(s, func(e *[stages + 1]float64) float64 {
			sum := 0.0
			for k, v := range mu {
				sum += e[k+1] * v
			}
			return sum
		})
	}
	w.scalars(reg, s)
	return s, true
}

// ownPart adds to the delayed measurements that lie in the piece itself a part got from
// their weights.
func (w *twin) ownPart(s *stretch, part func(e *[stages + 1]float64) float64) {
	for j := range s.q {
		for i := 1; i <= stages; i++ {
			if w.isOwn(i, j, s.h) {
				e := w.ownWeights(i, j, s.h)
				s.q[j][i] += part(&e)
			}
		}
	}
}

// isOwn tells whether node i looks back by lag j into the piece itself.
func (w *twin) isOwn(i, j int, h float64) bool {
	return w.r.node[i]*h > w.lags[j]*(1+1e-9)
}

// ownWeights give m̂ at node i less lag j from the m̂ at the nodes.
func (w *twin) ownWeights(i, j int, h float64) [stages + 1]float64 {
	return w.r.weights(w.r.node[i] - w.lags[j]/h)
}

// recall takes the delayed measurements from the history where they lie there.
func (w *twin) recall(s *stretch) {
	for j := range s.q {
		for i := range s.q[j] {
			if i > 0 && w.isOwn(i, j, s.h) {
				continue
			}
			sd := before
			if i == 0 {
				sd = after
			}
			s.q[j][i] = w.past.measurement(w.t+w.r.node[i]*s.h-w.lags[j], sd)
		}
	}
}

// matrix returns the factored matrix of collocate.
func (w *twin) matrix(reg *regime, s *stretch) (*lu, bool) {
	key := factored{reg.key, s.h}
	if f := w.factors[key]; f != nil {
		return f, true
	}
	n, h := w.model.n, s.h
	size := stages * n
	if s.own {
		size += stages
	}
	a := make([]float64, size*size)
	for i := range stages {
		for k := range stages {
			c := h * w.r.a[i][k]
			for p := range n {
				row := a[(i*n+p)*size:]
				for q := range n {
					row[k*n+q] = -c * reg.a[p*n+q]
				}
			}
		}
	}
	if s.own {
		w.ownColumns(reg, s, a, size)
	}
	for i := range size {
		a[i*size+i]++
	}
	f, ok := factor(a, size)
	if !ok {
		return nil, false
	}
	if len(w.factors) >= maxFactored {
		clear(w.factors)
	}
	w.factors[key] = f
	return f, true
}

// ownColumns writes the unknown m̂ into the matrix a of collocate.
func (w *twin) ownColumns(reg *regime, s *stretch, a []float64, size int) {
	n, ng, h := w.model.n, w.model.ng, s.h
	nf, first := ng+w.model.nq, stages*n
	for j := range s.q {
		for k := 1; k <= stages; k++ {
			if !w.isOwn(k, j, h) {
				continue
			}
			e := w.ownWeights(k, j, h)
			for l := 1; l <= stages; l++ {
				for p := range n {
					fq := reg.f[p*nf+ng+j]
					for i := range stages {
						a[(i*n+p)*size+first+l-1] -= h * w.r.a[i][k-1] * fq * e[l]
					}
				}
				a[(first+k-1)*size+first+l-1] -= reg.m[n+ng+j] * e[l]
			}
		}
	}
	for i := range stages {
		for p := range n {
			a[(first+i)*size+i*n+p] -= reg.m[p]
		}
	}
}

// rightSide is the known part of the system of collocate, from the states x0 at the start and the
// known signals of s; it is linear in them.
func (w *twin) rightSide(reg *regime, s *stretch, x0 []float64) []float64 {
	n, ng, nq := w.model.n, w.model.ng, w.model.nq
	nf := ng + nq
	b := make([]float64, stages*n, stages*(n+1))
	force := make([]float64, stages*n)
	for k := range stages {
		for p := range n {
			row := reg.f[p*nf : (p+1)*nf]
			sum := 0.0
			for i, v := range s.g[k+1] {
				sum += row[i] * v
			}
			for j := range s.q {
				sum += row[ng+j] * s.q[j][k+1]
			}
			force[k*n+p] = sum
		}
	}
	for i := range stages {
		for p := range n {
			sum := 0.0
			for k := range stages {
				sum += w.r.a[i][k] * force[k*n+p]
			}
			b[i*n+p] = x0[p] + s.h*sum
		}
	}
	if s.own {
		for i := 1; i <= stages; i++ {
			sum := 0.0
			for k, v := range s.g[i] {
				sum += reg.m[n+k] * v
			}
			for j := range s.q {
				sum += reg.m[n+ng+j] * s.q[j][i]
			}
			b = append(b, sum)
		}
	}
	return b
}

// value is a row at node i.
func (w *twin) value(row, x, g []float64, q []values, i int) float64 {
	n := len(x)
	sum := 0.0
	for k, v := range x {
		sum += row[k] * v
	}
	for k, v := range g {
		sum += row[n+k] * v
	}
	for j := range q {
		sum += row[n+len(g)+j] * q[j][i]
	}
	return sum
}

// scalars evaluates the rows at the nodes.
func (w *twin) scalars(reg *regime, s *stretch) {
	x := make([]float64, w.model.n)
	for i := range s.g {
		for k := range x {
			x[k] = s.x[k][i]
		}
		s.y[i] = w.value(reg.y, x, s.g[i], s.q, i)
		s.m[i] = w.value(reg.m, x, s.g[i], s.q, i)
		s.u[i] = w.value(reg.u, x, s.g[i], s.q, i)
		s.v[i] = w.value(reg.v, x, s.g[i], s.q, i)
		s.slope[i] = w.value(reg.slope, x, s.g[i], s.q, i)
	}
}

// exogenous returns g at time t in the piece from start over h, whose middle
// says which piece of each signal holds.
func (w *twin) exogenous(t, start, h float64) []float64 {
	g := make([]float64, w.model.ng)
	at := func(s *Signal, delay float64) float64 {
		mid := start + h/2 - delay
		if mid < 0 {
			return 0
		}
		if s.w > 0 || len(s.starts) == 0 {
			return s.At(math.Max(t-delay, 0))
		}
		return s.inPiece(s.piece(mid), t-delay)
	}
	for k, d := range w.rDelays {
		g[k] = at(&w.cfg.Reference, d)
	}
	g[len(w.rDelays)] = at(&w.cfg.Disturbance, 0)
	g[len(w.rDelays)+1] = 1
	return g
}
