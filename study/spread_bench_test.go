package study

import (
	"context"
	"testing"

	"steadytick/internal/yardstick"
)

// One trial: draw, loop, every linear figure.
func BenchmarkSpreadTrial(b *testing.B) {
	j, err := newSpreadJob(context.Background(), parsed(b, wide), SpreadOptions{Seed: 1})
	if err != nil {
		b.Fatal(err)
	}
	k := int64(0)
	for b.Loop() {
		k++
		if _, err := j.trial(k); err != nil {
			b.Fatal(err)
		}
	}
	yardstick.Report(b)
}
