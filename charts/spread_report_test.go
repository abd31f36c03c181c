package charts

import (
	"bytes"
	"context"
	"fmt"
	"strings"
	"testing"

	"steadytick/loop"
	"steadytick/study"
)

// drifting is an invented drive whose parts are far apart: some draws are unstable, some cannot be analysed.
const drifting = `loop: drifting <i>&amp; "drive"
output: rad
effort: V
symbols:
  Kt: {value: 0.3, spread: 95 %}
  J:  {value: 0.004, spread: 80 %}
  a:  {value: 1.1, spread: 11 %}
  d:  sqrt(a - 1)
plant: {model: Kt/(s*(J*s + 0.01 + 0.001*d)), dead_time: 14 ms}
controller: {model: 3.5*(s/19 + 1)/(s/190 + 1), map: tustin}
timing: {rate: 200 Hz, conversion: 2 us, compute: 600 us}
inputs:
  - step: 0.02
  - ramp: 1.5
requirements:
  - phase_margin >= 35 deg
  - ramp_error <= 0.2
  - delay_margin >= 4 ms
  - overshoot <= 40 %
  - word_margin >= 1 bits
`

// calmParts is a loop that all trials of a few meet.
const calmParts = `loop: calm parts
symbols: {k: {value: 10, spread: 10 %}}
plant: {model: k/s}
controller: {model: 1}
timing: {period: 0.1 s}
`

func spreadOf(t testing.TB, text string, o study.SpreadOptions) *study.Spread {
	t.Helper()
	l, problems := loop.Parse("drive.yaml", []byte(text), nil)
	if len(problems) > 0 {
		t.Fatal(problems)
	}
	o.Curves, o.Version = true, "test"
	r, err := study.RunSpread(context.Background(), l, o)
	if err != nil {
		t.Fatal(err)
	}
	return r
}

func renderSpread(t testing.TB, r *study.Spread) string {
	t.Helper()
	var b bytes.Buffer
	if err := SpreadReport(&b, r); err != nil {
		t.Fatal(err)
	}
	return b.String()
}

// spreadCases are the results that the tests look at.
func spreadCases(t testing.TB) map[string]*study.Spread {
	return map[string]*study.Spread{
		"uniform": spreadOf(t, drifting, study.SpreadOptions{Trials: 150, Seed: 18446744073709551615, Required: study.Fig(99)}),
		"corners": spreadOf(t, drifting, study.SpreadOptions{Draw: study.DrawCorners}),
		"calm":    spreadOf(t, calmParts, study.SpreadOptions{Draw: study.DrawNormal, Trials: 40, Seed: 1}),
	}
}

// notSpreadFigure are the leaves that the page words elsewhere.
func notSpreadFigure(path string, v any) bool {
	switch v.(type) {
	case bool:
		return true // worded: "unstable", "not judged", the verdict
	case string:
		return v != "inf" && v != "-inf"
	case nil:
		return true // no limit, no interval, no worst case: left out or worded
	}
	return false
}

func TestSpreadReportHoldsTheResult(t *testing.T) {
	for name, r := range spreadCases(t) {
		page := renderSpread(t, r)
		checkFigures(t, figuresIn(page), r, notSpreadFigure)
		if page != renderSpread(t, r) {
			t.Errorf("%s: the same result gives other bytes", name)
		}
		for _, bad := range []string{"drifting <i>", "ZgotmplZ"} {
			if strings.Contains(page, bad) {
				t.Errorf("%s: %q stands in the page", name, bad)
			}
		}
		for _, must := range []string{"licensed practice", "emergency stops", "drive.yaml", "central differences"} {
			if !strings.Contains(page, must) {
				t.Errorf("%s: the page does not say %q", name, must)
			}
		}
		if has := strings.Contains(page, "Trials that could not be analysed"); has != (r.Yield.Failed > 0) {
			t.Errorf("%s: failures shown: %v", name, has)
		}
		if has := strings.Contains(page, "the share that meets all requirements is no estimate of a yield"); has != (r.Draw == study.DrawCorners) {
			t.Errorf("%s: corners explained: %v", name, has)
		}
	}
	if err := SpreadReport(&bytes.Buffer{}, nil); err == nil {
		t.Error("no result is no error")
	}
	hurt := spreadOf(t, calmParts, study.SpreadOptions{Trials: 10, Seed: 1})
	hurt.Curves.Step[0].X = hurt.Curves.Step[0].X[1:]
	var b bytes.Buffer
	if err := SpreadReport(&b, hurt); err == nil || b.Len() > 0 {
		t.Errorf("a broken curve: %v, %d bytes", err, b.Len())
	}
}

