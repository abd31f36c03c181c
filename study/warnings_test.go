package study

import (
	"context"
	"strings"
	"testing"
)

// warned runs a loop and returns its warnings by code.
func warned(t *testing.T, text string) map[string]string {
	t.Helper()
	c, err := RunCompare(context.Background(), parsed(t, text), Options{})
	if err != nil {
		t.Fatal(err)
	}
	out := map[string]string{}
	for _, w := range c.Warnings {
		out[w.Code] += w.Text + "\n"
	}
	return out
}

func loopFile(sections ...string) string {
	return "loop: invented\n" + strings.Join(sections, "\n") + "\n"
}

const (
	quietTiming = "timing: {rate: 1 kHz, compute: 0 s}\ninputs: [{step: 1}, {ramp: 1}]"
	quietLoop   = "plant: {model: 4/(s*(0.1*s + 1))}\ncontroller: {model: 1, map: tustin}"
)

// Each warning appears where its cause is, with its number, and not in a loop without causes.
func TestWarnings(t *testing.T) {
	for code, c := range map[string]struct{ text, want string }{
		// 10/(s(s+1)) is unstable above T = 0.207146502944 s (recomputed with 50 digits).
		"unstable": {loopFile("plant: {model: 10/(s*(s + 1))}", "controller: {model: 1}", "timing: {period: 0.25 s, compute: 0 s}"),
			"sampled loop is unstable"},
		"hidden_unstable_mode": {loopFile("plant: {model: (s + 3)/((s - 1)*(s + 2))}", "controller: {model: (s - 1)/(s*(0.01*s + 1)), map: tustin}", quietTiming),
			"stable only on paper. A pole and a zero cancel at s = 1:"},
		"hidden_mode": {loopFile("plant: {model: 4/(s*(0.1*s + 1))}", "controller: {model: (0.1*s + 1)/(0.02*s + 1), map: matched}", quietTiming),
			"cancel at s = -10; the mode decays"},
		"sensor_gain": {loopFile(quietLoop, "sensor: {model: 0.5}", quietTiming), "gain at rest is 0.5, not 1"},
		// ramp: loop error 1/Kv = 0.25 s, tracking error 1/Kv − τ = 0.23 s (closed form)
		"sensor_dynamics": {loopFile(quietLoop, "sensor: {model: 1/(0.02*s + 1)}", quietTiming),
			"the loop error is 0.25 s, the tracking error 0.23 s"},
		// ω = π/T at 1 kHz, a little off
		"pathological_rate": {loopFile("plant: {model: 1/((s + 1)*(s^2/9869604 + 0.0002*s/3141.6 + 1))}", "controller: {model: 0.5}", quietTiming),
			"mode at 3141.59 rad/s swings through a whole number of half turns (1)"},
		// derivative filter Tf/T = 0.25: forward 1 − T/Tf = −3 (closed form)
		"map_moved_pole": {loopFile("plant: {model: 0.001/(s*(0.1*s + 1))}", "controller: {model: 1/(0.00025*s + 1), map: forward}", quietTiming),
			"s = -4000 of term model to z = -3"},
		"no_continuous_column": {loopFile("plant: {model: 4/(s*(0.1*s + 1))}", "controller: {model: 0.5*z/z}", quietTiming), "given in z only"},
		"sine_above_half_rate": {loopFile(quietLoop, "timing: {rate: 1 kHz, compute: 0 s}\ninputs: [{sine: {size: 1, frequency: 600 Hz}}]"), "half the sample rate"},
		"effort_saturates":     {loopFile(quietLoop, "actuator: {limits: [-0.5, 0.5]}", quietTiming), "(0.5 units)"},
	} {
		got := warned(t, c.text)
		if !strings.Contains(got[code], c.want) {
			t.Errorf("%s: got %v, want it with %q", code, got, c.want)
		}
	}
	if got := warned(t, loopFile(quietLoop, quietTiming)); len(got) > 0 {
		t.Errorf("a loop without causes warns: %v", got)
	}
}

// An unstable mode that only the prefilter has is in the machine all the same.
func TestUnstablePrefilterIsUnstable(t *testing.T) {
	text := loopFile("plant: {model: 4/(s*(0.1*s + 1))}", "controller: {model: 1, prefilter: {model: 1/(1 - s), map: tustin}}", quietTiming)
	c, err := RunCompare(context.Background(), parsed(t, text), Options{})
	if err != nil {
		t.Fatal(err)
	}
	if c.Sampled.Stable || c.Continuous.Stable {
		t.Error("a loop behind an unstable prefilter counts as stable")
	}
}

// What matched keeps depends on the integrators: s^-1 with one, the gain at rest without.
func TestMapNotes(t *testing.T) {
	text := loopFile("plant: {model: 4/(0.1*s + 1)}", "controller: {model: (s + 2)/s, map: matched, prefilter: {model: 1/(s + 1), map: matched}}", quietTiming)
	notes := mapNotes(parsed(t, text))
	if len(notes) != 2 || !strings.HasSuffix(notes[0].Text, "keeps the factor of s^-1 at rest") || !strings.HasSuffix(notes[1].Text, "keeps the gain at rest") {
		t.Errorf("notes %v", notes)
	}
	if notes := mapNotes(parsed(t, loopFile(quietLoop, quietTiming))); len(notes) != 0 {
		t.Errorf("a constant controller has notes %v", notes)
	}
}
