package charts

import (
	"bytes"
	"encoding/json"
	"errors"
	"fmt"
	"html"
	"math"
	"reflect"
	"regexp"
	"strconv"
	"strings"
	"testing"

	"steadytick/study"
)

func render(t *testing.T, c *study.Compare) string {
	t.Helper()
	var b bytes.Buffer
	if err := Report(&b, c); err != nil {
		t.Fatal(err)
	}
	return b.String()
}

// shown is a figure as it stands in the page.
type shown struct{ value, scale, text string }

var figurePattern = regexp.MustCompile(`<(?:span|h1|p|code)[^>]*? data-figure="([^"]*)"(?: data-value="([^"]*)")?(?: data-scale="([^"]*)")?>([^<]*)<`)

func figuresIn(page string) map[string]shown {
	out := map[string]shown{}
	for _, m := range figurePattern.FindAllStringSubmatch(page, -1) {
		out[m[1]] = shown{html.UnescapeString(m[2]), m[3], html.UnescapeString(m[4])}
	}
	return out
}

// leaves lists the numbers, truth values, nulls and infinities of the JSON result by path.
func leaves(t *testing.T, c any) map[string]any {
	t.Helper()
	text, err := json.Marshal(c)
	if err != nil {
		t.Fatal(err)
	}
	d := json.NewDecoder(bytes.NewReader(text))
	d.UseNumber()
	var tree any
	if err := d.Decode(&tree); err != nil {
		t.Fatal(err)
	}
	out := map[string]any{}
	var walk func(path string, v any)
	walk = func(path string, v any) {
		switch v := v.(type) {
		case map[string]any:
			for k, w := range v {
				walk(path+"."+k, w)
			}
		case []any:
			for i, w := range v {
				walk(path+"."+strconv.Itoa(i), w)
			}
		default:
			out[strings.TrimPrefix(path, ".")] = v
		}
	}
	walk("", tree)
	return out
}

// notFigures are the leaves that the page words elsewhere: names, units, and what belongs to other kinds
// of input (null there).
func notFigure(path string, v any) bool {
	last := path[strings.LastIndex(path, ".")+1:]
	switch last {
	case "schema", "input", "item", "name", "op", "unit", "output", "effort", "variant", "note", "part", "map", "text", "ran", "effort_at_limit", "size", "frequency_rad_s":
		return true
	case "phase_deg", "end_error", "end_time_s", "peak_tracking_error", "rms_tracking_error", "asymptote":
		return v == nil && strings.Contains(path, ".steady.")
	case "continuous":
		return v == nil
	}
	return false
}

// checkFigures holds the page's figures against the JSON result: every leaf that skip leaves stands there, with its exact
// value, and its text is that value to six significant digits.
func checkFigures(t *testing.T, have map[string]shown, result any, skip func(path string, v any) bool) {
	t.Helper()
	n := 0
	for path, want := range leaves(t, result) {
		if skip(path, want) {
			continue
		}
		n++
		got, ok := have[path]
		if !ok {
			t.Errorf("%s (%v) is not in the page", path, want)
			continue
		}
		if err := sameFigure(got, want); err != nil {
			t.Errorf("%s: %v", path, err)
		}
	}
	if n < 100 {
		t.Errorf("only %d figures compared", n)
	}
}

func sameFigure(got shown, want any) error {
	switch want := want.(type) {
	case json.Number:
		v, err := want.Float64()
		if err != nil {
			return err
		}
		scale := 1.0
		if got.scale != "" {
			if scale, err = strconv.ParseFloat(got.scale, 64); err != nil {
				return err
			}
		}
		text, err := strconv.ParseFloat(strings.ReplaceAll(got.text, "−", "-"), 64)
		if err != nil {
			return err
		}
		if got.value != want.String() {
			return fmt.Errorf("data-value %s, JSON has %s", got.value, want)
		}
		// Half a unit in the sixth digit is at most 5e-6 of the value (first digit 1); a hair for the
		// division by the scale.
		if !(math.Abs(text*scale-v) <= 5.0001e-6*math.Abs(v)) {
			return fmt.Errorf("text %q times %g, JSON has %v", got.text, scale, v)
		}
	case nil:
		if got.value != "null" || got.text != "—" && got.text != "cannot be judged" {
			return fmt.Errorf("%+v, JSON has null", got)
		}
	case bool:
		if got.value != strconv.FormatBool(want) {
			return fmt.Errorf("%+v, JSON has %v", got, want)
		}
	case string:
		switch {
		case want == "inf" && got.value == "inf" && got.text == "∞":
		case want == "-inf" && got.value == "-inf" && got.text == "−∞":
		case want == got.text: // a sentence
		default:
			return fmt.Errorf("%+v, JSON has %q", got, want)
		}
	}
	return nil
}

