package lti

import (
	"math"
	"math/rand"
	"testing"
	"time"

	"steadytick/internal/dd"
)

// TestUndamped: poles on the boundary are passed on the right. k·s/(s² + 1): s² + ks + 1,
// stable for k > 0. The same mode sampled: z² − 2cz + 1 with numerator k(z − 1):
// 1 + L = 0 is z² + (k − 2c)z + 1 − k: stable for 0 < k < 1 + c by Jury.
func TestUndamped(t *testing.T) {
	count := func(name string, l TF, want int) {
		t.Helper()
		n, marginal, err := UnstableCount(l)
		p, err2 := ClosedPoles(l, 64)
		if err != nil || err2 != nil || marginal || n != want || p.Unstable != want {
			t.Errorf("%s: %d by argument (marginal %v), %d by poles, want %d; %v, %v", name, n, marginal, p.Unstable, want, err, err2)
		}
	}
	mode := []dd.Complex{dd.C(0, 1), dd.C(0, -1)}
	count("k = 0.1", TF{Num: ascending(0.1), Poles: mode, OriginZeros: 1}, 0)
	count("k = −0.1", TF{Num: ascending(-0.1), Poles: mode, OriginZeros: 1}, 2)
	count("k = 1e-6", TF{Num: ascending(1e-6), Poles: mode, OriginZeros: 1}, 0)

	T := dd.New(0.25)
	w := dd.New(1)
	x := boundary(w, T)
	c := 1 + T.Float64()*x.Re.Float64()
	for k, want := range map[float64]int{0.3: 0, 0.999 * (1 + c): 0, 1.001 * (1 + c): 1, -0.3: 2} {
		// k(z−1)/(z² − 2cz + 1) = (k/T)·δ/((δ−x)(δ−x*))
		count("sampled", TF{Num: ascending(k / 0.25), Poles: []dd.Complex{x, x.Conj()}, OriginZeros: 1, Period: T}, want)
	}
}

// TestHiddenUndamped: an undamped mode that cancels in L stays on the boundary.
func TestHiddenUndamped(t *testing.T) {
	mode := []dd.Complex{dd.C(0, 1), dd.C(0, -1)}
	l := TF{Num: ascending(1, 0, 1), Poles: append(reals(-2), mode...)}
	n, marginal, err := UnstableCount(l)
	if err != nil || !marginal || n != 0 {
		t.Errorf("%d, %v, %v", n, marginal, err)
	}
	p, err := ClosedPoles(l, 64)
	if err != nil || p.Marginal != 2 {
		t.Errorf("%+v, %v", p, err)
	}
}

// TestTimeScale: dividing all frequencies by a scales every frequency and time by a
// and changes nothing else.
func TestTimeScale(t *testing.T) {
	base := func(a float64) TF {
		T := dd.New(0.05 * a)
		p := []dd.Complex{dd.C(-2/a, 0), dd.C(-0.01/a, 5/a), dd.C(-0.01/a, -5/a)}
		l := TF{Poles: toDelta(p, T), OriginPoles: 1, Period: T, Ticks: 2, Num: ascending(1)}
		v := l.Freq(1 / a)
		return l.Scale(dd.One.Div(dd.New(abs128(v))))
	}
	one, err := Analyze(base(1), 64)
	if err != nil {
		t.Fatal(err)
	}
	for _, a := range []float64{1e-6, 3.7, 1e9} {
		got, err := Analyze(base(a), 64)
		if err != nil {
			t.Fatal(err)
		}
		m, w := got.Margins, one.Margins
		// the roots are rounded after scaling: 1e-16 times 5/0.01 of damping
		const tol = 1e-12
		wantNear(t, "phase margin", m.PhaseMargin, w.PhaseMargin, tol)
		wantNear(t, "gain margin", m.GainMargin, w.GainMargin, tol)
		wantNear(t, "modulus", m.Modulus, w.Modulus, tol)
		wantNear(t, "crossover", m.Crossover*a, w.Crossover, tol)
		if got.Unstable != one.Unstable || len(got.Poles.X) != len(one.Poles.X) {
			t.Errorf("a = %g: %d unstable of %d", a, got.Unstable, len(got.Poles.X))
		}
	}
}

// TestDelaySplit: ticks of delay in two blocks are the ticks of their product.
func TestDelaySplit(t *testing.T) {
	T := dd.New(0.25)
	a := TF{Num: ascending(1), Period: T, Ticks: 2}
	b := heldServo(0.3, T, 3)
	x, err := Analyze(a.Mul(b), 64)
	if err != nil {
		t.Fatal(err)
	}
	y, err := Analyze(heldServo(0.3, T, 5), 64)
	if err != nil || x.Margins.PhaseMargin != y.Margins.PhaseMargin || x.Margins.GainMargin != y.Margins.GainMargin {
		t.Errorf("%+v, %+v, %v", x.Margins, y.Margins, err)
	}
}

// TestExtremeLoops: roots and gains anywhere in the range of float64: an error or figures
// without NaN, never a panic or a long search.
func TestExtremeLoops(t *testing.T) {
	rng := rand.New(rand.NewSource(11))
	number := func() float64 {
		v := math.Pow(10, 600*rng.Float64()-300)
		if rng.Intn(3) > 0 {
			v = math.Pow(10, 40*rng.Float64()-20)
		}
		if rng.Intn(2) == 0 {
			v = -v
		}
		return v
	}
	for i := range 150 {
		l := TF{OriginPoles: rng.Intn(4), OriginZeros: rng.Intn(3)}
		for range rng.Intn(6) {
			if rng.Intn(2) == 0 {
				l.Poles = append(l.Poles, dd.C(number(), 0))
				continue
			}
			p := dd.C(number(), number())
			if rng.Intn(3) == 0 {
				p.Re = dd.Zero
			}
			l.Poles = append(l.Poles, p, p.Conj())
		}
		for range 1 + rng.Intn(len(l.Poles)+1) {
			l.Num = append(l.Num, dd.New(number()))
		}
		switch rng.Intn(4) {
		case 0:
			l.DeadTime = dd.New(math.Abs(number()))
		case 1, 2:
			l.Period, l.Ticks = dd.New(math.Abs(number())), rng.Intn(5)*rng.Intn(2000)
		}
		start := time.Now()
		a, err := Analyze(l, 64)
		if took := time.Since(start); took > hang {
			t.Errorf("loop %d took %v: %+v", i, took, l)
		}
		if err != nil {
			continue
		}
		m := a.Margins
		for _, v := range []float64{m.PhaseMargin, m.GainMargin, m.GainReduction, m.Modulus, m.DelayMargin, m.Crossover, m.ModulusW} {
			if math.IsNaN(v) {
				t.Errorf("loop %d: NaN in %+v for %+v", i, m, l)
				break
			}
		}
	}
}
