package study

import (
	"context"
	"fmt"
	"math"

	"steadytick/loop"
)

// SpreadTrial is one trial by itself: the very figures that it has among the others. JSON schema steadytick/spread-trial/1.
type SpreadTrial struct {
	Schema   string         `json:"schema"`
	Loop     string         `json:"loop"`
	Draw     string         `json:"draw"`
	Seed     uint64         `json:"seed"`
	Trial    int64          `json:"trial"`
	Levels   string         `json:"levels"` // of a corner, "" for other draws
	Symbols  SymbolValues   `json:"symbols"`
	Computed SymbolValues   `json:"computed"` // the other symbols of the file, as they follow
	Failed   string         `json:"failed"`   // why it could not be analysed, "" where it was
	Stable   bool           `json:"stable"`
	Decay    Figure         `json:"decay_per_s"` // of the slowest mode
	Metrics  NamedFigures   `json:"metrics"`
	Required []TrialVerdict `json:"requirements"`
	Meets    bool           `json:"meets"`
	Units    Units          `json:"units"`
}

// TrialVerdict is a requirement and what the trial says to it.
type TrialVerdict struct {
	Requirement string `json:"requirement"`
	Met         *bool  `json:"met"` // null: cannot be judged
}

// NamedFigures are metrics with values, an object in JSON.
type NamedFigures []NamedFigure

// NamedFigure is one of them.
type NamedFigure struct {
	Name  string
	Value Figure
	Unit  string // not in the JSON
}

// MarshalJSON writes an object.
func (n NamedFigures) MarshalJSON() ([]byte, error) {
	b := []byte{'{'}
	for i, f := range n {
		if i > 0 {
			b = append(b, ',')
		}
		b = append(append(append(b, '"'), f.Name...), `":`...)
		b = appendFigure(b, f.Value)
	}
	return append(b, '}'), nil
}

// RunSpreadTrial runs trial k of the study alone, k from 1. It depends on the draw, the seed and k, not on how many trials the study has.
func RunSpreadTrial(ctx context.Context, l *loop.Loop, o SpreadOptions, k int64) (*SpreadTrial, error) {
	o.Rows = nil
	j, err := newSpreadJob(ctx, l, o)
	if err != nil {
		return nil, err
	}
	if most := j.most(); k < 1 || k > most {
		return nil, fmt.Errorf("there is no trial %d; the trials of this draw have the numbers 1 to %d", k, most)
	}
	row, err := j.trial(k)
	if err != nil {
		return nil, err
	}
	out := &SpreadTrial{
		Schema: "steadytick/spread-trial/1", Loop: l.Name, Draw: j.o.Draw, Seed: o.Seed, Trial: k, Symbols: j.values(row), Computed: SymbolValues{},
		Failed: row.failed, Stable: row.stable, Decay: row.decay, Metrics: NamedFigures{}, Units: Units{l.Output, l.Effort},
	}
	if j.o.Draw == DrawCorners {
		out.Levels = j.levels(k)
	}
	j.computed(out, k)
	for _, name := range j.metrics {
		out.Metrics = append(out.Metrics, NamedFigure{name, j.figure(row, name), requirementUnit(name, out.Units)})
	}
	out.Meets = row.failed == "" && row.stable
	for _, c := range j.list {
		v := TrialVerdict{Requirement: c.text}
		if s := j.slack(c, row); j.judges(c) {
			is := met(s)
			out.Meets = out.Meets && is
			if !math.IsNaN(s) {
				v.Met = &is
			}
		}
		out.Required = append(out.Required, v)
	}
	for _, q := range j.refused {
		out.Required = append(out.Required, TrialVerdict{Requirement: q.Text})
	}
	return out, nil
}

// most is the highest number of a trial.
func (j *spreadJob) most() int64 {
	if j.o.Draw == DrawCorners {
		return j.trials
	}
	return MostTrials
}

// computed adds the symbols of the file that are not drawn.
func (j *spreadJob) computed(out *SpreadTrial, k int64) {
	values, problems := j.drawSymbols(&spreadRow{trial: k})
	if len(problems) > 0 {
		return
	}
	l, problems := j.l.WithSymbols(values)
	if len(problems) > 0 {
		return
	}
	for _, s := range l.Symbols {
		if values[s.Name] == nil {
			v, _ := s.Value.Float64()
			out.Computed = append(out.Computed, SymbolValue{s.Name, v})
		}
	}
}
