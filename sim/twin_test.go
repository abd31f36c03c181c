package sim

import (
	"context"
	"errors"
	"math"
	"math/big"
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
		Terms: []TwinTerm{{gain(t, "1"), 1}}, Reference: Step(1), Duration: 20,
	})
	wd := math.Sqrt(3) / 2
	for i, at := range tr.T {
		near(t, "y", tr.Y[i], 1-math.Exp(-at/2)*(math.Cos(wd*at)+math.Sin(wd*at)/math.Sqrt(3)), 1e-12)
	}
	// ∫(1−y)² over all time is 1 for this loop (ISE of ω = 1: (1 + 4ζ²)/(4ζ)); at 20 s the rest is
	// below e^{−20}.
	near(t, "rms", tr.RMSError, math.Sqrt(1./20), 1e-9)
	near(t, "peak error", tr.PeakError, 1, 1e-15)
}

// x'(t) = −x(t − τ) + 1 by the method of steps: x = Σ_k (−1)^k (t − kτ)^{k+1}/(k+1)! over
// t > kτ. With the dead time in the plant or in the controller the output is behind by another τ, with
// it in the sensor it is x itself. Alternating terms up to 12^6/6! lose 4 digits.
func TestTwinMethodOfSteps(t *testing.T) {
	for _, tau := range []string{"1", "1.5", "7", "40"} {
		d, _ := rat(tau).Float64()
		for place, behind := range map[string]float64{"plant": d, "controller": d, "sensor": 0} {
			cfg := TwinConfig{
				Plant: model(t, one(), rats("1", "0"), "0"), Sensor: unit(t),
				Terms: []TwinTerm{{gain(t, "1"), 1}}, Reference: Step(1), Duration: 12,
			}
			*map[string]**big.Rat{"plant": &cfg.Plant.Delay, "controller": &cfg.Terms[0].Model.Delay, "sensor": &cfg.Sensor.Delay}[place] = rat(tau)
			tr := twinOf(t, cfg)
			for i, at := range tr.T {
				want := 0.0
				for k := 0.0; at-behind > k*d; k++ {
					want += math.Pow(-1, k) * math.Pow(at-behind-k*d, k+1) / math.Gamma(k+2)
				}
				near(t, "y at dead time "+tau+" of the "+place, tr.Y[i], want, 1e-11)
			}
		}
	}
}

// The same with dead times far below the dynamics: after many dead times only the
// dominant root s0 of s = −e^{−sτ} is left (Lambert's W₀(−τ)/τ; by Newton here), with
// the residue −1/(1 + τ·s0).
func TestTwinTinyDeadTime(t *testing.T) {
	for _, tau := range []string{"1e-1", "1e-2", "1e-4", "1e-6", "1e-9", "1e-12"} {
		d, _ := rat(tau).Float64()
		s := -1.0
		for range 50 {
			e := math.Exp(-s * d)
			s -= (s + e) / (1 - d*e)
		}
		tr := twinOf(t, TwinConfig{
			Plant: model(t, one(), rats("1", "0"), tau), Sensor: unit(t),
			Terms: []TwinTerm{{gain(t, "1"), 1}}, Reference: Step(1), Duration: 12,
		})
		if tr.Pieces > 200 {
			t.Errorf("dead time %s: %d pieces", tau, tr.Pieces)
		}
		for i, at := range tr.T {
			if at > 2 { // the second root of τ = 0.1 has died out to e^{−35·2}
				near(t, "y at dead time "+tau, tr.Y[i], 1-math.Exp(s*at)/(1+d*s), 1e-12)
			}
		}
	}
}

// A static plant 1/2 behind 1 s under proportional control 1: u = Σ_{k ≤ t} (−1/2)^k, a
// staircase that no lag smooths.
func TestTwinStaircase(t *testing.T) {
	tr := twinOf(t, TwinConfig{
		Plant: model(t, rats("1/2"), one(), "1"), Sensor: unit(t), Terms: []TwinTerm{{gain(t, "1"), 1}},
		Reference: Step(1), Duration: 20,
	})
	u := func(at float64) float64 {
		sum := 0.0
		for k := 0.0; k <= at; k++ {
			sum += math.Pow(-0.5, k)
		}
		return sum
	}
	for i, at := range tr.T {
		if at == 20 {
			continue // the end is seen from before
		}
		near(t, "u", tr.U[i], u(at), 1e-14)
		if at >= 1 {
			near(t, "y", tr.Y[i], u(at-1)/2, 1e-14)
		}
	}
}

