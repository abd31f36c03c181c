package study

import (
	"context"
	"math"
	"strings"
	"testing"
)

// At 10 Hz a mode of 62.8 rad/s turns once in a tick: what quantizers do to it lies between the ticks. The swings were found by an
// integration of the loops apart from this program (classical Runge–Kutta, fixed steps; values to four digits).
func TestSwingBetweenTheTicks(t *testing.T) {
	for controllerAndPlant, want := range map[[2]string]float64{
		{"0.2/s", "3948/(s^2 + 1.2*s + 3948)"}:                  0.2209,
		{"1 + 1/s", "1/(s + 1) + 188.5*s/(s^2 + 1.2*s + 3948)"}: 0.4198,
	} {
		c := compared(t, loopFile("plant: {model: "+controllerAndPlant[1]+"}", "controller: {model: "+controllerAndPlant[0]+", map: tustin}",
			"actuator: {step: 0.1}", "timing: {rate: 10 Hz, compute: 0 s}", "inputs: [{step: 1.03}]"))
		r := c.AsBuilt.Rest
		// Eight looks a period of the mode find a peak to 1 − cos(π/8) = 8 % at worst; forty at most are used.
		if !(math.Abs(r.LimitCycle.Value-want) <= 0.08*want) || !(r.LimitCycle.Value <= r.Bound.Value) {
			t.Errorf("%s: limit cycle %v, want %v; bound %v", controllerAndPlant, r.LimitCycle, want, r.Bound)
		}
	}
}

// The bound of a limit cycle does not depend on the unit of the measurement: a sensor of 1000 and a controller of a thousandth
// are the same loop.
func TestBoundKnowsTheSensor(t *testing.T) {
	bound := func(sensor, gain string) float64 {
		c := compared(t, loopFile("plant: {model: 1/(s*(0.1*s + 1)), backlash: {gap: 0.1, at: output}}", "controller: {model: "+gain+"*(s + 4)/s, map: tustin}",
			"sensor: {model: "+sensor+"}", "timing: {rate: 20 Hz, compute: 0 s, update: next_tick}", "inputs: [{step: 1}]"))
		r := c.AsBuilt.Rest
		if !(r.LimitCycle.Value <= r.Bound.Value) {
			t.Errorf("sensor %s: limit cycle %v, bound %v", sensor, r.LimitCycle, r.Bound)
		}
		return r.Bound.Value
	}
	if one, thousand := bound("1", "2"), bound("1000", "0.002"); !(math.Abs(thousand/one-1) <= 1e-9) { // sums of the same responses
		t.Errorf("bounds %v and %v", one, thousand)
	}
}

// At a constant speed the measurement of the tick before is the same speed: stale ticks change nothing, however velocity is had, and
// a clock slower than the ticks averages out. 1/(0.1*s + 1) under a gain of 1 stands at 50 of 100.
func TestVelocityKeepsItsMean(t *testing.T) {
	for sensor, timing := range map[string]string{
		"{counts_per_turn: 1000000, measures: velocity}":                              "rate: 100 Hz, stale: {every: 2}",
		"{counts_per_turn: 1000000, measures: velocity} ":                             "rate: 100 Hz, stale: {every: 2}, period_used: measured",
		"{counts_per_turn: 1000000, measures: velocity, method: time}":                "rate: 100 Hz, stale: {every: 2}",
		"{counts_per_turn: 100000, measures: velocity, method: time, clock: 10 kHz}":  "rate: 20 kHz",
		"{counts_per_turn: 100000, measures: velocity, method: time, clock: 10 kHz} ": "rate: 50 kHz",
		"{counts_per_turn: 100000, measures: velocity, method: time, clock: 150 Hz}":  "rate: 1 kHz",
	} {
		c := compared(t, loopFile("output: rad/s", "plant: {model: 1/(0.1*s + 1)}", "controller: {model: 1}", "sensor: {encoder: "+sensor+"}",
			"timing: {"+timing+"}", "inputs: [{step: 100}]"))
		// Counts of 6e-4 and 6e-5 of the speed a tick leave the mean off by less than 1e-3 of it. A clock of 150 Hz is seen to go on after 7, 7
		// and 6 ticks of 1 ms; counts of one such time are held for the next: (7·7 + 7·6 + 6·7)/3 over (20/3)² is 0.25 % less, half of it
		// in the error.
		tol := 0.05
		if strings.Contains(sensor, "150 Hz") {
			tol += 0.0025 * 50 / 2
		}
		if e := c.AsBuilt.Steady[0].TrackingError; !(math.Abs(e.Value-50) <= tol) {
			t.Errorf("%s, %s: error %v, want 50", sensor, timing, e)
		}
	}
}

