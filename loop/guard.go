package loop

import (
	"bytes"
	"fmt"
	"strings"
	"unicode/utf8"
)

// Limits of a loop file as text. They are far above what a loop needs and keep the
// reading of any file under a second.
const (
	maxBytes  = 64 << 10 // size of the file: the time of the YAML reader grows with its square
	maxIndent = 200      // columns of indentation
	maxNest   = 50       // brackets [ { within each other, and "- - - a" on one line
	maxDigits = 200      // digits of one number

	maxProblems = 200 // kept for one file
)

// guard refuses text that must not reach the YAML reader: too long, not UTF-8, control
// characters, nested too deep, numbers of absurd length.
func guard(r *reader, src []byte) {
	if len(src) > maxBytes {
		r.report(place{}, fmt.Sprintf("the file is %d bytes long", len(src)),
			fmt.Sprintf("at most %d bytes", maxBytes))
		return
	}
	if bytes.HasPrefix(src, []byte("\xff\xfe")) || bytes.HasPrefix(src, []byte("\xfe\xff")) {
		r.report(place{1, 1}, "the file is UTF-16", "UTF-8 text")
		return
	}
	depth := 0
	for i, line := range r.lines {
		if !guardLine(r, i+1, line, &depth) || len(r.problems) >= shown {
			return
		}
	}
}

// guardLine reports whether it makes sense to go on with the next line.
func guardLine(r *reader, n int, line string, depth *int) bool {
	column, digits := 0, 0
	for rest := line; rest != ""; {
		c, size := utf8.DecodeRuneInString(rest)
		rest = rest[size:]
		column++
		switch {
		case c == utf8.RuneError && size == 1:
			r.report(place{n, column}, "the text is not UTF-8", "a text file in UTF-8")
			return false
		case c < ' ' && c != '\t', c >= 0x7f && c <= 0x9f, c == '\u2028', c == '\u2029', c == '\ufeff':
			r.report(place{n, column}, fmt.Sprintf("control character U+%04X", c), "plain text")
			return false
		case c == '[' || c == '{':
			*depth++
		case c == ']' || c == '}':
			*depth = max(0, *depth-1)
		}
		if *depth > maxNest {
			r.report(place{n, column}, fmt.Sprintf("brackets nested more than %d deep", maxNest), "")
			return false
		}
		if c >= '0' && c <= '9' || c == '_' && digits > 0 || c == '.' && digits > 0 {
			digits++
		} else {
			digits = 0
		}
		if digits == 5*maxDigits {
			r.report(place{n, column - digits + 1}, "a number of very many digits", numberForm)
			return false
		}
	}
	return guardStart(r, n, line)
}

// guardStart looks at what the line begins with: indentation, dashes, question marks.
func guardStart(r *reader, n int, line string) bool {
	indent := len(line) - len(strings.TrimLeft(line, " "))
	if strings.TrimLeft(line, " \t") == "" {
		return true
	}
	if indent > maxIndent {
		r.report(place{n, indent + 1}, fmt.Sprintf("indented by more than %d columns", maxIndent), "")
		return false
	}
	marks := 0
	for _, c := range line {
		if c == '-' || c == '?' {
			marks++
		} else if c != ' ' && c != '\t' {
			break
		}
	}
	if marks > maxNest {
		r.report(place{n, indent + 1}, fmt.Sprintf("lists nested more than %d deep", maxNest), "")
		return false
	}
	return true
}
