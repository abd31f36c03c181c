package main

import (
	"context"
	"strings"
	"testing"

	"steadytick/loop"
	"steadytick/study"
)

// Every starter says that its data is invented, is stable in both columns, meets its
// requirements and gives no warning.
func TestStartersAnalyseCleanly(t *testing.T) {
	list := starters()
	if len(list) < 6 {
		t.Fatalf("%d starters, want at least 6", len(list))
	}
	for _, s := range list {
		if head, _, _ := strings.Cut(s.text, "\n\n"); !strings.Contains(strings.ToLower(strings.ReplaceAll(head, "\n# ", " ")), "invented demo data") {
			t.Errorf("%s does not say that its data is invented", s.name)
		}
		l, problems := loop.Parse(s.name, []byte(s.text), nil)
		if len(problems) > 0 {
			t.Errorf("%s: %v", s.name, problems)
			continue
		}
		c, err := study.RunCompare(context.Background(), l, study.Options{Degrade: study.DefaultDegrade(), Curves: true})
		if err != nil {
			t.Errorf("%s: %v", s.name, err)
			continue
		}
		if !c.Continuous.Stable || !c.Sampled.Stable || len(c.Warnings) > 0 {
			t.Errorf("%s: stable %v and %v, warnings %v", s.name, c.Continuous.Stable, c.Sampled.Stable, c.Warnings)
		}
		if len(c.Requirements) == 0 {
			t.Errorf("%s has no requirements", s.name)
		}
		for _, r := range c.Requirements {
			if r.Met == nil || !*r.Met {
				t.Errorf("%s: %s is not met", s.name, r.Name)
			}
		}
	}
}