// The cases have what they are for.
func TestSpreadCasesAreWide(t *testing.T) {
	r := spreadCases(t)["uniform"]
	if y := r.Yield; y.Unstable == 0 || y.Failed == 0 || y.Met == 0 || *y.Reached || len(r.Warnings) < 2 {
		t.Errorf("%+v", y)
	}
}

func TestSpreadReportInTheBrowser(t *testing.T) {
	b := openTab(t)
	for name, r := range spreadCases(t) {
		page := renderSpread(t, r)
		for _, width := range []int64{1280, 390} {
			t.Run(fmt.Sprintf("%s, %d", name, width), func(t *testing.T) {
				address := b.open(t, page, width)
				want := []string{"step-response"}
				for _, h := range r.Curves.Histogram {
					want = append(want, "histogram-"+h.Metric)
				}
				checkDrawn(t, b, want)
				have := map[string]shown{}
				for path, f := range eval[map[string][3]string](t, b, figuresScript) {
					have[path] = shown{f[0], f[1], f[2]}
				}
				checkFigures(t, have, r, notSpreadFigure)
				if w := eval[int64](t, b, `document.scrollingElement.scrollWidth`); w > width {
					t.Errorf("the page is %d pixels wide on a screen of %d", w, width)
				}
				if got := eval[string](t, b, `document.querySelector('h1').textContent`); got != r.Loop {
					t.Errorf("heading %q, want %q", got, r.Loop)
				}
				if over := eval[string](t, b, strings.Replace(wordsOverScript, "pick|file|slowest", "as|required", 1)+`.join('; ')`); over != "" {
					t.Errorf("words on each other: %s", over)
				}
				// Details open to the same width.
				if w := eval[int64](t, b, `(() => { document.querySelectorAll('details').forEach(d => d.open = true); return document.scrollingElement.scrollWidth })()`); w > width {
					t.Errorf("with the details open the page is %d pixels wide on a screen of %d", w, width)
				}
				b.checkQuiet(t, address)
			})
		}
	}
}

// A limit within reach of the bars is marked, one far from them is said to lie outside.
func TestSpreadHistogramLimits(t *testing.T) {
	bars := study.SpreadBars{Metric: "phase_margin", Unit: "deg", Nominal: study.Fig(50), Bars: study.Curve{Name: "trials", Step: true, X: []float64{48, 48, 50, 52, 52}, Y: []float64{0, 3, 4, 4, 0}}}
	for limit, inside := range map[float64]bool{47: true, 44.5: true, 43: false, 55.5: true, 90: false} {
		bars.Limits = []study.LimitLine{{Op: ">=", Value: limit}}
		x, note := limitsInView(axis{quantity: "phase margin", unit: plain("deg")}, bars, 48, 52)
		marked := false
		for _, m := range histogramMarks(x, bars) {
			marked = marked || m.at == limit && strings.HasPrefix(m.text, "required ≥ ")
		}
		if marked != inside || (note == "") != inside || *x.min > 48 || *x.max < 52 {
			t.Errorf("a limit of %g: marked %v, note %q, from %g to %g", limit, marked, note, *x.min, *x.max)
		}
	}
}
