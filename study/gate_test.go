package study

import (
	"context"
	"math"
	"strings"
	"testing"

	"steadytick/loop"
)

// gated holds a loop to its requirements.
func gated(t *testing.T, text string) *GateLoop {
	t.Helper()
	g, err := RunGate(context.Background(), parsed(t, text), GateOptions{})
	if err != nil {
		t.Fatal(err)
	}
	return g
}

// held1 is plant 1/(s(s+1)), controller 1, T = 1 s: phase margin 30.3842728003°, largest stable gain
// 2.392211191177 (recomputed with 50 digits).
const held1 = "plant: {model: 1/(s*(s + 1))}\ncontroller: {model: 1}\ntiming: {period: 1 s, compute: 0 s}\ninputs: [{ramp: 1}]\n"

// Slack is counted into the limit from either side, in the unit of the metric and relative to the limit; "stable" is
// the first line.
func TestGateSlack(t *testing.T) {
	const margin, gain = 30.3842728003, 2.392211191177
	dB := 20 * math.Log10(gain)
	const tol = 1e-9 // half a unit of the last digit given is 5e-11 deg; in dB 20/ln 10·5e-13/2.39 is less
	for text, want := range map[string]struct {
		slack, share float64
		met          bool
	}{
		"phase_margin >= 30 deg": {margin - 30, 100 * (margin - 30) / 30, true},
		"phase_margin < 30 deg":  {30 - margin, 100 * (30 - margin) / 30, false},
		"gain_margin >= 8 dB":    {dB - 8, 100 * (dB - 8) / 8, false},
		"gain_margin <= 8 dB":    {8 - dB, 100 * (8 - dB) / 8, true},
		"ramp_error <= 1":        {0, 0, true},  // Kv = 1, exactly
		"ramp_error < 1":         {0, 0, false}, // the limit itself does not meet it
		"ramp_error <= -2":       {-3, -150, false},
	} {
		g := gated(t, loopFile(held1+"requirements: ["+text+"]"))
		if len(g.Requirements) != 2 || g.Requirements[0].Name != "stable" || !g.Requirements[0].Passed() {
			t.Fatalf("%s: %+v", text, g.Requirements)
		}
		r := g.Requirements[1]
		within(t, text+": slack", r.Slack, want.slack, tol)
		within(t, text+": slack in per cent", r.SlackPercent, want.share, 20*tol) // 100 over a limit of 8
		if r.Passed() != want.met || g.Met != want.met || (r.Cause == nil) != want.met {
			t.Errorf("%s: met %v, file met %v, cause %v", text, r.Passed(), g.Met, r.Cause)
		}
		if r.Requirement != text || r.Line != 6 {
			t.Errorf("%s: shown as %q, line %d", text, r.Requirement, r.Line)
		}
	}
	none := gated(t, loopFile(held1+"requirements: [ramp_error <= 0]")).Requirements[1]
	if none.SlackPercent.OK || !none.Slack.OK {
		t.Errorf("a limit of 0 has no relative slack: %+v", none)
	}
	far := gated(t, loopFile(strings.Replace(held1, "ramp: 1", "parabola: 1", 1)+"requirements: [parabola_error <= 1]")).Requirements[1]
	if !math.IsInf(far.Slack.Value, -1) || !far.Slack.OK {
		t.Errorf("an error without bound has the slack %+v, want -inf", far.Slack)
	}
}

// A limit is shown in the unit that the file uses: 30° are π/6 rad, 1 rad/s is 1/2π Hz and 60/2π rpm.
func TestGateUnits(t *testing.T) {
	for text, want := range map[string]WrittenUnit{
		"phase_margin >= 0.5 rad":  {"rad", 180 / math.Pi},
		"phase_margin >= 30deg":    {"deg", 1},
		"crossover >= 0.1 Hz":      {"Hz", 2 * math.Pi},
		"bandwidth >= 5e-4 kHz":    {"kHz", 2000 * math.Pi},
		"bandwidth >= +10 rpm":     {"rpm", 2 * math.Pi / 60},
		"delay_margin >= 1e+2 ms":  {"ms", 1e-3},
		"delay_margin >= 5 µs":     {"µs", 1e-6},
		"modulus_margin >= 40 %":   {"%", 0.01},
		"modulus_margin >= -8 dB":  {"", 0},
		"modulus_margin >= 0.4":    {"", 0},
		"ramp_error <= 60 deg":     {"deg", math.Pi / 180},
		"ramp_error <= 1 rad":      {"rad", 1},
		"ramp_error <= 1":          {"rad", 0},
		"velocity_constant >= 0.5": {"", 0},
	} {
		g := gated(t, loopFile("output: rad", held1+"requirements: [\""+text+"\"]"))
		got := g.Requirements[1].Written
		if got.Name != want.Name || !(math.Abs(got.Size-want.Size) <= 1e-15*want.Size) { // one rounding each
			t.Errorf("%s is shown in %+v, want %+v", text, got, want)
		}
	}
}

