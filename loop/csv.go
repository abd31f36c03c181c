package loop

import (
	"bytes"
	"fmt"
	"math"
	"strconv"
	"strings"
)

// maxRows bounds a file of samples.
const maxRows = 1_000_000

// csvShape is what a file of numbers must look like.
type csvShape struct {
	headers     []string // the first line is one of them; blanks do not count
	least, most int      // rows
	row         string   // the figures of a row, for messages
}

// openCSV reads the file that n names. headers names the possible ones, for the message.
func (r *reader) openCSV(n *node, headers string) (name string, src []byte, ok bool) {
	if name, ok = r.text(n, "file"); !ok {
		return "", nil, false
	}
	if r.open == nil || name == "" || strings.ContainsRune(name, 0) {
		r.report(n.at, "input files cannot be opened here", "")
		return name, nil, false
	}
	src, err := r.open(name)
	if err != nil {
		r.report(n.at, fmt.Sprintf("file %s: %v", quote(name), err), "a CSV file with the header "+headers)
		return name, nil, false
	}
	return name, src, true
}

// csv gives every row of a file to take, which says what is wrong with it, "" for nothing; the numbers are
// overwritten by the next row. It returns the header, without blanks. The problems name the CSV file and its
// line; only the first is told.
func (r *reader) csv(name string, src []byte, shape csvShape, take func(v []float64) (message, expected string)) (header string, ok bool) {
	fail := func(line int, text, message, expected string) (string, bool) {
		if len(text) > 200 {
			text = text[:200]
		}
		r.faults++
		r.problems = append(r.problems, Problem{File: name, Line: line, Column: min(line, 1), LineText: text,
			Message: message, Expected: expected})
		return "", false
	}
	headers := strings.Join(shape.headers, " or ")
	if len(src) > maxCSV {
		return fail(0, "", "the input file is too long", fmt.Sprintf("at most %d bytes", maxCSV))
	}
	src = bytes.TrimPrefix(src, []byte("\xef\xbb\xbf"))
	var v []float64
	var figures string // of a row, for messages
	line, rows := 0, 0
	for len(src) > 0 {
		raw, rest, _ := bytes.Cut(src, []byte("\n"))
		src = rest
		line++
		text := strings.TrimSpace(string(raw))
		if line == 1 {
			if header = strings.ReplaceAll(text, " ", ""); !contains(shape.headers, header) {
				return fail(1, text, "this is not the header of an input file", headers)
			}
			v = make([]float64, strings.Count(header, ",")+1)
			figures = fmt.Sprintf("%s number%s: %s", numberWord(len(v)), plural(len(v)), shape.row)
			continue
		}
		if text == "" {
			continue
		}
		message, expected := csvRow(text, v), figures
		if message == "" && rows == shape.most {
			text, message, expected = "", "the input file has too many rows", fmt.Sprintf("at most %d", shape.most)
		}
		if message == "" {
			message, expected = take(v)
		}
		if message != "" {
			return fail(line, text, message, expected)
		}
		rows++
	}
	if rows < shape.least {
		return fail(0, "", fmt.Sprintf("the input file has fewer than %s row%s", numberWord(shape.least), plural(shape.least)),
			fmt.Sprintf("the header %s and %s row%s or more", headers, numberWord(shape.least), plural(shape.least)))
	}
	return header, true
}

// csvRow reads a row of numbers into v; message is what is wrong, "" for nothing.
func csvRow(text string, v []float64) (message string) {
	if strings.Count(text, ",") != len(v)-1 {
		return fmt.Sprintf("this row does not have %s column%s", numberWord(len(v)), plural(len(v)))
	}
	for i := range v {
		field, rest, _ := strings.Cut(text, ",")
		field, text = strings.TrimSpace(field), rest
		if strings.Trim(field, "0123456789+-.eE") != "" || len(field) > 2*maxDigits {
			return fmt.Sprintf("%s is not a number", quote(field))
		}
		x, err := strconv.ParseFloat(field, 64)
		if err != nil || math.Abs(x) > 1e200 {
			return fmt.Sprintf("%s is not a number, or out of range", quote(field))
		}
		v[i] = x
	}
	return ""
}

// numberWord is a small number in words.
func numberWord(n int) string {
	words := []string{"no", "one", "two", "three", "four", "five", "six", "seven", "eight", "nine"}
	if n >= 0 && n < len(words) {
		return words[n]
	}
	return strconv.Itoa(n)
}

func plural(n int) string {
	if n == 1 {
		return ""
	}
	return "s"
}
