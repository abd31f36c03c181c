// Package yardstick lets benchmarks give their speed as a ratio against a fixed piece of
// work done in the same run, so that figures of different machines, and of a loaded and a quiet
// one, can be compared.
package yardstick

import (
	"testing"
	"time"
)

// size is the number of products in the sum.
const size = 1000

// work is one yardstick: a running sum of 1000 products in float64.
func work(a, b []float64) float64 {
	s := 0.0
	for i, v := range a {
		s += v * b[i]
	}
	return s
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
	least, total := time.Duration(1<<62), 0.0
	for range 5 {
		start := time.Now()
		for range repeats {
			total += work(x, y)
		}
		least = min(least, time.Since(start))
	}
	if !(total > 0) { // uses the sums, so that the compiler keeps the work
		b.Fatal("a sum of positive products is not positive")
	}
	one := float64(least.Nanoseconds()) / repeats
	b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N)/one, "yardsticks/op")
}
