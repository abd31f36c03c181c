package study

import (
	"context"
	"math"
	"runtime/debug"
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
		a.column(l)
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

// The sweep of rate: 1000 rates under seven maps, every linear figure, on all cores.
func BenchmarkSweep(b *testing.B) {
	l := parsed(b, orderSix)
	s, maps := sevenMaps(b, l)
	grid := make([]float64, 1000)
	for i := range grid {
		grid[i] = 80 * math.Pow(100, float64(i)/999) // 80 Hz to 8 kHz
	}
	defer debug.SetGCPercent(debug.SetGCPercent(400)) // as the program does
	for b.Loop() {
		scans, err := s.scanRates(context.Background(), maps, grid, nil, func(int) {})
		if err != nil {
			b.Fatal(err)
		}
		n := 0
		for _, w := range scans {
			for _, p := range w.points {
				if p.runs() {
					n++
				}
			}
		}
		if n != 7000 {
			b.Fatalf("%d analyses", n)
		}
	}
	yardstick.Report(b)
}

// sevenMaps is the loop under every map.
func sevenMaps(b testing.TB, l *loop.Loop) (*sweeper, []mapped) {
	s, err := newSweeper(l, nil)
	if err != nil {
		b.Fatal(err)
	}
	var maps []mapped
	for _, m := range discretize.Methods() {
		if m == "prewarped" {
			m = "prewarped at 8 Hz"
		}
		other, problems := l.WithMap(m)
		if len(problems) > 0 {
			b.Fatal(problems)
		}
		maps = append(maps, mapped{m, other})
	}
	return s, maps
}
