package charts

import (
	"fmt"

	"steadytick/study"
)

// cell is one place of a table.
type cell struct {
	Figure figure
	Note   int    // number of the warning that explains a —, 0 for none
	Why    string // the same in words
	Bad    bool   // not as it should be
}

// row is a quantity with its unit in both columns.
type row struct {
	Label, Hint, Unit string
	Cells             []cell // continuous, sampled
}

// group is a run of rows under a heading.
type group struct {
	Title string
	Rows  []row
}

// quantity is a figure of a column.
type quantity struct {
	label, hint, unit string // unit "time": seconds with a prefix
	path              string // inside the column
	get               func(*study.Column) study.Figure
}

const timeUnit = "time"

// tables builds the figure tables of one result.
type tables struct {
	c     *study.Compare
	notes notes
}

// columns are the two columns with their JSON names; a column may be nil.
func (t tables) columns() []namedColumn {
	return []namedColumn{{"continuous", t.c.Continuous}, {"sampled", t.c.Sampled}}
}

type namedColumn struct {
	name string
	col  *study.Column
}

// row looks the quantity up in both columns.
func (t tables) row(q quantity) row {
	values := make([]study.Figure, 0, 2)
	for _, n := range t.columns() {
		v := study.Figure{}
		if n.col != nil {
			v = q.get(n.col)
		}
		values = append(values, v)
	}
	u := plain(q.unit)
	if q.unit == timeUnit {
		u = secondsOf(values...)
	}
	r := row{Label: q.label, Hint: q.hint, Unit: u.name}
	for i, n := range t.columns() {
		r.Cells = append(r.Cells, t.cell(n, q.path, values[i], u))
	}
	return r
}

// cell shows one figure and, where it is missing, why.
func (t tables) cell(n namedColumn, path string, v study.Figure, u unit) cell {
	if n.col == nil {
		return cell{Figure: figure{Text: notApplicable}, Why: "there is no " + n.name + " column"}
	}
	f := show(n.name+"."+path, v, u)
	out := cell{Figure: f}
	if f.Text == notApplicable {
		out.Note, out.Why = t.notes.explain(n.name, path, n.col.Stable)
	}
	return out
}

// words is a row of texts or truth values rather than figures.
func (t tables) words(label, path string, get func(*study.Column) (text figure, bad bool)) row {
	r := row{Label: label}
	for _, n := range t.columns() {
		if n.col == nil {
			r.Cells = append(r.Cells, cell{Figure: figure{Text: notApplicable}, Why: "there is no " + n.name + " column"})
			continue
		}
		f, bad := get(n.col)
		f.Path = n.name + "." + path
		r.Cells = append(r.Cells, cell{Figure: f, Bad: bad})
	}
	return r
}

func (t tables) truth(label, path, yes, no string, get func(*study.Column) bool) row {
	return t.words(label, path, func(c *study.Column) (figure, bool) { return showBool("", get(c), yes, no), !get(c) })
}

// compare is the comparison table: every single figure of the columns.
func (t tables) compare() []group {
	integer := func(c *study.Column) (figure, bool) {
		return figure{Value: exact(c.Type), Text: formatNumber(float64(c.Type))}, false
	}
	return t.three([]group{
		{"Stability", []row{
			t.truth("closed loop", "stable", "stable", "unstable", func(c *study.Column) bool { return c.Stable }),
			t.truth("judged by closed-loop poles", "stable_by_poles", "stable", "unstable", func(c *study.Column) bool { return c.StabilityByPoles }),
			t.truth("judged by the argument count", "stable_by_nyquist", "stable", "unstable", func(c *study.Column) bool { return c.StabilityByNyquist }),
			t.words("loop type", "type", integer),
		}},
		{"Margins", t.rows(marginQuantities)},
		{"Step response", t.builtRows(stepQuantities(t.c.Units))},
		{"Noise and words", t.builtRows(wordQuantities(t.c.Units))},
		{"Error constants", t.rows(constantQuantities)},
	})
}

// series is the table of the error series.
func (t tables) series() []group {
	return []group{
		{"Tracking error series, r − y = c0·r + c1·r′ + …", t.rows(seriesQuantities("tracking_series", func(c *study.Column) [4]study.Figure { return c.TrackingSeries }))},
		{"Loop error series, r − m = c0·r + c1·r′ + …", t.rows(seriesQuantities("loop_series", func(c *study.Column) [4]study.Figure { return c.LoopSeries }))},
	}
}

func (t tables) rows(all []quantity) []row {
	out := make([]row, len(all))
	for i, q := range all {
		out[i] = t.row(q)
	}
	return out
}

var marginQuantities = []quantity{
	{"phase margin", "", "deg", "phase_margin_deg", func(c *study.Column) study.Figure { return c.PhaseMarginDeg }},
	{"gain margin", "gain may rise by", "dB", "gain_margin_db", func(c *study.Column) study.Figure { return c.GainMarginDB }},
	{"gain reduction", "gain may fall by", "dB", "gain_reduction_db", func(c *study.Column) study.Figure { return c.GainReductionDB }},
	{"modulus margin", "min |1 + L|", "", "modulus_margin", func(c *study.Column) study.Figure { return c.ModulusMargin }},
	{"delay margin", "", timeUnit, "delay_margin_s", func(c *study.Column) study.Figure { return c.DelayMarginS }},
	{"jitter margin", "delay that may vary", timeUnit, "jitter_margin_s", func(c *study.Column) study.Figure { return c.JitterMarginS }},
	{"crossover", "|L| = 1", "rad/s", "crossover_rad_s", func(c *study.Column) study.Figure { return c.CrossoverRadS }},
	{"bandwidth", "closed loop, −3 dB", "rad/s", "bandwidth_rad_s", func(c *study.Column) study.Figure { return c.BandwidthRadS }},
}

var constantQuantities = []quantity{
	{"position constant Kp", "", "", "position_constant", func(c *study.Column) study.Figure { return c.PositionConstant }},
	{"velocity constant Kv", "", "1/s", "velocity_constant", func(c *study.Column) study.Figure { return c.VelocityConstant }},
	{"acceleration constant Ka", "", "1/s²", "acceleration_constant", func(c *study.Column) study.Figure { return c.AccelerationConstant }},
}

func seriesQuantities(path string, get func(*study.Column) [4]study.Figure) []quantity {
	var out []quantity
	for k, u := range []string{"", "s", "s²", "s³"} {
		out = append(out, quantity{fmt.Sprintf("c%d", k), "", u, fmt.Sprintf("%s.%d", path, k),
			func(c *study.Column) study.Figure { return get(c)[k] }})
	}
	return out
}
