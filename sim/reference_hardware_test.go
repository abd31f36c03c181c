package sim

import (
	"encoding/json"
	"fmt"
	"math"
	"math/big"
	"os"
	"strconv"
	"strings"
	"testing"
)

// numbers reads decimal strings.
type numbers []float64

func (n *numbers) UnmarshalJSON(b []byte) error {
	var list []json.Number
	if err := json.Unmarshal([]byte(strings.ReplaceAll(string(b), `"`, "")), &list); err != nil {
		return err
	}
	for _, s := range list {
		v, err := s.Float64()
		if err != nil {
			return err
		}
		*n = append(*n, v)
	}
	return nil
}

// held is a reference or a script, [from tick, value].
type heldValues [][2]json.Number

func (h *heldValues) UnmarshalJSON(b []byte) error {
	if b[0] == '"' { // one value throughout
		*h = heldValues{{"0", json.Number(strings.Trim(string(b), `"`))}}
		return nil
	}
	var list [][2]json.RawMessage
	if err := json.Unmarshal(b, &list); err != nil {
		return err
	}
	for _, p := range list {
		*h = append(*h, [2]json.Number{json.Number(p[0]), json.Number(strings.Trim(string(p[1]), `"`))})
	}
	return nil
}

func (h heldValues) signal(t testing.TB, period float64) Signal {
	var times, values []float64
	for i, p := range h {
		k, err1 := p[0].Float64()
		v, err2 := p[1].Float64()
		if err1 != nil || err2 != nil {
			t.Fatal(err1, err2)
		}
		if i > 0 {
			// Half a tick early, so that no rounding of the instant makes it a tick late; between samples nobody reads it.
			times, values = append(times, (k-0.5)*period), append(values, values[len(values)-1])
			times, values = append(times, (k-0.5)*period), append(values, v)
			continue
		}
		times, values = append(times, k*period), append(values, v)
	}
	s, err := Table(times, values)
	if err != nil {
		t.Fatal(err)
	}
	return s
}

func readCases(t testing.TB, name string, into any) {
	t.Helper()
	src, err := os.ReadFile("../testdata/reference/" + name)
	if err != nil {
		t.Fatal(err)
	}
	if err := json.Unmarshal(src, into); err != nil {
		t.Fatal(name, err)
	}
}

// mechanicalCase is one of friction.json and backlash.json, whose generators state the conventions.
type mechanicalCase struct {
	Name                           string
	Law, At, Output                string
	J, B, Coulomb, Static, Viscous string
	Gap                            string
	Period                         string `json:"period_s"`
	Delay                          string `json:"delay_s"`
	Kp, Ki, Kd                     *string
	Reference                      heldValues
	StuckError                     *string `json:"stuck_error"`
	Spread                         []float64
	Y, V, X, U                     numbers
	Keep                           int
}

func text(p *string) string {
	if p == nil {
		return "0"
	}
	return *p
}

// law is the controller of a case: a script, or P, I by the forward difference and D on the measurement by the backward one.
func (c *mechanicalCase) law(t testing.TB) (*Controller, Signal) {
	period, _ := rat(c.Period).Float64()
	if c.Kp == nil {
		ff := inZ(t, rats("1"), one(), c.Period)
		k, err := NewController(ControllerConfig{Period: rat(c.Period), Feedforward: &ff})
		if err != nil {
			t.Fatal(err)
		}
		var script heldValues
		for i, u := range c.U {
			script = append(script, [2]json.Number{json.Number(fmt.Sprint(i)), json.Number(strconv.FormatFloat(u, 'g', -1, 64))})
		}
		return k, script.signal(t, period)
	}
	terms := []Term{{Model: inZ(t, rats(*c.Kp), one(), c.Period), Weight: 1}}
	if ki := rat(text(c.Ki)); ki.Sign() != 0 {
		ki.Mul(ki, rat(c.Period))
		terms = append(terms, Term{Model: inZ(t, []*big.Rat{ki}, rats("-1", "1"), c.Period), Weight: 1})
	}
	if kd := rat(text(c.Kd)); kd.Sign() != 0 {
		kd.Quo(kd, rat(c.Period))
		terms = append(terms, Term{Model: inZ(t, []*big.Rat{new(big.Rat).Neg(kd), kd}, rats("0", "1"), c.Period), Weight: 0})
	}
	return controllerOf(t, c.Period, terms...), c.Reference.signal(t, period)
}

