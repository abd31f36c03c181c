package sdomain_test

import (
	"errors"
	"math"
	"math/big"
	"testing"

	"pgregory.net/rapid"

	"steadytick/internal/dd"
	"steadytick/internal/exact"
	"steadytick/sdomain"
)

func must(t testing.TB) func(sdomain.Model, error) sdomain.Model {
	return func(m sdomain.Model, err error) sdomain.Model {
		t.Helper()
		if err != nil {
			t.Fatal(err)
		}
		return m
	}
}

func polynomials(t testing.TB, num, den []*big.Rat) sdomain.Model {
	t.Helper()
	return must(t)(sdomain.FromPolynomials(num, den))
}

func equalRats(a []*big.Rat, b ...string) bool {
	if len(a) != len(b) {
		return false
	}
	for i := range a {
		if a[i].Cmp(rat(b[i])) != 0 {
			return false
		}
	}
	return true
}

func TestDeadTimeRules(t *testing.T) {
	ok := must(t)
	one := sdomain.Const(rat("1"))
	short := ok(sdomain.Exp(rat("0.01")))
	long := ok(sdomain.Exp(rat("0.02")))
	lag := polynomials(t, rats("1"), rats("1", "1"))

	var delay *sdomain.DelayError
	if _, err := sdomain.Exp(rat("-0.01")); !errors.As(err, &delay) || delay.Op != "dead time" {
		t.Errorf("negative dead time gave %v", err)
	}
	for _, q := range []sdomain.Model{long, one, lag} {
		if _, err := short.Add(q); !errors.As(err, &delay) || delay.Op != "sum" {
			t.Errorf("sum of different dead times gave %v", err)
		}
		if _, err := q.Sub(short); !errors.As(err, &delay) {
			t.Errorf("difference of different dead times gave %v", err)
		}
	}
	if _, err := lag.Div(short); !errors.As(err, &delay) || delay.Op != "division" {
		t.Errorf("division by a dead time gave %v", err)
	}
	if _, err := short.Pow(-1); !errors.As(err, &delay) {
		t.Errorf("inverse of a dead time gave %v", err)
	}
	if m := ok(short.Mul(long)); m.Delay.Cmp(rat("0.03")) != 0 {
		t.Errorf("product: dead time %s", m.Delay.RatString())
	}
	if m := ok(short.Pow(3)); m.Delay.Cmp(rat("0.03")) != 0 {
		t.Errorf("power: dead time %s", m.Delay.RatString())
	}
	if m := ok(ok(short.Mul(lag)).Add(short)); m.Delay.Cmp(rat("0.01")) != 0 {
		t.Errorf("sum of equal dead times: %s", m.Delay.RatString())
	}
	if m := ok(sdomain.Const(new(big.Rat)).Add(short)); m.Delay.Cmp(rat("0.01")) != 0 {
		t.Errorf("0 + dead time: %s", m.Delay.RatString())
	}
	if m := ok(short.Sub(short)); !m.Ratio.IsZero() || m.Delay.Sign() != 0 {
		t.Errorf("difference with itself: %v", m)
	}
	if _, err := short.WithDelay(rat("-0.02")); !errors.As(err, &delay) {
		t.Errorf("dead time below zero gave %v", err)
	}
	if m := ok(short.WithDelay(rat("-0.01"))); m.Delay.Sign() != 0 {
		t.Errorf("dead time taken away: %s", m.Delay.RatString())
	}
	var zero sdomain.Model
	if _, err := one.Div(zero); !errors.Is(err, exact.ErrZeroDivision) {
		t.Errorf("division by zero gave %v", err)
	}
	var size *exact.SizeError
	if _, err := ok(lag.Pow(100)).Mul(lag); !errors.As(err, &size) {
		t.Errorf("order 101 gave %v", err)
	}
}

// e^(−2s)/(s(1+s)): (1/s)·(1 − s + s² − …)·(1 − 2s + 2s² − 4/3·s³ + …), multiplied by hand:
// 1/s − 3 + 5s − 19/3·s².
func TestLaurentWithDeadTime(t *testing.T) {
	ok := must(t)
	m := ok(polynomials(t, rats("1"), rats("1", "1", "0")).Mul(ok(sdomain.Exp(rat("2")))))
	start, c := m.Laurent(4)
	if start != -1 || !equalRats(c, "1", "-3", "5", "-19/3") {
		t.Errorf("start %d, %v", start, c)
	}
}

