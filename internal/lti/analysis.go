package lti

// Analysis is all that is known of a closed loop from L alone.
type Analysis struct {
	Poles    Poles
	Unstable int  // by the argument count
	Marginal bool // of the argument count
	Stable   bool // by both verdicts
	Margins  MarginSet
	Scan     *Scan // of L
}

// Analyze computes poles (as ClosedPoles does with max), the argument count and the margins of L,
// sharing the work they have in common. Errors: ErrImproper, ErrAlgebraic,
// ErrRange and those of poly.Roots.
func Analyze(l TF, max int) (Analysis, error) {
	var a Analysis
	var err error
	if l.IsZero() {
		a.Poles = openPoles(l)
		a.Unstable, a.Marginal, err = hiddenOrOpen(l)
		a.Stable = a.Unstable == 0 && !a.Marginal && a.Poles.Unstable == 0
		a.Margins, a.Scan = noMargins(a.Stable), &Scan{}
		return a, err
	}
	f, err := l.factor()
	if err != nil {
		return a, err
	}
	if f.closesOnItself() {
		return a, ErrAlgebraic
	}
	p, err := newPlane(f)
	if err != nil {
		return a, err
	}
	if a.Poles, err = closedPoles(l, f, max); err != nil {
		return a, err
	}
	a.Scan = p.scan()
	gains := p.gainCrossings()
	a.Unstable, a.Marginal = p.unstable(gains)
	a.Stable = a.Unstable == 0 && !a.Marginal && a.Poles.Unstable == 0
	a.Margins = p.margins(l, gains, a.Stable)
	return a, nil
}
