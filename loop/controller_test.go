package loop

import (
	"math/big"
	"strings"
	"testing"
)

func withController(body string) string {
	return "loop: controllers\nsymbols: {k: 3}\nplant: {model: 1/(s+1)}\nactuator: {limits: [-1, 1]}\n" +
		"controller:\n" + body + "timing: {rate: 100 Hz}\n"
}

// paths are the transfer functions from r and from −m to u, at a point s.
func paths(t *testing.T, c Controller, s *big.Rat) (fromR, fromM *big.Rat) {
	t.Helper()
	fromR, fromM = new(big.Rat), new(big.Rat)
	for _, term := range c.Terms {
		p := big.NewRat(1, 1)
		for _, part := range term.Parts {
			v, ok := part.Continuous.Ratio.Eval(s)
			if !ok {
				t.Fatal("evaluated at a pole")
			}
			p.Mul(p, v)
		}
		fromM.Add(fromM, p)
		fromR.Add(fromR, p.Mul(p, term.Weight))
	}
	return fromR, fromM
}

// The forms of a PID against their formulas (textbook forms; the filter Td·s/(Tf·s + 1)
// of the series form is (Td·s + 1)/(Tf·s + 1)), evaluated at s = 7/3 in rational numbers.
func TestPIDForms(t *testing.T) {
	s := "(7/3)"
	i, d := "(1/"+s+")", s
	for name, c := range map[string]struct{ body, fromR, fromM string }{
		"parallel": {"form: parallel, Kp: 2, Ki: 5, Kd: 0.5, filter: 20 ms, map: tustin",
			"2 + 5*I + 0.5*D/(0.02*D+1)", "2 + 5*I + 0.5*D/(0.02*D+1)"},
		"parallel, ratio": {"form: parallel, Kp: 2, Kd: 0.5, filter_ratio: 10, map: tustin",
			"2 + 0.5*D/(0.025*D+1)", "2 + 0.5*D/(0.025*D+1)"},
		"parallel, symbols": {"form: parallel, Kp: -2*k, Ki: -k, map: tustin", "-6 - 3*I", "-6 - 3*I"},
		"integral alone":    {"form: parallel, Ki: 4, map: backward", "4*I", "4*I"},
		"stored with period": {"form: parallel, Kp: 2, Ki: 0.05, Kd: 50, stored: with_period, filter: 20 ms, map: tustin",
			"2 + 5*I + 0.5*D/(0.02*D+1)", "2 + 5*I + 0.5*D/(0.02*D+1)"}, // Ki = 0.05/T, Kd = 50·T, T = 0.01 s
		"weights": {"form: parallel, Kp: 2, Ki: 5, Kd: 0.5, filter: 20 ms, map: tustin, setpoint_weight: 0.7, derivative_on: measurement",
			"2*0.7 + 5*I", "2 + 5*I + 0.5*D/(0.02*D+1)"},
		"standard": {"form: standard, K: 2, Ti: 0.4 s, Td: 250 ms, filter: 20 ms, map: tustin, setpoint_weight: 0.5",
			"2*(0.5 + I/0.4 + 0.25*D/(0.02*D+1))", "2*(1 + I/0.4 + 0.25*D/(0.02*D+1))"},
		"series": {"form: series, Kp: 2, Ti: 0.4 s, Td: 250 ms, filter_ratio: 10, map: tustin",
			"2*(1 + I/0.4)*(0.25*D+1)/(0.025*D+1)", "2*(1 + I/0.4)*(0.25*D+1)/(0.025*D+1)"},
		"series, PI": {"form: series, Kp: 2, Ti: 0.4 s, map: tustin", "2*(1 + I/0.4)", "2*(1 + I/0.4)"},
		"series, PD": {"form: series, Kp: 2, Td: 0.4 s, filter: 10 ms, map: tustin",
			"2*(0.4*D+1)/(0.01*D+1)", "2*(0.4*D+1)/(0.01*D+1)"},
		"series, on measurement": {"form: series, Kp: 2, Ti: 0.4 s, Td: 250 ms, filter: 25 ms, map: tustin, derivative_on: measurement",
			"2*(1 + I/0.4)", "2*(1 + I/0.4)*(0.25*D+1)/(0.025*D+1)"},
		"series, weight": {"form: series, Kp: 2, Ti: 0.4 s, Td: 250 ms, filter: 25 ms, map: tustin, setpoint_weight: 0.6",
			"2*(0.6 + I/0.4)*(0.25*D+1)/(0.025*D+1)", "2*(1 + I/0.4)*(0.25*D+1)/(0.025*D+1)"},
		"series, both": {"form: series, Kp: 2, Ti: 0.4 s, Td: 250 ms, filter: 25 ms, map: tustin, setpoint_weight: 0.6, derivative_on: measurement",
			"2*(0.6 + I/0.4)", "2*(1 + I/0.4)*(0.25*D+1)/(0.025*D+1)"},
		"series, Td = Tf": {"form: series, Kp: 2, Td: 25 ms, filter: 25 ms, map: tustin, derivative_on: measurement", "2", "2"},
	} {
		l := mustParse(t, withController("  pid: {"+c.body+"}\n"))
		fromR, fromM := paths(t, l.Controller, rat("7/3"))
		fill := strings.NewReplacer("I", i, "D", d)
		wantR, wantM := evalText(t, fill.Replace(c.fromR), nil).c, evalText(t, fill.Replace(c.fromM), nil).c
		if fromR.Cmp(wantR) != 0 || fromM.Cmp(wantM) != 0 {
			t.Errorf("%s: from r %v want %v, from m %v want %v", name, fromR, wantR, fromM, wantM)
		}
	}
}

