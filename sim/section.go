package sim

import (
	"math"
	"sort"

	"steadytick/internal/dd"
)

// section is a first or second-order real factor of a transfer function,
//
//	Π(x − zeros) / Π(x − poles)
//
// with one real pole, two real poles, or a conjugate pair (poles[0] = conj poles[1]);
// not more zeros than poles.
type section struct{ poles, zeros []dd.Complex }

// complexPair tells whether the poles are a conjugate pair.
func (s *section) complexPair() bool { return s.poles[0].Im.Sign() != 0 }

// size is the largest pole magnitude.
func (s *section) size() float64 {
	m := 0.0
	for _, p := range s.poles {
		m = math.Max(m, p.Abs())
	}
	return m
}

// sections pairs poles with zeros: conjugate pairs stay together, each pair of
// complex zeros goes to a pole pair, and zeros go to the poles nearest to them in magnitude, so
// that no section has a large gain that another takes away. Sorted from fast to slow,
// integrators last.
func sections(poles, zeros []dd.Complex) []*section {
	pairs, reals := split(poles)
	zeroPairs, zeroReals := split(zeros)
	var out []*section
	for _, p := range pairs {
		out = append(out, &section{poles: []dd.Complex{p, p.Conj()}})
	}
	// More pairs of zeros than of poles: real poles are joined for them.
	for i := len(pairs); i < len(zeroPairs); i++ {
		s := &section{}
		for range 2 {
			k := nearest(reals, zeroPairs[i])
			s.poles = append(s.poles, reals[k])
			reals = append(reals[:k:k], reals[k+1:]...)
		}
		sort.Slice(s.poles, func(a, b int) bool { return s.poles[a].Abs() > s.poles[b].Abs() })
		out = append(out, s)
	}
	for _, p := range reals {
		out = append(out, &section{poles: []dd.Complex{p}})
	}
	for _, z := range zeroPairs {
		assign(out, z, z.Conj())
	}
	for _, z := range zeroReals {
		assign(out, z)
	}
	sort.SliceStable(out, func(i, j int) bool { return out[i].size() > out[j].size() })
	return out
}

// split returns the members with a positive imaginary part and the real ones.
func split(x []dd.Complex) (pairs, reals []dd.Complex) {
	for _, v := range x {
		switch v.Im.Sign() {
		case 0:
			reals = append(reals, v)
		case 1:
			pairs = append(pairs, v)
		}
	}
	return pairs, reals
}

// assign gives the zeros to the section with room whose poles are nearest.
func assign(list []*section, z ...dd.Complex) {
	best, at := math.Inf(1), -1
	for i, s := range list {
		if len(s.zeros)+len(z) > len(s.poles) {
			continue
		}
		if d := octaves(s.poles[0], z[0]); at < 0 || d < best {
			best, at = d, i
		}
	}
	if at < 0 {
		panic("more zeros than poles") // bug in the caller: it has checked
	}
	list[at].zeros = append(list[at].zeros, z...)
}

func nearest(list []dd.Complex, z dd.Complex) int {
	at := 0
	for i, p := range list {
		if octaves(p, z) < octaves(list[at], z) {
			at = i
		}
	}
	return at
}

// octaves is the distance of two magnitudes on a logarithmic scale; 0 counts as 1e-300.
func octaves(a, b dd.Complex) float64 {
	return math.Abs(math.Log(math.Max(a.Abs(), 1e-300)) - math.Log(math.Max(b.Abs(), 1e-300)))
}

// realization is a section in state space, double-double: x' = A·x + B·in, out = C·x + D·in.
type realization struct {
	a [2][2]dd.Float
	b [2]dd.Float
	c [2]dd.Float
	d float64 // 0 or 1
	n int
}

// realize writes the section with states whose couplings are of the size of its poles.
func (s *section) realize() realization {
	if len(s.poles) == 1 {
		r := realization{n: 1}
		p := s.poles[0].Re
		r.a[0][0], r.b[0], r.c[0] = p, dd.One, dd.One
		if len(s.zeros) == 1 {
			r.c[0], r.d = p.Sub(s.zeros[0].Re), 1
		}
		return r
	}
	r := realization{n: 2}
	e1, e0 := s.remainder(&r)
	k := dd.New(s.size())
	if k.Hi == 0 {
		k = dd.One
	}
	p, q := s.poles[0], s.poles[1]
	if s.complexPair() {
		// A = [σ k; −ω²/k σ], B = (0, 1): (xI−A)⁻¹B = (k, x−σ)/((x−σ)²+ω²).
		w := p.Im.Mul(p.Im).Div(k).Neg()
		r.a = [2][2]dd.Float{{p.Re, k}, {w, p.Re}}
		r.b = [2]dd.Float{{}, dd.One}
		r.c = [2]dd.Float{e0.Add(e1.Mul(p.Re)).Div(k), e1}
		return r
	}
	// A = [p 0; k q], B = (1, 0): (xI−A)⁻¹B = (x−q, k)/((x−p)(x−q)).
	r.a = [2][2]dd.Float{{p.Re, {}}, {k, q.Re}}
	r.b = [2]dd.Float{dd.One, {}}
	r.c = [2]dd.Float{e1, e0.Add(e1.Mul(q.Re)).Div(k)}
	return r
}

// remainder returns e1·x + e0, the numerator less D times the denominator of a
// second-order section, and sets D.
func (s *section) remainder(r *realization) (e1, e0 dd.Float) {
	switch len(s.zeros) {
	case 0:
		return dd.Zero, dd.One
	case 1:
		return dd.One, s.zeros[0].Re.Neg()
	}
	r.d = 1
	sumP, prodP := pairSums(s.poles)
	sumZ, prodZ := pairSums(s.zeros)
	return sumP.Sub(sumZ), prodZ.Sub(prodP)
}

// pairSums are the sum and the product of two reals or a conjugate pair.
func pairSums(x []dd.Complex) (sum, prod dd.Float) {
	return x[0].Re.Add(x[1].Re), x[0].Mul(x[1]).Re
}
