package dd

import "math"

// CLog returns log z = log|z| + j·arg z, arg in (−π, π]; log 0 is −Inf.
// The error is within 2^-97 of |log z|, and of each part apart unless z lies
// close to the unit circle: there log|z| is within 2^-102 absolute.
func CLog(z Complex) Complex {
	return Complex{logAbs(z), Atan2(z.Im, z.Re)}
}

// logAbs is log|z|. Between 1/2 and 2 (larger part m) it is
//
//	½·log1p((m−1)(m+1) + n²)
//
// and beyond that k·ln 2 + ½·log(m² + n²) with 1/2 <= m < 1 after scaling, where
// the two terms cancel by a factor of 3 at most.
func logAbs(z Complex) Float {
	m, n := z.Re.Abs(), z.Im.Abs()
	if m.Cmp(n) < 0 {
		m, n = n, m
	}
	if m.Hi == 0 || overflowed(m.Hi) || overflowed(n.Hi) {
		return New(math.Log(math.Hypot(z.Re.Hi, z.Im.Hi)))
	}
	if m.Hi >= 0.5 && m.Hi < 2 {
		t := m.Sub(One).Mul(m.Add(One)).Add(n.Mul(n))
		return Log1p(t).Ldexp(-1)
	}
	_, k := math.Frexp(m.Hi)
	m, n = m.Ldexp(-k), n.Ldexp(-k)
	l := Log(m.Mul(m).Add(n.Mul(n))).Ldexp(-1)
	return l.Add(Ln2.MulFloat(float64(k)))
}

// CLog1p returns log(1 + w), w = u + jv, for |w| below 1/2 by
//
//	Re = ½·log1p(2u + u² + v²),  Im = atan2(v, 1 + u)
//
// The real part is within 2^-98·(|u| + v²): full accuracy for small w, and
// digits lost only where |1 + w| passes through 1, near u = −v²/2.
func CLog1p(w Complex) Complex {
	if !(w.Abs() < 0.5) {
		return CLog(Complex{One.Add(w.Re), w.Im})
	}
	t := w.Re.Mul(Two.Add(w.Re)).Add(w.Im.Mul(w.Im))
	return Complex{Log1p(t).Ldexp(-1), Atan2(w.Im, One.Add(w.Re))}
}
