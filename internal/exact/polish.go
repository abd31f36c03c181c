package exact

import (
	"math"
	"math/big"

	"steadytick/internal/dd"
	"steadytick/internal/poly"
)

// polished takes the roots of the rounded polynomial, in double-double, and
// makes them roots of p by Newton steps on the exact coefficients at prec bits. It
// is the quick way for ordinary polynomials; ok is false when the proof fails, and
// then nothing is lost but time.
//
// Rounding works on p(2^e·w), with 2^e near the geometric mean of the roots, so that
// coefficients of small time constants do not underflow.
func (p Poly) polished(prec uint) (roots []bigC, ok bool) {
	c := p.floats(prec)
	m := len(c) - 1
	e := -int(math.Round(float64(c[m].MantExp(nil)) / float64(m)))
	scaled := make(poly.Poly, len(c))
	for k, v := range c {
		x, ok := toDD(new(big.Float).SetMantExp(v, k*e))
		if !ok && k == m {
			return nil, false
		}
		scaled[k] = x // one that underflows next to a leading coefficient near 1 counts as 0
	}
	start, err := scaled.Roots()
	if err != nil || len(start) != m {
		return nil, false
	}
	z := make([]bigC, m)
	for i, x := range start {
		if !x.IsFinite() || x.IsZero() {
			return nil, false
		}
		z[i] = fromDD(x, prec, e)
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
				return nil, false
			}
			z[i] = z[i].sub(v.div(d))
		}
	}
	return certify(c, z)
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
