package sim

import (
	"context"
	"math"
	"testing"
)

// openLoop drives the plant with the step itself, tick by tick, so the response is the
// continuous one.
func openLoop(t *testing.T, num, den []string, dead string, ticks int64) Config {
	one := inZ(t, rats("1"), one(), "1/10")
	c, err := NewController(ControllerConfig{Period: rat("1/10"), Feedforward: &one})
	if err != nil {
		t.Fatal(err)
	}
	return Config{
		System: plantOf(t, model(t, rats(num...), rats(den...), dead), unit(t)), Reference: Step(1), Ticks: ticks, PointsPerTick: 4,
		Tasks: []Task{{Period: rat("1/10"), Controller: c, Reads: []int{OutputM}, Drives: []int{InputEffort}}},
	}
}

func figure(t *testing.T, what string, got Maybe, want, tol float64) {
	t.Helper()
	if !got.OK {
		t.Errorf("%s does not apply, want %g", what, want)
		return
	}
	near(t, what, got.Value, want, tol)
}

// Step figures with closed forms (any textbook). Located on the exact solution, so 1e-12.
func TestStepFiguresClosedForms(t *testing.T) {
	// 1/(s+1) behind 0.25 s: rise ln 9, settling to 2 % 0.25 + ln 50.
	f, _, err := StepFigures(context.Background(), openLoop(t, []string{"3"}, []string{"1", "1"}, "0.25", 120), StepSpec{Final: 3})
	if err != nil {
		t.Fatal(err)
	}
	figure(t, "rise", f.RiseTime, math.Log(9), 1e-12)
	figure(t, "settling", f.SettlingTime, 0.25+math.Log(50), 1e-12)
	figure(t, "overshoot", f.OvershootPercent, 0, 0)
	figure(t, "peak effort", f.PeakEffort, 1, 0)
	if f.PeakTime.OK {
		t.Errorf("peak time %g without overshoot", f.PeakTime.Value)
	}
	// ω = 1, ζ = 1/2: overshoot e^{−πζ/√(1−ζ²)}, peak π/√(1−ζ²). Rise and settling by bisection on
	// the closed form 1 − e^{−t/2}(cos wt + sin wt/√3).
	w := math.Sqrt(3) / 2
	y := func(t float64) float64 { return 1 - math.Exp(-t/2)*(math.Cos(w*t)+math.Sin(w*t)/math.Sqrt(3)) }
	solve := func(level, a, b float64) float64 {
		for range 100 {
			if m := (a + b) / 2; (y(m)-level)*(y(a)-level) > 0 {
				a = m
			} else {
				b = m
			}
		}
		return a
	}
	want := Figures{
		OvershootPercent: some(100 * math.Exp(-math.Pi/math.Sqrt(3))), PeakTime: some(math.Pi / w),
		RiseTime: some(solve(0.9, 1, 3) - solve(0.1, 0, 1)),
		// The last exit from ±2 % is on the way back from the second undershoot... found by looking.
		SettlingTime: some(lastOutside(y, 0.02)), PeakEffort: some(1),
	}
	f, tr, err := StepFigures(context.Background(), openLoop(t, []string{"1"}, []string{"1", "1", "1"}, "0", 300), StepSpec{Final: 1})
	if err != nil {
		t.Fatal(err)
	}
	twin := twinOf(t, TwinConfig{
		Plant: model(t, one(), rats("1", "1", "0"), "0"), Sensor: unit(t), Terms: []TwinTerm{{unit(t), 1}},
		Reference: Step(1), Duration: 30, Step: &StepSpec{Final: 1},
	})
	for _, got := range []Figures{f, twin.Step} {
		figure(t, "overshoot", got.OvershootPercent, want.OvershootPercent.Value, 1e-10)
		figure(t, "peak time", got.PeakTime, want.PeakTime.Value, 1e-7) // flat: √(1e-15) at the top
		figure(t, "rise", got.RiseTime, want.RiseTime.Value, 1e-12)
		figure(t, "settling", got.SettlingTime, want.SettlingTime.Value, 1e-11)
		figure(t, "peak effort", got.PeakEffort, 1, 1e-12)
	}
	if tr.Step != f {
		t.Error("the trace has other figures")
	}
}

// lastOutside looks for the last time |y − 1| = band on a grid and halves it down.
func lastOutside(y func(float64) float64, band float64) float64 {
	for t := 30.0; t > 0; t -= 1e-3 {
		if math.Abs(y(t)-1) > band {
			a, b := t, t+1e-3
			for range 60 {
				if m := (a + b) / 2; math.Abs(y(m)-1) > band {
					a = m
				} else {
					b = m
				}
			}
			return a
		}
	}
	return 0
}

