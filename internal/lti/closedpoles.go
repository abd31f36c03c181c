package lti

import (
	"math"
	"math/cmplx"
	"sort"

	"steadytick/internal/dd"
)

// Poles are closed-loop poles, the dominant (rightmost equivalent) first, the
// two of a conjugate pair together, positive imaginary part first.
type Poles struct {
	X []dd.Complex // in x = s or δ
	// Equivalent is s itself, or ln(z)/T with the imaginary part in (−π/T, π/T]. A pole at
	// z = 0 exactly has the real part −Inf.
	Equivalent []complex128
	// Unstable is how many of X lie outside the stability region or, within 1e-12 of
	// their modulus, on its boundary; Marginal how many of them are on the boundary.
	Unstable, Marginal int
	// Complete tells that X holds every pole or, of a long delay, every pole to the
	// right of the last listed, by the argument count on a line beside it.
	Complete bool
}

// directDegree is the number of poles up to which all are computed. Beyond it
// (long delays) only the dominant ones are.
const directDegree = 64

// ClosedPoles returns the roots of 1 + L = 0, hidden modes included: all of them
// for up to 64 poles without dead time, otherwise the max rightmost (one more where a
// pair would be cut). Simple poles are good to about 1e-25 relative, m-fold ones
// to 1e-30^(1/m). Errors: ErrImproper, ErrAlgebraic, ErrRange and those of poly.Roots.
func ClosedPoles(l TF, max int) (Poles, error) {
	if l.IsZero() {
		return openPoles(l), nil
	}
	f, err := l.factor()
	if err != nil {
		return Poles{}, err
	}
	if f.closesOnItself() {
		return Poles{}, ErrAlgebraic
	}
	return closedPoles(l, f, max)
}

func closedPoles(l TF, f factored, max int) (Poles, error) {
	k := f.binades()
	c := newCharacteristic(l, k)
	for _, v := range c.num {
		if !v.IsFinite() {
			return Poles{}, ErrRange
		}
	}
	var half []dd.Complex
	var complete bool
	if c.dead.Sign() == 0 && c.degree() <= directDegree {
		half, complete = c.all()
	} else {
		half, complete = dominant(c, f.scaled(k), max)
	}
	for range c.hidden {
		half = append(half, dd.Complex{})
	}
	p := arrange(ldexpAll(half, k), l.Period)
	p.Complete = complete
	for _, x := range p.X {
		if !x.IsFinite() {
			return Poles{}, ErrRange
		}
	}
	return p, nil
}

// openPoles are the closed-loop poles of L = 0.
func openPoles(l TF) Poles {
	half := make([]dd.Complex, l.OriginPoles)
	for _, x := range l.Poles {
		if x.Im.Sign() >= 0 {
			half = append(half, x)
		}
	}
	p := arrange(half, l.Period)
	p.Complete = true
	return p
}

// arrange sorts the upper half of a set of poles, adds the lower one, and judges.
func arrange(half []dd.Complex, period dd.Float) Poles {
	type pole struct {
		x dd.Complex
		s complex128
	}
	list := make([]pole, len(half))
	for i, x := range half {
		list[i] = pole{x, equivalent(x, period)}
	}
	sort.SliceStable(list, func(i, j int) bool {
		a, b := list[i].s, list[j].s
		if real(a) != real(b) {
			return real(a) > real(b)
		}
		return imag(a) < imag(b)
	})
	var p Poles
	add := func(x dd.Complex, s complex128) {
		p.X, p.Equivalent = append(p.X, x), append(p.Equivalent, s)
		near := nearBoundary(x, period)
		if near {
			p.Marginal++
		}
		if near || !Inside(x, period) {
			p.Unstable++
		}
	}
	for _, v := range list {
		add(v.x, v.s)
		if v.x.Im.Sign() != 0 {
			add(v.x.Conj(), cmplx.Conj(v.s))
		}
	}
	return p
}

// equivalent is s for x = s and ln(1 + δT)/T for x = δ.
func equivalent(x dd.Complex, period dd.Float) complex128 {
	if period.Sign() == 0 {
		return x.Complex128()
	}
	v := dd.CLog1p(x.Scale(period))
	if !v.IsFinite() {
		return complex(math.Inf(-1), 0)
	}
	return dd.Complex{Re: v.Re.Div(period), Im: v.Im.Div(period)}.Complex128()
}
