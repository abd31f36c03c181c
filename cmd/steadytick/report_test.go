package main

import (
	"bytes"
	"context"
	"encoding/json"
	"html"
	"math"
	"os"
	"path/filepath"
	"regexp"
	"strconv"
	"strings"
	"testing"
)

// unsteady is unstable when sampled, has a sensor with a lag and inputs of every kind: figures
// that are null and infinite stand in its report. Invented data.
const unsteady = `loop: invented, unstable when sampled
plant: {model: 10/(s*(s + 1))}
controller: {model: 1, map: tustin}
sensor: {model: 1/(0.001*s + 1)}
timing: {period: 0.3 s, compute: 10 ms}
inputs: [step: 1, ramp: 1, parabola: 1, load_step: 1, sine: {size: 1, frequency: 1 Hz}, move: {distance: 1, velocity: 1, acceleration: 4, jerk: 40}]
requirements: [phase_margin >= 30 deg]
`

// shownFigure is a figure of the page: path in the JSON result, exact value, scale of the text, text.
var shownFigure = regexp.MustCompile(`data-figure="([^"]*)" data-value="([^"]*)"(?: data-scale="([^"]*)")?>([^<]*)<`)

// atPath is the leaf of a JSON tree at a path such as sampled.steady.0.ripple.
func atPath(tree any, path string) (any, bool) {
	for _, key := range strings.Split(path, ".") {
		switch v := tree.(type) {
		case map[string]any:
			next, ok := v[key]
			if !ok {
				return nil, false
			}
			tree = next
		case []any:
			i, err := strconv.Atoi(key)
			if err != nil || i < 0 || i >= len(v) {
				return nil, false
			}
			tree = v[i]
		default:
			return nil, v == nil // below a null everything is null
		}
	}
	return tree, true
}

// textAgrees tells whether the text of a figure is the JSON value to six digits: half a unit of the sixth is at
// most 5e-6 of it, and a hair for the division by the scale.
func textAgrees(want any, scale, text string) bool {
	n, ok := want.(json.Number)
	if !ok {
		return true // words, null and infinities are told by data-value
	}
	v, err := n.Float64()
	t, err2 := strconv.ParseFloat(strings.ReplaceAll(html.UnescapeString(text), "−", "-"), 64)
	s := 1.0
	if scale != "" {
		s, _ = strconv.ParseFloat(scale, 64)
	}
	return err == nil && err2 == nil && math.Abs(t*s-v) <= 5.0001e-6*math.Abs(v)
}

// The report and the JSON result of one command show the same figures, for every starter and for an
// unstable loop.
func TestReportShowsTheJSON(t *testing.T) {
	texts := map[string]string{"unsteady": unsteady}
	for _, s := range starters() {
		texts[s.name] = s.text
	}
	for name, text := range texts {
		t.Run(name, func(t *testing.T) {
			dir := t.TempDir()
			file := func(ending string) string { return filepath.Join(dir, "loop."+ending) }
			if err := os.WriteFile(file("yaml"), []byte(text), 0o644); err != nil {
				t.Fatal(err)
			}
			var out, errs bytes.Buffer
			args := []string{"steadytick", "compare", file("yaml"), "--json", file("json"), "--html", file("html")}
			if code := Main(context.Background(), &out, &errs, args); code != exitDone {
				t.Fatalf("status %d: %s", code, errs.String())
			}
			compareReport(t, file("json"), file("html"))
		})
	}
}

func compareReport(t *testing.T, jsonFile, htmlFile string) {
	t.Helper()
	text, err := os.ReadFile(jsonFile)
	if err != nil {
		t.Fatal(err)
	}
	page, err := os.ReadFile(htmlFile)
	if err != nil {
		t.Fatal(err)
	}
	d := json.NewDecoder(bytes.NewReader(text))
	d.UseNumber()
	var tree any
	if err := d.Decode(&tree); err != nil {
		t.Fatal(err)
	}
	found := shownFigure.FindAllStringSubmatch(string(page), -1)
	if len(found) < 100 { // the comparison table alone has some 60
		t.Errorf("only %d figures in the page", len(found))
	}
	for _, m := range found {
		want, ok := atPath(tree, m[1])
		have := html.UnescapeString(m[2])
		exact := "null"
		switch v := want.(type) {
		case json.Number:
			exact = v.String()
		case string:
			exact = v
		case bool:
			exact = strconv.FormatBool(v)
		}
		if !ok || have != exact || !textAgrees(want, m[3], m[4]) {
			t.Errorf("%s: the page has %s as %q (scale %q), the JSON result %v", m[1], have, m[4], m[3], want)
		}
	}
}
