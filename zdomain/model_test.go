package zdomain_test

import (
	"errors"
	"math"
	"math/big"
	"testing"

	"pgregory.net/rapid"

	"steadytick/internal/dd"
	"steadytick/internal/exact"
	"steadytick/zdomain"
)

func rat(s string) *big.Rat {
	x, ok := new(big.Rat).SetString(s)
	if !ok {
		panic("not a number: " + s)
	}
	return x
}

// ascending returns a polynomial from its coefficients in ascending powers.
func ascending(s ...string) exact.Poly {
	c := make([]*big.Rat, len(s))
	for i := range s {
		c[i] = rat(s[i])
	}
	return exact.NewPoly(c...)
}

func fromZ(t testing.TB, num, den exact.Poly, period string) zdomain.Model {
	t.Helper()
	r, err := exact.FromPolys(num, den)
	if err != nil {
		t.Fatal(err)
	}
	m, err := zdomain.FromZ(r, rat(period))
	if err != nil {
		t.Fatal(err)
	}
	return m
}

// z² − 1.8z + 0.8 = (z − 1)(z − 0.8): an integrator, and δ = −0.2/T.
func TestIntegratorFoundInDecimals(t *testing.T) {
	m := fromZ(t, ascending("1"), ascending("0.8", "-1.8", "1"), "0.01")
	if m.TF.OriginPoles != 1 || len(m.TF.Poles) != 1 || m.TF.Poles[0] != dd.C(-20, 0) {
		t.Errorf("poles at the origin %d, others %v", m.TF.OriginPoles, m.TF.Poles)
	}
	if m.Period.Cmp(rat("0.01")) != 0 || m.TF.Period != dd.FromRat(rat("0.01")) || m.TF.Ticks != 0 {
		t.Errorf("period %v, %v", m.Period, m.TF.Period)
	}
}

// Hold equivalent of 1/s²: T²/2·(z+1)/(z−1)² (check value, any T) is (1 + δT/2)/δ².
func TestDoubleIntegrator(t *testing.T) {
	m := fromZ(t, ascending("0.02", "0.02"), ascending("1", "-2", "1"), "0.2")
	if m.TF.OriginPoles != 2 || len(m.TF.Poles) != 0 || len(m.TF.Num) != 2 ||
		m.TF.Num[0] != dd.One || m.TF.Num[1] != dd.FromRat(rat("0.1")) {
		t.Errorf("got %v", m.TF)
	}
}

// Hold equivalent of 10(s+1)/s², T = 0.1 s: (1.05z − 0.95)/(z−1)² has Ka = 10 (check value).
func TestErrorConstants(t *testing.T) {
	m := fromZ(t, ascending("-0.95", "1.05"), ascending("1", "-2", "1"), "0.1")
	c := m.ErrorConstants()
	if c.Type != 2 || c.Acceleration != dd.New(10) || !math.IsInf(c.Velocity.Hi, 1) || !math.IsInf(c.Position.Hi, 1) {
		t.Errorf("got %v", c)
	}
	m.Exact = nil // from the numbers, every value here is exact in double-double or within 2 roundings
	d := m.ErrorConstants()
	if diff := d.Acceleration.Sub(c.Acceleration).Abs().Float64(); d.Type != 2 || !(diff <= 10*2*dd.Eps) {
		t.Errorf("from the numbers: %v", d)
	}
}

