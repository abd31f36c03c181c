package study

import (
	"context"
	"fmt"
	"math"
	"math/cmplx"
	"testing"
)

// compared runs a comparison with all curves.
func compared(t *testing.T, text string) *Compare {
	t.Helper()
	c, err := RunCompare(context.Background(), parsed(t, text), Options{Degrade: DefaultDegrade(), Curves: true})
	if err != nil {
		t.Fatal(err)
	}
	return c
}

func near(t *testing.T, what string, got, want, tol float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tol) {
		t.Errorf("%s is %.12g, want %.12g within %.2g", what, got, want, tol)
	}
}

// Plant 1/s behind a hold goes straight from tick to tick, so with T0 = KT/(e^(jωT) − 1 + KT) a
// sine of size A leaves between the ticks
//
//	A·|T0|·|e^(jωθ) − 1 − (θ/T)(e^(jωT) − 1)|
//
// of deviation from the sine through them; ripple is twice the greatest.
func TestRippleOfASine(t *testing.T) {
	const K, T, w, A = 0.6, 0.5, 1.7, 2.0
	c := compared(t, loopFile("plant: {model: 1/s}", "controller: {model: 0.6}", "timing: {period: 0.5 s, compute: 0 s}", "inputs: [{sine: {size: 2, frequency: 1.7 rad/s}}]"))
	turn := cmplx.Rect(1, w*T) - 1
	t0 := cmplx.Abs(K * T / (turn + K*T))
	most := 0.0
	for i := range 200001 {
		th := T * float64(i) / 200000
		most = math.Max(most, cmplx.Abs(cmplx.Rect(1, w*th)-1-complex(th/T, 0)*turn))
	}
	// the scan misses the top by (5e-6)² of it
	near(t, "ripple", c.Sampled.Steady[0].Ripple.Value, 2*A*t0*most, 1e-9)
}

// Loops with two degrees of freedom, feedforward, sensor delay and plants of every sort: the
// error predicted for a ramp is where the simulation ends.
func TestPredictionHoldsForEverySortOfLoop(t *testing.T) {
	for name, text := range map[string]string{
		"two degrees of freedom": loopFile("plant: {model: 5/((0.3*s+1)*(0.05*s+1))}",
			"controller: {pid: {form: standard, Kp: 2, Ti: 0.3 s, Td: 0.05 s, filter_ratio: 8, derivative_on: measurement, setpoint_weight: 0.6, map: {i: backward, d: backward}}}",
			"sensor: {model: 1/(0.01*s+1)}", "timing: {rate: 200 Hz, compute: 1 ms}", "inputs: [{ramp: 2}]"),
		"feedforward": loopFile("plant: {model: 5/(0.3*s+1), dead_time: 7 ms}",
			"controller: {model: 1.5, feedforward: {model: 0.2*(0.3*s+1)/(0.01*s+1), map: tustin}}",
			"timing: {rate: 500 Hz, compute: 0.3 ms, update: next_tick}", "inputs: [{ramp: 2}]"),
		"prefilter": loopFile("plant: {model: 5/(s*(0.3*s+1))}",
			"controller: {model: 1.5*(0.3*s+1)/(0.02*s+1), map: matched, prefilter: {model: 1/(0.1*s+1), map: tustin}}",
			"timing: {rate: 500 Hz, compute: 0.3 ms, update: {after: 5 ms}}", "inputs: [{ramp: 2}]"),
		"sensor with dead time": loopFile("plant: {model: 5/(s*(0.3*s+1))}", "controller: {model: 0.8*(0.3*s+1)/(0.02*s+1), map: hold}",
			"sensor: {model: exp(-0.013*s)/(0.02*s+1)}", "timing: {rate: 200 Hz, compute: 0.3 ms}", "inputs: [{ramp: 2}]"),
		"plant that passes the effort on": loopFile("plant: {model: (0.5*s+2)/(s+1)}", "controller: {model: 1.2/s, map: tustin}",
			"timing: {rate: 50 Hz, compute: 3 ms}", "inputs: [{ramp: 2}]"),
		"plant that starts the wrong way": loopFile("plant: {model: (1-0.2*s)/(s*(0.5*s+1))}", "controller: {model: 0.4}",
			"timing: {rate: 20 Hz, compute: 3 ms}", "inputs: [{ramp: 2}]"),
		"stored with the period": loopFile("plant: {model: 3/(s+1)}",
			"controller: {pid: {form: parallel, Kp: 1.2, Ki: 0.04, Kd: 0.5, filter: 40 ms, stored: with_period, map: tustin}}",
			"timing: {rate: 50 Hz, compute: 2 ms}", "inputs: [{ramp: 2}]"),
		"sensor gain": loopFile("plant: {model: 5/(s*(0.3*s+1))}", "controller: {model: 0.4}", "sensor: {model: 2}",
			"timing: {rate: 100 Hz, compute: 1 ms}", "inputs: [{ramp: 2}]"),
	} {
		t.Run(name, func(t *testing.T) {
			l := parsed(t, text)
			cont, sampled, err := bothColumns(l, &Compare{})
			if err != nil {
				t.Fatal(err)
			}
			for _, a := range []*analyzed{cont, sampled} {
				length := 36 * a.slowest() // e^−36 = 2e-16
				var r run
				if a.block.period == nil {
					r, err = runTwin(context.Background(), l, l.Inputs[0], length, nil)
				} else {
					r, err = variant{loop: l, run: a}.simulate(context.Background(), l.Inputs[0], length)
				}
				if err != nil {
					t.Fatal(err)
				}
				g := polynomialError("ramp", 2, a.trackingDD, a.block.open.Period)
				// r and y of that size are subtracted, after thousands of ticks
				near(t, a.name()+" error at the end", r.end, g[0]+g[1]*r.endTime, 1e-10*math.Max(1, r.trace.FinalR))
			}
		})
	}
}

