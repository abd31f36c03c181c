package sim

import (
	"context"
	"errors"
	"math"
	"math/big"
	"runtime"
	"sync"
	"testing"
	"time"
)

// proportional is the loop kp on a plant, one task.
func proportional(t testing.TB, plant *Continuous, T, delay, kp string, ticks int64) Config {
	return Config{
		System: plant, Reference: Step(1), Ticks: ticks,
		Tasks: []Task{{
			Period: rat(T), Delay: rat(delay), Controller: controllerOf(t, T, Term{Model: inZ(t, rats(kp), one(), T), Weight: 1}),
			Reads: []int{OutputM}, Drives: []int{InputEffort},
		}},
	}
}

// 1/(s+1) under kp = 2 at T = 1/2: y_{k+1} = y_k·e^{−T} + 2(1 − y_k)(1 − e^{−T}), and between
// the ticks y = u + (y_k − u)·e^{−τ}.
func TestFirstOrderBetweenTicks(t *testing.T) {
	cfg := proportional(t, plantOf(t, model(t, one(), rats("1", "1"), "0"), unit(t)), "1/2", "0", "2", 20)
	tr := run(t, cfg)
	at, y := 0, 0.0
	worst, square, peak := 0.0, 0.0, 0.0
	for k := range 20 {
		u := 2 * (1 - y)
		for ; at < len(tr.T) && tr.T[at] < float64(k+1)/2; at++ {
			want := u + (y-u)*math.Exp(-(tr.T[at]-float64(k)/2))
			worst = math.Max(worst, math.Abs(tr.Y[at]-want))
			if tr.U[at] != tr.TickU[k] {
				t.Fatalf("effort %v held at %v, want %v", tr.U[at], tr.T[at], tr.TickU[k])
			}
			peak = math.Max(peak, math.Abs(1-want))
		}
		// ∫(a + b·e^{−τ})² over the tick, a = 1 − u, b = u − y.
		a, b := 1-u, u-y
		square += a*a/2 + 2*a*b*-math.Expm1(-0.5) + b*b*-math.Expm1(-1)/2
		y = u + (y-u)*math.Exp(-0.5)
	}
	if !(worst <= 1e-15*10) {
		t.Errorf("off by %g between ticks", worst)
	}
	near(t, "peak", tr.PeakError, peak, 1e-14)
	// Eight parts of 1/16: the rest of Boole's rule is (1/16)^6·8/945·f⁗″ of at most 64·4.
	near(t, "rms", tr.RMSError, math.Sqrt(square/10), 2e-7)
}

// A period of 1e-7 s keeps its digits: y = t − 1 + e^{−t} of 1/(s(s+1)) after 3·10⁵ ticks with a
// dead time of 10 000 of them; 3·10⁵·√ of them roundings of 1e-16.
func TestFastTicks(t *testing.T) {
	one := inZ(t, rats("1"), one(), "1e-7")
	c, err := NewController(ControllerConfig{Period: rat("1e-7"), Feedforward: &one})
	if err != nil {
		t.Fatal(err)
	}
	tr := run(t, Config{
		System: plantOf(t, model(t, rats("1"), rats("1", "1", "0"), "1e-3"), unit(t)), Reference: Step(1), Ticks: 300_000, PointsPerTick: 1,
		Tasks: []Task{{Period: rat("1e-7"), Controller: c, Reads: []int{OutputM}, Drives: []int{InputEffort}}},
	})
	if tr.FinalT != 0.03 {
		t.Errorf("ends at %v", tr.FinalT)
	}
	const at = 0.03 - 1e-3
	want := at * at / 2 * (1 - at/3 + at*at/12 - at*at*at/60 + at*at*at*at/360) // t − 1 + e^{−t} by its series
	near(t, "y", tr.FinalY, want, 1e-11*want)
}

