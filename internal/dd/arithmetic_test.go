package dd

import (
	"fmt"
	"math"
	"math/big"
	"testing"

	"pgregory.net/rapid"
)

// drawFloat draws a double-double with a magnitude between 2^low and 2^high, often
// with a low word far below half an ulp, or none, and often close to a power of 2.
func drawFloat(t *rapid.T, name string, low, high int) Float {
	m := rapid.OneOf(rapid.Float64Range(1, 2), rapid.SampledFrom([]float64{1, 1.5, math.Nextafter(1, 2), math.Nextafter(2, 1)})).Draw(t, name+" mantissa")
	e := rapid.IntRange(low, high).Draw(t, name+" exponent")
	lo := rapid.SampledFrom([]float64{0, 1, -1, 0x1p-40, -0x1p-52}).Draw(t, name+" low")
	lo *= rapid.Float64Range(0.5, 1).Draw(t, name+" low mantissa")
	x := norm(m, lo*0x1p-53)
	if rapid.Bool().Draw(t, name+" sign") {
		x = x.Neg()
	}
	return x.Ldexp(e)
}

// drawAny draws any finite value of the whole range, zeros and subnormals included.
func drawAny(t *rapid.T, name string) Float {
	if rapid.IntRange(0, 9).Draw(t, name+" kind") == 0 {
		return New(rapid.SampledFrom([]float64{
			0, math.Copysign(0, -1), math.MaxFloat64, -math.MaxFloat64, 5e-324, -5e-324, 1, -1, 709.9, -745,
		}).Draw(t, name))
	}
	return drawFloat(t, name, -1074, 1022)
}

func drawComplex(t *rapid.T, name string, low, high int) Complex {
	return Complex{drawFloat(t, name+".re", low, high), drawFloat(t, name+".im", low, high)}
}

// normal tells that the pair does not overlap: |Lo| <= ulp(Hi)/2.
func normal(a Float) bool { return a.Hi+a.Lo == a.Hi }

// Each operation is within Eps = 2^-104 of the exact result, by math/big.
func TestArithmeticAgainstExact(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		// Products and quotients stay within 2^±640: their rounding errors are normal numbers.
		a, b := drawFloat(t, "a", -320, 320), drawFloat(t, "b", -320, 320)
		if rapid.Bool().Draw(t, "close") {
			b = a.MulFloat(-1 + rapid.Float64Range(0, 1e-9).Draw(t, "gap"))
		}
		A, B := bigOf(a), bigOf(b)
		op := func() *big.Float { return new(big.Float).SetPrec(2500) }
		check := func(name string, got Float, want *big.Float) {
			w, _ := want.Float64()
			if d := miss(got, want); !(d <= Eps*math.Abs(w)) || !normal(got) {
				t.Fatalf("%s(%v, %v) = %v, want %v: off by %.3g", name, a, b, got, w, d)
			}
		}
		check("Add", a.Add(b), op().Add(A, B))
		check("Sub", a.Sub(b), op().Sub(A, B))
		check("Mul", a.Mul(b), op().Mul(A, B))
		check("MulFloat", a.MulFloat(b.Hi), op().Mul(A, big.NewFloat(b.Hi)))
		check("Div", a.Div(b), op().Quo(A, B))
		check("Sqrt", a.Abs().Sqrt(), op().Sqrt(op().Abs(A)))
		if a.Cmp(b) != A.Cmp(B) || a.Abs().Cmp(b.Abs()) != op().Abs(A).Cmp(op().Abs(B)) {
			t.Fatalf("Cmp(%v, %v)", a, b)
		}
		if back := FromRat(a.Rat()); back != a {
			t.Fatalf("FromRat(Rat(%v)) = %v", a, back)
		}
	})
}

// Division and square root keep their accuracy to the ends of the range, as long
// as the result is a normal number whose low word does not underflow.
func TestDivSqrtAtTheEndsOfTheRange(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		a, b := drawFloat(t, "a", -960, 1022), drawFloat(t, "b", -960, 1022)
		want := new(big.Float).SetPrec(2500).Quo(bigOf(a), bigOf(b))
		w, _ := want.Float64()
		got := a.Div(b)
		switch m := math.Abs(w); {
		case m > 0x1.fffffffffffffp1023:
			if !math.IsInf(got.Hi, 0) {
				t.Fatalf("%v/%v = %v, want an overflow", a, b, got)
			}
		case m > 0x1p-960 && m < 0x1p1023:
			if d := miss(got, want); !(d <= Eps*m) {
				t.Fatalf("%v/%v = %v: off by %.3g", a, b, got, d)
			}
		}
		want.Sqrt(new(big.Float).Abs(bigOf(a)))
		w, _ = want.Float64()
		if d := miss(a.Abs().Sqrt(), want); !(d <= Eps*w) {
			t.Fatalf("√%v: off by %.3g", a.Abs(), d)
		}
	})
}

