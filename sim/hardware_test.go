package sim

import (
	"math"
	"reflect"
	"runtime"
	"testing"
)

// 4000 counts a turn at 4 kHz: one count a tick is 60 rpm (check value, common practice). At a constant
// 90 rpm the difference of counts is 1 or 2 a tick, 1.5 in the mean; the time between marks gives 90 rpm as
// it is, with an ideal clock.
func TestEncoderVelocity(t *testing.T) {
	const count = 60.0 / 4000 // of a position in rpm·s: a turn is 60
	velocity := func(e Encoder, ticks int64) *Trace {
		e.Count, e.Velocity, e.Output = count, true, OutputPosition
		cfg := scripted(t, PlantConfig{Plant: model(t, one(), one(), "0"), Sensor: unit(t), Position: true}, "1/4000", []float64{90}, ticks)
		cfg.Tasks[0].Sensors = []Sensor{{Encoder: &e}}
		return run(t, cfg)
	}
	near(t, "one count a tick", count*4000, 60, 1e-12)
	sum := 0.0
	for k, m := range velocity(Encoder{}, 400).TickM {
		if k == 0 {
			continue // nothing has been counted yet
		}
		// Whole counts of 60 rpm, up to the rounding of the division by the period.
		if n := math.Round(m / 60); n != 1 && n != 2 || !(math.Abs(m-60*n) <= 1e-9) {
			t.Fatalf("tick %d: %v rpm", k, m)
		}
		sum += m
	}
	near(t, "mean of 400 ticks", sum/400, 90, 1e-9)
	for k, m := range velocity(Encoder{ByTime: true}, 400).TickM {
		if k > 2 && !(math.Abs(m-90) <= 1e-7) { // from the third tick two marks are known
			t.Fatalf("by time, tick %d: %v rpm", k, m)
		}
	}
	// A clock of 1 MHz cuts each time by less than 1 us of at least 250/1.5·1 us: within 1 %.
	far := 0.0
	for k, m := range velocity(Encoder{ByTime: true, Clock: 1e6}, 400).TickM {
		if k > 2 {
			far = math.Max(far, math.Abs(m-90))
		}
	}
	if !(far > 1e-3 && far <= 0.9) {
		t.Errorf("a clock of 1 MHz is off by up to %v rpm of 90", far)
	}
}

// A position goes by whole counts, halves upward; at a standstill the velocity by time falls as the reciprocal of the
// time since the last mark.
func TestEncoderPositionAndStandstill(t *testing.T) {
	e := Encoder{Count: 0.25}
	for _, v := range [][2]float64{{0.124, 0}, {0.125, 0.25}, {-0.124, 0}, {-0.126, -0.25}, {10.1, 10}} {
		s := encoderState{Encoder: &e}
		if got := s.read(v[0], 0, 1); got != v[1] {
			t.Errorf("%v is read as %v, want %v", v[0], got, v[1])
		}
	}
	// Velocity 1 for 2 s, then 0: the marks of 0.25 lie at 0.125, 0.375, … 1.875; at t = 3 the next is 1.125 s overdue.
	cfg := scripted(t, PlantConfig{Plant: model(t, one(), one(), "0"), Sensor: unit(t), Position: true}, "1/2", []float64{1, 1, 1, 1, 0}, 8)
	cfg.Tasks[0].Sensors = []Sensor{{Encoder: &Encoder{Count: 0.25, Output: OutputPosition, Velocity: true, ByTime: true}}}
	tr := run(t, cfg)
	near(t, "moving", tr.TickM[3], 1, 1e-12)
	near(t, "just stopped", tr.TickM[4], 1, 1e-12)
	near(t, "after 1 s", tr.TickM[6], 0.25/1.125, 1e-12)
	near(t, "after 2 s", tr.TickM[8], 0.25/2.125, 1e-12)
	// Forth and back over one mark: each reading is a count over the time since the mark was passed before.
	cfg = scripted(t, PlantConfig{Plant: model(t, one(), one(), "0"), Sensor: unit(t), Position: true}, "1/2", []float64{0.3, -0.3, 0.3, -0.3}, 4)
	cfg.Tasks[0].Period = rat("1/2")
	cfg.Tasks[0].Sensors = []Sensor{{Encoder: &Encoder{Count: 0.25, Output: OutputPosition, Velocity: true, ByTime: true}}}
	tr = run(t, cfg)
	near(t, "forth", tr.TickM[1], 0.25/(0.125/0.3), 1e-12)
	near(t, "back", tr.TickM[2], -0.25/(0.5+0.025/0.3-0.125/0.3), 1e-12)
}

