package charts

import (
	_ "embed"
	"errors"
	"fmt"
	"io"

	"steadytick/study"
)

//go:embed page/rate.html
var rateText string

var ratePage = parsePage("rate", rateText)

// rateView is what the page of a search for rates is given.
type rateView struct {
	frame
	R          *study.Rate
	Trouble    bool // no rate works, or none that the timer makes
	Facts      []fact
	Reason     string
	Ledger     []ledgerRow
	LedgerUnit string

	WindowCharts, MapCharts, Margins, Errors, FoldingCharts section

	Windows, Relaxations, Pick, Settings, Breaks, Effect, Rules, Maps grid
	Folding, Candidates                                               []grid
}

// fact is one entry of the line under the verdict.
type fact struct {
	Name, Unit string
	Parts      []figure
}

// RateReport writes r as one HTML file. Nothing is written when it fails; the errors are those of Report. The same
// r gives the same bytes.
func RateReport(w io.Writer, r *study.Rate) error {
	if r == nil {
		return errors.New("charts: no result to report")
	}
	v, err := newRateView(r)
	if err != nil {
		return fmt.Errorf("report: %w", err)
	}
	return writePage(w, ratePage, v)
}

func newRateView(r *study.Rate) (*rateView, error) {
	t := rateTables{r}
	v := &rateView{
		R: r, Trouble: r.Pick == nil,
		Facts: t.facts(), Windows: t.windows(), Relaxations: t.relaxations(), Pick: t.pick(), Settings: t.settings(), Breaks: t.breaks(),
		Effect: t.effect(), Rules: t.rules(), Maps: t.maps(), Folding: t.folding(), Candidates: t.candidates(),
	}
	if r.Pick != nil {
		v.Reason = sentence(r.Pick.Reason)
		v.Ledger, v.LedgerUnit = ledgerRows(r.DelayLedger)
	}
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
func (v *rateView) draw(cv *canvas) (err error) {
	d := newRateDrawing(v.R)
	if v.WindowCharts, err = d.window(cv); err != nil {
		return err
	}
	if v.MapCharts, err = d.mapWindows(cv); err != nil {
		return err
	}
	if v.Margins, err = d.overRate(cv, "margin", isMargin); err != nil {
		return err
	}
	if v.Errors, err = d.overRate(cv, "figure", func(name string) bool { return !isMargin(name) }); err != nil {
		return err
	}
	v.FoldingCharts, err = d.folding(cv)
	return err
}

// sentence begins with a capital and ends with a full stop.
func sentence(s string) string {
	if s == "" {
		return s
	}
	return title(s) + "."
}

// isMargin tells the figures that are drawn with the margins.
func isMargin(name string) bool {
	switch name {
	case "phase_margin", "gain_margin", "modulus_margin", "delay_margin", "jitter_margin", "bandwidth", "crossover":
		return true
	}
	return false
}