// Noise with a corner of 0.5 Hz at the sensor, read every other tick of 50 ms and held 0.1 s through 1/(s + 1) under a gain so small
// that nothing comes back. With a = e^(−2π·0.5·0.1), p = e^(−0.1) the output's rms over the effort's is, by the covariances of
// x⁺ = p·x + (1 − p)·u, u⁺ = a·u + …:
//
//	√((1 − p)²·(1 + a·p)/((1 − p²)·(1 − a·p)))
//
// at the reads; the noise tick between them lies on the way and counts alike within 1 %.
func TestNoiseGoesOnInMissedTicks(t *testing.T) {
	a, p := math.Exp(-math.Pi*0.1), math.Exp(-0.1)
	want := math.Sqrt((1 - p) * (1 - p) * (1 + a*p) / ((1 - p*p) * (1 - a*p)))
	sum := 0.0
	const seeds = 8
	for seed := range uint64(seeds) {
		c, err := RunCompare(context.Background(), parsed(t, loopFile("plant: {model: 1/(s + 1)}", "controller: {model: 0.001}",
			"disturbances: [{noise: {at: sensor, rms: 1, band: 0.5 Hz}}]", "timing: {rate: 20 Hz, compute: 0 s, missed: {every: 2}}", "inputs: [{step: 1}]")),
			Options{Seed: seed + 1})
		if err != nil {
			t.Fatal(err)
		}
		sum += c.AsBuilt.Output.Value / c.AsBuilt.Effort.Value
	}
	// The ratio of one run of 10⁴ reads, correlated over some 10 s of 1000 s, has a standard deviation of a few per cent; of eight, 1 %.
	if got := sum / seeds; !(math.Abs(got/want-1) <= 0.05) {
		t.Errorf("ratio %v, want %v", got, want)
	}
}

// Where no tick runs in the last third, what belongs to ticks is not given, and the error between them is: y stays 0 under r = 1.
func TestNoTickInTheTail(t *testing.T) {
	c := compared(t, loopFile("plant: {model: 1/(s + 1)}", "controller: {model: 4}", "timing: {rate: 20 Hz, missed: 99.99 %}", "inputs: [{step: 1}]",
		"requirements: [step_error <= 0.5]"))
	s := c.AsBuilt.Steady[0]
	if s.TrackingError.OK || s.Swing.OK || s.WorstError != Fig(1) {
		t.Errorf("%+v", s)
	}
	if r := c.Requirements[0]; r.Met == nil || *r.Met {
		t.Errorf("%+v", r)
	}
}

// Numbers near the end of the range stay numbers: 1e190 of noise times 4·√(1 + …).
func TestHugeNoise(t *testing.T) {
	text := func(noise string) string {
		return loopFile("plant: {model: 1/(s + 1)}", "controller: {model: 4}", "sensor: {noise: "+noise+"}", "timing: {rate: 20 Hz}", "inputs: [{step: 1}]")
	}
	one, huge := compared(t, text("1")).Sampled, compared(t, text("1e190")).Sampled
	if r := huge.EffortNoise.Value / one.EffortNoise.Value; !(math.Abs(r/1e190-1) <= 1e-14) {
		t.Errorf("effort noise %v", huge.EffortNoise)
	}
}

// Play within a loop that integrates holds nothing: its effort would go on until the output is in its place.
func TestPlayHoldsNothingUnderAnIntegrator(t *testing.T) {
	stuck := func(plant, controller string) Figure {
		return compared(t, loopFile("plant: {model: "+plant+", backlash: {gap: 0.1, at: output}}", "controller: {model: "+controller+", map: tustin}",
			"timing: {rate: 50 Hz, compute: 0 s}", "inputs: [{step: 1}]")).Sampled.StuckError
	}
	if s := stuck("1/(s*(0.1*s + 1))", "2"); s != Fig(0) {
		t.Errorf("with an integrator %v", s)
	}
	if s := stuck("1/(0.1*s + 1)", "4"); !(math.Abs(s.Value-0.05/5) <= 1e-15) { // half the gap over 1 + 4
		t.Errorf("without one %v", s)
	}
}
