package sim

import (
	"context"
	"errors"
	"math"
	"testing"
)

func noise(t testing.TB, cfg Config, difference bool) NoiseGains {
	t.Helper()
	g, err := Noise(context.Background(), cfg, difference)
	if err != nil {
		t.Fatal(err)
	}
	return g
}

// x⁺ = a·x − b·k·(x + n), u = −k(x + n): var x = (bk)²/(1 − p²), p = a − bk, var u = k²(var x + 1). With a
// period of 1e-7 s, where 1 − p² has lost nine digits in z, the same from p = 1 − Tδ.
func TestNoiseOfFirstOrder(t *testing.T) {
	for _, T := range []string{"1/10", "1e-7"} {
		period, _ := rat(T).Float64()
		cfg := proportional(t, plantOf(t, model(t, one(), rats("1", "1"), "0"), unit(t)), T, "0", "3", 10)
		b := -math.Expm1(-period)
		q := b + 3*b // 1 − p
		want := 9 * b * b / (q * (2 - q))
		g := noise(t, cfg, false)
		near(t, "y at "+T, g.Output/math.Sqrt(want), 1, 1e-13)
		near(t, "u at "+T, g.Effort/(3*math.Sqrt(want+1)), 1, 1e-13)
	}
	// One tick of delay on 1/s with T = 1, k = 1/2, from the covariance equations by hand.
	cfg := proportional(t, plantOf(t, model(t, one(), rats("1", "0"), "0"), unit(t)), "1", "1", "1/2", 10)
	// X = var x, C = cov(x, w), W = var w, w = u before: x⁺ = x + w, w⁺ = −k(x + n):
	// X = X + 2C + W, C = −k(X + C), W = k²(X + 1). So C = −W/2 and C(1 + k) = −kX: k²(X + 1)(1 + k) = 2kX,
	// X = k(1 + k)/(2 − k(1 + k)) = 0.75/1.25.
	const X = 0.75 / 1.25
	g := noise(t, cfg, false)
	near(t, "a tick late, y", g.Output, math.Sqrt(X), 1e-14)
	near(t, "a tick late, u", g.Effort, math.Sqrt(0.25*(X+1)), 1e-14)
}

// stableSix is the loop of orderSix with gains that make it stable, without limits.
func stableSix(t testing.TB) Config {
	cfg := orderSix(t)
	cfg.Tasks[0].Controller = controllerOf(t, "1/2000",
		Term{Model: inZ(t, rats("-3980", "4000"), rats("-0.6", "1"), "1/2000"), Weight: 1},
		Term{Model: inZ(t, rats("0.05"), rats("-1", "1"), "1/2000"), Weight: 1})
	cfg.Tasks[0].Limits = Limits{}
	return cfg
}

// The two ways agree: Lyapunov solution and impulse response, of a loop of order six with a fraction of a tick of
// delay, and of one with a biproper plant, both also for differenced noise.
func TestNoiseTwoWays(t *testing.T) {
	six := stableSix(t)
	biproper := proportional(t, plantOf(t, model(t, rats("0.5", "1"), rats("1", "1"), "0.23"), model(t, one(), rats("0.05", "1"), "0")), "1/10", "0.03", "1", 10)
	for name, cfg := range map[string]Config{"order six": six, "biproper": biproper} {
		for _, difference := range []bool{false, true} {
			want, err := impulseNoise(context.Background(), cfg, difference)
			if err != nil {
				t.Fatal(name, err)
			}
			got := noise(t, cfg, difference)
			// The impulse response ends where 1e-18 of its squares was left; roundings of its sum of 10⁴ terms.
			near(t, name+" u", got.Effort/want.Effort, 1, 1e-11)
			near(t, name+" y", got.Output/want.Output, 1, 1e-11)
		}
	}
	// A long delay has the impulse response only: 1/s under k = 1/200 with 60 ticks of dead time, against the same
	// recursion written out.
	long := proportional(t, plantOf(t, model(t, one(), rats("1", "0"), "60"), unit(t)), "1", "0", "1/200", 10)
	x, sum, out := 0.0, 0.0, 0.0
	u := make([]float64, 200_000)
	for k := range u {
		n := 0.0
		if k == 0 {
			n = 1
		}
		u[k] = -(x + n) / 200
		sum += u[k] * u[k]
		out += x * x
		if k >= 60 {
			x += u[k-60]
		}
	}
	g := noise(t, long, false)
	near(t, "long delay, u", g.Effort/math.Sqrt(sum), 1, 1e-9) // 1e-18 of the squares is 1e-9 of the root's digits
	near(t, "long delay, y", g.Output/math.Sqrt(out), 1, 1e-9)
}

