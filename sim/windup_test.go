package sim

import (
	"fmt"
	"math"
	"testing"
)

// textbook is a PI controller as a program has it, with a feedforward of −1, on x' = (u − x), sampled at T, u within ±1; the rules of
// anti-windup as textbooks give them (Åström and Hägglund, "PID Controllers"; from memory). share is α: 0 for an
// integral that is updated after the output, 1 and ½ for one that is updated before it.
func textbook(rule AntiWindup, share, kp, ki, T, tt, low, high float64, r func(k int) float64, n int) (u, y []float64) {
	x, integral, before := 0.0, 0.0, 0.0
	a := math.Exp(-T)
	for k := range n {
		e := r(k) - x
		old := integral
		if share > 0 {
			integral += T * ki * ((1-share)*before + share*e)
		}
		if rule == Clamp {
			integral = math.Max(low, math.Min(integral, high))
		}
		v := -r(k) + kp*e + integral
		out := math.Max(-1, math.Min(v, 1))
		outward := v > 1 && ki*e > 0 || v < -1 && ki*e < 0
		undo := rule == Stop && v != out || rule == StopOutward && outward
		switch {
		case share > 0 && undo:
			integral = old
		case share == 0 && !undo:
			integral += T * ki * e
		}
		if rule == Tracking {
			integral += T * (out - v) / tt
		}
		u, y = append(u, out), append(y, x)
		x = a*x + (1-a)*out
		before = e
	}
	return u, y
}

// integral is ki/s under the map with share α, in z: forward ki·T/(z−1), backward ki·T·z/(z−1), tustin their mean.
func integralInZ(t testing.TB, share float64, ki, T string) Term {
	k := rat(ki)
	k.Mul(k, rat(T))
	switch share {
	case 0:
		return Term{Model: inZ(t, rats(k.RatString()), rats("-1", "1"), T), Weight: 1, Ahead: share}
	case 1:
		return Term{Model: inZ(t, rats("0", k.RatString()), rats("-1", "1"), T), Weight: 1, Ahead: share}
	}
	k.Quo(k, rat("2"))
	return Term{Model: inZ(t, rats(k.RatString(), k.RatString()), rats("-1", "1"), T), Weight: 1, Ahead: share}
}

// timedPI is the same controller for the measured period.
func timedPI(t testing.TB, share float64, kp, ki string) *TimedConfig {
	ff := TimedPart{Model: model(t, rats("-1"), one(), "0"), Stretch: 1}
	return &TimedConfig{Feedforward: &ff, Terms: [][]TimedPart{
		{{Model: model(t, rats(kp), one(), "0"), Ahead: share, Stretch: 1}},
		{{Model: model(t, rats(ki), rats("1", "0"), "0"), Ahead: share, Stretch: 1}},
	}}
}

// Every rule under every map is the textbook's program, tick by tick, also computed on the measured
// period when that is the nominal one. Signals are of order one; the two ways of summing differ by roundings, which the
// rules' comparisons do not amplify here (no effort comes within 1e-9 of a limit by chance).
func TestAntiWindupOfTheTextbook(t *testing.T) {
	const kp, ki, T, tt = 0.5, 3.0, 0.125, 0.4
	reference, err := Table([]float64{0, 3.9, 3.9}, []float64{0.95, 0.95, 0.3})
	if err != nil {
		t.Fatal(err)
	}
	r := func(k int) float64 {
		if k < 32 {
			return 0.95
		}
		return 0.3
	}
	ff := inZ(t, rats("-1"), one(), "1/8")
	rules := map[AntiWindup]string{NoAntiWindup: "none", StopOutward: "stop outward", Stop: "stop", Clamp: "clamp", Tracking: "tracking"}
	plant := plantOf(t, model(t, one(), rats("1", "1"), "0"), unit(t))
	seen := map[string]bool{}
	for rule, name := range rules {
		for _, share := range []float64{0, 0.5, 1} {
			for _, measured := range []bool{false, true} {
				what := fmt.Sprintf("%s, share %g, measured %v", name, share, measured)
				c, err := NewController(ControllerConfig{
					Period: rat("1/8"), AntiWindup: rule, TrackingTime: tt, Low: -0.5, High: 1.5, Feedforward: &ff, Timed: timedPI(t, share, "1/2", "3"),
					Terms: []Term{{Model: inZ(t, rats("1/2"), one(), "1/8"), Weight: 1}, integralInZ(t, share, "3", "1/8")},
				})
				if err != nil {
					t.Fatal(err)
				}
				tr := run(t, Config{
					System: plant, Reference: reference, Ticks: 79,
					Tasks: []Task{{
						Period: rat("1/8"), Controller: c, Reads: []int{OutputM}, Drives: []int{InputEffort},
						Limits: Limits{true, -1, 1}, MeasuredPeriod: measured,
					}},
				})
				u, y := textbook(rule, share, kp, ki, T, tt, -0.5, 1.5, r, 80)
				for k := range u {
					if !(math.Abs(tr.TickU[k]-u[k]) <= 1e-12) || !(math.Abs(tr.TickY[k]-y[k]) <= 1e-12) {
						t.Errorf("%s: tick %d: u %v y %v, want %v %v", what, k, tr.TickU[k], tr.TickY[k], u[k], y[k])
						break
					}
				}
				seen[fmt.Sprint(y)] = true
			}
		}
	}
	if len(seen) != 15 { // the rules and maps do differ here
		t.Errorf("%d different responses, want 15", len(seen))
	}
}
