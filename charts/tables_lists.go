package charts

import (
	"fmt"

	"steadytick/study"
)

// ledgerRow is one contribution to the delay around the loop.
type ledgerRow struct {
	Item             string
	Seconds, Degrees figure
	Share            float64 // of the longest, 0 to 1, for the bar
}

// ledger is the delay ledger; the unit is common to its rows.
func (t tables) ledger() (rows []ledgerRow, unitName string) { return ledgerRows(t.c.DelayLedger) }

func ledgerRows(list []study.LedgerItem) (rows []ledgerRow, unitName string) {
	longest := 0.0
	var all []float64
	for _, l := range list {
		longest = max(longest, l.Seconds)
		all = append(all, l.Seconds)
	}
	u := seconds(all...)
	for i, l := range list {
		r := ledgerRow{Item: l.Item, Seconds: showFloat(fmt.Sprintf("delay_ledger.%d.seconds", i), l.Seconds, u),
			Degrees: show(fmt.Sprintf("delay_ledger.%d.degrees", i), l.Degrees, one)}
		if longest > 0 && l.Seconds > 0 {
			r.Share = l.Seconds / longest
		}
		rows = append(rows, r)
	}
	return rows, u.name
}

// requirementRow is one requirement and how it fares.
type requirementRow struct {
	Name, Op, Unit string
	From           figure // the column of the value
	Limit, Value   figure
	Met            figure
	State          string // "met", "missed", "open"
	Note           int
	Why            string
}

func (t tables) requirements() []requirementRow {
	var out []requirementRow
	for i, q := range t.c.Requirements {
		path := fmt.Sprintf("requirements.%d.", i)
		u := plain(q.Unit)
		if q.Unit == "s" {
			u = secondsOf(study.Fig(q.Limit), q.Value)
		}
		r := requirementRow{Name: words(q.Name), Op: opSign(q.Op), Unit: u.name,
			Limit: showFloat(path+"limit", q.Limit, u), Value: show(path+"value", q.Value, u)}
		r.From = figure{Path: path + "from", Value: q.From, Text: q.From}
		r.Met, r.State = figure{Path: path + "met", Value: "null", Text: "cannot be judged"}, "open"
		if q.Met != nil {
			r.Met, r.State = showBool(path+"met", *q.Met, "✓ met", "✗ not met"), "missed"
			if *q.Met {
				r.State = "met"
			}
		}
		if r.Value.Text == notApplicable && t.c.Sampled != nil {
			r.Note, r.Why = t.notes.explain("sampled", q.Name, t.c.Sampled.Stable)
		}
		out = append(out, r)
	}
	return out
}

func opSign(op string) string {
	switch op {
	case "<=":
		return "≤"
	case ">=":
		return "≥"
	}
	return op
}

// crossingRow is one crossing of the loop frequency response.
type crossingRow struct {
	Column, Kind                  string
	RadS, Gain, Phase, Deg, Ratio figure
}

// crossings lists all crossings of both columns.
func (t tables) crossings() []crossingRow {
	var out []crossingRow
	for _, n := range t.columns() {
		if n.col == nil {
			continue
		}
		for _, k := range []struct {
			kind, path string
			all        []study.Crossing
		}{{"|L| = 1", "gain_crossings", n.col.GainCrossings}, {"arg L = −180°", "phase_crossings", n.col.PhaseCrossings}} {
			for i, x := range k.all {
				path := fmt.Sprintf("%s.%s.%d.", n.name, k.path, i)
				out = append(out, crossingRow{n.name, k.kind, showFloat(path+"rad_s", x.RadS, one), showFloat(path+"gain", x.Gain, one),
					showFloat(path+"phase_deg", x.PhaseDeg, one), show(path+"margin_deg", x.MarginDeg, one), show(path+"margin_db", x.MarginDB, one)})
			}
		}
	}
	return out
}

// poleTable is the closed-loop poles of one column.
type poleTable struct {
	Title      string
	Heads      []string
	Equivalent bool
	Rows       []poleRow
}

type poleRow struct {
	Number                 int
	Re, Im, EquivRe, EquiI figure
}

