package study

import (
	"context"
	"fmt"
	"math"
	"strings"
	"testing"

	"pgregory.net/rapid"
)

// oneLoop writes a loop file: a plant without dead time, a controller, a time-line, inputs.
func oneLoop(plant, controller, timing string, inputs ...string) string {
	return loopFile("plant: {model: "+plant+"}", "controller: "+controller, "timing: {"+timing+"}", "inputs: ["+strings.Join(inputs, ", ")+"]")
}

// within holds got to want, an absolute tolerance.
func within(t *testing.T, what string, got Figure, want, tol float64) {
	t.Helper()
	if !got.OK || !(math.Abs(got.Value-want) <= tol) {
		t.Errorf("%s: %+v, want %.15g within %g", what, got, want, tol)
	}
}

// Plant 1/(s(s+1)), controller 1, from the loop file to the margins (recomputed with 50 digits). Tolerance: half a
// unit of the last digit given.
func TestMarginsFromALoopFile(t *testing.T) {
	servo := func(timing string) (cont, sampled *Column) {
		return columns(t, parsed(t, oneLoop("1/(s*(s + 1))", "{model: 1, map: tustin}", timing)))
	}
	for _, c := range []struct {
		timing      string
		w, pm, last float64 // last: the last digit of pm
		stable      bool
	}{
		{"period: 0.5 s, compute: 0 s", 0.782499522392, 40.7579773827, 1e-10, true},
		{"period: 0.5 s, compute: 0 s, update: next_tick", 0.782499522392, 18.3410173306, 1e-10, true},
		{"period: 1 s, compute: 0 s", 0.771734028099, 30.3842728003, 1e-10, true},
		{"period: 1 s, compute: 0 s, update: next_tick", 0.771734028099, -13.8328299, 1e-7, false},
	} {
		cont, d := servo(c.timing)
		within(t, "continuous crossover", cont.CrossoverRadS, 0.786151377757, 0.5e-12)
		within(t, "continuous phase margin", cont.PhaseMarginDeg, 51.8272923730, 0.5e-10)
		within(t, "continuous delay margin", cont.DelayMarginS, 1.15061414366, 0.5e-11) // (π/2 − atan ω)/ω, ω² = (√5 − 1)/2
		within(t, c.timing+", crossover", d.CrossoverRadS, c.w, 0.5e-12)
		within(t, c.timing+", phase margin", d.PhaseMarginDeg, c.pm, c.last/2)
		if d.Stable != c.stable {
			t.Errorf("%s: stable %v, want %v", c.timing, d.Stable, c.stable)
		}
	}
}

// The largest stable gain of the same loop (recomputed with 50 digits): where its phase crosses −180°, to half a
// unit of the last digit given; stable 1e-10 below it, not 1e-10 above, a hundred times the distance at
// which a pole counts as lying on the boundary.
func TestLargestGainFromALoopFile(t *testing.T) {
	servo := func(gain float64, timing string) *Column {
		_, d := columns(t, parsed(t, oneLoop("1/(s*(s + 1))", fmt.Sprintf("{model: %.17g, map: tustin}", gain), timing+", compute: 0 s")))
		return d
	}
	for _, c := range []struct {
		timing     string
		gain, last float64
	}{
		{"period: 1 s", 2.392211191177, 1e-12},
		{"period: 500 ms", 4.361993867092, 1e-12},
		{"period: 0.1 s", 20.33892560993, 1e-11},
		{"rate: 1 Hz, update: next_tick", 0.8047185265209, 1e-13},
		{"rate: 10 Hz, update: next_tick", 6.846364201313, 1e-12},
	} {
		least := math.Inf(1)
		for _, p := range servo(1, c.timing).PhaseCrossings {
			least = math.Min(least, 1/p.Gain)
		}
		within(t, c.timing+", gain to −180°", Fig(least), c.gain, c.last/2)
		for factor, want := range map[float64]bool{1 - 1e-10: true, 1 + 1e-10: false} {
			d := servo(c.gain*factor, c.timing)
			if d.Stable != want || d.StabilityByPoles != want || d.StabilityByNyquist != want {
				t.Errorf("%s, gain %.17g: stable %v (poles %v, argument count %v), want %v", c.timing, c.gain*factor, d.Stable, d.StabilityByPoles, d.StabilityByNyquist, want)
			}
		}
	}
}

