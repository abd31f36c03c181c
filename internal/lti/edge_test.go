package lti

import (
	"errors"
	"math"
	"math/rand"
	"testing"
	"time"

	"steadytick/internal/dd"
)

// TestDoubleIntegrator: k/s² has −180° everywhere: phase margin 0, poles ±j√k on the boundary.
func TestDoubleIntegrator(t *testing.T) {
	l := TF{Num: ascending(4), OriginPoles: 2}
	n, marginal, err := UnstableCount(l)
	if err != nil || !marginal {
		t.Errorf("%d unstable, marginal %v, %v", n, marginal, err)
	}
	p, err := ClosedPoles(l, 64)
	if err != nil || p.Marginal != 2 || p.Unstable != 2 {
		t.Errorf("%+v, %v", p, err)
	}
	m, err := Margins(l, false)
	if err != nil || m.Crossover != 2 || !(math.Abs(m.PhaseMargin) <= 1e-15) || !(m.Modulus <= 1e-15) || len(m.PhaseCrossings) != 0 {
		t.Errorf("%+v, %v", m, err)
	}
	// sampled: T²/2·(z+1)/(z−1)² = (1 + δT/2)/δ², phase −180° − ωT/2: unstable, two outside
	for _, T := range []float64{1, 1e-3, 1e-7} {
		h := TF{Num: ascending(4, 2*T), OriginPoles: 2, Period: dd.New(T)}
		n, marginal, err := UnstableCount(h)
		if err != nil || n != 2 || marginal {
			t.Errorf("T = %g: %d unstable, marginal %v, %v", T, n, marginal, err)
		}
		m, err := Margins(h, false)
		if err != nil {
			t.Fatal(err)
		}
		wantNear(t, "phase margin is −ωT/2", m.PhaseMargin, -m.Crossover*T/2, 1e-12)
	}
}

// TestConditionallyStable: k(s+1)²/s³ is stable for k > 1/2 (Routh: s³ + ks² + 2ks + k).
// The phase is −180° at ω = 1, where |L| = 2k.
func TestConditionallyStable(t *testing.T) {
	l := func(k float64) TF { return TF{Num: ascending(k, 2*k, k), OriginPoles: 3} }
	for _, k := range []float64{0.5 * (1 - 1e-9), 0.5 * (1 + 1e-9), 3} {
		n, marginal, err := UnstableCount(l(k))
		if err != nil || marginal || (n > 0) != (k < 0.5) {
			t.Errorf("k = %g: %d unstable, marginal %v, %v", k, n, marginal, err)
		}
	}
	m, err := Margins(l(3), true)
	if err != nil || !math.IsInf(m.GainMargin, 1) || len(m.PhaseCrossings) != 1 {
		t.Fatalf("%+v, %v", m, err)
	}
	wantNear(t, "crossing", m.PhaseCrossings[0].W, 1, 1e-15)
	wantNear(t, "gain reduction", m.GainReduction, 1.0/6, 1e-14)
	low, err := Margins(l(0.25), false)
	if err != nil || low.GainMargin != 0 {
		t.Errorf("unstable, gain too low: gain margin %g, want none (no crossing has a gain above 1), %v", low.GainMargin, err)
	}
}

// TestSeveralCrossings: a mode lifts |L| above 1 again: three gain crossings, checked
// as roots of |L| = 1 by residual, and the margin is the one of least magnitude.
func TestSeveralCrossings(t *testing.T) {
	const w0, zeta = 10.0, 1e-4
	re, im := -zeta*w0, w0*math.Sqrt(1-zeta*zeta)
	l := TF{Num: ascending(w0 * w0), Poles: []dd.Complex{dd.C(re, im), dd.C(re, -im)}, OriginPoles: 1}
	m, err := Margins(l, false)
	if err != nil || len(m.GainCrossings) != 3 {
		t.Fatalf("%d crossings, %v", len(m.GainCrossings), err)
	}
	for i, c := range m.GainCrossings {
		v := l.Freq(c.W)
		// d log|L|/d log ω <= 1/ζ: a rounding of ω costs 1e4
		if got := math.Hypot(real(v), imag(v)); !(math.Abs(got-1) <= 1e-11) {
			t.Errorf("|L| = %.15g at crossing %d", got, i)
		}
		if c.Falling != (i != 1) {
			t.Errorf("crossing %d: falling %v", i, c.Falling)
		}
	}
	if m.Crossover != m.GainCrossings[0].W {
		t.Errorf("crossover %g", m.Crossover)
	}
	// phase −180° at ω0·√(1−…)= |p|, |L| = 1/(2ζ·ω0·…): gain margin negative
	wantNear(t, "gain margin", m.GainMargin, 2*zeta*w0, 1e-7)
}

