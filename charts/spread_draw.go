package charts

import (
	"math"

	"steadytick/study"
)

// spreadSteps draws the step responses of the loop as written and of the worst cases.
func spreadSteps(cv *canvas, r *study.Spread) (section, error) {
	s := section{ID: "steps"}
	c := r.Curves
	ch := chart{id: "step-response", x: timeAxis(c.Step), y: axis{quantity: "reference r, output y", unit: plain(r.Units.Output)}, series: cv.styled(c.Step)}
	err := cv.add(&s, ch, title(c.StepInput), "", 340)
	return s, err
}

// barsStyle is the outline of a histogram.
var barsStyle = style{Color: blue, Width: 1.8}

// spreadHistogram draws how a figure is distributed, with the figure of the loop as written and the limits.
func spreadHistogram(cv *canvas, b study.SpreadBars) (section, error) {
	s := section{ID: "histogram-" + b.Metric}
	u := plain(b.Unit)
	low, high, ok := span([]study.Curve{b.Bars}, xs, all)
	if !ok {
		return s, nil
	}
	if b.Unit == "s" {
		u = seconds(low, high)
	}
	x, note := limitsInView(axis{quantity: words(b.Metric), unit: u}, b, low, high)
	ch := chart{id: "histogram-" + b.Metric, x: x, y: axis{quantity: "trials"}, marks: histogramMarks(x, b), series: []series{{curve: b.Bars, style: barsStyle}}}
	ch.y.unit = one
	err := cv.add(&s, ch, title(words(b.Metric)), note, 230)
	return s, err
}

// limitsInView sets the ends of the axis: those of the bars, and a limit that lies no further from them than they are wide.
func limitsInView(a axis, b study.SpreadBars, low, high float64) (axis, string) {
	wide := high - low
	from, to := low, high
	note := ""
	for _, l := range b.Limits {
		if l.Value >= low-wide && l.Value <= high+wide {
			from, to = math.Min(from, l.Value), math.Max(to, l.Value)
			continue
		}
		note = limitText(l, a.unit) + " lies outside the picture"
	}
	from, to, a.interval = round(from/a.unit.scale, to/a.unit.scale)
	from, to, a.interval = from*a.unit.scale, to*a.unit.scale, a.interval*a.unit.scale
	a.min, a.max = &from, &to
	return a, note
}

func limitText(l study.LimitLine, u unit) string {
	text := "required " + opSign(l.Op) + " " + formatNumber(l.Value/u.scale)
	if u.name != "" {
		text += " " + u.name
	}
	return text
}

// histogramMarks are lines at the limits and at the figure as written; of two too close together only the first has its word.
func histogramMarks(x axis, b study.SpreadBars) []mark {
	var out []mark
	add := func(at float64, text string) {
		if !finite(at) || at < *x.min || at > *x.max {
			return
		}
		m := mark{onX: true, at: at, text: text}
		for _, have := range out {
			if have.text != "" && math.Abs(at-have.at) < labelApart*(*x.max-*x.min) {
				m.text = ""
			}
		}
		out = append(out, m)
	}
	for _, l := range b.Limits {
		add(l.Value, limitText(l, x.unit))
	}
	if b.Nominal.OK {
		add(b.Nominal.Value, "as written")
	}
	return out
}
