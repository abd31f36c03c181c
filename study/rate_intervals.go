package study

import (
	"fmt"
	"math"
	"strings"
)

// windows finds the intervals of every constraint and what they have in common.
func (j *rateJob) windows() error {
	j.spans = make([][]rateSpan, len(j.list))
	// Stability first: bounds of simulated figures lean on it.
	var err error
	if j.spans[0], err = j.scan.spans(j.list[0]); err != nil {
		return err
	}
	if err := j.scan.lookInside(j.spans[0]); err != nil {
		return err
	}
	step := j.progress("bounds", len(j.list))
	var count counter
	err = parallel(len(j.list)-1, func(i int) error {
		if !j.judges(j.list[i+1]) {
			return nil
		}
		s, err := j.scan.spans(j.list[i+1])
		j.spans[i+1] = s
		step(count.next())
		return err
	})
	if err != nil {
		return err
	}
	j.window = []rateSpan{{0, math.Inf(1)}}
	for i, c := range j.list {
		w, err := j.rateWindow(c, j.spans[i])
		if err != nil {
			return err
		}
		if w.Judged {
			j.window = meet(j.window, j.spans[i])
		} else {
			j.r.warn("requirement_not_judged", "requirement %q cannot be judged at any rate: %s; it is left out of the window", c.text, w.Note)
		}
		j.r.Windows = append(j.r.Windows, w)
	}
	for _, q := range j.unjudged {
		note := "rate does not evaluate this metric"
		if q.Name == "limit_cycle" {
			note = "a limit cycle is searched for at one rate: the pick shows it, or compare --rate"
		}
		j.r.warn("requirement_not_judged", "requirement %q cannot be judged: %s; it is left out of the window", q.Text, note)
		j.r.Windows = append(j.r.Windows, RateWindow{Requirement: q.Text, Name: q.Name, Intervals: []Interval{}, Note: note,
			Unit: requirementUnit(q.Name, j.r.Units)})
	}
	j.r.WindowHz = intervalsOf(j.window)
	return nil
}

// intervalsOf turns spans into results.
func intervalsOf(spans []rateSpan) []Interval {
	out := []Interval{}
	for _, s := range spans {
		v := Interval{Low: Fig(s.low), High: Fig(s.high)}
		v.Low.OK, v.High.OK = s.low > 0, !math.IsInf(s.high, 1)
		out = append(out, v)
	}
	return out
}

// rateWindow is the row of one constraint.
func (j *rateJob) rateWindow(c *constraint, spans []rateSpan) (RateWindow, error) {
	w := RateWindow{Requirement: c.text, Name: c.name, Intervals: intervalsOf(spans), Implied: c.implied, Unit: c.unit, Judged: j.judges(c)}
	if !w.Judged {
		w.Note = j.reasonMissing(c)
		return w, nil
	}
	if c.name == "runs" {
		w.Note = j.reasonNotRunning()
		return w, nil
	}
	w.Unchanged, w.Value = j.unchanged(c)
	switch {
	case w.Unchanged && len(spans) > 0:
		w.Note = fmt.Sprintf("no rate changes it: %s at every rate at which the loop is stable", withUnit(w.Value, c.unit))
	case w.Unchanged && math.IsInf(w.Value.Value, 0) && c.op[0] == '<':
		w.Note = "no rate changes it: infinite at every rate at which the loop is stable; the loop needs another integrator"
	case w.Unchanged:
		w.Note = fmt.Sprintf("no rate changes it: %s at every rate at which the loop is stable; change the controller or the requirement", withUnit(w.Value, c.unit))
	case len(spans) == 0 && c.name == "stable":
		w.Note = "unstable at every rate looked at"
	case len(spans) == 0:
		best, hz, err := j.best(c, []rateSpan{{0, math.Inf(1)}})
		if err != nil {
			return w, err
		}
		w.Best, w.BestHz = best, hz
		w.Note = "no rate looked at meets it"
		if best.OK {
			w.Note = fmt.Sprintf("no rate meets it; the best is %s at %s", withUnit(best, c.unit), hertzText(hz.Value))
		}
	case len(spans) > 1:
		w.Note = fmt.Sprintf("%d separate intervals", len(spans))
	}
	if gap := j.without(c); gap != "" {
		w.Note = strings.TrimPrefix(w.Note+"; "+gap, "; ")
	}
	return w, nil
}

