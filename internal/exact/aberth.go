package exact

import (
	"math"
	"math/big"
)

// maxWork bounds the search: rounds·degree² at 256 bits, some seconds. Ordinary polynomials that come
// here at all take a hundredth of it; only coefficients made for it exhaust it.
const maxWork = 5e5

// aberth finds all roots of p, simple ones, by the iteration
//
//	z_i ← z_i − N_i/(1 − N_i·Σ_{j≠i} 1/(z_i − z_j)),   N_i = p(z_i)/p′(z_i)
//
// (Ehrlich 1967, Aberth 1973; from memory) from start or, where that is nil, from points on the Newton
// polygon, with 256 bits and then twice as many until the inclusion discs prove every digit. It
// returns real roots (imaginary part 0) and those with positive imaginary part.
//
// A polynomial of degree m with coefficients of b bits separates its roots by at
// least 2^−(about m·(b + log2 m)) (Mahler, 1964; from memory), so this ends; ok is false when maxWork ends it first.
func (p Poly) aberth(start []bigC) (roots []bigC, ok bool) {
	z := append([]bigC(nil), start...)
	if start == nil {
		z = newtonPolygon(p.floats(256), 256)
	}
	work := 0.0
	for prec := uint(256); ; prec *= 2 {
		c := p.floats(prec)
		for i := range z {
			z[i] = z[i].at(prec)
		}
		// One unit is a round's cost for two points; below 1024 bits allocation is the most of it.
		unit := float64(len(z)*len(z)) * (1 + float64(prec*prec)/(1<<20))
		// Cubic convergence near simple roots, one bit and a half a round near
		// clusters, which matter as far as half the digits.
		for range 60 + 2*len(p) + int(prec) {
			if work += unit; work > maxWork {
				return nil, false
			}
			if aberthRound(c, z) {
				break
			}
		}
		if roots, ok = certify(c, z); ok {
			return roots, true
		}
	}
}

// floats rounds the coefficients to prec bits.
func (p Poly) floats(prec uint) []*big.Float {
	c := make([]*big.Float, len(p))
	for i, v := range p {
		c[i] = new(big.Float).SetPrec(prec).SetRat(v)
	}
	return c
}

// aberthRound moves every point once; true when every one has come to rest: its step is
// below 2^(40−prec) of its size, or its value is nothing but rounding.
func aberthRound(c []*big.Float, z []bigC) bool {
	done := true
	for i := range z {
		prec := z[i].prec()
		v, d := horner(c, z[i])
		if v.norm().Cmp(square(noise(c, z[i]))) <= 0 {
			continue
		}
		if d.isZero() {
			z[i] = z[i].mul(newC(prec, 1+1.0/256, 1.0/512))
			done = false
			continue
		}
		step := v.div(d)
		sum := newC(prec, 0, 0)
		for j := range z {
			if diff := z[i].sub(z[j]); j != i && !diff.isZero() {
				sum = sum.add(newC(prec, 1, 0).div(diff))
			}
		}
		if f := newC(prec, 1, 0).sub(step.mul(sum)); !f.isZero() {
			step = step.div(f)
		}
		z[i] = z[i].sub(step)
		if exponent(step) > exponent(z[i])+40-int(prec) {
			done = false
		}
	}
	return done
}

func square(x *big.Float) *big.Float { return new(big.Float).Mul(x, x) }

// noise bounds the rounding error of horner's value at z: each of the m steps
// rounds by less than 8·2^−prec of Σ|c_k||z|^k, and so do the coefficients.
func noise(c []*big.Float, z bigC) *big.Float {
	abs := new(big.Float).Abs(z.re)
	var t big.Float
	abs.Add(abs, t.Abs(z.im)) // at least |z|
	size := new(big.Float).SetPrec(64)
	for k := len(c) - 1; k >= 0; k-- {
		size.Mul(size, abs)
		size.Add(size, t.Abs(c[k]))
	}
	size.Mul(size, big.NewFloat(float64(8*len(c))))
	return size.SetMantExp(size, -int(z.prec()))
}

// exponent returns e with max(|re|, |im|) in [2^(e−1), 2^e); very low for 0.
func exponent(a bigC) int {
	e := math.MinInt32
	for _, x := range []*big.Float{a.re, a.im} {
		if x.Sign() != 0 {
			e = max(e, x.MantExp(nil))
		}
	}
	return e
}

// horner returns p(z) and p′(z).
func horner(c []*big.Float, z bigC) (v, d bigC) {
	v, d = newC(z.prec(), 0, 0), newC(z.prec(), 0, 0)
	for k := len(c) - 1; k >= 0; k-- {
		d = d.mul(z).add(v)
		v = v.mul(z)
		v.re.Add(v.re, c[k])
	}
	return v, d
}

