package loop

import (
	"math"
	"math/big"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"time"
)

func FuzzExpression(f *testing.F) {
	for _, s := range []string{
		"4.2*(0.21*s + 1)/(0.011*s + 1)", "Kt / (s*(J*s + b))", "1/2s", "2s(s+1)", "exp(-0.01*s)/(s+1)", "0.1(z - 1)z^-2",
		"sqrt(2)*pi^-3", "((((1))))", "-(-s)^2", "1e300*1e300", "(((2^32)^32)^32)^32", "1/(s-s)", "2^3^2", "a-(b-c)/d*e",
		"s^(1+1)", "1e+", ".", "--+-2s", "(s+1)(s+2)s z", "−3·s²", "",
	} {
		f.Add(s)
	}
	symbols := map[string]*big.Rat{"Kt": rat("0.31"), "J": rat("0.018"), "b": rat("0.09"), "a": rat("-7/3"), "zero": rat("0")}
	f.Fuzz(func(t *testing.T, text string) {
		if len(text) > 2000 {
			return
		}
		start := time.Now()
		e, err := parseExpression(text)
		if err != nil {
			if n := len([]rune(text)); err.at < 0 || err.at > n || err.message == "" {
				t.Fatalf("%q: error at %d of %d: %q", text, err.at, n, err.message)
			}
			return
		}
		printed := e.String()
		again, err := parseExpression(printed)
		if err != nil {
			t.Fatalf("%q prints as %q, which is refused: %v", text, printed, err)
		}
		if !again.same(e) || again.String() != printed {
			t.Fatalf("%q prints as %q, which reads as %q", text, printed, again)
		}
		ev := &evaluator{symbols: symbols}
		if _, errs := ev.names(e); len(errs) == 0 {
			one, errOne := ev.eval(e)
			two, errTwo := ev.eval(again)
			if (errOne == nil) != (errTwo == nil) || errOne == nil && !equalModels(one.model().Ratio, two.model().Ratio) {
				t.Fatalf("%q and %q differ: %v %v", text, printed, errOne, errTwo)
			}
		}
		if took := time.Since(start); took > slowest {
			t.Fatalf("%q took %v", text, took)
		}
	})
}

func FuzzLoopFile(f *testing.F) {
	for _, pattern := range []string{"testdata/good/*.yaml", "testdata/bad/*.yaml"} {
		paths, _ := filepath.Glob(pattern)
		for _, p := range paths {
			src, err := os.ReadFile(p)
			if err != nil {
				f.Fatal(err)
			}
			f.Add(string(src))
		}
	}
	open := func(name string) ([]byte, error) { // what it holds is told by the beginning of its name
		for beginning, text := range map[string]string{"d": sides["d.csv"], "n": sides["ntc.csv"], "b": sides["both.csv"], "ti": sides["ticks.csv"]} {
			if strings.HasPrefix(name, beginning) {
				return []byte(text), nil
			}
		}
		return []byte(sides["ref.csv"]), nil
	}
	f.Fuzz(func(t *testing.T, src string) {
		start := time.Now()
		l, problems := Parse("fuzz.yaml", []byte(src), open)
		if took := time.Since(start); took > slowest {
			t.Fatalf("took %v", took)
		}
		if (l == nil) != (len(problems) > 0) {
			t.Fatalf("loop %v with %d problems", l != nil, len(problems))
		}
		lines := strings.Split(src, "\n")
		for _, p := range problems {
			if p.Message == "" || p.File == "fuzz.yaml" && (p.Line < 0 || p.Line > len(lines) || p.Column < 0) {
				t.Fatalf("problem %+v", p)
			}
		}
		_ = problems.Error()
		if l != nil {
			checkWhole(t, l)
		}
	})
}