// A thermistor-like curve: through its points without error, between them the table's error as found by brute force; 10
// bits over its range add half a code by the table's slope.
func TestCurve(t *testing.T) {
	var temp, volt []float64
	for y := 0.0; y <= 100; y += 20 {
		// R = 10k·e^{3950(1/T − 1/298.15)} over a divider of 10k at 3.3 V (invented part, the usual beta formula).
		r := 1e4 * math.Exp(3950*(1/(y+273.15)-1/298.15))
		temp, volt = append(temp, y), append(volt, 3.3*r/(r+1e4))
	}
	c, err := NewCurve(temp, volt)
	if err != nil {
		t.Fatal(err)
	}
	for i, y := range temp {
		near(t, "electric", c.Electric(y), volt[i], 1e-15*4)
		near(t, "there and back", c.Straightened(c.Electric(y)), y, 1e-12)
	}
	worst := 0.0
	for y := 0.0; y <= 100; y += 0.01 {
		worst = math.Max(worst, math.Abs(c.Straightened(c.Electric(y))-y))
	}
	size, at := c.TableError()
	if !(math.Abs(size-worst) <= 1e-3*worst) || !(at > 0 && at < 100) || !(size > 0.1 && size < 3) {
		t.Errorf("table error %v at %v, by brute force %v", size, at, worst)
	}
	s := newSensor(&Sensor{Curve: c, Converter: Converter{Bits: 10, Low: 0, High: 3.3}}, 1, 0, 1)
	for y := 0.0; y <= 100; y += 0.37 {
		// Half a code by the steepest of the table's pieces nearby, besides the table's error.
		slope := math.Max(math.Abs(c.Slope(y-1)), math.Abs(c.Slope(y+1)))
		if got := s.measure(y, 0, 0, 1, 0); !(math.Abs(got-y) <= size+0.5*3.3/1024*slope) {
			t.Fatalf("%v is measured as %v", y, got)
		}
	}
	for _, bad := range [][2][]float64{{{0}, {1}}, {{0, 1, 2}, {1, 2, 1}}, {{0, 0}, {1, 2}}, {{0, 1}, {1, 1}}, {{0, math.NaN()}, {1, 2}}} {
		if _, err := NewCurve(bad[0], bad[1]); err == nil {
			t.Errorf("%v is no curve", bad)
		}
	}
}

// Moments and correlation of the random numbers over n = 10⁶, each within five of its standard deviations: mean
// 1/√n, variance √(2/n), fourth moment √(96/n), a correlation 1/√n.
func TestRandomNumbers(t *testing.T) {
	const n = 1_000_000
	d, other := newDice(7, 3), newDice(7, 4)
	var m, v, f, lag, cross, last float64
	for k := range int64(n) {
		x := d.normal(k)
		m += x
		v += x * x
		f += x * x * x * x
		lag += x * last
		cross += x * other.normal(k)
		last = x
	}
	root := math.Sqrt(n)
	near(t, "mean", m/n, 0, 5/root)
	near(t, "variance", v/n, 1, 5*math.Sqrt2/root)
	near(t, "fourth moment", f/n, 3, 5*math.Sqrt(96)/root)
	near(t, "next to each other", lag/n, 0, 5/root)
	near(t, "two streams", cross/n, 0, 5/root)
	c := newColoured(newDice(1, 1), 2, 0.5, 0.1)
	v, lag, last = 0, 0, 0
	for range int64(n) {
		x := c.next()
		v += x * x
		lag += x * last
		last = x
	}
	a := math.Exp(-0.05)
	// The variance of a variance of correlated numbers is 2/n·(1 + a²)/(1 − a²) of its square.
	near(t, "coloured", v/n, 4, 5*4*math.Sqrt(2.0/n*(1+a*a)/(1-a*a)))
	near(t, "its correlation", lag/v, a, 5*math.Sqrt((1-a*a)/n))
}

