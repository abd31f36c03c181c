package sim

import (
	"math"

	"steadytick/internal/dd"
)

// square is a square matrix of double-double numbers, rows one after the other.
type square struct {
	n int
	v []dd.Float
}

// mul returns a·b; exact zeros of a are skipped, so that triangular blocks cost what they hold.
func (a square) mul(b square) square {
	n := a.n
	out := square{n, make([]dd.Float, n*n)}
	for i := range n {
		row := out.v[i*n : (i+1)*n]
		for k := range n {
			f := a.v[i*n+k]
			if f.Hi == 0 {
				continue
			}
			for j, g := range b.v[k*n : (k+1)*n] {
				if g.Hi != 0 {
					row[j] = row[j].Add(f.Mul(g))
				}
			}
		}
	}
	return out
}

// norm is the largest row sum of magnitudes.
func (a square) norm() float64 {
	most := 0.0
	for i := range a.n {
		sum := 0.0
		for _, v := range a.v[i*a.n : (i+1)*a.n] {
			sum += math.Abs(v.Hi)
		}
		most = math.Max(most, sum)
	}
	return most
}

// taylorTerms of the exponential of a matrix of norm at most 1/8 leave a rest below
// 8^-17/17!·(1 + …) = 1.3e-30, relative to the first term.
const taylorTerms = 17

// expm1 returns e^(m·h) − I without the subtraction,
//
//	E = X + X²/2! + X³/3! + …,  X = m·h/2^q,  norm of X at most 1/8
//	E ← 2E + E·E, q times:  e^(2X) − I = 2(e^X − I) + (e^X − I)²
//
// in double-double: the 32 digits pay for what q squarings may cost, up to 16 of them. An
// integrator block stays exactly nilpotent. Overflow gives Inf or NaN entries.
func expm1(m square, h dd.Float) square {
	n := m.n
	size := m.norm() * math.Abs(h.Hi)
	q := 0
	if size > 0.125 && !math.IsInf(size, 0) {
		_, q = math.Frexp(size * 8)
	}
	x := square{n, make([]dd.Float, n*n)}
	for i, v := range m.v {
		x.v[i] = v.Mul(h).Ldexp(-q)
	}
	e := x
	for k := taylorTerms; k > 1; k-- {
		// e ← x + x·e/k, from the innermost bracket outward.
		p := x.mul(e)
		for i := range p.v {
			p.v[i] = x.v[i].Add(p.v[i].Div(dd.New(float64(k))))
		}
		e = p
	}
	for range q {
		p := e.mul(e)
		for i := range p.v {
			p.v[i] = p.v[i].Add(dd.Float{Hi: 2 * e.v[i].Hi, Lo: 2 * e.v[i].Lo})
		}
		e = p
	}
	return e
}
