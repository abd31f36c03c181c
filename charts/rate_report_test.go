package charts

import (
	"bytes"
	"context"
	"encoding/json"
	"fmt"
	"slices"
	"strings"
	"testing"

	"steadytick/loop"
	"steadytick/study"
)

// turntable is an invented loop with everything that rate looks at.
const turntable = `loop: turntable <i>&amp; "angle"
output: rad
effort: A
plant: {model: 0.18/(s*(0.0042*s + 0.015))}
controller: {model: 26*(s/19 + 1)/(s/190 + 1), map: tustin}
timing: {rate: 2 kHz, conversion: 2 us, compute: 60 us}
timer: {clock: 72 MHz, prescaler_bits: 4, reload_bits: 12, postscale: 7}
processor: {cost: 75 us, budget: 40 %}
rate: {from: 20 Hz, to: 8 kHz}
disturbances:
  - sine: {name: "mesh </script><b>", at: sensor, frequency: 310 Hz}
  - sine: {frequency: 700 Hz}
inputs:
  - step: 0.02
  - ramp: 1.5
requirements:
  - phase_margin >= 45 deg
  - ramp_error <= 0.01
  - overshoot <= 30 %
`

func ratesOf(t testing.TB, text string) *study.Rate {
	t.Helper()
	l, problems := loop.Parse("turntable.yaml", []byte(text), nil)
	if len(problems) > 0 {
		t.Fatal(problems)
	}
	r, err := study.RunRate(context.Background(), l, study.RateOptions{AllMaps: true, Curves: true, Points: 60, Version: "test"})
	if err != nil {
		t.Fatal(err)
	}
	return r
}

// contradicting is the turntable with a budget that excludes the phase margin.
func contradicting() string { return strings.Replace(turntable, "budget: 40 %", "budget: 0.6 %", 1) }

func renderRate(t testing.TB, r *study.Rate) string {
	t.Helper()
	var b bytes.Buffer
	if err := RateReport(&b, r); err != nil {
		t.Fatal(err)
	}
	return b.String()
}

// notRateFigure are the leaves that the page words elsewhere.
func notRateFigure(path string, v any) bool {
	switch v.(type) {
	case bool:
		return true // worded: "not judged", "all met", "inside the bandwidth"
	case string:
		return v != "inf" && v != "-inf"
	case nil:
		// An open end, a figure of another kind of row, no pick, no conflict: worded or left out.
		return true
	}
	// Drawn as the ends of the axis, and worded in the method; the windows of other maps are told by their intersection.
	// The timer's wanted rate is that of the pick.
	return path == "pick.timer.wanted_hz" || strings.HasPrefix(path, "searched_hz.") || strings.HasPrefix(path, "maps.") && strings.Contains(path, ".windows.")
}

func TestRateReportHoldsTheResult(t *testing.T) {
	for name, text := range map[string]string{"a window": turntable, "no window": contradicting()} {
		r := ratesOf(t, text)
		page := renderRate(t, r)
		checkFigures(t, figuresIn(page), r, notRateFigure)
		if page != renderRate(t, r) {
			t.Errorf("%s: the same result gives other bytes", name)
		}
		for _, bad := range []string{"</script><b>", "turntable <i>"} {
			if strings.Contains(page, bad) {
				t.Errorf("%s: %q is not escaped", name, bad)
			}
		}
		for _, must := range []string{"licensed practice", "emergency stops", "Common practice", "turntable.yaml"} {
			if !strings.Contains(page, must) {
				t.Errorf("%s: the page does not say %q", name, must)
			}
		}
		if has := strings.Contains(page, "Why no rate works"); has != (r.Conflict != nil) {
			t.Errorf("%s: conflict shown: %v", name, has)
		}
	}
	if err := RateReport(&bytes.Buffer{}, nil); err == nil {
		t.Error("no result is no error")
	}
}

func TestRateReportInTheBrowser(t *testing.T) {
	b := openTab(t)
	for _, c := range []struct {
		name string
		text string
	}{{"a window", turntable}, {"no window", contradicting()}} {
		r := ratesOf(t, c.text)
		page := renderRate(t, r)
		for _, width := range []int64{1280, 390} {
			t.Run(fmt.Sprintf("%s, %d", c.name, width), func(t *testing.T) {
				address := b.open(t, page, width)
				want := []string{"window-chart", "map-chart"}
				for _, o := range r.Curves.OverRate {
					if isMargin(o.Metric) {
						want = append(want, "rate-"+o.Metric)
					}
				}
				for _, o := range r.Curves.OverRate {
					if !isMargin(o.Metric) {
						want = append(want, "rate-"+o.Metric)
					}
				}
				checkDrawn(t, b, append(want, "folding-chart"))
				have := map[string]shown{}
				for path, f := range eval[map[string][3]string](t, b, figuresScript) {
					have[path] = shown{f[0], f[1], f[2]}
				}
				checkFigures(t, have, r, notRateFigure)
				if w := eval[int64](t, b, `document.scrollingElement.scrollWidth`); w > width {
					t.Errorf("the page is %d pixels wide on a screen of %d", w, width)
				}
				if got := eval[string](t, b, `document.querySelector('h1').textContent`); got != r.Loop {
					t.Errorf("heading %q, want %q", got, r.Loop)
				}
				// Words above a chart do not run into each other.
				if over := eval[json.RawMessage](t, b, wordsOverScript); string(over) != "[]" {
					t.Errorf("words on each other at %d pixels: %s", width, over)
				}
				b.checkQuiet(t, address)
			})
		}
	}
}

// wordsOverScript lists pairs of words of a chart's marks that overlap.
const wordsOverScript = `[...document.querySelectorAll('.chart svg')].flatMap(svg => {
  const words = [...svg.querySelectorAll('text')].filter(t => /^(pick|file|slowest) /.test(t.textContent)).map(t => [t.textContent, t.getBoundingClientRect()]);
  return words.flatMap(([a, r], i) => words.slice(i + 1).filter(([b, s]) => r.left < s.right && s.left < r.right && r.top < s.bottom && s.top < r.bottom).map(([b]) => a + ' / ' + b));
})`

// Every curve of the result is drawn, none twice.
func TestRateReportDrawsEveryMap(t *testing.T) {
	r := ratesOf(t, turntable)
	v, err := newRateView(r)
	if err != nil {
		t.Fatal(err)
	}
	var maps, keys []string
	for _, c := range r.Curves.OverRate[0].Curves {
		maps = append(maps, c.Name)
	}
	for _, k := range v.Margins.Keys {
		keys = append(keys, k.Name)
	}
	if len(maps) != 7 || !slices.Equal(maps, keys) {
		t.Errorf("keys %q, curves %q", keys, maps)
	}
}
