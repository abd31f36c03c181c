package loop

import (
	"math"
	"reflect"
	"testing"
)

func TestSensorSection(t *testing.T) {
	s := accepted(t, "sensor: {step: 0.001, noise: 2e-3, offset: -0.01}").Sensor
	if s.Step != 0.001 || s.Noise != 0.002 || s.Offset != -0.01 || s.Bits != 0 || s.Encoder != nil || s.Curve != nil {
		t.Errorf("%+v", s)
	}
	if s = accepted(t, "sensor: {bits: 12, range: [0, 5], noise: 0, offset: 1/4}").Sensor; s.Bits != 12 || s.Noise != 0 || s.Offset != 0.25 {
		t.Errorf("%+v", s)
	}
	if s = accepted(t, "loop: b").Sensor; s.Step != 0 || s.Noise != 0 || s.Offset != 0 || s.Encoder != nil || s.Curve != nil {
		t.Errorf("out of nothing: %+v", s)
	}
	refused(t, "sensor: {step: §0}", "step is not above zero")
	refused(t, "sensor: {step: 1 §V}\neffort: V", "step carries no unit")
	refused(t, "sensor: {noise: §-0.1, offset: §inf}", "noise is negative", "not a number")
	refused(t, "sensor: {noise: §NaN}", "not a number")
	refused(t, "sensor: {bits: §-3, range: [0, 5]}", "a whole number from 1 to 32")
	refused(t, "sensor: {bits: 12, range: [0, 5], §step: 0.1}", "bits and step exclude each other")
	refused(t, "output: rad\nsensor: {bits: 12, range: [0, 5], §encoder: {counts_per_turn: 10}}", "bits and encoder exclude each other")
	refused(t, "output: rad\nsensor: {encoder: {counts_per_turn: 10}, §step: 1}", "step and encoder exclude each other")
	refused(t, "output: rad\nsensor: {encoder: {counts_per_turn: 10}, §curve: [[0, 1], [1, 2]]}", "encoder and curve exclude each other")
	refused(t, "sensor: {§steps: 1}", "near step")
	refused(t, "sensor: {step: 0.1, §range: [0, 1]}", "range without bits")
}

func TestEncoder(t *testing.T) {
	for text, want := range map[string]Encoder{
		"output: rad\nsensor: {encoder: {counts_per_turn: 4096}}":                             {CountsPerTurn: 4096, Turn: 2 * math.Pi},
		"output: deg\nsensor: {encoder: {counts_per_turn: 1, measures: position}}":            {CountsPerTurn: 1, Turn: 360},
		"output: turn\nsensor: {encoder: {counts_per_turn: 1e9}}":                             {CountsPerTurn: 1_000_000_000, Turn: 1},
		"output: turns\nsensor: {encoder: {counts_per_turn: 4*512}}":                          {CountsPerTurn: 2048, Turn: 1},
		"output: rad/s\nsensor: {encoder: {counts_per_turn: 7}}":                              {CountsPerTurn: 7, Turn: 2 * math.Pi, Velocity: true},
		"output: deg/s\nsensor: {encoder: {counts_per_turn: 7, method: counts}}":              {CountsPerTurn: 7, Turn: 360, Velocity: true},
		"output: turns/s\nsensor: {encoder: {counts_per_turn: 7, method: time}}":              {CountsPerTurn: 7, Turn: 1, Velocity: true, ByTime: true},
		"output: rpm\nsensor: {encoder: {counts_per_turn: 7, method: time, clock: 10 MHz}}":   {CountsPerTurn: 7, Turn: 60, Velocity: true, ByTime: true, Clock: 1e7},
		"output: mm\nsensor: {encoder: {counts_per_turn: 7, measures: position, turn: 4}}":    {CountsPerTurn: 7, Turn: 4},
		"output: rad/s\nsensor: {encoder: {counts_per_turn: 7, measures: position, turn: 4}}": {CountsPerTurn: 7, Turn: 4}, // the sensor's model may integrate
		"output: rad\nsensor: {encoder: {counts_per_turn: 7, turn: 4}}":                       {CountsPerTurn: 7, Turn: 4},
	} {
		if got := accepted(t, text).Sensor.Encoder; got == nil || *got != want {
			t.Errorf("%s: %+v, want %+v", text, got, want)
		}
	}
	// 2π/4096 = 0.0015339807878856412 (16 digits of 50-digit arithmetic)
	if c := accepted(t, "output: rad\nsensor: {encoder: {counts_per_turn: 4096}}").Sensor.Encoder.Count(); !(math.Abs(c-0.0015339807878856412) <= 2.2e-19) { // an ulp there
		t.Errorf("a count is %.17g", c)
	}
	in := func(unit, body string) string { return "output: " + unit + "\nsensor: {encoder: {" + body + "}}" }
	refused(t, in("rad", "counts_per_turn: §0"), "a whole number from 1 to 1000000000")
	refused(t, in("rad", "counts_per_turn: §1e9 + 1"), "a whole number from 1 to")
	refused(t, in("rad", "counts_per_turn: §0.5"), "a whole number from 1 to")
	refused(t, in("rad", "counts_per_turn: §-4"), "a whole number from 1 to")
	refused(t, "output: rad\nsensor: {encoder: §{turn: 1}}", "encoder has no counts_per_turn")
	refused(t, in("rad", "counts_per_turn: 4, turn: §0"), "turn is not above zero")
	refused(t, in("rad", "counts_per_turn: 4, turn: 360 §deg"), "turn carries no unit")
	refused(t, in("rad", "counts_per_turn: 4, measures: §speed"), "one of position, velocity")
	refused(t, "output: mm\nsensor: {encoder: §{counts_per_turn: 4, turn: 1}}", `encoder does not tell what it measures; expected measures: position or velocity; the unit "mm" does not tell`)
	refused(t, "output: mm\nsensor: {encoder: §{counts_per_turn: 4, measures: position}}", `"mm" is no unit of a position that tells`)
	refused(t, "output: rad/s\nsensor: {encoder: §{counts_per_turn: 4, measures: position}}", "is no unit of a position that tells; expected turn:")
	refused(t, "output: rad\nsensor: {encoder: §{counts_per_turn: 4, measures: velocity}}", "the unit of the output times a second")
	refused(t, in("rad", "counts_per_turn: 4, §method: time"), "method beside a position")
	refused(t, in("rpm", "counts_per_turn: 4, method: §frequency"), "one of counts, time")
	refused(t, in("rpm", "counts_per_turn: 4, §clock: 1 MHz"), "clock without method: time")
	refused(t, in("rpm", "counts_per_turn: 4, method: counts, §clock: 1 MHz"), "clock without method: time")
	refused(t, in("rpm", "counts_per_turn: 4, method: time, clock: §0 Hz"), "clock is out of range")
	refused(t, in("rpm", "counts_per_turn: 4, method: time, clock: 10 §rpm"), "rpm\" is not a unit of a clock")
	refused(t, "output: rad\nsensor: {encoder: §4096}", "encoder is a single value")
}