// certify encloses the roots in discs about z_i of radius
//
//	r_i = m·|p(z_i)| / (|p_m|·Π_{j≠i} |z_i − z_j|),   m = deg p
//
// whose union holds all roots, a disc apart from the others exactly one (Smith,
// J. ACM 17, 1970; from memory). A disc that meets the real axis while discs eight times as
// large are disjoint holds a real root: the root and its conjugate are at most 4·r_i
// apart, and no other root is so near. The same holds for the imaginary axis when p is even,
// with −x̄ in place of x̄. These parts become exactly 0; ok tells that every other
// part is proved to 2^−108 of its own size.
func certify(c []*big.Float, z []bigC) (roots []bigC, ok bool) {
	radius := make([]*big.Float, len(z))
	for i := range z {
		radius[i] = inclusion(c, z, i)
		if radius[i] == nil || !apart(z, radius, i) {
			return nil, false
		}
	}
	even := isEven(c)
	count := 0
	for i, x := range z {
		r := new(big.Float).SetMantExp(radius[i], 108)
		re, im := x.re, x.im
		if new(big.Float).Abs(im).Cmp(radius[i]) <= 0 {
			im = new(big.Float)
		} else if new(big.Float).Abs(im).Cmp(r) < 0 {
			return nil, false
		}
		if even && new(big.Float).Abs(re).Cmp(radius[i]) <= 0 {
			re = new(big.Float)
		} else if new(big.Float).Abs(re).Cmp(r) < 0 {
			return nil, false
		}
		switch im.Sign() {
		case 0:
			roots = append(roots, bigC{re, im})
			count++
		case 1:
			roots = append(roots, bigC{re, im})
			count += 2
		}
	}
	return roots, count == len(z)
}

// apart tells whether disc i and the discs before it stay disjoint when eight times as large.
func apart(z []bigC, radius []*big.Float, i int) bool {
	for j := range i {
		sum := new(big.Float).Add(radius[i], radius[j])
		sum.SetMantExp(sum, 3)
		if sum.Mul(sum, sum).Cmp(z[i].sub(z[j]).norm()) >= 0 {
			return false
		}
	}
	return true
}

// isEven tells whether all odd coefficients are zero (exactly: rounding keeps zeros).
func isEven(c []*big.Float) bool {
	for k := 1; k < len(c); k += 2 {
		if c[k].Sign() != 0 {
			return false
		}
	}
	return true
}

// inclusion returns a bound of r_i that includes the rounding of p(z_i), nil when two points coincide.
func inclusion(c []*big.Float, z []bigC, i int) *big.Float {
	m := len(z)
	prec := z[i].prec()
	v, _ := horner(c, z[i])
	r := new(big.Float).Add(v.abs(), noise(c, z[i]))
	r.Mul(r, big.NewFloat(float64(m)))
	gaps := bigC{c[m], new(big.Float).SetPrec(prec)}
	for j := range z {
		if j != i {
			gaps = gaps.mul(z[i].sub(z[j]))
		}
	}
	if gaps.isZero() {
		return nil
	}
	return r.Quo(r, gaps.abs())
}

// newtonPolygon returns starting points: for each edge of the upper convex hull
// of (k, log2|c_k|) from k = i to k = j, j − i points on the circle of radius
// |c_i/c_j|^(1/(j−i)) (Bini, Numerical Algorithms 13, 1996; from memory).
func newtonPolygon(c []*big.Float, prec uint) []bigC {
	var hull []int
	log := make([]float64, len(c))
	for k, v := range c {
		if v.Sign() == 0 {
			continue
		}
		var mant big.Float
		e := v.MantExp(&mant)
		f, _ := mant.Float64()
		log[k] = float64(e) + math.Log2(math.Abs(f))
		for len(hull) > 1 {
			a, b := hull[len(hull)-2], hull[len(hull)-1]
			if (log[b]-log[a])*float64(k-a) > (log[k]-log[a])*float64(b-a) {
				break
			}
			hull = hull[:len(hull)-1]
		}
		hull = append(hull, k)
	}
	var z []bigC
	for n := 1; n < len(hull); n++ {
		i, j := hull[n-1], hull[n]
		whole, frac := math.Modf((log[i] - log[j]) / float64(j-i))
		for t := range j - i {
			// 0.7 and n turn the circles so that no point is real and no two are in line.
			angle := 2*math.Pi*float64(t)/float64(j-i) + 0.7 + float64(n)
			x := newC(prec, math.Exp2(frac)*math.Cos(angle), math.Exp2(frac)*math.Sin(angle))
			x.re.SetMantExp(x.re, int(whole))
			x.im.SetMantExp(x.im, int(whole))
			z = append(z, x)
		}
	}
	return z
}