func TestStepFiguresNotApplicable(t *testing.T) {
	cfg := openLoop(t, []string{"1"}, []string{"1", "1"}, "0", 10) // ends at 1 s: 63 %
	for _, final := range []float64{0, math.Inf(1), math.NaN()} {
		f, _, err := StepFigures(context.Background(), cfg, StepSpec{Final: final})
		if err != nil {
			t.Fatal(err)
		}
		if f != (Figures{}) {
			t.Errorf("final %g: %+v", final, f)
		}
	}
	f, _, err := StepFigures(context.Background(), cfg, StepSpec{Final: 1})
	if err != nil {
		t.Fatal(err)
	}
	if f.RiseTime.OK || f.SettlingTime.OK {
		t.Errorf("a response that ends at 63 %% has figures %+v", f)
	}
	if _, _, err := StepFigures(context.Background(), cfg, StepSpec{Final: 1, Band: -1}); err == nil {
		t.Error("a negative band has no error")
	}
	// A falling response: −1/(s+1).
	cfg = openLoop(t, []string{"-1"}, []string{"1", "1"}, "0", 100)
	f, _, _ = StepFigures(context.Background(), cfg, StepSpec{Final: -1})
	figure(t, "rise of a falling response", f.RiseTime, math.Log(9), 1e-12)
	// A plant that passes the step on jumps over both levels at once: 1 + 0.5/(s+1)... final 1.5.
	cfg = openLoop(t, []string{"1", "1.5"}, []string{"1", "1"}, "0", 200)
	f, _, _ = StepFigures(context.Background(), cfg, StepSpec{Final: 1.5})
	figure(t, "rise after a jump", f.RiseTime, math.Log(0.5/0.15), 1e-12)
}

// Recovery after a limit: 1/s under a PI controller whose integrator runs on. By hand (see piOnIntegrator): with T = 1 and
// r = 3 the output climbs far beyond and back through 3; back-calculation recovers sooner.
func TestRecoveryTime(t *testing.T) {
	took := map[AntiWindup]float64{}
	for _, rule := range []AntiWindup{NoAntiWindup, Tracking} {
		c, err := NewController(ControllerConfig{
			Period: rat("1/2"), Terms: []Term{{Model: inZ(t, rats("-0.75", "1"), rats("-1", "1"), "1/2"), Weight: 1}},
			AntiWindup: rule, TrackingTime: 0.5,
		})
		if err != nil {
			t.Fatal(err)
		}
		f, tr, err := StepFigures(context.Background(), Config{
			System: plantOf(t, model(t, one(), rats("1", "0"), "0"), unit(t)), Reference: Step(3), Ticks: 60, MaxPoints: 5000, PointsPerTick: 40,
			Tasks: []Task{{Period: rat("1/2"), Controller: c, Reads: []int{OutputM}, Drives: []int{InputEffort}, Limits: Limits{true, -1, 1}}},
		}, StepSpec{Final: 3})
		if err != nil {
			t.Fatal(err)
		}
		// From the trace: the first and the last time that the output crosses the edge of the band, by straight lines.
		first, last := 0.0, 0.0
		for i := 1; i < len(tr.T); i++ {
			a, b := math.Abs(tr.Y[i-1]-3)-0.06, math.Abs(tr.Y[i]-3)-0.06
			if a > 0 != (b > 0) {
				last = tr.T[i-1] + (tr.T[i]-tr.T[i-1])*a/(a-b)
				if first == 0 {
					first = last
				}
			}
		}
		near(t, "recovery", f.RecoveryTime.Value, last-first, 1e-9)
		took[rule] = f.RecoveryTime.Value
	}
	if !(took[NoAntiWindup] > 1.5*took[Tracking]) || !(took[Tracking] > 0) {
		t.Errorf("recovery %v", took)
	}
	// An effort without limits has nothing to recover from, one that never meets them recovers at once.
	cfg := proportional(t, plantOf(t, model(t, one(), rats("1", "0"), "0"), unit(t)), "1/10", "0", "1", 100)
	if f, _, err := StepFigures(context.Background(), cfg, StepSpec{Final: 1}); err != nil || f.RecoveryTime.OK {
		t.Errorf("recovery %v, %v", f.RecoveryTime, err)
	}
	cfg.Tasks[0].Limits = Limits{true, -9, 9}
	if f, _, err := StepFigures(context.Background(), cfg, StepSpec{Final: 1}); err != nil || f.RecoveryTime != some(0) {
		t.Errorf("recovery %v, %v", f.RecoveryTime, err)
	}
}
