package main

import (
	"fmt"
	"io"
	"strings"

	"steadytick/study"
)

// printGate prints the files, each with one line a requirement, then the comparison, then one line on the whole.
func printGate(w io.Writer, result *study.Gate) error {
	t := &table{w: w}
	widths := gateWidths(result.Loops...)
	for i, g := range result.Loops {
		if i > 0 {
			t.line("")
		}
		printGateLoop(t, g, widths)
	}
	if result.Against != nil {
		t.line("")
		printAgainst(t, result)
	}
	t.line("")
	t.line("%s", gateSummary(result))
	t.line("Figures of a linear model: no proof of safety.")
	return t.err
}

// printGateLoop prints one file.
func printGateLoop(t *table, g *study.GateLoop, widths []int) {
	if len(g.Problems) > 0 {
		t.line("%s: NOT CHECKED, %s in the file (see stderr)", g.File, count(len(g.Problems), "problem"))
		return
	}
	missed := 0
	for _, r := range g.Requirements {
		if !r.Passed() {
			missed++
		}
	}
	switch {
	case missed > 0:
		t.line("%s: %d of %d NOT MET", g.File, missed, len(g.Requirements))
	case len(g.Requirements) == 1:
		t.line("%s: met", g.File)
	default:
		t.line("%s: all %d met", g.File, len(g.Requirements))
	}
	t.line("  %s, a tick of %s", g.Loop, seconds(g.PeriodS.Value))
	if len(g.Requirements) > 1 {
		printGateLine(t, gateHead, widths, limitColumn)
	}
	for _, l := range requirementLines(g) {
		printGateLine(t, l, widths, limitColumn)
	}
	if g.Note != "" && t.err == nil {
		printWrapped(t.w, "  note: ", g.Note)
	}
}

// gateHead names the figures.
var gateHead = gateLine{cells: []string{"", "", "value", "limit", "slack", ""}}

// gateWidths are the widths of the columns of several files, so that they stand under each other.
func gateWidths(list ...*study.GateLoop) []int {
	all := []gateLine{gateHead}
	for _, g := range list {
		all = append(all, requirementLines(g)...)
	}
	return columnWidths(all, len(gateHead.cells), limitColumn)
}

// requirementLines turns requirements into lines, figures in the unit in which the file writes the limit.
func requirementLines(g *study.GateLoop) []gateLine {
	var out []gateLine
	for _, r := range g.Requirements {
		l := gateLine{cells: []string{word(r), r.Name, "", "", "", ""}}
		if r.Name == "stable" {
			l.cells[2] = yesNo(r.Passed())
		} else {
			l.cells[2] = show(r.Written.In(r.Value))
			l.cells[3] = strings.TrimRight(r.Op+" "+show(r.Written.In(r.Limit))+" "+cut(r.Written.Name, 12), " ")
			l.cells[4], l.cells[5] = short(r.Written.In(r.Slack), 4), percent(r.SlackPercent)
		}
		if r.From == "as built" && r.Met != nil && *r.Met {
			l.why = append(l.why, "of the loop as built, which is the worse here")
		}
		if r.NotJudged != "" {
			l.why = append(l.why, r.NotJudged)
		}
		if r.Cause != nil && r.Cause.Kind != "unstable" { // the line of "stable" has said it
			l.why = append(l.why, r.Cause.Kind+": "+r.Cause.Text)
		}
		out = append(out, l)
	}
	return out
}

func word(r study.GateRequirement) string {
	switch {
	case r.Met == nil:
		return "NOT JUDGED"
	case !*r.Met:
		return "NOT MET"
	}
	return "met"
}

func yesNo(v bool) string {
	if v {
		return "yes"
	}
	return "NO"
}

// gateSummary is the verdict on the whole run.
func gateSummary(result *study.Gate) string {
	met, broken, missed := 0, 0, 0
	for _, g := range result.Loops {
		switch {
		case len(g.Problems) > 0:
			broken++
		case g.Met:
			met++
		}
		for _, r := range g.Requirements {
			if !r.Passed() {
				missed++
			}
		}
	}
	text := map[bool]string{true: "MET: ", false: "NOT MET: "}[result.Met]
	if n := len(result.Loops); n > 1 {
		text += fmt.Sprintf("%d of %d files met", met, n)
		if not := n - met - broken; not > 0 {
			text += fmt.Sprintf(", %d not met", not)
		}
		if broken > 0 {
			text += fmt.Sprintf(", %d not checked", broken)
		}
		return text + "."
	}
	switch {
	case broken > 0:
		text += "the file was not checked"
	case missed == 0:
		text += "every requirement is met"
	default:
		text += fmt.Sprintf("%d of %s not met", missed, count(len(result.Loops[0].Requirements), "requirement"))
	}
	switch a := result.Against; {
	case a == nil:
	case len(a.Problems) > 0:
		text += map[bool]string{true: ", but ", false: ", and "}[missed == 0 && broken == 0] + "nothing was compared"
	case len(a.Worse) == 0:
		text += ", nothing got worse"
	default:
		text += map[bool]string{true: ", but ", false: ", and "}[missed == 0] + count(len(a.Worse), "figure") + " got worse"
	}
	return text + "."
}

// count is a number with its noun.
func count(n int, noun string) string {
	if n == 1 {
		return "1 " + noun
	}
	return fmt.Sprintf("%d %ss", n, noun)
}

// shownProblems is how many problems of a file are printed before they are only counted: more than a screen of
// them is no help.
const shownProblems = 20

// printGateNotes prints problems and warnings, each with its file.
func printGateNotes(stderr io.Writer, result *study.Gate) {
	for _, g := range result.Loops {
		printGateProblems(stderr, g.File, g.Problems)
		printGateWarnings(stderr, g.File, g.Warnings)
	}
	if a := result.Against; a != nil {
		printGateProblems(stderr, a.File, a.Problems)
		printGateWarnings(stderr, a.File, a.Warnings)
	}
}

func printGateProblems(stderr io.Writer, file string, list []string) {
	for i, p := range list {
		if i == shownProblems {
			fmt.Fprintf(stderr, "%s: and %d more\n", file, len(list)-shownProblems)
			return
		}
		fmt.Fprintln(stderr, p)
	}
}

// explaining are the warnings that explain figures of compare; they put no verdict of a gate in doubt and
// stand in its JSON and JUnit files only.
var explaining = map[string]bool{
	"sensor_dynamics": true, "reference_path": true, "no_continuous_column": true, "no_figure": true,
	"unstable": true, "effort_saturates": true, "requirement_not_judged": true,
}

func printGateWarnings(stderr io.Writer, file string, list []study.Warning) {
	for _, x := range list {
		if !explaining[x.Code] {
			printWrapped(stderr, "warning: ", file+": "+x.Text)
		}
	}
}
