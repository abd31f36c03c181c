package sim

import (
	"context"
	"math"
	"math/big"
	"testing"
	"time"

	"pgregory.net/rapid"
	"steadytick/discretize"
	"steadytick/sdomain"
)

// The twin of a random PI or lead loop with random limits, anti-windup, dead times and load runs to
// its end in few pieces, and a fast sampled loop comes near it: within a few ticks' worth of the
// movement, as both differ by the hold and the delay of half a tick.
func TestTwinNearFastRun(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		n := func(name string, low, high int) *big.Rat {
			return big.NewRat(int64(rapid.IntRange(low, high).Draw(t, name)), 100)
		}
		one := big.NewRat(1, 1)
		fail := func(err error) {
			if err != nil {
				t.Fatal(err)
			}
		}
		poly := func(num, den []*big.Rat, dead *big.Rat) sdomain.Model {
			m, err := sdomain.FromPolynomials(num, den)
			fail(err)
			m.Delay = dead
			return m
		}
		dead := []*big.Rat{new(big.Rat), big.NewRat(1, 1000), n("dead", 1, 100), new(big.Rat), n("sensor dead", 1, 60)}
		plant := poly([]*big.Rat{n("b1", -20, 30), n("b0", 20, 150)}, []*big.Rat{n("a2", 5, 100), n("a1", 20, 150), n("a0", 0, 150)},
			dead[rapid.IntRange(0, 2).Draw(t, "which dead")])
		sensor := poly([]*big.Rat{one}, []*big.Rat{n("lag", 0, 30), one}, dead[rapid.IntRange(3, 4).Draw(t, "which sensor dead")])
		control := poly([]*big.Rat{n("kp", 10, 150), n("ki", 0, 150)}, []*big.Rat{one, n("leak", 0, 1)}, new(big.Rat))
		aw := AntiWindup(rapid.IntRange(0, 2).Draw(t, "anti-windup"))
		limits := Limits{true, -0.2 - rapid.Float64Range(0, 1).Draw(t, "low"), 0.3 + rapid.Float64Range(0, 1.5).Draw(t, "high")}
		r := []Signal{Step(1), Ramp(0.3), Sine(1, 1.7)}[rapid.IntRange(0, 2).Draw(t, "reference")]
		load, err := Table([]float64{rapid.Float64Range(0, 5).Draw(t, "when")}, []float64{rapid.Float64Range(-0.6, 0.6).Draw(t, "load")})
		fail(err)

		start := time.Now()
		ctx, cancel := context.WithTimeout(context.Background(), 2*time.Minute)
		defer cancel()
		twin, err := Twin(ctx, TwinConfig{
			Plant: plant, Sensor: sensor, Terms: []TwinTerm{{control, 1}}, AntiWindup: aw, TrackingTime: 0.3,
			Limits: limits, Reference: r, Disturbance: load, Duration: 10,
		})
		fail(err)
		if twin.Pieces > 5000 {
			t.Fatalf("%d pieces in %v", twin.Pieces, time.Since(start))
		}
		T := big.NewRat(1, 2000)
		m, err := discretize.Map(control, discretize.Spec{Method: "tustin"}, T)
		fail(err)
		c, err := NewController(ControllerConfig{Period: T, Terms: []Term{{Model: m, Weight: 1}}, AntiWindup: aw, TrackingTime: 0.3})
		fail(err)
		sys, err := NewPlant(plant, sensor)
		fail(err)
		tr, err := Run(ctx, Config{
			System: sys, Reference: r, Disturbances: []Drive{{InputDisturbance, load}}, Ticks: 20_000, PointsPerTick: 1, MaxPoints: 30_000,
			Tasks: []Task{{Period: T, Controller: c, Reads: []int{OutputM}, Drives: []int{InputEffort}, Limits: limits}},
		})
		fail(err)
		if twin.Diverged || tr.Diverged {
			return // both bounded by limits only where the plant is stable
		}
		tol := 0.02 * size(tr.TickY)
		for i, at := range twin.T {
			k := int(math.Round(at * 2000))
			if math.Abs(tr.TickT[k]-at) > 1e-9 {
				t.Fatalf("tick %d at %v", k, tr.TickT[k])
			}
			if !(math.Abs(twin.Y[i]-tr.TickY[k]) <= tol) {
				t.Fatalf("at %v: y = %v, sampled %v", at, twin.Y[i], tr.TickY[k])
			}
		}
	})
}
