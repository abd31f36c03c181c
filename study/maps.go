package study

import (
	"fmt"
	"math/big"

	"steadytick/discretize"
	"steadytick/loop"
)

// MapNote says how one continuous part of the controller became digital, and what that keeps.
type MapNote struct {
	Part string `json:"part"` // "model", "p", "i", "d", "prefilter", "feedforward"
	Map  string `json:"map"`
	Text string `json:"text"`
}

// mapNotes lists the parts that a map made digital. A constant needs none.
func mapNotes(l *loop.Loop) []MapNote {
	out := []MapNote{}
	add := func(name string, p loop.Part) {
		if p.Continuous == nil || p.Continuous.Ratio.Order() == 0 && len(p.Continuous.Ratio.Num) == 0 {
			return
		}
		out = append(out, MapNote{name, p.Map.Method, mapText(p)})
	}
	for _, t := range l.Controller.Terms {
		for _, p := range t.Parts {
			add(t.Name, p)
		}
	}
	if p := l.Controller.Prefilter; p != nil {
		add("prefilter", *p)
	}
	if p := l.Controller.Feedforward; p != nil {
		add("feedforward", *p)
	}
	return out
}

// mapText is what the map of a part keeps and what it does to the rest.
func mapText(p loop.Part) string {
	switch p.Map.Method {
	case "tustin":
		return "trapezoidal rule: keeps stability and the gain at rest; frequencies near half the rate are pressed together"
	case "prewarped":
		w, _ := new(big.Rat).Set(p.Map.At).Float64()
		return fmt.Sprintf("trapezoidal rule made exact at %s rad/s: keeps stability; gains of integrators change with the stretch", number(w))
	case "matched":
		kept := "gain at rest"
		if n := discretize.MatchedGain(*p.Continuous); n != 0 {
			kept = fmt.Sprintf("factor of s^%d at rest", n)
		}
		return "poles and finite zeros by z = e^(sT); of the zeros at infinity one stays, the others go to z = −1; keeps the " + kept
	case "forward":
		return "forward difference: keeps the gain at rest, not stability"
	case "backward":
		return "backward difference: keeps stability and the gain at rest; adds damping and lag"
	case "hold":
		return "equivalent under a zero-order hold: keeps samples of the step response and poles; adds half a tick of lag"
	case "triangle":
		return "equivalent under a first-order hold: keeps samples of the ramp response and poles"
	}
	return ""
}
