package study

import (
	"math"
	"math/cmplx"
	"testing"
)

// No frequency has a larger ω·|T| than the one that sets the jitter margin: against 20 000 frequencies, spaced evenly up to half the rate and
// about every pole.
func TestJitterMarginBrute(t *testing.T) {
	for _, hz := range []float64{60, 80, 120, 300, 2000} {
		l, problems := parsed(t, orderSix).WithRate(periodOf(hz))
		if len(problems) > 0 {
			t.Fatal(problems)
		}
		h, err := prepare(l)
		if err != nil {
			t.Fatal(err)
		}
		b, err := assembleSampled(l, h, l.Timing.Period, l.Timing.LoopDelay())
		if err != nil {
			t.Fatal(err)
		}
		a, err := analyze(b)
		if err != nil {
			t.Fatal(err)
		}
		most := 0.0
		try := func(w float64) {
			if half := math.Pi * hz; w > 0 && w <= half {
				v := b.open.Freq(w)
				most = math.Max(most, w*cmplx.Abs(v/(1+v)))
			}
		}
		for i := 1; i <= 10_000; i++ {
			try(math.Pi * hz * float64(i) / 10_000)
		}
		for _, p := range a.poles.Equivalent {
			for k := -500; k <= 500; k++ {
				try(math.Abs(imag(p)) + 3*math.Abs(real(p))*float64(k)/500)
			}
		}
		// The grid can only fall short, by a curvature of (1/500·3)²/2 of a resonance at most: 2e-5.
		if got := a.jitterMargin().Value * most; !(got <= 1+1e-9) || !(got >= 1-2e-5) {
			t.Errorf("%g Hz: jitter margin %.9g, by brute force %.9g", hz, a.jitterMargin().Value, 1/most)
		}
	}
}
