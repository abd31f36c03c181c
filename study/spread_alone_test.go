package study

import (
	"context"
	"encoding/json"
	"math"
	"os"
	"path/filepath"
	"reflect"
	"runtime"
	"slices"
	"strings"
	"testing"
)

// A trial alone has the very line that it has among the others, whatever their number.
func TestSpreadTrialAloneIsItsRow(t *testing.T) {
	l := parsed(t, wide)
	for _, draw := range []string{DrawUniform, DrawNormal, DrawCorners} {
		o := SpreadOptions{Draw: draw, Trials: 40, Seed: 9, Simulate: true}
		if draw == DrawCorners {
			o.Trials = 0
		}
		_, text := lines(t, l, o)
		rows := rowsOf(t, text)
		for _, k := range []int64{1, 2, 11, 16} {
			alone := SpreadOptions{Draw: draw, Seed: 9, Simulate: true}
			one, err := RunSpreadTrial(context.Background(), l, alone, k)
			if err != nil {
				t.Fatal(err)
			}
			var got rowJSON
			b, err := json.Marshal(one)
			if err == nil {
				err = json.Unmarshal(b, &got)
			}
			if err != nil {
				t.Fatal(err)
			}
			if !reflect.DeepEqual(got, rows[k-1]) {
				t.Errorf("%s: alone %+v\namong the others %+v", draw, got, rows[k-1])
			}
		}
	}
}

// The loop as written and a trial of the study have the figures that a comparison of the same file gives.
func TestSpreadFiguresAreThoseOfCompare(t *testing.T) {
	paths, err := filepath.Glob("../cmd/steadytick/starters/*.yaml")
	if err != nil || len(paths) < 6 {
		t.Fatal(paths, err)
	}
	for _, path := range paths {
		src, err := os.ReadFile(path)
		if err != nil {
			t.Fatal(err)
		}
		l := parsed(t, string(src))
		r, err := RunSpread(context.Background(), l, SpreadOptions{Trials: 1, Seed: 1, Simulate: true})
		if len(l.Symbols) == 0 {
			if err != ErrNoSpread {
				t.Errorf("%s: %v", path, err)
			}
			continue
		}
		if err != nil {
			t.Fatal(path, err)
		}
		drawn := l
		for pass := range 2 {
			c, err := RunCompare(context.Background(), drawn, Options{})
			if err != nil {
				t.Fatal(err)
			}
			for _, m := range r.Metrics {
				have := m.Nominal
				if pass == 1 {
					if have = (Figure{}); m.Lowest != nil {
						have = m.Lowest.Value
					}
				}
				if want, _ := metric(drawn, c, m.Name); have.OK != want.OK || have.OK && have != want {
					t.Errorf("%s, pass %d: %s is %v, compare has %v", path, pass, m.Name, have, want)
				}
			}
			text := string(src) // the same file with the numbers of trial 1 written into it
			for _, s := range r.Metrics[slices.IndexFunc(r.Metrics, func(m SpreadMetric) bool { return m.Lowest != nil })].Lowest.Symbols {
				text = replaceSymbol(t, text, s.Name, string(appendFigure(nil, Fig(s.Value))))
			}
			drawn = parsed(t, text)
		}
	}
}

// replaceSymbol writes another value into "name: {value: 1, spread: 2 %}".
func replaceSymbol(t *testing.T, text, name, value string) string {
	t.Helper()
	for _, line := range strings.Split(text, "\n") {
		if before, rest, ok := strings.Cut(line, "{value:"); ok && strings.TrimSpace(before) == name+":" {
			_, after, _ := strings.Cut(rest, ",")
			return strings.Replace(text, line, before+"{value: "+value+","+after, 1)
		}
	}
	t.Fatalf("no symbol %s", name)
	return ""
}

// Results are the same on one and on two processors.
func TestSpreadOnOneAndTwoProcessors(t *testing.T) {
	l := parsed(t, wide)
	defer runtime.GOMAXPROCS(runtime.GOMAXPROCS(1))
	a, textA := lines(t, l, SpreadOptions{Trials: 300, Seed: 2, Curves: true})
	runtime.GOMAXPROCS(2)
	b, textB := lines(t, l, SpreadOptions{Trials: 300, Seed: 2, Curves: true})
	if !reflect.DeepEqual(a, b) || !slices.Equal(textA, textB) {
		t.Error("the results differ")
	}
}

// The corners are those that brute force finds: every combination written into the file and compared.
func TestSpreadCornersAgainstBruteForce(t *testing.T) {
	l := parsed(t, wide)
	r := spreadOf(t, l, SpreadOptions{Trials: 3, Seed: 1})
	drawn := spreadOf(t, l, SpreadOptions{Draw: DrawCorners})
	ends := [4][2]string{{"0.018*0.6", "0.018*1.4"}, {"0.09*0.5", "0.09*1.5"}, {"b/J*0.95", "b/J*1.05"}, {"0.31*0.75", "0.31*1.25"}}
	met := int64(0)
	worst := map[string]float64{}
	at := map[string]int64{}
	for k := range int64(16) {
		text := wide
		for i, name := range []string{"J", "b", "w", "Kt"} {
			text = replaceSymbol(t, text, name, ends[i][k>>i&1])
		}
		l := parsed(t, text)
		c, err := RunCompare(context.Background(), l, Options{})
		if err != nil {
			t.Fatal(err)
		}
		all := c.Sampled.Stable
		for _, q := range c.Requirements {
			all = all && *q.Met
			d := slackOf(q.Value.Value, q.Op, q.Limit)
			if !c.Sampled.Stable {
				d = math.Inf(-1)
			}
			if old, ok := worst[q.Name]; !ok || d < old {
				worst[q.Name], at[q.Name] = d, k+1
			}
		}
		if all {
			met++
		}
	}
	if r.Corners.Met != met || r.Corners.Of != 16 || drawn.Yield.Met != met || drawn.Trials != 16 || met == 0 || met == 16 {
		t.Errorf("%d corners meet all; beside the trials %+v, drawn %+v", met, r.Corners, drawn.Yield)
	}
	for i, q := range r.Requirements[1:] {
		if q.Corner.Trial != at[q.Name] || drawn.Requirements[i+1].Worst.Trial != at[q.Name] {
			t.Errorf("%s: the worst corner is %+v, drawn %+v, by brute force %d", q.Requirement, q.Corner, drawn.Requirements[i+1].Worst, at[q.Name])
		}
		// The value of a corner is rounded to 12 digits, b/J among them: 1e-11 of the figure, times a condition of below 100.
		d := slackOf(q.Corner.Value.Value, q.Op, q.Limit.Value)
		if !(math.Abs(d-worst[q.Name]) <= 1e-9*math.Abs(q.Limit.Value)) {
			t.Errorf("%s: slack %g at the worst corner, by brute force %g", q.Requirement, d, worst[q.Name])
		}
	}
	if got := r.Requirements[1].Corner.Levels; got != "J low, b high, w high, Kt low" { // Kv is least with a weak and much damped drive
		t.Errorf("the worst corner of the ramp error is %s", got)
	}
	if drawn.Yield.Interval[0].OK || r.Requirements[1].Interval[0].OK == false {
		t.Error("corners have an interval, or trials have none")
	}
}
