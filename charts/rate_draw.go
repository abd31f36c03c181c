package charts

import (
	"math"
	"strings"

	"steadytick/study"
)

// rateDrawing draws the charts of a search for rates; all share the axis of rates.
type rateDrawing struct {
	r     *study.Rate
	x     axis
	marks []mark
}

// The bars of the intersection and the strokes of the timer's rates.
var (
	togetherStyle = style{Color: ink, Width: 11}
	timerStyle    = style{Color: rust, Width: 1}
)

func newRateDrawing(r *study.Rate) rateDrawing {
	low, high := r.SearchedHz[0], r.SearchedHz[1]
	d := rateDrawing{r: r, x: axis{quantity: "sample rate", unit: plain("Hz"), log: true, min: &low, max: &high}}
	d.marks = d.rateMarks()
	return d
}

// labelApart is how far apart two words above a chart must be, as a part of its width: at 390 pixels a word is nearly half of it.
const labelApart = 0.45

// rateMarks are lines at the pick, the file's rate and the slowest rate; of two that stand too close together only the first has its word.
func (d rateDrawing) rateMarks() []mark {
	type line struct {
		at   float64
		text string
	}
	var lines []line
	if p := d.r.Pick; p != nil {
		lines = append(lines, line{p.RateHz, "pick"})
	}
	lines = append(lines, line{d.r.FileRateHz, "file"})
	if p := d.r.Pick; p != nil && p.SlowestHz.OK {
		lines = append(lines, line{p.SlowestHz.Value, "slowest"})
	}
	var out []mark
	width := math.Log(*d.x.max / *d.x.min)
	for _, l := range lines {
		if !finite(l.at) || l.at < *d.x.min || l.at > *d.x.max {
			continue
		}
		m := mark{onX: true, at: l.at, text: l.text + " " + formatNumber(l.at) + " Hz"}
		for _, have := range out {
			if have.text != "" && math.Abs(math.Log(l.at/have.at)) < labelApart*width {
				m.text = ""
			}
		}
		out = append(out, m)
	}
	return out
}

// bars lays rows of intervals out as a category chart: a thin line over the range, a thick one where the rates are met.
func (d rateDrawing) bars(id, quantity string, rows []study.RateBar, more ...series) chart {
	names := make([]string, len(rows))
	tried := study.Curve{Name: "rates looked at"}
	for i, row := range rows {
		names[i] = row.Requirement
		tried.X, tried.Y = append(tried.X, *d.x.min, *d.x.max), append(tried.Y, float64(i), float64(i))
	}
	marks := append([]mark{}, d.marks...)
	for i := range marks { // long names leave too little width for a second word
		if i > 0 {
			marks[i].text = ""
		}
	}
	all := []series{{curve: tried, style: triedStyle, gaps: true}}
	return chart{id: id, x: d.x, y: axis{quantity: quantity, categories: names}, marks: marks, series: append(all, more...)}
}

func (d rateDrawing) window(cv *canvas) (section, error) {
	s := section{ID: "rate-window"}
	c := d.r.Curves
	rows := append([]study.RateBar{}, c.Bars...)
	met := windowCurve(rows)
	rows = append(rows, study.RateBar{Requirement: "all together", Intervals: c.Window})
	together := study.Curve{Name: "all together"}
	for _, v := range c.Window {
		y := float64(len(rows) - 1)
		together.X, together.Y = append(together.X, v[0], v[1]), append(together.Y, y, y)
	}
	more := []series{{curve: met, style: metStyle, gaps: true}, {curve: together, style: togetherStyle, gaps: true}}
	if len(c.TimerHz) > 0 {
		timer := study.Curve{Name: "rates the timer makes"}
		for _, f := range c.TimerHz {
			timer.X, timer.Y = append(timer.X, f, f), append(timer.Y, float64(len(rows)), float64(len(rows)))
		}
		rows = append(rows, study.RateBar{Requirement: "timer"})
		more = append(more, series{curve: timer, style: timerStyle, gaps: true})
	}
	for i := len(more) - 1; i >= 0; i-- {
		if len(more[i].curve.X) == 0 {
			more = append(more[:i], more[i+1:]...)
		}
	}
	ch := d.bars("window-chart", "requirement", rows, more...)
	for _, v := range c.Window { // the ends of the window over all rows
		for _, at := range v {
			if at > *d.x.min && at < *d.x.max {
				ch.marks = append(ch.marks[:len(ch.marks):len(ch.marks)], mark{onX: true, at: at})
			}
		}
	}
	err := cv.add(&s, ch, "Which rates meet each requirement", "Lines: the pick, the file's rate, the ends of the window.", 120+34*len(rows))
	return s, err
}

func (d rateDrawing) mapWindows(cv *canvas) (section, error) {
	s := section{ID: "map-window"}
	rows := d.r.Curves.Maps
	if len(rows) == 0 {
		return s, nil
	}
	var more []series
	if met := windowCurve(rows); len(met.X) > 0 {
		met.Name = "all together"
		more = append(more, series{curve: met, style: togetherStyle, gaps: true})
	}
	err := cv.add(&s, d.bars("map-chart", "controller map", rows, more...), "The window under each map", "", 120+34*len(rows))
	return s, err
}

// overRate draws the chosen figures, each a chart with a curve a map and its limits.
func (d rateDrawing) overRate(cv *canvas, id string, chosen func(string) bool) (section, error) {
	s := section{ID: id + "-over-rate"}
	for _, o := range d.r.Curves.OverRate {
		if !chosen(o.Metric) {
			continue
		}
		y := axis{quantity: words(o.Metric), unit: plain(o.Unit)}
		if !isMargin(o.Metric) { // margins go through zero, errors over decades
			y.wide(o.Curves)
		}
		if y.unit.name == "s" {
			low, high, _ := span(o.Curves, ys, all)
			y.unit = seconds(low, high)
		}
		ch := chart{id: "rate-" + o.Metric, x: d.x, y: y, series: cv.styled(o.Curves), marks: d.marks[:len(d.marks):len(d.marks)]}
		for _, l := range o.Limits {
			if finite(l.Value) && (!y.log || l.Value > 0) {
				ch.marks = append(ch.marks, mark{at: l.Value, text: "required " + opSign(l.Op) + " " + formatNumber(l.Value/y.unit.scale) + " " + y.unit.name})
			}
		}
		if err := cv.add(&s, ch, title(words(o.Metric)), "", 260); err != nil {
			return s, err
		}
	}
	return s, nil
}

// wide makes the axis logarithmic where positive curves span more than a factor of 100: only that shows both ends.
func (a *axis) wide(curves []study.Curve) {
	if low, high, ok := span(curves, ys, all); ok && low > 0 && high > 100*low {
		low, high = math.Pow(10, math.Floor(math.Log10(low))), math.Pow(10, math.Ceil(math.Log10(high)))
		a.log, a.min, a.max = true, &low, &high
	}
}

func (d rateDrawing) folding(cv *canvas) (section, error) {
	s := section{ID: "fold"}
	ch := chart{id: "folding-chart", x: d.x, y: axis{quantity: "lands at", unit: plain("Hz")}, series: cv.styled(d.r.Curves.Folding), marks: d.marks}
	err := cv.add(&s, ch, "Where each vibration lands among the samples", "", 300)
	return s, err
}

// title begins a name with a capital.
func title(s string) string {
	if s == "" {
		return s
	}
	return strings.ToUpper(s[:1]) + s[1:]
}
