package loop

import (
	"fmt"
	"math"
	"math/big"
	"reflect"
	"strings"
	"testing"
)

func timed(keys string) string { return "timing: {rate: 1 kHz" + keys + "}" }

func TestTimingSection(t *testing.T) {
	tm := accepted(t, timed(", conversion: 10 us, latency: 1.5 us, compute: 100 us, update_jitter: 5 us")).Timing
	if tm.Latency.Cmp(rat("0.0000015")) != 0 || tm.UpdateJitter.Cmp(rat("0.000005")) != 0 || tm.LoopDelay().Cmp(rat("0.0001115")) != 0 {
		t.Errorf("%+v, delay %v", tm, tm.LoopDelay())
	}
	tm = accepted(t, timed("")).Timing
	if tm.Latency.Sign() != 0 || tm.UpdateJitter.Sign() != 0 || tm.Measured != nil || tm.Missed != (Chance{}) || tm.Stale != (Chance{}) || tm.MeasuredPeriod {
		t.Errorf("out of nothing: %+v", tm)
	}
	accepted(t, timed(", conversion: 100 us, latency: 400 us, compute: 500 us")) // the whole tick
	accepted(t, timed(", conversion: 100 us, latency: 400 us, update: {after: 500 us}"))
	accepted(t, timed(", update_jitter: 499.999 us"))

	refused(t, timed(", latency: §5"), "the unit is missing")
	refused(t, timed(", latency: §-1 us"), "latency: a negative time")
	refused(t, timed(", update_jitter: §NaN us"), "not a number")
	refused(t, timed(", §update_jiter: 5 us"), "near update_jitter")
	refused(t, timed(", conversion: 100 us, latency: 401 us, §compute: 500 us"), "conversion, latency and compute take 1.001 ms, longer than the tick of 1 ms")
	refused(t, timed(", conversion: 600 us, §compute: 500 us"), "conversion and compute take 1.1 ms")
	refused(t, timed(", §latency: 2 ms"), "conversion, latency and compute take 2 ms")
	refused(t, timed(", conversion: 100 us, latency: 400 us, §update: {after: 499 us}"), "before the effort is known at 500 us; expected after: conversion + latency + compute or more")
	refused(t, timed(", §update_jitter: 500 us"), "with a jitter of 500 us peak the updates of a tick of 1 ms can change order; expected less than half a tick")
	refused(t, timed(", §jitter: 0.5 ms"), "the samples of a tick")
}

func TestChances(t *testing.T) {
	for text, want := range map[string]Chance{
		"1 %":           {Probability: 0.01},
		"0 %":           {},
		"0.001%":        {Probability: 1e-5},
		"99.9999 %":     {Probability: 0.999999},
		"{every: 2}":    {Every: 2},
		"{every: 5*20}": {Every: 100},
		"{every: 1e9}":  {Every: 1_000_000_000},
	} {
		if got := accepted(t, timed(", missed: "+text)).Timing; got.Missed != want || got.Stale != (Chance{}) {
			t.Errorf("%s: %+v", text, got)
		}
		if got := accepted(t, timed(", stale: "+text)).Timing; got.Stale != want || got.Missed != (Chance{}) {
			t.Errorf("%s: %+v", text, got)
		}
	}
	for text, want := range map[string]string{
		"§100 %":               "is out of range; expected 0 % up to below 100 %",
		"§250 %":               "is out of range",
		"§-1 %":                "is out of range",
		"§1":                   "the unit is missing",
		"1 §ms":                "is a unit of time",
		"§NaN %":               "not a number",
		"§inf %":               "not a number",
		"§[1 %]":               "is a list here; expected a probability such as 1 %, or {every: 100}",
		"{every: §1}":          "a whole number from 2 to",
		"{every: §0}":          "a whole number from 2 to",
		"{every: §-5}":         "a whole number from 2 to",
		"{every: §2.5}":        "a whole number from 2 to",
		"{every: §1e9 + 1}":    "a whole number from 2 to",
		"{every: 1 §%}":        "every",
		"§{}":                  "has no every",
		"{every: 3, §of: 100}": "unknown key",
	} {
		refused(t, timed(", missed: "+text), want)
		refused(t, timed(", stale: "+text), want)
	}
}