// TestTangency: 1 + L touches zero: (s² + 1)(s + 3)/… : with L = k/((s+1)^3), k = 8 the
// locus passes −1 at ω = √3 (Routh: (1+k) = 9).
func TestTangency(t *testing.T) {
	l := func(k float64) TF { return TF{Num: ascending(k), Poles: reals(-1, -1, -1)} }
	n, marginal, err := UnstableCount(l(8))
	if err != nil || !marginal {
		t.Errorf("k = 8: %d unstable, marginal %v, %v", n, marginal, err)
	}
	p, err := ClosedPoles(l(8), 64)
	if err != nil || p.Marginal != 2 {
		t.Errorf("k = 8: %+v, %v", p, err)
	}
	m, err := Margins(l(4), true)
	if err != nil {
		t.Fatal(err)
	}
	wantNear(t, "gain margin", m.GainMargin, 2, 1e-14)
	for _, k := range []float64{8 - 1e-9, 8 + 1e-9} {
		n, marginal, err := UnstableCount(l(k))
		if err != nil || marginal || (n == 2) != (k > 8) {
			t.Errorf("k − 8 = %.2g: %d unstable, marginal %v, %v", k-8, n, marginal, err)
		}
	}
}

// TestModulusClosedForm: L = 1/s: |1+L|² = 1 + 1/ω², infimum 1 at infinity. L = k/(s(s+1)),
// k = 1: |1+L|² = ((1−v)² + v)/(v² + v), v = ω²: minimum where 2v² − 2v − 1 = 0.
func TestModulusClosedForm(t *testing.T) {
	m, err := Margins(TF{Num: ascending(1), OriginPoles: 1}, true)
	if err != nil || m.Modulus != 1 || !math.IsInf(m.ModulusW, 1) {
		t.Errorf("1/s: %g at %g, %v", m.Modulus, m.ModulusW, err)
	}
	m, err = Margins(servo(1), true)
	if err != nil {
		t.Fatal(err)
	}
	v := (1 + math.Sqrt(3)) / 2
	wantNear(t, "modulus", m.Modulus, math.Sqrt(((1-v)*(1-v)+v)/(v*v+v)), 1e-14)
	wantNear(t, "its frequency", m.ModulusW, math.Sqrt(v), 1e-9)
}

func TestTypedErrors(t *testing.T) {
	for _, c := range []struct {
		name string
		l    TF
		want error
	}{
		{"algebraic", TF{Num: ascending(1, -1), Poles: reals(-2)}, ErrAlgebraic},
		{"improper", TF{Num: ascending(1, 1, 1), Poles: reals(-2)}, ErrImproper},
		{"improper sampled", TF{Num: ascending(1, 1, 1), Poles: reals(-2), Period: dd.New(0.1)}, ErrImproper},
		{"infinite gain", TF{Num: ascending(1e300, 1e300), Poles: reals(-1e-200, -1e-200, -1e-200)}, nil},
	} {
		_, e1 := ClosedPoles(c.l, 64)
		_, _, e2 := UnstableCount(c.l)
		_, e3 := Margins(c.l, true)
		_, e4 := Analyze(c.l, 64)
		for _, err := range []error{e1, e2, e3, e4} {
			if c.want != nil && !errors.Is(err, c.want) {
				t.Errorf("%s: %v, want %v", c.name, err, c.want)
			}
		}
	}
	// a numerator one degree too high is made causal by a tick
	l := TF{Num: ascending(0.5, 0.05), OriginPoles: 0, Period: dd.New(0.1), Ticks: 1} // 0.5(1+δT)·z^−1 = 0.5
	n, marginal, err := UnstableCount(l)
	if err != nil || n != 0 || marginal {
		t.Errorf("z·z^−1: %d, %v, %v", n, marginal, err)
	}
}