// The denominator of the hold equivalent of 1/(s(s+1)) at T = 1 ms, stored in float32, is not an integrator
// any more: a pole at z = 1.00005645, coefficient sum −5.96e-8 (check value).
func TestIntegratorLostInFloat32(t *testing.T) {
	e := math.Exp(-1e-3)
	a1, a0 := new(big.Rat).SetFloat64(float64(float32(-1-e))), new(big.Rat).SetFloat64(float64(float32(e)))
	sum := new(big.Rat).Add(a1, a0)
	sum.Add(sum, big.NewRat(1, 1))
	if f, _ := sum.Float64(); !(math.Abs(f+5.96e-8) <= 0.005e-8) { // printed with three digits
		t.Errorf("sum %g", f)
	}
	m := fromZ(t, ascending("1"), exact.NewPoly(a0, a1, big.NewRat(1, 1)), "0.001")
	if m.TF.OriginPoles != 0 || len(m.TF.Poles) != 2 {
		t.Fatalf("got %v", m.TF)
	}
	z := 1 + 0.001*math.Max(m.TF.Poles[0].Re.Hi, m.TF.Poles[1].Re.Hi)
	if !(math.Abs(z-1.00005645) <= 0.5e-8) { // printed with eight decimals
		t.Errorf("pole at z = %.10f", z)
	}
}

func TestRefusals(t *testing.T) {
	one := exact.Const(rat("1"))
	for _, p := range []string{"0", "-1", "1e-400", "1e400"} {
		if _, err := zdomain.FromZ(one, rat(p)); !errors.Is(err, zdomain.ErrPeriod) {
			t.Errorf("period %s gave %v", p, err)
		}
		if _, err := zdomain.FromDelta(one, rat(p)); !errors.Is(err, zdomain.ErrPeriod) {
			t.Errorf("period %s gave %v", p, err)
		}
	}
	r, err := exact.FromPolys(ascending("1"), exact.IntPoly(1, 1).Pow(101))
	if err != nil {
		t.Fatal(err)
	}
	var size *exact.SizeError
	if _, err := zdomain.FromZ(r, rat("1")); !errors.As(err, &size) {
		t.Errorf("order 101 gave %v", err)
	}
}

// The model in δ has the value of the function in z, and a root z of the
// denominator is found at δ = (z−1)/T to every digit, z = 0 and z = 1 included.
func TestFromZKeepsValuesAndRoots(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		period := big.NewRat(rapid.Int64Range(1, 1000).Draw(t, "period"), 1_000_000)
		one := big.NewRat(1, 1)
		den, count := exact.IntPoly(1), map[string]int{}
		var roots []*big.Rat
		for range rapid.IntRange(1, 5).Draw(t, "order") {
			z := big.NewRat(rapid.Int64Range(-12, 12).Draw(t, "root"), 10)
			roots = append(roots, z)
			count[z.String()]++
			den = den.Mul(exact.NewPoly(new(big.Rat).Neg(z), one))
		}
		r, err := exact.FromPolys(exact.IntPoly(rapid.Int64Range(1, 9).Draw(t, "c"), 1), den)
		if err != nil {
			t.Fatal(err)
		}
		m, err := zdomain.FromZ(r, period)
		if err != nil {
			t.Fatal(err)
		}
		if m.TF.OriginPoles != count["1/1"] {
			t.Fatalf("%d integrators, want %d", m.TF.OriginPoles, count["1/1"])
		}
		for _, z := range roots {
			delta := new(big.Rat).Sub(z, one)
			if delta.Sign() == 0 {
				continue
			}
			want := dd.FromRat(delta.Quo(delta, period))
			n := 0
			for _, p := range m.TF.Poles {
				// Both are the same rational rounded, to 2^−106 and 2^−107.
				if p.Im.Sign() == 0 && p.Re.Sub(want).Abs().Float64() <= dd.Eps/2*want.Abs().Float64() {
					n++
				}
			}
			if n != count[z.String()] {
				t.Fatalf("root %s found %d times, want %d", z, n, count[z.String()])
			}
		}
		z := big.NewRat(rapid.Int64Range(-50, 50).Draw(t, "z"), 7)
		want, ok1 := r.Eval(z)
		x := new(big.Rat).Sub(z, one)
		got, ok2 := m.Exact.Eval(x.Quo(x, period))
		if ok1 != ok2 || ok1 && got.Cmp(want) != 0 {
			t.Fatalf("value at z = %s: %v, want %v", z, got, want)
		}
	})
}
