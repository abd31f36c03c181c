package study

import (
	"fmt"
	"math/big"
	"strings"

	"steadytick/loop"
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

// sensitivityStep is how far a symbol is moved to either side for the central differences, as a part of it. Their error is a sixth of
// the third derivative times its square, 1e-7 of a smooth figure, and the error of the figure over twice the step: 1e-8/2e-3 = 5e-6
// for figures of a run, 1e-9 for linear ones.
const sensitivityStep = 1e-3

// sensitivities moves each drawn symbol by itself to either side of its nominal value, the computed ones following:
//
//	d metric/d ln symbol ≈ (m(v·(1 + h)) − m(v·(1 − h))) / (ln(1 + h) − ln(1 − h))
//
// and gives, for each symbol and metric, a hundredth of it: the change with 1 % more of the symbol. Not OK where a figure is missing
// or infinite on either side.
func (j *spreadJob) sensitivities() ([][]Figure, error) {
	n := len(j.symbols)
	rows := make([]*spreadRow, 2*n)
	step := j.progress("sensitivities", len(rows))
	var count counter
	err := parallel(len(rows), func(i int) (err error) {
		row := &spreadRow{}
		values, problems := j.replace(row, func(k int, s loop.Symbol) *big.Rat {
			if k != i/2 {
				return s.Value
			}
			return new(big.Rat).Mul(s.Value, moved[i%2])
		})
		rows[i], err = j.evaluateWith(row, values, problems)
		step(count.next())
		return err
	})
	if err != nil {
		return nil, err
	}
	out := make([][]Figure, n)
	for i := range out {
		out[i] = make([]Figure, len(j.metrics))
		for m, name := range j.metrics {
			out[i][m] = perPercent(j.figure(rows[2*i], name), j.figure(rows[2*i+1], name))
		}
	}
	return out, nil
}

// moved are the factors 1 − h and 1 + h.
var moved = [2]*big.Rat{big.NewRat(999, 1000), big.NewRat(1001, 1000)}

// logStep is ln(1 + h) − ln(1 − h) for the step h = 1e-3.
const logStep = 2 * (sensitivityStep + sensitivityStep*sensitivityStep*sensitivityStep/3) // the next term is 2h⁵/5 = 4e-16

func perPercent(below, above Figure) Figure {
	if !below.OK || !above.OK {
		return Figure{}
	}
	d := (above.Value - below.Value) / logStep / 100
	if d-d != 0 { // of an infinite figure
		return Figure{}
	}
	return Fig(d)
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
