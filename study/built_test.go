package study

import (
	"context"
	"encoding/json"
	"math"
	"math/big"
	"runtime"
	"testing"

	"steadytick/sim"
)

// With nothing declared, and with a measured period that is always the nominal one, the run as built is the linear sampled
// loop: the same numbers up to the rounding of two ways to sum, 1e-12 of signals of order one.
func TestIdealHardwareIsTheSampledLoop(t *testing.T) {
	for _, extra := range []string{"", "period_used: measured", "jitter: 0 s, update_jitter: 0 s, missed: 0 %, stale: 0 %"} {
		timing := "timing: {rate: 500 Hz, conversion: 20 us, compute: 300 us"
		if extra != "" {
			timing += ", " + extra
		}
		l := parsed(t, loopFile("plant: {model: 40/(s*(0.1*s + 1)), dead_time: 0.7 ms}", "sensor: {model: 1/(0.002*s + 1)}",
			"controller: {pid: {form: parallel, Kp: 0.6, Ki: 0.9, Kd: 0.02, filter: 3 ms, map: {i: forward, d: backward}, setpoint_weight: 0.8}}",
			timing+"}", "inputs: [{step: 1}, {ramp: 2}, {sine: {size: 1, frequency: 2 Hz}}, {load_step: 0.3}]"))
		_, a, err := bothColumns(l, &Compare{})
		if err != nil || !a.stable {
			t.Fatal(err, a.stable)
		}
		for _, in := range l.Inputs {
			linear, err := sampledConfig(l, a.block, in, 2)
			if err != nil {
				t.Fatal(err)
			}
			real, err := builtConfig(l, a.block, in, 2, 1, asDeclared)
			if err != nil {
				t.Fatal(err)
			}
			want, err1 := sim.Run(context.Background(), linear)
			got, err2 := sim.Run(context.Background(), real)
			if err1 != nil || err2 != nil {
				t.Fatal(err1, err2)
			}
			for k := range want.TickY {
				if !(math.Abs(got.TickY[k]-want.TickY[k]) <= 1e-12) || !(math.Abs(got.TickU[k]-want.TickU[k]) <= 1e-11) {
					t.Fatalf("%q, %s: tick %d: y %v u %v, want %v %v", extra, in.Kind, k, got.TickY[k], got.TickU[k], want.TickY[k], want.TickU[k])
				}
			}
		}
	}
}

// The variance from the Lyapunov solution against the loop as built, whose noise keeps its converter busy: within five standard
// deviations of the estimate from 20 000 ticks, correlated over the 12 ticks of the loop's slowest time constant at most.
func TestEffortNoiseIsThatOfTheRun(t *testing.T) {
	for _, sensor := range []string{
		"sensor: {noise: 0.003, step: 0.002}",
		"sensor: {bits: 12, range: [-4, 4], noise: 0.004, offset: 0.01}",
		"sensor: {encoder: {counts_per_turn: 3000, measures: position}, noise: 0.004}",
	} {
		c := compared(t, loopFile("output: rad", "plant: {model: 2/(s + 1)}", "controller: {model: 1.5*(s + 2)/s, map: tustin}", sensor,
			"timing: {rate: 20 Hz, compute: 8 ms}", "inputs: [{step: 1}]", "requirements: [effort_noise <= 1]"))
		theory, found := c.Sampled.EffortNoise, c.AsBuilt.Effort
		if tol := 5 * math.Sqrt(12.0/float64(c.AsBuilt.NoiseTicks)); !(math.Abs(found.Value/theory.Value-1) <= tol) || !found.OK {
			t.Errorf("%s: effort noise %v as built, %v by theory", sensor, found, theory)
		}
		if r := c.Requirements[0]; r.Met == nil || !*r.Met || r.Value.Value != math.Max(theory.Value, found.Value) {
			t.Errorf("%s: %+v", sensor, r)
		}
	}
}

