package lti

import (
	"math"
	"math/big"
	"testing"
	"time"

	"steadytick/internal/dd"
	"steadytick/internal/poly"
)

// num reads an exact decimal.
func num(t testing.TB, s string) dd.Float {
	t.Helper()
	r, ok := new(big.Rat).SetString(s)
	if !ok {
		t.Fatalf("bad number %q", s)
	}
	return dd.FromRat(r)
}

// reals is a list of real poles.
func reals(v ...float64) []dd.Complex {
	var out []dd.Complex
	for _, x := range v {
		out = append(out, dd.C(x, 0))
	}
	return out
}

func ascending(v ...float64) poly.Poly {
	var out poly.Poly
	for _, x := range v {
		out = append(out, dd.New(x))
	}
	return out
}

// servo is k/(s(s+1)).
func servo(k float64) TF {
	return TF{Num: ascending(k), Poles: reals(-1), OriginPoles: 1}
}

// heldServo is the hold equivalent of k/(s(s+1)) by partial fractions,
//
//	G = k·(δ(1+p) − p)/(δ(δ − p)),   p = (e^(−T) − 1)/T
//
// for T = 1: (0.367879441171442 z + 0.264241117657115)/(z² − 1.36787944117144 z + 0.367879441171442),
// a standard textbook plant (e.g. Ogata, Discrete-Time Control Systems; from memory).
func heldServo(k float64, period dd.Float, ticks int) TF {
	p := dd.Expm1(period.Neg()).Div(period)
	return TF{
		Num:         poly.Poly{p.Neg().MulFloat(k), dd.One.Add(p).MulFloat(k)},
		Poles:       []dd.Complex{dd.Real(p)},
		OriginPoles: 1,
		Period:      period,
		Ticks:       ticks,
	}
}

func relative(got, want float64) float64 {
	if got == want {
		return 0
	}
	return math.Abs(got-want) / math.Abs(want)
}

func wantNear(t *testing.T, what string, got, want, tol float64) {
	t.Helper()
	if !(relative(got, want) <= tol) {
		t.Errorf("%s = %.17g, want %.17g (relative error %.2g, allowed %.2g)", what, got, want, relative(got, want), tol)
	}
}

// fromRoots is a monic polynomial.
func fromRoots(r []dd.Complex) poly.Poly { return poly.FromRoots(r) }

func abs128(v complex128) float64 { return math.Hypot(real(v), imag(v)) }

// hang is how long no analysis may take on any machine, however loaded: it tells that
// something does not end, not how fast it is. For speed see the benchmarks.
const hang = time.Minute
