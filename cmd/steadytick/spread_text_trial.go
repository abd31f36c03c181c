package main

import (
	"fmt"
	"io"

	"steadytick/study"
)

// printSpreadTrial prints one trial.
func printSpreadTrial(w io.Writer, r *study.SpreadTrial) error {
	t := &table{w: w}
	t.line("%s", r.Loop)
	if r.Levels != "" {
		t.wrapped("  ", fmt.Sprintf("corner %d: %s", r.Trial, r.Levels))
	} else {
		t.line("  trial %d of seed %d, %s", r.Trial, r.Seed, r.Draw)
	}
	t.line("")
	t.line("Symbols")
	for _, s := range r.Symbols {
		t.line("  %s%s  drawn", padRight(cut(s.Name, nameCells), nameCells), padLeft(fmt.Sprintf("%.12g", s.Value), 20))
	}
	for _, s := range r.Computed {
		t.line("  %s%s", padRight(cut(s.Name, nameCells), nameCells), padLeft(fmt.Sprintf("%.12g", s.Value), 20))
	}
	t.line("")
	if r.Failed != "" {
		t.wrapped("", "This trial cannot be analysed: "+r.Failed)
		return t.err
	}
	t.line("Metrics")
	t.line("  %s%s", padRight("stable", nameCells), padLeft(yesNo(r.Stable), 20))
	for _, m := range r.Metrics {
		t.line("  %s%s  %s", padRight(m.Name, nameCells), padLeft(show(m.Value), 20), m.Unit)
	}
	t.line("")
	t.line("Requirements")
	for _, q := range r.Required {
		state := "not judged"
		if q.Met != nil {
			state = map[bool]string{true: "met", false: "not met"}[*q.Met]
		}
		t.line("  %s%s", padRight(cut(q.Requirement, 2*nameCells-9), 2*nameCells-8), state)
	}
	return t.err
}
