package sim

import (
	"math"
	"math/big"
	"testing"

	"pgregory.net/rapid"
	"steadytick/discretize"
	"steadytick/sdomain"
	"steadytick/zdomain"
)

// randomLoop is a stable-ish loop of random plant, sensor, controller and timing.
type randomLoop struct {
	num, den, sensor []*big.Rat
	lead             [2][]*big.Rat
	period           *big.Rat
	delay, dead      *big.Rat
	limits           Limits
	ramp, load       float64
}

func drawLoop(t *rapid.T) randomLoop {
	n := func(name string, low, high int) *big.Rat {
		return big.NewRat(int64(rapid.IntRange(low, high).Draw(t, name)), 100)
	}
	l := randomLoop{
		num: []*big.Rat{n("n1", 0, 50), n("n0", 30, 100)}, den: []*big.Rat{n("a2", 20, 200), n("a1", 50, 300), n("a0", 0, 300)},
		sensor: []*big.Rat{n("lag", 1, 40), big.NewRat(1, 1)},
		lead:   [2][]*big.Rat{{n("c1", 10, 60), n("c0", 20, 80)}, {n("b1", 5, 40), big.NewRat(1, 1)}},
		period: n("period", 5, 40), delay: n("delay", 0, 90), dead: n("dead time", 0, 90),
		ramp: rapid.Float64Range(-1, 1).Draw(t, "ramp"), load: rapid.Float64Range(-1, 1).Draw(t, "load"),
	}
	if rapid.Bool().Draw(t, "limited") {
		l.limits = Limits{true, -0.5, 0.7}
	}
	return l
}

// scaled is p(s·k) for a polynomial in descending powers: the same in a time k times slower.
func scaled(p []*big.Rat, k *big.Rat) []*big.Rat {
	out := make([]*big.Rat, len(p))
	f := big.NewRat(1, 1)
	for i := len(p) - 1; i >= 0; i-- {
		out[i] = new(big.Rat).Mul(p[i], f)
		f = new(big.Rat).Mul(f, k)
	}
	return out
}

// run simulates the loop slowed down by k, its dead time shared out between plant and
// sensor, the loop delay moved into the dead time by move.
func (l *randomLoop) run(t *rapid.T, k, sensorPart, move *big.Rat) *Trace {
	mul := func(a *big.Rat) *big.Rat { return new(big.Rat).Mul(a, k) }
	fail := func(err error) {
		if err != nil {
			t.Fatal(err)
		}
	}
	plant, err := sdomain.FromPolynomials(scaled(l.num, k), scaled(l.den, k))
	fail(err)
	sensor, err := sdomain.FromPolynomials([]*big.Rat{big.NewRat(1, 1)}, scaled(l.sensor, k))
	fail(err)
	lead, err := sdomain.FromPolynomials(scaled(l.lead[0], k), scaled(l.lead[1], k))
	fail(err)
	sensor.Delay = mul(new(big.Rat).Mul(l.dead, sensorPart))
	plant.Delay = mul(new(big.Rat).Sub(l.dead, new(big.Rat).Mul(l.dead, sensorPart)))
	moved := mul(new(big.Rat).Mul(l.delay, move))
	plant.Delay = new(big.Rat).Add(plant.Delay, moved)
	period := mul(l.period)
	var m zdomain.Model
	m, err = discretize.Map(lead, discretize.Spec{Method: "tustin"}, period)
	fail(err)
	c, err := NewController(ControllerConfig{Period: period, Terms: []Term{{Model: m, Weight: 1}}})
	fail(err)
	sys, err := NewPlant(plant, sensor)
	fail(err)
	kf, _ := k.Float64()
	return run2(t, Config{
		System: sys, Reference: Ramp(l.ramp / kf), Ticks: 40, PointsPerTick: 1, MaxPoints: 10000,
		Disturbances: []Drive{{InputDisturbance, Step(l.load)}},
		Tasks: []Task{{
			Period: period, Delay: new(big.Rat).Sub(mul(l.delay), moved), Controller: c,
			Reads: []int{OutputM}, Drives: []int{InputEffort}, Limits: l.limits,
		}},
	})
}

func run2(t *rapid.T, cfg Config) *Trace {
	tr, err := Run(t.Context(), cfg)
	if err != nil {
		t.Fatal(err)
	}
	return tr
}

func size(lists ...[]float64) float64 {
	m := 1.0
	for _, l := range lists {
		for _, v := range l {
			m = math.Max(m, math.Abs(v))
		}
	}
	return m
}