// TestHiddenModes: an integrator or an unstable mode that cancels in L stays in the loop.
func TestHiddenModes(t *testing.T) {
	origin := TF{Num: ascending(1), Poles: reals(-1), OriginPoles: 1, OriginZeros: 1}
	n, marginal, err := UnstableCount(origin)
	if err != nil || !marginal {
		t.Errorf("hidden integrator: %d, %v, %v", n, marginal, err)
	}
	p, err := ClosedPoles(origin, 64)
	if err != nil || len(p.X) != 2 || !p.X[0].IsZero() || p.Marginal != 1 {
		t.Errorf("hidden integrator: %+v, %v", p, err)
	}
	fast := TF{Num: ascending(-4, 4), Poles: reals(-1, 1)} // 4(s−1)/((s+1)(s−1))
	n, marginal, err = UnstableCount(fast)
	if err != nil || n != 1 || marginal {
		t.Errorf("hidden unstable mode: %d, %v, %v", n, marginal, err)
	}
	p, err = ClosedPoles(fast, 64)
	if err != nil || p.Unstable != 1 {
		t.Errorf("hidden unstable mode: %+v, %v", p, err)
	}
}

// TestPoleAtHalfRate: a controller pole at z = −1 (as from an ideal derivative).
func TestPoleAtHalfRate(t *testing.T) {
	// k·z^0/(z+1)·…: L = k/(T(δ + 2/T)) = k/(z + 1): closed pole z = −1 − k
	for k, want := range map[float64]int{-0.5: 0, 0.5: 1, -2.5: 1} {
		l := TF{Num: ascending(k * 8), Poles: reals(-16), Period: dd.New(0.125)}
		n, marginal, err := UnstableCount(l)
		p, err2 := ClosedPoles(l, 64)
		if err != nil || err2 != nil || marginal || n != want || p.Unstable != want {
			t.Errorf("k = %g: %d by argument (marginal %v), %d by poles, want %d; %v, %v", k, n, marginal, p.Unstable, want, err, err2)
		}
	}
}

func TestZeroLoop(t *testing.T) {
	for _, l := range []TF{{}, {Poles: reals(-1)}, {Period: dd.One}} {
		a, err := Analyze(l, 64)
		if err != nil || !a.Stable || !math.IsInf(a.Margins.GainMargin, 1) || a.Margins.Modulus != 1 {
			t.Errorf("%+v: %+v, %v", l, a, err)
		}
	}
}

// TestAllPass: |L| = 1 at every frequency.
func TestAllPass(t *testing.T) {
	l := TF{Num: ascending(1, -1), Poles: reals(-1), DeadTime: dd.Zero}
	l.Num = ascending(-1, 1) // (s−1)/(s+1): −1 at rest
	n, marginal, err := UnstableCount(l)
	if err != nil || !marginal {
		t.Errorf("%d, %v, %v", n, marginal, err)
	}
	if _, err := Analyze(l, 64); err != nil {
		t.Error(err)
	}
	delayed := TF{Num: ascending(1), Period: dd.One, Ticks: 10000}
	start := time.Now()
	if _, err := Analyze(delayed, 64); err != nil {
		t.Error(err)
	}
	if took := time.Since(start); took > hang {
		t.Errorf("took %v", took)
	}
}

