package lti

import (
	"math"

	"steadytick/internal/dd"
)

// Constants are the error constants of a loop L. Where a limit is infinite the
// field is +Inf or −Inf (in Hi), with the sign of the leading coefficient; never NaN.
type Constants struct {
	Type int // poles less zeros at the origin; negative when L vanishes there; 0 for L = 0

	Position     dd.Float // Kp = lim L
	Velocity     dd.Float // Kv = lim x·L, 1/s
	Acceleration dd.Float // Ka = lim x²·L, 1/s²
}

// ErrorConstants returns the limits for x → 0 of
//
//	Kp = lim L,  Kv = lim x·L,  Ka = lim x²·L,    L = lead·x^start + …
//
// where x is s or δ = (z−1)/T, so that one rule serves both domains: sampled, they
// are lim L(z), lim (z−1)L(z)/T and lim (z−1)²L(z)/T² for z → 1. Delay does
// not enter. lead is the leading coefficient, not 0 unless L is the zero function.
func ErrorConstants(start int, lead dd.Float) Constants {
	if lead.Sign() == 0 {
		return Constants{}
	}
	limit := func(power int) dd.Float {
		switch {
		case start+power == 0:
			return lead
		case start+power > 0:
			return dd.Zero
		}
		return dd.New(math.Inf(lead.Sign()))
	}
	return Constants{Type: -start, Position: limit(0), Velocity: limit(1), Acceleration: limit(2)}
}

// Leading returns the first term lead·x^start of the expansion of g about the
// origin; 0, 0 for the zero function.
func Leading(g TF) (start int, lead dd.Float) {
	if len(g.Num) == 0 {
		return 0, dd.Zero
	}
	lead = g.Num[0]
	for _, p := range g.Poles {
		switch p.Im.Sign() {
		case 0:
			lead = lead.Div(p.Re.Neg())
		case 1: // with its conjugate: |p|², divided in two steps against overflow
			size := dd.New(p.Abs())
			a, b := p.Re.Div(size), p.Im.Div(size)
			lead = lead.Div(size).Div(size).Div(a.Mul(a).Add(b.Mul(b)))
		}
	}
	return g.OriginZeros - g.OriginPoles, lead
}
