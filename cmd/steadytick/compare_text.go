package main

import (
	"fmt"
	"io"

	"steadytick/study"
)

// printCompare prints the tables of a comparison.
func printCompare(w io.Writer, c *study.Compare) error {
	t := &table{w: w}
	t.line("%s", c.Loop)
	t.line("  a tick of %s, sample to update %s", seconds(c.PeriodS), seconds(c.LoopDelayS))
	t.line("")
	if t.err == nil {
		printWrapped(w, "", c.Verdict)
	}
	t.line("")
	printColumns(t, c)
	printSteady(t, c)
	printBuilt(t, c)
	printPoles(t, c)
	printLedger(t, c)
	printMaps(t, c)
	printDegrade(t, c)
	printRequirements(t, c)
	t.line("")
	if t.err == nil {
		printWrapped(w, "", study.Caution)
	}
	return t.err
}

// printColumns prints the comparison, with a third column where the file declares hardware.
func printColumns(t *table, c *study.Compare) {
	rows := study.ComparisonRows(c)
	if c.AsBuilt == nil {
		t.row("", "", "continuous", "sampled")
		for _, r := range rows {
			t.row(r.Name, r.Unit, cell(c.Continuous, r), cell(c.Sampled, r))
		}
		return
	}
	t.row3("", "", "continuous", "sampled", "as built")
	for _, r := range rows {
		t.row3(r.Name, r.Unit, cell(c.Continuous, r), cell(c.Sampled, r), builtCell(c.AsBuilt, r))
	}
}

func builtCell(b *study.AsBuilt, r study.ComparisonRow) string {
	if r.Built == nil {
		return ""
	}
	return show(r.Built(b))
}

// printBuilt prints what only the loop as built has.
func printBuilt(t *table, c *study.Compare) {
	if c.AsBuilt == nil {
		return
	}
	t.line("")
	t.line("As built: simulated on the hardware of the file, seed %d", c.AsBuilt.Seed)
	t.line("  noise over %d ticks; each input in the last third of a long run", c.AsBuilt.NoiseTicks)
	for _, r := range study.BuiltRows(c) {
		t.row(r.Name, r.Unit, "", show(r.Figure))
	}
}

// cell is one value of a comparison row.
func cell(col *study.Column, r study.ComparisonRow) string {
	if col == nil {
		return "—"
	}
	if r.Word != nil {
		return r.Word(col)
	}
	return show(r.Figure(col))
}

// printSteady prints the steady errors, both columns, input by input.
func printSteady(t *table, c *study.Compare) {
	if len(c.Sampled.Steady) == 0 {
		return
	}
	t.line("")
	t.line("Steady error (tracking: r − y; loop: r − m)")
	t.row("", "", "continuous", "sampled")
	for i, s := range c.Sampled.Steady {
		var cont *study.Steady
		if c.Continuous != nil {
			cont = &c.Continuous.Steady[i]
		}
		for _, r := range study.SteadyRows(s, c.Units) {
			left := "—"
			if cont != nil {
				left = show(r.Figure(cont))
			}
			t.row(r.Name, r.Unit(c.Units), left, show(r.Figure(&s)))
		}
	}
}

// printPoles prints the closed-loop poles, the sampled ones as their equivalents.
func printPoles(t *table, c *study.Compare) {
	const most = 12
	t.line("")
	t.line("Closed-loop poles in rad/s (sampled: ln z / T), slowest first")
	var left [][2]float64
	if c.Continuous != nil {
		left = c.Continuous.Poles
	}
	right := c.Sampled.EquivalentPoles
	t.line("  %s%s", padLeft("continuous", 37), padLeft("sampled", 38))
	for i := 0; i < max(len(left), len(right)) && i < most; i++ {
		t.line("  %s%s", padLeft(pole(left, i), 37), padLeft(pole(right, i), 38))
	}
	if n := max(len(left), len(right)); n > most {
		t.line("  … and %d more in --json", n-most)
	}
}

func pole(list [][2]float64, i int) string {
	switch {
	case i >= len(list):
		return ""
	case list[i][1] == 0:
		return fmt.Sprintf("%.6g", list[i][0])
	}
	return fmt.Sprintf("%.6g %+.6gj", list[i][0], list[i][1])
}

// printLedger prints where the lag around the loop comes from.
func printLedger(t *table, c *study.Compare) {
	t.line("")
	if c.Sampled.CrossoverRadS.OK {
		t.line("Delay ledger: lag around the sampled loop, degrees at %s rad/s", show(c.Sampled.CrossoverRadS)) // its crossover
	} else {
		t.line("Delay ledger: lag around the sampled loop")
	}
	t.row("", "", "seconds", "degrees")
	for _, i := range c.DelayLedger {
		t.row(i.Item, "", show(study.Fig(i.Seconds)), show(i.Degrees))
	}
}

// printMaps prints how the continuous parts of the controller became digital.
func printMaps(t *table, c *study.Compare) {
	if len(c.Maps) == 0 || t.err != nil {
		return
	}
	t.line("")
	t.line("Controller maps")
	for _, m := range c.Maps {
		printWrapped(t.w, "  "+m.Part+", "+m.Map+": ", m.Text)
	}
}

// printDegrade prints how sampling and delay degrade tracking.
func printDegrade(t *table, c *study.Compare) {
	if len(c.Degrade) == 0 {
		return
	}
	t.line("")
	t.line("Tracking error of the simulated loop, %s", c.Units.Output)
	last := ""
	for _, r := range c.Degrade {
		if r.Input != last {
			t.line("  %s%s%s%s", padRight(cut(r.Input, 30), 33), padLeft("peak", 14), padLeft("rms", 14), padLeft("steady", 14))
			last = r.Input
		}
		if r.Note != "" && !r.PeakError.OK {
			t.line("    %s%s", padRight(cut(r.Variant, 30), 31), cut(r.Note, 44))
			continue
		}
		t.line("    %s%s%s%s", padRight(cut(r.Variant, 30), 31), padLeft(show(r.PeakError), 14), padLeft(show(r.RMSError), 14), padLeft(show(r.SteadyError), 14))
	}
}

// printRequirements prints the requirements with what the sampled loop reaches.
func printRequirements(t *table, c *study.Compare) {
	if len(c.Requirements) == 0 {
		return
	}
	t.line("")
	of := "sampled loop"
	if c.AsBuilt != nil {
		of = "the worse of sampled and as built"
	}
	t.line("Requirements (%s)", of)
	for _, r := range c.Requirements {
		verdict := "cannot be judged"
		if r.Met != nil {
			verdict = "met"
			if !*r.Met {
				verdict = "NOT MET"
			}
		}
		t.line("  %s %s %s%s  %s", padRight(cut(r.Name, 24), 25), padRight(r.Op, 2), padLeft(fmt.Sprintf("%.6g %s", r.Limit, r.Unit), 18), padLeft(show(r.Value), 14), verdict)
	}
}
