package discretize

import (
	"cmp"
	"math"
	"math/big"
	"slices"

	"steadytick/internal/dd"
	"steadytick/internal/poly"
	"steadytick/sdomain"
)

const (
	maxGrowth = 600              // e^600 ≈ 1e260 leaves room for the other factors below 1e308
	maxPT     = float64(1 << 40) // |p|·T: phases are then still good to 2^-104+40 ≈ 1e-19
	minPT     = 1e-280           // below it e^{pT} − 1 underflows
	maxGain   = 1e290            // and 1/maxGain: both words of a double-double hold digits
	maxOrder  = 120              // nodes of an expTable less the two of the input
)

// Plant is a continuous model prepared for hold equivalents at many periods: its
// poles, and its numerator in Newton form over them,
//
//	G(s) = feed + Σ_k c_k / Π_{i<=k} (s − λ_i),   k = 0 … N−1
//
// which is a cascade of first-order sections x_k' = λ_k·x_k + x_(k−1), x_(−1) = u,
// y = feed·u + Σ c_k x_k. The poles run from the fastest to the slowest, origin
// last, conjugates side by side; so the c_k of the slow end come first out of the
// numerator, and those of the origin are its own coefficients, exactly.
// Integrators cancelled by zeros at the origin are left out here and counted in hidden.
type Plant struct {
	lambda []dd.Complex
	c      []dd.Complex
	feed   dd.Float
	num    int // poles off the origin; they come first in lambda

	start  int // G ≈ gain·s^start about s = 0
	gain   dd.Float
	hidden int // zeros at the origin that meet poles at the origin
	zero   bool

	delay *big.Rat // the model's own dead time, s
}

// Prepare finds the poles of m and its Newton form. Errors: *ImproperError,
// *RangeError (order), or what the root finder reports.
func Prepare(m sdomain.Model) (*Plant, error) {
	p := &Plant{delay: new(big.Rat)}
	if m.Delay != nil {
		p.delay.Set(m.Delay)
	}
	r := m.Ratio
	if r.IsZero() {
		p.zero = true
		return p, nil
	}
	if rel := r.RelativeDegree(); rel < 0 {
		return nil, &ImproperError{Method: "hold", Excess: -rel}
	}
	if n := r.Order(); n > maxOrder {
		return nil, &RangeError{"the order of the model", float64(n), maxOrder}
	}
	poles, err := r.Poles()
	if err != nil {
		return nil, err
	}
	p.hidden = min(r.OriginZeros, r.OriginPoles)
	p.lambda, p.num = sortPoles(poles), len(poles)
	p.lambda = append(p.lambda, make([]dd.Complex, r.OriginPoles-p.hidden)...)
	num, den := r.NumPoly(), r.DenPoly()
	lead := den[len(den)-1]
	a := make([]dd.Complex, 0, len(num))
	for _, c := range num[p.hidden:] {
		a = append(a, dd.Real(dd.FromRat(new(big.Rat).Quo(c, lead))))
	}
	p.newton(a)
	start, c := r.Laurent(1)
	p.start, p.gain = start, dd.FromRat(c[0])
	if g := math.Abs(p.gain.Hi); !(g >= 1/maxGain && g <= maxGain) {
		return nil, &RangeError{"the leading coefficient of the model at s = 0", g, maxGain}
	}
	return p, nil
}

// newton divides the numerator a (ascending, overwritten) by (s − λ) from the last
// pole to the first; the remainders are the c_k, what is left at the end is feed.
func (p *Plant) newton(a []dd.Complex) {
	p.c = make([]dd.Complex, len(p.lambda))
	for k := len(p.lambda) - 1; k >= 0 && len(a) > 0; k-- {
		r := a[len(a)-1]
		for i := len(a) - 2; i >= 0; i-- {
			a[i+1], r = r, mulNode(r, p.lambda[k]).Add(a[i])
		}
		p.c[k] = r
		a = a[1:]
	}
	if len(a) > 0 {
		p.feed = a[0].Re
	}
}

// sortPoles orders conjugate-closed poles by falling magnitude, equal ones and
// conjugates side by side, the upper one of a pair first.
func sortPoles(poles []dd.Complex) []dd.Complex {
	upper := make([]dd.Complex, 0, len(poles))
	for _, v := range poles {
		if v.Im.Sign() >= 0 {
			upper = append(upper, v)
		}
	}
	slices.SortStableFunc(upper, func(a, b dd.Complex) int {
		return cmp.Or(cmp.Compare(b.Abs(), a.Abs()), a.Re.Cmp(b.Re), a.Im.Cmp(b.Im))
	})
	out := make([]dd.Complex, 0, len(poles)+2)
	for _, v := range upper {
		out = append(out, v)
		if v.Im.Sign() > 0 {
			out = append(out, v.Conj())
		}
	}
	return out
}

// check reports poles for which this period is too long or too short.
func (p *Plant) check(T dd.Float) error { return checkRoots("pole", p.lambda[:p.num], T) }

// checkRoots does the same for any roots off the origin; what is "pole" or "zero".
func checkRoots(what string, roots []dd.Complex, T dd.Float) error {
	t, growth := T.Float64(), 0.0
	for _, v := range roots {
		growth += math.Max(0, v.Re.Float64()*t)
		switch a := v.Abs() * t; {
		case !(a <= maxPT):
			return &RangeError{"the magnitude of a " + what + " times the period", a, maxPT}
		case a < minPT:
			return &RangeError{"the magnitude of a " + what + " times the period", a, minPT}
		}
	}
	if !(growth <= maxGrowth) {
		return &GrowthError{what, growth}
	}
	return nil
}

// deltaPoles returns (e^{λT} − 1)/T, without subtraction; zero stays zero, equal
// and conjugate poles stay so bitwise.
func (p *Plant) deltaPoles(T dd.Float) []dd.Complex {
	d := make([]dd.Complex, len(p.lambda))
	for i, v := range p.lambda[:p.num] {
		switch {
		case i > 0 && v == p.lambda[i-1]:
			d[i] = d[i-1]
		case i > 0 && v == p.lambda[i-1].Conj():
			d[i] = d[i-1].Conj()
		default:
			d[i] = deltaOf(v, T)
		}
	}
	return d
}

// deltaOf maps one point: δ = (e^{sT} − 1)/T.
func deltaOf(s dd.Complex, T dd.Float) dd.Complex {
	e := dd.CExpm1(s.Scale(T))
	return dd.Complex{Re: e.Re.Div(T), Im: e.Im.Div(T)}
}

// realPart drops the imaginary parts, which are rounding errors: the polynomial
// is real because its roots and weights are closed under conjugation.
func realPart(a []dd.Complex) poly.Poly {
	out := make(poly.Poly, len(a))
	for i, v := range a {
		out[i] = v.Re
	}
	return out.Trim()
}

// negProduct returns Π(−d_i), real for a conjugate-closed list.
func negProduct(d []dd.Complex) dd.Float {
	q := dd.Complex{Re: dd.One}
	for _, v := range d {
		q = q.Mul(v.Neg())
	}
	return q.Re
}
