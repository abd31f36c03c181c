package study

import (
	"math"
)

// shownGrowth: the response of an unstable loop is drawn until it exceeds this many
// times the largest reference seen (or 1 for none), so that the stable ones stay legible.
const shownGrowth = 4

// add draws one run into the curves of its input. The first sampled run also gives its
// ticks as dots; the effort of sampled runs is a staircase.
func (c *InputCurves) add(r run, name string, sampled, stable bool) {
	t := r.trace
	first := sampled && len(c.Response) <= 2
	if len(c.Response) == 0 {
		c.Response = append(c.Response, Curve{Name: "reference", X: t.T, Y: t.R})
	}
	n := shownPoints(t.R, t.Y, stable)
	err := make([]float64, n)
	for i := range err {
		err[i] = t.R[i] - t.Y[i]
	}
	c.Response = append(c.Response, Curve{Name: name, X: t.T[:n], Y: t.Y[:n]})
	c.Error = append(c.Error, Curve{Name: name, X: t.T[:n], Y: err})
	if first && len(t.TickT) > 0 {
		k := shownPoints(t.TickR, t.TickY, stable)
		dots := make([]float64, k)
		for i := range dots {
			dots[i] = t.TickR[i] - t.TickY[i]
		}
		c.Error = append(c.Error, Curve{Name: name + ", at the ticks", X: t.TickT[:k], Y: dots, Dots: true})
	}
	c.Effort = append(c.Effort, Curve{Name: name, X: t.T[:n], Y: t.U[:n], Step: sampled})
}

// shownPoints is how many leading points are shown: all of a stable run, else those within the
// bound of growth.
func shownPoints(r, y []float64, stable bool) int {
	if stable {
		return len(y)
	}
	top := 0.0
	for _, v := range r {
		top = math.Max(top, math.Abs(v))
	}
	if top == 0 {
		top = 1
	}
	for i, v := range y {
		if !(math.Abs(v) <= shownGrowth*top) || math.IsInf(v, 0) {
			return i
		}
	}
	return len(y)
}

// addCurves completes the curves that need no simulation.
func (c *Compare) addFrequencyAndPoles(cont, sampled *analyzed) {
	list := []*analyzed{sampled}
	if cont != nil {
		list = []*analyzed{cont, sampled}
	}
	c.Curves.addFrequency(list)
	c.Curves.addPoles(list)
}
