package study

import (
	"math"
	"math/big"

	"steadytick/loop"
)

// sensitivityStep is how far a symbol is moved to either side for the central differences, as a part of it.
const sensitivityStep = 1e-3

// moved are the factors on the two sides, 1 − h and its inverse, so that they lie equally far from 1 in ln symbol.
var moved = [2]*big.Rat{big.NewRat(999, 1000), big.NewRat(1000, 999)}

// sensitivities moves each drawn symbol by itself to either side of its nominal value, the computed ones following:
//
//	d metric/d ln symbol ≈ (m(v/(1 − h)) − m(v·(1 − h))) / (−2·ln(1 − h))     h the step
//
// and gives, for each symbol and metric, a hundredth of it: the change with 1 % more of the symbol. Their error is h²/6 = 1.7e-7 times the
// third derivative by ln symbol, and that of the figure over 2h: 5e-6 of it for figures of a run, good to 1e-8, and below 1e-8 for linear
// ones. Not OK where a figure is missing or infinite on either side.
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

func perPercent(below, above Figure) Figure {
	if !below.OK || !above.OK || math.IsInf(below.Value, 0) || math.IsInf(above.Value, 0) {
		return Figure{}
	}
	return Fig((above.Value - below.Value) / (-2 * math.Log1p(-sensitivityStep)) / 100)
}
