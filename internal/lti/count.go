package lti

import (
	"math"

	"steadytick/internal/dd"
)

// UnstableCount returns how many roots of 1 + L = 0 lie outside the stability
// region, counted by the argument along its boundary and by nothing else: no root of the
// closed loop is computed. Hidden unstable modes count. marginal tells that a root lies
// within 1e-12 of its own modulus of the boundary (it may then be counted or not), or
// that L is too close to the unit circle over a whole band to tell.
//
// The principle of the argument (Nyquist) for the upper half of the boundary, passed
// to the right of poles that lie on it:
//
//	unstable = P − Δ/π,   Δ = change of arg(1 + L),   P = poles of L outside
//
// Between two neighbouring gain crossings |L| stays on one side of 1, where
//
//	|L| <= 1:  arg(1+L) is its principal value
//	|L| >= 1:  arg(1+L) = φ + principal value of arg(1 + 1/L),  φ = arg L unwrapped
//
// and at a crossing L = e^(jφ), so that with ψ = φ brought into (−π, π] the two are ψ/2 and
// φ − ψ/2. The turns of a long delay are never followed; φ is known in closed form.
//
// With dead time and |L| >= 1 at infinite frequency there are infinitely many
// unstable roots: the count is then P + 1 at least and not more is said.
// Errors: ErrImproper, ErrAlgebraic, ErrRange and those of poly.Roots.
func UnstableCount(l TF) (n int, marginal bool, err error) {
	if l.IsZero() {
		return hiddenOrOpen(l)
	}
	p, err := prepare(l)
	if err != nil {
		return 0, false, err
	}
	n, marginal = p.unstable(p.gainCrossings())
	return n, marginal, nil
}

// prepare builds the plane of l ≠ 0 and refuses loops that cannot be closed.
func prepare(l TF) (*plane, error) {
	f, err := l.factor()
	if err != nil {
		return nil, err
	}
	if f.closesOnItself() {
		return nil, ErrAlgebraic
	}
	return newPlane(f)
}

// closesOnItself tells whether L(∞) is −1 within rounding, without any delay.
func (f factored) closesOnItself() bool {
	instant := f.ticks == 0 && f.dead.Sign() == 0
	return instant && f.excessPoles() == 0 && math.Abs(dd.One.Add(f.lead).Hi) <= cancelled
}

// hiddenOrOpen is the count of L = 0: the poles remain as they are.
func hiddenOrOpen(l TF) (n int, marginal bool, err error) {
	marginal = l.OriginPoles > 0
	for _, r := range l.Poles {
		switch {
		case nearBoundary(r, l.Period):
			marginal = true
		case !Inside(r, l.Period):
			n++
		}
	}
	return n, marginal, nil
}

// unstable is UnstableCount for given gain crossings, ascending.
func (p *plane) unstable(crossings []float64) (n int, marginal bool) {
	open := p.openUnstable()
	if p.endless() {
		return open + 1, p.hidden
	}
	if p.unitGain() {
		return open, true
	}
	turn, from := 0.0, p.start()
	for i, nu := range append(crossings[:len(crossings):len(crossings)], math.Inf(1)) {
		last := 0.0
		if i > 0 {
			last = crossings[i-1]
		}
		big := p.bigBetween(last, nu)
		a, b := from.value(big), p.end().value(big)
		if !math.IsInf(nu, 1) {
			phi, _ := p.phase(nu)
			next := point{phi, math.Remainder(phi, 2*math.Pi)}
			b, from = next.value(big), next
		}
		turn += b - a
	}
	half := turn / math.Pi
	n = open - int(math.Round(half))
	whole := math.Abs(half-math.Round(half)) <= 1e-6 // phases of up to 1e5 rad are good to 1e-10
	return max(n, 0), !whole || n < 0 || p.hidden || p.exhausted || p.touches(crossings)
}

// point is a place where L = e^(jφ), or an end of the boundary, where L is real:
// there ψ = 0 serves, arg(1 + 1/L) and arg(1 + L) being zero on their sides.
type point struct{ phi, psi float64 }

// value is arg(1 + L) in the form for |L| >= 1 or <= 1.
func (q point) value(big bool) float64 {
	if big {
		return q.phi - q.psi/2
	}
	return q.psi / 2
}

// start is L on the real axis just right of w = 0, where an integrator's quarter
// turn has not begun: its phase is that along the axis less e·π/2.
func (p *plane) start() point {
	f := p.restPhase()
	for _, c := range p.factors {
		if c.b == 0 && c.a > 0 {
			f += c.sign * math.Pi
		} else if c.b != 0 {
			f += c.sign * p.cornerAngle(c)
		}
	}
	return point{phi: math.Pi * math.Round(f/math.Pi)}
}

// cornerAngle is the phase of a complex factor at ν = 0; those of a pair add to 0 or 2π.
func (p *plane) cornerAngle(c factor) float64 {
	angle := math.Atan2(-c.b, math.Abs(c.a))
	if c.a > 0 {
		angle = math.Pi - angle
	}
	return angle
}

// end is L at infinity. With a pole of L there (z = −1), the boundary leaves the
// axis for the real axis before it, and turns the phase back by slope·π/2; with a zero
// only arg(1 + L) = 0 matters.
func (p *plane) end() point { return point{phi: p.restPhase() - float64(p.ticks)*math.Pi} }

// bigBetween tells whether |L| > 1 between two neighbouring crossings.
func (p *plane) bigBetween(lo, hi float64) bool {
	var f float64
	switch {
	case lo == 0 && math.IsInf(hi, 1):
		f, _ = p.gain(1)
		if math.Abs(f) <= touching { // a touch that was not listed
			f, _ = p.gain(p.small / 3)
		}
	case lo == 0:
		f, _ = p.gain(hi / 2)
	case math.IsInf(hi, 1):
		f, _ = p.farGain(1 / (2 * lo))
	default:
		f, _ = p.gain(math.Sqrt(lo) * math.Sqrt(hi))
	}
	return f > 0
}

// endless tells whether dead time meets a gain of 1 or more at infinite frequency.
func (p *plane) endless() bool { return p.dead != 0 && p.slope() == 0 && p.logK >= 0 }

// touches tells whether 1 + L has a root on the boundary within onBoundary: at a
// gain crossing the root is about |1 + L|/|L'| away; or 1 + L vanishes at an end.
func (p *plane) touches(crossings []float64) bool {
	if p.e == 0 {
		if f, _ := p.gain(0); p.start().reversed() && math.Abs(f) <= touching {
			return true
		}
	}
	if p.slope() == 0 && p.dead == 0 && p.end().reversed() && math.Abs(p.logK) <= touching {
		return true
	}
	for _, nu := range crossings {
		f, df := p.gain(nu)
		phi, dphi := p.phase(nu)
		gap := math.Hypot(f, math.Remainder(phi-math.Pi, 2*math.Pi))
		if gap <= math.Max(onBoundary*nu*math.Hypot(df, dphi), 4*touching) {
			return true
		}
	}
	return false
}

// reversed tells whether L is negative at this end.
func (q point) reversed() bool { return math.Abs(math.Remainder(q.phi, 2*math.Pi)) > 1 }
