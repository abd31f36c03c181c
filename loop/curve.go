package loop

import (
	"fmt"
	"math"
)

// maxPoints bounds a curve.
const maxPoints = 10_000

// points collects a curve; output rises, electric rises or falls throughout.
type points struct{ output, electric []float64 }

// add takes a point. It tells what is wrong with it, "" for nothing, and which of its two figures that is.
func (p *points) add(output, electric float64) (message, expected string, figure int) {
	n := len(p.output)
	if n > 0 {
		step, rise := output-p.output[n-1], electric-p.electric[n-1]
		switch {
		case !(step > 0):
			return "the outputs of the curve do not rise", fmt.Sprintf("an output above %g", p.output[n-1]), 0
		case rise == 0:
			return "the curve is level here: the firmware cannot tell these two outputs apart", "an electric value that differs from the one before", 1
		case n > 1 && (rise > 0) != (p.electric[1] > p.electric[0]):
			return "the curve turns round here: the firmware cannot tell which output it was", p.onward(), 1
		}
		if slope := math.Abs(rise) / step; !(slope >= 1e-200 && slope <= 1e200) {
			return "the slope of the curve is outside the range of numbers", "a magnitude from 1e-200 to 1e200", 1
		}
	}
	p.output, p.electric = append(p.output, output), append(p.electric, electric)
	return "", "", 0
}

// onward is how the electric value goes on.
func (p *points) onward() string {
	last := p.electric[len(p.electric)-1]
	if p.electric[1] > p.electric[0] {
		return fmt.Sprintf("an electric value above %g, as the curve rises", last)
	}
	return fmt.Sprintf("an electric value below %g, as the curve falls", last)
}

// curve reads the curve of the sensor, a list of points or a file of them; nil when there is none or something is wrong.
func (r *reader) curve(n *node) *Curve {
	if n == nil || n.broken {
		return nil
	}
	var p points
	var file string
	var ok bool
	switch n.kind {
	case listNode:
		ok = r.curveList(&p, n)
	case mapNode:
		s, broken := r.section(n, "curve", "file")
		if broken {
			return nil
		}
		file, ok = r.curveFile(&p, s.need("file", "file: a CSV file with the header output,electric"))
	default:
		r.report(n.at, fmt.Sprintf("curve is %s here", n.kind), "points such as [[0, 3.1], [25, 2.4]], or {file: ntc.csv}")
	}
	if !ok {
		return nil
	}
	return &Curve{File: file, Output: p.output, Electric: p.electric}
}

// curveList reads points [output, electric].
func (r *reader) curveList(p *points, n *node) bool {
	if len(n.items) < 2 || len(n.items) > maxPoints {
		r.report(n.at, fmt.Sprintf("a curve of %d points", len(n.items)), fmt.Sprintf("2 to %d points [output, electric]", maxPoints))
		return false
	}
	good := true
	for _, item := range n.items {
		c, ok := r.constants(item, "a point of the curve", 2)
		if ok && len(c) != 2 {
			r.report(item.at, fmt.Sprintf("a point of the curve with %s number%s", numberWord(len(c)), plural(len(c))), "[output, electric]")
			ok = false
		}
		if good = good && ok; !good {
			continue // faults of single points are told together, the order only of points that stand
		}
		output, _ := c[0].Float64()
		electric, _ := c[1].Float64()
		if message, expected, figure := p.add(output, electric); message != "" {
			r.report(item.items[figure].at, message, expected)
			return false
		}
	}
	return good
}

// curveFile reads points from a CSV file.
func (r *reader) curveFile(p *points, n *node) (name string, ok bool) {
	const header = "output,electric"
	name, src, ok := r.openCSV(n, header)
	if !ok {
		return name, false
	}
	shape := csvShape{headers: []string{header}, least: 2, most: maxPoints, row: "the output and what the converter sees there"}
	_, ok = r.csv(name, src, shape, func(v []float64) (message, expected string) {
		message, expected, _ = p.add(v[0], v[1])
		return message, expected
	})
	return name, ok
}