// PI kp = 1, ki = 2 with clamped integrator on 1/s, u <= 1, r = 3, by hand: u = 1 and e = 3 − t; at t = 2
// the computed effort is back at the limit, where it is held, the integrator following with
// i' = 1, until the integrand 2e is down to 1 at t = 2.5. From there e” + e' + 2e = 0 with e = 1/2,
// e' = −1.
func TestTwinHeldOnTheLimit(t *testing.T) {
	tr := twinOf(t, TwinConfig{
		Plant: model(t, one(), rats("1", "0"), "0"), Sensor: unit(t),
		Terms: []TwinTerm{{model(t, rats("1", "2"), rats("1", "0"), "0"), 1}}, AntiWindup: StopOutward,
		Limits: Limits{true, -1, 1}, Reference: Step(3), Duration: 12,
	})
	w := math.Sqrt(7) / 2
	for i, at := range tr.T {
		e := 3 - at
		if x := at - 2.5; x > 0 {
			e = math.Exp(-x/2) * (0.5*math.Cos(w*x) - 0.75/w*math.Sin(w*x))
		}
		near(t, "y", tr.Y[i], 3-e, 1e-12)
	}
	// Mirrored, the lower limit does the same.
	down := twinOf(t, TwinConfig{
		Plant: model(t, one(), rats("1", "0"), "0"), Sensor: unit(t),
		Terms: []TwinTerm{{model(t, rats("1", "2"), rats("1", "0"), "0"), 1}}, AntiWindup: StopOutward,
		Limits: Limits{true, -1, 1}, Reference: Step(-3), Duration: 12,
	})
	for i := range tr.T {
		near(t, "mirrored y", down.Y[i], -tr.Y[i], 1e-14)
		near(t, "mirrored u", down.U[i], -tr.U[i], 1e-13)
	}
}

// Poles ten decades above the dynamics cost few pieces and change nothing.
func TestTwinStiff(t *testing.T) {
	cfg := TwinConfig{
		Plant: model(t, one(), rats("1", "1", "0"), "0"), Sensor: unit(t),
		Terms: []TwinTerm{{gain(t, "1"), 1}}, Reference: Step(1), Duration: 20,
	}
	plain := twinOf(t, cfg)
	cfg.Sensor = model(t, one(), rats("1e-10", "1"), "0")
	stiff := twinOf(t, cfg)
	if stiff.Pieces > 200 {
		t.Errorf("%d pieces", stiff.Pieces)
	}
	for i := range plain.T {
		near(t, "y", stiff.Y[i], plain.Y[i], 1e-9) // the lag itself moves y by 1e-10 times its slope
	}
}

// Moving dead time between plant and sensor leaves m; and a term's dead time in series with theirs
// leaves m as well, behind by it against the reference.
func TestTwinSplitDeadTime(t *testing.T) {
	with := func(plant, sensor, term string) *TwinTrace {
		lead := model(t, rats("0.6", "1"), rats("0.1", "1"), term)
		return twinOf(t, TwinConfig{
			Plant: model(t, one(), rats("1", "1"), plant), Sensor: model(t, one(), rats("0.2", "1"), sensor),
			Terms: []TwinTerm{{lead, 1}}, Disturbance: Step(1), Duration: 6,
		})
	}
	want := with("0.7", "0", "0")
	for _, c := range [][3]string{{"0.3", "0.4", "0"}, {"0", "0.7", "0"}, {"0.5", "0", "0.2"}, {"0", "0", "0.7"}, {"0.000001", "0.3", "0.399999"}} {
		got := with(c[0], c[1], c[2])
		d, _ := rat(c[0]).Float64()
		h, _ := rat(c[1]).Float64()
		// What reaches the plant is the same in all of them: read y without its dead time.
		for i, at := range got.T {
			k := int(math.Round((at - d + 0.7) / 6 * 1000))
			if at >= d && math.Abs((at-d+0.7)/6*1000-float64(k)) < 1e-6 && k <= 1000 {
				near(t, "y", got.Y[i], want.Y[k], 1e-11)
			}
			if at < d+h && got.M[i] != 0 {
				t.Errorf("m = %g at %g, before the dead time", got.M[i], at)
			}
		}
		near(t, "peak effort", got.PeakEffort, want.PeakEffort, 1e-9)
	}
}

func TestTwinErrors(t *testing.T) {
	base := func() TwinConfig {
		return TwinConfig{
			Plant: model(t, one(), rats("1", "0"), "0"), Sensor: unit(t),
			Terms: []TwinTerm{{gain(t, "1"), 1}}, Reference: Step(1), Duration: 1,
		}
	}
	for name, c := range map[string]struct {
		change func(*TwinConfig)
		want   error
	}{
		"improper":         {func(c *TwinConfig) { c.Terms[0].Model = sdomain.S() }, ErrImproper},
		"improper plant":   {func(c *TwinConfig) { c.Plant = sdomain.S() }, ErrImproper},
		"algebraic loop":   {func(c *TwinConfig) { c.Plant = gain(t, "-1") }, ErrIllPosed},
		"two solutions":    {func(c *TwinConfig) { c.Plant = gain(t, "-2"); c.Limits = Limits{true, -1, 1} }, ErrIllPosed},
		"no duration":      {func(c *TwinConfig) { c.Duration = 0 }, nil},
		"NaN duration":     {func(c *TwinConfig) { c.Duration = math.NaN() }, nil},
		"falling times":    {func(c *TwinConfig) { c.Times = []float64{0.5, 0.4} }, nil},
		"time beyond":      {func(c *TwinConfig) { c.Times = []float64{2} }, nil},
		"NaN signal":       {func(c *TwinConfig) { c.Reference = Step(math.NaN()) }, ErrSignal},
		"limits":           {func(c *TwinConfig) { c.Limits = Limits{true, 1, -1} }, nil},
		"no tracking time": {func(c *TwinConfig) { c.AntiWindup = Tracking }, nil},
		"NaN weight":       {func(c *TwinConfig) { c.Terms[0].Weight = math.NaN() }, nil},
	} {
		cfg := base()
		c.change(&cfg)
		tr, err := Twin(context.Background(), cfg)
		if err == nil || tr != nil || c.want != nil && !errors.Is(err, c.want) {
			t.Errorf("%s: %v", name, err)
		}
	}
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	if _, err := Twin(ctx, base()); !errors.Is(err, context.Canceled) {
		t.Errorf("cancelled: %v", err)
	}
}

