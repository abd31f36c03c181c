package study

import (
	"context"
	"errors"
	"fmt"
	"math"
	"strings"
	"testing"
)

// A draw that makes the file invalid is a failed trial with its reason; the root of a negative number for a < 1, a part of 0.12/0.44 of
// the draws, within five standard deviations. Corners fail where 1 + C·P·H = 0 at infinite frequency: K = 1 there.
func TestSpreadFailedTrials(t *testing.T) {
	root := `loop: root
symbols:
  a: {value: 1.1, spread: 20 %}
  w: sqrt(a - 1)
plant: {model: 1/(s*(s + w + 1))}
controller: {model: 1}
timing: {rate: 20 Hz}
requirements: [phase_margin >= 1 deg]
`
	const n, p = 500, 0.12 / 0.44
	r, text := lines(t, parsed(t, root), SpreadOptions{Trials: n, Seed: 1})
	if got := float64(r.Yield.Failed) / n; !(math.Abs(got-p) <= 5*math.Sqrt(p*(1-p)/n)) || r.Yield.Met != n-r.Yield.Failed {
		t.Errorf("%g of the trials fail, want %g: %+v", got, p, r.Yield)
	}
	if len(r.Failures) != 1 || r.Failures[0].Count != r.Yield.Failed || !strings.Contains(r.Failures[0].Reason, "the root of something other than a constant >= 0") {
		t.Errorf("%+v", r.Failures)
	}
	first := rowsOf(t, text)[r.Failures[0].First-1]
	if first.Failed != r.Failures[0].Reason || !(first.Symbols["a"] < 1) {
		t.Errorf("the first failure is %+v", first)
	}
	if len(r.Warnings) != 1 || r.Warnings[0].Code != "trials_failed" {
		t.Errorf("%+v", r.Warnings)
	}
	direct := `loop: direct
symbols: {K: {value: 0.8, spread: 25 %}, a: {value: 2, spread: 10 %}}
plant: {model: (s + a)/(s + 1)}
controller: {model: -K}
timing: {rate: 20 Hz, compute: 1 ms}
`
	r = spreadOf(t, parsed(t, direct), SpreadOptions{Draw: DrawCorners})
	if r.Yield.Failed != 2 || r.Failures[0].Count != 2 || !strings.Contains(r.Failures[0].Reason, "algebraic loop") || r.Failures[0].First != 2 {
		t.Errorf("%+v %+v", r.Yield, r.Failures)
	}
	one, err := RunSpreadTrial(context.Background(), parsed(t, direct), SpreadOptions{Draw: DrawCorners}, 2)
	if err != nil || one.Meets || !strings.Contains(one.Failed, "algebraic loop") || one.Levels != "K high, a low" {
		t.Errorf("%+v %v", one, err)
	}
}

// Files and options that cannot be are refused with what to do.
func TestSpreadRefuses(t *testing.T) {
	none := parsed(t, strings.ReplaceAll(fmt.Sprintf(integrator, "0 %", "0.1 s", ""), "spread: 50 %", "spread: 0 %"))
	if _, err := RunSpread(context.Background(), none, SpreadOptions{}); !errors.Is(err, ErrNoSpread) || !strings.Contains(err.Error(), "J: {value: 0.018, spread: 20 %}") {
		t.Error(err)
	}
	many := "loop: many\nsymbols:\n"
	sum := "s + 1"
	for i := range 17 {
		many += fmt.Sprintf("  a%d: {value: 0.1, spread: 1 %%}\n", i)
		sum += fmt.Sprintf(" + a%d", i)
	}
	l := parsed(t, many+"plant: {model: 1/("+sum+")}\ncontroller: {model: 1}\ntiming: {rate: 20 Hz}\n")
	if _, err := RunSpread(context.Background(), l, SpreadOptions{Draw: DrawCorners}); !errors.Is(err, ErrTooManyCorners) || !strings.Contains(err.Error(), "17 symbols") || !strings.Contains(err.Error(), "take the spread off") {
		t.Error(err)
	}
	r := spreadOf(t, l, SpreadOptions{Trials: 5, Seed: 1})
	if r.Corners != nil || !strings.Contains(r.CornersNote, "17 symbols have 2^17 corners") {
		t.Errorf("%+v %s", r.Corners, r.CornersNote)
	}
	for k, good := range map[int64]bool{-1: false, 0: false, 1: true, 16: true, 17: false} {
		_, err := RunSpreadTrial(context.Background(), parsed(t, wide), SpreadOptions{Draw: DrawCorners}, k)
		if good != (err == nil) || !good && !strings.Contains(err.Error(), "the numbers 1 to 16") {
			t.Errorf("trial %d of 16 corners: %v", k, err)
		}
	}
	ctx, stop := context.WithCancel(context.Background())
	stop()
	if r, err := RunSpread(ctx, parsed(t, wide), SpreadOptions{}); r != nil || !errors.Is(err, context.Canceled) {
		t.Error(r, err)
	}
}

