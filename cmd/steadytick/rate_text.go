package main

import (
	"fmt"
	"io"
	"math"
	"slices"
	"strings"

	"steadytick/study"
)

// printRate prints the tables of a search for rates.
func printRate(w io.Writer, r *study.Rate) error {
	t := &table{w: w}
	t.line("%s", r.Loop)
	t.wrapped("  ", "map "+r.Map+"; rates looked at "+r.SearchNote)
	t.line("")
	t.wrapped("", r.Verdict)
	printWindows(t, r)
	printConflict(t, r)
	printPick(t, r)
	printMapWindows(t, r)
	printRules(t, r)
	printFolding(t, r)
	printCandidates(t, r)
	t.line("")
	t.wrapped("", study.Caution)
	return t.err
}

// wrapped prints a text under a label.
func (t *table) wrapped(label, text string) {
	if t.err == nil {
		printWrapped(t.w, label, text)
	}
}

const (
	nameCells = 28 // requirement
	rateCells = 10 // a rate
	barsCells = 28 // intervals over the range, logarithmic
)

// printWindows prints a row a requirement: the rates that meet it, in figures and as a bar over the range.
func printWindows(t *table, r *study.Rate) {
	t.line("")
	t.line("%s%s%s  %s", padRight("Rates that meet", nameCells), padLeft("from", rateCells), padLeft("to", rateCells), scaleLine(r.SearchedHz))
	for _, w := range r.Windows {
		if !w.Judged {
			t.line("%s%s", padRight(cut(w.Requirement, nameCells-2), nameCells), padLeft("not judged", 2*rateCells))
			continue
		}
		intervalLines(t, w.Requirement, w.Intervals, r.SearchedHz, '=')
	}
	intervalLines(t, "all together", r.WindowHz, r.SearchedHz, '#')
	for _, w := range r.Windows {
		if w.Note != "" {
			t.wrapped("  ", w.Requirement+": "+w.Note)
		}
	}
}

// mostLines bounds the intervals written out for one requirement; the bar shows them all.
const mostLines = 4

// intervalLines prints the intervals of one row, the bar beside the first.
func intervalLines(t *table, name string, list []study.Interval, over [2]float64, mark rune) {
	drawn := "  " + intervalBar(list, over, mark)
	name = padRight(cut(name, nameCells-2), nameCells)
	if len(list) == 0 {
		t.line("%s%s%s", name, padLeft("none", 2*rateCells), drawn)
		return
	}
	for i, v := range list {
		if i == mostLines {
			t.line("%s%s", padRight("", nameCells), padLeft(fmt.Sprintf("%d more in --json", len(list)-i), 2*rateCells))
			return
		}
		t.line("%s%s%s%s", name, padLeft(endText(v.Low, "slowest"), rateCells), padLeft(endText(v.High, "fastest"), rateCells), drawn)
		name, drawn = padRight("", nameCells), ""
	}
}

func endText(f study.Figure, open string) string {
	if !f.OK {
		return open
	}
	return study.RateText(f.Value)
}

// intervalBar draws intervals of rates over a range, logarithmic: a mark where the middle of a cell is inside one, or where
// an interval narrower than a cell lies.
func intervalBar(list []study.Interval, over [2]float64, mark rune) string {
	cells := []rune(strings.Repeat(".", barsCells))
	width := math.Log(over[1] / over[0])
	place := func(f study.Figure, open int) float64 {
		if !f.OK {
			return float64(open)
		}
		return math.Log(f.Value/over[0]) / width * barsCells
	}
	for _, v := range list {
		from, to := place(v.Low, 0), place(v.High, barsCells)
		narrow := int(math.Floor((from + to) / 2))
		for i := range cells {
			if middle := float64(i) + 0.5; middle >= from && middle <= to || i == narrow {
				cells[i] = mark
			}
		}
	}
	return string(cells)
}

// scaleLine labels the ends of the bars.
func scaleLine(over [2]float64) string {
	left, right := study.RateText(over[0]), study.RateText(over[1])
	return left + padLeft(right, barsCells-len([]rune(left)))
}

