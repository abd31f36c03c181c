package exact_test

import (
	"errors"
	"math/big"
	"strings"
	"testing"

	"steadytick/internal/exact"
)

// factor returns 1 + t·x as a Ratio.
func factor(t string) exact.Ratio {
	r, err := exact.FromPolys(exact.NewPoly(big.NewRat(1, 1), rat(t)), exact.IntPoly(1))
	if err != nil {
		panic(err)
	}
	return r
}

func constant(s string) exact.Ratio { return exact.Const(rat(s)) }

func div(t testing.TB, a, b exact.Ratio) exact.Ratio {
	t.Helper()
	r, err := a.Div(b)
	if err != nil {
		t.Fatal(err)
	}
	return r
}

// A PID keeps the denominator a person would write: x·(Tf·x + 1), order 2.
func TestSumKeepsLeastDenominator(t *testing.T) {
	x := exact.X()
	pid := constant("2").Add(div(t, constant("0.5"), x)).
		Add(div(t, constant("0.3").Mul(x), factor("0.01")))
	if pid.Order() != 2 || pid.OriginPoles != 1 || len(pid.Den) != 1 || pid.OriginZeros != 0 {
		t.Errorf("denominator is not x·(0.01x + 1): %v", pid)
	}
	if h := pid.Hidden(); h.Degree() != 0 {
		t.Errorf("hidden modes %s in a plain PID", h.Format("x"))
	}
	// Common denominator by hand: 2·x(1+0.01x) + 0.5(1+0.01x) + 0.3x² = 0.5 + 2.005x + 0.32x².
	if want := exact.NewPoly(rat("0.5"), rat("2.005"), rat("0.32")); !pid.NumPoly().Equal(want) {
		t.Errorf("numerator %s", pid.NumPoly().Format("x"))
	}
}

// 1/((x+1)(x+2)) written expanded, plus 1/(x+1): the shared factor is found inside.
func TestSumFindsFactorsInside(t *testing.T) {
	a := mustRatio(t, exact.IntPoly(1), exact.IntPoly(2, 3, 1))
	b := mustRatio(t, exact.IntPoly(1), exact.IntPoly(1, 1))
	s := a.Add(b)
	if s.Order() != 2 || s.Hidden().Degree() != 0 {
		t.Errorf("order %d, hidden %s: %v", s.Order(), s.Hidden().Format("x"), s)
	}
}

// 3/x² + 4(1+x)/(x²(1+2x)³) has x²(1+2x)³ below, and 5/x² + 1/x³ has x³.
func TestSumTakesHigherPower(t *testing.T) {
	a := mustRatio(t, exact.IntPoly(3), exact.IntPoly(0, 0, 1))
	b := mustRatio(t, exact.IntPoly(4, 4), exact.IntPoly(0, 0, 1).Mul(exact.IntPoly(1, 2).Pow(3)))
	if s := a.Add(b); s.OriginPoles != 2 || s.Order() != 5 {
		t.Errorf("got %v", s)
	}
	if s := a.Add(mustRatio(t, exact.IntPoly(1), exact.IntPoly(0, 0, 0, 1))); s.OriginPoles != 3 || s.OriginZeros != 0 {
		t.Errorf("got %v", s)
	}
}

func TestProductsNeverCancel(t *testing.T) {
	x := exact.X()
	lead := div(t, factor("0.2"), factor("0.01"))
	plant := div(t, constant("3"), x.Mul(mustRatio(t, exact.IntPoly(10, 7, 1), exact.IntPoly(1)))) // 3/(x(x+2)(x+5))
	loop := lead.Mul(plant)                                                                        // 1 + 0.2x meets x + 5
	if h := loop.Hidden(); !h.Equal(exact.NewPoly(rat("1"), rat("0.2"))) {
		t.Errorf("hidden %s, want 1 + 0.2*x", h.Format("x"))
	}
	if loop.Order() != 4 {
		t.Errorf("order %d, want 4", loop.Order())
	}
	red := loop.Reduced()
	if red.Order() != 3 || red.Hidden().Degree() != 0 {
		t.Errorf("reduced: order %d, hidden %s", red.Order(), red.Hidden().Format("x"))
	}
	one := div(t, x, x)
	if one.OriginZeros != 1 || one.OriginPoles != 1 || !one.Hidden().Equal(exact.IntPoly(0, 1)) {
		t.Errorf("x/x lost its hidden mode: %v", one)
	}
	if red := one.Reduced(); red.Order() != 0 || red.OriginZeros != 0 {
		t.Errorf("x/x reduced is %v", red)
	}
	z, err := loop.Zeros()
	if err != nil {
		t.Fatal(err)
	}
	p, err := loop.Poles()
	if err != nil {
		t.Fatal(err)
	}
	same := 0
	for _, v := range p {
		if len(z) == 1 && v == z[0] {
			same++
		}
	}
	if same != 1 {
		t.Errorf("zero %v is not bitwise one of the poles %v", z, p)
	}
}

