package charts

import (
	"fmt"
	"math"
	"slices"
	"strconv"

	"steadytick/study"
)

// spreadTables builds the tables of a study over tolerances.
type spreadTables struct{ r *study.Spread }

// count is a whole number, every digit of it.
func count(path string, n int64) figure {
	return figure{Path: path, Value: strconv.FormatInt(n, 10), Text: strconv.FormatInt(n, 10)}
}

func countAt(path string, n int64) gridCell { return number(count(path, n)) }

func (t spreadTables) facts() []fact {
	r := t.r
	var out []fact
	add := func(name, unit string, parts ...figure) { out = append(out, fact{name, unit, parts}) }
	add("Yield", "%", showFloat("yield.percent", r.Yield.Percent, one))
	if r.Yield.Interval[0].OK {
		add("95 % interval", "%", intervalParts95("yield.interval_percent", r.Yield.Interval)...)
	}
	if r.Yield.Required.OK {
		add("Asked for", "%", show("yield.required_percent", r.Yield.Required, one))
	}
	if r.Draw == study.DrawCorners {
		add("Corners", "", count("trials", r.Trials))
	} else {
		add("Trials", "", count("trials", r.Trials))
	}
	seed := strconv.FormatUint(r.Seed, 10)
	add("Seed", "", figure{Path: "seed", Value: seed, Text: seed})
	add("Draw", "", word(r.Draw))
	u := seconds(r.PeriodS)
	add("Tick", u.name, showFloat("period_s", r.PeriodS, u))
	add("Controller map", "", word(r.Map))
	return out
}

func intervalParts95(path string, v [2]study.Figure) []figure {
	return []figure{show(path+".0", v[0], one), word(" to "), show(path+".1", v[1], one)}
}

func (t spreadTables) symbols() grid {
	g := grid{ID: "symbols", Caption: "Symbols drawn", Heads: heads("symbol", "#as written", "#spread, %", "#low", "#high")}
	for i, s := range t.r.Symbols {
		path := fmt.Sprintf("symbols.%d.", i)
		g.Rows = append(g.Rows, gridRow{Cells: []gridCell{text(s.Name), floatAt(path+"nominal", s.Nominal), floatAt(path+"spread_percent", s.Percent),
			floatAt(path+"low", s.Low), floatAt(path+"high", s.High)}})
	}
	return g
}

// counts tells what became of the trials, and of the corners beside them.
func (t spreadTables) counts() grid {
	r := t.r
	g := grid{ID: "counts", Caption: "What became of them", Heads: heads("of the", "#all", "#meet all", "#%", "#stable", "#unstable", "#failed")}
	row := func(name, path string, c study.Counted, stable, unstable, failed int64) {
		g.Rows = append(g.Rows, gridRow{Cells: []gridCell{text(name), countAt(path+"of", c.Of), countAt(path+"met", c.Met), floatAt(path+"percent", c.Percent),
			countAt(path+"stable", stable), countAt(path+"unstable", unstable), countAt(path+"failed", failed)}})
	}
	row("trials", "yield.", r.Yield.Counted, r.Yield.Stable, r.Yield.Unstable, r.Yield.Failed)
	if c := r.Corners; c != nil {
		row("corners", "corners.", c.Counted, c.Stable, c.Unstable, c.Failed)
	}
	return g
}

func (t spreadTables) failures() grid {
	g := grid{ID: "failures", Caption: "Trials that could not be analysed", Heads: heads("#times", "#first in trial", "reason")}
	for i, f := range t.r.Failures {
		path := fmt.Sprintf("failures.%d.", i)
		g.Rows = append(g.Rows, gridRow{Cells: []gridCell{countAt(path+"count", f.Count), countAt(path+"first_trial", f.First), text(f.Reason)}})
	}
	return g
}