// Instants come from the integer: a third of a millisecond a million times is 1000/3 s to the last bit.
func TestNoDrift(t *testing.T) {
	cfg := proportional(t, plantOf(t, model(t, one(), rats("1", "1"), "0"), unit(t)), "1/3000", "1/7000", "1", 1_000_000)
	cfg.PointsPerTick = 1
	tr := run(t, cfg)
	want, _ := big.NewRat(1_000_000, 3000).Float64()
	if tr.FinalT != want {
		t.Errorf("ends at %v, want %v", tr.FinalT, want)
	}
	near(t, "steady output", tr.FinalY, 0.5, 1e-15)
	for _, at := range tr.TickT {
		k := math.Round(at * 3000)
		if w, _ := new(big.Rat).SetFrac64(int64(k), 3000).Float64(); math.Abs(at-w) > 1e-16*w {
			t.Fatalf("tick %g at %v, want %v", k, at, w)
		}
	}
}

// The prepared cycle and the agenda that seeks each instant give the same run.
func TestCycleAndAgendaAgree(t *testing.T) {
	cfg := proportional(t, plantOf(t, model(t, rats("1"), rats("1", "1", "0"), "0.13"), unit(t)), "1/5", "0.47", "0.4", 60)
	cfg.MaxPoints = 10000
	want := run(t, cfg)
	cfg.Tasks[0].Jitter = func(int64) float64 { return 0 }
	got := run(t, cfg)
	if len(got.TickT) != len(want.TickT) {
		t.Fatalf("%d ticks, want %d", len(got.TickT), len(want.TickT))
	}
	for k := range want.TickT {
		near(t, "instant", got.TickT[k], want.TickT[k], 1e-15*want.TickT[k])
		near(t, "y", got.TickY[k], want.TickY[k], 1e-13)
		near(t, "u", got.TickU[k], want.TickU[k], 1e-13)
	}
}

// Two tasks with no short common period still run; the second only watches.
func TestLongCommonPeriod(t *testing.T) {
	cfg := proportional(t, plantOf(t, model(t, one(), rats("1", "1"), "0"), unit(t)), "1/10", "0", "2", 100)
	want := run(t, cfg)
	watch := cfg.Tasks[0]
	watch.Period, watch.Drives = rat("0.0999"), nil
	watch.Controller = controllerOf(t, "0.0999", Term{Model: inZ(t, rats("1"), one(), "0.0999"), Weight: 1})
	cfg.Tasks = append(cfg.Tasks, watch)
	got := run(t, cfg)
	for k := range want.TickY {
		near(t, "y", got.TickY[k], want.TickY[k], 1e-13)
	}
}

func TestDiverges(t *testing.T) {
	cfg := proportional(t, plantOf(t, model(t, rats("1"), rats("1", "-50"), "0"), unit(t)), "1/10", "0", "1", 1000)
	cfg.Step = &StepSpec{Final: 1}
	tr := run(t, cfg)
	if !tr.Diverged || tr.Step != (Figures{}) {
		t.Errorf("diverged %v, %+v", tr.Diverged, tr.Step)
	}
	for _, list := range [][]float64{tr.T, tr.Y, tr.M, tr.U, tr.TickU, {tr.FinalY, tr.PeakError, tr.RMSError, tr.PeakEffort}} {
		if !finite(list) {
			t.Error("not finite")
		}
	}
	// A plant that overflows within one tick is an error of the request.
	cfg = proportional(t, plantOf(t, model(t, rats("1"), rats("1", "-500000"), "0"), unit(t)), "1/10", "0", "1", 10)
	if _, err := Run(context.Background(), cfg); err == nil {
		t.Error("e^50000 has no error")
	}
}