// Tustin of 1/s: s = δ/(1 + δT/2) gives (1 + δT/2)/δ.
func TestTustinOfIntegrator(t *testing.T) {
	integ := div(t, constant("1"), exact.X())
	got, err := integ.Moebius(rat("1"), rat("0"), rat("0.05"), rat("1")) // T = 0.1
	if err != nil {
		t.Fatal(err)
	}
	if got.OriginPoles != 1 || got.OriginZeros != 0 || len(got.Den) != 0 ||
		!got.NumPoly().Equal(exact.NewPoly(rat("1"), rat("0.05"))) {
		t.Errorf("got %v", got)
	}
	if _, err := integ.Moebius(rat("2"), rat("4"), rat("1"), rat("2")); !errors.Is(err, exact.ErrSingularMap) {
		t.Errorf("singular map gave %v", err)
	}
}

// A substitution that moves a root to the origin counts it there.
func TestMoebiusFindsOrigin(t *testing.T) {
	r := mustRatio(t, exact.IntPoly(1), exact.NewPoly(rat("0.8"), rat("-1.8"), rat("1"))) // 1/((z−1)(z−0.8))
	got, err := r.Moebius(rat("0.01"), rat("1"), rat("0"), rat("1"))
	if err != nil {
		t.Fatal(err)
	}
	// δT·(δT + 0.2) = 0.002·δ·(1 + 0.05·δ)
	if got.OriginPoles != 1 || got.Gain.Cmp(rat("500")) != 0 ||
		!got.DenPoly().Equal(exact.NewPoly(rat("0"), rat("1"), rat("0.05"))) {
		t.Errorf("got %v", got)
	}
}

func TestSquareFree(t *testing.T) {
	// (1+x)·(1+2x)³·(1+x+x²)³·(3x)²·7
	p := exact.IntPoly(1, 1).Mul(exact.IntPoly(1, 2).Pow(3)).Mul(exact.IntPoly(1, 1, 1).Pow(3)).
		Mul(exact.IntPoly(0, 3).Pow(2)).Scale(rat("7"))
	got := p.SquareFree()
	if len(got) != 2 || got[0].N != 1 || got[1].N != 3 ||
		!got[0].P.Equal(exact.IntPoly(1, 1)) || !got[1].P.Equal(exact.IntPoly(1, 2).Mul(exact.IntPoly(1, 1, 1))) {
		t.Errorf("got %v", got)
	}
}

// Poles on the imaginary axis have a real part of exactly zero also when the
// polynomial is written expanded among others; one 1e-30 beside it has not.
func TestImaginaryAxisIsExact(t *testing.T) {
	axis := exact.IntPoly(4, 0, 1).Mul(exact.IntPoly(9, 0, 1)) // ±2j, ±3j
	p := axis.Mul(exact.IntPoly(2, 1)).Mul(exact.IntPoly(5, 2, 1))
	x, err := mustRatio(t, exact.IntPoly(1), p).Poles()
	if err != nil {
		t.Fatal(err)
	}
	n := 0
	for _, v := range x {
		if v.Re.Sign() == 0 {
			n++
		}
	}
	if len(x) != 7 || n != 4 {
		t.Errorf("%d of %d poles on the axis, want 4 of 7: %v", n, len(x), x)
	}
	near := exact.NewPoly(rat("4"), rat("1e-30"), rat("1")).Mul(exact.IntPoly(2, 1)).Mul(exact.IntPoly(5, 2, 1))
	x, err = mustRatio(t, exact.IntPoly(1), near).Poles()
	if err != nil {
		t.Fatal(err)
	}
	found := 0
	for _, v := range x {
		if samePart(v.Re, rat("-5e-31")) {
			found++
		}
	}
	if found != 2 {
		t.Errorf("the pair with real part -5e-31 is not in %v", x)
	}
}

// Time constants of picoseconds to the 40th power underflow float64; the roots do not.
func TestRootsOutsideFloatCoefficients(t *testing.T) {
	p := exact.IntPoly(1)
	for k := int64(1); k <= 40; k++ {
		p = p.Mul(exact.NewPoly(big.NewRat(1, 1), big.NewRat(k, 1e12)))
	}
	x, err := mustRatio(t, exact.IntPoly(1), p).Poles()
	if err != nil {
		t.Fatal(err)
	}
	for k := int64(1); k <= 40; k++ {
		n := 0
		for _, v := range x {
			if v.Im.Sign() == 0 && samePart(v.Re, big.NewRat(-1e12, k)) {
				n++
			}
		}
		if n != 1 {
			t.Errorf("pole −1e12/%d found %d times", k, n)
		}
	}
}

