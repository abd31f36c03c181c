package charts

import (
	"fmt"
	"math"
	"strings"

	"steadytick/study"
)

// section is a run of charts that share one key.
type section struct {
	ID     string
	Title  string
	Keys   []key
	Charts []chartBox
}

// key names one curve of a section.
type key struct {
	Name  string
	Style style
	Dots  bool
}

// chartBox is the place of one chart in the page.
type chartBox struct {
	ID, Title, Note string
	Height          int // pixels
}

// canvas collects the drawings of a report.
type canvas struct {
	styles   styles
	drawings []drawing
}

// add draws the chart into the section; a chart without any point is left out.
func (cv *canvas) add(s *section, c chart, title, note string, height int) error {
	points := 0
	for _, sr := range c.series {
		points += len(sr.curve.X)
	}
	if points == 0 {
		return nil
	}
	c.group = s.ID
	d, err := c.draw()
	if err != nil {
		return err
	}
	cv.drawings = append(cv.drawings, d)
	s.Charts = append(s.Charts, chartBox{ID: c.id, Title: title, Note: note, Height: height})
	for _, sr := range c.series {
		s.addKey(key{Name: sr.curve.Name, Style: sr.style, Dots: sr.curve.Dots})
	}
	return nil
}

func (s *section) addKey(k key) {
	for _, have := range s.Keys {
		if have.Name == k.Name {
			return
		}
	}
	s.Keys = append(s.Keys, k)
}

// styled gives each curve its style. Empty curves are left out.
func (cv *canvas) styled(curves []study.Curve) []series {
	var out []series
	for i, c := range curves {
		if len(c.X) == 0 && len(c.Y) == 0 {
			continue
		}
		s := series{curve: c, index: i}
		if c.Dots {
			s.style = cv.styles.ofDots(c.Name)
		} else {
			s.style = cv.styles.of(c.Name)
		}
		out = append(out, s)
	}
	return out
}

// span is the range of x or y over curves that keep returns true for; ok is false when there is none.
func span(curves []study.Curve, values func(study.Curve) []float64, keep func(string) bool) (low, high float64, ok bool) {
	low, high = math.Inf(1), math.Inf(-1)
	for _, c := range curves {
		if !keep(c.Name) {
			continue
		}
		for _, v := range values(c) {
			if finite(v) {
				low, high = min(low, v), max(high, v)
			}
		}
	}
	return low, high, low <= high
}

func xs(c study.Curve) []float64 { return c.X }
func ys(c study.Curve) []float64 { return c.Y }
func all(string) bool            { return true }

// round returns the range widened to whole steps of 1, 2 or 5 times a power of ten, about six of them.
func round(low, high float64) (float64, float64, float64) {
	if !(high > low) {
		pad := math.Max(math.Abs(low)*0.1, 1e-12)
		low, high = low-pad, high+pad
	}
	step := math.Pow(10, math.Floor(math.Log10((high-low)/6)))
	for _, k := range []float64{1, 2, 5, 10} {
		if (high-low)/(k*step) <= 7 {
			step *= k
			break
		}
	}
	return math.Floor(low/step) * step, math.Ceil(high/step) * step, step
}

// inputs draws, for each input, response, tracking error and effort over time.
func (cv *canvas) inputs(c *study.Compare) ([]section, error) {
	var out []section
	for i, in := range c.Curves.Inputs {
		s := section{ID: fmt.Sprintf("input-%d", i+1), Title: in.Input}
		stable := stableIn(c, in.Input)
		for _, p := range []struct {
			name, title, quantity, unit string
			curves                      []study.Curve
			height                      int
		}{
			{"response", "Response", "reference r, output y", c.Units.Output, in.Response, 320},
			{"error", "Tracking error", "tracking error r − y", c.Units.Output, in.Error, 360},
			{"added", "Error added by sampling and delay", "continuous y − sampled y", c.Units.Output, in.Added, 300},
			{"effort", "Effort", "effort u", c.Units.Effort, in.Effort, 260},
		} {
			ch := chart{id: s.ID + "-" + p.name, series: cv.styled(p.curves), x: timeAxis(p.curves),
				y: axis{quantity: p.quantity, unit: plain(p.unit)}}
			if ch.y.limitTo(p.curves, stable) {
				p.title += " (unstable variants leave the picture)"
			}
			if err := cv.add(&s, ch, p.title, "", p.height); err != nil {
				return nil, err
			}
		}
		out = append(out, s)
	}
	return out, nil
}

// stableIn tells of a curve name whether its variant is stable under the input. A name that is no
// variant's (the dots at the ticks) goes with the longest variant name that it begins with.
func stableIn(c *study.Compare, input string) func(string) bool {
	known := map[string]bool{}
	if c.Continuous != nil {
		known["continuous"] = c.Continuous.Stable
	}
	if c.Sampled != nil {
		known["sampled"] = c.Sampled.Stable
	}
	for _, r := range c.Degrade {
		if r.Input == input {
			known[r.Variant] = r.Stable
		}
	}
	return func(name string) bool {
		if stable, ok := known[name]; ok {
			return stable
		}
		best, stable := "", true
		for n, st := range known {
			if len(n) > len(best) && strings.HasPrefix(name, n) {
				best, stable = n, st
			}
		}
		return stable
	}
}

// limitTo keeps the axis to the stable curves where an unstable one would flatten them: where it is
// more than three times as tall.
func (a *axis) limitTo(curves []study.Curve, stable func(string) bool) bool {
	low, high, ok := span(curves, ys, stable)
	least, most, _ := span(curves, ys, all)
	if !ok || most-least <= 3*(high-low) {
		return false
	}
	low, high, a.interval = round(low-0.25*(high-low), high+0.25*(high-low))
	a.min, a.max = &low, &high
	return true
}

func timeAxis(curves []study.Curve) axis {
	low, high, ok := span(curves, xs, all)
	if !ok {
		return axis{quantity: "time", unit: plain("s")}
	}
	return axis{quantity: "time", unit: seconds(low, high), min: &low, max: &high}
}

// logAxis spans the curves on a logarithmic axis.
func logAxis(quantity, unitName string, curves []study.Curve) axis {
	a := axis{quantity: quantity, unit: plain(unitName), log: true}
	if low, high, ok := span(curves, xs, all); ok && low > 0 && high > low {
		a.min, a.max = &low, &high
	}
	return a
}
