package study

import (
	"fmt"
	"math"
	"math/cmplx"
	"testing"

	"steadytick/internal/reference"
	"steadytick/loop"
)

// The targets of the numerics against arithmetic of 260 digits
// (testdata/reference/generate.py): error constants and series to 1e-11 relative,
// poles and margins to 1e-8.
const (
	constantsTarget = 1e-11
	marginsTarget   = 1e-8
)

// A pole that close to z = 0 dies within a tick. δ is near −1/T there and is stored to 2^-104 = 5e-32 of that, so
// z is known to about 1e-29 (a condition of some hundreds) and no relative accuracy of ln z is left; above, 1e-29/1e-22 over |ln z| = 50
// is within the target.
const (
	deepPole      = 1e-22
	deepTolerance = 1e-29
)

// worst keeps the largest relative deviation of a kind of figure.
type worst struct {
	deviation float64
	where     string
}

// check compares figure got with want; zero and infinite figures must be so exactly.
func check(t *testing.T, kinds map[string]*worst, kind, where string, got Figure, want reference.Number, target float64) {
	t.Helper()
	if got.OK != want.OK {
		t.Errorf("%s: applicable %v, want %v (%v)", where, got.OK, want.OK, want.Float64())
		return
	}
	if !want.OK {
		return
	}
	w := want.Float64()
	if w == 0 || math.IsInf(w, 0) {
		if got.Value != w {
			t.Errorf("%s: %g, want exactly %g", where, got.Value, w)
		}
		return
	}
	d := math.Abs(got.Value-w) / math.Abs(w)
	if !(d <= target) {
		t.Errorf("%s: %.17g, want %.17g: %.2g relative, target %g", where, got.Value, w, d, target)
	}
	if k := kinds[kind]; k == nil || d > k.deviation {
		kinds[kind] = &worst{d, where}
	}
}

func TestReferenceSet(t *testing.T) {
	entries := reference.Load(t)
	if len(entries) < 60 {
		t.Fatalf("%d entries; the set must hold at least 60", len(entries))
	}
	kinds := map[string]*worst{}
	for _, e := range entries {
		t.Run(e.Name, func(t *testing.T) {
			l, problems := loop.Parse(e.Name, []byte(e.Loop), nil)
			if len(problems) > 0 {
				t.Fatal(problems)
			}
			cont, sampled, err := bothColumns(l, &Compare{})
			if err != nil {
				t.Fatal(err)
			}
			if e.Expect.Continuous != nil {
				compareColumn(t, kinds, e.Name+", continuous", l, cont, e.Expect.Continuous)
			}
			compareColumn(t, kinds, e.Name+", sampled", l, sampled, e.Expect.Sampled)
		})
	}
	for kind, w := range kinds {
		t.Logf("%-10s worst %.2g (%s)", kind, w.deviation, w.where)
	}
}

func compareColumn(t *testing.T, kinds map[string]*worst, name string, l *loop.Loop, a *analyzed, want *reference.Column) {
	t.Helper()
	col := a.column(l)
	if col.Stable != want.Stable || col.Type != want.Type {
		t.Errorf("%s: stable %v type %d, want %v %d (poles %v, nyquist %v)", name, col.Stable, col.Type, want.Stable, want.Type, a.byPoles, a.byNyquist)
		return
	}
	constant := func(what string, got Figure, w reference.Number) {
		t.Helper()
		check(t, kinds, "constants", name+", "+what, got, w, constantsTarget)
	}
	constant("Kp", col.PositionConstant, want.Kp)
	constant("Kv", col.VelocityConstant, want.Kv)
	constant("Ka", col.AccelerationConstant, want.Ka)
	if want.Stable {
		for k := range steadyTerms {
			constant(fmt.Sprintf("c%d", k), col.TrackingSeries[k], want.TrackingSeries[k])
			constant(fmt.Sprintf("loop c%d", k), col.LoopSeries[k], want.LoopSeries[k])
		}
	}
	compareMargins(t, kinds, name, col, want)
	comparePoles(t, kinds, name, a, want)
	compareSteady(t, kinds, name, col, want)
}

