package charts

import (
	"fmt"
	"slices"
	"sort"
	"strings"

	"steadytick/study"
)

// rateTables builds the tables of a search for rates.
type rateTables struct{ r *study.Rate }

func (t rateTables) facts() []fact {
	var out []fact
	add := func(name, unit string, parts ...figure) { out = append(out, fact{name, unit, parts}) }
	if p := t.r.Pick; p != nil {
		add("Pick", "Hz", showFloat("pick.rate_hz", p.RateHz, one))
		u := seconds(p.PeriodS)
		add("Period", u.name, showFloat("pick.period_s", p.PeriodS, u))
		add("Slowest rate", "Hz", show("pick.slowest_hz", p.SlowestHz, one))
		add("Fastest rate", "Hz", show("pick.fastest_hz", p.FastestHz, one))
	}
	add("The file's rate", "Hz", showFloat("file_rate_hz", t.r.FileRateHz, one))
	add("Controller map", "", word(t.r.Map))
	return out
}

// intervals writes a list of intervals; open ends are named.
func intervals(path string, list []study.Interval) []figure {
	if len(list) == 0 {
		return []figure{word("none")}
	}
	var out []figure
	for i, v := range list {
		if i > 0 {
			out = append(out, word("; "))
		}
		low, high := show(fmt.Sprintf("%s.%d.0", path, i), v.Low, one), show(fmt.Sprintf("%s.%d.1", path, i), v.High, one)
		between := word(" to ")
		switch {
		case !v.Low.OK && !v.High.OK:
			low.Text, between.Text, high.Text = "every rate looked at", "", ""
		case !v.Low.OK:
			low.Text, between.Text = "up", " to "
		case !v.High.OK:
			between.Text, high.Text = " on", ""
		}
		out = append(out, low, between, high)
	}
	return out
}

func (t rateTables) windows() grid {
	g := grid{ID: "windows", Caption: "Rates that meet each requirement, Hz", Heads: heads("requirement", "#from, to", "#figure", "unit", "remark")}
	for i, w := range t.r.Windows {
		path := fmt.Sprintf("windows.%d.", i)
		value := number(show(path+"value", w.Value, one))
		switch {
		case w.BestHz.OK:
			value = number(show(path+"best", w.Best, one), word(" at "), show(path+"best_at_hz", w.BestHz, one), word(" Hz"))
		case !w.Value.OK:
			value = number(word(""))
		}
		rates := intervals(path+"intervals_hz", w.Intervals)
		if !w.Judged {
			rates = []figure{word("not judged")}
		}
		unit := w.Unit
		if w.Name == "stable" || w.Name == "runs" {
			unit = ""
		}
		row := gridRow{Cells: []gridCell{text(w.Requirement), number(rates...), value, {Class: "unit", Parts: []figure{word(unit)}}, text(w.Note)}}
		if w.Judged && len(w.Intervals) == 0 {
			row.Class = "missed"
			row.Cells[1].Class = "n state"
		}
		g.Rows = append(g.Rows, row)
	}
	g.Rows = append(g.Rows, gridRow{Class: "together", Cells: []gridCell{text("all together"), number(intervals("window_hz", t.r.WindowHz)...), text(""), text(""), text(t.r.PickNote)}})
	return g
}

func (t rateTables) relaxations() grid {
	g := grid{ID: "relaxations", Caption: "How far one limit alone must give way", Heads: heads("requirement", "#limit now", "#enough", "unit", "#window opens at, Hz")}
	if t.r.Conflict == nil {
		return g
	}
	for i, q := range t.r.Conflict.Relaxations {
		path := fmt.Sprintf("conflict.relaxations.%d.", i)
		enough := number(show(path+"enough", q.Enough, one))
		if !q.Enough.OK {
			enough = text("not enough alone")
		}
		g.Rows = append(g.Rows, gridRow{Cells: []gridCell{text(q.Requirement), shownAt(path+"limit", q.Limit), enough, text(q.Unit), shownAt(path+"rate_hz", q.RateHz)}})
	}
	return g
}