// First order, closed form: plant 1/(s+1), K = 4. The final value is 0.8, the pole −5: no
// overshoot, rise ln 9/5, settling to 2 % at ln 50/5.
func TestStepFiguresAreRelativeToTheFinalValue(t *testing.T) {
	c := compared(t, loopFile("plant: {model: 1/(s + 1)}", "controller: {model: 4}", "timing: {rate: 1 kHz, compute: 0 s}", "inputs: [{step: 3}, {parabola: 2}]"))
	f := c.Continuous.Transient
	near(t, "overshoot", f.OvershootPercent.Value, 0, 0)
	near(t, "rise time", f.RiseTimeS.Value, math.Log(9)/5, 1e-9)
	near(t, "settling time", f.SettlingTimeS.Value, math.Log(50)/5, 1e-9)
	near(t, "peak effort", f.PeakEffort.Value, 12, 1e-9)
	// 1 − T = (s + 1)/(s + 5) = 0.2 + 0.16·s − 0.032·s² + …: r = t² leaves 0.2·t² + 0.32·t − 0.064
	s := c.Continuous.Steady[1]
	at := s.EndTimeS.Value
	near(t, "error at the end of the run", s.EndError.Value, 0.2*at*at+0.32*at-0.064, 1e-12)
}

// Plant 1/s, K = 1, T = 1 s: after one tick the sampled loop is at 1, the continuous one at
// 1 − 1/e, so sampling has added −1/e of error.
func TestAddedErrorHasItsSign(t *testing.T) {
	c := compared(t, loopFile("plant: {model: 1/s}", "controller: {model: 1}", "timing: {period: 1 s, compute: 0 s}", "inputs: [{step: 1}]"))
	added := c.Curves.Inputs[0].Added[0]
	for i, at := range added.X {
		if at == 1 {
			near(t, "added error", added.Y[i], -math.Exp(-1), 1e-11)
			return
		}
	}
	t.Error("no point at the first tick")
}

