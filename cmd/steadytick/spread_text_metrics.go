package main

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"steadytick/study"
)

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