func TestRunErrors(t *testing.T) {
	plant := plantOf(t, model(t, one(), rats("1", "1"), "0"), unit(t))
	other := controllerOf(t, "1/7", Term{Model: inZ(t, rats("1"), one(), "1/7"), Weight: 1})
	for name, change := range map[string]func(*Config){
		"no system":         func(c *Config) { c.System = nil },
		"no task":           func(c *Config) { c.Tasks = nil },
		"no ticks":          func(c *Config) { c.Ticks = 0 },
		"negative points":   func(c *Config) { c.MaxPoints = -1 },
		"no period":         func(c *Config) { c.Tasks[0].Period = nil },
		"negative delay":    func(c *Config) { c.Tasks[0].Delay = rat("-1") },
		"negative offset":   func(c *Config) { c.Tasks[0].Offset = rat("-1") },
		"no controller":     func(c *Config) { c.Tasks[0].Controller = nil },
		"other period":      func(c *Config) { c.Tasks[0].Controller = other },
		"reads nothing":     func(c *Config) { c.Tasks[0].Reads = nil },
		"no such output":    func(c *Config) { c.Tasks[0].Reads = []int{2} },
		"no such input":     func(c *Config) { c.Tasks[0].Drives = []int{9} },
		"own reference":     func(c *Config) { c.Tasks[0].Reference = 1 },
		"no such reference": func(c *Config) { c.Tasks[0].Reference = 2 },
		"limits":            func(c *Config) { c.Tasks[0].Limits = Limits{true, 1, 1} },
		"NaN limits":        func(c *Config) { c.Tasks[0].Limits = Limits{true, math.NaN(), 1} },
		"bits, no limits":   func(c *Config) { c.Tasks[0].Bits = 8 },
		"range":             func(c *Config) { c.Tasks[0].Sensors = []Sensor{{Converter: Converter{Bits: 8, Low: 1, High: 0}}} },
		"too many bits":     func(c *Config) { c.Tasks[0].Sensors = []Sensor{{Converter: Converter{Bits: 60, Low: 0, High: 1}}} },
		"NaN slew":          func(c *Config) { c.Tasks[0].Slew = math.NaN() },
		"NaN reference":     func(c *Config) { c.Reference = Step(math.NaN()) },
		"NaN disturbance":   func(c *Config) { c.Disturbances = []Drive{{InputDisturbance, Ramp(math.Inf(1))}} },
		"disturbance input": func(c *Config) { c.Disturbances = []Drive{{5, Step(1)}} },
		"band":              func(c *Config) { c.Step = &StepSpec{1, 2} },
		"wild jitter":       func(c *Config) { c.Tasks[0].Jitter = func(k int64) float64 { return float64(-k) } },
		"NaN jitter":        func(c *Config) { c.Tasks[0].Jitter = func(k int64) float64 { return math.NaN() } },
		"update too early": func(c *Config) {
			c.Tasks[0].Jitter = func(k int64) float64 { return 0.01 }
			c.Tasks[0].UpdateOnGrid = true
		},
	} {
		cfg := proportional(t, plant, "1/10", "0", "2", 10)
		change(&cfg)
		done := make(chan error, 1)
		go func() { _, err := Run(context.Background(), cfg); done <- err }()
		select {
		case err := <-done:
			if err == nil {
				t.Errorf("%s: no error", name)
			}
		case <-time.After(20 * time.Second):
			t.Fatalf("%s: hangs", name)
		}
	}
	if _, err := NewController(ControllerConfig{Period: rat("1"), AntiWindup: Tracking}); err == nil {
		t.Error("no tracking time")
	}
	if _, err := NewController(ControllerConfig{Period: rat("0")}); err == nil {
		t.Error("no period")
	}
	if _, err := NewController(ControllerConfig{Period: rat("1"), Terms: []Term{{Model: inZ(t, rats("0", "0", "1"), one(), "1"), Weight: 1}}}); !errors.Is(err, ErrImproper) {
		t.Errorf("improper: %v", err)
	}
	if _, err := NewContinuous([][]float64{{1, 2}}, [][]float64{{1}}, 1, nil); err == nil {
		t.Error("matrices that do not fit")
	}
	if _, err := NewContinuous([][]float64{{1}}, [][]float64{{1}}, 1, []Channel{{Input: 1, B: []float64{1}, D: []float64{0}}}); err == nil {
		t.Error("channel of no input")
	}
}

