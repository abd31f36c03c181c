package charts

import (
	"encoding/json"
	"math"
	"strconv"
	"strings"

	"steadytick/study"
)

const (
	infinite      = "∞"
	notApplicable = "—"
	minus         = "−"
)

// formatNumber writes v with six significant digits, for people: a real minus sign, e5 for e+05.
func formatNumber(v float64) string {
	switch {
	case math.IsNaN(v):
		return notApplicable
	case math.IsInf(v, 1):
		return infinite
	case math.IsInf(v, -1):
		return minus + infinite
	case v == 0:
		return "0" // and not −0
	}
	s := strconv.FormatFloat(v, 'g', 6, 64)
	if mantissa, exponent, ok := strings.Cut(s, "e"); ok {
		n, _ := strconv.Atoi(exponent) // FormatFloat writes a sign and at least two digits
		s = mantissa + "e" + strconv.Itoa(n)
	}
	return strings.ReplaceAll(s, "-", minus)
}

// figure is one value of the result, ready for the template.
type figure struct {
	Path  string // in the JSON result
	Value string // exact, as the JSON has it
	Scale string // what Text is divided by, "" for 1
	Text  string
}

// unit is a unit of measure with the power of ten of its prefix.
type unit struct {
	name  string
	scale float64 // 1e-3 for ms
	text  string  // of scale, "" for 1
}

var one = unit{scale: 1}

// plain is a unit that takes no prefix.
func plain(name string) unit { return unit{name: name, scale: 1} }

// seconds returns the prefix of the second under which the largest of the values is at least 1.
func seconds(values ...float64) unit {
	largest := 0.0
	for _, v := range values {
		if a := math.Abs(v); a > largest && !math.IsInf(a, 1) {
			largest = a
		}
	}
	for _, u := range []unit{{"s", 1, ""}, {"ms", 1e-3, "1e-3"}, {"µs", 1e-6, "1e-6"}} {
		if largest >= u.scale {
			return u
		}
	}
	if largest == 0 {
		return plain("s")
	}
	return unit{"ns", 1e-9, "1e-9"}
}

// secondsOf is seconds for figures that may be missing.
func secondsOf(figures ...study.Figure) unit {
	var values []float64
	for _, f := range figures {
		if f.OK {
			values = append(values, f.Value)
		}
	}
	return seconds(values...)
}

// exact returns v as the JSON result writes it, without the quotes of a string.
func exact(v any) string {
	b, err := json.Marshal(v)
	if err != nil { // a bare float64 that is not finite
		return "null"
	}
	return strings.Trim(string(b), `"`)
}

// show makes a figure of f at the path.
func show(path string, f study.Figure, u unit) figure {
	out := figure{Path: path, Value: exact(f), Scale: u.text, Text: notApplicable}
	if f.OK && !math.IsNaN(f.Value) {
		out.Text = formatNumber(f.Value / u.scale)
	}
	return out
}

// showFloat is show for a bare number.
func showFloat(path string, v float64, u unit) figure { return show(path, study.Fig(v), u) }

// showBool words a truth value.
func showBool(path string, v bool, yes, no string) figure {
	f := figure{Path: path, Value: exact(v), Text: no}
	if v {
		f.Text = yes
	}
	return f
}