func (t spreadTables) requirements() grid {
	g := grid{ID: "requirements", Caption: "Yield of each requirement", Heads: heads("requirement", "#limit", "#as written", "unit", "#met", "#missed", "#no figure", "#yield, %", "#95 % interval", "#corners that meet it")}
	for i, q := range t.r.Requirements {
		path := fmt.Sprintf("requirements.%d.", i)
		state := gridCell{Class: "n state", Parts: []figure{showFloat(path+"percent", q.Percent, one)}}
		interval := number(word(notApplicable))
		if q.Interval[0].OK {
			interval = number(intervalParts95(path+"interval_percent", q.Interval)...)
		}
		limit := number(word(""))
		if q.Limit.OK {
			limit = shownAt(path+"limit", q.Limit)
		}
		row := gridRow{Cells: []gridCell{text(q.Requirement), limit, shownAt(path+"nominal", q.Nominal), {Class: "unit", Parts: []figure{word(q.Unit)}},
			countAt(path+"met", q.Met), countAt(path+"missed", q.Missed), countAt(path+"unjudged", q.Unjudged), state, interval, shownAt(path+"corners_met", q.CornersMet)}}
		if q.Judged && q.Missed+q.Unjudged > 0 {
			row.Class = "missed"
		}
		if !q.Judged {
			row.Class = "open"
			row.Cells[0] = text(q.Requirement + ": not judged")
		}
		g.Rows = append(g.Rows, row)
	}
	return g
}

// caseCells are the number of a worst case, its value and its symbols.
func caseCells(path string, w *study.WorstCase) []gridCell {
	if w == nil {
		return []gridCell{text(""), text(""), text("")}
	}
	value := number(show(path+"value", w.Value, one))
	if !w.Stable {
		value = number(show(path+"value", w.Value, one), word(" unstable"))
	}
	var parts []figure
	for i, s := range w.Symbols {
		if i > 0 {
			parts = append(parts, word(", "))
		}
		parts = append(parts, word(s.Name+" "), showFloat(path+"symbols."+s.Name, s.Value, one))
	}
	if w.Levels != "" {
		parts = append(parts, word(" ("+w.Levels+")"))
	}
	return []gridCell{countAt(path+"trial", w.Trial), value, {Class: "symbols", Parts: parts}}
}

// worst lists the worst trial and the worst corner of each requirement.
func (t spreadTables) worst() grid {
	g := grid{ID: "worst-cases", Caption: "Worst cases of each requirement", Heads: heads("requirement", "case", "#number", "#figure", "unit", "symbols")}
	for i, q := range t.r.Requirements {
		g.Rows = append(g.Rows, caseRows(q.Requirement, q.Unit, fmt.Sprintf("requirements.%d.", i), []spreadCase{
			{"trial", "worst_trial.", q.Worst}, {"corner", "worst_corner.", q.Corner}})...)
	}
	return g
}

// spreadCase is a trial or a corner that is worth a row.
type spreadCase struct {
	what, path string
	at         *study.WorstCase // nil: there is none
}

// caseRows are the rows of the cases that there are; the name stands in the first.
func caseRows(name, unit, path string, cases []spreadCase) (rows []gridRow) {
	for _, c := range cases {
		if c.at == nil {
			continue
		}
		cells := caseCells(path+c.path, c.at)
		rows = append(rows, gridRow{Cells: []gridCell{text(name), text(c.what), cells[0], cells[1], {Class: "unit", Parts: []figure{word(unit)}}, cells[2]}})
		name = ""
	}
	return rows
}

// metrics is the table of distributions.
func (t spreadTables) metrics() grid {
	g := grid{ID: "metrics-table", Caption: "Every figure over the trials that have it", Heads: heads("metric", "unit", "#as written", "#mean", "#standard deviation", "#min", "#max", "#trials", "#infinite", "#without", "worse when")}
	for i, m := range t.r.Metrics {
		path := fmt.Sprintf("metrics.%d.", i)
		g.Rows = append(g.Rows, gridRow{Cells: []gridCell{text(words(m.Name)), {Class: "unit", Parts: []figure{word(m.Unit)}}, shownAt(path+"nominal", m.Nominal),
			shownAt(path+"mean", m.Mean), shownAt(path+"standard_deviation", m.Deviation), shownAt(path+"min", m.Min), shownAt(path+"max", m.Max),
			countAt(path+"count", m.Count), countAt(path+"infinite", m.Infinite), countAt(path+"without", m.Without), text(string(m.Worse))}})
	}
	return g
}