// printConflict prints why no rate works and what would open the window.
func printConflict(t *table, r *study.Rate) {
	if r.Conflict == nil {
		return
	}
	t.line("")
	t.line("Why no rate works")
	for _, text := range r.Conflict.Text {
		t.wrapped("  ", text)
	}
	if len(r.Conflict.Relaxations) == 0 {
		return
	}
	t.line("")
	t.line("%s%s%s%s", padRight("Giving way on one alone", nameCells+2), padLeft("limit now", 16), padLeft("enough", 16), padLeft("opens at", 14))
	for _, q := range r.Conflict.Relaxations {
		enough, at := "not enough", ""
		if q.Enough.OK {
			enough, at = show(q.Enough)+" "+q.Unit, study.RateText(q.RateHz.Value)
		}
		t.line("  %s%s%s%s", padRight(cut(q.Requirement, nameCells-2), nameCells), padLeft(show(q.Limit)+" "+q.Unit, 16), padLeft(enough, 16), padLeft(at, 14))
	}
}

// printPick prints the recommended rate, how the timer makes it, and what breaks on both sides.
func printPick(t *table, r *study.Rate) {
	p := r.Pick
	if p == nil {
		return
	}
	t.line("")
	t.line("Pick: %s, a tick of %s", exactRate(p.RateHz), seconds(p.PeriodS))
	t.wrapped("  ", "Why: "+p.Reason+".")
	if p.Timer != nil {
		t.line("")
		t.line("  %s%s%s%s", padRight("Timer setting", 16), padLeft("prescaler", 12), padLeft("reload", 12), padLeft("rate", 20)+padLeft("error ppm", 14))
		settingLine(t, "pick", *p.Timer)
		for _, s := range p.Settings {
			settingLine(t, "near", s)
		}
	}
	t.line("")
	t.line("  %s%s%s", padRight("What breaks", nameCells+12), padLeft("at", 14), padLeft("times the pick", 18))
	breakLines(t, "slower", p.Below)
	breakLines(t, "faster", p.Above)
	if e := r.ComputeEffect; e != nil {
		t.line("")
		if e.Note != "" {
			t.wrapped("  ", "Compute time: "+e.Note+".")
		}
		if e.UpperHzPerUS.OK {
			t.wrapped("  ", fmt.Sprintf("Compute time: each microsecond moves the fastest rate by %s Hz.", show(e.UpperHzPerUS)))
		}
	}
	if len(r.DelayLedger) > 0 {
		t.line("")
		t.line("  %s%s%s", padRight("Delay ledger at the pick", nameCells+12), padLeft("seconds", 14), padLeft("degrees", 18))
		for _, i := range r.DelayLedger {
			t.line("  %s%s%s", padRight(i.Item, nameCells+12), padLeft(show(study.Fig(i.Seconds)), 14), padLeft(show(i.Degrees), 18))
		}
	}
}

func settingLine(t *table, what string, s study.TimerSetting) {
	t.line("  %s%s%s%s%s", padRight(what, 16), padLeft(fmt.Sprint(s.Prescaler), 12), padLeft(fmt.Sprint(s.Reload), 12), padLeft(exactRate(s.RateHz), 20), padLeft(fmt.Sprintf("%.4g", s.ErrorPPM), 14))
}

// exactRate is a rate to ten digits, in Hz.
func exactRate(hz float64) string { return fmt.Sprintf("%.10g Hz", hz) }

func breakLines(t *table, side string, list []study.Break) {
	for i, b := range list {
		if i == mostLines {
			t.line("    … and %d more in --json", len(list)-i)
			return
		}
		t.line("  %s%s%s", padRight(cut(side+": "+b.Requirement, nameCells+10), nameCells+12), padLeft(study.RateText(b.RateHz), 14), padLeft(fmt.Sprintf("%.3g", b.Factor), 18))
	}
}

// printMapWindows prints every map side by side.
func printMapWindows(t *table, r *study.Rate) {
	if len(r.Maps) == 0 {
		return
	}
	t.line("")
	t.line("%s%s%s  %s", padRight("Window under each map", nameCells), padLeft("from", rateCells), padLeft("to", rateCells), scaleLine(r.SearchedHz))
	for _, m := range r.Maps {
		intervalLines(t, m.Map, m.WindowHz, r.SearchedHz, '#')
	}
	for _, m := range r.Maps {
		switch {
		case m.Note != "":
			t.wrapped("  ", m.Map+": "+m.Note)
		case m.SlowestHz.OK && m.Against.OK && m.Map != r.Map:
			t.wrapped("  ", fmt.Sprintf("%s: slowest rate %.3g times that of %s; %q ends it", m.Map, m.Against.Value, r.Map, m.BindsBelow))
		}
	}
}

