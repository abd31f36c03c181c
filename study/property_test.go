package study

import (
	"context"
	"fmt"
	"math"
	"math/big"
	"strings"
	"testing"

	"pgregory.net/rapid"

	"steadytick/loop"
)

// parsed reads a loop file that must be right.
func parsed(t interface{ Fatal(...any) }, text string) *loop.Loop {
	l, problems := loop.Parse("test.yaml", []byte(text), nil)
	if len(problems) > 0 {
		t.Fatal(problems.Error(), "\n", text)
	}
	return l
}

// columns analyses both columns of a loop.
func columns(t interface{ Fatal(...any) }, l *loop.Loop) (cont, sampled *Column) {
	a, b, err := bothColumns(l, &Compare{})
	if err != nil {
		t.Fatal(err)
	}
	return a.column(l), b.column(l)
}

// servo is a family of loops of type 1: a drive with an electrical lag, a lead, a sensor lag.
// All numbers are decimals, written exactly.
type servo struct{ gain, lag, electrical, lead, sensor int } // thousandths

func drawServo(t *rapid.T) servo {
	return servo{
		gain:       rapid.IntRange(500, 4000).Draw(t, "gain"),
		lag:        rapid.IntRange(100, 900).Draw(t, "lag"),
		electrical: rapid.IntRange(2, 9).Draw(t, "electrical"),
		lead:       rapid.IntRange(100, 900).Draw(t, "lead"),
		sensor:     rapid.IntRange(1, 9).Draw(t, "sensor"),
	}
}

func milli(n int) string { return fmt.Sprintf("%d.%03d", n/1000, n%1000) }

func (s servo) plant() string {
	return fmt.Sprintf("%s/(s*(%s*s + 1)*(%s*s + 1))", milli(s.gain), milli(s.lag), milli(s.electrical))
}

// file writes the loop with plant and timing given; everything else is the same.
func (s servo) file(plant, timing, method string) string {
	return fmt.Sprintf(`loop: invented servo
output: rad
effort: V
plant: %s
controller:
  model: (%s*s + 1)/(%s*s + 1)
  map: %s
sensor:
  model: 1/(%s*s + 1)
timing: %s
inputs:
  - step: 1
  - ramp: 2
  - parabola: 3
`, plant, milli(s.lead), milli(s.lead/10+1), method, milli(s.sensor), timing)
}

// figures are the numbers of a column that every way of writing a loop must give alike.
func figures(c *Column) map[string]float64 {
	m := map[string]float64{
		"type": float64(c.Type), "Kp": c.PositionConstant.Value, "Kv": c.VelocityConstant.Value, "Ka": c.AccelerationConstant.Value,
		"phase margin": c.PhaseMarginDeg.Value, "gain margin": c.GainMarginDB.Value, "modulus": c.ModulusMargin.Value,
		"crossover": c.CrossoverRadS.Value, "bandwidth": c.BandwidthRadS.Value, "delay margin": c.DelayMarginS.Value,
	}
	for k := range steadyTerms {
		m[fmt.Sprintf("c%d", k)] = c.TrackingSeries[k].Value
		m[fmt.Sprintf("loop c%d", k)] = c.LoopSeries[k].Value
	}
	for i, s := range c.Steady {
		m[fmt.Sprintf("steady %d", i)] = s.TrackingError.Value
		m[fmt.Sprintf("ripple %d", i)] = s.Ripple.Value
	}
	return m
}

// same holds two sets of figures together: relative, with the floor that a difference
// of zeros needs. Roots of polynomials enter the margins, so 1e-9 leaves 7 of 16 digits to them.
func same(t *rapid.T, what string, got, want map[string]float64, tol float64) {
	for k, w := range want {
		g := got[k]
		if g == w || math.IsNaN(g) && math.IsNaN(w) {
			continue
		}
		if !(math.Abs(g-w) <= tol*math.Abs(w)) {
			t.Errorf("%s: %s is %.15g, want %.15g", what, k, g, w)
		}
	}
}

