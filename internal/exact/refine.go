package exact

// common is one member of a coprime base with its power in two products.
type common struct {
	p    Poly
	a, b int
}

// refine returns pairwise coprime polynomials, each 1 at the origin, such that
//
//	Πa = Π p_i^(a_i),   Πb = Π p_i^(b_i)
//
// Factors are split only where they share a root, by greatest common divisors.
func refine(a, b []Factor) []common {
	var base []common
	for _, f := range a {
		base = insert(base, common{f.P, f.N, 0})
	}
	for _, f := range b {
		base = insert(base, common{f.P, 0, f.N})
	}
	return base
}

// insert adds c to a coprime base. Each split lowers the sum of the degrees of
// what is still to be inserted or in the base, so the recursion ends.
func insert(base []common, c common) []common {
	if c.p.Degree() < 1 {
		return base
	}
	for i, m := range base {
		if m.p.Equal(c.p) {
			base[i].a += c.a
			base[i].b += c.b
			return base
		}
		g := m.p.GCD(c.p)
		if g.Degree() < 1 {
			continue
		}
		_, _, g = g.Origin()
		rest, _ := m.p.DivMod(g)
		other, _ := c.p.DivMod(g)
		base = append(base[:i:i], base[i+1:]...)
		base = insert(base, common{g, m.a + c.a, m.b + c.b})
		base = insert(base, common{rest, m.a, m.b})
		return insert(base, common{other, c.a, c.b})
	}
	return append(base, c)
}

// Hidden returns the greatest common divisor of numerator and denominator, the
// origin included: the modes that the function has as a system but not as a
// function. Degree 0 (the constant 1) when there are none. Its first non-zero
// coefficient is 1.
func (r Ratio) Hidden() Poly {
	out := IntPoly(1).Shift(min(r.OriginZeros, r.OriginPoles))
	for _, m := range refine(r.Num, r.Den) {
		out = out.Mul(m.p.Pow(min(m.a, m.b)))
	}
	return out
}

// Reduced returns r without its hidden modes.
func (r Ratio) Reduced() Ratio {
	k := min(r.OriginZeros, r.OriginPoles)
	out := Ratio{Gain: r.Gain, OriginZeros: r.OriginZeros - k, OriginPoles: r.OriginPoles - k}
	base := refine(r.Num, r.Den)
	shared := false
	for _, m := range base {
		shared = shared || min(m.a, m.b) > 0
	}
	if !shared {
		out.Num, out.Den = r.Num, r.Den
		return out
	}
	for _, m := range base {
		if k := m.a - m.b; k > 0 {
			out.Num = addFactor(out.Num, m.p, k)
		} else {
			out.Den = addFactor(out.Den, m.p, -k)
		}
	}
	return out
}
