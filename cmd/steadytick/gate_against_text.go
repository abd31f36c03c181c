package main

import (
	"fmt"
	"strings"

	"steadytick/study"
)

// printAgainst prints every metric before and after.
func printAgainst(t *table, result *study.Gate) {
	a := result.Against
	if len(a.Problems) > 0 {
		t.line("against %s: NOT COMPARED, %s (see stderr)", a.File, count(len(a.Problems), "problem"))
		return
	}
	compared := 0
	for _, c := range a.Changes {
		if c.Verdict != study.ChangeApart && c.Verdict != study.ChangeNew {
			compared++
		}
	}
	if len(a.Worse) == 0 {
		t.line("against %s: nothing worse, %s compared", a.File, count(compared, "metric"))
	} else {
		t.line("against %s: %d WORSE", a.File, len(a.Worse))
	}
	t.line("  %s, a tick of %s; tolerance %.6g %% of the value before", a.Loop, seconds(a.PeriodS.Value), a.TolerancePercent)
	switch {
	case !a.StableBefore:
		t.line("  the loop before is unstable, so its figures are no measure")
	case !a.StableAfter:
		t.line("  the loop is unstable now: the figures that need stability are gone")
	}
	lines := []gateLine{stableLine(a)}
	for _, c := range a.Changes {
		l := changeLine(c, a.TolerancePercent)
		if !a.StableBefore || !a.StableAfter {
			l.why = nil // the line above has said it
		}
		lines = append(lines, l)
	}
	head := gateLine{cells: []string{"", "", "before", "now", "unit", "change", ""}}
	widths := columnWidths(append(lines, head), len(head.cells), unitColumn)
	printGateLine(t, head, widths, unitColumn)
	for _, l := range lines {
		printGateLine(t, l, widths, unitColumn)
	}
}

func stableLine(a *study.GateAgainst) gateLine {
	verdict := study.ChangeSame
	switch {
	case a.StableBefore && !a.StableAfter:
		verdict = "WORSE"
	case !a.StableBefore && a.StableAfter:
		verdict = study.ChangeBetter
	}
	return gateLine{cells: []string{verdict, "stable", yesNo(a.StableBefore), yesNo(a.StableAfter), "", "", ""}}
}

// changeLine is one metric; general is the tolerance in the head of the table.
func changeLine(c study.MetricChange, general float64) gateLine {
	verdict := c.Verdict
	if verdict == study.ChangeWorse {
		verdict = strings.ToUpper(verdict)
	}
	change, share := short(c.Shown.In(c.Change), 3), percent(c.ChangePercent)
	switch {
	case c.Verdict == study.ChangeSame || !c.Change.OK || c.Change.Value == 0:
		change, share = "", ""
	case c.Change.Value > 0:
		change = "+" + change
		if share != "" && c.ChangePercent.Value >= 0.001 && c.ChangePercent.Value < 999.5 {
			share = "+" + share
		}
	}
	l := gateLine{cells: []string{verdict, c.Name, show(c.Shown.In(c.Before)), show(c.Shown.In(c.After)), cut(c.Shown.Name, 10), change, share}}
	switch {
	case c.Note != "":
		l.why = []string{c.Note}
	case c.Verdict == study.ChangeWorse && c.TolerancePercent != general:
		l.why = []string{fmt.Sprintf("%.6g %% is tolerated here", c.TolerancePercent)}
	}
	return l
}
