package exact

import (
	"math"
	"math/big"

	"steadytick/internal/dd"
	"steadytick/internal/poly"
)

// polished takes the roots of the rounded polynomial, in double-double, and
// makes them roots of p by Newton steps on the exact coefficients at prec bits. It
// is the quick way for ordinary polynomials. When the proof fails, ok is false and the points are
// left as a start for the slow way (nil when there are none).
func (p Poly) polished(prec uint) (roots, points []bigC, ok bool) {
	start, e := p.doubleRoots()
	if start == nil {
		return nil, nil, false
	}
	c := p.floats(prec)
	z := make([]bigC, len(start))
	points = make([]bigC, len(start))
	for i, x := range start {
		z[i] = fromDD(x, prec, e)
		// 2^−40 of the size aside in directions that differ, so that no pair of points
		// is bound to stay conjugate on its way to two real roots.
		sin, cos := math.Sincos(float64(i))
		points[i] = z[i].mul(newC(prec, 1+0x1p-40*cos, 0x1p-40*sin))
	}
	// Newton doubles the digits: from about 16 at worst after double-double on
	// clustered roots to 64 in two steps; the third is for worse clusters.
	for i := range z {
		if i > 0 && start[i] == start[i-1].Conj() && start[i].Im.Sign() != 0 {
			z[i] = bigC{z[i-1].re, new(big.Float).Neg(z[i-1].im)}
			continue
		}
		for range 3 {
			v, d := horner(c, z[i])
			if d.isZero() {
				return nil, points, false
			}
			z[i] = z[i].sub(v.div(d))
		}
	}
	roots, ok = certify(c, z)
	return roots, points, ok
}

// doubleRoots returns double-double roots of p(2^e·w) in w, nil when there are none
// to be had. With 2^e near the geometric mean of the roots, the coefficients of
// small time constants do not underflow.
func (p Poly) doubleRoots() (x []dd.Complex, e int) {
	c := p.floats(256)
	m := len(c) - 1
	e = -int(math.Round(float64(c[m].MantExp(nil)) / float64(m)))
	scaled := make(poly.Poly, len(c))
	for k, v := range c {
		var ok bool
		scaled[k], ok = toDD(new(big.Float).SetMantExp(v, k*e))
		if !ok && k == m {
			return nil, 0 // elsewhere, one that underflows next to a leading coefficient near 1 counts as 0
		}
	}
	x, err := scaled.Roots()
	if err != nil || len(x) != m {
		return nil, 0
	}
	for _, z := range x {
		if !z.IsFinite() || z.IsZero() {
			return nil, 0
		}
	}
	return x, e
}

// fromDD returns x·2^e.
func fromDD(x dd.Complex, prec uint, e int) bigC {
	part := func(a dd.Float) *big.Float {
		f := new(big.Float).SetPrec(prec).SetFloat64(a.Hi)
		f.Add(f, new(big.Float).SetFloat64(a.Lo))
		return f.SetMantExp(f, e)
	}
	return bigC{part(x.Re), part(x.Im)}
}