func (t spreadTables) quantiles() grid {
	g := grid{ID: "quantiles", Caption: "Quantiles", Heads: heads("metric", "unit", "#1 %", "#5 %", "#25 %", "#50 %", "#75 %", "#95 %", "#99 %")}
	for i, m := range t.r.Metrics {
		path := fmt.Sprintf("metrics.%d.quantiles.", i)
		q := m.Quantiles
		g.Rows = append(g.Rows, gridRow{Cells: []gridCell{text(words(m.Name)), {Class: "unit", Parts: []figure{word(m.Unit)}}, shownAt(path+"p1", q.P1), shownAt(path+"p5", q.P5),
			shownAt(path+"p25", q.P25), shownAt(path+"p50", q.P50), shownAt(path+"p75", q.P75), shownAt(path+"p95", q.P95), shownAt(path+"p99", q.P99)}})
	}
	return g
}

// extremes lists the trials and corners with the lowest and the highest figure.
func (t spreadTables) extremes() grid {
	g := grid{ID: "extremes-table", Caption: "Lowest and highest figures", Heads: heads("metric", "case", "#number", "#figure", "unit", "symbols")}
	for i, m := range t.r.Metrics {
		g.Rows = append(g.Rows, caseRows(words(m.Name), m.Unit, fmt.Sprintf("metrics.%d.", i), []spreadCase{
			{"lowest, trial", "lowest_trial.", m.Lowest}, {"highest, trial", "highest_trial.", m.Top},
			{"lowest, corner", "lowest_corner.", m.LowCor}, {"highest, corner", "highest_corner.", m.TopCor}})...)
	}
	return g
}

// bars writes the histograms out: a row a metric.
func (t spreadTables) bars() grid {
	g := grid{ID: "bars", Caption: "The bars of the histograms: trials in each of equally wide stretches", Heads: heads("metric", "unit", "#from", "#to", "trials, from the first bar to the last")}
	for i, m := range t.r.Metrics {
		h := m.Histogram
		if h == nil {
			continue
		}
		path := fmt.Sprintf("metrics.%d.histogram.", i)
		var parts []figure
		for k, n := range h.Counts {
			if k > 0 {
				parts = append(parts, word(" "))
			}
			parts = append(parts, count(fmt.Sprintf("%scounts.%d", path, k), n))
		}
		g.Rows = append(g.Rows, gridRow{Cells: []gridCell{text(words(m.Name)), {Class: "unit", Parts: []figure{word(m.Unit)}}, floatAt(path+"from", h.From), floatAt(path+"to", h.To), {Class: "symbols", Parts: parts}}})
	}
	return g
}

// sensitivities is a table a metric, its symbols by what they do over their spreads; those of requirements apart from the others.
func (t spreadTables) sensitivities() (named, others []grid) {
	for i, m := range t.r.Metrics {
		g := grid{Caption: headOf(m.Name, t.r.Units), Heads: heads("symbol", "#with 1 % more", "#over its spread", "and its direction", "#rank correlation")}
		most := 0.0
		order := make([]int, len(m.Sensitivities))
		for k, s := range m.Sensitivities {
			order[k] = k
			most = math.Max(most, math.Abs(s.OverSpread.Value))
		}
		slices.SortStableFunc(order, func(a, b int) int {
			x, y := math.Abs(m.Sensitivities[a].OverSpread.Value), math.Abs(m.Sensitivities[b].OverSpread.Value)
			switch {
			case x > y:
				return -1
			case x < y:
				return 1
			}
			return 0
		})
		for _, k := range order {
			s := m.Sensitivities[k]
			path := fmt.Sprintf("metrics.%d.sensitivities.%d.", i, k)
			bar := gridCell{Class: "signed", Bar: &signedBar{}}
			if most > 0 && s.OverSpread.OK {
				bar.Bar = &signedBar{Share: math.Abs(s.OverSpread.Value) / most, Minus: s.OverSpread.Value < 0}
			}
			g.Rows = append(g.Rows, gridRow{Cells: []gridCell{text(s.Symbol), shownAt(path+"per_percent", s.PerPercent), shownAt(path+"over_spread", s.OverSpread), bar, shownAt(path+"rank_correlation", s.Rank)}})
		}
		if t.required(m.Name) && most > 0 {
			named = append(named, g)
		} else {
			others = append(others, g)
		}
	}
	return named, others
}

// required tells whether a requirement names the metric; without requirements the margins are looked at.
func (t spreadTables) required(name string) bool {
	if len(t.r.Requirements) == 1 {
		return name == "phase_margin" || name == "gain_margin" || name == "modulus_margin"
	}
	return slices.ContainsFunc(t.r.Requirements, func(q study.SpreadRequirement) bool { return q.Name == name })
}
