package study

import (
	"bytes"
	"context"
	"encoding/json"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"reflect"
	"runtime"
	"slices"
	"strings"
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

// wide is an invented drive with four uncertain numbers, one of them computed from another, and requirements that some trials miss.
const wide = `loop: wide drive
output: rad
effort: V
symbols:
  J:  {value: 0.018, spread: 40 %}
  b:  {value: 0.09, spread: 50 %}
  w:  {value: b/J, spread: 5 %}
  Kt: {value: 0.31, spread: 25 %}
plant: {model: Kt/(J*s*(s + w))}
controller: {model: 9.2*(0.21*s + 1)/(0.011*s + 1), map: tustin}
actuator: {limits: [-24, 24]}
timing: {rate: 100 Hz, conversion: 6 us, compute: 1.4 ms}
inputs: [step: 0.01, ramp: 2]
requirements:
  - ramp_error <= 0.08
  - phase_margin >= 45 deg
  - gain_margin >= 6 dB
`

// lines runs a study and returns its result and its lines without the first and the last.
func lines(t testing.TB, l *loop.Loop, o SpreadOptions) (*Spread, []string) {
	t.Helper()
	var b bytes.Buffer
	o.Rows = &b
	r := spreadOf(t, l, o)
	all := strings.Split(strings.TrimSuffix(b.String(), "\n"), "\n")
	return r, all[1 : len(all)-1]
}

// rowJSON is a line for tests: numbers as they stand in it.
type rowJSON struct {
	Trial   int64                      `json:"trial"`
	Symbols map[string]float64         `json:"symbols"`
	Stable  bool                       `json:"stable"`
	Metrics map[string]json.RawMessage `json:"metrics"`
	Failed  string                     `json:"failed"`
}

func (r rowJSON) figure(name string) float64 {
	var v float64
	if json.Unmarshal(r.Metrics[name], &v) != nil || string(r.Metrics[name]) == "null" {
		return math.NaN()
	}
	return v
}

func rowsOf(t testing.TB, text []string) []rowJSON {
	t.Helper()
	out := make([]rowJSON, len(text))
	for i, line := range text {
		if err := json.Unmarshal([]byte(line), &out[i]); err != nil {
			t.Fatal(err, line)
		}
	}
	return out
}

// Every number of the result is what plain arithmetic makes of the lines.
func TestSpreadAgainstItsLines(t *testing.T) {
	l := parsed(t, wide)
	r, text := lines(t, l, SpreadOptions{Trials: 400, Seed: 5})
	rows := rowsOf(t, text)
	met := 0
	for _, q := range rows {
		if q.Stable && q.figure("ramp_error") <= 0.08 && q.figure("phase_margin") >= 45 && q.figure("gain_margin") >= 6 {
			met++
		}
	}
	if int64(met) != r.Yield.Met || met == 0 || met == len(rows) {
		t.Errorf("%d trials meet all, the result has %+v", met, r.Yield)
	}
	for _, m := range r.Metrics {
		checkMetric(t, rows, m)
	}
	for _, q := range r.Requirements[1:] {
		checkRequirement(t, rows, q)
	}
}

func checkMetric(t *testing.T, rows []rowJSON, m SpreadMetric) {
	t.Helper()
	var v []float64
	sum := 0.0
	for _, q := range rows {
		if f := q.figure(m.Name); !math.IsNaN(f) {
			v = append(v, f)
			sum += f
		}
	}
	if int64(len(v)) != m.Count {
		t.Errorf("%s: %d figures, the result counts %d", m.Name, len(v), m.Count)
		return
	}
	if len(v) == 0 {
		return
	}
	slices.Sort(v)
	mean, squares := sum/float64(len(v)), 0.0
	for _, f := range v {
		squares += (f - mean) * (f - mean)
	}
	scale := math.Max(math.Abs(v[0]), math.Abs(v[len(v)-1]))
	// 400 additions of 53 bits each: 400·2^−53 = 5e-14 of the largest figure.
	if !(math.Abs(m.Mean.Value-mean) <= 1e-13*scale) || !(math.Abs(m.Deviation.Value-math.Sqrt(squares/float64(len(v)-1))) <= 1e-12*scale) ||
		m.Min.Value != v[0] || m.Max.Value != v[len(v)-1] {
		t.Errorf("%s: %+v, plain sums give %g", m.Name, m, mean)
	}
	for p, q := range map[float64]Figure{0.01: m.Quantiles.P1, 0.05: m.Quantiles.P5, 0.25: m.Quantiles.P25, 0.5: m.Quantiles.P50, 0.75: m.Quantiles.P75, 0.95: m.Quantiles.P95, 0.99: m.Quantiles.P99} {
		want := v[int(math.Ceil(p*float64(len(v))))-1]
		// A bin is 2^−10 of its distance from the nominal figure wide, a hair for the rounding of the edges.
		if !(math.Abs(q.Value-want) <= math.Abs(want-m.Nominal.Value)*1.001/1024+1e-9*math.Abs(m.Nominal.Value)) {
			t.Errorf("%s: the quantile %g is %v, sorted %g", m.Name, p, q, want)
		}
	}
	if m.Histogram == nil {
		return
	}
	n, width := int64(0), (m.Histogram.To-m.Histogram.From)/histogramBars
	for i, k := range m.Histogram.Counts {
		n += k
		// A bar holds what lies in it, give or take what lies within a bin of its ends.
		low, high := m.Histogram.From+float64(i)*width, m.Histogram.From+float64(i+1)*width
		room := width / 20 // bins are at most 2^−10 of 24 bars
		inside, near := 0, 0
		for _, f := range v {
			if f >= low+room && f <= high-room {
				inside++
			}
			if f >= low-room && f <= high+room {
				near++
			}
		}
		if k < int64(inside) || k > int64(near) {
			t.Errorf("%s: bar %d has %d, between %d and %d lie there", m.Name, i, k, inside, near)
		}
	}
	if n != m.Count || m.Histogram.From != v[0] || m.Histogram.To != v[len(v)-1] {
		t.Errorf("%s: the bars hold %d of %d", m.Name, n, m.Count)
	}
	for _, s := range m.Sensitivities {
		// A rank from the distribution differs from one of the sample by √(1/n)/2 at most as a rule, of which the correlation takes
		// the square; ties within 1/64 of a distance cost their width.
		if want := spearman(rows, m.Name, s.Symbol); !(math.Abs(s.Rank.Value-want) <= 0.01) {
			t.Errorf("%s: rank correlation %v with %s, of the lines %g", m.Name, s.Rank, s.Symbol, want)
		}
	}
}

// spearman is the correlation of the ranks of a metric and a symbol, ties with their middle rank; the drawn place of w, which follows b and J,
// is w·J/b.
func spearman(rows []rowJSON, metric, symbol string) float64 {
	var x, y []float64
	for _, q := range rows {
		if f := q.figure(metric); !math.IsNaN(f) {
			s := q.Symbols[symbol]
			if symbol == "w" {
				s *= q.Symbols["J"] / q.Symbols["b"]
			}
			x, y = append(x, f), append(y, s)
		}
	}
	rank := func(v []float64) []float64 {
		out := make([]float64, len(v))
		for i := range v {
			below, same := 0, 0
			for _, w := range v {
				if w < v[i] {
					below++
				}
				if w == v[i] {
					same++
				}
			}
			out[i] = float64(below) + float64(same+1)/2
		}
		return out
	}
	a, b := rank(x), rank(y)
	middle := float64(len(a)+1) / 2
	var ab, aa, bb float64
	for i := range a {
		ab += (a[i] - middle) * (b[i] - middle)
		aa += (a[i] - middle) * (a[i] - middle)
		bb += (b[i] - middle) * (b[i] - middle)
	}
	return ab / math.Sqrt(aa*bb)
}

func checkRequirement(t *testing.T, rows []rowJSON, q SpreadRequirement) {
	t.Helper()
	met, worst := int64(0), -1
	better := func(a, b float64) bool { return a < b == (q.Op == "<=") }
	unstable := -1
	for i, row := range rows {
		f := row.figure(q.Name)
		if row.Stable && meets(f, q.Op, q.Limit.Value) {
			met++
		}
		if !row.Stable && unstable < 0 {
			unstable = i
		}
		if row.Stable && (worst < 0 || better(rows[worst].figure(q.Name), f)) {
			worst = i
		}
	}
	if met != q.Met || q.Missed != int64(len(rows))-met || q.Percent != 100*float64(met)/float64(len(rows)) {
		t.Errorf("%s: %d trials meet it, the result has %+v", q.Requirement, met, q)
	}
	if unstable >= 0 {
		if q.Worst.Stable {
			t.Errorf("%s: trial %d is unstable, the worst is %+v", q.Requirement, rows[unstable].Trial, q.Worst)
		}
		return
	}
	if q.Worst.Trial != rows[worst].Trial || q.Worst.Value.Value != rows[worst].figure(q.Name) {
		t.Errorf("%s: the worst is %+v, of the lines %+v", q.Requirement, q.Worst, rows[worst])
	}
	for _, s := range q.Worst.Symbols {
		if s.Value != rows[worst].Symbols[s.Name] {
			t.Errorf("%s: %s is %g in trial %d", q.Requirement, s.Name, s.Value, q.Worst.Trial)
		}
	}
}

// A trial alone has the very line that it has among the others, whatever their number.
func TestSpreadTrialAloneIsItsRow(t *testing.T) {
	l := parsed(t, wide)
	for _, draw := range []string{DrawUniform, DrawNormal, DrawCorners} {
		o := SpreadOptions{Draw: draw, Trials: 40, Seed: 9, Simulate: true}
		if draw == DrawCorners {
			o.Trials = 0
		}
		_, text := lines(t, l, o)
		rows := rowsOf(t, text)
		for _, k := range []int64{1, 2, 11, 16} {
			alone := SpreadOptions{Draw: draw, Seed: 9, Simulate: true}
			one, err := RunSpreadTrial(context.Background(), l, alone, k)
			if err != nil {
				t.Fatal(err)
			}
			var got rowJSON
			b, err := json.Marshal(one)
			if err == nil {
				err = json.Unmarshal(b, &got)
			}
			if err != nil {
				t.Fatal(err)
			}
			if !reflect.DeepEqual(got, rows[k-1]) {
				t.Errorf("%s: alone %+v\namong the others %+v", draw, got, rows[k-1])
			}
		}
	}
}

// The loop as written and a trial of the study have the figures that a comparison of the same file gives.
func TestSpreadFiguresAreThoseOfCompare(t *testing.T) {
	paths, err := filepath.Glob("../cmd/steadytick/starters/*.yaml")
	if err != nil || len(paths) < 6 {
		t.Fatal(paths, err)
	}
	for _, path := range paths {
		src, err := os.ReadFile(path)
		if err != nil {
			t.Fatal(err)
		}
		l := parsed(t, string(src))
		r, err := RunSpread(context.Background(), l, SpreadOptions{Trials: 1, Seed: 1, Simulate: true})
		if len(l.Symbols) == 0 {
			if err != ErrNoSpread {
				t.Errorf("%s: %v", path, err)
			}
			continue
		}
		if err != nil {
			t.Fatal(path, err)
		}
		drawn := l
		for pass := range 2 {
			c, err := RunCompare(context.Background(), drawn, Options{})
			if err != nil {
				t.Fatal(err)
			}
			for _, m := range r.Metrics {
				have := m.Nominal
				if pass == 1 {
					have = m.Lowest.Value
				}
				if want, _ := metric(drawn, c, m.Name); have != want {
					t.Errorf("%s, pass %d: %s is %v, compare has %v", path, pass, m.Name, have, want)
				}
			}
			text := string(src) // the same file with the numbers of trial 1 written into it
			for _, s := range r.Metrics[0].Lowest.Symbols {
				text = replaceSymbol(t, text, s.Name, string(appendFigure(nil, Fig(s.Value))))
			}
			drawn = parsed(t, text)
		}
	}
}

// replaceSymbol writes another value into "name: {value: 1, spread: 2 %}".
func replaceSymbol(t *testing.T, text, name, value string) string {
	t.Helper()
	for _, line := range strings.Split(text, "\n") {
		if before, rest, ok := strings.Cut(line, "{value:"); ok && strings.TrimSpace(before) == name+":" {
			_, after, _ := strings.Cut(rest, ",")
			return strings.Replace(text, line, before+"{value: "+value+","+after, 1)
		}
	}
	t.Fatalf("no symbol %s", name)
	return ""
}

// Results are the same on one and on two processors.
func TestSpreadOnOneAndTwoProcessors(t *testing.T) {
	l := parsed(t, wide)
	defer runtime.GOMAXPROCS(runtime.GOMAXPROCS(1))
	a, textA := lines(t, l, SpreadOptions{Trials: 300, Seed: 2, Curves: true})
	runtime.GOMAXPROCS(2)
	b, textB := lines(t, l, SpreadOptions{Trials: 300, Seed: 2, Curves: true})
	if !reflect.DeepEqual(a, b) || !slices.Equal(textA, textB) {
		t.Error("the results differ")
	}
}

// The corners are those that brute force finds: every combination written into the file and compared.
func TestSpreadCornersAgainstBruteForce(t *testing.T) {
	l := parsed(t, wide)
	r := spreadOf(t, l, SpreadOptions{Trials: 3, Seed: 1})
	drawn := spreadOf(t, l, SpreadOptions{Draw: DrawCorners})
	ends := [4][2]string{{"0.018*0.6", "0.018*1.4"}, {"0.09*0.5", "0.09*1.5"}, {"b/J*0.95", "b/J*1.05"}, {"0.31*0.75", "0.31*1.25"}}
	met := int64(0)
	worst := map[string]float64{}
	at := map[string]int64{}
	for k := range int64(16) {
		text := wide
		for i, name := range []string{"J", "b", "w", "Kt"} {
			text = replaceSymbol(t, text, name, ends[i][k>>i&1])
		}
		l := parsed(t, text)
		c, err := RunCompare(context.Background(), l, Options{})
		if err != nil {
			t.Fatal(err)
		}
		all := c.Sampled.Stable
		for _, q := range c.Requirements {
			all = all && *q.Met
			d := slackOf(q.Value.Value, q.Op, q.Limit)
			if !c.Sampled.Stable {
				d = math.Inf(-1)
			}
			if old, ok := worst[q.Name]; !ok || d < old {
				worst[q.Name], at[q.Name] = d, k+1
			}
		}
		if all {
			met++
		}
	}
	if r.Corners.Met != met || r.Corners.Of != 16 || drawn.Yield.Met != met || drawn.Trials != 16 || met == 0 || met == 16 {
		t.Errorf("%d corners meet all; beside the trials %+v, drawn %+v", met, r.Corners, drawn.Yield)
	}
	for i, q := range r.Requirements[1:] {
		if q.Corner.Trial != at[q.Name] || drawn.Requirements[i+1].Worst.Trial != at[q.Name] {
			t.Errorf("%s: the worst corner is %+v, drawn %+v, by brute force %d", q.Requirement, q.Corner, drawn.Requirements[i+1].Worst, at[q.Name])
		}
		// The value of a corner is rounded to 12 digits, b/J among them: 1e-11 of the figure, times a condition of below 100.
		d := slackOf(q.Corner.Value.Value, q.Op, q.Limit.Value)
		if !(math.Abs(d-worst[q.Name]) <= 1e-9*math.Abs(q.Limit.Value)) {
			t.Errorf("%s: slack %g at the worst corner, by brute force %g", q.Requirement, d, worst[q.Name])
		}
	}
	if got := r.Requirements[1].Corner.Levels; got != "J low, b high, w high, Kt low" { // Kv is least with a weak and much damped drive
		t.Errorf("the worst corner of the ramp error is %s", got)
	}
	if drawn.Yield.Interval[0].OK || r.Requirements[1].Interval[0].OK == false {
		t.Error("corners have an interval, or trials have none")
	}
}
