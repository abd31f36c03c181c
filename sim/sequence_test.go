package sim

import (
	"math"
	"testing"
)

// piOnIntegrator is kp = ki = 1 on the plant 1/s at T = 1 s with the effort within ±1, r = 3. All
// values are small binary fractions, so the sequences computed by hand are met exactly.
func piOnIntegrator(t *testing.T, aw AntiWindup, track, r float64) *Trace {
	c, err := NewController(ControllerConfig{
		Period: rat("1"), Terms: []Term{{Model: inZ(t, rats("0", "1"), rats("-1", "1"), "1"), Weight: 1}},
		AntiWindup: aw, TrackingTime: track,
	})
	if err != nil {
		t.Fatal(err)
	}
	return run(t, Config{
		System: plantOf(t, model(t, one(), rats("1", "0"), "0"), unit(t)), Reference: Step(r), Ticks: 7,
		Tasks: []Task{{Period: rat("1"), Controller: c, Reads: []int{OutputM}, Drives: []int{InputEffort}, Limits: Limits{true, -1, 1}}},
	})
}

func exactly(t *testing.T, what string, got, want []float64) {
	t.Helper()
	if len(got) < len(want) {
		t.Fatalf("%s: %d values, want %d", what, len(got), len(want))
	}
	for k, w := range want {
		if got[k] != w {
			t.Errorf("%s[%d] = %v, want %v", what, k, got[k], w)
		}
	}
}

// By hand: v = e + i, u = v within ±1, then i by the rule, y ← y + u.
func TestAntiWindupByHand(t *testing.T) {
	// i ← i + e:              v = 3 5 6 6 5 3 0 −3
	tr := piOnIntegrator(t, NoAntiWindup, 0, 3)
	exactly(t, "u, integrator runs on", tr.TickU, []float64{1, 1, 1, 1, 1, 1, 0, -1})
	exactly(t, "y", tr.TickY, []float64{0, 1, 2, 3, 4, 5, 6, 6})
	// i stays while v > 1 and e > 0: v = 3 2 1 1 0 −1 −1 0
	tr = piOnIntegrator(t, StopOutward, 0, 3)
	exactly(t, "u, clamp", tr.TickU, []float64{1, 1, 1, 1, 0, -1, -1, 0})
	exactly(t, "y", tr.TickY, []float64{0, 1, 2, 3, 4, 4, 3, 2})
	// i ← i + e + (u − v)/2:  v = 3 4 3.5 2.25 0.625 −1, i = 2 2.5 2.25 1.625 0.625 −1
	tr = piOnIntegrator(t, Tracking, 2, 3)
	exactly(t, "u, tracking", tr.TickU, []float64{1, 1, 1, 1, 0.625, -1})
	exactly(t, "y", tr.TickY, []float64{0, 1, 2, 3, 4, 4.625, 3.625})
	// And the mirror images.
	tr = piOnIntegrator(t, StopOutward, 0, -3)
	exactly(t, "u, clamp, mirrored", tr.TickU, []float64{-1, -1, -1, -1, 0, 1, 1, 0})
	tr = piOnIntegrator(t, Tracking, 2, -3)
	exactly(t, "u, tracking, mirrored", tr.TickU, []float64{-1, -1, -1, -1, -0.625, 1})
}

// Quantization is no limit: with the effort between two codes the integrator must go on.
func TestQuantizedEffortDoesNotClamp(t *testing.T) {
	c, err := NewController(ControllerConfig{
		Period: rat("1"), Terms: []Term{{Model: inZ(t, rats("1/64"), rats("-1", "1"), "1"), Weight: 1}}, AntiWindup: StopOutward,
	})
	if err != nil {
		t.Fatal(err)
	}
	tr := run(t, Config{
		System: plantOf(t, model(t, rats("0"), one(), "0"), unit(t)), Reference: Step(1), Ticks: 40,
		Tasks: []Task{{Period: rat("1"), Controller: c, Reads: []int{OutputM}, Limits: Limits{true, -1, 1}, Bits: 3}},
	})
	// v = k/64, codes every 1/4, halves upward.
	for k, u := range tr.TickU {
		if want := math.Floor(float64(k)/16+0.5) / 4; u != want {
			t.Fatalf("u[%d] = %v, want %v", k, u, want)
		}
	}
}

