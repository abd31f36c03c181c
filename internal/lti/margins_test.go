package lti

import (
	"math"
	"testing"
)

const deg = 180 / math.Pi

// TestMarginsServo: plant 1/(s(s+1)), controller 1, unity feedback; figures
// recomputed with 50-digit arithmetic, 12 digits given.
func TestMarginsServo(t *testing.T) {
	for _, c := range []struct {
		name             string
		l                TF
		crossover, phase float64
		stable           bool
		tol              float64 // digits given
	}{
		{"continuous", servo(1), 0.786151377757, 51.8272923730, true, 1e-11},
		{"T=0.5", heldServo(1, num(t, "0.5"), 0), 0.782499522392, 40.7579773827, true, 1e-11},
		{"T=0.5, one tick", heldServo(1, num(t, "0.5"), 1), 0.782499522392, 18.3410173306, true, 1e-11},
		{"T=1", heldServo(1, num(t, "1"), 0), 0.771734028099, 30.3842728003, true, 1e-11},
		{"T=1, one tick", heldServo(1, num(t, "1"), 1), 0.771734028099, -13.8328299, false, 1e-8},
	} {
		n, marginal, err := UnstableCount(c.l)
		if err != nil || marginal || (n == 0) != c.stable {
			t.Errorf("%s: %d unstable, marginal %v, %v", c.name, n, marginal, err)
		}
		m, err := Margins(c.l, n == 0)
		if err != nil {
			t.Fatal(err)
		}
		if !m.HasCrossover || len(m.GainCrossings) != 1 {
			t.Errorf("%s: %d crossings", c.name, len(m.GainCrossings))
		}
		wantNear(t, c.name+": crossover", m.Crossover, c.crossover, 1e-11)
		wantNear(t, c.name+": phase margin", m.PhaseMargin*deg, c.phase, c.tol)
	}
	m, err := Margins(servo(1), true)
	if err != nil {
		t.Fatal(err)
	}
	// ω² = (√5 − 1)/2, margin π/2 − atan ω; evaluated with 50 digits. (A table that
	// gives 1.15061414364 is wrong in its twelfth digit.)
	wantNear(t, "delay margin", m.DelayMargin, 1.15061414365604987, 1e-14)
	wantNear(t, "crossover", m.Crossover, 0.78615137775742328607, 1e-15)
	if !math.IsInf(m.GainMargin, 1) || m.GainReduction != 0 {
		t.Errorf("gain margins %g, %g: a second-order loop has none", m.GainMargin, m.GainReduction)
	}
}

// TestLargestGain: largest stable gain of the sampled servo (recomputed with 50-digit arithmetic).
func TestLargestGain(t *testing.T) {
	for _, c := range []struct {
		period string
		ticks  int
		want   float64
	}{
		{"1", 0, 2.392211191177}, {"0.5", 0, 4.361993867092}, {"0.1", 0, 20.33892560993},
		{"1", 1, 0.8047185265209}, {"0.1", 1, 6.846364201313},
	} {
		l := heldServo(0.01, num(t, c.period), c.ticks)
		m, err := Margins(l, true)
		if err != nil {
			t.Fatal(err)
		}
		wantNear(t, "largest gain at T = "+c.period, 0.01*m.GainMargin, c.want, 1e-12)
		for _, k := range []float64{1 - 1e-9, 1 + 1e-9} {
			n, marginal, err := UnstableCount(heldServo(c.want*k, num(t, c.period), c.ticks))
			if err != nil || marginal || (n > 0) != (k > 1) {
				t.Errorf("T = %s, %d ticks, gain factor %.10g: %d unstable, marginal %v, %v", c.period, c.ticks, k, n, marginal, err)
			}
		}
	}
}

// TestLargestPeriod: 10/(s(s+1)) is unstable above T = 0.207146502944 s (recomputed with 50-digit arithmetic).
func TestLargestPeriod(t *testing.T) {
	for _, c := range []struct {
		period string
		want   int
	}{{"0.2071465029", 0}, {"0.2071465030", 2}} {
		n, marginal, err := UnstableCount(heldServo(10, num(t, c.period), 0))
		if err != nil || marginal || n != c.want {
			t.Errorf("T = %s: %d unstable, marginal %v, %v", c.period, n, marginal, err)
		}
	}
}
