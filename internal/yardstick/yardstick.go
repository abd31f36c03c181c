// Package yardstick lets benchmarks give their speed as a ratio against a fixed piece of
// work done in the same run, so that figures of different machines, and of a loaded and a quiet
// one, can be compared.
package yardstick

import (
	"testing"
	"time"
)

// size is the length of the sum; sums a repetition.
const size = 1000

// sink keeps the compiler from dropping the work.
var sink float64

// work is one yardstick: a running sum of 1000 products in float64.
func work(a, b []float64) {
	s := 0.0
	for i, v := range a {
		s += v * b[i]
	}
	sink += s
}

// Report adds the metric "yardsticks/op" to a benchmark that has just ended its loop: its time an
// operation over the time of one sum of 1000 products, the least of several measurements.
func Report(b *testing.B) {
	b.Helper()
	b.StopTimer()
	x, y := make([]float64, size), make([]float64, size)
	for i := range x {
		x[i], y[i] = float64(i), 1/float64(i+1)
	}
	const repeats = 2000
	least := time.Duration(1 << 62)
	for range 5 {
		start := time.Now()
		for range repeats {
			work(x, y)
		}
		least = min(least, time.Since(start))
	}
	one := float64(least.Nanoseconds()) / repeats
	b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N)/one, "yardsticks/op")
}
