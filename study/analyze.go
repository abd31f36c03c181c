package study

import (
	"math"

	"steadytick/internal/dd"
	"steadytick/internal/lti"
)

// maxPoles is how many closed-loop poles of a loop with a long delay are given.
const maxPoles = 64

// analyzed is a block with the figures that everything else is made from.
type analyzed struct {
	block      *block
	stable     bool
	byPoles    bool
	byNyquist  bool
	poles      lti.Poles
	trackingDD []dd.Float
	loopErrDD  []dd.Float
	tracking   []float64 // of r − y
	loopErr    []float64 // of r − m
	margins    lti.MarginSet
	scan       *lti.Scan // of the open loop
	delay      float64   // around the loop, seconds: dead times and whole ticks
	warnings   []Warning
}

// seconds is the period, 0 in the continuous column.
func (a *analyzed) seconds() float64 {
	if a.block.period == nil {
		return 0
	}
	T, _ := a.block.period.Float64()
	return T
}

// analyze computes poles, verdicts, series and margins of a block.
func analyze(b *block) (*analyzed, error) {
	a := &analyzed{block: b}
	got, err := lti.Analyze(b.open, maxPoles)
	if err != nil {
		return nil, err
	}
	a.poles, a.margins, a.scan = got.Poles, got.Margins, got.Scan
	outside := 0
	for _, p := range b.outer {
		if !lti.Inside(p, b.open.Period) {
			outside++
		}
	}
	a.byPoles = outside == 0 && got.Poles.Unstable == 0
	a.byNyquist = outside == 0 && got.Unstable == 0 && !got.Marginal
	a.stable = a.byPoles && a.byNyquist
	if a.byPoles != a.byNyquist {
		a.warn("verdicts_disagree", "the closed-loop poles say %s, the argument count along the stability boundary says %s (%d roots outside%s): the loop is so close to the boundary that neither is certain, and is treated as unstable",
			stableWord(a.byPoles), stableWord(a.byNyquist), got.Unstable, marginalWord(got.Marginal))
	}
	if outside > 0 {
		a.warn("unstable_outside_loop", "the prefilter or the feedforward has %d poles that do not decay: the loop around the plant cannot help that", outside)
	}
	a.trackingDD = b.sys.TrackingSeries(steadyTerms)
	a.tracking = floats(a.trackingDD)
	a.loopErrDD = b.sys.LoopErrorSeries(steadyTerms)
	a.loopErr = floats(a.loopErrDD)
	a.crossCheck()
	a.delay = b.open.DeadTime.Float64() + b.open.Period.Float64()*float64(b.open.Ticks)
	return a, nil
}

func stableWord(ok bool) string {
	if ok {
		return "stable"
	}
	return "unstable"
}

func marginalWord(m bool) string {
	if m {
		return ", some on the boundary itself"
	}
	return ""
}

func floats(c []dd.Float) []float64 {
	out := make([]float64, len(c))
	for i, v := range c {
		out[i] = v.Float64()
	}
	return out
}

// routesAgree is how far the two routes to the tracking series may differ,
// relative to the largest coefficient seen so far scaled by the slowest time
// constant; both carry 32 digits, so 1e-12 leaves 20 of them to cancellation.
const routesAgree = 1e-12

// crossCheck holds the tracking series against the second route, from the
// coefficients of the closed loop, and warns with the difference.
func (a *analyzed) crossCheck() {
	second := a.block.sys.TrackingByCoefficients(steadyTerms)
	scale := 0.0
	for k, c := range a.tracking {
		scale = math.Max(scale, math.Abs(c))
		if diff := math.Abs(c - second[k].Float64()); !(diff <= routesAgree*scale) && diff > 1e-300 {
			a.warn("routes_disagree", "tracking series c%d: series give %.12g, closed-loop coefficients give %.12g (difference %.2g); treat the steady errors with care",
				k, c, second[k].Float64(), diff)
			return
		}
	}
}

// bandwidth is where the response from r to y has fallen by 3 dB.
func (a *analyzed) bandwidth() Figure {
	w, ok, err := a.block.sys.Bandwidth(a.poles)
	return Figure{w, ok && err == nil && !math.IsNaN(w)}
}

// toOutput is the closed-loop response from r to y at ω.
func (b *block) toOutput(w float64) complex128 {
	return b.sys.Cr.Freq(w) * b.sys.Gy.Freq(w) / (1 + b.open.Freq(w))
}

// toMeasurement is the closed-loop response from r to m at ω.
func (b *block) toMeasurement(w float64) complex128 {
	return b.sys.Cr.Freq(w) * b.sys.Gm.Freq(w) / (1 + b.open.Freq(w))
}
