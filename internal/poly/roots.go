package poly

import (
	"errors"
	"fmt"
	"math"
	"sort"

	"steadytick/internal/dd"
)

// ErrZeroPolynomial says that every number is a root.
var ErrZeroPolynomial = errors.New("the zero polynomial has no set of roots")

// RangeError says that a coefficient or a root is not a finite float64 number, or
// that the roots span more than 2^1800.
type RangeError struct {
	What  string // "coefficient" or "root"
	Index int
}

func (e *RangeError) Error() string {
	return fmt.Sprintf("%s %d is outside the range of the arithmetic", e.What, e.Index)
}

// AsymmetryError says that the approximations found, each good by itself, cannot
// be the roots of a real polynomial: a root was found twice and another one not at all.
type AsymmetryError struct {
	Moved float64 // how far a root would have to move to its conjugate, in error radii
}

func (e *AsymmetryError) Error() string {
	return fmt.Sprintf("the roots found are not symmetric: off by %.3g times their error radius", e.Moved)
}

// Roots returns all roots, as many as the degree, in ascending modulus, the two
// of a conjugate pair together with the positive imaginary part first. Pairs are
// bitwise conjugate, real roots have an imaginary part of exactly zero, and low-order
// coefficients that are exactly zero give exact zero roots.
//
// The relative error of a simple root is within 7(n+1)·dd.Eps·κ, n the degree, to first order in
//
//	κ = Σ|p_k||x|^k/(|x||p'(x)|)
//
// its condition number: the iteration stops at |p(x)| within twice the bound of
// the rounding errors, which is at most 3.5(n+1)·Eps·Σ|p_k||x|^k (see horner.double).
// An m-fold root comes as a cluster with a radius of about 2^(-100/m): 1e-15 for a
// double, 1e-10 for a triple root, 1e-3 for an eightfold one. Two close real roots inside
// that radius may come as a conjugate pair and the other way round (see pair).
//
// Errors: ErrZeroPolynomial, *RangeError, *ConvergenceError, *AsymmetryError.
func (p Poly) Roots() ([]dd.Complex, error) {
	for i, c := range p {
		if !c.IsFinite() {
			return nil, &RangeError{"coefficient", i}
		}
	}
	p = p.Trim()
	if len(p) == 0 {
		return nil, ErrZeroPolynomial
	}
	low := 0
	for p[low].Sign() == 0 {
		low++
	}
	x, err := nonzeroRoots(p[low:])
	if err != nil {
		return nil, err
	}
	for i, r := range x {
		if !r.IsFinite() || r.IsZero() {
			return nil, &RangeError{"root", i}
		}
	}
	return append(make([]dd.Complex, low), order(x)...), nil
}

// nonzeroRoots is Roots for p with p[0] ≠ 0 and a non-zero leading coefficient,
// pairs side by side but not in order. A root out of range is Inf or zero.
func nonzeroRoots(p Poly) ([]dd.Complex, error) {
	switch len(p) {
	case 1:
		return nil, nil
	case 2:
		return []dd.Complex{dd.Real(p[0].Neg().Div(p[1]))}, nil
	case 3:
		return quadratic(p), nil
	}
	edges := hull(p, 0)
	first, last := radius(edges[0], edges[1]), radius(edges[len(edges)-2], edges[len(edges)-1])
	if !(last-first < 1800) {
		return nil, &RangeError{"root", 0} // low words would underflow, see the package dd
	}
	// The middle of the range; 0.44, since whole and half logarithms are common,
	// and their rounding must not decide: p(2^k·x) is to have the same roots, bit for bit.
	h := newHorner(p, int(math.Floor((first+last)/2+0.44)))
	s := newSweeper(circles(hull(p, h.shift)))
	// In float64 first: its end, good or bad, is only a better start.
	s.run(singleSweeps, h.step(s, h.single))
	clear(s.done)
	if !s.run(doubleSweeps, h.step(s, h.double)) {
		return nil, s.failure(doubleSweeps)
	}
	h.settle(s)
	h.polish(s)
	x, moved := pair(s.x, h.discs(s))
	if !(moved <= 1) {
		return nil, &AsymmetryError{moved}
	}
	for i := range x {
		x[i] = x[i].Ldexp(h.shift)
	}
	return x, nil
}

// polish applies one more correction where it makes the value smaller. The
// stopping bound overrates the rounding errors, for an ill-conditioned root by a few
// digits, which this step gains.
func (h *horner) polish(s *sweeper) {
	for i, x := range s.x {
		if x.IsZero() || !x.IsFinite() {
			continue
		}
		v := h.double(x)
		s.move(i, v.p/v.dp, v.e)
		if y := s.x[i]; y.IsZero() || !y.IsFinite() || !(h.double(y).noise() < v.noise()) {
			s.x[i] = x
		}
	}
}

// step is the Newton correction by an evaluator, done where the value vanishes in
// its rounding errors.
func (h *horner) step(s *sweeper, eval func(dd.Complex) sample) func(int) (complex128, int, bool) {
	return func(i int) (complex128, int, bool) {
		if s.x[i].IsZero() || !s.x[i].IsFinite() {
			return 0, 0, true // left to the range check of Roots
		}
		v := eval(s.x[i])
		return v.p / v.dp, v.e, v.atRoot()
	}
}

// quadratic solves c + b·x + a·x² = 0, after x = 2^e·y with |c| and |a| alike,
//
//	q = −(b + sign(b)·√(b² − 4ac))/2,  x1 = q/a,  x2 = c/q
//
// so that no difference but the discriminant cancels. A double root with
// coefficients of up to 53 bits is exact.
func quadratic(p Poly) []dd.Complex {
	_, ec := math.Frexp(p[0].Hi)
	_, ea := math.Frexp(p[2].Hi)
	e := (ec - ea) / 2
	c := newHorner(p, 0).view(e).c
	half := c[1].Ldexp(-1)
	disc := half.Mul(half).Sub(c[0].Mul(c[2]))
	if disc.Sign() < 0 {
		re, im := half.Neg().Div(c[2]), disc.Neg().Sqrt().Div(c[2]).Abs()
		return []dd.Complex{
			dd.Complex{Re: re, Im: im}.Ldexp(e),
			dd.Complex{Re: re, Im: im.Neg()}.Ldexp(e),
		}
	}
	root := disc.Sqrt()
	if half.Sign() > 0 {
		root = root.Neg()
	}
	q := root.Sub(half)
	return []dd.Complex{
		dd.Real(q.Div(c[2]).Ldexp(e)),
		dd.Real(c[0].Div(q).Ldexp(e)),
	}
}

// order sorts by modulus, the pairs kept together: pair leaves them side by side.
func order(x []dd.Complex) []dd.Complex {
	type group struct {
		size float64
		x    []dd.Complex
	}
	var groups []group
	for i := 0; i < len(x); {
		n := 1
		if x[i].Im.Sign() != 0 {
			n = 2
		}
		groups = append(groups, group{x[i].Abs(), x[i : i+n]})
		i += n
	}
	sort.SliceStable(groups, func(i, j int) bool {
		a, b := groups[i], groups[j]
		if a.size != b.size {
			return a.size < b.size
		}
		return a.x[0].Re.Cmp(b.x[0].Re) < 0
	})
	out := make([]dd.Complex, 0, len(x))
	for _, g := range groups {
		out = append(out, g.x...)
	}
	return out
}