// Variance under measurement noise, a first-order loop: x⁺ = a·x − b·k·(x + n) has the variance of x
// (bk)²σ²/(1 − (a − bk)²), and u = −k(x + n) that of k²(var x + σ²). The estimates from n ticks have
// the relative standard deviation √(2/n·(1 + p²)/(1 − p²)) or less, p = a − bk.
func TestNoiseVariance(t *testing.T) {
	const n, sigma = 400_000, 0.01
	cfg := proportional(t, plantOf(t, model(t, one(), rats("1", "1"), "0"), unit(t)), "1/10", "0", "3", n)
	cfg.Reference, cfg.PointsPerTick, cfg.MaxPoints, cfg.Seed = Zero(), 1, n+10, 5
	cfg.Tasks[0].Sensors = []Sensor{{Noise: sigma}}
	tr := run(t, cfg)
	a := math.Exp(-0.1)
	b := 1 - a
	p := a - 3*b
	want := 9 * b * b * sigma * sigma / (1 - p*p)
	tol := 5 * math.Sqrt(2.0/n*(1+p*p)/(1-p*p))
	near(t, "variance of y", variance(tr.TickY)/want, 1, tol)
	near(t, "variance of u", variance(tr.TickU)/(9*(want+sigma*sigma)), 1, tol)
	// A fine converter on a busy signal is noise of q²/12 (Widrow; from memory): here the noise that keeps it busy is 3 q.
	const q = sigma / 3
	cfg.Tasks[0].Sensors = []Sensor{{Noise: sigma, Converter: Converter{Step: q}}}
	more := 1 + q*q/12/(sigma*sigma)
	near(t, "quantized, variance of u", variance(run(t, cfg).TickU)/(9*(want+sigma*sigma)), more, tol)
	if !(more-1 > tol/5) {
		t.Errorf("the test cannot tell: %v of %v", more-1, tol)
	}
}

func variance(x []float64) float64 {
	s := 0.0
	for _, v := range x {
		s += v * v
	}
	return s / float64(len(x))
}

// Ticks that are missed and measurements that are stale, by hand: x⁺ = x + u, u = (1 − m)/2, every third tick missed (the
// effort stays), every fourth with the measurement before.
func TestMissedAndStaleTicks(t *testing.T) {
	cfg := proportional(t, plantOf(t, model(t, one(), rats("1", "0"), "0"), unit(t)), "1", "0", "1/2", 12)
	cfg.Tasks[0].Missed = Chance{Every: 3}.On(1, false)
	cfg.Tasks[0].Stale = Chance{Every: 4}.On(1, true)
	tr := run(t, cfg)
	x, u, m := 0.0, 0.0, 0.0
	var want []float64
	for k := range 13 {
		if k%3 != 2 {
			if k%4 != 3 {
				m = x
			}
			u = (1 - m) / 2
			want = append(want, u)
		}
		x += u
	}
	exactly(t, "u", tr.TickU, want)
	// By chance: the share of 0.1 over 10⁵ ticks within five of √(0.09/10⁵).
	missed := 0
	on := Chance{Probability: 0.1}.On(3, false)
	for k := range int64(100_000) {
		if on(k) {
			missed++
		}
	}
	near(t, "share missed", float64(missed)/1e5, 0.1, 5*math.Sqrt(0.09/1e5))
}

// A late sample sees the later plant: y = t of an integrator under u = 1 read at k + j(k); a shifted update arrives
// later. Measured intervals give the instants as they are listed, over again.
func TestShiftedInstants(t *testing.T) {
	cfg := scripted(t, PlantConfig{Plant: model(t, one(), rats("1", "0"), "0"), Sensor: unit(t)}, "1", []float64{1}, 9)
	late := UniformJitter(11, false, 0.2)
	cfg.Tasks[0].Jitter = late
	tr := run(t, cfg)
	for k, m := range tr.TickM {
		at := float64(k) + late(int64(k))
		if at < 0 {
			at = 0
		}
		if k > 1 && !(math.Abs(tr.TickT[k]-at) <= 1e-15*at) {
			t.Errorf("sample %d at %v, want %v", k, tr.TickT[k], at)
		}
		if want := tr.TickT[k] - tr.TickT[0]; k > 0 && !(math.Abs(m-want) <= 1e-14) {
			t.Errorf("m[%d] = %v, want %v", k, m, want)
		}
	}
	cfg.Tasks[0].Jitter = MeasuredJitter([]float64{1.1, 0.9, 1.05}, 1)
	tr = run(t, cfg)
	for k, want := range []float64{0, 1.1, 2, 3.05, 4.15, 5.05, 6.1, 7.2, 8.1} {
		near(t, "measured instant", tr.TickT[k], want, 1e-14)
	}
	cfg.Tasks[0].Jitter = nil
	cfg.Tasks[0].UpdateShift = Repeated([]float64{0.25, 0.5})
	near(t, "late update", run(t, cfg).FinalY, 9-0.25, 1e-14)
}