func TestFiguresEqualJSON(t *testing.T) {
	for name, c := range map[string]*study.Compare{"calm": winch(), "stormy": stormy()} {
		t.Run(name, func(t *testing.T) { checkFigures(t, figuresIn(render(t, c)), c, notFigure) })
	}
}

// The comparison itself must see a wrong figure.
func TestSameFigureSeesDifferences(t *testing.T) {
	for _, bad := range []struct {
		got  shown
		want any
	}{
		{shown{"1.5", "", "1.5001"}, json.Number("1.5")}, {shown{"1.5", "", "—"}, json.Number("1.5")},
		{shown{"1.5", "1e-3", "1.5"}, json.Number("1.5")}, {shown{"1.6", "", "1.5"}, json.Number("1.5")},
		{shown{"null", "", "0"}, nil}, {shown{"inf", "", "—"}, "inf"}, {shown{"false", "", "met"}, true},
	} {
		if sameFigure(bad.got, bad.want) == nil {
			t.Errorf("%+v passes for %v", bad.got, bad.want)
		}
	}
}

func TestReportHasItsParts(t *testing.T) {
	page := render(t, winch())
	for _, id := range append(allIDs(2), "comparison", "requirements", "ledger", "steady", "series", "warnings", "crossings", "loop-file", "method") {
		if strings.Count(page, fmt.Sprintf(`id="%s"`, id)) != 1 {
			t.Errorf("id %s stands %d times in the page", id, strings.Count(page, fmt.Sprintf(`id="%s"`, id)))
		}
	}
	for _, want := range []string{"winch drum angle", "sensor_dynamics", "is no proof of safety", "steadytick 0.1.0", "# invented demo data", "How sampling and delay degrade tracking", "✗ not met"} {
		if !strings.Contains(page, want) {
			t.Errorf("the page does not contain %q", want)
		}
	}
}

func TestReportIsDeterministicAndLeavesItsInput(t *testing.T) {
	c, before := stormy(), stormy()
	first := render(t, c)
	for range 5 { // maps would shuffle
		if render(t, c) != first {
			t.Fatal("two reports of the same result differ")
		}
	}
	if !reflect.DeepEqual(c, before) {
		t.Error("Report changed the result that it was given")
	}
}

// Less than everything must still give a page.
func TestReportOfSparseResults(t *testing.T) {
	digital := winch()
	digital.Continuous = nil
	noCurves := winch()
	noCurves.Curves = nil
	empty := winch()
	empty.Curves = &study.Curves{}
	for name, c := range map[string]*study.Compare{"zero": {}, "digital only": digital, "no curves": noCurves, "empty curves": empty} {
		t.Run(name, func(t *testing.T) {
			page := render(t, c)
			if !strings.Contains(page, "is no proof of safety") || !strings.HasSuffix(strings.TrimSpace(page), "</html>") {
				t.Error("the page is cut short")
			}
		})
	}
	if err := Report(&bytes.Buffer{}, nil); err == nil {
		t.Error("a nil result gives a report")
	}
}

func TestUndrawableCurvesAreRefused(t *testing.T) {
	for name, spoil := range map[string]func(*study.Curves) *study.Curve{
		"NaN":           func(c *study.Curves) *study.Curve { v := &c.Inputs[0].Error[2]; v.Y[7] = math.NaN(); return v },
		"infinite":      func(c *study.Curves) *study.Curve { v := &c.GainDB[0]; v.Y[0] = math.Inf(-1); return v },
		"NaN in x":      func(c *study.Curves) *study.Curve { v := &c.Poles[0]; v.X[1] = math.NaN(); return v },
		"lengths":       func(c *study.Curves) *study.Curve { v := &c.Inputs[1].Effort[0]; v.Y = v.Y[1:]; return v },
		"zero on a log": func(c *study.Curves) *study.Curve { v := &c.PhaseMarginOverRate[0]; v.X[0] = 0; return v },
	} {
		t.Run(name, func(t *testing.T) {
			c := winch()
			bad := spoil(c.Curves)
			var b bytes.Buffer
			err := Report(&b, c)
			var curveErr *CurveError
			if !errors.As(err, &curveErr) || curveErr.Curve != bad.Name {
				t.Fatalf("error %v, want a CurveError that names %q", err, bad.Name)
			}
			if b.Len() > 0 {
				t.Error("something was written all the same")
			}
		})
	}
}

type fullDisk struct{}

func (fullDisk) Write([]byte) (int, error) { return 0, errors.New("disk full") }

func TestWriteErrorComesBack(t *testing.T) {
	if err := Report(fullDisk{}, winch()); err == nil || !strings.Contains(err.Error(), "disk full") {
		t.Errorf("error %v", err)
	}
}

func BenchmarkReport(b *testing.B) {
	c := winch()
	for b.Loop() {
		if err := Report(&bytes.Buffer{}, c); err != nil {
			b.Fatal(err)
		}
	}
}
