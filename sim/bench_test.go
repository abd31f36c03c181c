package sim

import (
	"context"
	"testing"

	"steadytick/internal/yardstick"
)

// orderSix is a loop of order six: a plant of order three with a sensor lag, a controller of
// order two, an update within the tick.
func orderSix(t testing.TB) Config {
	plant := plantOf(t,
		model(t, rats("80"), rats("1", "60", "500", "0"), "0"),
		model(t, one(), rats("0.0004", "1"), "0"))
	c := controllerOf(t, "1/2000",
		Term{Model: inZ(t, rats("-7.96", "8"), rats("-0.6", "1"), "1/2000"), Weight: 1},
		Term{Model: inZ(t, rats("0.0005"), rats("-1", "1"), "1/2000"), Weight: 1})
	return Config{
		System: plant, Reference: Step(1), Ticks: 1000,
		Tasks: []Task{{
			Period: rat("1/2000"), Delay: rat("0.00014"), Controller: c,
			Reads: []int{OutputM}, Drives: []int{InputEffort}, Limits: Limits{On: true, Low: -24, High: 24},
		}},
	}
}

func BenchmarkTick(b *testing.B) {
	for _, points := range []int{1, 4, 8} {
		b.Run(map[int]string{1: "points=1", 4: "points=4", 8: "points=8"}[points], func(b *testing.B) {
			cfg := stableSix(b)
			cfg.Tasks[0].Limits = Limits{On: true, Low: -24, High: 24}
			cfg.PointsPerTick = points
			cfg.Ticks = int64(max(b.N, 1))
			b.ReportAllocs()
			if _, err := Run(context.Background(), cfg); err != nil {
				b.Fatal(err)
			}
			yardstick.Report(b)
		})
	}
}

// BenchmarkTwin is the continuous twin of a loop of order six over a motion.
func BenchmarkTwin(b *testing.B) {
	move, err := Move(1.5, 2, 9, 60)
	if err != nil {
		b.Fatal(err)
	}
	cfg := TwinConfig{
		Plant:  model(b, rats("80"), rats("1", "60", "500", "0"), "0"),
		Sensor: model(b, one(), rats("0.0004", "1"), "0"),
		Terms: []TwinTerm{
			{model(b, rats("0.4", "8"), rats("0.002", "1"), "0"), 1}, {model(b, rats("1"), rats("1", "0"), "0"), 1},
		},
		Reference: move, Duration: 2.5,
	}
	b.ReportAllocs()
	for b.Loop() {
		tr, err := Twin(context.Background(), cfg)
		if err != nil {
			b.Fatal(err)
		}
		b.ReportMetric(float64(tr.Pieces), "pieces")
	}
}