// A P controller on 1/(s + 1) with a coarse sensor hunts: for Kp 4, T 0.5 s, a code of 0.25 and r = 0.9 the cycle has an
// amplitude of 0.30778 (testdata/reference/quantized.json). It is found, no larger than the bound, and a requirement on it is missed.
func TestLimitCycleIsFound(t *testing.T) {
	c := compared(t, loopFile("plant: {model: 1/(s + 1)}", "controller: {model: 4}", "sensor: {step: 0.25}",
		"timing: {rate: 2 Hz, compute: 0 s}", "inputs: [{step: 0.9}]", "requirements: [limit_cycle <= 0.1]"))
	r := c.AsBuilt.Rest
	if r.Cycling == 0 || !(r.LimitCycle.Value >= 2*0.30778-1e-4) || !(r.LimitCycle.Value <= r.Bound.Value) || !r.PeriodS.OK {
		t.Errorf("%+v", r)
	}
	if q := c.Requirements[0]; q.Met == nil || *q.Met || q.From != asBuilt {
		t.Errorf("%+v", q)
	}
}

// What holds an integrating plant off its place under a P controller of gain 2 is a dead zone of ±0.3 and half a code of 0.02:
// at most (0.3 + 0.01)/2; and the runs to rest come near to it.
func TestStuckErrorOfADeadZone(t *testing.T) {
	c := compared(t, loopFile("plant: {model: 1/(s*(0.2*s + 1))}", "controller: {model: 2}", "actuator: {deadband: 0.3, step: 0.02}",
		"timing: {rate: 50 Hz, compute: 0 s}", "inputs: [{step: 1}]", "requirements: [stuck_error <= 0.2]"))
	if !(math.Abs(c.Sampled.StuckError.Value-0.155) <= 1e-12) {
		t.Errorf("bound %v", c.Sampled.StuckError)
	}
	found := c.AsBuilt.Rest.StuckError
	if !(found.Value > 0.05 && found.Value <= 0.155) || c.AsBuilt.Rest.Cycling != 0 {
		t.Errorf("found %+v", c.AsBuilt.Rest)
	}
}

// An integrator that runs on while the effort is limited costs recovery time; each rule of anti-windup saves some of it.
func TestRecoveryTimesCompared(t *testing.T) {
	took := map[string]float64{}
	for _, rule := range []string{"none", "clamp", "stop", "stop_outward", "{tracking_time: 0.3 s}"} {
		c := compared(t, loopFile("plant: {model: 1/(s*(0.1*s + 1))}", "controller: {pid: {form: parallel, Kp: 3, Ki: 1.5, map: tustin}, anti_windup: "+rule+"}",
			"actuator: {limits: [-1, 1]}", "timing: {rate: 100 Hz, compute: 1 ms}", "inputs: [{step: 2}]", "requirements: [recovery_time <= 100 s]"))
		f := c.Sampled.Transient.RecoveryTimeS
		if !f.OK || c.Requirements[0].Met == nil || !*c.Requirements[0].Met {
			t.Fatalf("%s: %v %+v", rule, f, c.Requirements[0])
		}
		took[rule] = f.Value
	}
	for rule, v := range took {
		if rule != "none" && !(v < took["none"]) {
			t.Errorf("%s recovers in %v s, none in %v s", rule, v, took["none"])
		}
	}
}

// The same seed gives the same bytes with one core and with several; another seed gives other ones.
func TestSameSeedSameBytes(t *testing.T) {
	text := loopFile("output: rad", "plant: {model: 8/(s*(0.05*s + 1)), friction: {coulomb: 0.01, static: 0.02}, backlash: {gap: 0.001, at: output}}",
		"controller: {model: 1.2}", "sensor: {bits: 12, range: [-4, 4], noise: 0.002}", "actuator: {limits: [-5, 5], bits: 10, slew: 200}",
		"timing: {rate: 200 Hz, compute: 1 ms, jitter: 0.2 ms, update_jitter: 0.1 ms, missed: 1 %, stale: 2 %}", "inputs: [{step: 1}, {ramp: 0.5}]",
		"disturbances: [{noise: {at: input, rms: 0.1, band: 20 Hz}}, {sine: {at: sensor, size: 0.01, frequency: 90 Hz}}]")
	result := func(cores int, seed uint64) string {
		defer runtime.GOMAXPROCS(runtime.GOMAXPROCS(cores))
		l := parsed(t, text)
		c, err := RunCompare(context.Background(), l, Options{Seed: seed})
		if err != nil {
			t.Fatal(err)
		}
		out, err := json.Marshal(c)
		if err != nil {
			t.Fatal(err)
		}
		return string(out)
	}
	one := result(1, 3)
	if two := result(2, 3); two != one {
		t.Error("the number of cores matters")
	}
	if result(2, 4) == one {
		t.Error("the seed does not matter")
	}
}

