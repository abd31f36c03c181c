package charts

import (
	"fmt"

	"steadytick/study"
)

// builtQuantity is a figure that the loop as built has too.
type builtQuantity struct {
	quantity
	builtPath string
	built     func(*study.AsBuilt) study.Figure
}

// builtRow is row with a third cell.
func (t tables) builtRow(q builtQuantity) row {
	b := t.c.AsBuilt
	if b == nil || q.built == nil {
		return t.row(q.quantity)
	}
	v := q.built(b)
	values := []study.Figure{v}
	for _, n := range t.columns() {
		if n.col != nil {
			values = append(values, q.get(n.col))
		}
	}
	u := plain(q.unit)
	if q.unit == timeUnit {
		u = secondsOf(values...)
	}
	r := row{Label: q.label, Hint: q.hint, Unit: u.name}
	for _, n := range t.columns() {
		f := study.Figure{}
		if n.col != nil {
			f = q.get(n.col)
		}
		r.Cells = append(r.Cells, t.cell(n, q.path, f, u))
	}
	r.Cells = append(r.Cells, cell{Figure: show("as_built."+q.builtPath, v, u)})
	return r
}

func (t tables) builtRows(all []builtQuantity) []row {
	out := make([]row, len(all))
	for i, q := range all {
		out[i] = t.builtRow(q)
	}
	return out
}

// three fills up the rows of a table with three columns.
func (t tables) three(groups []group) []group {
	if t.c.AsBuilt == nil {
		return groups
	}
	for _, g := range groups {
		for i := range g.Rows {
			for len(g.Rows[i].Cells) < 3 {
				g.Rows[i].Cells = append(g.Rows[i].Cells, cell{})
			}
		}
	}
	return groups
}

// stepQuantities are the step figures, of the loop as built too.
func stepQuantities(u study.Units) []builtQuantity {
	of := func(label, hint, unit, path string, f func(*study.Transient) study.Figure) builtQuantity {
		return builtQuantity{quantity{label, hint, unit, "transient." + path, func(c *study.Column) study.Figure { return f(&c.Transient) }},
			"transient." + path, func(b *study.AsBuilt) study.Figure { return f(&b.Transient) }}
	}
	return []builtQuantity{
		of("overshoot", "", "%", "overshoot_percent", func(t *study.Transient) study.Figure { return t.OvershootPercent }),
		of("rise time", "10 to 90 %", timeUnit, "rise_time_s", func(t *study.Transient) study.Figure { return t.RiseTimeS }),
		of("settling time", "", timeUnit, "settling_time_s", func(t *study.Transient) study.Figure { return t.SettlingTimeS }),
		of("peak time", "", timeUnit, "peak_time_s", func(t *study.Transient) study.Figure { return t.PeakTimeS }),
		of("peak effort", "", u.Effort, "peak_effort", func(t *study.Transient) study.Figure { return t.PeakEffort }),
		of("recovery", "after the limit", timeUnit, "recovery_time_s", func(t *study.Transient) study.Figure { return t.RecoveryTimeS }),
	}
}

// wordQuantities come from the words and the noise of the file.
func wordQuantities(u study.Units) []builtQuantity {
	return []builtQuantity{
		{quantity{"effort noise", "rms", u.Effort, "effort_noise", func(c *study.Column) study.Figure { return c.EffortNoise }},
			"effort_noise", func(b *study.AsBuilt) study.Figure { return b.Effort }},
		{quantity{"output noise", "rms", u.Output, "output_noise", func(c *study.Column) study.Figure { return c.OutputNoise }},
			"output_noise", func(b *study.AsBuilt) study.Figure { return b.Output }},
		{quantity{"stuck error", "at most", u.Output, "stuck_error", func(c *study.Column) study.Figure { return c.StuckError }},
			"rest.stuck_error", func(b *study.AsBuilt) study.Figure {
				if b.Rest == nil {
					return study.Figure{}
				}
				return b.Rest.StuckError
			}},
	}
}

// builtItem is one line about the loop as built alone.
type builtItem struct {
	Label, Unit string
	Figure      figure
}

// builtGroup is such lines under a heading.
type builtGroup struct {
	Title string
	Rows  []builtItem
}

// built is everything else about the loop as built.
func (t tables) built() []builtGroup {
	b := t.c.AsBuilt
	if b == nil {
		return nil
	}
	u := t.c.Units
	item := func(path, label, unit string, f study.Figure) builtItem {
		if unit == timeUnit {
			s := secondsOf(f)
			return builtItem{label, s.name, show("as_built."+path, f, s)}
		}
		return builtItem{label, unit, show("as_built."+path, f, plain(unit))}
	}
	whole := func(n int64) study.Figure { return study.Fig(float64(n)) }
	runs := []builtItem{
		item("seed", "seed of the noise", "", whole(int64(b.Seed))),
		item("noise_ticks", "noise taken over", "ticks", whole(b.NoiseTicks)),
		item("sensor_table_error", "error of the sensor's table", u.Output, b.TableError),
	}
	if b.Rest == nil {
		runs = append(runs, builtItem{"at rest: nothing sticks, or it takes too long", "", figure{Path: "as_built.rest", Value: "null", Text: notApplicable}})
	}
	out := []builtGroup{{"The simulation", runs}}
	if r := b.Rest; r != nil {
		out = append(out, builtGroup{"Left alone at rest", []builtItem{
			item("rest.limit_cycle", "largest limit cycle, peak to peak", u.Output, r.LimitCycle),
			item("rest.limit_cycle_period_s", "its period", timeUnit, r.PeriodS),
			item("rest.limit_cycle_effort", "effort in it, peak to peak", u.Effort, r.EffortPP),
			item("rest.limit_cycle_bound", "no larger by theory than", u.Output, r.Bound),
			item("rest.cycling", "runs that hunt", "", whole(int64(r.Cycling))),
			item("rest.starts", "of so many starts", "", whole(int64(r.Starts))),
		}})
	}
	for i := range b.Steady {
		s := &b.Steady[i]
		path := fmt.Sprintf("steady.%d.", i)
		title := s.Input
		if t.c.Sampled != nil && i < len(t.c.Sampled.Steady) {
			title = study.InputLabel(t.c.Sampled.Steady[i], u)
		}
		size := item(path+"size", "size", "", s.Size)
		kind := builtItem{"input", "", figure{Path: "as_built." + path + "input", Value: s.Input, Text: s.Input}}
		limit := builtItem{"effort at its end", "", showBool("as_built."+path+"effort_at_limit", s.AtLimit, "at its limit", "within its limits")}
		rows := []builtItem{kind, size}
		rows = append(rows, item(path+"tracking_error", "mean tracking error", u.Output, s.TrackingError),
			item(path+"swing", "rms about it, at the ticks", u.Output, s.Swing),
			item(path+"ripple", "ripple, peak to peak", u.Output, s.Ripple),
			item(path+"worst_error", "worst, at and between ticks", u.Output, s.WorstError),
			item(path+"peak_tracking_error", "peak tracking error", u.Output, s.PeakError),
			item(path+"rms_tracking_error", "rms tracking error", u.Output, s.RMSError))
		out = append(out, builtGroup{title, append(rows, limit)})
	}
	return out
}
