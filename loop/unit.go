package loop

import (
	"fmt"
	"math/big"
	"strings"
)

// dimension is the kind of a quantity.
type dimension string

const (
	timeDim      dimension = "time"       // base unit s
	frequencyDim dimension = "frequency"  // base unit Hz or rad/s, as the reader asks
	angleDim     dimension = "angle"      // base unit deg
	percentDim   dimension = "percentage" // base unit %
	decibelDim   dimension = "ratio"      // base unit dB
)

// unit is a name with its size: a value in the unit times factor is in the base unit.
// For frequencies the base is Hz.
type unit struct {
	name   string
	dim    dimension
	factor *big.Rat
}

// units in the order in which messages list them.
var units = []unit{
	{"ns", timeDim, power10(-9)}, {"us", timeDim, power10(-6)}, {"ms", timeDim, power10(-3)},
	{"s", timeDim, big.NewRat(1, 1)}, {"min", timeDim, big.NewRat(60, 1)},
	{"Hz", frequencyDim, big.NewRat(1, 1)}, {"kHz", frequencyDim, power10(3)}, {"MHz", frequencyDim, power10(6)},
	{"rad/s", frequencyDim, new(big.Rat).Inv(twoPi)}, {"rpm", frequencyDim, big.NewRat(1, 60)},
	{"deg", angleDim, big.NewRat(1, 1)}, {"rad", angleDim, new(big.Rat).Quo(big.NewRat(180, 1), pi)},
	{"%", percentDim, big.NewRat(1, 1)},
	{"dB", decibelDim, big.NewRat(1, 1)},
}

var twoPi = new(big.Rat).Mul(big.NewRat(2, 1), pi)

// unitNames lists the units of the given dimensions.
func unitNames(dims ...dimension) []string {
	var out []string
	for _, u := range units {
		for _, d := range dims {
			if u.dim == d {
				out = append(out, u.name)
			}
		}
	}
	return out
}

func findUnit(name string) (unit, bool) {
	if name == "µs" || name == "μs" { // MICRO SIGN, GREEK SMALL LETTER MU
		name = "us"
	}
	for _, u := range units {
		if u.name == name {
			return u, true
		}
	}
	return unit{}, false
}

// quantity is a number with the unit as written, "" for none. The places count
// characters from the start of the text.
type quantity struct {
	value          *big.Rat
	unit           string
	unitAt, length int
}

// parseQuantity reads "[-]number [unit]".
func parseQuantity(text string) (quantity, *exprError) {
	trimmed := strings.TrimLeft(text, " \t")
	at := len(text) - len(trimmed)
	sign, body := "", trimmed
	if strings.HasPrefix(body, "-") || strings.HasPrefix(body, "+") {
		sign, body = body[:1], strings.TrimLeft(body[1:], " \t")
	}
	n := scanNumber(body)
	if n == 0 && body == "" {
		return quantity{}, &exprError{len([]rune(text)), "the number is missing", numberForm, ""}
	}
	if n == 0 {
		return quantity{}, &exprError{at, fmt.Sprintf("%s is not a number", quote(strings.TrimSpace(text))), numberForm, ""}
	}
	v, err := exactNumber(body[:n])
	if err != nil {
		return quantity{}, &exprError{at, err.Error(), numberForm, ""}
	}
	if sign == "-" {
		v.Neg(v)
	}
	rest := strings.TrimLeft(body[n:], " \t")
	name := strings.TrimRight(rest, " \t")
	return quantity{v, name, len([]rune(text)) - len([]rune(rest)), len([]rune(text))}, nil
}

// inUnits converts q to the base unit of the dimension dim. example is a value for the
// message, such as "500 us".
func (q quantity) inUnits(dim dimension, example string) (*big.Rat, *exprError) {
	possible := "one of " + strings.Join(unitNames(dim), ", ")
	if names := unitNames(dim); len(names) == 1 {
		possible = names[0]
	}
	if q.unit == "" {
		return nil, &exprError{0, fmt.Sprintf("the unit is missing (%s)", dim),
			fmt.Sprintf("a number with %s, such as %s", possible, example), ""}
	}
	u, ok := findUnit(q.unit)
	if !ok {
		return nil, &exprError{q.unitAt, fmt.Sprintf("%s is not a unit", quote(q.unit)),
			possible, nearestUnit(q.unit, dim)}
	}
	if u.dim != dim {
		return nil, &exprError{q.unitAt, fmt.Sprintf("%s is a unit of %s, not of %s", quote(q.unit), u.dim, dim),
			possible, ""}
	}
	return new(big.Rat).Mul(q.value, u.factor), nil
}

// nearestUnit also knows the spellings that people use in place of the units.
func nearestUnit(name string, dim dimension) string {
	common := map[string]string{"sec": "s", "second": "s", "seconds": "s", "msec": "ms", "millis": "ms",
		"usec": "us", "micros": "us", "nsec": "ns", "minute": "min", "minutes": "min", "hertz": "Hz",
		"rps": "rad/s", "rad/sec": "rad/s", "degree": "deg", "degrees": "deg", "°": "deg", "percent": "%", "db": "dB"}
	if u, ok := common[strings.ToLower(name)]; ok {
		return u
	}
	return nearest(name, unitNames(dim))
}

// Bounds of times in seconds: 1 fs and 30 years. Anything outside is a slip.
var shortest, longest = power10(-15), power10(9)

// checkSeconds says what is wrong with a time in seconds, "" for nothing.
func checkSeconds(t *big.Rat) string {
	switch {
	case t.Sign() < 0:
		return "a negative time"
	case t.Sign() > 0 && t.Cmp(shortest) < 0:
		return "a time below 1e-15 s that is not zero"
	case t.Cmp(longest) > 0:
		return "a time above 1e9 s"
	}
	return ""
}

// Bounds of sample rates in Hz.
var lowestRate, highestRate = power10(-6), power10(9)

// checkRate says what is wrong with a sample rate in Hz, "" for nothing.
func checkRate(f *big.Rat) string {
	switch {
	case f.Sign() <= 0:
		return "a sample rate must be above zero"
	case f.Cmp(lowestRate) < 0:
		return "a sample rate below 1e-6 Hz"
	case f.Cmp(highestRate) > 0:
		return "a sample rate above 1e9 Hz"
	}
	return ""
}

// ParseRate reads a sample rate such as "2 kHz" and returns the period in exact seconds.
func ParseRate(text string) (*big.Rat, error) {
	q, e := parseQuantity(text)
	var f *big.Rat
	if e == nil {
		f, e = q.inUnits(frequencyDim, "2 kHz")
	}
	if e != nil {
		return nil, flagError(text, e)
	}
	if fault := checkRate(f); fault != "" {
		return nil, fmt.Errorf("rate %s: %s", quote(text), fault)
	}
	return f.Inv(f), nil
}

// flagError words an error about a short text that is not in a file.
func flagError(text string, e *exprError) error {
	s := fmt.Sprintf("%s: %s", quote(text), e.message)
	if e.expected != "" {
		s += "; expected " + e.expected
	}
	if e.nearest != "" {
		s += fmt.Sprintf("; did you mean %q?", e.nearest)
	}
	return fmt.Errorf("%s", s)
}
