package dd

import "math"

// Pi is the circle constant; HalfPi is half of it.
var (
	Pi     = Float{0x1.921fb54442d18p+1, 0x1.1a62633145c07p-53}
	HalfPi = Float{0x1.921fb54442d18p+0, 0x1.1a62633145c07p-54}
)

// halfPi is π/2 in four words, 212 bits (mpmath, as for ln 2).
var halfPi = [4]float64{
	0x1.921fb54442d18p+0, 0x1.1a62633145c07p-54, -0x1.f1976b7ed8fbcp-110, 0x1.4cf98e804177dp-164,
}

// SinCos returns sine and cosine of x in radians; NaN for an infinite x.
//
// Each is within 2^-98 relative for |x| <= 2^50 unless x lies within
// |x|·2^-53 of a zero of the function; there the absolute error is within
// |x|·2^-157. Above 2^50 the reduction uses as many bits of π as x needs.
func SinCos(x Float) (s, c Float) {
	if overflowed(x.Hi) {
		return New(math.NaN()), New(math.NaN())
	}
	r, quarter := reduce(x)
	s, c = sinSmall(r), cosSmall(r)
	switch quarter {
	case 1:
		return c, s.Neg()
	case 2:
		return s.Neg(), c.Neg()
	case 3:
		return c.Neg(), s
	}
	return s, c
}

// reduce splits x = k·π/2 + r with |r| <= π/4 (a little more where x.Hi·2/π is
// rounded the other way) and returns r and k mod 4.
//
// k is a whole number below 2^51, its products with the words of π/2 are exact
// as pairs. A difference is rounded to 3u² of itself, and after the first one it
// is at most |r| + k·2^-54.
func reduce(x Float) (r Float, quarter int) {
	if math.Abs(x.Hi) > 0x1p50 {
		return reduceBig(x)
	}
	k := math.RoundToEven(x.Hi / halfPi[0])
	if k == 0 {
		return x, 0
	}
	r = x
	for _, w := range halfPi {
		p, e := twoProd(k, w)
		r = r.Sub(Float{p, e})
	}
	return r, int(int64(k) & 3)
}

// sinSmall is Taylor's series for |r| <= 0.8: the first term left out, r^29/29!,
// is below 2^-112 of the sum.
func sinSmall(r Float) Float {
	q := r.Mul(r)
	s := inverseFactorial[27].Neg()
	for n := 25; n >= 3; n -= 2 {
		c := inverseFactorial[n]
		if n%4 == 3 {
			c = c.Neg()
		}
		s = s.Mul(q).Add(c)
	}
	return r.Add(r.Mul(q.Mul(s)))
}

// cosSmall is Taylor's series for |r| <= 0.8: the first term left out, r^28/28!,
// is below 2^-106; the sum is at least 0.69.
func cosSmall(r Float) Float {
	q := r.Mul(r)
	s := inverseFactorial[26].Neg()
	for n := 24; n >= 2; n -= 2 {
		c := inverseFactorial[n]
		if n%4 == 2 {
			c = c.Neg()
		}
		s = s.Mul(q).Add(c)
	}
	return One.Add(q.Mul(s))
}
