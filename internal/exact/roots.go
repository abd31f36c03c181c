package exact

import (
	"errors"
	"fmt"
	"math/big"

	"steadytick/internal/dd"
)

// ErrRange says that a pole, zero or coefficient is outside the range of
// double precision (about 1e-308 to 1e308).
var ErrRange = errors.New("a number of the model is outside the range of double precision")

// ErrRoots says that the roots could not be told apart at the highest
// precision. It takes coefficients of thousands of digits, or made for it.
var ErrRoots = errors.New("roots of a polynomial cannot be told apart")

// Poles returns the poles outside the origin, hidden ones included, each as often
// as its multiplicity and then as bitwise equal values. Complex poles come as
// neighbours p, p̄ that are exact conjugates, the one with positive imaginary part
// first. Real and imaginary part each are those of the exact pole to 106 bits; a part
// that is zero is exactly zero, so a pole on the imaginary axis is told from one beside it.
// Hidden poles are bitwise equal to the zeros they meet.
func (r Ratio) Poles() ([]dd.Complex, error) {
	return r.rootsOf(func(c common) int { return c.b })
}

// Zeros returns the finite zeros outside the origin, as Poles does.
func (r Ratio) Zeros() ([]dd.Complex, error) {
	return r.rootsOf(func(c common) int { return c.a })
}

func (r Ratio) rootsOf(power func(common) int) ([]dd.Complex, error) {
	var out []dd.Complex
	for _, c := range refine(r.Num, r.Den) {
		n := power(c)
		if n == 0 {
			continue
		}
		for _, f := range c.p.SquareFree() {
			x, err := f.P.simpleRoots()
			if err != nil {
				return nil, err
			}
			for range n * f.N {
				out = append(out, x...)
			}
		}
	}
	return out, nil
}

// simpleRoots returns the roots of p, which has simple roots only and p(0) = 1.
// Roots whose negative is a root too are split off first, so that a real part that is zero can be
// proved to be zero (certify): roots on the imaginary axis are among them.
func (p Poly) simpleRoots() ([]dd.Complex, error) {
	if p.Degree() < 3 {
		return p.isolate()
	}
	_, _, even := p.GCD(p.mirror()).Origin()
	if d := even.Degree(); d == 0 || d == p.Degree() {
		return p.isolate()
	}
	rest, _ := p.DivMod(even)
	a, err := even.isolate()
	if err != nil {
		return nil, err
	}
	b, err := rest.isolate()
	return append(a, b...), err
}

// mirror returns p(−x).
func (p Poly) mirror() Poly {
	out := NewPoly(p...)
	for k := 1; k < len(out); k += 2 {
		out[k].Neg(out[k])
	}
	return out
}

// isolate is simpleRoots for p that is even or has no root in common with p(−x).
func (p Poly) isolate() ([]dd.Complex, error) {
	switch p.Degree() {
	case 1:
		x := new(big.Rat).Inv(p[1])
		return roundRoots([]bigC{{toFloat(x.Neg(x)), new(big.Float)}})
	case 2:
		return roundRoots(p.quadratic())
	}
	x, start, ok := p.polished(256)
	if !ok {
		x, ok = p.aberth(start)
	}
	if ok {
		return roundRoots(x)
	}
	return nil, fmt.Errorf("%w: degree %d", ErrRoots, p.Degree())
}

// toFloat rounds to 256 bits.
func toFloat(x *big.Rat) *big.Float { return new(big.Float).SetPrec(256).SetRat(x) }

// quadratic returns the roots of 1 + p1·x + p2·x²; the discriminant is exact.
func (p Poly) quadratic() []bigC {
	disc := new(big.Rat).Mul(p[1], p[1])
	disc.Sub(disc, new(big.Rat).Mul(big.NewRat(4, 1), p[2]))
	p1, p2 := toFloat(p[1]), toFloat(p[2])
	root := toFloat(new(big.Rat).Abs(disc))
	root.Sqrt(root)
	half := big.NewFloat(-0.5)
	if disc.Sign() < 0 {
		re := new(big.Float).Mul(p1, half)
		im := new(big.Float).Mul(root, half)
		re.Quo(re, p2)
		im.Quo(im, p2)
		return []bigC{{re, im.Abs(im)}}
	}
	if p1.Sign() < 0 {
		root.Neg(root)
	}
	q := new(big.Float).Add(p1, root)
	q.Mul(q, half)
	one := new(big.Float).SetPrec(256).SetInt64(1)
	zero := new(big.Float)
	return []bigC{{new(big.Float).Quo(q, p2), zero}, {one.Quo(one, q), zero}}
}

// roundRoots rounds real roots and those of positive imaginary part to
// double-double, and adds the conjugates.
func roundRoots(x []bigC) ([]dd.Complex, error) {
	var out []dd.Complex
	for _, z := range x {
		re, ok1 := toDD(z.re)
		im, ok2 := toDD(z.im)
		if !ok1 || !ok2 {
			return nil, ErrRange
		}
		c := dd.Complex{Re: re, Im: im}
		out = append(out, c)
		if im.Sign() != 0 {
			out = append(out, c.Conj())
		}
	}
	return out, nil
}