func compareMargins(t *testing.T, kinds map[string]*worst, name string, col *Column, want *reference.Column) {
	t.Helper()
	margin := func(what string, got Figure, w reference.Number) {
		t.Helper()
		check(t, kinds, "margins", name+", "+what, got, w, marginsTarget)
	}
	if len(col.GainCrossings) != len(want.GainCrossings) {
		t.Errorf("%s: %d gain crossings, want %d", name, len(col.GainCrossings), len(want.GainCrossings))
	} else {
		for i, g := range want.GainCrossings {
			margin("gain crossing", Fig(col.GainCrossings[i].RadS), g.RadS)
			margin("margin of a crossing", col.GainCrossings[i].MarginDeg, g.MarginDeg)
		}
	}
	greatest := 0.0 // gain below 1 at a phase crossing
	for _, p := range want.PhaseCrossings {
		if g := p.Gain.Float64(); g < 1 {
			greatest = math.Max(greatest, g)
		}
	}
	for _, p := range want.PhaseCrossings {
		if p.Gain.Float64() < greatest/31.6 {
			continue // 30 dB below the one that decides: of a loop with delay these are not listed
		}
		best := Crossing{RadS: math.Inf(1)}
		for _, c := range col.PhaseCrossings {
			if math.Abs(c.RadS-p.RadS.Float64()) < math.Abs(best.RadS-p.RadS.Float64()) {
				best = c
			}
		}
		margin("phase crossing", Fig(best.RadS), p.RadS)
		margin("gain at a phase crossing", Fig(best.Gain), p.Gain)
	}
	if want.Stable || want.PhaseMarginDeg.OK && !want.PhaseMarginDeg.IsInf() {
		margin("phase margin", col.PhaseMarginDeg, want.PhaseMarginDeg)
	}
	margin("modulus margin", col.ModulusMargin, want.ModulusMargin)
	margin("delay margin", col.DelayMarginS, want.DelayMarginS)
	margin("crossover", col.CrossoverRadS, want.CrossoverRadS)
	margin("gain margin", col.GainMarginDB, want.GainMarginDB)
	margin("gain reduction", col.GainReductionDB, want.GainReductionDB)
	if want.Stable {
		if want.BandwidthRadS.OK {
			margin("bandwidth", col.BandwidthRadS, want.BandwidthRadS)
		} else if !math.IsInf(col.BandwidthRadS.Value, 1) && col.BandwidthRadS.OK {
			t.Errorf("%s: bandwidth %g, want none", name, col.BandwidthRadS.Value)
		}
	}
}

// comparePoles finds the nearest computed pole for each pole of the reference.
func comparePoles(t *testing.T, kinds map[string]*worst, name string, a *analyzed, want *reference.Column) {
	t.Helper()
	if want.PoleCount != nil && len(a.poles.Equivalent) != *want.PoleCount {
		t.Errorf("%s: %d poles, want %d", name, len(a.poles.Equivalent), *want.PoleCount)
	}
	for _, p := range want.Poles {
		w := complex(p.Re.Float64(), p.Im.Float64())
		if cmplx.IsInf(w) || real(w) < -1e300 {
			continue
		}
		if T := complex(a.seconds(), 0); real(w*T) < math.Log(deepPole) {
			deepest := math.Inf(1)
			for _, q := range a.poles.Equivalent {
				deepest = math.Min(deepest, cmplx.Abs(cmplx.Exp(q*T)-cmplx.Exp(w*T)))
			}
			if !(deepest <= deepTolerance) {
				t.Errorf("%s: no pole within %g of z = %v: nearest is %.2g away", name, deepTolerance, cmplx.Exp(w*T), deepest)
			}
			continue
		}
		best := math.Inf(1)
		for _, q := range a.poles.Equivalent {
			best = math.Min(best, cmplx.Abs(q-w))
		}
		d := best / cmplx.Abs(w)
		if w == 0 {
			d = best
		}
		if !(d <= marginsTarget) {
			t.Errorf("%s: no pole near %v: nearest is %.2g away, relative", name, w, d)
		}
		if k := kinds["poles"]; k == nil || d > k.deviation {
			kinds["poles"] = &worst{d, name}
		}
	}
}

func compareSteady(t *testing.T, kinds map[string]*worst, name string, col *Column, want *reference.Column) {
	t.Helper()
	for _, s := range col.Steady {
		where := name + ", steady " + s.Input
		if want.Steady == nil {
			if s.TrackingError.OK {
				t.Errorf("%s: an unstable loop has a steady error", where)
			}
			continue
		}
		var w reference.SteadyError
		switch s.Input {
		case "step":
			w = want.Steady.Step
		case "ramp":
			w = want.Steady.Ramp
		case "parabola":
			w = want.Steady.Parabola
		case "load_step":
			check(t, kinds, "steady", where, s.TrackingError, want.Steady.LoadStep.TrackingError, constantsTarget)
			continue
		case "sine":
			if want.Sine != nil {
				check(t, kinds, "sine", where, s.TrackingError, want.Sine.Amplitude, marginsTarget)
				check(t, kinds, "sine", where+" phase", s.PhaseDeg, want.Sine.PhaseDeg, marginsTarget)
			}
			continue
		}
		check(t, kinds, "steady", where, s.TrackingError, w.TrackingError, constantsTarget)
		check(t, kinds, "steady", where+" loop", s.LoopError, w.LoopError, constantsTarget)
		for k := range 3 {
			check(t, kinds, "steady", where+fmt.Sprintf(" g%d", k), s.Asymptote[k], w.Asymptote[k], constantsTarget)
		}
		if w.Ripple.OK {
			check(t, kinds, "ripple", where+" ripple", s.Ripple, w.Ripple, marginsTarget)
			check(t, kinds, "ripple", where+" worst", s.WorstError, w.WorstError, marginsTarget)
		}
	}
}
