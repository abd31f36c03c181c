package study

import (
	"fmt"
	"strings"

	"steadytick/loop"
)

// InputLabel names an input with its size and unit: "ramp 2 rad/s".
func InputLabel(s Steady, u Units) string {
	size := number(s.Size.Value)
	switch s.Input {
	case "step", "move":
		return fmt.Sprintf("%s %s %s", s.Input, size, u.Output)
	case "ramp":
		return fmt.Sprintf("ramp %s %s", size, PerSecond(u.Output, 1))
	case "parabola":
		return fmt.Sprintf("parabola %s %s", size, PerSecond(u.Output, 2))
	case "sine":
		return fmt.Sprintf("sine %s %s at %s rad/s", size, u.Output, number(s.FrequencyRadS.Value))
	case "load_step":
		return fmt.Sprintf("load step %s %s", size, u.Effort)
	}
	return s.Input
}

// PerSecond is the unit divided by s^n, n = 0, 1 or 2: m/s becomes m/s².
func PerSecond(unit string, n int) string {
	if n == 0 {
		return unit
	}
	power := []string{"", "", "²", "³"}
	if base, ok := strings.CutSuffix(unit, "/s"); ok {
		return base + "/s" + power[n+1]
	}
	return unit + "/s" + power[n]
}

// inputTitle is InputLabel for an input of the loop file; a file is named.
func inputTitle(l *loop.Loop, in loop.Input) string {
	if in.Kind == "file" {
		return "file " + in.File
	}
	return InputLabel(blankSteady(in), Units{l.Output, l.Effort})
}

// blankSteady is the row of an input before anything is computed.
func blankSteady(in loop.Input) Steady {
	s := Steady{Input: in.Kind, Size: Fig(in.Size)}
	switch in.Kind {
	case "sine":
		w, _ := in.Frequency.Float64()
		s.FrequencyRadS = Fig(w)
	case "move":
		s.Size = Fig(in.Move.Distance)
	case "file":
		s.Size = Figure{}
	}
	return s
}
