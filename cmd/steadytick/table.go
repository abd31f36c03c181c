package main

import (
	"fmt"
	"io"
	"math"
	"strings"
	"unicode/utf8"

	"steadytick/study"
)

// width is what a table may take: a terminal of 80 columns.
const width = 78

// show is a figure to six significant digits; an em dash where there is none.
func show(f study.Figure) string {
	switch {
	case !f.OK:
		return "—"
	case math.IsInf(f.Value, 1):
		return "inf"
	case math.IsInf(f.Value, -1):
		return "-inf"
	case f.Value == 0:
		return "0"
	}
	return fmt.Sprintf("%.6g", f.Value)
}

// seconds is a time with a unit that suits it.
func seconds(t float64) string {
	if t == 0 {
		return "0 s"
	}
	for _, u := range []struct {
		size float64
		name string
	}{{1, "s"}, {1e-3, "ms"}, {1e-6, "µs"}} {
		if t >= u.size {
			return fmt.Sprintf("%.6g %s", t/u.size, u.name)
		}
	}
	return fmt.Sprintf("%.6g ns", t*1e9)
}

// padLeft and padRight pad by characters, not bytes.
func padLeft(s string, n int) string {
	return strings.Repeat(" ", max(0, n-utf8.RuneCountInString(s))) + s
}

func padRight(s string, n int) string {
	return s + strings.Repeat(" ", max(0, n-utf8.RuneCountInString(s)))
}

// cut shortens a name that would break the table.
func cut(s string, n int) string {
	if utf8.RuneCountInString(s) <= n {
		return s
	}
	return string([]rune(s)[:n-1]) + "…"
}

// table collects lines and the first error of the writer.
type table struct {
	w   io.Writer
	err error
}

func (t *table) line(format string, args ...any) {
	if t.err == nil {
		_, t.err = fmt.Fprintln(t.w, strings.TrimRight(fmt.Sprintf(format, args...), " "))
	}
}

// row is name, unit and two columns.
func (t *table) row(name, unit, continuous, sampled string) {
	t.line("  %s%s%s%s", padRight(cut(name, 34), 35), padRight(cut(unit, 10), 11), padLeft(continuous, 14), padLeft(sampled, 15))
}

// row3 is row with three values.
func (t *table) row3(name, unit, left, middle, right string) {
	t.line("  %s %s%s%s%s", padRight(cut(name, 26), 26), padRight(cut(unit, 8), 8), padLeft(left, 13), padLeft(middle, 14), padLeft(right, 14))
}

// printWrapped prints a text under a label, wrapped with a hanging indent.
func printWrapped(w io.Writer, label, text string) {
	line := label
	used := utf8.RuneCountInString(label)
	first := true
	for _, word := range strings.Fields(text) {
		n := utf8.RuneCountInString(word)
		if !first && used+1+n > width {
			fmt.Fprintln(w, line)
			line, used, first = "  ", 2, true
		}
		if !first {
			line += " "
			used++
		}
		line += word
		used += n
		first = false
	}
	fmt.Fprintln(w, line)
}