func TestMapsPerTerm(t *testing.T) {
	l := mustParse(t, withController("  pid: {form: parallel, Kp: 2, Ki: 5, Kd: 1, filter: 20 ms, map: {i: forward, d: prewarped}, at: 10 Hz}\n"))
	got := map[string]string{}
	for _, term := range l.Controller.Terms {
		got[term.Name] = term.Parts[0].Map.Method
		if term.Name == "d" && term.Parts[0].Map.At.Cmp(new(big.Rat).Mul(big.NewRat(20, 1), pi)) != 0 {
			t.Errorf("at is %v rad/s, want 20 pi", term.Parts[0].Map.At)
		}
	}
	if got["i"] != "forward" || got["d"] != "prewarped" || got["p"] != "tustin" {
		t.Errorf("maps %v", got)
	}
}

func TestWindupAndSideParts(t *testing.T) {
	l := mustParse(t, withController("  model: 2/s\n  map: tustin\n  anti_windup: {tracking_time: 50 ms}\n"+
		"  feedforward: {model: 0.3}\n  prefilter: {model: 1/(0.1*s+1), map: matched}\n"))
	c := l.Controller
	if c.AntiWindup.Kind != "tracking" || c.AntiWindup.TrackingTime.Cmp(rat("0.05")) != 0 {
		t.Errorf("anti-windup %+v", c.AntiWindup)
	}
	if c.Feedforward == nil || c.Prefilter == nil || c.Prefilter.Map.Method != "matched" || c.Digital {
		t.Errorf("parts %+v", c)
	}
	if c = mustParse(t, withController("  model: 2\n")).Controller; c.AntiWindup.Kind != "none" || c.Feedforward != nil {
		t.Errorf("defaults %+v", c)
	}
}

// A z model: 0.1(z − 1)z⁻² is 0.1(z − 1)/z².
func TestDigital(t *testing.T) {
	l := mustParse(t, withController("  model: 0.1(z - 1)z^-2\n  rate: 6000 rpm\n"))
	d := l.Controller.Terms[0].Parts[0].Digital
	if d == nil || !l.Controller.Digital {
		t.Fatal("not digital")
	}
	if v, _ := d.Eval(rat("3")); v.Cmp(rat("2/90")) != 0 {
		t.Errorf("at z = 3 it is %v", v)
	}
	if _, problems := l.WithRate(rat("1/100")); len(problems) > 0 {
		t.Errorf("its own rate: %v", problems)
	}
	if _, problems := l.WithRate(rat("1/200")); len(problems) != 1 || !strings.Contains(problems[0].Message, "5 ms") {
		t.Errorf("another rate: %v", problems)
	}
	if _, problems := l.WithMap("tustin"); len(problems) != 1 {
		t.Errorf("a map: %v", problems)
	}
}

func TestWithRate(t *testing.T) {
	l := mustParse(t, withController("  pid: {form: parallel, Ki: 0.05, stored: with_period, map: tustin}\n"))
	p, err := ParseRate("200 Hz")
	if err != nil {
		t.Fatal(err)
	}
	m, problems := l.WithRate(p)
	if len(problems) > 0 {
		t.Fatal(problems)
	}
	// The stored number stays: Ki = 0.05/T.
	before, _ := paths(t, l.Controller, rat("1"))
	after, _ := paths(t, m.Controller, rat("1"))
	if m.Timing.Period.Cmp(rat("1/200")) != 0 || before.Cmp(rat("5")) != 0 || after.Cmp(rat("10")) != 0 {
		t.Errorf("period %v, Ki %v and %v", m.Timing.Period, before, after)
	}
	if m, problems = m.WithMap("prewarped at 30 Hz"); len(problems) > 0 {
		t.Fatal(problems)
	}
	if mp := m.Controller.Terms[0].Parts[0].Map; mp.Method != "prewarped" || m.Timing.Period.Cmp(rat("1/200")) != 0 {
		t.Errorf("map %v at period %v", mp, m.Timing.Period)
	}
	for _, text := range []string{"tustn", "prewarped", "prewarped at 30", "prewarped at 500 Hz", "prewarped at -1 Hz", "tustin at 3 Hz", " "} {
		if _, problems := l.WithMap(text); len(problems) == 0 {
			t.Errorf("--map %q is taken", text)
		}
	}
	for _, p := range []string{"0", "-1", "1e-12", "1e9"} {
		if _, problems := l.WithRate(rat(p)); len(problems) == 0 {
			t.Errorf("a period of %s s is taken", p)
		}
	}
	slow := mustParse(t, strings.Replace(withController("  model: 2\n"), "rate: 100 Hz", "rate: 100 Hz, compute: 6 ms", 1))
	if _, problems := slow.WithRate(p); len(problems) != 1 || !strings.Contains(problems[0].Message, "longer than the tick") {
		t.Errorf("6 ms of compute in 5 ms: %v", problems)
	}
}

func TestParseRate(t *testing.T) {
	for text, want := range map[string]string{"2 kHz": "1/2000", "44.1kHz": "1/44100", "600 rpm": "1/10", "1 MHz": "1/1000000"} {
		if p, err := ParseRate(text); err != nil || p.Cmp(rat(want)) != 0 {
			t.Errorf("%s: %v %v", text, p, err)
		}
	}
	for text, part := range map[string]string{"2": "unit is missing", "2 khz": `did you mean "kHz"`, "5 ms": "unit of time",
		"-2 Hz": "above zero", "": "missing", "2e9 Hz": "1e9", "NaN Hz": "not a number"} {
		if _, err := ParseRate(text); err == nil || !strings.Contains(err.Error(), part) {
			t.Errorf("%q: %v", text, err)
		}
	}
}
