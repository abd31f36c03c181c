package sim

import (
	"errors"
	"math"

	"steadytick/internal/dd"
	"steadytick/internal/exact"
	"steadytick/internal/lti"
	"steadytick/internal/poly"
)

// ErrImproper is a model with more zeros than poles.
var ErrImproper = errors.New("the model has more zeros than poles")

// ErrRange is a model whose numbers do not fit float64.
var ErrRange = errors.New("the model is outside the range of the arithmetic")

// maxOrder is the largest number of states.
const maxOrder = 120

// chain is a model with one input and one output in state space,
//
//	x' = A·x + B·in,  out = C·x + D·in     (δx in place of x' in the sampled domain)
//
// a cascade of first and second-order real sections: each pole stands by itself on the
// diagonal, so poles spread over many decades keep all their digits.
type chain struct {
	n    int
	a    []float64 // n×n, row by row
	b, c []float64
	d    float64
}

// realize returns the cascade of g without its delay. zeros are the zeros of g.Num where they
// are known better than its coefficients tell them (multiple zeros), else nil. Errors:
// ErrImproper, ErrRange, those of poly.Roots.
func realize(g lti.TF, zeros []dd.Complex) (*chain, error) {
	if len(g.Num) == 0 {
		return &chain{}, nil
	}
	if zeros == nil {
		var err error
		if zeros, err = g.Num.Roots(); err != nil {
			return nil, err
		}
	}
	zeros = append(zeros, make([]dd.Complex, g.OriginZeros)...)
	poles := append([]dd.Complex(nil), g.Poles...)
	poles = append(poles, make([]dd.Complex, g.OriginPoles)...)
	if len(zeros) > len(poles) {
		return nil, ErrImproper
	}
	if len(poles) > maxOrder {
		return nil, ErrRange
	}
	return assemble(sections(poles, zeros), leading(g.Num))
}

// realizeExact is realize for a g that is known as an exact ratio, r without the delay.
func realizeExact(g lti.TF, r exact.Ratio) (*chain, error) {
	if r.IsZero() {
		return &chain{}, nil
	}
	zeros, err := r.Zeros()
	if err != nil {
		return nil, err
	}
	return realize(g, append([]dd.Complex{}, zeros...))
}

func leading(p poly.Poly) float64 { return p[p.Degree()].Float64() }

// assemble puts the sections one behind the other, gain at the end.
func assemble(list []*section, gain float64) (*chain, error) {
	n := 0
	for _, s := range list {
		n += len(s.poles)
	}
	out := &chain{n: n, a: make([]float64, n*n), b: make([]float64, n), c: make([]float64, n), d: 1}
	at, before := 0, 0.0
	for _, s := range list {
		r := s.realize()
		f := out.incoming(s, at, before)
		for i := range r.n {
			for j := range r.n {
				out.a[(at+i)*n+at+j] = r.a[i][j].Float64()
			}
			bi := r.b[i].Float64() * f
			for j := range at {
				out.a[(at+i)*n+j] = bi * out.c[j]
			}
			out.b[at+i] = bi * out.d
		}
		for j := range at {
			out.c[j] *= r.d
		}
		for i := range r.n {
			out.c[at+i] = r.c[i].Float64() / f
		}
		out.d *= r.d
		at += r.n
		before = s.size()
	}
	for j := range out.c {
		out.c[j] *= gain
	}
	out.d *= gain
	return out, out.check()
}

// incoming is the power of two by which the states of s are scaled, so that what
// drives them is of the size of the poles around.
func (m *chain) incoming(s *section, at int, before float64) float64 {
	most := 0.0
	for _, v := range m.c[:at] {
		most = math.Max(most, math.Abs(v))
	}
	want := math.Max(s.size(), before)
	if most == 0 || want == 0 {
		return 1
	}
	_, e := math.Frexp(want / most)
	return math.Ldexp(1, e-1)
}

func (m *chain) check() error {
	for _, list := range [][]float64{m.a, m.b, m.c, {m.d}} {
		for _, v := range list {
			if math.IsNaN(v) || math.IsInf(v, 0) {
				return ErrRange
			}
		}
	}
	return nil
}

// output is C·x + D·in.
func (m *chain) output(x []float64, in float64) float64 {
	sum := m.d * in
	for j, c := range m.c {
		sum += c * x[j]
	}
	return sum
}

// rate is row i of A·x + B·in.
func (m *chain) rate(i int, x []float64, in float64) float64 {
	sum := m.b[i] * in
	for j, a := range m.a[i*m.n : (i+1)*m.n] {
		sum += a * x[j]
	}
	return sum
}

// after returns the chain that feeds the output of m into q; its states are those of m
// and then those of q.
func (m *chain) after(q *chain) *chain {
	n := m.n + q.n
	out := &chain{n: n, a: make([]float64, n*n), b: make([]float64, n), c: make([]float64, n), d: q.d * m.d}
	for i := range m.n {
		copy(out.a[i*n:], m.a[i*m.n:(i+1)*m.n])
		out.b[i] = m.b[i]
		out.c[i] = q.d * m.c[i]
	}
	for i := range q.n {
		for j := range m.n {
			out.a[(m.n+i)*n+j] = q.b[i] * m.c[j]
		}
		copy(out.a[(m.n+i)*n+m.n:], q.a[i*q.n:(i+1)*q.n])
		out.b[m.n+i] = q.b[i] * m.d
		out.c[m.n+i] = q.c[i]
	}
	return out
}
