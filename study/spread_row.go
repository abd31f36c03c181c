package study

import (
	"bytes"
	"encoding/json"
	"fmt"
	"math"
	"strconv"
)

// appendFigure writes a figure as JSON: a number that reads back exactly, "inf", "-inf" or null.
func appendFigure(b []byte, f Figure) []byte {
	switch {
	case !f.OK || math.IsNaN(f.Value):
		return append(b, "null"...)
	case math.IsInf(f.Value, 1):
		return append(b, `"inf"`...)
	case math.IsInf(f.Value, -1):
		return append(b, `"-inf"`...)
	}
	return strconv.AppendFloat(b, f.Value, 'g', -1, 64)
}

// appendRow writes a trial as one line of JSON:
//
//	{"trial":7,"symbols":{"L":4.7e-05},"stable":true,"decay_per_s":3800,"metrics":{"phase_margin":50.2, …}}
//	{"trial":8,"symbols":{"L":0},"failed":"division by zero"}
func (j *spreadJob) appendRow(b []byte, row *spreadRow) []byte {
	b = append(b, `{"trial":`...)
	b = strconv.AppendInt(b, row.trial, 10)
	b = append(b, `,"symbols":`...)
	b = j.values(row).append(b)
	if row.failed != "" {
		reason, _ := json.Marshal(row.failed) // a string has no error
		b = append(append(b, `,"failed":`...), reason...)
		return append(b, "}\n"...)
	}
	b = append(b, `,"stable":`...)
	b = strconv.AppendBool(b, row.stable)
	b = append(b, `,"decay_per_s":`...)
	b = appendFigure(b, row.decay)
	b = append(b, `,"metrics":{`...)
	for i, name := range j.metrics {
		if i > 0 {
			b = append(b, ',')
		}
		b = append(append(append(b, '"'), name...), `":`...)
		b = appendFigure(b, row.figures[i])
	}
	return append(b, "}}\n"...)
}

// readFigure is a figure as it stands in a line.
type readFigure struct{ Figure }

// UnmarshalJSON reads a number, "inf", "-inf" or null.
func (f *readFigure) UnmarshalJSON(text []byte) error {
	switch string(text) {
	case "null":
		f.Figure = Figure{}
		return nil
	case `"inf"`:
		f.Figure = Fig(math.Inf(1))
		return nil
	case `"-inf"`:
		f.Figure = Fig(math.Inf(-1))
		return nil
	}
	v, err := strconv.ParseFloat(string(text), 64)
	if err != nil || math.IsInf(v, 0) || math.IsNaN(v) {
		return fmt.Errorf("%s is not a figure", text)
	}
	f.Figure = Fig(v)
	return nil
}

// readRow reads a line that appendRow wrote: the very same symbols and metrics, no others, none missing.
func (j *spreadJob) readRow(line []byte) (*spreadRow, error) {
	var in struct {
		Trial   int64                 `json:"trial"`
		Symbols map[string]readFigure `json:"symbols"`
		Failed  string                `json:"failed"`
		Stable  *bool                 `json:"stable"`
		Decay   readFigure            `json:"decay_per_s"`
		Metrics map[string]readFigure `json:"metrics"`
	}
	d := json.NewDecoder(bytes.NewReader(line))
	d.DisallowUnknownFields()
	if err := d.Decode(&in); err != nil {
		return nil, err
	}
	row := &spreadRow{trial: in.Trial, failed: in.Failed, decay: in.Decay.Figure}
	for _, s := range j.symbols {
		v, ok := in.Symbols[s.Name]
		if !ok && in.Failed == "" {
			return nil, fmt.Errorf("the symbol %s is missing", s.Name)
		}
		if !v.OK {
			v.Value = math.NaN()
		}
		row.symbols = append(row.symbols, v.Value)
	}
	if in.Failed != "" {
		return row, nil
	}
	if in.Stable == nil || !in.Decay.OK {
		return nil, fmt.Errorf("the trial does not say whether it is stable")
	}
	row.stable = *in.Stable
	for _, name := range j.metrics {
		f, ok := in.Metrics[name]
		if !ok {
			return nil, fmt.Errorf("the metric %s is missing", name)
		}
		row.figures = append(row.figures, f.Figure)
	}
	if len(in.Metrics) != len(j.metrics) || len(in.Symbols) != len(j.symbols) {
		return nil, fmt.Errorf("symbols or metrics that the loop does not have")
	}
	return row, nil
}