// Against simulation: the estimate of n ticks within five of its standard deviations, the correlation time
// of the loop being some 20 ticks.
func TestNoiseBySimulation(t *testing.T) {
	const n = 400_000
	cfg := stableSix(t)
	g := noise(t, cfg, false)
	cfg.Reference, cfg.Ticks, cfg.PointsPerTick, cfg.MaxPoints, cfg.Seed = Zero(), n, 1, n+10, 3
	cfg.Tasks[0].Sensors = []Sensor{{Noise: 1e-3}}
	tr := run(t, cfg)
	near(t, "u", math.Sqrt(variance(tr.TickU))/(1e-3*g.Effort), 1, 5*math.Sqrt(20.0/n))
	// The loop's bandwidth of 8 rad/s and its slowest mode, some 2 rad/s, correlate over 250 to 1000 ticks.
	near(t, "y", math.Sqrt(variance(tr.TickY))/(1e-3*g.Output), 1, 2.5*math.Sqrt(1000.0/n))
}

// An unstable loop, and one that never forgets, have no variance.
func TestNoVariance(t *testing.T) {
	for _, kp := range []string{"25", "20"} { // 1/s at T = 1/10: the pole at 1 − k/10
		cfg := proportional(t, plantOf(t, model(t, one(), rats("1", "0"), "0"), unit(t)), "1/10", "0", kp, 10)
		if g, err := Noise(context.Background(), cfg, false); !errors.Is(err, ErrNoVariance) {
			t.Errorf("k = %s: %v, %v", kp, g, err)
		}
	}
}

// x⁺ = a·x + b·(w − k·(x + n)), p = a − bk: the responses are geometric, b·k·p^j and b·p^j, so the sums of their
// magnitudes bk/(1 − |p|) and b/(1 − |p|), with p negative here.
func TestPeakGains(t *testing.T) {
	cfg := proportional(t, plantOf(t, model(t, one(), rats("1", "1"), "0"), unit(t)), "1/2", "0", "3", 10)
	g, err := Peaks(context.Background(), cfg)
	if err != nil {
		t.Fatal(err)
	}
	b := -math.Expm1(-0.5)
	p := 1 - 4*b
	near(t, "measurement", g.Measurement, 3*b/(1+p), 1e-13)
	near(t, "effort", g.Effort, b/(1+p), 1e-13)
}

// Limits and anti-windup are no part of the linear loop: every rule gives the variances and peak gains of none.
func TestNoiseKnowsNoLimits(t *testing.T) {
	cfg := func(rule AntiWindup) Config {
		c, err := NewController(ControllerConfig{
			Period: rat("1/10"), AntiWindup: rule, TrackingTime: 0.1, Low: -1e-3, High: 1e-3,
			Terms: []Term{{Model: inZ(t, rats("2"), one(), "1/10"), Weight: 1}, integralInZ(t, 0.5, "1", "1/10")},
		})
		if err != nil {
			t.Fatal(err)
		}
		return Config{
			System: plantOf(t, model(t, one(), rats("1", "1"), "7"), unit(t)), Ticks: 1, // a long dead time: by the impulse response
			Tasks: []Task{{
				Period: rat("1/10"), Controller: c, Reads: []int{OutputM}, Drives: []int{InputEffort}, Limits: Limits{true, -1e-3, 1e-3},
			}},
		}
	}
	// 2 + 1/s with 7 s of dead time on 1/(s + 1) is unstable; scaled down to a gain of 1/20 it is not.
	scaled := func(rule AntiWindup) Config {
		c := cfg(rule)
		c.System = plantOf(t, model(t, rats("1/20"), rats("1", "1"), "7"), unit(t))
		return c
	}
	want := noise(t, scaled(NoAntiWindup), false)
	peaks, err := Peaks(context.Background(), scaled(NoAntiWindup))
	if err != nil {
		t.Fatal(err)
	}
	for _, rule := range []AntiWindup{StopOutward, Stop, Clamp, Tracking} {
		got := noise(t, scaled(rule), false)
		near(t, "effort", got.Effort/want.Effort, 1, 1e-9) // the tail left out of the impulse response
		near(t, "output", got.Output/want.Output, 1, 1e-9)
		p, err := Peaks(context.Background(), scaled(rule))
		if err != nil {
			t.Fatal(err)
		}
		near(t, "measurement", p.Measurement/peaks.Measurement, 1, 1e-9)
		near(t, "effort peak", p.Effort/peaks.Effort, 1, 1e-9)
	}
}
