package charts

import "steadytick/study"

// grid is a table of figures and words.
type grid struct {
	ID, Caption string
	Heads       []gridHead
	Rows        []gridRow
}

type gridHead struct {
	Text   string
	Number bool
}

type gridRow struct {
	Class string
	Cells []gridCell
}

// gridCell holds figures and words one after another.
type gridCell struct {
	Class string
	Parts []figure
	Bar   *signedBar // nil: none
}

// signedBar is a bar to the right of the middle, or to the left of it.
type signedBar struct {
	Share float64 // of half the cell, 0 to 1
	Minus bool
}

// heads makes column heads; one that begins with # stands over numbers.
func heads(names ...string) []gridHead {
	out := make([]gridHead, len(names))
	for i, n := range names {
		if n[0] == '#' {
			out[i] = gridHead{n[1:], true}
		} else {
			out[i] = gridHead{n, false}
		}
	}
	return out
}

// text is a cell of words.
func text(s string) gridCell { return gridCell{Parts: []figure{{Text: s}}} }

// number is a cell of figures, set to the right.
func number(parts ...figure) gridCell { return gridCell{Class: "n", Parts: parts} }

// word is a part of a cell that is no figure.
func word(s string) figure { return figure{Text: s} }

// shownAt is a figure of the result in a cell.
func shownAt(path string, f study.Figure) gridCell { return number(show(path, f, one)) }

func floatAt(path string, v float64) gridCell { return number(showFloat(path, v, one)) }
