package discretize

import "steadytick/internal/dd"

// cascade is a Plant over one period T, sampled: with A_δ = (e^{AT} − I)/T,
//
//	(δI − A_δ) x = b(δ)·u,   A_δ lower triangular with d on its diagonal
//	a_kj = T^(k−j−1)·exp[λ_jT, …, λ_kT]   below the diagonal, k > j
//
// so that no entry needs a subtraction. The transfer function from u to x_k is
// P_k(δ)/Π_{i<=k}(δ − d_i), found by forward substitution.
type cascade struct {
	d   []dd.Complex // δ poles in the order of Plant.lambda
	a   table        // below the diagonal as above, diagonal unused
	p   [][]dd.Complex
	pow []dd.Float // T^0 … T^N
}

// powers returns h^0 … h^n.
func powers(h dd.Float, n int) []dd.Float {
	out := make([]dd.Float, n+1)
	out[0] = dd.One
	for i := range n {
		out[i+1] = out[i].Mul(h)
	}
	return out
}

// nodes returns `zeros` zeros and then λ_i·h, the nodes of the exponential of the
// plant with its input held by as many integrators.
func (p *Plant) nodes(h dd.Float, zeros int) []dd.Complex {
	x := make([]dd.Complex, zeros, zeros+len(p.lambda))
	for _, v := range p.lambda {
		x = append(x, v.Scale(h))
	}
	return x
}

// cascade samples the plant at period T. e is expTable(p.nodes(T, zeros)); input
// gives b_k(δ), ascending, from it.
func (p *Plant) cascade(T dd.Float, e table, zeros int, input func(c *cascade, k int) []dd.Complex) *cascade {
	n := len(p.lambda)
	c := &cascade{d: p.deltaPoles(T), a: newTable(n), pow: powers(T, n+1)}
	for k := range n {
		for j := range k {
			c.a[k][j] = e[k+zeros][j+zeros].Scale(c.pow[k-j-1])
		}
	}
	for k := range n {
		c.p = append(c.p, c.combine(input(c, k), c.a[k][:k]))
	}
	return c
}

// combine returns start·Π_{i<n}(δ − d_i) + Σ_{j<n} w_j·P_j·Π_{j<i<n}(δ − d_i),
// n = len(w), by a scheme like Horner's.
func (c *cascade) combine(start, w []dd.Complex) []dd.Complex {
	r := make([]dd.Complex, len(start), len(start)+len(w))
	copy(r, start)
	for j, wj := range w {
		r = timesRoot(r, c.d[j])
		if wj.IsZero() {
			continue
		}
		for i, v := range c.p[j] {
			r[i] = r[i].Add(mulNode(v, wj))
		}
	}
	return r
}

// timesRoot returns r·(δ − d), reusing r.
func timesRoot(r []dd.Complex, d dd.Complex) []dd.Complex {
	r = append(r, r[len(r)-1])
	for i := len(r) - 2; i > 0; i-- {
		r[i] = r[i-1].Sub(mulNode(r[i], d))
	}
	r[0] = mulNode(r[0], d).Neg()
	return r
}
