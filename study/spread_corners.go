package study

import (
	"fmt"
	"strings"
)

// corners evaluates every combination of the ends of the spreads beside the trials; nil where there are too many. Drawn corners are
// the trials themselves.
func (j *spreadJob) corners() (*spreadTally, error) {
	switch n := len(j.symbols); {
	case j.o.Draw == DrawCorners:
		return j.tally, nil
	case n > fewCornerSymbols:
		return nil, nil
	}
	beside := *j
	beside.o.Draw = DrawCorners
	beside.o.Progress = nil
	rows := make([]*spreadRow, 1<<len(j.symbols))
	step := j.progress("corners", len(rows))
	var count counter
	err := parallel(len(rows), func(i int) (err error) {
		if err := j.ctx.Err(); err != nil {
			return err
		}
		rows[i], err = beside.trial(int64(i) + 1)
		step(count.next())
		return err
	})
	if err != nil {
		return nil, err
	}
	t := newSpreadTally(&beside, false)
	for _, row := range rows {
		t.add(row)
	}
	return t, nil
}

// levels names the ends of a corner: "L high, C low".
func (j *spreadJob) levels(corner int64) string {
	var out []string
	for i, g := range cornerGrades(corner, len(j.symbols)) {
		out = append(out, j.symbols[i].Name+map[float64]string{0: " low", 1: " high"}[g])
	}
	return strings.Join(out, ", ")
}

// seen makes a worst case of a row.
func (j *spreadJob) seen(row *spreadRow, value Figure, corner bool) *WorstCase {
	if row == nil {
		return nil
	}
	w := &WorstCase{Trial: row.trial, Stable: row.stable, Value: value, Symbols: j.values(row)}
	if corner {
		w.Levels = j.levels(row.trial)
	}
	return w
}

// note says why there are no corners.
func (j *spreadJob) cornersNote() string {
	if n := len(j.symbols); j.o.Draw != DrawCorners && n > fewCornerSymbols {
		return fmt.Sprintf("%d symbols have 2^%d corners; they are looked at beside the trials for up to %d symbols, and by a draw of corners for up to %d", n, n, fewCornerSymbols, mostCornerSymbols)
	}
	return ""
}
