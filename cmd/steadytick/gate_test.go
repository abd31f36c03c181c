package main

import (
	"bytes"
	"context"
	"encoding/json"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"unicode/utf8"

	"steadytick/study"
)

// A stopped gate says so, ends with status 2 and writes nothing.
func TestGateStopped(t *testing.T) {
	dir := t.TempDir()
	loop, out := filepath.Join(dir, "loop.yaml"), filepath.Join(dir, "out")
	if err := os.WriteFile(loop, []byte(starters()[0].text), 0o644); err != nil {
		t.Fatal(err)
	}
	ctx, stop := context.WithCancel(context.Background())
	stop()
	for _, more := range [][]string{nil, {"--against", loop}} {
		var stdout, stderr bytes.Buffer
		args := append([]string{"steadytick", "gate", loop, "--junit", out + ".xml", "--json", out + ".json"}, more...)
		if code := Main(ctx, &stdout, &stderr, args); code != exitRequest {
			t.Errorf("status %d, want %d", code, exitRequest)
		}
		if stdout.Len() > 0 || !strings.Contains(stderr.String(), "stopped; no file was written") {
			t.Errorf("stdout %q, stderr %q", stdout.String(), stderr.String())
		}
	}
	left, err := os.ReadDir(dir)
	if err != nil || len(left) != 1 {
		t.Errorf("the folder holds %v (%v), want the loop file only", left, err)
	}
}

// Every line of a gate fits a terminal of 80 columns, whatever the metric and its figures, and every verdict is a word.
func TestGateFitsTheTerminal(t *testing.T) {
	yes, no := true, false
	unit := study.WrittenUnit{Name: "a very long unit of output", Size: 1}
	line := func(name string, met *bool) study.GateRequirement {
		return study.GateRequirement{Requirement: name, Name: name, Op: ">=", Limit: study.Fig(-1.23456e-105), Value: study.Fig(-1.23456e-105), Met: met,
			Slack: study.Fig(-1.23456e-105), SlackPercent: study.Fig(-1.2345e9), Written: unit,
			Cause: &study.GateCause{Kind: "sampling", Text: strings.Repeat("word ", 40)}}
	}
	result := &study.Gate{Loops: []*study.GateLoop{{File: "loop.yaml", Loop: "invented", PeriodS: study.Fig(1), Requirements: []study.GateRequirement{
		{Requirement: "stable", Name: "stable", Met: &yes}, line("acceleration_constant", nil), line("peak_tracking_error", &no), line("ripple", &yes)}}},
		Against: &study.GateAgainst{File: "old.yaml", Worse: []string{"acceleration_constant"}, Changes: []study.MetricChange{
			{Name: "acceleration_constant", Shown: unit, Before: study.Fig(-1.23456e-105), After: study.Fig(-1.23456e-105), Change: study.Fig(1.2345e-105),
				ChangePercent: study.Fig(123), Verdict: study.ChangeApart, Note: strings.Repeat("word ", 40)}}}}
	var out bytes.Buffer
	if err := printGate(&out, result); err != nil {
		t.Fatal(err)
	}
	for _, l := range strings.Split(out.String(), "\n") {
		if n := utf8.RuneCountInString(l); n > 80 {
			t.Errorf("%d characters: %s", n, l)
		}
	}
	for _, want := range []string{"NOT JUDGED", "NOT MET", "  met", "not compared"} {
		if !strings.Contains(out.String(), want) {
			t.Errorf("no %q in\n%s", want, out.String())
		}
	}
}

// gate and compare give the same figures in their JSON.
func TestGateJSONHasTheFiguresOfCompare(t *testing.T) {
	run := func(want int, args ...string) map[string]any {
		var out, errs bytes.Buffer
		if code := Main(context.Background(), &out, &errs, append([]string{"steadytick"}, args...)); code != want {
			t.Fatalf("status %d: %s", code, errs.String())
		}
		var tree map[string]any
		if err := json.Unmarshal(out.Bytes(), &tree); err != nil {
			t.Fatal(err)
		}
		return tree
	}
	for _, s := range starters() {
		file := filepath.Join(t.TempDir(), s.name+".yaml")
		if err := os.WriteFile(file, []byte(s.text), 0o644); err != nil {
			t.Fatal(err)
		}
		c := run(exitDone, "compare", file, "--json", "-")["requirements"].([]any)
		g := run(exitDone, "gate", file, "--json", "-")["loops"].([]any)[0].(map[string]any)["requirements"].([]any)
		if len(g) != len(c)+1 {
			t.Fatalf("%s: %d requirements, compare has %d", s.name, len(g), len(c))
		}
		for i, x := range c {
			for key, want := range x.(map[string]any) {
				if got := g[i+1].(map[string]any)[key]; got != want {
					t.Errorf("%s: %s is %v, compare has %v", s.name, key, got, want)
				}
			}
		}
	}
}
