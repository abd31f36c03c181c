package study

import (
	"context"
	"testing"

	"steadytick/discretize"

	"steadytick/internal/yardstick"
	"steadytick/loop"
)

// orderSix is an invented loop of order six: drive, belt mode, sensor and controller lag.
const orderSix = `loop: invented carriage
output: mm
effort: N
plant:
  model: 22/(s*(0.24*s + 1)) * (s^2/48400 + 0.02*s/220 + 1)/(s^2/57600 + 0.02*s/240 + 1)
controller:
  model: 1.1*(0.2*s + 1)/(0.004*s + 1)
  map: tustin
sensor:
  model: 1/(0.0008*s + 1)
timing: {rate: 2 kHz, conversion: 12 us, compute: 110 us}
inputs:
  - step: 1
  - ramp: 50
  - parabola: 20
requirements:
  - phase_margin >= 40 deg
`

// One full analysis of one rate: assembly, poles, both verdicts, series, margins, steady errors.
func BenchmarkFullAnalysis(b *testing.B) {
	l := parsed(b, orderSix)
	h, err := prepare(l)
	if err != nil {
		b.Fatal(err)
	}
	for b.Loop() {
		blk, err := assembleSampled(l, h, l.Timing.Period, l.Timing.LoopDelay())
		if err != nil {
			b.Fatal(err)
		}
		a, err := analyze(blk)
		if err != nil {
			b.Fatal(err)
		}
		if _, err := a.column(l); err != nil {
			b.Fatal(err)
		}
	}
	yardstick.Report(b)
}

// The whole comparison with the curves of the report.
func BenchmarkCompare(b *testing.B) {
	l := parsed(b, orderSix)
	for b.Loop() {
		if _, err := RunCompare(context.Background(), l, Options{Degrade: DefaultDegrade(), Curves: true}); err != nil {
			b.Fatal(err)
		}
	}
	yardstick.Report(b)
}

// One rate, every map: what a sweep over rates repeats.
func BenchmarkRateAllMaps(b *testing.B) {
	l := parsed(b, orderSix)
	h, err := prepare(l)
	if err != nil {
		b.Fatal(err)
	}
	var loops []*loop.Loop
	for _, m := range append(discretize.Methods(), "prewarped at 8 Hz") {
		if m == "prewarped" {
			continue
		}
		other, problems := l.WithMap(m)
		if len(problems) > 0 {
			b.Fatal(problems)
		}
		loops = append(loops, other)
	}
	for b.Loop() {
		a, err := h.at(l.Timing.Period, l.Timing.LoopDelay())
		if err != nil {
			b.Fatal(err)
		}
		for _, o := range loops {
			blk, err := a.assemble(o)
			if err != nil {
				b.Fatal(err)
			}
			x, err := analyze(blk)
			if err != nil {
				b.Fatal(err)
			}
			if _, err := x.column(o); err != nil {
				b.Fatal(err)
			}
		}
	}
	yardstick.Report(b)
}
