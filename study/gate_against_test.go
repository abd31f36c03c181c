package study

import (
	"context"
	"math"
	"math/big"
	"strings"
	"testing"

	"steadytick/loop"
)

// against compares two loop files, the earlier one first.
func against(t *testing.T, before, now string, tolerance ...string) *GateAgainst {
	t.Helper()
	tol, err := ParseTolerance(tolerance)
	if err != nil {
		t.Fatal(err)
	}
	a, err := RunGateAgainst(context.Background(), gated(t, now), parsed(t, before), tol, GateOptions{})
	if err != nil {
		t.Fatal(err)
	}
	return a
}

func changeOf(t *testing.T, a *GateAgainst, name string) MetricChange {
	t.Helper()
	for _, c := range a.Changes {
		if c.Name == name {
			return c
		}
	}
	t.Fatalf("no metric %s in %+v", name, a.Changes)
	return MetricChange{}
}

// Plant 1/(s(s+1)), controller 1: T = 0.5 s has 40.7579773827° of phase margin, T = 1 s has 30.3842728003° (recomputed
// with 50 digits); the ramp error is 1 at both.
func TestAgainstKnownMargins(t *testing.T) {
	at := func(period string) string {
		return oneLoop("1/(s*(s + 1))", "{model: 1}", "compute: 0 s, period: "+period, "{ramp: 1}")
	}
	const fast, slow = 40.7579773827, 30.3842728003
	a := against(t, at("0.5 s"), at("1 s"))
	m := changeOf(t, a, "phase_margin")
	within(t, "change", m.Change, slow-fast, 1e-10) // half a unit of the last digit of each
	within(t, "change in per cent", m.ChangePercent, 100*(slow-fast)/fast, 5e-10)
	if m.Verdict != ChangeWorse || m.WorseWhen != WorseDown {
		t.Errorf("%+v", m)
	}
	if r := changeOf(t, a, "ramp_error"); r.Verdict != ChangeSame || r.Before.Value != 1 || r.After.Value != 1 {
		t.Errorf("%+v", r)
	}
	if len(a.Worse) == 0 || a.PeriodS.Value != 0.5 || a.TolerancePercent != DefaultTolerance {
		t.Errorf("%+v", a)
	}
	if back := changeOf(t, against(t, at("1 s"), at("0.5 s")), "phase_margin"); back.Verdict != ChangeBetter {
		t.Errorf("the other way round it is %s", back.Verdict)
	}
	// (40.7579773827 − 30.3842728003)/40.7579773827 = 25.4520 %
	for tolerance, want := range map[string]string{"25.4 %": ChangeWorse, "25.5 %": ChangeWithin, "phase_margin=25.5 %": ChangeWithin} {
		if got := changeOf(t, against(t, at("0.5 s"), at("1 s"), tolerance), "phase_margin"); got.Verdict != want {
			t.Errorf("tolerance %s: %s, want %s", tolerance, got.Verdict, want)
		}
	}
	if same := against(t, at("1 s"), at("1 s"), "0 %"); len(same.Worse) > 0 {
		t.Errorf("worse than itself: %v", same.Worse)
	}
}

// A loop that was stable and is not is worse; one that was not is no measure for what it has become.
func TestAgainstStability(t *testing.T) {
	// unstable above T = 0.207146502944 s (recomputed with 50 digits)
	at := func(period string) string {
		return oneLoop("10/(s*(s + 1))", "{model: 1}", "compute: 0 s, period: "+period, "{ramp: 1}")
	}
	a := against(t, at("0.1 s"), at("0.21 s"))
	if !a.StableBefore || a.StableAfter || len(a.Worse) == 0 || a.Worse[0] != "stable" {
		t.Errorf("%+v", a)
	}
	if r := changeOf(t, a, "ramp_error"); r.Verdict != ChangeWorse || !strings.Contains(r.Note, "the loop is unstable") {
		t.Errorf("a figure that went with stability: %+v", r)
	}
	grows := strings.NewReplacer("{ramp: 1}", "{parabola: 1}")
	if p := changeOf(t, against(t, grows.Replace(at("0.1 s")), grows.Replace(at("0.21 s"))), "parabola_error"); p.Verdict != ChangeNeutral {
		t.Errorf("an error without bound got worse: %+v", p)
	}
	a = against(t, at("0.21 s"), at("0.1 s"))
	if len(a.Worse) > 0 {
		t.Errorf("worse than an unstable loop: %v", a.Worse)
	}
	if r := changeOf(t, a, "phase_margin"); r.Verdict != ChangeApart || !strings.Contains(r.Note, "the loop before is unstable") {
		t.Errorf("%+v", r)
	}
}

