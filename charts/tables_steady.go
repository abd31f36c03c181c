package charts

import (
	"fmt"

	"steadytick/study"
)

// steady is the table of steady errors: a group for each input.
func (t tables) steady() []group {
	n := 0
	for _, col := range t.columns() {
		if col.col != nil {
			n = max(n, len(col.col.Steady))
		}
	}
	out := make([]group, 0, n)
	for i := range n {
		out = append(out, t.steadyOf(i))
	}
	return out
}

// steadyOf is the group of input i.
func (t tables) steadyOf(i int) group {
	var first *study.Steady
	for _, n := range t.columns() {
		if n.col != nil && i < len(n.col.Steady) {
			first = &n.col.Steady[i]
			break
		}
	}
	g := group{Title: inputTitle(*first, t.c.Units)}
	for _, q := range t.steadyQuantities(i) {
		get := q.get
		r := t.row(quantity{q.label, q.hint, q.unit, fmt.Sprintf("steady.%d.%s", i, q.path), func(c *study.Column) study.Figure {
			if i >= len(c.Steady) {
				return study.Figure{}
			}
			return get(c.Steady[i])
		}})
		g.Rows = append(g.Rows, r)
	}
	if first.Asymptote != nil || first.Input != "sine" {
		g.Rows = append(g.Rows, t.asymptote(i)...)
	}
	return g
}

// inputTitle words an input with its size: "ramp, 2 rad/s".
func inputTitle(s study.Steady, u study.Units) string {
	title := s.Input
	if s.Size.OK {
		title += ", " + formatNumber(s.Size.Value) + " " + sizeUnit(s.Input, u)
	}
	if s.FrequencyRadS.OK {
		title += ", " + formatNumber(s.FrequencyRadS.Value) + " rad/s"
	}
	return title
}

// sizeUnit is the unit of an input's size.
func sizeUnit(kind string, u study.Units) string {
	switch kind {
	case "ramp":
		return study.PerSecond(u.Output, 1)
	case "parabola":
		return study.PerSecond(u.Output, 2)
	case "load_step":
		return u.Effort
	}
	return u.Output
}

// steadyQuantity is a figure of a steady error.
type steadyQuantity struct {
	label, hint, unit, path string
	get                     func(study.Steady) study.Figure
}

// steadyQuantities are the figures that are there for every input, and those further ones that either
// column has.
func (t tables) steadyQuantities(i int) []steadyQuantity {
	u := t.c.Units
	out := []steadyQuantity{
		{"tracking error", "r − y", u.Output, "tracking_error", func(s study.Steady) study.Figure { return s.TrackingError }},
		{"loop error", "r − m", u.Output, "loop_error", func(s study.Steady) study.Figure { return s.LoopError }},
		{"worst tracking error", "at and between ticks", u.Output, "worst_error", func(s study.Steady) study.Figure { return s.WorstError }},
		{"ripple", "between ticks, peak to peak", u.Output, "ripple", func(s study.Steady) study.Figure { return s.Ripple }},
	}
	for _, q := range []steadyQuantity{
		{"phase of the error", "against r", "deg", "phase_deg", func(s study.Steady) study.Figure { return s.PhaseDeg }},
		{"peak tracking error", "simulated", u.Output, "peak_tracking_error", func(s study.Steady) study.Figure { return s.PeakError }},
		{"rms tracking error", "simulated", u.Output, "rms_tracking_error", func(s study.Steady) study.Figure { return s.RMSError }},
		{"tracking error at the end", "simulated", u.Output, "end_error", func(s study.Steady) study.Figure { return s.EndError }},
		{"which is at", "", timeUnit, "end_time_s", func(s study.Steady) study.Figure { return s.EndTimeS }},
	} {
		for _, n := range t.columns() {
			if n.col != nil && i < len(n.col.Steady) && q.get(n.col.Steady[i]).OK {
				out = append(out, q)
				break
			}
		}
	}
	return out
}

// asymptote is three rows: the coefficients of g0 + g1·t + g2·t².
func (t tables) asymptote(i int) []row {
	var out []row
	for k := range 3 {
		q := quantity{fmt.Sprintf("asymptote g%d", k), "", study.PerSecond(t.c.Units.Output, k), fmt.Sprintf("steady.%d.asymptote.%d", i, k), func(c *study.Column) study.Figure {
			if i >= len(c.Steady) || c.Steady[i].Asymptote == nil {
				return study.Figure{}
			}
			return c.Steady[i].Asymptote[k]
		}}
		if k == 0 {
			q.hint = "r − y → g0 + g1·t + g2·t²"
		}
		out = append(out, t.row(q))
	}
	return out
}