// Slew and word length of the actuator reach the simulation: u moves by slew·T at most and sits on
// its grid of 2^4 codes over the limits.
func TestActuatorReachesTheSimulation(t *testing.T) {
	l := parsed(t, loopFile("plant: {model: 1/(s + 1)}", "controller: {model: 3}", "actuator: {limits: [-4, 4], bits: 4, slew: 20}",
		"timing: {rate: 50 Hz, compute: 0 s}", "inputs: [{step: 1}]"))
	_, a, err := bothColumns(l, &Compare{})
	if err != nil {
		t.Fatal(err)
	}
	for _, converters := range []bool{false, true} {
		r, err := variant{loop: l, run: a, built: converters}.simulate(context.Background(), l.Inputs[0], 1)
		if err != nil {
			t.Fatal(err)
		}
		last, offGrid := 0.0, 0
		for _, u := range r.trace.U {
			step := 20 * 0.02
			if converters {
				step += 0.5 // half a code each way
			}
			if !(math.Abs(u-last) <= step*(1+1e-12)) {
				t.Errorf("converters %v: the effort jumps from %g to %g", converters, last, u)
			}
			last = u
			if code := (u + 4) / 0.5; math.Abs(code-math.Round(code)) > 1e-12 {
				offGrid++
			}
		}
		if converters != (offGrid == 0) {
			t.Errorf("converters %v: %d efforts off the grid", converters, offGrid)
		}
	}
}

// With limits, the continuous twin has the anti-windup of the sampled loop: at a fast rate their
// overshoots agree, and are far below that without.
func TestTwinHasTheAntiWindup(t *testing.T) {
	over := func(kind string) (cont, sampled float64) {
		c := compared(t, loopFile("plant: {model: 1/(s + 1)}",
			fmt.Sprintf("controller: {pid: {form: standard, Kp: 2, Ti: 0.3 s, map: tustin}, anti_windup: %s}", kind), "actuator: {limits: [-1.2, 1.2]}",
			"timing: {rate: 2 kHz, compute: 0 s}", "inputs: [{step: 1}]"))
		return c.Continuous.Transient.OvershootPercent.Value, c.Sampled.Transient.OvershootPercent.Value
	}
	wound, _ := over("none")
	for _, kind := range []string{"stop_outward", "{tracking_time: 0.1 s}"} {
		cont, sampled := over(kind)
		// T over the fastest time constant, 0.0005/0.3, by first order
		near(t, "overshoot with "+kind, cont, sampled, 0.01*sampled+0.1)
		if !(cont < 0.8*wound) {
			t.Errorf("%s: overshoot %g, without anti-windup %g", kind, cont, wound)
		}
	}
}

// Beyond ±180° the phase goes on: plant 1/(s(s+1)³) ends at −360°, and no step between neighbours is a jump.
func TestPhaseCurveIsUnwrapped(t *testing.T) {
	c := compared(t, loopFile("plant: {model: 1/(s*(s + 1)^3)}", "controller: {model: 0.1}", "timing: {rate: 200 Hz, compute: 0 s}", "inputs: [{step: 1}]"))
	for _, p := range c.Curves.PhaseDeg {
		for i := 1; i < len(p.Y); i++ {
			if !(math.Abs(p.Y[i]-p.Y[i-1]) < 90) {
				t.Errorf("%s: the phase jumps from %g to %g at %g rad/s", p.Name, p.Y[i-1], p.Y[i], p.X[i])
			}
		}
		if p.Name == "continuous" {
			// four poles far below: −360° + 3·(1/ω)·180/π
			end := len(p.Y) - 1
			near(t, "phase at the end", p.Y[end], -360+3*math.Atan(1/p.X[end])*180/math.Pi, 1e-6)
		}
	}
}