// 10/(s(s+1)): Kv = 10 and a ramp error of 0.1 at every stable T, unstable above
// T = 0.207146502944 s (recomputed). 10(s+1)/s² at 0.1 s: Ka = 10, error 0.1 for t²/2 (closed form).
// One division away from exact: 2 units of 2^-53.
func TestErrorConstantsFromALoopFile(t *testing.T) {
	for _, period := range []string{"1e-6", "0.01", "0.2", "0.20714650293"} {
		_, d := columns(t, parsed(t, oneLoop("10/(s*(s + 1))", "{model: 1, map: tustin}", "period: "+period+" s, compute: 0 s", "ramp: 1")))
		within(t, period+": Kv", d.VelocityConstant, 10, 10*0x1p-52)
		within(t, period+": ramp error", d.Steady[0].TrackingError, 0.1, 0.1*0x1p-52)
	}
	if _, d := columns(t, parsed(t, oneLoop("10/(s*(s + 1))", "{model: 1, map: tustin}", "period: 0.20714650295 s, compute: 0 s"))); d.Stable {
		t.Error("stable above the largest period")
	}
	_, d := columns(t, parsed(t, oneLoop("10*(s + 1)/s^2", "{model: 1, map: tustin}", "period: 0.1 s, compute: 0 s", "parabola: 1")))
	within(t, "Ka", d.AccelerationConstant, 10, 10*0x1p-52)
	within(t, "parabola error", d.Steady[0].TrackingError, 0.1, 0.1*0x1p-52)
}

// Final value theorem, unity feedback, closed loop (… + n2 s² + n1 s + n0)/(… + d2 s² + d1 s + d0):
//
//	step A:     A(d0 − n0)/d0
//	ramp A·t:   A(d1 − n1)/d0   if d0 = n0, else unbounded
//	A·t²:       2A(d2 − n2)/d0  if also d1 = n1
//
// of the loop (b1 s + b0)/(s^k (s + p)(s + q)), where d − n is the denominator of the loop alone.
func TestSteadyErrorsByFinalValue(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		draw := func(name string, lo, hi int) int { return rapid.IntRange(lo, hi).Draw(t, name) }
		k, p, q := draw("integrators", 0, 2), draw("p", 1, 40), draw("q", 1, 40)
		b0, b1, size := draw("b0", 1, 60), draw("b1", 0, 60), draw("A", 1, 9)
		text := oneLoop(fmt.Sprintf("(%d*s + %d)/(s^%d*(s + %d)*(s + %d))", b1, b0, k, p, q), "{model: 1, map: tustin}", "period: 1 ms, compute: 0 s",
			fmt.Sprintf("step: %d", size), fmt.Sprintf("ramp: %d", size), fmt.Sprintf("parabola: %d", 2*size))
		c, _ := columns(t, parsed(t, text))
		if !c.Stable {
			t.Skip("not stable")
		}
		alone := [3]float64{} // d − n
		alone[k] = float64(p * q)
		if k < 2 {
			alone[k+1] = float64(p + q)
		}
		d0 := float64(b0)
		if k == 0 {
			d0 += float64(p * q)
		}
		A := float64(size)
		want := [3]float64{A * alone[0] / d0, A * alone[1] / d0, 2 * A * alone[2] / d0}
		for i := range want {
			if i > 0 && alone[0] != 0 || i > 1 && alone[1] != 0 {
				want[i] = math.Inf(1)
			}
			got := c.Steady[i].TrackingError
			if got.Value != want[i] && !(math.Abs(got.Value-want[i]) <= 4*0x1p-53*want[i]) { // two roundings here, one there
				t.Errorf("%s of %s: %.17g, want %.17g", c.Steady[i].Input, text, got.Value, want[i])
			}
		}
	})
}