func TestGainsAndDegrees(t *testing.T) {
	for _, c := range []struct {
		num, den       []*big.Rat
		gain           string
		order, degree  int
		proper, strict bool
	}{
		{rats("10"), rats("1", "1", "0"), "10", 1, 2, true, true},       // 10/(s(s+1))
		{rats("10", "10"), rats("1", "0", "0"), "10", 2, 1, true, true}, // 10(s+1)/s²
		{rats("3", "6"), rats("1", "4"), "3/2", 0, 0, true, false},
		{rats("2", "0"), rats("1", "4"), "0", 0, 0, true, false},
		{rats("1", "0", "1"), rats("1", "4"), "1/4", 0, -1, false, false},
		{rats("0", "0"), rats("1", "4"), "0", 0, 0, true, true},
	} {
		m := polynomials(t, c.num, c.den)
		gain, order := m.DCGain()
		if gain.Cmp(rat(c.gain)) != 0 || order != c.order {
			t.Errorf("%s: gain %s order %d", m.Ratio.Format("s"), gain.RatString(), order)
		}
		if m.RelativeDegree() != c.degree || m.Proper() != c.proper || m.StrictlyProper() != c.strict {
			t.Errorf("%s: relative degree %d, proper %v, strictly %v", m.Ratio.Format("s"), m.RelativeDegree(), m.Proper(), m.StrictlyProper())
		}
	}
	if _, err := sdomain.FromPolynomials(rats("1"), nil); !errors.Is(err, exact.ErrZeroDivision) {
		t.Errorf("empty denominator gave %v", err)
	}
}

// Kv = 10 of 10/(s(s+1)) and Ka = 10 of 10(s+1)/s²: textbook values (Ogata, Modern Control
// Engineering, static error constants; from memory).
func TestErrorConstants(t *testing.T) {
	c := polynomials(t, rats("10"), rats("1", "1", "0")).ErrorConstants()
	if c.Type != 1 || !math.IsInf(c.Position.Hi, 1) || c.Velocity != dd.New(10) || c.Acceleration != dd.Zero {
		t.Errorf("10/(s(s+1)): %v", c)
	}
	c = polynomials(t, rats("-10", "-10"), rats("1", "0", "0")).ErrorConstants()
	if c.Type != 2 || !math.IsInf(c.Position.Hi, -1) || !math.IsInf(c.Velocity.Hi, -1) || c.Acceleration != dd.New(-10) {
		t.Errorf("-10(s+1)/s²: %v", c)
	}
}

func TestZerosPoles(t *testing.T) {
	pair := func(re, im string) [2]*big.Rat { return [2]*big.Rat{rat(re), rat(im)} }
	// 3(s+2)/(s·((s+1)²+4)) = (3s+6)/(s³+2s²+5s)
	got := must(t)(sdomain.FromZerosPoles([][2]*big.Rat{pair("-2", "0")},
		[][2]*big.Rat{pair("-1", "2"), pair("0", "0"), pair("-1", "-2")}, rat("3")))
	want := polynomials(t, rats("3", "6"), rats("1", "2", "5", "0"))
	if !got.Ratio.NumPoly().Equal(want.Ratio.NumPoly()) || !got.Ratio.DenPoly().Equal(want.Ratio.DenPoly()) {
		t.Errorf("got %s, want %s", got.Ratio.Format("s"), want.Ratio.Format("s"))
	}
	var conj *sdomain.ConjugateError
	_, err := sdomain.FromZerosPoles(nil, [][2]*big.Rat{pair("-1", "2"), pair("-1", "-2"), pair("-1", "2")}, rat("3"))
	if !errors.As(err, &conj) || conj.What != "pole" {
		t.Errorf("a pole without conjugate gave %v", err)
	}
	_, err = sdomain.FromZerosPoles(nil, [][2]*big.Rat{pair("-1", "2"), pair("-1", "2"), pair("-1", "-2")}, rat("3"))
	if !errors.As(err, &conj) {
		t.Errorf("one conjugate for two poles gave %v", err)
	}
	_, err = sdomain.FromZerosPoles([][2]*big.Rat{pair("-1", "2"), pair("-1.000001", "-2")}, nil, rat("3"))
	if !errors.As(err, &conj) || conj.What != "zero" {
		t.Errorf("a zero without conjugate gave %v", err)
	}
}