// rad and deg are converted; other units are refused. The errors of the two files are equal but for 180/π.
func TestAgainstUnits(t *testing.T) {
	inRad := oneLoop("10/(s*(s + 1))", "{model: 1}", "rate: 100 Hz, compute: 0 s", "{step: 1}", "{ramp: 2}", "{load_step: 1}") + "output: rad\neffort: V\n"
	inDeg := oneLoop("572.9577951308232/(s*(s + 1))", "{model: 0.017453292519943295}", "rate: 100 Hz, compute: 0 s",
		"{step: 57.29577951308232}", "{ramp: 114.59155902616465}", "{load_step: 1}") + "output: deg\neffort: V\n"
	a := against(t, inRad, inDeg, "0 %")
	if len(a.Worse) > 0 {
		t.Errorf("worse: %v", a.Worse)
	}
	r := changeOf(t, a, "ramp_error") // slope/Kv = 2/10
	within(t, "ramp error before, in deg", r.Before, 0.2*180/math.Pi, 1e-13)
	if r.Unit != "deg" || r.Verdict != ChangeSame {
		t.Errorf("%+v", r)
	}
	back := changeOf(t, against(t, inDeg, inRad, "0 %"), "load_error") // 1/(controller gain 1) rad
	within(t, "load error before, in rad", back.Before, 1, 1e-14)
	g := gated(t, strings.Replace(inRad, "output: rad", "output: m", 1))
	_, err := RunGateAgainst(context.Background(), g, parsed(t, inRad), Tolerance{}, GateOptions{})
	if err == nil || !strings.Contains(err.Error(), `output is "rad" in test.yaml and "m" in test.yaml`) {
		t.Errorf("%v", err)
	}
}

// A figure of another input, another step or another band answers another question; one that is gone is worse.
func TestAgainstOtherQuestions(t *testing.T) {
	file := func(more string, inputs ...string) string {
		return oneLoop("10/(s*(s + 1))", "{model: 1}", "rate: 100 Hz, compute: 0 s", inputs...) + more
	}
	const move, longer = "{move: {distance: 1, velocity: 1, acceleration: 4, jerk: 40}}", "{move: {distance: 2, velocity: 1, acceleration: 4, jerk: 40}}"
	limits := "actuator: {limits: [-0.5, 0.5]}\n"
	for _, c := range []struct{ name, before, now, metric, verdict, note string }{
		{"steeper ramp", file("", "{ramp: 1}"), file("", "{ramp: 2}"), "ramp_error", ChangeApart, "ramp 1 units/s before, ramp 2 units/s now"},
		{"another ramp behind the first", file("", "{ramp: 1}"), file("", "{ramp: 1}", "{ramp: 2}"), "ramp_error", ChangeSame, ""},
		{"ramp gone", file("", "{ramp: 1}"), file("", "{step: 1}"), "ramp_error", ChangeWorse, "no figure any more: inputs has no ramp"},
		{"ramp new", file("", "{step: 1}"), file("", "{ramp: 1}"), "ramp_error", ChangeNew, "no figure before"},
		{"longer move", file("", move), file("", longer), "peak_tracking_error", ChangeApart, "move 1 units before, move 2 units now"},
		{"one more input", file("", "{ramp: 1}"), file("", "{ramp: 1}", "{sine: {size: 1, frequency: 1 Hz}}"), "ripple", ChangeApart, "1 before, 2 now"},
		{"another sine", file("", "{sine: {size: 1, frequency: 2 Hz}}"), file("", "{sine: {size: 1, frequency: 1 Hz}}"), "ripple", ChangeApart, "before"},
		{"larger step of a linear loop", file("", "{step: 1}"), file("", "{step: 2}"), "overshoot", ChangeSame, ""},
		{"its effort", file("", "{step: 1}"), file("", "{step: 2}"), "peak_effort", ChangeApart, "step 1 units before, step 2 units now"},
		{"larger step of a limited loop", file(limits, "{step: 1}"), file(limits, "{step: 2}"), "rise_time", ChangeApart, "the step differs"},
		{"a step that now meets a limit", file("", "{step: 1}"), file(limits, "{step: 2}"), "rise_time", ChangeApart, "the step differs"},
		{"a load that now meets one", file("", "{load_step: 1}"), file("actuator: {limits: [-0.5, 0.5]}\n", "{load_step: 1}"), "load_error", ChangeWorse, "ends with the effort at its limit"},
		{"another band", file("", "{step: 1}"), file("settling_band: 5 %\n", "{step: 1}"), "settling_time", ChangeApart, "settling_band is 2 % before and 5 % now"},
		{"bandwidth has no better", file("", "{step: 1}"), strings.Replace(file("", "{step: 1}"), "model: 1}", "model: 2}", 1), "bandwidth", ChangeNeutral, ""},
		{"a requirement says that it has", file("", "{step: 1}"), strings.Replace(file("requirements: [bandwidth <= 1 Hz]\n", "{step: 1}"), "model: 1}", "model: 2}", 1), "bandwidth", ChangeWorse, ""},
		{"bounded from both sides", file("", "{step: 1}"), strings.Replace(file("requirements: [bandwidth <= 1 Hz, bandwidth > 0 Hz]\n", "{step: 1}"), "model: 1}", "model: 2}", 1), "bandwidth", ChangeNeutral, ""},
		{"integrator lost", file("", "{step: 1}"), strings.Replace(file("", "{step: 1}"), "10/(s*(s + 1))", "10/((s + 0.001)*(s + 1))", 1), "position_constant", ChangeWorse, ""},
		{"and its error", file("", "{step: 1}"), strings.Replace(file("", "{step: 1}"), "10/(s*(s + 1))", "10/((s + 0.001)*(s + 1))", 1), "step_error", ChangeWorse, ""},
		{"an error of a hundred thousandth", file("", "{step: 1}"), strings.Replace(file("", "{step: 1}"), "10/(s*(s + 1))", "10/((s + 0.0001)*(s + 1))", 1), "step_error", ChangeWithin, ""},
	} {
		t.Run(c.name, func(t *testing.T) {
			got := changeOf(t, against(t, c.before, c.now), c.metric)
			if got.Verdict != c.verdict || !strings.Contains(got.Note, c.note) {
				t.Errorf("%s, %q; want %s, %q", got.Verdict, got.Note, c.verdict, c.note)
			}
		})
	}
}