// Firmware that differentiates a ramp of slope 2 over jittering ticks, filtered with τ = 1/2 by the backward difference,
//
//	d ← (τ·d + (m − m before))/(τ + T)
//
// with the nominal T: its output wanders; with the measured T it comes to 2 and stays.
func TestMeasuredPeriod(t *testing.T) {
	late := UniformJitter(2, false, 0.3)
	slope := func(measured bool) *Trace {
		c, err := NewController(ControllerConfig{
			Period: rat("1"), Terms: []Term{{Model: inZ(t, rats("-1", "1"), rats("-1/2", "3/2"), "1"), Weight: 0}},
			Timed: &TimedConfig{Terms: [][]TimedPart{{{Model: model(t, rats("1", "0"), rats("1/2", "1"), "0"), Ahead: 1, Stretch: 1}}}},
		})
		if err != nil {
			t.Fatal(err)
		}
		return run(t, Config{
			System: plantOf(t, model(t, one(), rats("1", "0"), "0"), unit(t)), Reference: Zero(), Ticks: 40,
			Disturbances: []Drive{{InputDisturbance, Step(2)}},
			Tasks: []Task{{
				Period: rat("1"), Controller: c, Reads: []int{OutputM}, Jitter: late, MeasuredPeriod: measured,
			}},
		})
	}
	nominal, right := slope(false), slope(true)
	dn := nominal.TickM[0] / 1.5 // of tick 0 only the nominal period is known
	dr := dn
	for k := 1; k < 40; k++ {
		moved := nominal.TickM[k] - nominal.TickM[k-1]
		interval := nominal.TickT[k] - nominal.TickT[k-1]
		dn, dr = (dn/2+moved)/1.5, (dr/2+moved)/(0.5+interval)
		near(t, "nominal", nominal.TickU[k], -dn, 1e-13)
		near(t, "measured", right.TickU[k], -dr, 1e-13)
	}
	near(t, "settled", right.TickU[39], -2, 1e-12) // each tick leaves at most 0.5/1.2 of the rest
	if math.Abs(dn-2) < 1e-3 {
		t.Errorf("the nominal period makes no difference: %v", dn)
	}
}

// Disturbances where they enter, each against its closed form on a plant 1/(s+1) without feedback (the effort is 0): a
// sine at the output shows as it is, one at the sensor only in what the firmware reads, and folds: 11 Hz read at 10 Hz is 1 Hz.
func TestDisturbancesWhereTheyEnter(t *testing.T) {
	p := PlantConfig{Plant: model(t, one(), rats("1", "1"), "0"), Sensor: unit(t)}
	w := 2 * math.Pi * 11
	cfg := scripted(t, p, "1/10", []float64{0}, 20)
	cfg.Disturbances = []Drive{{InputOutput, Sine(0.5, w)}}
	tr := run(t, cfg)
	for i, at := range tr.T {
		if !(math.Abs(tr.Y[i]-0.5*math.Sin(w*at)) <= 1e-13) {
			t.Fatalf("y(%v) = %v", at, tr.Y[i])
		}
	}
	cfg = scripted(t, p, "1/10", []float64{0}, 20)
	cfg.Tasks[0].Sensors = []Sensor{{Disturbances: []Signal{Sine(0.5, w)}}}
	tr = run(t, cfg)
	for k, m := range tr.TickM {
		near(t, "folded", m, 0.5*math.Sin(2*math.Pi*float64(k)/10), 1e-13)
		near(t, "y", tr.TickY[k], 0, 0)
	}
	// White noise held a tick on 1/(s+1): variance of the samples σ²(1 − a)²/(1 − a²).
	const n = 200_000
	cfg = scripted(t, p, "1/10", []float64{0}, n)
	cfg.Random, cfg.PointsPerTick, cfg.MaxPoints = []RandomDrive{{InputDisturbance, Random{RMS: 3}}}, 1, n+10
	a := math.Exp(-0.1)
	near(t, "noise", variance(run(t, cfg).TickY)/(9*(1-a)/(1+a)), 1, 5*math.Sqrt(2.0/n*(1+a*a)/(1-a*a)))
}