// The computed effort does not change when dead time moves from plant to sensor or the
// loop delay becomes dead time. The disturbance must then be left out of the second, as it passes the dead
// time and not the loop delay.
func TestSplittingDelayChangesNothing(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		l := drawLoop(t)
		unit, zero := big.NewRat(1, 1), new(big.Rat)
		part := big.NewRat(int64(rapid.IntRange(1, 4).Draw(t, "part")), 4)
		want := l.run(t, unit, zero, zero)
		got := l.run(t, unit, part, zero)
		// 40 ticks of a loop whose modes grow at most a few times: rounding 1e-15 of the largest, with
		// room for growth that the size counts.
		tol := 1e-12 * size(want.TickU, want.TickM)
		for k := range want.TickU {
			if !(math.Abs(got.TickU[k]-want.TickU[k]) <= tol) {
				t.Fatalf("sensor dead time: u[%d] = %v, want %v", k, got.TickU[k], want.TickU[k])
			}
		}
		l.load = 0
		want = l.run(t, unit, zero, zero)
		got = l.run(t, unit, zero, part)
		for k := range want.TickU {
			if !(math.Abs(got.TickU[k]-want.TickU[k]) <= tol) || !(math.Abs(got.TickY[k]-want.TickY[k]) <= tol) {
				t.Fatalf("loop delay: u[%d] = %v, want %v", k, got.TickU[k], want.TickU[k])
			}
		}
	})
}

// A loop k times slower gives the same values at k times the instants.
func TestScalingTime(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		l := drawLoop(t)
		zero := new(big.Rat)
		k := new(big.Rat).SetFloat64(math.Exp(rapid.Float64Range(-15, 5).Draw(t, "log of the scale")))
		want := l.run(t, big.NewRat(1, 1), zero, zero)
		got := l.run(t, k, zero, zero)
		kf, _ := k.Float64()
		if len(got.T) != len(want.T) {
			t.Fatalf("%d points, want %d", len(got.T), len(want.T))
		}
		tol := 1e-12 * size(want.Y, want.U)
		for i := range want.T {
			if !(math.Abs(got.T[i]-kf*want.T[i]) <= 1e-14*kf*want.T[len(want.T)-1]) {
				t.Fatalf("instant %v, want %v", got.T[i], kf*want.T[i])
			}
			if !(math.Abs(got.Y[i]-want.Y[i]) <= tol) || !(math.Abs(got.U[i]-want.U[i]) <= tol) {
				t.Fatalf("at %v: y = %v, want %v", want.T[i], got.Y[i], want.Y[i])
			}
		}
		if !(math.Abs(got.RMSError-want.RMSError) <= tol) || !(math.Abs(got.PeakError-want.PeakError) <= tol) {
			t.Fatalf("errors %v %v, want %v %v", got.PeakError, got.RMSError, want.PeakError, want.RMSError)
		}
	})
}

// As T → 0 the sampled loop approaches its twin with order 1 at least: a quarter of the period,
// at most half the difference (a quarter plus second-order terms).
func TestRunApproachesTwin(t *testing.T) {
	plant := model(t, rats("2"), rats("0.3", "1", "0"), "0.1")
	sensor := model(t, one(), rats("0.02", "1"), "0")
	lead := model(t, rats("0.3", "0.8"), rats("0.05", "1"), "0")
	last := math.Inf(1)
	for _, T := range []string{"1/50", "1/200", "1/800", "1/3200"} {
		m, err := discretize.Map(lead, discretize.Spec{Method: "tustin"}, rat(T))
		if err != nil {
			t.Fatal(err)
		}
		ticks := new(big.Rat).Quo(rat("4"), rat(T)).Num().Int64()
		tr := run(t, Config{
			System: plantOf(t, plant, sensor), Reference: Step(1), Ticks: ticks, PointsPerTick: 2,
			Disturbances: []Drive{{InputDisturbance, Step(0.3)}},
			Tasks: []Task{{Period: rat(T), Controller: controllerOf(t, T, Term{Model: m, Weight: 1}),
				Reads: []int{OutputM}, Drives: []int{InputEffort}}},
		})
		twin := twinOf(t, TwinConfig{
			Plant: plant, Sensor: sensor, Terms: []TwinTerm{{lead, 1}}, Reference: Step(1), Disturbance: Step(0.3),
			Duration: 4, Times: tr.T,
		})
		worst := 0.0
		for i := range tr.T {
			worst = math.Max(worst, math.Abs(tr.Y[i]-twin.Y[i]))
		}
		if !(worst <= last/2) {
			t.Errorf("T = %s: off by %g, before %g", T, worst, last)
		}
		near(t, "peak error", tr.PeakError, twin.PeakError, worst+1e-12)
		near(t, "rms error", tr.RMSError, twin.RMSError, worst+1e-12)
		last = worst
	}
	t.Logf("at T = 1/3200 s off by %g", last)
}
