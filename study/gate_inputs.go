package study

import (
	"fmt"
	"math"

	"steadytick/loop"
)

// sameSize: sizes of inputs are the same to what seven digits of a converted angle say.
const sameSize = 1e-6

// apart says why the figures of the two revisions answer different questions, "" where they do not: an error
// of a ramp twice as steep is no worse error.
func (r revisions) apart(name string) string {
	switch name {
	case "step_error":
		return r.differ(firstOnly, "step")
	case "ramp_error":
		return r.differ(firstOnly, "ramp")
	case "parabola_error":
		return r.differ(firstOnly, "parabola")
	case "load_error":
		return r.differ(firstOnly, "load_step")
	case "ripple":
		return r.differ(everyOne, "step", "ramp", "parabola", "sine", "load_step")
	case "peak_tracking_error", "rms_tracking_error":
		return r.differ(everyOne, "move", "file")
	case "peak_effort":
		return r.stepsDiffer()
	case "settling_time":
		if r.before.SettlingBand != r.after.SettlingBand {
			return fmt.Sprintf("settling_band is %s %% before and %s %% now", number(100*r.before.SettlingBand), number(100*r.after.SettlingBand))
		}
		fallthrough
	case "overshoot", "rise_time", "samples_per_rise":
		if stepLimited(r.was) || stepLimited(r.now) { // otherwise linear: the size of the step does not matter
			return r.stepsDiffer()
		}
	}
	return ""
}

// Metrics look at the first input of a kind, or at every one.
const (
	firstOnly = true
	everyOne  = false
)

// differ compares the inputs of some kinds, all of them or the first of each.
func (r revisions) differ(first bool, kinds ...string) string {
	before, after := inputsOf(r.before, first, kinds), inputsOf(r.after, first, kinds)
	if len(before) != len(after) {
		return fmt.Sprintf("the list of inputs differs: %d before, %d now", len(before), len(after))
	}
	for i := range before {
		if !r.sameInput(before[i], after[i]) {
			a, b := inputTitle(r.before, before[i]), inputTitle(r.after, after[i])
			if a == b {
				return fmt.Sprintf("the input %s differs", a)
			}
			return fmt.Sprintf("the input differs: %s before, %s now", a, b)
		}
	}
	return ""
}

func inputsOf(l *loop.Loop, first bool, kinds []string) []loop.Input {
	var out []loop.Input
	for _, in := range l.Inputs {
		for _, k := range kinds {
			if in.Kind == k && !(first && len(out) > 0) {
				out = append(out, in)
			}
		}
	}
	return out
}

// stepsDiffer compares the steps that the step figures belong to.
func (r revisions) stepsDiffer() string {
	a, b := gateStep(r.before), gateStep(r.after)
	if nearly(a.Size*r.units.output, b.Size) {
		return ""
	}
	return fmt.Sprintf("the step differs: %s before, %s now", inputTitle(r.before, a), inputTitle(r.after, b))
}

// gateStep is the step that the step figures belong to: the first of the file, 1 without one.
func gateStep(l *loop.Loop) loop.Input {
	for _, in := range l.Inputs {
		if in.Kind == "step" && in.Size != 0 {
			return in
		}
	}
	return loop.Input{Kind: "step", Size: 1}
}

// sameInput tells whether two inputs are the same in the units of the revision after.
func (r revisions) sameInput(a, b loop.Input) bool {
	unit := r.units.output
	if a.Kind == "load_step" {
		unit = r.units.effort
	}
	switch {
	case a.Kind != b.Kind || !nearly(a.Size*unit, b.Size):
		return false
	case a.Kind == "sine":
		return a.Frequency.Cmp(b.Frequency) == 0
	case a.Kind == "move":
		return nearly(a.Move.Distance*unit, b.Move.Distance) && nearly(a.Move.Velocity*unit, b.Move.Velocity) &&
			nearly(a.Move.Acceleration*unit, b.Move.Acceleration) && nearly(a.Move.Jerk*unit, b.Move.Jerk)
	}
	if len(a.Times) != len(b.Times) {
		return false
	}
	for i := range a.Times {
		if a.Times[i] != b.Times[i] || !nearly(a.Values[i]*unit, b.Values[i]) {
			return false
		}
	}
	return true
}

// nearly compares two sizes.
func nearly(a, b float64) bool {
	return math.Abs(a-b) <= sameSize*math.Max(math.Abs(a), math.Abs(b))
}

// floorOfSignal is the part of the largest reference that stands for an error that was 0.
const floorOfSignal = 1e-3

// floor is what the tolerance is taken of where the figure before is 0:
//
//	overshoot            1 percentage point
//	errors and ripple    0.001 of the largest reference of the file: step, ramp, parabola, sine, move, file
//	any other            0, so that every step away from 0 counts
func (r revisions) floor(name string) float64 {
	if name == "overshoot" {
		return 1
	}
	if m, _ := loop.FindMetric(name); m.Unit != "output" {
		return 0
	}
	most := 0.0
	for _, in := range r.after.Inputs {
		switch in.Kind {
		case "load_step":
		case "move":
			most = math.Max(most, math.Abs(in.Move.Distance))
		default:
			most = math.Max(most, math.Abs(in.Size))
		}
		for _, v := range in.Values {
			most = math.Max(most, math.Abs(v))
		}
	}
	return floorOfSignal * most
}
