package charts

import "steadytick/study"

// rates draws margins and errors over the sample rate and the rate window: three sections, for their
// curves have nothing in common. They are no variants, so each section starts with the first styles.
func (cv *canvas) rates(c *study.Compare) ([]section, error) {
	var out []section
	every := append(append([]study.Curve{}, c.Curves.PhaseMarginOverRate...), c.Curves.ErrorOverRate...)
	every = append(every, windowCurve(c.Curves.RateWindow))
	x := logAxis("sample rate", "Hz", every)
	var marks []mark
	if r := c.Curves.RateHz; r > 0 && finite(r) {
		marks = append(marks, mark{onX: true, at: r, text: "this loop, " + formatNumber(r) + " Hz"})
	}
	for _, draw := range []func(*study.Compare, axis, []mark) (section, error){cv.marginOverRate, cv.errorOverRate, cv.rateWindow} {
		s, err := draw(c, x, marks[:len(marks):len(marks)])
		if err != nil {
			return nil, err
		}
		if len(s.Charts) > 0 {
			out = append(out, s)
		}
	}
	return out, nil
}

func (cv *canvas) marginOverRate(c *study.Compare, x axis, marks []mark) (section, error) {
	s := section{ID: "margin-rate"}
	for _, r := range c.Requirements {
		if r.Name == "phase_margin" && finite(r.Limit) {
			marks = append(marks, mark{at: r.Limit, text: "required " + opSign(r.Op) + " " + formatNumber(r.Limit) + " deg"})
		}
	}
	ch := chart{id: "margin-over-rate", x: x, y: axis{quantity: "phase margin", unit: plain("deg")},
		series: (&canvas{}).styled(c.Curves.PhaseMarginOverRate), marks: marks}
	err := cv.add(&s, ch, "Phase margin over the sample rate", "", 320)
	return s, err
}

func (cv *canvas) errorOverRate(c *study.Compare, x axis, marks []mark) (section, error) {
	s := section{ID: "error-rate"}
	y := axis{quantity: "steady tracking error", unit: plain(c.Units.Output)}
	y.wide(c.Curves.ErrorOverRate)
	ch := chart{id: "error-over-rate", x: x, y: y, series: (&canvas{}).styled(c.Curves.ErrorOverRate), marks: marks}
	err := cv.add(&s, ch, "Steady tracking error over the sample rate", "", 320)
	return s, err
}

// The bars of the rate window: thick where the requirement is met, a thin line over the rates tried.
var (
	metStyle   = style{Color: blue, Width: 11}
	triedStyle = style{Color: grey, Width: 1}
)

func (cv *canvas) rateWindow(c *study.Compare, x axis, marks []mark) (section, error) {
	s := section{ID: "window"}
	if len(c.Curves.RateWindow) == 0 || x.min == nil {
		return s, nil
	}
	names := make([]string, len(c.Curves.RateWindow))
	met, tried := windowCurve(c.Curves.RateWindow), study.Curve{Name: "rates tried"}
	for i, bar := range c.Curves.RateWindow {
		names[i] = bar.Requirement
		tried.X, tried.Y = append(tried.X, *x.min, *x.max), append(tried.Y, float64(i), float64(i))
	}
	ch := chart{id: "rate-window", x: x, y: axis{quantity: "requirement", categories: names}, marks: marks,
		series: []series{{curve: tried, style: triedStyle, gaps: true}, {curve: met, style: metStyle, gaps: true}}}
	err := cv.add(&s, ch, "Rate window", "Which of the rates tried meet each requirement.", 120+38*len(names))
	return s, err
}

// windowCurve lays the intervals out as pairs of points: x from low to high, y the row's number.
func windowCurve(bars []study.RateBar) study.Curve {
	c := study.Curve{Name: "met"}
	for i, bar := range bars {
		for _, v := range bar.Intervals {
			c.X, c.Y = append(c.X, v[0], v[1]), append(c.Y, float64(i), float64(i))
		}
	}
	return c
}