// A sensor lag τ of unit gain makes the ramp tracking error per unit slope 1/Kv − τ; the loop
// error stays 1/Kv (closed form), in both columns.
func TestSensorLagFromALoopFile(t *testing.T) {
	text := loopFile(quietLoop, "sensor: {model: 1/(0.02*s + 1)}", quietTiming)
	c, d := columns(t, parsed(t, text))
	for _, col := range []*Column{c, d} {
		within(t, "tracking error", col.Steady[1].TrackingError, 0.23, 0.23*0x1p-52)
		within(t, "loop error", col.Steady[1].LoopError, 0.25, 0.25*0x1p-52)
	}
}

// A digital integrator in series with the plant 1/s, r = t²/2: y deviates T²/8 between the ticks where the
// samples show nothing (recomputed). 1e-10 of it is what the search for the extreme is stopped at.
func TestRippleFromALoopFile(t *testing.T) {
	_, d := columns(t, parsed(t, oneLoop("1/s", "{model: (1.2*s + 0.5)/s, map: backward}", "rate: 4 Hz, compute: 0 s", "parabola: 1")))
	within(t, "ripple", d.Steady[0].Ripple, 1.0/128, 1e-10/128)
}

// Plant 1/(s(s+1)), T = 1 s, the controller that cancels the zero of the hold equivalent: y = 1
// at every tick from the first, yet u rings and y(1.5) = 1.36156025, y(2.5) = 0.740297843
// (recomputed; half a unit of the last digit). The cancelled zero at −0.71828 must be reported.
func TestCancelledSamplingZeroRings(t *testing.T) {
	controller := "{model: (z - 0.367879441171442322)/(0.367879441171442322*z + 0.264241117657115357)}"
	text := oneLoop("1/(s*(s + 1))", controller, "period: 1 s, compute: 0 s", "step: 1")
	l := parsed(t, text)
	_, a, err := bothColumns(l, &Compare{})
	if err != nil {
		t.Fatal(err)
	}
	r, err := variant{loop: l, run: a}.simulate(context.Background(), l.Inputs[0], 6)
	if err != nil {
		t.Fatal(err)
	}
	for k, u := range []float64{2.71828183, -2.95249244, 2.12072167} {
		within(t, fmt.Sprintf("u(%d)", k), Fig(r.trace.TickU[k]), u, 0.5e-8)
	}
	for k := 1; k < 6; k++ {
		within(t, fmt.Sprintf("y(%d)", k), Fig(r.trace.TickY[k]), 1, 1e-14) // some tens of operations of 1e-16
	}
	between := map[float64]float64{}
	for i, at := range r.trace.T {
		between[at] = r.trace.Y[i]
	}
	within(t, "y(1.5)", Fig(between[1.5]), 1.36156025, 0.5e-8)
	within(t, "y(2.5)", Fig(between[2.5]), 0.740297843, 0.5e-9)
	if got := warned(t, text)["hidden_mode"]; !strings.Contains(got, "z = -0.7183") || !strings.Contains(got, "ring") {
		t.Errorf("the cancelled zero is reported as %q", got)
	}
}

