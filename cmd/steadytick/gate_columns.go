package main

import (
	"fmt"
	"io"
	"math"
	"strings"
	"unicode/utf8"

	"steadytick/study"
)

// gateGap stands before each column of a gate: verdict, name, value, limit, slack and its share; or before, now, unit, change
// and its share.
var gateGap = []int{2, 1, 1, 2, 1, 1, 1}

// gateLine is one requirement or metric: a word for the verdict, then its figures. Under it stands why.
type gateLine struct {
	cells []string // verdict, name, then figures
	why   []string
}

// short is a difference, to as many digits as help.
func short(f study.Figure, digits int) string {
	if !f.OK || math.IsInf(f.Value, 0) {
		return show(f)
	}
	return fmt.Sprintf("%.*g", digits, f.Value)
}

// percent is a share to three digits, below one per cent to two, as long as there are no more before the point.
func percent(f study.Figure) string {
	switch {
	case !f.OK:
		return ""
	case math.IsInf(f.Value, 0):
		return show(f)
	case f.Value >= 999.5:
		return "> 999 %"
	case f.Value <= -999.5:
		return "< -999 %"
	case f.Value != 0 && math.Abs(f.Value) < 0.001:
		return "~ 0 %"
	}
	if math.Abs(f.Value) < 1 {
		return fmt.Sprintf("%.2g %%", f.Value)
	}
	return fmt.Sprintf("%.3g %%", f.Value)
}

// columnWidths are the widths of n columns; name and text, which ends with a unit, are cut to what a terminal has left.
func columnWidths(lines []gateLine, n, text int) []int {
	const leastName, leastText = 10, 5 // characters that still tell what it is
	widths := make([]int, n)
	over := -width
	for i := range widths {
		for _, l := range lines {
			widths[i] = max(widths[i], utf8.RuneCountInString(l.cells[i]))
		}
		over += widths[i] + gateGap[i]
	}
	for _, c := range [2]struct{ column, least int }{{1, leastName}, {text, leastText}} {
		take := min(max(over, 0), max(widths[c.column]-c.least, 0))
		widths[c.column] -= take
		over -= take
	}
	return widths
}

// limitColumn and unitColumn hold text, not figures.
const limitColumn, unitColumn = 3, 4

// printGateLine prints verdict, name and the column of text to the left, figures to the right.
func printGateLine(t *table, l gateLine, widths []int, text int) {
	var b strings.Builder
	for i, c := range l.cells {
		b.WriteString(strings.Repeat(" ", gateGap[i]))
		if i < 2 || i == text {
			b.WriteString(padRight(cut(c, widths[i]), widths[i]))
		} else {
			b.WriteString(padLeft(c, widths[i]))
		}
	}
	t.line("%s", b.String())
	for _, why := range l.why {
		if t.err == nil {
			printIndented(t.w, "      ", why)
		}
	}
}

// printIndented prints a text wrapped, every line after the same indent.
func printIndented(w io.Writer, indent, text string) {
	line := ""
	for _, word := range strings.Fields(text) {
		if line != "" && utf8.RuneCountInString(indent+line)+1+utf8.RuneCountInString(word) > width {
			fmt.Fprintln(w, indent+line)
			line = ""
		}
		line = strings.TrimLeft(line+" "+word, " ")
	}
	fmt.Fprintln(w, indent+line)
}
