package sim

import (
	"context"
	"math"
	"testing"
)

// The short way of a plain run gives what the general way gives: the same rows and figures, sums up to the rounding
// of their order.
func TestPlainRunIsTheGeneralOne(t *testing.T) {
	parabola, table := Parabola(0.3), Signal{}
	var err error
	if table, err = Table([]float64{0, 0.013, 0.013, 0.2}, []float64{0, 1, 0.5, 2}); err != nil {
		t.Fatal(err)
	}
	for name, change := range map[string]func(*Config){
		"step":       func(*Config) {},
		"many ticks": func(c *Config) { c.Ticks, c.PointsPerTick = 20_000, 1 },
		"sine":       func(c *Config) { c.Reference = Sine(1, 30) },
		"parabola":   func(c *Config) { c.Reference = parabola },
		"table":      func(c *Config) { c.Reference = table },
		"no delay":   func(c *Config) { c.Tasks[0].Delay = nil },
		"ticks late": func(c *Config) {
			c.Tasks[0].Delay = rat("0.0017")
			c.Tasks[0].Limits = Limits{On: true, Low: -3, High: 2}
		},
		"offset":        func(c *Config) { c.Tasks[0].Offset = rat("0.0012") },
		"bits and slew": func(c *Config) { c.Tasks[0].Bits, c.Tasks[0].Slew = 9, 5000 },
		"step size":     func(c *Config) { c.Tasks[0].Step = 0.125 },
		"windup":        func(c *Config) { c.Tasks[0].Controller = windup(t, StopOutward) },
		"tracking":      func(c *Config) { c.Tasks[0].Controller = windup(t, Tracking) },
		"no rule":       func(c *Config) { c.Tasks[0].Controller = windup(t, NoAntiWindup) },
		"few points":    func(c *Config) { c.MaxPoints = 20 },
	} {
		both := make([]*Trace, 2)
		for i, general := range []bool{false, true} {
			cfg := byHand(t, 900)
			cfg.PointsPerTick = 0
			change(&cfg)
			e, err := newEngine(&cfg)
			if err != nil {
				t.Fatal(err)
			}
			if e.general = general; e.plain() == general {
				t.Fatalf("%s: plain %v", name, !general)
			}
			if both[i], err = e.run(context.Background()); err != nil {
				t.Fatal(err)
			}
		}
		got, want := both[0], both[1]
		for what, l := range map[string][2][]float64{
			"t": {got.T, want.T}, "r": {got.R, want.R}, "y": {got.Y, want.Y}, "m": {got.M, want.M}, "u": {got.U, want.U},
			"tick t": {got.TickT, want.TickT}, "tick y": {got.TickY, want.TickY}, "tick m": {got.TickM, want.TickM}, "tick u": {got.TickU, want.TickU},
			"figures": {{got.FinalT, got.FinalR, got.FinalY, got.FinalM, got.FinalU, got.PeakError, got.PeakErrorTime, got.PeakEffort},
				{want.FinalT, want.FinalR, want.FinalY, want.FinalM, want.FinalU, want.PeakError, want.PeakErrorTime, want.PeakEffort}},
		} {
			if len(l[0]) != len(l[1]) {
				t.Fatalf("%s: %d values of %s, want %d", name, len(l[0]), what, len(l[1]))
			}
			for k := range l[0] {
				if l[0][k] != l[1][k] {
					t.Fatalf("%s: %s[%d] = %v, want %v", name, what, k, l[0][k], l[1][k])
				}
			}
		}
		// The short way sums the squares of checkEvery intervals without keeping what rounding drops, 1.1e-16 each.
		if !(math.Abs(got.RMSError-want.RMSError) <= checkEvery*1.1e-16*want.RMSError) {
			t.Errorf("%s: rms %v, want %v", name, got.RMSError, want.RMSError)
		}
	}
}

// windup is a PI controller for the loop of byHand.
func windup(t testing.TB, rule AntiWindup) *Controller {
	c, err := NewController(ControllerConfig{
		Period: rat("1/2000"), AntiWindup: rule, TrackingTime: 0.02,
		Terms: []Term{
			{Model: inZ(t, rats("-3980", "4000"), rats("-0.6", "1"), "1/2000"), Weight: 0.5},
			{Model: inZ(t, rats("0.05"), rats("-1", "1"), "1/2000"), Weight: 1},
		},
	})
	if err != nil {
		t.Fatal(err)
	}
	return c
}