// Splitting the same delay between dead time of the plant and time to update changes nothing
// in the sampled loop.
func TestSplittingADelayChangesNothing(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		s := drawServo(t)
		total := rapid.IntRange(1, 90).Draw(t, "total")
		part := rapid.IntRange(0, total).Draw(t, "part")
		write := func(dead, after int) map[string]float64 {
			plant := fmt.Sprintf("{model: %s, dead_time: %d ms}", s.plant(), dead)
			timing := fmt.Sprintf("{period: 20 ms, compute: 0 s, update: {after: %d ms}}", after)
			_, sampled := columns(t, parsed(t, s.file(plant, timing, "tustin")))
			return figures(sampled)
		}
		same(t, "split delay", write(part, total-part), write(0, total), 1e-9)
	})
}

// A loop written as an expression, as coefficients, as zeros and poles and as state space is the same loop.
func TestFourWaysToWriteALoop(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		s := drawServo(t)
		timing := "{rate: 200 Hz, compute: 1 ms, update: when_ready}"
		k, a, b := big.NewRat(int64(s.gain), 1000), big.NewRat(int64(s.lag), 1000), big.NewRat(int64(s.electrical), 1000)
		ab := new(big.Rat).Mul(a, b)
		sum := new(big.Rat).Add(a, b)
		dec := func(r *big.Rat) string { return r.FloatString(6) } // products of two thousandths end there
		ways := map[string]string{
			"expression":   fmt.Sprintf("{model: %s}", s.plant()),
			"coefficients": fmt.Sprintf("{model: {num: [%s], den: [%s, %s, 1, 0]}}", dec(k), dec(ab), dec(sum)),
			"state space": fmt.Sprintf("{model: {A: [[0, 1, 0], [0, 0, 1], [0, -1/%s, -%s/%s]], B: [[0], [0], [%s/%s]], C: [[1, 0, 0]], D: [[0]]}}",
				dec(ab), dec(sum), dec(ab), dec(k), dec(ab)),
			"zeros and poles": fmt.Sprintf("{model: {zeros: [], poles: [0, -1/%s, -1/%s], gain: %s/%s}}", dec(a), dec(b), dec(k), dec(ab)),
		}
		var want [2]map[string]float64
		c, d := columns(t, parsed(t, s.file(ways["expression"], timing, "tustin")))
		want[0], want[1] = figures(c), figures(d)
		for name, plant := range ways {
			c, d := columns(t, parsed(t, s.file(plant, timing, "tustin")))
			same(t, name+", continuous", figures(c), want[0], 1e-9)
			same(t, name+", sampled", figures(d), want[1], 1e-9)
		}
	})
}

// Scaling all times by 1000 (s → 1000·s) scales each figure by its unit.
func TestScalingTimeScalesResults(t *testing.T) {
	power := map[string]int{"Kv": -1, "Ka": -2, "crossover": -1, "bandwidth": -1, "delay margin": 1,
		"c1": 1, "c2": 2, "c3": 3, "loop c1": 1, "loop c2": 2, "loop c3": 3}
	rapid.Check(t, func(t *rapid.T) {
		s := drawServo(t)
		method := rapid.SampledFrom([]string{"tustin", "matched", "forward", "backward", "hold", "triangle"}).Draw(t, "map")
		slow := s.file(fmt.Sprintf("{model: %s, dead_time: 3 ms}", s.plant()), "{period: 4 ms, compute: 1 ms}", method)
		fast := strings.NewReplacer("*s + 1", "/1000*s + 1", "/(s*", "/(s/1000*", " ms", " us").Replace(slow)
		c0, d0 := columns(t, parsed(t, slow))
		c1, d1 := columns(t, parsed(t, fast))
		for _, pair := range [][2]*Column{{c0, c1}, {d0, d1}} {
			want, got := figures(pair[0]), figures(pair[1])
			for k, n := range power {
				want[k] *= math.Pow(1000, float64(-n))
			}
			for k := range want {
				if strings.HasPrefix(k, "steady") || strings.HasPrefix(k, "ripple") {
					delete(want, k) // sizes of inputs stay, slopes do not
				}
			}
			same(t, "time scaled", got, want, 1e-9)
		}
	})
}