func TestNumericFoldsGain(t *testing.T) {
	// 6(x+2)/(x(x+3)(2x+8)) = 3(x+2)/(x(x+3)(x+4))
	r := mustRatio(t, exact.IntPoly(12, 6), exact.IntPoly(0, 24, 14, 2))
	num, poles, err := r.Numeric()
	if err != nil {
		t.Fatal(err)
	}
	if len(num) != 2 || num[0].Hi != 6 || num[1].Hi != 3 || len(poles) != 2 {
		t.Errorf("num %v, poles %v", num, poles)
	}
	huge := mustRatio(t, exact.NewPoly(rat("1e400")), exact.IntPoly(1))
	if _, _, err := huge.Numeric(); !errors.Is(err, exact.ErrRange) {
		t.Errorf("gain 1e400 gave %v", err)
	}
	tiny := mustRatio(t, exact.IntPoly(1), exact.NewPoly(rat("1"), rat("1e-400")))
	if _, _, err := tiny.Numeric(); !errors.Is(err, exact.ErrRange) {
		t.Errorf("a pole at -1e400 gave %v", err)
	}
}

func TestBounds(t *testing.T) {
	var size *exact.SizeError
	if _, err := factor("1").Pow(101); !errors.As(err, &size) {
		t.Errorf("(1+x)^101 gave %v", err)
	}
	if _, err := constant("3").Pow(1 << 30); !errors.As(err, &size) {
		t.Errorf("3^(2^30) gave %v", err)
	}
	if _, err := constant("3").Pow(10000); !errors.As(err, &size) {
		t.Errorf("3^10000 gave %v", err)
	}
	if r, err := constant("-1").Pow(999999); err != nil || r.Gain.Cmp(rat("-1")) != 0 {
		t.Errorf("(-1)^999999 gave %v, %v", r, err)
	}
	p, err := factor("1").Pow(-100)
	if err != nil || p.Order() != 100 {
		t.Errorf("(1+x)^-100: order %d, %v", p.Order(), err)
	}
	if err := p.Mul(div(t, constant("1"), factor("2"))).Check(); !errors.As(err, &size) || size.Got != 101 {
		t.Errorf("order 101 gave %v", err)
	}
	if err := constant(strings.Repeat("9", 3000)).Check(); !errors.As(err, &size) {
		t.Errorf("a gain of 3000 digits gave %v", err)
	}
	if r, err := factor("1").Pow(0); err != nil || r.Order() != 0 || len(r.Num) != 0 || r.Gain.Cmp(rat("1")) != 0 {
		t.Errorf("(1+x)^0 gave %v, %v", r, err)
	}
}

func TestZero(t *testing.T) {
	var none exact.Ratio
	zero := constant("0")
	for _, z := range []exact.Ratio{none, zero, factor("1").Sub(factor("1")), zero.Mul(factor("1")), zero.Neg()} {
		if !z.IsZero() || z.Order() != 0 || z.RelativeDegree() != 0 || z.String() != "0" {
			t.Errorf("not a clean zero: %#v", z)
		}
		if _, err := factor("1").Div(z); !errors.Is(err, exact.ErrZeroDivision) {
			t.Errorf("division by zero gave %v", err)
		}
		if s := z.Add(factor("1")); s.IsZero() {
			t.Error("0 + (1+x) is 0")
		}
		if num, poles, err := z.Numeric(); len(num) != 0 || len(poles) != 0 || err != nil {
			t.Errorf("zero in numbers: %v %v %v", num, poles, err)
		}
	}
	for _, n := range []int{0, -1} {
		if _, err := zero.Pow(n); !errors.Is(err, exact.ErrZeroDivision) {
			t.Errorf("0^%d gave %v", n, err)
		}
	}
	if _, err := exact.FromPolys(exact.IntPoly(1), exact.IntPoly(0, 0)); !errors.Is(err, exact.ErrZeroDivision) {
		t.Errorf("zero denominator gave %v", err)
	}
}

func TestFormat(t *testing.T) {
	r := mustRatio(t, exact.NewPoly(rat("0"), rat("0.5"), rat("-0.1")), exact.IntPoly(0, 0, 3, 1))
	if got, want := r.Format("s"), "(1/6)*s*(1 - 0.2*s)/(s^2*(1 + (1/3)*s))"; got != want {
		t.Errorf("got %s, want %s", got, want)
	}
}