func TestCurve(t *testing.T) {
	for text, want := range map[string]Curve{
		"[[0, 3.1], [25, 2.4]]":                    {Output: []float64{0, 25}, Electric: []float64{3.1, 2.4}},
		"[[-1, -2], [0, 0], [1/2, 5], [2, 1e200]]": {Output: []float64{-1, 0, 0.5, 2}, Electric: []float64{-2, 0, 5, 1e200}},
		"{file: ntc.csv}":                          {File: "ntc.csv", Output: []float64{0, 25}, Electric: []float64{3.1, 2.4}},
	} {
		if got := accepted(t, "sensor: {curve: "+text+"}").Sensor.Curve; got == nil || !reflect.DeepEqual(*got, want) {
			t.Errorf("%s: %+v, want %+v", text, got, want)
		}
	}
	in := func(text string) string { return "sensor: {curve: " + text + "}" }
	refused(t, in("§[[0, 1]]"), "a curve of 1 points")
	refused(t, in("§[]"), "2 to 10000 points")
	refused(t, in("§ntc.csv"), "curve is a single value")
	refused(t, in("[[0, 1], §3]"), "a point of the curve is a single value")
	refused(t, in("[[0, 1], §[1, 2, 3]]"), "at most 2")
	refused(t, in("[[0, 1], §[1]]"), "a point of the curve with one number")
	refused(t, in("[[0, §NaN], [1, 2 §V]]")+"\noutput: V", "not a number", "carries no unit")
	refused(t, in("[[0, 1], [§0, 2]]"), "the outputs of the curve do not rise; expected an output above 0")
	refused(t, in("[[0, 1], [1, 2], [§0.5, 3], [0, 4]]"), "the outputs of the curve do not rise; expected an output above 1")
	refused(t, in("[[0, 1], [1, 2], [2, §1.5]]"), "the curve turns round here: the firmware cannot tell which output it was; expected an electric value above 2")
	refused(t, in("[[0, 3], [1, 2], [2, 1], [3, §1.25]]"), "an electric value below 1, as the curve falls")
	refused(t, in("[[0, 1], [1, 2], [2, §2]]"), "the curve is level here")
	refused(t, in("[[0, 0], [1e-150, §1e150]]"), "the slope of the curve is outside")
	refused(t, in("[[1, 0], [§1 + 1e-60, 1]]"), "do not rise") // the same float64
	refused(t, in("§{§csv: ntc.csv}"), "curve has no file", "unknown key")
	refused(t, in("§{}"), "curve has no file")
	refused(t, in("{file: §nowhere.csv}"), "no such file; expected a CSV file with the header output,electric")
}
