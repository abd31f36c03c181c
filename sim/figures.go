package sim

import (
	"context"
	"errors"
	"math"
)

// Maybe is a figure that may not apply: then OK is false and Value is 0.
type Maybe struct {
	Value float64
	OK    bool
}

func some(v float64) Maybe { return Maybe{v, !math.IsNaN(v) && !math.IsInf(v, 0)} }

// Figures are those of a step response that starts at 0 (IEEE Std 181): rise from the first
// passing of 10 % to the first of 90 % of the final value; overshoot in percent of the
// final value; settling to the last time outside the band around it; the instant
// of the highest value, where it goes beyond the final one; the largest magnitude of the effort.
type Figures struct {
	OvershootPercent Maybe
	RiseTime         Maybe // seconds
	SettlingTime     Maybe // seconds; not applicable when the run ends outside the band
	PeakTime         Maybe // seconds; not applicable without overshoot
	PeakEffort       Maybe
	// RecoveryTime is how long the response takes, from its first moment within the settling band, to stay in it,
	// in seconds: what is left of an effort that was at its limit; 0 when it never was. Not applicable without limits, or when the
	// run ends outside.
	RecoveryTime Maybe
}

// StepSpec asks for the figures of a step response.
type StepSpec struct {
	Final float64 // final value of y; nothing applies when it is 0 or not finite
	Band  float64 // half width of the settling band as a part of Final; 0 means 0.02
}

func (s *StepSpec) check() error {
	if math.IsNaN(s.Band) || s.Band < 0 || s.Band >= 1 {
		return errors.New("the settling band must lie between 0 and 1")
	}
	if s.Band == 0 {
		s.Band = 0.02
	}
	return nil
}

func (s *StepSpec) applies() bool {
	return s.Final != 0 && !math.IsNaN(s.Final) && !math.IsInf(s.Final, 0)
}

// StepFigures runs cfg and returns the figures of its output.
func StepFigures(ctx context.Context, cfg Config, spec StepSpec) (Figures, *Trace, error) {
	cfg.Step = &spec
	tr, err := Run(ctx, cfg)
	if err != nil {
		return Figures{}, nil, err
	}
	return tr.Step, tr, nil
}

// span01 is a stretch of the response, smooth inside, of length h from t. at gives the
// value and the slope at θ, 0 <= θ <= h, as parts of the final value.
type span01 struct {
	t, h           float64
	v0, d0, v1, d1 float64
	at             func(theta float64) (v, d float64)
}

// finder gathers the figures from consecutive stretches. Levels are parts of the final value.
type finder struct {
	band         float64
	started      bool
	t10, t90     float64
	has10, has90 bool
	top, topTime float64
	outside      bool    // at the end of what was seen
	settled      float64 // last passing into the band
	entered      float64 // first moment within the band
	inside       bool    // there was one
	last         float64 // value at the end of what was seen
}

func newFinder(band float64) *finder { return &finder{band: band, outside: true} }

// overNothing is the overshoot, as a part of the final value, that counts as none: the final
// value itself is known to about 1e-12.
const overNothing = 1e-11

// add takes the next stretch.
func (f *finder) add(s span01) {
	f.started = true
	if s.v0 != f.last {
		// A jump of the response at s.t, as where the plant passes the effort straight on.
		f.monotone(s.t, s.t, f.last, s.v0, func(float64) (float64, float64) { return s.v0, 0 })
	}
	if s.d0*s.d1 < 0 && f.matters(&s) {
		th := rootOf(func(x float64) float64 { _, d := s.at(x); return d }, 0, s.h, s.d0, s.d1)
		v, _ := s.at(th)
		f.monotone(s.t, s.t+th, s.v0, v, shifted(s.at, 0))
		f.monotone(s.t+th, s.t+s.h, v, s.v1, shifted(s.at, th))
	} else {
		f.monotone(s.t, s.t+s.h, s.v0, s.v1, s.at)
	}
	f.last = s.v1
}

