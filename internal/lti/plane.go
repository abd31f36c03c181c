package lti

import (
	"math"

	"steadytick/internal/dd"
)

// plane is a loop prepared for work along the stability boundary. Both domains
// are brought to one form, a function of w whose boundary is the axis w = jν:
//
//	continuous:  w = s,                      ν = ω
//	sampled:     w = (2/T)(z−1)/(z+1),       ν = (2/T)·tan(ωT/2),   δ = w/(1 − wT/2)
//	L(jν) = K·(jν)^e·Π(jν − z_i)/Π(jν − p_i) · e^(−jντ)  or  e^(−2j·ticks·atan(νT/2))
//
// A factor δ − p becomes ((1 + pT/2)·w − p)/(1 − wT/2), so w has a pole at
// p/(1 + pT/2); surplus poles leave zeros at w = 2/T; a root at z = −1 leaves none.
// Frequencies are scaled by a power of two so that corners lie about 1.
//
// Everything along the axis is float64: the magnitude of each factor is good to a
// few roundings because jν − p is formed from both halves of p.
type plane struct {
	lead         dd.Float // K
	e            int
	zeros, poles []dd.Complex // all, in w
	period, dead float64
	ticks        int
	scale        int // frequencies in units of 2^scale rad/s

	factors      []factor // zeros and poles but for pairs that cancel
	logK         float64
	leadFloat    float64 // K
	small, large float64 // least and greatest modulus among factors, 1 without any
	hidden       bool    // a pole on the boundary is cancelled by a zero
	evals        int     // evaluations left before a search is given up
	exhausted    bool
}

// factor is jν − (a + jb) in the numerator (sign 1) or the denominator (sign −1).
type factor struct {
	a, b, bLow float64
	mod        float64
	sign       float64
}

// newPlane prepares f. The error is ErrRange.
func newPlane(f factored) (*plane, error) {
	k := f.binades()
	f = f.scaled(k)
	p := &plane{
		e: f.oz - f.op, lead: f.lead, scale: k,
		period: f.period.Float64(), dead: f.dead.Float64(), ticks: f.ticks,
		hidden: f.oz > 0 && f.op > 0,
	}
	if f.period.Sign() == 0 {
		p.zeros, p.poles = f.zeros, f.poles
	} else {
		p.bilinear(f)
	}
	if !p.lead.IsFinite() || p.lead.Sign() == 0 {
		return nil, ErrRange
	}
	p.logK, p.leadFloat = math.Log(math.Abs(p.lead.Hi)), p.lead.Float64()
	p.collect()
	return p, nil
}

// searchBudget bounds the evaluations of one search along the axis. The loops of
// testdata need 350 at most, random loops with delays of thousands of ticks up to 7000; it
// stops searches over hundreds of decades.
const searchBudget = 20000

// bilinear maps δ to w.
func (p *plane) bilinear(f factored) {
	half := f.period.Ldexp(-1)
	gain := dd.Real(p.lead)
	endZeros, endPoles := 0, 0 // at z = −1
	for _, z := range f.zeros {
		d := dd.Real(dd.One).Add(z.Scale(half))
		if d.IsZero() {
			gain = gain.Mul(z.Neg())
			endZeros++
			continue
		}
		gain = gain.Mul(d)
		p.zeros = append(p.zeros, z.Div(d))
	}
	for _, z := range f.poles {
		d := dd.Real(dd.One).Add(z.Scale(half))
		if d.IsZero() {
			gain = gain.Div(z.Neg())
			endPoles++
			continue
		}
		gain = gain.Div(d)
		p.poles = append(p.poles, z.Div(d))
	}
	corner := dd.Real(dd.One.Div(half))
	for range f.excessPoles() {
		gain = gain.Scale(half).Neg()
		p.zeros = append(p.zeros, corner)
	}
	for range -f.excessPoles() { // (1 − wT/2)^−1·z^−1 = (1 + wT/2)^−1 takes a tick each
		gain = gain.Scale(corner.Re)
		p.poles = append(p.poles, corner.Neg())
		p.ticks--
	}
	p.lead = gain.Re // conjugate factors leave the imaginary part to rounding
	p.hidden = p.hidden || endZeros > 0 && endPoles > 0
}

// Two roots closer than sameRoot of their modulus cancel on the axis (1e-25: a
// simple root is known to about 1e-30), and a root with a damping below undamped is one on the
// axis (hold equivalents of undamped modes are exact to about 1e-30).
const (
	sameRoot = 1e-25
	undamped = 1e-27
)

// collect fills factors.
func (p *plane) collect() {
	gone := make([]bool, len(p.zeros))
next:
	for _, r := range p.poles {
		for i, z := range p.zeros {
			if !gone[i] && z.Sub(r).Abs() <= sameRoot*r.Abs() {
				gone[i] = true
				p.hidden = p.hidden || math.Abs(r.Re.Hi) <= onBoundary*r.Abs()
				continue next
			}
		}
		p.factors = append(p.factors, newFactor(r, -1))
	}
	for i, z := range p.zeros {
		if !gone[i] {
			p.factors = append(p.factors, newFactor(z, 1))
		}
	}
	p.small, p.large = math.Inf(1), 0
	for _, f := range p.factors {
		p.small, p.large = math.Min(p.small, f.mod), math.Max(p.large, f.mod)
	}
	if len(p.factors) == 0 {
		p.small, p.large = 1, 1
	}
}

func newFactor(r dd.Complex, sign float64) factor {
	f := factor{a: r.Re.Float64(), b: r.Im.Hi, bLow: r.Im.Lo, mod: r.Abs(), sign: sign}
	if math.Abs(f.a) <= undamped*f.mod {
		f.a = 0
	}
	return f
}

// slope is the exponent of |L| at infinity, |L| ~ ν^slope.
func (p *plane) slope() int { return p.e + len(p.zeros) - len(p.poles) }

// openUnstable counts the poles of L strictly outside the stability region.
func (p *plane) openUnstable() int {
	n := 0
	for _, r := range p.poles {
		if newFactor(r, -1).a > 0 {
			n++
		}
	}
	return n
}

// omega returns the frequency in rad/s that belongs to ν.
func (p *plane) omega(nu float64) float64 {
	if p.period != 0 {
		nu = 2 / p.period * math.Atan(nu*p.period/2)
	}
	return math.Ldexp(nu, p.scale)
}

// nu is the inverse of omega, for 0 <= ω < π/T.
func (p *plane) nu(omega float64) float64 {
	w := math.Ldexp(omega, -p.scale)
	if p.period == 0 {
		return w
	}
	return 2 / p.period * math.Tan(w*p.period/2)
}

// stretch is dν/dω in scaled units.
func (p *plane) stretch(nu float64) float64 {
	h := nu * p.period / 2
	return 1 + h*h
}
