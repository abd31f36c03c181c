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
	n, _ := Poly{b, a, d, c}.integers() // a common factor of all four changes nothing
	up, down := intPair(n[0], n[1]), intPair(n[2], n[3])
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

func intPair(c0, c1 *big.Int) Poly {
	return NewPoly(new(big.Rat).SetInt(c0), new(big.Rat).SetInt(c1))
}

// homogeneous returns Σ p_k·up^k·down^(m−k), m the degree of p; up and down have
// integer coefficients and degree at most 1. All steps are in integers, over one denominator.
func (p Poly) homogeneous(up, down Poly) Poly {
	a, den := p.trim().integers()
	u, _ := up.integers()
	v, _ := down.integers()
	var s []*big.Int
	power := []*big.Int{big.NewInt(1)} // down^(m−k)
	for k := len(a) - 1; k >= 0; k-- {
		s = mulLinear(s, u)
		for len(s) < len(power) {
			s = append(s, new(big.Int))
		}
		for i, c := range power {
			s[i].Add(s[i], new(big.Int).Mul(c, a[k]))
		}
		power = mulLinear(power, v)
	}
	out := make(Poly, len(s))
	for i, c := range s {
		out[i] = new(big.Rat).SetFrac(c, den)
	}
	return out.trim()
}

// mulLinear returns a·b for b of one or two coefficients.
func mulLinear(a, b []*big.Int) []*big.Int {
	out := make([]*big.Int, len(a)+len(b)-1)
	for i := range out {
		out[i] = new(big.Int)
	}
	var t big.Int
	for i, c := range a {
		for j, d := range b {
			out[i+j].Add(out[i+j], t.Mul(c, d))
		}
	}
	return out
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
