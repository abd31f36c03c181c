package study

import (
	"context"
	"strings"
	"testing"
)

// The sentence at the top names what sampling does and its largest cause.
func TestVerdict(t *testing.T) {
	for _, c := range []struct{ controller, timing, want string }{
		{"1", "rate: 10 MHz, compute: 0 s", "Sampled at 10 MHz the loop is stable; the phase margin stays at "},
		{"1", "rate: 100 Hz, compute: 1 ms", "largest part by the hold, half a tick ("},
		{"1", "rate: 100 Hz, compute: 7 ms", "largest part by the compute ("},
		{"1", "rate: 100 Hz, compute: 1 ms, update: {after: 15 ms}", "largest part by the waiting for the update ("},
		{"3", "rate: 3 Hz, compute: 0 s", "Sampled at 3 Hz the loop is unstable: the continuous loop has "},
		{"-1", "rate: 1 kHz, compute: 0 s", "and so is the continuous loop: mend the design before the sample rate."},
	} {
		l := parsed(t, oneLoop("4/(s*(0.1*s + 1))", "{model: "+c.controller+", map: tustin}", c.timing))
		got, err := RunCompare(context.Background(), l, Options{})
		if err != nil {
			t.Fatal(err)
		}
		if !strings.Contains(got.Verdict, c.want) {
			t.Errorf("%s, %s: %q, want it with %q", c.controller, c.timing, got.Verdict, c.want)
		}
	}
}
