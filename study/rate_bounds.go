package study

import (
	"math"
	"slices"
)

const (
	// boundTo is how well a bound of linear figures is found, relative: a few roundings of the rate.
	boundTo = 1e-13
	// boundSimulated is the same for figures of a simulation, which are good to about 1e-8 themselves.
	boundSimulated = 1e-7
)

// rateSpan is an interval of rates, Hz; 0 and +Inf are ends that were not reached within the range.
type rateSpan struct{ low, high float64 }

// spans finds the intervals of rates that meet a constraint: between neighbouring samples of which one meets it and one does not
// there is a bound, refined until it is known to boundTo; and where the slack of three neighbours of one kind bends
// towards its limit, the place of least distance is searched for a bound that they did not see.
func (w *rateScan) spans(c *constraint) ([]rateSpan, error) {
	list, err := w.withDips(c, w.samples(c))
	if err != nil || len(list) == 0 {
		return nil, err
	}
	var out []rateSpan
	if met(list[0].slack) {
		out = append(out, rateSpan{0, math.Inf(1)})
	}
	for i := 1; i < len(list); i++ {
		a, b := list[i-1], list[i]
		if met(a.slack) == met(b.slack) {
			continue
		}
		hz, err := w.bound(c, a, b)
		if err != nil {
			return nil, err
		}
		if met(b.slack) {
			out = append(out, rateSpan{hz, math.Inf(1)})
		} else {
			out[len(out)-1].high = hz
		}
	}
	return out, nil
}

// bound is the rate between two samples, of which one meets the constraint and one does not, where that changes: the last rate
// found that meets it. False position on the slack, which is smooth as a rule, and bisection in turn, which needs nothing.
func (w *rateScan) bound(c *constraint, a, b sample) (float64, error) {
	good, bad := a, b
	if met(b.slack) {
		good, bad = b, a
	}
	tol := boundTo
	if math.IsNaN(bad.slack) { // beyond it there is no figure, for want of length of the run as a rule: that has no exact end
		return good.hz, nil
	}
	if c.needs.any() {
		tol = boundSimulated
		if hz, ok, err := w.stableEdge(c, good, bad); ok || err != nil {
			return hz, err
		}
	}
	slackAt := w.slackAt
	if c.name == "stable" {
		crosses, err := w.crosses(good.hz, bad.hz)
		if err != nil {
			return 0, err
		}
		if crosses {
			slackAt = w.rawDecayAt
		}
	}
	g, h := good.slack, bad.slack // halved where one end stays (the Illinois rule)
	last := 0
	for i := range 120 {
		if math.Abs(good.hz-bad.hz) <= tol*good.hz {
			break
		}
		middle := good.hz + (bad.hz-good.hz)/2
		if middle == good.hz || middle == bad.hz {
			break
		}
		hz := middle
		if f := g / (g - h); i%3 != 2 && f > 0 && f < 1 && !math.IsInf(g, 0) {
			if hz = good.hz + (bad.hz-good.hz)*f; hz == good.hz || hz == bad.hz {
				hz = middle
			}
		}
		s, err := slackAt(c, hz)
		if err != nil {
			return 0, err
		}
		if met(s) {
			good, g = sample{hz, s}, s
			if last > 0 {
				h /= 2
			}
			last = 1
		} else {
			bad, h = sample{hz, s}, s
			if last < 0 {
				g /= 2
			}
			last = -1
		}
	}
	return good.hz, nil
}

// crosses tells whether the rightmost pole clearly lies on one side of the boundary at one rate and on the other at the other. The end
// of stability is then where it crosses; the verdicts, which count a pole within 1e-12 of the boundary as on it, would end a
// little before.
func (w *rateScan) crosses(good, bad float64) (bool, error) {
	p, err := w.at(good, simulated{})
	if err != nil {
		return false, err
	}
	q, err := w.at(bad, simulated{})
	if err != nil || !p.runs() || !q.runs() {
		return false, err
	}
	a, clearA := p.rawDecay()
	b, clearB := q.rawDecay()
	return clearA && clearB && a > 0 && b < 0, nil
}

func (w *rateScan) rawDecayAt(_ *constraint, hz float64) (float64, error) {
	p, err := w.at(hz, simulated{})
	if err != nil {
		return math.NaN(), err
	}
	if !p.runs() {
		return math.Inf(-1), nil
	}
	d, _ := p.rawDecay()
	return d, nil
}

// besideEdge is how near the end of stability a simulated figure is looked at: nearer, runs grow without end.
const besideEdge = 5e-4