// The sweep runs from slow to fast through the loop's own rate, and its window of stability ends
// at the largest period of 10/(s(s+1)), T = 0.207146502944 s (recomputed with 50 digits).
func TestRateSweep(t *testing.T) {
	c := compared(t, loopFile("plant: {model: 10/(s*(s + 1))}", "controller: {model: 1}", "timing: {rate: 20 Hz, compute: 0 s}", "inputs: [{ramp: 1}]"))
	m := c.Curves.PhaseMarginOverRate[0]
	own := false
	for i, hz := range m.X {
		if i > 0 && hz <= m.X[i-1] {
			t.Fatalf("rates fall from %g to %g", m.X[i-1], hz)
		}
		own = own || hz == 20
	}
	if !own {
		t.Error("the loop's own rate is not among the rates")
	}
	const limit = 1 / 0.207146502944
	step := math.Pow(10, 2*sweepDecades/(sweepPoints-1))
	low := c.Curves.RateWindow[0].Intervals[0][0]
	if !(low >= limit && low < limit*step) {
		t.Errorf("the window of stability begins at %g Hz, want the first rate tried above %g", low, limit)
	}
}

// Boundaries count as met where the operator has the equals sign.
func TestMeets(t *testing.T) {
	for _, c := range []struct {
		v    float64
		op   string
		want bool
	}{{1, "<=", true}, {1, "<", false}, {1, ">=", true}, {1, ">", false}, {0.5, "<", true}, {2, ">", true}, {2, "<=", false}, {0.5, ">=", false},
		{math.NaN(), "<=", false}, {math.NaN(), ">", false}, {math.Inf(1), ">=", true}} {
		if got := meets(c.v, c.op, 1); got != c.want {
			t.Errorf("%g %s 1 is %v", c.v, c.op, got)
		}
	}
	l := parsed(t, loopFile("plant: {model: 1/(s + 1)}", "controller: {model: 4}", "timing: {rate: 1 kHz, compute: 0.2 ms}", "inputs: [{step: 1}]",
		"requirements: [samples_per_rise >= 100, processor_load <= 20 %]"))
	c, err := RunCompare(context.Background(), l, Options{})
	if err != nil {
		t.Fatal(err)
	}
	rise := c.Sampled.Transient.RiseTimeS.Value
	near(t, "samples per rise", c.Requirements[0].Value.Value, rise/0.001, 1e-9)
	near(t, "processor load", c.Requirements[1].Value.Value, 20, 1e-12)
}

// An unstable loop meets nothing, however large its constants.
func TestUnstableMeetsNothing(t *testing.T) {
	c := compared(t, loopFile("plant: {model: 40/(s*(0.05*s + 1))}", "controller: {model: 3*(0.1*s + 1)/(0.005*s + 1), map: tustin}",
		"timing: {rate: 60 Hz, compute: 0 s, update: next_tick}", "inputs: [{step: 1}]", "requirements: [modulus_margin >= 0.3, velocity_constant >= 10]"))
	if c.Sampled.Stable {
		t.Fatal("the loop is meant to be unstable")
	}
	for _, r := range c.Requirements {
		if r.Met == nil || *r.Met {
			t.Errorf("%s is not judged as missed", r.Name)
		}
	}
}

// A heater that cannot cool: the load step is never removed, whatever the linear loop says, so its
// error is not judged, and a warning says why.
func TestLoadBeyondTheLimitIsNotJudged(t *testing.T) {
	c := compared(t, loopFile("plant: {model: 0.08/(9*s + 1)}", "controller: {model: 50 + 5/s, map: tustin}", "actuator: {limits: [0, 3000]}",
		"timing: {rate: 10 Hz, compute: 0 s}", "inputs: [{load_step: 200}]", "requirements: [load_error <= 0.5]"))
	if r := c.Requirements[0]; r.Met != nil {
		t.Errorf("load_error is judged: met %v", *r.Met)
	}
	warned := false
	for _, w := range c.Warnings {
		warned = warned || w.Code == "steady_at_limit"
	}
	if !warned {
		t.Errorf("no warning of the limit in %v", c.Warnings)
	}
	// and the curves go on to the end, though the reference is 0 and the output large
	curves := c.Curves.Inputs[0]
	last := curves.Response[0].X[len(curves.Response[0].X)-1]
	for _, y := range curves.Response {
		if end := y.X[len(y.X)-1]; !(end >= 0.99*last) {
			t.Errorf("%s ends at %g s of %g s", y.Name, end, last)
		}
	}
}
