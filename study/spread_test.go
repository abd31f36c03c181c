package study

import (
	"context"
	"fmt"
	"math"
	"testing"

	"steadytick/loop"
)

// integrator is k/s under a controller 1, a tick of T: the hold equivalent is kT/(z − 1), the closed loop z − 1 + kT, stable for kT < 2.
// |L| = 1 at ωT = 2·asin(kT/2) with the phase −90° − ωT/2, so that the phase margin is 90° − asin(kT/2); and Kv = k.
const integrator = `loop: integrator
symbols: {k: {value: 10, spread: %s}}
plant: {model: k/s}
controller: {model: 1}
timing: {period: %s}
requirements: [%s]
`

func integratorLoop(t testing.TB, spread, period, requirements string) *loop.Loop {
	t.Helper()
	return parsed(t, fmt.Sprintf(integrator, spread, period, requirements))
}

func spreadOf(t testing.TB, l *loop.Loop, o SpreadOptions) *Spread {
	t.Helper()
	r, err := RunSpread(context.Background(), l, o)
	if err != nil {
		t.Fatal(err)
	}
	return r
}

// Yields in closed form, within five standard deviations √(p(1 − p)/n) of a binomial share.
func TestSpreadYieldInClosedForm(t *testing.T) {
	const n = 2000
	// the part of a normal distribution cut at ±3σ that lies below x
	cut := func(x float64) float64 { return (1 + math.Erf(3*x/math.Sqrt2)/math.Erf(3/math.Sqrt2)) / 2 }
	edge := math.Sqrt2 / 0.1 // kT = √2 where the phase margin is 45°
	for _, c := range []struct {
		name, draw, spread, period, requirements string
		want                                     float64
	}{
		{"stable", DrawUniform, "90 %", "0.12 s", "", (2/0.12 - 1) / 18},
		{"phase margin", DrawUniform, "50 %", "0.1 s", "phase_margin >= 45 deg", (edge - 5) / 10},
		{"from both sides", DrawUniform, "50 %", "0.1 s", "phase_margin >= 45 deg, velocity_constant >= 8", (edge - 8) / 10},
		{"normal", DrawNormal, "90 %", "0.1 s", "phase_margin >= 45 deg", cut((edge - 10) / 9)},
	} {
		r := spreadOf(t, integratorLoop(t, c.spread, c.period, c.requirements), SpreadOptions{Draw: c.draw, Trials: n, Seed: 7})
		got := r.Yield.Percent / 100
		if !(math.Abs(got-c.want) <= 5*math.Sqrt(c.want*(1-c.want)/n)) {
			t.Errorf("%s: a yield of %g, want %g", c.name, got, c.want)
		}
		if low, high := r.Yield.Interval[0].Value/100, r.Yield.Interval[1].Value/100; !(low < got && got < high) {
			t.Errorf("%s: %g is not within %g … %g", c.name, got, low, high)
		}
		if r.Yield.Stable+r.Yield.Unstable != n || r.Yield.Of != n || r.Yield.Failed != 0 {
			t.Errorf("%s: %+v", c.name, r.Yield)
		}
	}
}

// metricNamed finds a metric of a result.
func metricNamed(t testing.TB, r *Spread, name string) *SpreadMetric {
	t.Helper()
	for i := range r.Metrics {
		if r.Metrics[i].Name == name {
			return &r.Metrics[i]
		}
	}
	t.Fatalf("no metric %s", name)
	return nil
}

// The moments of Kv = k, uniform over [a, b]: (a + b)/2 and (b − a)/√12; the mean of n has a deviation of a √n-th of that, and the
// sample deviation s of a uniform distribution one of s·√((9/5 − 1)/4n).
func TestSpreadMomentsInClosedForm(t *testing.T) {
	const n = 2000
	r := spreadOf(t, integratorLoop(t, "50 %", "0.1 s", ""), SpreadOptions{Trials: n, Seed: 3})
	m := metricNamed(t, r, "velocity_constant")
	s := 10 / math.Sqrt(12)
	if !(math.Abs(m.Mean.Value-10) <= 5*s/math.Sqrt(n)) || !(math.Abs(m.Deviation.Value-s) <= 5*s*math.Sqrt(0.2/n)) {
		t.Errorf("mean %v, deviation %v, want 10 and %g", m.Mean, m.Deviation, s)
	}
	if !(m.Min.Value >= 5 && m.Min.Value < 5.1) || !(m.Max.Value <= 15 && m.Max.Value > 14.9) { // the chance of none in 1 % of the range is 0.99^2000 = 2e-9
		t.Errorf("from %v to %v", m.Min, m.Max)
	}
	// The quantile p is 5 + 10p, with a deviation of 10·√(p(1 − p)/n).
	for p, q := range map[float64]Figure{0.01: m.Quantiles.P1, 0.25: m.Quantiles.P25, 0.5: m.Quantiles.P50, 0.95: m.Quantiles.P95} {
		if !(math.Abs(q.Value-5-10*p) <= 5*10*math.Sqrt(p*(1-p)/n)) {
			t.Errorf("the quantile %g is %v", p, q)
		}
	}
	if top := m.Sensitivities[0].Rank.Value; !(top > 0.999) { // Kv grows with k alone; ties and unequal ranks cost below 1/n
		t.Errorf("rank correlation %g of Kv with k", top)
	}
	if low := metricNamed(t, r, "phase_margin").Sensitivities[0].Rank.Value; !(low < -0.999) {
		t.Errorf("rank correlation %g of the phase margin with k", low)
	}
}

// d PM/d ln k = −a/√(1 − a²) with a = kT/2, and a third derivative of −a(1 + 2a²)/(1 − a²)^(5/2), in rad; central differences are
// off by h²/6 of that.
func TestSpreadSensitivityInClosedForm(t *testing.T) {
	for _, period := range []string{"0.02 s", "0.1 s", "0.17 s"} {
		l := integratorLoop(t, "10 %", period, "")
		r := spreadOf(t, l, SpreadOptions{Trials: 10, Seed: 1})
		T, _ := l.Timing.Period.Float64()
		a := 10 * T / 2
		const deg = 180 / math.Pi / 100 // a hundredth, for 1 %
		want := -deg * a / math.Sqrt(1-a*a)
		third := deg * a * (1 + 2*a*a) / math.Pow(1-a*a, 2.5)
		got := metricNamed(t, r, "phase_margin").Sensitivities[0]
		if !(math.Abs(got.PerPercent.Value-want) <= 1.01*third*sensitivityStep*sensitivityStep/6+1e-8*90/100/sensitivityStep/2) {
			t.Errorf("%s: %v per cent, want %g", period, got.PerPercent, want)
		}
		if got.OverSpread.Value != 10*got.PerPercent.Value {
			t.Errorf("%s: %v over a spread of 10 %%, %v with 1 %%", period, got.OverSpread, got.PerPercent)
		}
		// Kv = k: 1 % more is 0.1; the third derivative of e^x is e^x.
		if kv := metricNamed(t, r, "velocity_constant").Sensitivities[0].PerPercent.Value; !(math.Abs(kv-0.1) <= 0.1*(sensitivityStep*sensitivityStep/6+1e-11/sensitivityStep)) {
			t.Errorf("%s: Kv by %g", period, kv)
		}
	}
}
