package study

import (
	"slices"

	"steadytick/sim"
)

// instants are all the instants of the runs up to the end, each once: the continuous
// loop is computed at them, so that its difference from each run needs no interpolation.
func instants(runs []outcome, end float64) []float64 {
	times := []float64{0, end}
	for _, x := range runs {
		if x.run.trace == nil {
			continue
		}
		for _, t := range x.run.trace.T {
			if t <= end {
				times = append(times, t)
			}
		}
	}
	slices.Sort(times)
	return slices.Compact(times)
}

// addedErrors is what sampling and delay add to the tracking error: y of the continuous loop, the
// first of runs, less y of each variant.
func addedErrors(runs []outcome) []Curve {
	var out []Curve
	for _, x := range runs[1:] {
		if t := x.run.trace; t != nil {
			out = append(out, difference(x.row, t, runs[0].run.trace))
		}
	}
	return out
}

// difference is twin.Y − t.Y at the instants of t, as far as both go and the run is shown.
func difference(row DegradeRow, t, twin *sim.Trace) Curve {
	c := Curve{Name: row.Variant}
	k := 0
	for i, at := range t.T[:shownPoints(t.R, t.Y, row.Stable)] {
		for k < len(twin.T) && twin.T[k] < at {
			k++
		}
		if k == len(twin.T) {
			break
		}
		if twin.T[k] == at {
			c.X, c.Y = append(c.X, at), append(c.Y, twin.Y[k]-t.Y[i])
		}
	}
	return c
}