func (t rateTables) pick() grid {
	g := grid{ID: "picked", Caption: "How the timer makes it", Heads: heads("setting", "#value", "unit")}
	p := t.r.Pick
	if p == nil {
		return g
	}
	add := func(name, unit string, c gridCell) {
		g.Rows = append(g.Rows, gridRow{Cells: []gridCell{text(name), c, text(unit)}})
	}
	add("rate wanted", "Hz", floatAt("pick.wanted_hz", p.WantedHz))
	if s := p.Timer; s != nil {
		add("prescaler register", "", floatAt("pick.timer.prescaler", float64(s.Prescaler)))
		add("reload register", "", floatAt("pick.timer.reload", float64(s.Reload)))
		add("rate made", "Hz", floatAt("pick.timer.rate_hz", s.RateHz))
		add("error against the rate wanted", "ppm", floatAt("pick.timer.error_ppm", s.ErrorPPM))
	} else {
		add("timer", "", text("the loop file has no timer section"))
	}
	return g
}

func (t rateTables) settings() grid {
	g := grid{ID: "settings", Caption: "Other settings around it", Heads: heads("#prescaler", "#reload", "#rate, Hz", "#wanted, Hz", "#error, ppm")}
	if t.r.Pick == nil {
		return g
	}
	for i, s := range t.r.Pick.Settings {
		path := fmt.Sprintf("pick.settings.%d.", i)
		g.Rows = append(g.Rows, gridRow{Cells: []gridCell{floatAt(path+"prescaler", float64(s.Prescaler)), floatAt(path+"reload", float64(s.Reload)),
			floatAt(path+"rate_hz", s.RateHz), floatAt(path+"wanted_hz", s.WantedHz), floatAt(path+"error_ppm", s.ErrorPPM)}})
	}
	return g
}

func (t rateTables) breaks() grid {
	g := grid{ID: "breaks", Caption: "What breaks, nearest first", Heads: heads("side", "requirement", "#at, Hz", "#times the pick")}
	if t.r.Pick == nil {
		return g
	}
	for _, side := range []struct {
		name, path string
		list       []study.Break
	}{{"slower", "pick.breaks_below", t.r.Pick.Below}, {"faster", "pick.breaks_above", t.r.Pick.Above}} {
		for i, b := range side.list {
			path := fmt.Sprintf("%s.%d.", side.path, i)
			g.Rows = append(g.Rows, gridRow{Cells: []gridCell{text(side.name), text(b.Requirement), floatAt(path+"rate_hz", b.RateHz), floatAt(path+"factor", b.Factor)}})
		}
	}
	return g
}

func (t rateTables) effect() grid {
	g := grid{ID: "effect", Caption: "Each microsecond of compute time", Heads: heads("moves", "#by", "unit")}
	e := t.r.ComputeEffect
	if e == nil {
		return g
	}
	for _, x := range []struct {
		name, path, unit string
		f                study.Figure
	}{
		{"the slowest rate", "lower_bound_hz_per_us", "Hz", e.LowerHzPerUS},
		{"the slowest rate", "lower_bound_percent_per_us", "%", e.LowerPercent},
		{"the fastest rate", "upper_bound_hz_per_us", "Hz", e.UpperHzPerUS},
	} {
		if x.f.OK {
			g.Rows = append(g.Rows, gridRow{Cells: []gridCell{text(x.name), shownAt("compute_effect."+x.path, x.f), text(x.unit)}})
		}
	}
	if e.Note != "" && !(e.LowerHzPerUS.OK && e.LowerHzPerUS.Value != 0) {
		g.Rows = append(g.Rows, gridRow{Cells: []gridCell{text(e.Note), text(""), text("")}})
	}
	return g
}

func (t rateTables) rules() grid {
	g := grid{ID: "thumb", Caption: "Common practice", Heads: heads("rule", "#says, Hz", "beside the computed window")}
	for i, q := range t.r.Rules {
		g.Rows = append(g.Rows, gridRow{Cells: []gridCell{text(q.Rule), number(intervalParts(fmt.Sprintf("rules_of_thumb.%d.range_hz", i), q.RangeHz)...), text(q.Says)}})
	}
	return g
}

