package sim

import (
	"math"
	"sync"
)

// stages is the number of collocation points of a piece of the continuous loop. Ten points
// follow e^{λt} over |λ|h = 1 to 1e-12 (Chebyshev coefficients of order k on half the
// length are about (λh/4)^k/k!) with matrices that stay small.
const stages = 10

// gridPoints is the number of points, besides the start, at which a piece is searched for
// events and extremes.
const gridPoints = 40

// radau holds the collocation of Radau's kind on [0, 1]: points c_1 < … < c_s = 1, the zeros of
// P_s(2c−1) − P_{s−1}(2c−1) with P the Legendre polynomials. It is of order 2s − 1 at the end
// of a piece and damps modes much faster than the piece (Hairer and Wanner, Solving
// Ordinary Differential Equations II, IV.5; from memory, the tests check order and damping).
//
// A piece is stored by its values at the s + 1 nodes 0, c_1, …, c_s, a polynomial of degree s.
type radau struct {
	node           [stages + 1]float64                 // 0, c_1, …, c_s
	a              [stages][stages]float64             // a[i][k] = ∫_0^{c_{i+1}} of the Lagrange polynomial of c_{k+1}
	bary           [stages + 1]float64                 // barycentric weights of the nodes
	spec           [stages + 1][stages + 1]float64     // Legendre coefficients from node values
	grid           [gridPoints + 1]float64             // points in [0, 1], denser toward 0
	look           [gridPoints + 1][stages + 1]float64 // values on the grid from node values
	diff           [stages + 1][stages + 1]float64     // slopes at the nodes (per unit of the piece) from node values
	gaussX, gaussW []float64                           // Gauss's rule on [0, 1]
	gaussAt        [][stages + 1]float64               // values there from node values
}

var radauTable = sync.OnceValue(newRadau)

// legendre returns P_0(x) … P_n(x) for x in [0, 1] mapped to [−1, 1].
func legendre(n int, c float64) []float64 {
	x := 2*c - 1
	p := make([]float64, n+1)
	p[0] = 1
	if n > 0 {
		p[1] = x
	}
	for k := 1; k < n; k++ {
		p[k+1] = (float64(2*k+1)*x*p[k] - float64(k)*p[k-1]) / float64(k+1)
	}
	return p
}

// zeros finds the n simple zeros of f in (0, 1) by sign changes on a fine grid and
// bisection to the last bit.
func zeros(f func(float64) float64, n int) []float64 {
	var out []float64
	const cells = 4000 // the closest zeros of Legendre polynomials up to degree 24 are 0.003 apart
	for i := range cells {
		a, b := float64(i)/cells, float64(i+1)/cells
		if fa := f(a); fa*f(b) < 0 {
			for range 60 {
				m := a + (b-a)/2
				if fm := f(m); fa*fm <= 0 {
					b = m
				} else {
					a = m
				}
			}
			out = append(out, a+(b-a)/2)
		}
	}
	if len(out) != n {
		panic("zeros of a Legendre polynomial not found") // no input reaches this
	}
	return out
}

func newRadau() *radau {
	r := &radau{}
	inner := zeros(func(c float64) float64 {
		p := legendre(stages, c)
		return p[stages] - p[stages-1]
	}, stages-1)
	copy(r.node[1:], inner)
	r.node[stages] = 1
	for i := range r.bary {
		r.bary[i] = 1
		for j := range r.node {
			if j != i {
				r.bary[i] /= 4 * (r.node[i] - r.node[j]) // 4 keeps the products near 1
			}
		}
	}
	r.integrals()
	r.spectrum()
	for i := range r.grid {
		x := float64(i) / gridPoints
		r.grid[i] = x * x
		r.look[i] = r.weights(r.grid[i])
	}
	r.slopes()
	n := 2 * stages
	r.gaussX = zeros(func(c float64) float64 { return legendre(n, c)[n] }, n)
	for _, x := range r.gaussX {
		// w = 2/((1−x²)·P'_n(x)²) on [−1, 1], with (x²−1)·P'_n = n·(x·P_n − P_{n−1}).
		p := legendre(n, x)
		y := 2*x - 1
		d := float64(n) * p[n-1]
		r.gaussW = append(r.gaussW, (1-y*y)/(d*d))
		r.gaussAt = append(r.gaussAt, r.weights(x))
	}
	return r
}

