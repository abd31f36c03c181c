package study

import "math"

// spreadTally takes in rows one after another, in the order of their numbers, and keeps what the result needs: its size does not depend on how
// many rows come.
type spreadTally struct {
	j        *spreadJob
	grades   func(k int64) []float64
	count    int64
	met      int64
	stable   int64
	unstable int64
	failed   int64
	judged   []*judgedTally // as j.list
	metrics  []*metricTally // as j.metrics
	failures []SpreadFailure
}

// judgedTally counts what a constraint says of the rows.
type judgedTally struct {
	met, missed, unjudged int64
	worst                 *spreadRow
	slack, decay          float64 // of the worst
}

// metricTally sums a figure over the rows.
type metricTally struct {
	count, infinite, without int64
	mean, squares            float64 // of the finite ones: Welford's running mean and sum of squared deviations
	least, most              float64
	lowest, highest          *spreadRow // infinite figures included
	low, high                float64
	bins                     *bins // nil: only the ends are wanted
	sums                     []gradeSums
}

// newSpreadTally makes an empty tally; whole tells whether distributions are wanted beside the ends.
func newSpreadTally(j *spreadJob, whole bool) *spreadTally {
	t := &spreadTally{j: j, grades: j.grades}
	for range j.list {
		t.judged = append(t.judged, &judgedTally{slack: math.Inf(1)})
	}
	for i := range j.metrics {
		m := &metricTally{least: math.Inf(1), most: math.Inf(-1), low: math.Inf(1), high: math.Inf(-1)}
		if whole {
			m.bins = newBins(j.nominal.figures[i], len(j.symbols))
			m.sums = make([]gradeSums, len(j.symbols))
		}
		t.metrics = append(t.metrics, m)
	}
	return t
}

// add takes in a row.
func (t *spreadTally) add(row *spreadRow) {
	t.count++
	switch {
	case row.failed != "":
		t.failed++
		t.fail(row)
	case row.stable:
		t.stable++
	default:
		t.unstable++
	}
	all := row.failed == "" && row.stable
	for i, c := range t.j.list {
		s := t.j.slack(c, row)
		t.judged[i].add(row, s)
		all = all && met(s) || all && !t.j.judges(c)
	}
	if all {
		t.met++
	}
	var grades []float64
	for i, m := range t.metrics {
		if row.failed != "" {
			m.without++
			continue
		}
		if grades == nil && m.bins != nil {
			grades = t.grades(row.trial)
		}
		m.add(row, row.figures[i], grades)
	}
}

// mostReasons bounds the reasons that are told apart.
const mostReasons = 20

func (t *spreadTally) fail(row *spreadRow) {
	reason := row.failed
	for pass := range 2 {
		for i := range t.failures {
			if t.failures[i].Reason == reason {
				t.failures[i].Count++
				return
			}
		}
		if pass == 0 && len(t.failures) >= mostReasons-1 {
			reason = "other reasons"
			continue
		}
		break
	}
	t.failures = append(t.failures, SpreadFailure{reason, 1, row.trial})
}

// add counts a row with its slack. The worst row is that of least slack; of unstable ones, which have none, that which grows fastest, the
// first of equals. What failed has no figure to be the worst by.
func (q *judgedTally) add(row *spreadRow, slack float64) {
	switch {
	case math.IsNaN(slack):
		q.unjudged++
		return
	case met(slack):
		q.met++
	default:
		q.missed++
	}
	if row.failed != "" {
		return
	}
	decay := 0.0
	if math.IsInf(slack, -1) {
		decay = row.decay.Value
	}
	if q.worst == nil || slack < q.slack || slack == q.slack && decay < q.decay {
		q.worst, q.slack, q.decay = row, slack, decay
	}
}

// add counts a figure. The running mean and sum of squares are those of B. P. Welford, "Note on a method for calculating corrected sums of
// squares and products", Technometrics 4, 1962 (from memory):
//
//	d = x − m    m ← m + d/n    q ← q + d·(x − m)
func (m *metricTally) add(row *spreadRow, f Figure, grades []float64) {
	if !f.OK {
		m.without++
		return
	}
	if f.Value < m.low || m.lowest == nil {
		m.low, m.lowest = f.Value, row
	}
	if f.Value > m.high || m.highest == nil {
		m.high, m.highest = f.Value, row
	}
	if math.IsInf(f.Value, 0) {
		m.infinite++
		return
	}
	m.count++
	d := f.Value - m.mean
	m.mean += d / float64(m.count)
	m.squares += d * (f.Value - m.mean)
	m.least, m.most = math.Min(m.least, f.Value), math.Max(m.most, f.Value)
	if m.bins == nil {
		return
	}
	m.bins.add(f.Value, grades)
	for i, g := range grades {
		m.sums[i].add(g)
	}
}

// judges tells whether trials can be held to the constraint: what no version computes, and a figure that the loop as written does not
// have, is left out of the yield.
func (j *spreadJob) judges(c *constraint) bool {
	if c.name == "stable" || !j.nominal.stable {
		return true
	}
	return j.figure(j.nominal, c.name).OK
}