// config is the run of a case on a plant.
func (c *mechanicalCase) config(t testing.TB, p PlantConfig, ticks int) Config {
	s, err := NewPlantWith(p)
	if err != nil {
		t.Fatal(err)
	}
	k, r := c.law(t)
	return Config{
		System: s, Reference: r, Ticks: int64(ticks), PointsPerTick: 2, MaxPoints: 100_000,
		Tasks: []Task{{Period: rat(c.Period), Delay: rat(c.Delay), Controller: k, Reads: []int{OutputM}, Drives: []int{InputEffort}}},
	}
}

// compare holds the output at the ticks to the reference: the rounding of a tick, some 1e-15 of signals of order one, times what
// the generator found that a disturbance of the samples does to the run up to there.
func (c *mechanicalCase) compare(t *testing.T, tr *Trace, want numbers) {
	t.Helper()
	if len(tr.TickY) < len(want) || len(want) < 20 {
		t.Fatalf("%s: %d ticks, want %d", c.Name, len(tr.TickY), len(want))
	}
	for k, w := range want {
		tol := 2e-14
		if k < len(c.Spread) {
			tol *= math.Max(1, c.Spread[k])
		} else if len(c.Spread) > 0 {
			break // beyond what the generator followed
		}
		if !(math.Abs(tr.TickY[k]-w) <= tol) {
			t.Errorf("%s: y[%d] = %.17g, want %.17g, tolerance %g", c.Name, k, tr.TickY[k], w, tol)
			return
		}
	}
}

// Dry friction against event-driven solutions with 50 digits: stick, slip, reversal, rest, and hunting.
func TestFrictionReference(t *testing.T) {
	var cases []mechanicalCase
	readCases(t, "friction.json", &cases)
	for _, c := range cases {
		den := []*big.Rat{rat(c.J), rat(c.B), new(big.Rat)}
		want := c.Y
		if c.Output == "velocity" {
			den, want = den[:2], c.V
		}
		cfg := c.config(t, PlantConfig{Plant: model(t, one(), den, "0"), Sensor: unit(t), Friction: true}, len(want))
		f := Friction{Velocity: c.Output == "velocity"}
		for v, s := range map[*float64]string{&f.Coulomb: c.Coulomb, &f.Static: c.Static, &f.Viscous: c.Viscous} {
			*v, _ = rat(s).Float64()
		}
		cfg.Friction = &f
		c.compare(t, run(t, cfg), want)
	}
	if len(cases) < 11 {
		t.Errorf("only %d cases", len(cases))
	}
}

// Play at the output and at the input, among them limit cycles, against event-driven solutions with 50 digits.
func TestPlayReference(t *testing.T) {
	var cases []mechanicalCase
	readCases(t, "backlash.json", &cases)
	for _, c := range cases {
		cfg := c.config(t, PlantConfig{Plant: model(t, one(), rats("1", "1", "0"), "0"), Sensor: unit(t)}, len(c.Y))
		gap, _ := rat(c.Gap).Float64()
		if c.At == "output" {
			cfg.Play = &Play{Gap: gap}
		} else {
			cfg.Tasks[0].Play = gap
		}
		c.compare(t, run(t, cfg), c.Y)
	}
	if len(cases) < 9 {
		t.Errorf("only %d cases", len(cases))
	}
}