// An integrator behind the hold lags by exactly T/2 more: at a crossover of a twentieth of the
// rate 9°, with a tick of delay 27° (closed form, |T/(2 sin(ωT/2))|·k = 1). Counting 1.5 T beside
// the hold equivalent would give 36°. The ledger adds up to the same. 1e-8 is the target for margins.
func TestDelayCountsOnce(t *testing.T) {
	for timing, lag := range map[string]float64{"": 9, ", update: next_tick": 27} {
		gain := "0.312868930080461738" // 2 sin(π/20)
		c, err := RunCompare(context.Background(), parsed(t, oneLoop("1/s", "{model: "+gain+", map: tustin}", "period: 1 s, compute: 0 s"+timing)), Options{})
		if err != nil {
			t.Fatal(err)
		}
		within(t, "phase margin"+timing, c.Sampled.PhaseMarginDeg, 90-lag, 1e-8)
		seconds, degrees := 0.0, 0.0
		for _, i := range c.DelayLedger {
			seconds, degrees = seconds+i.Seconds, degrees+i.Degrees.Value
		}
		within(t, "ledger, degrees"+timing, Fig(degrees), lag, 1e-8)
		within(t, "ledger, seconds"+timing, Fig(seconds), lag/18, 1e-15) // 18° a second at 2π/20 rad/s
	}
}

// L = 1/s: |T(jω)| < 1/(δω) for all ω gives δ = 1 s, where the constant-delay margin is π/2 s (Kao
// and Lincoln, Automatica 40, 2004, from memory).
func TestJitterMarginOfAnIntegrator(t *testing.T) {
	c, _ := columns(t, parsed(t, oneLoop("1/s", "{model: 1, map: tustin}", "period: 1 ms, compute: 0 s")))
	within(t, "delay margin", c.DelayMarginS, math.Pi/2, 1e-8*math.Pi/2)
	within(t, "jitter margin", c.JitterMarginS, 1, 0x1p-52)
	// At T = 1 s the sampled loop is y(z) = r/z, so that |T| = 1 up to ω = π: δ = 1/π (closed form).
	_, d := columns(t, parsed(t, oneLoop("1/s", "{model: 1, map: tustin}", "period: 1 s, compute: 0 s")))
	within(t, "sampled jitter margin", d.JitterMarginS, 1/math.Pi, 1e-15)
}

// The integral gain is per second, whatever T and however it is written: Kv = Ki·P(0) (closed form). A
// sum of errors without T, or T in milliseconds, would be off by factors of T.
func TestIntegralGainIsPerSecond(t *testing.T) {
	for _, c := range []struct{ ki, timing string }{
		{"2", "period: 100 ms"}, {"2", "period: 0.1 s"}, {"2", "rate: 10 Hz"}, {"2", "period: 1 ms"},
		{"0.2, stored: with_period", "rate: 10 Hz"}, {"0.002, stored: with_period", "period: 1000 us"},
	} {
		_, d := columns(t, parsed(t, oneLoop("3/(s + 1)", "{pid: {form: parallel, Kp: 0.5, Ki: "+c.ki+", map: backward}}", c.timing+", compute: 0 s", "ramp: 1")))
		within(t, c.ki+", "+c.timing+": Kv", d.VelocityConstant, 6, 6*0x1p-52)
		within(t, c.ki+", "+c.timing+": ramp error", d.Steady[0].TrackingError, 1.0/6, 0x1p-52/6)
	}
}

// Backward and forward differences of Ki/s answer the first error differently (closed form): backward u(0) = Ki·T,
// forward u(0) = 0, the trapezoid half of it.
func TestDifferencesAreNotConfused(t *testing.T) {
	for method, want := range map[string]float64{"backward": 0.25, "tustin": 0.125, "forward": 0} {
		l := parsed(t, oneLoop("1/(s + 1)", "{model: 0.5/s, map: "+method+"}", "period: 0.5 s, compute: 0 s", "step: 1"))
		_, a, err := bothColumns(l, &Compare{})
		if err != nil {
			t.Fatal(err)
		}
		r, err := variant{loop: l, run: a}.simulate(context.Background(), l.Inputs[0], 2)
		if err != nil {
			t.Fatal(err)
		}
		if r.trace.TickU[0] != want { // small binary fractions: exact
			t.Errorf("%s: u(0) = %v, want %v", method, r.trace.TickU[0], want)
		}
	}
}