// A dead zone takes its half width from the effort, and play at the input its half gap: u = 1, −1, 0.2 … by hand.
func TestDeadZoneAndPlayAtTheInput(t *testing.T) {
	p := PlantConfig{Plant: model(t, one(), rats("1", "0"), "0"), Sensor: unit(t)}
	efforts := []float64{1, -1, 0.25, -0.25, 0.5}
	cfg := scripted(t, p, "1", efforts, 5)
	cfg.Tasks[0].Deadband = 0.25
	exactly(t, "y", run(t, cfg).TickY, []float64{0, 0.75, 0, 0, 0, 0.25})
	cfg = scripted(t, p, "1", efforts, 5)
	cfg.Tasks[0].Play = 0.5
	exactly(t, "y", run(t, cfg).TickY, []float64{0, 0.75, 0, 0, 0, 0.25})
	cfg.Tasks[0].Play = 1 // 0.5 −0.5 −0.25 −0.25 0
	exactly(t, "y", run(t, cfg).TickY, []float64{0, 0.5, 0, -0.25, -0.5, -0.5})
}

// everything is a loop with every effect on.
func everything(t testing.TB, ticks int64) Config {
	s, err := NewPlantWith(PlantConfig{
		Plant: model(t, rats("400"), rats("1", "8", "0"), "0"), Sensor: model(t, one(), rats("0.0004", "1"), "0"), Friction: true, Position: true,
	})
	if err != nil {
		t.Fatal(err)
	}
	c := controllerOf(t, "1/2000",
		Term{Model: inZ(t, rats("-7.96", "8"), rats("-0.6", "1"), "1/2000"), Weight: 1},
		Term{Model: inZ(t, rats("0.0005"), rats("-1", "1"), "1/2000"), Weight: 1})
	return Config{
		System: s, Reference: Sine(1, 3), Ticks: ticks, PointsPerTick: 2, Seed: 9,
		Random:       []RandomDrive{{InputDisturbance, Random{RMS: 0.005, Band: 300}}},
		Disturbances: []Drive{{InputOutput, Sine(1e-3, 900)}},
		Friction:     &Friction{Coulomb: 0.01, Static: 0.015, Viscous: 0.001},
		Play:         &Play{Gap: 1e-3},
		Tasks: []Task{{
			Period: rat("1/2000"), Delay: rat("0.00014"), Controller: c, Reads: []int{OutputM}, Drives: []int{InputEffort},
			Limits: Limits{On: true, Low: -24, High: 24}, Bits: 16, Slew: 5000, Deadband: 0.002, Play: 0.001,
			Jitter: UniformJitter(9, false, 1e-5), UpdateShift: UniformJitter(9, true, 1e-5),
			Missed: Chance{Probability: 0.001}.On(9, false), Stale: Chance{Probability: 0.01}.On(9, true),
			Sensors: []Sensor{{Noise: 1e-4, Offset: 1e-3, Converter: Converter{Bits: 14, Low: -6.3, High: 6.3}}},
		}},
	}
}

// The same seed gives the same numbers, another one others; the memory of a run does not grow with its length.
func TestEverythingAtOnce(t *testing.T) {
	a, b := run(t, everything(t, 3000)), run(t, everything(t, 3000))
	if !reflect.DeepEqual(a, b) {
		t.Error("two runs of one seed differ")
	}
	other := everything(t, 3000)
	other.Seed = 10
	if c := run(t, other); reflect.DeepEqual(a.Y, c.Y) || c.Diverged {
		t.Error("another seed makes no difference")
	}
	if a.Diverged || !(a.RMSError > 1e-4 && a.RMSError < 0.5) {
		t.Errorf("rms %v, diverged %v", a.RMSError, a.Diverged)
	}
	heap := func(ticks int64) float64 {
		most := uint64(0)
		cfg := everything(t, ticks)
		cfg.Progress = func(float64) {
			var s runtime.MemStats
			runtime.GC()
			runtime.ReadMemStats(&s)
			most = max(most, s.HeapAlloc)
		}
		run(t, cfg)
		return float64(most)
	}
	short, long := heap(10_000), heap(200_000)
	if !(long <= short+1e6) {
		t.Errorf("%g bytes after 10⁴ ticks, %g after 2·10⁵", short, long)
	}
}
