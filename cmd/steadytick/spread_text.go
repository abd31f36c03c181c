package main

import (
	"fmt"
	"io"
	"math"
	"slices"
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

const (
	metricCells = 22 // name of a metric
	sensCells   = 20 // the same beside its symbols
)

// printSpreadMetrics prints the distribution of each figure that changes, and the others in a line.
func printSpreadMetrics(t *table, r *study.Spread) {
	t.line("")
	t.line("%s%s%s%s%s%s%s%s", padRight("Metrics", metricCells), padRight("unit", 6), padLeft("mean", 10), padLeft("std dev", 10), padLeft("min", 10), padLeft("median", 10), padLeft("max", 10), "")
	var same, without []string
	for _, m := range r.Metrics {
		switch {
		case m.Histogram == nil && m.Count+m.Infinite == r.Yield.Stable && m.Count*m.Infinite == 0 && m.Count+m.Infinite > 0:
			same = append(same, strings.TrimRight(m.Name+" "+brief4(m.Top.Value)+" "+m.Unit, " "))
			continue
		case m.Count == 0 && m.Infinite == 0:
			without = append(without, m.Name)
			continue
		}
		t.line("%s%s%s%s%s%s%s", padRight("  "+cut(m.Name, metricCells-3), metricCells), padRight(cut(m.Unit, 5), 6), padLeft(brief4(m.Mean), 10), padLeft(brief4(m.Deviation), 10),
			padLeft(brief4(m.Min), 10), padLeft(brief4(m.Quantiles.P50), 10), padLeft(brief4(m.Max), 10))
		if m.Infinite > 0 || m.Without > r.Yield.Unstable+r.Yield.Failed {
			t.line("    infinite in %d trials, missing in %d", m.Infinite, m.Without)
		}
	}
	if len(same) > 0 {
		t.wrapped("  ", "the same in every stable trial: "+strings.Join(same, ", "))
	}
	if len(without) > 0 {
		t.wrapped("  ", "in no trial: "+strings.Join(without, ", "))
	}
	if n := r.Yield.Unstable + r.Yield.Failed; n > 0 {
		t.line("  of the stable trials; %d unstable and %d failed ones have no figures", r.Yield.Unstable, r.Yield.Failed)
	}
}

// printSensitivities prints what each symbol does to the metrics of the requirements; to the margins where there are none.
func printSensitivities(t *table, r *study.Spread) {
	var names []string
	for _, q := range r.Requirements {
		if q.Judged && !slices.Contains(names, q.Name) {
			names = append(names, q.Name)
		}
	}
	if len(names) == 1 {
		names = []string{"phase_margin", "gain_margin", "modulus_margin"}
	}
	t.line("")
	t.line("%s%s%s%s%s", padRight("Sensitivities", sensCells), padRight("symbol", 11), padLeft("with 1 % more", 14), padLeft("over spread", 14), padLeft("rank corr.", 12))
	for _, m := range r.Metrics {
		if !slices.Contains(names, m.Name) {
			continue
		}
		name := m.Name
		for _, s := range byInfluence(m.Sensitivities) {
			if s.OverSpread.Value == 0 && !s.Rank.OK {
				continue
			}
			t.line("%s%s%s%s%s  %s", padRight("  "+cut(name, sensCells-3), sensCells), padRight(cut(s.Symbol, 10), 11), padLeft(signed(s.PerPercent), 14),
				padLeft("±"+brief4(absolute(s.OverSpread)), 14), padLeft(rankText(s.Rank), 12), cut(m.Unit, 5))
			name = ""
		}
		if name != "" {
			t.line("%s%s", padRight("  "+cut(name, sensCells-3), sensCells), "no symbol changes it")
		}
	}
}

// byInfluence puts the symbols that move a metric most first.
func byInfluence(list []study.Sensitivity) []study.Sensitivity {
	out := slices.Clone(list)
	slices.SortStableFunc(out, func(a, b study.Sensitivity) int {
		x, y := math.Abs(a.OverSpread.Value), math.Abs(b.OverSpread.Value)
		switch {
		case x > y:
			return -1
		case x < y:
			return 1
		}
		return 0
	})
	return out
}

func signed(f study.Figure) string {
	if !f.OK || f.Value == 0 {
		return show(f)
	}
	return fmt.Sprintf("%+.4g", f.Value)
}

func absolute(f study.Figure) study.Figure { return study.Figure{Value: math.Abs(f.Value), OK: f.OK} }

func rankText(f study.Figure) string {
	if !f.OK {
		return "—"
	}
	return fmt.Sprintf("%+.2f", f.Value)
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
