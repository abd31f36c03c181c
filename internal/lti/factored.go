package lti

import (
	"errors"
	"math"

	"steadytick/internal/dd"
)

// ErrImproper says that a loop has more zeros than poles (its delay counted with
// the poles in the sampled domain): it would have to predict.
var ErrImproper = errors.New("the loop has more zeros than poles, so it cannot be run")

// ErrAlgebraic says that L is −1 at infinity: the loop closes instantly on itself
// and its equations have no solution.
var ErrAlgebraic = errors.New("the loop gain is −1 at infinite frequency: an algebraic loop without solution")

// ErrRange says that gains or roots of a loop leave the range of float64.
var ErrRange = errors.New("the loop's gain leaves the range of the arithmetic")

// factored is a transfer function with its numerator in roots as well,
//
//	G(x) = lead · x^(oz−op) · Π(x − zeros)/Π(x − poles) · delay
type factored struct {
	lead         dd.Float
	zeros, poles []dd.Complex // none at the origin
	oz, op       int
	period, dead dd.Float
	ticks        int
}

// factor finds the zeros of g, which must not be the zero function.
func (g TF) factor() (factored, error) {
	n := g.Num.Trim()
	zeros := g.zeros
	if zeros == nil || len(zeros) != n.Degree() {
		var err error
		if zeros, err = n.Roots(); err != nil {
			return factored{}, err
		}
	}
	f := factored{
		lead: n[len(n)-1], zeros: zeros, poles: g.Poles,
		oz: g.OriginZeros, op: g.OriginPoles,
		period: g.Period, dead: g.DeadTime, ticks: g.Ticks,
	}
	if f.excessPoles() < 0 && (g.Period.Sign() == 0 || f.excessPoles()+f.ticks < 0) {
		return f, ErrImproper
	}
	return f, nil
}

// excessPoles is the number of poles less the number of zeros.
func (f factored) excessPoles() int { return len(f.poles) + f.op - len(f.zeros) - f.oz }

// binades is the exponent k for which corners of f lie about 2^k rad/s: the mean
// over poles and zeros, or the delay's where there are none.
func (f factored) binades() int {
	sum, n := 0.0, 0
	for _, list := range [2][]dd.Complex{f.zeros, f.poles} {
		for _, r := range list {
			sum += math.Log2(r.Abs())
			n++
		}
	}
	if n == 0 {
		n = 1
		switch e := f.excessPoles(); {
		case f.dead.Sign() > 0:
			sum = -math.Log2(f.dead.Hi)
		case f.period.Sign() > 0:
			sum = -math.Log2(f.period.Hi)
		case e > 0:
			sum = math.Log2(math.Abs(f.lead.Hi)) / float64(e)
		}
	}
	return int(math.Round(math.Max(-900, math.Min(900, sum/float64(n)))))
}

// scaled returns the same function of x/2^k, exactly: frequencies are divided by
// 2^k and times multiplied. Products of corners then stay in the range of float64.
func (f factored) scaled(k int) factored {
	f.zeros, f.poles = ldexpAll(f.zeros, -k), ldexpAll(f.poles, -k)
	f.lead = f.lead.Ldexp(-k * f.excessPoles())
	f.period, f.dead = f.period.Ldexp(k), f.dead.Ldexp(k)
	return f
}

func ldexpAll(x []dd.Complex, n int) []dd.Complex {
	out := make([]dd.Complex, len(x))
	for i, v := range x {
		out[i] = v.Ldexp(n)
	}
	return out
}

// shifted returns f as a function of a variable in which the line Re s = sigma, in
// the sampled domain the circle |z| = ρ = e^(sigma·T), is the stability boundary:
//
//	s = s' + σ                          p' = p − σ
//	z = ρ·z',  δ = ρ·δ' + (ρ−1)/T       p' = (p − (ρ−1)/T)/ρ
//
// the gain taking the factors ρ and the delay e^(−στ) or ρ^(−ticks).
func (f factored) shifted(sigma dd.Float) factored {
	rho, move := dd.One, sigma
	delay := f.dead.Mul(sigma)
	if f.period.Sign() != 0 {
		st := sigma.Mul(f.period)
		rho, move = dd.Exp(st), dd.Expm1(st).Div(f.period)
		delay = st.MulFloat(float64(f.ticks + f.excessPoles()))
	}
	at := func(p dd.Complex) dd.Complex {
		p.Re = p.Re.Sub(move)
		return dd.Complex{Re: p.Re.Div(rho), Im: p.Im.Div(rho)}
	}
	out := f
	out.lead = f.lead.Mul(dd.Exp(delay.Neg()))
	out.oz, out.op, out.zeros, out.poles = 0, 0, nil, nil
	add := func(list []dd.Complex, origin int, to *[]dd.Complex, count *int) {
		for range origin {
			list = append(list[:len(list):len(list)], dd.Complex{})
		}
		for _, p := range list {
			if q := at(p); q.IsZero() {
				*count++
			} else {
				*to = append(*to, q)
			}
		}
	}
	add(f.zeros, f.oz, &out.zeros, &out.oz)
	add(f.poles, f.op, &out.poles, &out.op)
	return out
}

// FindZeros returns g with the roots of its numerator kept beside it, so that products of it need not
// find them again. Where the roots cannot be found g is returned as it is.
func (g TF) FindZeros() TF {
	if g.zeros == nil && !g.IsZero() {
		if z, err := g.Num.Trim().Roots(); err == nil {
			g.zeros = append([]dd.Complex{}, z...) // not nil, even when there are none
		}
	}
	return g
}
