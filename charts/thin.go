package charts

import "steadytick/study"

const (
	// maxPoints is drawn of one curve: a chart is at most 1000 pixels wide, and a lowest and a highest
	// point for each two of them, the width of a line, look the same as the whole curve.
	maxPoints = 1000
	// maxDots is drawn of a curve of dots: each is an element of its own in the page, and closer than
	// two pixels they run together.
	maxDots = 500
)

// thin returns the curve with at most limit points (limit ≥ 4): the first, the last, and of each of
// equally long stretches of the rest the lowest and the highest in their order. The curve passed in is
// not changed; a short one is returned as it is.
func thin(c study.Curve, limit int) study.Curve {
	n := len(c.X)
	if n <= limit {
		return c
	}
	stretches := (limit - 2) / 2
	out := study.Curve{Name: c.Name, Step: c.Step, Dots: c.Dots,
		X: make([]float64, 0, limit), Y: make([]float64, 0, limit)}
	keep := func(i int) {
		out.X, out.Y = append(out.X, c.X[i]), append(out.Y, c.Y[i])
	}
	keep(0)
	for s := range stretches {
		from, to := 1+s*(n-2)/stretches, 1+(s+1)*(n-2)/stretches
		low, high := from, from
		for i := from + 1; i < to; i++ {
			if c.Y[i] < c.Y[low] {
				low = i
			}
			if c.Y[i] > c.Y[high] {
				high = i
			}
		}
		keep(min(low, high))
		if low != high {
			keep(max(low, high))
		}
	}
	keep(n - 1)
	return out
}