func shifted(at func(float64) (float64, float64), by float64) func(float64) (float64, float64) {
	return func(x float64) (float64, float64) { return at(x + by) }
}

// matters tells whether the extremum inside s can change a figure: its estimate lies 1 % of the
// band within an edge of it or beyond, or is a new highest value. The estimate is that of
// the two tangents, which go beyond every smooth curve between them.
func (f *finder) matters(s *span01) bool {
	th := (s.v1 - s.v0 - s.d1*s.h) / (s.d0 - s.d1)
	v := s.v0 + s.d0*th
	return math.Abs(v-1) > 0.99*f.band || v > f.top || !f.has90
}

// monotone takes a stretch without an extremum inside.
func (f *finder) monotone(t0, t1, v0, v1 float64, at func(float64) (float64, float64)) {
	locate := func(level float64) float64 {
		if t1 == t0 {
			return t0
		}
		return t0 + rootOf(func(x float64) float64 { v, _ := at(x); return v - level }, 0, t1-t0, v0-level, v1-level)
	}
	if !f.has10 && v1 >= 0.1 {
		f.t10, f.has10 = locate(0.1), true
	}
	if !f.has90 && v1 >= 0.9 {
		f.t90, f.has90 = locate(0.9), true
	}
	if v1 > f.top {
		f.top, f.topTime = v1, t1
	}
	edge := func(v float64) float64 { return math.Abs(v-1) - f.band }
	switch {
	case edge(v1) > 0:
		f.outside = true
	case edge(v0) > 0:
		level := 1 - f.band
		if v0 > 1 {
			level = 1 + f.band
		}
		f.outside, f.settled = false, locate(level)
		f.enter(f.settled)
	}
	// Through the band and out again in one stretch.
	if !f.inside && edge(v0) > 0 && (v0-1)*(v1-1) < 0 {
		level := 1 - f.band
		if v0 > 1 {
			level = 1 + f.band
		}
		f.enter(locate(level))
	}
}

func (f *finder) enter(t float64) {
	if !f.inside {
		f.inside, f.entered = true, t
	}
}

// figures ends the search; effort is its peak, limits tells that it has limits, limited that it was at one.
func (f *finder) figures(effort float64, limits, limited bool) Figures {
	out := Figures{PeakEffort: some(effort)}
	if f.has10 && f.has90 {
		out.RiseTime = some(f.t90 - f.t10)
	}
	if !f.started {
		return out
	}
	out.OvershootPercent = some(0)
	if f.top > 1+overNothing {
		out.OvershootPercent = some((f.top - 1) * 100)
		out.PeakTime = some(f.topTime)
	}
	if !f.outside {
		out.SettlingTime = some(f.settled)
		switch {
		case limited && f.inside:
			out.RecoveryTime = some(math.Max(0, f.settled-f.entered))
		case limits && !limited:
			out.RecoveryTime = some(0)
		}
	}
	return out
}

// rootOf finds the zero of f between a and b, where it has values fa and fb of
// different sign or zero, by false position with halving of the kept value (Illinois; Dowell
// and Jarratt, 1971), with bisection where that is slow, to the last digits of b − a.
func rootOf(f func(float64) float64, a, b, fa, fb float64) float64 {
	if fa == 0 || !(fa*fb < 0) {
		if math.Abs(fa) <= math.Abs(fb) {
			return a
		}
		return b
	}
	tol := 4e-16 * math.Max(math.Abs(a), math.Abs(b))
	for i := range 100 {
		if math.Abs(b-a) <= tol {
			break
		}
		c := (a*fb - b*fa) / (fb - fa)
		if i%4 == 3 || !(c > math.Min(a, b) && c < math.Max(a, b)) {
			c = a + (b-a)/2
		}
		fc := f(c)
		if fc == 0 {
			return c
		}
		if fc*fb < 0 {
			a, fa = b, fb
		} else {
			fa /= 2
		}
		b, fb = c, fc
	}
	return b
}