// TestRandomLoops: on random loops of both domains the two verdicts agree, the poles are
// complete, no figure is NaN and nothing takes long.
func TestRandomLoops(t *testing.T) {
	rng := rand.New(rand.NewSource(7))
	disagree := 0
	for i := range 600 {
		l := randomLoop(rng)
		start := time.Now()
		a, err := Analyze(l, 64)
		if err != nil {
			if !errors.Is(err, ErrAlgebraic) {
				t.Errorf("loop %d %+v: %v", i, l, err)
			}
			continue
		}
		if took := time.Since(start); took > hang {
			t.Errorf("loop %d took %v: %+v", i, took, l)
		}
		if a.Poles.Complete && !a.Marginal && a.Poles.Marginal == 0 && a.Unstable != a.Poles.Unstable && a.Poles.Unstable < 64 {
			t.Errorf("loop %d: %d by argument, %d by poles: %+v", i, a.Unstable, a.Poles.Unstable, l)
		}
		if !a.Poles.Complete {
			disagree++
		}
		m := a.Margins
		for _, v := range []float64{m.PhaseMargin, m.GainMargin, m.GainReduction, m.Modulus, m.DelayMargin, m.Crossover, m.ModulusW} {
			if math.IsNaN(v) {
				t.Errorf("loop %d: NaN in %+v", i, m)
			}
		}
		for _, s := range a.Poles.Equivalent {
			if math.IsNaN(real(s)) || math.IsNaN(imag(s)) {
				t.Errorf("loop %d: NaN among poles", i)
			}
		}
	}
	t.Logf("%d of 600 incomplete", disagree)
	if disagree > 6 {
		t.Errorf("%d of 600 pole sets incomplete", disagree)
	}
}

// randomLoop draws corners over six decades, modes damped down to 1e-5, delays.
func randomLoop(rng *rand.Rand) TF {
	var l TF
	corner := func() float64 { return math.Pow(10, 6*rng.Float64()-3) }
	root := func(low bool) []dd.Complex {
		w := corner()
		if low {
			w = math.Min(w, 3)
		}
		if rng.Intn(2) == 0 {
			if rng.Intn(8) == 0 {
				return reals(w)
			}
			return reals(-w)
		}
		zeta := math.Pow(10, -5*rng.Float64())
		return []dd.Complex{dd.C(-zeta*w, w), dd.C(-zeta*w, -w)}
	}
	if rng.Intn(2) == 0 {
		l.Period = dd.New(math.Pow(10, -7*rng.Float64()))
		l.Ticks = []int{0, 0, 1, 3, 20, 300, 5000}[rng.Intn(7)]
	} else if rng.Intn(3) == 0 {
		l.DeadTime = dd.New(corner())
	}
	for range 1 + rng.Intn(4) {
		l.Poles = append(l.Poles, root(false)...)
	}
	var zeros []dd.Complex
	for range rng.Intn(3) {
		if z := root(false); len(zeros)+len(z) < len(l.Poles) {
			zeros = append(zeros, z...)
		}
	}
	l.OriginPoles = rng.Intn(4)
	l.OriginZeros = rng.Intn(20) / 19
	if l.Period.Sign() != 0 {
		zeros, l.Poles = toDelta(zeros, l.Period), toDelta(l.Poles, l.Period)
	}
	l.Num = fromRoots(zeros)
	w := corner()
	v := l.Freq(w)
	if m := math.Hypot(real(v), imag(v)); m > 1e-250 && m < 1e250 {
		l.Num = l.Num.Scale(dd.New(1 / m))
	}
	if rng.Intn(6) == 0 {
		l.Num = l.Num.Scale(dd.New(-1))
	}
	return l
}

func toDelta(s []dd.Complex, period dd.Float) []dd.Complex {
	out := make([]dd.Complex, 0, len(s))
	for _, p := range s {
		v := dd.CExpm1(p.Scale(period))
		out = append(out, dd.Complex{Re: v.Re.Div(period), Im: v.Im.Div(period)})
	}
	return out
}

// TestCrossingsDistinct: no crossing is listed twice; with dead time neighbours beyond the
// corners are about 2π/τ apart.
func TestCrossingsDistinct(t *testing.T) {
	rng := rand.New(rand.NewSource(3))
	for i := range 300 {
		l := randomLoop(rng)
		if i%2 == 0 && l.Period.Sign() == 0 {
			l.DeadTime = dd.New(math.Pow(10, 4*rng.Float64()-2))
		}
		m, err := Margins(l, true)
		if err != nil {
			continue
		}
		for _, list := range [][]Crossing{m.GainCrossings, m.PhaseCrossings} {
			for k := 1; k < len(list); k++ {
				// crossings from both sides of a tangent come to about 1e-8; random loops have none
				if !(list[k].W > list[k-1].W*(1+1e-10)) {
					t.Errorf("loop %d: crossings at %.17g and %.17g rad/s", i, list[k-1].W, list[k].W)
				}
			}
		}
	}
}
