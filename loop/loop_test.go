package loop

import (
	"math/big"
	"os"
	"testing"
)

func mustParse(t *testing.T, src string) *Loop {
	t.Helper()
	l, problems := Parse("test.yaml", []byte(src), nil)
	if len(problems) > 0 {
		t.Fatalf("unexpected problems:\n%v", problems)
	}
	return l
}

func rat(s string) *big.Rat {
	v, ok := new(big.Rat).SetString(s)
	if !ok {
		panic("not a rational: " + s)
	}
	return v
}

// The figures are those written in the file.
func TestWinch(t *testing.T) {
	src, err := os.ReadFile("testdata/good/winch.yaml")
	if err != nil {
		t.Fatal(err)
	}
	l := mustParse(t, string(src))
	if l.Name != "winch drum angle" || l.Output != "rad" || l.Effort != "V" || l.SettlingBand != 0.02 {
		t.Errorf("names: %q %q %q %v", l.Name, l.Output, l.Effort, l.SettlingBand)
	}
	if len(l.Symbols) != 3 || l.Symbols[0].Value.Cmp(rat("0.018")) != 0 || l.Symbols[0].Spread.Cmp(rat("1/5")) != 0 || l.Symbols[1].Spread != nil {
		t.Errorf("symbols: %+v", l.Symbols)
	}
	// Kt/(s(Js + b)) = (Kt/b)/(s·(1 + s·J/b)).
	p := l.Plant.Ratio
	if p.Gain.Cmp(rat("31/9")) != 0 || p.OriginPoles != 1 || len(p.Num) != 0 || len(p.Den) != 1 || p.Den[0].P[1].Cmp(rat("1/5")) != 0 {
		t.Errorf("plant: %+v", p)
	}
	c := l.Controller
	if len(c.Terms) != 1 || c.Terms[0].Weight.Cmp(rat("1")) != 0 || c.Terms[0].Parts[0].Map.Method != "tustin" || c.Digital {
		t.Errorf("controller: %+v", c)
	}
	if g, k := c.Terms[0].Parts[0].Continuous.DCGain(); g.Cmp(rat("4.2")) != 0 || k != 0 {
		t.Errorf("controller gain %v order %v", g, k)
	}
	if l.Sensor.Bits != 14 || l.Sensor.Range != [2]float64{-6.3, 6.3} || *l.Actuator.Limits != [2]float64{-24, 24} || l.Actuator.Bits != 11 {
		t.Errorf("converters: %+v %+v", l.Sensor, l.Actuator)
	}
	tm := l.Timing
	if tm.Period.Cmp(rat("1/2000")) != 0 || tm.LoopDelay().Cmp(rat("0.000146")) != 0 || tm.Jitter.Cmp(rat("0.000015")) != 0 {
		t.Errorf("timing: %+v", tm)
	}
	if len(l.Inputs) != 3 || l.Inputs[1].Kind != "ramp" || l.Inputs[1].Size != 2 {
		t.Errorf("inputs: %+v", l.Inputs)
	}
	if len(l.Requirements) != 3 || l.Requirements[1] != (Requirement{"phase_margin", ">=", 45, "phase_margin >= 45 deg", 38}) {
		t.Errorf("requirements: %+v", l.Requirements)
	}
}
