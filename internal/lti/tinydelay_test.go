package lti

import (
	"math"
	"math/cmplx"
	"testing"

	"steadytick/internal/dd"
)

// A dead time far below the dynamics moves the roots of s(1000s + 1)³ + 0.1 by about
//
//	ds = τ·s/(d ln L0/ds),   relative to s at most τ·|s|·3
//
// and adds a chain near Re s = −ln(…)/τ: the four roots must be there, to that shift. Reference
// roots by Newton in complex128 on the quartic itself.
func TestDeadTimeFarBelowTheDynamics(t *testing.T) {
	for _, tau := range []float64{1e-9, 1e-6, 1e-3} {
		// L = 1e-10·e^(−τs)/(s·(s + 0.001)³)
		l := TF{Num: ascending(1e-10), Poles: reals(-1e-3, -1e-3, -1e-3), OriginPoles: 1, DeadTime: dd.New(tau)}
		p, err := ClosedPoles(l, 64)
		if err != nil {
			t.Fatal(err)
		}
		for _, near := range []complex128{0.00150687 + 0.00221181i, -0.00300687 + 0.00221806i} {
			s := near
			for range 20 {
				q := s + 1e-3
				s -= (s*q*q*q + 1e-10) / (q*q*q + 3*s*q*q)
			}
			best := math.Inf(1)
			for _, got := range p.Equivalent {
				best = math.Min(best, cmplx.Abs(got-s))
			}
			if !(best <= (3*tau*cmplx.Abs(s)+1e-12)*cmplx.Abs(s)) {
				t.Errorf("dead time %g s: nearest pole to %v is %.2g away", tau, s, best)
			}
		}
		if p.Unstable != 2 {
			t.Errorf("dead time %g s: %d unstable poles, want 2", tau, p.Unstable)
		}
	}
}

// |1/(s+1)| is below 1 at every ω > 0: that it starts at 1 is no crossing.
func TestUnitGainAtRestIsNoCrossing(t *testing.T) {
	a, err := Analyze(TF{Num: ascending(1), Poles: reals(-1)}, 64)
	if err != nil {
		t.Fatal(err)
	}
	if m := a.Margins; len(m.GainCrossings) != 0 || m.HasCrossover || !math.IsInf(m.PhaseMargin, 1) || !math.IsInf(m.DelayMargin, 1) {
		t.Errorf("margins %+v, want none", m)
	}
	// L(0) = −1 is a closed-loop pole at 0 all the same
	a, err = Analyze(TF{Num: ascending(-1), Poles: reals(-1)}, 64)
	if err != nil || a.Stable {
		t.Errorf("stable %v, %v; want a pole at the origin", a.Stable, err)
	}
}
