package lti

import (
	"math"
	"math/cmplx"

	"steadytick/internal/dd"
)

// place is a frequency on the boundary with L there, in double-double.
type place struct {
	w dd.Float // rad/s
	l dd.Complex
}

// refineGain improves a gain crossing by Newton's method on log|L(ω)|, L evaluated
// from its poles and coefficients in double-double. The derivative is that of plane; it
// needs few digits. Steps that do not bring |L| nearer to 1 are not taken.
func refineGain(l TF, p *plane, nu float64) place {
	_, df := p.gain(nu)
	return refine(l, p, nu, df, func(v dd.Complex) float64 {
		m := v.Re.Mul(v.Re).Add(v.Im.Mul(v.Im))
		return math.Log1p(m.Sub(dd.One).Float64()) / 2
	})
}

// refinePhase improves a crossing of −180° by Newton's method on arg(−L).
func refinePhase(l TF, p *plane, nu float64) place {
	_, df := p.phase(nu)
	return refine(l, p, nu, df, reversePhase)
}

// reversePhase is arg(−v), in (−π, π].
func reversePhase(v dd.Complex) float64 {
	a := dd.Atan2(v.Im.Neg(), v.Re.Neg()).Float64()
	if a <= -math.Pi {
		return math.Pi
	}
	return a
}

// refine drives miss(L) to zero; df is its derivative with respect to ν. Quadratic
// convergence from float64 accuracy needs one or two steps; four are the bound.
func refine(l TF, p *plane, nu, df float64, miss func(dd.Complex) float64) place {
	at := place{w: dd.New(p.omega(nu))}
	if at.l = l.response(at.w); !at.l.IsFinite() {
		at.l = p.response(nu) // partial products leave the range of float64
		return at
	}
	err := miss(at.l)
	slope := df * p.stretch(nu) * math.Ldexp(1, -p.scale)
	for range 4 {
		next := place{w: at.w.Sub(dd.New(err / slope))}
		if !next.w.IsFinite() || next.w.Sign() <= 0 {
			break
		}
		next.l = l.response(next.w)
		e := miss(next.l)
		if !next.l.IsFinite() || !(math.Abs(e) < math.Abs(err)) {
			break
		}
		at, err = next, e
	}
	return at
}

// response is L(jν) in float64.
func (p *plane) response(nu float64) dd.Complex {
	f, _ := p.gain(nu)
	a, _ := p.phase(nu)
	return dd.FromComplex(cmplx.Rect(math.Exp(f), a))
}
