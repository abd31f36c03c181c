package study

import (
	"context"
	"encoding/json"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"steadytick/loop"
)

// exampleLoops are the example files and the starters.
func exampleLoops(t *testing.T) []*loop.Loop {
	t.Helper()
	var out []*loop.Loop
	for _, pattern := range []string{"../testdata/loops/*.yaml", "../cmd/steadytick/starters/*.yaml"} {
		files, err := filepath.Glob(pattern)
		if err != nil || len(files) < 6 {
			t.Fatalf("%s: %d files, %v", pattern, len(files), err)
		}
		for _, f := range files {
			l, problems := loop.Load(f)
			if len(problems) > 0 {
				t.Fatal(problems)
			}
			out = append(out, l)
		}
	}
	return out
}

// requireEverything asks every metric of a loop to be above and below limits that no figure meets from both sides.
func requireEverything(l *loop.Loop, limits ...float64) {
	l.Requirements = nil
	for _, limit := range limits {
		for _, m := range loop.Metrics() {
			for _, op := range []string{"<=", ">", "<", ">="} {
				l.Requirements = append(l.Requirements, loop.Requirement{Name: m.Name, Op: op, Limit: limit, Text: m.Name + " " + op + " x", Line: 1})
			}
		}
	}
}

// Every requirement of every example is met, missed with a cause, or not judged with a reason; for any figure v
// and limit, exactly two of <=, >, <, >= hold, or fewer where the loop as built is the worse for one and the sampled loop for
// another of them; and no NaN reaches a text or the JSON.
func TestGateOfEveryMetric(t *testing.T) {
	type limited struct {
		name  string
		limit float64
	}
	for _, l := range exampleLoops(t) {
		requireEverything(l, 0, 1e-200, -1e200, 0.3, 40, 1e200)
		g, err := RunGate(context.Background(), l, GateOptions{})
		if err != nil {
			t.Fatal(err)
		}
		met, values := map[limited]int{}, map[limited]map[Figure]bool{}
		for _, r := range g.Requirements[1:] {
			k := limited{r.Name, r.Limit.Value}
			if values[k] == nil {
				values[k] = map[Figure]bool{}
			}
			values[k][r.Value] = true
			switch {
			case r.Met == nil && (r.NotJudged == "" || r.Cause != nil):
				t.Errorf("%s: %s is not judged, %q, %+v", l.File, r.Requirement, r.NotJudged, r.Cause)
			case r.Met != nil && !*r.Met && (r.Cause == nil || r.Cause.Text == "" || r.Cause.Kind == ""):
				t.Errorf("%s: %s is missed without a cause", l.File, r.Requirement)
			case r.Passed():
				met[k]++
			}
			if r.Met != nil && g.Requirements[0].Passed() && r.Op == ">=" && (met[k] > 2 || met[k] < 2 && len(values[k]) == 1) {
				t.Errorf("%s: %s against %g: %d of 4 hold", l.File, r.Name, k.limit, met[k])
			}
		}
		text, err := json.Marshal(g)
		if err != nil || strings.Contains(string(text), "NaN") || strings.Contains(string(text), "%!") {
			t.Errorf("%s: %v\n%s", l.File, err, text)
		}
	}
}

// No example is worse than itself at no tolerance, and each compares with each, or says which units part them.
func TestAgainstEveryExample(t *testing.T) {
	list := exampleLoops(t)
	for _, now := range list {
		g, err := RunGate(context.Background(), now, GateOptions{})
		if err != nil {
			t.Fatal(err)
		}
		for _, before := range list {
			a, err := RunGateAgainst(context.Background(), g, before, Tolerance{}, GateOptions{})
			if (err == nil) != (now.Output == before.Output && now.Effort == before.Effort) {
				t.Errorf("%s against %s: %v", now.File, before.File, err)
			}
			if err != nil {
				continue
			}
			if now == before && len(a.Worse) > 0 {
				t.Errorf("%s is worse than itself: %v", now.File, a.Worse)
			}
			if text, err := json.Marshal(a); err != nil || strings.Contains(string(text), "NaN") {
				t.Errorf("%s against %s: %v", now.File, before.File, err)
			}
		}
	}
}

// A requirement on a file given as reference counts as any other.
func TestGateOfAFileInput(t *testing.T) {
	dir := t.TempDir()
	write := func(name, text string) string {
		path := filepath.Join(dir, name)
		if err := os.WriteFile(path, []byte(text), 0o644); err != nil {
			t.Fatal(err)
		}
		return path
	}
	write("ref.csv", "t_s,r\n0,0\n1,1\n")
	l, problems := loop.Load(write("loop.yaml", oneLoop("10/(s*(s + 1))", "{model: 1}", "rate: 100 Hz, compute: 0 s", "{file: ref.csv}")+"requirements: [peak_tracking_error <= 1e-6]\n"))
	if len(problems) > 0 {
		t.Fatal(problems)
	}
	g, err := RunGate(context.Background(), l, GateOptions{})
	if err != nil {
		t.Fatal(err)
	}
	if c := g.Requirements[1].Cause; c == nil || c.Kind != "design" {
		t.Errorf("%+v", c)
	}
}