func TestMeasuredTicks(t *testing.T) {
	m := accepted(t, timed(", measured: ticks.csv, update_jitter: 5 us")).Timing.Measured
	if m.File != "ticks.csv" || !reflect.DeepEqual(m.Interval, []float64{0.001, 0.0011}) || m.Delay != nil {
		t.Errorf("%+v", m)
	}
	if m = accepted(t, timed(", measured: both.csv")).Timing.Measured; !reflect.DeepEqual(m.Delay, []float64{0.0002, 0}) || len(m.Interval) != 2 {
		t.Errorf("%+v", m)
	}
	refused(t, timed(", measured: ticks.csv, §jitter: 1 us"), "jitter and measured exclude each other")
	refused(t, timed(", jitter: 1 us, §measured: ticks.csv"), "jitter and measured exclude each other")
	refused(t, timed(", measured: both.csv, §update_jitter: 1 us"), "update_jitter beside measured delays")
	refused(t, timed(", measured: §none.csv"), "no such file; expected a CSV file with the header interval_s or interval_s,delay_s")
	refused(t, timed(", measured: §{file: ticks.csv}"), "file is a mapping here")
	// Delays: the plant below answers at once, so that a measured delay of 0 leaves no time for it.
	direct := "plant: {model: (s + 2)/(s + 1)}\n"
	accepted(t, direct+timed(", compute: 1 us, measured: ticks.csv"))
	refused(t, direct+timed(", §compute: 1 us, measured: both.csv"), "algebraic loop")
	// The longest delay counts among all delay, 1000 s here: 0.2 ms of the file, with none in timing.
	accepted(t, "plant: {model: 1/(s + 1), dead_time: 999.9997 s}\n"+timed(", measured: both.csv"))
	refused(t, "plant: {model: 1/(s + 1), §dead_time: 999.9999 s}\n"+timed(", measured: both.csv"), "all delay together is 1000000")
}

// A file at another rate: its intervals stay, and must still belong to the tick.
func TestMeasuredAtAnotherRate(t *testing.T) {
	l := accepted(t, timed(", measured: ticks.csv"))
	for period, fits := range map[string]bool{
		"0.001": true, "0.1": true, "0.11": true, "0.111": false, "0.000011": true, "0.0000109": false,
	} { // 0.01 · 0.1 s is the shorter interval, 100 · 11 µs the longer one
		m, problems := l.WithRate(rat(period))
		want := fits && period != "0.11" // 0.01 · 0.11 s = 1.1 ms is above the shorter one
		if (m != nil) != want {
			t.Errorf("a tick of %s s: %v", period, problems)
		}
		if m != nil && m.Timing.Measured != l.Timing.Measured {
			t.Errorf("a tick of %s s: read again", period)
		}
		again, refused := ParseWith(l.File, l.Source, openSide, Options{Period: rat(period)})
		if (again == nil) != (m == nil) || problems.Error() != refused.Error() {
			t.Errorf("a tick of %s s: %v, read again: %v", period, problems, refused)
		}
		if m == nil && (len(problems) != 1 || problems[0].File != "ticks.csv" || problems[0].Line < 2 || !strings.Contains(problems[0].Message, "in a loop with a tick of")) {
			t.Errorf("a tick of %s s: %v", period, problems)
		}
	}
}