// Inputs are the same in the units of the revision that is checked: here output before is rad, now deg, effort V.
func TestSameInput(t *testing.T) {
	const deg = 180 / math.Pi
	r := revisions{units: conversion{output: deg, effort: 1}}
	move := func(d, v, a, j float64) loop.Input {
		return loop.Input{Kind: "move", Move: &loop.Move{Distance: d, Velocity: v, Acceleration: a, Jerk: j}}
	}
	table := func(times, values []float64) loop.Input {
		return loop.Input{Kind: "file", Times: times, Values: values}
	}
	sine := func(hz int64) loop.Input { return loop.Input{Kind: "sine", Size: 0, Frequency: big.NewRat(hz, 1)} }
	for name, c := range map[string]struct {
		a, b loop.Input
		want bool
	}{
		"ramp":             {loop.Input{Kind: "ramp", Size: 2}, loop.Input{Kind: "ramp", Size: 2 * deg}, true},
		"seven digits":     {loop.Input{Kind: "ramp", Size: 1}, loop.Input{Kind: "ramp", Size: 57.29578}, true},
		"another ramp":     {loop.Input{Kind: "ramp", Size: 2}, loop.Input{Kind: "ramp", Size: 2}, false},
		"another kind":     {loop.Input{Kind: "ramp", Size: 2}, loop.Input{Kind: "step", Size: 2 * deg}, false},
		"load":             {loop.Input{Kind: "load_step", Size: 2}, loop.Input{Kind: "load_step", Size: 2}, true},
		"sine":             {sine(3), sine(3), true},
		"another sine":     {sine(3), sine(4), false},
		"move":             {move(1, 2, 3, 4), move(deg, 2*deg, 3*deg, 4*deg), true},
		"other distance":   {move(1, 2, 3, 4), move(1, 2*deg, 3*deg, 4*deg), false},
		"other velocity":   {move(1, 2, 3, 4), move(deg, 2, 3*deg, 4*deg), false},
		"other jerk":       {move(1, 2, 3, 4), move(deg, 2*deg, 3*deg, 5*deg), false},
		"file":             {table([]float64{0, 1}, []float64{0, 1}), table([]float64{0, 1}, []float64{0, deg}), true},
		"other values":     {table([]float64{0, 1}, []float64{0, 1}), table([]float64{0, 1}, []float64{0, 1}), false},
		"other times":      {table([]float64{0, 1}, []float64{0, 1}), table([]float64{0, 2}, []float64{0, deg}), false},
		"one instant more": {table([]float64{0, 1}, []float64{0, 1}), table([]float64{0, 1, 2}, []float64{0, deg, 0}), false},
	} {
		if got := r.sameInput(c.a, c.b); got != c.want {
			t.Errorf("%s: same %v, want %v", name, got, c.want)
		}
	}
}

