package loop

import (
	"fmt"
	"sort"
	"strings"
	"unicode"
)

// place is a position in the loop file: lines and columns count from 1, columns count
// characters (not bytes). The zero place means the file as a whole.
type place struct{ line, column int }

// Problem is one thing that is wrong with a loop file, at one place.
type Problem struct {
	File     string // as given to Parse; the CSV file for a problem inside an input file
	Line     int    // from 1; 0: the file as a whole
	Column   int    // from 1, in characters; 0: the line as a whole
	LineText string // the line itself, without its end
	Message  string // what is wrong
	Expected string // what would be right, "" when the message says it
	Nearest  string // the known name nearest to what was written, "" when none is near
}

// Problems are the problems of one file in the order of their places. A nil or empty
// Problems means that the file is fine; compare its length, not the error interface.
type Problems []Problem

// shown is how many problems Error prints before it only counts the rest: more than a
// screen of them is no help (common practice of compilers).
const shown = 20

// Error prints every problem with its line and a pointer under the place.
func (p Problems) Error() string {
	var b strings.Builder
	for i, q := range p {
		if i == shown {
			fmt.Fprintf(&b, "and %d more\n", len(p)-shown)
			break
		}
		q.print(&b)
	}
	return strings.TrimSuffix(b.String(), "\n")
}

func (q Problem) print(b *strings.Builder) {
	b.WriteString(clean(q.File))
	if q.Line > 0 {
		fmt.Fprintf(b, ":%d", q.Line)
	}
	if q.Line > 0 && q.Column > 0 {
		fmt.Fprintf(b, ":%d", q.Column)
	}
	fmt.Fprintf(b, ": %s\n", clean(q.Message))
	if q.Line > 0 && strings.TrimSpace(q.LineText) != "" {
		text, pointer := excerpt(q.LineText, q.Column)
		fmt.Fprintf(b, "    %s\n", text)
		if q.Column > 0 {
			fmt.Fprintf(b, "    %s\n", pointer)
		}
	}
	if q.Expected != "" {
		fmt.Fprintf(b, "    expected: %s\n", clean(q.Expected))
	}
	if q.Nearest != "" {
		fmt.Fprintf(b, "    did you mean %q?\n", q.Nearest)
	}
}

// Columns of a terminal that are kept before and behind the place of a long line.
const keepBefore, keepAfter = 50, 28

// excerpt returns the line as shown and the pointer line that belongs under it. Tabs
// become four spaces, characters without a shape become U+FFFD, a long line is cut
// around the place. column counts characters from 1.
func excerpt(line string, column int) (text, pointer string) {
	var cells []string
	var widths []int
	for _, c := range line {
		cell, w := cell(c)
		cells, widths = append(cells, cell), append(widths, w)
	}
	at := min(max(column-1, 0), len(cells))
	from, to := at, at
	for w := 0; from > 0 && w+widths[from-1] <= keepBefore; from-- {
		w += widths[from-1]
	}
	for w := 0; to < len(cells) && w+widths[to] <= keepAfter+(keepBefore-sum(widths[from:at])); to++ {
		w += widths[to]
	}
	text, pad := strings.Join(cells[from:to], ""), sum(widths[from:at])
	if from > 0 {
		text, pad = "… "+text, pad+2
	}
	if to < len(cells) {
		text += " …"
	}
	return text, strings.Repeat(" ", pad) + "^"
}

func sum(v []int) int {
	s := 0
	for _, x := range v {
		s += x
	}
	return s
}

// cell is what is shown for a character and how many columns of a terminal it takes.
func cell(c rune) (string, int) {
	switch {
	case c == '\t':
		return "    ", 4
	case c == '\u200d' || unicode.Is(unicode.Mn, c) || unicode.Is(unicode.Me, c):
		return string(c), 0
	case !unicode.IsGraphic(c):
		return "\ufffd", 1
	case wide(c):
		return string(c), 2
	}
	return string(c), 1
}

// wide reports whether terminals show c two columns wide: the large blocks of Unicode
// Standard Annex 11 with property W or F (from memory; rare blocks left out).
func wide(c rune) bool {
	for _, b := range [][2]rune{
		{0x1100, 0x115f}, {0x2e80, 0x303e}, {0x3041, 0xa4cf}, {0xac00, 0xd7a3}, {0xf900, 0xfaff},
		{0xfe30, 0xfe6f}, {0xff00, 0xff60}, {0xffe0, 0xffe6}, {0x1f300, 0x1faff}, {0x20000, 0x3fffd},
	} {
		if c >= b[0] && c <= b[1] {
			return true
		}
	}
	return false
}

// clean makes text from a file fit for one line of a terminal.
func clean(s string) string {
	return strings.Map(func(c rune) rune {
		switch {
		case c == '\t' || c == '\n' || c == '\r':
			return ' '
		case !unicode.IsGraphic(c):
			return '\ufffd'
		}
		return c
	}, s)
}

// quote is s for a message: in quotes, cut when long.
func quote(s string) string {
	if r := []rune(s); len(r) > 40 {
		s = string(r[:37]) + "…"
	}
	return `"` + s + `"`
}

// sorted orders by place, the loop file itself first, and drops what is said twice.
func (p Problems) sorted(file string) Problems {
	sort.SliceStable(p, func(i, j int) bool {
		if p[i].File != p[j].File {
			return p[i].File == file || p[j].File != file && p[i].File < p[j].File
		}
		if p[i].Line != p[j].Line {
			return p[i].Line < p[j].Line
		}
		return p[i].Column < p[j].Column
	})
	var out Problems
	for i, q := range p {
		if i == 0 || q != p[i-1] {
			out = append(out, q)
		}
	}
	return out
}