func TestWithRateChecksTheNewTimes(t *testing.T) {
	for _, c := range []struct{ keys, good, bad, part string }{
		{", compute: 10 us, latency: 90 us", "0.0001", "0.000099", "longer than the tick"},
		{", update_jitter: 100 us", "0.00021", "0.0002", "the updates of a tick"},
	} {
		l := accepted(t, timed(c.keys))
		if m, problems := l.WithRate(rat(c.good)); len(problems) > 0 || m.Timing.Latency != l.Timing.Latency {
			t.Errorf("%s at %s: %v", c.keys, c.good, problems)
		}
		if _, problems := l.WithRate(rat(c.bad)); len(problems) != 1 || !strings.Contains(problems[0].Message, c.part) {
			t.Errorf("%s at %s: %v", c.keys, c.bad, problems)
		}
	}
}

func TestPeriodUsed(t *testing.T) {
	in := func(controller string) string {
		return timed(", period_used: measured") + "\ncontroller: {" + controller + "}"
	}
	for _, controller := range []string{
		"model: 2", "model: 2, map: hold", // a number needs no map
		"model: (s + 1)/s, map: tustin", "model: (s + 1)/s, map: prewarped, at: 40 Hz", "model: 1/(s + 1), map: forward", "model: 1/s, map: backward",
		"pid: {form: parallel, Kp: 1, Ki: 2, Kd: 3, filter: 1 ms, map: {i: forward, d: backward}}", "pid: {form: parallel, Kp: 1}",
		"pid: {form: standard, K: 1, Ti: 1 s, map: tustin}, prefilter: {model: 1/(s + 1), map: backward}, feedforward: {model: 3}",
	} {
		if l := accepted(t, in(controller)); !l.Timing.MeasuredPeriod {
			t.Errorf("%s: %+v", controller, l.Timing)
		}
		if l := accepted(t, strings.Replace(in(controller), "measured", "nominal", 1)); l.Timing.MeasuredPeriod {
			t.Errorf("%s: %+v", controller, l.Timing)
		}
	}
	refused(t, timed(", period_used: §mesured"), "near measured")
	refused(t, in("model: (s + 1)/s, §map: hold"), "map hold with period_used: measured: its numbers are made for one period; expected one of forward, backward, tustin, prewarped, or period_used: nominal")
	refused(t, in("model: (s + 1)/s, §map: triangle"), "map triangle with")
	refused(t, in("model: (s + 1)/s, §map: matched"), "map matched with")
	refused(t, in("§model: 0.1/(z - 1)"), "a model in z with period_used: measured")
	refused(t, in("pid: {form: parallel, Kp: 1, Ki: 2, §map: hold}"), "map hold with")
	refused(t, in("pid: {form: parallel, Kp: 1, Ki: 2, Kd: 3, filter: 1 ms, map: {i: tustin, §d: matched}}"), "map matched with")
	refused(t, in("pid: {form: series, Kp: 1, Ti: 2 s, Td: 3 s, filter: 1 ms, map: {§i: triangle, d: tustin}}"), "map triangle with")
	refused(t, in("pid: {form: parallel, Kp: 1, Ki: 2, §stored: with_period, map: tustin}"), "stored: with_period and period_used: measured contradict each other")
	refused(t, in("model: 2, prefilter: {model: 1/(s + 1), §map: matched}, feedforward: {§model: z^-1}"), "map matched with", "a model in z with")

	l := accepted(t, in("model: (s + 1)/s, map: tustin"))
	if _, problems := l.WithMap("backward"); len(problems) > 0 {
		t.Error(problems)
	}
	_, problems := l.WithMap("hold")
	if len(problems) != 1 || problems[0].Line != 2 || !strings.Contains(problems[0].Message, "--map hold with period_used: measured") {
		t.Errorf("another map: %v", problems)
	}
}