func intervalParts(path string, v study.Interval) []figure {
	return []figure{show(path+".0", v.Low, one), word(" to "), show(path+".1", v.High, one)}
}

func (t rateTables) maps() grid {
	g := grid{ID: "map-windows", Caption: "The window under each map, Hz", Heads: heads("map", "#from, to", "#slowest", "#times that of the file's map", "what ends it below")}
	for i, m := range t.r.Maps {
		path := fmt.Sprintf("maps.%d.", i)
		last := m.BindsBelow
		if last == "" {
			last = m.Note
		}
		g.Rows = append(g.Rows, gridRow{Cells: []gridCell{text(m.Map), number(intervals(path+"window_hz", m.WindowHz)...),
			shownAt(path+"slowest_hz", m.SlowestHz), shownAt(path+"against", m.Against), text(last)}})
	}
	return g
}

func (t rateTables) folding() []grid {
	var out []grid
	for i, f := range t.r.Folding {
		path := fmt.Sprintf("folding.%d.", i)
		g := grid{Caption: fmt.Sprintf("%s at the %s", f.Name, f.At), Heads: heads("#sampled at, Hz", "#lands at, Hz", "remark")}
		g.Rows = append(g.Rows, gridRow{Cells: []gridCell{text("its frequency"), floatAt(path+"frequency_hz", f.FrequencyHz), text(f.Warning)}})
		for k, l := range f.Lands {
			remark := ""
			if l.InsideBandwidth {
				remark = "inside the bandwidth"
			}
			at := fmt.Sprintf("%slands.%d.", path, k)
			g.Rows = append(g.Rows, gridRow{Cells: []gridCell{floatAt(at+"rate_hz", l.RateHz), floatAt(at+"lands_hz", l.LandsHz), text(remark)}})
		}
		out = append(out, g)
	}
	return out
}

// candidates is a table a map: rates down, metrics across.
func (t rateTables) candidates() []grid {
	var names []string
	seen := map[string]bool{}
	for _, c := range t.r.Candidates {
		for n := range c.Metrics {
			if !seen[n] {
				seen[n] = true
				names = append(names, n)
			}
		}
	}
	sort.Strings(names)
	var out []grid
	at := map[string]int{}
	for i, c := range t.r.Candidates {
		k, ok := at[c.Map]
		if !ok {
			k = len(out)
			at[c.Map] = k
			g := grid{Caption: "Map " + c.Map, Heads: heads("#rate, Hz", "what it is", "requirements")}
			for _, n := range names {
				g.Heads = append(g.Heads, gridHead{headOf(n, t.r.Units), true})
			}
			out = append(out, g)
		}
		out[k].Rows = append(out[k].Rows, candidateRow(fmt.Sprintf("candidates.%d.", i), c, names))
	}
	return out
}

func candidateRow(path string, c study.Candidate, names []string) gridRow {
	state := gridCell{Class: "state", Parts: []figure{word("✓ all met")}}
	row := gridRow{}
	if !c.Meets {
		row.Class = "missed"
		state.Parts = []figure{word("✗ " + firstCause(c.Fails))}
		state.Class = "state fails"
	}
	row.Cells = []gridCell{floatAt(path+"rate_hz", c.RateHz), text(c.Why), state}
	for _, n := range names {
		f, ok := c.Metrics[n]
		if !ok {
			row.Cells = append(row.Cells, number(word(notApplicable)))
			continue
		}
		row.Cells = append(row.Cells, shownAt(path+"metrics."+n, f))
	}
	return row
}

// firstCause shortens what fails: a loop that cannot run is not stable, and an unstable one meets nothing.
func firstCause(fails []string) string {
	for _, cause := range [][2]string{{"can run", "cannot run"}, {"stable", "unstable"}} {
		if slices.Contains(fails, cause[0]) {
			return cause[1]
		}
	}
	return strings.Join(fails, "; ")
}

// headOf is a metric with its unit.
func headOf(name string, u study.Units) string {
	if unit := study.MetricUnit(name, u); unit != "" {
		return words(name) + ", " + unit
	}
	return words(name)
}
