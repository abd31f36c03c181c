package sim

import (
	"math"
	"math/big"
	"math/cmplx"
	"testing"

	"steadytick/sdomain"
)

// Twelve lags in a row start so slowly that the last ones are below the rounding of the
// first. Closed form by residues: with L = k/(s+1)^12 the closed-loop poles are
//
//	s_j = −1 + (−k)^(1/12),   y(t) = k/(1+k) + Σ_j k·e^(s_j·t) / (12·s_j·(s_j+1)^11)
func TestTwinChainOfLags(t *testing.T) {
	const n, k = 12, 0.3
	plant := sdomain.Const(big.NewRat(1, 1))
	lag := model(t, one(), rats("1", "1"), "0")
	for range n {
		var err error
		if plant, err = plant.Mul(lag); err != nil {
			t.Fatal(err)
		}
	}
	times := make([]float64, 61)
	for i := range times {
		times[i] = float64(i) / 2
	}
	tr := twinOf(t, TwinConfig{
		Plant: plant, Sensor: sdomain.Const(big.NewRat(1, 1)),
		Terms:     []TwinTerm{{Model: sdomain.Const(big.NewRat(3, 10)), Weight: 1}},
		Reference: Step(1), Duration: 30, Times: times,
	})
	for i, at := range times {
		want := complex(k/(1+k), 0)
		for j := range n {
			s := -1 + cmplx.Rect(math.Pow(k, 1.0/n), math.Pi*float64(2*j+1)/n)
			want += k * cmplx.Exp(s*complex(at, 0)) / (n * s * cmplx.Pow(s+1, n-1))
		}
		// The residues, up to 1, cancel to y at the start: 1e-14.
		if !(math.Abs(tr.Y[i]-real(want)) <= 1e-13) {
			t.Errorf("y(%g) = %.15g, want %.15g", at, tr.Y[i], real(want))
		}
	}
}