func TestDisturbanceKinds(t *testing.T) {
	in := func(entry string) string { return "disturbances: [" + entry + "]" }
	for entry, want := range map[string]Disturbance{
		"load_step: {size: -2}": {Kind: "step", At: "input", Size: -2, SizeExact: rat("-2"), Time: new(big.Rat)},
		"load_step: {name: a, at: output, size: 1/2, time: 0.2 s}": {Kind: "step", Name: "a", At: "output", Size: 0.5, SizeExact: rat("1/2"), Time: rat("1/5")},
		"noise: {rms: 0.01}": {Kind: "noise", At: "input", Size: 0.01, SizeExact: rat("1/100")},
		"noise: {name: b, at: sensor, rms: 2, band: 200 rad/s}": {Kind: "noise", Name: "b", At: "sensor", Size: 2, SizeExact: rat("2"), Band: rat("200")},
		"file: {file: d.csv}":                      {Kind: "file", At: "input", File: "d.csv", Times: []float64{0, 0.25}, Values: []float64{0, -2}},
		"file: {name: c, at: output, file: d.csv}": {Kind: "file", Name: "c", At: "output", File: "d.csv", Times: []float64{0, 0.25}, Values: []float64{0, -2}},
		"sine: {frequency: 3 rad/s, size: 2}":      {Kind: "sine", At: "output", Size: 2, SizeExact: rat("2"), Frequency: rat("3")},
		"sine: {frequency: 3 rad/s}":               {Kind: "sine", At: "output", Frequency: rat("3")},
	} {
		if got := accepted(t, in(entry)).Disturbances; len(got) != 1 || !reflect.DeepEqual(got[0], want) {
			t.Errorf("%s: %+v, want %+v", entry, got, want)
		}
	}
	if d := accepted(t, in("load_step: {at: sensor, size: 3, time: 0 s}")).Disturbances[0]; d.Time.Sign() != 0 || d.At != "sensor" {
		t.Errorf("%+v", d)
	}
	// 200 Hz in rad/s: 400π = 1256.6370614359173, 17 digits of 50-digit arithmetic.
	if f, _ := accepted(t, in("noise: {rms: 1, band: 200 Hz}")).Disturbances[0].Band.Float64(); !(math.Abs(f-1256.6370614359173) <= 2.3e-13) { // an ulp there
		t.Errorf("200 Hz is %.17g rad/s", f)
	}
	refused(t, in("load_step: §{time: 1 s}"), "load_step has no size")
	refused(t, in("load_step: {size: §0}"), "the size of the load_step is zero")
	refused(t, in("load_step: {size: §NaN, time: §-1 s}"), "not a number", "time: a negative time")
	refused(t, in("load_step: {size: 1, time: §2}"), "the unit is missing")
	refused(t, in("load_step: {size: 1, at: §plant}"), "one of input, output, sensor")
	refused(t, in("load_step: §0.5"), "load_step is a single value")
	refused(t, in("load_step: {size: 1, §frequency: 3 Hz}"), "unknown key")
	refused(t, in("noise: §{band: 1 Hz}"), "noise has no rms")
	refused(t, in("noise: {rms: §0}"), "rms is zero")
	refused(t, in("noise: {rms: §-1}"), "rms is not above zero")
	refused(t, in("noise: {rms: §nan}"), "not a number")
	refused(t, in("noise: {rms: 1, band: §0 Hz}"), "band is out of range")
	refused(t, in("noise: {rms: 1, band: §200}"), "the unit is missing")
	refused(t, in("noise: {rms: 1, §size: 2}"), "unknown key")
	refused(t, in("file: §d.csv"), "file is a single value here")
	refused(t, in("file: §{name: x}"), "file has no file")
	refused(t, in("file: {file: §e.csv}"), "no such file; expected a CSV file with the header t_s,d")
	refused(t, in("§step: {size: 1}"), "unknown key")
	refused(t, in("§lod_step: {size: 1}"), "near load_step")
}