// A loop that is unstable as written, a requirement that no analysis judges, and one without a figure.
func TestSpreadOddRequirements(t *testing.T) {
	l := integratorLoop(t, "90 %", "0.3 s", "phase_margin >= 45 deg")
	r, text := lines(t, l, SpreadOptions{Trials: 100, Seed: 1})
	if r.Warnings[0].Code != "nominal_unstable" || r.Yield.Stable == 0 || metricNamed(t, r, "phase_margin").Sensitivities[0].PerPercent.OK {
		t.Errorf("%+v", r)
	}
	if q := r.Requirements[1]; q.Missed < r.Yield.Unstable || q.Worst.Stable || q.Worst.Value.OK {
		t.Errorf("%+v", q)
	}
	if !(r.Requirements[0].Worst.Value.Value < 0) {
		t.Errorf("the worst of stable does not grow: %+v", r.Requirements[0].Worst)
	}
	// The worst grows fastest: of z = 1 − kT that with the largest k.
	most := 0.0
	for _, row := range rowsOf(t, text) {
		most = math.Max(most, row.Symbols["k"])
	}
	for _, q := range r.Requirements {
		if q.Worst.Symbols[0].Value != most {
			t.Errorf("%s: the worst is %+v, the largest k %g", q.Requirement, q.Worst, most)
		}
	}
	m := metricNamed(t, r, "velocity_constant") // an unstable loop has one, but no error that follows from it
	if m.Without != r.Yield.Unstable || m.Count+m.Infinite+m.Without != 100 {
		t.Errorf("%+v", m)
	}
	l = integratorLoop(t, "10 %", "0.1 s", "word_margin >= 1 bits")
	r = spreadOf(t, l, SpreadOptions{Trials: 10, Seed: 1, Required: Fig(0)})
	if q := r.Requirements[len(r.Requirements)-1]; q.Judged || r.Yield.Met != 10 || *r.Yield.Reached || r.Warnings[0].Code != "requirement_not_judged" || !strings.Contains(r.Verdict, `does not count as reached: "word_margin >= 1 bits" is not judged`) {
		t.Errorf("%+v %+v", r.Requirements, r.Yield)
	}
}

// The sentence names the yield, what fails most or comes nearest to it, what drives it, and the worst cases.
func TestSpreadVerdict(t *testing.T) {
	for _, c := range []struct {
		name, text string
		o          SpreadOptions
		want       []string
	}{
		{"some fail", wide, SpreadOptions{Trials: 200, Seed: 5, Required: Fig(99)}, []string{"does not reach the 99 % asked for", `"ramp_error <= 0.08" fails most, in `, " b drives it", "The worst trial, number ", "the worst corner (J low, b high, w high, Kt low) has "}},
		{"all meet", fmt.Sprintf(integrator, "10 %", "0.1 s", "velocity_constant >= 1, phase_margin >= 50 deg"), SpreadOptions{Trials: 50, Seed: 1, Required: Fig(90)},
			[]string{"50 of 50 trials (100 %) meet all requirements", "between 92.87 and 100 %", "reaches the 90 % asked for", `"phase_margin >= 50 deg" comes nearest to failing. k drives it: 1 % more of it changes the figure by -0.3308 deg`, "the worst corner (k high) has 56.63 deg"}},
		{"no requirements", fmt.Sprintf(integrator, "10 %", "0.1 s", ""), SpreadOptions{Trials: 50, Seed: 1}, []string{"(100 %) are stable", "k drives the modulus margin", "the worst corner (k high) has 0.45"}},
		{"some unstable", fmt.Sprintf(integrator, "90 %", "0.12 s", "velocity_constant >= 1"), SpreadOptions{Trials: 50, Seed: 1}, []string{`"stable" fails most, in `, "k drives the modulus margin", "is unstable; the worst corner (k high) is unstable"}},
		{"corners", wide, SpreadOptions{Draw: DrawCorners}, []string{"of 16 corners (", ". \"ramp_error <= 0.08\" fails most", "The worst corner (J low"}},
	} {
		got := spreadOf(t, parsed(t, c.text), c.o).Verdict
		for _, w := range c.want {
			if !strings.Contains(got, w) {
				t.Errorf("%s: %s\nwant %q", c.name, got, w)
			}
		}
	}
	for p, want := range map[float64]string{100: "100", 99.95: "99.95", 99.999: "99.999", 87.126: "87.13", 0: "0", 99.99999: "99.99999"} {
		if got := share(p); got != want {
			t.Errorf("%g is written %s, want %s", p, got, want)
		}
	}
}