// Complex products and quotients: (√2+1)·Eps < 2.5·Eps and 6·Eps of the modulus.
func TestComplexAgainstExact(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		a, b := drawComplex(t, "a", -150, 150), drawComplex(t, "b", -150, 150)
		// (p·q̄)/n in exact arithmetic
		ar, ai, br, bi := bigOf(a.Re), bigOf(a.Im), bigOf(b.Re), bigOf(b.Im)
		f := func() *big.Float { return new(big.Float).SetPrec(2500) }
		combine := func(s int, p, q, r, u *big.Float) *big.Float {
			x, y := f().Mul(p, q), f().Mul(r, u)
			if s < 0 {
				return x.Sub(x, y)
			}
			return x.Add(x, y)
		}
		check := func(name string, got Complex, re, im *big.Float, eps float64) {
			d := math.Hypot(miss(got.Re, re), miss(got.Im, im))
			if !(d <= eps*got.Abs()) {
				t.Fatalf("%s(%v, %v) = %v: off by %.3g", name, a, b, got, d)
			}
		}
		check("Mul", a.Mul(b), combine(-1, ar, br, ai, bi), combine(1, ar, bi, ai, br), 2.5*Eps)
		n := combine(1, br, br, bi, bi)
		re, im := combine(1, ar, br, ai, bi), combine(-1, ai, br, ar, bi)
		check("Div", a.Div(b), re.Quo(re, n), im.Quo(im, n), 6*Eps)
	})
}

func hasNaN(x ...Float) bool {
	for _, v := range x {
		if math.IsNaN(v.Hi) || math.IsNaN(v.Lo) {
			return true
		}
		if math.IsInf(v.Hi, 0) && v.Lo != 0 {
			return true
		}
	}
	return false
}

// No function makes a NaN of finite arguments, wherever the value or its limit exists.
func TestNoNaN(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		a, b := drawAny(t, "a"), drawAny(t, "b")
		z := Complex{a, b}
		s, c := SinCos(a)
		results := map[string][]Float{
			"Add": {a.Add(b), a.Sub(b)}, "Mul": {a.Mul(b), a.MulFloat(b.Hi)},
			"Exp": {Exp(a), Expm1(a)}, "Log": {Log(a.Abs()), Log1p(a.Abs())}, "Sqrt": {a.Abs().Sqrt()},
			"SinCos": {s, c}, "Atan2": {Atan2(a, b)}, "Hypot": {Hypot(a, b)}, "Ldexp": {a.Ldexp(900), a.Ldexp(-900)},
			"CExp": parts(CExp(z)), "CExpm1": parts(CExpm1(z)), "CLog": parts(CLog(z)),
			"CLog1p": parts(CLog1p(z)), "CSqrt": parts(CSqrt(z)),
		}
		if b.Hi != 0 {
			results["Div"] = append(parts(Real(a).Div(Real(b))), a.Div(b))
			results["Div"] = append(results["Div"], parts(C(1, 1).Div(z))...)
		}
		for name, r := range results {
			if hasNaN(r...) {
				t.Fatalf("%s of %v, %v = %v", name, a, b, r)
			}
		}
	})
}