// What is wrong in a file of numbers is told with its line.
func TestNumberFilesRefused(t *testing.T) {
	long := strings.Repeat("0.001\n", maxRows+1)
	many := "output,electric\n"
	for i := range maxPoints + 1 {
		many += fmt.Sprintf("%d,%d\n", i, i)
	}
	const curve, ticks, record = "sensor: {curve: {file: x.csv}}", "timing: {rate: 1 kHz, measured: x.csv}", "disturbances: [file: {file: x.csv}]"
	for _, c := range []struct {
		text, csv string
		line      int
		part      string
	}{
		{curve, "", 0, "fewer than two rows; expected the header output,electric and two rows or more"},
		{curve, "output,electric\n1,2\n", 0, "fewer than two rows"},
		{curve, "electric,output\n1,2\n", 1, "not the header of an input file; expected output,electric"},
		{curve, "output,electric\n1,2\n1,3\n", 3, "the outputs of the curve do not rise"},
		{curve, "output,electric\n1,2\n\n2,3\n3,3\n", 5, "the curve is level here"},
		{curve, "output,electric\n1,2\n2,3\n3,2.5\n4,9\n", 4, "the curve turns round here"},
		{curve, "output,electric\n1,2\n2\n", 3, "this row does not have two columns; expected two numbers: the output and what"},
		{curve, "output,electric\n1,2\n2,3,4\n", 3, "this row does not have two columns"},
		{curve, "output,electric\n1,2\n2,nan\n", 3, `"nan" is not a number`},
		{curve, "output,electric\n1,2\n2,1e201\n", 3, "out of range"},
		{curve, "output,electric\n0,0\n1e-200,1e10\n", 3, "the slope of the curve"},
		{curve, many, maxPoints + 2, "too many rows; expected at most 10000"},
		{ticks, "interval_s\n", 0, "fewer than one row; expected the header interval_s or interval_s,delay_s and one row or more"},
		{ticks, "interval\n0.001\n", 1, "expected interval_s or interval_s,delay_s"},
		{ticks, "interval_s\n0.001,0.002\n", 2, "this row does not have one column"},
		{ticks, "interval_s,delay_s\n0.001\n", 2, "this row does not have two columns"},
		{ticks, "interval_s\n0.001\n0\n", 3, "the interval is not above zero"},
		{ticks, "interval_s\n0.001\n-0.001\n", 3, "the interval is not above zero"},
		{ticks, "interval_s\nNaN\n", 2, "is not a number"},
		{ticks, "interval_s\n0.00001\n0.1\n0.1001\n", 4, "an interval of 0.1001 s in a loop with a tick of 0.001 s; expected 0.01 to 100 ticks"},
		{ticks, "interval_s\n0.0000099\n", 2, "an interval of 9.9e-06 s"},
		{ticks, "interval_s,delay_s\n0.001,0\n0.001,-1e-9\n", 3, "the delay is negative"},
		{ticks, "interval_s,delay_s\n0.001,1000\n0.001,1000.1\n", 3, "a delay of 1000.1 s in a loop with a tick of 0.001 s; expected at most 1000000 ticks"},
		{ticks, "interval_s\n" + long, maxRows + 2, "too many rows"},
		{record, "t_s,r\n0,0\n1,1\n", 1, "expected t_s,d"},
		{record, "t_s,d\n0,0\n0,1\n", 3, "the times do not rise"},
		{record, "t_s,d\n-1,0\n0,1\n", 2, "the time is out of range"},
		{record, "t_s,d\n0,0\n1,x\n", 3, "is not a number; expected two numbers: the time in s and d"},
	} {
		_, problems := Parse("bad.yaml", []byte(whole(c.text)), func(string) ([]byte, error) { return []byte(c.csv), nil })
		if len(problems) != 1 || problems[0].File != "x.csv" || problems[0].Line != c.line ||
			!strings.Contains(problems[0].Message+"; expected "+problems[0].Expected, c.part) {
			t.Errorf("%s with %.60q: want line %d %s\n%v", c.text, c.csv, c.line, c.part, problems)
		}
	}
	if _, problems := Parse("bad.yaml", []byte(whole(ticks)), nil); len(problems) != 1 || !strings.Contains(problems[0].Message, "cannot be opened here") {
		t.Errorf("%v", problems)
	}
}
