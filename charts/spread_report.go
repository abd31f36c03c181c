package charts

import (
	_ "embed"
	"errors"
	"fmt"
	"io"

	"steadytick/study"
)

//go:embed page/spread.html
var spreadText string

var spreadPage = parsePage("spread", spreadText)

// spreadView is what the page of a study over tolerances is given.
type spreadView struct {
	frame
	R       *study.Spread
	Trouble bool // a trial misses something, or the yield asked for is not reached
	Facts   []fact
	Corner  bool // the trials are the corners
	Step    figure

	Steps      section
	Histograms []section

	Symbols, Requirements, Counts, Failures, Worst, Metrics, Quantiles, Extremes, Bars grid
	Sensitivities                                                                      []grid
	Others                                                                             []grid // of metrics that no requirement names
}

// SpreadReport writes r as one HTML file. Nothing is written when it fails; the errors are those of Report. The same
// r gives the same bytes.
func SpreadReport(w io.Writer, r *study.Spread) error {
	if r == nil {
		return errors.New("charts: no result to report")
	}
	v, err := newSpreadView(r)
	if err != nil {
		return fmt.Errorf("report: %w", err)
	}
	return writePage(w, spreadPage, v)
}

func newSpreadView(r *study.Spread) (*spreadView, error) {
	t := spreadTables{r}
	v := &spreadView{
		R: r, Trouble: r.Yield.Met < r.Yield.Of || r.Yield.Reached != nil && !*r.Yield.Reached, Corner: r.Draw == study.DrawCorners,
		Step:  showFloat("sensitivity_step_percent", r.StepPercent, one),
		Facts: t.facts(), Symbols: t.symbols(), Requirements: t.requirements(), Counts: t.counts(), Failures: t.failures(), Worst: t.worst(),
		Metrics: t.metrics(), Quantiles: t.quantiles(), Extremes: t.extremes(), Bars: t.bars(),
	}
	v.Sensitivities, v.Others = t.sensitivities()
	cv := &canvas{drawings: []drawing{}}
	if r.Curves != nil {
		if err := v.draw(cv); err != nil {
			return nil, err
		}
	}
	var err error
	v.frame, err = newFrame(cv.drawings)
	return v, err
}

// draw makes all charts.
func (v *spreadView) draw(cv *canvas) (err error) {
	if v.Steps, err = spreadSteps(cv, v.R); err != nil {
		return err
	}
	for _, b := range v.R.Curves.Histogram {
		s, err := spreadHistogram(cv, b)
		if err != nil {
			return err
		}
		v.Histograms = append(v.Histograms, s)
	}
	return nil
}