func TestInfinitiesAndZeros(t *testing.T) {
	inf, nan := math.Inf(1), math.NaN()
	Inf := New(inf)
	same := func(got Float, want float64) bool {
		return got.Lo == 0 && (got.Hi == want && math.Signbit(got.Hi) == math.Signbit(want) || got.Hi != got.Hi && want != want)
	}
	for i, c := range []struct {
		got  Float
		want float64
	}{
		{Inf.Add(One), inf}, {One.Sub(Inf), -inf}, {Inf.Sub(Inf), nan}, {New(math.MaxFloat64).Add(New(math.MaxFloat64)), inf},
		{Inf.Mul(New(-2)), -inf}, {New(1e200).Mul(New(-1e200)), -inf}, {New(1e200).MulFloat(1e200), inf}, {Inf.Mul(Zero), nan},
		{One.Div(Zero), inf}, {Zero.Div(Zero), nan}, {One.Div(Inf), 0}, {Inf.Div(Two), inf}, {New(1e300).Div(New(1e-300)), inf},
		{New(1e-300).Div(New(1e300)), 0}, {Inf.Sqrt(), inf}, {Zero.Sqrt(), 0}, {New(-1).Sqrt(), nan},
		{One.Ldexp(5000), inf}, {One.Ldexp(-5000), 0},
		{Exp(Inf), inf}, {Exp(New(-inf)), 0}, {Exp(New(710)), inf}, {Exp(New(-800)), 0}, {Expm1(New(-800)), -1}, {Expm1(New(800)), inf},
		{Exp(New(nan)), nan}, {Exp(Zero), 1}, {Expm1(Zero), 0}, {Expm1(New(1e-300)), 1e-300},
		{Log(Zero), -inf}, {Log(New(-1)), nan}, {Log(Inf), inf}, {Log(One), 0}, {Log1p(New(-1)), -inf}, {Log1p(New(-2)), nan}, {Log1p(Zero), 0},
		{Atan2(Zero, One), 0}, {Atan2(New(math.Copysign(0, -1)), One), math.Copysign(0, -1)}, {Atan2(One, Inf), 0},
		{Hypot(Inf, New(nan)), inf}, {CExp(C(1000, 0)).Im, 0}, {CExp(C(1000, 0)).Re, inf}, {CExp(C(-1000, 1)).Re, 0},
		{CLog(Complex{}).Re, -inf}, {CSqrt(Complex{}).Re, 0},
	} {
		if !same(c.got, c.want) {
			t.Errorf("case %d: got %v, want %v", i, c.got, c.want)
		}
	}
	for _, c := range []struct {
		y, x     float64
		quarters float64
	}{
		{0, -1, 4}, {math.Copysign(0, -1), -1, -4}, {1, 0, 2}, {-1, 0, -2}, {inf, inf, 1}, {inf, -inf, 3}, {-inf, 1, -2}, {1, -inf, 4},
	} {
		if got, want := Atan2(New(c.y), New(c.x)), Pi.Ldexp(-2).MulFloat(c.quarters); got != want {
			t.Errorf("Atan2(%v, %v) = %v, want %v", c.y, c.x, got, want)
		}
	}
	if z := CSqrt(C(-4, 0)); z != C(0, 2) {
		t.Errorf("√−4 = %v", z)
	}
	if z := CSqrt(C(-4, math.Copysign(0, -1))); z.Im.Hi != -2 {
		t.Errorf("√(−4 − 0j) = %v", z)
	}
}

// Inverse pairs and addition theorems tie the functions to each other.
func TestIdentities(t *testing.T) {
	near := func(a, b Float, tol float64) error {
		if d := math.Abs(a.Sub(b).Float64()); !(d <= tol) {
			return fmt.Errorf("%v and %v differ by %.3g, tolerance %.3g", a, b, d, tol)
		}
		return nil
	}
	rapid.Check(t, func(t *rapid.T) {
		x := drawFloat(t, "x", -60, 8)
		y := drawFloat(t, "y", -60, 8)
		ax := math.Abs(x.Hi)
		s, c := SinCos(x)
		z := Complex{x, y}
		w := CSqrt(z)
		w = w.Mul(w)
		back := CLog(CExp(Complex{x, y.Ldexp(-8)})) // |Im| <= 2 < π
		for _, err := range []error{
			// log(e^x): e^x errs by 2^-98 relative, an absolute 2^-98 of the logarithm.
			near(Log(Exp(x)), x, 0x1p-98*(1+ax)),
			// log1p(expm1 x), x < 0: 2^-98·|e^x−1| divided by e^x, and 2^-98·|x|, which is less.
			near(Log1p(Expm1(x.Abs().Neg().Ldexp(-6))), x.Abs().Neg().Ldexp(-6), 0x1p-97*math.Expm1(ax/64)),
			near(s.Mul(s).Add(c.Mul(c)), One, 0x1p-97),
			// The square doubles the 2^-100 of the root, in norm.
			near(w.Re, x, 0x1p-98*z.Abs()),
			near(w.Im, y, 0x1p-98*z.Abs()),
			near(back.Re, x, 0x1p-96*(1+ax)),
			near(back.Im, y.Ldexp(-8), 0x1p-96),
		} {
			if err != nil {
				t.Fatalf("x = %v, y = %v: %v", x, y, err)
			}
		}
		// The functions of a conjugate are bitwise conjugate.
		for _, f := range []func(Complex) Complex{CExp, CExpm1, CLog, CLog1p, CSqrt} {
			if f(z.Conj()) != f(z).Conj() {
				t.Fatalf("not symmetric at %v", z)
			}
		}
	})
}

func BenchmarkExp(b *testing.B) {
	for b.Loop() {
		Exp(Float{1.234, 1e-18})
	}
}

func BenchmarkCExpm1(b *testing.B) {
	z := Complex{Float{-0.2, 1e-18}, New(0.7)}
	for b.Loop() {
		CExpm1(z)
	}
}

func BenchmarkComplexMul(b *testing.B) {
	z, w := C(0.6, 0.8), C(0.6, 0.8)
	for b.Loop() {
		z = z.Mul(w)
	}
}
