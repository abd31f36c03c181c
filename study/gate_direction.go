package study

import (
	"fmt"
	"math"
	"strconv"
	"strings"

	"steadytick/loop"
)

// Worse tells in which direction a metric gets worse.
type Worse string

const (
	// WorseUp: a higher figure is worse.
	WorseUp Worse = "higher"
	// WorseDown: a lower figure is worse.
	WorseDown Worse = "lower"
	// Neutral: neither is; a change is shown and not judged.
	Neutral Worse = ""
)

// worseWhen is the direction in which each metric gets worse. Faster is not better without a reason: a loop that
// loses damping rises sooner. So crossover, bandwidth, rise_time and samples_per_rise are neutral, unless an op in the
// file's requirements says otherwise.
var worseWhen = map[string]Worse{
	"step_error":            WorseUp,
	"ramp_error":            WorseUp,
	"parabola_error":        WorseUp,
	"load_error":            WorseUp,
	"position_constant":     WorseDown,
	"velocity_constant":     WorseDown,
	"acceleration_constant": WorseDown,
	"phase_margin":          WorseDown,
	"gain_margin":           WorseDown,
	"modulus_margin":        WorseDown,
	"delay_margin":          WorseDown,
	"jitter_margin":         WorseDown,
	"crossover":             Neutral,
	"bandwidth":             Neutral,
	"overshoot":             WorseUp,
	"rise_time":             Neutral,
	"settling_time":         WorseUp,
	"recovery_time":         WorseUp,
	"peak_effort":           WorseUp,
	"ripple":                WorseUp,
	"peak_tracking_error":   WorseUp,
	"rms_tracking_error":    WorseUp,
	"effort_noise":          WorseUp,
	"stuck_error":           WorseUp,
	"limit_cycle":           WorseUp,
	"word_margin":           WorseDown,
	"processor_load":        WorseUp,
	"samples_per_rise":      Neutral,
}

// directionOf is the direction of a metric; the ops of the file's requirements on it go before the table, and
// two that bound it from both sides make it neutral.
func directionOf(name string, requirements []loop.Requirement) Worse {
	up, down := false, false
	for _, r := range requirements {
		if r.Name == name {
			below := r.Op == "<=" || r.Op == "<"
			up, down = up || below, down || !below
		}
	}
	switch {
	case up && down:
		return Neutral
	case up:
		return WorseUp
	case down:
		return WorseDown
	}
	return worseWhen[name]
}

// DefaultTolerance is how much worse a metric may get, in per cent of its value before: above what the third digit
// of a figure shows, below what a change of the design does (a choice, not a standard).
const DefaultTolerance = 1

// largestTolerance bounds what ParseTolerance takes, in per cent.
const largestTolerance = 1e6

// Tolerance is how much worse metrics may get, in per cent of the value before.
type Tolerance struct {
	Percent float64            // of every metric that Of does not name
	Of      map[string]float64 // by metric name
}

// of is the tolerance of a metric.
func (t Tolerance) of(name string) float64 {
	if p, ok := t.Of[name]; ok {
		return p
	}
	return t.Percent
}

// ParseTolerance reads tolerances such as "1 %", for all metrics, and "peak_effort=20 %", for one.
func ParseTolerance(flags []string) (Tolerance, error) {
	t := Tolerance{Percent: DefaultTolerance, Of: map[string]float64{}}
	all := false
	for _, f := range flags {
		name, number, one := strings.Cut(f, "=")
		if !one {
			name, number = "", f
		}
		name = strings.TrimSpace(name)
		if _, known := loop.FindMetric(name); one && !known {
			return t, fmt.Errorf("%q: %q is not the name of a metric", f, name)
		}
		p, err := percentage(number)
		if err != nil {
			return t, fmt.Errorf("%q: %w", f, err)
		}
		_, twice := t.Of[name]
		if one && twice || !one && all {
			return t, fmt.Errorf("%q: a second tolerance for the same", f)
		}
		if one {
			t.Of[name] = p
			continue
		}
		t.Percent, all = p, true
	}
	return t, nil
}

// percentage reads "1 %".
func percentage(text string) (float64, error) {
	number, ok := strings.CutSuffix(strings.TrimSpace(text), "%")
	if !ok {
		return 0, fmt.Errorf("the unit is missing; expected a percentage such as \"1 %%\"")
	}
	p, err := strconv.ParseFloat(strings.TrimSpace(number), 64)
	if err != nil || math.IsNaN(p) {
		return 0, fmt.Errorf("%q is not a number; expected a percentage such as \"1 %%\"", strings.TrimSpace(number))
	}
	if !(p >= 0 && p <= largestTolerance) {
		return 0, fmt.Errorf("expected 0 %% to %g %%", float64(largestTolerance))
	}
	return p, nil
}