// weights of the node values for the value at c (barycentric form).
func (r *radau) weights(c float64) (w [stages + 1]float64) {
	sum := 0.0
	for i, x := range r.node {
		if c == x {
			w = [stages + 1]float64{}
			w[i] = 1
			return w
		}
		w[i] = r.bary[i] / (c - x)
		sum += w[i]
	}
	for i := range w {
		w[i] /= sum
	}
	return w
}

// integrals sets a: from the values at c_1 … c_s to Legendre coefficients, and their integrals
//
//	∫_{-1}^{x} P_k = (P_{k+1}(x) − P_{k−1}(x))/(2k+1)
func (r *radau) integrals() {
	v := make([]float64, stages*stages)
	for i := range stages {
		copy(v[i*stages:], legendre(stages-1, r.node[i+1]))
	}
	inv := inverse(v, stages)
	for i := range stages {
		p := legendre(stages, r.node[i+1])
		for k := range stages {
			sum := 0.0
			for j := range stages {
				in := p[1] + 1
				if j > 0 {
					in = (p[j+1] - p[j-1]) / float64(2*j+1)
				}
				sum += in / 2 * inv[j*stages+k]
			}
			r.a[i][k] = sum
		}
	}
}

func (r *radau) spectrum() {
	const n = stages + 1
	v := make([]float64, n*n)
	for i := range n {
		copy(v[i*n:], legendre(stages, r.node[i]))
	}
	inv := inverse(v, n)
	for i := range n {
		copy(r.spec[i][:], inv[i*n:(i+1)*n])
	}
}

// slopes sets diff: for i ≠ j the slope of the Lagrange polynomial of j at node i is
// (b_j/b_i)/(x_i − x_j), and each row sums to 0.
func (r *radau) slopes() {
	for i := range r.node {
		for j := range r.node {
			if i != j {
				r.diff[i][j] = r.bary[j] / r.bary[i] / (r.node[i] - r.node[j])
				r.diff[i][i] -= r.diff[i][j]
			}
		}
	}
}

// values is a scalar signal on a piece, by its values at the nodes.
type values [stages + 1]float64

// at returns the value at c, a part of the piece.
func (v *values) at(r *radau, c float64) float64 {
	num, den := 0.0, 0.0
	for i, x := range r.node {
		if c == x {
			return v[i]
		}
		w := r.bary[i] / (c - x)
		num += w * v[i]
		den += w
	}
	return num / den
}

// slope returns the values of the derivative per unit of the piece.
func (v *values) slope(r *radau) (d values) {
	for i := range d {
		for j, x := range v {
			d[i] += r.diff[i][j] * x
		}
	}
	return d
}

// tail is the size of what the polynomial does not resolve: its last two Legendre coefficients.
func (v *values) tail(r *radau) float64 {
	c1, c2 := 0.0, 0.0
	for j, x := range v {
		c1 += r.spec[stages][j] * x
		c2 += r.spec[stages-1][j] * x
	}
	return math.Max(math.Abs(c1), math.Abs(c2))
}

// size is the largest magnitude at the nodes.
func (v *values) size() float64 {
	m := 0.0
	for _, x := range v {
		if x = math.Abs(x); !(x <= m) {
			m = x // a NaN stays
		}
	}
	return m
}

// onGrid returns the values on the grid.
func (v *values) onGrid(r *radau) (g [gridPoints + 1]float64) {
	for i := range g {
		g[i] = v.weighted(&r.look[i])
	}
	return g
}

// weighted is the value by its weights.
func (v *values) weighted(w *[stages + 1]float64) float64 {
	sum := 0.0
	for j, x := range v {
		sum += w[j] * x
	}
	return sum
}