// An encoder under a derivative bounds the rates from above: the noise of a count grows with the rate. At the end of the window
// the figure is the limit, 0.1 % inside it is met, 0.1 % outside it is not.
func TestEncoderBoundsTheRateFromAbove(t *testing.T) {
	l := parsed(t, loopFile("output: rad", "plant: {model: 20/(s*(0.05*s + 1))}", "sensor: {encoder: {counts_per_turn: 2000, measures: position}}",
		"controller: {pid: {form: parallel, Kp: 3, Kd: 0.1, filter: 0.2 ms, map: backward}}", "timing: {rate: 1 kHz, compute: 20 us}",
		"inputs: [{step: 1}]", "rate: {from: 100 Hz, to: 50 kHz}", "requirements: [effort_noise <= 0.12]"))
	r, err := RunRate(context.Background(), l, RateOptions{})
	if err != nil {
		t.Fatal(err)
	}
	var w *RateWindow
	for i := range r.Windows {
		if r.Windows[i].Name == "effort_noise" {
			w = &r.Windows[i]
		}
	}
	if w == nil || len(w.Intervals) != 1 || !w.Intervals[0].High.OK {
		t.Fatalf("%+v", w)
	}
	high := w.Intervals[0].High.Value
	at := func(hz float64) float64 {
		other, problems := l.WithRate(new(big.Rat).SetFloat64(1 / hz))
		if len(problems) > 0 {
			t.Fatal(problems)
		}
		_, a, err := bothColumns(other, &Compare{})
		if err != nil {
			t.Fatal(err)
		}
		f, err := words(context.Background(), other, a)
		if err != nil || !f.effort.OK {
			t.Fatal(err, f)
		}
		return f.effort.Value
	}
	if in, out := at(high*0.999), at(high*1.001); !(in <= 0.12 && out > 0.12) || !(high > 200 && high < 5e4) {
		t.Errorf("the window ends at %v Hz, where the noise goes from %v to %v", high, in, out)
	}
}

// Interrupt latency has its place in the ledger and in the delay of the loop; what waits is what is left.
func TestLatencyInTheLedger(t *testing.T) {
	c := compared(t, loopFile("plant: {model: 4/(s*(0.1*s + 1))}", "controller: {model: 2}",
		"timing: {rate: 1 kHz, conversion: 5 us, latency: 7 us, compute: 100 us, update: {after: 200 us}}", "inputs: [{step: 1}]"))
	got := map[string]float64{}
	for _, i := range c.DelayLedger {
		got[i.Item] = i.Seconds
	}
	if got["interrupt latency"] != 7e-6 || !(math.Abs(got["waiting for the update"]-88e-6) <= 1e-18) || c.LoopDelayS != 200e-6 {
		t.Errorf("%v, %v", got, c.LoopDelayS)
	}
}

// A pick that the sampled loop allows and the hardware does not is given with a warning that says so.
func TestPickThatTheHardwareMisses(t *testing.T) {
	l := parsed(t, loopFile("plant: {model: 1/(s*(0.1*s + 1))}", "controller: {model: 2}", "sensor: {step: 0.05}",
		"timing: {rate: 50 Hz, compute: 1 ms}", "inputs: [{step: 1.01}]", "requirements: [step_error <= 0.001, phase_margin >= 40 deg]"))
	r, err := RunRate(context.Background(), l, RateOptions{})
	if err != nil {
		t.Fatal(err)
	}
	warned := false
	for _, w := range r.Warnings {
		warned = warned || w.Code == "as_built_misses"
	}
	if r.Pick == nil || !warned {
		t.Errorf("pick %+v, note %q, warnings %v", r.Pick, r.PickNote, r.Warnings)
	}
}

// A loop too slow for its rate is cut, says so, and has no figures of what would be left after its transients; a requirement that the
// sampled loop meets is not missed for that.
func TestBuiltRunThatIsCut(t *testing.T) {
	c := compared(t, loopFile("plant: {model: 1/(40*s + 1)}", "controller: {model: 1}", "sensor: {step: 0.05}",
		"timing: {rate: 20 kHz, compute: 1 us}", "inputs: [{step: 1}]", "requirements: [overshoot <= 40 %, step_error <= 0.6]"))
	told := 0
	for _, w := range c.Warnings {
		if w.Code == "as_built_cut" {
			told++
		}
	}
	b := c.AsBuilt
	if told != 2 || b.Rest != nil || b.Effort.OK || b.Output.OK || b.Steady[0].WorstError.OK || b.Steady[0].TrackingError.OK {
		t.Errorf("%d warnings, %+v", told, b)
	}
	for _, r := range c.Requirements {
		if r.Met == nil || !*r.Met || r.From != "sampled" {
			t.Errorf("%+v", r)
		}
	}
}

