package exact

import "math/big"

// Laurent returns the first n terms (n >= 1) of the expansion about the origin,
//
//	G(x) = Σ_{k<n} c[k]·x^(start+k) + …,   c[0] ≠ 0
//
// The zero function gives start 0 and zeros.
func (r Ratio) Laurent(n int) (start int, c []*big.Rat) {
	s := newLen(n)
	if r.IsZero() || n < 1 {
		return 0, s
	}
	s[0].Set(r.Gain)
	for _, f := range r.Num {
		for range f.N {
			s = seriesMul(s, f.P)
		}
	}
	for _, f := range r.Den {
		for range f.N {
			s = seriesDiv(s, f.P)
		}
	}
	return r.OriginZeros - r.OriginPoles, s
}

// seriesMul returns s·p truncated to the length of s.
func seriesMul(s, p Poly) Poly {
	out := newLen(len(s))
	var t big.Rat
	for i := range s {
		for j := 0; j <= i && j < len(p); j++ {
			out[i].Add(out[i], t.Mul(p[j], s[i-j]))
		}
	}
	return out
}

// seriesDiv returns s/p truncated to the length of s; p(0) = 1.
func seriesDiv(s, p Poly) Poly {
	out := newLen(len(s))
	var t big.Rat
	for i := range s {
		out[i].Set(s[i])
		for j := 1; j <= i && j < len(p); j++ {
			out[i].Sub(out[i], t.Mul(p[j], out[i-j]))
		}
	}
	return out
}
