package sim

import (
	"context"
	"math"
	"math/big"
	"testing"

	"steadytick/internal/exact"
	"steadytick/sdomain"
	"steadytick/zdomain"
)

func rat(s string) *big.Rat {
	r, ok := new(big.Rat).SetString(s)
	if !ok {
		panic("bad number " + s)
	}
	return r
}

func rats(list ...string) []*big.Rat {
	var out []*big.Rat
	for _, s := range list {
		out = append(out, rat(s))
	}
	return out
}

// model is num/den in descending powers of s, with a dead time.
func model(t testing.TB, num, den []*big.Rat, dead string) sdomain.Model {
	t.Helper()
	m, err := sdomain.FromPolynomials(num, den)
	if err != nil {
		t.Fatal(err)
	}
	m.Delay = rat(dead)
	return m
}

// inZ is num/den in ascending powers of z at period T.
func inZ(t testing.TB, num, den []*big.Rat, T string) zdomain.Model {
	t.Helper()
	r, err := exact.FromPolys(exact.NewPoly(num...), exact.NewPoly(den...))
	if err != nil {
		t.Fatal(err)
	}
	m, err := zdomain.FromZ(r, rat(T))
	if err != nil {
		t.Fatal(err)
	}
	return m
}

func one() []*big.Rat { return rats("1") }

func unit(t testing.TB) sdomain.Model { return model(t, one(), one(), "0") }

func plantOf(t testing.TB, p, h sdomain.Model) *Continuous {
	t.Helper()
	s, err := NewPlant(p, h)
	if err != nil {
		t.Fatal(err)
	}
	return s
}

func controllerOf(t testing.TB, T string, terms ...Term) *Controller {
	t.Helper()
	c, err := NewController(ControllerConfig{Period: rat(T), Terms: terms})
	if err != nil {
		t.Fatal(err)
	}
	return c
}

func run(t testing.TB, cfg Config) *Trace {
	t.Helper()
	out, err := Run(context.Background(), cfg)
	if err != nil {
		t.Fatal(err)
	}
	return out
}

func near(t testing.TB, what string, got, want, tol float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tol) {
		t.Errorf("%s = %.17g, want %.17g, off by %.3g, tolerance %.3g", what, got, want, got-want, tol)
	}
}

// valueAt finds the point at time t.
func valueAt(t testing.TB, tr *Trace, list []float64, at float64) float64 {
	t.Helper()
	for i, v := range tr.T {
		if math.Abs(v-at) < 1e-9 {
			return list[i]
		}
	}
	t.Fatalf("no point at %g", at)
	return 0
}

// Deadbeat control of 1/(s(s+1)) at T = 1 s: a known textbook example, recomputed with 50-digit
// arithmetic; nine digits are given, so 5e-9 of the size.
func TestDeadbeat(t *testing.T) {
	plant := plantOf(t, model(t, one(), rats("1", "1", "0"), "0"), unit(t))
	e1 := math.Exp(-1)
	// Zero-cancelling: D = (1/P)·1/(z−1), P the hold equivalent.
	num := rats("0.36787944117144232160", "-1.36787944117144232160", "1")
	den := exact.NewPoly(rats("0.26424111765711535681", "0.36787944117144232160")...).Mul(exact.NewPoly(rats("-1", "1")...))
	cancel := controllerOf(t, "1", Term{Model: inZ(t, num, den, "1"), Weight: 1})
	tr := run(t, Config{
		System: plant, Reference: Step(1), Ticks: 6,
		Tasks: []Task{{Period: rat("1"), Controller: cancel, Reads: []int{OutputM}, Drives: []int{InputEffort}}},
	})
	for k, want := range []float64{2.71828183, -2.95249244, 2.12072167} {
		near(t, "zero-cancelling u", tr.TickU[k], want, 5e-9)
	}
	near(t, "y(1.5)", valueAt(t, tr, tr.Y, 1.5), 1.36156025, 5e-9)
	near(t, "y(2.5)", valueAt(t, tr, tr.Y, 2.5), 0.740297843, 5e-10)
	for k := 1; k <= 6; k++ {
		near(t, "y at the ticks", tr.TickY[k], 1, 1e-13) // a handful of operations of size 3
	}
	// Ripple-free: D = u(z)/(1−y(z)) with u = u0 + u1/z, y = y1/z + (1−y1)/z²,
	// u0 = 1/(1−e⁻¹), u1 = 1−u0... in powers of z: (u0 z − u0 e⁻¹)/(z + 1 − y1).
	u0 := 1 / (1 - e1)
	y1 := u0 * e1
	f := func(v float64) *big.Rat { return new(big.Rat).SetFloat64(v) }
	free := controllerOf(t, "1", Term{
		Model:  inZ(t, []*big.Rat{f(-u0 * e1), f(u0)}, []*big.Rat{f(1 - y1), rat("1")}, "1"),
		Weight: 1,
	})
	tr = run(t, Config{
		System: plant, Reference: Step(1), Ticks: 5,
		Tasks: []Task{{Period: rat("1"), Controller: free, Reads: []int{OutputM}, Drives: []int{InputEffort}}},
	})
	near(t, "u0", tr.TickU[0], 1.58197671, 5e-9)
	near(t, "u1", tr.TickU[1], -0.581976707, 5e-10)
	near(t, "y(1)", tr.TickY[1], 0.581976707, 5e-10)
	for i, at := range tr.T {
		if at >= 2 {
			near(t, "no ripple in y", tr.Y[i], 1, 1e-14*10) // coefficients rounded once
			near(t, "no ripple in u", tr.U[i], 0, 1e-14*10)
		}
	}
}
