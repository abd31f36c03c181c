package study

import (
	"fmt"
	"math"
	"strings"
)

// bound is the requirement that fails most, or comes nearest to failing, with the metric that tells the most about it.
type bound struct {
	requirement *SpreadRequirement // nil without one
	metric      *SpreadMetric      // nil without one
	worst       *WorstCase
	corner      *WorstCase
}

// binding finds it: of the judged requirements that of the lowest yield, of equals that whose worst trial is nearest to its limit, relative to
// the limit. Stability stands behind the others, for what is unstable misses them all; without requirements the modulus margin is looked at.
func (j *spreadJob) binding(r *Spread) bound {
	var b bound
	least, near := int64(math.MaxInt64), math.Inf(1)
	for i := range r.Requirements {
		q := &r.Requirements[i]
		if !q.Judged || q.Name == "stable" {
			continue
		}
		d := math.Inf(1)
		if w := q.Worst; w != nil && w.Value.OK && w.Stable {
			d = slackOf(w.Value.Value, q.Op, q.Limit.Value) / math.Max(math.Abs(q.Limit.Value), 1e-300)
		}
		if q.Met < least || q.Met == least && d < near {
			b.requirement, least, near = q, q.Met, d
		}
	}
	stable := &r.Requirements[0]
	name := "modulus_margin"
	switch {
	case b.requirement == nil || r.Yield.Stable+r.Yield.Failed < r.Yield.Of && stable.Met <= least:
		b.requirement = stable
		b.worst, b.corner = stable.Worst, stable.Corner
	default:
		name = b.requirement.Name
		b.worst, b.corner = b.requirement.Worst, b.requirement.Corner
	}
	for i := range r.Metrics {
		if r.Metrics[i].Name == name {
			b.metric = &r.Metrics[i]
		}
	}
	if b.requirement == stable && stable.Met == r.Yield.Of && b.metric != nil { // no requirement and nothing unstable
		b.worst, b.corner = b.metric.Lowest, b.metric.LowCor
	}
	return b
}

// driver is the symbol whose spread moves the metric most; by the trials where the loop as written tells nothing.
func (m *SpreadMetric) driver() *Sensitivity {
	var out *Sensitivity
	most := 0.0
	for i := range m.Sensitivities {
		s := &m.Sensitivities[i]
		if v := math.Abs(s.OverSpread.Value); s.OverSpread.OK && v > most {
			out, most = s, v
		}
	}
	if out != nil {
		return out
	}
	for i := range m.Sensitivities {
		s := &m.Sensitivities[i]
		if v := math.Abs(s.Rank.Value); s.Rank.OK && v > most {
			out, most = s, v
		}
	}
	return out
}

// spreadVerdict is a few sentences: the yield, what fails most, which symbol drives it, the worst trial and the worst corner.
func spreadVerdict(r *Spread, b bound) string {
	what := "trials"
	if r.Draw == DrawCorners {
		what = "corners"
	}
	goal := "meet all requirements"
	if len(r.Requirements) == 1 {
		goal = "are stable"
	}
	y := r.Yield
	text := fmt.Sprintf("%d of %d %s (%s %%) %s", y.Met, y.Of, what, share(y.Percent), goal)
	if y.Interval[0].OK {
		text += fmt.Sprintf("; the yield lies between %s and %s %% with 95 %% confidence", share(y.Interval[0].Value), share(y.Interval[1].Value))
	}
	text += "."
	text += reachedText(r)
	q := b.requirement
	switch missed := y.Of - q.Met; {
	case missed > 0:
		text += fmt.Sprintf(" %q fails most, in %d.", q.Requirement, missed)
	case q.Name != "stable":
		text += fmt.Sprintf(" %q comes nearest to failing.", q.Requirement)
	}
	return text + driverText(r, b) + worstText(r, b)
}

// reachedText says whether the yield asked for is reached.
func reachedText(r *Spread) string {
	y := r.Yield
	if y.Reached == nil {
		return ""
	}
	asked := fmt.Sprintf(" the %s %% asked for.", number(y.Required.Value))
	switch list := leftOut(r); {
	case *y.Reached:
		return " That reaches" + asked
	case y.Percent >= y.Required.Value:
		return fmt.Sprintf(" Whether that reaches the %s %% asked for cannot be told, and does not count as reached: %s is not judged.", number(y.Required.Value), strings.Join(quoted(list), ", "))
	}
	return " That does not reach" + asked
}

// share writes per cent so that 99.98 is not rounded to 100.
func share(p float64) string {
	if p > 99 && p < 100 {
		text := fmt.Sprintf("%.*f", int(math.Min(8, 1-math.Floor(math.Log10(100-p)))), p)
		return strings.TrimRight(text, "0")
	}
	return number(p)
}

func driverText(r *Spread, b bound) string {
	if b.metric == nil {
		return ""
	}
	d := b.metric.driver()
	if d == nil {
		return fmt.Sprintf(" No symbol moves the %s.", strings.ReplaceAll(b.metric.Name, "_", " "))
	}
	text := fmt.Sprintf(" %s drives it", d.Symbol)
	if b.requirement.Name != b.metric.Name {
		text = fmt.Sprintf(" %s drives the %s", d.Symbol, strings.ReplaceAll(b.metric.Name, "_", " "))
	}
	if d.PerPercent.OK {
		return text + fmt.Sprintf(": 1 %% more of it changes the figure by %s%s.", number(d.PerPercent.Value), spaced(b.metric.Unit))
	}
	return text + fmt.Sprintf(": rank correlation %.2g.", d.Rank.Value)
}

func spaced(unit string) string {
	if unit == "" {
		return ""
	}
	return " " + unit
}

func worstText(r *Spread, b bound) string {
	unit := ""
	if b.metric != nil {
		unit = b.metric.Unit
	}
	tell := func(w *WorstCase) string {
		if !w.Stable {
			return "is unstable"
		}
		return "has " + figureText(w.Value) + spaced(unit)
	}
	if b.requirement.Name == "stable" && b.worst == b.requirement.Worst {
		tell = func(w *WorstCase) string { return map[bool]string{true: "is stable", false: "is unstable"}[w.Stable] }
	}
	text := ""
	if b.worst != nil && r.Draw != DrawCorners {
		text += fmt.Sprintf(" The worst trial, number %d, %s", b.worst.Trial, tell(b.worst))
	}
	if b.corner != nil {
		if text != "" {
			text += "; the"
		} else {
			text += " The"
		}
		text += fmt.Sprintf(" worst corner (%s) %s", b.corner.Levels, tell(b.corner))
	}
	if text == "" {
		return ""
	}
	return text + "."
}

func figureText(f Figure) string {
	switch {
	case !f.OK:
		return "no such figure"
	case math.IsInf(f.Value, 0):
		return "inf"
	}
	return number(f.Value)
}
