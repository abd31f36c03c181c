package exact

import (
	"errors"
	"math/big"
)

// ErrSingularMap is a substitution that is no map: a·d = b·c.
var ErrSingularMap = errors.New("singular substitution: a·d = b·c")

// Moebius returns G((a·w + b)/(c·w + d)) as a function of w, factor by factor:
//
//	P(x) of degree m  →  Σ_k p_k·(a·w + b)^k·(c·w + d)^(m−k) / (c·w + d)^m
//
// The powers of (c·w + d) of all factors are collected into one, with exponent
// the relative degree of G. Hidden modes stay hidden modes. The error is ErrSingularMap.
func (r Ratio) Moebius(a, b, c, d *big.Rat) (Ratio, error) {
	det := new(big.Rat).Mul(a, d)
	if det.Cmp(new(big.Rat).Mul(b, c)) == 0 {
		return Ratio{}, ErrSingularMap
	}
	if r.IsZero() {
		return Const(new(big.Rat)), nil
	}
	up, down := NewPoly(b, a), NewPoly(d, c)
	out := Ratio{Gain: new(big.Rat).Set(r.Gain)}
	out = out.times(up, r.OriginZeros).times(up, -r.OriginPoles)
	for _, f := range r.Num {
		out = out.times(f.P.homogeneous(up, down), f.N)
	}
	for _, f := range r.Den {
		out = out.times(f.P.homogeneous(up, down), -f.N)
	}
	return out.times(down, r.RelativeDegree()), nil
}

// homogeneous returns Σ p_k·up^k·down^(m−k), m the degree of p.
func (p Poly) homogeneous(up, down Poly) Poly {
	p = p.trim()
	m := len(p) - 1
	var s Poly
	power := IntPoly(1) // down^(m−k)
	for k := m; k >= 0; k-- {
		s = s.Mul(up).Add(power.Scale(p[k]))
		power = power.Mul(down)
	}
	return s
}

// times returns r·p^n for n of either sign, p not zero.
func (r Ratio) times(p Poly, n int) Ratio {
	if n == 0 {
		return r
	}
	c, k, q := p.Origin()
	r.Gain = new(big.Rat).Mul(r.Gain, ratPow(c, n))
	if n > 0 {
		r.OriginZeros += k * n
		r.Num = addFactor(r.Num, q, n)
	} else {
		r.OriginPoles -= k * n
		r.Den = addFactor(r.Den, q, -n)
	}
	return r
}
