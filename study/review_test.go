package study

import (
	"strings"
	"testing"
)

// So far below its crossover that |L| passes 1 nowhere below half the rate: the verdict still names the cause.
func TestVerdictBeyondHalfTheRate(t *testing.T) {
	c := compared(t, loopFile("plant: {model: 12/(s*(0.28*s + 1))}", "controller: {model: 26*(s/19 + 1)/(s/190 + 1), map: tustin}",
		"timing: {rate: 1 Hz, compute: 0 s}", "inputs: [{step: 1}]"))
	if c.Sampled.Stable || c.Sampled.CrossoverRadS.OK {
		t.Fatalf("the loop is meant to be unstable and without a crossover: %+v", c.Sampled)
	}
	if want := "above half the sample rate (3.142 rad/s)"; !strings.Contains(c.Verdict, want) {
		t.Errorf("%q, want it with %q", c.Verdict, want)
	}
}

// An unstable loop is unstable with its converters too.
func TestUnstableWithConverters(t *testing.T) {
	c := compared(t, loopFile("plant: {model: 40/(s*(0.05*s + 1))}", "controller: {model: 12}", "sensor: {model: 1, bits: 12, range: [-4, 4]}",
		"timing: {rate: 20 Hz, compute: 0 s}", "inputs: [{step: 1}]"))
	found := false
	for _, r := range c.Degrade {
		if r.Variant == asBuilt {
			found = true
			if r.Stable || r.Note != "unstable" {
				t.Errorf("stable %v, note %q", r.Stable, r.Note)
			}
		}
	}
	if !found {
		t.Error("no line of the loop as built")
	}
}

// The forward map moves the prefilter's pole −2000 to z = 1 − 2 = −1 at 1 kHz, and −3000 to −2, outside.
func TestMovedPrefilterPole(t *testing.T) {
	got := warned(t, loopFile("plant: {model: 4/(s*(0.1*s + 1))}", "controller: {model: 1, prefilter: {model: 3000/(s + 3000), map: forward}}", quietTiming))
	if want := "pole s = -3000 of the prefilter to z = -2"; !strings.Contains(got["map_moved_pole"], want) {
		t.Errorf("%v, want it with %q", got, want)
	}
}
