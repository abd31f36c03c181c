package loop

import (
	"math"
	"strings"
	"testing"
)

// The update rules and the delay from sample to update.
func TestLoopDelay(t *testing.T) {
	for update, want := range map[string]string{
		"":                          "110/1000000",
		", update: when_ready":      "110/1000000",
		", update: next_tick":       "1/1000",
		", update: {after: 250 us}": "1/4000",
		", update: {after: 3 ms}":   "3/1000", // more than a tick is allowed
	} {
		l := mustParse(t, "loop: t\nplant: {model: 1/(s+1)}\ncontroller: {model: 2}\ntiming: {rate: 1 kHz, conversion: 10 us, compute: 100 us"+update+"}\n")
		if got := l.Timing.LoopDelay(); got.Cmp(rat(want)) != 0 {
			t.Errorf("%q: %v", update, got)
		}
	}
}

// A loop without any delay is algebraic only when every stage answers at once.
func TestAlgebraicLoops(t *testing.T) {
	for _, c := range []struct {
		plant, sensor, controller, timing string
		refused                           bool
	}{
		{"(s+2)/(s+1)", "1", "2", "", true},
		{"(s+2)/(s+1)", "1", "2", ", compute: 1 us", false},
		{"(s+2)/(s+1)", "1", "2", ", update: next_tick", false},
		{"(s+2)/(s+1)", "1", "2", ", update: {after: 0 s}", true},
		{"(s+2)/(s+1)*exp(-0.001*s)", "1", "2", "", false},
		{"(s+2)/(s+1)", "1/(0.001*s+1)", "2", "", false},
		{"1/(s+1)", "1", "2", "", false},
		{"(s+2)/(s+1)", "1", "{model: 1/(s+1), map: tustin}", "", true},
		{"(s+2)/(s+1)", "1", "{model: 1/(s+1), map: forward}", "", false},
		{"(s+2)/(s+1)", "1", "{model: 1/(s+1), map: hold}", "", false},
		{"(s+2)/(s+1)", "1", "{model: 1/(z-0.5)}", "", false},
		{"(s+2)/(s+1)", "1", "{model: z/(z-0.5)}", "", true},
		{"(s+2)/(s+1)", "1", "-1", ", compute: 1 us", true}, // 1 + L(∞) = 0, continuous column
		{"(s+2)/(s+1)", "1", "-0.9", ", compute: 1 us", false},
		{"(s+2)/(3*s+1)", "(2*s+1)/(s+1)", "-1.5", ", compute: 1 us", true},
	} {
		controller := c.controller
		if !strings.HasPrefix(controller, "{") {
			controller = "{model: " + controller + "}"
		}
		src := "loop: t\nplant: {model: " + c.plant + "}\nsensor: {model: " + c.sensor + "}\ncontroller: " + controller + "\ntiming: {rate: 1 kHz" + c.timing + "}\n"
		_, problems := Parse("t.yaml", []byte(src), nil)
		if refused := len(problems) == 1 && strings.Contains(problems[0].Message, "algebraic"); refused != c.refused || len(problems) > 1 {
			t.Errorf("%+v: %v", c, problems)
		}
	}
}

