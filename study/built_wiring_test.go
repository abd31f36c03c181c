package study

import (
	"context"
	"math"
	"testing"

	"steadytick/sim"
)

// builtRun runs the first input of a file for a while on its hardware.
func builtRun(t *testing.T, text string, length float64) (sim.Config, *sim.Trace) {
	t.Helper()
	l := parsed(t, text)
	_, a, err := bothColumns(l, &Compare{})
	if err != nil {
		t.Fatal(err)
	}
	cfg, err := builtConfig(l, a.block, l.Inputs[0], length, 1, asDeclared)
	if err != nil {
		t.Fatal(err)
	}
	tr, err := sim.Run(context.Background(), cfg)
	if err != nil {
		t.Fatal(err)
	}
	return cfg, tr
}

// What the file says of its ticks reaches the task: every fourth measurement stale, every fifth tick missed, updates within ±1 ms of
// their place and not all at it.
func TestTicksOfTheFile(t *testing.T) {
	cfg, _ := builtRun(t, loopFile("plant: {model: 1/(s + 1)}", "controller: {model: 1}", "inputs: [{step: 1}]",
		"timing: {rate: 20 Hz, compute: 10 ms, stale: {every: 4}, missed: {every: 5}, update_jitter: 1 ms, jitter: 2 ms}"), 1)
	task := cfg.Tasks[0]
	least, most, sampled := 0.0, 0.0, 0.0
	for k := range int64(400) {
		if task.Stale(k) != (k%4 == 3) || task.Missed(k) != (k%5 == 4) {
			t.Fatalf("tick %d: stale %v, missed %v", k, task.Stale(k), task.Missed(k))
		}
		least, most = math.Min(least, task.UpdateShift(k)), math.Max(most, task.UpdateShift(k))
		sampled = math.Max(sampled, math.Abs(task.Jitter(k)))
	}
	// Of 400 uniform numbers the extremes lie within 5 % of the ends but for a chance of 2·0.975^400 = 8e-5, and the seed is fixed.
	if !(least < -0.95e-3 && least >= -1e-3 && most > 0.95e-3 && most <= 1e-3 && sampled > 1.9e-3 && sampled <= 2e-3) {
		t.Errorf("updates from %v to %v, samples to %v", least, most, sampled)
	}
}

// Two load steps on 1/s add up, each from its own time on: y(1) = 0.25 + 0.5·(1 − 0.3). A gain of 1e-12 leaves the loop open.
func TestLoadStepsOfTheFile(t *testing.T) {
	_, tr := builtRun(t, loopFile("plant: {model: 1/s}", "controller: {model: 1e-12}", "timing: {rate: 10 Hz, compute: 10 ms}", "inputs: [{step: 1}]",
		"disturbances: [{load_step: {size: 0.25}}, {load_step: {size: 0.5, time: 0.3 s}}]"), 1)
	near(t, "y", tr.FinalY, 0.25+0.5*0.7, 1e-11) // the gain
}

// Friction of a velocity, and friction behind a lag of the drive, are simulated as such: with the velocity taken for a position, or
// the force through the whole plant, there would be no law of motion.
func TestFrictionOfTheFile(t *testing.T) {
	for _, plant := range []string{
		"{model: 1/(s + 1), friction: {coulomb: 0.1, motion: velocity}}",
		"{model: 1/(s*(s + 1)*(0.01*s + 1)), friction: {coulomb: 0.1, through: 1/(s*(s + 1))}}",
	} {
		_, tr := builtRun(t, loopFile("plant: "+plant, "controller: {model: 0.09}", "timing: {rate: 50 Hz, compute: 1 ms}", "inputs: [{step: 1}]"), 2)
		near(t, plant, tr.FinalY, 0, 0) // an effort of 0.09 does not move it against 0.1
	}
}

// A curve of slope 2 makes half of the noise that the converter sees.
func TestNoiseBehindACurve(t *testing.T) {
	noise := func(sensor string) float64 {
		return compared(t, loopFile("plant: {model: 1/(s + 1)}", "controller: {model: 2}", "sensor: "+sensor, "timing: {rate: 20 Hz, compute: 1 ms}",
			"inputs: [{step: 1}]")).Sampled.EffortNoise.Value
	}
	near(t, "noise", noise("{curve: [[-3, -6], [3, 6]], noise: 0.01}"), noise("{noise: 0.005}"), 1e-15)
}

// Ripple as built is the swing of the error once transients are gone: of the cycle of 0.30778 (testdata/reference/quantized.json).
func TestRippleOfALimitCycle(t *testing.T) {
	c := compared(t, loopFile("plant: {model: 1/(s + 1)}", "controller: {model: 4}", "sensor: {step: 0.25}",
		"timing: {rate: 2 Hz, compute: 0 s}", "inputs: [{step: 0.9}]", "requirements: [ripple <= 0.5]"))
	near(t, "ripple", c.AsBuilt.Steady[0].Ripple.Value, 2*0.30778098689143909715, 1e-12)
	if r := c.Requirements[0]; r.Met == nil || *r.Met || r.From != asBuilt {
		t.Errorf("%+v", r)
	}
}
