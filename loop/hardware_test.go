package loop

import (
	"fmt"
	"math"
	"math/big"
	"reflect"
	"strings"
	"testing"
)

// sides are files that the texts of these tests name.
var sides = map[string]string{
	"ref.csv":   "t_s,r\n0,0\n1,1\n",
	"d.csv":     "t_s,d\n0,0\n0.25,-2\n",
	"ntc.csv":   "output,electric\n0,3.1\n25,2.4\n",
	"ticks.csv": "interval_s\n0.001\n0.0011\n",
	"both.csv":  "interval_s,delay_s\n0.001,0.0002\n0.0011,0\n",
}

func openSide(name string) ([]byte, error) {
	if text, ok := sides[name]; ok {
		return []byte(text), nil
	}
	return nil, fmt.Errorf("no such file")
}

// whole fills the sections that a text does not have.
func whole(text string) string {
	for _, part := range []struct{ key, section string }{
		{"loop", "loop: a"}, {"plant", "plant: {model: 1/(s + 1)}"}, {"controller", "controller: {model: 2}"},
		{"timing", "timing: {rate: 1 kHz, compute: 20 us}"},
	} {
		if !strings.HasPrefix(text, part.key+":") && !strings.Contains(text, "\n"+part.key+":") {
			text += "\n" + part.section
		}
	}
	return text + "\n"
}

// accepted reads a text with what it lacks.
func accepted(t *testing.T, text string) *Loop {
	t.Helper()
	l, problems := Parse("good.yaml", []byte(whole(text)), openSide)
	if len(problems) > 0 {
		t.Fatalf("%s\n%v", text, problems)
	}
	return l
}

// refused reads a text that must give just the problems of want, each at the place of a § in it, in that order.
func refused(t *testing.T, text string, want ...string) {
	t.Helper()
	var places []place
	var src strings.Builder
	line, column := 1, 1
	for _, c := range whole(text) {
		switch c {
		case '§':
			places = append(places, place{line, column})
			continue
		case '\n':
			line, column = line+1, 0
		}
		column++
		src.WriteRune(c)
	}
	l, problems := Parse("bad.yaml", []byte(src.String()), openSide)
	if l != nil || len(problems) != len(want) || len(places) != len(want) {
		t.Errorf("%s\n%d problems, %d marks, want %d:\n%v", text, len(problems), len(places), len(want), problems)
		return
	}
	for i, p := range problems {
		if (place{p.Line, p.Column}) != places[i] || !strings.Contains(p.Message+"; expected "+p.Expected+"; near "+p.Nearest, want[i]) {
			t.Errorf("%s\nwant %v %s\n got\n%v", text, places[i], want[i], problems)
		}
	}
}

func TestFrictionAndBacklash(t *testing.T) {
	second := "plant: {model: 1/(s*(s + 1)), friction: {%s}}"
	for body, want := range map[string]Friction{
		"coulomb: 0.3": {Coulomb: 0.3, Static: 0.3},
		"coulomb: 0.3, static: 0.4, viscous: 1/4": {Coulomb: 0.3, Static: 0.4, Viscous: 0.25},
		"static: 2":                              {Static: 2},
		"viscous: 0.5, motion: position":         {Viscous: 0.5},
		"coulomb: 0, static: 0, viscous: 1e-200": {Viscous: 1e-200},
		"coulomb: 1e200":                         {Coulomb: 1e200, Static: 1e200},
	} {
		if got := accepted(t, fmt.Sprintf(second, body)).Friction; got == nil || *got != want {
			t.Errorf("%s: %+v, want %+v", body, got, want)
		}
	}
	if got := accepted(t, "plant: {model: 4/(s + 1), friction: {coulomb: 1, motion: velocity}}").Friction; !got.Velocity || got.Through != nil {
		t.Errorf("%+v", got)
	}
	// The way of the force: its own gain and order, whatever sign and lag the plant has; a plant with hidden factors has the same degrees.
	for _, plant := range []string{
		"model: -3/(s*(s + 1)*(0.01*s + 1)), friction: {coulomb: 1, through: 1/(s*(s + 2))}",
		"model: 3*(s + 5)/(s*(s + 1)*(s + 5)), dead_time: 1 ms, friction: {coulomb: 1}",
		"model: 3/(s^2 - 4), friction: {viscous: 1, through: {num: [1, 3], den: [2, 0, 0, 0]}}",
		"model: (1 - s)/(s*(s + 1)^3), friction: {viscous: 1, through: \"1/((s + 1)*(s - 1))\"}",
		"model: {A: [[0, 1], [0, -5]], B: [0, 1], C: [1, 0]}, friction: {coulomb: 1}",
		"model: -1/((s + 1)*(1 - s)), friction: {coulomb: 1}", // +1/((s + 1)(s − 1)): the sign is that of large s
	} {
		accepted(t, "plant: {"+plant+"}")
	}
	f := accepted(t, "plant: {model: 3/(s*(s + 1)*(0.01*s + 1)), friction: {coulomb: 1, through: 2/(s*(s + 4))}}").Friction
	if g, k := f.Through.DCGain(); k != 1 || g.Cmp(rat("1/2")) != 0 {
		t.Errorf("through: %v s^-%d", g, k)
	}
	if b := accepted(t, "plant: {model: 1/s, backlash: {gap: 0.002}}").Backlash; *b != (Backlash{Gap: 0.002}) {
		t.Errorf("%+v", b)
	}
	if b := accepted(t, "plant: {model: 1/s, backlash: {gap: 2*pi, at: output}}").Backlash; *b != (Backlash{Gap: 2 * math.Pi, AtOutput: true}) {
		t.Errorf("%+v", b)
	}
	if l := accepted(t, "plant: {model: 1/s, backlash: {gap: 1, at: input}}"); l.Backlash.AtOutput || l.Friction != nil {
		t.Errorf("%+v", l)
	}
}