// An unstable loop ends with finite figures and says so.
func TestTwinDiverges(t *testing.T) {
	tr := twinOf(t, TwinConfig{
		Plant: model(t, rats("1"), rats("1", "-100"), "0.1"), Sensor: unit(t),
		Terms: []TwinTerm{{gain(t, "1"), 1}}, Reference: Step(1), Duration: 100, Step: &StepSpec{Final: 1},
	})
	if !tr.Diverged || tr.Step != (Figures{}) || len(tr.T) == 0 || len(tr.T) > 100 {
		t.Errorf("diverged %v, %d instants, %+v", tr.Diverged, len(tr.T), tr.Step)
	}
	for i := range tr.T {
		if !finite([]float64{tr.Y[i], tr.U[i], tr.M[i]}) {
			t.Fatalf("not finite at %g", tr.T[i])
		}
	}
	if !finite([]float64{tr.FinalY, tr.FinalU, tr.PeakError, tr.RMSError, tr.PeakEffort}) {
		t.Errorf("%+v", tr)
	}
}

// A prefilter's and a feedforward's dead time move the reference alone: without feedback (weight 1,
// plant 0) u is the delayed signal itself.
func TestTwinDelaysOfTheReference(t *testing.T) {
	filter, feed := model(t, one(), one(), "0.3"), model(t, rats("2"), one(), "0.7")
	tr := twinOf(t, TwinConfig{
		Plant: model(t, rats("0"), one(), "0"), Sensor: unit(t), Terms: []TwinTerm{{model(t, one(), one(), "0.5"), 1}, {gain(t, "1"), 0.5}},
		Prefilter: &filter, Feedforward: &feed, Reference: Ramp(1), Duration: 2,
	})
	for i, at := range tr.T {
		want := math.Max(0, at-0.8) + 0.5*math.Max(0, at-0.3) + 2*math.Max(0, at-0.7)
		near(t, "u", tr.U[i], want, 1e-14)
	}
}

// The linear map of often used systems gives what elimination gives, in every mode.
func TestOperator(t *testing.T) {
	cfg := TwinConfig{
		Plant: model(t, rats("2"), rats("1", "0.3", "4"), "0.4"), Sensor: model(t, one(), rats("0.05", "1"), "0"),
		Terms:  []TwinTerm{{model(t, rats("1", "2"), rats("1", "0"), "0"), 1}},
		Limits: Limits{true, -1, 2}, Reference: Ramp(1), Disturbance: Step(0.5), AntiWindup: StopOutward, Duration: 3,
	}
	if err := cfg.check(); err != nil {
		t.Fatal(err)
	}
	m, err := newTwinModel(&cfg)
	if err != nil {
		t.Fatal(err)
	}
	w := newTwin(&cfg, m)
	for w.t < 1.5 {
		if _, err := w.advance(); err != nil {
			t.Fatal(err)
		}
	}
	for _, st := range []state{{}, {md: high}, {md: high, frozen: true}, {md: low}} {
		reg := w.regime(st)
		s, _ := w.collocate(reg, 0.1)
		f, _ := w.matrix(reg, s)
		want := w.rightSide(reg, s, w.x)
		f.solve(want)
		f.used = worthwhile
		got := w.solution(reg, s, f)
		if f.op == nil {
			t.Fatal("no operator")
		}
		for i := range want {
			near(t, "unknown", got[i], want[i], 1e-14) // sums of 50 terms of size 1
		}
	}
}

// A load a few microseconds after the start comes back through the dead time while everything that it
// moves is still far below the rounding of the past; pieces must not shrink for that.
func TestTwinSmallStart(t *testing.T) {
	load, err := Table([]float64{5.453824996948242e-06}, []float64{0.000244140625})
	if err != nil {
		t.Fatal(err)
	}
	tr := twinOf(t, TwinConfig{
		Plant: model(t, rats("0.02", "1.45"), rats("0.94", "0.2", "0.07"), "0"), Sensor: model(t, one(), rats("0.16", "1"), "0.25"),
		Terms: []TwinTerm{{model(t, rats("0.99", "1.5"), rats("1", "0"), "0"), 1}}, AntiWindup: Tracking, TrackingTime: 0.3,
		Limits: Limits{true, -0.2222, 0.3}, Reference: Ramp(0.3), Disturbance: load, Duration: 10,
	})
	if tr.Pieces > 300 {
		t.Errorf("%d pieces", tr.Pieces)
	}
}