// The floor is a thousandth of the largest reference; a load is none.
func TestFloor(t *testing.T) {
	inputs := []loop.Input{{Kind: "step", Size: -2}, {Kind: "load_step", Size: 100}}
	at := func(more ...loop.Input) revisions {
		return revisions{after: &loop.Loop{Inputs: append(append([]loop.Input(nil), inputs...), more...)}}
	}
	for name, c := range map[string]struct{ got, want float64 }{
		"step":         {at().floor("step_error"), 0.002},
		"move":         {at(loop.Input{Kind: "move", Move: &loop.Move{Distance: 5}}).floor("ripple"), 0.005},
		"file":         {at(loop.Input{Kind: "file", Values: []float64{1, -7, 3}}).floor("load_error"), 0.007},
		"overshoot":    {at().floor("overshoot"), 1},
		"effort":       {at().floor("peak_effort"), 0},
		"phase margin": {at().floor("phase_margin"), 0},
	} {
		if c.got != c.want {
			t.Errorf("%s: %g, want %g", name, c.got, c.want)
		}
	}
}

// The verdict on two figures, infinities and zeros included.
func TestJudgeChange(t *testing.T) {
	inf := math.Inf(1)
	for _, c := range []struct {
		when                 Worse
		before, after, floor float64
		want                 string
	}{
		{WorseUp, 100, 100.9, 0, ChangeWithin},
		{WorseUp, 100, 101, 0, ChangeWithin}, // exactly the tolerance
		{WorseUp, 100, 101.1, 0, ChangeWorse},
		{WorseUp, 100, 99, 0, ChangeBetter},
		{WorseDown, 100, 98, 0, ChangeWorse},
		{WorseDown, -100, -102, 0, ChangeWorse},
		{WorseDown, -100, -98, 0, ChangeBetter},
		{Neutral, 100, 200, 0, ChangeNeutral},
		{Neutral, 100, inf, 0, ChangeNeutral},
		{WorseUp, 100, 100 * (1 + 1e-10), 0, ChangeSame},
		{WorseUp, inf, inf, 0, ChangeSame},
		{WorseUp, 1, inf, 0, ChangeWorse},
		{WorseUp, inf, 1, 0, ChangeBetter},
		{WorseDown, inf, 1e9, 0, ChangeWorse},
		{WorseDown, 1, inf, 0, ChangeBetter},
		{WorseUp, 0, 0, 0, ChangeSame},
		{WorseUp, 0, 1e-12, 0, ChangeWorse},
		{WorseUp, 0, 0.0099, 1, ChangeWithin},
		{WorseUp, 0, 0.0101, 1, ChangeWorse},
		{WorseUp, 1e-9, 2e-9, 1, ChangeWorse}, // the floor is for zeros only
		{WorseDown, 0, -0.02, 1, ChangeWorse},
		{WorseDown, 0, 0.02, 1, ChangeBetter},
	} {
		m := MetricChange{WorseWhen: c.when, Before: Fig(c.before), After: Fig(c.after), TolerancePercent: 1}
		if got := judgeChange(m, c.floor); got != c.want {
			t.Errorf("%g → %g, worse when %q, floor %g: %s, want %s", c.before, c.after, c.when, c.floor, got, c.want)
		}
	}
}

// The table of directions has every metric and no other.
func TestDirectionsAreComplete(t *testing.T) {
	for _, m := range loop.Metrics() {
		if _, ok := worseWhen[m.Name]; !ok {
			t.Errorf("%s has no direction", m.Name)
		}
	}
	if n := len(loop.Metrics()); len(worseWhen) != n {
		t.Errorf("%d directions for %d metrics", len(worseWhen), n)
	}
}

func TestParseTolerance(t *testing.T) {
	got, err := ParseTolerance([]string{"2.5 %", "ripple=20%", "overshoot = 0 %"})
	if err != nil || got.Percent != 2.5 || got.of("ripple") != 20 || got.of("overshoot") != 0 || got.of("phase_margin") != 2.5 {
		t.Errorf("%+v, %v", got, err)
	}
	if got, err = ParseTolerance(nil); err != nil || got.of("ripple") != DefaultTolerance {
		t.Errorf("%+v, %v", got, err)
	}
	for text, want := range map[string]string{
		"1": "the unit is missing", "": "the unit is missing", "NaN %": "is not a number", "x %": "is not a number", "-1 %": "expected 0 % to",
		"inf %": "expected 0 % to", "1e99 %": "expected 0 % to", "gain=1 %": `"gain" is not the name of a metric`, "=1 %": "is not the name", "ripple=": "the unit is missing",
	} {
		if _, err := ParseTolerance([]string{text}); err == nil || !strings.Contains(err.Error(), want) {
			t.Errorf("%q: %v, want %q", text, err, want)
		}
	}
	for _, twice := range [][]string{{"1 %", "2 %"}, {"ripple=1 %", "ripple=2 %"}} {
		if _, err := ParseTolerance(twice); err == nil {
			t.Errorf("%q is accepted", twice)
		}
	}
}