func TestFrictionRefused(t *testing.T) {
	second := func(body string) string { return "plant: {model: 1/(s*(s + 1)), friction: {" + body + "}}" }
	refused(t, second("coulomb: §-0.3"), "coulomb is negative")
	refused(t, second("coulomb: §NaN, static: §.inf"), "not a number that can be computed with", "not a number that can be computed with")
	refused(t, second("coulomb: 0.3, static: §0.2999"), "static is less than coulomb")
	refused(t, second("coulomb: 1, viscous: §-1"), "viscous is negative")
	refused(t, "effort: N\n"+second("coulomb: 1 §N"), "coulomb carries no unit")
	refused(t, second("coulomb: 1e-200, static: §1e-201"), "outside the range")
	refused(t, "plant: {model: 1/(s*(s + 1)), friction: §{coulomb: 0, viscous: 0}}", "friction without a force")
	refused(t, "plant: {model: 1/(s*(s + 1)), friction: §{}}", "friction without a force")
	refused(t, "plant: {model: 1/(s*(s + 1)), friction: §0.3}", "friction is a single value")
	refused(t, "plant: {model: 1/(s*(s + 1)), §friction: }", `"friction" has no value`)
	refused(t, second("§columb: 0.3"), "near coulomb")
	refused(t, second("coulomb: 1, motion: §speed"), "one of position, velocity")
	refused(t, second("coulomb: 1, through: §3"), "through needs two poles more than zeros with motion: position; this model has as many zeros as poles")
	refused(t, second("coulomb: 1, through: §1/(s + 1)"), "this model has one")
	refused(t, second("coulomb: 1, motion: velocity, through: §1/s^2"), "through needs one pole more than zeros with motion: velocity; this model has two")
	refused(t, second("coulomb: 1, through: §-1/s^2"), "the leading coefficient of through is negative")
	refused(t, second("coulomb: 1, through: §1/(s*(1 - s))"), "the leading coefficient of through is negative")
	refused(t, second("coulomb: 1, through: §exp(-0.1*s)/s^2"), "through has a dead time")
	refused(t, second("coulomb: 1, through: §1/z^2"), "through is in z")
	refused(t, second("coulomb: 1, through: 1/(§q*s^2)"), `"q" is not defined`)
	at := func(plant, body string) string { return "plant: {model: " + plant + ", §friction: {" + body + "}}" }
	refused(t, at("1/(s*(s + 1)*(0.1*s + 1))", "coulomb: 1"),
		"friction at the plant input needs a plant with two poles more than zeros; this one has three; expected give through: the model from the force to the output")
	refused(t, at("1/(s*(s + 1))", "coulomb: 1, motion: velocity"), "one pole more than zeros; this one has two; expected motion: position, if")
	refused(t, at("1/(s + 1)", "coulomb: 1"), "this one has one; expected motion: velocity, if")
	refused(t, at("(s + 2)/(s + 1)", "coulomb: 1"), "this one has as many zeros as poles")
	refused(t, at("-1/(s*(s + 1))", "coulomb: 1"), "goes the other way")
	refused(t, at("(1 - s)/((s + 1)*(s + 2)*(s + 3))", "coulomb: 1"), "goes the other way")
	refused(t, "plant: {model: 1/(s + 1), friction: {coulomb: 1, through: §1/s^2}}", "plant/through is improper: the plant has one pole more than zeros, through two poles more")
	refused(t, "plant: {model: (s + 2)/(s + 1), friction: {coulomb: 1, motion: velocity, through: §1/s}}", "the plant has as many zeros as poles, through one pole more")
	refused(t, "plant: {model: §1/z, friction: {coulomb: §-1}}", "the plant is in z", "coulomb is negative")
	refused(t, "plant: {model: 1/s, backlash: {gap: §0}}", "gap is not above zero")
	refused(t, "plant: {model: 1/s, backlash: {gap: §-1, at: §sensor}}", "gap is not above zero", "one of input, output")
	refused(t, "plant: {model: 1/s, backlash: §{at: input}}", "backlash has no gap")
	refused(t, "plant: {model: 1/s, backlash: {gap: §nan}}", "not a number")
}

