package sim

import "math"

// Tail is about the last part of a run, once transients are gone: at the ticks of the first task, and the
// extremes between them too.
type Tail struct {
	Ticks                       int64   // 0: none of the figures at the ticks applies
	MeanError, ErrorRMS         float64 // of r − y at the ticks; rms about the mean
	WorstError                  float64 // largest magnitude of r − y
	ErrorSpan                   float64 // highest less lowest r − y
	Swing                       float64 // of y: highest less lowest
	MeanEffort, EffortRMS       float64 // rms about the mean
	LowestEffort, HighestEffort float64
	Outputs                     []float64 // y at every tick, when Config.TailKeep asks for it
}

// tail gathers a Tail. Means and squares by Welford's update (Technometrics 4, 1962; from memory).
type tail struct {
	from            float64
	n               int64
	err, effort     moments
	worst           float64
	low, high       float64
	least, most     float64 // of r − y
	lowest, highest float64
	keep            bool
	outputs         []float64
}

type moments struct{ n, mean, square float64 }

func (m *moments) add(v float64) {
	m.n++
	d := v - m.mean
	m.mean += d / m.n
	m.square += d * (v - m.mean)
}

func (m *moments) rms() float64 {
	if m.n == 0 {
		return 0
	}
	return math.Sqrt(math.Max(0, m.square/m.n))
}

func newTail(from float64, keep int64) *tail {
	inf := math.Inf(1)
	return &tail{keep: keep > 0, outputs: make([]float64, 0, keep), from: from * (1 - 1e-12), low: inf, high: -inf, least: inf, most: -inf, lowest: inf, highest: -inf}
}

// look takes a point.
func (t *tail) look(y, err float64) {
	t.worst = math.Max(t.worst, math.Abs(err))
	t.least, t.most = math.Min(t.least, err), math.Max(t.most, err)
	t.low, t.high = math.Min(t.low, y), math.Max(t.high, y)
}

// tick takes a tick.
func (t *tail) tick(u, y, err float64) {
	t.n++
	if t.keep {
		t.outputs = append(t.outputs, y)
	}
	t.err.add(err)
	t.effort.add(u)
	t.lowest, t.highest = math.Min(t.lowest, u), math.Max(t.highest, u)
}

func (t *tail) figures() Tail {
	if t == nil || math.IsInf(t.low, 1) {
		return Tail{}
	}
	if t.n == 0 { // no tick of the task ran in it
		return Tail{WorstError: t.worst, ErrorSpan: t.most - t.least, Swing: t.high - t.low}
	}
	return Tail{
		Ticks: t.n, MeanError: t.err.mean, ErrorRMS: t.err.rms(), WorstError: t.worst, ErrorSpan: math.Max(0, t.most-t.least), Swing: math.Max(0, t.high-t.low),
		MeanEffort: t.effort.mean, EffortRMS: t.effort.rms(), LowestEffort: t.lowest, HighestEffort: t.highest, Outputs: t.outputs,
	}
}