// As T → 0 the sampled figures approach the continuous ones to first order in T, because the hold is
// a delay of T/2 and the sample-to-update delay is in proportion: halving T must halve the difference, or quarter it where
// the terms of first order cancel.
func TestFastSamplingApproachesTheContinuousLoop(t *testing.T) {
	seen := map[string]int{}
	rapid.Check(t, func(t *rapid.T) {
		s := drawServo(t)
		method := rapid.SampledFrom([]string{"tustin", "matched", "forward", "backward", "hold", "triangle"}).Draw(t, "map")
		gaps := func(us int) (gap, limit map[string]float64) {
			timing := fmt.Sprintf("{period: %d us, compute: %d us}", us, us/4)
			c, d := columns(t, parsed(t, s.file(fmt.Sprintf("{model: %s}", s.plant()), timing, method)))
			if !c.Stable || !d.Stable {
				t.Skip("not stable")
			}
			gap, limit = figures(d), figures(c)
			for k := range gap {
				gap[k] -= limit[k]
			}
			return gap, limit
		}
		coarse, limit := gaps(8)
		fine, _ := gaps(4)
		for k, a := range coarse {
			// Of a figure that hardly depends on T the terms of first order may cancel, and rounding shows.
			if !(math.Abs(a) > 1e-7*math.Abs(limit[k])) || math.IsInf(a, 0) {
				continue
			}
			seen[k]++
			// The terms of second order are T/τ of those of first order: 8 µs over 1 ms, and 30 for their size.
			r, ok := a/fine[k], func(order int) bool {
				return math.Abs(a/fine[k]-math.Exp2(float64(order))) <= math.Exp2(float64(order-3))
			}
			if strings.HasPrefix(k, "ripple") {
				if !ok(4) { // the effort steps by a part T, through a plant with three more poles than zeros
					t.Errorf("%s, %s: %.6g at 8 us, %.6g at 4 us: ratio %.4f, want about 16", method, k, a, fine[k], r)
				}
			} else if !ok(1) && !ok(2) {
				t.Errorf("%s, %s: difference %.6g at 8 us, %.6g at 4 us: ratio %.4f, want about 2, or 4", method, k, a, fine[k], r)
			}
		}
	})
	for _, k := range []string{"phase margin", "gain margin", "modulus", "delay margin", "bandwidth", "c2"} {
		if seen[k] == 0 {
			t.Errorf("%s was never compared", k)
		}
	}
	t.Log("figures compared:", seen)
}

// The steady error predicted is the one simulated.
func TestPredictedSteadyErrorIsTheSimulatedOne(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		s := drawServo(t)
		delay := rapid.IntRange(0, 30).Draw(t, "delay")
		timing := fmt.Sprintf("{period: 10 ms, compute: 0 s, update: {after: %d ms}}", delay)
		l := parsed(t, s.file(fmt.Sprintf("{model: %s}", s.plant()), timing, "tustin"))
		_, a, err := bothColumns(l, &Compare{})
		if err != nil {
			t.Fatal(err)
		}
		if !a.stable || a.slowest() > 2 {
			t.Skip("not stable, or slow")
		}
		for _, in := range l.Inputs {
			v := variant{loop: l, run: a}
			length := 40 * a.slowest() // e^−40 = 4e-18 of the transient is left
			r, err := v.simulate(context.Background(), in, length)
			if err != nil {
				t.Fatal(err)
			}
			g := polynomialError(in.Kind, in.Size, a.trackingDD, a.block.open.Period)
			want := g[0] + g[1]*r.endTime + g[2]*r.endTime*r.endTime
			// The run ends with y of the size of r in float64, after thousands of ticks.
			scale := math.Abs(r.trace.FinalR) + math.Abs(want)
			if !(math.Abs(r.end-want) <= 1e-10*scale) {
				t.Errorf("%s: simulated %.12g, predicted %.12g at %g s", in.Kind, r.end, want, r.endTime)
			}
		}
	})
}