// checkWhole looks for what a loop that was accepted must hold.
func checkWhole(t *testing.T, l *Loop) {
	t.Helper()
	if l.Plant.Ratio.IsZero() || !l.Plant.Proper() || l.Sensor.Model.Ratio.IsZero() || len(l.Controller.Terms) == 0 {
		t.Fatalf("models %+v", l)
	}
	for _, term := range l.Controller.Terms {
		if term.Weight == nil || len(term.Parts) == 0 {
			t.Fatalf("term %+v", term)
		}
		for _, p := range term.Parts {
			if (p.Continuous == nil) == (p.Digital == nil) || p.Continuous != nil && p.Map.Method == "" {
				t.Fatalf("part %+v", p)
			}
		}
	}
	tm := l.Timing
	if tm.Period.Sign() <= 0 || tm.LoopDelay().Sign() < 0 || tm.Jitter.Sign() < 0 {
		t.Fatalf("timing %+v", tm)
	}
	checkHardware(t, l)
	again, problems := l.WithRate(tm.Period)
	if len(problems) > 0 || again.Timing.Period.Cmp(tm.Period) != 0 {
		t.Fatalf("its own rate is refused: %v", problems)
	}
	period := new(big.Rat).Mul(tm.Period, big.NewRat(3, 2))
	other, problems := l.WithRate(period)
	agree(t, "3/2 of the period", l, Options{Period: period}, other, problems)
	other, problems = l.WithMap("hold")
	agree(t, "another map", l, Options{Map: "hold"}, other, problems)
}

// checkHardware looks for what the simulation of a loop that was accepted relies on.
func checkHardware(t *testing.T, l *Loop) {
	t.Helper()
	sound := func(what string, good bool) {
		if !good {
			t.Fatalf("%s of %+v", what, l)
		}
	}
	a, s, tm, w := l.Actuator, l.Sensor, l.Timing, l.Controller.AntiWindup
	sound("actuator", a.Step >= 0 && a.Deadband >= 0 && (a.Step == 0 || a.Bits == 0) && !math.IsInf(a.Step+a.Deadband, 0))
	sound("sensor", s.Step >= 0 && s.Noise >= 0 && (s.Step == 0 || s.Bits == 0) && !math.IsInf(s.Step+s.Noise+s.Offset, 0) && !math.IsNaN(s.Offset))
	if e := s.Encoder; e != nil {
		sound("encoder", s.Bits == 0 && s.Step == 0 && s.Curve == nil && e.Count() > 0 && e.Clock >= 0 && (e.Velocity || !e.ByTime) && (e.ByTime || e.Clock == 0))
	}
	if c := s.Curve; c != nil {
		sound("curve", len(c.Output) >= 2 && len(c.Output) == len(c.Electric))
		for i := 1; i < len(c.Output); i++ {
			slope := (c.Electric[i] - c.Electric[i-1]) / (c.Output[i] - c.Output[i-1])
			sound("curve", c.Output[i] > c.Output[i-1] && slope != 0 && !math.IsInf(slope, 0) && (slope > 0) == (c.Electric[1] > c.Electric[0]))
		}
	}
	if f := l.Friction; f != nil {
		through := l.Plant
		if f.Through != nil {
			through = *f.Through
		}
		lead, _ := leading(through.Ratio).Float64()
		sound("friction", f.Coulomb >= 0 && f.Static >= f.Coulomb && f.Viscous >= 0 && f.Static+f.Viscous > 0 && lead >= 0 &&
			(through.RelativeDegree() == 1) == f.Velocity && l.Plant.RelativeDegree() >= through.RelativeDegree())
	}
	sound("backlash", l.Backlash == nil || l.Backlash.Gap > 0)
	sound("anti-windup", w.Kind == "none" || a.Limits != nil)
	sound("clamp", (w.Kind == "clamp") == (w.Clamp[0] < w.Clamp[1]))
	for _, c := range []Chance{tm.Missed, tm.Stale} {
		sound("chance", c.Probability >= 0 && c.Probability < 1 && (c.Every == 0 || c.Every >= 2 && c.Probability == 0))
	}
	if m := tm.Measured; m != nil {
		sound("measured", tm.Jitter.Sign() == 0 && len(m.Interval) > 0 && (m.Delay == nil || len(m.Delay) == len(m.Interval)))
	}
	for _, d := range l.Disturbances {
		sound("disturbance", (d.Frequency != nil) == (d.Kind == "sine") && (d.Time != nil) == (d.Kind == "step") && (len(d.Times) > 1) == (d.Kind == "file") &&
			(d.Kind != "noise" || d.Size > 0) && (d.Kind != "step" || d.Size != 0))
	}
}