// Cancelling ends a run; progress goes from 0 to 1.
func TestCancelAndProgress(t *testing.T) {
	cfg := proportional(t, plantOf(t, model(t, one(), rats("1", "1"), "0"), unit(t)), "1/10", "0", "2", 1<<40)
	ctx, cancel := context.WithCancel(context.Background())
	var parts []float64
	cfg.Progress = func(p float64) {
		if parts = append(parts, p); len(parts) == 3 {
			cancel()
		}
	}
	if _, err := Run(ctx, cfg); !errors.Is(err, context.Canceled) {
		t.Errorf("error %v", err)
	}
	parts = nil
	cfg.Ticks = 20_000
	if _, err := Run(context.Background(), cfg); err != nil || parts[0] != 0 || parts[len(parts)-1] != 1 {
		t.Errorf("progress %v, error %v", parts, err)
	}
}

// One system may serve several runs at once.
func TestRunsAtOnce(t *testing.T) {
	plant := plantOf(t, model(t, one(), rats("1", "1", "0"), "0.1"), unit(t))
	cfg := proportional(t, plant, "1/10", "0.03", "0.5", 500)
	want := run(t, cfg)
	var wg sync.WaitGroup
	for range 8 {
		wg.Go(func() {
			tr, err := Run(context.Background(), cfg)
			if err != nil || tr.FinalY != want.FinalY {
				t.Errorf("%v, %v", tr, err)
			}
		})
	}
	wg.Wait()
}

// A motion as the disturbance of 1/s behind a dead time, no controller at work: the output is its
// integral, by the pieces' own coefficients; breaks fall where no tick is.
func TestMotionAsDisturbance(t *testing.T) {
	d, err := Move(2, 1, 2, 8)
	if err != nil {
		t.Fatal(err)
	}
	integral := func(at float64) float64 {
		sum := 0.0
		for i, from := range d.starts {
			to := at
			if i+1 < len(d.starts) {
				to = math.Min(at, d.starts[i+1])
			}
			if h := to - from; h > 0 {
				c := d.coef[i]
				sum += h * (c[0] + h*(c[1]/2+h*(c[2]/3+h*c[3]/4)))
			}
		}
		return sum
	}
	cfg := proportional(t, plantOf(t, model(t, rats("1"), rats("1", "0"), "0.123"), unit(t)), "1/7", "0", "1", 25)
	cfg.Tasks[0].Drives, cfg.Disturbances = nil, []Drive{{InputDisturbance, d}}
	tr := run(t, cfg)
	for i, at := range tr.T {
		near(t, "y", tr.Y[i], integral(at-0.123), 1e-14)
	}
}

// A sine as the disturbance of 1/(s+1): y = a/(1+w²)·(sin wt − w·cos wt + w·e^{−t}).
func TestSineAsDisturbance(t *testing.T) {
	const a, w = 2, 3.1
	cfg := proportional(t, plantOf(t, model(t, one(), rats("1", "1"), "0"), unit(t)), "1/7", "0", "1", 40)
	cfg.Tasks[0].Drives, cfg.Disturbances = nil, []Drive{{InputDisturbance, Sine(a, w)}}
	tr := run(t, cfg)
	for i, at := range tr.T {
		near(t, "y", tr.Y[i], a/(1+w*w)*(math.Sin(w*at)-w*math.Cos(w*at)+w*math.Exp(-at)), 1e-14)
	}
}

// A plant that is a gain holds the reference of the last tick: the error of a ramp comes up to
// slope·T just before the next.
func TestPeakBeforeJump(t *testing.T) {
	cfg := openLoop(t, []string{"1"}, []string{"1"}, "0", 50)
	cfg.Reference = Ramp(3)
	tr := run(t, cfg)
	near(t, "peak", tr.PeakError, 0.3, 1e-14)
	near(t, "rms", tr.RMSError, 0.3/math.Sqrt(3), 1e-14) // ∫e² of a parabola, exact
}