// 12 bit, 3.3 V: q = 3.3/4096 = 0.805664 mV; the ends hold, halves go up.
func TestConverter(t *testing.T) {
	c := Converter{Bits: 12, Low: 0, High: 3.3}
	near(t, "q", c.Value(0.0008), 0.000805664, 5e-10) // given to 6 digits
	for _, v := range [][2]float64{{-1, 0}, {5, 3.3 * 4095 / 4096}, {3.3, 3.3 * 4095 / 4096}, {0.0004, 0}} {
		near(t, "converter", c.Value(v[0]), v[1], 1e-15)
	}
	s := Converter{Bits: 2, Low: -1, High: 1}
	for _, v := range [][2]float64{{-0.25, 0}, {-0.26, -0.5}, {0.25, 0.5}, {0.74, 0.5}, {9, 0.5}, {-9, -1}} {
		if got := s.Value(v[0]); got != v[1] {
			t.Errorf("%g becomes %g, want %g", v[0], got, v[1])
		}
	}
	if got := (Converter{}).Value(0.123); got != 0.123 {
		t.Errorf("no quantization gives %g", got)
	}
}

// A slew of 1/4 a tick: u = 1/4, 1/2, … whatever the controller asks for.
func TestSlew(t *testing.T) {
	c := controllerOf(t, "1/2", Term{Model: inZ(t, rats("1"), one(), "1/2"), Weight: 1})
	tr := run(t, Config{
		System: plantOf(t, model(t, rats("0"), one(), "0"), unit(t)), Reference: Step(1), Ticks: 6,
		Tasks: []Task{{Period: rat("1/2"), Controller: c, Reads: []int{OutputM}, Slew: 0.5}},
	})
	exactly(t, "u", tr.TickU, []float64{0.25, 0.5, 0.75, 1, 1, 1, 1})
}

// Position and velocity feedback [1/T², 3/(2T)] on 1/s² (closed form) brings a step home in two
// ticks, between the ticks too: u = 1/T², −1/T².
func TestDoubleIntegratorDeadbeat(t *testing.T) {
	sys, err := NewContinuous([][]float64{{0, 1}, {0, 0}}, [][]float64{{1, 0}, {0, 1}}, 1,
		[]Channel{{Input: 0, B: []float64{0, 1}, D: []float64{0, 0}}})
	if err != nil {
		t.Fatal(err)
	}
	c := controllerOf(t, "1/10",
		Term{Model: inZ(t, rats("100"), one(), "1/10"), Weight: 1},
		Term{Model: inZ(t, rats("15"), one(), "1/10"), Weight: 0, Read: 1})
	tr := run(t, Config{
		System: sys, Reference: Step(1), Ticks: 5,
		Tasks: []Task{{Period: rat("1/10"), Controller: c, Reads: []int{0, 1}, Drives: []int{0}}},
	})
	for k, want := range []float64{100, -100, 0, 0, 0} {
		near(t, "u", tr.TickU[k], want, 1e-12) // sums of a few numbers of size 100
	}
	for i, at := range tr.T {
		switch {
		case at < 0.1:
			near(t, "first tick", tr.Y[i], 50*at*at, 1e-15)
		case at > 0.2:
			near(t, "at rest", tr.Y[i], 1, 1e-15*4)
		}
	}
}

// Digital integrator in series with the plant 1/s, r = t²/2: the output deviates T²/8 between
// ticks (closed form). With the controller (1.25z − 1)/(z − 1)/T... its steady error at the
// ticks is constant and y runs in straight lines below the parabola's chords.
func TestRippleOfDigitalIntegrator(t *testing.T) {
	const T = 0.5
	c := controllerOf(t, "1/2", Term{Model: inZ(t, rats("-1", "1.25"), rats("-1", "1"), "1/2"), Weight: 1})
	tr := run(t, Config{
		System: plantOf(t, model(t, one(), rats("1", "0"), "0"), unit(t)), Reference: Parabola(1), Ticks: 200, PointsPerTick: 4, MaxPoints: 10000,
		Tasks: []Task{{Period: rat("1/2"), Controller: c, Reads: []int{OutputM}, Drives: []int{InputEffort}}},
	})
	var tick, middle float64
	for i, at := range tr.T {
		switch {
		case at == 99:
			tick = tr.R[i] - tr.Y[i]
		case at == 99.25:
			middle = tr.R[i] - tr.Y[i]
		}
	}
	near(t, "ripple", tick-middle, T*T/8, 1e-11) // r and y are about 5000, 1e-12 each
	// Ka = lim (z−1)²L/T² with L = C·T/(z−1): 0.25/T, so the error at the ticks is T/0.25.
	near(t, "error at the ticks", tick, T/0.25, 1e-11)
}
