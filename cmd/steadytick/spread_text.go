package main

import (
	"fmt"
	"io"
	"math"
	"strings"

	"steadytick/study"
)

// printSpread prints the tables of a study over tolerances.
func printSpread(w io.Writer, r *study.Spread) error {
	t := &table{w: w}
	t.line("%s", r.Loop)
	t.wrapped("  ", fmt.Sprintf("a tick of %s, map %s", seconds(r.PeriodS), r.Map))
	t.wrapped("  ", drawText(r))
	t.line("")
	t.wrapped("", r.Verdict)
	printSpreadSymbols(t, r)
	printSpreadRequirements(t, r)
	printWorstCases(t, r)
	printSpreadMetrics(t, r)
	printSensitivities(t, r)
	printSpreadFailures(t, r)
	t.line("")
	t.wrapped("", study.Caution)
	return t.err
}

// drawText says what was drawn.
func drawText(r *study.Spread) string {
	n := countText(int64(len(r.Symbols)), "symbol")
	switch r.Draw {
	case study.DrawCorners:
		return fmt.Sprintf("%s, %d corners: every combination of both ends of the spreads", n, r.Trials)
	case study.DrawNormal:
		return fmt.Sprintf("%s, %d trials of seed %d, normal: sigma spread/3, cut at the spread", n, r.Trials, r.Seed)
	}
	return fmt.Sprintf("%s, %d trials of seed %d, uniform within the spreads", n, r.Trials, r.Seed)
}

func countText(n int64, noun string) string {
	if n == 1 {
		return "1 " + noun
	}
	return fmt.Sprintf("%d %ss", n, noun)
}

func printSpreadSymbols(t *table, r *study.Spread) {
	t.line("")
	t.line("%s%s%s%s%s", padRight("Symbols drawn", nameCells), padLeft("as written", 12), padLeft("spread", 12), padLeft("low", 13), padLeft("high", 13))
	for _, s := range r.Symbols {
		t.line("%s%s%s%s%s", padRight("  "+cut(s.Name, nameCells-4), nameCells), padLeft(show(study.Fig(s.Nominal)), 12), padLeft(show(study.Fig(s.Percent))+" %", 12),
			padLeft(show(study.Fig(s.Low)), 13), padLeft(show(study.Fig(s.High)), 13))
	}
}

// brief4 is a figure to four digits.
func brief4(f study.Figure) string {
	if !f.OK || f.Value == 0 || math.IsInf(f.Value, 0) {
		return show(f)
	}
	return fmt.Sprintf("%.4g", f.Value)
}

// printSpreadRequirements prints a row a requirement: as written, how many trials meet it, and how far the worst go.
func printSpreadRequirements(t *table, r *study.Spread) {
	t.line("")
	t.line("%s%s%s%s%s%s", padRight("Requirements", nameCells), padLeft("as written", 12), padLeft("met by", 9), padLeft("worst trial", 12), padLeft("worst corner", 13), "")
	for _, q := range r.Requirements {
		if !q.Judged {
			t.line("%s%s", padRight("  "+cut(q.Requirement, nameCells-4), nameCells), padLeft("not judged", 12))
			continue
		}
		asWritten, unit := brief4(q.Nominal), q.Unit
		if q.Name == "stable" {
			asWritten, unit = yesNo(q.Nominal.OK && q.Nominal.Value > 0), ""
		}
		t.line("%s%s%s%s%s %s", padRight("  "+cut(q.Requirement, nameCells-4), nameCells), padLeft(asWritten, 12), padLeft(percentText(q.Percent), 9),
			padLeft(worstFigure(q, q.Worst), 12), padLeft(worstFigure(q, q.Corner), 13), unit)
	}
	y := r.Yield
	t.line("%s%s%s", padRight("  all together", nameCells), padLeft("", 12), padLeft(percentText(y.Percent), 9))
	if y.Interval[0].OK {
		t.line("  95 %% interval of the yield (Wilson): %s to %s", percentText(y.Interval[0].Value), percentText(y.Interval[1].Value))
	}
	if c := r.Corners; c != nil && r.Draw != study.DrawCorners {
		t.line("  corners that meet all: %d of %d", c.Met, c.Of)
	}
	if r.CornersNote != "" {
		t.wrapped("  ", r.CornersNote)
	}
}

// worstFigure is the figure of a worst case; of stability and of an unstable loop the word.
func worstFigure(q study.SpreadRequirement, w *study.WorstCase) string {
	switch {
	case w == nil:
		return "—"
	case !w.Stable:
		return "unstable"
	case q.Name == "stable":
		return "stable"
	}
	return brief4(w.Value)
}

// percentText keeps 99.99 from being rounded to 100.
func percentText(p float64) string {
	text := fmt.Sprintf("%.4g", p)
	if text == "100" && p < 100 {
		text = ">99.99"
	}
	return text + " %"
}

// printWorstCases prints the symbols of the worst trial and the worst corner of each requirement.
func printWorstCases(t *table, r *study.Spread) {
	title := "Worst cases"
	for _, q := range r.Requirements {
		if !q.Judged || q.Name == "stable" && r.Yield.Unstable == 0 || unchanged(r, q) {
			continue
		}
		if title != "" {
			t.line("")
			t.line("%s", title)
			title = ""
		}
		t.line("  %s", q.Requirement)
		if w := q.Worst; w != nil && r.Draw != study.DrawCorners {
			t.wrapped("    ", fmt.Sprintf("trial %d: %s, %s", w.Trial, withUnit(worstFigure(q, w), q, w), symbolsText(w)))
		}
		if w := q.Corner; w != nil {
			t.wrapped("    ", fmt.Sprintf("corner %d: %s, %s", w.Trial, withUnit(worstFigure(q, w), q, w), w.Levels))
		}
	}
}

// unchanged tells whether the figure of a requirement is the same in every trial and every corner, so that none is the worst.
func unchanged(r *study.Spread, q study.SpreadRequirement) bool {
	for _, m := range r.Metrics {
		if m.Name != q.Name || m.Lowest == nil || m.Lowest.Value != m.Top.Value || m.Without > 0 {
			continue
		}
		return m.LowCor == nil || m.LowCor.Value == m.Lowest.Value && m.TopCor.Value == m.Lowest.Value
	}
	return false
}

func withUnit(text string, q study.SpreadRequirement, w *study.WorstCase) string {
	if q.Unit == "" || q.Name == "stable" || !w.Stable {
		return text
	}
	return text + " " + q.Unit
}

// symbolsText is "L 4.98e-05, C 0.000233", to six digits.
func symbolsText(w *study.WorstCase) string {
	parts := make([]string, len(w.Symbols))
	for i, s := range w.Symbols {
		parts[i] = s.Name + " " + show(study.Fig(s.Value))
	}
	return strings.Join(parts, ", ")
}

func printSpreadFailures(t *table, r *study.Spread) {
	if len(r.Failures) == 0 {
		return
	}
	t.line("")
	t.line("Trials that could not be analysed")
	for _, f := range r.Failures {
		t.wrapped("  ", fmt.Sprintf("%d times, first in trial %d: %s", f.Count, f.First, f.Reason))
	}
}