// Limits in the metric's base unit: 1 Hz = 2π rad/s, 1 rpm = 2π/60 rad/s, 1 rad = 180/π deg.
func TestRequirementUnits(t *testing.T) {
	const head = "loop: t\noutput: rad\neffort: V\nplant: {model: 1/(s+1)}\ncontroller: {model: 2}\ntiming: {rate: 1 kHz}\ninputs: [step: 1, move: {distance: 1, velocity: 1, acceleration: 1, jerk: 1}]\nrequirements:\n"
	for text, want := range map[string]float64{
		"step_error <= 0.02":         0.02,
		"step_error <= 0.02 rad":     0.02,
		"step_error <= 1 deg":        math.Pi / 180,
		"step_error<=-1.5e-3":        -1.5e-3,
		"phase_margin >= 45 deg":     45,
		"phase_margin > 1 rad":       180 / math.Pi,
		"gain_margin >= 8 dB":        8,
		"modulus_margin >= 0.5":      0.5,
		"modulus_margin >= 50 %":     0.5,
		"modulus_margin >= -6 dB":    math.Pow(10, -0.3),
		"delay_margin >= 400 us":     400e-6,
		"crossover >= 40 Hz":         80 * math.Pi,
		"bandwidth < 60 rpm":         2 * math.Pi,
		"bandwidth <= 12 rad/s":      12,
		"overshoot <= 20 %":          20,
		"settling_time <= 1.5 min":   90,
		"peak_effort <= 12 V":        12,
		"velocity_constant >= 5":     5,
		"word_margin >= 2 bits":      2,
		"processor_load < 70 %":      70,
		"rms_tracking_error <= 0.01": 0.01,
		"samples_per_rise >= 6":      6,
		"ripple <= 0.001":            0.001,
		"recovery_time <= 35 ms":     0.035,
		"limit_cycle <= 1e-4 rad":    1e-4,
	} {
		l := mustParse(t, head+"  - "+text+"\n")
		got := l.Requirements[0]
		// Each limit is one correctly rounded exact value against an expression of a few
		// roundings: 4 ulp of relative 2.2e-16.
		if !(math.Abs(got.Limit-want) <= 1e-15*math.Abs(want)) {
			t.Errorf("%s: %v, want %v", text, got.Limit, want)
		}
		if got.Text != text || got.Line != 9 || !strings.HasPrefix(text, got.Name) {
			t.Errorf("%+v", got)
		}
	}
}

func TestInputs(t *testing.T) {
	l, problems := Load("testdata/good/stage.yaml")
	if len(problems) > 0 {
		t.Fatal(problems)
	}
	if in := l.Inputs[0]; in.Kind != "move" || *in.Move != (Move{80, 250, 4000, 1e5}) {
		t.Errorf("move %+v", in.Move)
	}
	if in := l.Inputs[1]; in.File != "stage.csv" || len(in.Times) != 3 || in.Times[1] != 0.5 || in.Values[1] != 1e-3 {
		t.Errorf("file %+v", in)
	}
	if in := l.Inputs[2]; in.Kind != "load_step" || in.Size != 0.5 || in.SizeExact.Cmp(rat("1/2")) != 0 {
		t.Errorf("load step %+v", in)
	}
	// 120 rpm are 2 Hz, 4π rad/s.
	if f, _ := l.Inputs[3].Frequency.Float64(); !(math.Abs(f-4*math.Pi) <= 1e-14) { // 4π is 12.6: an ulp is 1.8e-15
		t.Errorf("sine %+v", l.Inputs[3])
	}
	if l.SettlingBand != 0.01 || l.Actuator.Slew != 5000 {
		t.Errorf("band %v slew %v", l.SettlingBand, l.Actuator.Slew)
	}
	m, problems := l.WithRate(rat("1/4000"))
	if len(problems) > 0 || len(m.Inputs[1].Times) != 3 {
		t.Errorf("at another rate: %v", problems)
	}
}

func TestLoadFaults(t *testing.T) {
	for _, path := range []string{"testdata/none.yaml", "testdata", "/dev/null/x", "/dev/zero"} {
		l, problems := Load(path)
		if l != nil || len(problems) != 1 || problems[0].File != path || !strings.Contains(problems.Error(), "cannot read") {
			t.Errorf("%s: %v", path, problems)
		}
	}
}

// Every metric of the list can be required, and nothing else.
func TestMetrics(t *testing.T) {
	if n := len(Metrics()); n != 28 { // the names of the table in doc.go
		t.Errorf("%d metrics", n)
	}
	for _, m := range Metrics() {
		if got, ok := FindMetric(m.Name); !ok || got.Unit != m.Unit {
			t.Errorf("%s not found", m.Name)
		}
	}
	if _, ok := FindMetric("error"); ok {
		t.Error("found what is not there")
	}
}