// Friction beside a dead time of the sensor is no reason to give no comparison; and a ramp that leaves the range of the
// sensor has no steady figures as built.
func TestWhatIsNotSimulatedAsBuilt(t *testing.T) {
	has := func(c *Compare, code string) bool {
		for _, w := range c.Warnings {
			if w.Code == code {
				return true
			}
		}
		return false
	}
	for _, part := range []string{"friction: {coulomb: 0.1}", "backlash: {gap: 0.1, at: output}"} {
		c := compared(t, loopFile("plant: {model: 1/(s*(0.1*s + 1)), "+part+"}", "controller: {model: 2}", "sensor: {model: exp(-0.01*s)}",
			"timing: {rate: 50 Hz, compute: 1 ms}", "inputs: [{step: 1}]"))
		if c.AsBuilt != nil || !has(c, "not_simulated_as_built") {
			t.Errorf("%s: %+v, %v", part, c.AsBuilt, c.Warnings)
		}
	}
	c := compared(t, loopFile("plant: {model: 1/(s*(0.1*s + 1))}", "controller: {model: 2}", "sensor: {bits: 10, range: [-2, 2]}",
		"timing: {rate: 50 Hz, compute: 1 ms}", "inputs: [{ramp: 1}, {ramp: 0.001}, {ramp: -1}]"))
	s := c.AsBuilt.Steady
	if s[0].WorstError.OK || s[2].WorstError.OK || !s[1].WorstError.OK || !has(c, "as_built_out_of_range") {
		t.Errorf("%+v, %v", s, c.Warnings)
	}
}

// A loop that only its hardware breaks meets nothing: the response leaves the converter's range and does not come back, the
// plant being unstable by itself.
func TestLoopThatRunsAwayAsBuilt(t *testing.T) {
	l := parsed(t, loopFile("plant: {model: 1/((s - 5)*(0.01*s + 1))}", "controller: {model: 12*(1 + 0.05/s), map: tustin}",
		"sensor: {bits: 12, range: [-1.2, 1.2]}", "timing: {rate: 500 Hz, compute: 0 s}", "inputs: [{step: 1}]",
		"requirements: [phase_margin >= 1 deg, step_error <= 5, settling_time <= 1000 s]"))
	g, err := RunGate(context.Background(), l, GateOptions{})
	if err != nil || g.Met {
		t.Fatalf("met %v, %v", g.Met, err)
	}
	for _, r := range g.Requirements[1:] {
		if r.Met == nil || *r.Met || r.Cause == nil || r.From != asBuilt {
			t.Errorf("%+v", r)
		}
	}
}

// The bounds see an update that is late by many ticks: with 1/s, k = 0.3 and 200 ticks at 1 kHz a code of 0.001 can move the output by
// 1e-3 peak to peak, the response to the measurement being of one sign: its sum of magnitudes is that of its values, T(0) = 1.
func TestLateUpdateIsInTheBounds(t *testing.T) {
	c := compared(t, loopFile("plant: {model: 1/s}", "controller: {model: 0.3}", "sensor: {step: 0.001}",
		"timing: {rate: 1 kHz, compute: 0 s, update: {after: 200 ms}}", "inputs: [{step: 1}]"))
	if b := c.AsBuilt.Rest.Bound; !(math.Abs(b.Value/1e-3-1) <= 1e-6) {
		t.Errorf("bound %v, want 1e-3", b)
	}
}

// The steady error of the linear loop is not the doing of its words: a P loop with 1/(1 + 4) of it and a code of 0.01 is held off by
// half a code at most, times 4/5.
func TestStuckErrorIsOfTheWordsAlone(t *testing.T) {
	c := compared(t, loopFile("plant: {model: 1/(s + 1)}", "controller: {model: 4}", "sensor: {step: 0.01}",
		"timing: {rate: 20 Hz, compute: 0 s}", "inputs: [{step: 1}]"))
	if s := c.AsBuilt.Rest.StuckError; !(s.Value <= 0.004+1e-9) || !s.OK {
		t.Errorf("stuck %v", s)
	}
}