// What cannot be judged is no pass, and says why.
func TestGateNotJudged(t *testing.T) {
	for text, want := range map[string]string{
		held1 + "requirements: [effort_noise <= 1]":                                                        "neither noise nor words",
		held1 + "requirements: [processor_load <= 50 %]":                                                   "no compute time",
		strings.Replace(held1, "1/(s*(s + 1))", "s/(s + 1)^2", 1) + "requirements: [settling_time <= 1 s]": "no such figure",
	} {
		g := gated(t, loopFile(text))
		r := g.Requirements[1]
		if r.Met != nil || r.Passed() || g.Met || r.Cause != nil || !strings.Contains(r.NotJudged, want) {
			t.Errorf("%s: met %v, file met %v, %q, want %q", r.Requirement, r.Met, g.Met, r.NotJudged, want)
		}
	}
}

// A file without requirements is held to stability, and says so.
func TestGateWithoutRequirements(t *testing.T) {
	g := gated(t, loopFile(held1))
	if !g.Met || len(g.Requirements) != 1 || g.Note == "" {
		t.Errorf("%+v", g)
	}
	// 10/(s(s+1)) is unstable above T = 0.207146502944 s (recomputed with 50 digits).
	for period, stable := range map[string]bool{"0.20714 s": true, "0.20715 s": false} {
		g := gated(t, oneLoop("10/(s*(s + 1))", "{model: 1}", "compute: 0 s, period: "+period))
		if g.Met != stable || g.Requirements[0].Passed() != stable {
			t.Errorf("T = %s: met %v, stable %v", period, g.Met, g.Requirements[0].Passed())
		}
	}
}

// An unstable loop meets nothing; the cause stands once, and there is no slack to be glad of.
func TestGateUnstable(t *testing.T) {
	g := gated(t, oneLoop("10/(s*(s + 1))", "{model: 1}", "period: 0.25 s, compute: 0 s", "{ramp: 1}")+"requirements: [velocity_constant >= 1, modulus_margin >= 0.01]\n")
	if g.Met || g.Requirements[0].Cause == nil || g.Requirements[0].Cause.Item != "hold, half a tick" {
		t.Errorf("cause %+v", g.Requirements[0].Cause)
	}
	for _, r := range g.Requirements[1:] {
		if r.Passed() || r.Slack.OK || r.Cause == nil || r.Cause.Kind != "unstable" {
			t.Errorf("%s: met %v, slack %+v, cause %+v", r.Name, r.Met, r.Slack, r.Cause)
		}
	}
}

// The figures are those of compare.
func TestGateShowsTheFiguresOfCompare(t *testing.T) {
	var lines []string
	for _, m := range loop.Metrics() {
		lines = append(lines, m.Name+" >= 0"+map[string]string{"s": " s", "rad/s": " Hz", "deg": " deg", "dB": " dB", "%": " %"}[m.Unit])
	}
	l := parsed(t, oneLoop("4/(s*(0.1*s + 1))", "{model: 1}", "rate: 100 Hz, compute: 1 ms", "{step: 1}", "{ramp: 1}", "{parabola: 1}", "{load_step: 1}",
		"{move: {distance: 1, velocity: 1, acceleration: 4, jerk: 40}}")+"requirements: ["+strings.Join(lines, ", ")+"]\n")
	c, err := RunCompare(context.Background(), l, Options{Degrade: DefaultDegrade(), Curves: true})
	if err != nil {
		t.Fatal(err)
	}
	g, err := RunGate(context.Background(), l, GateOptions{})
	if err != nil {
		t.Fatal(err)
	}
	figures := 0
	for i, r := range c.Requirements {
		if got := g.Requirements[i+1]; got.Value != r.Value || got.Name != r.Name || got.Limit.Value != r.Limit || got.Unit != r.Unit {
			t.Errorf("%s: %+v, compare has %+v", r.Name, got, r)
		}
		if r.Value.OK {
			figures++
		}
	}
	if figures < 20 {
		t.Errorf("only %d figures", figures)
	}
}

// A value at its limit has a slack of 0, and not of −0, which would print with a sign.
func TestSlackAtTheLimit(t *testing.T) {
	for _, op := range []string{"<=", ">="} {
		s, percent := slack(Requirement{Op: op, Limit: 4, Value: Fig(4)})
		if s.Value != 0 || math.Signbit(s.Value) || percent.Value != 0 || math.Signbit(percent.Value) {
			t.Errorf("%s: slack %v, %v %%", op, s.Value, percent.Value)
		}
	}
}