func TestActuatorSection(t *testing.T) {
	a := accepted(t, "actuator: {step: 0.01, deadband: 0.2}").Actuator
	if a != (Actuator{Step: 0.01, Deadband: 0.2}) {
		t.Errorf("%+v", a)
	}
	if a = accepted(t, "actuator: {limits: [-1, 1], bits: 8, deadband: 0}").Actuator; a.Bits != 8 || a.Deadband != 0 || a.Step != 0 {
		t.Errorf("%+v", a)
	}
	refused(t, "actuator: {step: §-1, deadband: §-0.1}", "step is not above zero", "deadband is negative")
	refused(t, "actuator: {limits: [-1, 1], bits: 8, §step: 0.1}", "bits and step exclude each other")
	refused(t, "actuator: {deadband: §nan}", "not a number")
	refused(t, "actuator: {§dead_band: 1}", "near deadband")
}

func TestAntiWindupKinds(t *testing.T) {
	in := func(kind string) string {
		return "controller: {model: 2/s, map: tustin, anti_windup: " + kind + "}"
	}
	limits := "\nactuator: {limits: [-3, 5]}"
	for kind, want := range map[string]AntiWindup{
		"none":                  {Kind: "none"},
		"clamp":                 {Kind: "clamp", Clamp: [2]float64{-3, 5}},
		"{clamp: [-10, 4]}":     {Kind: "clamp", Clamp: [2]float64{-10, 4}},
		"{clamp: [1/4, 2*pi]}":  {Kind: "clamp", Clamp: [2]float64{0.25, 2 * math.Pi}},
		"stop":                  {Kind: "stop"},
		"stop_outward":          {Kind: "stop_outward"},
		"{tracking_time: 5 ms}": {Kind: "tracking", TrackingTime: big.NewRat(5, 1000)},
	} {
		if got := accepted(t, in(kind)+limits).Controller.AntiWindup; !reflect.DeepEqual(got, want) {
			t.Errorf("%s: %+v, want %+v", kind, got, want)
		}
		if kind != "none" {
			refused(t, strings.Replace(in(kind), "anti_windup", "§anti_windup", 1), "anti_windup without limits of the actuator")
		}
	}
	accepted(t, in("none"))
	refused(t, in("§stop_outwards")+limits, "near stop_outward")
	refused(t, in("§condition")+limits, "none, clamp, stop, stop_outward, {clamp: [-10, 10]} or {tracking_time: 50 ms}")
	refused(t, in("{clamp: §[2, 1]}")+limits, "clamp are not two rising numbers")
	refused(t, in("{clamp: §[2]}")+limits, "clamp are not two rising numbers")
	refused(t, in("{clamp: §3}")+limits, "clamp is a single value")
	refused(t, in("{clamp: [§NaN, 1]}")+limits, "not a number")
	refused(t, in("{clamp: [1, 2], §tracking_time: 1 s}")+limits, "clamp and tracking_time exclude each other")
	refused(t, in("{tracking_time: §0 s}")+limits, "tracking_time is zero")
	refused(t, in("§{}")+limits, "anti_windup has neither clamp nor tracking_time")
	refused(t, in("§[1, 2]")+limits, "anti_windup is a list here")
	refused(t, in("§{§stop: yes}")+limits, "has neither", "unknown key")
}
