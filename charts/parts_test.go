package charts

import (
	"encoding/json"
	"fmt"
	"math"
	"reflect"
	"slices"
	"testing"

	"pgregory.net/rapid"

	"steadytick/study"
)

func TestFormatNumber(t *testing.T) {
	for _, c := range []struct {
		v    float64
		want string
	}{
		{0, "0"}, {math.Copysign(0, -1), "0"}, {1, "1"}, {100000, "100000"}, {1234567, "1.23457e6"}, {-0.5, "−0.5"},
		{1.0 / 3, "0.333333"}, {1e-4, "0.0001"}, {-1.23456789e-5, "−1.23457e−5"}, {6.02214076e23, "6.02214e23"},
		{math.Inf(1), "∞"}, {math.Inf(-1), "−∞"}, {math.NaN(), "—"}, {math.MaxFloat64, "1.79769e308"}, {5e-324, "4.94066e−324"},
	} {
		if got := formatNumber(c.v); got != c.want {
			t.Errorf("%g is shown as %s, want %s", c.v, got, c.want)
		}
	}
}

func TestSecondsPrefix(t *testing.T) {
	for _, c := range []struct {
		values []float64
		want   string
	}{{[]float64{2, 0.001}, "s"}, {[]float64{0.5, math.Inf(1)}, "ms"}, {[]float64{-2.5e-4}, "µs"}, {[]float64{3e-9}, "ns"}, {[]float64{0}, "s"}, {nil, "s"}} {
		if got := seconds(c.values...).name; got != c.want {
			t.Errorf("%v: %s, want %s", c.values, got, c.want)
		}
	}
}

// Thinning keeps real points in their order, the ends, and the highest and lowest of all.
func TestThin(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		n := rapid.IntRange(0, 3000).Draw(t, "n")
		limit := rapid.IntRange(4, 600).Draw(t, "limit")
		seed := rapid.Float64Range(0.1, 50).Draw(t, "seed")
		c := study.Curve{Name: "c", Step: true}
		for i := range n {
			c.X, c.Y = append(c.X, float64(i)), append(c.Y, math.Sin(float64(i)*seed)*math.Exp(-float64(i%97)/40))
		}
		got := thin(c, limit)
		if len(got.X) > max(limit, min(n, limit)) || len(got.X) != len(got.Y) || !got.Step || got.Name != "c" {
			t.Fatalf("%d points of %d, limit %d", len(got.X), n, limit)
		}
		if n == 0 {
			return
		}
		for i, x := range got.X {
			if got.Y[i] != c.Y[int(x)] || i > 0 && x <= got.X[i-1] {
				t.Fatalf("point %d at %g is not the curve's or out of order", i, x)
			}
		}
		if got.X[0] != 0 || got.X[len(got.X)-1] != float64(n-1) {
			t.Fatal("an end is lost")
		}
		if slices.Max(got.Y) != slices.Max(c.Y) || slices.Min(got.Y) != slices.Min(c.Y) {
			t.Fatal("an extreme is lost")
		}
	})
}

func TestLongCurvesAreThinnedInTheOptions(t *testing.T) {
	c := stormy()
	if n := len(c.Curves.Inputs[0].Error[0].X); n != 50_000 {
		t.Fatalf("the fixture has %d points", n)
	}
	cv := &canvas{}
	if _, err := cv.inputs(c); err != nil {
		t.Fatal(err)
	}
	for _, d := range cv.drawings {
		var o struct{ Series []struct{ Data []any } }
		if err := json.Unmarshal(d.Option, &o); err != nil {
			t.Fatal(err)
		}
		for _, s := range o.Series {
			if len(s.Data) > maxPoints {
				t.Errorf("%s draws %d points", d.ID, len(s.Data))
			}
		}
	}
}

// Every axis has a quantity and a unit, in the options of every chart.
func TestAxesAreNamed(t *testing.T) {
	v, err := newView(winch())
	if err != nil {
		t.Fatal(err)
	}
	var all []struct {
		ID     string
		Option struct{ XAxis, YAxis []struct{ Name, Type string } }
	}
	if err := json.Unmarshal([]byte(v.Drawings), &all); err != nil {
		t.Fatal(err)
	}
	if len(all) != len(allIDs(2)) {
		t.Errorf("%d charts, want %d", len(all), len(allIDs(2)))
	}
	for _, d := range all {
		for _, a := range append(d.Option.XAxis, d.Option.YAxis...) {
			var quantity, unit string
			n, _ := fmt.Sscanf(a.Name, "%s", &quantity)
			if i := slices.Index([]byte(a.Name), '('); i >= 0 {
				unit = a.Name[i:]
			}
			if n != 1 || unit == "" && a.Type != "category" {
				t.Errorf("%s: axis %q lacks its quantity or unit", d.ID, a.Name)
			}
		}
	}
}

func TestCurveKeepsItsStyle(t *testing.T) {
	var s styles
	first := s.of("half rate")
	if s.of("other"); !reflect.DeepEqual(s.of("half rate"), first) {
		t.Error("a name changes its style")
	}
	if got := s.ofDots("half rate, at the ticks"); got.Color != first.Color {
		t.Error("dots do not take their curve's colour")
	}
}

func TestRound(t *testing.T) {
	for _, c := range []struct{ low, high, wantLow, wantHigh float64 }{{0.03, 0.97, 0, 1}, {-188, 12, -200, 50}, {5, 5, 4.4, 5.6}} {
		low, high, step := round(c.low, c.high)
		// Exact but for the rounding of a few products of decimal steps.
		if !(math.Abs(low-c.wantLow) <= 1e-12*step+1e-15) || !(math.Abs(high-c.wantHigh) <= 1e-12*math.Abs(high)) {
			t.Errorf("[%g, %g] becomes [%g, %g] by %g", c.low, c.high, low, high, step)
		}
	}
}

func TestMissingFigureFindsItsWarning(t *testing.T) {
	n := notes{{Code: "hidden_mode", Text: "a mode is hidden"}, {Code: "no_crossing", Text: "continuous: phase margin does not apply, |L| never crosses 1"},
		{Code: "unstable", Text: "the sampled loop is unstable"}}
	for _, c := range []struct {
		column, path string
		stable       bool
		want         int
	}{{"continuous", "phase_margin_deg", true, 2}, {"sampled", "phase_margin_deg", true, 0}, {"sampled", "steady.0.ripple", false, 3}, {"continuous", "steady.0.ripple", false, 0}} {
		if got, why := n.explain(c.column, c.path, c.stable); got != c.want || why == "" {
			t.Errorf("%s.%s: warning %d (%s), want %d", c.column, c.path, got, why, c.want)
		}
	}
}

// Poles are crosses, a different one for each column, whether or not the curve says dots.
func TestPolesAreCrosses(t *testing.T) {
	cv := &canvas{}
	if _, err := cv.poles(winch()); err != nil {
		t.Fatal(err)
	}
	var o struct {
		Series []struct{ Name, Symbol, Type string }
	}
	if err := json.Unmarshal(cv.drawings[0].Option, &o); err != nil {
		t.Fatal(err)
	}
	if o.Series[0].Symbol != crossPath["+"] || o.Series[1].Symbol != crossPath["×"] || o.Series[0].Type != "scatter" {
		t.Errorf("%+v", o.Series)
	}
}
