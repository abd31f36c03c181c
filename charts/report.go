package charts

import (
	"bytes"
	_ "embed"
	"errors"
	"fmt"
	"html/template"
	"io"

	"steadytick/study"
)

//go:embed page/report.html
var pageText string

//go:embed page/shared.html
var sharedText string

//go:embed page/report.css
var pageStyle string

//go:embed page/report.js
var pageScript string

var page = parsePage("report", pageText)

// parsePage parses the template of one report with the pieces that all reports share.
func parsePage(name, text string) *template.Template {
	t := template.New(name).Funcs(template.FuncMap{
		"swatch": func(s style, dots bool) template.HTML { return s.swatch(dots) },
		"inc":    func(i int) int { return i + 1 },
	})
	return template.Must(template.Must(t.Parse(sharedText)).Parse(text))
}

// frame is what every page needs around its content.
type frame struct {
	Style          template.CSS
	Drawings       template.JS
	Runtime        template.JS
	RuntimeAddress string
	Script         template.JS
	PointLimit     int
	DotLimit       int
}

// newFrame carries the drawings, with the chart runtime or the address that it is loaded from.
func newFrame(drawings []drawing) (frame, error) {
	f := frame{Style: template.CSS(pageStyle), Script: template.JS(pageScript), PointLimit: maxPoints, DotLimit: maxDots}
	text, err := encode(drawings)
	if err != nil {
		return f, err
	}
	f.Drawings = template.JS(text)
	if f.Runtime = template.JS(runtimeScript()); f.Runtime == "" {
		f.RuntimeAddress = RuntimeAddress()
	}
	return f, nil
}

// size is about how large a page becomes: megabytes, and growing step by step costs more than filling them.
func (f frame) size() int { return len(f.Runtime) + len(f.Drawings) + 1<<19 }

// view is what the page template is given.
type view struct {
	frame
	C               *study.Compare
	Rate            figure
	Period, Delay   figure
	PeriodU, DelayU string
	Met             int
	Trouble         bool // a requirement is missed or the sampled loop unstable
	Compare, Series []group
	Steady          []group
	Ledger          []ledgerRow
	LedgerUnit      string
	Built           []builtGroup
	Requirements    []requirementRow
	Inputs          []inputView
	Frequency       section
	Crossings       []crossingRow
	Poles           section
	PoleTables      []poleTable
	Rates           []section
}

// inputView is one input: how its tracking degrades, in a table and in charts.
type inputView struct {
	section
	Table *degradeTable
}

// Report writes c as one HTML file. Nothing is written when it fails; the errors are a CurveError for a
// curve that cannot be drawn, and what w returns. The same c gives the same bytes.
func Report(w io.Writer, c *study.Compare) error {
	if c == nil {
		return errors.New("charts: no result to report")
	}
	v, err := newView(c)
	if err != nil {
		return fmt.Errorf("report: %w", err)
	}
	return writePage(w, page, v)
}

// sized is what a page shows, with a guess of how long the page gets.
type sized interface{ size() int }

// writePage writes a page whole, or nothing when it fails.
func writePage(w io.Writer, page *template.Template, v sized) error {
	var b bytes.Buffer
	b.Grow(v.size())
	if err := page.Execute(&b, v); err != nil {
		return fmt.Errorf("report: %w", err)
	}
	_, err := w.Write(b.Bytes())
	return err
}

func newView(c *study.Compare) (*view, error) {
	t := tables{c: c, notes: c.Warnings}
	v := &view{C: c, Trouble: c.Sampled != nil && !c.Sampled.Stable,
		Compare: t.compare(), Built: t.built(), Series: t.series(), Steady: t.steady(), Requirements: t.requirements(),
		Crossings: t.crossings(), PoleTables: t.poles()}
	v.Ledger, v.LedgerUnit = t.ledger()
	v.setFacts()
	cv := &canvas{drawings: []drawing{}}
	if c.Curves != nil {
		if err := v.draw(cv); err != nil {
			return nil, err
		}
	}
	v.Inputs = joinInputs(v.Inputs, t.degrade(&cv.styles))
	var err error
	v.frame, err = newFrame(cv.drawings)
	return v, err
}

// setFacts words the line under the verdict.
func (v *view) setFacts() {
	pu, du := seconds(v.C.PeriodS), seconds(v.C.LoopDelayS)
	v.Period, v.PeriodU = showFloat("period_s", v.C.PeriodS, pu), pu.name
	v.Delay, v.DelayU = showFloat("loop_delay_s", v.C.LoopDelayS, du), du.name
	v.Rate.Text = notApplicable
	if v.C.PeriodS > 0 {
		v.Rate.Text = formatNumber(1 / v.C.PeriodS)
	}
	for _, r := range v.C.Requirements {
		if r.Met != nil {
			if *r.Met {
				v.Met++
			} else {
				v.Trouble = true
			}
		}
	}
}

// draw makes all charts.
func (v *view) draw(cv *canvas) error {
	inputs, err := cv.inputs(v.C)
	if err != nil {
		return err
	}
	for _, s := range inputs {
		v.Inputs = append(v.Inputs, inputView{section: s})
	}
	if v.Frequency, err = cv.frequency(v.C); err != nil {
		return err
	}
	if v.Poles, err = cv.poles(v.C); err != nil {
		return err
	}
	v.Rates, err = cv.rates(v.C)
	return err
}

// joinInputs puts each degradation table with the charts of its input: the one of the same name, else,
// when there are as many tables as inputs, the one at the same place. A table left over stands alone.
func joinInputs(inputs []inputView, degrade []*degradeTable) []inputView {
	used := map[*degradeTable]bool{}
	for i := range inputs {
		for _, d := range degrade {
			if d.Input == inputs[i].Title {
				inputs[i].Table, used[d] = d, true
			}
		}
	}
	if len(used) == 0 && len(degrade) == len(inputs) {
		for i := range inputs {
			inputs[i].Table, used[degrade[i]] = degrade[i], true
		}
	}
	for i, d := range degrade {
		if !used[d] {
			inputs = append(inputs, inputView{section: section{ID: fmt.Sprintf("variants-%d", i+1), Title: d.Input}, Table: d})
		}
	}
	return inputs
}