// stableEdge gives the end of stability as the bound of a simulated figure that is met right up to it. ok is false where the
// bad end is stable or the figure fails before.
func (w *rateScan) stableEdge(c *constraint, good, bad sample) (hz float64, ok bool, err error) {
	p, err := w.at(bad.hz, simulated{})
	if err != nil || p.stable() {
		return 0, false, err
	}
	stable := w.list[0]
	from, err := w.slackAt(stable, good.hz)
	if err != nil {
		return 0, false, err
	}
	to, err := w.slackAt(stable, bad.hz)
	if err != nil || !met(from) || met(to) {
		return 0, false, err
	}
	edge, err := w.bound(stable, sample{good.hz, from}, sample{bad.hz, to})
	if err != nil {
		return 0, false, err
	}
	inside := edge * (1 + math.Copysign(besideEdge, good.hz-bad.hz))
	if (inside-edge)*(good.hz-inside) < 0 {
		return edge, true, nil
	}
	s, err := w.slackAt(c, inside)
	return edge, met(s), err
}

// withDips adds samples where the slack comes nearest to the limit between samples that all meet it, or all miss it.
func (w *rateScan) withDips(c *constraint, list []sample) ([]sample, error) {
	out := slices.Clone(list)
	for i := 1; i+1 < len(list); i++ {
		a, b, d := list[i-1], list[i], list[i+1]
		if met(a.slack) != met(b.slack) || met(b.slack) != met(d.slack) || !bends(a, b, d) {
			continue
		}
		if !reaches(a, b, d) && (c.needs.any() || !steep(a, b, d)) {
			continue
		}
		found, err := w.dip(c, a, b, d)
		if err != nil {
			return nil, err
		}
		out = append(out, found...)
	}
	slices.SortFunc(out, func(x, y sample) int {
		switch {
		case x.hz < y.hz:
			return -1
		case x.hz > y.hz:
			return 1
		}
		return 0
	})
	return slices.CompactFunc(out, func(x, y sample) bool { return x.hz == y.hz }), nil
}

// bends tells whether the middle one of three slacks is the nearest to the limit.
func bends(a, b, d sample) bool {
	x, y, z := math.Abs(a.slack), math.Abs(b.slack), math.Abs(d.slack)
	return y <= x && y <= z && math.Max(x, z) > y*(1+1e-9) && !math.IsInf(y, 0)
}

// steep tells whether a neighbour of the middle slack is half as far again from the limit: the figure then changes too much
// between the samples for a parabola to tell.
func steep(a, b, d sample) bool {
	return math.Max(math.Abs(a.slack), math.Abs(d.slack)) > 1.5*math.Abs(b.slack)
}

// reaches tells whether the parabola through three slacks comes within a quarter of the middle one's distance of the limit.
func reaches(a, b, d sample) bool {
	u, v := math.Log(b.hz/a.hz), math.Log(d.hz/b.hz)
	s, t := (b.slack-a.slack)/u, (d.slack-b.slack)/v
	curve := (t - s) / (u + v)
	if curve == 0 || math.IsNaN(curve) || math.IsInf(curve, 0) {
		return true
	}
	slope := (s*v + t*u) / (u + v)
	top := b.slack - slope*slope/(4*curve)
	return met(top) != met(b.slack) || math.Abs(top) < math.Abs(b.slack)/4
}

// dip narrows the place of least |slack| by golden section until the limit is passed or the place is known to 1e-7 of the
// rate: an island narrower than that is no rate to choose.
func (w *rateScan) dip(c *constraint, a, b, d sample) ([]sample, error) {
	const golden = 0.3819660112501051
	side := met(b.slack)
	var out []sample
	for range 40 {
		if d.hz-a.hz <= 1e-7*b.hz {
			break
		}
		x := b.hz + golden*(d.hz-b.hz)
		if b.hz-a.hz > d.hz-b.hz {
			x = b.hz - golden*(b.hz-a.hz)
		}
		s, err := w.slackAt(c, x)
		if err != nil {
			return nil, err
		}
		if math.IsNaN(s) {
			break
		}
		n := sample{x, s}
		out = append(out, n)
		if met(s) != side {
			break
		}
		switch {
		case math.Abs(s) < math.Abs(b.slack) && x > b.hz:
			a, b = b, n
		case math.Abs(s) < math.Abs(b.slack):
			d, b = b, n
		case x > b.hz:
			d = n
		default:
			a = n
		}
		if c.needs.any() && len(out) >= 12 {
			break
		}
	}
	return out, nil
}

// meet is the intersection of two ascending lists of intervals.
func meet(a, b []rateSpan) []rateSpan {
	var out []rateSpan
	for _, x := range a {
		for _, y := range b {
			if s := (rateSpan{math.Max(x.low, y.low), math.Min(x.high, y.high)}); s.low < s.high {
				out = append(out, s)
			}
		}
	}
	slices.SortFunc(out, func(x, y rateSpan) int {
		if x.low < y.low {
			return -1
		}
		return 1
	})
	return out
}