// printRules prints common practice beside the computed answer.
func printRules(t *table, r *study.Rate) {
	if len(r.Rules) == 0 {
		return
	}
	t.line("")
	t.line("Rules of thumb: common practice, not computed")
	for _, q := range r.Rules {
		t.wrapped("  ", fmt.Sprintf("%s: %s to %s; %s", q.Rule, study.RateText(q.RangeHz.Low.Value), study.RateText(q.RangeHz.High.Value), q.Says))
	}
}

// printFolding prints where declared disturbances land.
func printFolding(t *table, r *study.Rate) {
	if len(r.Folding) == 0 {
		return
	}
	t.line("")
	t.line("Folding: where a vibration lands among the samples")
	for _, f := range r.Folding {
		t.line("  %s at %s, %s", f.Name, study.RateText(f.FrequencyHz), f.At)
		for _, l := range f.Lands {
			if !worthShowing(r, l.RateHz) {
				continue
			}
			inside := ""
			if l.InsideBandwidth {
				inside = "inside the bandwidth"
			}
			t.line("    %s%s  %s", padLeft("sampled at "+study.RateText(l.RateHz), 28), padLeft("lands at "+study.RateText(l.LandsHz), 26), inside)
		}
	}
}

// worthShowing tells whether a rate meets the requirements or is the file's; every rate where none meets them.
func worthShowing(r *study.Rate, hz float64) bool {
	if len(r.WindowHz) == 0 {
		return true
	}
	for _, c := range r.Candidates {
		if c.RateHz == hz && c.Map == r.Map && (c.Meets || c.Why == "file") {
			return true
		}
	}
	return false
}

// printCandidates prints rates with their main figures.
func printCandidates(t *table, r *study.Rate) {
	if len(r.Candidates) == 0 {
		return
	}
	t.line("")
	t.line("%s%s%s%s%s%s%s  %s", padRight("Candidates", 12), padLeft("phase", 9), padLeft("gain", 9), padLeft("modulus", 9), padLeft("band", 11), padLeft("over-", 9), padLeft("load", 8), "")
	t.line("%s%s%s%s%s%s%s  %s", padRight("", 12), padLeft("deg", 9), padLeft("dB", 9), padLeft("", 9), padLeft("rad/s", 11), padLeft("shoot %", 9), padLeft("%", 8), "")
	for _, c := range r.Candidates {
		if c.Map != r.Map {
			continue
		}
		state := "meets all"
		switch {
		case slices.Contains(c.Fails, "can run"):
			state = "cannot run"
		case slices.Contains(c.Fails, "stable"):
			state = "unstable"
			c.Metrics = map[string]study.Figure{"processor_load": c.Metrics["processor_load"]} // margins of an unstable loop mislead here
		case !c.Meets:
			state = fmt.Sprintf("fails %d", len(c.Fails))
		}
		if c.Why == "chosen" || c.Why == "file" {
			state += ", " + map[string]string{"chosen": "pick", "file": "file"}[c.Why]
		}
		t.line("%s%s%s%s%s%s%s  %s", padRight(study.RateText(c.RateHz), 12), brief(c, "phase_margin", 9), brief(c, "gain_margin", 9),
			brief(c, "modulus_margin", 9), brief(c, "bandwidth", 11), brief(c, "overshoot", 9), brief(c, "processor_load", 8), state)
	}
}

// brief is a figure of a candidate to four digits.
func brief(c study.Candidate, name string, cells int) string {
	f, ok := c.Metrics[name]
	switch {
	case !ok || !f.OK:
		return padLeft("—", cells)
	case math.IsInf(f.Value, 0):
		return padLeft("inf", cells)
	}
	text := fmt.Sprintf("%.4g", f.Value)
	for digits := 3; len(text) >= cells && digits > 0; digits-- {
		text = fmt.Sprintf("%.*g", digits, f.Value)
	}
	return padLeft(text, cells)
}