// Anti-windup tick by tick with 50 digits: every rule under every map on two plants.
func TestAntiWindupReference(t *testing.T) {
	var cases []struct {
		Name, Rule, Map, Plant string
		Period                 string `json:"period_s"`
		Kp, Ki                 string
		Reference              heldValues
		Limits                 [2]string
		Clamp                  *[2]string
		Tracking               *string `json:"tracking_s"`
		Y, U                   numbers
	}
	readCases(t, "antiwindup.json", &cases)
	plants := map[string][]*big.Rat{"1/(s + 1)": rats("1", "1"), "1/(s*(s + 1))": rats("1", "1", "0")}
	rules := map[string]AntiWindup{"none": NoAntiWindup, "clamp": Clamp, "stop": Stop, "stop_outward": StopOutward, "tracking": Tracking}
	shares := map[string]float64{"forward": 0, "tustin": 0.5, "backward": 1}
	for _, c := range cases {
		den, known := plants[c.Plant]
		rule, ruled := rules[c.Rule]
		share, mapped := shares[c.Map]
		if !known || !ruled || !mapped {
			t.Fatalf("%s: %q, %q, %q", c.Name, c.Plant, c.Rule, c.Map)
		}
		cc := ControllerConfig{
			Period: rat(c.Period), AntiWindup: rule,
			Terms: []Term{{Model: inZ(t, rats(c.Kp), one(), c.Period), Weight: 1}, integralInZ(t, share, c.Ki, c.Period)},
		}
		if c.Tracking != nil {
			cc.TrackingTime, _ = rat(*c.Tracking).Float64()
		}
		if c.Clamp != nil {
			cc.Low, _ = rat(c.Clamp[0]).Float64()
			cc.High, _ = rat(c.Clamp[1]).Float64()
		}
		k, err := NewController(cc)
		if err != nil {
			t.Fatal(c.Name, err)
		}
		low, _ := rat(c.Limits[0]).Float64()
		high, _ := rat(c.Limits[1]).Float64()
		period, _ := rat(c.Period).Float64()
		tr := run(t, Config{
			System: plantOf(t, model(t, one(), den, "0"), unit(t)), Reference: c.Reference.signal(t, period), Ticks: int64(len(c.Y)),
			Tasks: []Task{{Period: rat(c.Period), Controller: k, Reads: []int{OutputM}, Drives: []int{InputEffort}, Limits: Limits{true, low, high}}},
		})
		for i := range c.Y {
			// Sixty ticks of roundings of signals of order one.
			if !(math.Abs(tr.TickY[i]-c.Y[i]) <= 1e-13) || !(math.Abs(tr.TickU[i]-c.U[i]) <= 1e-12) {
				t.Errorf("%s: tick %d: y %v u %v, want %v %v", c.Name, i, tr.TickY[i], tr.TickU[i], c.Y[i], c.U[i])
				break
			}
		}
	}
	if len(cases) < 72 {
		t.Errorf("only %d cases", len(cases))
	}
}

