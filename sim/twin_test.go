package sim

import (
	"context"
	"math"
	"testing"

	"steadytick/sdomain"
)

func twinOf(t testing.TB, cfg TwinConfig) *TwinTrace {
	t.Helper()
	out, err := Twin(context.Background(), cfg)
	if err != nil {
		t.Fatal(err)
	}
	return out
}

// gain is the model k.
func gain(t testing.TB, k string) sdomain.Model { return model(t, rats(k), one(), "0") }

// 1/(s(s+1)) under unity feedback: ω = 1, ζ = 1/2; the step response is
// 1 − e^{−t/2}(cos ωd·t + sin(ωd·t)/√3), ωd = √3/2 (any textbook).
func TestTwinSecondOrder(t *testing.T) {
	tr := twinOf(t, TwinConfig{
		Plant: model(t, one(), rats("1", "1", "0"), "0"), Sensor: unit(t),
		Terms: []TwinTerm{{gain(t, "1"), 1}}, Reference: Step(1), Duration: 20, Step: &StepSpec{Final: 1},
	})
	wd := math.Sqrt(3) / 2
	worst := 0.0
	for i, at := range tr.T {
		want := 1 - math.Exp(-at/2)*(math.Cos(wd*at)+math.Sin(wd*at)/math.Sqrt(3))
		worst = math.Max(worst, math.Abs(tr.Y[i]-want))
	}
	t.Logf("worst %g pieces %d", worst, tr.Pieces)
	t.Logf("%+v", tr.Step)
}

// x' = −x(t−1) with r = 0 does not move; the same with a step is the classical problem of the
// method of steps: y' = r − y(t−1), y = Σ_k (−1)^k (t−k)^{k+1}/(k+1)!, t > k.
func TestTwinSteps(t *testing.T) {
	for _, tau := range []string{"1", "0.001", "1.5", "1e-9"} {
		d, _ := rat(tau).Float64()
		tr := twinOf(t, TwinConfig{
			Plant: model(t, one(), rats("1", "0"), tau), Sensor: unit(t),
			Terms: []TwinTerm{{gain(t, "1"), 1}}, Reference: Step(1), Duration: 12,
		})
		worst := 0.0
		for i, at := range tr.T {
			if d < 1 {
				break
			}
			// x is what the plant would give without dead time; y is behind by it.
			want := 0.0
			for k := 0; at-d > float64(k)*d; k++ {
				want += math.Pow(-1, float64(k)) * math.Pow(at-d-float64(k)*d, float64(k+1)) / math.Gamma(float64(k+2))
			}
			worst = math.Max(worst, math.Abs(tr.Y[i]-want))
		}
		t.Logf("tau %s worst %g pieces %d final %g", tau, worst, tr.Pieces, tr.FinalY)
	}
}