// Ticks start at the offset, be it more than a period, and efforts reach the plant after every delay.
func TestOffsetBeyondPeriod(t *testing.T) {
	cfg := proportional(t, plantOf(t, model(t, one(), rats("1", "0"), "0.17"), unit(t)), "1/10", "0.05", "1", 20)
	cfg.Tasks[0].Offset = rat("0.23")
	tr := run(t, cfg)
	near(t, "first tick", tr.TickT[0], 0.23, 1e-16)
	for i, at := range tr.T {
		// Effort 1 from 0.28 on reaches the plant at 0.45; the next, still 1, later.
		want := 0.0
		if at >= 0.28 {
			want = 1
		}
		if at < 0.5 && tr.U[i] != want {
			t.Errorf("u(%g) = %g, want %g", at, tr.U[i], want)
		}
		if at <= 0.55 {
			near(t, "y", tr.Y[i], math.Max(0, at-0.45), 1e-15)
		}
	}
}

// Thinning keeps the bound, the ends and the extremes of the points looked at.
func TestThinning(t *testing.T) {
	plant := plantOf(t, model(t, rats("1"), rats("1", "0.02", "1"), "0"), unit(t))
	cfg := proportional(t, plant, "1/50", "0.007", "0.9", 50_000)
	cfg.MaxPoints = 1 << 20
	full := run(t, cfg)
	cfg.MaxPoints = 300
	thin := run(t, cfg)
	if len(thin.T) > 300 || len(thin.T) < 150 || len(thin.TickT) > 300 {
		t.Errorf("%d points, %d ticks", len(thin.T), len(thin.TickT))
	}
	span := func(list []float64) (low, high float64) {
		low, high = list[0], list[0]
		for _, v := range list {
			low, high = math.Min(low, v), math.Max(high, v)
		}
		return low, high
	}
	for _, c := range [][2][]float64{{full.Y, thin.Y}, {full.U, thin.U}, {full.T, thin.T}} {
		a, b := span(c[0])
		if l, h := span(c[1]); l != a || h != b {
			t.Errorf("extremes %v %v, want %v %v", l, h, a, b)
		}
	}
	for i := 1; i < len(thin.T); i++ {
		if !(thin.T[i] > thin.T[i-1]) {
			t.Fatal("instants do not rise")
		}
	}
	if thin.PeakError != full.PeakError || thin.RMSError != full.RMSError || thin.FinalY != full.FinalY {
		t.Error("figures depend on the points kept")
	}
}

// Memory stays when the ticks grow.
func TestMemoryStays(t *testing.T) {
	cfg := orderSix(t)
	heap := func(ticks int64) uint64 {
		cfg.Ticks = ticks
		var a, b runtime.MemStats
		runtime.ReadMemStats(&a)
		run(t, cfg)
		runtime.ReadMemStats(&b)
		return b.TotalAlloc - a.TotalAlloc
	}
	heap(1000)
	small, big := heap(20_000), heap(1_000_000)
	// The same trace of at most 2000 points twice, grown by doubling: below 64 bytes·2000·4·2.
	if !(big <= small+1_100_000) {
		t.Errorf("10⁶ ticks take %d bytes, 2·10⁴ take %d", big, small)
	}
}

// Newton–Cotes weights integrate the powers that they are exact for.
func TestQuadrature(t *testing.T) {
	exact := []int{1: 1, 2: 3, 3: 3, 4: 5, 5: 5, 6: 7, 8: 5, 12: 5}
	for parts, degree := range exact {
		if degree == 0 {
			continue
		}
		w := quadrature(parts, 2)
		for d := 0; d <= degree; d++ {
			sum := 0.0
			for i, v := range w {
				sum += v * math.Pow(2*float64(i)/float64(parts), float64(d))
			}
			want := math.Pow(2, float64(d+1)) / float64(d+1)
			near(t, "integral", sum, want, 1e-14*want)
		}
	}
}