func (t tables) poles() []poleTable {
	var out []poleTable
	for _, n := range t.columns() {
		if n.col == nil || len(n.col.Poles) == 0 {
			continue
		}
		p := poleTable{Title: n.name, Heads: []string{"Re s, rad/s", "Im s, rad/s"}, Equivalent: len(n.col.EquivalentPoles) > 0}
		if p.Equivalent {
			p.Heads = []string{"Re z", "Im z", "Re ln(z)/T, rad/s", "Im ln(z)/T, rad/s"}
		}
		for i, z := range n.col.Poles {
			path := fmt.Sprintf("%s.poles.%d.", n.name, i)
			r := poleRow{Number: i + 1, Re: showFloat(path+"0", z[0], one), Im: showFloat(path+"1", z[1], one)}
			if i < len(n.col.EquivalentPoles) {
				e, path := n.col.EquivalentPoles[i], fmt.Sprintf("%s.equivalent_poles_rad_s.%d.", n.name, i)
				r.EquivRe, r.EquiI = showFloat(path+"0", e[0], one), showFloat(path+"1", e[1], one)
			}
			p.Rows = append(p.Rows, r)
		}
		out = append(out, p)
	}
	return out
}

// degradeRow is one variant of the loop under one input.
type degradeRow struct {
	Variant, Remark     string
	Style               style
	Drawn               bool // the style is that of a curve
	Period, Delay       figure
	Stable              figure
	Unstable            bool
	Peak, RMS, Steady   figure
	PeakShare, RMSShare float64 // of the largest among the stable variants, 0 to 1
}

// degradeTable is the variants of one input.
type degradeTable struct {
	Input, Unit       string
	Period, DelayUnit string
	Rows              []degradeRow
}

// degrade groups the rows by input in the order of appearance.
func (t tables) degrade(st *styles) []*degradeTable {
	var out []*degradeTable
	byInput := map[string]*degradeTable{}
	largest := map[string][2]float64{}
	periods, delays := map[string][]study.Figure{}, map[string][]study.Figure{}
	for _, r := range t.c.Degrade {
		if byInput[r.Input] == nil {
			byInput[r.Input] = &degradeTable{Input: r.Input, Unit: t.c.Units.Output}
			out = append(out, byInput[r.Input])
		}
		periods[r.Input], delays[r.Input] = append(periods[r.Input], r.PeriodS), append(delays[r.Input], r.LoopDelayS)
		if r.Stable {
			l := largest[r.Input]
			largest[r.Input] = [2]float64{larger(l[0], r.PeakError), larger(l[1], r.RMSError)}
		}
	}
	for i, r := range t.c.Degrade {
		d, path := byInput[r.Input], fmt.Sprintf("degrade.%d.", i)
		pu, du := secondsOf(periods[r.Input]...), secondsOf(delays[r.Input]...)
		d.Period, d.DelayUnit = pu.name, du.name
		row := degradeRow{Variant: r.Variant, Remark: r.Note, Unstable: r.Ran && !r.Stable,
			Period: show(path+"period_s", r.PeriodS, pu), Delay: show(path+"loop_delay_s", r.LoopDelayS, du),
			Stable: showBool(path+"stable", r.Stable, "stable", "unstable"),
			Peak:   show(path+"peak_tracking_error", r.PeakError, one), RMS: show(path+"rms_tracking_error", r.RMSError, one),
			Steady: show(path+"steady_tracking_error", r.SteadyError, one)}
		if !r.Ran {
			row.Stable.Text = "not run"
		}
		row.Style, row.Drawn = st.byName[r.Variant]
		row.PeakShare, row.RMSShare = share(r.PeakError, largest[r.Input][0]), share(r.RMSError, largest[r.Input][1])
		d.Rows = append(d.Rows, row)
	}
	return out
}

func larger(v float64, f study.Figure) float64 {
	if f.OK && finite(f.Value) {
		return max(v, f.Value)
	}
	return v
}

// share is how long a bar is, 0 to 1; an unstable variant's may want more than there is.
func share(f study.Figure, largest float64) float64 {
	if !f.OK || !(f.Value > 0) || !(largest > 0) {
		return 0
	}
	return min(1, f.Value/largest)
}
