package lti

import (
	"math"
	"math/cmplx"
	"testing"
	"time"

	"steadytick/internal/dd"
)

// TestLambertPoles: L = k·e^(−s)/s has the poles s = W_m(−k), W the Lambert function
// (Corless et al., "On the Lambert W function", 1996; from memory). Values for k = 1/2:
// mpmath lambertw(-0.5, m), m = 0, −2, −3, 20 digits.
func TestLambertPoles(t *testing.T) {
	p, err := ClosedPoles(TF{Num: ascending(0.5), OriginPoles: 1, DeadTime: dd.One}, 64)
	if err != nil || !p.Complete || len(p.X) != 64 || p.Unstable != 0 {
		t.Fatalf("%d poles, complete %v, unstable %d, %v", len(p.X), p.Complete, p.Unstable, err)
	}
	for i, want := range lambertHalf {
		if got := p.Equivalent[2*i]; !(cmplx.Abs(got-want) <= 1e-15*cmplx.Abs(want)) {
			t.Errorf("pole %d: %v, want %v", i, got, want)
		}
	}
}

// TestDeadTimeMargins: k·e^(−sτ)/s: crossover k, phase margin π/2 − kτ, largest gain π/(2τ).
func TestDeadTimeMargins(t *testing.T) {
	for _, c := range []struct{ k, tau float64 }{{1, 0.5}, {1e6, 1e-6}, {1e-3, 100}} {
		m, err := Margins(TF{Num: ascending(c.k), OriginPoles: 1, DeadTime: dd.New(c.tau)}, true)
		if err != nil {
			t.Fatal(err)
		}
		wantNear(t, "crossover", m.Crossover, c.k, 1e-15)
		wantNear(t, "phase margin", m.PhaseMargin, math.Pi/2-c.k*c.tau, 1e-14)
		wantNear(t, "delay margin", m.DelayMargin, math.Pi/2/c.k-c.tau, 1e-14)
		wantNear(t, "gain margin", m.GainMargin, math.Pi/2/(c.k*c.tau), 1e-14)
	}
}

// TestTicksCascade: an integrator with d ticks of delay, (z−1)·z^d + g = 0, is
// stable for g < 2·sin(π/(2(2d+1))) (Levin and May 1976, from memory; the crossing is
// at ωT = π/(2d+1), where |z − 1| = 2·sin(ωT/2)).
func TestTicksCascade(t *testing.T) {
	T := num(t, "1e-4")
	for _, d := range []int{1, 2, 10, 62, 63, 64, 200, 10000} {
		limit := 2 * math.Sin(math.Pi/float64(2*(2*d+1)))
		for _, f := range []float64{0.5, 1 - 1e-9, 1 + 1e-9, 1.5} {
			l := TF{Num: ascending(f * limit / 1e-4), OriginPoles: 1, Period: T, Ticks: d}
			n, marginal, err := UnstableCount(l)
			if err != nil || marginal || (n > 0) != (f > 1) {
				t.Errorf("%d ticks, gain factor %g: %d unstable, marginal %v, %v", d, f, n, marginal, err)
			}
			p, err := ClosedPoles(l, 64)
			if err != nil || !p.Complete || p.Unstable != n {
				t.Errorf("%d ticks, gain factor %g: %d poles, %d unstable, want %d; complete %v, %v", d, f, len(p.X), p.Unstable, n, p.Complete, err)
			}
		}
		m, err := Margins(TF{Num: ascending(0.5 * limit / 1e-4), OriginPoles: 1, Period: T, Ticks: d}, true)
		if err != nil {
			t.Fatal(err)
		}
		// 0.5·limit/1e-4 is good to two roundings
		wantNear(t, "gain margin", m.GainMargin, 2, 1e-14)
	}
}

// TestTenThousandTicks: 10 000 ticks of delay against dead time of the same length and
// T/2 more for the hold: poles and margins agree to (sT)², s the pole: the hold is
// e^(−sT/2) times 1 + (sT)²/24.
func TestTenThousandTicks(t *testing.T) {
	T := num(t, "1e-4")
	sampled := heldServo(0.6, T, 10000)
	continuous := servo(0.6)
	continuous.DeadTime = num(t, "1.00005")
	start := time.Now()
	a, err := Analyze(sampled, 64)
	took := time.Since(start)
	if err != nil || !a.Poles.Complete || !a.Stable || len(a.Poles.X) != 64 {
		t.Fatalf("%d poles, complete %v, stable %v, %v", len(a.Poles.X), a.Poles.Complete, a.Stable, err)
	}
	if took > hang {
		t.Errorf("took %v", took)
	}
	c, err := Analyze(continuous, 64)
	if err != nil {
		t.Fatal(err)
	}
	for i := range 10 {
		s := c.Poles.Equivalent[i]
		x := cmplx.Abs(s) * 1e-4
		if got := a.Poles.Equivalent[i]; !(cmplx.Abs(got-s) <= x*x*cmplx.Abs(s)) {
			t.Errorf("pole %d: %v, continuous %v", i, got, s)
		}
	}
	wantNear(t, "phase margin", a.Margins.PhaseMargin, c.Margins.PhaseMargin, 1e-9) // (0.5·1e-4)²
	wantNear(t, "gain margin", a.Margins.GainMargin, c.Margins.GainMargin, 1e-8)    // (1.3·1e-4)²
	wantNear(t, "modulus margin", a.Margins.Modulus, c.Margins.Modulus, 1e-8)
}

// TestNeutral: dead time with |L(j∞)| >= 1 is unstable by rule, below 1 it need not be.
func TestNeutral(t *testing.T) {
	l := func(c float64) TF {
		return TF{Num: ascending(2*c, c), Poles: reals(-3), DeadTime: dd.New(0.25)} // c·(s+2)/(s+3)
	}
	if n, _, err := UnstableCount(l(1.01)); err != nil || n == 0 {
		t.Errorf("c = 1.01: %d unstable, %v", n, err)
	}
	n, marginal, err := UnstableCount(l(0.99))
	if err != nil || n != 0 || marginal {
		t.Errorf("c = 0.99: %d unstable, marginal %v, %v", n, marginal, err)
	}
	m, err := Margins(l(0.5), true)
	if err != nil || !(m.GainMargin <= 2) || !(m.Modulus >= 0.5-1e-12 && m.Modulus <= 0.51) {
		t.Errorf("gain margin %g, modulus %g, %v", m.GainMargin, m.Modulus, err)
	}
}
