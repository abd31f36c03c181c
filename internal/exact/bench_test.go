package exact_test

import (
	"fmt"
	"math/big"
	"testing"

	"steadytick/internal/exact"
)

// BenchmarkPoles takes lags of 1, 1/2, 1/3 … seconds, expanded to one polynomial.
func BenchmarkPoles(b *testing.B) {
	for _, n := range []int64{6, 12, 20} {
		p := exact.IntPoly(1)
		for k := int64(1); k <= n; k++ {
			p = p.Mul(exact.NewPoly(big.NewRat(1, 1), big.NewRat(1, k)))
		}
		r := mustRatio(b, exact.IntPoly(1), p)
		b.Run(fmt.Sprint("order", n), func(b *testing.B) {
			for b.Loop() {
				if _, err := r.Poles(); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}
