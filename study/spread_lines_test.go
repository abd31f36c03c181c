package study

import (
	"bytes"
	"encoding/json"
	"math"
	"slices"
	"strings"
	"testing"

	"steadytick/loop"
)

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