// Quantizers, encoders and noise: the sequences and figures of quantized.json.
func TestQuantizedReference(t *testing.T) {
	src, err := os.ReadFile("../testdata/reference/quantized.json")
	if err != nil {
		t.Fatal(err)
	}
	var all []map[string]json.RawMessage
	if err := json.Unmarshal(src, &all); err != nil {
		t.Fatal(err)
	}
	seen := map[string]int{}
	number := func(m map[string]json.RawMessage, key string) float64 {
		v, err := strconv.ParseFloat(strings.Trim(string(m[key]), `"`), 64)
		if err != nil {
			r, ok := new(big.Rat).SetString(strings.Trim(string(m[key]), `"`))
			if !ok {
				t.Fatalf("%s: %v", key, err)
			}
			v, _ = r.Float64()
		}
		return v
	}
	word := func(m map[string]json.RawMessage, key string) string { return strings.Trim(string(m[key]), `"`) }
	list := func(m map[string]json.RawMessage, key string) numbers {
		var n numbers
		if err := json.Unmarshal(m[key], &n); err != nil {
			t.Fatal(key, err)
		}
		return n
	}
	for _, m := range all {
		name, kind := word(m, "name"), word(m, "kind")
		seen[kind]++
		switch kind {
		case "converter":
			c := Converter{Bits: int(number(m, "bits")), High: number(m, "range")}
			near(t, name, c.Bin(), number(m, "q"), 1e-16*c.High)
			near(t, name, c.Bin()/math.Sqrt(12), number(m, "rms"), 1e-16*c.High)
		case "loop":
			cfg := quantizedLoop(t, word(m, "plant"), word(m, "period_s"), word(m, "kp"), word(m, "ki"))
			cfg.Reference = Step(number(m, "reference"))
			cfg.Tasks[0].Sensors = []Sensor{{Converter: Converter{Step: number(m, "step")}}}
			y, u := list(m, "y"), list(m, "u")
			cfg.Ticks = int64(len(y))
			tr := run(t, cfg)
			for k := range y {
				if !(math.Abs(tr.TickY[k]-y[k]) <= 1e-13) || !(math.Abs(tr.TickU[k]-u[k]) <= 1e-13) {
					t.Errorf("%s: tick %d: y %v u %v, want %v %v", name, k, tr.TickY[k], tr.TickU[k], y[k], u[k])
					break
				}
			}
		case "stuck":
			// Halves go up here and away from zero there: the same for sequences that stay above zero.
			y, a := list(m, "y"), number(m, "a")
			for k := 1; k < len(y) && a > 0 && y[0] > 0; k++ {
				if got := (Converter{Step: 1}).Value(a * y[k-1]); got != y[k] {
					t.Errorf("%s: %v after %v, want %v", name, got, y[k-1], y[k])
				}
			}
		case "encoder":
			counts, period := number(m, "counts"), number(m, "period_s")
			e := encoderState{Encoder: &Encoder{Count: 1 / counts, Velocity: true}}
			for k, want := range list(m, "difference_nearest") {
				at := float64(k) * period
				p := number(m, "start")/counts + number(m, "velocity")*at + number(m, "acceleration")*at*at/2
				if got := e.read(p, at, period); !(math.Abs(got-want)*counts*period <= 1e-9) { // whole counts
					t.Errorf("%s: %v at tick %d, want %v", name, got, k, want)
					break
				}
			}
		case "noise":
			cfg := quantizedLoop(t, word(m, "plant"), word(m, "period_s"), word(m, "kp"), word(m, "ki"))
			if kd := rat(word(m, "kd")); kd.Sign() != 0 {
				kd.Quo(kd, rat(word(m, "period_s")))
				terms := []Term{
					{Model: inZ(t, rats(word(m, "kp")), one(), word(m, "period_s")), Weight: 1},
					{Model: inZ(t, []*big.Rat{new(big.Rat).Neg(kd), kd}, rats("0", "1"), word(m, "period_s")), Weight: 1},
				}
				cfg.Tasks[0].Controller = controllerOf(t, word(m, "period_s"), terms...)
			}
			cfg.Tasks[0].Delay = rat(word(m, "delay_s"))
			g := noise(t, cfg, false)
			near(t, name+", u", g.Effort*g.Effort/number(m, "variance_u"), 1, 1e-12) // P of order ten, well conditioned
			near(t, name+", y", g.Output*g.Output/number(m, "variance_y"), 1, 1e-12)
		}
	}
	for kind, least := range map[string]int{"converter": 4, "loop": 4, "noise": 8, "encoder": 6} {
		if seen[kind] < least {
			t.Errorf("only %d cases of %s", seen[kind], kind)
		}
	}
}

// quantizedLoop is PI, I by the forward difference, on a plant of quantized.json.
func quantizedLoop(t testing.TB, plant, period, kp, ki string) Config {
	den := map[string][]*big.Rat{"1/(s + 1)": rats("1", "1"), "1/(s*(s + 1))": rats("1", "1", "0")}[plant]
	if den == nil {
		t.Fatalf("plant %q", plant)
	}
	terms := []Term{{Model: inZ(t, rats(kp), one(), period), Weight: 1}}
	if rat(ki).Sign() != 0 {
		terms = append(terms, integralInZ(t, 0, ki, period))
	}
	return Config{
		System: plantOf(t, model(t, one(), den, "0"), unit(t)), Ticks: 10,
		Tasks: []Task{{Period: rat(period), Controller: controllerOf(t, period, terms...), Reads: []int{OutputM}, Drives: []int{InputEffort}}},
	}
}
