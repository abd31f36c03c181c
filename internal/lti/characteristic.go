package lti

import (
	"math"

	"steadytick/internal/dd"
	"steadytick/internal/poly"
)

// characteristic is the function whose roots are the closed-loop poles,
//
//	F(x) = x^op·Π(x − p)·z^ticks + x^oz·Num(x)          z = 1 + xT
//	F(s) = s^op·Π(s − p)·e^(s·dead) + s^oz·Num(s)
//
// without the factor x^min(op, oz) of hidden modes at the origin. It is evaluated
// by its factors: expanded coefficients only give starting points. x, T and the dead
// time are in units of 2^scale as in plane.
type characteristic struct {
	num          poly.Poly
	poles        []dd.Complex
	oz, op       int
	hidden       int // min(op, oz)
	period, dead dd.Float
	ticks        int
	scale        int
}

// newCharacteristic scales g by 2^k rad/s.
func newCharacteristic(g TF, k int) characteristic {
	c := characteristic{
		poles: ldexpAll(g.Poles, -k), scale: k,
		period: g.Period.Ldexp(k), dead: g.DeadTime.Ldexp(k), ticks: g.Ticks,
		hidden: min(g.OriginPoles, g.OriginZeros),
	}
	c.op, c.oz = g.OriginPoles-c.hidden, g.OriginZeros-c.hidden
	shift := g.OriginZeros - g.OriginPoles - len(g.Poles)
	for j, v := range g.Num.Trim() {
		c.num = append(c.num, v.Ldexp(k*(j+shift)))
	}
	return c
}

// degree is the number of roots without those hidden at the origin; for dead time,
// of the function without it.
func (c characteristic) degree() int {
	return max(len(c.poles)+c.op+c.ticks, c.num.Degree()+c.oz)
}

// at returns F and F'.
func (c characteristic) at(x dd.Complex) (f, df dd.Complex) {
	f, df = dd.Real(dd.One), dd.Complex{}
	times := func(v, dv dd.Complex) { f, df = f.Mul(v), df.Mul(v).Add(f.Mul(dv)) }
	one := dd.Real(dd.One)
	for _, p := range c.poles {
		v := x.Sub(p)
		f, df = f.Mul(v), df.Mul(v).Add(f)
	}
	for range c.op {
		f, df = f.Mul(x), df.Mul(x).Add(f)
	}
	if c.ticks > 0 {
		z := one.Add(x.Scale(c.period))
		low := power(z, c.ticks-1)
		times(low.Mul(z), low.Scale(c.period.MulFloat(float64(c.ticks))))
	}
	if c.dead.Sign() != 0 {
		e := dd.CExp(x.Scale(c.dead))
		times(e, e.Scale(c.dead))
	}
	var n, dn dd.Complex
	for i := len(c.num) - 1; i >= 0; i-- {
		dn = dn.Mul(x).Add(n)
		n = n.Mul(x)
		n.Re = n.Re.Add(c.num[i])
	}
	for range c.oz {
		dn = dn.Mul(x).Add(n)
		n = n.Mul(x)
	}
	return f.Add(n), df.Add(dn)
}

// expanded returns the coefficients of F without dead time, with ticks of delay.
func (c characteristic) expanded(ticks int) poly.Poly {
	p := poly.FromRoots(c.poles).Shift(c.op)
	for range ticks {
		p = p.Mul(poly.Poly{dd.One, c.period})
	}
	return p.Add(c.num.Shift(c.oz))
}

// converged is the relative step at which Newton's method in double-double stops:
// 2^-96, a few units of the arithmetic.
const converged = 0x1p-96

// polish improves a root by Newton's method. From 1e-6 three steps reach the
// arithmetic; at a multiple root steps shrink by less and end in noise: 12 steps are
// the bound, and a step that is small and not smaller than the last ends it. A real
// root stays real: rounding in conjugate factors would move it off the axis.
func (c characteristic) polish(x dd.Complex) dd.Complex {
	last := math.Inf(1)
	for range 12 {
		f, df := c.at(x)
		if f.IsZero() {
			return x
		}
		step := f.Div(df)
		if x.Im.Sign() == 0 {
			step.Im = dd.Zero
		}
		size := step.Abs()
		if !step.IsFinite() || size > last/2 && size < 1e-6*x.Abs() {
			return x
		}
		x = x.Sub(step)
		if size <= converged*x.Abs() {
			return x
		}
		last = size
	}
	return x
}

// all returns the upper half (Im >= 0) of all roots of a loop without dead time. ok
// is false when the iteration for them did not converge or roots ran together.
func (c characteristic) all() (roots []dd.Complex, ok bool) {
	p := c.expanded(c.ticks)
	starts, err := p.Roots()
	if err != nil {
		return c.byStarts(p)
	}
	for _, x := range starts {
		if x.Im.Sign() >= 0 {
			roots = append(roots, c.polish(x))
		}
	}
	if ranTogether(roots, starts) {
		return c.byStarts(p)
	}
	return roots, true
}

// ranTogether tells whether polishing brought two different starts to one root.
func ranTogether(roots, starts []dd.Complex) bool {
	var upper []dd.Complex
	for _, x := range starts {
		if x.Im.Sign() >= 0 {
			upper = append(upper, x)
		}
	}
	for i := range roots {
		for j := range i {
			gap := roots[i].Sub(roots[j]).Abs()
			was := upper[i].Sub(upper[j]).Abs()
			if gap < 1e-3*was {
				return true
			}
		}
	}
	return false
}

// byStarts runs the simultaneous iteration on the factors themselves from the
// Newton polygon of the coefficients.
func (c characteristic) byStarts(p poly.Poly) (roots []dd.Complex, ok bool) {
	all, err := poly.Aberth(c.at, poly.Starts(p))
	used := make([]bool, len(all))
	for i, x := range all {
		if used[i] {
			continue
		}
		used[i] = true
		mate, gap := -1, 2*math.Abs(x.Im.Hi)
		for j := range all {
			if d := all[j].Sub(x.Conj()).Abs(); !used[j] && d < gap {
				mate, gap = j, d
			}
		}
		if mate < 0 {
			roots = append(roots, dd.Real(x.Re))
			continue
		}
		used[mate] = true
		x.Im = x.Im.Abs()
		roots = append(roots, x)
	}
	return roots, err == nil
}
