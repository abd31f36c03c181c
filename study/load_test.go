package study

import (
	"strings"
	"testing"
)

// The processor's load is the cost of a tick over the tick: cost where it stands, or cycles of the clock, else compute. A load that is the limit as
// a decimal meets it: 3 us of 1 ms are 0.3 %, and in floating point 100·3e-6/1e-3 is above that.
func TestProcessorLoad(t *testing.T) {
	for processor, want := range map[string]float64{
		"":                                       0.3, // 3 us of compute in 1 ms
		"processor: {budget: 50 %}":              0.3,
		"processor: {cost: 1 us}":                0.1,
		"processor: {cost: 55 us, budget: 40 %}": 5.5,
		"processor: {cost_cycles: 4032, clock: 72 MHz}":           5.6, // 56 us
		"processor: {cost_cycles: 3960, clock: 72 MHz}":           5.5,
		"processor: {cost: 1.2 ms} # more than the tick can hold": 120,
	} {
		g := gated(t, loopFile("plant: {model: 1/(s + 1)}", "controller: {model: 4}", "timing: {rate: 1 kHz, compute: 3 us}", processor,
			"requirements: [processor_load <= "+number(want)+" %, processor_load >= "+number(want)+" %]"))
		for _, r := range g.Requirements[1:] {
			if r.Met == nil || !*r.Met || r.Value.Value != want {
				t.Errorf("%q: %s is %v with %.17g %%", processor, r.Requirement, r.Met, r.Value.Value)
			}
		}
	}
	text := loopFile("plant: {model: 1/(s + 1)}", "controller: {model: 4}", "timing: {rate: 1 kHz}", "requirements: [processor_load <= 1 %]")
	c := compared(t, text)
	for _, w := range c.Warnings {
		if w.Code == "requirement_not_judged" && strings.Contains(w.Text, "no compute time and processor no cost") {
			return
		}
	}
	t.Errorf("nothing says what is missing: %v", c.Warnings)
}

// The budget is the decimal that was written: 100·0.29 is below 29 in floating point.
func TestProcessorBudget(t *testing.T) {
	l := parsed(t, loopFile("plant: {model: 1/(s + 1)}", "controller: {model: 4}", "timing: {rate: 1 kHz}", "processor: {cost: 290 us, budget: 29 %}"))
	list, _ := constraints(l)
	if c := list[2]; c.name != "processor_load" || c.limit != 29 || c.text != "processor_load <= 29 %" || !meets(loadPercent(l), c.op, c.limit) {
		t.Errorf("%+v, load %.17g", c, loadPercent(l))
	}
}
