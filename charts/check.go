package charts

import (
	"fmt"
	"math"

	"steadytick/study"
)

// CurveError says which curve of which chart cannot be drawn, and why.
type CurveError struct {
	Chart, Curve string
	Index        int // of the point, −1 for the whole curve
	Reason       string
}

func (e *CurveError) Error() string {
	if e.Index < 0 {
		return fmt.Sprintf("chart %s, curve %q: %s", e.Chart, e.Curve, e.Reason)
	}
	return fmt.Sprintf("chart %s, curve %q, point %d: %s", e.Chart, e.Curve, e.Index, e.Reason)
}

// checkCurve refuses what the chart library would drop without a word. positive: X must be above zero.
func checkCurve(chart string, c study.Curve, positive bool) error {
	if len(c.X) != len(c.Y) {
		return &CurveError{chart, c.Name, -1, fmt.Sprintf("%d values of x and %d of y", len(c.X), len(c.Y))}
	}
	for i := range c.X {
		switch {
		case !finite(c.X[i]):
			return &CurveError{chart, c.Name, i, fmt.Sprintf("x is %v", c.X[i])}
		case !finite(c.Y[i]):
			return &CurveError{chart, c.Name, i, fmt.Sprintf("y is %v", c.Y[i])}
		case positive && c.X[i] <= 0:
			return &CurveError{chart, c.Name, i, fmt.Sprintf("x is %v on a logarithmic axis", c.X[i])}
		}
	}
	return nil
}

func finite(v float64) bool { return !math.IsNaN(v) && !math.IsInf(v, 0) }