// without says where a constraint that has a figure at some rates has none at others though the loop is stable there; such a rate counts
// as one that does not meet it.
func (j *rateJob) without(c *constraint) string {
	low, high, n := math.Inf(1), math.Inf(-1), 0
	for _, s := range j.scan.samples(c) {
		if math.IsNaN(s.slack) {
			low, high = math.Min(low, s.hz), math.Max(high, s.hz)
			n++
		}
	}
	switch {
	case n == 0:
		return ""
	case c.needs.step:
		return fmt.Sprintf("no figure between %s and %s, where the step response does not settle in the longest run: counted as not met", hertzText(low), hertzText(high))
	}
	return fmt.Sprintf("no figure at %d of the rates between %s and %s: counted as not met", n, hertzText(low), hertzText(high))
}

// withUnit writes a figure with its unit.
func withUnit(f Figure, unit string) string {
	text := number(f.Value)
	if math.IsInf(f.Value, 0) {
		text = "infinite"
	}
	if unit == "" || math.IsInf(f.Value, 0) {
		return text
	}
	return text + " " + unit
}

// sameFigure: figures that differ by less, relative, at every rate are one figure: they are good to 1e-11.
const sameFigure = 1e-9

// unchanged tells whether the figure of a constraint is the same at every rate looked at, and which.
func (j *rateJob) unchanged(c *constraint) (bool, Figure) {
	if c.figure == nil || c.needs.any() {
		return false, Figure{}
	}
	low, high, n := math.Inf(1), math.Inf(-1), 0
	for _, p := range j.scan.points {
		if !p.stable() {
			continue
		}
		f, why := c.figure(p)
		if !f.OK || why != "" {
			return false, Figure{}
		}
		low, high = math.Min(low, f.Value), math.Max(high, f.Value)
		n++
	}
	if n < 3 || !(high == low || high-low <= sameFigure*math.Max(math.Abs(low), math.Abs(high))) {
		return false, Figure{}
	}
	return true, Fig(high)
}

// best is the figure of a constraint that comes nearest to its limit, or lies furthest inside it, within spans, and its rate.
func (j *rateJob) best(c *constraint, within []rateSpan) (best, hz Figure, err error) {
	top := sample{0, math.Inf(-1)}
	list := j.scan.samples(c)
	for i, s := range list {
		if inSpans(within, s.hz) && !math.IsNaN(s.slack) && s.slack > top.slack {
			top = s
			if i > 0 && i+1 < len(list) {
				if top, err = j.climb(c, list[i-1], s, list[i+1], within); err != nil {
					return best, hz, err
				}
			}
		}
	}
	for _, s := range within { // the ends of the interval may be better than any rate looked at
		for _, end := range [2]float64{s.low, s.high} {
			if end <= 0 || math.IsInf(end, 1) {
				continue
			}
			v, err := j.scan.slackAt(c, end)
			if err != nil {
				return best, hz, err
			}
			if v > top.slack {
				top = sample{end, v}
			}
		}
	}
	if math.IsInf(top.slack, -1) {
		return best, hz, nil
	}
	p, err := j.scan.at(top.hz, c.needs)
	if err != nil {
		return best, hz, err
	}
	f, _ := c.figure(p)
	return f, Fig(top.hz), nil
}

func inSpans(list []rateSpan, hz float64) bool {
	for _, s := range list {
		if hz >= s.low && hz <= s.high {
			return true
		}
	}
	return false
}

// climb narrows the place of the greatest slack between three samples to 1e-5 of the rate.
func (j *rateJob) climb(c *constraint, a, b, d sample, within []rateSpan) (sample, error) {
	const golden = 0.3819660112501051
	for d.hz-a.hz > 1e-5*b.hz {
		x := b.hz + golden*(d.hz-b.hz)
		if b.hz-a.hz > d.hz-b.hz {
			x = b.hz - golden*(b.hz-a.hz)
		}
		s, err := j.scan.slackAt(c, x)
		if err != nil {
			return b, err
		}
		n := sample{x, s}
		better := s > b.slack && inSpans(within, x)
		switch {
		case better && x > b.hz:
			a, b = b, n
		case better:
			d, b = b, n
		case x > b.hz:
			d = n
		default:
			a = n
		}
	}
	return b, nil
}

// reasonMissing says why a constraint has no figure at any rate.
func (j *rateJob) reasonMissing(c *constraint) string {
	for _, p := range j.scan.points {
		if !p.stable() || !p.has(c.needs) {
			continue
		}
		if f, why := c.figure(p); !f.OK || why != "" {
			return why
		}
	}
	return "it has no figure"
}

// reasonNotRunning says why the loop cannot run at some rates.
func (j *rateJob) reasonNotRunning() string {
	for _, p := range j.scan.points {
		if p.why != "" {
			return fmt.Sprintf("at %s: %s", hertzText(p.hz), p.why)
		}
	}
	return ""
}