// drawModel draws a model of small order as product of a few written factors.
func drawModel(t *rapid.T, name string) sdomain.Model {
	n := rapid.SliceOfN(rapid.Int64Range(-9, 9), 1, 4).Draw(t, name+" num")
	d := rapid.SliceOfN(rapid.Int64Range(-9, 9), 1, 4).Draw(t, name+" den")
	n[0], d[0] = 3, 2
	if rapid.Bool().Draw(t, name+" integrator") {
		d = append(d, 0)
	}
	toRats := func(v []int64) (out []*big.Rat) {
		for _, x := range v {
			out = append(out, big.NewRat(x, 1))
		}
		return out
	}
	m, err := sdomain.FromPolynomials(toRats(n), toRats(d))
	if err != nil {
		t.Fatal(err)
	}
	m, err = m.WithDelay(big.NewRat(rapid.Int64Range(0, 30).Draw(t, name+" delay"), 10))
	if err != nil {
		t.Fatal(err)
	}
	return m
}

func TestLaurentOfProduct(t *testing.T) {
	const n = 5
	rapid.Check(t, func(t *rapid.T) {
		a, b := drawModel(t, "a"), drawModel(t, "b")
		p, err := a.Mul(b)
		if err != nil {
			t.Fatal(err)
		}
		sa, ca := a.Laurent(n)
		sb, cb := b.Laurent(n)
		sp, cp := p.Laurent(n)
		if sp != sa+sb {
			t.Fatal("start")
		}
		for k := range cp {
			sum := new(big.Rat)
			for j := 0; j <= k; j++ {
				sum.Add(sum, new(big.Rat).Mul(ca[j], cb[k-j]))
			}
			if sum.Cmp(cp[k]) != 0 {
				t.Fatalf("term %d: %s, want %s", k, cp[k].RatString(), sum.RatString())
			}
		}
	})
}

// TF evaluated in double-double at a rational point, against the exact value.
func TestTFAgainstExactValue(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		a, b := drawModel(t, "a"), drawModel(t, "b")
		m, err := a.Mul(b)
		if err != nil {
			t.Fatal(err)
		}
		g, err := m.TF()
		if err != nil {
			t.Fatal(err)
		}
		if g.DeadTime != dd.FromRat(m.Delay) || g.Period.Sign() != 0 || g.Ticks != 0 {
			t.Fatalf("delays of %v", g)
		}
		x := big.NewRat(rapid.Int64Range(-40, 40).Draw(t, "x"), 7)
		want, ok := m.Ratio.Eval(x)
		if !ok || x.Sign() == 0 {
			return
		}
		xd := dd.Real(dd.FromRat(x))
		v, size := g.Num.Eval(xd), 0.0
		for k, c := range g.Num {
			size += c.Abs().Float64() * math.Pow(math.Abs(xd.Re.Hi), float64(k))
		}
		// Each operation and each rounded value err by at most 2^−104; about 4 for each of
		// at most 8 numerator terms, relative to Σ|c||x|^k; a pole p moves x − p by 2^−105·|p|.
		tol := 32 * dd.Eps * size
		den := 1.0
		for _, p := range g.Poles {
			d := xd.Sub(p)
			v = v.Div(d)
			den *= d.Abs()
			tol += 16 * dd.Eps * size * (1 + p.Abs()/d.Abs())
		}
		for range g.OriginPoles {
			v = v.Div(xd)
			den *= xd.Abs()
		}
		for range g.OriginZeros {
			v = v.Mul(xd)
			den /= xd.Abs()
		}
		diff := v.Sub(dd.Real(dd.FromRat(want)))
		if !(diff.Abs() <= tol/den) {
			t.Fatalf("%s at %s: %v, want %s (off by %g, tolerance %g)", m.Ratio.Format("s"), x.RatString(), v.Complex128(), want.RatString(), diff.Abs(), tol/den)
		}
	})
}
