package study

import (
	"math"
	"strings"
	"unicode"

	"steadytick/loop"
)

// WrittenUnit is a unit in which a figure is shown: the figure in its base unit over Size. The zero value shows
// the base unit.
type WrittenUnit struct {
	Name string
	Size float64
}

// In turns a figure in the base unit into one in the unit.
func (u WrittenUnit) In(f Figure) Figure {
	if u.Size != 0 {
		f.Value /= u.Size
	}
	return f
}

const (
	degree = math.Pi / 180 // in rad
	turn   = 2 * math.Pi   // in rad
)

// unitSizes are the units that a limit may be written in, by the base unit of its metric.
var unitSizes = map[string]map[string]float64{
	"s":     {"ns": 1e-9, "us": 1e-6, "µs": 1e-6, "μs": 1e-6, "ms": 1e-3, "s": 1, "min": 60},
	"rad/s": {"Hz": turn, "kHz": 1e3 * turn, "MHz": 1e6 * turn, "rad/s": 1, "rpm": turn / 60},
	"deg":   {"deg": 1, "rad": 1 / degree},
	"rad":   {"rad": 1, "deg": degree},
	"":      {"%": 0.01}, // modulus_margin
}

// writtenUnit finds the unit in which the file writes the limit of a requirement. A ratio written in dB,
// which is no multiple of the plain number, and the loop's own units stay as they are.
func writtenUnit(r loop.Requirement, base string) WrittenUnit {
	at := strings.Index(r.Text, r.Op)
	if at < 0 {
		return WrittenUnit{Name: base}
	}
	number := strings.TrimSpace(r.Text[at+len(r.Op):])
	name := strings.TrimLeftFunc(number, func(c rune) bool {
		return unicode.IsDigit(c) || unicode.IsSpace(c) || strings.ContainsRune("+-.eE", c)
	})
	if size, ok := unitSizes[base][strings.TrimSpace(name)]; ok {
		return WrittenUnit{strings.TrimSpace(name), size}
	}
	return WrittenUnit{Name: base}
}

// angleFactor is what a figure in one unit of angle is multiplied with to be in another; false where one of them
// is no unit of angle. Equal units need no factor.
func angleFactor(from, to string) (float64, bool) {
	if from == to {
		return 1, true
	}
	if from != "rad" && from != "deg" || to != "rad" && to != "deg" {
		return 0, false
	}
	return unitSizes[to][from], true
}

// withUnit is a figure in a sentence, in the unit of the requirement.
func (r GateRequirement) withUnit(f Figure) string {
	v := r.Written.In(f)
	switch {
	case !f.OK:
		return "none"
	case math.IsInf(v.Value, 1):
		return "inf"
	case math.IsInf(v.Value, -1):
		return "-inf"
	case r.Written.Name == "":
		return number(v.Value)
	}
	return number(v.Value) + " " + r.Written.Name
}

// timeSteps are the units of time that suit a size, longest first.
var timeSteps = []WrittenUnit{{"s", 1}, {"ms", 1e-3}, {"µs", 1e-6}, {"ns", 1e-9}}

// suitedTime is the unit that suits a time of t seconds.
func suitedTime(t float64) WrittenUnit {
	for _, u := range timeSteps {
		if math.Abs(t) >= u.Size {
			return u
		}
	}
	return timeSteps[0]
}

// suitedUnit is a unit for figures in a base unit of which the largest has size v: only times have others.
func suitedUnit(base string, v float64) WrittenUnit {
	if base != "s" {
		return WrittenUnit{Name: base}
	}
	return suitedTime(v)
}

// timeText is a time in a sentence, with a unit that suits it.
func timeText(t float64) string {
	u := suitedTime(t)
	return number(t/u.Size) + " " + u.Name
}
