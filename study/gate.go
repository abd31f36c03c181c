package study

import (
	"context"
	"math"

	"steadytick/loop"
)

// GateSchema names the JSON of Gate.
const GateSchema = "steadytick/gate/1"

// Gate is the result of the gate command over one or several loop files. JSON schema steadytick/gate/1.
type Gate struct {
	Schema  string       `json:"schema"`
	Met     bool         `json:"met"` // every requirement of every file is met, and nothing got worse
	Loops   []*GateLoop  `json:"loops"`
	Against *GateAgainst `json:"against"` // null without a revision to compare with
}

// GateLoop is one loop file held to its requirements. Of a file that could not be checked only File and
// Problems are filled.
type GateLoop struct {
	File         string            `json:"file"`
	Loop         string            `json:"loop"`
	PeriodS      Figure            `json:"period_s"`
	LoopDelayS   Figure            `json:"loop_delay_s"`
	Met          bool              `json:"met"`
	Requirements []GateRequirement `json:"requirements"` // "stable" first, then those of the file in its order
	Problems     []string          `json:"problems"`     // why the file could not be checked
	Note         string            `json:"note"`         // what to know about the result, "" for nothing
	DelayLedger  []LedgerItem      `json:"delay_ledger"`
	Warnings     []Warning         `json:"warnings"`
	Units        Units             `json:"units"`

	loop    *loop.Loop
	compare *Compare
}

// GateRequirement is one requirement and how the sampled loop stands to it. Figures are in Unit, the base unit of
// the metric, the same as those of compare.
type GateRequirement struct {
	Requirement string `json:"requirement"` // as the file has it; "stable"
	Name        string `json:"name"`
	Op          string `json:"op"`    // "" for stable
	Limit       Figure `json:"limit"` // null for stable
	Unit        string `json:"unit"`
	Line        int    `json:"line"` // of the loop file, 0 for stable
	Value       Figure `json:"value"`
	Continuous  Figure `json:"continuous_value"` // of the loop as designed
	From        string `json:"from"`             // the column of value: "sampled", or "as built" where that is worse; "" for stable
	Met         *bool  `json:"met"`              // null: not judged, which is no pass
	NotJudged   string `json:"not_judged"`       // why it is not judged, "" where it is

	// Slack is how far inside the limit the value lies, negative when it is outside; null for stable, and in an
	// unstable loop, whose figures meet nothing. SlackPercent is the same relative to the limit, null for a limit of 0.
	Slack        Figure     `json:"slack"`
	SlackPercent Figure     `json:"slack_percent"`
	Cause        *GateCause `json:"cause"` // null where it is met or not judged

	// Written is the unit that the file uses for the limit, for readers.
	Written WrittenUnit `json:"-"`
}

// Passed tells whether the requirement is judged and met.
func (r GateRequirement) Passed() bool { return r.Met != nil && *r.Met }

// GateOptions steers RunGate.
type GateOptions struct {
	Progress func(what string, done, all int) // nil: silent
}

// RunGate holds a loop to its requirements, at its own rate. It returns an error when the
// loop cannot be analysed at all; an unstable loop is a result that meets nothing.
func RunGate(ctx context.Context, l *loop.Loop, o GateOptions) (*GateLoop, error) {
	c, err := RunCompare(ctx, l, Options{Progress: o.Progress})
	if err != nil {
		return nil, err
	}
	g := &GateLoop{
		File: l.File, Loop: l.Name, PeriodS: Fig(c.PeriodS), LoopDelayS: Fig(c.LoopDelayS), Met: true,
		Problems: []string{}, DelayLedger: c.DelayLedger, Warnings: []Warning{}, Units: c.Units,
		loop: l, compare: c,
	}
	for _, w := range c.Warnings {
		if w.Code != "requirement_not_judged" { // the requirement itself says it
			g.Warnings = append(g.Warnings, w)
		}
	}
	g.Requirements = append(g.Requirements, gateStable(c))
	for i, r := range l.Requirements {
		g.Requirements = append(g.Requirements, gateRequirement(l, c, r, c.Requirements[i]))
	}
	for _, r := range g.Requirements {
		g.Met = g.Met && r.Passed()
	}
	if len(l.Requirements) == 0 {
		g.Note = "the file has no requirements: only stability is checked"
	}
	return g, nil
}

// GateProblem is the entry of a file that could not be checked.
func GateProblem(file string, problems []string) *GateLoop {
	return &GateLoop{File: file, Problems: problems, Requirements: []GateRequirement{},
		DelayLedger: []LedgerItem{}, Warnings: []Warning{}}
}

// gateStable is the first line of every gate.
func gateStable(c *Compare) GateRequirement {
	r := GateRequirement{Requirement: "stable", Name: "stable", Met: &c.Sampled.Stable}
	if !c.Sampled.Stable {
		r.Cause = stableCause(c)
	}
	return r
}

// gateRequirement adds slack and cause to a requirement that compare has judged.
func gateRequirement(l *loop.Loop, c *Compare, r loop.Requirement, j Requirement) GateRequirement {
	out := GateRequirement{
		Requirement: r.Text, Name: j.Name, Op: j.Op, Limit: Fig(j.Limit), Unit: j.Unit, Line: r.Line,
		Value: j.Value, From: j.From, Continuous: continuousMetric(l, c, j.Name), Met: j.Met, Written: writtenUnit(r, j.Unit),
	}
	if j.Met == nil {
		out.NotJudged = notJudged(l, c, j.Name)
		return out
	}
	if c.Sampled.Stable {
		out.Slack, out.SlackPercent = slack(j)
	}
	if !*j.Met {
		out.Cause = causeOf(l, c, out)
	}
	return out
}

// slack is value − limit for a lower bound and limit − value for an upper one, then in per cent of |limit|.
func slack(r Requirement) (Figure, Figure) {
	if !r.Value.OK {
		return Figure{}, Figure{}
	}
	s := r.Value.Value - r.Limit
	if (r.Op == "<=" || r.Op == "<") && s != 0 { // and not −0
		s = -s
	}
	if r.Limit == 0 {
		return Fig(s), Figure{}
	}
	return Fig(s), Fig(100 * s / math.Abs(r.Limit))
}

// notJudged says why a metric has no figure to judge by.
func notJudged(l *loop.Loop, c *Compare, name string) string {
	if !judged(name) {
		return "this version computes no " + name
	}
	_, why := metric(l, c, name)
	return why
}

// continuousMetric is the metric of the continuous column.
func continuousMetric(l *loop.Loop, c *Compare, name string) Figure {
	if c.Continuous == nil || !judged(name) {
		return Figure{}
	}
	twin := *c
	twin.Sampled = c.Continuous
	f, _ := metric(l, &twin, name)
	return f
}
