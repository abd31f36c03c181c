package exact

import (
	"math/big"
	"math/bits"
)

// GCD returns the greatest common divisor, monic; degree 0 (the constant 1) when
// p and q have no root in common. GCD(0, 0) is 0.
//
// Two steps. First the gcd modulo a prime that divides neither leading
// coefficient: its degree is never below the true one, so degree 0 there proves
// that there is no common root. Only otherwise the primitive remainder sequence
// over the integers runs (Knuth, The Art of Computer Programming 2, 4.6.1).
func (p Poly) GCD(q Poly) Poly {
	p, q = p.trim(), q.trim()
	if len(p) == 0 || len(q) == 0 {
		return p.Add(q).monic()
	}
	if len(p) == 1 || len(q) == 1 {
		return IntPoly(1)
	}
	a, _ := p.integers()
	b, _ := q.integers()
	a, b = primitive(a), primitive(b)
	if coprimeModular(a, b) {
		return IntPoly(1)
	}
	if len(a) < len(b) {
		a, b = b, a
	}
	for len(b) > 0 {
		a, b = b, primitive(pseudoRemainder(a, b))
	}
	out := make(Poly, len(a))
	for i, v := range a {
		out[i] = new(big.Rat).SetInt(v)
	}
	return out.monic()
}

// monic returns p divided by its leading coefficient.
func (p Poly) monic() Poly {
	if p.IsZero() {
		return nil
	}
	return p.Scale(new(big.Rat).Inv(p.Lead()))
}

// primitive trims a and divides it by the gcd of its coefficients.
func primitive(a []*big.Int) []*big.Int {
	for len(a) > 0 && a[len(a)-1].Sign() == 0 {
		a = a[:len(a)-1]
	}
	var g, t big.Int
	for _, v := range a {
		g.GCD(nil, nil, &g, t.Abs(v))
	}
	out := make([]*big.Int, len(a))
	for i, v := range a {
		out[i] = new(big.Int).Quo(v, &g)
	}
	return out
}

// pseudoRemainder returns a remainder of a constant times a by b, deg b <= deg a.
func pseudoRemainder(a, b []*big.Int) []*big.Int {
	r := make([]*big.Int, len(a))
	for i, v := range a {
		r[i] = new(big.Int).Set(v)
	}
	lead := b[len(b)-1]
	var t big.Int
	for k := len(a) - len(b); k >= 0; k-- {
		f := new(big.Int).Set(r[k+len(b)-1])
		if f.Sign() == 0 {
			continue
		}
		for _, v := range r {
			v.Mul(v, lead)
		}
		for j, v := range b {
			r[k+j].Sub(r[k+j], t.Mul(f, v))
		}
	}
	return r
}

// prime is 2^61 − 1, a Mersenne prime: a common factor modulo it that is none
// over Q is met once in about 2^61 pairs and costs time only.
const prime = 1<<61 - 1

// coprimeModular is true only when a and b have no common factor; false tells nothing.
func coprimeModular(a, b []*big.Int) bool {
	u, v := reduce(a), reduce(b)
	if u[len(u)-1] == 0 || v[len(v)-1] == 0 {
		return false
	}
	if len(u) < len(v) {
		u, v = v, u
	}
	for len(v) > 1 {
		u, v = v, remainderModular(u, v)
	}
	return len(v) == 1
}

// reduce returns a modulo the prime.
func reduce(a []*big.Int) []uint64 {
	m := big.NewInt(prime)
	out := make([]uint64, len(a))
	var t big.Int
	for i, v := range a {
		out[i] = t.Mod(v, m).Uint64()
	}
	return out
}

// remainderModular returns u mod v, trimmed; the leading coefficient of v is not 0. It changes u.
func remainderModular(u, v []uint64) []uint64 {
	inv := powModular(v[len(v)-1], prime-2)
	for k := len(u) - len(v); k >= 0; k-- {
		f := mulModular(u[k+len(v)-1], inv)
		for j, c := range v {
			d := mulModular(f, c)
			if u[k+j] < d {
				u[k+j] += prime
			}
			u[k+j] -= d
		}
	}
	n := len(v) - 1
	for n > 0 && u[n-1] == 0 {
		n--
	}
	return u[:n]
}

func mulModular(a, b uint64) uint64 {
	hi, lo := bits.Mul64(a, b)
	_, r := bits.Div64(hi, lo, prime) // hi < prime: both factors are below it
	return r
}

func powModular(a, n uint64) uint64 {
	r := uint64(1)
	for ; n > 0; n >>= 1 {
		if n&1 == 1 {
			r = mulModular(r, a)
		}
		a = mulModular(a, a)
	}
	return r
}
