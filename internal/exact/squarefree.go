package exact

import "math/big"

// SquareFree splits p into factors without multiple roots (Yun, "On square-free
// decomposition algorithms", 1976; from memory):
//
//	p = c · x^k · ΠP_i^(N_i),  the P_i pairwise coprime with simple roots, N_i rising
//
// The constant and the power of x are left out (see Origin). The zero
// polynomial and constants give no factors.
func (p Poly) SquareFree() []Factor {
	_, _, f := p.Origin()
	if f.Degree() < 1 {
		return nil
	}
	d := f.Derivative()
	a := f.GCD(d)
	if a.Degree() == 0 {
		return []Factor{{P: f, N: 1}}
	}
	b, _ := f.DivMod(a)
	c, _ := d.DivMod(a)
	e := c.Sub(b.Derivative())
	var out []Factor
	for n := 1; b.Degree() > 0; n++ {
		a = b.GCD(e)
		if a.Degree() > 0 {
			_, _, q := a.Origin()
			out = append(out, Factor{P: q, N: n})
		}
		b, _ = b.DivMod(a)
		c, _ = e.DivMod(a)
		e = c.Sub(b.Derivative())
	}
	return out
}

// ratPow returns a^n; a must not be 0 when n is negative.
func ratPow(a *big.Rat, n int) *big.Rat {
	m := big.NewInt(int64(n))
	m.Abs(m)
	out := new(big.Rat).SetFrac(new(big.Int).Exp(a.Num(), m, nil), new(big.Int).Exp(a.Denom(), m, nil))
	if n < 0 {
		out.Inv(out)
	}
	return out
}
